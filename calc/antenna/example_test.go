package antenna_test

import (
	"fmt"
	"math"

	"crossplumb/calc/antenna"
)

// Two half-wave dipoles a quarter wavelength apart, into loads matched to one alone: what each receives of its own field, and
// of what reaches its neighbour.
func ExampleCouplingMatrix() {
	c := make([]complex128, 4)
	antenna.CouplingMatrix(c, [][3]float64{{0, 0, 0}, {0.25, 0, 0}})
	fmt.Printf("mutual impedance %.1f Ω\n", antenna.MutualImpedance(0.25, 0))
	fmt.Printf("own part %.2f, neighbour's part %.2f\n", math.Hypot(real(c[0]), imag(c[0])), math.Hypot(real(c[1]), imag(c[1])))
	// Output:
	// mutual impedance (40.8-28.3i) Ω
	// own part 1.04, neighbour's part 0.35
}
