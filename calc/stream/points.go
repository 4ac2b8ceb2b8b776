package stream

import (
	"math"
	"math/bits"
	"slices"

	"gonum.org/v1/gonum/mathext"
)

// replicates is the number of independent randomisations of the Sobol points; the standard error comes from the
// scatter of their means. With 16 its own relative error is 1/√30, 18 %, which is why targets are set below the limit.
const replicates = 16

// points are randomised quasi-random draws of a far × near matrix with independent circular Gaussian entries of unit
// power (or of random phases), the same at every call: I. M. Sobol's sequence with the direction numbers of Joe and Kuo,
// scrambled in each replicate by a random lower triangular matrix and a random digital shift a dimension (Matoušek 1998).
//
// Entries may be drawn in two ways that are the same in law and differ in how much of the answer sits in few
// coordinates: each entry by itself, or with the distance of each column of H from the ones before it drawn first
// (triangular). log det of a full-rank matrix is a sum over the logarithms of those distances, so that in rich scatter
// the second needs a fraction of the points; near line of sight the first does. Distances are those of a reference
// channel, the plan's: for others they are still a lawful draw.
type points struct {
	rows, cols int      // of the matrix
	phases     bool     // rows·cols unit phasors instead of Gaussian entries
	reference  *channel // of triangular draws, nil for plain ones
	dims       int
	sobol      [][][digits]uint32 // scrambled direction numbers per replicate and dimension
	shift      [][]uint32         // per replicate and dimension
	state      [][]uint32         // running Sobol state per replicate, before the shift
	have       int                // points per replicate made so far
	draws      [replicates][]block
	quantile   *quantile
	radius     []*radial // by number of complex dimensions left
	work       *workspace
	seed       uint64
}

// splitmix is the generator of Steele, Lea and Flood (OOPSLA 2014); one step a call.
func splitmix(state *uint64) uint64 {
	*state += 0x9e3779b97f4a7c15
	z := *state
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

func newPoints(rows, cols int, phases bool, reference *channel) *points {
	p := &points{rows: rows, cols: cols, phases: phases, reference: reference}
	n := rows * cols
	p.dims = 2 * n
	if phases {
		p.dims = n
	}
	if p.reference != nil {
		p.dims += p.extra()
		for m := range rows + 1 {
			if m == 0 {
				p.radius = append(p.radius, nil)
				continue
			}
			p.radius = append(p.radius, newRadial(m))
		}
		p.prepare()
	}
	p.seed = 1
	plain := directions(min(p.dims, sobolDimensions))
	p.quantile = newQuantile()
	for range replicates {
		p.sobol = append(p.sobol, scrambled(plain, &p.seed))
		s := make([]uint32, len(plain))
		for j := range s {
			s[j] = uint32(splitmix(&p.seed) >> 32)
		}
		p.shift = append(p.shift, s)
		p.state = append(p.state, make([]uint32, len(plain)))
	}
	return p
}

// extra is the number of radii of a triangular draw.
func (p *points) extra() int { return min(p.rows, p.cols) }

// digits is how many direction numbers a dimension needs: points per replicate are below 2^digits.
const digits = 13

// directions returns the direction numbers of the first n dimensions.
func directions(n int) [][digits]uint32 {
	out := make([][digits]uint32, n)
	at := 0
	for d := range out {
		v := &out[d]
		if d == 0 {
			for i := range v {
				v[i] = 1 << (31 - i)
			}
			continue
		}
		poly := uint32(sobolTable[at])
		at++
		degree := 0
		for poly>>(degree+1) != 0 {
			degree++
		}
		for i := range degree {
			if i < digits {
				v[i] = uint32(sobolTable[at+i]) << (31 - i)
			}
		}
		at += degree
		for i := degree; i < digits; i++ {
			x := v[i-degree] ^ v[i-degree]>>degree
			for k := 1; k < degree; k++ {
				if poly>>(degree-k)&1 == 1 {
					x ^= v[i-k]
				}
			}
			v[i] = x
		}
	}
	return out
}

// scrambled applies Matoušek's scrambling to each dimension: a random lower triangular binary matrix with ones on its
// diagonal acts on the digits, most significant first. Column k of the matrix is the image of digit k.
func scrambled(plain [][digits]uint32, seed *uint64) [][digits]uint32 {
	out := make([][digits]uint32, len(plain))
	for d := range plain {
		var column [digits]uint32
		for k := range column {
			column[k] = 1<<(31-k) | uint32(splitmix(seed)>>32)&(1<<(31-k)-1)
		}
		for i, v := range plain[d] {
			for k := range column {
				if v>>(31-k)&1 == 1 {
					out[d][i] ^= column[k]
				}
			}
		}
	}
	return out
}

// block is a run of consecutive points: entry k of point i is at (i−from)·size+k.
type block struct {
	from, to int
	w        []complex128
}

// upTo makes sure that n points of each replicate exist. see, where not nil, is told each new point's replicate and vec(H) of the reference.
func (p *points) upTo(n int, see func(replicate int, h []complex128)) {
	if n <= p.have {
		return
	}
	size := p.rows * p.cols
	u := make([]float64, p.dims)
	all := make([]complex128, replicates*(n-p.have)*size)
	for r := range replicates {
		b := block{from: p.have, to: n, w: all[:(n-p.have)*size]}
		all = all[len(b.w):]
		state, shift, numbers := p.state[r], p.shift[r], p.sobol[r]
		// Dimensions beyond the table: a stream of its own for each replicate and starting point.
		beyond := p.seed + uint64(r)*0xd1342543de82ef95 + uint64(p.have)
		for i := b.from; i < n; i++ {
			if i > 0 {
				c := bits.TrailingZeros(uint(i)) // Gray code order (Antonov and Saleev)
				for j := range state {
					state[j] ^= numbers[j][c]
				}
			}
			for j := range state {
				u[j] = (float64(state[j]^shift[j]) + 0.5) / (1 << 32)
			}
			for j := len(state); j < p.dims; j++ {
				u[j] = (float64(splitmix(&beyond)>>11) + 0.5) / (1 << 53)
			}
			p.draw(b.w[(i-b.from)*size:][:size], u)
			if see != nil {
				see(r, p.work.h)
			}
		}
		p.draws[r] = append(p.draws[r], b)
	}
	p.have = n
}

// draw maps a point of the unit cube to a matrix, column after column.
func (p *points) draw(out []complex128, u []float64) {
	if p.phases {
		for i := range out {
			s, c := math.Sincos(2 * math.Pi * u[i])
			out[i] = complex(c, s)
		}
		return
	}
	at := 0
	if p.reference != nil {
		at = p.extra()
	}
	const half = math.Sqrt2 / 2
	for i := range out {
		out[i] = complex(p.quantile.at(u[at])*half, p.quantile.at(u[at+1])*half)
		at += 2
	}
	if p.reference != nil {
		p.triangulate(out, u[:p.extra()])
	}
}

// workspace holds what triangular draws need beside the reference: its columns grouped by their diagonal blocks L_kk,
// which are multiples of one another where columns see the far end alike, and scratch.
type workspace struct {
	group []int          // of each column; −1 where L_kk is singular
	block [][]complex128 // per group: L_kk packed by rows, its diagonal inverted
	basis [][]complex128 // per group: orthonormal columns
	count []int          // per group: how many
	h     []complex128   // vec(H) of the reference
	x     []complex128
}

func (p *points) prepare() {
	c, rows := p.reference, p.rows
	w := &workspace{h: make([]complex128, rows*p.cols), x: make([]complex128, rows)}
	for k := range p.cols {
		var l []complex128
		regular := true
		for i := range rows {
			r := k*rows + i
			row := c.lower[r*(r+1)/2+k*rows:][:i+1]
			regular = regular && row[i] != 0
			l = append(l, row...)
		}
		g := -1
		if regular {
			for o := range w.block {
				if multiple(l, w.block[o]) {
					g = o
				}
			}
			if g < 0 {
				g = len(w.block)
				w.block = append(w.block, l)
				w.basis = append(w.basis, make([]complex128, rows*rows))
			}
		}
		w.group = append(w.group, g)
	}
	for _, l := range w.block {
		at := 0
		for i := range rows {
			at += i
			l[at] = 1 / l[at]
			at++
		}
	}
	w.count = make([]int, len(w.block))
	p.work = w
}

// multiple reports whether two packed triangles differ by a factor only.
func multiple(a, b []complex128) bool {
	f := real(a[0]) / real(b[0])
	for i := range a {
		if d := a[i] - complex(f, 0)*b[i]; abs2(d) > 1e-16*abs2(a[0]) {
			return false
		}
	}
	return true
}

// triangulate replaces, column by column, the length of the part of w_k that moves column k of the reference's H off the
// columns before it: with h_k = … + L_kk w_k, the part of w_k orthogonal to L_kk⁻¹h_j, j < k. Its length is independent
// of its direction and of the rest, so that drawing it from a coordinate of its own keeps the law.
func (p *points) triangulate(out []complex128, u []float64) {
	c, rows, ws := p.reference, p.rows, p.work
	clear(ws.count)
	for k := range p.cols {
		col := out[k*rows : (k+1)*rows]
		if g := ws.group[k]; g >= 0 && k < len(u) {
			off := ws.x
			copy(off, col)
			basis, n := ws.basis[g], ws.count[g]
			for m := range n {
				remove(off, basis[m*rows:(m+1)*rows])
			}
			if length := norm2(off); length > 0 && n < rows {
				// The last columns stand in the fewest dimensions and matter most: they take the first coordinates.
				r := p.radius[rows-n].at(p.quantile.at(u[len(u)-1-k]))
				grow := r/math.Sqrt(length) - 1
				for i := range col {
					col[i] += complex(grow*real(off[i]), grow*imag(off[i]))
				}
			}
		}
		// h_k = mean + Σ_{j ≤ k} L_kj w_j: later columns are measured against it.
		h := ws.h[k*rows : (k+1)*rows]
		for i := range rows {
			r := k*rows + i
			h[i] = c.mean[r] + c.row(r, out)
		}
		// L⁻¹h_k joins the basis of each group that still has columns to come.
		for g, l := range ws.block {
			n := ws.count[g]
			if n >= rows || !slices.Contains(ws.group[k+1:], g) {
				continue
			}
			x := ws.basis[g][n*rows : (n+1)*rows]
			at := 0
			for i := range rows {
				t := h[i] - product(l[at:at+i], x)
				d := real(l[at+i])
				x[i] = complex(real(t)*d, imag(t)*d)
				at += i + 1
			}
			before := norm2(x)
			for m := range n {
				remove(x, ws.basis[g][m*rows:(m+1)*rows])
			}
			if after := norm2(x); after > 1e-20*before {
				shrink(x, 1/math.Sqrt(after))
				ws.count[g]++
			}
		}
	}
}

// product is Σ a_i b_i over the length of a.
func product(a, b []complex128) complex128 {
	var re, im float64
	b = b[:len(a)]
	for i, x := range a {
		y := b[i]
		re += real(x)*real(y) - imag(x)*imag(y)
		im += real(x)*imag(y) + imag(x)*real(y)
	}
	return complex(re, im)
}

func norm2(x []complex128) float64 {
	s := 0.0
	for _, v := range x {
		s += abs2(v)
	}
	return s
}

// remove takes out of x its part along the unit vector (or zero vector) b.
func remove(x, b []complex128) {
	var tr, ti float64
	x = x[:len(b)]
	for i, c := range b {
		y := x[i]
		tr += real(c)*real(y) + imag(c)*imag(y)
		ti += real(c)*imag(y) - imag(c)*real(y)
	}
	for i, c := range b {
		x[i] -= complex(tr*real(c)-ti*imag(c), tr*imag(c)+ti*real(c))
	}
}

func shrink(x []complex128, by float64) {
	for i := range x {
		x[i] = complex(by*real(x[i]), by*imag(x[i]))
	}
}

// quantile is the normal quantile, tabulated between 1/32 and 31/32 with cubic interpolation through the exact
// derivative (error below 2e-7) and computed outside.
type quantile struct {
	z, slope [quantileCells + 1]float64
}

const quantileCells = 512

func newQuantile() *quantile {
	q := &quantile{}
	for i := 1; i < quantileCells; i++ {
		z := mathext.NormalQuantile(float64(i) / quantileCells)
		q.z[i] = z
		q.slope[i] = math.Sqrt(2*math.Pi) * math.Exp(z*z/2) / quantileCells
	}
	return q
}

func (q *quantile) at(u float64) float64 {
	x := u * quantileCells
	i := int(x)
	if i < 16 || i >= quantileCells-16 {
		return mathext.NormalQuantile(u)
	}
	t := x - float64(i)
	d := q.z[i+1] - q.z[i]
	return q.z[i] + t*(q.slope[i]+t*(3*d-2*q.slope[i]-q.slope[i+1]+t*(q.slope[i]+q.slope[i+1]-2*d)))
}

// radial is the length of m independent unit-power complex Gaussians as a function of a normal variable z of the same
// probability: r² has the distribution P(m, r²) = Φ(z). Tabulated in z, where it is smooth to both ends.
type radial struct {
	r [radialCells + 1]float64
}

const (
	radialCells = 96
	radialReach = 6.4 // beyond lies 1.6e-10 of the probability, less than one point in all that are drawn
)

func newRadial(m int) *radial {
	t := &radial{}
	for i := range t.r {
		z := -radialReach + 2*radialReach*float64(i)/radialCells
		t.r[i] = math.Sqrt(gammaQuantile(m, z))
	}
	return t
}

// gammaQuantile solves P(m, x) = Φ(z) for whole m by Newton steps on the logarithm of the smaller tail.
func gammaQuantile(m int, z float64) float64 {
	// Wilson and Hilferty's approximation starts it; for the lower tail the leading term x^m/m! does better.
	k := 1 / (9 * float64(m))
	c := 1 - k + z*math.Sqrt(k)
	x := float64(m) * c * c * c
	lower := z < 0
	tail := 0.5 * math.Erfc(math.Abs(z)/math.Sqrt2)
	logFactorial, _ := math.Lgamma(float64(m) + 1)
	if lower {
		if y := math.Exp((math.Log(tail) + logFactorial) / float64(m)); !(x > y) {
			x = y
		}
	}
	if m == 1 {
		if lower {
			return -math.Log1p(-tail)
		}
		return -math.Log(tail)
	}
	want := math.Log(tail)
	for range 60 {
		var p float64
		if lower {
			p = mathext.GammaIncReg(float64(m), x)
		} else {
			p = mathext.GammaIncRegComp(float64(m), x)
		}
		density := math.Exp(float64(m-1)*math.Log(x) - x - logFactorial + math.Log(float64(m)))
		step := (math.Log(p) - want) * p / density
		if !lower {
			step = -step
		}
		next := x - step
		if next <= 0 {
			next = x / 2
		}
		if math.Abs(next-x) <= 1e-14*x {
			return next
		}
		x = next
	}
	return x
}

func (t *radial) at(z float64) float64 {
	x := (math.Min(math.Max(z, -radialReach), radialReach) + radialReach) * (radialCells / (2 * radialReach))
	i := min(max(int(x), 1), radialCells-2)
	s := x - float64(i)
	// Cubic through four neighbours.
	a, b, c, d := t.r[i-1], t.r[i], t.r[i+1], t.r[i+2]
	return b + s*(c-b+(s-1)*(((c-2*b+a)+(d-2*c+b))/4+(s-0.5)*(d-3*c+3*b-a)/6))
}
