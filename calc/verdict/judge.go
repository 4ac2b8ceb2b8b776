package verdict

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/doubt"
	"crossplumb/calc/sheet"
)

// Verdict is the whole answer about one mount.
type Verdict struct {
	Word        string
	Probability float64
	Judged      sheet.State
	Reason      Reason
	Deciding    *Deciding
	Limits      []LimitOutcome
	Remedies    []Remedy
	Missing     []Missing
	Planned     []PlannedValue
	AsFound     *StateOutcome
	AsLeft      *StateOutcome
	Geometry    Geometry
	FarFromPlan bool
	Around      string // the surroundings in words
	Sight       bool
	NotJudged   []NotJudged
}

// The codes of a reason.
const (
	LimitMissed        = "limit_missed"
	AllMet             = "all_met"
	Doubt              = "doubt"
	MissingReading     = "missing_reading"
	SurroundingsDecide = "surroundings_decide"
)

// Reason is why the word is what it is.
type Reason struct{ Code, Limit, Antenna, Quantity, Text string }

// LimitOutcome is a limit beside what the mount gives. The numbers are nil where
// there is none: not applicable, or without end (no cross-talk at all).
type LimitOutcome struct {
	Name, Sense, Unit, WhyNot           string
	Limit                               float64
	Value, U, Low, High, Margin, Chance *float64
	Applicable                          bool
}

// PlannedValue is what the plan gives for one limit, nil without end or none.
type PlannedValue struct {
	Name  string
	Value *float64
}

// StateOutcome is the verdict on one state.
type StateOutcome struct {
	Word        string
	Probability float64
	Limits      []LimitOutcome
}

// NotJudged is a limit that applies but could not be computed.
type NotJudged struct{ Limit, Why string }

// judge holds what one verdict computes with.
type judge struct {
	*model
	limits []limit
	flow   *flow // nil where no limit needs the stream computation
	draws  *doubt.Draws
	dims   int // variables that the widest state needs
}

// Judge computes the verdict of a sheet. The state judged is the latest one that
// has any reading of the near end, or as left where a bolt moved after what was
// found was read. A problem says that the sheet asks for nothing
// that applies, or that its readings can not be true together.
func Judge(s *sheet.Sheet) (*Verdict, *codec.Problem) {
	j, p := newJudge(s)
	if p != nil {
		return nil, p
	}
	var beliefs [3]*belief
	for st := sheet.Planned; st <= sheet.AsLeft; st++ {
		b, p := j.believe(st)
		if p != nil {
			return nil, p
		}
		sp := spreadOf(b)
		if j.dims = max(j.dims, sp.dims); j.dims > doubt.MaxDims {
			return nil, &codec.Problem{Code: codec.TooLarge, Field: "near.antennas", Message: "the readings name more instruments than can be told apart; name fewer"}
		}
		beliefs[st] = b
	}
	v := &Verdict{Judged: sheet.Planned, Sight: s.Surroundings.Sight, Around: around(s)}
	for st := sheet.AsLeft; st > sheet.Planned; st-- {
		if beliefs[st].stands {
			v.Judged = st
			break
		}
	}
	b := beliefs[v.Judged]
	o := j.run(b)
	v.Probability = o.joint
	v.Limits = j.report(o)
	v.Missing = j.model.missing(b)
	v.FarFromPlan = j.farFromPlan(b)
	v.Planned = j.planned()
	v.Geometry = j.geometry(beliefs, v.Judged)
	for k := range j.limits {
		if j.limits[k].whoNot != "" {
			v.NotJudged = append(v.NotJudged, NotJudged{j.limits[k].Name, j.limits[k].whoNot})
		}
	}
	v.Word = j.word(b, o.joint)
	if v.Word == MeasureAgain && wordOf(o.joint) == Go {
		for _, i := range j.restingOnCompass(b) {
			v.Missing = append(v.Missing, Missing{j.bodies[i].antenna.ID, azimuth.String(), true})
		}
	}
	if beliefs[sheet.AsFound].stands {
		v.AsFound = j.stateOutcome(beliefs[sheet.AsFound], v, o)
	}
	if beliefs[sheet.AsLeft].stands {
		v.AsLeft = j.stateOutcome(beliefs[sheet.AsLeft], v, o)
	}
	if v.Word != Go && v.Judged != sheet.Planned {
		v.Remedies = j.remedies(b, o)
	}
	if v.Word == MeasureAgain && len(v.Missing) == 0 {
		v.Deciding = j.deciding(b)
	}
	v.Reason = j.reason(v, b, o)
	if v.Reason.Code != MissingReading && len(v.NotJudged) == 0 {
		if other, which := j.otherCase(b, wordOf(o.joint)); other != "" {
			// Where a better reading would bring the word, it comes first: whoever is on the mast can take it, and
			// the median case asks for it whatever the other cases say.
			if v.Deciding != nil && v.Deciding.UNeeded != nil {
				v.Reason.Text += " With " + which + " spreads it would be " + other + "."
				return v, nil
			}
			median := v.Reason.Text
			if v.Reason.Code == Doubt {
				median = "In the median case: " + median
			}
			v.Reason.Code = SurroundingsDecide
			v.Reason.Text = "The surroundings decide, not a reading: " + v.Word + " in their median case, " + other + " with " + which + " spreads. " + median
		}
	}
	return v, nil
}

// otherCase judges the narrow and the wide case of the surroundings' class, and
// returns the first word that differs from that of the median, with its case.
func (j *judge) otherCase(b *belief, word string) (other, which string) {
	if j.flow == nil {
		return "", ""
	}
	for i, shift := range j.flow.cases(b.values()) {
		moved := *b
		surface := *b.surface
		surface.rough, surface.shift = false, shift
		moved.surface = &surface
		if w := wordOf(j.runEvery(&moved, 2).joint); w != word {
			return w, [2]string{"narrow (10 %)", "wide (90 %)"}[i]
		}
	}
	return "", ""
}

// newJudge makes the sheet and its limits ready.
func newJudge(s *sheet.Sheet) (*judge, *codec.Problem) {
	if len(s.Limits) == 0 {
		return nil, &codec.Problem{Code: codec.MissingField, Field: "limits", Message: "a verdict needs at least one limit to judge by"}
	}
	j := &judge{model: newModel(s)}
	j.limits = j.model.limits()
	for k := range j.limits {
		l := &j.limits[k]
		if !l.flows {
			continue
		}
		if j.flow == nil {
			measuredAt := j.plan
			if b, p := j.believe(sheet.AsFound); p != nil {
				return nil, p
			} else if b.readings > 0 {
				measuredAt = b.values()
			}
			var why string
			if j.flow, why = j.newFlow(measuredAt); j.flow == nil {
				j.unjudged(why)
				break
			}
		}
		if l.whyNot = j.flow.whyNot(l.metric); l.whyNot != "" {
			l.flows = false
			continue
		}
		j.flow.want(l.metric)
	}
	if j.flow != nil && j.flow.size == 0 {
		j.flow = nil // asked for, but nothing of it applies
	}
	applies := false
	for k := range j.limits {
		applies = applies || j.limits[k].whyNot == ""
	}
	if !applies {
		return nil, &codec.Problem{Code: codec.Impossible, Field: "limits", Message: "none of the limits applies to this mount (" + j.limits[0].whyNot + "); set one that does"}
	}
	return j, nil
}

// unjudged marks every limit that needs the stream computation.
func (j *judge) unjudged(why string) {
	for k := range j.limits {
		if j.limits[k].flows {
			j.limits[k].flows, j.limits[k].whoNot = false, why
		}
	}
}

// word is the word for the probability of a belief. With a reading or a limit
// missing it is never go, nor where only a compass makes it so; and with a reading missing it is no-go only where the
// mount would fail even if all that nobody measured hung exactly as planned.
func (j *judge) word(b *belief, p float64) string {
	w := wordOf(p)
	if w == Go && (b.incomplete || j.notJudged() || j.restingOnCompass(b) != nil) {
		return MeasureAgain
	}
	if w == NoGo && b.incomplete && wordOf(j.runEvery(j.atBest(b), 2).joint) != NoGo {
		return MeasureAgain
	}
	return w
}

// atBest is a belief in which everything of the near end that was not measured
// hangs exactly as planned.
func (j *judge) atBest(b *belief) *belief {
	c := *b
	c.est = append([]doubt.Estimate(nil), b.est...)
	c.surface, c.incomplete = nil, false
	for at := range j.at(j.near, 0) {
		if !b.measured[at] {
			c.est[at] = doubt.Estimate{Value: j.plan[at]}
		}
	}
	return &c
}

func (j *judge) stateOutcome(b *belief, v *Verdict, judged *outcome) *StateOutcome {
	o := judged
	if b.state != v.Judged {
		o = j.run(b)
	}
	return &StateOutcome{Word: j.word(b, o.joint), Probability: o.joint, Limits: j.report(o)}
}

// finite is nil for a number without end.
func finite(x float64) *float64 {
	if math.IsInf(x, 0) || math.IsNaN(x) {
		return nil
	}
	return &x
}

// report sets every limit beside what the draws show.
func (j *judge) report(o *outcome) []LimitOutcome {
	out := make([]LimitOutcome, len(j.limits))
	for k := range j.limits {
		l := &j.limits[k]
		r := LimitOutcome{Name: l.Name, Sense: "at most", Unit: l.kind.Unit, Limit: l.Limit.Value, Applicable: l.whyNot == "", WhyNot: l.whyNot}
		if l.AtLeast {
			r.Sense = "at least"
		}
		if o.values[k] != nil {
			s := &o.summary[k]
			r.Value, r.U, r.Low, r.High = finite(s.Median), finite(s.U), finite(s.Low), finite(s.High)
			r.Margin, r.Chance = finite(l.margin(s.Median)), finite(o.met[k])
		} else if l.whyNot == "" {
			r.WhyNot = l.whoNot
		}
		out[k] = r
	}
	return out
}

// planned are the values of the plan itself, without doubt.
func (j *judge) planned() []PlannedValue {
	out := make([]PlannedValue, 0, len(j.limits))
	for k := range j.limits {
		l := &j.limits[k]
		switch {
		case l.value != nil:
			out = append(out, PlannedValue{l.Name, finite(l.value(j.plan))})
		case l.flows:
			v := j.flow.metric(l.metric, j.flow.of(&j.flow.planned, j.flow.planned.BitsPerSHz))
			out = append(out, PlannedValue{l.Name, finite(v)})
		}
	}
	return out
}

// critical is the limit that fails most often, −1 without any.
func (j *judge) critical(o *outcome) int {
	worst := -1
	for k := range j.limits {
		if j.limits[k].judged() && (worst < 0 || o.met[k] < o.met[worst]) {
			worst = k
		}
	}
	return worst
}
