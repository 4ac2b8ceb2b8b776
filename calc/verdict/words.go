package verdict

import (
	"math"
	"strconv"

	"crossplumb/calc/sheet"
)

func (q quantity) unit() string {
	if q.angular() {
		return "deg"
	}
	return "mm"
}

// border turns a number into its border unit, free of the dust of the conversion.
func (q quantity) border(si float64) float64 {
	if q.angular() {
		return math.Round(si/degree*1e6) / 1e6
	}
	return math.Round(si*1000*1e6) / 1e6
}

func (q quantity) axis() string {
	switch q {
	case right:
		return "right"
	case up:
		return "up"
	case forward:
		return "forward"
	}
	return ""
}

// direction is the word for the sign of a change, as seen from behind. What has no
// boresight leans to a side and to the front instead of turning and tilting.
func (q quantity) direction(by float64, leans bool) string {
	pair := [quantities][2]string{
		skew: {"clockwise", "anticlockwise"}, tilt: {"up", "down"}, azimuth: {"right", "left"},
		right: {"right", "left"}, up: {"up", "down"}, forward: {"forward", "back"},
	}[q]
	if leans && q == skew {
		pair = [2]string{"right", "left"}
	} else if leans && q == tilt {
		pair = [2]string{"forward", "back"}
	}
	if by < 0 {
		return pair[1]
	}
	return pair[0]
}

func remedyText(r Remedy, q quantity, leans bool) string {
	amount := number(math.Abs(r.Change))
	switch {
	case leans && q == skew:
		return "Lean " + r.Antenna + " " + amount + "° to the " + r.Direction
	case leans && q == tilt:
		return "Lean " + r.Antenna + " " + amount + "° " + r.Direction
	}
	switch q {
	case skew:
		return "Turn " + r.Antenna + " " + amount + "° " + r.Direction
	case tilt:
		return "Tilt " + r.Antenna + " " + amount + "° " + r.Direction
	case azimuth:
		return "Swing " + r.Antenna + " " + amount + "° to the " + r.Direction
	}
	return "Move " + r.Antenna + " " + amount + " mm " + r.Direction
}

// number with at most one decimal, none where it is whole.
func number(x float64) string {
	return strconv.FormatFloat(math.Round(x*10)/10, 'f', -1, 64)
}

// figures with two significant digits, for doubts.
func figures(x float64) string {
	if x >= 10 {
		return strconv.FormatFloat(math.Round(x), 'f', -1, 64)
	}
	return strconv.FormatFloat(x, 'g', 2, 64)
}

// nameOf is a limit in words, with its unit.
func nameOf(limit string) string {
	switch limit {
	case sheet.CrossTalk:
		return "cross-talk"
	case sheet.EnvelopeCorr:
		return "envelope correlation"
	case sheet.PointingLoss:
		return "pointing loss"
	case sheet.EffectiveStreams:
		return "effective streams"
	case sheet.RateShare:
		return "share of the planned rate"
	case sheet.ChainImbalance:
		return "imbalance of the chains"
	case sheet.PairAngleError:
		return "angle error of the pair"
	case sheet.SkewDeviation:
		return "skew off plan"
	case sheet.TiltDeviation:
		return "tilt off plan"
	case sheet.AzimuthDeviation:
		return "azimuth off plan"
	case sheet.PositionDeviation:
		return "position off plan"
	}
	return limit
}

func withUnit(x *float64, unit string) string {
	if x == nil {
		return "none"
	}
	s := strconv.FormatFloat(*x, 'f', 1, 64)
	switch unit {
	case "dB":
		return s + " dB"
	case "deg":
		return s + "°"
	case "mm":
		return strconv.FormatFloat(math.Round(*x), 'f', -1, 64) + " mm"
	}
	return strconv.FormatFloat(*x, 'f', 2, 64)
}

// reason says in one sentence why the word is what it is.
func (j *judge) reason(v *Verdict, b *belief, o *outcome) Reason {
	k := j.critical(o)
	r := Reason{}
	sentence := func(l *LimitOutcome) string {
		want := "at least "
		if l.Sense == "at most" {
			want = "at most "
		}
		return upperFirst(nameOf(l.Name)) + " is " + withUnit(l.Value, l.Unit) + ", the limit is " + want + withUnit(&l.Limit, l.Unit)
	}
	switch {
	case v.Word == Go:
		r.Code, r.Text = AllMet, "Every limit holds with the doubt of the readings."
		if k >= 0 {
			r.Limit = j.limits[k].Name
		}
	case v.Word == NoGo:
		r.Code, r.Limit = LimitMissed, j.limits[k].Name
		r.Text = sentence(&v.Limits[k]) + "."
		if len(v.Remedies) > 0 {
			r.Antenna, r.Quantity = v.Remedies[0].Antenna, v.Remedies[0].Quantity
		}
	case len(v.Missing) > 0:
		r.Code, r.Antenna, r.Quantity = MissingReading, v.Missing[0].Antenna, v.Missing[0].Quantity
		r.Text = "Measure the " + r.Quantity + " of " + r.Antenna
		if v.Missing[0].ByCompass {
			r.Text = "The azimuth of " + r.Antenna + " rests on a compass: sight the sun or a landmark"
		}
		if n := len(v.Missing); n > 1 {
			r.Text += " (" + itoa(n) + " readings are missing)"
		}
		r.Text += "."
	case wordOf(v.Probability) == Go && len(v.NotJudged) > 0:
		r.Code, r.Limit = Doubt, v.NotJudged[0].Limit
		r.Text = upperFirst(nameOf(r.Limit)) + " could not be judged: " + v.NotJudged[0].Why + "."
	default:
		r.Code, r.Limit = Doubt, j.limits[k].Name
		r.Text = sentence(&v.Limits[k]) + ": the doubt is too wide to say."
		if d := v.Deciding; d != nil {
			r.Antenna, r.Quantity = d.Antenna, d.Quantity
			unit := "°"
			if d.Unit == "mm" {
				unit = " mm"
			}
			r.Text = "The " + d.Quantity + " of " + d.Antenna + " decides: ±" + figures(d.U) + unit + " is too wide"
			if d.UNeeded != nil {
				r.Text += ", ±" + figures(*d.UNeeded) + unit + " will do"
			}
			r.Text += "."
		} else if j.farDecides(b) {
			r.Text = sentence(&v.Limits[k]) + ": the far end decides, whose readings are not here or not close enough."
		}
	}
	return r
}

func upperFirst(s string) string {
	if s == "" || s[0] < 'a' || s[0] > 'z' {
		return s
	}
	return string(s[0]-32) + s[1:]
}

// around is the surroundings in words.
func around(s *sheet.Sheet) string {
	sight := "no sight of the far end"
	if s.Surroundings.Sight {
		sight = "in sight of the far end"
	}
	switch {
	case s.Surroundings.Class != nil:
		c := s.Surroundings.Class
		return c.Standard + " " + c.Edition + " " + c.Scenario + ", median, " + sight
	case s.Surroundings.Spreads != nil:
		p := s.Surroundings.Spreads
		return "spread of arrivals " + number(p.Near.AzimuthDeg) + "° here and " + number(p.Far.AzimuthDeg) + "° at the far end, " + sight
	}
	n := len(s.Surroundings.Reflectors)
	if n == 1 {
		return "1 surveyed reflector, " + sight
	}
	return itoa(n) + " surveyed reflectors, " + sight
}
