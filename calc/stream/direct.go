package stream

import (
	"math"

	"crossplumb/calc/antenna"
)

// direct fills h (far port f, near port n at n·F+f) with the line-of-sight matrix
//
//	H_L,fn = (D₀/D_fn)(F_f^V F_n^V − F_f^H F_n^H) e^{−jk(D_fn−D₀)}
//
// distances exact between elements, fields in the exact directions between bodies. The common phase e^{−jkD₀} is left
// out: it turns all of H alike and would cost seven digits at 30 km.
func (e *Engine) direct(near, far []antenna.Body, nearPorts, farPorts []port, h []complex128) {
	se, ce := math.Sincos(e.setup.Elevation)
	d0 := e.setup.Distance
	for b := range near {
		nb := hung(&e.near.bodies[b], &near[b])
		ns := nb.Ready()
		for c := range far {
			fb := hung(&e.far.bodies[c], &far[c])
			fs := fb.Ready()
			// The far frame looks back: its (r, u, f) is (−r, u, −f) from the far datum in the near frame.
			dr, du, df := -fb.Right-nb.Right, fb.Up-nb.Up+d0*se, d0*ce-fb.Forward-nb.Forward
			az, el := math.Atan2(dr, df), math.Atan2(du, math.Hypot(dr, df))
			out, back := antenna.Toward(az, el), antenna.Toward(az, -el)
			nv, fv := ns.View(&out), fs.View(&back)
			for i := range nearPorts {
				p := &nearPorts[i]
				if p.body != b {
					continue
				}
				pr, pu, pf := nb.PortPosition(e.near.units[p.unit].first)
				pV, pH := fieldOf(p, &nv)
				for j := range farPorts {
					q := &farPorts[j]
					if q.body != c {
						continue
					}
					qr, qu, qf := fb.PortPosition(e.far.units[q.unit].first)
					qV, qH := fieldOf(q, &fv)
					r, u, f := -qr-pr, qu-pu, -qf-pf
					// D − D₀ = (D² − D₀²)/(D + D₀), free of cancellation.
					square := 2*d0*(u*se+f*ce) + r*r + u*u + f*f
					d := math.Sqrt(math.Max(d0*d0+square, 0))
					over := square / (d + d0)
					s, co := math.Sincos(e.near.k * over)
					a := d0 / d
					h[i*len(farPorts)+j] = complex(a*co, -a*s) * (qV*pV - qH*pH)
				}
			}
		}
	}
}

// fieldOf is a port's (V, H) field where its body is seen as v.
func fieldOf(p *port, v *antenna.View) (complex128, complex128) {
	c, s := complex(v.Gain*v.Cos, 0), complex(v.Gain*v.Sin, 0)
	return p.v*c - p.h*s, p.v*s + p.h*c
}

// couple replaces h by C_far h C_nearᵀ where an end's dipoles couple.
func (e *Engine) couple(near, far []antenna.Body, h []complex128) {
	nf, nn := len(e.far.ports), len(e.near.ports)
	t := make([]complex128, len(h))
	if e.far.dipole {
		c := e.far.coupling(far)
		for n := range nn {
			for f := range nf {
				var s complex128
				for g := range nf {
					s += c[f*nf+g] * h[n*nf+g]
				}
				t[n*nf+f] = s
			}
		}
		copy(h, t)
	}
	if e.near.dipole {
		c := e.near.coupling(near)
		for n := range nn {
			for f := range nf {
				var s complex128
				for m := range nn {
					s += c[n*nn+m] * h[m*nf+f]
				}
				t[n*nf+f] = s
			}
		}
		copy(h, t)
	}
}

// pointing is, per body, how far the pattern toward the middle of the other mount lies below the top of its main lobe,
// in dB.
func pointing(m *mount, bodies []antenna.Body, elevation float64) []float64 {
	d := antenna.Toward(0, elevation)
	out := make([]float64, len(bodies))
	for b := range bodies {
		body := hung(&m.bodies[b], &bodies[b])
		s := body.Ready()
		v := s.View(&d)
		out[b] = math.Max(0, -20*math.Log10(v.Gain))
	}
	return out
}

// reflections fills one matrix per reflector and polarization, laid out like direct's: the path from each near port
// over the reflector to each far port, with spherical phases,
//
//	B_r^p,fn = a_r (d₀/d_fn) F_f^p F_n^p e^{−jk(d_fn−d₀)}
//
// d being the way over the reflector, d₀ that from datum to datum.
func (e *Engine) reflections(near, far []antenna.Body, out [][]complex128) {
	se, ce := math.Sincos(e.setup.Elevation)
	d0 := e.setup.Distance
	nf, nn := len(e.far.ports), len(e.near.ports)
	nearV, nearH := make([]complex128, nn), make([]complex128, nn)
	farV, farH := make([]complex128, nf), make([]complex128, nf)
	for i := range e.setup.Around.Reflectors {
		r := &e.setup.Around.Reflectors[i]
		e.reach(e.near, near, r.Right, r.Up, r.Forward, nearV, nearH)
		// Seen from the far datum, in its own frame.
		e.reach(e.far, far, -r.Right, r.Up-d0*se, d0*ce-r.Forward, farV, farH)
		bv, bh := out[2*i], out[2*i+1]
		a := complex(r.Amplitude, 0)
		for n := range nn {
			for f := range nf {
				bv[n*nf+f] = a * farV[f] * nearV[n]
				bh[n*nf+f] = a * farH[f] * nearH[n]
			}
		}
		e.couple(near, far, bv)
		e.couple(near, far, bh)
	}
}

// reach is the field of each port of an end toward a point of its frame, with the phase of the way there against the
// way from the datum.
func (e *Engine) reach(m *mount, bodies []antenna.Body, right, up, forward float64, v, h []complex128) {
	d0 := math.Sqrt(right*right + up*up + forward*forward)
	for b := range bodies {
		body := hung(&m.bodies[b], &bodies[b])
		s := body.Ready()
		dr, du, df := right-body.Right, up-body.Up, forward-body.Forward
		d := antenna.Toward(math.Atan2(dr, df), math.Atan2(du, math.Hypot(dr, df)))
		view := s.View(&d)
		for i := range m.ports {
			p := &m.ports[i]
			if p.body != b {
				continue
			}
			pr, pu, pf := body.PortPosition(p.local)
			square := pr*pr + pu*pu + pf*pf - 2*(pr*right+pu*up+pf*forward)
			way := math.Sqrt(math.Max(d0*d0+square, 0))
			sn, cs := math.Sincos(m.k * square / (way + d0))
			// Amplitude: a crew surveys the path at the datum; nearer elements receive it in proportion.
			a := complex(d0/way, 0) * complex(cs, -sn)
			v[i], h[i] = fieldOf(p, &view)
			v[i] *= a
			h[i] *= a
		}
	}
}
