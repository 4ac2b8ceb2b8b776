package verdict

import (
	"math"

	"crossplumb/calc/doubt"
)

// spread says how the deviates of a draw become the numbers of all bodies: each
// number has a random part of its own, and sources of bias move several together.
type spread struct {
	base   []float64
	random []randomPart
	bias   []biasPart
	dims   int
}

type randomPart struct {
	at, dim    int
	scale, dof float64
}

type biasPart struct {
	at, dim int
	u       float64
}

// spreadOf lays the variables out: the sources first, then the random parts, the
// near skews before all others.
func spreadOf(b *belief) spread {
	s := spread{base: b.values()}
	source := map[string]int{}
	for at := range b.est {
		for _, part := range b.est[at].Bias {
			dim, ok := source[part.Source]
			if !ok {
				dim = len(source)
				source[part.Source] = dim
			}
			s.bias = append(s.bias, biasPart{at, dim, part.U})
		}
	}
	s.dims = len(source)
	for q := range quantities {
		for at := int(q); at < len(b.est); at += int(quantities) {
			if e := &b.est[at]; e.Random > 0 {
				s.random = append(s.random, randomPart{at, s.dims, e.Random, e.DOF})
				s.dims++
			}
		}
	}
	return s
}

// draw fills x from the deviates of one draw.
func (s *spread) draw(z, x []float64) {
	copy(x, s.base)
	for i := range s.random {
		r := &s.random[i]
		x[r.at] += r.scale * doubt.StudentOfNormal(z[r.dim], r.dof)
	}
	for i := range s.bias {
		x[s.bias[i].at] += s.bias[i].u * z[s.bias[i].dim]
	}
}

// outcome is what the draws of one state show.
type outcome struct {
	values  [][]float64     // [limit][draw], sorted; nil where a limit has no value
	summary []doubt.Summary // of the values
	met     []float64       // share of draws that hold each limit
	joint   float64         // share that holds all
}

// run judges one belief: every limit in every draw.
func (j *judge) run(b *belief) *outcome {
	out := j.runEvery(b, 1)
	out.summary = make([]doubt.Summary, len(out.values))
	for k := range out.values {
		if out.values[k] != nil {
			out.summary[k] = doubt.Summarise(out.values[k])
		}
	}
	return out
}

// runEvery judges with every stride-th draw: a lattice again, only thinner. Where a
// limit needs the stream computation its responses come from the belief's surface;
// where that is too rough they are computed draw by draw, with fewer draws.
func (j *judge) runEvery(b *belief, stride int) *outcome {
	s := spreadOf(b)
	draws := j.drawsOf(s.dims)
	var response, delta []float64
	if j.flow != nil {
		if b.surface == nil {
			b.surface = j.flow.about(b, b.only)
			b.surface.rough = j.rough(b, &s, draws)
		}
		response, delta = make([]float64, j.flow.size), make([]float64, len(b.surface.axes))
		if b.surface.rough {
			stride = max(stride, directStride)
			if b.incomplete {
				stride = 4 * directStride // no word hangs on it
			}
			j.flow.exact(b.surface.at) // the anchor of what is computed below
		}
	}
	n := draws.N / stride
	out := &outcome{values: make([][]float64, len(j.limits)), met: make([]float64, len(j.limits))}
	for k := range j.limits {
		if j.limits[k].judged() {
			out.values[k] = make([]float64, n)
		}
	}
	x := make([]float64, len(s.base))
	for i := range n {
		s.draw(draws.At(i*stride), x)
		if b.surface != nil {
			if b.surface.rough {
				copy(response, j.flow.nearby(x))
			} else {
				b.surface.response(x, delta, response)
			}
		}
		all := true
		for k := range j.limits {
			l := &j.limits[k]
			if !l.judged() {
				continue
			}
			v := j.valueOf(l, x, response)
			out.values[k][i] = v
			if l.met(v) {
				out.met[k]++
			} else {
				all = false
			}
		}
		if all {
			out.joint++
		}
	}
	for k := range out.met {
		out.met[k] = share(out.met[k], n)
	}
	out.joint = share(out.joint, n)
	return out
}

// share of n draws as a probability, (k + ½)/(n + 1): that none or all of a finite
// number did is no certainty (Jeffreys' rule).
func share(k float64, n int) float64 { return (k + 0.5) / (float64(n) + 1) }

// directStride thins the draws where each needs the stream computation itself: 512
// of them, which leaves a probability at the guard uncertain by 0.007.
const directStride = 4

// valueOf is what a judged limit is about, at x with its response.
func (j *judge) valueOf(l *limit, x, response []float64) float64 {
	if l.flows {
		return j.flow.metric(l.metric, response)
	}
	return l.value(x)
}

// rough tells whether a surface is not good enough to judge by: in a few draws
// computed in full it is off by more than a fifth of a metric's doubt, and the
// limit is near enough for that to matter.
func (j *judge) rough(b *belief, s *spread, draws *doubt.Draws) bool {
	const checks = 12
	off := make([]float64, len(j.limits))
	sum, square := make([]float64, len(j.limits)), make([]float64, len(j.limits))
	x := make([]float64, len(s.base))
	response, delta := make([]float64, j.flow.size), make([]float64, len(b.surface.axes))
	for i := range checks {
		s.draw(draws.At((i*2+1)*draws.N/(2*checks)), x)
		full := j.flow.nearby(x)
		b.surface.response(x, delta, response)
		for k := range j.limits {
			if l := &j.limits[k]; l.flows {
				v := j.flow.metric(l.metric, full)
				d := v - j.flow.metric(l.metric, response)
				off[k] += d * d / checks
				sum[k] += v / checks
				square[k] += v * v / checks
			}
		}
	}
	for k := range j.limits {
		l := &j.limits[k]
		if !l.flows {
			continue
		}
		u := math.Sqrt(math.Max(square[k]-sum[k]*sum[k], 0))
		miss := math.Sqrt(off[k])
		if miss > u/5 && miss > negligible && math.Abs(l.margin(sum[k])) < 4*(u+miss) {
			return true
		}
	}
	return false
}

// drawsOf returns draws of at least that many variables, made once.
func (j *judge) drawsOf(dims int) *doubt.Draws {
	if j.draws == nil || j.draws.Dims < dims {
		j.draws = doubt.NewDraws(blocks, max(dims, j.dims))
	}
	return j.draws
}

// blocks of draws for a probability: 2048 points. TestDrawsAreEnough compares with
// a hundred times as many.
const blocks = 1

// score is how well a geometry alone holds the limits: the least margin over the
// doubt of its limit. It orders moves; the probability decides. A nil response
// leaves the limits of the stream computation aside.
func (j *judge) score(x, response, scale []float64) float64 {
	worst := math.Inf(1)
	for k := range j.limits {
		if l := &j.limits[k]; l.judged() && (!l.flows || response != nil) {
			worst = math.Min(worst, l.margin(j.valueOf(l, x, response))/scale[k])
		}
	}
	return worst
}
