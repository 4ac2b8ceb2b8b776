package scatter

import "gonum.org/v1/gonum/integrate/quad"

// legendre returns the nodes and weights of Gauss-Legendre quadrature over 0…1.
func legendre(n int) (at, weight []float64) {
	at, weight = make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(at, weight, 0, 1)
	return at, weight
}
