package verdict

import (
	"math"

	"crossplumb/calc/doubt"
)

// Deciding is the reading whose doubt decides the word, and how small its standard
// uncertainty must get for a word to come out where the readings stand now. UNeeded
// is nil where even an exact reading would not do.
type Deciding struct {
	Antenna, Quantity, Unit string
	U                       float64
	UNeeded                 *float64
}

// with returns the belief with the doubt of one reading (one number, or the three
// axes of a position) scaled.
func (j *judge) with(b *belief, body int, q quantity, by float64) *belief {
	c := *b
	if b.surface != nil && b.surface.rough { // one by one would take too long for a ranking
		smooth := *b.surface
		smooth.rough = false
		c.surface = &smooth
	}
	c.est = append([]doubt.Estimate(nil), b.est...)
	last := q
	if q == right {
		last = forward
	}
	for ; q <= last; q++ {
		at := j.at(body, q)
		c.est[at] = b.est[at].Scale(by)
	}
	return &c
}

// firmness is how near a probability is to a word.
func firmness(p float64) float64 { return math.Max(p, 1-p) }

// deciding finds the near reading that, were it exact, would bring the probability
// nearest to a word; nil where the far end's readings would bring it nearer still.
func (j *judge) deciding(b *belief) *Deciding {
	type candidate struct {
		body int
		q    quantity
	}
	var best candidate
	most := -1.0
	now := firmness(j.runEvery(j.with(b, 0, skew, 1), 4).joint)
	for i := range j.near {
		for _, q := range [4]quantity{skew, tilt, azimuth, right} {
			if b.looks[j.at(i, q)] == 0 && !(q == right && b.looks[j.at(i, up)]+b.looks[j.at(i, forward)] > 0) {
				continue
			}
			exact := j.runEvery(j.with(b, i, q, 0), 4)
			if f := firmness(exact.joint); f > most {
				most, best = f, candidate{i, q}
			}
		}
	}
	if most < 0 || most <= now+0.005 {
		return nil // no reading here decides: the far end's doubt does
	}
	if most < Guard && j.farFirmness(b) > most {
		return nil // nor is one to be read again that would do less than the far end's readings
	}
	at := j.at(best.body, best.q)
	u := b.est[at].U()
	if best.q == right {
		for q := right; q <= forward; q++ {
			u = math.Max(u, b.est[j.at(best.body, q)].U())
		}
	}
	d := &Deciding{
		Antenna: j.bodies[best.body].antenna.ID, Quantity: best.q.String(), Unit: best.q.unit(), U: best.q.border(u),
	}
	if most >= Guard {
		lo, hi := 0.0, 1.0 // lo is known to do
		for range 8 {
			mid := (lo + hi) / 2
			if firmness(j.run(j.with(b, best.body, best.q, mid)).joint) >= Guard {
				lo = mid
			} else {
				hi = mid
			}
		}
		if lo > 0 { // else all but an exact reading is too doubtful
			need := best.q.border(u * lo)
			d.UNeeded = &need
		}
	}
	return d
}

// farDecides tells whether a word would come out if the far end were known exactly.
func (j *judge) farDecides(b *belief) bool { return j.farFirmness(b) >= Guard }

// farFirmness is how near to a word the probability would come if the far end were
// known exactly.
func (j *judge) farFirmness(b *belief) float64 {
	c := j.with(b, 0, skew, 1)
	for at := j.at(j.near, 0); at < len(c.est); at++ {
		c.est[at] = b.est[at].Scale(0)
	}
	return firmness(j.runEvery(c, 4).joint)
}
