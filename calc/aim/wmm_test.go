package aim

import (
	"bufio"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"crossplumb/testdata/published"
)

func TestTermsAreThePublishedOnes(t *testing.T) {
	f, err := os.Open("../../testdata/published/wmm2025.cof")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, seen := bufio.NewScanner(f), 0
	for lines.Scan() {
		words := strings.Fields(lines.Text())
		if len(words) != 6 {
			continue
		}
		var x [6]float64
		for i, w := range words {
			if x[i], err = strconv.ParseFloat(w, 64); err != nil {
				t.Fatal(err)
			}
		}
		n, m := int(x[0]), int(x[1])
		if got, want := wmmTerms[n*(n+1)/2+m-1], (wmmTerm{x[2], x[3], x[4], x[5]}); got != want {
			t.Errorf("n %d m %d: %v, published %v", n, m, got, want)
		}
		seen++
	}
	if seen != len(wmmTerms) {
		t.Errorf("%d lines read, %d terms kept", seen, len(wmmTerms))
	}
}

// The official test values print 1e-6 nT and 0.01°. Their Y, Z and rates hold to
// the last digit or two; their X (and with it H and F) is up to 6e-4 nT off the
// exact sum, which TestMagneticAgainstLongArithmetic shows to be theirs.
func TestMagneticAgainstOfficialTestValues(t *testing.T) {
	for _, row := range published.Table(t, "wmm2025_testvalues.csv") {
		p := at(number(t, row, "lat_deg"), number(t, row, "lon_deg_east"), 1000*number(t, row, "height_km_wgs84"))
		m := Magnetic(p, number(t, row, "decimal_year"))
		const printed, theirX = 3e-6, 6e-4
		near(t, "X", m.X, number(t, row, "X_nT"), theirX)
		near(t, "Y", m.Y, number(t, row, "Y_nT"), printed)
		near(t, "Z", m.Z, number(t, row, "Z_nT"), printed)
		near(t, "H", m.Horizontal(), number(t, row, "H_nT"), theirX)
		near(t, "F", m.Total(), number(t, row, "F_nT"), theirX)
		near(t, "dX", m.XRate, number(t, row, "dX_nT_per_yr"), printed)
		near(t, "dY", m.YRate, number(t, row, "dY_nT_per_yr"), printed)
		near(t, "dZ", m.ZRate, number(t, row, "dZ_nT_per_yr"), printed)
		near(t, "dD", m.DeclinationRate()/degree, number(t, row, "dD_deg_per_yr"), printed)
		near(t, "declination", m.Declination()/degree, number(t, row, "declination_deg"), 0.005+1e-9)
		near(t, "inclination", m.Inclination()/degree, number(t, row, "inclination_deg"), 0.005+1e-9)
	}
}

// Rows 6, 31 and 50 of the official table, summed with 40 digits (mpmath 1.3.0,
// Legendre functions as explicit polynomials, their slope by differences).
func TestMagneticAgainstLongArithmetic(t *testing.T) {
	rows := published.Table(t, "wmm2025_testvalues.csv")
	for _, want := range []struct {
		row  int
		x, z float64
	}{
		{5, 23781.931121418, -32577.51864699},
		{30, 30131.436004142, 15295.61178795},
		{49, 34021.975906327, 8341.1377689209},
	} {
		row := rows[want.row]
		p := at(number(t, row, "lat_deg"), number(t, row, "lon_deg_east"), 1000*number(t, row, "height_km_wgs84"))
		m := Magnetic(p, number(t, row, "decimal_year"))
		near(t, "X", m.X, want.x, 1e-7)
		near(t, "Z", m.Z, want.z, 1e-7)
	}
}

func TestMagneticAgainstReportTable(t *testing.T) {
	for _, row := range published.Table(t, "wmm2025_report_table.csv") {
		p := at(number(t, row, "lat_deg"), number(t, row, "lon_deg_east"), 1000*number(t, row, "height_km_wgs84"))
		m := Magnetic(p, number(t, row, "decimal_year"))
		const nt, deg = 0.05 + 1e-9, 0.005 + 1e-9
		near(t, "X", m.X, number(t, row, "X_nT"), nt)
		near(t, "Y", m.Y, number(t, row, "Y_nT"), nt)
		near(t, "Z", m.Z, number(t, row, "Z_nT"), nt)
		near(t, "H", m.Horizontal(), number(t, row, "H_nT"), nt)
		near(t, "F", m.Total(), number(t, row, "F_nT"), nt)
		near(t, "inclination", m.Inclination()/degree, number(t, row, "inclination_deg"), deg)
		near(t, "declination", m.Declination()/degree, number(t, row, "declination_deg"), deg)
	}
}

// Equation 43 of the technical report is said there to give 0.29° where the
// horizontal field is strongest, 41 875 nT.
func TestDeclinationDoubt(t *testing.T) {
	near(t, "at the strongest", MagneticField{X: 41875}.DeclinationDoubt()/degree, 0.29, 0.005)
	near(t, "at 2000 nT", MagneticField{Y: 2000}.DeclinationDoubt()/degree, 2.7209, 1e-3)
	if u := (MagneticField{Z: 60000}).DeclinationDoubt(); math.IsInf(u, 0) || u > math.Pi {
		t.Errorf("no horizontal field: %v", u)
	}
}

func TestMagneticAtThePolesIsFinite(t *testing.T) {
	for _, lat := range []float64{90, -90, 89.99, -89.99, 89.9999999} {
		m := Magnetic(at(lat, 40, 0), 2026)
		for _, x := range []float64{m.X, m.Y, m.Z, m.Declination(), m.DeclinationRate(), m.DeclinationDoubt()} {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				t.Errorf("latitude %v: %+v", lat, m)
			}
		}
	}
	// The field itself is smooth across the pole: at opposite longitudes X and Y
	// turn over, Z stays.
	a, b := Magnetic(at(89.99999, 30, 0), 2026), Magnetic(at(89.99999, -150, 0), 2026)
	near(t, "X across the pole", a.X, -b.X, 1)
	near(t, "Z across the pole", a.Z, b.Z, 1)
}
