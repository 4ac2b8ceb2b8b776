package antenna

import (
	"encoding/csv"
	"math"
	"math/cmplx"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
)

// The method of moments as an outside check: decks for nec2c (Debian package nec2c 1.3, a translation of NEC-2) and what
// it answered stand in testdata/nec. Where nec2c is installed its answers are compared with the kept ones as well.

func necDir(t testing.TB) string {
	t.Helper()
	dir, err := filepath.Abs(filepath.Join("..", "..", "testdata", "nec"))
	if err != nil {
		t.Fatal(err)
	}
	return dir
}

type necRow struct{ deck, quantity, at, first, second string }

func necResults(t testing.TB) []necRow {
	t.Helper()
	f, err := os.Open(filepath.Join(necDir(t), "results.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []necRow
	for _, r := range all[1:] {
		out = append(out, necRow{r[0], r[1], r[2], r[3], r[4]})
	}
	return out
}

func TestNECAnswersAsKept(t *testing.T) {
	nec, err := exec.LookPath("nec2c")
	if err != nil {
		t.Log("nec2c is not installed: the kept answers stand unchecked on this machine")
	}
	decks := map[string][]necRow{}
	for _, r := range necResults(t) {
		decks[r.deck] = append(decks[r.deck], r)
		if _, err := os.Stat(filepath.Join(necDir(t), r.deck)); err != nil {
			t.Fatal(err)
		}
	}
	if len(decks) != 31 {
		t.Fatalf("%d decks", len(decks))
	}
	if nec == "" {
		return
	}
	for deck, rows := range decks {
		out := filepath.Join(t.TempDir(), "out")
		if err := exec.Command(nec, "-i", filepath.Join(necDir(t), deck), "-o", out).Run(); err != nil {
			t.Fatal(err)
		}
		text, err := os.ReadFile(out)
		if err != nil {
			t.Fatal(err)
		}
		words := " " + strings.Join(strings.Fields(string(text)), " ") + " "
		for _, r := range rows {
			if !strings.Contains(words, " "+r.first+" "+r.second+" ") {
				t.Errorf("%s %s %s: nec2c no longer answers %s %s", deck, r.quantity, r.at, r.first, r.second)
			}
		}
	}
}

func TestDipoleCouplingAgainstNEC(t *testing.T) {
	// Both driven alike see Z₁₁ + Z₁₂, in opposition Z₁₁ − Z₁₂. NEC's wires are thin, not endlessly thin: corrections go with
	// powers of 1/Ω, Ω = 2 ln(2l/a) (Hallén), so that three radii extrapolate to the limit that induced EMF stands for. What
	// the quadratic term changes, halved, bounds what the next one may.
	drive := map[string]complex128{}
	for _, r := range necResults(t) {
		if r.quantity == "impedance" {
			drive[r.deck] = complex(number(t, r.first), number(t, r.second))
		}
	}
	var x [3]float64
	for i, a := range [3]float64{1e-6, 1e-7, 1e-8} {
		x[i] = 1 / (2 * math.Log(1/a))
	}
	for d, name := range map[float64]string{0.2: "020", 0.3: "030", 0.5: "050", 0.7: "070", 1: "100"} {
		var z12, z11 [3]complex128
		for i, r := range [3]string{"6", "7", "8"} {
			even, odd := drive["pair_"+name+"_r"+r+"_even.nec"], drive["pair_"+name+"_r"+r+"_odd.nec"]
			if even == 0 || odd == 0 {
				t.Fatal("no answer for ", name, r)
			}
			z11[i], z12[i] = (even+odd)/2, (even-odd)/2
		}
		limit := func(z [3]complex128) (linear, quadratic complex128) {
			linear = z[2] - complex(x[2]/(x[2]-x[1]), 0)*(z[2]-z[1])
			for i := range z {
				p := 1.0
				for j := range z {
					if j != i {
						p *= x[j] / (x[j] - x[i])
					}
				}
				quadratic += complex(p, 0) * z[i]
			}
			return linear, quadratic
		}
		linear, quadratic := limit(z12)
		within := cmplx.Abs(quadratic-linear)/2 + 0.05 // NEC prints five digits: 0.005 Ω, ten times larger extrapolated
		if within > 0.6 {
			t.Errorf("%v wavelengths: the extrapolation itself is open by %v Ω", d, within)
		}
		if got := MutualImpedance(d, 0); cmplx.Abs(got-quadratic) > within {
			t.Errorf("%v wavelengths: %v Ω, NEC %v ± %.2f", d, got, quadratic, within)
		}
		linear, quadratic = limit(z11)
		if got := SelfImpedance(); cmplx.Abs(got-quadratic) > cmplx.Abs(quadratic-linear)/2+0.05 {
			t.Errorf("%v wavelengths: self impedance %v Ω, NEC %v, %v", d, got, quadratic, linear)
		}
	}
}

func TestLeaningDipoleAgainstNEC(t *testing.T) {
	// Skew and tilt, the pattern and the two field components in 264 directions. NEC's θ̂ points down and its φ̂ runs
	// counter-clockwise: E_θ = −V, E_φ = −H. The wire is 1e-7 wavelengths thin, Ω = 32: its current is sinusoidal to a few
	// hundredths, and so is the field.
	b := Body{Pattern: &Pattern{Kind: Dipole}, Skew: 20 * degree, Tilt: 10 * degree, Ports: []Port{{}}}
	type sample struct {
		at   string
		v, h complex128 // ours
		e, f complex128 // NEC's, as V and H
	}
	var all []sample
	var top complex128
	var power float64
	for _, r := range necResults(t) {
		if r.quantity != "field" {
			continue
		}
		angle := strings.Fields(r.at)
		d := Toward(-number(t, angle[1])*degree, (90-number(t, angle[0]))*degree)
		v, h := b.Field(0, &d)
		phasor := func(s string) complex128 {
			p := strings.Fields(s)
			return -cmplx.Rect(number(t, p[0]), number(t, p[1])*degree)
		}
		s := sample{r.at, v, h, phasor(r.first), phasor(r.second)}
		all = append(all, s)
		top += cmplx.Conj(v)*s.e + cmplx.Conj(h)*s.f
		power += square(v) + square(h)
	}
	if len(all) != 264 {
		t.Fatalf("%d directions", len(all))
	}
	scale := top / complex(power, 0) // one complex factor for all directions: NEC's source and phase
	most := 0.0
	for _, s := range all {
		dv, dh := s.e/scale-s.v, s.f/scale-s.h
		off := math.Sqrt(square(dv) + square(dh))
		most = math.Max(most, off)
		if off > 0.02 {
			t.Errorf("θ φ %s: V %v H %v, NEC %v %v", s.at, s.v, s.h, s.e/scale, s.f/scale)
		}
	}
	t.Logf("largest difference %.4f of the peak field", most)
}
