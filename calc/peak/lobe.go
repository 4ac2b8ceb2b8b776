package peak

import "math"

// The first side lobe of a uniform aperture below its main lobe, dB: nothing that
// is built radiates a higher one on purpose, so these are bounds. Line source and
// circular aperture; C. A. Balanis, Antenna Theory, tables 12.1 and 12.2. A test
// works both out from the patterns themselves.
const (
	LineSidelobe     = 13.26
	CircularSidelobe = 17.57
)

// What is known of a lobe before it is measured. The shares and spreads are
// judgement and common practice, stated in every answer's method.
const (
	priorMain      = 0.7  // of first peaks found by a crew that aimed by instrument
	faultShare     = 0.1  // of links whose level is low for another reason
	faultDepth     = 40.0 // dB, and how low, evenly
	sideDepth      = 30.0 // dB, the deepest side lobe that is met
	beamwidthDoubt = 0.1  // of a data sheet's beamwidth, relative
	sideWidth      = 0.5  // of a side lobe against the main lobe: half as wide
	sideWidthDoubt = 0.1  // relative to the main lobe's width
)

// mainOdds returns the odds that a fitted lobe is the main lobe, from its
// curvature c = −12/w² where the beamwidth is known, and from its level where the
// expected one is.
func mainOdds(fit parabola, s Search) float64 {
	main, side := priorMain, 1-priorMain
	if s.Beamwidth > 0 {
		c0 := -12 / (s.Beamwidth * s.Beamwidth)
		cSide := c0 / (sideWidth * sideWidth)
		// dc/c = −2 dw/w
		main *= normal(fit.c-c0, math.Hypot(fit.uc, 2*beamwidthDoubt*c0))
		side *= normal(fit.c-cSide, math.Hypot(fit.uc, 2*sideWidthDoubt/sideWidth*cSide))
	}
	if s.Expected != nil {
		low := *s.Expected - fit.top
		u := math.Hypot(s.ExpectedDoubt, fit.uTop)
		main *= (1-faultShare)*normal(low, u) + faultShare*flat(low, 0, faultDepth, u)
		side *= (1-faultShare)*flat(low, LineSidelobe, sideDepth, u) + faultShare*flat(low, LineSidelobe, sideDepth+faultDepth, u)
	}
	if main+side == 0 { // neither explains it to 38 σ
		return priorMain
	}
	return main / (main + side)
}

// normal is the density of the normal law.
func normal(x, sigma float64) float64 {
	z := x / sigma
	return math.Exp(-z*z/2) / (sigma * math.Sqrt(2*math.Pi))
}

// flat is the density of something even between lo and hi, seen with a normal
// error.
func flat(x, lo, hi, sigma float64) float64 {
	r := sigma * math.Sqrt2
	return (math.Erf((x-lo)/r) - math.Erf((x-hi)/r)) / 2 / (hi - lo)
}
