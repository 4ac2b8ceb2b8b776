// Package codec reads and writes the JSON of the door to the physics.
//
// It is small on purpose: package calc/wire runs on the phone as WebAssembly,
// where encoding/json and fmt weigh more than all the physics. And it is strict
// on purpose: what a person typed at a mast is either understood completely or
// refused with the path of the field that is wrong.
package codec

import (
	"strconv"
)

// Kind tells what a Value holds.
type Kind uint8

// The kinds of RFC 8259.
const (
	Null Kind = iota
	Bool
	Number
	Text
	List
	Object
)

// String names the kind the way a message to a person does.
func (k Kind) String() string {
	switch k {
	case Null:
		return "null"
	case Bool:
		return "true or false"
	case Number:
		return "a number"
	case Text:
		return "text"
	case List:
		return "a list"
	case Object:
		return "an object"
	}
	return "nothing"
}

// Value is one node of a JSON document. A value that was read knows its parent,
// so that its path can be told; a value that was built (Num, Str, …) does not.
type Value struct {
	Kind    Kind
	Truth   bool
	Num     float64
	Str     string
	Items   []*Value
	Members []Member

	parent *Value
	key    string // name in the parent object
	index  int    // position in the parent list
	probe  *Shape // not nil while a decoder is being described; see shape.go
}

// Member is one name and value of an object, in the order of the document.
type Member struct {
	Name  string
	Value *Value
}

// Path is where the value stands in its document, like
// near.antennas[1].skew.as_left[0].value; empty for the document itself.
func (v *Value) Path() string {
	if v == nil || v.parent == nil {
		return ""
	}
	above := v.parent.Path()
	if v.parent.Kind == List {
		return above + "[" + strconv.Itoa(v.index) + "]"
	}
	return join(above, v.key)
}

func join(above, name string) string {
	if above == "" {
		return name
	}
	return above + "." + name
}

// Get returns the member of an object by name, or nil.
func (v *Value) Get(name string) *Value {
	if v == nil || v.Kind != Object {
		return nil
	}
	for i := range v.Members {
		if v.Members[i].Name == name {
			return v.Members[i].Value
		}
	}
	return nil
}

// Set replaces the member of an object, or adds it at the end.
func (v *Value) Set(name string, to *Value) {
	for i := range v.Members {
		if v.Members[i].Name == name {
			v.Members[i].Value = to
			return
		}
	}
	v.Members = append(v.Members, Member{name, to})
}

// Num is a number to be written.
func Num(x float64) *Value { return &Value{Kind: Number, Num: x} }

// MaybeNum is a number to be written, or null where there is none.
func MaybeNum(x *float64) *Value {
	if x == nil {
		return Nothing()
	}
	return Num(*x)
}

// Int is a whole number to be written.
func Int(n int) *Value { return &Value{Kind: Number, Num: float64(n)} }

// Str is a text to be written.
func Str(s string) *Value { return &Value{Kind: Text, Str: s} }

// MaybeStr is a text to be written, or null where it is empty.
func MaybeStr(s string) *Value {
	if s == "" {
		return Nothing()
	}
	return Str(s)
}

// Truth is true or false to be written.
func Truth(b bool) *Value { return &Value{Kind: Bool, Truth: b} }

// Nothing is null.
func Nothing() *Value { return &Value{Kind: Null} }

// Seq is a list to be written.
func Seq(items ...*Value) *Value { return &Value{Kind: List, Items: items} }

// Nums is a list of numbers to be written.
func Nums(xs []float64) *Value {
	v := &Value{Kind: List, Items: make([]*Value, len(xs))}
	for i, x := range xs {
		v.Items[i] = Num(x)
	}
	return v
}

// Strs is a list of texts to be written.
func Strs(ss []string) *Value {
	v := &Value{Kind: List, Items: make([]*Value, len(ss))}
	for i, s := range ss {
		v.Items[i] = Str(s)
	}
	return v
}

// Obj is an object to be written, its members in the order given.
func Obj(members ...Member) *Value { return &Value{Kind: Object, Members: members} }

// M is one member for Obj.
func M(name string, v *Value) Member { return Member{name, v} }
