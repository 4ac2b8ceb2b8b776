package aim

import (
	"errors"
	"math"
)

// ErrNearAntipode refuses a geodesic to the far side of the earth, where the
// shortest way round is not unique and the iteration below does not settle.
var ErrNearAntipode = errors.New("the two ends lie on opposite sides of the earth; no geodesic is computed beyond 19 700 km")

// Geodesic is the shortest line on the ellipsoid between two places at height
// zero.
type Geodesic struct {
	Distance     float64 // metres
	StartBearing float64 // forward azimuth at the first end, 0 to 2π
	EndBearing   float64 // forward azimuth at the second end, 0 to 2π
}

// longestArc is how far round the auxiliary sphere a geodesic is followed. The
// iteration shrinks its error by about f·σ/sin σ a step: 0.25 here, 0.004 for the
// length of any radio path.
const longestArc = 3.1

// Inverse solves the inverse problem of geodesy on the WGS 84 ellipsoid.
//
// With reduced latitudes tan β = (1 − f) tan φ the geodesic is a great circle of
// the auxiliary sphere, and (Karney 2013, equations 5 to 8)
//
//	s/b     = ∫ √(1 + k² sin²σ) dσ
//	λ₁₂     = ω₁₂ − f sin α₀ ∫ (2 − f) / (1 + (1 − f)√(1 + k² sin²σ)) dσ
//	k²      = e′² cos²α₀
//
// ω₁₂ is found by putting the second line's right side back into itself, which
// contracts for every arc up to longestArc. Both integrals are taken by Gauss and
// Legendre's rule instead of a series, so that there is no truncation in f.
//
// The latitude may be ±π/2. At a pole the bearing refers to the meridian of the
// longitude given. Two ends at one place give distance 0 and bearing 0.
// Source: C. F. F. Karney, Algorithms for geodesics, J. Geodesy 87 (2013) 43–55.
func Inverse(from, to Position) (Geodesic, error) {
	lambda := HalfTurn(to.Lon - from.Lon)
	sinB1, cosB1, b1 := reduced(from.Lat)
	sinB2, cosB2, b2 := reduced(to.Lat)
	// sin(β₂ − β₁) instead of a difference of products: at 50 m the products
	// agree in nine digits.
	sinDiff := math.Sin(b2 - b1)
	const secondEcc = eccSquared / (1 - eccSquared)

	omega := lambda
	for step := 0; ; step++ {
		sinOmega := math.Sin(omega)
		half := math.Sin(omega / 2)
		east1, north1 := cosB2*sinOmega, sinDiff+2*sinB1*cosB2*half*half
		east2, north2 := cosB1*sinOmega, sinDiff-2*cosB1*sinB2*half*half
		sinArc := math.Hypot(east1, north1)
		arc := math.Atan2(sinArc, sinB1*sinB2+cosB1*cosB2*math.Cos(omega))
		if arc > longestArc || step == 60 {
			return Geodesic{}, ErrNearAntipode
		}
		if sinArc == 0 {
			return Geodesic{}, nil
		}
		sinA1, cosA1 := east1/sinArc, north1/sinArc
		sinA0 := sinA1 * cosB1
		start := math.Atan2(sinB1, cosA1*cosB1) // arc from the northward crossing of the equator
		k2 := secondEcc * (1 - sinA0*sinA0)
		next := lambda + flattening*sinA0*arcIntegral(start, arc, func(sinSquared float64) float64 {
			return (2 - flattening) / (1 + (1-flattening)*math.Sqrt(1+k2*sinSquared))
		})
		if math.Abs(next-omega) > 1e-15 && step < 59 {
			omega = next
			continue
		}
		return Geodesic{
			Distance: semiMinor * arcIntegral(start, arc, func(sinSquared float64) float64 {
				return math.Sqrt(1 + k2*sinSquared)
			}),
			StartBearing: Turn(math.Atan2(east1, north1)),
			EndBearing:   Turn(math.Atan2(east2, north2)),
		}, nil
	}
}

// reduced returns the reduced latitude with its sine and cosine.
func reduced(lat float64) (sin, cos, beta float64) {
	sinLat, cosLat := math.Sincos(lat)
	if cosLat < 1e-15 { // the nearest float64 to π/2 is 6e-17 short of the pole
		return math.Copysign(1, sinLat), 0, math.Copysign(rightTurn, sinLat)
	}
	beta = math.Atan2((1-flattening)*sinLat, cosLat)
	sin, cos = math.Sincos(beta)
	return sin, cos, beta
}

// Half of the abscissas and the weights of the eight-point rule of Gauss and
// Legendre (Abramowitz and Stegun, Handbook of Mathematical Functions, table
// 25.4, n = 8). On a piece of half a radian the integrands above, which vary by
// a part in 300, leave a remainder below 1e-16.
var (
	legendreAt = [4]float64{0.183434642495650, 0.525532409916329, 0.796666477413627, 0.960289856497536}
	legendreBy = [4]float64{0.362683783378362, 0.313706645877887, 0.222381034453374, 0.101228536290376}
)

// arcIntegral integrates a function of sin²σ over an arc.
func arcIntegral(start, length float64, f func(sinSquared float64) float64) float64 {
	pieces := math.Ceil(length / 0.5)
	half := length / pieces / 2
	sum := 0.0
	for i := 0.0; i < pieces; i++ {
		middle := start + (2*i+1)*half
		for j := range legendreAt {
			a, b := math.Sin(middle-half*legendreAt[j]), math.Sin(middle+half*legendreAt[j])
			sum += legendreBy[j] * (f(a*a) + f(b*b))
		}
	}
	return sum * half
}
