package verdict

import (
	"math"
	"slices"
)

// rig hangs a mount off its plan by any deviations and tells the probability of
// go, quickly enough to search with. The stream computation's responses are those
// of the plan's surface, save that what the deviations of one number do comes from
// the computation itself, along that number, as far out as the search goes.
type rig struct {
	j       *judge
	plan    *belief // hung exactly as planned, read by the planned methods
	spread  spread
	stride  int
	surface *surface
	lines   map[int]*line // by number
	at      [][]float64   // numbers of each draw, hung as planned
	full    [][]float64   // responses of each draw, hung as planned
	axisOf  map[int]int   // of the surface, by number
}

// line is the response along one number: nodes one standard uncertainty apart near
// the plan and farther apart beyond.
type line struct {
	u      float64
	off    []float64 // rising, 0 among them
	values [][]float64
}

func (j *judge) newRig(plan *belief, stride int) *rig {
	r := &rig{j: j, plan: plan, spread: spreadOf(plan), stride: stride, lines: map[int]*line{}, axisOf: map[int]int{}}
	if j.flow != nil {
		if plan.surface == nil {
			plan.surface = j.flow.about(plan, nil)
		}
		r.surface = plan.surface
		for i := range r.surface.axes {
			r.axisOf[r.surface.axes[i].at] = i
		}
	}
	draws := j.drawsOf(r.spread.dims)
	for i := 0; i < draws.N; i += stride {
		x := make([]float64, len(r.spread.base))
		r.spread.draw(draws.At(i), x)
		r.at = append(r.at, x)
		if r.surface != nil {
			out := make([]float64, j.flow.size)
			r.surface.response(x, make([]float64, len(r.surface.axes)), out)
			r.full = append(r.full, out)
		}
	}
	return r
}

// reachTo makes the line along a number reach as far as off and the doubt about it.
func (r *rig) reachTo(at int, off float64) *line {
	l := r.lines[at]
	if l == nil {
		l = &line{u: r.plan.est[at].U(), off: []float64{0}, values: [][]float64{r.surface.centre}}
		r.lines[at] = l
	}
	x := append([]float64(nil), r.surface.at...)
	eval := func(d float64) []float64 {
		x[at] = r.surface.at[at] + d
		near := 6 * degree // as far as common random numbers stay common
		if !quantity(at % int(quantities)).angular() {
			near = r.j.sheet.Radio.WavelengthM() / 4
		}
		if math.Abs(d) > near {
			return r.j.flow.accurate(x)
		}
		return r.j.flow.nearby(x)
	}
	// Nodes are u apart up to 8 u, then each step is a quarter longer; for places at
	// most a sixteenth of a wavelength, which phases turn over with.
	const even, growth = 8, 1.25
	step := func(from float64) float64 {
		s := l.u
		if from >= even*l.u {
			s = from * (growth - 1)
		}
		if !quantity(at % int(quantities)).angular() {
			s = math.Min(s, r.j.sheet.Radio.WavelengthM()/16)
		}
		return s
	}
	for limit := off + reach*l.u; l.off[len(l.off)-1] < limit; {
		last := l.off[len(l.off)-1]
		d := last + step(last)
		l.off, l.values = append(l.off, d), append(l.values, eval(d))
	}
	for limit := off - reach*l.u; l.off[0] > limit; {
		first := l.off[0]
		d := first - step(-first)
		l.off, l.values = slices.Insert(l.off, 0, d), slices.Insert(l.values, 0, eval(d))
	}
	return l
}

// add adds the response at d along the line, less that at e, to out: parabolas
// through three nodes.
func (l *line) add(d, e float64, out []float64) {
	w, at := l.weights(d)
	v, from := l.weights(e)
	for k := range out {
		for i := range w {
			out[k] += w[i]*l.values[at+i][k] - v[i]*l.values[from+i][k]
		}
	}
}

func (l *line) weights(d float64) (w [3]float64, at int) {
	n := len(l.off)
	if n < 3 {
		return w, 0
	}
	i, _ := slices.BinarySearch(l.off, d)
	at = min(max(i-1, 0), n-3)
	a, b, c := l.off[at], l.off[at+1], l.off[at+2]
	d = math.Min(math.Max(d, l.off[0]), l.off[n-1])
	w[0] = (d - b) * (d - c) / ((a - b) * (a - c))
	w[1] = (d - a) * (d - c) / ((b - a) * (b - c))
	w[2] = (d - a) * (d - b) / ((c - a) * (c - b))
	return w, at
}

// move adds to a response what hanging off the plan by off does, doubt being the
// draw's own deviation from the plan's numbers (nil: none).
func (r *rig) move(off []float64, moved []int, x, out []float64) {
	doubt := func(at int) float64 {
		if x == nil {
			return 0
		}
		return x[at] - r.surface.at[at]
	}
	for _, at := range moved {
		r.lines[at].add(off[at]+doubt(at), doubt(at), out)
	}
	for i := range r.surface.pairs {
		p := &r.surface.pairs[i]
		a, b := r.surface.axes[p.a].at, r.surface.axes[p.b].at
		if off[a] == 0 && off[b] == 0 {
			continue
		}
		// A mixed term is known at the plan; farther out than its nodes it is kept, not
		// followed.
		far := func(at int, axis int) float64 {
			most := 2 * r.surface.axes[axis].u
			return math.Min(math.Max(off[at], -most), most)
		}
		da, db := doubt(a), doubt(b)
		more := (far(a, p.a)+da)*(far(b, p.b)+db) - da*db
		for k := range out {
			out[k] += more * p.both[k]
		}
	}
}

// moved lists the numbers that are off their plan, their lines long enough.
func (r *rig) moved(off []float64) []int {
	var out []int
	for at, d := range off {
		if d != 0 {
			if r.surface != nil {
				r.reachTo(at, d)
			}
			out = append(out, at)
		}
	}
	return out
}

// probability of go with the mount hung off its plan by off, and the limit that
// fails most often.
func (r *rig) probability(off []float64) (p float64, binding string) {
	moved := r.moved(off)
	j := r.j
	fails := make([]int, len(j.limits))
	x := make([]float64, len(off))
	var response []float64
	if r.surface != nil {
		response = make([]float64, j.flow.size)
	}
	good := 0
	for i := range r.at {
		copy(x, r.at[i])
		if r.surface != nil {
			copy(response, r.full[i])
			r.move(off, moved, x, response)
		}
		for _, at := range moved {
			x[at] += off[at]
		}
		all := true
		for k := range j.limits {
			l := &j.limits[k]
			if l.judged() && !l.met(j.valueOf(l, x, response)) {
				fails[k]++
				all = false
			}
		}
		if all {
			good++
		}
	}
	most := 0
	for k := range fails {
		if fails[k] > most {
			most, binding = fails[k], j.limits[k].Name
		}
	}
	return share(float64(good), len(r.at)), binding
}

// margin of one limit at the best estimate, hung off the plan by off.
func (r *rig) margin(l *limit, off []float64) float64 {
	moved := r.moved(off)
	x := append([]float64(nil), r.spread.base...)
	for _, at := range moved {
		x[at] += off[at]
	}
	var response []float64
	if r.surface != nil && l.flows {
		response = append([]float64(nil), r.surface.centre...)
		r.move(off, moved, nil, response)
	}
	return l.margin(r.j.valueOf(l, x, response))
}

// corners are the corners of a box worth trying, as signs of its edges: for each
// limit the one where it is worst, found by turning one sign after the other until
// none makes it worse, from all plus and from all minus.
func (r *rig) corners(edges []float64) [][]float64 {
	var out [][]float64
	for k := range r.j.limits {
		l := &r.j.limits[k]
		if !l.judged() {
			continue
		}
		for _, from := range [2]float64{1, -1} {
			off := make([]float64, len(edges))
			for i := range edges {
				off[i] = from * edges[i]
			}
			now := r.margin(l, off)
			for range 4 { // sweeps: couplings between two signs need a second, more are rare
				changed := false
				for i := range off {
					if off[i] == 0 {
						continue
					}
					off[i] = -off[i]
					if m := r.margin(l, off); m < now-1e-12 {
						now, changed = m, true
					} else {
						off[i] = -off[i]
					}
				}
				if !changed {
					break
				}
			}
			out = append(out, off)
		}
	}
	return out
}

// worstCorners are the n corners of the least probability.
func (r *rig) worstCorners(edges []float64, n int) [][]float64 {
	all := r.corners(edges)
	chance := map[*float64]float64{}
	for _, off := range all {
		chance[&off[0]], _ = r.probability(off)
	}
	slices.SortStableFunc(all, func(a, b []float64) int {
		switch {
		case chance[&a[0]] < chance[&b[0]]:
			return -1
		case chance[&a[0]] > chance[&b[0]]:
			return 1
		}
		return 0
	})
	return all[:min(n, len(all))]
}
