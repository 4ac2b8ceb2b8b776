// Package polar is the polarization of ports and what two facing ends make of
// it: coupling through the mirror, loss, cross-talk, orthogonality, and what a
// skew costs each kind of radio. Frames and signs are those of package calc.
package polar

import (
	"math"
	"math/cmplx"
)

// Port is the polarization of one port as mounted, seen from behind.
type Port struct {
	SlantRad float64 // of its body, clockwise from vertical
	SkewRad  float64 // of the body, clockwise
	Axial    float64 // r = minor over major axis, 0 linear to 1 circular
	LeftHand bool    // sense of rotation; of no meaning when Axial is 0
}

// AxialFromDB turns an axial ratio in dB (≥ 0) into r,
//
//	r = 10^(−AR/20)
//
// so that 0 dB is circular (r = 1) and a large ratio nearly linear.
// Reference: IEEE Std 145, axial ratio.
func AxialFromDB(db float64) float64 { return math.Pow(10, -db/20) }

// Vector is the port's complex field (V, H) in its own view from behind, not
// normalised:
//
//	e = (cos s ± j r sin s, sin s ∓ j r cos s),  s = slant + skew
//
// upper sign right-hand, with exp(+jωt). Its squared norm is 1 + r².
// Reference: Balanis, Antenna Theory, ch. 2 (polarization ellipse); sense by
// IEEE Std 145.
func (p Port) Vector() [2]complex128 {
	s, c := math.Sincos(p.SlantRad + p.SkewRad)
	r := p.Axial
	if p.LeftHand {
		r = -r
	}
	return [2]complex128{complex(c, r*s), complex(s, -r*c)}
}

// Unit is Vector normalised to unit power.
func (p Port) Unit() [2]complex128 {
	e := p.Vector()
	n := complex(1/math.Sqrt(1+p.Axial*p.Axial), 0)
	return [2]complex128{e[0] * n, e[1] * n}
}

// Coupling is the complex coupling of two ports that face each other,
//
//	c = e_nearᵀ · diag(1, −1) · e_far / (‖e_near‖ ‖e_far‖)
//
// without conjugation: the far view is the near view seen in a mirror. |c| ≤ 1.
// +45° facing +45° gives 0, two right-hand circular ports give 1.
func Coupling(near, far Port) complex128 {
	a, b := near.Unit(), far.Unit()
	return a[0]*b[0] - a[1]*b[1]
}

// Blind is the loss factor below which two ports are called orthogonal: −100 dB,
// far below what any real pair keeps (40 dB is an excellent one).
const Blind = 1e-10

// LossFactor is the share of the power that a port takes of what the facing port
// sends, 0 to 1,
//
//	factor = |c|²
//
// for two linear ports cos² of the angle between them after the mirror.
// Reference: polarization loss factor, Balanis, Antenna Theory, ch. 2.
func LossFactor(near, far Port) float64 {
	a := cmplx.Abs(Coupling(near, far))
	return math.Min(1, a*a)
}
