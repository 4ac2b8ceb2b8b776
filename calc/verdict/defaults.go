package verdict

import "math"

const degree = math.Pi / 180

// doubtOf is a standard uncertainty for each kind of quantity.
type doubtOf struct{ skewDeg, tiltDeg, azimuthDeg, positionMM float64 }

// hungByEye is the doubt of what nobody measured: the plan, as a crew hangs it by
// eye (common practice).
var hungByEye = doubtOf{skewDeg: 5, tiltDeg: 3, azimuthDeg: 10, positionMM: 50}

// onTheBarMM is the doubt of an axis that was not taped while another axis of the
// same antenna was: it hangs on the same bar (common practice).
const onTheBarMM = 10

// farPlan is the doubt of the far end until its crew's readings are there: hung
// with a level and aimed, but not seen from here (common practice).
var farPlan = doubtOf{skewDeg: 2, tiltDeg: 1, azimuthDeg: 1, positionMM: 10}

func (d doubtOf) of(q quantity) float64 {
	switch q {
	case skew:
		return d.skewDeg * degree
	case tilt:
		return d.tiltDeg * degree
	case azimuth:
		return d.azimuthDeg * degree
	}
	return d.positionMM / 1000
}

// biasShare is how much of a reading's variance is the bias of its instrument,
// which repeats by the same instrument do not average away. A compass errs by the
// steel around it, the same each time; a level or tape about half by its zero and
// half by the hand that holds it (common practice).
func biasShare(method string) float64 {
	switch {
	case method == "phone":
		return 0.75
	case byCompass(method):
		return 0.9
	}
	return 0.5
}

// plannedDoubt is the standard uncertainty that a method is good for when the
// reading is yet to be made, in degrees or millimetres (common practice): a level
// on a flat, a phone on it, a compass beside steel, the shadow of a plumb line, a
// landmark from a map, a tape. A plan that names no method means level, sun and tape.
func plannedDoubt(method string, q quantity) float64 {
	if !q.angular() {
		return 3.0 / 1000
	}
	deg := 0.3
	switch method {
	case "phone":
		deg = 0.5
	case "compass":
		deg = 3
	case "sun":
		deg = 1
	case "landmark":
		deg = 0.5
	case "level":
	default:
		if q == azimuth {
			deg = 1
		}
	}
	return deg * degree
}
