// Package schema publishes what each operation of the door takes and gives, as JSON
// Schema (draft 2020-12). The input is described by the decoder itself, which can
// not drift from what it refuses; the output by the shape of the answers to the
// golden questions, kept in answers.json and held to them by a test.
//
// It is imported by the server alone: the phone has no use for it.
package schema

import (
	_ "embed"
	"encoding/json"
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/wire"
)

//go:embed answers.json
var answers []byte

// For returns the schemas of an operation's input and output; nil for a name that
// wire.Operations does not hold.
func For(op string) (in, out json.RawMessage) {
	shape := wire.Shape(op)
	if shape == nil {
		return nil, nil
	}
	var known map[string]json.RawMessage
	if err := json.Unmarshal(answers, &known); err != nil {
		panic("schema: answers.json is not JSON: " + err.Error())
	}
	out = known[op]
	if out == nil {
		out = json.RawMessage(`{"type":"object"}`)
	}
	return marshal(ofShape(shape)), out
}

func marshal(v any) json.RawMessage {
	b, err := json.Marshal(v)
	if err != nil {
		panic("schema: " + err.Error())
	}
	return b
}

// node is one schema in the making.
type node map[string]any

// ofShape turns what a decoder asked for into a schema.
func ofShape(s *codec.Shape) node {
	n := node{}
	if s.Free && s.Kind == codec.Null {
		return n // read by another decoder, and not in this operation
	}
	switch s.Kind {
	case codec.Object:
		n["type"], n["additionalProperties"] = "object", false
		fields, required := node{}, []string{}
		for _, name := range s.Names {
			f := ofShape(s.Fields[name])
			if s.Required[name] {
				required = append(required, name)
			} else {
				f = nullable(f)
			}
			fields[name] = f
		}
		n["properties"] = fields
		if len(required) > 0 {
			n["required"] = required
		}
	case codec.List:
		n["type"], n["minItems"], n["maxItems"] = "array", s.MinItems, s.MaxItems
		if s.Item != nil {
			n["items"] = ofShape(s.Item)
		}
		if s.OneOrMany && s.Item != nil {
			n = node{"anyOf": []any{ofShape(s.Item), n}}
		}
	case codec.Number:
		n["type"] = "number"
		r := s.Range
		if r.Whole {
			n["type"] = "integer"
		}
		if !math.IsInf(r.Min, 0) {
			key := "minimum"
			if r.OpenMin {
				key = "exclusiveMinimum"
			}
			n[key] = r.Min
		}
		if !math.IsInf(r.Max, 0) {
			key := "maximum"
			if r.OpenMax {
				key = "exclusiveMaximum"
			}
			n[key] = r.Max
		}
		if r.Suggestion != "" {
			n["description"] = r.Suggestion
		}
	case codec.Text:
		n["type"] = "string"
		if s.Options != nil {
			n["enum"] = s.Options
		} else {
			n["maxLength"] = codec.MaxText
		}
	case codec.Bool:
		n["type"] = "boolean"
	}
	return n
}

// nullable lets a schema be null too.
func nullable(n node) node {
	if t, ok := n["type"].(string); ok {
		n["type"] = []string{t, "null"}
		if options, ok := n["enum"].([]string); ok {
			all := []any{}
			for _, o := range options {
				all = append(all, o)
			}
			n["enum"] = append(all, nil)
		}
		return n
	}
	if any, ok := n["anyOf"].([]any); ok {
		n["anyOf"] = append(any, node{"type": "null"})
	}
	return n
}
