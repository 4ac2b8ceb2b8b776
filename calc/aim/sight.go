package aim

import (
	"errors"
	"math"
)

// Why a sight can not be used.
var (
	ErrBelowHorizon = errors.New("the sun is below the horizon at this place and time; check the time and its offset, or sight a landmark")
	ErrTooHigh      = errors.New("the sun stands above 60°, where a shadow tells little of its direction; wait until it is lower, or sight a landmark")
	ErrSteep        = errors.New("the landmark stands more than 60° above or below; choose one nearer to the horizon")
	ErrTooClose     = errors.New("the angle in the horizontal plane comes out within 15° of 0° or 180°, where an angle between two sloping lines tells little of it; read the angle in the horizontal plane instead (shadow of a plumb line)")
	ErrNoTriangle   = errors.New("no such angle is possible between the boresight and the reference at these elevations; check the angle and the tilt")
)

// The limits of a sight.
const (
	HighestSight = 60 * degree // of the reference; tan 60° = 1.7 turns a level's error into azimuth
	NarrowSight  = 15 * degree // a space angle must be this far from 0° and 180°; common practice
)

// Reference is something whose true azimuth is known: the sun or a landmark.
type Reference struct {
	Azimuth   float64 // from true north
	Elevation float64 // where it is seen
	Doubt     float64 // standard uncertainty of its azimuth: time for the sun, positions for a landmark
}

// Reading is how the angle to the reference was read.
type Reading struct {
	Angle      float64 // clockwise from the reference to the boresight; unsigned for a space angle
	AngleDoubt float64
	LevelDoubt float64 // how far the plane of the reading may be off level
}

// SightDoubt is the part of a sight that stays when everything else is exact: the
// sun's half-shadow, laying the boresight on the instrument's line. Common
// practice, 0.1°.
const SightDoubt = 0.1 * degree

// Boresight returns the azimuth of a boresight from an angle read in the horizontal
// plane, clockwise from the reference to the boresight as seen from above, and
// its standard uncertainty:
//
//	azimuth = reference + angle
//	u² = u_angle² + (tan h · u_level)² + u_reference² + (0.1°)²
//
// with h the elevation of the reference. For the sun, u_reference is the rate of
// its azimuth times the doubt of the time. A reference beyond ±60° is refused.
func (r Reference) Boresight(reading Reading) (azimuth, doubt float64, err error) {
	if math.Abs(r.Elevation) > HighestSight {
		return 0, 0, ErrSteep
	}
	return Turn(r.Azimuth + reading.Angle), r.doubt(reading.AngleDoubt, reading.LevelDoubt), nil
}

func (r Reference) doubt(angle, level float64) float64 {
	u := math.Hypot(math.Hypot(angle, math.Tan(r.Elevation)*level), math.Hypot(r.Doubt, SightDoubt))
	return math.Min(u, widestBearingDoubt)
}

// BoresightFromSpace returns the azimuth of a boresight from the angle γ between
// the boresight itself, at elevation e, and the line to the reference, at
// elevation h. In the horizontal plane that is
//
//	D = acos((cos γ − sin h sin e) / (cos h cos e))
//
// to the right of the reference, or to its left. The angle's doubt grows by
// sin γ / (cos h cos e sin D); that of the tilt counts like that of a level. D
// within 15° of 0° or 180° is refused.
// Source: the spherical triangle of zenith, boresight and reference (side cosine
// rule; any textbook of nautical astronomy).
func (r Reference) BoresightFromSpace(reading Reading, boresight float64, right bool) (azimuth, doubt float64, err error) {
	if math.Abs(r.Elevation) > HighestSight {
		return 0, 0, ErrSteep
	}
	sinH, cosH := math.Sincos(r.Elevation)
	sinE, cosE := math.Sincos(boresight)
	c := (math.Cos(reading.Angle) - sinH*sinE) / (cosH * cosE)
	if !(math.Abs(c) <= 1) {
		return 0, 0, ErrNoTriangle
	}
	d := math.Acos(c)
	if d < NarrowSight || d > halfTurn-NarrowSight {
		return 0, 0, ErrTooClose
	}
	grown := reading.AngleDoubt * math.Sin(reading.Angle) / (cosH * cosE * math.Sin(d))
	// ∂D/∂e of the same formula
	byTilt := (sinH/(cosH*cosE*cosE) - math.Cos(reading.Angle)*sinE/(cosH*cosE*cosE)) / math.Sin(d)
	level := math.Hypot(math.Tan(r.Elevation), byTilt) * reading.LevelDoubt
	u := math.Hypot(math.Hypot(grown, level), math.Hypot(r.Doubt, SightDoubt))
	if !right {
		d = -d
	}
	return Turn(r.Azimuth + d), math.Min(u, widestBearingDoubt), nil
}

// SunReference is the sun as a reference for a sight, at a time known to so many
// seconds. It refuses a sun below the horizon or above 60°.
func SunReference(p Position, t Instant, timeDoubt float64, air Air) (Reference, error) {
	s := SunAt(p, t, air)
	switch {
	case s.ApparentElevation <= 0:
		return Reference{}, ErrBelowHorizon
	case s.ApparentElevation > HighestSight:
		return Reference{}, ErrTooHigh
	}
	return Reference{
		Azimuth:   s.Azimuth,
		Elevation: s.ApparentElevation,
		Doubt:     math.Abs(SunRate(p, t)) * timeDoubt,
	}, nil
}

// LandmarkReference is a place of known position as a reference for a sight.
func LandmarkReference(from, landmark End, k float64) (Reference, error) {
	t, err := Aim(from, landmark, k)
	if err != nil {
		return Reference{}, err
	}
	return Reference{Azimuth: t.TrueBearing, Elevation: t.Elevation, Doubt: t.BearingDoubt}, nil
}
