package verdict

import (
	"math"
	"testing"

	"crossplumb/calc/sheet"
)

// TestSurfaceIsTheComputation: in draws of the readings' doubt the surface gives
// what the stream computation gives, to a quarter of the doubt of each metric (which
// widens that doubt by 3 %), or it says that it is too rough to judge by.
func TestSurfaceIsTheComputation(t *testing.T) {
	for _, row := range []struct {
		name  string
		job   string
		rough bool
		edit  func(*sheet.Sheet)
	}{
		{"a skewed crossed pair", "crossed-pair-skewed-combining", false, func(*sheet.Sheet) {}},
		{"two panels", "two-crossed-panels", false, func(*sheet.Sheet) {}},
		{"two omnis", "two-omnis-half-wavelength", false, func(*sheet.Sheet) {}},
		{"a limit amid the doubt", "two-omnis-half-wavelength", false, func(s *sheet.Sheet) {
			s.Limits[0].Value = 0.27
		}},
		{"a skew read badly", "two-crossed-panels", false, func(s *sheet.Sheet) {
			a := &s.Near.Antennas[1].Skew.AsLeft[0]
			a.Deg, a.UDeg = 8, 3
		}},
		{"imbalance of panels aimed badly", "two-crossed-panels", false, func(s *sheet.Sheet) {
			a := &s.Near.Antennas[1].Azimuth.AsLeft[0]
			a.Deg, a.UDeg = 75, 2
			s.Limits = []sheet.Limit{{Name: sheet.ChainImbalance, Value: 2.4}}
		}},
		{"an aim read badly", "crossed-pair-skewed-combining", false, func(s *sheet.Sheet) { // bends
			a := &s.Near.Antennas[0]
			a.Azimuth.AsLeft[0].UDeg, a.Tilt.AsLeft[0].UDeg = 10, 1.5
			s.Limits = []sheet.Limit{{Name: sheet.RateShare, AtLeast: true, Value: 0.97}}
		}},
		{"skews of both ends read badly", "two-crossed-panels", false, func(s *sheet.Sheet) { // bends in their sum
			s.Radio.Combining, s.Radio.TxPowerDBm = false, nil
			*s.Surroundings.Spreads.KDB = 30
			for _, end := range []struct {
				m    *sheet.Mount
				keep [2]int
			}{{&s.Near, [2]int{0, 1}}, {&s.Far, [2]int{1, 0}}} {
				for i := range end.m.Antennas {
					a := &end.m.Antennas[i]
					a.Elements = a.Elements[end.keep[i] : end.keep[i]+1]
				}
			}
			s.Near.Antennas[1].Skew.AsLeft = []sheet.Angle{{Deg: 14, UDeg: 2, How: sheet.How{Method: "level"}}}
			s.Far.Antennas[0].Skew.AsLeft = []sheet.Angle{{Deg: 6, UDeg: 3, How: sheet.How{Method: "level"}}}
			s.Far.Antennas[1].Skew.AsLeft = []sheet.Angle{{Deg: 6, UDeg: 3, How: sheet.How{Method: "level"}}}
			s.Limits = []sheet.Limit{{Name: sheet.ChainImbalance, Value: 0.5}}
		}},
		{"phases that turn over", "two-crossed-panels", true, func(s *sheet.Sheet) {
			s.Limits = []sheet.Limit{{Name: sheet.EffectiveStreams, AtLeast: true, Value: 3.8}}
		}},
	} {
		s := load(t, row.job)
		row.edit(s)
		j, p := newJudge(s)
		if p != nil {
			t.Fatal(p)
		}
		b, p := j.believe(sheet.AsLeft)
		if p != nil {
			t.Fatal(p)
		}
		surface := j.flow.about(b, nil)
		sp := spreadOf(b)
		draws := j.drawsOf(sp.dims)
		rough := false
		b.surface = surface
		if rough = j.rough(b, &sp, draws); rough != row.rough {
			t.Errorf("%s: rough is %v, want %v", row.name, rough, row.rough)
		}
		x, delta, got := make([]float64, len(sp.base)), make([]float64, len(surface.axes)), make([]float64, j.flow.size)
		const n = 256
		for k := range j.limits {
			l := &j.limits[k]
			if !l.flows {
				continue
			}
			var sum, square, miss float64
			for i := range n {
				sp.draw(draws.At(i*draws.N/n), x)
				want := j.flow.metric(l.metric, j.flow.nearby(x))
				surface.response(x, delta, got)
				d := j.flow.metric(l.metric, got) - want
				sum += want / n
				square += want * want / n
				miss += d * d / n
			}
			u, rms := math.Sqrt(math.Max(square-sum*sum, 0)), math.Sqrt(miss)
			t.Logf("%s, %s: mean %.4f, doubt %.5f, surface off by %.5f rms (%d axes, %d pairs, margin %.3f)", row.name, l.Name, sum, u, rms, len(surface.axes), len(surface.pairs), l.margin(sum))
			if !row.rough && rms > u/4+negligible && math.Abs(l.margin(sum)) < 4*(u+rms) {
				t.Errorf("%s, %s: off by %.5f, doubt %.5f", row.name, l.Name, rms, u)
			}
		}
	}
}
