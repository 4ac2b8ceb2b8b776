package scatter

import (
	"math"
	"math/cmplx"
)

// Spectrum is the distribution of arrival azimuths about their mean, before any
// antenna pattern.
type Spectrum struct {
	Kind      SpectrumKind
	SpreadRad float64 // σ of the untruncated density (SpectrumLaplacian, SpectrumGaussian, SpectrumSector)
	Kappa     float64 // concentration (SpectrumVonMises)
}

// SpectrumKind names the form of a spectrum.
type SpectrumKind uint8

// The kinds of spectrum.
const (
	SpectrumUniform2D SpectrumKind = iota // every azimuth alike, all in the horizontal plane
	SpectrumUniform3D                     // every direction of the sphere alike
	SpectrumLaplacian                     // exp(−√2|φ|/σ), cut at ±180° about the mean
	SpectrumGaussian                      // exp(−φ²/2σ²), cut at ±180° about the mean
	SpectrumVonMises                      // exp(κ cos φ)
	SpectrumSector                        // uniform within ±√3 σ of the mean
)

// SpectrumSectorMaxRad is the largest σ of a SpectrumSector: √3 σ reaches half a turn.
const SpectrumSectorMaxRad = math.Pi / 1.7320508075688772

// Correlation is the complex correlation of two like elements that receive a
// spectrum of uncorrelated arrivals,
//
//	ρ = E[exp(j 2π d sin φ)]
//
// d being their spacing in wavelengths and φ the azimuth from the broadside of
// their axis, positive toward the first element; mean is the mean of φ. Closed
// forms where there is one:
//
//	SpectrumUniform2D  J₀(2πd)              SpectrumUniform3D  sin(2πd)/(2πd)
//
// and else the series of Jacobi and Anger,
//
//	ρ = Σₙ Jₙ(2πd) aₙ exp(jn·mean),   aₙ = E[cos n(φ − mean)]
//
// which ends by itself: Jₙ(x) falls faster than exponentially beyond n = x. The
// absolute error is below 1e-12 for d ≤ 1000. A negative d gives the conjugate.
//
// References: Abramowitz and Stegun 9.1.42–45; Abdi and Kaveh, IEEE J. Sel. Areas
// Commun. 20 (2002) for von Mises; Salz and Winters, IEEE Trans. Veh. Technol. 43
// (1994) for the series.
func Correlation(s Spectrum, d, meanRad float64) complex128 {
	if d < 0 {
		return cmplx.Conj(Correlation(s, -d, meanRad))
	}
	x := 2 * math.Pi * d
	switch s.Kind {
	case SpectrumUniform2D:
		return complex(math.J0(x), 0)
	case SpectrumUniform3D:
		if x < 1e-4 { // the series' next term is x⁴/120, below 1e-18
			return complex(1-x*x/6, 0)
		}
		return complex(math.Sin(x)/x, 0)
	}
	n := orders(x)
	a := s.harmonics(n)
	j := besselJ(x, n)
	// Jₙ(x) with n and −n together: even orders give cos, odd ones j·sin.
	re, im := j[0], 0.0
	turn, step := complex(1, 0), cmplx.Rect(1, meanRad)
	for i := 1; i <= n; i++ {
		turn *= step
		if i%2 == 0 {
			re += 2 * j[i] * a[i] * real(turn)
		} else {
			im += 2 * j[i] * a[i] * imag(turn)
		}
	}
	return complex(re, im)
}

// Envelope is the correlation of the envelopes of two zero-mean complex Gaussian
// signals of complex correlation ρ, |ρ|² to the approximation that the trade
// uses; the exact figure is lower by at most 0.03. It holds without a line of
// sight only.
// Reference: Jakes, Microwave Mobile Communications, 1.5.
func Envelope(rho complex128) float64 {
	return real(rho)*real(rho) + imag(rho)*imag(rho)
}

// orders is how many terms of the series matter: beyond it |Jₙ(x)| < 1e-17.
// For n = x + c·x^(1/3) the Bessel function falls like an Airy function,
// exp(−(2/3)·2^(1/2)·c^(3/2)): c = 13 gives e^−44; 20 more serve small x.
func orders(x float64) int {
	return int(x+13*math.Cbrt(x)) + 20
}

// besselJ returns J₀(x) … Jₙ(x), n ≥ orders(x), by Miller's downward recurrence,
//
//	Jₖ₋₁ = (2k/x) Jₖ − Jₖ₊₁,   J₀ + 2 Σ J₂ₖ = 1
//
// Reference: Abramowitz and Stegun 9.12, example 1.
func besselJ(x float64, n int) []float64 {
	j := make([]float64, n+1)
	if x < 1e-9 { // J₁ = x/2 is the first to feel x, J₂ = x²/8 is nothing
		j[0], j[1] = 1, x/2
		return j
	}
	const start, tooLarge = 1e-280, 1e250
	above, here := 0.0, start
	sum := 0.0
	for k := n + 1; k >= 1; k-- { // here = J_k up to a factor
		if k <= n {
			j[k] = here
			if k%2 == 0 {
				sum += 2 * here
			}
		}
		above, here = here, 2*float64(k)/x*here-above
		if math.Abs(here) > tooLarge {
			for i := k; i <= n; i++ {
				j[i] /= tooLarge
			}
			above, here, sum = above/tooLarge, here/tooLarge, sum/tooLarge
		}
	}
	j[0] = here
	sum += here
	for k := range j {
		j[k] /= sum
	}
	return j
}

// harmonics returns a₀ … aₙ, aₖ = E[cos k(φ − mean)].
func (s Spectrum) harmonics(n int) []float64 {
	a := make([]float64, n+1)
	a[0] = 1
	switch s.Kind {
	case SpectrumLaplacian:
		// ∫ exp(−b|φ|) cos kφ over ±π, b = √2/σ, in closed form.
		b := math.Sqrt2 / s.SpreadRad
		edge := math.Exp(-b * math.Pi)
		for k := 1; k <= n; k++ {
			q := float64(k) / b
			e := edge
			if k%2 == 1 {
				e = -edge
			}
			a[k] = (1 - e) / ((1 + q*q) * (1 - edge))
		}
	case SpectrumGaussian:
		s.gaussian(a)
	case SpectrumVonMises:
		vonMises(s.Kappa, a)
	case SpectrumSector:
		w := math.Sqrt(3) * s.SpreadRad
		for k := 1; k <= n; k++ {
			x := w * float64(k)
			if x > 1e-8 {
				a[k] = math.Sin(x) / x
			} else {
				a[k] = 1
			}
		}
	case SpectrumUniform2D, SpectrumUniform3D:
		// a₀ alone: no direction stands out
	default:
		panic("scatter: spectrum of no kind")
	}
	return a
}

// gaussianUncut is the σ below which the cut at ±180° is beyond 8.5 σ and takes
// less than 2e-17 of the density away.
const gaussianUncut = math.Pi / 8.5

func (s Spectrum) gaussian(a []float64) {
	if s.SpreadRad < gaussianUncut {
		for k := range a {
			z := float64(k) * s.SpreadRad
			a[k] = math.Exp(-z * z / 2)
		}
		return
	}
	// With a wide spread the cut leaves a corner, so that aₖ falls like 1/k² only.
	// Gauss-Legendre over 0…π is exact to rounding once it has a few nodes more
	// than the highest harmonic has half waves.
	n := len(a)
	at, weight := legendre(n + 40)
	cosine, before, now := make([]float64, len(at)), make([]float64, len(at)), make([]float64, len(at))
	sum := 0.0
	for i := range at {
		phi := math.Pi * at[i]
		weight[i] *= math.Exp(-phi * phi / (2 * s.SpreadRad * s.SpreadRad))
		sum += weight[i]
		cosine[i] = math.Cos(phi)
		before[i], now[i] = 1, cosine[i]
	}
	for k := 1; k < n; k++ {
		t := 0.0
		for i := range at {
			t += weight[i] * now[i]
			before[i], now[i] = now[i], 2*cosine[i]*now[i]-before[i] // cos (k+1)φ
		}
		a[k] = t / sum
	}
}

// vonMises fills a with Iₖ(κ)/I₀(κ) from the ratio of neighbours,
//
//	rₖ = Iₖ₊₁/Iₖ = 1/(2(k+1)/κ + rₖ₊₁)
//
// downward, which forgets where it began. It begins at Amos's bound, good to
// O(1/κ), and far enough above the last harmonic that the rest is forgotten.
// Reference: Gautschi, SIAM Review 9 (1967); Amos, Math. Comp. 28 (1974).
func vonMises(kappa float64, a []float64) {
	if kappa == 0 {
		return
	}
	n := len(a) - 1
	top := n + 40 + int(12*math.Sqrt(kappa))
	k := float64(top)
	r := kappa / (k + 0.5 + math.Sqrt((k+1.5)*(k+1.5)+kappa*kappa))
	for i := top - 1; i >= 0; i-- {
		r = 1 / (2*float64(i+1)/kappa + r)
		if i < n {
			a[i+1] = r // rᵢ for now
		}
	}
	for i := 1; i <= n; i++ {
		a[i] *= a[i-1]
	}
}

// KappaOfSpread is the concentration that the trade pairs with a spread,
//
//	κ = 1/σ²
//
// the limit of small spreads.
func KappaOfSpread(spreadRad float64) float64 { return 1 / (spreadRad * spreadRad) }
