package antenna

import "math"

// FreeSpaceImpedance is η₀ = √(μ₀/ε₀) in ohm (CODATA 2018: 376.730 313 668).
const FreeSpaceImpedance = 376.730313668

// SelfImpedance is the impedance in ohm of a thin half-wave dipole in free space, limit of vanishing radius:
//
//	Z₁₁ = η₀/(4π) · (Cin(2π) + j Si(2π)) = 73.079 + j 42.515
//
// Balanis, Antenna Theory, equations 8-60 and 8-61 with l = λ/2, where the terms in the radius vanish. Cin(2π) and
// Si(2π) are evaluated from their power series.
func SelfImpedance() complex128 {
	x := 2 * math.Pi
	var cin, si float64
	// Cin(x) = Σ (−1)^{n+1} x^{2n}/(2n (2n)!), Si(x) = Σ (−1)^n x^{2n+1}/((2n+1)(2n+1)!)
	term := x
	for n := 1; n < 60; n++ {
		sign := 1.0
		switch n % 4 {
		case 3, 0:
			sign = -1
		}
		if n%2 == 1 {
			si += sign * term / float64(n)
		} else {
			cin += sign * term / float64(n)
		}
		term *= x / float64(n+1)
	}
	return complex(FreeSpaceImpedance/(4*math.Pi)*cin, FreeSpaceImpedance/(4*math.Pi)*si)
}

// MutualImpedance is the impedance in ohm between two thin parallel half-wave dipoles by the induced electromotive
// force: their axes stand apart by the distance d and their centres are offset along the axis by h, both in wavelengths.
//
//	Z₂₁ = j η₀/(4π) ∫ sin k(λ/4 − |z|) [e^{−jkR₁}/R₁ + e^{−jkR₂}/R₂] dz,  |z| ≤ λ/4
//	R₁,₂ = √(d² + (h + z ∓ λ/4)²)
//
// (Balanis, Antenna Theory, section 8.6; sinusoidal currents, referred to the feed.) Side by side is h = 0; end to end
// is d = 0 with |h| > ½. The integral has no closed form here because it serves the positions between as well; it is
// taken by Gauss-Legendre on panels that shrink toward the near ends, to 1e-9 for d ≥ 0.01 or gaps ≥ 0.01.
//
// It panics when the dipoles touch: d = 0 and |h| ≤ ½.
func MutualImpedance(d, h float64) complex128 {
	d, h = math.Abs(d), math.Abs(h)
	if d == 0 && h <= 0.5 {
		panic("antenna: coupled dipoles touch")
	}
	var re, im float64
	k := 2 * math.Pi
	panel := func(a, b float64) {
		for _, t := range legendre8 {
			for _, sign := range [2]float64{-1, 1} {
				z := (a+b)/2 + sign*t.at*(b-a)/2
				w := t.weight * (b - a) / 2 * math.Sin(k*(0.25-math.Abs(z)))
				for _, end := range [2]float64{-0.25, 0.25} {
					r := math.Hypot(d, h+z-end)
					s, c := math.Sincos(k * r)
					re += w * s / r // j e^{−jx}/r = (sin x + j cos x)/r
					im += w * c / r
				}
			}
		}
	}
	// Where an end of the other dipole stands abreast of this one the integrand varies over a distance of d: panels halve
	// toward the ends and the middle.
	edges := [...]float64{0, 1. / 256, 1. / 64, 1. / 16, 1. / 8, 3. / 16, 0.25 - 1./64, 0.25 - 1./256, 0.25}
	for i := 1; i < len(edges); i++ {
		panel(edges[i-1], edges[i])
		panel(-edges[i], -edges[i-1])
	}
	// η₀/(4π) times the integral, z in wavelengths: dz/R has no dimension.
	f := FreeSpaceImpedance / (4 * math.Pi)
	return complex(f*re, f*im)
}

// legendre8 holds the positive half of the 16-point Gauss-Legendre rule on −1…1 (Abramowitz and Stegun, table 25.4).
var legendre8 = [8]struct{ at, weight float64 }{
	{0.095012509837637440, 0.189450610455068496},
	{0.281603550779258913, 0.182603415044923589},
	{0.458016777657227386, 0.169156519395002538},
	{0.617876244402643748, 0.149595988816576732},
	{0.755404408355003034, 0.124628971255533872},
	{0.865631202387831744, 0.095158511682492785},
	{0.944575023073232576, 0.062253523938647893},
	{0.989400934991649933, 0.027152459411754095},
}

// CouplingMatrix says what loads of Z₁₁* receive when n parallel half-wave dipoles stand together, against what each
// receives alone, row by row in out (n×n):
//
//	C = (Z₁₁ + Z₁₁*)(Z + Z₁₁* I)⁻¹
//
// with Z the impedance matrix: Z₁₁ on the diagonal, mutual impedances off it. At the dipoles' right, up and forward
// positions in wavelengths, up along their axes. By reciprocity it serves for transmission too. Open-circuited
// half-wave dipoles are taken as invisible (canonical minimum scattering), which is what induced EMF assumes.
func CouplingMatrix(out []complex128, position [][3]float64) {
	n := len(position)
	if len(out) != n*n {
		panic("antenna: coupling matrix of another size")
	}
	self := SelfImpedance()
	load := complex(real(self), -imag(self))
	a := make([]complex128, n*n)
	for i := range n {
		a[i*n+i] = self + load
		for j := range i {
			p, q := position[i], position[j]
			z := MutualImpedance(math.Hypot(p[0]-q[0], p[2]-q[2]), p[1]-q[1])
			a[i*n+j], a[j*n+i] = z, z
		}
	}
	// Gauss-Jordan with pivots; the matrix is small and, with passive loads, regular.
	for i := range out {
		out[i] = 0
	}
	for i := range n {
		out[i*n+i] = self + load
	}
	for c := range n {
		best := c
		for r := c + 1; r < n; r++ {
			if square(a[r*n+c]) > square(a[best*n+c]) {
				best = r
			}
		}
		if best != c {
			for j := range n {
				a[c*n+j], a[best*n+j] = a[best*n+j], a[c*n+j]
				out[c*n+j], out[best*n+j] = out[best*n+j], out[c*n+j]
			}
		}
		inv := 1 / a[c*n+c]
		for j := range n {
			a[c*n+j] *= inv
			out[c*n+j] *= inv
		}
		for r := range n {
			if f := a[r*n+c]; r != c && f != 0 {
				for j := range n {
					a[r*n+j] -= f * a[c*n+j]
					out[r*n+j] -= f * out[c*n+j]
				}
			}
		}
	}
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
