package scatter_test

import (
	"fmt"

	"crossplumb/calc/scatter"
)

// Rural macro with sight at 1.9 km: what the mast and the user's end see, poor, usual and rich.
func ExampleClass_Angles() {
	c := scatter.Class{Scenario: scatter.RuralMacro, Sight: true, CarrierGHz: 5.8, Distance: 1900}
	for _, which := range []scatter.Case{scatter.Narrow, scatter.Median, scatter.Wide} {
		a := c.Angles(which)
		fmt.Printf("mast %.1f° by %.1f°, user %.0f° by %.1f°, K %.1f dB\n", a.ASD, a.ZSD, a.ASA, a.ZSA, a.KdB)
	}
	// Output:
	// mast 2.6° by 0.3°, user 16° by 0.9°, K 12.1 dB
	// mast 7.9° by 0.8°, user 33° by 3.0°, K 7.0 dB
	// mast 24.3° by 2.1°, user 67° by 9.6°, K 1.9 dB
}
