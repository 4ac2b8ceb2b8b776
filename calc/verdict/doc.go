// Package verdict judges a mount: from the readings of its sheet, through the
// doubt of every one of them, to one word (go, no-go, measure again), the reading
// whose doubt decides, and the turns of a wrench that help.
//
// # Rule
//
// All limits of the sheet together are one question, and the answer is one
// probability P that all of them hold, given the readings, their doubts and the
// median surroundings. Go when P ≥ 0.95, no-go when P ≤ 0.05, else measure again
// (guard band of JCGM 106:2012, 8.3.2, at 95 %). With a reading missing the word
// is never go.
//
// # Doubt
//
// P is the share of reproducible draws (JCGM 101:2008) in which every limit holds.
// Nothing is taken to first order: a pointing loss and a cross-talk are even in
// the angle that causes them.
package verdict

// The words of a verdict.
const (
	Go           = "go"
	NoGo         = "no-go"
	MeasureAgain = "measure again"
)

// Guard is the probability on either side that a word needs: 95 %, the level at
// which the trade states uncertainty (JCGM 100:2008, 6.2.2; common practice).
const Guard = 0.95

// wordOf turns a probability into its word.
func wordOf(p float64) string {
	switch {
	case p >= Guard:
		return Go
	case p <= 1-Guard:
		return NoGo
	}
	return MeasureAgain
}
