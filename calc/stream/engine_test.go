package stream

import (
	"math"
	"testing"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

const (
	degree     = math.Pi / 180
	lambda     = 299792458 / 5.8e9
	ofDecibels = math.Ln10 / 10
)

func linear(db float64) float64 { return math.Exp(db * ofDecibels) }

// panel is a crossed ±45° sector panel of usual figures.
func panel(right, up float64) antenna.Body {
	return antenna.Body{
		Pattern: &antenna.Pattern{Kind: antenna.Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18},
		Right:   right, Up: up,
		Ports: []antenna.Port{{Slant: 45 * degree}, {Slant: -45 * degree}},
	}
}

// class is a scenario of TR 38.901 over 1.9 km.
func class(s scatter.Scenario, sight bool) scatter.Surroundings {
	c := scatter.Class{Scenario: s, Sight: sight, CarrierGHz: 5.8, Distance: 1900}
	return c.Surroundings(scatter.Median, true, 0)
}

func link(around scatter.Surroundings, db float64) Setup {
	return Setup{Wavelength: lambda, Distance: 1900, SNR: linear(db), Around: around}
}

func row(n int, step float64) (near, far []antenna.Body) {
	for i := range n {
		near = append(near, panel(float64(i)*step, 0))
		far = append(far, panel(float64(i)*step, 0))
	}
	return near, far
}

func benchmarkEngine(b *testing.B, bodies int, around scatter.Surroundings) {
	near, far := row(bodies, 0.5)
	e, err := New(link(around, 25), near, far)
	if err != nil {
		b.Fatal(err)
	}
	l := e.Around(near, far)
	b.Run("New", func(b *testing.B) {
		for b.Loop() {
			New(link(around, 25), near, far)
		}
		b.ReportMetric(e.Planned().StandardError, "bit/s/Hz-error")
	})
	turn := 0.0
	move := func() {
		turn += 0.001
		near[1].Skew, near[1].Right, near[0].Azimuth = turn, 0.5+turn/10, turn
		far[1].Skew, far[1].Right, far[0].Azimuth, far[0].Tilt, far[1].Tilt = turn, 0.5+turn/10, turn, turn, turn
	}
	b.Run("Evaluate", func(b *testing.B) {
		turn = 0
		for b.Loop() {
			move()
			if turn > 0.1 {
				turn = 0
			}
			e.Evaluate(near, far)
		}
	})
	b.Run("Local", func(b *testing.B) {
		turn = 0
		for b.Loop() {
			move()
			if turn > 0.1 {
				turn = 0
			}
			l.Evaluate(near, far)
		}
	})
	b.Logf("nodes fine %d %d coarse %d %d points %d", len(e.fineNear.nodes), len(e.fineFar.nodes), len(e.coarseNear.nodes), len(e.coarseFar.nodes), e.base.n*replicates)
}

func BenchmarkStream4(b *testing.B) {
	b.Run("RMa", func(b *testing.B) { benchmarkEngine(b, 2, class(scatter.RuralMacro, true)) })
	b.Run("UMi", func(b *testing.B) { benchmarkEngine(b, 2, class(scatter.UrbanMicro, false)) })
}

func BenchmarkStream8(b *testing.B) {
	b.Run("RMa", func(b *testing.B) { benchmarkEngine(b, 4, class(scatter.RuralMacro, true)) })
	b.Run("UMi", func(b *testing.B) { benchmarkEngine(b, 4, class(scatter.UrbanMicro, false)) })
}

// BenchmarkCovariance is R_V and R_H of two crossed panels at the wide end of UMi, all bodies moved, at both accuracies.
func BenchmarkCovariance(b *testing.B) {
	around := class(scatter.UrbanMicro, false)
	near, _ := row(2, 0.5)
	m := newMount(near, lambda)
	for name, tolerance := range map[string]float64{"fine": fineTolerance, "coarse": coarseTolerance} {
		b.Run(name, func(b *testing.B) {
			s := newSpectrum(m, &around.Far, tolerance)
			v, h := make([]complex128, 16), make([]complex128, 16)
			turn := 0.0
			for b.Loop() {
				turn += 1e-6
				near[0].Skew, near[1].Skew = turn, -turn
				s.update(near)
				s.covariance(m.ports, v, h)
			}
			b.ReportMetric(float64(len(s.nodes)), "directions")
		})
	}
}
