package stream

import (
	"math"
	"strconv"
	"testing"

	"crossplumb/testdata/published"
)

func number(t testing.TB, s string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

func identity(n int) []complex128 {
	r := make([]complex128, n*n)
	for i := range n {
		r[i*n+i] = 1
	}
	return r
}

func pair(rho complex128) []complex128 { return []complex128{1, rho, conj(rho), 1} }

// TestErgodicCapacityOfIndependentRayleigh: COMPUTED from theorem 2 of Telatar 1999. The promise is a standard error of at
// most 0.01 bit/s/Hz and an answer within 0.02 of exact; four standard errors must hold it as well.
func TestErgodicCapacityOfIndependentRayleigh(t *testing.T) {
	rows := published.Table(t, "mimo_ergodic_capacity_iid_rayleigh.csv")
	if len(rows) != 36 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		tx, rx := int(number(t, r["n_tx"])), int(number(t, r["n_rx"]))
		db := number(t, r["snr_db_total_tx_power_over_noise_per_rx_antenna"])
		k, err := Kronecker(identity(tx), identity(rx), linear(db), Shared)
		if err != nil {
			t.Fatal(err)
		}
		want := number(t, r["ergodic_capacity_bps_per_hz_telatar_theorem2"])
		if off := math.Abs(k.BitsPerSHz - want); k.StandardError > 0.01 || off > 0.02 || off > 4*k.StandardError+0.5e-6 {
			t.Errorf("%d×%d at %v dB: %.4f ± %.4f, want %v", tx, rx, db, k.BitsPerSHz, k.StandardError, want)
		}
		if tx == 1 && rx == 1 {
			// One pair: closed form, and C₁ is the same integral.
			if math.Abs(k.SingleChain-want) > 1e-6 {
				t.Errorf("single chain at %v dB: %v, want %v", db, k.SingleChain, want)
			}
		}
		if k.EffectiveStreams > float64(min(tx, rx)) || math.Abs(k.RateMultiple-k.BitsPerSHz/k.SingleChain) > 1e-12 {
			t.Errorf("%+v", k)
		}
	}
}

// TestKronecker: COMPUTED with numpy, 400,000 draws; both errors count.
func TestKronecker(t *testing.T) {
	rows := published.Table(t, "mimo_kronecker_2x2.csv")
	if len(rows) != 12 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		near, far := complex(number(t, r["rho_near"]), 0), complex(number(t, r["rho_far"]), 0)
		k, err := Kronecker(pair(near), pair(far), linear(number(t, r["snr_total_db"])), Shared)
		if err != nil {
			t.Fatal(err)
		}
		want, se := number(t, r["bits_per_s_hz"]), number(t, r["standard_error"])
		if off := math.Abs(k.BitsPerSHz - want); off > 4*math.Hypot(se, k.StandardError) || k.StandardError > 0.01 {
			t.Errorf("%v: %.4f ± %.4f, want %v ± %v", r, k.BitsPerSHz, k.StandardError, want, se)
		}
		// Shared power over two chains is per-chain power 3 dB lower.
		p, err := Kronecker(pair(near), pair(far), linear(number(t, r["snr_total_db"]))/2, PerChain)
		if err != nil || math.Abs(p.BitsPerSHz-k.BitsPerSHz) > 1e-9 {
			t.Errorf("per chain: %v, %v (%v)", p.BitsPerSHz, k.BitsPerSHz, err)
		}
	}
}

// TestOutage: PUBLISHED, Foschini and Gans 1998, read off the text as "about", so within half of the last digit's unit;
// and beside it a recomputation to two decimals. Our own error: a quantile at p = 0.01 of n points whose density there
// is f stands off by √(p(1−p)/n)/f. The spread of the rate is about 0.9 to 1.8 bit/s/Hz here (a Gaussian tail has
// f = 0.027/σ), with n = 16,384: 0.05 at most, taken fourfold with the table's own half digit.
func TestOutage(t *testing.T) {
	printed := map[float64]float64{1.2: 0.05, 7: 0.5, 19: 0.5, 88: 0.5}
	for _, r := range published.Table(t, "mimo_outage_foschini_gans_1998.csv") {
		n := int(number(t, r["n_tx"]))
		if testing.Short() && n > 4 {
			continue
		}
		got, err := Outage(identity(n), identity(n), linear(number(t, r["avg_rx_snr_db"])), Shared, 0.01)
		if err != nil {
			t.Fatal(err)
		}
		want := number(t, r["published_99pct_capacity_bps_per_hz_approx"])
		within, ok := printed[want]
		if !ok {
			t.Fatalf("unknown row %v", r)
		}
		if math.Abs(got-want) > within {
			t.Errorf("%d×%d: %.3f at 1 %%, published about %v", n, n, got, want)
		}
		if want := number(t, r["recomputed_1pct_quantile_bps_per_hz"]); math.Abs(got-want) > 0.2+0.005 {
			t.Errorf("%d×%d: %.3f at 1 %%, recomputed %v", n, n, got, want)
		}
	}
}

// TestCorrelationMatricesOf3GPP: PUBLISHED, TS 36.101 annex B.2.3 and its NR successors, four decimals. The spatial
// covariance of vec(H) that this package factors is R_eNB ⊗ R_UE of the published α and β; where the standard adds a
// little a to keep it positive, (R + aI)/(1 + a).
func TestCorrelationMatricesOf3GPP(t *testing.T) {
	exponent := map[int][]float64{1: {0}, 2: {0, 1}, 4: {0, 1. / 9, 4. / 9, 1}} // annex B.2.3.1, first row
	end := func(n int, x float64) []complex128 {
		r := make([]complex128, n*n)
		for i := range n {
			for j := range n {
				p := exponent[n][max(i, j)-min(i, j)]
				if n == 4 && i != 0 && j != 0 {
					p = math.Pow(math.Abs(float64(i-j))/3, 2) // (|i−j|/3)²: the same sequence 1/9, 4/9, 1
				}
				r[i*n+j] = complex(math.Pow(x, p), 0)
				if i == j {
					r[i*n+j] = 1
				}
			}
		}
		return r
	}
	levels := map[string][2]float64{}
	for _, r := range published.Table(t, "3gpp_mimo_correlation_levels.csv") {
		levels[r["level"]] = [2]float64{number(t, r["alpha_base_station"]), number(t, r["beta_user_equipment"])}
	}
	if len(levels) != 3 || levels["low"] != [2]float64{} {
		t.Fatalf("levels %v", levels)
	}
	type key struct {
		level  string
		nb, nu int
	}
	cov := map[key][]complex128{}
	checked, first := 0, 0
	for _, r := range published.Table(t, "3gpp_mimo_correlation_matrices.csv") {
		k := key{r["level"], int(number(t, r["n_base_station_antennas"])), int(number(t, r["n_user_equipment_antennas"]))}
		if got := [2]float64{number(t, r["alpha"]), number(t, r["beta"])}; got != levels[k.level] {
			t.Fatalf("%v: α β %v", k, got)
		}
		c, ok := cov[k]
		n := k.nb * k.nu
		if !ok {
			near, far := end(k.nb, levels[k.level][0]), end(k.nu, levels[k.level][1])
			if err := CheckCorrelation(near); err != nil {
				t.Fatal(err)
			}
			e, err := correlated(near, far, 1, Shared)
			if err != nil {
				t.Fatal(err)
			}
			c = make([]complex128, n*n)
			for i := range n {
				for j := range n {
					for m := range min(i, j) + 1 {
						c[i*n+j] += e.channel.lower[i*(i+1)/2+m] * conj(e.channel.lower[j*(j+1)/2+m])
					}
				}
			}
			cov[k] = c
		}
		i, j := int(number(t, r["row"]))-1, int(number(t, r["column"]))-1
		a := number(t, r["psd_adjust_a"])
		got := real(c[i*n+j])
		if i == j {
			got += a
		}
		got /= 1 + a
		const half = 0.5e-4 + 1e-9
		if want := number(t, r["value_from_formula_4dp"]); math.Abs(got-want) > half {
			t.Errorf("%v (%d,%d): %.5f, want %v", k, i+1, j+1, got, want)
		}
		if p := r["value_printed_in_spec_first_row"]; p != "" {
			first++
			if want := number(t, p); math.Abs(got-want) > 1.1*half+0.5e-4 { // the standard rounds some of its own entries once more
				t.Errorf("%v (%d,%d): %.5f, printed %v", k, i+1, j+1, got, want)
			}
		}
		checked++
	}
	if checked < 500 || first < 30 {
		t.Errorf("%d entries, %d of them as printed", checked, first)
	}
}

// TestLineOfSightSpacing: COMPUTED with exact spherical waves, three decimals. Both sides compute distances D to a
// relative ε = 2⁻⁵³ at best, so that phases are off by kDε; a condition number σ₁/σ_N then by kDε·√N·σ₁/σ_N relative,
// which is where the table's own last digits at 30 km come from. The table's entries have unit modulus, ours fall with
// distance: by ε = (N−1)²d²/2D² at most, 8.7 ε dB, which shows at 100 m only.
func TestLineOfSightSpacing(t *testing.T) {
	rows := published.Table(t, "los_mimo_optimal_spacing.csv")
	if len(rows) < 60 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		f, d := number(t, r["f_ghz"])*1e9, number(t, r["range_km"])*1000
		n := int(number(t, r["n_antennas_each_end"]))
		wavelength := 299792458 / f
		best := BestSpacing(n, d, wavelength)
		if want := number(t, r["optimal_equal_spacing_m"]); math.Abs(best-want) > 0.5e-6*1.01 {
			t.Errorf("%v: spacing %v, want %v", r, best, want)
		}
		if want := number(t, r["optimal_dt_times_dr_m2"]); math.Abs(best*best-want) > 0.5e-6*1.01 {
			t.Errorf("%v: product %v, want %v", r, best*best, want)
		}
		for share, column := range map[float64]string{
			1: "condition_number_db_at_optimum_exact_spherical", 0.8: "condition_number_db_at_80pct_spacing", 0.5: "condition_number_db_at_50pct_spacing",
			0.25: "condition_number_db_at_25pct_spacing", 0.1: "condition_number_db_at_10pct_spacing",
		} {
			var at [][3]float64
			for i := range n {
				at = append(at, [3]float64{share * best * (float64(i) - float64(n-1)/2), 0, 0})
			}
			l, err := LineOfSight(at, at, d, wavelength, 100)
			if err != nil {
				t.Fatal(err)
			}
			want := number(t, r[column])
			noise := 2 * math.Pi / wavelength * d * 0x1p-53 * math.Sqrt(float64(n)) * math.Pow(10, want/20)
			fall := math.Pow(float64(n-1)*share*best/d, 2) / 2
			if within := 0.0005 + 8.7*(noise+fall); math.Abs(l.ConditionDB-want) > within {
				t.Errorf("%v at %v: %.5f dB, want %v ± %.5f", r, share, l.ConditionDB, want, within)
			}
		}
	}
}
