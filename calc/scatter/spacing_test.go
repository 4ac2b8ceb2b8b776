package scatter_test

import (
	"fmt"
	"math"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/scatter"
)

func TestEffectiveSpacing(t *testing.T) {
	for _, row := range []struct {
		s         scatter.Spacing
		off, want float64
	}{
		// the project's physics note works these two by hand: |1·cos β − 0.5·sin β|
		{scatter.Spacing{Right: 1, Forward: 0.5}, 30, math.Sqrt(3)/2 - 0.25},
		{scatter.Spacing{Right: 1, Forward: 0.5}, -30, math.Sqrt(3)/2 + 0.25},
		{scatter.Spacing{Right: 0.5}, 90, 0}, // end-on
		{scatter.Spacing{Up: 2}, 41, 2},      // stacked: whatever the bearing
		{scatter.Spacing{Forward: 0.7}, 0, 0},
		{scatter.Spacing{Forward: 0.7}, 90, 0.7},
	} {
		if got := row.s.Effective(row.off * degree); math.Abs(got-row.want) > 1e-15 {
			t.Errorf("%+v at %g°: %g, want %g", row.s, row.off, got, row.want)
		}
	}
}

func TestEffectiveSpacingIsTheProjection(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.Float64Range(-20, 20)
		s := scatter.Spacing{Right: x.Draw(t, "right"), Up: x.Draw(t, "up"), Forward: x.Draw(t, "forward")}
		b := rapid.Float64Range(-math.Pi, math.Pi).Draw(t, "bearing")
		along := s.Right*math.Sin(b) + s.Forward*math.Cos(b)
		r := scatter.Spacing{Right: s.Right - along*math.Sin(b), Up: s.Up, Forward: s.Forward - along*math.Cos(b)}
		if math.Abs(r.Length()-s.Effective(b)) > 1e-12 {
			t.Fatalf("projection %g, Effective %g", r.Length(), s.Effective(b))
		}
	})
}

func TestTwoElementBeamwidth(t *testing.T) {
	if _, ok := scatter.TwoElementBeamwidth(0.2499); ok {
		t.Error("below a quarter wavelength there is no half-power width")
	}
	for _, row := range []struct{ d, want float64 }{
		{0.25, 180}, {0.5, 60}, {1, 28.955024371859853},
	} {
		got, ok := scatter.TwoElementBeamwidth(row.d)
		if !ok || math.Abs(got/degree-row.want) > 1e-9 {
			t.Errorf("d=%g: %g°, want %g°", row.d, got/degree, row.want)
		}
		// the array factor there is one half, whatever the formula
		if f := math.Cos(math.Pi * row.d * math.Sin(got/2)); math.Abs(f*f-0.5) > 1e-12 {
			t.Errorf("d=%g: power %g at the edge of the beam", row.d, f*f)
		}
	}
}

func TestGratingLobes(t *testing.T) {
	if got := scatter.GratingLobes(0.99, 10); len(got) != 0 {
		t.Errorf("lobes %v below one wavelength", got)
	}
	got := scatter.GratingLobes(2, 10)
	if len(got) != 2 || math.Abs(got[0]-30*degree) > 1e-15 || math.Abs(got[1]-90*degree) > 1e-15 {
		t.Errorf("two wavelengths: %v, want 30° and 90°", got)
	}
}

// Two panels 412 mm apart at 5.8 GHz.
func ExampleTwoElementBeamwidth() {
	wavelength := 299792458.0 / 5.8e9
	d := 0.412 / wavelength
	b, _ := scatter.TwoElementBeamwidth(d)
	fmt.Printf("%.2f wavelengths, %.1f°\n", d, b*180/math.Pi)
	// Output: 7.97 wavelengths, 3.6°
}
