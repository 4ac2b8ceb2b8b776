package verdict

import (
	"math"
	"testing"

	"crossplumb/calc/doubt"
	"crossplumb/calc/sheet"
)

// TestDrawsAreEnough: the probability that 2048 draws give, against 200,000, for
// every job and limits set amid the doubt. The tolerance is what plain random draws
// would need 10,000 of.
func TestDrawsAreEnough(t *testing.T) {
	for _, name := range []string{"crossed-pair-measure-again", "crossed-pair-go", "two-crossed-panels", "two-omnis-half-wavelength"} {
		s := load(t, name)
		if name == "two-crossed-panels" { // leave the stream computation out
			s.Limits = s.Limits[3:]
		}
		if name == "two-omnis-half-wavelength" {
			s.Limits = s.Limits[2:]
		}
		j, p := newJudge(s)
		if p != nil {
			t.Fatal(p)
		}
		b, p := j.believe(sheet.AsLeft)
		if p != nil {
			t.Fatal(p)
		}
		first := j.run(b)
		for _, quantile := range []float64{0.05, 0.3, 0.8, 0.95, 0.98} {
			for k := range j.limits { // each limit where its own share of good draws is about this
				q := quantile
				if j.limits[k].AtLeast {
					q = 1 - q
				}
				v := first.values[k]
				j.limits[k].Limit.Value = v[int(q*float64(len(v)))]
			}
			few := j.run(b).joint
			keep := j.draws
			j.draws = doubt.NewDraws(100, j.draws.Dims)
			many := j.runEvery(b, 1).joint
			j.draws = keep
			if e := math.Abs(few - many); e > 0.006 {
				t.Errorf("%s at %.2f: probability %.4f, by a hundred times the draws %.4f", name, quantile, few, many)
			} else {
				t.Logf("%s at %.2f: %.4f, off by %+.4f", name, quantile, many, few-many)
			}
		}
	}
}
