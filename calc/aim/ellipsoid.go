package aim

import "math"

// The WGS 84 ellipsoid (NGA.STND.0036, table 3.1).
const (
	semiMajor  = 6_378_137.0
	flattening = 1 / 298.257223563
	semiMinor  = semiMajor * (1 - flattening)
	eccSquared = flattening * (2 - flattening) // first eccentricity squared
)

// Position is a place on or near the earth.
type Position struct {
	Lat, Lon float64 // geodetic latitude and east longitude, radians
	Height   float64 // above the ellipsoid, metres
}

// normalRadius is the radius of curvature in the prime vertical, metres:
//
//	N(φ) = a / √(1 − e² sin²φ)
func normalRadius(lat float64) float64 {
	s := math.Sin(lat)
	return semiMajor / math.Sqrt(1-eccSquared*s*s)
}

// Cartesian returns earth-centred, earth-fixed coordinates in metres:
//
//	x = (N + h) cos φ cos λ,  y = (N + h) cos φ sin λ,  z = (N(1 − e²) + h) sin φ
//
// Source: NGA.STND.0036, section 4 (also any textbook of geodesy).
func (p Position) Cartesian() (x, y, z float64) {
	n := normalRadius(p.Lat)
	sinLat, cosLat := math.Sincos(p.Lat)
	sinLon, cosLon := math.Sincos(p.Lon)
	return (n + p.Height) * cosLat * cosLon,
		(n + p.Height) * cosLat * sinLon,
		(n*(1-eccSquared) + p.Height) * sinLat
}

// Line is the straight line from one place to another, as the place where it
// starts sees it.
type Line struct {
	East, North, Up float64 // metres, in the horizon of the start
	Bearing         float64 // from true north, clockwise, 0 to 2π
	Elevation       float64 // above the horizontal, −π/2 to π/2
	Range           float64 // straight length, metres
}

// Sight returns the straight line from one place to another: the difference of
// the two places, turned into east, north and up at the first.
//
//	bearing = atan2(E, N),  elevation = atan2(U, √(E² + N²))
//
// Refraction is not in it. The bearing of a line to a place straight overhead,
// and every bearing at a pole, is a convention of no use; Target refuses them.
func Sight(from, to Position) Line {
	x1, y1, z1 := from.Cartesian()
	x2, y2, z2 := to.Cartesian()
	dx, dy, dz := x2-x1, y2-y1, z2-z1
	sinLat, cosLat := math.Sincos(from.Lat)
	sinLon, cosLon := math.Sincos(from.Lon)
	outward := cosLon*dx + sinLon*dy // away from the earth's axis
	l := Line{
		East:  -sinLon*dx + cosLon*dy,
		North: -sinLat*outward + cosLat*dz,
		Up:    cosLat*outward + sinLat*dz,
	}
	flat := math.Hypot(l.East, l.North)
	l.Bearing = Turn(math.Atan2(l.East, l.North))
	l.Elevation = math.Atan2(l.Up, flat)
	l.Range = math.Hypot(flat, l.Up)
	return l
}
