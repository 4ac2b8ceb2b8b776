package stream

import (
	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
)

// Glance evaluates geometries under several surroundings at the coarse quadrature and the few common points of a
// Local, without an accurate anchor: good for differences and ratios between its own results, whose errors are alike,
// not for figures that stand alone. The first index of the answer is that of around, the second that of
// geometry. near and far are the plan as in New; errors are those of New.
func Glance(setup Setup, around []scatter.Surroundings, near, far []antenna.Body, geometry [][2][]antenna.Body) ([][]Result, error) {
	out := make([][]Result, len(around))
	for i := range around {
		setup.Around = around[i]
		e, err := prepare(setup, near, far)
		if err != nil {
			return nil, err
		}
		e.points = e.newLayout(false)
		l := &Local{e: e}
		for _, g := range geometry {
			out[i] = append(out[i], l.Evaluate(g[0], g[1]))
		}
	}
	return out, nil
}

// MeanPowers is MeanPower of a Result for mounts planned as near and far that hang as atNear and atFar, at the fine
// quadrature and without sampling. Errors are those of New.
func MeanPowers(setup Setup, near, far, atNear, atFar []antenna.Body) ([][]float64, error) {
	e, err := prepare(setup, near, far)
	if err != nil {
		return nil, err
	}
	e.load(atNear, atFar, false)
	r := e.describe(atNear, atFar, false)
	return r.MeanPower, nil
}
