package sheet

import "crossplumb/calc/codec"

// quantity is which angle a reading is of: its range and what it must state.
type quantity struct {
	rng   codec.Range
	north bool
}

var (
	azimuth = quantity{codec.Range{Min: 0, Max: 360, Suggestion: "degrees clockwise from true north"}, true}
	tilt    = quantity{codec.Range{Min: -90, Max: 90, Suggestion: "degrees of elevation, up positive"}, false}
	skew    = quantity{codec.Range{Min: -180, Max: 180, Suggestion: "degrees clockwise as seen from behind"}, false}
)

func readAngles(v *codec.Value, to *AngleStates, q quantity) *codec.Problem {
	f := codec.Open(v)
	if c := f.Child("planned"); c != nil {
		a, p := readAngle(c, q, true)
		to.Planned = a
		f.Fail(p)
	}
	for _, state := range []struct {
		name string
		to   *[]Angle
	}{{"as_found", &to.AsFound}, {"as_left", &to.AsLeft}} {
		for _, item := range f.OneOrMany(state.name, MaxReadings) {
			a, p := readAngle(item, q, false)
			f.Fail(p)
			*state.to = append(*state.to, a)
		}
	}
	to.Turned = emptied(v)
	return f.Done()
}

// emptied tells whether as_left is an empty list. Null says that nobody spoke of
// what is left; the empty list, as Fold writes it, that a bolt moved and what was
// read before no longer holds.
func emptied(states *codec.Value) bool {
	left := states.Get("as_left")
	return left != nil && left.Kind == codec.List && len(left.Items) == 0
}

func readAngle(v *codec.Value, q quantity, planned bool) (Angle, *codec.Problem) {
	f := codec.Open(v)
	a := Angle{Deg: f.Number("value", q.rng)}
	f.Choice("unit", "deg")
	a.UDeg = readU(f, planned, 180)
	a.How = readHow(f, planned)
	north := f.MaybeText("north")
	if p := f.Done(); p != nil || v.Described() {
		return a, p
	}
	switch {
	case q.north && north == "":
		return a, f.Refuse("north", codec.MissingField, `say which north the bearing is from: "true"; turn a compass bearing into a true one first by adding the declination`)
	case q.north && north != "true":
		return a, f.Refuse("north", codec.OutOfRange, `must be "true"; turn a magnetic bearing into a true one by adding the declination (east positive), a grid bearing by the convergence`)
	case !q.north && north != "":
		return a, f.Refuse("north", codec.Impossible, "only a bearing has a north; take it out")
	}
	return a, nil
}

func readU(f *codec.Fields, planned bool, max float64) float64 {
	if planned {
		return f.NumberOr("u", 0, codec.Range{Min: 0, Max: 0, Suggestion: "a plan has no uncertainty"})
	}
	// A millionth of a degree or millimetre is beyond any instrument; pooling squares and inverts it.
	r := codec.Between(1e-6, max)
	r.Suggestion = "the standard uncertainty of the reading; no reading is exact"
	return f.Number("u", r)
}

func readHow(f *codec.Fields, planned bool) How {
	h := How{Instrument: f.MaybeText("instrument"), At: f.MaybeText("at"), By: f.MaybeText("by")}
	if planned {
		h.Method = f.MaybeText("method")
	} else {
		h.Method = f.Text("method")
	}
	if h.At != "" && !rfc3339(h.At) {
		f.Fail(f.Refuse("at", codec.OutOfRange, "must be a time with its offset, like 2026-11-30T09:12:00+01:00"))
	}
	return h
}

// rfc3339 checks the form of a time; the reading does not compute with it.
func rfc3339(s string) bool {
	const form = "0000-00-00T00:00:00"
	if len(s) < len(form)+1 {
		return false
	}
	for i := range form {
		digit := s[i] >= '0' && s[i] <= '9'
		if form[i] == '0' != digit || form[i] != '0' && s[i] != form[i] {
			return false
		}
	}
	rest := s[len(form):]
	if rest[0] == '.' {
		rest = rest[1:]
		n := 0
		for n < len(rest) && rest[n] >= '0' && rest[n] <= '9' {
			n++
		}
		if n == 0 {
			return false
		}
		rest = rest[n:]
	}
	if rest == "Z" {
		return true
	}
	const offset = "+00:00"
	if len(rest) != len(offset) || rest[0] != '+' && rest[0] != '-' || rest[3] != ':' {
		return false
	}
	for _, i := range []int{1, 2, 4, 5} {
		if rest[i] < '0' || rest[i] > '9' {
			return false
		}
	}
	return true
}

func readPositions(v *codec.Value, to *PositionStates) *codec.Problem {
	f := codec.Open(v)
	if c := f.Child("planned"); c != nil {
		p, problem := readPosition(c, true)
		to.Planned = p
		f.Fail(problem)
	}
	for _, state := range []struct {
		name string
		to   *[]Position
	}{{"as_found", &to.AsFound}, {"as_left", &to.AsLeft}} {
		for _, item := range f.OneOrMany(state.name, MaxReadings) {
			p, problem := readPosition(item, false)
			f.Fail(problem)
			*state.to = append(*state.to, p)
		}
	}
	to.Turned = emptied(v)
	return f.Done()
}

func readPosition(v *codec.Value, planned bool) (Position, *codec.Problem) {
	f := codec.Open(v)
	var p Position
	value := f.Child("value")
	if value != nil {
		g := codec.Open(value)
		r := codec.Between(-100000, 100000)
		axis := func(name string) *float64 {
			if planned && !v.Described() {
				x := g.Number(name, r)
				return &x
			}
			return g.MaybeNumber(name, r)
		}
		p.Right, p.Up, p.Forward = axis("right"), axis("up"), axis("forward")
		f.Fail(g.Done())
	}
	f.Choice("unit", "mm")
	p.UMM = readU(f, planned, 10000)
	p.How = readHow(f, planned)
	if q := f.Done(); q != nil || v.Described() {
		return p, q
	}
	if p.Right == nil && p.Up == nil && p.Forward == nil {
		return p, value.Refuse(codec.MissingField, "at least one axis must be measured")
	}
	return p, nil
}
