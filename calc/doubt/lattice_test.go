package doubt

import (
	"math"
	"testing"
)

// kinship is how strongly two components leave a pattern between them: one over
// the least |h₁h₂| with h₁a + h₂b ≡ 0 (mod n), which for a rank-1 lattice bounds
// the correlation of any two functions of the two variables. It hangs on b/a alone.
func kinship(n int) func(a, b int) float64 {
	figure := make([]float64, n)
	for c := 1; c < n; c += 2 {
		least := n
		for h := 1; h < n/2; h++ {
			r := h * c % n
			least = min(least, h*min(r, n-r))
		}
		figure[c] = 1 / float64(least)
	}
	inverse := make([]int, n)
	for a := 1; a < n; a += 2 {
		x := 1
		for range 12 { // Newton's iteration modulo a power of two
			x = x * (2 - a*x%n + n) % n
		}
		inverse[a] = x
	}
	return func(a, b int) float64 { return figure[b*inverse[a]%n] }
}

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
	kin := kinship(n)
	nearest := make([]float64, n)
	var z []uint16
	for j := range dims {
		gamma := math.Max(0.05, 0.9*math.Pow(0.93, float64(j)))
		best, bestScore := 0, math.Inf(1)
		for c := 1; c < n/2; c += 2 {
			sum := 0.0
			for i := range product {
				sum += product[i] * (1 + gamma*kernel[i*c%n])
			}
			score := (sum/float64(n) - 1) / gamma
			score = math.Max(score, 0) + 40*nearest[c]*nearest[c]
			if score < bestScore*(1-1e-9) {
				best, bestScore = c, score
			}
		}
		z = append(z, uint16(best))
		for c := 1; c < n/2; c += 2 {
			nearest[c] = math.Max(nearest[c], math.Max(kin(best, c), kin(best, n-c)))
		}
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
