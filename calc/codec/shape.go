package codec

import "math"

// Shape is what a decoder accepts, found by letting the decoder itself read a
// probe: the published schema can not drift from the code that refuses.
type Shape struct {
	Kind      Kind
	Names     []string // of an object's fields, in the order the decoder asks
	Fields    map[string]*Shape
	Required  map[string]bool
	Item      *Shape // of a list
	MinItems  int
	MaxItems  int
	OneOrMany bool // a single item may stand for a list of one
	Range     Range
	Options   []string
	Free      bool // anything: another decoder reads it later
}

// Describe runs a decoder on a probe and returns the shape it asked for. The
// decoder sees plausible dummies and any problem it reports is of no account.
func Describe(decode func(*Value)) *Shape {
	s := &Shape{}
	decode(&Value{probe: s})
	return s
}

// Described tells whether v is a probe: a decoder may then walk through every
// branch instead of the one that the document chose.
func (v *Value) Described() bool { return v != nil && v.probe != nil }

// Free marks a value that is kept as it is and read by another decoder.
func (v *Value) Free() *Value {
	if v != nil && v.probe != nil {
		v.probe.Free = true
	}
	return v
}

func (s *Shape) field(name string, required bool) *Shape {
	if s.Fields == nil {
		s.Fields, s.Required = map[string]*Shape{}, map[string]bool{}
	}
	if s.Fields[name] == nil {
		s.Fields[name] = &Shape{}
		s.Names = append(s.Names, name)
	}
	s.Required[name] = s.Required[name] || required
	return s.Fields[name]
}

// typical is a number inside the range.
func (r Range) typical() float64 {
	lo, hi := r.Min, r.Max
	switch {
	case math.IsInf(lo, 0) && math.IsInf(hi, 0):
		return 1
	case math.IsInf(hi, 0):
		return lo + 1
	case math.IsInf(lo, 0):
		return hi - 1
	case r.Whole:
		return lo
	}
	return (lo + hi) / 2
}
