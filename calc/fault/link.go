package fault

import (
	"math"

	"crossplumb/calc/aim"
	"crossplumb/calc/codec"
	"crossplumb/calc/polar"
	"crossplumb/calc/sheet"
)

// link is the two-ended radio link as it should be: n chains, numbered by the near
// port, each tied to one far port.
type link struct {
	n     int
	ports [2][]port
	mate  [2][]int // mate[Near][i] is the far port of near port i, and back
	loss  float64  // free space between the ends, dB; 0 where the expected level is given
	tx    [2][]float64
	noise *float64 // of a receiver, dBm; nil where the sheet has no bandwidth
	tied  bool     // ties port to port; otherwise combines its chains

	// Worked out once for all states: share of power that couples with leaks, what
	// reaches from port to port (gains and free space), transmit powers, the noise
	// floor in mW.
	coupled, reach []float64
	sent           [2][]float64
	floor          float64
	load, own      []float64 // room for the covariance

	frequencyMHz, bandwidthMHz float64 // as planned; bandwidth 0 where not stated
	pathDoubt                  float64 // of the expected level, common to all, dB
	expected                   *float64
	sidelobes                  []float64 // levels of side lobes below the main lobe of the antennas that have them, dB
	figureAssumed              bool      // the noise figure is not the sheet's
}

// port is one port as it hangs.
type port struct {
	label     string
	antenna   int
	polar     polar.Port
	leak      float64 // power
	boresight float64 // gain, dBi
	gain      float64 // toward the other end, dBi
}

// What is taken where the sheet does not say; common practice.
const (
	defaultNoiseFigure = 6.0 // dB
	// Cross-talk that is there however true the antennas are: path, receiver.
	residualLeakDB = 32.0
	deepestOffAim  = 20.0 // dB, where the parabola of a main lobe ends
	dipoleGain     = 2.15 // dBi of a half-wave dipole (Balanis, Antenna Theory, section 4.6)
)

// newLink works out the link from its sheet.
func newLink(s *sheet.Sheet, f *Figures, v *codec.Value) (*link, *codec.Problem) {
	l := &link{tied: !s.Radio.Combining, frequencyMHz: s.Radio.FrequencyMHz, pathDoubt: pathDoubt}
	for end, m := range [2]*sheet.Mount{&s.Near, &s.Far} {
		bearing, elevation := s.Path.BearingDeg, s.Path.ElevationDeg
		if End(end) == Far {
			bearing, elevation = bearing+180, -elevation
		}
		for a := range m.Antennas {
			ant := &m.Antennas[a]
			for _, e := range ant.Elements {
				l.ports[end] = append(l.ports[end], port{
					label: e.Port, antenna: a, polar: polarization(ant, &e), leak: leak(&e),
					boresight: gain(ant), gain: gain(ant) - offAim(ant, bearing, elevation),
				})
			}
			if !ant.Symmetric() {
				level := typicalSidelobe
				if ant.Pattern.SidelobeDB != nil {
					level = *ant.Pattern.SidelobeDB
				}
				l.sidelobes = append(l.sidelobes, level)
			}
		}
	}
	l.pair(s.Radio.Links)
	if l.n == 0 {
		return nil, v.Get("radio").Refuse(codec.Impossible, "no near port is tied to a far port")
	}
	if s.Radio.BandwidthMHz != nil {
		figure := defaultNoiseFigure
		l.figureAssumed = s.Radio.NoiseFigureDB == nil
		if !l.figureAssumed {
			figure = *s.Radio.NoiseFigureDB
		}
		l.bandwidthMHz = *s.Radio.BandwidthMHz
		n := thermalNoise(l.bandwidthMHz*1e6) + figure
		l.noise = &n
	}
	if p := l.powers(s, f); p != nil {
		return nil, p
	}
	l.prepare()
	return l, nil
}

// coupling is the share of the power that goes from a near port, turned by so much
// more, to a far port, with what leaks.
func (l *link) coupling(i, j int, turn float64) float64 {
	p, q := l.ports[Near][i], l.ports[Far][j]
	p.polar.SkewRad += turn
	return polar.LossFactor(p.polar, q.polar) + p.leak + q.leak + polar.LeakFromDB(residualLeakDB)
}

// prepare works out what every state has in common.
func (l *link) prepare() {
	shift := 0.0
	if l.expected != nil { // so that the mean planned level is the expected one
		shift = *l.expected - l.plannedMean()
	}
	for i, p := range l.ports[Near] {
		for j, q := range l.ports[Far] {
			l.coupled = append(l.coupled, l.coupling(i, j, 0))
			l.reach = append(l.reach, decibel(p.gain+q.gain-l.loss+shift))
		}
	}
	for end := range l.tx {
		for _, dbm := range l.tx[end] {
			l.sent[end] = append(l.sent[end], decibel(dbm))
		}
	}
	if l.noise != nil {
		l.floor = decibel(*l.noise)
	}
}

// thermalNoise is k·290 K·B in dBm: −174 dBm in 1 Hz (IEEE Std 145 takes 290 K;
// Boltzmann's constant by the SI).
func thermalNoise(hertz float64) float64 { return 10 * math.Log10(1.380649e-23*290*hertz*1000) }

// powers fills in transmit powers and the loss between.
func (l *link) powers(s *sheet.Sheet, f *Figures) *codec.Problem {
	if f.ExpectedDBm != nil {
		l.expected, l.pathDoubt = f.ExpectedDBm, *f.ExpectedUDB
	} else if len(s.Radio.TxPowerDBm) == 0 {
		return &codec.Problem{Code: codec.MissingField, Field: "radio.tx_power_dbm", Message: "without the transmit power no level can be expected; give it, or an expected level with the radio figures"}
	}
	per := func(i int) float64 {
		p := s.Radio.TxPowerDBm
		switch {
		case len(p) == 0:
			return 0
		case s.Radio.Power == sheet.Shared && len(p) == 1:
			return p[0] - 10*math.Log10(float64(l.n))
		case i < len(p):
			return p[i]
		}
		return p[len(p)-1]
	}
	for end := range l.ports {
		l.tx[end] = make([]float64, len(l.ports[end]))
		for i := range l.tx[end] {
			chain := i
			if End(end) == Far && l.mate[Far][i] >= 0 {
				chain = l.mate[Far][i]
			}
			l.tx[end][i] = per(chain)
		}
	}
	l.loss = aim.FreeSpaceLoss(s.Path.DistanceM, s.Radio.WavelengthM())
	return nil
}

// latest are the readings of a mount's newest state, the plan where there are
// none.
func latest(s *sheet.AngleStates) []sheet.Angle {
	switch {
	case len(s.AsLeft) > 0:
		return s.AsLeft
	case len(s.AsFound) > 0:
		return s.AsFound
	}
	return []sheet.Angle{s.Planned}
}

// turned is the mean of readings of one angle, degrees, the short way about the
// first.
func turned(readings []sheet.Angle) float64 {
	sum := 0.0
	for _, r := range readings {
		sum += math.Remainder(r.Deg-readings[0].Deg, 360)
	}
	return readings[0].Deg + sum/float64(len(readings))
}

const degree = math.Pi / 180

func polarization(a *sheet.Antenna, e *sheet.Element) polar.Port {
	p := polar.Port{SlantRad: e.SlantDeg * degree, SkewRad: turned(latest(&a.Skew)) * degree}
	if e.AxialRatioDB != nil {
		p.Axial, p.LeftHand = polar.AxialFromDB(*e.AxialRatioDB), e.Hand == "left"
	}
	return p
}

func leak(e *sheet.Element) float64 {
	if e.XPDDB == nil {
		return 0
	}
	return polar.LeakFromDB(*e.XPDDB)
}

func gain(a *sheet.Antenna) float64 {
	switch {
	case a.Pattern.GainDBi != nil:
		return *a.Pattern.GainDBi
	case a.Pattern.Kind == sheet.Dipole:
		return dipoleGain
	}
	return 0
}

// offAim is what an antenna that is known not to look along the path loses by it,
// dB, by the form of its main lobe −12(Δ/θ)², 20 dB at most.
func offAim(a *sheet.Antenna, bearing, elevation float64) float64 {
	lost := 0.0
	add := func(off float64, width *float64) {
		if width != nil {
			lost += 12 * math.Pow(off / *width, 2)
		}
	}
	if !a.Symmetric() {
		add(math.Remainder(turned(latest(&a.Azimuth))-bearing, 360), a.Pattern.BeamwidthAzDeg)
		add(turned(latest(&a.Tilt))+a.ElectricalTiltDeg-elevation, a.Pattern.BeamwidthElDeg)
	}
	return math.Min(lost, deepestOffAim)
}

// pair ties near ports to far ports: as the sheet links them, else by the largest
// sum of coupled powers, label to label where that is open.
func (l *link) pair(links []sheet.Link) {
	for end := range l.mate {
		l.mate[end] = make([]int, len(l.ports[end]))
		for i := range l.mate[end] {
			l.mate[end][i] = -1
		}
	}
	tie := func(i, j int) {
		l.mate[Near][i], l.mate[Far][j] = j, i
		l.n++
	}
	if links != nil {
		for _, k := range links {
			tie(find(l.ports[Near], k.Near), find(l.ports[Far], k.Far))
		}
		return
	}
	// Best assignment by dynamic programming over sets of far ports: at most 8
	// ports, 256 sets.
	sets := 1 << len(l.ports[Far])
	best := make([][]float64, len(l.ports[Near])+1)
	from := make([][]int, len(l.ports[Near])+1)
	for i := range best {
		best[i], from[i] = make([]float64, sets), make([]int, sets)
		for set := range best[i] {
			best[i][set] = math.Inf(-1)
		}
	}
	best[0][0] = 0
	for i := range l.ports[Near] {
		for set := range sets {
			if math.IsInf(best[i][set], -1) {
				continue
			}
			try := func(to, j int, more float64) {
				if b := best[i][set] + more; b > best[i+1][to]+1e-12 {
					best[i+1][to], from[i+1][to] = b, j
				}
			}
			for j := range l.ports[Far] {
				if set&(1<<j) == 0 {
					c := polar.LossFactor(l.ports[Near][i].polar, l.ports[Far][j].polar)
					if i == j {
						c += 1e-9 // label to label where nothing else decides
					}
					try(set|1<<j, j, c)
				}
			}
			try(set, -1, 0) // more near ports than far ports
		}
	}
	last := 0
	for set := range sets {
		if best[len(l.ports[Near])][set] > best[len(l.ports[Near])][last] {
			last = set
		}
	}
	for i := len(l.ports[Near]); i > 0; i-- {
		if j := from[i][last]; j >= 0 {
			tie(i-1, j)
			last &^= 1 << j
		}
	}
}

func find(ports []port, label string) int {
	for i := range ports {
		if ports[i].label == label {
			return i
		}
	}
	panic("fault: a link to a port that the sheet does not have")
}
