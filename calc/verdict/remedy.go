package verdict

import (
	"math"
	"slices"
	"sort"

	"crossplumb/calc/doubt"
)

// Remedy is one turn of a wrench, what it buys, and the word once it is done and
// measured as well as now.
type Remedy struct {
	Antenna, Quantity, Axis, Unit, Direction, Text string
	Change                                         float64 // border units
	Limit                                          string  // the limit that misses most now
	From, To                                       *float64
	WordAfter                                      string
	ProbabilityAfter                               float64
}

// maxRemedies is how many are judged again and shown: more would not be read on a
// mast.
const maxRemedies = 6

// step is what a hand can set: a tenth of a degree, a millimetre.
func (q quantity) step() float64 {
	if q.angular() {
		return 0.1 * degree
	}
	return 0.001
}

// reach is how far a remedy may move a thing.
func (q quantity) reach() float64 {
	switch q {
	case skew:
		return math.Pi / 2
	case tilt:
		return math.Pi / 6
	case azimuth:
		return math.Pi
	}
	return 2
}

// remedies finds, for each thing of the near end that was read and that a wrench
// can change, the move that serves the best estimate most; judges the mount again
// as it would be measured afterwards; and ranks them by what they buy.
func (j *judge) remedies(b *belief, o *outcome) []Remedy {
	critical := j.critical(o)
	if critical < 0 {
		return nil
	}
	scale := j.scales(o)
	x := b.values()
	var at []float64
	if j.flow != nil {
		at = j.flow.exact(x) // and what is tried below is near this
	}
	now := j.score(x, at, scale)
	widen := j.limits[critical].flows // spacing may help beyond the plan
	type move struct {
		body  int
		q     quantity
		by    float64
		score float64
	}
	var moves []move
	for i := range j.near {
		for q := range quantities {
			at := j.at(i, q)
			if !b.measured[at] || b.looks[at] == 0 {
				continue
			}
			by, score := j.bestMove(b, x, at, q, scale, widen)
			if math.Abs(by) >= q.step()/2 && score > now+0.05 {
				moves = append(moves, move{i, q, by, score})
			}
		}
	}
	slices.SortStableFunc(moves, func(a, b move) int {
		switch {
		case a.score > b.score:
			return -1
		case a.score < b.score:
			return 1
		}
		return 0
	})
	if len(moves) > maxRemedies {
		moves = moves[:maxRemedies]
	}
	before := &o.summary[critical]
	var out []Remedy
	for _, m := range moves {
		moved := *b
		if j.flow != nil {
			moved.surface, moved.only = nil, b.surface.active(len(b.est))
			moved.only[j.at(m.body, m.q)] = true
		}
		moved.est = append([]doubt.Estimate(nil), b.est...)
		moved.est[j.at(m.body, m.q)].Value += m.by
		after := j.run(&moved)
		if after.joint < o.joint {
			continue
		}
		s := &after.summary[critical]
		leans := j.bodies[m.body].symmetric
		r := Remedy{
			Antenna: j.bodies[m.body].antenna.ID, Quantity: m.q.String(), Axis: m.q.axis(), Unit: m.q.unit(),
			Change: m.q.border(m.by), Direction: m.q.direction(m.by, leans), Limit: j.limits[critical].Name,
			From: finite(before.Median), To: finite(s.Median),
			ProbabilityAfter: after.joint, WordAfter: j.word(&moved, after.joint),
		}
		r.Text = remedyText(r, m.q, leans)
		out = append(out, r)
	}
	sort.SliceStable(out, func(a, b int) bool { return out[a].ProbabilityAfter > out[b].ProbabilityAfter })
	return out
}

func (j *judge) notJudged() bool {
	for k := range j.limits {
		if j.limits[k].whoNot != "" {
			return true
		}
	}
	return false
}

// scales is the doubt of each limit's value, at least a hundredth of the limit.
func (j *judge) scales(o *outcome) []float64 {
	scale := make([]float64, len(j.limits))
	for k := range j.limits {
		if o.values[k] != nil {
			s := &o.summary[k]
			scale[k] = math.Max((s.High-s.Low)/4, math.Abs(j.limits[k].Limit.Value)/100)
			if math.IsNaN(scale[k]) || math.IsInf(scale[k], 0) {
				scale[k] = math.Abs(j.limits[k].Limit.Value) / 10
			}
		}
	}
	return scale
}

// bestMove searches one number for the best score: by a coarse walk both ways,
// finer near the start, and golden sections for what needs no stream computation or
// lies near enough for its surface; then it tries the finds, the plan, and for
// spacing a quarter and half a wavelength to either side, by the stream computation
// itself. The move is rounded to what a hand can set.
func (j *judge) bestMove(b *belief, x []float64, at int, q quantity, scale []float64, widen bool) (by, score float64) {
	y := append([]float64(nil), x...)
	var delta, response []float64
	if b.surface != nil {
		delta, response = make([]float64, len(b.surface.axes)), make([]float64, j.flow.size)
	}
	value := func(d float64) float64 {
		y[at] = x[at] + d
		if b.surface == nil {
			return j.score(y, nil, scale)
		}
		b.surface.response(y, delta, response)
		return j.score(y, response, scale)
	}
	plan := j.plan[at] - x[at]
	round := func(d float64) float64 { return math.Round(d/q.step()) * q.step() }
	found := round(j.search(value, q, plan))
	if b.surface == nil {
		return found, value(found)
	}
	tries := []float64{found, round(plan)}
	if widen && !q.angular() {
		wave := j.sheet.Radio.WavelengthM()
		for _, part := range [4]float64{-0.5, -0.25, 0.25, 0.5} {
			tries = append(tries, round(part*wave))
		}
	}
	score = math.Inf(-1)
	for i, d := range tries {
		if d == 0 || slices.Contains(tries[:i], d) {
			continue
		}
		y[at] = x[at] + d
		if v := j.score(y, j.flow.accurate(y), scale); v > score {
			by, score = d, v
		}
	}
	return by, score
}

// search is a coarse walk both ways from 0, then golden sections about the best.
func (j *judge) search(value func(float64) float64, q quantity, plan float64) float64 {
	best, bestAt := value(0), 0.0
	width := 0.0
	const steps = 24
	for k := 1; k <= steps; k++ {
		d := q.reach() * math.Pow(float64(k)/steps, 2)
		for _, s := range [2]float64{d, -d} {
			if v := value(s); v > best {
				best, bestAt = v, s
				width = q.reach() * (math.Pow(float64(k+1)/steps, 2) - math.Pow(float64(k-1)/steps, 2)) / 2
			}
		}
	}
	if v := value(plan); v >= best { // the plan is always worth a look
		best, bestAt, width = v, plan, math.Max(width, q.step()*10)
	}
	if width == 0 {
		width = q.reach() / (steps * steps)
	}
	lo, hi := bestAt-width, bestAt+width
	const golden = 0.6180339887498949
	a, c := hi-golden*(hi-lo), lo+golden*(hi-lo)
	fa, fc := value(a), value(c)
	for hi-lo > q.step()/4 {
		if fa >= fc {
			hi, c, fc = c, a, fa
			a = hi - golden*(hi-lo)
			fa = value(a)
		} else {
			lo, a, fa = a, c, fc
			c = lo + golden*(hi-lo)
			fc = value(c)
		}
	}
	if m := (lo + hi) / 2; value(m) > best {
		bestAt = m
	}
	return bestAt
}
