package stream

import (
	"math"

	"crossplumb/calc/antenna"
)

// Quantity is one of the six numbers that say how a body hangs.
type Quantity int

const (
	// Right, Up and Forward are the position, m.
	Right Quantity = iota
	// Up is plumb.
	Up
	// Forward is along the path.
	Forward
	// Azimuth, Tilt and Skew are the angles, rad.
	Azimuth
	// Tilt is the elevation of the boresight.
	Tilt
	// Skew is the rotation about the boresight.
	Skew
)

// Coordinate is one number of one body that varies, and by how much it usually does.
type Coordinate struct {
	Far      bool
	Body     int
	Quantity Quantity
	Scale    float64 // standard deviation, m or rad, above 0
}

func (c *Coordinate) move(near, far []antenna.Body, by float64) {
	b := &near[min(c.Body, len(near)-1)]
	if c.Far {
		b = &far[c.Body]
	}
	switch c.Quantity {
	case Right:
		b.Right += by
	case Up:
		b.Up += by
	case Forward:
		b.Forward += by
	case Azimuth:
		b.Azimuth += by
	case Tilt:
		b.Tilt += by
	case Skew:
		b.Skew += by
	}
}

// Response is a cheap stand-in for Local.Values over many draws: the anchor plus, for each coordinate, the change along
// it alone, taken exactly at a few deviations and interpolated between. What coordinates do together beyond the sum is
// left out; Residual says how much that is over draws of the coordinates together.
type Response struct {
	l        *Local
	coords   []Coordinate
	at       [][]float64 // knots of each coordinate in its own scale, with 0, rising
	curves   [][][figures]float64
	base     [figures]float64
	Residual Values // standard deviation of truth less At over 16 joint normal draws; 0 where a figure does not exist
}

const figures = 4

func (v *Values) list() [figures]float64 {
	return [figures]float64{v.BitsPerSHz, v.EffectiveStreams, v.NearEnvelope, v.FarEnvelope}
}

func valuesOf(f [figures]float64) Values {
	return Values{f[0], f[1], f[2], f[3]}
}

// Response samples the neighbourhood of l's anchor along each coordinate: at ±1.25 and ±2.75 of its scale, or at ±1.75
// alone where the mounts hold more than 8 ports together, to bound the time.
func (l *Local) Response(coords []Coordinate) *Response {
	r := &Response{l: l, coords: append([]Coordinate(nil), coords...)}
	near, far := append([]antenna.Body(nil), l.near...), append([]antenna.Body(nil), l.far...)
	v := l.Values(near, far)
	r.base = v.list()
	knots := []float64{-2.75, -1.25, 0, 1.25, 2.75}
	if len(l.e.near.ports)+len(l.e.far.ports) > 8 {
		knots = []float64{-1.75, 0, 1.75}
	}
	for i := range r.coords {
		c := &r.coords[i]
		var curve [][figures]float64
		for _, k := range knots {
			var d [figures]float64
			if k != 0 {
				copy(near, l.near)
				copy(far, l.far)
				c.move(near, far, k*c.Scale)
				v := l.Values(near, far)
				d = v.list()
				for f := range d {
					d[f] -= r.base[f]
				}
			}
			curve = append(curve, d)
		}
		copy(near, l.near)
		copy(far, l.far)
		r.at = append(r.at, knots)
		r.curves = append(r.curves, curve)
	}
	r.check(near, far)
	return r
}

// checkDraws is how many joint draws Residual comes from: its own relative error is 1/√32, 18 %.
const checkDraws = 16

func (r *Response) check(near, far []antenna.Body) {
	seed := uint64(2)
	d := make([]float64, len(r.coords))
	q := newQuantile()
	var sum [figures]float64
	for range checkDraws {
		copy(near, r.l.near)
		copy(far, r.l.far)
		for i := range d {
			d[i] = r.coords[i].Scale * q.at((float64(splitmix(&seed)>>11)+0.5)/(1<<53))
			r.coords[i].move(near, far, d[i])
		}
		truth, guess := r.l.Values(near, far), r.At(d)
		t, g := truth.list(), guess.list()
		for f := range t {
			sum[f] += (t[f] - g[f]) * (t[f] - g[f])
		}
	}
	for f := range sum {
		sum[f] = math.Sqrt(sum[f] / checkDraws)
	}
	r.Residual = valuesOf(sum)
}

// At is the answer for deviations d from the anchor, one for each coordinate, in metres and radians. Beyond the outermost
// knots the curves go on straight. Envelopes stay within 0 to 1, streams and rate at 0 or above.
func (r *Response) At(d []float64) Values {
	out := r.base
	for i := range r.coords {
		x := d[i] / r.coords[i].Scale
		at, curve := r.at[i], r.curves[i]
		w := weights(at, x)
		for k := range at {
			if w[k] == 0 {
				continue
			}
			for f := range out {
				out[f] += w[k] * curve[k][f]
			}
		}
	}
	out[0], out[1] = math.Max(out[0], 0), math.Max(out[1], 0)
	for f := 2; f < figures; f++ {
		if r.base[f] >= 0 {
			out[f] = math.Min(math.Max(out[f], 0), 1)
		} else {
			out[f] = -1
		}
	}
	return valuesOf(out)
}

// weights are Lagrange's for the knots; outside they are those of the straight line through the outermost two.
func weights(at []float64, x float64) (w [5]float64) {
	n := len(at)
	switch {
	case x <= at[0]:
		t := (x - at[0]) / (at[1] - at[0])
		w[0], w[1] = 1-t, t
		return w
	case x >= at[n-1]:
		t := (x - at[n-2]) / (at[n-1] - at[n-2])
		w[n-2], w[n-1] = 1-t, t
		return w
	}
	for k := range at {
		p := 1.0
		for m := range at {
			if m != k {
				p *= (x - at[m]) / (at[k] - at[m])
			}
		}
		w[k] = p
	}
	return w
}
