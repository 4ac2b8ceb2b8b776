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

// runEvery judges with every stride-th draw: a lattice again, only thinner.
func (j *judge) runEvery(b *belief, stride int) *outcome {
	s := spreadOf(b)
	draws := j.drawsOf(s.dims)
	n := draws.N / stride
	out := &outcome{values: make([][]float64, len(j.limits)), met: make([]float64, len(j.limits))}
	for k := range j.limits {
		if j.limits[k].value != nil {
			out.values[k] = make([]float64, n)
		}
	}
	x := make([]float64, len(s.base))
	for i := range n {
		s.draw(draws.At(i*stride), x)
		all := true
		for k := range j.limits {
			l := &j.limits[k]
			if l.value == nil {
				continue
			}
			v := l.value(x)
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
		out.met[k] /= float64(n)
	}
	out.joint /= float64(n)
	return out
}

// drawsOf returns draws of at least that many variables, made once.
func (j *judge) drawsOf(dims int) *doubt.Draws {
	if j.draws == nil || j.draws.Dims < dims {
		j.draws = doubt.NewDraws(blocks, max(dims, j.dims))
	}
	return j.draws
}

// blocks of draws for a probability: 2048 points. At the guard of 0.95 the
// probability is then within 0.004 of what a hundred times as many give; see
// TestDrawsAreEnough.
const blocks = 1

// score is how well the best estimate alone holds the limits: the least margin
// over the doubt of its limit. It orders moves; the probability decides.
func (j *judge) score(x []float64, scale []float64) float64 {
	worst := math.Inf(1)
	for k := range j.limits {
		if l := &j.limits[k]; l.value != nil {
			worst = math.Min(worst, l.margin(l.value(x))/scale[k])
		}
	}
	return worst
}
