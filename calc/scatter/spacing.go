package scatter

import "math"

// Spacing is the way from one element to another in a mount frame, in
// wavelengths.
type Spacing struct{ Right, Up, Forward float64 }

// Length is the distance in wavelengths.
func (s Spacing) Length() float64 {
	return math.Hypot(math.Hypot(s.Right, s.Up), s.Forward)
}

// Effective is the spacing across arrivals from one bearing: the part of d at
// right angles to the direction û,
//
//	|d − (d·û)û|,   û = (sin β, 0, cos β)
//
// in wavelengths, β clockwise off forward. Only this part tells arrivals from
// directions about û apart (to first order in their spread). One wavelength right
// with half a wavelength forward gives 0.62 at +30° and 1.12 at −30°.
func (s Spacing) Effective(offRad float64) float64 {
	sin, cos := math.Sincos(offRad)
	across := s.Right*cos - s.Forward*sin
	return math.Hypot(across, s.Up)
}

// TwoElementBeamwidth is the half-power beamwidth in radians, broadside, of two
// equal isotropic elements d wavelengths apart that are fed in phase,
//
//	2 asin(1/(4d))
//
// from cos²(π d sin φ) = 1/2. Below d = 0.25 the power never falls to a half:
// ok is false. One wavelength gives 29.0°; the trade reckons with 30° (common
// practice).
// Reference: Balanis, Antenna Theory, ch. 6 (two-element array).
func TwoElementBeamwidth(d float64) (rad float64, ok bool) {
	if !(d >= 0.25) {
		return 0, false
	}
	return 2 * math.Asin(1/(4*d)), true
}

// GratingLobes returns the angles off broadside, in radians and one side only, at
// which two or more equal elements d wavelengths apart, fed in phase, radiate as
// strongly as broadside,
//
//	sin φ = m/d,   m = 1, 2, … ≤ d
//
// at most max of them, innermost first; none below one wavelength.
// Reference: Balanis, Antenna Theory, ch. 6 (grating lobes).
func GratingLobes(d float64, max int) []float64 {
	var at []float64
	for m := 1; float64(m) <= d && len(at) < max; m++ {
		at = append(at, math.Asin(float64(m)/d))
	}
	return at
}
