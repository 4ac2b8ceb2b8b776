package stream

import (
	"math"
	"slices"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

// mount is one end: its bodies as built, what they share, and scratch to evaluate them where they hang.
type mount struct {
	bodies []antenna.Body // patterns and ports; positions and angles as planned
	units  []unit         // ports that share a body and a place on it
	ports  []port
	twin   []port // what is sampled instead of ports, nil where they serve themselves: see twins
	polar  [][4]complex128
	k      float64 // 2π/λ
	dipole bool    // every body is a half-wave dipole that couples to its neighbours
}

// unit is a place on a body where one or more ports have their element.
type unit struct {
	body, first int // first port there, counted within the body
}

type port struct {
	body, local, unit int
	v, h              complex128 // Jones vector
}

func newMount(bodies []antenna.Body, wavelength float64) *mount {
	m := &mount{bodies: bodies, k: 2 * math.Pi / wavelength}
	m.dipole = true
	for b := range bodies {
		if p := bodies[b].Pattern; p == nil || p.Kind != antenna.Dipole {
			m.dipole = false
		}
		for i := range bodies[b].Ports {
			p := &bodies[b].Ports[i]
			u := -1
			for j := range m.units {
				if m.units[j].body == b {
					q := &bodies[b].Ports[m.units[j].first]
					if q.Right == p.Right && q.Up == p.Up && q.Forward == p.Forward {
						u = j
					}
				}
			}
			if u < 0 {
				u = len(m.units)
				m.units = append(m.units, unit{b, i})
			}
			v, h := p.Jones()
			m.ports = append(m.ports, port{b, i, u, v, h})
		}
	}
	m.split()
	if m.dipole && (len(bodies) < 2 || !m.parallel(bodies)) {
		m.dipole = false
	}
	return m
}

// split finds the units that hold two ports and takes their polar decomposition E = U P, E the two Jones vectors as rows
// and U unitary. Rate and streams stay when a unitary matrix mixes ports, so that P may be sampled for E: it is the
// identity for any orthogonal pair, which makes the entries of H nearly independent whatever the slant.
func (m *mount) split() {
	m.polar = make([][4]complex128, len(m.units))
	found := false
	m.twin = append([]port(nil), m.ports...)
	for u := range m.units {
		var pair []int
		for i := range m.ports {
			if m.ports[i].unit == u {
				pair = append(pair, i)
			}
		}
		if len(pair) != 2 {
			continue
		}
		a, b := &m.ports[pair[0]], &m.ports[pair[1]]
		// G = EᴴE, P = (G + √det G · I)/√(tr G + 2√det G): the square root of a 2×2 matrix (Cayley-Hamilton).
		g11, g22 := abs2(a.v)+abs2(b.v), abs2(a.h)+abs2(b.h)
		g12 := conj(a.v)*a.h + conj(b.v)*b.h
		det := math.Sqrt(math.Max(g11*g22-abs2(g12), 0))
		scale := math.Sqrt(g11 + g22 + 2*det)
		m.polar[u] = [4]complex128{complex((g11+det)/scale, 0), g12 / complex(scale, 0), conj(g12) / complex(scale, 0), complex((g22+det)/scale, 0)}
		m.twin[pair[0]].local, m.twin[pair[1]].local = -1, -2 // first and second row of P
		found = true
	}
	if !found {
		m.twin = nil
		return
	}
	// First rows before second rows: V apart from H, so that what scatters apart stands apart in the matrices.
	slices.SortStableFunc(m.twin, func(a, b port) int {
		second := func(p port) int {
			if p.local == -2 {
				return 1
			}
			return 0
		}
		return second(a) - second(b)
	})
}

// twins turns P of each pair against the skew of its body, again a unitary mixture, so that its rows see V and H of the
// mount frame however the body is skewed.
func (m *mount) twins(bodies []antenna.Body) []port {
	if m.twin == nil {
		return m.ports
	}
	for i := range m.twin {
		t := &m.twin[i]
		if t.local >= 0 {
			continue
		}
		p := &m.polar[t.unit]
		sn, cs := math.Sincos(bodies[t.body].Skew)
		s, c := complex(sn, 0), complex(cs, 0)
		if t.local == -1 {
			t.v, t.h = c*p[0]-s*p[2], c*p[1]-s*p[3]
		} else {
			t.v, t.h = s*p[0]+c*p[2], s*p[1]+c*p[3]
		}
	}
	return m.twin
}

// parallel reports whether the dipoles hang near enough parallel, one port each along the axis, for the coupling model:
// within 10° of the first, which changes the mutual impedance by its cosine, 1.5 %.
func (m *mount) parallel(bodies []antenna.Body) bool {
	_, first, _ := bodies[0].Axes()
	for i := range bodies {
		if len(bodies[i].Ports) != 1 || math.Abs(math.Sin(bodies[i].Ports[0].Slant)) > 1e-9 {
			return false
		}
		_, u, _ := bodies[i].Axes()
		if first[0]*u[0]+first[1]*u[1]+first[2]*u[2] < 0.9848 {
			return false
		}
	}
	return true
}

// hung overlays the pose of at onto the body as built: position and angles move, pattern and ports stay.
func hung(built, at *antenna.Body) antenna.Body {
	b := *at
	b.Pattern, b.Ports = built.Pattern, built.Ports
	return b
}

// spectrum is a quadrature over the directions one end sees, with the fields of that end's units on it.
type spectrum struct {
	m       *mount
	nodes   []antenna.Direction
	root    []float64   // √weight per node
	cached  []pose      // per body: the pose whose fields are stored
	valid   []bool      // per body
	cosPsi  [][]float64 // per body and node
	sinPsi  [][]float64
	gain    [][]float64 // pattern × √weight
	re, im  [][]float64 // per unit and node: pattern × √weight × e^{jkΩ·r}
	grams   [][4]complex128
	gramOK  []bool
	apart   []bool // per pair of units: too far for any correlation
	changed []bool
}

type pose struct{ right, up, forward, azimuth, tilt, skew float64 }

func poseOf(b *antenna.Body) pose {
	return pose{b.Right, b.Up, b.Forward, b.Azimuth, b.Tilt, b.Skew}
}

func newSpectrum(m *mount, a *scatter.Angular, tolerance float64) *spectrum {
	s := &spectrum{m: m}
	r, apart := m.resolution(a, tolerance)
	s.apart = apart
	s.take(a.Nodes(r), tolerance)
	nb, nu := len(m.bodies), len(m.units)
	s.cached, s.valid, s.changed = make([]pose, nb), make([]bool, nb), make([]bool, nb)
	flat := make([]float64, (3*nb+2*nu)*len(s.nodes))
	take := func() []float64 {
		x := flat[:len(s.nodes):len(s.nodes)]
		flat = flat[len(s.nodes):]
		return x
	}
	for range nb {
		s.cosPsi = append(s.cosPsi, take())
		s.sinPsi = append(s.sinPsi, take())
		s.gain = append(s.gain, take())
	}
	for range nu {
		s.re = append(s.re, take())
		s.im = append(s.im, take())
	}
	s.grams, s.gramOK = make([][4]complex128, nu*nu), make([]bool, nu*nu)
	return s
}

// take keeps the nodes that matter: the weakest, seen through the patterns as planned, are left out as long as they hold
// together less than a third of the tolerance of the power received.
func (s *spectrum) take(nodes []scatter.Node, tolerance float64) {
	sights := make([]antenna.Sight, len(s.m.bodies))
	for b := range sights {
		sights[b] = s.m.bodies[b].Ready()
	}
	power := make([]float64, len(nodes))
	all := make([]antenna.Direction, len(nodes))
	total := 0.0
	for i, n := range nodes {
		all[i] = antenna.Toward(n.Azimuth, n.Elevation)
		for b := range sights {
			g := sights[b].View(&all[i]).Gain
			power[i] = math.Max(power[i], n.Weight*g*g)
		}
		total += power[i]
	}
	sorted := slices.Clone(power)
	slices.Sort(sorted)
	least, sum := 0.0, 0.0
	for _, p := range sorted {
		if sum += p; sum > tolerance/3*total {
			least = p * (1 - 1e-6) // nodes that are alike by symmetry stay together, whatever their last bit
			break
		}
	}
	for i, n := range nodes {
		if power[i] >= least {
			s.nodes = append(s.nodes, all[i])
			s.root = append(s.root, math.Sqrt(n.Weight))
		}
	}
}

// decorrelated is the product of wave number, distance and spread beyond which two places count as uncorrelated: a
// Laplacian leaves 2/q² = 1.3e-3 of correlation there, twice that at 20° of spread, its square below 1e-5.
const decorrelated = 40

// resolution is how finely this end's field varies over direction: the extent of the array as planned, plus a wavelength
// for what a crew may move, and its narrowest main lobe. Pairs of units too far apart for any correlation are marked and
// need no resolving.
func (m *mount) resolution(a *scatter.Angular, tolerance float64) (r scatter.Resolution, apart []bool) {
	r = scatter.Resolution{Tolerance: tolerance}
	least := func(w *float64, b float64) {
		if b > 0 && (*w == 0 || b < *w) {
			*w = b
		}
	}
	for i := range m.bodies {
		// A body skewed or leaning by up to 20° cuts a narrow elevation lobe aslant: along azimuth it is then 1/sin 20° = 3
		// times as wide, and the other way round.
		az, el := m.bodies[i].Pattern.Widths()
		least(&r.BeamAz, az)
		least(&r.BeamAz, 3*el)
		least(&r.BeamEl, el)
		least(&r.BeamEl, 3*az)
	}
	// A narrow lobe sees only its own part of a wide spread; its power pattern has the standard deviation width/2.355.
	seen := func(form scatter.Form, sigma, beam float64) float64 {
		if form == scatter.Uniform || form == scatter.Cosine {
			return 0 // correlation dies out too slowly to be cut off
		}
		if beam > 0 {
			sigma = 1 / math.Sqrt(1/(sigma*sigma)+2.355*2.355/(beam*beam))
		}
		return sigma
	}
	sa, se := seen(a.AzimuthForm, a.AzimuthSpread, r.BeamAz), seen(a.ElevationForm, a.ElevationSpread, r.BeamEl)
	n := len(m.units)
	apart = make([]bool, n*n)
	var across, up float64
	for i := range m.units {
		for j := range i {
			p, q := m.units[i], m.units[j]
			r0, u0, f0 := m.bodies[p.body].PortPosition(p.first)
			r1, u1, f1 := m.bodies[q.body].PortPosition(q.first)
			if p.body != q.body && (m.k*math.Abs(r0-r1)*sa > decorrelated || m.k*math.Abs(u0-u1)*se > decorrelated) {
				apart[i*n+j], apart[j*n+i] = true, true
				continue
			}
			across = math.Max(across, math.Hypot(r0-r1, f0-f1))
			up = math.Max(up, math.Abs(u0-u1))
		}
	}
	if len(m.bodies) > 1 {
		across += 2 * math.Pi / m.k
		up += 2 * math.Pi / m.k
	}
	r.PhaseAz, r.PhaseEl = m.k*across, m.k*up
	return r, apart
}

// resolvable reports whether a quadrature over the spectrum stays within reason: about 200,000 directions.
func (m *mount) resolvable(a *scatter.Angular) bool {
	r, _ := m.resolution(a, fineTolerance)
	span := func(form scatter.Form, sigma, half float64) float64 {
		if form == scatter.Uniform || form == scatter.Cosine {
			return half
		}
		return math.Min(10*sigma, half)
	}
	lobe := func(beam float64) float64 {
		if beam > 0 {
			return 1 / beam
		}
		return 0
	}
	// About one direction for each radian of phase, and a few for each main lobe and for the shape of the density.
	az := 40 + span(a.AzimuthForm, a.AzimuthSpread, math.Pi)*2*(r.PhaseAz+4*lobe(r.BeamAz))
	el := 40 + span(a.ElevationForm, a.ElevationSpread, math.Pi/2)*2*(r.PhaseEl+4*lobe(r.BeamEl))
	return az*el < 4e5
}

// fields brings the stored fields of every body to where it hangs now.
func (s *spectrum) fields(bodies []antenna.Body) {
	k := s.m.k
	for b := range bodies {
		p := poseOf(&bodies[b])
		if s.valid[b] && s.cached[b] == p {
			s.changed[b] = false
			continue
		}
		s.changed[b] = true
		body := hung(&s.m.bodies[b], &bodies[b])
		cp, sp, gain := s.cosPsi[b], s.sinPsi[b], s.gain[b]
		if old := &s.cached[b]; !s.valid[b] || old.azimuth != p.azimuth || old.tilt != p.tilt || old.skew != p.skew {
			view := body.Ready()
			for i := range s.nodes {
				v := view.View(&s.nodes[i])
				cp[i], sp[i], gain[i] = v.Cos, v.Sin, v.Gain*s.root[i]
			}
		}
		for u := range s.m.units {
			if s.m.units[u].body != b {
				continue
			}
			r, up, f := body.PortPosition(s.m.units[u].first)
			re, im := s.re[u], s.im[u]
			if r == 0 && up == 0 && f == 0 {
				copy(re, gain)
				clear(im)
				continue
			}
			r, up, f = r*k, up*k, f*k
			for i := range s.nodes {
				d := &s.nodes[i]
				sn, cs := math.Sincos(r*d.Right + up*d.Up + f*d.Forward)
				re[i], im[i] = gain[i]*cs, gain[i]*sn
			}
		}
		s.cached[b], s.valid[b] = p, true
	}
}

// covariance fills R_V and R_H of the given ports, row by row:
//
//	R_p,mn = ∫ p(Ω) F_m^p F_n^{p*} e^{+jkΩ·(r_m−r_n)} dΩ
//
// from the four products of cos ψ and sin ψ of each pair of units. fields and grams must be up to date.
func (s *spectrum) covariance(ports []port, rv, rh []complex128) {
	n, nu := len(ports), len(s.m.units)
	for i := range n {
		a := &ports[i]
		for j := i; j < n; j++ {
			b := &ports[j]
			g := &s.grams[a.unit*nu+b.unit]
			cc, cs, sc, ss := g[0], g[1], g[2], g[3]
			if a.unit > b.unit { // a body with several element places may list its ports across them
				g = &s.grams[b.unit*nu+a.unit]
				cc, cs, sc, ss = conj(g[0]), conj(g[2]), conj(g[1]), conj(g[3])
			}
			bv, bh := conj(b.v), conj(b.h)
			v := a.v*bv*cc - a.v*bh*cs - a.h*bv*sc + a.h*bh*ss
			h := a.v*bv*ss + a.v*bh*sc + a.h*bv*cs + a.h*bh*cc
			rv[i*n+j], rv[j*n+i] = v, conj(v)
			rh[i*n+j], rh[j*n+i] = h, conj(h)
		}
	}
}

// update brings fields and grams to where the bodies hang.
func (s *spectrum) update(bodies []antenna.Body) {
	s.fields(bodies)
	nu := len(s.m.units)
	for u := range nu {
		for v := u; v < nu; v++ {
			bu, bv := s.m.units[u].body, s.m.units[v].body
			if s.gramOK[u*nu+v] && !s.changed[bu] && !s.changed[bv] {
				continue
			}
			if !s.apart[u*nu+v] {
				s.grams[u*nu+v] = s.gram(u, v)
			}
			s.gramOK[u*nu+v] = true
		}
	}
}

// gram is Σ of a unit's field times another's conjugate, times cos·cos, cos·sin, sin·cos and sin·sin of their turns.
func (s *spectrum) gram(u, v int) (g [4]complex128) {
	bu, bv := s.m.units[u].body, s.m.units[v].body
	cu, su, cv, sv := s.cosPsi[bu], s.sinPsi[bu], s.cosPsi[bv], s.sinPsi[bv]
	if u == v {
		var cc, cs, ss float64
		re, im := s.re[u], s.im[u]
		for i := range re {
			p := re[i]*re[i] + im[i]*im[i]
			pc := p * cu[i]
			cc += pc * cu[i]
			cs += pc * su[i]
			ss += p * su[i] * su[i]
		}
		return [4]complex128{complex(cc, 0), complex(cs, 0), complex(cs, 0), complex(ss, 0)}
	}
	ur, ui, vr, vi := s.re[u], s.im[u], s.re[v], s.im[v]
	n := len(ur)
	ui, vr, vi, cu, su, cv, sv = ui[:n], vr[:n], vi[:n], cu[:n], su[:n], cv[:n], sv[:n]
	var ccr, cci, csr, csi, scr, sci, ssr, ssi float64
	for i := range ur {
		x := ur[i]*vr[i] + ui[i]*vi[i]
		y := ui[i]*vr[i] - ur[i]*vi[i]
		xc, yc, xs, ys := x*cu[i], y*cu[i], x*su[i], y*su[i]
		ccr += xc * cv[i]
		cci += yc * cv[i]
		csr += xc * sv[i]
		csi += yc * sv[i]
		scr += xs * cv[i]
		sci += ys * cv[i]
		ssr += xs * sv[i]
		ssi += ys * sv[i]
	}
	return [4]complex128{complex(ccr, cci), complex(csr, csi), complex(scr, sci), complex(ssr, ssi)}
}

func conj(z complex128) complex128 { return complex(real(z), -imag(z)) }

func abs2(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// sandwich replaces r by c r cᴴ.
func sandwich(r, c []complex128, n int) {
	t := make([]complex128, n*n)
	for i := range n {
		for j := range n {
			var s complex128
			for k := range n {
				s += c[i*n+k] * r[k*n+j]
			}
			t[i*n+j] = s
		}
	}
	for i := range n {
		for j := range n {
			var s complex128
			for k := range n {
				s += t[i*n+k] * conj(c[j*n+k])
			}
			r[i*n+j] = s
		}
	}
}

// coupling is the matrix by which dipoles that stand together receive, against each alone.
func (m *mount) coupling(bodies []antenna.Body) []complex128 {
	n := len(m.ports)
	at := make([][3]float64, n)
	right, up, forward := bodies[0].Axes()
	for i := range at {
		b := hung(&m.bodies[i], &bodies[i])
		r, u, f := b.PortPosition(0)
		k := m.k / (2 * math.Pi)
		r, u, f = r*k, u*k, f*k
		// Across the first dipole's axis, along it, across again.
		at[i] = [3]float64{
			r*right[0] + u*right[1] + f*right[2],
			r*up[0] + u*up[1] + f*up[2],
			r*forward[0] + u*forward[1] + f*forward[2],
		}
	}
	c := make([]complex128, n*n)
	antenna.CouplingMatrix(c, at)
	return c
}
