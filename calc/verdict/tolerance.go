package verdict

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/doubt"
	"crossplumb/calc/sheet"
)

// Tolerances is how far the antennas may hang off their plan, read as well as the
// planned methods read: the inverse of the verdict.
type Tolerances struct {
	PlanIsGo    bool    // the plan itself is go; else there is no box
	Probability float64 // of the plan, hung exactly
	Box         []Tolerance
	// WorstCorner is the corner of the box with the least probability, and that
	// probability.
	WorstCorner       []float64 // border units, one for each of Box
	CornerProbability float64
	// Binding is the limit that fails first outside the box.
	Binding string
}

// Tolerance is one thing that a hand sets.
type Tolerance struct {
	Antenna, Quantity, Axis, Unit string
	U                             float64  // doubt of the planned method
	Together                      *float64 // ± with everything else at its edge too; nil: not limiting
	Alone                         *float64 // ± with everything else as planned; nil: not limiting
}

// free is how far a quantity is tried before it is called not limiting.
func (q quantity) free() float64 {
	switch q {
	case skew:
		return math.Pi / 4
	case tilt:
		return math.Pi / 6
	case azimuth:
		return math.Pi / 2
	}
	return 1
}

// Tolerate finds the tolerances of a mount. Each tolerance alone is the largest
// deviation, to either side, with which the verdict is still go while all else
// hangs as planned. The box has the shape of those, shrunk until the verdict is
// still go at every corner, all readings at their edges together. Readings in the
// sheet's near end are passed over; the far end counts as in a verdict.
func Tolerate(s *sheet.Sheet) (*Tolerances, *codec.Problem) {
	j, p := newJudge(s)
	if p != nil {
		return nil, p
	}
	far, p := j.believe(sheet.Planned)
	if p != nil {
		return nil, p
	}
	x := append([]float64(nil), j.plan...)
	start := j.run(j.asHung(far, x))
	out := &Tolerances{Probability: start.joint, PlanIsGo: start.joint >= Guard}
	var at []int
	var alone []float64
	for i := range j.near {
		for q := range quantities {
			if q == azimuth && j.bodies[i].symmetric || !q.angular() && j.bodies[i].datum {
				continue
			}
			out.Box = append(out.Box, Tolerance{
				Antenna: j.bodies[i].antenna.ID, Quantity: q.String(), Axis: q.axis(), Unit: q.unit(),
				U: q.border(plannedDoubt(j.plannedMethod(i, q), q)),
			})
			at = append(at, j.at(i, q))
		}
	}
	if !out.PlanIsGo {
		if k := j.critical(start); k >= 0 {
			out.Binding = j.limits[k].Name
		}
		return out, nil
	}
	isGo := func() bool { return j.runEvery(j.asHung(far, x), 1).joint >= Guard }
	for n, a := range at {
		q := quantity(a % int(quantities))
		holds := func(t float64) bool {
			defer func() { x[a] = j.plan[a] }()
			if x[a] = j.plan[a] + t; !isGo() {
				return false
			}
			x[a] = j.plan[a] - t
			return isGo()
		}
		t := q.free()
		if !holds(t) {
			t = largest(t, holds)
			v := q.border(t)
			out.Box[n].Alone = &v
		} else {
			t = math.Inf(1)
		}
		alone = append(alone, t)
	}
	corner := make([]float64, len(at))
	set := func(scale float64, signs []float64) {
		for n, a := range at {
			x[a] = j.plan[a]
			if !math.IsInf(alone[n], 1) {
				x[a] += scale * signs[n] * alone[n]
			}
		}
	}
	worst := func(scale float64) (least float64, binding string) {
		least = math.Inf(1)
		for _, signs := range j.corners(x, set, scale, len(at)) {
			set(scale, signs)
			o := j.runEvery(j.asHung(far, x), 1)
			if o.joint < least {
				least = o.joint
				copy(corner, signs)
				if k := j.critical(o); k >= 0 {
					binding = j.limits[k].Name
				}
			}
		}
		return least, binding
	}
	scale := 1.0
	holds := func(s float64) bool {
		least, binding := worst(s)
		if least < Guard {
			out.Binding = binding
		}
		return least >= Guard
	}
	if !holds(1) {
		scale = largest(1, holds)
	}
	out.CornerProbability, _ = worst(scale)
	for n, a := range at {
		q := quantity(a % int(quantities))
		edge := 0.0
		if !math.IsInf(alone[n], 1) {
			edge = scale * alone[n]
			v := q.border(edge)
			out.Box[n].Together = &v
		}
		out.WorstCorner = append(out.WorstCorner, q.border(corner[n]*edge))
	}
	return out, nil
}

// largest bisects for the largest t below top that holds, to half a per cent.
func largest(top float64, holds func(float64) bool) float64 {
	lo, hi := 0.0, top
	for range 24 {
		if hi-lo < 0.005*lo {
			break
		}
		if mid := (lo + hi) / 2; holds(mid) {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo
}

// corners are the corners worth trying: for each limit the one where it is worst,
// found by turning one sign after the other until none makes it worse, from all
// plus and from all minus.
func (j *judge) corners(x []float64, set func(float64, []float64), scale float64, n int) [][]float64 {
	var out [][]float64
	for k := range j.limits {
		l := &j.limits[k]
		if l.value == nil {
			continue
		}
		for _, from := range [2]float64{1, -1} {
			signs := make([]float64, n)
			for i := range signs {
				signs[i] = from
			}
			margin := func() float64 {
				set(scale, signs)
				return l.margin(l.value(x))
			}
			now := margin()
			for range 4 { // sweeps: couplings between two signs need a second, more are rare
				changed := false
				for i := range signs {
					signs[i] = -signs[i]
					if m := margin(); m < now-1e-12 {
						now, changed = m, true
					} else {
						signs[i] = -signs[i]
					}
				}
				if !changed {
					break
				}
			}
			out = append(out, signs)
		}
	}
	return out
}

// plannedMethod is the method by which the plan says a quantity will be read.
func (m *model) plannedMethod(i int, q quantity) string {
	a := m.bodies[i].antenna
	switch q {
	case skew:
		return a.Skew.Planned.Method
	case tilt:
		return a.Tilt.Planned.Method
	case azimuth:
		return a.Azimuth.Planned.Method
	}
	return a.Position.Planned.Method
}

// asHung is the belief of near antennas that hang at x, each number read once by
// its planned method.
func (j *judge) asHung(far *belief, x []float64) *belief {
	b := *far
	b.est = append([]doubt.Estimate(nil), far.est...)
	for i := range j.near {
		for q := range quantities {
			at := j.at(i, q)
			b.est[at] = doubt.Estimate{Value: x[at]}
			if q == azimuth && j.bodies[i].symmetric || !q.angular() && j.bodies[i].datum {
				continue
			}
			method := j.plannedMethod(i, q)
			name := q.String() + q.axis()
			b.est[at] = doubt.Pool([]doubt.Reading{{Value: x[at], U: plannedDoubt(method, q), Source: method + "/" + name, Share: biasShare(method)}})
		}
	}
	return &b
}
