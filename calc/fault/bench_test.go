package fault

import (
	"math/rand/v2"
	"testing"
)

// One ranking of a crossed pair with every figure of both ends.
func BenchmarkRank(b *testing.B) {
	s := newSim(rand.New(rand.NewPCG(1, 1)))
	s.tied, s.detailed, s.oneEnd = true, true, false
	var none [simPorts]float64
	sheet, v := decode(b, s.document(s.build(truth{Lossy, 0, -1}, 0, none, none)))
	for b.Loop() {
		if _, p := Rank(sheet, v); p != nil {
			b.Fatal(p)
		}
	}
}
