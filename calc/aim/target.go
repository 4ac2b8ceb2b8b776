package aim

import (
	"errors"
	"math"
)

// Why a target can not be aimed at.
var (
	ErrSamePlace = errors.New("both ends are at the same place on the map, so there is no bearing; check the two positions")
	ErrPole      = errors.New("at the pole itself every direction is south (or north); give the position a little beside it")
)

// StandardK is the effective earth radius factor of the median atmosphere,
// 4/3 (Recommendation ITU-R P.310 and P.834).
const StandardK = 4.0 / 3

// DefaultPositionDoubt is the standard uncertainty of a position whose own is
// not known, metres in each of east and north: a phone's satellite fix under an
// open sky. Common practice.
const DefaultPositionDoubt = 5.0

// End is one end of a path, with the standard uncertainty of its position in
// each of east and north, metres.
type End struct {
	Position
	Doubt float64
}

// Target is the direction to the far end as the near end needs it.
type Target struct {
	TrueBearing        float64 // of the straight line, from true north
	GeodesicBearing    float64 // of the shortest line on the ellipsoid
	GeometricElevation float64 // of the straight line
	Elevation          float64 // of the ray as it leaves, bent by the atmosphere
	Distance           float64 // on the ellipsoid, metres
	SlantRange         float64 // straight, metres
	BearingDoubt       float64 // standard uncertainty of the true bearing
}

// widestBearingDoubt is the standard deviation of a bearing of which nothing is
// known: uniform over the circle.
var widestBearingDoubt = halfTurn / math.Sqrt(3)

// Aim returns the direction from one end to the other. The ray bends down with
// the atmosphere, so it leaves higher than the straight line:
//
//	elevation = geometric + (1 − 1/k) s / 2R
//
// R = 6371 km, k > 0 the effective earth radius factor, s the distance on the
// ellipsoid. The doubt of the bearing is that of both positions across the line;
// the near end's also turns its own meridian, by tan φ/(N + h) per metre of
// east, which near a pole is all of it:
//
//	u² = (u₁² [(tan φ/(N+h) − cos β/d)² + (sin β/d)²] + (u₂/d)²)
//
// It returns ErrPole where the near end is a pole, ErrSamePlace where the ends
// are less than a millimetre apart on the map, ErrNearAntipode.
func Aim(from, to End, k float64) (Target, error) {
	if math.Cos(from.Lat) < 1e-12 { // within 6 µm of the pole
		return Target{}, ErrPole
	}
	g, err := Inverse(from.Position, to.Position)
	if err != nil {
		return Target{}, err
	}
	if g.Distance < 1e-3 {
		return Target{}, ErrSamePlace
	}
	line := Sight(from.Position, to.Position)
	flat := math.Hypot(line.East, line.North)
	sinB, cosB := math.Sincos(line.Bearing)
	meridian := math.Tan(from.Lat) / (normalRadius(from.Lat) + from.Height)
	doubt := math.Hypot(from.Doubt*math.Hypot(meridian-cosB/flat, sinB/flat), to.Doubt/flat)
	return Target{
		TrueBearing:        line.Bearing,
		GeodesicBearing:    g.StartBearing,
		GeometricElevation: line.Elevation,
		Elevation:          line.Elevation + RayBend(g.Distance, k),
		Distance:           g.Distance,
		SlantRange:         line.Range,
		BearingDoubt:       math.Min(doubt, widestBearingDoubt),
	}, nil
}

// RayBend is how much higher a ray leaves than the straight line to where it
// arrives, radians, for a path of s metres and an effective earth radius factor
// k > 0: the ray is an arc of curvature (1 − 1/k)/R, and leaves its chord by half
// the angle of the arc.
func RayBend(s, k float64) float64 { return (1 - 1/k) * s / (2 * MeanEarthRadius) }

// EffectiveRadius is the effective earth radius in metres for a median
// refractivity gradient of −deltaN per kilometre through the lowest kilometre:
//
//	a_e = 6371 · 157 / (157 − ΔN)  km
//
// for ΔN < 157 N-units/km. Source: Recommendation ITU-R P.1812-6, equations 6 and 7a.
func EffectiveRadius(deltaN float64) float64 { return MeanEarthRadius * 157 / (157 - deltaN) }
