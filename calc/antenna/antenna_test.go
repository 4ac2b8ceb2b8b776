package antenna

import (
	"math"
	"math/cmplx"
	"strconv"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/testdata/published"
)

const degree = math.Pi / 180

func number(t testing.TB, s string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// element is the element of TR 38.901 V16.1.0 with the figures read from its table 7.3-1.
func element(t testing.TB) (Pattern, float64) {
	value := map[string]float64{}
	for _, r := range published.Table(t, "tr38901_table_7_3_1_antenna_element.csv") {
		if x, err := strconv.ParseFloat(r["value"], 64); err == nil {
			value[r["symbol"]] = x
		}
	}
	return Pattern{
		Kind: Panel, BeamwidthAz: value["phi_3dB"] * degree, BeamwidthEl: value["theta_3dB"] * degree,
		FrontToBack: value["A_max"], Sidelobe: value["SLA_V"],
	}, value["G_E_max"]
}

// printed is what six printed decimals leave open.
const printed = 0.5e-6

func TestPanelIsTheElementOfTR38901(t *testing.T) {
	p, gain := element(t)
	if err := p.Check(); err != nil || gain != 8 {
		t.Fatal(err, gain)
	}
	rows := published.Table(t, "tr38901_antenna_element_check_values.csv")
	if len(rows) < 150 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		theta, phi := number(t, r["theta_zenith_deg"]), number(t, r["phi_azimuth_from_boresight_deg"])
		// θ is from the zenith; 3GPP's φ is counter-clockwise, which the symmetric cut does not show.
		got := p.Attenuation(-phi*degree, (90-theta)*degree)
		if want := -number(t, r["A_db"]); math.Abs(got-want) > printed {
			t.Errorf("θ %v φ %v: %v dB, want %v", theta, phi, got, want)
		}
		if want := number(t, r["gain_dbi"]); math.Abs(gain-got-want) > printed {
			t.Errorf("θ %v φ %v: gain %v dBi, want %v", theta, phi, gain-got, want)
		}
		// The amplitude that fields are made of is the same figure, to what the fast functions leave: 3e-8 rad on 12(x/65°)².
		d := Toward(-phi*degree, (90-theta)*degree)
		b := Body{Pattern: &p, Ports: []Port{{}}}
		s := b.Ready()
		if theta > 0 && theta < 180 {
			if v := s.View(&d); math.Abs(-20*math.Log10(v.Gain)-got) > 5e-6 {
				t.Errorf("θ %v φ %v: view %v dB, want %v", theta, phi, -20*math.Log10(v.Gain), got)
			}
		}
	}
}

func TestMutualImpedanceAgainstTheClosedForm(t *testing.T) {
	const half = 0.5e-4 // four printed decimals
	rows := published.Table(t, "mutual_impedance_half_wave_dipoles.csv")
	if len(rows) != 14 {
		t.Fatalf("%d rows", len(rows))
	}
	for _, r := range rows {
		d, gap := number(t, r["side_by_side_distance_wavelengths"]), number(t, r["collinear_tip_gap_wavelengths"])
		var z complex128
		switch r["arrangement"] {
		case "self_thin_limit":
			z = SelfImpedance()
		case "side_by_side":
			z = MutualImpedance(d, 0)
		case "collinear_tip_gap":
			z = MutualImpedance(0, 0.5+gap)
		default:
			t.Fatalf("unknown arrangement %q", r["arrangement"])
		}
		want := complex(number(t, r["R21_ohm_eta_376p730"]), number(t, r["X21_ohm_eta_376p730"]))
		if math.Abs(real(z-want)) > half+1e-7 || math.Abs(imag(z-want)) > half+1e-7 {
			t.Errorf("%s %v %v: %v, want %v", r["arrangement"], d, gap, z, want)
		}
		// The same with the rounded η = 120π, printed beside.
		rounded := z * complex(120*math.Pi/FreeSpaceImpedance, 0)
		if want := complex(number(t, r["R21_ohm_eta_120pi"]), number(t, r["X21_ohm_eta_120pi"])); cmplx.Abs(rounded-want) > 2*half {
			t.Errorf("%s %v %v with 120π: %v, want %v", r["arrangement"], d, gap, rounded, want)
		}
	}
}

func TestMutualImpedanceIsEvenAndFades(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d, h := rapid.Float64Range(0.02, 20).Draw(t, "d"), rapid.Float64Range(-20, 20).Draw(t, "h")
		z := MutualImpedance(d, h)
		if z != MutualImpedance(d, -h) || z != MutualImpedance(-d, h) {
			t.Fatal("not even")
		}
		// |Z₂₁| ≤ η/4π · ∫ sin · 2/R ≤ η/(4π) · (2/k)·2/R_min with R_min at least the distance of the nearer ends.
		least := math.Hypot(d, math.Max(0, math.Abs(h)-0.5))
		if bound := FreeSpaceImpedance / (4 * math.Pi) * 2 / math.Pi / least; cmplx.Abs(z) > bound {
			t.Fatalf("%v above %v", cmplx.Abs(z), bound)
		}
	})
}

func TestTouchingDipolesPanic(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("no panic")
		}
	}()
	MutualImpedance(0, 0.3)
}

func TestCouplingMatrix(t *testing.T) {
	t.Run("alone is whole", func(t *testing.T) {
		c := make([]complex128, 1)
		CouplingMatrix(c, [][3]float64{{3, 2, 1}})
		if cmplx.Abs(c[0]-1) > 1e-15 {
			t.Error(c)
		}
	})
	t.Run("far apart is the identity", func(t *testing.T) {
		c := make([]complex128, 4)
		CouplingMatrix(c, [][3]float64{{}, {500, 0, 0}})
		// |Z₁₂|/2R₁₁ ≈ η/(2π²·500)/146 = 2.6e-4
		if cmplx.Abs(c[0]-1) > 3e-4 || cmplx.Abs(c[1]) > 3e-4 {
			t.Error(c)
		}
	})
	t.Run("two by hand", func(t *testing.T) {
		// C = (Z₁₁+Z₁₁*)[[a, b], [b, a]]⁻¹ with a = 2R₁₁, b = Z₁₂: a/(a²−b²)·2R₁₁ and −b/(a²−b²)·2R₁₁.
		c := make([]complex128, 4)
		CouplingMatrix(c, [][3]float64{{}, {0.3, 0, 0.4}})
		a, b := complex(2*real(SelfImpedance()), 0), MutualImpedance(0.5, 0)
		want := []complex128{a * a / (a*a - b*b), -a * b / (a*a - b*b)}
		for i, w := range want {
			if cmplx.Abs(c[i]-w) > 1e-12 || cmplx.Abs(c[3-i]-w) > 1e-12 {
				t.Errorf("%v, want %v", c, want)
			}
		}
	})
	t.Run("solves its own equation", func(t *testing.T) {
		rapid.Check(t, func(t *rapid.T) {
			n := rapid.IntRange(2, 6).Draw(t, "n")
			at := make([][3]float64, n)
			for i := range at {
				at[i] = [3]float64{float64(i) * rapid.Float64Range(0.1, 0.4).Draw(t, "r"), rapid.Float64Range(-1, 1).Draw(t, "u"), rapid.Float64Range(-0.02, 0.02).Draw(t, "f")}
				if i > 0 {
					at[i][0] = at[i-1][0] + rapid.Float64Range(0.1, 0.8).Draw(t, "step")
				}
			}
			c := make([]complex128, n*n)
			CouplingMatrix(c, at)
			self := SelfImpedance()
			for i := range n {
				for j := range n {
					var s complex128
					for k := range n {
						z := self + cmplx.Conj(self)
						if i != k {
							z = MutualImpedance(math.Hypot(at[i][0]-at[k][0], at[i][2]-at[k][2]), at[i][1]-at[k][1])
						}
						s += z * c[k*n+j]
					}
					want := complex128(0)
					if i == j {
						want = self + cmplx.Conj(self)
					}
					if cmplx.Abs(s-want) > 1e-9 {
						t.Fatalf("row %d column %d: %v", i, j, s)
					}
				}
			}
		})
	})
}

func TestFastFunctions(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		x := rapid.Float64Range(-1, 1).Draw(t, "x")
		if d := arcsine(x) - math.Asin(x); math.Abs(d) > 3e-8 {
			t.Fatalf("arcsine %v", d)
		}
		a, b := rapid.Float64Range(-1, 1).Draw(t, "a"), rapid.Float64Range(-1, 1).Draw(t, "b")
		// The angle of no vector at all is anything: ours is 0, the library's hangs on the signs of the zeros.
		if d := math.Remainder(arctangent2(a, b)-math.Atan2(a, b), 2*math.Pi); math.Abs(d) > 3e-8 && (a != 0 || b != 0) {
			t.Fatalf("arctangent %v", d)
		}
		db := rapid.Float64Range(0, 100).Draw(t, "db")
		if d := ofAttenuation(db)/math.Pow(10, -db/20) - 1; math.Abs(d) > 1e-7 {
			t.Fatalf("attenuation %v", d)
		}
		if d := ofAttenuation(2*db)/math.Pow(10, -db/10) - 1; math.Abs(d) > 2e-5 {
			t.Fatalf("attenuation %v", d)
		}
	})
	if arctangent2(0, 0) != 0 || arctangent2(0, math.Copysign(0, -1)) != 0 || ofAttenuation(0) != 1 {
		t.Error("ends")
	}
}

func TestPatterns(t *testing.T) {
	const b3 = 3 // dB at half the half-power width by the form 12(x/x₃)²
	for _, c := range []struct {
		name   string
		p      Pattern
		az, el float64 // deg
		want   float64
		within float64
		source string
	}{
		{"isotropic", Pattern{}, 77, -33, 0, 0, "definition"},
		{"panel half power", Pattern{Kind: Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18}, 32.5, 0, b3, 1e-12, "TR 38.901 table 7.3-1"},
		{"panel behind", Pattern{Kind: Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18}, 180, 0, 25, 1e-12, "TR 38.901 table 7.3-1"},
		{"panel tilted down 6°", Pattern{Kind: Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18, ElectricalTilt: -6 * degree}, 0, -6, 0, 1e-12, "electrical tilt moves the beam"},
		{"panel tilted up, boresight", Pattern{Kind: Panel, BeamwidthAz: 65 * degree, BeamwidthEl: 8 * degree, FrontToBack: 25, Sidelobe: 18, ElectricalTilt: 4 * degree}, 0, 0, b3, 1e-12, "electrical tilt moves the beam"},
		{"omni is the same all round", Pattern{Kind: Omni, BeamwidthEl: 20 * degree, Sidelobe: 15}, 140, 10, b3, 1e-12, "TR 38.901 table 7.3-1, vertical cut"},
		{"dipole half power at 39°", Pattern{Kind: Dipole}, 100, 39.04, 3.0103, 0.005, "78° width, Balanis section 4.6"},
		{"dipole at 30°", Pattern{Kind: Dipole}, 0, 30, -20 * math.Log10(math.Cos(math.Pi/4)/math.Cos(30*degree)), 1e-9, "Balanis equation 4-84"},
		{"dipole along its axis", Pattern{Kind: Dipole}, 0, 90, 120, 0, "the null, cut"},
		{"dish half power", Pattern{Kind: Dish, BeamwidthAz: 3 * degree, FrontToBack: 45, Sidelobe: 20}, 0, 1.5, b3, 1e-9, "main lobe"},
		{"dish envelope starts", Pattern{Kind: Dish, BeamwidthAz: 3 * degree, FrontToBack: 45, Sidelobe: 20}, 3 * math.Sqrt(20./12), 0, 20, 1e-9, "by construction"},
		{"dish envelope falls 25 log", Pattern{Kind: Dish, BeamwidthAz: 3 * degree, FrontToBack: 60, Sidelobe: 20}, 30 * math.Sqrt(20./12), 0, 45, 1e-9, "25 dB a decade (from memory)"},
		{"dish behind", Pattern{Kind: Dish, BeamwidthAz: 3 * degree, FrontToBack: 45, Sidelobe: 20}, 180, 0, 45, 0, "front-to-back"},
	} {
		t.Run(c.name, func(t *testing.T) {
			if err := c.p.Check(); err != nil {
				t.Fatal(err)
			}
			if got := c.p.Attenuation(c.az*degree, c.el*degree); math.Abs(got-c.want) > c.within {
				t.Errorf("%v dB, want %v (%s)", got, c.want, c.source)
			}
			// The view from outside sees the same figure.
			b := Body{Pattern: &c.p, Ports: []Port{{}}}
			s, d := b.Ready(), Toward(c.az*degree, c.el*degree)
			if got := -20 * math.Log10(s.View(&d).Gain); math.Abs(got-c.want) > c.within+2e-5 {
				t.Errorf("view %v dB, want %v", got, c.want)
			}
		})
	}
}

func TestCuts(t *testing.T) {
	az := []Sample{{-90 * degree, -12}, {0, 0}, {90 * degree, -12}, {180 * degree, -25}}
	el := []Sample{{20 * degree, -15}, {-20 * degree, -15}, {0, 0}} // any order
	p, err := NewCuts(az, el)
	if err != nil {
		t.Fatal(err)
	}
	if err := p.Check(); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ az, el, want float64 }{
		{0, 0, 0}, {45, 0, 6}, {-45, 0, 6}, {135, 0, 18.5}, {-135, 0, 18.5}, {0, 10, 7.5}, {45, 10, 13.5}, {0, 60, 15}, {180, 20, 25}, {179.95, 0, 25 - 13*0.05/90},
	} {
		if got := p.Attenuation(c.az*degree, c.el*degree); math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%v° %v°: %v dB, want %v", c.az, c.el, got, c.want)
		}
	}
	if w, h := p.Widths(); math.Abs(w/degree-45.2) > 0.4 || math.Abs(h/degree-8.03) > 0.3 {
		t.Errorf("widths %v %v", w/degree, h/degree)
	}
	p.ElectricalTilt = -5 * degree
	if got := p.Attenuation(0, -5*degree); math.Abs(got) > 1e-9 {
		t.Errorf("tilted: %v dB", got)
	}
	for name, bad := range map[string][]Sample{
		"one sample":    {{0, 0}},
		"above peak":    {{0, 0}, {1, 0.1}},
		"not a number":  {{0, 0}, {1, math.NaN()}},
		"endless":       {{0, 0}, {1, math.Inf(-1)}},
		"out of circle": {{0, 0}, {4, -3}},
		"one angle":     {{1, 0}, {1, -3}},
	} {
		if _, err := NewCuts(bad, el); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
}

func TestCheckRefuses(t *testing.T) {
	good := Pattern{Kind: Panel, BeamwidthAz: 1, BeamwidthEl: 1, FrontToBack: 20, Sidelobe: 20}
	for name, p := range map[string]Pattern{
		"panel without width":  {Kind: Panel, BeamwidthEl: 1, FrontToBack: 20, Sidelobe: 20},
		"panel without front":  {Kind: Panel, BeamwidthAz: 1, BeamwidthEl: 1, Sidelobe: 20},
		"not a number":         {Kind: Panel, BeamwidthAz: math.NaN(), BeamwidthEl: 1, FrontToBack: 20, Sidelobe: 20},
		"omni without width":   {Kind: Omni, Sidelobe: 20},
		"dish upside down":     {Kind: Dish, BeamwidthAz: 1, FrontToBack: 20, Sidelobe: 30},
		"cuts without samples": {Kind: Cuts},
		"no such kind":         {Kind: 17},
		"tilt over the top":    {Kind: Omni, BeamwidthEl: 1, Sidelobe: 20, ElectricalTilt: 2},
	} {
		if p.Check() == nil {
			t.Errorf("%s: accepted", name)
		}
	}
	if err := good.Check(); err != nil {
		t.Error(err)
	}
	if w := DishBeamwidth(70); math.Abs(w-degree) > 1e-15 {
		t.Errorf("dish of 70 wavelengths: %v°, want 1° (common practice)", w/degree)
	}
}

// coupling through the mirror of package documentation.
func coupling(a, b *Port) complex128 {
	av, ah := a.Jones()
	bv, bh := b.Jones()
	return av*bv - ah*bh
}

func TestJones(t *testing.T) {
	for _, c := range []struct {
		name string
		a, b Port
		want float64 // |c|²
	}{
		{"vertical faces vertical", Port{}, Port{}, 1},
		{"horizontal faces horizontal", Port{Slant: 90 * degree}, Port{Slant: 90 * degree}, 1},
		{"+45 faces +45: cross-polar", Port{Slant: 45 * degree}, Port{Slant: 45 * degree}, 0},
		{"+45 faces −45: full", Port{Slant: 45 * degree}, Port{Slant: -45 * degree}, 1},
		{"10° off", Port{Slant: 10 * degree}, Port{}, math.Pow(math.Cos(10*degree), 2)},
		{"two right-hand circular", Port{Axial: 1, Hand: Right}, Port{Axial: 1, Hand: Right}, 1},
		{"right faces left", Port{Axial: 1, Hand: Right}, Port{Axial: 1, Hand: Left}, 0},
		{"circular faces linear", Port{Axial: 1, Hand: Right}, Port{Slant: 0.3}, 0.5},
		{"axial of a linear port is not read", Port{Axial: 0.5}, Port{}, 1},
	} {
		if got := square(coupling(&c.a, &c.b)); math.Abs(got-c.want) > 1e-15 {
			t.Errorf("%s: %v, want %v (IEEE Std 145; Balanis ch. 2)", c.name, got, c.want)
		}
	}
	// Right-hand is clockwise seen from behind: at ωt = 0 the field of e^{jωt} points up, a quarter later to the right.
	v, h := (&Port{Axial: 1, Hand: Right}).Jones()
	if later := h * complex(0, 1); real(v) <= 0 || real(later) <= 0 {
		t.Errorf("right-hand turns the other way: %v then %v", v, later)
	}
	// A leak adds its power to that of a rotation: −20 dB and 5.7°.
	a, b := Port{Slant: 5.7 * degree, Leak: 0.1}, Port{Slant: 90 * degree}
	if got, want := square(coupling(&a, &b)), math.Pow(math.Sin(5.7*degree), 2)+math.Pow(0.1*math.Cos(5.7*degree), 2); math.Abs(got-want) > 1e-12 {
		t.Errorf("leak: %v, want %v", got, want)
	}
}

func TestOrientation(t *testing.T) {
	close := func(a, b [3]float64) bool {
		return math.Abs(a[0]-b[0])+math.Abs(a[1]-b[1])+math.Abs(a[2]-b[2]) < 1e-12
	}
	s, c := math.Sincos(10 * degree)
	for _, k := range []struct {
		name        string
		b           Body
		up, forward [3]float64
	}{
		{"true", Body{}, [3]float64{0, 1, 0}, [3]float64{0, 0, 1}},
		{"skew clockwise takes up to the right", Body{Skew: 10 * degree}, [3]float64{s, c, 0}, [3]float64{0, 0, 1}},
		{"tilt raises the boresight, the top leans back", Body{Tilt: 10 * degree}, [3]float64{0, c, -s}, [3]float64{0, s, c}},
		{"azimuth swings to the right", Body{Azimuth: 10 * degree}, [3]float64{0, 1, 0}, [3]float64{s, 0, c}},
	} {
		r, u, f := k.b.Axes()
		if !close(u, k.up) || !close(f, k.forward) {
			t.Errorf("%s: up %v forward %v", k.name, u, f)
		}
		// right × up = −forward in (right, up, forward): a right-handed triple seen from behind.
		if x := r[1]*u[2] - r[2]*u[1]; math.Abs(x-f[0]) > 1e-12 {
			t.Errorf("%s: axes are mirrored", k.name)
		}
	}
	b := Body{Right: 1, Up: 2, Forward: 3, Skew: 90 * degree, Ports: []Port{{Up: 0.1}}}
	if r, u, f := b.PortPosition(0); math.Abs(r-1.1)+math.Abs(u-2)+math.Abs(f-3) > 1e-12 {
		t.Errorf("an element above the centre goes to the right with the skew: %v %v %v", r, u, f)
	}
}

func body(t *rapid.T) Body {
	angle := rapid.Float64Range(-math.Pi, math.Pi)
	return Body{
		Pattern: &Pattern{Kind: Panel, BeamwidthAz: 1.1, BeamwidthEl: 0.4, FrontToBack: 25, Sidelobe: 18},
		Azimuth: angle.Draw(t, "azimuth"), Tilt: rapid.Float64Range(-1.4, 1.4).Draw(t, "tilt"), Skew: angle.Draw(t, "skew"),
		Ports: []Port{{Slant: angle.Draw(t, "slant")}},
	}
}

func TestFieldProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := body(t)
		d := Toward(rapid.Float64Range(-math.Pi, math.Pi).Draw(t, "az"), rapid.Float64Range(-1.5, 1.5).Draw(t, "el"))
		s := b.Ready()
		v := s.View(&d)
		if x := v.Cos*v.Cos + v.Sin*v.Sin; math.Abs(x-1) > 1e-12 {
			t.Fatalf("ψ is no angle: %v", x)
		}
		fv, fh := b.Field(0, &d)
		if p := square(fv) + square(fh); math.Abs(p-v.Gain*v.Gain) > 1e-12 {
			t.Fatalf("turning changes power: %v, %v", p, v.Gain*v.Gain)
		}
		// Straight ahead of its own boresight a body is seen at the top of its lobe, slant and skew adding up, for tilt 0.
		b.Tilt = 0
		ahead := Toward(b.Azimuth, 0)
		fv, fh = b.Field(0, &ahead)
		sn, cs := math.Sincos(b.Ports[0].Slant + b.Skew)
		if math.Abs(real(fv)-cs) > 1e-7 || math.Abs(real(fh)-sn) > 1e-7 {
			t.Fatalf("boresight: %v %v, want %v %v", fv, fh, cs, sn)
		}
		// Swinging body and direction together changes nothing.
		by := rapid.Float64Range(-3, 3).Draw(t, "by")
		az, el := rapid.Float64Range(-3, 3).Draw(t, "az2"), rapid.Float64Range(-1.5, 1.5).Draw(t, "el2")
		one, two := Toward(az, el), Toward(az+by, el)
		v1, h1 := b.Field(0, &one)
		b.Azimuth += by
		v2, h2 := b.Field(0, &two)
		if cmplx.Abs(v1-v2)+cmplx.Abs(h1-h2) > 1e-6 {
			t.Fatalf("azimuth is not an angle of the frame: %v %v, %v %v", v1, h1, v2, h2)
		}
	})
}
