package aim_test

import (
	"fmt"
	"math"

	"crossplumb/calc/aim"
)

const degree = math.Pi / 180

// Two masts on either side of the antimeridian, 3 km apart.
func ExampleAim() {
	near := aim.End{Position: aim.Position{Lat: -16.80 * degree, Lon: 179.99 * degree, Height: 240}, Doubt: 5}
	far := aim.End{Position: aim.Position{Lat: -16.79 * degree, Lon: -179.984 * degree, Height: 310}, Doubt: 5}
	t, err := aim.Aim(near, far, aim.StandardK)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("bearing %.2f° ± %.2f°, elevation %.2f°, %.1f m\n", t.TrueBearing/degree, t.BearingDoubt/degree, t.Elevation/degree, t.Distance)
	// Output: bearing 68.24° ± 0.14°, elevation 1.33°, 2984.4 m
}

// Declination at Vienna at the end of 2026, with the model's own doubt.
func ExampleMagnetic() {
	f := aim.Magnetic(aim.Position{Lat: 48.2 * degree, Lon: 16.37 * degree, Height: 170}, 2026.9)
	fmt.Printf("%.2f° ± %.2f°\n", f.Declination()/degree, f.DeclinationDoubt()/degree)
	// Output: 5.38° ± 0.37°
}
