package antenna

import "math"

// Hand is the sense of rotation of an elliptical polarization, IEEE's, seen from behind.
type Hand int

const (
	// Linear has no sense.
	Linear Hand = iota
	// Right turns clockwise seen from behind.
	Right
	// Left turns counter-clockwise seen from behind.
	Left
)

// Port is one connector: its polarization in the body's own behind view and where its element sits on the body.
type Port struct {
	Name               string
	Slant              float64 // rad
	Right, Up, Forward float64 // offset of the element from the centre of the body, m, in the body's own axes
	Leak               float64 // amplitude of the cross-polar field, 10^(−XPD/20); 0 is perfect
	Axial              float64 // minor over major axis of the ellipse, 10^(−AR/20), 0 for linear, 1 for circular
	Hand               Hand
}

// Body is one antenna as it hangs, in the frame of its own mount.
type Body struct {
	Pattern            *Pattern // nil is isotropic
	Right, Up, Forward float64  // centre, m
	Azimuth            float64  // rad, clockwise off the frame's forward
	Tilt               float64  // rad, boresight up
	Skew               float64  // rad, clockwise seen from behind
	Ports              []Port
}

// Jones is the polarization of a port on its boresight, components (V, H) in the body's own behind view:
//
//	e = (cos s ± j r sin s, sin s ∓ j r cos s)/√(1 + r²) + j x e⊥
//
// upper sign for right-hand, r the axial amplitude, x the leak and e⊥ = (−ē_H, ē_V) the orthogonal polarization. The
// leak stands in quadrature, so that its power adds to that of a rotation, tan²δ + x² (typical cross-talk).
// IEEE Std 145; Balanis, Antenna Theory, chapter 2.
func (p *Port) Jones() (v, h complex128) {
	s, c := math.Sincos(p.Slant)
	r := p.Axial
	switch p.Hand {
	case Linear:
		r = 0
	case Left:
		r = -r
	}
	n := 1 / math.Sqrt(1+r*r)
	v = complex(c*n, r*s*n)
	h = complex(s*n, -r*c*n)
	if p.Leak != 0 {
		ov := complex(-real(h), imag(h))
		oh := complex(real(v), -imag(v))
		v += complex(0, p.Leak) * ov
		h += complex(0, p.Leak) * oh
	}
	return v, h
}

// axes are the body's own right, up and forward expressed in the mount frame (right, up, forward).
type axes struct{ right, up, forward [3]float64 }

func (b *Body) axes() axes {
	sk, ck := math.Sincos(b.Skew)
	st, ct := math.Sincos(b.Tilt)
	sa, ca := math.Sincos(b.Azimuth)
	// Skew turns up towards right; tilt then raises forward towards up; azimuth then swings forward towards right.
	turn := func(r, u, f float64) [3]float64 {
		u, f = u*ct+f*st, f*ct-u*st
		return [3]float64{r*ca + f*sa, u, f*ca - r*sa}
	}
	return axes{
		right:   turn(ck, -sk, 0),
		up:      turn(sk, ck, 0),
		forward: turn(0, 0, 1),
	}
}

// PortPosition is where the element of port i sits in the mount frame: the centre of the body plus the offset, which
// turns with the body.
func (b *Body) PortPosition(i int) (right, up, forward float64) {
	p := &b.Ports[i]
	right, up, forward = b.Right, b.Up, b.Forward
	if p.Right != 0 || p.Up != 0 || p.Forward != 0 {
		a := b.axes()
		right += p.Right*a.right[0] + p.Up*a.up[0] + p.Forward*a.forward[0]
		up += p.Right*a.right[1] + p.Up*a.up[1] + p.Forward*a.forward[1]
		forward += p.Right*a.right[2] + p.Up*a.up[2] + p.Forward*a.forward[2]
	}
	return right, up, forward
}

// Direction is a unit vector with the two field directions that belong to it, so that a spectrum computes them once.
type Direction struct {
	Right, Up, Forward float64    // Ω
	V, H               [3]float64 // directions of growing elevation and of growing azimuth
}

// Toward returns the direction of azimuth β and elevation ε in the mount frame.
func Toward(az, el float64) Direction {
	sb, cb := math.Sincos(az)
	se, ce := math.Sincos(el)
	return Direction{
		Right: sb * ce, Up: se, Forward: cb * ce,
		V: [3]float64{-sb * se, ce, -cb * se},
		H: [3]float64{cb, 0, -sb},
	}
}

// View is a body seen from one direction: the amplitude of its pattern against the top of the main lobe, and the
// turn ψ of its own (V, H) against those of the mount frame, as cosine and sine. Port fields follow as
//
//	F_V = g (e_V cos ψ − e_H sin ψ),  F_H = g (e_V sin ψ + e_H cos ψ)
//
// with e the port's Jones vector: the slant is constant in the body's own spherical frame (TR 38.901 clause 7.3.2,
// model 2) and turned into the mount frame (clause 7.1).
type View struct{ Gain, Cos, Sin float64 }

// Sight is a body made ready to be looked at from many directions.
type Sight struct {
	a axes
	p *Pattern
}

// Ready returns the body's axes and pattern, for View.
func (b *Body) Ready() Sight { return Sight{b.axes(), b.Pattern} }

// View evaluates the body's pattern and the turn of its field directions in direction d of the mount frame.
//
// Straight along the body's own vertical axis, where azimuth has no meaning, the turn is that of azimuth 0.
func (s *Sight) View(d *Direction) View {
	x := d.Right*s.a.right[0] + d.Up*s.a.right[1] + d.Forward*s.a.right[2]
	y := d.Right*s.a.up[0] + d.Up*s.a.up[1] + d.Forward*s.a.up[2]
	z := d.Right*s.a.forward[0] + d.Up*s.a.forward[1] + d.Forward*s.a.forward[2]
	// The body's own H direction is (z, 0, −x)/√(x²+z²) in its axes; its components on the frame's V and H are −sin ψ
	// and cos ψ.
	q := math.Sqrt(x*x + z*z)
	hx, hz := 1.0, 0.0
	if q > 1e-12 {
		hx, hz = z/q, -x/q
	}
	w := [3]float64{
		hx*s.a.right[0] + hz*s.a.forward[0],
		hx*s.a.right[1] + hz*s.a.forward[1],
		hx*s.a.right[2] + hz*s.a.forward[2],
	}
	v := View{Gain: 1}
	v.Sin = -(w[0]*d.V[0] + w[1]*d.V[1] + w[2]*d.V[2])
	v.Cos = w[0]*d.H[0] + w[1]*d.H[1] + w[2]*d.H[2]
	if s.p != nil && s.p.Kind != Isotropic {
		v.Gain = s.p.amplitude(x, y, z)
	}
	return v
}

// amplitude is 10^(−A/20) in the direction (x, y, z) of the body's own axes.
func (p *Pattern) amplitude(x, y, z float64) float64 {
	switch p.Kind {
	case Isotropic:
		return 1
	case Dipole:
		c2 := 1 - y*y
		if c2 <= 1e-12 {
			return dipoleFloor
		}
		return math.Max(math.Cos(math.Pi/2*y)/math.Sqrt(c2), dipoleFloor)
	case Panel:
		a := arctangent2(x, z) / p.BeamwidthAz
		e := (arcsine(within1(y)) - p.ElectricalTilt) / p.BeamwidthEl
		a, e = 12*a*a, 12*e*e
		if a > p.FrontToBack {
			a = p.FrontToBack
		}
		if e > p.Sidelobe {
			e = p.Sidelobe
		}
		if a += e; a > p.FrontToBack {
			a = p.FrontToBack
		}
		return ofAttenuation(a)
	case Dish:
		return ofAttenuation(p.dish(arctangent2(math.Sqrt(x*x+y*y), z)))
	case Omni:
		return ofAttenuation(p.Attenuation(0, arcsine(within1(y))))
	}
	return ofAttenuation(p.Attenuation(arctangent2(x, z), arcsine(within1(y))))
}

func within1(y float64) float64 {
	if y > 1 {
		return 1
	}
	if y < -1 {
		return -1
	}
	return y
}

// Field is the (V, H) field of one port in direction d, relative to the top of the body's main lobe, phase of the
// position not included.
func (b *Body) Field(port int, d *Direction) (v, h complex128) {
	s := b.Ready()
	w := s.View(d)
	ev, eh := b.Ports[port].Jones()
	c, sn := complex(w.Gain*w.Cos, 0), complex(w.Gain*w.Sin, 0)
	return ev*c - eh*sn, ev*sn + eh*c
}

// Axes are the body's own right, up and forward as unit vectors (right, up, forward) of the mount frame.
func (b *Body) Axes() (right, up, forward [3]float64) {
	a := b.axes()
	return a.right, a.up, a.forward
}
