// Package aim answers where to point and how to find that direction on a mast:
// bearing, elevation and distance to the far end, the path between the ends,
// the magnetic declination, the sun, sights, sectors and the lean of a mast.
//
// # Conventions
//
// Inside, angles are radians and lengths metres; names that end in Deg, MHz, DB
// or MM say otherwise. Latitude is geodetic and longitude east, on the WGS 84
// ellipsoid (NGA.STND.0036: a = 6 378 137 m, 1/f = 298.257 223 563). A height is
// above that ellipsoid; where a caller has heights above sea level, both ends
// must have them, and the error is what the geoid differs between the ends.
//
// Azimuth and bearing count clockwise from true north, 0 to 2π. Elevation counts
// up from the horizontal. Tilt is the elevation of a boresight, + up; skew is a
// turn about the boresight, clockwise + as seen from behind, looking to the far
// end.
//
// # Why none of this comes from a library
//
// The Go module index offers spherical geometry only (golang/geo); no module for
// ellipsoidal geodesics, the World Magnetic Model or the sun's position is kept
// there, and package calc takes gonum alone so that the phone stays light. So
// the published algorithms are written out here, each with its source, and held
// against published tables row by row.
package aim

import "math"

const (
	degree    = math.Pi / 180
	fullTurn  = 2 * math.Pi
	halfTurn  = math.Pi
	rightTurn = math.Pi / 2
)

// LightSpeed in vacuum, m/s, exact by definition of the metre (BIPM SI Brochure,
// 9th edition, 2.2).
const LightSpeed = 299_792_458.0

// MeanEarthRadius in metres: the figure that the ITU-R P-series takes for the
// radius of the sphere (Recommendation ITU-R P.310, P.526, P.1812: 6371 km).
const MeanEarthRadius = 6_371_000.0

// Turn brings an angle into 0 ≤ x < 2π.
func Turn(x float64) float64 {
	x = math.Mod(x, fullTurn)
	if x < 0 {
		x += fullTurn
	}
	if x >= fullTurn { // -1e-17 + 2π rounds to 2π
		x = 0
	}
	return x
}

// HalfTurn brings an angle into −π ≤ x ≤ π, the short way round.
func HalfTurn(x float64) float64 { return math.Remainder(x, fullTurn) }
