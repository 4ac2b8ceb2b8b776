package aim

import (
	"strconv"
	"testing"
)

func number(t testing.TB, row map[string]string, column string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(row[column], 64)
	if err != nil {
		t.Fatalf("column %s: %v", column, err)
	}
	return x
}

// near fails where got is farther than tolerance from want; NaN fails always.
func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if d := got - want; !(d <= tolerance && d >= -tolerance) {
		t.Errorf("%s: got %.12g, want %.12g ± %g (off by %.3g)", what, got, want, tolerance, d)
	}
}

// nearTurn is near for angles in degrees that come round at 360.
func nearTurn(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	near(t, what, HalfTurn((got-want)*degree)/degree, 0, tolerance)
}

func at(latDeg, lonDeg, height float64) Position {
	return Position{latDeg * degree, lonDeg * degree, height}
}
