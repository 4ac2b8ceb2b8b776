package stream

import (
	"math"
	"slices"

	"crossplumb/calc/antenna"
)

// Detail is what an engineer looks at behind a Result. Matrices are square, row by row, ports counted through the bodies.
type Detail struct {
	// NearV … FarH are the covariances R_p before normalising, relative to the boresight gain; nil beside reflectors and
	// where nothing is scattered.
	NearV, NearH, FarV, FarH []complex128

	// NearCorrelation and FarCorrelation are those of the scattered part, the other end's ports exciting equally; nil
	// where nothing is scattered. A port that receives none of it has zeros.
	NearCorrelation, FarCorrelation []complex128

	// ConditionDB is the median over the scatter of 20 log₁₀ of the largest over the smallest singular value of H, at
	// most 250.
	ConditionDB float64
}

// Detail computes it for the mounts where they hang.
func (e *Engine) Detail(near, far []antenna.Body) Detail {
	e.load(near, far, false)
	c := e.channel
	var d Detail
	if c.random {
		if len(c.paths) == 0 {
			d.NearV, d.NearH, d.FarV, d.FarH = slices.Clone(c.rv), slices.Clone(c.rh), slices.Clone(c.sv), slices.Clone(c.sh)
		}
		d.NearCorrelation = normalised(e.scatterCovariance(true), c.near)
		d.FarCorrelation = normalised(e.scatterCovariance(false), c.far)
	}
	var all []float64
	condition := func() {
		h, rows, cols := c.h, c.far, c.near
		if cols > rows {
			t := make([]complex128, len(h))
			for n := range cols {
				for f := range rows {
					t[f*cols+n] = h[n*rows+f]
				}
			}
			h, rows, cols = t, cols, rows
		}
		_, s, _ := svd(h, rows, cols, leastColumn)
		db := 250.0
		if s[cols-1] > leastColumn*s[0] {
			db = 20 * math.Log10(s[0]/s[cols-1])
		}
		all = append(all, db)
	}
	if !c.random {
		c.hold()
		condition()
	} else {
		e.points.upTo(conditionPoints, nil)
		size := e.points.rows * e.points.cols
		for r := range replicates {
			w := e.points.draws[r][0].w
			for i := range conditionPoints {
				c.at(w[i*size:][:size])
				condition()
			}
		}
	}
	slices.Sort(all)
	d.ConditionDB = all[len(all)/2]
	return d
}

// conditionPoints per replicate: 256 draws put the median within 3 percentiles of itself.
const conditionPoints = 16

func normalised(r []complex128, n int) []complex128 {
	out := make([]complex128, len(r))
	for i := range n {
		for j := range n {
			if q := real(r[i*n+i]) * real(r[j*n+j]); q > 0 {
				out[i*n+j] = r[i*n+j] / complex(math.Sqrt(q), 0)
			}
		}
	}
	return out
}

// Coupled tells at which ends mutual coupling is part of the answer: where every body is a half-wave dipole and they hang
// parallel. Elsewhere it is not modelled.
func (e *Engine) Coupled() (near, far bool) { return e.near.dipole, e.far.dipole }
