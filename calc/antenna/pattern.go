package antenna

import (
	"errors"
	"math"
	"sort"
)

// Kind names the family of a pattern.
type Kind int

const (
	// Isotropic has the same gain everywhere.
	Isotropic Kind = iota
	// Panel has the form of 3GPP TR 38.901 table 7.3-1 with the antenna's own figures.
	Panel
	// Omni has the vertical cut of the panel at every azimuth.
	Omni
	// Dipole is the thin half-wave dipole, its axis along the body's up.
	Dipole
	// Dish has a rotationally symmetric main lobe and an envelope over its side lobes.
	Dish
	// Cuts is sampled: one horizontal and one vertical cut.
	Cuts
)

// Pattern is the gain of an antenna relative to the top of its main lobe. The zero value is isotropic.
//
// Which fields count depends on the kind; attenuations are positive decibels.
type Pattern struct {
	Kind           Kind
	BeamwidthAz    float64 // full half-power width in azimuth, rad: Panel, Dish
	BeamwidthEl    float64 // full half-power width in elevation, rad: Panel, Omni
	FrontToBack    float64 // largest attenuation, dB: Panel, Dish
	Sidelobe       float64 // largest attenuation of the vertical cut (Panel, Omni), level below the peak at which the side-lobe envelope starts (Dish), dB
	ElectricalTilt float64 // beam above the boresight, rad, up positive: Panel, Omni; Cuts, whose elevation cut it shifts

	azCut, elCut []float64 // Cuts: attenuation in dB on uniform grids, see NewCuts
	floor        float64   // Cuts: largest attenuation found in either cut, dB
}

// Sample is one point of a measured cut: the angle off the boresight in radians (azimuth clockwise positive,
// elevation up positive) and the level in dB against the top of the main lobe (0 or less).
type Sample struct {
	Angle float64
	Level float64
}

// cutStep is the spacing of the grid onto which sampled cuts are interpolated once, so that a look-up costs two
// reads: 0.1°, a fifth of the step at which narrow cuts are published (0.5° and 1° are usual, common practice).
const cutStep = 0.1 * math.Pi / 180

const (
	azCutLen = 3601 // −180° to 180°
	elCutLen = 1801 // −90° to 90°
)

var errCut = errors.New("a cut needs at least two samples at different angles within ±180°, levels finite and not above 0 dB")

// NewCuts returns a pattern from a horizontal and a vertical cut, combined as TR 38.901 table 7.3-1 combines its two:
//
//	A(β, ε) = min(A_az(β) + A_el(ε), floor)
//
// with A in dB below the peak and floor the largest attenuation in either cut. Between samples A is linear in dB; the
// horizontal cut is periodic, the vertical one keeps its outermost sample up to ±90°. Samples may come in any order.
// An error says what is wrong with them.
func NewCuts(az, el []Sample) (Pattern, error) {
	p := Pattern{Kind: Cuts}
	var err error
	if p.azCut, err = resample(az, azCutLen, -math.Pi, true); err != nil {
		return Pattern{}, err
	}
	if p.elCut, err = resample(el, elCutLen, -math.Pi/2, false); err != nil {
		return Pattern{}, err
	}
	for _, c := range [][]float64{p.azCut, p.elCut} {
		for _, a := range c {
			p.floor = math.Max(p.floor, a)
		}
	}
	return p, nil
}

func resample(samples []Sample, n int, from float64, periodic bool) ([]float64, error) {
	s := append([]Sample(nil), samples...)
	for _, x := range s {
		if !(math.Abs(x.Angle) <= math.Pi+1e-9) || !(x.Level <= 0) || math.IsInf(x.Level, 0) {
			return nil, errCut
		}
	}
	sort.Slice(s, func(i, j int) bool { return s[i].Angle < s[j].Angle })
	if len(s) < 2 || s[0].Angle == s[len(s)-1].Angle {
		return nil, errCut
	}
	if periodic {
		first, last := s[0], s[len(s)-1]
		if last.Angle-first.Angle < 2*math.Pi-1e-9 {
			s = append([]Sample{{last.Angle - 2*math.Pi, last.Level}}, s...)
			s = append(s, Sample{first.Angle + 2*math.Pi, first.Level})
		}
	}
	out := make([]float64, n)
	k := 0
	for i := range out {
		x := from + float64(i)*cutStep
		for k < len(s)-2 && s[k+1].Angle < x {
			k++
		}
		a, b := s[k], s[k+1]
		t := 0.0
		if b.Angle > a.Angle {
			t = math.Min(math.Max((x-a.Angle)/(b.Angle-a.Angle), 0), 1)
		}
		out[i] = -(a.Level + t*(b.Level-a.Level))
	}
	return out, nil
}

// Check reports what is missing or impossible in the figures of a pattern, nil if it can be evaluated.
func (p *Pattern) Check() error {
	width := func(w float64) bool { return w > 0 && w <= 2*math.Pi }
	db := func(a float64) bool { return a > 0 && a <= 200 }
	switch p.Kind {
	case Isotropic, Dipole:
		return nil
	case Panel:
		if !width(p.BeamwidthAz) || !width(p.BeamwidthEl) {
			return errors.New("a panel needs both half-power beamwidths, above 0 and at most 360 degrees")
		}
		if !db(p.FrontToBack) || !db(p.Sidelobe) {
			return errors.New("a panel needs its front-to-back ratio and its vertical side-lobe attenuation, above 0 dB")
		}
	case Omni:
		if !width(p.BeamwidthEl) || !db(p.Sidelobe) {
			return errors.New("an omnidirectional antenna needs its half-power beamwidth in elevation and its side-lobe attenuation")
		}
	case Dish:
		if !width(p.BeamwidthAz) || !db(p.FrontToBack) || !db(p.Sidelobe) || p.Sidelobe > p.FrontToBack {
			return errors.New("a dish needs its half-power beamwidth, its side-lobe attenuation and a front-to-back ratio not below it")
		}
	case Cuts:
		if len(p.azCut) != azCutLen || len(p.elCut) != elCutLen {
			return errors.New("a sampled pattern needs its cuts")
		}
	default:
		return errors.New("unknown kind of pattern")
	}
	if !(math.Abs(p.ElectricalTilt) < math.Pi/2) {
		return errors.New("electrical tilt must lie within 90 degrees")
	}
	return nil
}

// DishBeamwidth is the half-power width in radians of a dish of the given diameter in wavelengths,
//
//	70°·λ/D
//
// for an illumination tapered about 10 dB to the rim (common practice). It is capped at 180°.
func DishBeamwidth(diameterWavelengths float64) float64 {
	return math.Min(70/diameterWavelengths, 180) * math.Pi / 180
}

// Attenuation is the pattern in decibels below the top of the main lobe (0 or more) in the direction of local azimuth
// β (−π..π) and local elevation ε (−π/2..π/2), both in the body's own frame.
//
//	Panel   A = min(A_az + A_el, A_max), A_az = min(12(β/β₃)², A_max), A_el = min(12((ε−ε_t)/ε₃)², SLA)
//	Omni    A = A_el
//	Dipole  A = −20 log₁₀(cos(½π sin ε)/cos ε)
//	Dish    A = min(12(γ/γ₃)², S, F) with γ the angle off the boresight, S = S₀ + 25 log₁₀(γ/γ₀) beyond the γ₀ at
//	        which the main lobe has fallen to S₀: an envelope over side lobes, not their nulls
//
// Panel: 3GPP TR 38.901 V16.1.0 table 7.3-1. Dipole: Balanis, Antenna Theory, equation 4-84 (the axis is ε = ±90°,
// where the attenuation is cut at 120 dB). The 25 log slope of the dish is that of the ITU-R F.699 family of
// reference patterns (slope from memory), started at the antenna's own side-lobe level.
func (p *Pattern) Attenuation(az, el float64) float64 {
	switch p.Kind {
	case Panel:
		a := az / p.BeamwidthAz
		e := (el - p.ElectricalTilt) / p.BeamwidthEl
		return math.Min(math.Min(12*a*a, p.FrontToBack)+math.Min(12*e*e, p.Sidelobe), p.FrontToBack)
	case Omni:
		e := (el - p.ElectricalTilt) / p.BeamwidthEl
		return math.Min(12*e*e, p.Sidelobe)
	case Dipole:
		s, c := math.Sincos(el)
		f := math.Cos(math.Pi / 2 * s)
		if c < dipoleFloor || f <= dipoleFloor*c {
			return 120
		}
		return -20 * math.Log10(f/c)
	case Dish:
		return p.dish(math.Acos(math.Min(math.Max(math.Cos(az)*math.Cos(el), -1), 1)))
	case Cuts:
		return math.Min(look(p.azCut, (az+math.Pi)/cutStep)+look(p.elCut, (el-p.ElectricalTilt+math.Pi/2)/cutStep), p.floor)
	}
	return 0
}

// dipoleFloor is 120 dB as an amplitude: below it the null of the dipole is a statement about the model, not the antenna.
const dipoleFloor = 1e-6

func (p *Pattern) dish(g float64) float64 {
	m := 12 * (g / p.BeamwidthAz) * (g / p.BeamwidthAz)
	if m <= p.Sidelobe {
		return m
	}
	start := p.BeamwidthAz * math.Sqrt(p.Sidelobe/12)
	return math.Min(p.Sidelobe+25*math.Log10(g/start), p.FrontToBack)
}

func look(c []float64, x float64) float64 {
	i := int(x)
	if i < 0 {
		return c[0]
	}
	if i >= len(c)-1 {
		return c[len(c)-1]
	}
	return c[i] + (x-float64(i))*(c[i+1]-c[i])
}

// Symmetric reports whether the pattern has no forward direction of its own, so that no azimuth need be read.
func (p *Pattern) Symmetric() bool {
	return p.Kind == Isotropic || p.Kind == Omni || p.Kind == Dipole
}

// Widths are the full half-power widths of the main lobe in azimuth and elevation in radians, 0 where the pattern does
// not vary. Those of sampled cuts are measured on the cuts; the dipole's is 78° (Balanis, section 4.6).
func (p *Pattern) Widths() (az, el float64) {
	if p == nil {
		return 0, 0
	}
	switch p.Kind {
	case Panel:
		return p.BeamwidthAz, p.BeamwidthEl
	case Omni:
		return 0, p.BeamwidthEl
	case Dipole:
		return 0, 78 * math.Pi / 180
	case Dish:
		return p.BeamwidthAz, p.BeamwidthAz
	case Cuts:
		return halfPower(p.azCut), halfPower(p.elCut)
	}
	return 0, 0
}

// halfPower is the width of a cut between its first crossings of 3 dB on both sides of its middle, 0 if there are none.
func halfPower(c []float64) float64 {
	const half = 3.0102999566398120 // 10 log₁₀ 2
	mid := len(c) / 2
	for i := range c { // the peak need not stand in the middle of the cut
		if c[i] < c[mid] {
			mid = i
		}
	}
	lo, hi := mid, mid
	for lo > 0 && c[lo] < half {
		lo--
	}
	for hi < len(c)-1 && c[hi] < half {
		hi++
	}
	if c[lo] < half && c[hi] < half {
		return 0
	}
	return float64(hi-lo) * cutStep
}
