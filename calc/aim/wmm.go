package aim

import "math"

// MagneticModel is the name of the model of the earth's field in use.
const MagneticModel = "WMM2025"

// MagneticField is the earth's main field at one place and time. X is north, Y
// east, Z down; nT. The rates are a year's change.
type MagneticField struct {
	X, Y, Z             float64
	XRate, YRate, ZRate float64
}

// Magnetic returns the main field by the World Magnetic Model 2025, at a place
// from 1 km below to 850 km above the ellipsoid and a time in decimal years. The
// model is made for 2025.0 to 2030.0; for other years the same straight lines in
// time are drawn on, and WithinModel tells so.
//
//	X' = −Σ (a/r)ⁿ⁺² Σ (g cos mλ + h sin mλ) dP/dφ'
//	Y' =  Σ (a/r)ⁿ⁺² Σ m (g sin mλ − h cos mλ) P / cos φ'
//	Z' = −Σ (n+1)(a/r)ⁿ⁺² Σ (g cos mλ + h sin mλ) P
//
// P are Schmidt's semi-normalised functions of geocentric latitude φ', a = 6371.2
// km; X' and Z' are then turned into the horizon of the ellipsoid. P/cos φ' is
// built up itself, so nothing is divided by the cosine and the poles need no case
// of their own.
// Source: The US/UK World Magnetic Model for 2025–2030, technical report, NOAA
// NCEI 2024.
func Magnetic(p Position, year float64) MagneticField {
	const reference = 6_371_200.0
	n := normalRadius(p.Lat)
	sinLat, cosLat := math.Sincos(p.Lat)
	flat, up := (n+p.Height)*cosLat, (n*(1-eccSquared)+p.Height)*sinLat
	r := math.Hypot(flat, up)
	s, c := up/r, flat/r // of the geocentric latitude

	var f MagneticField
	sinM, cosM := 0.0, 1.0 // of mλ
	sinLon, cosLon := math.Sincos(p.Lon)
	sector := 1.0 // the function of degree m and order m; over c for m ≥ 1
	for m := 0; m <= wmmDegree; m++ {
		if m > 0 {
			sinM, cosM = sinM*cosLon+cosM*sinLon, cosM*cosLon-sinM*sinLon
			if m > 1 {
				sector *= c * math.Sqrt(float64(2*m-1)/float64(2*m))
			}
		}
		before, here := 0.0, sector
		if m == 0 { // the terms of order 0 begin at degree 1
			before, here = 1, s
		}
		for n := max(m, 1); n <= wmmDegree; n++ {
			fn, fm := float64(n), float64(m)
			after := ((2*fn+1)*s*here - math.Sqrt(fn*fn-fm*fm)*before) / math.Sqrt((fn+1)*(fn+1)-fm*fm)
			value, overCos, slope := here, 0.0, 0.0
			if m == 0 {
				slope = zonalSlope(n, s, c)
			} else {
				value, overCos = here*c, here
				slope = (fn+1)*s*here - math.Sqrt((fn+1)*(fn+1)-fm*fm)*after
			}
			t := wmmTerms[n*(n+1)/2+m-1]
			reach := math.Pow(reference/r, fn+2)
			add := func(g, h float64, x, y, z *float64) {
				along, across := g*cosM+h*sinM, fm*(g*sinM-h*cosM)
				*x -= reach * along * slope
				*y += reach * across * overCos
				*z -= reach * (fn + 1) * along * value
			}
			add(t.g, t.h, &f.X, &f.Y, &f.Z)
			add(t.gRate, t.hRate, &f.XRate, &f.YRate, &f.ZRate)
			before, here = here, after
		}
	}
	dt := year - wmmEpoch
	f.X, f.Y, f.Z = f.X+dt*f.XRate, f.Y+dt*f.YRate, f.Z+dt*f.ZRate
	// sin and cos of φ' − φ
	sinD, cosD := s*cosLat-c*sinLat, c*cosLat+s*sinLat
	f.X, f.Z = f.X*cosD-f.Z*sinD, f.X*sinD+f.Z*cosD
	f.XRate, f.ZRate = f.XRate*cosD-f.ZRate*sinD, f.XRate*sinD+f.ZRate*cosD
	return f
}

// zonalSlope is dPₙ(sin φ)/dφ = cos φ · Pₙ'(sin φ), by
// P'ₙ = s P'ₙ₋₁ + n Pₙ₋₁.
func zonalSlope(n int, s, c float64) float64 {
	p, before, derivative := 1.0, 0.0, 0.0
	for k := 1; k <= n; k++ {
		fk := float64(k)
		derivative = s*derivative + fk*p
		p, before = ((2*fk-1)*s*p-(fk-1)*before)/fk, p
	}
	return c * derivative
}

// Horizontal is the strength of the horizontal part, nT.
func (f MagneticField) Horizontal() float64 { return math.Hypot(f.X, f.Y) }

// Total is the strength of the field, nT.
func (f MagneticField) Total() float64 { return math.Hypot(f.Horizontal(), f.Z) }

// Declination is the bearing of magnetic north from true north, + east.
func (f MagneticField) Declination() float64 { return math.Atan2(f.Y, f.X) }

// Inclination is the dip below the horizontal, + down.
func (f MagneticField) Inclination() float64 { return math.Atan2(f.Z, f.Horizontal()) }

// DeclinationRate is a year's change of the declination, radians.
func (f MagneticField) DeclinationRate() float64 {
	h := f.Horizontal()
	return (f.X*f.YRate - f.Y*f.XRate) / (h * h)
}

// DeclinationDoubt is the standard uncertainty of the declination by the model's
// own error model, with what the model leaves out (crust, storms) in it:
//
//	u = √(0.26² + (5417 / H)²) degrees, H in nT
//
// Source: technical report of WMM2025, section 3.4, equation 43. It knows nothing
// of the steel of a mast.
func (f MagneticField) DeclinationDoubt() float64 {
	return math.Min(math.Hypot(0.26, 5417/math.Max(f.Horizontal(), 1))*degree, widestBearingDoubt)
}

// The zones about the magnetic poles, by horizontal strength (technical report
// of WMM2025, blackout and caution zones): below 2000 nT a compass is of no use,
// below 6000 nT it is to be used with caution.
const (
	BlackoutBelow = 2000.0
	CautionBelow  = 6000.0
)

// WithinModel tells whether the model is made for this decimal year.
func WithinModel(year float64) bool { return year >= wmmEpoch && year < wmmEnd }
