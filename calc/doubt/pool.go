// Package doubt is the arithmetic of uncertainty: readings pooled into one
// estimate, shared biases kept apart from what repeats can average away, and
// reproducible draws to carry both through a computation.
//
// References: JCGM 100:2008 (GUM), JCGM 101:2008 (propagation by draws), JCGM
// 106:2012 (decisions with a guard band).
package doubt

import "math"

// Reading is one reading of one quantity.
type Reading struct {
	Value  float64
	U      float64 // standard uncertainty, as stated with the reading
	Source string  // what readings with one bias have in common: the instrument
	Share  float64 // share of U² that is the bias of the source, 0 to 1
}

// Part is the share of an estimate's doubt that comes from one source's bias.
type Part struct {
	Source string
	U      float64
}

// Estimate is a quantity as its readings together tell it. Its doubt has a random
// part, its own, and parts that other estimates share when they come from the
// same source.
type Estimate struct {
	Value  float64
	Random float64 // standard deviation (scale, when DOF > 0) of the random part
	DOF    float64 // degrees of freedom of the random part: Student's t; 0 is normal
	Bias   []Part
	Looks  int // how many readings went in
}

// U is the standard uncertainty of the estimate,
//
//	u² = random² ν/(ν−2) + Σ bias²
func (e *Estimate) U() float64 {
	v := e.Random * e.Random
	if e.DOF > 2 {
		v *= e.DOF / (e.DOF - 2)
	}
	for _, b := range e.Bias {
		v += b.U * b.U
	}
	return math.Sqrt(v)
}

// Scale multiplies every part of the doubt.
func (e *Estimate) Scale(by float64) Estimate {
	s := *e
	s.Random *= by
	s.Bias = make([]Part, len(e.Bias))
	for i, b := range e.Bias {
		s.Bias[i] = Part{b.Source, b.U * by}
	}
	return s
}

// StatedDOF is the worth of a stated uncertainty in degrees of freedom once
// repeats speak too: u known to 25 %, ν = ½ (Δu/u)⁻² = 8.
// Reference: JCGM 100:2008, G.4.2 and equation (G.3); the 25 % is common practice.
const StatedDOF = 8

// FewReadings is how many repeats it takes before their own scatter may speak for
// a smaller uncertainty than the stated one (common practice).
const FewReadings = 4

// Pool makes one estimate of all readings of one quantity since its bolt last
// moved. A later reading never replaces an earlier one: to measure until the
// answer pleases must not work.
//
// Readings weigh by 1/u². Of each u², the share of its source is a bias, the same
// for every reading by that source, so that repeats do not lower it; the rest is
// random and averages. With two or more readings their scatter about the mean
// joins the stated random part,
//
//	s² = (ν₀ + χ²)/(ν₀ + n − 1),  χ² = Σ (xᵢ − x̄)²/rᵢ²,  ν = ν₀ + n − 1
//
// with ν₀ = StatedDOF (pooled variance, JCGM 100:2008, 4.2.4 and H.3.6), and the
// random part becomes Student's t with ν. With fewer than FewReadings s is not
// taken below 1. Panics without readings or where a U is not positive.
func Pool(readings []Reading) Estimate {
	if len(readings) == 0 {
		panic("doubt: no readings to pool")
	}
	var sum, weights float64
	for _, r := range readings {
		if !(r.U > 0) {
			panic("doubt: a reading without uncertainty")
		}
		w := 1 / (r.U * r.U)
		sum += w * r.Value
		weights += w
	}
	e := Estimate{Value: sum / weights, Looks: len(readings)}
	var random, chi2 float64
	for _, r := range readings {
		w := 1 / (r.U * r.U) / weights
		own := r.U * r.U * (1 - r.Share)
		random += w * w * own
		if own > 0 {
			d := r.Value - e.Value
			chi2 += d * d / own
		}
		e.add(r.Source, w*r.U*math.Sqrt(r.Share))
	}
	e.Random = math.Sqrt(random)
	if n := float64(len(readings)); n > 1 && random > 0 {
		s2 := (StatedDOF + chi2) / (StatedDOF + n - 1)
		if n < FewReadings {
			s2 = math.Max(s2, 1)
		}
		e.Random *= math.Sqrt(s2)
		e.DOF = StatedDOF + n - 1
	}
	return e
}

func (e *Estimate) add(source string, u float64) {
	if u == 0 {
		return
	}
	for i := range e.Bias {
		if e.Bias[i].Source == source {
			e.Bias[i].U += u
			return
		}
	}
	e.Bias = append(e.Bias, Part{source, u})
}
