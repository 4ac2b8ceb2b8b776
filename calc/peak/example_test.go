package peak_test

import (
	"fmt"
	"math"

	"crossplumb/calc/peak"
)

const degree = math.Pi / 180

// A dish of 4° beamwidth stepped through half a degree at a time.
func ExampleSearch_Fit() {
	expected := -48.0
	s := peak.Search{
		Levels:    []float64{-54, -51, -50, -48, -48, -48, -49, -51, -53},
		Beamwidth: 4 * degree, Expected: &expected, ExpectedDoubt: 2, LevelDoubt: peak.DefaultLevelDoubt,
	}
	for a := 45.0; a <= 49; a += 0.5 {
		s.Angles = append(s.Angles, a*degree)
	}
	r := s.Fit()
	fmt.Printf("%s lobe, peak at %.2f° ± %.2f°, %.1f dBm; bolt back by %.1f°\n", r.Lobe, *r.Peak/degree, r.PeakDoubt/degree, r.Level, 49-*r.Peak/degree)
	// Output: main lobe, peak at 47.09° ± 0.06°, -48.3 dBm; bolt back by 1.9°
}

func ExampleTwoFace() {
	// The level reads +1.7° one way round and −3.3° the other.
	tilt, bias, u := peak.TwoFace(peak.Face{Mean: 1.7 * degree, Spread: 0.2 * degree, Count: 6}, peak.Face{Mean: -3.3 * degree, Spread: 0.2 * degree, Count: 6})
	fmt.Printf("tilt %.1f° ± %.1f°, the level is off by %.1f°\n", tilt/degree, u/degree, bias/degree)
	// Output: tilt 2.5° ± 0.1°, the level is off by -0.8°
}
