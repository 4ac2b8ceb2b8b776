package doubt_test

import (
	"fmt"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"crossplumb/calc/doubt"
)

// TestEndGauge reworks JCGM 100:2008 annex H.1 from its published inputs: l =
// 50.000 838 mm, u_c = 32 nm, ν_eff = 16, k = 2.92, U₉₉ = 93 nm.
func TestEndGauge(t *testing.T) {
	const (
		ls     = 50.000623e6 // nm
		d      = 215.0       // nm, mean of five
		alpha  = 11.5e-6     // per °C
		theta  = -0.1        // °C, mean deviation of the bed
		uAlpha = 1.2e-6      // here of no effect to first order: its sensitivity is zero
	)
	uD := doubt.Propagate([]float64{1, 1, 1}, []float64{5.8, 3.9, 6.7}, nil) // 13 nm pooled over 5, C.M.C. random, systematic
	if math.Abs(uD-9.7) > 0.05 {
		t.Errorf("u(d) = %.2f nm, published 9.7", uD)
	}
	if dof := doubt.EffectiveDOF([]float64{5.8, 3.9, 6.7}, []float64{24, 5, 8}); math.Abs(dof-25.6) > 0.2 {
		t.Errorf("ν(d) = %.2f, published 25.6 from unrounded parts", dof)
	}
	c := []float64{1, 1, 0, -ls * theta, -ls * alpha}
	u := []float64{25, uD, uAlpha, 0.58e-6, 0.029}
	uc := doubt.Propagate(c, u, nil)
	if math.Abs(uc-32) > 0.5 {
		t.Errorf("u_c = %.2f nm, published 32", uc)
	}
	parts := make([]float64, len(c))
	for i := range c {
		parts[i] = math.Abs(c[i] * u[i])
	}
	// published parts: 25, 9.7, 0, 2.9, 16.6 nm
	for i, want := range []float64{25, 9.7, 0, 2.9, 16.6} {
		if math.Abs(parts[i]-want) > 0.1 {
			t.Errorf("part %d: %.2f nm, published %.1f", i, parts[i], want)
		}
	}
	dof := doubt.EffectiveDOF(parts, []float64{18, 25.6, math.Inf(1), 50, 2})
	if math.Floor(dof) != 16 {
		t.Errorf("ν_eff = %.2f, published 16 (from 16.7)", dof)
	}
	k := doubt.StudentOfNormal(doubt.NormalQuantile(0.995), math.Floor(dof))
	if math.Abs(k-2.92) > 0.005 {
		t.Errorf("k₉₉ = %.4f, published 2.92", k)
	}
	if got := math.Round(k * 32); got != 93 {
		t.Errorf("U₉₉ = %g nm, published 93", got)
	}
	if l := (ls + d) / 1e6; math.Abs(l-50.000838) > 5e-7 {
		t.Errorf("l = %.6f mm", l)
	}
	// H.1.7: with the second-order terms of δα and θ, and of α_S and δθ, u_c is 34 nm.
	second := doubt.Propagate([]float64{1, 1, 1}, []float64{uc, ls * 0.58e-6 * 0.41, ls * uAlpha * 0.029}, nil)
	if math.Abs(second-34) > 0.5 {
		t.Errorf("u_c with second-order terms = %.2f nm, published 34", second)
	}
}

// TestResistanceAndReactance reworks JCGM 100:2008 annex H.2: five simultaneous
// observations of V, I and φ, their correlations, and R, X, Z from them.
func TestResistanceAndReactance(t *testing.T) {
	data := [3][5]float64{
		{5.007, 4.994, 5.005, 4.990, 4.999},      // V/V
		{19.663, 19.639, 19.640, 19.685, 19.678}, // I/mA
		{1.0456, 1.0438, 1.0468, 1.0428, 1.0433}, // φ/rad
	}
	var mean, u [3]float64
	var r [3][3]float64
	for a := range data {
		for _, x := range data[a] {
			mean[a] += x / 5
		}
	}
	cov := func(a, b int) float64 {
		s := 0.0
		for i := range 5 {
			s += (data[a][i] - mean[a]) * (data[b][i] - mean[b])
		}
		return s / (5 * 4) // of the means
	}
	for a := range data {
		u[a] = math.Sqrt(cov(a, a))
	}
	for a := range data {
		for b := range data {
			r[a][b] = cov(a, b) / (u[a] * u[b])
		}
	}
	close := func(what string, got, want, half float64) {
		t.Helper()
		if math.Abs(got-want) > half {
			t.Errorf("%s = %.6f, published %g", what, got, want)
		}
	}
	// table H.2
	close("u(V)", u[0], 0.0032, 5e-5)
	close("u(I)", u[1], 0.0095, 5e-5)
	close("u(φ)", u[2], 0.00075, 5e-6)
	close("r(V,I)", r[0][1], -0.36, 0.005)
	close("r(V,φ)", r[0][2], 0.86, 0.005)
	close("r(I,φ)", r[1][2], -0.65, 0.005)
	v, i, phi := mean[0], mean[1]/1000, mean[2]
	uu := []float64{u[0], u[1] / 1000, u[2]}
	sin, cos := math.Sincos(phi)
	sens := map[string][]float64{
		"R": {cos / i, -v * cos / (i * i), -v * sin / i},
		"X": {sin / i, -v * sin / (i * i), v * cos / i},
		"Z": {1 / i, -v / (i * i), 0},
	}
	rr := func(a, b int) float64 { return r[a][b] }
	// table H.4, first approach
	close("R", v/i*cos, 127.732, 5e-4)
	close("X", v/i*sin, 219.847, 5e-4)
	close("Z", v/i, 254.260, 5e-4)
	close("u(R)", doubt.Propagate(sens["R"], uu, rr), 0.071, 5e-4)
	close("u(X)", doubt.Propagate(sens["X"], uu, rr), 0.295, 1e-3) // unrounded it is 0.2956
	close("u(Z)", doubt.Propagate(sens["Z"], uu, rr), 0.236, 5e-4)
}

func TestStudentOfNormalAgainstExactQuantiles(t *testing.T) {
	for _, dof := range []float64{9, 10, 16, 30} {
		exact := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: dof}
		for z := -4.0; z <= 4; z += 0.1 {
			want := exact.Quantile(distuv.UnitNormal.CDF(z))
			limit := 0.002
			if math.Abs(z) > 3 {
				limit = 0.02
			}
			if got := doubt.StudentOfNormal(z, dof); math.Abs(got-want) > limit {
				t.Errorf("ν=%g z=%.1f: %.5f, exact %.5f", dof, z, got, want)
			}
		}
	}
	if doubt.StudentOfNormal(1.7, 0) != 1.7 {
		t.Error("without degrees of freedom the deviate is the normal one")
	}
}

func reading(value, u float64, source string, share float64) doubt.Reading {
	return doubt.Reading{Value: value, U: u, Source: source, Share: share}
}

func TestPooling(t *testing.T) {
	one := doubt.Pool([]doubt.Reading{reading(6.2, 0.3, "level 3", 0.5)})
	if math.Abs(one.U()-0.3) > 1e-15 || one.DOF != 0 || one.Value != 6.2 {
		t.Errorf("a single reading keeps what it states: %+v, u %g", one, one.U())
	}
	var many []doubt.Reading
	for range 100 {
		many = append(many, reading(6.2, 0.3, "level 3", 0.5))
	}
	e := doubt.Pool(many)
	if u, floor := e.U(), 0.3*math.Sqrt(0.5); u < floor {
		t.Errorf("a hundred readings by one level: u %g below its bias %g", u, floor)
	}
	// two instruments: the biases average, the weights go by 1/u²
	e = doubt.Pool([]doubt.Reading{reading(1, 0.1, "a", 1), reading(2, 0.2, "b", 1)})
	if math.Abs(e.Value-1.2) > 1e-12 || math.Abs(e.U()-math.Hypot(0.8*0.1, 0.2*0.2)) > 1e-12 {
		t.Errorf("pool of two instruments: %+v, u %g", e, e.U())
	}
}

// TestFewRepeatsDoNotLowerTheDoubt: three readings that happen to agree exactly
// must not claim to be better than three stated ones; disagreeing ones raise it.
func TestFewRepeatsDoNotLowerTheDoubt(t *testing.T) {
	agree := doubt.Pool([]doubt.Reading{reading(1, 0.3, "l", 0), reading(1, 0.3, "l", 0), reading(1, 0.3, "l", 0)})
	if agree.Random < 0.3/math.Sqrt(3)-1e-15 {
		t.Errorf("three agreeing readings: random part %g below the stated %g", agree.Random, 0.3/math.Sqrt(3))
	}
	differ := doubt.Pool([]doubt.Reading{reading(0, 0.3, "l", 0), reading(2, 0.3, "l", 0)})
	if want := 0.3 / math.Sqrt2 * math.Sqrt((8+2*(1/0.3)*(1/0.3))/9); math.Abs(differ.Random-want) > 1e-12 {
		t.Errorf("two readings 2 apart: %g, want %g", differ.Random, want)
	}
	var agreeing []doubt.Reading
	for range 4 {
		agreeing = append(agreeing, reading(1, 0.3, "l", 0))
	}
	if four := doubt.Pool(agreeing); four.Random >= 0.15 || four.DOF != 11 {
		t.Errorf("from four readings on their scatter counts: %+v", four)
	}
}

// TestDrawsFillTheSpace: means, variances and products of the deviates, which are
// known exactly, for every pair of variables.
func TestDrawsFillTheSpace(t *testing.T) {
	const dims = 60
	d := doubt.NewDraws(1, dims)
	worst := 0.0
	for a := range dims {
		var mean, square float64
		for i := range d.N {
			z := d.At(i)[a]
			mean += z / float64(d.N)
			square += z * z / float64(d.N)
		}
		if math.Abs(mean) > 1e-9 || math.Abs(square-1) > 2e-3 {
			t.Errorf("variable %d: mean %g, variance %g", a, mean, square)
		}
		for b := range a {
			r := 0.0
			for i := range d.N {
				r += d.At(i)[a] * d.At(i)[b] / float64(d.N)
			}
			worst = math.Max(worst, math.Abs(r))
		}
	}
	// as plain random draws would leave, 3.5/√2048 = 0.08, in the worst of 1770 pairs
	if worst > 0.085 {
		t.Errorf("two variables move together: correlation %.3f", worst)
	}
}

// TestProbabilityByDraws: the share of draws in which a known statement holds,
// against its exact probability.
func TestProbabilityByDraws(t *testing.T) {
	d := doubt.NewDraws(1, 48)
	share := func(holds func(z []float64) bool) float64 {
		n := 0
		for i := range d.N {
			if holds(d.At(i)) {
				n++
			}
		}
		return float64(n) / float64(d.N)
	}
	sum := func(z []float64, from, to int) float64 {
		s := 0.0
		for i := from; i < to; i++ {
			s += z[i]
		}
		return s / math.Sqrt(float64(to-from))
	}
	for _, row := range []struct {
		name  string
		holds func([]float64) bool
		want  float64
	}{
		{"one variable", func(z []float64) bool { return z[7] <= 1.6448536 }, 0.95},
		{"a sum of four", func(z []float64) bool { return sum(z, 0, 4) <= 1.6448536 }, 0.95},
		{"a sum of twenty", func(z []float64) bool { return sum(z, 20, 40) <= 1.6448536 }, 0.95},
		{"two together", func(z []float64) bool { return z[1] <= 1.6448536 && math.Abs(z[9]) <= 1.9599640 }, 0.95 * 0.95},
		{"a circle", func(z []float64) bool { return math.Hypot(z[3], z[12]) <= 2.4477468 }, 0.95},
		{"a ball of six", func(z []float64) bool {
			s := 0.0
			for _, x := range z[10:16] {
				s += x * x
			}
			return s <= 12.5915872 // 95 % of χ² with 6
		}, 0.95},
	} {
		if got := share(row.holds); math.Abs(got-row.want) > 0.004 {
			t.Errorf("%s: %.4f, exact %.4f", row.name, got, row.want)
		} else {
			t.Logf("%s: off by %+.4f", row.name, got-row.want)
		}
	}
}

func TestSummarise(t *testing.T) {
	x := make([]float64, 1000)
	for i := range x {
		x[i] = float64(999 - i)
	}
	s := doubt.Summarise(x)
	if s.Median != 499.5 || math.Abs(s.Low-24.5) > 1e-9 || math.Abs(s.High-974.5) > 1e-9 || math.Abs(s.U-288.819) > 1e-3 {
		t.Errorf("%+v", s)
	}
	s = doubt.Summarise([]float64{1, 2, math.Inf(1)})
	if s.Median != 2 || math.IsInf(s.U, 0) {
		t.Errorf("an infinite draw: %+v", s)
	}
}

// Three readings of one skew by one level, each good to 0.3°.
func ExamplePool() {
	var rs []doubt.Reading
	for _, v := range []float64{6.0, 6.4, 6.2} {
		rs = append(rs, doubt.Reading{Value: v, U: 0.3, Source: "level 3", Share: 0.5})
	}
	e := doubt.Pool(rs)
	fmt.Printf("%.2f° ± %.2f°, of which %.2f° is the level's own\n", e.Value, e.U(), e.Bias[0].U)
	// Output: 6.20° ± 0.25°, of which 0.21° is the level's own
}
