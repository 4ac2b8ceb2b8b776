package aim

import "math"

// Path is the way between two antennas over an earth of effective radius k·R,
// heights above one datum.
type Path struct {
	Wavelength            float64
	Distance              float64 // along the ground, metres
	NearHeight, FarHeight float64
	K                     float64
}

// Obstacle is something that reaches toward the path: its distance from the near
// end and the height of its top above the datum, with that height's standard
// uncertainty.
type Obstacle struct{ At, Top, Doubt float64 }

// Clearance is how one obstacle stands to the path.
type Clearance struct {
	Bulge     float64 // of the earth at that place, metres
	Line      float64 // height of the line there, above the datum
	Fresnel   float64 // radius of the first Fresnel zone, metres
	Clearance float64 // of the line over the top and the bulge, metres; negative where it cuts
	Nu        float64
	Loss      float64 // of this edge alone, dB
}

// Fresnel is the radius of the n-th Fresnel zone at distances d1 and d2 from the
// ends, for d1, d2 > 0:
//
//	R = √(n λ d₁ d₂ / (d₁ + d₂))
//
// Source: Recommendation ITU-R P.526-15, section 2.1.
func Fresnel(n, wavelength, d1, d2 float64) float64 {
	return math.Sqrt(n * wavelength * d1 * d2 / (d1 + d2))
}

// Bulge is how far the earth stands above the chord between the ends at distances
// d1 and d2 from them: d₁ d₂ / (2 k R).
func Bulge(d1, d2, k float64) float64 { return d1 * d2 / (2 * k * MeanEarthRadius) }

// FreeSpaceLoss is the basic transmission loss between isotropic antennas in free
// space, dB:
//
//	L = 20 log(4π d / λ)
//
// Source: Recommendation ITU-R P.525-4, equation 3; the exact form, not the one
// with the constant rounded to 32.4.
func FreeSpaceLoss(distance, wavelength float64) float64 {
	return 20 * math.Log10(4*math.Pi*distance/wavelength)
}

// KnifeEdge is the loss over one knife edge, dB, of the dimensionless clearance ν:
//
//	J(ν) = 6.9 + 20 log(√((ν − 0.1)² + 1) + ν − 0.1)   for ν > −0.78, else 0
//
// Source: Recommendation ITU-R P.526-15, section 4.1. Between −0.7 and 10 it keeps
// within 0.13 dB of the Fresnel integral it stands for.
func KnifeEdge(nu float64) float64 {
	if nu <= -0.78 {
		return 0
	}
	// For large negative ν the sum would cancel; −0.78 is not large.
	return math.Max(0, 6.9+20*math.Log10(math.Hypot(nu-0.1, 1)+nu-0.1))
}

// SlantRange is the straight distance between the antennas, metres: the ground
// distance and the difference in height as the two sides of a right angle
// (Recommendation ITU-R P.1812-6, equation 8).
func (p Path) SlantRange() float64 { return math.Hypot(p.Distance, p.FarHeight-p.NearHeight) }

// At is the clearance of the path over an obstacle with 0 < At < Distance.
//
//	ν = h √(2/λ · (1/d₁ + 1/d₂)),  h = −clearance
//
// (Recommendation ITU-R P.526-15, section 4.1.)
func (p Path) At(o Obstacle) Clearance {
	d1, d2 := o.At, p.Distance-o.At
	c := Clearance{
		Bulge:   Bulge(d1, d2, p.K),
		Line:    p.NearHeight + (p.FarHeight-p.NearHeight)*o.At/p.Distance,
		Fresnel: Fresnel(1, p.Wavelength, d1, d2),
	}
	c.Clearance = c.Line - o.Top - c.Bulge
	c.Nu = nu(-c.Clearance, d1, d2, p.Wavelength)
	c.Loss = KnifeEdge(c.Nu)
	return c
}

func nu(excess, d1, d2, wavelength float64) float64 {
	return excess * math.Sqrt(2/wavelength*(1/d1+1/d2))
}

// Diffraction is the loss over all obstacles together, dB, and how many of them
// count. One edge is P.526's knife edge. For several, the edge of largest ν is the
// main one; to it are added the worst edge between it and each end, seen from the
// end to the main edge's top (J. Deygout, Multiple knife-edge diffraction of
// microwaves, IEEE Trans. Antennas Propag. 14, 1966, 480–489, stopped after three
// edges). It errs on the side of too much loss where edges stand close together.
func (p Path) Diffraction(obstacles []Obstacle) (loss float64, edges int) {
	points := make([]point, len(obstacles))
	for i, o := range obstacles {
		points[i] = point{o.At, o.Top + Bulge(o.At, p.Distance-o.At, p.K)}
	}
	near, far := point{0, p.NearHeight}, point{p.Distance, p.FarHeight}
	main, nuMain := worst(points, near, far, p.Wavelength)
	if main < 0 || KnifeEdge(nuMain) == 0 {
		return 0, 0
	}
	loss, edges = KnifeEdge(nuMain), 1
	for _, side := range [2][2]point{{near, points[main]}, {points[main], far}} {
		if i, v := worst(points, side[0], side[1], p.Wavelength); i >= 0 && KnifeEdge(v) > 0 {
			loss += KnifeEdge(v)
			edges++
		}
	}
	return loss, edges
}

// DiffractionDoubt is the standard uncertainty of Diffraction from the doubt of
// the tops, each moved by its own up and down, and from the construction itself:
// nothing for one edge, SeveralEdgesDoubt for more.
func (p Path) DiffractionDoubt(obstacles []Obstacle) float64 {
	_, edges := p.Diffraction(obstacles)
	sum := 0.0
	if edges > 1 {
		sum = SeveralEdgesDoubt * SeveralEdgesDoubt
	}
	moved := append([]Obstacle(nil), obstacles...)
	for i, o := range obstacles {
		moved[i].Top = o.Top + o.Doubt
		up, _ := p.Diffraction(moved)
		moved[i].Top = o.Top - o.Doubt
		down, _ := p.Diffraction(moved)
		moved[i] = o
		sum += (up - down) * (up - down) / 4
	}
	return math.Sqrt(sum)
}

// SeveralEdgesDoubt is how far a construction of several knife edges is taken to
// be off, dB standard uncertainty. Common practice; real edges are round and the
// constructions differ by as much among themselves.
const SeveralEdgesDoubt = 3.0

// point is a place in the plane of the path, its height with the earth's bulge
// added so that rays are straight.
type point struct{ x, y float64 }

// worst finds the point of largest ν strictly between two others; −1 where there
// is none.
func worst(points []point, from, to point, wavelength float64) (int, float64) {
	at, most := -1, math.Inf(-1)
	for i, q := range points {
		if q.x <= from.x || q.x >= to.x {
			continue
		}
		d1, d2 := q.x-from.x, to.x-q.x
		line := from.y + (to.y-from.y)*d1/(d1+d2)
		if v := nu(q.y-line, d1, d2, wavelength); v > most {
			at, most = i, v
		}
	}
	return at, most
}
