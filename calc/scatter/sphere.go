package scatter

import "math"

// Resolution says how finely a field varies over the directions that a quadrature is to resolve.
type Resolution struct {
	Tolerance        float64 // of each covariance, against the power received
	PhaseAz, PhaseEl float64 // 2π/λ times the horizontal and the vertical extent of the array
	BeamAz, BeamEl   float64 // narrowest half-power widths, rad; 0 where the pattern does not vary
}

// Node is one direction of a quadrature with its share of the power; the shares sum to 1.
type Node struct{ Azimuth, Elevation, Weight float64 }

// Nodes returns a product quadrature over the spectrum,
//
//	∫ p(Ω) f(Ω) dΩ ≈ Σ w f(Ω)
//
// as coarse as keeps test fields of the stated resolution (plane-wave phases along and across the array, under the main
// lobe of a pattern) within the tolerance. Densities narrow against the field get the Gauss rule of their own weight,
// smooth ones equal steps, wide ones with a cusp panels of Gauss-Legendre
// graded toward it.
func (a *Angular) Nodes(r Resolution) []Node {
	az := density{form: a.AzimuthForm, sigma: a.AzimuthSpread, mean: a.AzimuthMean, lo: a.AzimuthMean - math.Pi, hi: a.AzimuthMean + math.Pi, periodic: true}
	el := density{form: a.ElevationForm, sigma: a.ElevationSpread, mean: a.ElevationMean, lo: -math.Pi / 2, hi: math.Pi / 2}
	x, wx := az.rule(r.Tolerance, r.PhaseAz, r.BeamAz)
	y, wy := el.rule(r.Tolerance, r.PhaseEl, r.BeamEl)
	least := 1e-2 * r.Tolerance / float64(len(x)*len(y))
	nodes := make([]Node, 0, len(x)*len(y))
	total := 0.0
	for i := range x {
		for j := range y {
			if w := wx[i] * wy[j]; w > least {
				nodes = append(nodes, Node{x[i], y[j], w})
				total += w
			}
		}
	}
	for i := range nodes {
		nodes[i].Weight /= total
	}
	return nodes
}

// density is one factor of the spectrum, not normalised.
type density struct {
	form                Form
	sigma, mean, lo, hi float64
	periodic            bool
}

func (d *density) at(x float64) float64 {
	x -= d.mean
	switch d.form {
	case Laplacian:
		return math.Exp(-math.Sqrt2 * math.Abs(x) / d.sigma)
	case Gaussian:
		return math.Exp(-0.5 * (x / d.sigma) * (x / d.sigma))
	case VonMises:
		return math.Exp((math.Cos(x) - 1) / (d.sigma * d.sigma))
	case Cosine:
		return math.Cos(x + d.mean)
	}
	return 1
}

// reach is how far from its mean the density has fallen so far that what lies beyond holds less than tol of the power.
func (d *density) reach(tol float64) float64 {
	l := -math.Log(tol)
	switch d.form {
	case Laplacian:
		return d.sigma * l / math.Sqrt2
	case Gaussian:
		return d.sigma * math.Sqrt(2*l)
	case VonMises:
		// cos x − 1 ≤ −2x²/π² up to π: a Gaussian that is wider lies above it.
		return d.sigma * math.Pi / 2 * math.Sqrt(l)
	}
	return math.Inf(1)
}

// panels is a composite Gauss-Legendre rule of m points a panel. Panels start at first and grow with their distance from
// the mean, no wider than widest, and within three lobes of the mean, where a main lobe may point, no wider than lobe.
func (d *density) panels(m int, first, widest, lobe, tol float64) (x, w []float64) {
	at, weight := legendre(m)
	reach := d.reach(tol)
	side := func(sign, limit float64) {
		limit = math.Min(limit, reach)
		for from := 0.0; from < limit; {
			width := math.Min(math.Max(first, from), widest)
			width = math.Min(width, math.Max(lobe, from/3))
			if limit-from < 1.5*width {
				width = limit - from
			}
			for i := range at {
				p := d.mean + sign*(from+width*at[i])
				x = append(x, p)
				w = append(w, width*weight[i]*d.at(p))
			}
			from += width
		}
	}
	side(-1, d.mean-d.lo)
	side(1, d.hi-d.mean)
	total := 0.0
	for _, v := range w {
		total += v
	}
	for i := range w {
		w[i] /= total
	}
	return x, w
}

// trapezoid is the rule of n equal steps within reach of the mean, midpoints.
func (d *density) trapezoid(n int, reach float64) (x, w []float64) {
	x, w = make([]float64, n), make([]float64, n)
	total := 0.0
	for i := range x {
		x[i] = d.mean + reach*(2*(float64(i)+0.5)/float64(n)-1)
		w[i] = d.at(x[i])
		if x[i] < d.lo || x[i] > d.hi {
			w[i] = 0
		}
		total += w[i]
	}
	for i := range w {
		w[i] /= total
	}
	return x, w
}

// rule picks, of the families that suit the density, the rule with the fewest nodes that holds the tolerance. What it is
// held against is a rule of panels far finer.
func (d *density) rule(tol, phase, beam float64) (x, w []float64) {
	shaped := d.form == Laplacian || d.form == Gaussian || d.form == VonMises
	if shaped && d.sigma < 1e-9 {
		return []float64{d.mean}, []float64{1}
	}
	half := (d.hi - d.lo) / 2
	scale := half
	if shaped {
		scale = d.sigma
	}
	narrow := scale
	if beam > 0 {
		narrow = math.Min(narrow, beam)
	}
	// wide is the panel over which m points still integrate plane-wave phases to better than 1e-6: their half-phase is
	// at most 0.6 m − 1 (Gauss-Legendre resolves π/2 per point at best and converges from there).
	wide := func(m int) float64 {
		h := half
		if phase > 0 {
			h = math.Min(h, 2*(0.6*float64(m)-1)/phase)
		}
		return h
	}
	lobe := func(m int) float64 {
		if beam > 0 {
			return 0.15 * float64(m) * beam
		}
		return math.Inf(1)
	}
	fineX, fineW := d.panels(12, narrow, 0.7*wide(12), 0.7*lobe(12), 1e-2*tol)
	want := d.trial(fineX, fineW, phase, beam)
	best := len(fineX)
	x, w = fineX, fineW
	keep := func(tx, tw []float64) bool {
		if len(tx) >= best {
			return true // no better than what there is: the family has nothing to offer
		}
		power := tol * real(want[0])
		for i, v := range d.trial(tx, tw, phase, beam) {
			dr, di := real(v)-real(want[i]), imag(v)-imag(want[i])
			if !(dr*dr+di*di <= power*power) {
				return false
			}
		}
		x, w, best = tx, tw, len(tx)
		return true
	}
	if shaped && scale*phase < 8 {
		alpha, beta := recurrence(fineX, fineW, 24)
		for _, n := range []int{2, 3, 4, 5, 6, 8, 10, 13, 16, 20, 24} {
			if n > len(alpha) || n >= best {
				break
			}
			if tx, tw := gauss(alpha[:n], beta[:n]); keep(tx, tw) {
				break
			}
		}
	}
	if d.form == Gaussian || d.form == VonMises || d.form == Uniform && d.periodic {
		// Equal steps converge exponentially for what is smooth and falls off or closes on itself.
		reach := math.Min(d.reach(0.1*tol), half)
		for n := 8; n < best; n += 2 + n/6 {
			if tx, tw := d.trapezoid(n, reach); keep(tx, tw) {
				break
			}
		}
	}
	for _, m := range []int{3, 5, 8, 12} {
		for _, f := range []float64{1.4, 1, 0.7} {
			if tx, tw := d.panels(m, f*narrow*float64(m)/4, f*wide(m), f*lobe(m), 0.1*tol); keep(tx, tw) {
				break
			}
		}
	}
	return x, w
}

// trial integrates the test fields: for two orientations of the array and two pointings of the beam. The first element
// is the power under the aimed beam.
func (d *density) trial(x, w []float64, phase, beam float64) []complex128 {
	out := make([]complex128, 5)
	for i := range x {
		u := x[i] - d.mean
		aimed, off := w[i], w[i]
		if beam > 0 {
			// The power pattern is ½ at ±beam/2: exp(−4 ln2 (u/beam)²).
			aimed *= math.Exp(-4 * math.Ln2 * (u / beam) * (u / beam))
			v := u/beam - 0.5
			off *= math.Exp(-4 * math.Ln2 * v * v)
		}
		s1, c1 := math.Sincos(phase * math.Sin(u))
		s2, c2 := math.Sincos(phase * math.Sin(u+1))
		out[0] += complex(aimed, 0)
		out[1] += complex(aimed*c1, aimed*s1)
		out[2] += complex(aimed*c2, aimed*s2)
		out[3] += complex(off*c1, off*s1)
		out[4] += complex(off*c2, off*s2)
	}
	return out
}

// recurrence returns the first n coefficients of the orthogonal polynomials of a discrete measure (Stieltjes'
// procedure; Gautschi, Orthogonal Polynomials, section 2.2). beta[0] is the total weight.
func recurrence(x, w []float64, n int) (alpha, beta []float64) {
	alpha, beta = make([]float64, n), make([]float64, n)
	prev, cur := make([]float64, len(x)), make([]float64, len(x))
	for i := range cur {
		cur[i] = 1
	}
	last := 1.0
	for k := range n {
		var norm, moment float64
		for i := range x {
			q := w[i] * cur[i] * cur[i]
			norm += q
			moment += q * x[i]
		}
		if !(norm > 0) {
			return alpha[:k], beta[:k]
		}
		alpha[k] = moment / norm
		beta[k] = norm / last
		last = norm
		for i := range x {
			next := (x[i]-alpha[k])*cur[i] - beta[k]*prev[i]
			if k == 0 {
				next = (x[i] - alpha[k]) * cur[i]
			}
			prev[i], cur[i] = cur[i], next
		}
	}
	return alpha, beta
}

// gauss returns the Gauss rule of the Jacobi matrix (alpha, beta): nodes are its eigenvalues, found by counting signs
// (Sturm), weights follow from the orthonormal polynomials there.
func gauss(alpha, beta []float64) (x, w []float64) {
	n := len(alpha)
	lo, hi := math.Inf(1), math.Inf(-1)
	for i := range n {
		r := 0.0
		if i > 0 {
			r += math.Sqrt(beta[i])
		}
		if i+1 < n {
			r += math.Sqrt(beta[i+1])
		}
		lo, hi = math.Min(lo, alpha[i]-r), math.Max(hi, alpha[i]+r)
	}
	below := func(t float64) int { // eigenvalues less than t
		count := 0
		q := 1.0
		for i := range n {
			b := 0.0
			if i > 0 {
				b = beta[i] / q
			}
			q = alpha[i] - t - b
			if q == 0 {
				q = 1e-300
			}
			if q < 0 {
				count++
			}
		}
		return count
	}
	x, w = make([]float64, n), make([]float64, n)
	for k := range n {
		a, b := lo, hi
		for range 60 {
			m := (a + b) / 2
			if below(m) > k {
				b = m
			} else {
				a = m
			}
		}
		x[k] = (a + b) / 2
		// Orthonormal polynomials: √β_{i+1} p_{i+1} = (x − α_i) p_i − √β_i p_{i−1}, p_0 = 1/√β_0.
		sum, prev, cur := 0.0, 0.0, 1/math.Sqrt(beta[0])
		for i := range n {
			sum += cur * cur
			if i+1 < n {
				next := (x[k] - alpha[i]) * cur
				if i > 0 {
					next -= math.Sqrt(beta[i]) * prev
				}
				prev, cur = cur, next/math.Sqrt(beta[i+1])
			}
		}
		w[k] = 1 / sum
	}
	return x, w
}
