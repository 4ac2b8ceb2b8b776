package wire_test

import (
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"testing"
	"time"

	"pgregory.net/rapid"

	"crossplumb/calc/wire"
)

func FuzzStreamCapacity(f *testing.F) { fuzzDoor(f, "stream.capacity", false) }
func FuzzStreamLimit(f *testing.F)    { fuzzDoor(f, "stream.limit", false) }
func FuzzMountStreams(f *testing.F)   { fuzzDoor(f, "mount.streams", true) }

// TestStreamsOfSheetsWithOtherNumbers: whole sheets with other numbers in a few places, extreme ones among them: answered
// or refused, never a fault, never without end.
func TestStreamsOfSheetsWithOtherNumbers(t *testing.T) {
	names, err := filepath.Glob(filepath.Join("..", "..", "testdata", "jobs", "*.json"))
	if err != nil || len(names) == 0 {
		t.Fatal(err)
	}
	answered, refused := 0, 0
	var longest time.Duration
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
				rapid.Just[any](0.0), rapid.Just[any](nil), rapid.Just[any](-were[i]), rapid.Just[any](were[i]*1000), rapid.Just[any](were[i]/1000),
				rapid.Map(rapid.Float64Range(-200, 200), func(x float64) any { return x }),
				rapid.Map(rapid.Float64Range(0, 5), func(x float64) any { return math.Pow(10, x) }),
			).Draw(t, "value"))
		}
		changed, err := json.Marshal(doc)
		if err != nil {
			t.Fatal(err)
		}
		begin := time.Now()
		out, p := wire.Reckon("mount.streams", changed)
		longest = max(longest, time.Since(begin))
		switch {
		case p != nil && (p.Code == "internal" || p.Message == ""):
			t.Fatalf("%v of %s", p, changed)
		case p != nil:
			refused++
		case !json.Valid(out):
			t.Fatalf("not JSON: %s", out)
		default:
			answered++
			var a struct {
				EffectiveStreams float64 `json:"effective_streams"`
				NearPorts        []string
				States           map[string]*struct {
					Bits     float64  `json:"bits_per_s_hz"`
					Error    float64  `json:"standard_error"`
					Envelope *float64 `json:"near_envelope"`
				} `json:"states"`
			}
			if err := json.Unmarshal(out, &a); err != nil {
				t.Fatal(err)
			}
			for name, s := range a.States {
				if s != nil && (s.Bits < 0 || s.Error > 0.013 || s.Envelope != nil && (*s.Envelope < 0 || *s.Envelope > 1)) {
					t.Fatalf("%s: %+v", name, *s)
				}
			}
			if a.EffectiveStreams < 0 || a.EffectiveStreams > 8 {
				t.Fatalf("%v streams", a.EffectiveStreams)
			}
		}
	})
	if answered < 10 || refused < 10 {
		t.Errorf("%d answered, %d refused: this test sees one side only", answered, refused)
	}
	t.Logf("%d answered, %d refused, the longest in %v", answered, refused, longest)
}

// TestStreamsOfAWidePair: line-of-sight spacing at 80 GHz, a thousand wavelengths, beside scatter: what is that far apart is
// uncorrelated and costs nothing to know.
func TestStreamsOfAWidePair(t *testing.T) {
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", "two-omnis-half-wavelength.json"))
	if err != nil {
		t.Fatal(err)
	}
	var doc map[string]any
	if err := json.Unmarshal(in, &doc); err != nil {
		t.Fatal(err)
	}
	doc["radio"].(map[string]any)["frequency_mhz"] = 80000.0
	doc["path"].(map[string]any)["distance_m"] = 5000.0
	doc["surroundings"] = map[string]any{"sight": true, "spreads": map[string]any{
		"near": map[string]any{"azimuth_deg": 8, "elevation_deg": 2}, "far": map[string]any{"azimuth_deg": 8, "elevation_deg": 2}, "k_db": 15, "xpr_db": 9, "spectrum": "laplacian",
	}}
	spacing := math.Sqrt(299792458/80e9*5000/2) * 1000
	for _, end := range []string{"near", "far"} {
		second := doc[end].(map[string]any)["antennas"].([]any)[1].(map[string]any)
		second["position_mm"].(map[string]any)["planned"].(map[string]any)["value"] = map[string]any{"right": spacing, "up": 0, "forward": 0}
		second["position_mm"].(map[string]any)["as_left"] = nil
	}
	changed, err := json.Marshal(doc)
	if err != nil {
		t.Fatal(err)
	}
	begin := time.Now()
	out, p := wire.Reckon("mount.streams", changed)
	if p != nil {
		t.Fatal(p)
	}
	var a struct {
		EffectiveStreams float64 `json:"effective_streams"`
		States           map[string]*struct {
			Envelope float64 `json:"near_envelope"`
		}
	}
	if err := json.Unmarshal(out, &a); err != nil {
		t.Fatal(err)
	}
	if a.EffectiveStreams < 1.97 || a.States["planned"].Envelope > 1e-5 {
		t.Errorf("%+v", a)
	}
	t.Logf("in %v", time.Since(begin))
}
