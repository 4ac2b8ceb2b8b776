package scatter_test

import (
	"fmt"
	"math"
	"math/cmplx"
	"strconv"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
	"pgregory.net/rapid"

	"crossplumb/calc/scatter"

	"crossplumb/testdata/published"
)

const degree = math.Pi / 180

func number(t testing.TB, s string) float64 {
	t.Helper()
	if s == "" {
		return 0
	}
	x, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// TestCorrelationAgainstQuadratureTables: COMPUTED with scipy 1.10.1 and mpmath
// 1.2.1 adaptive quadrature; the Laplacian rows agree with a Bessel series, the
// von Mises rows with Abdi and Kaveh 2002. Printed to 12 digits, the second table
// to 6 decimals: half a unit of the last place is the tolerance there.
func TestCorrelationAgainstQuadratureTables(t *testing.T) {
	seen := 0
	check := func(name string, s scatter.Spectrum, d, mean float64, want complex128, tolerance float64) {
		seen++
		got := scatter.Correlation(s, d, mean*degree)
		if e := cmplx.Abs(got - want); !(e <= tolerance) {
			t.Errorf("%s d=%g mean=%g: got %v, want %v, off by %.2g", name, d, mean, got, want, e)
		}
	}
	kinds := map[string]scatter.SpectrumKind{
		"uniform2d": scatter.SpectrumUniform2D, "uniform3d": scatter.SpectrumUniform3D, "laplacian": scatter.SpectrumLaplacian,
		"gaussian": scatter.SpectrumGaussian, "vonmises": scatter.SpectrumVonMises, "von_mises": scatter.SpectrumVonMises, "uniform": scatter.SpectrumSector,
	}
	for _, r := range published.Table(t, "spatial_correlation_more.csv") {
		s := scatter.Spectrum{Kind: kinds[r["spectrum"]], SpreadRad: number(t, r["rms_spread_deg"]) * degree, Kappa: number(t, r["kappa"])}
		want := complex(number(t, r["rho_re"]), number(t, r["rho_im"]))
		check(r["spectrum"], s, number(t, r["spacing_wavelengths"]), number(t, r["off_broadside_deg"]), want, 2e-11)
	}
	for _, r := range published.Table(t, "spatial_correlation_pas.csv") {
		p := number(t, r["spread_parameter_deg_or_kappa"])
		s := scatter.Spectrum{Kind: kinds[r["power_azimuth_spectrum"]], SpreadRad: p * degree, Kappa: p}
		want := complex(number(t, r["rho_real"]), number(t, r["rho_imag"]))
		check(r["power_azimuth_spectrum"], s, number(t, r["spacing_wavelengths"]), number(t, r["mean_aoa_deg_from_broadside"]), want, 1e-6)
	}
	if seen != 199+276 {
		t.Errorf("read %d rows, the tables hold 475", seen)
	}
}

// byQuadrature is the defining integral, straight: Gauss-Legendre in panels much
// shorter than a wave of the integrand, split at the mean where the Laplacian has
// its corner.
func byQuadrature(density func(float64) float64, width, d, mean float64) complex128 {
	panels := 40 + int(8*d)
	edge := math.Min(math.Pi, width)
	integrate := func(f func(float64) float64) float64 {
		sum := 0.0
		for i := 0; i < panels; i++ {
			a, b := edge*float64(i)/float64(panels), edge*float64(i+1)/float64(panels)
			sum += quad.Fixed(f, a, b, 30, quad.Legendre{}, 0)
			sum += quad.Fixed(f, -b, -a, 30, quad.Legendre{}, 0)
		}
		return sum
	}
	norm := integrate(density)
	re := integrate(func(p float64) float64 { return density(p) * math.Cos(2*math.Pi*d*math.Sin(p+mean)) })
	im := integrate(func(p float64) float64 { return density(p) * math.Sin(2*math.Pi*d*math.Sin(p+mean)) })
	return complex(re/norm, im/norm)
}

// TestCorrelationIsTheIntegral compares the series with the integral it stands
// for, far beyond the tables: up to 100 wavelengths, spreads from 0.1° to 100°.
func TestCorrelationIsTheIntegral(t *testing.T) {
	for _, d := range []float64{0, 1e-12, 1e-4, 0.03, 0.5, 3.7, 22, 100} {
		for _, mean := range []float64{0, -35, 62, 90, 180} {
			for _, spread := range []float64{0.1, 1, 9, 21.17, 21.18, 40, 60, 100} {
				s := spread * degree
				kappa := 1 / (s * s)
				for _, c := range []struct {
					name     string
					spectrum scatter.Spectrum
					density  func(float64) float64
					width    float64 // beyond it the density is below 1e-16 of its peak
				}{
					{"laplacian", scatter.Spectrum{Kind: scatter.SpectrumLaplacian, SpreadRad: s}, func(p float64) float64 { return math.Exp(-math.Sqrt2 * math.Abs(p) / s) }, 28 * s},
					{"gaussian", scatter.Spectrum{Kind: scatter.SpectrumGaussian, SpreadRad: s}, func(p float64) float64 { return math.Exp(-p * p / (2 * s * s)) }, 9 * s},
					{"von mises", scatter.Spectrum{Kind: scatter.SpectrumVonMises, Kappa: kappa}, func(p float64) float64 { h := math.Sin(p / 2); return math.Exp(-2 * kappa * h * h) }, 12 * s},
				} {
					got := scatter.Correlation(c.spectrum, d, mean*degree)
					want := byQuadrature(c.density, c.width, d, mean*degree)
					if e := cmplx.Abs(got - want); !(e < 1e-11) {
						t.Errorf("%s σ=%g° d=%g mean=%g°: series %v, integral %v, off by %.2g", c.name, spread, d, mean, got, want, e)
					}
				}
			}
		}
	}
}

func TestCorrelationLimits(t *testing.T) {
	for _, row := range []struct {
		name string
		s    scatter.Spectrum
		d    float64
		mean float64
		want complex128
		tol  float64
	}{
		{"one place is fully correlated", scatter.Spectrum{Kind: scatter.SpectrumLaplacian, SpreadRad: 0.2}, 0, 0.3, 1, 1e-15},
		{"no spread is one plane wave", scatter.Spectrum{Kind: scatter.SpectrumLaplacian, SpreadRad: 1e-9}, 1.25, 30 * degree, cmplx.Rect(1, 2*math.Pi*1.25*0.5), 1e-12},
		{"von Mises of no concentration is Clarke's ring", scatter.Spectrum{Kind: scatter.SpectrumVonMises}, 0.8, 1, complex(math.J0(1.6*math.Pi), 0), 1e-14},
		{"a sector of all round is Clarke's ring", scatter.Spectrum{Kind: scatter.SpectrumSector, SpreadRad: scatter.SpectrumSectorMaxRad}, 0.8, 1, complex(math.J0(1.6*math.Pi), 0), 1e-14},
		// half a wavelength on the sphere is exactly uncorrelated: sin(π)/π
		{"half a wavelength on the sphere", scatter.Spectrum{Kind: scatter.SpectrumUniform3D}, 0.5, 0, 0, 1e-16},
		// first zero of J₀ at 2.404825557695773 (Abramowitz and Stegun table 9.5)
		{"first zero of Clarke's ring", scatter.Spectrum{Kind: scatter.SpectrumUniform2D}, 2.404825557695773 / (2 * math.Pi), 0, 0, 1e-15},
	} {
		t.Run(row.name, func(t *testing.T) {
			if got := scatter.Correlation(row.s, row.d, row.mean); cmplx.Abs(got-row.want) > row.tol {
				t.Errorf("got %v, want %v", got, row.want)
			}
		})
	}
}

func TestCorrelationProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		kind := scatter.SpectrumKind(rapid.IntRange(0, 5).Draw(t, "kind"))
		s := scatter.Spectrum{Kind: kind, SpreadRad: rapid.Float64Range(1e-4, 1.8).Draw(t, "spread"), Kappa: rapid.Float64Range(0, 1e5).Draw(t, "kappa")}
		d := rapid.Float64Range(0, 60).Draw(t, "d")
		mean := rapid.Float64Range(-math.Pi, math.Pi).Draw(t, "mean")
		rho := scatter.Correlation(s, d, mean)
		if a := cmplx.Abs(rho); !(a <= 1+1e-12) {
			t.Fatalf("|ρ| = %v above 1", a)
		}
		if other := scatter.Correlation(s, d, -mean); cmplx.Abs(other-cmplx.Conj(rho)) > 1e-12 {
			t.Fatalf("mirrored arrivals: %v, want the conjugate of %v", other, rho)
		}
		if other := scatter.Correlation(s, -d, mean); cmplx.Abs(other-cmplx.Conj(rho)) > 1e-12 {
			t.Fatalf("elements exchanged: %v, want the conjugate of %v", other, rho)
		}
		if other := scatter.Correlation(s, d, math.Pi-mean); cmplx.Abs(other-rho) > 1e-10 {
			t.Fatalf("arrivals mirrored at the axis: %v, want %v", other, rho)
		}
	})
}

// Two omnis half a wavelength apart, with arrivals from all round and with the
// narrow spread that a mast above its surroundings sees.
func ExampleCorrelation() {
	round := scatter.Correlation(scatter.Spectrum{Kind: scatter.SpectrumUniform2D}, 0.5, 0)
	narrow := scatter.Correlation(scatter.Spectrum{Kind: scatter.SpectrumLaplacian, SpreadRad: 8 * degree}, 0.5, 0)
	fmt.Printf("all round %.3f, 8° %.3f\n", cmplx.Abs(round), cmplx.Abs(narrow))
	// Output: all round 0.304, 8° 0.915
}

func BenchmarkCorrelation(b *testing.B) {
	for _, d := range []float64{0.5, 4, 100} {
		b.Run(strconv.FormatFloat(d, 'g', -1, 64)+" wavelengths", func(b *testing.B) {
			s := scatter.Spectrum{Kind: scatter.SpectrumLaplacian, SpreadRad: 8 * degree}
			for b.Loop() {
				scatter.Correlation(s, d, 0.4)
			}
		})
	}
}

// TestEnvelopeIsNearTheExactFigure: for two zero-mean complex Gaussian signals
// E|x||y| = (π/4) ₂F₁(−½, −½; 1; |ρ|²) (Jakes, Microwave Mobile Communications,
// 1.3–1.5), which the trade replaces by |ρ|².
func TestEnvelopeIsNearTheExactFigure(t *testing.T) {
	worst := 0.0
	for a := 0.0; a <= 0.999; a += 0.01 {
		term, f := 1.0, 1.0
		for k := 1; k < 4000; k++ {
			q := (float64(k) - 1.5) / float64(k)
			term *= q * q * a * a
			f += term
		}
		exact := math.Pi / 4 * (f - 1) / (1 - math.Pi/4)
		worst = math.Max(worst, scatter.Envelope(complex(0, a))-exact)
		if exact > scatter.Envelope(complex(a, 0))+1e-12 {
			t.Errorf("|ρ|=%g: exact %g above |ρ|²", a, exact)
		}
	}
	if worst > 0.03 || worst < 0.02 {
		t.Errorf("largest difference %.4f, the documentation says at most 0.03", worst)
	}
}
