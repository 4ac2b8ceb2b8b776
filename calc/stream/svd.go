package stream

import "math"

// leastColumn is 250 dB below the whole: rounding of double precision is at 320.
const leastColumn = 3e-13

// svd is the singular value decomposition A = U Σ Vᴴ of a rows × cols matrix stored by columns (entry (i,j) at
// j·rows+i): one-sided Jacobi rotations on the columns (Hestenes; Demmel and Veselić, SIAM J. Matrix Anal. 13 (1992)),
// which finds small singular values to their own relative accuracy. Columns that are already orthogonal are left alone,
// so that block structure is kept.
//
// Columns that have shrunk below the share least of the whole are left as they are: what they hold is rounding, or small
// enough that its direction would be; least is at least leastColumn. Columns orthogonal to a thousandth of that are not
// turned either.
//
// s holds cols values in falling order. u is rows × rows and v cols × cols, by columns, both unitary; columns of u beyond
// the rank complete it.
func svd(a []complex128, rows, cols int, least float64) (u []complex128, s []float64, v []complex128) {
	w := append([]complex128(nil), a...)
	v = make([]complex128, cols*cols)
	for j := range cols {
		v[j*cols+j] = 1
	}
	// Scaled to 1, squares neither overflow nor vanish.
	size := 0.0
	for _, x := range w {
		size = math.Max(size, math.Max(math.Abs(real(x)), math.Abs(imag(x))))
	}
	total := 0.0
	for i, x := range w {
		if size > 0 {
			w[i] = complex(real(x)/size, imag(x)/size)
		}
		total += abs2(w[i])
	}
	// Columns of one length that are orthogonal but for rounding would be turned by an angle of chance.
	orthogonal := math.Max(1e-15, 1e-3*least)
	for range 60 {
		rotated := false
		for p := range cols {
			for q := p + 1; q < cols; q++ {
				x, y := w[p*rows:(p+1)*rows], w[q*rows:(q+1)*rows]
				var xx, yy float64
				var xy complex128
				for i := range x {
					xx += abs2(x[i])
					yy += abs2(y[i])
					xy += conj(x[i]) * y[i]
				}
				g := math.Hypot(real(xy), imag(xy))
				if g <= orthogonal*math.Sqrt(xx*yy) || min(xx, yy) <= least*least*total {
					continue
				}
				rotated = true
				zeta := (yy - xx) / (2 * g)
				t := 1 / (math.Abs(zeta) + math.Sqrt(1+zeta*zeta))
				if zeta < 0 {
					t = -t
				}
				c := 1 / math.Sqrt(1+t*t)
				sn := c * t
				phase := xy / complex(g, 0)
				rotate := func(x, y []complex128) {
					for i := range x {
						b := conj(phase) * y[i]
						x[i], y[i] = complex(c, 0)*x[i]-complex(sn, 0)*b, complex(sn, 0)*x[i]+complex(c, 0)*b
					}
				}
				rotate(x, y)
				rotate(v[p*cols:(p+1)*cols], v[q*cols:(q+1)*cols])
			}
		}
		if !rotated {
			break
		}
	}
	s = make([]float64, cols)
	for j := range cols {
		for _, x := range w[j*rows : (j+1)*rows] {
			s[j] += abs2(x)
		}
		s[j] = math.Sqrt(s[j])
	}
	for j := 1; j < cols; j++ { // insertion sort, falling, stable
		for k := j; k > 0 && s[k] > s[k-1]*(1+1e-12); k-- {
			s[k], s[k-1] = s[k-1], s[k]
			swap(w, k, rows)
			swap(v, k, cols)
		}
	}
	u = make([]complex128, rows*rows)
	n := 0
	// upright makes column n orthogonal to those before it, twice over, and one long. For a small singular value the column
	// holds rounding at 2⁻⁵³ over its share, which this takes out.
	upright := func() {
		col := u[n*rows : (n+1)*rows]
		for range 2 {
			for k := range n {
				remove(col, u[k*rows:(k+1)*rows])
			}
			shrink(col, 1/math.Sqrt(norm2(col)))
		}
	}
	for ; n < min(rows, cols) && s[n] > least*math.Sqrt(total); n++ {
		for i := range rows {
			u[n*rows+i] = w[n*rows+i] / complex(s[n], 0)
		}
		upright()
	}
	for ; n < rows; n++ {
		// The unit vector that the columns so far reach least.
		best, far := 0, math.Inf(1)
		for i := range rows {
			reach := 0.0
			for k := range n {
				reach += abs2(u[k*rows+i])
			}
			if reach < far-1e-12 {
				best, far = i, reach
			}
		}
		u[n*rows+best] = 1
		upright()
	}
	for j := range s {
		s[j] *= size
	}
	return u, s, v
}

// swap exchanges column k of a matrix with the one before.
func swap(a []complex128, k, rows int) {
	for i := range rows {
		a[k*rows+i], a[(k-1)*rows+i] = a[(k-1)*rows+i], a[k*rows+i]
	}
}
