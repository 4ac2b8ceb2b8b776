package scatter_test

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/scatter"

	"crossplumb/testdata/published"
)

var scenarios = map[string]scatter.Scenario{
	"RMa": scatter.RuralMacro, "UMa": scatter.UrbanMacro, "UMi-StreetCanyon": scatter.UrbanMicro, "InH-Office": scatter.IndoorOffice,
}

// TestClassesAreTable7_5_6: PUBLISHED, 3GPP TR 38.901 V16.1.0. Every angular figure, K and cross-polar ratio of the outdoor
// and office columns, at carriers below, at and above each floor. Outdoor to indoor is not offered.
func TestClassesAreTable7_5_6(t *testing.T) {
	seen := 0
	for _, r := range published.Table(t, "tr38901_table_7_5_6_angular_parameters.csv") {
		if r["spec_version"] != "16.1.0" {
			t.Fatalf("edition %s", r["spec_version"])
		}
		if r["condition"] == "O2I" {
			continue
		}
		seen++
		law := func(name string, f float64) float64 {
			a, b := number(t, r[name+"_constant"]), number(t, r[name+"_slope_per_log10_frequency"])
			switch r[name+"_log10_argument"] {
			case "fc":
				return a + b*math.Log10(f)
			case "1+fc":
				return a + b*math.Log10(1+f)
			case "none":
				return a
			}
			t.Fatalf("argument %q", r[name+"_log10_argument"])
			return 0
		}
		for _, f := range []float64{0.9, 2, 3.5, 5.8, 6, 11, 28, 80} {
			c := scatter.Class{Scenario: scenarios[r["scenario"]], Sight: r["condition"] == "LOS", CarrierGHz: f, Distance: 1000}
			at := math.Max(f, number(t, r["carrier_frequency_floor_ghz"]))
			for z, which := range map[float64]scatter.Case{0: scatter.Median, -1.28: scatter.Narrow, 1.28: scatter.Wide} {
				a := c.Angles(which)
				for _, k := range []struct {
					name      string
					got, most float64
				}{{"lgASD", a.ASD, 104}, {"lgASA", a.ASA, 104}, {"lgZSA", a.ZSA, 52}} {
					want := math.Min(math.Pow(10, law(k.name+"_mean", at)+z*law(k.name+"_sigma", at)), k.most)
					if math.Abs(k.got-want) > 1e-12*want {
						t.Errorf("%s %s %v GHz case %v: %s %v°, want %v°", r["scenario"], r["condition"], f, z, k.name, k.got, want)
					}
				}
				if r["k_factor_mean_db"] == "N/A" {
					if !math.IsInf(a.KdB, -1) {
						t.Errorf("%s %s: K %v without sight", r["scenario"], r["condition"], a.KdB)
					}
				} else if want := number(t, r["k_factor_mean_db"]) - z*number(t, r["k_factor_sigma_db"]); math.Abs(a.KdB-want) > 1e-12 {
					t.Errorf("%s %s case %v: K %v dB, want %v", r["scenario"], r["condition"], z, a.KdB, want)
				}
				if want := number(t, r["xpr_mean_db"]); a.XPRdB != want {
					t.Errorf("%s %s: cross-polar ratio %v dB, want %v", r["scenario"], r["condition"], a.XPRdB, want)
				}
			}
		}
	}
	if seen != 8 {
		t.Errorf("%d columns", seen)
	}
}

// TestZenithSpreadOfDeparture: COMPUTED from tables 7.5-7 to 7.5-10, six decimals printed.
func TestZenithSpreadOfDeparture(t *testing.T) {
	const half = 0.5e-6 * 1.001
	all := published.Table(t, "tr38901_zsd_check_values.csv")
	if len(all) < 50 {
		t.Fatalf("%d rows", len(all))
	}
	for _, r := range all {
		f := number(t, r["fc_ghz"])
		if f == 0 {
			f = 5 // these scenarios do not ask for it
		}
		c := scatter.Class{Scenario: scenarios[r["scenario"]], Sight: true, CarrierGHz: f, Distance: number(t, r["d2D_m"]), MastHeight: number(t, r["h_bs_m"]), UserHeight: number(t, r["h_ut_m"])}
		check := func(what string, got, want float64) {
			if math.Abs(got-want) > half {
				t.Errorf("%v: %s %v, want %v", r, what, got, want)
			}
		}
		a := c.Angles(scatter.Median)
		check("lgZSD with sight", math.Log10(a.ZSD), number(t, r["lgZSD_mean_LOS"]))
		check("offset with sight", a.ZenithOffsetDeg, 0)
		c.Sight = false
		a = c.Angles(scatter.Median)
		check("lgZSD without", math.Log10(a.ZSD), number(t, r["lgZSD_mean_NLOS"]))
		check("offset without", a.ZenithOffsetDeg, number(t, r["zod_offset_NLOS_deg"]))
	}
}

// TestZenithTablesAsPrinted: PUBLISHED. The σ column and the office rows, which the worked values leave out, and the
// formulas' texts, so that a table of another edition would not pass for this one.
func TestZenithTablesAsPrinted(t *testing.T) {
	for _, r := range published.Table(t, "tr38901_zsd_tables_7_5_7_to_7_5_10.csv") {
		if r["condition"] == "O2I" {
			continue
		}
		c := scatter.Class{Scenario: scenarios[r["scenario"]], Sight: r["condition"] == "LOS", CarrierGHz: 8, Distance: 10}
		sigma := number2(r["lgZSD_sigma_formula"], 8)
		mean := math.Log10(c.Angles(scatter.Median).ZSD)
		if got := math.Log10(c.Angles(scatter.Wide).ZSD) - mean; math.Abs(got-1.28*sigma) > 1e-9 && c.Angles(scatter.Wide).ZSD < 52 {
			t.Errorf("%s %s: σ %v, want %v", r["scenario"], r["condition"], got/1.28, sigma)
		}
		if r["scenario"] == "InH-Office" {
			if want := number2(r["lgZSD_mean_formula"], 8); math.Abs(mean-want) > 1e-9 {
				t.Errorf("%s %s: lgZSD %v, want %v", r["scenario"], r["condition"], mean, want)
			}
		}
	}
}

// number2 reads "a", or "b log10(1+fc)+a" with its blanks, at a carrier.
func number2(formula string, fc float64) float64 {
	s := strings.ReplaceAll(strings.ReplaceAll(formula, " ", ""), "log10(1+fc)", "L")
	value := func(s string) float64 {
		x, scale, sign, dot := 0.0, 1.0, 1.0, false
		for _, c := range s {
			switch {
			case c == '-':
				sign = -1
			case c == '.':
				dot = true
			case c >= '0' && c <= '9':
				x = x*10 + float64(c-'0')
				if dot {
					scale *= 10
				}
			}
		}
		return sign * x / scale
	}
	b, a, both := strings.Cut(s, "L")
	if !both {
		return value(s)
	}
	return value(b)*math.Log10(1+fc) + value(a)
}

// TestSigmaOfRMS: the rms of the density cut at its edges, by quadrature, is the one asked for.
func TestSigmaOfRMS(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		half := rapid.SampledFrom([]float64{math.Pi, math.Pi / 2}).Draw(t, "half")
		rms := rapid.Float64Range(0.01, 0.995).Draw(t, "rms") * half / math.Sqrt(3)
		form := rapid.SampledFrom([]scatter.Form{scatter.Laplacian, scatter.Gaussian}).Draw(t, "form")
		sigma, ok := scatter.SigmaOfRMS(form, rms, half)
		if !ok || sigma < rms {
			t.Fatalf("σ %v for rms %v", sigma, rms)
		}
		const n = 20000
		var m0, m2 float64
		for i := range n {
			x := half * (float64(i) + 0.5) / n
			p := math.Exp(-math.Sqrt2 * x / sigma)
			if form == scatter.Gaussian {
				p = math.Exp(-x * x / (2 * sigma * sigma))
			}
			m0 += p
			m2 += p * x * x
		}
		// Midpoint rule: relative error (h²/24)·|p'/p|², h = half/n, at most 1e-5 for σ ≥ 0.01.
		if got := math.Sqrt(m2 / m0); math.Abs(got/rms-1) > 2e-5 {
			t.Fatalf("rms %v, want %v", got, rms)
		}
	})
	for _, form := range []scatter.Form{scatter.Laplacian, scatter.Gaussian} {
		if _, ok := scatter.SigmaOfRMS(form, 104*degree, math.Pi); ok {
			t.Error("the cap of TR 38.901 is the uniform density")
		}
		if s, ok := scatter.SigmaOfRMS(form, 0, math.Pi); !ok || s != 0 {
			t.Error("no spread")
		}
	}
}

func TestClassSurroundings(t *testing.T) {
	c := scatter.Class{Scenario: scatter.UrbanMicro, CarrierGHz: 5.8, Distance: 200}
	a := c.Angles(scatter.Median)
	up := 3 * degree
	s := c.Surroundings(scatter.Median, true, up)
	if s.K != 0 || s.Sight || math.Abs(s.XPR-math.Pow(10, 0.8)) > 1e-12 {
		t.Errorf("%+v", s)
	}
	// UMi, 200 m: the offset is −10^(3.3 − 1.5·log₁₀ 200) = −0.705°; the mast sees arrivals raised by it.
	if want := up + 0.7054*degree; math.Abs(s.Near.ElevationMean-want) > 1e-5 || s.Far.ElevationMean != -up {
		t.Errorf("means %v %v, want %v %v", s.Near.ElevationMean, s.Far.ElevationMean, want, -up)
	}
	if s.Near.AzimuthSpread < a.ASD*degree || s.Far.AzimuthSpread < a.ASA*degree || s.Near.AzimuthForm != scatter.Gaussian || s.Far.ElevationForm != scatter.Laplacian {
		t.Errorf("%+v", s)
	}
	m := c.Surroundings(scatter.Median, false, -up)
	if m.Far != s.Near || m.Near != s.Far {
		t.Errorf("with the mast at the far end the spectra do not change sides: %+v, %+v", m, s)
	}
	wide := scatter.Class{Scenario: scatter.UrbanMacro, Sight: true, CarrierGHz: 5.8, Distance: 200}
	if w := wide.Surroundings(scatter.Wide, true, 0); w.Far.AzimuthForm != scatter.Uniform {
		t.Errorf("64.6° · 10^(0.256) is past 104°: %+v", w.Far)
	}
	for _, bad := range []scatter.Class{{CarrierGHz: 0.2, Distance: 1}, {CarrierGHz: 5, Distance: 0}, {CarrierGHz: 5, Distance: math.Inf(1)}, {Scenario: 9, CarrierGHz: 5, Distance: 1}, {CarrierGHz: math.NaN(), Distance: 1}} {
		if bad.Check() == nil {
			t.Errorf("%+v accepted", bad)
		}
	}
	if err := c.Check(); err != nil {
		t.Error(err)
	}
	for name, want := range map[string]scatter.Scenario{"RMa": scatter.RuralMacro, "UMa": scatter.UrbanMacro, "UMi": scatter.UrbanMicro, "InH": scatter.IndoorOffice} {
		if scatter.ScenarioOf(name) != want {
			t.Error(name)
		}
	}
}
