package stream

import (
	"math"
)

// channel is the law of H for one geometry, as vec(H) = mean + L·w with w independent: Gaussian entries with L the
// Cholesky factor of the covariance, or phasors with one matrix each.
//
// It is kept twice: for the ports as they are, which gives powers and correlations, and for their twins, unitary mixtures
// that carry the same rate and are cheaper to sample.
type channel struct {
	far, near int
	direct    []complex128 // vec(H̄) of the ports: far port f, near port n at n·far+f
	power     []float64    // E|h − h̄|² of the ports
	mean      []complex128 // vec(H̄) of the twins
	lower     []complex128 // L packed by rows: row i has i+1 entries
	runs      []run        // what of L is not zero, row after row
	ends      []int        // runs of row i are those before ends[i]
	paths     [][]complex128
	random    bool

	rv, rh, sv, sh     []complex128 // R of the near and of the far end's ports, by polarization
	trv, trh, tsv, tsh []complex128 // the same of the twins

	h, gram []complex128 // scratch
}

func newChannel(far, near, paths int) *channel {
	n := far * near
	c := &channel{far: far, near: near, direct: make([]complex128, n), mean: make([]complex128, n), power: make([]float64, n), h: make([]complex128, n)}
	m := min(far, near)
	c.gram = make([]complex128, m*m)
	if paths > 0 {
		for range paths {
			c.paths = append(c.paths, make([]complex128, n))
		}
		return c
	}
	for _, r := range []*[]complex128{&c.rv, &c.rh, &c.trv, &c.trh} {
		*r = make([]complex128, near*near)
	}
	for _, r := range []*[]complex128{&c.sv, &c.sh, &c.tsv, &c.tsh} {
		*r = make([]complex128, far*far)
	}
	c.lower = make([]complex128, n*(n+1)/2)
	return c
}

// run is a stretch of a row of L.
type run struct{ from, to, at int } // columns, and where the first one is in lower

// sparse lists the runs of L. Entries below 1e-12 of the largest count as zero: polarizations that scatter apart leave
// three quarters of L empty.
func (c *channel) sparse() {
	c.runs, c.ends = c.runs[:0], c.ends[:0]
	most := 0.0
	for _, l := range c.lower {
		most = math.Max(most, abs2(l))
	}
	least := 1e-24 * most
	at := 0
	for i := range c.far * c.near {
		open := false
		for j := range i + 1 {
			if abs2(c.lower[at+j]) > least {
				if !open {
					c.runs = append(c.runs, run{j, j, at + j})
					open = true
				}
				c.runs[len(c.runs)-1].to = j + 1
			} else {
				open = false
			}
		}
		c.ends = append(c.ends, len(c.runs))
		at += i + 1
	}
}

// row is Σ_j L_ij w_j.
func (c *channel) row(i int, w []complex128) complex128 {
	from := 0
	if i > 0 {
		from = c.ends[i-1]
	}
	var s complex128
	for _, r := range c.runs[from:c.ends[i]] {
		s += product(c.lower[r.at:r.at+r.to-r.from], w[r.from:r.to])
	}
	return s
}

// powers fills power and random from the ends' covariances, scale being 1/(1+K).
func (c *channel) powers(scale, same, cross float64) {
	c.random = false
	for n := range c.near {
		v, h := real(c.rv[n*c.near+n]), real(c.rh[n*c.near+n])
		for f := range c.far {
			p := scale * ((same*v+cross*h)*real(c.sv[f*c.far+f]) + (cross*v+same*h)*real(c.sh[f*c.far+f]))
			c.power[n*c.far+f] = p
			c.random = c.random || p > 0
		}
	}
}

// factor builds the covariance of vec(H_S) of the twins,
//
//	C[(j,i),(l,k)] = s Σ_pq κ_pq R_near,q[j,l] R_far,p[i,k]
//
// and replaces it by its Cholesky factor. Rows whose remaining variance is below 1e-13 of their own get none: ports that
// share place and polarization receive the same scatter.
func (c *channel) factor(scale, same, cross float64) {
	nf, nn := c.far, c.near
	ks, kc := complex(scale*same, 0), complex(scale*cross, 0)
	at := 0
	for j := range nn {
		for i := range nf {
			for l := range j + 1 {
				v, h := c.trv[j*nn+l], c.trh[j*nn+l]
				a, b := ks*v+kc*h, kc*v+ks*h
				last := nf
				if l == j {
					last = i + 1
				}
				for k := range last {
					c.lower[at] = a*c.tsv[i*nf+k] + b*c.tsh[i*nf+k]
					at++
				}
			}
		}
	}
	n := nf * nn
	for i := range n {
		ri := c.lower[i*(i+1)/2:][: i+1 : i+1]
		own := real(ri[i])
		var left float64
		for j := range i {
			rj := c.lower[j*(j+1)/2:][: j+1 : j+1]
			d := real(rj[j])
			if d == 0 {
				ri[j] = 0
				continue
			}
			re, im := real(ri[j]), imag(ri[j])
			for k, y := range rj[:j] {
				x := ri[k]
				re -= real(x)*real(y) + imag(x)*imag(y)
				im -= imag(x)*real(y) - real(x)*imag(y)
			}
			re, im = re/d, im/d
			ri[j] = complex(re, im)
			left += re*re + im*im
		}
		if d := own - left; d > 1e-13*own && own > 0 {
			ri[i] = complex(math.Sqrt(d), 0)
		} else {
			ri[i] = 0
		}
	}
	c.sparse()
}

// sum fills power from the paths.
func (c *channel) sum() {
	clear(c.power)
	c.random = false
	for _, p := range c.paths {
		for i, v := range p {
			c.power[i] += abs2(v)
			if v != 0 {
				c.random = true
			}
		}
	}
}

// at puts one draw into h.
func (c *channel) at(w []complex128) {
	h := c.h
	copy(h, c.mean)
	if len(c.paths) > 0 {
		for k, p := range c.paths {
			wr, wi := real(w[k]), imag(w[k])
			for i, v := range p {
				h[i] += complex(real(v)*wr-imag(v)*wi, real(v)*wi+imag(v)*wr)
			}
		}
		return
	}
	for i := range h {
		h[i] += c.row(i, w)
	}
}

// rate is log₂ det(I + ρHHᴴ) and Σ ρλ/(1+ρλ) of the matrix in h.
func (c *channel) rate(rho float64) (bits, streams float64) {
	nf, nn, m := c.far, c.near, c.gram
	h := c.h
	n := nf
	if nf <= nn {
		for i := range nf {
			for j := 0; j <= i; j++ {
				var re, im float64
				for k := 0; k < len(h); k += nf {
					a, b := h[k+i], h[k+j]
					re += real(a)*real(b) + imag(a)*imag(b)
					im += imag(a)*real(b) - real(a)*imag(b)
				}
				m[i*n+j] = complex(rho*re, rho*im)
			}
		}
	} else {
		n = nn
		for i := range nn {
			a := h[i*nf : (i+1)*nf]
			for j := 0; j <= i; j++ {
				b := h[j*nf : (j+1)*nf]
				var re, im float64
				for k := range a {
					re += real(a[k])*real(b[k]) + imag(a[k])*imag(b[k])
					im += imag(a[k])*real(b[k]) - real(a[k])*imag(b[k])
				}
				m[i*n+j] = complex(rho*re, rho*im)
			}
		}
	}
	// Cholesky in place, the inverse of the diagonal kept beside; then tr M⁻¹ = Σ |(L⁻¹)_ij|², column by column.
	det := 1.0
	for i := range n {
		m[i*n+i] += 1
	}
	var inv [maxPorts]float64
	for j := range n {
		d := real(m[j*n+j])
		rj := m[j*n : j*n+j]
		for _, v := range rj {
			d -= real(v)*real(v) + imag(v)*imag(v)
		}
		if !(d >= 1) { // M ≥ I: what falls below is rounding
			d = 1
		}
		det *= d
		if det > 1e200 {
			bits += math.Log2(det)
			det = 1
		}
		q := 1 / math.Sqrt(d)
		inv[j] = q
		for i := j + 1; i < n; i++ {
			ri := m[i*n : i*n+j]
			re, im := real(m[i*n+j]), imag(m[i*n+j])
			for k, v := range ri {
				u := rj[k]
				re -= real(v)*real(u) + imag(v)*imag(u)
				im -= imag(v)*real(u) - real(v)*imag(u)
			}
			m[i*n+j] = complex(re*q, im*q)
		}
	}
	bits += math.Log2(det)
	trace := 0.0
	var x [maxPorts]complex128
	for j := range n {
		x[j] = complex(inv[j], 0)
		trace += inv[j] * inv[j]
		for i := j + 1; i < n; i++ {
			var re, im float64
			for k := j; k < i; k++ {
				a, b := m[i*n+k], x[k]
				re -= real(a)*real(b) - imag(a)*imag(b)
				im -= real(a)*imag(b) + imag(a)*real(b)
			}
			x[i] = complex(re*inv[i], im*inv[i])
			trace += real(x[i])*real(x[i]) + imag(x[i])*imag(x[i])
		}
	}
	return bits, float64(n) - trace
}

// maxPorts is the most ports an end may have. Eight is what mounts carry; sixteen lets published tables be checked.
const maxPorts = 16

// turned replaces the twins' mean and covariances by those of Uᴴ H V, U and V unitary and stored by columns.
func (c *channel) turned(u, v []complex128) {
	nf, nn := c.far, c.near
	t := make([]complex128, max(nf, nn)*max(nf, nn))
	for n := range nn {
		for f := range nf {
			var s complex128
			for k := range nf {
				s += conj(u[f*nf+k]) * c.mean[n*nf+k]
			}
			t[n*nf+f] = s
		}
	}
	for n := range nn {
		for f := range nf {
			var s complex128
			for k := range nn {
				s += t[k*nf+f] * v[n*nn+k]
			}
			c.mean[n*nf+f] = s
		}
	}
	// Rᵥ[a,b] = Σ V_na R_nl V*_lb at the near end, with V replaced by U* at the far end.
	mix := func(r, q []complex128, n int, star bool) {
		for a := range n {
			for l := range n {
				var s complex128
				for k := range n {
					x := q[a*n+k]
					if star {
						x = conj(x)
					}
					s += x * r[k*n+l]
				}
				t[a*n+l] = s
			}
		}
		for a := range n {
			for b := range a + 1 {
				var s complex128
				for k := range n {
					x := q[b*n+k]
					if !star {
						x = conj(x)
					}
					s += t[a*n+k] * x
				}
				r[a*n+b], r[b*n+a] = s, conj(s)
			}
		}
	}
	mix(c.trv, v, nn, false)
	mix(c.trh, v, nn, false)
	mix(c.tsv, u, nf, true)
	mix(c.tsh, u, nf, true)
}
