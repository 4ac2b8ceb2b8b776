// Package wire is the one door to the physics: named operations, a JSON object
// in, a JSON object or a problem out. The server's calc routes, the command line
// and the phone's WebAssembly all go through Reckon, so that they can not differ.
package wire

import (
	"slices"

	"crossplumb/calc/codec"
)

// Version is the version of the calculations. It is raised whenever the same
// input may give another answer; a stored verdict keeps the version that made it.
const Version = "1.0.0"

// Problem is an input that can not be answered; see package codec for its codes.
type Problem = codec.Problem

// answer is the object an operation gives back; Reckon adds the method to it.
type answer = *codec.Value

// operation is one thing that can be asked.
type operation struct {
	name    string
	run     func(*codec.Value) (answer, *Problem)
	sources []string // what the formulas come from, part of every answer
}

// operations is the whole table, one slice for each topic. A new topic has a file
// of its own here (aim.go, peak.go, stream.go, …) with a function like
// polarOperations, and one line below.
func operations() []operation {
	return slices.Concat(
		polarOperations(),
		spacingOperations(),
		aimOperations(),
		peakOperations(),
		faultOperations(),
		streamOperations(),
		streamsOperations(),
		mountOperations(),
		toleranceOperations(),
	)
}

// Operations returns the names of all operations in their order.
func Operations() []string {
	table := operations()
	names := make([]string, len(table))
	for i := range table {
		names[i] = table[i].name
	}
	return names
}

// Reckon runs one operation. The answer is a JSON object that holds finite
// numbers only; a nil problem comes with an answer and a problem with none.
// Reckon never panics: a fault of ours comes back with the code "internal".
func Reckon(op string, in []byte) ([]byte, *Problem) {
	return reckon(operations(), op, in)
}

func reckon(table []operation, op string, in []byte) (out []byte, problem *Problem) {
	defer func() {
		if fault := recover(); fault != nil {
			out, problem = nil, &Problem{Code: codec.Internal, Message: "the computation failed (" + text(fault) + "); please report this input"}
		}
	}()
	for _, o := range table {
		if o.name != op {
			continue
		}
		v, p := codec.Parse(in)
		if p != nil {
			return nil, p
		}
		a, p := o.run(v)
		if p != nil {
			return nil, p
		}
		a.Set("method", codec.Obj(codec.M("version", codec.Str(Version)), codec.M("sources", codec.Strs(o.sources))))
		return codec.Marshal(a)
	}
	return nil, &Problem{Code: codec.UnknownOperation, Message: "there is no operation of this name"}
}

// text tells what a panic said, without fmt.
func text(fault any) string {
	switch f := fault.(type) {
	case error:
		return f.Error()
	case string:
		return f
	}
	return "no reason given"
}

// Shape is what an operation accepts, for its published schema; nil for a name
// that is not in the table.
func Shape(op string) *codec.Shape {
	for _, o := range operations() {
		if o.name == op {
			return codec.Describe(func(v *codec.Value) {
				defer func() { _ = recover() }() // a probe holds dummies: what they compute to is of no account
				_, _ = o.run(v)
			})
		}
	}
	return nil
}
