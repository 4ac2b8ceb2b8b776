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

// free is how far a quantity is tried before it is called not limiting: farther off
// than any hand leaves it, and for places a wavelength, beyond which the phases
// repeat.
func (m *model) free(q quantity) float64 {
	switch q {
	case skew:
		return 30 * degree
	case tilt:
		return 20 * degree
	case azimuth:
		return 45 * degree
	}
	return math.Max(m.sheet.Radio.WavelengthM(), 0.03)
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
	plan := j.asHung(far, j.plan)
	start := j.run(plan)
	out := &Tolerances{Probability: start.joint, PlanIsGo: start.joint >= Guard}
	var at []int
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
	if j.flow != nil {
		j.flow.exact(plan.surface.at) // the anchor of the lines
	}
	stride := 1
	if j.flow != nil {
		stride = 2
	}
	r := j.newRig(plan, stride)
	alone := make([]float64, len(j.plan)) // by number; 0 where not limiting
	for n, a := range at {
		q := quantity(a % int(quantities))
		off := make([]float64, len(j.plan))
		holds := func(t float64) bool {
			for _, d := range [2]float64{t, -t} {
				off[a] = d
				if p, _ := r.probability(off); p < Guard {
					return false
				}
			}
			return true
		}
		if t, limiting := firstFailure(plan.est[a].U(), j.free(q), holds); limiting {
			alone[a] = t
			v := q.border(t)
			out.Box[n].Alone = &v
		}
	}
	edges := func(scale float64) []float64 {
		e := make([]float64, len(alone))
		for i := range e {
			e[i] = scale * alone[i]
		}
		return e
	}
	search := func(scale float64) bool {
		for _, off := range r.corners(edges(scale)) {
			if p, _ := r.probability(off); p < Guard {
				return false
			}
		}
		return true
	}
	scale := 1.0
	if !search(1) {
		scale = largest(1, search)
	}
	// The last word is the verdict's own, with its surface about the corner itself, at
	// the corners that came out worst.
	worst := r.worstCorners(edges(scale), 3)
	at1 := func(f float64) (least float64, corner []float64, binding string) {
		least = math.Inf(1)
		for _, off := range worst {
			x := append([]float64(nil), j.plan...)
			for i := range x {
				x[i] += f * off[i]
			}
			if o := j.runEvery(j.asHung(far, x), 1); o.joint < least {
				least, corner = o.joint, off
				if k := j.critical(o); k >= 0 {
					binding = j.limits[k].Name
				}
			}
		}
		return least, corner, binding
	}
	holds := func(f float64) bool {
		p, _, binding := at1(f)
		if p < Guard {
			out.Binding = binding
		}
		return p >= Guard
	}
	f := 1.0
	if j.flow != nil {
		lo, hi := 0.0, 1.0
		for most := 1 / scale; holds(hi); hi = math.Min(hi*1.15, most) {
			if lo = hi; hi >= most {
				break
			}
		}
		for hi-lo > 0.01*hi {
			if mid := (lo + hi) / 2; holds(mid) {
				lo = mid
			} else {
				hi = mid
			}
		}
		f = lo
	} else {
		holds(1.01) // names the limit that binds
	}
	var corner []float64
	out.CornerProbability, corner, _ = at1(f)
	scale *= f
	for i := range corner {
		corner[i] *= f
	}
	for n, a := range at {
		q := quantity(a % int(quantities))
		if alone[a] > 0 {
			v := q.border(scale * alone[a])
			out.Box[n].Together = &v
		}
		out.WorstCorner = append(out.WorstCorner, q.border(corner[a]))
	}
	return out, nil
}

// firstFailure walks outward from 0 in growing steps, the first as long as the
// doubt, until holds fails, and bisects the last step. limiting is false where
// nothing fails up to most.
func firstFailure(first, most float64, holds func(float64) bool) (t float64, limiting bool) {
	lo, step := 0.0, first
	for {
		hi := math.Min(lo+step, most)
		if !holds(hi) {
			return lo + largest(hi-lo, func(d float64) bool { return holds(lo + d) }), true
		}
		if hi >= most {
			return 0, false
		}
		lo, step = hi, step*1.3
	}
}

// largest bisects for the largest t below top that holds, to half a per cent.
func largest(top float64, holds func(float64) bool) float64 {
	lo, hi := 0.0, top
	for range 24 {
		if hi-lo < 0.005*lo || hi-lo < 1e-4*top {
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
