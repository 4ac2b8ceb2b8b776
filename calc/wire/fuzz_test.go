package wire_test

import (
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"crossplumb/calc/wire"
)

// fuzzDoor asks one operation anything: it must answer with JSON or refuse with a
// problem, and never call a fault its own. Seeds are the operation's golden
// questions and, for the mount, the jobs. (encoding/json refuses what is not finite,
// so that a valid answer is a finite one.)
func fuzzDoor(f *testing.F, op string, jobs bool) {
	f.Helper()
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "golden", op+".json"))
	if err != nil {
		f.Fatal(err)
	}
	var rows []struct{ In json.RawMessage }
	if err := json.Unmarshal(in, &rows); err != nil {
		f.Fatal(err)
	}
	for _, r := range rows {
		f.Add([]byte(r.In))
	}
	if jobs {
		names, err := filepath.Glob(filepath.Join("..", "..", "testdata", "jobs", "*.json"))
		if err != nil || len(names) == 0 {
			f.Fatal("no jobs", err)
		}
		for _, name := range names {
			if op == "mount.tolerances" && strings.Contains(name, "four-crossed") {
				continue // eight ports take seconds, and ask nothing that four do not
			}
			in, err := os.ReadFile(name)
			if err != nil {
				f.Fatal(err)
			}
			f.Add(in)
		}
	}
	f.Fuzz(func(t *testing.T, in []byte) {
		out, p := wire.Reckon(op, in)
		switch {
		case p != nil && out != nil:
			t.Fatalf("an answer beside a problem: %s", out)
		case p != nil && p.Code == "internal":
			t.Fatalf("a fault of ours: %v", p)
		case p != nil && p.Message == "":
			t.Fatalf("a problem that says nothing: %v", p)
		case p == nil && !json.Valid(out):
			t.Fatalf("not JSON: %s", out)
		}
	})
}

func FuzzPolarizationLoss(f *testing.F)   { fuzzDoor(f, "polarization.loss", false) }
func FuzzPolarizationPair(f *testing.F)   { fuzzDoor(f, "polarization.pair", false) }
func FuzzSpacingWavelengths(f *testing.F) { fuzzDoor(f, "spacing.wavelengths", false) }
func FuzzScatterCorrelation(f *testing.F) { fuzzDoor(f, "scatter.correlation", false) }
func FuzzMountFold(f *testing.F)          { fuzzDoor(f, "mount.fold", false) }
func FuzzMountVerdict(f *testing.F)       { fuzzDoor(f, "mount.verdict", true) }
func FuzzMountTolerances(f *testing.F)    { fuzzDoor(f, "mount.tolerances", true) }
