package aim

import "math"

// SunCaution stands beside everything that has to do with the sun.
const SunCaution = "Never look at the sun, nor at it through an optic, not even for a moment: take its direction from the shadow of a plumb line."

// Air is what refraction depends on.
type Air struct {
	PressureHPa  float64
	TemperatureC float64
}

// StandardAir is the air of refraction tables: 1010 hPa and 10 °C
// (NREL/TP-560-34302, equation 42, where its factors are 1).
var StandardAir = Air{1010, 10}

// Sun is where the sun stands, with the steps on the way there, all in radians
// but Distance.
type Sun struct {
	Azimuth           float64 // from true north, clockwise
	Elevation         float64 // of the straight line, seen from the place and not the earth's centre
	ApparentElevation float64 // raised by refraction; where the sun is seen

	Longitude, Latitude, Distance float64 // heliocentric of the earth; distance in astronomical units
	NutationLongitude             float64
	NutationObliquity             float64
	Obliquity                     float64 // true obliquity of the ecliptic
	ApparentLongitude             float64
	RightAscension, Declination   float64 // geocentric
	HourAngle                     float64 // geocentric
	LocalRightAscension           float64 // topocentric, likewise below
	LocalDeclination              float64
	LocalHourAngle                float64
}

// EarthLag is ΔT = TT − UT1 in seconds: how far the earth lags behind the clocks.
// It was 63.8 in 2000 and 69 from 2018 on (International Earth Rotation and
// Reference Systems Service); it is held there, because a minute's error moves
// the sun 0.0007° only.
const EarthLag = 69.2

// SunAt returns where the sun stands, for years 2000 to 2100, by the solar position
// algorithm of Reda and Andreas with all its terms. Its own error is 0.0003°; that
// UT1 is taken for UTC adds up to 0.004° (0.9 s of the earth's turning).
// Source: NREL/TP-560-34302, sections 3.1 to 3.14.
func SunAt(p Position, t Instant, air Air) Sun {
	return sunAt(p, t.JulianDay(), EarthLag, air)
}

func sunAt(p Position, julianDay, lag float64, air Air) Sun {
	century := (julianDay - 2451545) / 36525
	ephemerisCentury := (julianDay + lag/86400 - 2451545) / 36525
	millennium := ephemerisCentury / 10

	var s Sun
	s.Longitude = Turn(series(earthLongitude[:], millennium))
	s.Latitude = series(earthLatitude[:], millennium)
	s.Distance = series(earthRadius[:], millennium)
	geocentricLongitude := Turn(s.Longitude + halfTurn)
	geocentricLatitude := -s.Latitude

	s.NutationLongitude, s.NutationObliquity = nutation(ephemerisCentury)
	s.Obliquity = meanObliquity(millennium) + s.NutationObliquity
	const arcSecond = degree / 3600
	aberration := -20.4898 * arcSecond / s.Distance
	s.ApparentLongitude = Turn(geocentricLongitude + s.NutationLongitude + aberration)

	sinE, cosE := math.Sincos(s.Obliquity)
	sinL, cosL := math.Sincos(s.ApparentLongitude)
	s.RightAscension = Turn(math.Atan2(sinL*cosE-math.Tan(geocentricLatitude)*sinE, cosL))
	s.Declination = math.Asin(math.Sin(geocentricLatitude)*cosE + math.Cos(geocentricLatitude)*sinE*sinL)

	// Sidereal time at Greenwich, equations 28 and 29.
	mean := 280.46061837 + 360.98564736629*(julianDay-2451545) + century*century*(0.000387933-century/38710000)
	sidereal := Turn(math.Mod(mean, 360)*degree) + s.NutationLongitude*cosE
	s.HourAngle = Turn(sidereal + p.Lon - s.RightAscension)

	// Parallax, section 3.12.
	parallax := 8.794 * arcSecond / s.Distance
	u := math.Atan(semiMinor / semiMajor * math.Tan(p.Lat))
	x := math.Cos(u) + p.Height/semiMajor*math.Cos(p.Lat)
	y := semiMinor/semiMajor*math.Sin(u) + p.Height/semiMajor*math.Sin(p.Lat)
	sinP := math.Sin(parallax)
	sinH, cosH := math.Sincos(s.HourAngle)
	shift := math.Atan2(-x*sinP*sinH, math.Cos(s.Declination)-x*sinP*cosH)
	s.LocalRightAscension = Turn(s.RightAscension + shift)
	s.LocalDeclination = math.Atan2((math.Sin(s.Declination)-y*sinP)*math.Cos(shift), math.Cos(s.Declination)-x*sinP*cosH)
	s.LocalHourAngle = s.HourAngle - shift

	sinH, cosH = math.Sincos(s.LocalHourAngle)
	sinD, cosD := math.Sincos(s.LocalDeclination)
	sinLat, cosLat := math.Sincos(p.Lat)
	// atan2 of the components instead of the report's arcsine: near the zenith
	// and at the poles it keeps its digits.
	south := sinLat*cosD*cosH - cosLat*sinD
	west := cosD * sinH
	s.Elevation = math.Atan2(sinLat*sinD+cosLat*cosD*cosH, math.Hypot(south, west))
	s.Azimuth = Turn(math.Atan2(west, south) + halfTurn)
	s.ApparentElevation = s.Elevation + Refraction(s.Elevation, air)
	return s
}

// series sums a table of waves: Σ τⁱ Σ A cos(B + Cτ), in 1 instead of 10⁻⁸.
func series(table [][]wave, tau float64) float64 {
	sum := 0.0
	for i := len(table) - 1; i >= 0; i-- {
		part := 0.0
		for _, w := range table[i] {
			part += w.a * math.Cos(w.b+w.c*tau)
		}
		sum = sum*tau + part
	}
	return sum * 1e-8
}

// nutation returns the nutation in longitude and in obliquity (section 3.4).
func nutation(century float64) (longitude, obliquity float64) {
	t := century
	x := [5]float64{
		(297.85036 + t*(445267.11148+t*(-0.0019142+t/189474))) * degree,
		(357.52772 + t*(35999.05034+t*(-0.0001603-t/300000))) * degree,
		(134.96298 + t*(477198.867398+t*(0.0086972+t/56250))) * degree,
		(93.27191 + t*(483202.017538+t*(-0.0036825+t/327270))) * degree,
		(125.04452 + t*(-1934.136261+t*(0.0020708+t/450000))) * degree,
	}
	for _, n := range nutationTerms {
		angle := 0.0
		for i, y := range n.y {
			angle += float64(y) * x[i]
		}
		sin, cos := math.Sincos(angle)
		longitude += (n.a + n.b*t) * sin
		obliquity += (n.c + n.d*t) * cos
	}
	return longitude * degree / 36_000_000, obliquity * degree / 36_000_000
}

// meanObliquity is the mean obliquity of the ecliptic (equation 24).
func meanObliquity(millennium float64) float64 {
	u := millennium / 10
	coefficients := [...]float64{84381.448, -4680.93, -1.55, 1999.25, -51.38, -249.67, -39.05, 7.12, 27.87, 5.79, 2.45}
	sum := 0.0
	for i := len(coefficients) - 1; i >= 0; i-- {
		sum = sum*u + coefficients[i]
	}
	return sum * degree / 3600
}

// Refraction is how much the air raises something at this geometric elevation:
//
//	Δe = P/1010 · 283/(273 + T) · 1.02 / (60 tan(e + 10.3/(e + 5.11)))  degrees
//
// and none below −0.8°, where the sun has set.
// Source: NREL/TP-560-34302, equation 42.
func Refraction(elevation float64, air Air) float64 {
	e := elevation / degree
	if e < -0.26667-0.5667 {
		return 0
	}
	return air.PressureHPa / 1010 * 283 / (273 + air.TemperatureC) * 1.02 / (60 * math.Tan((e+10.3/(e+5.11))*degree)) * degree
}

// SunRate is how fast the sun's azimuth moves, radians a second, over the minute
// about the instant.
func SunRate(p Position, t Instant) float64 {
	a, b := SunAt(p, t-30, StandardAir), SunAt(p, t+30, StandardAir)
	return HalfTurn(b.Azimuth-a.Azimuth) / 60
}
