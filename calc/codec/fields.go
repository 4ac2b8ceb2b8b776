package codec

import (
	"math"
	"strconv"
)

// Range is what numbers a field takes. Its text is part of the message.
type Range struct {
	Min, Max   float64
	OpenMin    bool // Min itself is refused
	OpenMax    bool
	Whole      bool   // whole numbers only
	Suggestion string // what to change, appended to the message
}

// Any takes every finite number.
var Any = Range{Min: math.Inf(-1), Max: math.Inf(1)}

// Between takes lo ≤ x ≤ hi.
func Between(lo, hi float64) Range { return Range{Min: lo, Max: hi} }

// AtLeast takes x ≥ lo.
func AtLeast(lo float64) Range { return Range{Min: lo, Max: math.Inf(1)} }

// Above takes lo < x ≤ hi.
func Above(lo, hi float64) Range { return Range{Min: lo, Max: hi, OpenMin: true} }

// Whole takes whole numbers lo … hi.
func Whole(lo, hi int) Range { return Range{Min: float64(lo), Max: float64(hi), Whole: true} }

func (r Range) holds(x float64) bool {
	if x < r.Min || x > r.Max || r.OpenMin && x == r.Min || r.OpenMax && x == r.Max {
		return false
	}
	return !r.Whole || x == math.Trunc(x)
}

func (r Range) message() string {
	num := func(x float64) string { return string(AppendNumber(nil, x)) }
	kind := "must be "
	if r.Whole {
		kind = "must be a whole number "
	}
	var s string
	switch lo, hi := !math.IsInf(r.Min, 0), !math.IsInf(r.Max, 0); {
	case lo && hi && r.OpenMin:
		s = kind + "above " + num(r.Min) + " and at most " + num(r.Max)
	case lo && hi:
		s = kind + "from " + num(r.Min) + " to " + num(r.Max)
	case lo && r.OpenMin:
		s = kind + "above " + num(r.Min)
	case lo:
		s = kind + "at least " + num(r.Min)
	case hi:
		s = kind + "at most " + num(r.Max)
	default:
		s = kind + "finite"
	}
	if r.Suggestion != "" {
		s += "; " + r.Suggestion
	}
	return s
}

// Fields takes the members of one object apart. The first problem sticks, so a
// decoder reads straight through and asks Done at the end; Done also refuses
// every name that nobody asked for.
type Fields struct {
	v       *Value
	used    []bool
	problem *Problem
}

// Open begins to read an object.
func Open(v *Value) *Fields {
	f := &Fields{v: v}
	switch {
	case v.probe != nil:
		v.probe.Kind = Object
	case v.Kind != Object:
		f.problem = v.Refuse(WrongType, "must be an object, not "+v.Kind.String())
	default:
		f.used = make([]bool, len(v.Members))
	}
	return f
}

// Done returns the first problem met, or the first field that is not known.
func (f *Fields) Done() *Problem {
	if f.problem != nil {
		return f.problem
	}
	for i, used := range f.used {
		if !used {
			return f.v.Members[i].Value.Refuse(UnknownField, "this field is not known here; take it out or correct its name")
		}
	}
	return nil
}

// Problem is the first problem so far, without the check for unknown fields.
func (f *Fields) Problem() *Problem { return f.problem }

// Fail makes p the problem of these fields unless one is there already. A nil p
// does nothing.
func (f *Fields) Fail(p *Problem) {
	if f.problem == nil && p != nil {
		f.problem = p
	}
}

// Refuse makes a problem about the named field.
func (f *Fields) Refuse(name, code, message string) *Problem {
	return &Problem{code, join(f.v.Path(), name), message}
}

// Path is the path of the named field.
func (f *Fields) Path(name string) string { return join(f.v.Path(), name) }

// take finds a member; nil where it is absent or null.
func (f *Fields) take(name string, required bool) *Value {
	if f.v.probe != nil {
		return &Value{probe: f.v.probe.field(name, required)}
	}
	if f.problem != nil && f.used == nil {
		return nil
	}
	for i := range f.v.Members {
		if f.v.Members[i].Name == name {
			f.used[i] = true
			if f.v.Members[i].Value.Kind != Null {
				return f.v.Members[i].Value
			}
			if required {
				f.Fail(f.v.Members[i].Value.Refuse(MissingField, "must not be null"))
			}
			return nil
		}
	}
	if required {
		f.Fail(f.Refuse(name, MissingField, "this field is missing"))
	}
	return nil
}

// Child returns a member that must be there, for a decoder of its own; nil
// (with the problem noted) where it is not.
func (f *Fields) Child(name string) *Value { return f.take(name, true) }

// Maybe returns a member that may be absent or null, then nil.
func (f *Fields) Maybe(name string) *Value { return f.take(name, false) }

// Number reads a number that must be there.
func (f *Fields) Number(name string, r Range) float64 {
	x, p := f.take(name, true).AsNumber(r)
	f.Fail(p)
	return x
}

// MaybeNumber reads a number that may be absent or null.
func (f *Fields) MaybeNumber(name string, r Range) *float64 {
	v := f.take(name, false)
	if v == nil {
		return nil
	}
	x, p := v.AsNumber(r)
	f.Fail(p)
	return &x
}

// NumberOr reads a number, or takes the default where it is absent or null.
func (f *Fields) NumberOr(name string, otherwise float64, r Range) float64 {
	if x := f.MaybeNumber(name, r); x != nil && (f.v.probe == nil) {
		return *x
	}
	return otherwise
}

// Text reads a text that must be there.
func (f *Fields) Text(name string) string {
	s, p := f.take(name, true).AsText()
	f.Fail(p)
	return s
}

// MaybeText reads a text; absent, null and empty are the same.
func (f *Fields) MaybeText(name string) string {
	v := f.take(name, false)
	if v == nil {
		return ""
	}
	s, p := v.AsText()
	f.Fail(p)
	return s
}

// Choice reads a text that must be one of the options.
func (f *Fields) Choice(name string, options ...string) string {
	s, p := f.take(name, true).AsChoice(options...)
	f.Fail(p)
	return s
}

// MaybeChoice reads one of the options, or empty where it is absent or null.
func (f *Fields) MaybeChoice(name string, options ...string) string {
	v := f.take(name, false)
	if v == nil {
		return ""
	}
	s, p := v.AsChoice(options...)
	f.Fail(p)
	return s
}

// Truth reads true or false, which must be there.
func (f *Fields) Truth(name string) bool {
	b, p := f.take(name, true).AsTruth()
	f.Fail(p)
	return b
}

// TruthOr reads true or false, or takes the default.
func (f *Fields) TruthOr(name string, otherwise bool) bool {
	v := f.take(name, false)
	if v == nil {
		return otherwise
	}
	b, p := v.AsTruth()
	f.Fail(p)
	return b
}

// Items reads a list of at least min and at most max items.
func (f *Fields) Items(name string, min, max int) []*Value {
	items, p := f.take(name, true).AsList(min, max)
	f.Fail(p)
	return items
}

// MaybeItems reads a list that may be absent or null, then nil.
func (f *Fields) MaybeItems(name string, min, max int) []*Value {
	v := f.take(name, false)
	if v == nil {
		return nil
	}
	items, p := v.AsList(min, max)
	f.Fail(p)
	return items
}

// Numbers reads a list of numbers.
func (f *Fields) Numbers(name string, min, max int, r Range) []float64 {
	v := f.take(name, true)
	xs, p := v.AsNumbers(min, max, r)
	f.Fail(p)
	return xs
}

// MaybeNumbers reads a list of numbers that may be absent or null, then nil.
func (f *Fields) MaybeNumbers(name string, min, max int, r Range) []float64 {
	v := f.take(name, false)
	if v == nil {
		return nil
	}
	xs, p := v.AsNumbers(min, max, r)
	f.Fail(p)
	return xs
}

// OneOrMany reads a list, or a single object as a list of one.
func (f *Fields) OneOrMany(name string, max int) []*Value {
	v := f.take(name, false)
	if v == nil {
		return nil
	}
	if v.probe != nil {
		v.probe.OneOrMany = true
	} else if v.Kind == Object {
		return []*Value{v}
	}
	items, p := v.AsList(0, max)
	f.Fail(p)
	return items
}

// AsNumber reads a finite number within the range. A nil value gives zero and
// no problem: whoever looked for it has noted that it is missing.
func (v *Value) AsNumber(r Range) (float64, *Problem) {
	switch {
	case v == nil:
		return 0, nil
	case v.probe != nil:
		v.probe.Kind, v.probe.Range = Number, r
		return r.typical(), nil
	case v.Kind == Text:
		return 0, v.Refuse(WrongType, "must be a number without quotes, with a point as decimal sign")
	case v.Kind != Number:
		return 0, v.Refuse(WrongType, "must be a number, not "+v.Kind.String())
	case !r.holds(v.Num):
		return 0, v.Refuse(OutOfRange, r.message())
	}
	return v.Num, nil
}

// MaxText is the longest text in bytes: a site's remark fits, a book does not.
const MaxText = 2000

// AsText reads a text of at most MaxText bytes.
func (v *Value) AsText() (string, *Problem) {
	switch {
	case v == nil:
		return "", nil
	case v.probe != nil:
		v.probe.Kind = Text
		return "", nil
	case v.Kind != Text:
		return "", v.Refuse(WrongType, "must be text, not "+v.Kind.String())
	case len(v.Str) > MaxText:
		return "", v.Refuse(TooLarge, "the text is longer than 2000 bytes; shorten it")
	}
	return v.Str, nil
}

// AsChoice reads one of the options.
func (v *Value) AsChoice(options ...string) (string, *Problem) {
	if v != nil && v.probe != nil {
		v.probe.Kind, v.probe.Options = Text, options
		return options[0], nil
	}
	s, p := v.AsText()
	if v == nil || p != nil {
		return "", p
	}
	all := ""
	for i, o := range options {
		if o == s {
			return s, nil
		}
		switch {
		case i == 0:
		case i == len(options)-1:
			all += " or "
		default:
			all += ", "
		}
		all += `"` + o + `"`
	}
	return "", v.Refuse(OutOfRange, "must be "+all)
}

// AsTruth reads true or false.
func (v *Value) AsTruth() (bool, *Problem) {
	switch {
	case v == nil:
		return false, nil
	case v.probe != nil:
		v.probe.Kind = Bool
		return false, nil
	case v.Kind != Bool:
		return false, v.Refuse(WrongType, "must be true or false, not "+v.Kind.String())
	}
	return v.Truth, nil
}

// AsList reads a list of at least min and at most max items.
func (v *Value) AsList(min, max int) ([]*Value, *Problem) {
	switch {
	case v == nil:
		return nil, nil
	case v.probe != nil:
		v.probe.Kind, v.probe.MinItems, v.probe.MaxItems = List, min, max
		if v.probe.Item == nil {
			v.probe.Item = &Shape{}
		}
		items := []*Value{{probe: v.probe.Item}}
		for len(items) < min { // a decoder may index what it asked for
			items = append(items, items[0])
		}
		return items, nil
	case v.Kind != List:
		return nil, v.Refuse(WrongType, "must be a list, not "+v.Kind.String())
	case len(v.Items) > max:
		return nil, v.Refuse(TooLarge, "must hold at most "+strconv.Itoa(max)+" items, not "+strconv.Itoa(len(v.Items)))
	case len(v.Items) < min:
		return nil, v.Refuse(OutOfRange, "must hold at least "+strconv.Itoa(min)+" items, not "+strconv.Itoa(len(v.Items)))
	}
	return v.Items, nil
}

// AsNumbers reads a list of numbers.
func (v *Value) AsNumbers(min, max int, r Range) ([]float64, *Problem) {
	items, p := v.AsList(min, max)
	if p != nil || v == nil {
		return nil, p
	}
	xs := make([]float64, len(items))
	for i, item := range items {
		if xs[i], p = item.AsNumber(r); p != nil {
			return nil, p
		}
	}
	return xs, nil
}
