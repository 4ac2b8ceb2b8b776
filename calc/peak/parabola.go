package peak

import "math"

// parabola is L = a + b x + c x², with what least squares say of it.
type parabola struct {
	a, b, c   float64
	uc        float64 // standard uncertainty of c
	top, uTop float64 // level at the vertex and its standard uncertainty
	cov       [3][3]float64
	noise     float64 // pooled standard deviation of one reading
}

// pooledFreedom is how many degrees of freedom the stated doubt of a reading
// counts for beside the residuals.
const pooledFreedom = 3.0

// fitParabola fits by least squares, with c observed besides as c0 ± uc0 where
// uc0 > 0. ok is false where the readings leave it open.
func fitParabola(xs, ys []float64, c0, uc0, readingDoubt float64) (p parabola, ok bool) {
	// Scaled to −1 … 1, so that the normal equations keep their digits.
	scale := 0.0
	for _, x := range xs {
		scale = math.Max(scale, math.Abs(x))
	}
	if scale == 0 {
		return parabola{}, false
	}
	rows := len(xs)
	if uc0 > 0 {
		rows++
	}
	if rows < 3 {
		return parabola{}, false
	}
	// Sums of powers: the normal equations.
	var powers [5]float64
	var right [3]float64
	for i, x := range xs {
		z, zn := x/scale, 1.0
		for k := range powers {
			powers[k] += zn
			if k < 3 {
				right[k] += zn * ys[i]
			}
			zn *= z
		}
	}
	solve := func(noise float64) (beta [3]float64, inverse [3][3]float64, fine bool) {
		var m [3][3]float64
		r := right
		for i := range 3 {
			for j := range 3 {
				m[i][j] = powers[i+j]
			}
		}
		if uc0 > 0 {
			weight := noise / (uc0 * scale * scale)
			m[2][2] += weight * weight
			r[2] += weight * weight * c0 * scale * scale
		}
		if inverse, fine = invert(m); !fine {
			return beta, inverse, false
		}
		for i := range 3 {
			for j := range 3 {
				beta[i] += inverse[i][j] * r[j]
			}
		}
		return beta, inverse, true
	}
	// The weight of c0 hangs on the noise and the noise on the residuals: twice is
	// enough, the second changes it by a few per cent.
	noise := readingDoubt
	var beta [3]float64
	var inverse [3][3]float64
	freedom := 0.0
	for range 3 {
		if beta, inverse, ok = solve(noise); !ok {
			return parabola{}, false
		}
		squares := 0.0
		for i, x := range xs {
			z := x / scale
			d := ys[i] - (beta[0] + z*(beta[1]+z*beta[2]))
			squares += d * d
		}
		freedom = math.Max(0, float64(rows-3))
		noise = math.Sqrt((squares + pooledFreedom*readingDoubt*readingDoubt) / (freedom + pooledFreedom))
	}
	freedom += pooledFreedom
	// The variance of Student's t, so that few readings do not look sure.
	variance := noise * noise * freedom / (freedom - 2)
	unscale := [3]float64{1, scale, scale * scale}
	p.a, p.b, p.c = beta[0], beta[1]/scale, beta[2]/(scale*scale)
	for i := range 3 {
		for j := range 3 {
			p.cov[i][j] = variance * inverse[i][j] / (unscale[i] * unscale[j])
		}
	}
	p.uc, p.noise = math.Sqrt(p.cov[2][2]), noise
	p.top, p.uTop = p.a, math.Sqrt(p.cov[0][0])
	if p.c < 0 {
		v := -p.b / (2 * p.c)
		p.top = p.a + v*(p.b+v*p.c)
		p.uTop = p.spread([3]float64{1, v, v * v})
	}
	return p, true
}

// spread is the standard uncertainty of a linear form of the coefficients.
func (p parabola) spread(g [3]float64) float64 {
	sum := 0.0
	for i := range 3 {
		for j := range 3 {
			sum += g[i] * p.cov[i][j] * g[j]
		}
	}
	return math.Sqrt(math.Max(0, sum))
}

// peakDoubt is the standard uncertainty of the vertex −b/2c.
func (p parabola) peakDoubt() float64 {
	return p.spread([3]float64{0, -1 / (2 * p.c), p.b / (2 * p.c * p.c)})
}

// invert returns the inverse of a symmetric positive definite matrix of three by
// cofactors; fine is false where it is nearly singular. Three by three does not
// pay for a matrix library on the phone (gonum's mat weighs 155 kB there, packed).
func invert(m [3][3]float64) (inverse [3][3]float64, fine bool) {
	size := m[0][0] * m[1][1] * m[2][2]
	minor := func(r, c int) float64 {
		r1, r2, c1, c2 := (r+1)%3, (r+2)%3, (c+1)%3, (c+2)%3
		return m[r1][c1]*m[r2][c2] - m[r1][c2]*m[r2][c1]
	}
	det := m[0][0]*minor(0, 0) + m[0][1]*minor(0, 1) + m[0][2]*minor(0, 2)
	if !(det > 1e-12*size) { // by Hadamard det ≤ size; below 1e-12 no digits are left
		return inverse, false
	}
	for i := range 3 {
		for j := range 3 {
			inverse[i][j] = minor(j, i) / det
		}
	}
	return inverse, true
}
