package peak

import "math"

// Pose is how a phone is held against an antenna, and so which angle its
// accelerometer tells. The axes are those of the W3C Device Orientation and Motion
// specification: x to the right of the upright screen, y to its top, z out of it.
type Pose int

const (
	// FaceUp lies on its back on something level; the angle is how far the screen's
	// normal stands off the vertical. It tells which sign the phone gives gravity.
	FaceUp Pose = iota
	// SkewOnBack lies with its back on the antenna's back plate, a long edge along
	// the antenna's, screen to the person behind it. Positive is clockwise as that
	// person sees it. Turned half round on the plate the reading changes its sign
	// and the offset of the sensor's x axis does not.
	SkewOnBack
	// TiltByEdge stands upright with a long edge on the back plate, the left one (as
	// seen on the screen) for the first face, and the right one, turned about the
	// vertical, for the second. Positive with the left edge is boresight up. Both the
	// offset of the x axis and the sensor's turn in its case keep their sign.
	TiltByEdge
	// TiltOnBack lies as SkewOnBack does; positive is boresight up. A half turn on the
	// plate leaves its reading as it is, bias and all: one face only, no reversal.
	TiltOnBack
)

// Acceleration is one sample of accelerationIncludingGravity, m/s².
type Acceleration struct{ X, Y, Z float64 }

// Length of the acceleration.
func (a Acceleration) Length() float64 { return math.Hypot(math.Hypot(a.X, a.Y), a.Z) }

// upright is the least share of gravity in the plane of the screen of a phone that
// is held upright: the sine of 30°. Below it the phone lies flat and the in-plane
// angle is mostly noise; common practice.
const upright = 0.5

// lying is the least share of gravity across the screen of a phone that lies on its
// back: the cosine of 30°. The sign is told as well at 30° as at 0; common practice.
const lying = 0.866

// Angle turns one acceleration at rest into the angle of a pose, in radians. With
// the way up u = sign·a/|a|,
//
//	FaceUp      acos |u_z|
//	SkewOnBack  atan2(−u_x, |u_y|)   exact at any tilt of the plate
//	TiltByEdge  asin(−u_x)           exact at any skew of the plate
//	TiltOnBack  asin(−u_z)
//
// sign is +1 where the acceleration points up at rest, as the specification has it
// (a phone on its back reads z = +9.8), and −1 where a platform gives it the other
// way. ok is false where the phone is not held so that the pose means anything, or
// the acceleration is nought.
func (p Pose) Angle(a Acceleration, sign float64) (angle float64, ok bool) {
	g := a.Length()
	if g == 0 || math.IsInf(g, 0) || math.IsNaN(g) {
		return 0, false
	}
	x, y, z := sign*a.X/g, sign*a.Y/g, sign*a.Z/g
	if p == FaceUp {
		return math.Acos(math.Min(1, math.Abs(z))), math.Abs(z) >= lying
	}
	if math.Hypot(x, y) < upright {
		return 0, false
	}
	switch p {
	case SkewOnBack:
		return math.Atan2(-x, math.Abs(y)), true
	case TiltByEdge:
		return math.Asin(math.Max(-1, math.Min(1, -x))), true
	}
	return math.Asin(math.Max(-1, math.Min(1, -z))), true
}

// UpSign tells from a phone that lies on its back which sign it gives gravity: +1
// where z is positive, −1 where it is negative. ok is false where the samples do
// not agree or the phone does not lie.
func UpSign(samples []Acceleration) (sign float64, ok bool) {
	votes := 0
	for _, a := range samples {
		if _, lies := FaceUp.Angle(a, 1); !lies {
			continue
		}
		if a.Z > 0 {
			votes++
		} else {
			votes--
		}
	}
	// A hand that lays it down makes a few samples that are not of rest; common practice.
	if n := len(samples); n == 0 || math.Abs(float64(votes)) < 0.8*float64(n) {
		return 0, false
	}
	return math.Copysign(1, float64(votes)), true
}

// PhoneScale is the standard uncertainty of the scale of an angle that a phone gives:
// an offset of 0.1 m/s² along the upright axis is a hundredth of gravity, and a
// reversal by the edges leaves that in. Common practice.
const PhoneScale = 0.01

// WithScale adds the doubt of an instrument's scale to an angle's:
// u² = u₀² + (scale·angle)².
func WithScale(doubt, scale, angle float64) float64 { return math.Hypot(doubt, scale*angle) }
