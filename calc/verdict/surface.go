package verdict

import (
	"math"
	"slices"
)

// surface is the responses about one belief as a polynomial of second order in what
// is doubtful. The stream computation is too slow for thousands of draws, and
// mostly smooth: nodes at ±√3 u of every number (those of three-point Gauss-Hermite
// quadrature) and at the corners of the pairs that bend say what the draws need.
// Where that is not enough, as with places so doubtful that phases turn over, the
// check says so and the draws are computed one by one; see judge.runEvery.
type surface struct {
	at     []float64 // the best estimate
	centre []float64
	axes   []axis
	pairs  []pair
	shift  []float64 // to another case of the surroundings; nil: none
	rough  bool      // the polynomial is not good enough for the limits
}

// axis is one doubtful number with its first and half its second derivative.
type axis struct {
	at     int
	u      float64
	linear []float64
	bend   []float64
}

type pair struct {
	a, b int // of axes
	both []float64
}

// node is how far off the best estimate the nodes stand, in standard uncertainties.
var node = math.Sqrt(3)

// reach is how far off, in standard uncertainties, the polynomial is followed;
// farther draws count as here. Beyond it a polynomial means nothing.
const reach = 3.5

// mostPairs bounds the corners that are computed.
const mostPairs = 12

// about builds the surface of a belief. Numbers in only (nil: all) get axes.
func (f *flow) about(b *belief, only []bool) *surface {
	s := &surface{at: b.values()}
	s.centre = f.exact(s.at)
	x := append([]float64(nil), s.at...)
	for i := range b.est {
		u := b.est[i].U()
		if u == 0 || only != nil && !only[i] {
			continue
		}
		h := node * u
		x[i] = s.at[i] + h
		plus := f.nearby(x)
		x[i] = s.at[i] - h
		minus := f.nearby(x)
		x[i] = s.at[i]
		a := axis{at: i, u: u, linear: make([]float64, f.size), bend: make([]float64, f.size)}
		for k := range f.size {
			a.linear[k] = (plus[k] - minus[k]) / (2 * h)
			a.bend[k] = (plus[k] + minus[k] - 2*s.centre[k]) / (2 * h * h)
		}
		s.axes = append(s.axes, a)
	}
	s.cross(f, x)
	return s
}

// movement is how far each response moves at one standard uncertainty of all
// numbers together.
func (s *surface) movement() []float64 {
	total := make([]float64, len(s.centre))
	for i := range s.axes {
		for k := range total {
			total[k] = math.Hypot(total[k], s.axes[i].effect(k))
		}
	}
	return total
}

// cross computes the mixed terms of the axes that bend the responses most: an even
// quantity, such as a skew against the far end's, bends in the sum of two.
func (s *surface) cross(f *flow, x []float64) {
	total := s.movement()
	weight := make([]float64, len(s.axes))
	order := make([]int, len(s.axes))
	for i := range s.axes {
		order[i] = i
		for k := range total {
			if total[k] > negligible {
				weight[i] = math.Max(weight[i], s.axes[i].bent(k)/total[k])
			}
		}
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case weight[a] > weight[b]:
			return -1
		case weight[a] < weight[b]:
			return 1
		}
		return 0
	})
	const matters = 0.01 // of the whole movement
	for j := 1; j < len(order) && weight[order[j]] > matters; j++ {
		for i := range j {
			if len(s.pairs) == mostPairs {
				return
			}
			a, b := &s.axes[order[i]], &s.axes[order[j]]
			ha, hb := node*a.u, node*b.u
			x[a.at], x[b.at] = s.at[a.at]+ha, s.at[b.at]+hb
			corner := f.nearby(x)
			x[a.at], x[b.at] = s.at[a.at], s.at[b.at]
			p := pair{a: order[i], b: order[j], both: make([]float64, f.size)}
			for k := range p.both {
				alone := s.centre[k] + ha*(a.linear[k]+ha*a.bend[k]) + hb*(b.linear[k]+hb*b.bend[k])
				p.both[k] = (corner[k] - alone) / (ha * hb)
			}
			s.pairs = append(s.pairs, p)
		}
	}
}

// negligible is a movement of a response that no limit can feel: a thousandth of a
// stream, of the rate, of a correlation, of a decibel.
const negligible = 1e-3

// effect is how much a response moves at one standard uncertainty, and bent how
// much of that is of second order.
func (a *axis) effect(k int) float64 { return math.Abs(a.linear[k])*a.u + a.bent(k) }

func (a *axis) bent(k int) float64 { return math.Abs(a.bend[k]) * a.u * a.u }

// active marks the numbers that move any response by a twentieth of the most that
// one number moves it, or more.
func (s *surface) active(numbers int) []bool {
	out := make([]bool, numbers)
	for k := range s.centre {
		most := 0.0
		for i := range s.axes {
			most = math.Max(most, s.axes[i].effect(k))
		}
		for i := range s.axes {
			if e := s.axes[i].effect(k); e > negligible && e > most/20 {
				out[s.axes[i].at] = true
			}
		}
	}
	return out
}

// response at x, into out; delta is scratch of one for each axis.
func (s *surface) response(x, delta, out []float64) {
	copy(out, s.centre)
	for i := range s.axes {
		a := &s.axes[i]
		d := x[a.at] - s.at[a.at]
		d = math.Min(math.Max(d, -reach*a.u), reach*a.u)
		delta[i] = d
		for k := range out {
			out[k] += d * (a.linear[k] + d*a.bend[k])
		}
	}
	for i := range s.pairs {
		p := &s.pairs[i]
		dd := delta[p.a] * delta[p.b]
		for k := range out {
			out[k] += dd * p.both[k]
		}
	}
	for k := range s.shift {
		out[k] += s.shift[k]
	}
}
