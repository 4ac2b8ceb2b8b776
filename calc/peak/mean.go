package peak

import "math"

// Mean is a mean direction with its standard uncertainty.
type Mean struct {
	Angle  float64 // −π to π
	Length float64 // of the mean of the unit vectors, 0 to 1: 1 when all agree
	Doubt  float64 // standard deviation about it over √n; 0 for a single angle
}

// shortest is the length of the mean vector below which there is no mean
// direction worth the name: angles spread evenly over three quarters of the circle
// still have 0.3.
const shortest = 0.2

// VectorMean returns the direction of the mean of unit vectors,
//
//	atan2(Σ sin, Σ cos)
//
// so that the mean of 359° and 1° is 0° and not 180°. ok is false without angles
// and where they point all round. Source: K. V. Mardia and P. E. Jupp, Directional
// Statistics (2000), section 2.2.
func VectorMean(angles []float64) (m Mean, ok bool) {
	n := float64(len(angles))
	if n == 0 {
		return Mean{}, false
	}
	var sum, wide float64
	for _, a := range angles {
		s, c := math.Sincos(a)
		sum, wide = sum+s, wide+c
	}
	m.Length = math.Hypot(sum, wide) / n
	if m.Length < shortest {
		return Mean{}, false
	}
	m.Angle = math.Atan2(sum, wide)
	squares := 0.0
	for _, a := range angles {
		d := math.Remainder(a-m.Angle, 2*math.Pi)
		squares += d * d
	}
	if n > 1 {
		m.Doubt = math.Sqrt(squares / (n - 1) / n)
	}
	return m, true
}
