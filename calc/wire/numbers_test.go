package wire_test

import (
	"encoding/json"
	"maps"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/wire"
)

// numbers lists every number of a document with a way to set it.
func numbers(v any, set func(any), visit func(x float64, set func(any))) {
	switch x := v.(type) {
	case float64:
		visit(x, set)
	case []any:
		for i := range x {
			numbers(x[i], func(n any) { x[i] = n }, visit)
		}
	case map[string]any:
		for _, k := range slices.Sorted(maps.Keys(x)) {
			numbers(x[k], func(n any) { x[k] = n }, visit)
		}
	}
}

// TestSheetsWithOtherNumbers: bytes rarely make a sheet, so here whole sheets get
// other numbers, null or nothing in a few places: the verdict answers or refuses,
// and never faults.
func TestSheetsWithOtherNumbers(t *testing.T) {
	names, err := filepath.Glob(filepath.Join("..", "..", "testdata", "jobs", "*.json"))
	if err != nil || len(names) == 0 {
		t.Fatal(err)
	}
	answered, refused := 0, 0
	rapid.Check(t, func(t *rapid.T) {
		in, err := os.ReadFile(rapid.SampledFrom(names).Draw(t, "job"))
		if err != nil {
			t.Fatal(err)
		}
		var doc any
		if err := json.Unmarshal(in, &doc); err != nil {
			t.Fatal(err)
		}
		var places []func(any)
		var were []float64
		numbers(doc, nil, func(x float64, set func(any)) { places, were = append(places, set), append(were, x) })
		for range rapid.IntRange(1, 4).Draw(t, "changes") {
			i := rapid.IntRange(0, len(places)-1).Draw(t, "place")
			places[i](rapid.OneOf(
				rapid.Just[any](0.0), rapid.Just[any](nil), rapid.Just[any]("NaN"), rapid.Just[any](-were[i]), rapid.Just[any](were[i]*1000), rapid.Just[any](were[i]/1000),
				rapid.Map(rapid.Float64Range(-200, 200), func(x float64) any { return x }),
			).Draw(t, "value"))
		}
		changed, err := json.Marshal(doc)
		if err != nil {
			t.Fatal(err)
		}
		out, p := wire.Reckon("mount.verdict", changed)
		switch {
		case p != nil && p.Code == "internal":
			t.Fatalf("%v\n%s", p, changed)
		case p != nil:
			refused++
		case !json.Valid(out):
			t.Fatalf("not JSON: %s", out)
		default:
			answered++
		}
	})
	if answered == 0 || refused == 0 {
		t.Errorf("%d answered, %d refused: the changes try one side only", answered, refused)
	}
}
