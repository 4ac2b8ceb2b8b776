package doubt

import (
	"math"
	"testing"
)

// componentByComponent builds the generating vector the way that lattice's comment
// says. Reference: Sloan and Reztsov, Math. Comp. 71 (2002).
func componentByComponent(n, dims int) []uint16 {
	kernel := make([]float64, n)
	for i := range kernel {
		x := float64(i) / float64(n)
		kernel[i] = 2 * math.Pi * math.Pi * (x*x - x + 1.0/6)
	}
	product := make([]float64, n)
	for i := range product {
		product[i] = 1
	}
	taken := map[int]bool{}
	var z []uint16
	for j := range dims {
		gamma := math.Max(0.02, 0.9*math.Pow(0.93, float64(j)))
		best, bestError := 0, math.Inf(1)
		for c := 1; c < n/2; c += 2 {
			if taken[c] {
				continue
			}
			sum := 0.0
			for i := range product {
				sum += product[i] * (1 + gamma*kernel[i*c%n])
			}
			if sum < bestError*(1-1e-12) {
				best, bestError = c, sum
			}
		}
		taken[best] = true
		z = append(z, uint16(best))
		mean := 0.0
		for i := range product {
			product[i] *= 1 + gamma*kernel[i*best%n]
			mean += product[i] / float64(n)
		}
		for i := range product {
			product[i] /= mean
		}
	}
	return z
}

func TestLatticeIsWhatItsCommentSays(t *testing.T) {
	want := componentByComponent(BlockSize, len(lattice))
	for j := range want {
		if lattice[j] != want[j] {
			t.Fatalf("component %d is %d, the construction gives %d; whole: %v", j, lattice[j], want[j], want)
		}
	}
}
