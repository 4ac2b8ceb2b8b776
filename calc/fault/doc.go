// Package fault tells what is wrong with a link from the figures on its radios'
// own pages.
//
// Each candidate is a forward model: what every figure would be at both ends if
// this, and only this, were wrong. Levels, signal-to-noise ratios and the rest
// have a common doubt (path, powers, calibration) and doubts of their own, so that
// the figures are one Gaussian vector about what a candidate predicts; a candidate
// whose size is not known (how many dB a feeder loses) is the mixture over its
// sizes. Likelihood times prior ranks them:
//
//	odds_c ∝ prior_c · Σ_k weight_k · N(y; μ_ck, Σ) · P(what is not a number)
//
// Two candidates whose predictions lie closer than 4.5 in Mahalanobis' distance
// can not be told apart for certain by these figures; each names the others of
// which this is so, and the likelihood shares the odds among them.
//
// The priors and spreads are judgement and common practice. They stand in
// candidates.go and noise.go, each with its reason, and in every answer's method.
// CONFUSION.md in this folder shows what comes of them on simulated faults.
package fault

// End is one end of the link. Crews stand at the near end.
type End int

// The two ends.
const (
	Near End = iota
	Far
)

// String is the end's name in documents.
func (e End) String() string {
	if e == Far {
		return "far"
	}
	return "near"
}

func (e End) other() End { return 1 - e }
