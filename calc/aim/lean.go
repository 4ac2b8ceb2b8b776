package aim

import "math"

// Lean returns what a mast that leans does to a mount that was set by the mast's
// own scale or on the ground before it stood:
//
//	tilt = −lean · cos(toward − azimuth)
//	skew = +lean · sin(toward − azimuth)
//
// A mast that leans the way the antenna looks tips it down; one that leans to its
// right turns it clockwise. The forms are those of a small lean: at 10° they are
// 0.1° off. A level held on the antenna has the lean in its reading already.
func Lean(lean, toward, azimuth float64) (tilt, skew float64) {
	s, c := math.Sincos(toward - azimuth)
	return -lean * c, lean * s
}

// LeanFromAxes returns the lean of a mast and the way it leans from readings in
// two vertical planes: the parts of the lean toward two bearings. The lean is the
// horizontal vector with these projections. Planes that are nearly one tell
// nothing of the other direction: within 20° of parallel ok is false.
func LeanFromAxes(first, firstToward, second, secondToward float64) (lean, toward float64, ok bool) {
	sinA, cosA := math.Sincos(firstToward)
	sinB, cosB := math.Sincos(secondToward)
	det := sinA*cosB - cosA*sinB
	if math.Abs(det) < math.Sin(20*degree) {
		return 0, 0, false
	}
	east := (first*cosB - second*cosA) / det
	north := (second*sinA - first*sinB) / det
	return math.Hypot(east, north), Turn(math.Atan2(east, north)), true
}

// EdgeLevel is what a level reads that lies across the edge of a body of this
// skew and tilt: the level feels the slope of that edge against the horizon,
//
//	asin(sin skew · cos tilt)
//
// because tilting the body turns the edge's slope out of the vertical.
func EdgeLevel(skew, tilt float64) float64 { return math.Asin(math.Sin(skew) * math.Cos(tilt)) }

// SkewFromEdge is the inverse of EdgeLevel: the skew of a body of this tilt across
// whose edge a level reads so much. No skew reads more than 90° − |tilt|; then ok
// is false.
func SkewFromEdge(level, tilt float64) (skew float64, ok bool) {
	s := math.Sin(level) / math.Cos(tilt)
	if !(math.Abs(s) <= 1) {
		return 0, false
	}
	return math.Asin(s), true
}

// Footprint is the ground that a beam covers, as distances from the foot of the
// mast over flat ground, metres. A distance that does not exist is +Inf: that edge
// of the beam is at or above the horizon.
type Footprint struct{ Inner, Centre, Outer float64 }

// Sector returns the footprint of a beam of vertical half-power width θ whose
// boresight has this tilt (elevation, up +), from an antenna at height h > 0 above
// flat ground:
//
//	inner = h / tan(δ + θ/2),  centre = h / tan δ,  outer = h / tan(δ − θ/2),  δ = −tilt
//
// An edge that looks straight down or backwards has its distance 0. The curve of
// the earth moves an edge at 10 km by h less 6 m.
func Sector(height, tilt, beamwidth float64) Footprint {
	edge := func(down float64) float64 {
		switch {
		case down <= 0:
			return math.Inf(1)
		case down >= rightTurn:
			return 0
		}
		return height / math.Tan(down)
	}
	return Footprint{edge(-tilt + beamwidth/2), edge(-tilt), edge(-tilt - beamwidth/2)}
}
