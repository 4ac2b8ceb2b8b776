package wire_test

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"crossplumb/calc/wire"
)

// golden is one question and its answer, kept in testdata/golden and read here
// natively, here again as WebAssembly under Node, and in the browser.
//
// Out need not be whole: what it names must be in the answer, numbers within the
// tolerance (|got − want| ≤ abs + rel·|want|), lists as long. Problem stands
// instead of Out where the question is refused.
type golden struct {
	Name      string
	Op        string
	Source    string // what the expected values come from
	In        json.RawMessage
	Out       any
	Problem   *struct{ Code, Field string }
	Tolerance struct{ Abs, Rel float64 }
}

func (g *golden) compare(t *testing.T, path string, got, want any) {
	t.Helper()
	switch w := want.(type) {
	case float64:
		x, ok := got.(float64)
		if !ok || !(math.Abs(x-w) <= g.Tolerance.Abs+g.Tolerance.Rel*math.Abs(w)) {
			t.Errorf("%s is %v, want %v", path, got, w)
		}
	case map[string]any:
		m, ok := got.(map[string]any)
		if !ok {
			t.Errorf("%s is %v, want an object", path, got)
			return
		}
		for name, v := range w {
			x, there := m[name]
			if !there {
				t.Errorf("%s.%s is not in the answer", path, name)
				continue
			}
			g.compare(t, path+"."+name, x, v)
		}
	case []any:
		s, ok := got.([]any)
		if !ok || len(s) != len(w) {
			t.Errorf("%s is %v, want %d items", path, got, len(w))
			return
		}
		for i := range w {
			g.compare(t, path+"["+strconv.Itoa(i)+"]", s[i], w[i])
		}
	default:
		if got != want {
			t.Errorf("%s is %v, want %v", path, got, want)
		}
	}
}

func TestGolden(t *testing.T) {
	files, err := filepath.Glob(filepath.Join("..", "..", "testdata", "golden", "*.json"))
	if err != nil || len(files) < 6 {
		t.Fatalf("%d golden files, %v", len(files), err)
	}
	for _, file := range files {
		in, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		var all []golden
		if err := json.Unmarshal(in, &all); err != nil {
			t.Fatalf("%s: %v", file, err)
		}
		for _, g := range all {
			t.Run(g.Op+"/"+g.Name, func(t *testing.T) {
				if g.Source == "" {
					t.Error("no source stands beside it")
				}
				out, p := wire.Reckon(g.Op, g.In)
				if g.Problem != nil {
					if p == nil {
						t.Fatalf("answered %s", out)
					}
					if p.Code != g.Problem.Code || p.Field != g.Problem.Field {
						t.Errorf("got %v, want %+v", p, *g.Problem)
					}
					return
				}
				if p != nil {
					t.Fatal(p)
				}
				if g.Out == nil {
					t.Fatal("neither an answer nor a problem is expected")
				}
				var got any
				if err := json.Unmarshal(out, &got); err != nil {
					t.Fatal(err)
				}
				g.compare(t, "out", got, g.Out)
			})
		}
	}
}
