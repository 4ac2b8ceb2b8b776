package peak

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// Short searches over a known lobe, six to eight steps, from 8 dB down on the left to
// 2.7 dB down on the right, flutter 0.5 dB, with the beamwidth right, not known, or of
// another antenna: none may be called flat, and a peak that is told must be covered.
func TestSteppedOverIsNotFlat(t *testing.T) {
	r := rand.New(rand.NewPCG(51, 52))
	for _, row := range []struct {
		name  string
		share float64 // stated beamwidth against the true one, 0 where none is
		least float64 // share of searches that must tell the peak
	}{
		{"right", 1, 0.99}, {"not known", 0, 0.9}, {"half", 0.5, 0.99}, {"twice", 2, 0.9}, {"thrice", 3, 0.9}, {"of a sector antenna", 9, 0.9},
	} {
		const trials = 2000
		found, in, flat := 0, 0, 0
		for range trials {
			w := (5 + 5*r.Float64()) * degree
			n := 6 + r.IntN(3)
			from, to := -w*math.Sqrt(8.0/12), w*math.Sqrt(2.7/12)
			s := Search{LevelDoubt: DefaultLevelDoubt, Beamwidth: row.share * w}
			for i := range n {
				x := from + (to-from)*float64(i)/float64(n-1)
				s.Angles = append(s.Angles, 72*degree+x)
				s.Levels = append(s.Levels, -48-12*x*x/w/w+0.5*r.NormFloat64())
			}
			f := s.Fit()
			if slices.Contains(f.Wants, WantWider) {
				flat++
			}
			if f.Peak == nil {
				if len(f.Wants) == 0 {
					t.Fatalf("%s: no peak, and nothing wanted", row.name)
				}
				continue
			}
			found++
			if math.Abs(*f.Peak-72*degree) <= 1.96*f.PeakDoubt {
				in++
			}
		}
		t.Logf("%s: told %d of %d, covered %.3f, called flat %d", row.name, found, trials, float64(in)/float64(found), flat)
		if flat > 0 {
			t.Errorf("%s: called flat %d times", row.name, flat)
		}
		if float64(found) < row.least*trials {
			t.Errorf("%s: told %d of %d", row.name, found, trials)
		}
		if float64(in) < 0.93*float64(found) {
			t.Errorf("%s: covered %.3f", row.name, float64(in)/float64(found))
		}
	}
}
