package stream

import (
	"errors"
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

// Limit is what the bare line of sight between two sets of isotropic, vertically polarized elements carries.
type Limit struct {
	BitsPerSHz       float64
	EffectiveStreams float64
	Singular         []float64 // singular values of H_L, falling
	ConditionDB      float64   // 20 log₁₀ of the largest over the smallest; +Inf where H_L is singular
}

// LineOfSight computes it for positions (right, up, forward) in each end's own mount frame, in metres, with SNR ρ per
// chain, linear:
//
//	H_mn = (D₀/D_mn) e^{−jkD_mn}, exact distances;  log₂ det(I + ρHHᴴ)
//
// Errors: the ends touch, an element stands where another does, or there are more than 16 at an end. Bøhagen, Orten and
// Øien, IEEE Trans. Wireless Commun. 6 (2007); Sarris and Nix, IEEE Trans. Veh. Technol. 56 (2007).
func LineOfSight(near, far [][3]float64, distance, wavelength, snr float64) (Limit, error) {
	setup := Setup{Wavelength: wavelength, Distance: distance, SNR: snr, Around: scatter.Surroundings{Sight: true, K: math.Inf(1)}}
	e, err := prepare(setup, elements(near), elements(far))
	if err != nil {
		return Limit{}, err
	}
	e.load(elements(near), elements(far), false)
	e.channel.hold()
	var l Limit
	l.BitsPerSHz, l.EffectiveStreams = e.channel.rate(e.rho)
	rows, cols, h := len(far), len(near), e.channel.direct
	if cols > rows { // singular values of the transpose: the same, and no zeros beyond the rank
		t := make([]complex128, len(h))
		for n := range cols {
			for f := range rows {
				t[f*cols+n] = h[n*rows+f]
			}
		}
		h, rows, cols = t, cols, rows
	}
	_, l.Singular, _ = svd(h, rows, cols, leastColumn)
	l.ConditionDB = 20 * math.Log10(l.Singular[0]/l.Singular[cols-1])
	return l, nil
}

func elements(at [][3]float64) []antenna.Body {
	var out []antenna.Body
	for _, p := range at {
		out = append(out, antenna.Body{Right: p[0], Up: p[1], Forward: p[2], Ports: make([]antenna.Port, 1)})
	}
	return out
}

// BestSpacing is the distance between neighbours, in metres, at which the line of sight between two equal, parallel,
// uniform rows of n elements broadside to each other has n equal singular values:
//
//	d² = λD/n
//
// (d_near·d_far = λD/n where they differ.) Bøhagen, Orten and Øien 2007, equation for parallel arrays.
func BestSpacing(n int, distance, wavelength float64) float64 {
	return math.Sqrt(wavelength * distance / float64(n))
}

// Stream is one of the streams that a mount sends: how it weights its ports and where that sends.
type Stream struct {
	Weights []complex128 // per port, Σ|w|² = 1; the largest one real
	Gain    float64      // mean power gain of the stream, E‖H w‖², 1 for one planned, aligned, co-polar pair
	Share   float64      // Gain over the sum of all streams' gains
	Beam    []float64    // dB against one port's boresight, on the azimuths asked for; −100 where nothing is sent
}

var errStreams = errors.New("the geometry differs from the one the engine was built for in the number of bodies")

// Streams are the eigenvectors of the mean of HᴴH for the near end, or of HHᴴ (conjugated, as sent by reciprocity) for
// the far one, strongest first, each with its beam over the given azimuths (rad, clockwise off that end's forward) at the
// elevation of the other end.
//
//	E HᴴH w = g w;  beam(φ) = |Σ w_n F_n^V e^{jkΩ·r_n}|² + |Σ w_n F_n^H e^{jkΩ·r_n}|²
//
// Where gains are equal, as at the best line-of-sight spacing, any mixture of the streams is as good; one is shown.
func (e *Engine) Streams(near, far []antenna.Body, ofNear bool, azimuths []float64) ([]Stream, error) {
	if len(near) != len(e.near.bodies) || len(far) != len(e.far.bodies) {
		return nil, errStreams
	}
	e.load(near, far, false)
	c := e.channel
	n, other, m, bodies, up := c.near, c.far, e.near, near, e.setup.Elevation
	if !ofNear {
		n, other, m, bodies, up = c.far, c.near, e.far, far, -e.setup.Elevation
	}
	// T[j,l] = E Σ_i h_ij* h_il: the conjugate of the covariance of what this end receives from the other.
	t := make([]complex128, n*n)
	if c.random {
		copy(t, e.scatterCovariance(ofNear))
	}
	at := func(own, from int) complex128 {
		if ofNear {
			return c.direct[own*c.far+from]
		}
		return c.direct[from*c.far+own]
	}
	for j := range n {
		for l := range n {
			for i := range other {
				t[j*n+l] += at(j, i) * conj(at(l, i))
			}
		}
	}
	// The weights maximise w^T-sent power: h_i = Σ_j at(j,i) w_j, E|h|² = wᵀ t w* summed, so w is the conjugate of an
	// eigenvector of t (Hermitian, row by row = its transpose by columns).
	_, gains, v := svd(t, n, n, leastColumn)
	total := 0.0
	for _, g := range gains {
		total += g
	}
	var out []Stream
	for s := range min(n, other) {
		w := make([]complex128, n)
		big := 0
		for j := range w {
			w[j] = v[s*n+j]
			if abs2(w[j]) > abs2(w[big])*(1+1e-9) {
				big = j
			}
		}
		turn := conj(w[big]) / complex(math.Sqrt(abs2(w[big])), 0)
		for j := range w {
			w[j] *= turn
		}
		st := Stream{Weights: w, Gain: gains[s]}
		if total > 0 {
			st.Share = gains[s] / total
		}
		for _, az := range azimuths {
			d := antenna.Toward(az, up)
			fv, fh := m.send(bodies, w, &d)
			st.Beam = append(st.Beam, 10*math.Log10(math.Max(abs2(fv)+abs2(fh), 1e-10)))
		}
		out = append(out, st)
	}
	return out, nil
}

// send is the far field (V, H) of weighted ports in one direction.
func (m *mount) send(bodies []antenna.Body, w []complex128, d *antenna.Direction) (v, h complex128) {
	if m.dipole { // C is symmetric for equal loads: what port currents excite is Cᵀw
		c := m.coupling(bodies)
		mixed := make([]complex128, len(w))
		for i := range w {
			for j := range w {
				mixed[i] += c[j*len(w)+i] * w[j]
			}
		}
		w = mixed
	}
	for b := range bodies {
		body := hung(&m.bodies[b], &bodies[b])
		s := body.Ready()
		view := s.View(d)
		for i := range m.ports {
			p := &m.ports[i]
			if p.body != b {
				continue
			}
			r, u, f := body.PortPosition(p.local)
			sn, cs := math.Sincos(m.k * (r*d.Right + u*d.Up + f*d.Forward))
			fv, fh := fieldOf(p, &view)
			a := w[i] * complex(cs, sn)
			v += a * fv
			h += a * fh
		}
	}
	return v, h
}
