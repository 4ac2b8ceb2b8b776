package polar

import (
	"math"
	"math/cmplx"
)

// Pair is two ports at each end, facing each other.
type Pair struct {
	Near, Far [2]Ellipse
	Crossed   bool // near port 0 is tied to far port 1 and 1 to 0
}

// Ellipse is a port with its own discrimination.
type Ellipse struct {
	Port
	Leak float64 // power ratio 10^(−X/10) of its cross-polar discrimination; 0 is perfect
}

// LeakFromDB turns a cross-polar discrimination X in dB into the power that
// leaks, 10^(−X/10).
func LeakFromDB(x float64) float64 { return math.Pow(10, -x/10) }

// Couplings are the complex couplings [near][far] of the four ways.
func (p Pair) Couplings() [2][2]complex128 {
	var c [2][2]complex128
	for i := range c {
		for j := range c[i] {
			c[i][j] = Coupling(p.Near[i].Port, p.Far[j].Port)
		}
	}
	return c
}

// LargestCoupling tells how the ports pair by the largest coupling: true where
// near 0 goes with far 1. Equal sums go label to label.
func (p Pair) LargestCoupling() (crossed bool) {
	c := p.Couplings()
	power := func(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
	straight, other := power(c[0][0])+power(c[1][1]), power(c[0][1])+power(c[1][0])
	return other > straight+1e-12
}

// Reception is what one receiving port gets.
type Reception struct {
	Coupling     float64 // |c|² of the port it is tied to
	CrossTalk    float64 // typical power of the other stream over its own, 1/XPI
	CrossTalkMax float64 // the worst phases
}

// Receive tells what a port receives: at near port i when nearEnd, else at far
// port i. With δ the angle by which two linear pairs miss each other and X each
// end's discrimination in dB,
//
//	typical  1/XPI = tan² δ + Σ 10^(−X/10)
//	worst   √(1/XPI) = |tan δ| + Σ 10^(−X/20)
//
// tan² δ being in general |c_cross|²/|c_own|², Σ over the receiving port and the
// port that disturbs it. A port that is blind to its own partner has an infinite
// cross-talk.
func (p Pair) Receive(nearEnd bool, i int) Reception {
	c := p.Couplings()
	partner := i
	if p.Crossed {
		partner = 1 - i
	}
	var own, cross complex128
	var leaks [2]float64
	if nearEnd {
		own, cross = c[i][partner], c[i][1-partner]
		leaks = [2]float64{p.Near[i].Leak, p.Far[1-partner].Leak}
	} else {
		own, cross = c[partner][i], c[1-partner][i]
		leaks = [2]float64{p.Far[i].Leak, p.Near[1-partner].Leak}
	}
	r := Reception{Coupling: math.Min(1, real(own)*real(own)+imag(own)*imag(own))}
	if r.Coupling < Blind {
		r.CrossTalk, r.CrossTalkMax = math.Inf(1), math.Inf(1)
		return r
	}
	t := cmplx.Abs(cross) / cmplx.Abs(own)
	if t*t < Blind { // rounding of a true right angle, not cross-talk
		t = 0
	}
	r.CrossTalk = t*t + leaks[0] + leaks[1]
	worst := t + math.Sqrt(leaks[0]) + math.Sqrt(leaks[1])
	r.CrossTalkMax = worst * worst
	return r
}

// SINR is the signal over noise and cross-talk of a port that is tied to its
// partner, as a power ratio, S being the ratio of the aligned pair without
// cross-talk:
//
//	SINR = S |c|² / (1 + S |c|²/XPI)
//
// for perfect linear ports cos² δ · S/(1 + S sin² δ). At a large S it ends at the
// XPI: 5.7° of skew caps it at 20 dB.
func (r Reception) SINR(s float64) float64 {
	if r.Coupling < Blind {
		return 0
	}
	return s * r.Coupling / (1 + s*r.Coupling*r.CrossTalk)
}

// TiedBits is the rate in bit/s/Hz of a radio that ties port to port, with S per
// chain, in the worse of the two directions:
//
//	Σ log₂(1 + SINR)
func (p Pair) TiedBits(s float64) float64 {
	bits := func(nearEnd bool) float64 {
		return math.Log2(1+p.Receive(nearEnd, 0).SINR(s)) + math.Log2(1+p.Receive(nearEnd, 1).SINR(s))
	}
	return math.Min(bits(true), bits(false))
}

// CombiningBits is the rate in bit/s/Hz of a radio that combines its chains, with
// S per chain:
//
//	log₂ det(I + S C Cᴴ)
//
// C being the couplings. A rotation common to both ports of an end costs nothing;
// ports of one end that are not at right angles cost a little. The ports' own
// discrimination is left out: what leaks from one port of an end into the other is
// a mixing that the radio undoes as it undoes a rotation.
// Reference: Telatar, Eur. Trans. Telecommun. 10 (1999).
func (p Pair) CombiningBits(s float64) float64 {
	c := p.Couplings()
	g := [2][2]complex128{} // I + S C Cᴴ
	for i := range g {
		for j := range g {
			g[i][j] = complex(s, 0) * (c[i][0]*cmplx.Conj(c[j][0]) + c[i][1]*cmplx.Conj(c[j][1]))
		}
		g[i][i]++
	}
	return math.Log2(real(g[0][0]*g[1][1] - g[0][1]*g[1][0]))
}

// CombinedSINR is the signal over noise and what remains of the other stream
// behind the linear receiver of least mean square error of a combining radio, at
// near port's or far port's stream i:
//
//	1/[(I + S CᴴC)⁻¹]ᵢᵢ − 1
//
// streams being numbered by the port that sends them.
func (p Pair) CombinedSINR(nearEnd bool, sender int, s float64) float64 {
	c := p.Couplings()
	if !nearEnd {
		c[0][1], c[1][0] = c[1][0], c[0][1]
	}
	column := func(a, b int) complex128 {
		return complex(s, 0) * (cmplx.Conj(c[0][a])*c[0][b] + cmplx.Conj(c[1][a])*c[1][b])
	}
	a, d, b := real(column(0, 0))+1, real(column(1, 1))+1, column(0, 1)
	det := a*d - real(b)*real(b) - imag(b)*imag(b)
	if sender == 0 {
		return det/d - 1
	}
	return det/a - 1
}

// AngleBetween is the angle from the second port of an end to the first in
// radians, 0 to π, clockwise as seen from behind; for a true pair π/2. It is of
// the major axes and means little for ports that are nearly circular.
func AngleBetween(first, second Port) float64 {
	a := math.Mod(first.SlantRad+first.SkewRad-second.SlantRad-second.SkewRad, math.Pi)
	if a < 0 {
		a += math.Pi
	}
	return a
}

// Residual is how far two ports of one end are from orthogonal,
//
//	|e₁ᴴ e₂|/(‖e₁‖‖e₂‖)
//
// 0 for a true pair, |sin ε| for linear ports 90° + ε apart.
func Residual(first, second Port) float64 {
	a, b := first.Unit(), second.Unit()
	return math.Min(1, cmplx.Abs(cmplx.Conj(a[0])*b[0]+cmplx.Conj(a[1])*b[1]))
}
