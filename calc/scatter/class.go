package scatter

import (
	"errors"
	"math"
)

// Scenario is one of the scenarios of 3GPP TR 38.901.
type Scenario int

const (
	// RuralMacro is RMa.
	RuralMacro Scenario = iota
	// UrbanMacro is UMa.
	UrbanMacro
	// UrbanMicro is UMi, street canyon.
	UrbanMicro
	// IndoorOffice is InH, office.
	IndoorOffice
)

// ClassSource names the edition whose tables this package holds. Later editions changed UMi and UMa: they are never
// mixed.
const ClassSource = "3GPP TR 38.901 V16.1.0, tables 7.5-6 to 7.5-10"

// Class is a scenario of TR 38.901 at a carrier and a distance, between a mast and a user's device.
type Class struct {
	Scenario   Scenario
	Sight      bool
	CarrierGHz float64
	Distance   float64 // horizontal, m
	MastHeight float64 // m; 0 takes the scenario's own (table 7.2-1 to 7.2-3)
	UserHeight float64 // m; 0 takes the scenario's own
}

// Case says which of the scatter's own spread of cases is meant.
type Case int

const (
	// Median takes every logarithmic mean as it stands.
	Median Case = iota
	// Narrow is the 10 % case: spreads at 10^(μ−1.28σ), K at μ+1.28σ. The poorest scatter of the three.
	Narrow
	// Wide is the 90 % case: spreads at 10^(μ+1.28σ), K at μ−1.28σ.
	Wide
)

// normal90 is the 90 % point of the normal distribution, as PHYSICS and common usage round it.
const normal90 = 1.28

// Angles are the figures of a class. Spreads are rms values in degrees as the tables print them, not yet σ of a density.
type Angles struct {
	ASD, ZSD        float64 // at the mast: azimuth, zenith of departure, deg
	ASA, ZSA        float64 // at the user's end: azimuth, zenith of arrival, deg
	KdB, XPRdB      float64 // K without sight is −∞
	ZenithOffsetDeg float64 // of departure; positive points the mean departure downwards
}

// Caps of the rms spreads, TR 38.901 V16.1.0 clause 7.5 step 4. They are the rms of a uniform density: 360°/√12 and
// 180°/√12.
const (
	azimuthCapDeg = 104
	zenithCapDeg  = 52
)

// law is a line of table 7.5-6: a + b·log₁₀(f) or a + b·log₁₀(1+f), f in GHz.
type law struct {
	a, b float64
	plus bool // argument 1 + f
}

func (l law) at(f float64) float64 {
	if l.b == 0 {
		return l.a
	}
	if l.plus {
		f++
	}
	return l.a + l.b*math.Log10(f)
}

// classRow is one column of table 7.5-6.
type classRow struct {
	floor                        float64 // GHz; lower carriers count as this
	asd, asdSigma, asa, asaSigma law
	zsa, zsaSigma                law
	k, kSigma, xpr               float64
}

func flat(a float64) law     { return law{a: a} }
func ofFc(a, b float64) law  { return law{a: a, b: b} }
func ofFc1(a, b float64) law { return law{a: a, b: b, plus: true} }

// row is table 7.5-6 of TR 38.901 V16.1.0, part by part as far as the angles, K and the cross-polar ratio go.
func (c *Class) row() classRow {
	switch c.Scenario {
	case UrbanMacro:
		if c.Sight {
			return classRow{6, ofFc(1.06, 0.1114), flat(0.28), flat(1.81), flat(0.20), flat(0.95), flat(0.16), 9, 3.5, 8}
		}
		return classRow{6, ofFc(1.5, -0.1144), flat(0.28), ofFc(2.08, -0.27), flat(0.11), ofFc(1.512, -0.3236), flat(0.16), 0, 0, 7}
	case UrbanMicro:
		if c.Sight {
			return classRow{2, ofFc1(1.21, -0.05), flat(0.41), ofFc1(1.73, -0.08), ofFc1(0.28, 0.014), ofFc1(0.73, -0.1), ofFc1(0.34, -0.04), 9, 5, 9}
		}
		return classRow{2, ofFc1(1.53, -0.23), ofFc1(0.33, 0.11), ofFc1(1.81, -0.08), ofFc1(0.3, 0.05), ofFc1(0.92, -0.04), ofFc1(0.41, -0.07), 0, 0, 8}
	case IndoorOffice:
		if c.Sight {
			return classRow{6, flat(1.6), flat(0.18), ofFc1(1.781, -0.19), ofFc1(0.119, 0.12), ofFc1(1.44, -0.26), ofFc1(0.264, -0.04), 7, 4, 11}
		}
		return classRow{6, flat(1.62), flat(0.25), ofFc1(1.863, -0.11), ofFc1(0.059, 0.12), ofFc1(1.387, -0.15), ofFc1(0.746, -0.09), 0, 0, 10}
	}
	if c.Sight {
		return classRow{0, flat(0.90), flat(0.38), flat(1.52), flat(0.24), flat(0.47), flat(0.40), 7, 4, 12}
	}
	return classRow{0, flat(0.95), flat(0.45), flat(1.52), flat(0.13), flat(0.58), flat(0.37), 0, 0, 7}
}

// heights are those of the user's and the mast's antenna where the class states none: TR 38.901 V16.1.0 table 7.2-1
// (UMi, UMa), 7.2-2 (indoor office) and 7.2-3 (RMa).
func (c *Class) heights() (mast, user float64) {
	switch c.Scenario {
	case UrbanMacro:
		mast, user = 25, 1.5
	case UrbanMicro:
		mast, user = 10, 1.5
	case IndoorOffice:
		mast, user = 3, 1
	default:
		mast, user = 35, 1.5
	}
	if c.MastHeight > 0 {
		mast = c.MastHeight
	}
	if c.UserHeight > 0 {
		user = c.UserHeight
	}
	return mast, user
}

// zenith is lgZSD, its σ and the zenith offset in degrees: TR 38.901 V16.1.0 tables 7.5-7 (UMa), 7.5-8 (UMi), 7.5-9
// (RMa), 7.5-10 (indoor office).
func (c *Class) zenith() (mean, sigma, offset float64) {
	d, f := c.Distance, c.CarrierGHz
	mast, user := c.heights()
	km := d / 1000
	switch c.Scenario {
	case UrbanMacro:
		if c.Sight {
			return math.Max(-0.5, -2.1*km-0.01*(user-1.5)+0.75), 0.40, 0
		}
		f = math.Max(f, 6)
		l := math.Log10(f)
		off := 7.66*l - 5.96 - math.Pow(10, (0.208*l-0.782)*math.Log10(math.Max(25, d))-0.13*l+2.03-0.07*(user-1.5))
		return math.Max(-0.5, -2.1*km-0.01*(user-1.5)+0.9), 0.49, off
	case UrbanMicro:
		if c.Sight {
			return math.Max(-0.21, -14.8*km+0.01*math.Abs(user-mast)+0.83), 0.35, 0
		}
		return math.Max(-0.5, -3.1*km+0.01*math.Max(user-mast, 0)+0.2), 0.35, -math.Pow(10, -1.5*math.Log10(math.Max(10, d))+3.3)
	case IndoorOffice:
		if c.Sight {
			l := math.Log10(1 + math.Max(f, 6))
			return -1.43*l + 2.228, 0.13*l + 0.30, 0
		}
		return 1.08, 0.36, 0
	}
	if c.Sight {
		return math.Max(-1, -0.17*km-0.01*(user-1.5)+0.22), 0.34, 0
	}
	off := math.Atan((35-3.5)/d) - math.Atan((35-1.5)/d)
	return math.Max(-1, -0.19*km-0.01*(user-1.5)+0.28), 0.30, off * 180 / math.Pi
}

// Angles evaluates the tables for one case,
//
//	spread = 10^(μ + zσ), K = μ_K − zσ_K dB,  z = 0, −1.28, +1.28
//
// capped at 104° in azimuth and 52° in zenith (clause 7.5, step 4). The cross-polar ratio and the zenith offset stay at
// their means.
func (c *Class) Angles(which Case) Angles {
	z := 0.0
	switch which {
	case Narrow:
		z = -normal90
	case Wide:
		z = normal90
	}
	r := c.row()
	f := math.Max(c.CarrierGHz, r.floor)
	spread := func(mean, sigma, most float64) float64 { return math.Min(math.Pow(10, mean+z*sigma), most) }
	zm, zs, off := c.zenith()
	a := Angles{
		ASD:             spread(r.asd.at(f), r.asdSigma.at(f), azimuthCapDeg),
		ASA:             spread(r.asa.at(f), r.asaSigma.at(f), azimuthCapDeg),
		ZSA:             spread(r.zsa.at(f), r.zsaSigma.at(f), zenithCapDeg),
		ZSD:             spread(zm, zs, zenithCapDeg),
		KdB:             math.Inf(-1),
		XPRdB:           r.xpr,
		ZenithOffsetDeg: off,
	}
	if c.Sight {
		a.KdB = r.k - z*r.kSigma
	}
	return a
}

// Check says whether the class can be evaluated: a carrier of 0.5 to 100 GHz (7 GHz at most for RMa is what TR 38.901
// clause 7.1 was made for; higher ones are allowed here, the tables do not depend on it) and a positive distance.
func (c *Class) Check() error {
	if c.Scenario < RuralMacro || c.Scenario > IndoorOffice {
		return errors.New("unknown scenario")
	}
	if !(c.CarrierGHz >= 0.5 && c.CarrierGHz <= 100) {
		return errors.New("TR 38.901 covers 0.5 to 100 GHz; use typed spreads outside it")
	}
	if !(c.Distance > 0) || math.IsInf(c.Distance, 0) {
		return errors.New("the distance must be above 0")
	}
	return nil
}

// Surroundings turns the figures of a case into spectra for two facing mounts: the mast's end sees the departure
// spreads, the user's end the arrival spreads. elevation is that of the far end seen from the near one, in radians.
//
// Azimuth is Gaussian (equation 7.5-9), elevation Laplacian (equation 7.5-14), both cut, their σ solved so that the rms
// of the cut density is the published one. The rms of the table with sight includes the direct path's share; taken for
// the scatter alone, as here, it is on the narrow side. Means point at the other end, at the mast lowered by the zenith
// offset.
func (c *Class) Surroundings(which Case, mastIsNear bool, elevation float64) Surroundings {
	a := c.Angles(which)
	mast := Angular{AzimuthForm: Gaussian, ElevationForm: Laplacian}
	user := mast
	mast.setAzimuth(a.ASD)
	user.setAzimuth(a.ASA)
	up := elevation
	if !mastIsNear {
		up = -elevation
	}
	mast.ElevationMean = up - a.ZenithOffsetDeg*math.Pi/180
	user.ElevationMean = -up
	mast.setElevation(a.ZSD)
	user.setElevation(a.ZSA)
	s := Surroundings{Sight: c.Sight, XPR: math.Pow(10, a.XPRdB/10), Near: mast, Far: user}
	if c.Sight {
		s.K = math.Pow(10, a.KdB/10)
	}
	if !mastIsNear {
		s.Near, s.Far = user, mast
	}
	return s
}

func (a *Angular) setAzimuth(rmsDeg float64) {
	sigma, ok := SigmaOfRMS(a.AzimuthForm, rmsDeg*math.Pi/180, math.Pi)
	if !ok {
		a.AzimuthForm = Uniform
	}
	a.AzimuthSpread = sigma
}

func (a *Angular) setElevation(rmsDeg float64) {
	sigma, ok := SigmaOfRMS(a.ElevationForm, rmsDeg*math.Pi/180, math.Pi/2)
	if !ok {
		a.ElevationForm = Uniform
	}
	a.ElevationSpread = sigma
}

// SigmaOfRMS returns the σ of the uncut density (Laplacian or Gaussian) whose rms, once cut at ±half about its mean, is
// the given one, in radians. ok is false where the rms is that of a uniform density, half/√3, or above: no such σ
// exists and the uniform density is meant.
func SigmaOfRMS(form Form, rms, half float64) (sigma float64, ok bool) {
	if !(rms < half/math.Sqrt(3)*0.999) {
		return math.Inf(1), false
	}
	if rms <= 0 {
		return 0, true
	}
	// The cut rms grows with σ, from 0 to half/√3.
	lo, hi := rms, rms
	for cutRMS(form, hi, half) < rms {
		hi *= 2
	}
	for range 200 {
		mid := (lo + hi) / 2
		if mid == lo || mid == hi {
			break
		}
		if cutRMS(form, mid, half) < rms {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2, true
}

// cutRMS is the rms of a density of the given σ cut at ±half,
//
//	Laplacian  with u = √2·half/σ: σ² (1 − e^{−u}(1 + u + u²/2))/(1 − e^{−u})
//	Gaussian   with t = half/σ:    σ² (1 − 2tφ(t)/erf(t/√2))
func cutRMS(form Form, sigma, half float64) float64 {
	if form == Gaussian {
		t := half / sigma
		if t < 1e-3 {
			return half / math.Sqrt(3)
		}
		return sigma * math.Sqrt(1-2*t*math.Exp(-t*t/2)/math.Sqrt(2*math.Pi)/math.Erf(t/math.Sqrt2))
	}
	u := math.Sqrt2 * half / sigma
	if u < 1e-3 {
		return half / math.Sqrt(3)
	}
	e := math.Exp(-u)
	return sigma * math.Sqrt((1-e*(1+u+u*u/2))/(1-e))
}

// ScenarioOf is the scenario of a short name: RMa, UMa, UMi or InH; RMa for any other.
func ScenarioOf(name string) Scenario {
	switch name {
	case "UMa":
		return UrbanMacro
	case "UMi":
		return UrbanMicro
	case "InH":
		return IndoorOffice
	}
	return RuralMacro
}
