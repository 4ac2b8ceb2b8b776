package verdict_test

import (
	"math"
	"testing"

	"crossplumb/calc/sheet"
	"crossplumb/calc/verdict"
)

// hang sets the near readings of a sheet to plan plus deviations, each by its
// planned method and with the doubt that the tolerance states.
func hang(s *sheet.Sheet, box []verdict.Tolerance, off []float64) {
	for i := range s.Near.Antennas {
		a := &s.Near.Antennas[i]
		a.Skew.AsFound, a.Tilt.AsFound, a.Azimuth.AsFound, a.Position.AsFound = nil, nil, nil, nil
		a.Skew.AsLeft, a.Tilt.AsLeft, a.Azimuth.AsLeft, a.Position.AsLeft = nil, nil, nil, nil
		place := [3]float64{*a.Position.Planned.Right, *a.Position.Planned.Up, *a.Position.Planned.Forward}
		for n, t := range box {
			if t.Antenna != a.ID {
				continue
			}
			read := func(st *sheet.AngleStates) {
				st.AsLeft = []sheet.Angle{{Deg: st.Planned.Deg + off[n], UDeg: t.U, How: st.Planned.How}}
			}
			switch t.Quantity {
			case "skew":
				read(&a.Skew)
			case "tilt":
				read(&a.Tilt)
			case "azimuth":
				read(&a.Azimuth)
			default:
				place[map[string]int{"right": 0, "up": 1, "forward": 2}[t.Axis]] += off[n]
				a.Position.AsLeft = []sheet.Position{{Right: &place[0], Up: &place[1], Forward: &place[2], UMM: t.U, How: a.Position.Planned.How}}
			}
		}
	}
}

// TestTolerancesAreTheInverseOfTheVerdict: at the worst corner of the box go, just
// outside not; each tolerance alone likewise.
func TestTolerancesAreTheInverseOfTheVerdict(t *testing.T) {
	for _, name := range []string{"crossed-pair-go", "two-crossed-panels", "two-omnis-half-wavelength"} {
		s := job(t, name)
		if name == "two-crossed-panels" { // the limits that need no stream computation
			s.Limits = s.Limits[3:]
		}
		if name == "two-omnis-half-wavelength" { // the correlation, by the stream computation, beside a lean
			s.Limits = []sheet.Limit{{Name: sheet.EnvelopeCorr, Value: 0.45}, {Name: sheet.SkewDeviation, Value: 2}, {Name: sheet.RateShare, AtLeast: true, Value: 0.97}}
			// taped to 3 mm, half a wavelength would have no tolerance left: the plan is wider
			wide := 60.0
			s.Near.Antennas[1].Position.Planned.Right = &wide
			s.Surroundings = class("UMa", false)
		}
		hang(s, nil, nil)
		tol, p := verdict.Tolerate(s)
		if p != nil {
			t.Fatal(p)
		}
		if !tol.PlanIsGo || len(tol.WorstCorner) != len(tol.Box) {
			t.Fatalf("%s: %+v", name, tol)
		}
		at := func(scale float64, off []float64) float64 {
			scaled := make([]float64, len(off))
			for i := range off {
				scaled[i] = off[i] * scale
			}
			hang(s, tol.Box, scaled)
			v, p := verdict.Judge(s)
			if p != nil {
				t.Fatal(p)
			}
			return v.Probability
		}
		// the standard error of a probability at the guard is below 0.005
		if in, out := at(1, tol.WorstCorner), at(1.03, tol.WorstCorner); in < verdict.Guard-0.005 || out >= verdict.Guard {
			t.Errorf("%s: at the worst corner %.4f, just outside %.4f", name, in, out)
		}
		limiting := 0
		for n, one := range tol.Box {
			if one.Alone == nil {
				continue
			}
			limiting++
			if *one.Together > *one.Alone+1e-9 {
				t.Errorf("%s: %s of %s wider together (%g) than alone (%g)", name, one.Quantity, one.Antenna, *one.Together, *one.Alone)
			}
			off := make([]float64, len(tol.Box))
			off[n] = *one.Alone
			up := math.Min(at(0.97, off), at(-0.97, off))
			over := math.Min(at(1.03, off), at(-1.03, off))
			if up < verdict.Guard-0.005 || over >= verdict.Guard {
				t.Errorf("%s: %s of %s alone ±%g: inside %.4f, outside %.4f", name, one.Quantity+one.Axis, one.Antenna, *one.Alone, up, over)
			}
		}
		if limiting < 2 {
			t.Errorf("%s: only %d tolerances limit", name, limiting)
		}
		// every corner of the limiting ones, where they are few enough to try all
		if name == "crossed-pair-go" {
			for bits := range 1 << len(tol.Box) {
				off := make([]float64, len(tol.Box))
				for n := range off {
					off[n] = math.Abs(tol.WorstCorner[n]) * float64(bits>>n&1*2-1)
				}
				if p := at(1, off); p < tol.CornerProbability-0.005 {
					t.Errorf("%s: corner %b has %.4f, the worst was said to have %.4f", name, bits, p, tol.CornerProbability)
				}
			}
		}
	}
}

func BenchmarkTolerate(b *testing.B) {
	s := job(b, "crossed-pair-go")
	for b.Loop() {
		if _, p := verdict.Tolerate(s); p != nil {
			b.Fatal(p)
		}
	}
}
