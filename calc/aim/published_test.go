package aim

import (
	"encoding/csv"
	"os"
	"path/filepath"
	"strconv"
	"testing"
)

// table reads a published table and returns its rows by column name.
func table(t testing.TB, name string) []map[string]string {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "testdata", "published", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	rows := make([]map[string]string, 0, len(all))
	for _, line := range all[1:] {
		row := map[string]string{}
		for i, name := range all[0] {
			row[name] = line[i]
		}
		rows = append(rows, row)
	}
	if len(rows) == 0 {
		t.Fatalf("%s holds no rows", name)
	}
	return rows
}

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
