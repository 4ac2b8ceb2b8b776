package verdict

import (
	"math"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/antenna"
)

// TestLossTowardTheFarEndIsThePattern: the short way to the other end's direction
// agrees with the general view of package antenna.
func TestLossTowardTheFarEndIsThePattern(t *testing.T) {
	p := antenna.Pattern{Kind: antenna.Panel, BeamwidthAz: 1.1, BeamwidthEl: 0.3, FrontToBack: 25, Sidelobe: 18, ElectricalTilt: -0.07}
	rapid.Check(t, func(t *rapid.T) {
		angle := rapid.Float64Range(-1.2, 1.2)
		b := antenna.Body{Pattern: &p, Skew: angle.Draw(t, "skew"), Tilt: angle.Draw(t, "tilt"), Azimuth: 2 * angle.Draw(t, "azimuth")}
		rise := angle.Draw(t, "rise")
		toward := antenna.Toward(0, rise)
		s := b.Ready()
		want := -20 * math.Log10(s.View(&toward).Gain)
		m := &model{bodies: make([]body, 1)}
		x := make([]float64, quantities)
		x[skew], x[tilt], x[azimuth] = b.Skew, b.Tilt, b.Azimuth
		short := beam{m: m, pattern: &p}
		short.sin, short.cos = math.Sincos(rise)
		if got := short.loss(x); math.Abs(got-want) > 1e-5 { // the general view is made for speed, to a few parts in 10⁷
			t.Fatalf("%g dB, want %g", got, want)
		}
	})
}
