package db

import "encoding/json/jsontext"

// What a crew does to point an antenna and to find out what is wrong. As with readings, angles and levels are calc's
// to judge; here is checked only what the log itself rests on.

// Step is the body of level.stepped: one level of a peak search, read at one angle.
type Step struct {
	Antenna  string  `json:"antenna"`
	Axis     string  `json:"axis"`
	Search   int     `json:"search"`
	AngleDeg float64 `json:"angle_deg"`
	LevelDBm float64 `json:"level_dbm"`
	Typed    *string `json:"typed"`
}

// ControlOff is the body of power_control.confirmed: who says that automatic transmit power control is off at both ends.
type ControlOff struct {
	Name string `json:"name"`
}

// Peak is the body of peak.fitted: the answer of a peak search that was kept.
type Peak struct {
	Antenna string         `json:"antenna"`
	Axis    string         `json:"axis"`
	Search  int            `json:"search"`
	Answer  jsontext.Value `json:"answer"`
}

// RadioFigures is the body of figures.read: what the page of one end's radio showed.
type RadioFigures struct {
	End   string         `json:"end"`
	Page  jsontext.Value `json:"page"`
	Typed jsontext.Value `json:"typed"`
}

// SightTaken is the body of sight.taken: what was read against the sun, a landmark or a compass, and what came of it.
type SightTaken struct {
	Antenna   string         `json:"antenna"`
	Phase     string         `json:"phase"`
	Reference string         `json:"reference"`
	Landmark  *string        `json:"landmark"`
	Asked     jsontext.Value `json:"asked"`
	Answer    jsontext.Value `json:"answer"`
	Typed     *string        `json:"typed"`
}

// LeanRead is the body of lean.read: how far the mast is off plumb in two planes.
type LeanRead struct {
	Asked  jsontext.Value `json:"asked"`
	Answer jsontext.Value `json:"answer"`
	Typed  *string        `json:"typed"`
}

// ObstacleNoted is the body of obstacle.noted: something the crew sees standing in the path.
type ObstacleNoted struct {
	Name *string  `json:"name"`
	AtM  float64  `json:"at_m"`
	TopM float64  `json:"top_m"`
	UM   *float64 `json:"u_m"`
}

var (
	axes       = []string{"azimuth", "tilt"}
	ends       = []string{"near", "far"}
	references = []string{"sun", "landmark", "compass"}
)

// readAimBody reads the bodies above; known is false for a kind that is none of them.
func readAimBody(e Entry) (content any, known bool, err error) {
	tooLong := func(s *string) bool { return s != nil && len(*s) > maxText }
	onMount := func(also string) string {
		if e.Mount == "" {
			return "it belongs to a mount"
		}
		return also
	}
	switch e.Kind {
	case LevelStepped:
		content, err = body(e, new(Step), func(s *Step) string {
			switch {
			case !named(s.Antenna) || !among(s.Axis, axes):
				return "a step has antenna and axis, azimuth or tilt"
			case s.Search < 1:
				return "search counts from 1"
			case tooLong(s.Typed):
				return "typed is too long"
			}
			return onMount("")
		}, "antenna", "axis", "search", "angle_deg", "level_dbm")
	case PowerControlConfirmed:
		content, err = body(e, new(ControlOff), func(c *ControlOff) string {
			if !named(c.Name) {
				return "a confirmation has a name"
			}
			return onMount("")
		}, "name")
	case PeakFitted:
		content, err = body(e, new(Peak), func(p *Peak) string {
			switch {
			case !named(p.Antenna) || !among(p.Axis, axes):
				return "a peak has antenna and axis, azimuth or tilt"
			case p.Search < 1:
				return "search counts from 1"
			case p.Answer.Kind() != '{':
				return "answer is an object"
			}
			return onMount("")
		}, "antenna", "axis", "search", "answer")
	case FiguresRead:
		content, err = body(e, new(RadioFigures), func(f *RadioFigures) string {
			switch {
			case !among(f.End, ends):
				return "end is near or far"
			case f.Page.Kind() != '{':
				return "page is an object"
			}
			return onMount("")
		}, "end", "page")
	case SightWasTaken:
		content, err = body(e, new(SightTaken), func(s *SightTaken) string {
			switch {
			case !named(s.Antenna) || !among(s.Phase, phases) || !among(s.Reference, references):
				return "a sight has antenna, phase, and its reference: sun, landmark or compass"
			case s.Asked.Kind() != '{' || s.Answer.Kind() != '{':
				return "asked and answer are objects"
			case tooLong(s.Typed) || tooLong(s.Landmark):
				return "typed is too long"
			}
			return onMount("")
		}, "antenna", "phase", "reference", "asked", "answer")
	case LeanWasRead:
		content, err = body(e, new(LeanRead), func(l *LeanRead) string {
			switch {
			case l.Asked.Kind() != '{' || l.Answer.Kind() != '{':
				return "asked and answer are objects"
			case tooLong(l.Typed):
				return "typed is too long"
			}
			return onMount("")
		}, "asked", "answer")
	case ObstacleWasNoted:
		content, err = body(e, new(ObstacleNoted), func(o *ObstacleNoted) string {
			if o.Name != nil && len(*o.Name) > maxName {
				return "the name is too long"
			}
			return onMount("")
		}, "at_m", "top_m")
	default:
		return nil, false, nil
	}
	return content, true, err
}
