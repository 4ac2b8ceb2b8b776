package schema

import (
	"bytes"
	"encoding/json"
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"sort"
	"testing"

	"crossplumb/calc/wire"
)

var update = flag.Bool("update", false, "write answers.json anew from the golden questions")

// questions are the inputs of the golden files and jobs, by operation.
func questions(t *testing.T) map[string][]json.RawMessage {
	t.Helper()
	root := filepath.Join("..", "..", "..", "testdata")
	out := map[string][]json.RawMessage{}
	files, err := filepath.Glob(filepath.Join(root, "golden", "*.json"))
	if err != nil || len(files) == 0 {
		t.Fatal("no golden files", err)
	}
	for _, f := range files {
		in, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		var rows []struct {
			Op      string
			In      json.RawMessage
			Problem any
		}
		if err := json.Unmarshal(in, &rows); err != nil {
			t.Fatal(f, err)
		}
		for _, r := range rows {
			if r.Problem == nil {
				out[r.Op] = append(out[r.Op], r.In)
			}
		}
	}
	jobs, err := filepath.Glob(filepath.Join(root, "jobs", "*.json"))
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range jobs {
		in, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		for _, op := range []string{"mount.verdict", "mount.streams"} {
			if slices.Contains(wire.Operations(), op) {
				out[op] = append(out[op], in)
			}
		}
	}
	return out
}

// merge joins the schema of one more value into a schema.
func merge(n node, v any) node {
	if n == nil {
		n = node{}
	}
	add := func(kind string) {
		switch t := n["type"].(type) {
		case nil:
			n["type"] = kind
		case string:
			if t != kind {
				both := []string{t, kind}
				sort.Strings(both)
				n["type"] = both
			}
		case []string:
			if !slices.Contains(t, kind) {
				t = append(t, kind)
				sort.Strings(t)
				n["type"] = t
			}
		}
	}
	switch x := v.(type) {
	case nil:
		add("null")
	case bool:
		add("boolean")
	case float64:
		add("number")
	case string:
		add("string")
	case []any:
		add("array")
		items, _ := n["items"].(node)
		for _, item := range x {
			items = merge(items, item)
		}
		if items != nil {
			n["items"] = items
		}
	case map[string]any:
		add("object")
		properties, _ := n["properties"].(node)
		required, seen := n["required"].([]string)
		if properties == nil {
			properties = node{}
		}
		var still []string
		names := make([]string, 0, len(x))
		for name := range x {
			names = append(names, name)
		}
		sort.Strings(names)
		for _, name := range names {
			old, _ := properties[name].(node)
			properties[name] = merge(old, x[name])
			if !seen || slices.Contains(required, name) {
				still = append(still, name)
			}
		}
		n["properties"], n["required"] = properties, still
	}
	return n
}

// TestAnswersAreDescribed: answers.json describes every operation's answers, and is
// what the golden questions give. After a change of an answer or a new operation:
//
//	go test ./calc/wire/schema -run TestAnswersAreDescribed -update
func TestAnswersAreDescribed(t *testing.T) {
	asked := questions(t)
	all := map[string]node{}
	for op, inputs := range asked {
		var n node
		for _, in := range inputs {
			out, p := wire.Reckon(op, in)
			if p != nil {
				t.Fatalf("%s: %v", op, p)
			}
			var v any
			if err := json.Unmarshal(out, &v); err != nil {
				t.Fatal(err)
			}
			n = merge(n, v)
		}
		all[op] = n
	}
	made, err := json.MarshalIndent(all, "", " ")
	if err != nil {
		t.Fatal(err)
	}
	made = append(made, '\n')
	if *update {
		if err := os.WriteFile("answers.json", made, 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if !bytes.Equal(made, answers) {
		t.Error("answers.json is not what the golden questions give; write it anew with -update and look at the difference")
	}
	for _, op := range wire.Operations() {
		if asked[op] == nil {
			t.Errorf("%s has no golden question, so that its answer is not described", op)
		}
	}
}

// accepts is a small validator for the schemas that this package makes.
func accepts(n map[string]any, v any, path string) error {
	if options, ok := n["anyOf"].([]any); ok {
		var last error
		for _, o := range options {
			if last = accepts(o.(map[string]any), v, path); last == nil {
				return nil
			}
		}
		return last
	}
	kinds := []any{}
	switch t := n["type"].(type) {
	case string:
		kinds = append(kinds, t)
	case []any:
		kinds = t
	case nil:
		return nil
	}
	kind := map[bool]string{true: "null"}[v == nil]
	switch x := v.(type) {
	case bool:
		kind = "boolean"
	case string:
		kind = "string"
	case float64:
		kind = "number"
		if slices.Contains(kinds, any("integer")) && x == math.Trunc(x) {
			kind = "integer"
		}
		if min, ok := n["minimum"].(float64); ok && x < min {
			return fmt.Errorf("%s: %v below %v", path, x, min)
		}
		if min, ok := n["exclusiveMinimum"].(float64); ok && x <= min {
			return fmt.Errorf("%s: %v not above %v", path, x, min)
		}
		if max, ok := n["maximum"].(float64); ok && x > max {
			return fmt.Errorf("%s: %v above %v", path, x, max)
		}
	case []any:
		kind = "array"
		items, _ := n["items"].(map[string]any)
		for i, item := range x {
			if err := accepts(items, item, fmt.Sprintf("%s[%d]", path, i)); err != nil {
				return err
			}
		}
	case map[string]any:
		kind = "object"
		properties, _ := n["properties"].(map[string]any)
		for name, item := range x {
			p, known := properties[name].(map[string]any)
			if !known && n["additionalProperties"] == false {
				return fmt.Errorf("%s.%s is not known", path, name)
			}
			if err := accepts(p, item, path+"."+name); err != nil {
				return err
			}
		}
		required, _ := n["required"].([]any)
		for _, name := range required {
			if _, there := x[name.(string)]; !there {
				return fmt.Errorf("%s.%s is missing", path, name)
			}
		}
	}
	if !slices.Contains(kinds, any(kind)) {
		return fmt.Errorf("%s: a %s where %v is wanted", path, kind, kinds)
	}
	if options, ok := n["enum"].([]any); ok && !slices.Contains(options, v) {
		return fmt.Errorf("%s: %v is none of %v", path, v, options)
	}
	return nil
}

// TestSchemasAcceptWhatTheDoorTakes: every golden question and answer fits the
// published schemas; an unknown field and a wrong type do not.
func TestSchemasAcceptWhatTheDoorTakes(t *testing.T) {
	for op, inputs := range questions(t) {
		rawIn, rawOut := For(op)
		var in, out map[string]any
		if err := json.Unmarshal(rawIn, &in); err != nil {
			t.Fatal(op, err)
		}
		if err := json.Unmarshal(rawOut, &out); err != nil {
			t.Fatal(op, err)
		}
		if len(in["properties"].(map[string]any)) == 0 {
			t.Errorf("%s takes nothing: %s", op, rawIn)
		}
		for _, question := range inputs {
			var v map[string]any
			if err := json.Unmarshal(question, &v); err != nil {
				t.Fatal(err)
			}
			if err := accepts(in, v, "in"); err != nil {
				t.Errorf("%s: %v", op, err)
			}
			v["no such field"] = 1.0
			if accepts(in, v, "in") == nil {
				t.Errorf("%s: an unknown field fits the schema", op)
			}
		}
		answer, p := wire.Reckon(op, inputs[0])
		if p != nil {
			t.Fatal(p)
		}
		var v any
		if err := json.Unmarshal(answer, &v); err != nil {
			t.Fatal(err)
		}
		if err := accepts(out, v, "out"); err != nil {
			t.Errorf("%s: %v", op, err)
		}
	}
	if in, out := For("no.such"); in != nil || out != nil {
		t.Error("an operation that is not there has a schema")
	}
}
