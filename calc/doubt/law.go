package doubt

import "math"

// Propagate is the law of propagation of uncertainty to first order,
//
//	u_c² = Σᵢ Σⱼ cᵢ cⱼ u(xᵢ) u(xⱼ) r(xᵢ, xⱼ)
//
// c being the sensitivities and r the correlations (nil: none). For quantities
// that are linear in their inputs over their doubt; where one is even in an input
// use draws.
// Reference: JCGM 100:2008, equations (10) and (16).
func Propagate(c, u []float64, r func(i, j int) float64) float64 {
	sum := 0.0
	for i := range c {
		sum += c[i] * c[i] * u[i] * u[i]
		if r == nil {
			continue
		}
		for j := 0; j < i; j++ {
			sum += 2 * c[i] * c[j] * u[i] * u[j] * r(i, j)
		}
	}
	return math.Sqrt(math.Max(sum, 0))
}

// EffectiveDOF is the degrees of freedom of a combined uncertainty,
//
//	ν = u_c⁴ / Σ uᵢ⁴/νᵢ
//
// parts being uᵢ(y) = |cᵢ| u(xᵢ) and νᵢ their degrees of freedom, +Inf where
// exact. Returns +Inf where no part has finite ones.
// Reference: Welch and Satterthwaite, JCGM 100:2008, equation (G.2b).
func EffectiveDOF(parts, dof []float64) float64 {
	var sum, below float64
	for i, u := range parts {
		sum += u * u
		if !math.IsInf(dof[i], 1) {
			below += u * u * u * u / dof[i]
		}
	}
	if below == 0 {
		return math.Inf(1)
	}
	return sum * sum / below
}

// NormalQuantile is the z below which a standard normal variable stays with
// probability p, 0 < p < 1.
func NormalQuantile(p float64) float64 { return math.Sqrt2 * math.Erfinv(2*p-1) }

// StudentOfNormal turns a standard normal deviate z into the deviate of Student's
// t with ν degrees of freedom at the same probability, by the expansion of Fisher
// and Cornish to the fourth order in 1/ν,
//
//	t = z + g₁/ν + g₂/ν² + g₃/ν³ + g₄/ν⁴
//
// For ν ≥ 9, all that Pool makes, it is within 0.002 of exact up to |z| = 3 and
// within 0.02 up to |z| = 4. ν = 0 stands for no end of them: t = z.
// Reference: Abramowitz and Stegun 26.7.5.
func StudentOfNormal(z, dof float64) float64 {
	if dof == 0 {
		return z
	}
	z2 := z * z
	g1 := z * (z2 + 1) / 4
	g2 := z * ((5*z2+16)*z2 + 3) / 96
	g3 := z * (((3*z2+19)*z2+17)*z2 - 15) / 384
	g4 := z * ((((79*z2+776)*z2+1482)*z2-1920)*z2 - 945) / 92160
	return z + (g1+(g2+(g3+g4/dof)/dof)/dof)/dof
}
