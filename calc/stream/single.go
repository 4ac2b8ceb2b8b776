package stream

import "math"

// singleChain is E log₂(1 + ρ|h|²) of a Rice-distributed h, where |E h|² = direct and the scattered power is scatter,
// both already times ρ:
//
//	E ln(1+X) = ∫₀^∞ (e^{−t}/t)(1 − M(t)) dt,  M(t) = E e^{−tX} = e^{−t·direct/(1+t·scatter)}/(1 + t·scatter)
//
// With t = e^y the integrand is analytic in |Im y| < π/2 and falls off exponentially to the left, doubly so to the
// right: the trapezoid of step 0.5 is exact to e^{−2π·(π/2)/0.5} = 3e-9.
func singleChain(direct, scatter float64) float64 {
	total := direct + scatter
	if !(total > 0) {
		return 0
	}
	if scatter <= 1e-12*total {
		return math.Log1p(direct) / math.Ln2
	}
	const h = 0.5
	y := -math.Log(total+1) - 21 // 1 − M ≈ t·total below: e^{−21} is 8e-10 of the answer
	grow := math.Exp(h)
	sum := 0.0
	for t := math.Exp(y); t < 25; t *= grow {
		q := 1 + t*scatter
		sum += math.Exp(-t) * (1 - math.Exp(-t*direct/q)/q)
	}
	return h * sum / math.Ln2
}

// singleChainGuess ranks pairs: ln(1+x) − ½ var/(1+x)² with the moments of X, cheap and in the right order except among
// pairs that are nearly equal.
func singleChainGuess(direct, scatter float64) float64 {
	x := direct + scatter
	variance := scatter * (scatter + 2*direct)
	return math.Log1p(x) - 0.5*variance/((1+x)*(1+x))
}
