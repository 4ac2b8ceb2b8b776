package polar_test

import (
	"encoding/csv"
	"fmt"
	"math"
	"math/cmplx"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/polar"
)

const degree = math.Pi / 180

func linear(slant, skew float64) polar.Port {
	return polar.Port{SlantRad: slant * degree, SkewRad: skew * degree}
}

func elliptical(slant, axialDB float64, left bool) polar.Port {
	return polar.Port{SlantRad: slant * degree, Axial: polar.AxialFromDB(axialDB), LeftHand: left}
}

// TestLossFactorAgainstTable: COMPUTED as |ρ_w·ρ_a*|² (Balanis, ch. 2), printed to
// 8 decimals, so half a unit of the last place is the tolerance. The table's wave
// and antenna share one view; ours face each other, so one side is mirrored here.
func TestLossFactorAgainstTable(t *testing.T) {
	f, err := os.Open(filepath.Join("..", "..", "testdata", "published", "polarization_loss_factor.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	number := func(s string) float64 {
		x, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		return x
	}
	seen := 0
	for _, r := range all[1:] {
		kind, want := r[0], number(r[3])
		var pairs [][2]polar.Port
		switch kind {
		case "linear_vs_linear_tilt":
			tilt := number(r[1])
			pairs = append(pairs, [2]polar.Port{linear(0, 0), linear(tilt, 0)}, [2]polar.Port{linear(30, tilt), linear(-30, 0)})
		case "linear_vs_perfect_circular":
			for s := 0.0; s < 180; s += 15 {
				pairs = append(pairs, [2]polar.Port{linear(s, 0), elliptical(0, 0, false)}, [2]polar.Port{elliptical(0, 0, true), linear(0, s)})
			}
		case "circular_opposite_sense":
			pairs = append(pairs, [2]polar.Port{elliptical(0, 0, true), elliptical(50, 0, false)})
		case "perfect_circular_wave_on_elliptical_antenna_same_sense":
			pairs = append(pairs, [2]polar.Port{elliptical(0, 0, true), elliptical(20, number(r[2]), true)}, [2]polar.Port{elliptical(-77, number(r[2]), false), elliptical(0, 0, false)})
		default:
			t.Fatalf("unknown case %q", kind)
		}
		for _, p := range pairs {
			seen++
			if got := polar.LossFactor(p[0], p[1]); math.Abs(got-want) > 5.1e-9 {
				t.Errorf("%s %s %s: factor %.9f, want %s", kind, r[1], r[2], got, r[3])
			}
		}
	}
	if len(all) != 17 || seen < 40 {
		t.Errorf("read %d lines and %d pairs", len(all), seen)
	}
}

// TestTheMirror holds the sign that is easy to get wrong, both ways round.
func TestTheMirror(t *testing.T) {
	for _, row := range []struct {
		name      string
		near, far polar.Port
		want      float64
	}{
		{"+45° facing +45° is cross-polar", linear(45, 0), linear(45, 0), 0},
		{"+45° facing −45° couples fully", linear(45, 0), linear(-45, 0), 1},
		{"vertical faces vertical", linear(0, 0), linear(0, 0), 1},
		{"horizontal faces horizontal", linear(90, 0), linear(90, 0), 1},
		{"horizontal faces horizontal the other way up", linear(90, 0), linear(-90, 0), 1},
		{"vertical and horizontal are blind", linear(0, 0), linear(90, 0), 0},
		{"right facing right", elliptical(0, 0, false), elliptical(0, 0, false), 1},
		{"left facing left", elliptical(0, 0, true), elliptical(33, 0, true), 1},
		{"right facing left", elliptical(0, 0, false), elliptical(0, 0, true), 0},
		{"one end clockwise, the other as much anticlockwise in its own view", linear(0, 20), linear(0, -20), 1},
		{"both ends clockwise in their own views add up", linear(0, 20), linear(0, 20), math.Pow(math.Cos(40*degree), 2)},
	} {
		t.Run(row.name, func(t *testing.T) {
			if got := polar.LossFactor(row.near, row.far); math.Abs(got-row.want) > 1e-15 {
				t.Errorf("factor %g, want %g", got, row.want)
			}
		})
	}
}

// crossed is the usual link: ±45° at both ends, which the mirror swaps.
func crossed(nearSkew, farSkew, x1, x2 float64) polar.Pair {
	var p polar.Pair
	for i, slant := range [2]float64{45, -45} {
		p.Near[i].Port, p.Far[i].Port = linear(slant, nearSkew), linear(slant, farSkew)
		if x1 > 0 {
			p.Near[i].Leak = polar.LeakFromDB(x1)
		}
		if x2 > 0 {
			p.Far[i].Leak = polar.LeakFromDB(x2)
		}
	}
	p.Crossed = true
	return p
}

func db(x float64) float64 { return 10 * math.Log10(x) }

// TestCrossTalk: tan² δ and the sum of both ends' discriminations, worked by hand
// from the formula of the project's physics note (Balanis, ch. 2; common practice
// for the sums).
func TestCrossTalk(t *testing.T) {
	for _, row := range []struct {
		name           string
		near, far      float64
		x1, x2         float64
		typical, worst float64
	}{
		{"8° of skew", 8, 0, 0, 0, 17.0439494, 17.0439494},                // −20 lg tan 8°
		{"8° of skew anticlockwise", -8, 0, 0, 0, 17.0439494, 17.0439494}, // even in the skew
		{"5.7° of skew", 5.7, 0, 0, 0, 20.0162344, 20.0162344},            // −20 lg tan 5.7°
		{"skews of both ends add in their own views", 4, 4, 0, 0, 17.0439494, 17.0439494},
		{"no skew, 30 dB each end", 0, 0, 30, 30, 26.9897000, 23.9794001}, // −10 lg 0.002; −20 lg (2·10^−1.5)
		{"8° and 30 dB", 8, 0, 30, 30, 16.6250627, 13.8164966},
	} {
		t.Run(row.name, func(t *testing.T) {
			p := crossed(row.near, row.far, row.x1, row.x2)
			for _, nearEnd := range []bool{true, false} {
				for i := range 2 {
					r := p.Receive(nearEnd, i)
					if got := -db(r.CrossTalk); math.Abs(got-row.typical) > 5e-5 {
						t.Errorf("typical %.6f dB, want %.6f", got, row.typical)
					}
					if got := -db(r.CrossTalkMax); math.Abs(got-row.worst) > 5e-3 {
						t.Errorf("worst %.6f dB, want %.6f", got, row.worst)
					}
				}
			}
		})
	}
}

// TestWhatASkewCosts: the two radios of the physics note. Tied:
// cos²δ·S/(1+S·sin²δ); combining: nothing for a common rotation, 0.04 of 13.3
// bit/s/Hz for ports 10° off square at 20 dB per chain.
func TestWhatASkewCosts(t *testing.T) {
	const s = 100.0 // 20 dB
	for _, skew := range []float64{0, 3, 5.7, 8, 30} {
		p := crossed(skew, 0, 0, 0)
		sin, cos := math.Sincos(skew * degree)
		if got, want := p.Receive(true, 0).SINR(s), cos*cos*s/(1+s*sin*sin); math.Abs(got-want) > 1e-9*want {
			t.Errorf("tied, skew %g°: SINR %g, want %g", skew, got, want)
		}
		if got, want := p.CombiningBits(s), 2*math.Log2(1+s); math.Abs(got-want) > 1e-12 {
			t.Errorf("combining, skew %g°: %g bit/s/Hz, want %g", skew, got, want)
		}
	}
	if got := db(crossed(5.7106, 0, 0, 0).Receive(true, 0).SINR(1e9)); math.Abs(got-20) > 1e-3 {
		t.Errorf("5.7° caps the SINR at %g dB, want 20", got)
	}
	off := crossed(0, 0, 0, 0)
	off.Near[1].SkewRad = 10 * degree
	if got := off.CombiningBits(s); math.Abs(got-13.273) > 5e-4 { // log₂(1 + 2·100 + 100²·cos² 10°)
		t.Errorf("10° off square: %g bit/s/Hz, want 13.273", got)
	}
	// Behind the linear receiver each stream keeps S/(1+…): for square ports all of it.
	if got := crossed(8, 0, 0, 0).CombinedSINR(true, 0, s); math.Abs(got-s) > 1e-9 {
		t.Errorf("combined SINR %g of a skewed square pair, want %g", got, s)
	}
}

func TestSlantAgainstHorizontalAndVertical(t *testing.T) {
	p := crossed(0, 0, 0, 0)
	p.Far[0].Port, p.Far[1].Port = linear(0, 0), linear(90, 0)
	if got, want := p.CombiningBits(100), 2*math.Log2(101); math.Abs(got-want) > 1e-12 {
		t.Errorf("±45° against H/V carries %g bit/s/Hz on a combining radio, want two full streams, %g", got, want)
	}
}

func TestAngles(t *testing.T) {
	for _, row := range []struct{ a, b, want float64 }{
		{45, -45, 90}, {-45, 45, 90}, {53, -45, 98}, {45, -37, 82}, {0, 90, 90}, {135, 45, 90}, {170, 0, 170},
	} {
		a, b := linear(row.a, 0), linear(row.b, 0)
		if got := polar.AngleBetween(a, b) / degree; math.Abs(got-row.want) > 1e-12 {
			t.Errorf("from %g° to %g°: %g°, want %g°", row.b, row.a, got, row.want)
		}
		if got, want := polar.Residual(a, b), math.Abs(math.Cos(row.want*degree)); math.Abs(got-want) > 1e-15 {
			t.Errorf("residual of %g° and %g°: %g, want %g", row.a, row.b, got, want)
		}
	}
	if got := polar.Residual(elliptical(0, 0, false), elliptical(0, 0, true)); got > 1e-15 {
		t.Errorf("right and left circular leave %g", got)
	}
}

func anyPort(t *rapid.T, name string) polar.Port {
	return polar.Port{
		SlantRad: rapid.Float64Range(-math.Pi, math.Pi).Draw(t, name+" slant"),
		SkewRad:  rapid.Float64Range(-math.Pi, math.Pi).Draw(t, name+" skew"),
		Axial:    rapid.Float64Range(0, 1).Draw(t, name+" axial"),
		LeftHand: rapid.Bool().Draw(t, name+" left"),
	}
}

func TestLossFactorProperties(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := anyPort(t, "near"), anyPort(t, "far")
		f := polar.LossFactor(a, b)
		if !(f >= 0 && f <= 1) {
			t.Fatalf("factor %g", f)
		}
		near := func(what string, g float64) {
			if math.Abs(f-g) > 1e-12 {
				t.Fatalf("%s: %g, was %g", what, g, f)
			}
		}
		near("ends exchanged", polar.LossFactor(b, a))
		turn := rapid.Float64Range(-4, 4).Draw(t, "turn")
		c, d := a, b
		c.SkewRad += turn
		d.SkewRad -= turn // the same turn in space is the other way round in the far view
		near("both ends turned together", polar.LossFactor(c, d))
		c, d = a, b
		c.SlantRad, c.SkewRad, c.LeftHand = -a.SlantRad, -a.SkewRad, !a.LeftHand
		d.SlantRad, d.SkewRad, d.LeftHand = -b.SlantRad, -b.SkewRad, !b.LeftHand
		near("everything mirrored", polar.LossFactor(c, d))
		c = a
		c.SlantRad += math.Pi
		near("half a turn", polar.LossFactor(c, b))
		// what one port does not take, the port orthogonal to it takes
		o := a
		o.SlantRad += math.Pi / 2
		o.LeftHand = !a.LeftHand
		near("orthogonal port", 1-polar.LossFactor(o, b))
	})
}

// A crossed panel that hangs 8° off, on a radio that ties port to port.
func ExamplePair_Receive() {
	var p polar.Pair
	for i, slant := range [2]float64{45, -45} {
		p.Near[i].Port = polar.Port{SlantRad: slant * degree, SkewRad: 8 * degree}
		p.Far[i].Port = polar.Port{SlantRad: slant * degree}
	}
	p.Crossed = p.LargestCoupling()
	r := p.Receive(true, 0)
	fmt.Printf("swapped by the mirror: %v, cross-talk %.1f dB, SINR %.1f dB of 25\n",
		p.Crossed, -db(r.CrossTalk), db(r.SINR(math.Pow(10, 2.5))))
	// Output: swapped by the mirror: true, cross-talk 17.0 dB, SINR 16.4 dB of 25
}

// TestRightHandTurnsClockwiseSeenFromBehind: the field Re(e·exp(jωt)) of a right-hand
// port turns from up toward right as time goes, that of a left-hand one the other way
// (IEEE Std 145), whatever the slant and the axial ratio.
func TestRightHandTurnsClockwiseSeenFromBehind(t *testing.T) {
	for _, left := range []bool{false, true} {
		for _, axial := range []float64{1, 0.5, 0.1} {
			for _, slant := range []float64{0, 0.3, -1, 2} {
				e := polar.Port{SlantRad: slant, Axial: axial, LeftHand: left}.Vector()
				at := func(phase float64) (up, right float64) {
					w := cmplx.Rect(1, phase)
					return real(e[0] * w), real(e[1] * w)
				}
				for phase := 0.0; phase < 2*math.Pi; phase += 0.5 {
					up, right := at(phase)
					up1, right1 := at(phase + 0.01)
					if clockwise := up*right1-right*up1 > 0; clockwise == left {
						t.Fatalf("left %v, axial %g, slant %g: turns clockwise: %v", left, axial, slant, clockwise)
					}
				}
			}
		}
	}
}
