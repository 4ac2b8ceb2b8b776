package peak

import (
	"math"
	"slices"
)

// Face is the mean of readings with one face of an instrument: their standard
// deviation and how many independent ones there are.
type Face struct {
	Mean, Spread float64
	Count        float64
}

// FaceOf is the face of a few readings, in radians: their mean x̄ and standard
// deviation
//
//	s² = Σ (xᵢ − x̄)²/(n − 1)        JCGM 100:2008, 4.2.2
//
// zero for a single reading. The readings lie within a quarter turn, so that their
// plain mean is their vector mean to second order. Panics without readings.
func FaceOf(readings []float64) Face {
	if len(readings) == 0 {
		panic("peak: a face without readings")
	}
	n := float64(len(readings))
	f := Face{Count: n}
	for _, x := range readings {
		f.Mean += x / n
	}
	for _, x := range readings {
		f.Spread += (x - f.Mean) * (x - f.Mean)
	}
	if n > 1 {
		f.Spread = math.Sqrt(f.Spread / (n - 1))
	}
	return f
}

// Uncertainty that stays when the bias is gone: the instrument's own
// non-linearity and how it is laid on. Common practice; static errors of phones
// are published as under 0.3° (Sensors 15, 2015), most of it bias.
const faceFloor = 0.1 * math.Pi / 180

// PooledSpread is the standard deviation of single readings by phone or small
// level that is taken where fewer than four say nothing of it; common practice.
const PooledSpread = 0.3 * math.Pi / 180

// TwoFace takes the bias out of an angle read twice, the instrument turned half
// round about the normal of the measured face in between: A = θ + b and
// B = −θ + b give
//
//	θ = (A − B)/2,  b = (A + B)/2,  u² = (s_A²/n_A + s_B²/n_B)/4 + floor²
//
// Four or more readings speak for their own spread, with Student's factor for few
// (n − 1)/(n − 3); fewer may not go below PooledSpread.
func TwoFace(a, b Face) (angle, bias, doubt float64) {
	u := math.Sqrt(a.variance()+b.variance()) / 2
	return (a.Mean - b.Mean) / 2, (a.Mean + b.Mean) / 2, math.Hypot(u, faceFloor)
}

// variance of the mean of the face's readings.
func (f Face) variance() float64 {
	s2 := f.Spread * f.Spread
	if f.Count >= 4 {
		s2 *= (f.Count - 1) / (f.Count - 3)
	} else {
		s2 = math.Max(s2, PooledSpread*PooledSpread)
	}
	return s2 / f.Count
}

// Sample is one sample of an instrument that streams them.
type Sample struct {
	Time    float64 // seconds
	Angle   float64
	Gravity float64 // length of the acceleration in m/s²; 0 where it is not known
}

// Held is what a stretch of samples amounts to.
type Held struct {
	Face            // Count is the number of independent samples
	Used, Shaky int // samples taken and rejected
	Duration    float64
	Drift       float64 // of a straight line through the samples, over the duration
	Still       bool
	Enough      bool
}

// How samples are judged; common practice.
const (
	standardGravity = 9.80665 // m/s², CGPM 1901
	shakeLimit      = 0.3     // m/s²: beyond, a hand or the wind moves the instrument
	offsetLimit     = 0.5     // m/s²: how far from gravity a phone's zeros may put it at rest
	outlierLimit    = 4.0     // robust standard deviations
	stillSpread     = 0.1 * math.Pi / 180
	StillSeconds    = 3.0  // enough when it is still
	SwaySeconds     = 20.0 // several swings of a mast's top
)

// Hold averages a stretch of samples. Samples whose acceleration is not gravity's
// alone (as this instrument measures it at rest) are rejected, then those farther than four robust standard deviations from
// the median. What is left is averaged; because neighbours in time are alike, the
// count of independent samples is n (1 − r)/(1 + r), with r the correlation of
// neighbours (the variance of the mean of a first-order autoregressive series).
// The top of a mast sways slowly: three seconds are enough only when it is still.
// ok is false when nothing is left.
func Hold(samples []Sample) (h Held, ok bool) {
	rest := atRest(samples)
	calm := make([]Sample, 0, len(samples))
	for _, s := range samples {
		if s.Gravity == 0 || math.Abs(s.Gravity-rest) <= shakeLimit {
			calm = append(calm, s)
		}
	}
	if len(calm) == 0 {
		return Held{}, false
	}
	about := median(calm, func(s Sample) float64 { return s.Angle })
	away := func(s Sample) float64 { return math.Abs(s.Angle - about) }
	// 1.4826 makes the median of deviations the σ of a normal law; the floor keeps
	// an instrument with coarse steps from rejecting its next step.
	limit := outlierLimit * math.Max(1.4826*median(calm, away), stillSpread)
	kept := calm[:0]
	for _, s := range calm {
		if away(s) <= limit {
			kept = append(kept, s)
		}
	}
	n := float64(len(kept))
	h.Used, h.Shaky = len(kept), len(samples)-len(kept)
	var meanT, meanA float64
	first, last := math.Inf(1), math.Inf(-1)
	for _, s := range kept {
		meanT, meanA = meanT+s.Time/n, meanA+s.Angle/n
		first, last = min(first, s.Time), max(last, s.Time)
	}
	h.Mean, h.Duration = meanA, last-first
	var tt, ta, aa, neighbours float64
	for i, s := range kept {
		dt, da := s.Time-meanT, s.Angle-meanA
		tt, ta, aa = tt+dt*dt, ta+dt*da, aa+da*da
		if i > 0 {
			neighbours += da * (kept[i-1].Angle - meanA)
		}
	}
	if n > 1 {
		h.Spread = math.Sqrt(aa / (n - 1))
	}
	if tt > 0 {
		h.Drift = ta / tt * h.Duration
	}
	r := 0.0
	if aa > 0 {
		r = math.Max(0, neighbours/aa)
	}
	h.Count = math.Max(1, n*(1-r)/(1+r))
	h.Still = h.Spread <= stillSpread && math.Abs(h.Drift) <= stillSpread
	h.Enough = h.Duration >= h.Needed()
	return h, true
}

// Needed is for how many seconds to hold on in all: fewer when it is still.
func (h Held) Needed() float64 {
	if h.Still {
		return StillSeconds
	}
	return SwaySeconds
}

// atRest is the length that an acceleration has when nothing moves: the middle of
// what was seen, because a phone's own zeros shift it, where that can be gravity.
func atRest(samples []Sample) float64 {
	known := make([]Sample, 0, len(samples))
	for _, s := range samples {
		if s.Gravity != 0 {
			known = append(known, s)
		}
	}
	if len(known) == 0 {
		return standardGravity
	}
	seen := median(known, func(s Sample) float64 { return s.Gravity })
	if math.Abs(seen-standardGravity) > offsetLimit {
		return standardGravity
	}
	return seen
}

func median(samples []Sample, of func(Sample) float64) float64 {
	xs := make([]float64, len(samples))
	for i, s := range samples {
		xs[i] = of(s)
	}
	slices.Sort(xs)
	if n := len(xs); n%2 == 0 {
		return (xs[n/2-1] + xs[n/2]) / 2
	}
	return xs[len(xs)/2]
}
