package scatter_test

import (
	"math"
	"math/cmplx"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/scatter"
)

// field integrates a plane wave's phase across a baseline (right, up, forward), in wavelengths.
func field(nodes []scatter.Node, r, u, f float64) complex128 {
	var s complex128
	for _, n := range nodes {
		sb, cb := math.Sincos(n.Azimuth)
		se, ce := math.Sincos(n.Elevation)
		s += complex(n.Weight, 0) * cmplx.Exp(complex(0, 2*math.Pi*(r*sb*ce+u*se+f*cb*ce)))
	}
	return s
}

func resolution(tolerance, across, up float64) scatter.Resolution {
	return scatter.Resolution{Tolerance: tolerance, PhaseAz: 2 * math.Pi * across, PhaseEl: 2 * math.Pi * up}
}

// TestSphereAgainstClosedForms: a uniform sphere gives sin(kd)/(kd) in every direction, arrivals in the horizontal plane
// J₀(2πd) (Clarke; Aulin), and the azimuth correlation of this package where there is no elevation spread.
func TestSphereAgainstClosedForms(t *testing.T) {
	const tol = 1e-5
	sphere := scatter.Angular{AzimuthForm: scatter.Uniform, ElevationForm: scatter.Cosine}
	for _, d := range []float64{0.1, 0.25, 0.5, 1, 2, 3} {
		n := sphere.Nodes(resolution(tol, d, d))
		want := math.Sin(2*math.Pi*d) / (2 * math.Pi * d)
		for _, dir := range [][3]float64{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}, {0.6, 0, 0.8}, {0.48, 0.6, 0.64}} {
			if got := field(n, d*dir[0], d*dir[1], d*dir[2]); cmplx.Abs(got-complex(want, 0)) > tol {
				t.Errorf("sphere %v wavelengths along %v: %v, want %v", d, dir, got, want)
			}
		}
		plane := scatter.Angular{AzimuthForm: scatter.Uniform, ElevationForm: scatter.Laplacian}
		if got := field(plane.Nodes(resolution(tol, d, d)), d, 0, 0); cmplx.Abs(got-complex(math.J0(2*math.Pi*d), 0)) > tol {
			t.Errorf("plane %v wavelengths: %v, want %v", d, got, math.J0(2*math.Pi*d))
		}
	}
}

func TestSphereAgainstTheAzimuthIntegral(t *testing.T) {
	forms := map[scatter.Form]scatter.SpectrumKind{scatter.Laplacian: scatter.SpectrumLaplacian, scatter.Gaussian: scatter.SpectrumGaussian, scatter.VonMises: scatter.SpectrumVonMises}
	rapid.Check(t, func(t *rapid.T) {
		form := rapid.SampledFrom([]scatter.Form{scatter.Laplacian, scatter.Gaussian, scatter.VonMises}).Draw(t, "form")
		sigma := rapid.Float64Range(1, 70).Draw(t, "spread") * degree
		d := rapid.Float64Range(0, 6).Draw(t, "d")
		tol := rapid.SampledFrom([]float64{3e-3, 1e-5}).Draw(t, "tolerance")
		off := rapid.Float64Range(-math.Pi, math.Pi).Draw(t, "off")
		a := scatter.Angular{AzimuthForm: form, AzimuthSpread: sigma, ElevationForm: scatter.Laplacian}
		nodes := a.Nodes(resolution(tol, d, 1))
		// A baseline turned by −off sees the mean at off from its broadside.
		s, c := math.Sincos(off)
		got := field(nodes, d*c, 0, d*s)
		want := scatter.Correlation(scatter.Spectrum{Kind: forms[form], SpreadRad: sigma, Kappa: scatter.KappaOfSpread(sigma)}, d, off)
		// The rule was chosen on two orientations; others may be a few times less lucky.
		if cmplx.Abs(got-want) > 4*tol {
			t.Fatalf("%v, want %v, with %d nodes", got, want, len(nodes))
		}
	})
}

func TestNodesHoldPowerAndMean(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := scatter.Angular{
			AzimuthForm:     rapid.SampledFrom([]scatter.Form{scatter.Laplacian, scatter.Gaussian, scatter.VonMises, scatter.Uniform}).Draw(t, "az"),
			ElevationForm:   rapid.SampledFrom([]scatter.Form{scatter.Laplacian, scatter.Gaussian, scatter.Uniform, scatter.Cosine}).Draw(t, "el"),
			AzimuthSpread:   rapid.Float64Range(0, 1.5).Draw(t, "spread"),
			ElevationSpread: rapid.Float64Range(0, 0.6).Draw(t, "rise"),
			AzimuthMean:     rapid.Float64Range(-1, 1).Draw(t, "mean"),
			ElevationMean:   rapid.Float64Range(-0.3, 0.3).Draw(t, "up"),
		}
		r := resolution(1e-4, rapid.Float64Range(0, 10).Draw(t, "across"), rapid.Float64Range(0, 5).Draw(t, "up2"))
		r.BeamAz, r.BeamEl = rapid.Float64Range(0.05, 2).Draw(t, "beam"), rapid.Float64Range(0.05, 2).Draw(t, "beam2")
		total, mean := 0.0, 0.0
		for _, n := range a.Nodes(r) {
			if !(n.Weight > 0) || math.Abs(n.Elevation) > math.Pi/2 || math.Abs(n.Azimuth-a.AzimuthMean) > math.Pi {
				t.Fatalf("%+v", n)
			}
			total += n.Weight
			mean += n.Weight * (n.Azimuth - a.AzimuthMean)
		}
		if math.Abs(total-1) > 1e-12 || math.Abs(mean) > 1e-3 {
			t.Fatalf("power %v, mean %v", total, mean)
		}
	})
}

// TestNarrowBeamsCaptureLess: PHYSICS section 4's example, a 10° beam in 30° of spread, worked independently: the share
// of a Laplacian that a Gaussian main lobe takes, by dense sums.
func TestNarrowBeamsCaptureLess(t *testing.T) {
	a := scatter.Angular{AzimuthSpread: 30 * degree}
	r := scatter.Resolution{Tolerance: 1e-5, BeamAz: 10 * degree}
	lobe := func(x float64) float64 { return math.Exp(-4 * math.Ln2 * math.Pow(x/(10*degree), 2)) }
	got := 0.0
	for _, n := range a.Nodes(r) {
		got += n.Weight * lobe(n.Azimuth)
	}
	var num, den float64
	for i := range 400000 {
		x := math.Pi * (float64(i) + 0.5) / 400000
		p := math.Exp(-math.Sqrt2 * x / (30 * degree))
		num += p * lobe(x)
		den += p
	}
	if math.Abs(got-num/den) > 1e-5 {
		t.Errorf("%v of the power, want %v", got, num/den)
	}
	if db := -10 * math.Log10(got); math.Abs(db-6.7) > 0.1 {
		t.Errorf("%.2f dB are lost, want 6.7", db)
	}
}
