package stream_test

import (
	"fmt"
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
	"crossplumb/calc/stream"
)

// Two crossed panels half a metre apart at each end of a 1.9 km link at 5.8 GHz, in rural surroundings with sight, and the
// same with the second panel turned by 8°: a radio that combines its chains does not notice.
func ExampleEngine_Evaluate() {
	const degree = math.Pi / 180
	panel := func(right float64) antenna.Body {
		return antenna.Body{
			Pattern: &antenna.Pattern{Kind: antenna.Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18},
			Right:   right,
			Ports:   []antenna.Port{{Slant: 45 * degree}, {Slant: -45 * degree}},
		}
	}
	class := scatter.Class{Scenario: scatter.RuralMacro, Sight: true, CarrierGHz: 5.8, Distance: 1900}
	near, far := []antenna.Body{panel(0), panel(0.5)}, []antenna.Body{panel(0), panel(0.5)}
	e, err := stream.New(stream.Setup{
		Wavelength: 299792458 / 5.8e9, Distance: 1900, SNR: math.Pow(10, 2.5), Around: class.Surroundings(scatter.Median, true, 0),
	}, near, far)
	if err != nil {
		fmt.Println(err)
		return
	}
	near[1].Skew = 8 * degree
	for _, r := range []stream.Result{e.Planned(), e.Evaluate(near, far)} {
		fmt.Printf("%.1f bit/s/Hz, %.2f of 4 streams, %.1f times one chain\n", r.BitsPerSHz, r.EffectiveStreams, r.RateMultiple)
	}
	// Output:
	// 28.1 bit/s/Hz, 3.75 of 4 streams, 3.5 times one chain
	// 28.1 bit/s/Hz, 3.75 of 4 streams, 3.5 times one chain
}

// At 18 GHz over 2 km two elements 4.08 m apart at each end carry two full streams without any scatter.
func ExampleLineOfSight() {
	wavelength := 299792458 / 18e9
	d := stream.BestSpacing(2, 2000, wavelength)
	two := [][3]float64{{0, 0, 0}, {d, 0, 0}}
	l, err := stream.LineOfSight(two, two, 2000, wavelength, 100)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.2f m: %.2f bit/s/Hz, singular values %.1f dB apart\n", d, l.BitsPerSHz, l.ConditionDB)
	// Output:
	// 4.08 m: 15.30 bit/s/Hz, singular values 0.0 dB apart
}
