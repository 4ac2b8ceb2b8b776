package peak

import (
	"encoding/json"
	"flag"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"
)

var writeTraces = flag.Bool("traces", false, "write testdata/traces anew from the simulator")

// matrix is a rotation of the phone: its columns are the phone's axes in the world,
// right of the person behind the antenna, forward along the boresight's bearing, up.
type matrix [3][3]float64

func (m matrix) times(n matrix) (p matrix) {
	for i := range 3 {
		for j := range 3 {
			for k := range 3 {
				p[i][j] += m[i][k] * n[k][j]
			}
		}
	}
	return p
}

// about turns right-handedly about the axis i.
func about(i int, angle float64) matrix {
	s, c := math.Sincos(angle)
	m := matrix{}
	j, k := (i+1)%3, (i+2)%3
	m[i][i], m[j][j], m[k][k], m[j][k], m[k][j] = 1, c, c, -s, s
	return m
}

// plate is the antenna's body: boresight up by tilt, then turned clockwise, as seen
// from behind, by skew about the boresight. Columns right, forward, up of the body.
func plate(tilt, skew float64) matrix { return about(0, tilt).times(about(1, skew)) }

// The phone on the body, by its axes in right, forward and up of the body; written
// out by hand from how it is laid on, not from the formulas that are tested.
var (
	// Back on the plate: x right, y up, z to the person, that is backward.
	onBack = matrix{{1, 0, 0}, {0, 0, -1}, {0, 1, 0}}
	// Half round on the plate: x left, y down, z backward.
	onBackTurned = matrix{{-1, 0, 0}, {0, 0, -1}, {0, -1, 0}}
	// Left edge on the plate: x away from it, that is backward, y up, z left.
	leftEdge = matrix{{0, 0, -1}, {-1, 0, 0}, {0, 1, 0}}
	// Right edge on the plate: x forward, y up, z right.
	rightEdge = matrix{{0, 0, 1}, {1, 0, 0}, {0, 1, 0}}
)

// rest is what a phone at rest reads: the way up in its axes, as the specification
// has it.
func rest(body, phone matrix) Acceleration {
	m := body.times(phone)
	return Acceleration{standardGravity * m[2][0], standardGravity * m[2][1], standardGravity * m[2][2]}
}

func TestPoseAngles(t *testing.T) {
	for _, sign := range []float64{1, -1} {
		for _, tilt := range []float64{-12, -2, 0, 3.5, 20} {
			for _, skew := range []float64{-44, -6, 0, 1.5, 30} {
				body := plate(tilt*degree, skew*degree)
				for _, row := range []struct {
					name  string
					pose  Pose
					phone matrix
					want  float64
				}{
					{"skew", SkewOnBack, onBack, skew}, {"skew turned", SkewOnBack, onBackTurned, -skew},
					{"tilt by left edge", TiltByEdge, leftEdge, tilt}, {"tilt by right edge", TiltByEdge, rightEdge, -tilt},
					// The half turn on the plate does not reverse a tilt read on the back.
					{"tilt on back", TiltOnBack, onBack, tilt}, {"tilt on back turned", TiltOnBack, onBackTurned, tilt},
				} {
					a := rest(body, row.phone)
					a = Acceleration{sign * a.X, sign * a.Y, sign * a.Z}
					got, ok := row.pose.Angle(a, sign)
					if !ok {
						t.Fatalf("%s at tilt %v skew %v: refused", row.name, tilt, skew)
					}
					near(t, row.name, got/degree, row.want, 1e-9)
				}
			}
		}
	}
}

func TestUpSign(t *testing.T) {
	// A phone that lies face up reads z = +g by the specification, −g elsewhere.
	spec, other := Acceleration{0.1, -0.2, 9.8}, Acceleration{-0.1, 0.2, -9.8}
	upright := Acceleration{0, 9.8, 0.3}
	for _, row := range []struct {
		name    string
		samples []Acceleration
		sign    float64
		ok      bool
	}{
		{"specification", []Acceleration{spec, spec, spec}, 1, true},
		{"opposite", []Acceleration{other, other}, -1, true},
		{"upright", []Acceleration{upright, upright}, 0, false},
		{"turned over meanwhile", []Acceleration{spec, other, spec, spec}, 0, false},
		{"one of twelve while laid down", []Acceleration{upright, spec, spec, spec, spec, spec, spec, spec, spec, spec, spec, spec}, 1, true},
		{"weightless", []Acceleration{{}, {}}, 0, false},
		{"none", nil, 0, false},
	} {
		if sign, ok := UpSign(row.samples); ok != row.ok || sign != row.sign {
			t.Errorf("%s: %v %v", row.name, sign, ok)
		}
	}
	if _, ok := SkewOnBack.Angle(spec, 1); ok {
		t.Error("a phone that lies flat has a skew")
	}
	if _, ok := TiltByEdge.Angle(Acceleration{math.NaN(), 9, 0}, 1); ok {
		t.Error("NaN has an angle")
	}
}

// Trace is what a phone would have recorded: seconds and acceleration.
type trace [][4]float64

func (tr trace) hold(t testing.TB, pose Pose, sign float64) Held {
	t.Helper()
	var samples []Sample
	for _, row := range tr {
		a := Acceleration{row[1], row[2], row[3]}
		if angle, ok := pose.Angle(a, sign); ok {
			samples = append(samples, Sample{row[0], angle, a.Length()})
		}
	}
	h, ok := Hold(samples)
	if !ok {
		t.Fatal("nothing left")
	}
	return h
}

// phone is a phone in the hands of somebody on a mast.
type phone struct {
	r        *rand.Rand
	sign     float64
	zero     Acceleration // offset of the sensor's axes, m/s²: what two faces take out
	turned   float64      // of the sensor in its case about z: they take it out by the edges
	noise    float64      // m/s², each axis and sample
	sway     float64      // amplitude, rad
	period   float64      // s
	knocks   int
	layingOn float64 // each time it is laid on, rad
}

// newPhone draws one. Offsets of 0.1 m/s² are 0.6°; noise and sway are those of a
// windy day. Our own figures: no recording stands behind them.
func newPhone(r *rand.Rand) phone {
	sign := 1.0
	if r.IntN(2) == 0 {
		sign = -1
	}
	n := r.NormFloat64
	return phone{
		r: r, sign: sign, zero: Acceleration{0.1 * n(), 0.1 * n(), 0.1 * n()}, turned: 0.3 * degree * n(), noise: 0.03,
		sway: (0.1 + 0.3*r.Float64()) * degree, period: 2 + 4*r.Float64(), knocks: 2 + r.IntN(5),
		// θ = (A − B)/2 halves the variance: faceFloor is what is left of it.
		layingOn: math.Sqrt2 * faceFloor,
	}
}

// record holds the phone on a swaying plate. The sway turns the body about its
// right and forward axes; a knock shakes the phone for a third of a second.
func (p phone) record(seconds, rate, tilt, skew float64, on matrix) trace {
	n := p.r.NormFloat64
	phase := 2 * math.Pi * p.r.Float64()
	laidX, laidY := p.layingOn*n(), p.layingOn*n()
	shaken := make([]float64, p.knocks)
	for i := range shaken {
		shaken[i] = seconds * p.r.Float64()
	}
	var out trace
	for i := 0.0; i <= seconds*rate; i++ {
		t := i / rate
		s := p.sway * math.Sin(2*math.Pi*t/p.period+phase)
		body := about(0, 0.8*s).times(about(1, 0.6*s)).times(about(0, laidX)).times(about(1, laidY)).times(plate(tilt, skew))
		a := rest(body, on.times(about(2, p.turned)))
		hit := 0.0
		for _, k := range shaken {
			if t >= k && t < k+0.3 {
				hit = 1.5
			}
		}
		out = append(out, [4]float64{t,
			p.sign*(a.X+p.zero.X) + (p.noise+hit)*n(), p.sign*(a.Y+p.zero.Y) + (p.noise+hit)*n(), p.sign*(a.Z+p.zero.Z) + (p.noise+hit)*n()})
	}
	return out
}

// A hundred phones on swaying masts, both signs: the known angle lies within two
// stated standard uncertainties in at least 93, and one face alone would not do.
func TestPhoneByTwoFaces(t *testing.T) {
	for _, row := range []struct {
		name   string
		pose   Pose
		a, b   matrix
		turned bool // the reversal takes the sensor's turn in its case out
	}{
		{"tilt by edges", TiltByEdge, leftEdge, rightEdge, true},
		{"skew on the back", SkewOnBack, onBack, onBackTurned, false},
	} {
		within, alone, rejected, signs := 0, 0, 0, 0
		var worst float64
		for seed := range 100 {
			r := rand.New(rand.NewPCG(uint64(seed), 71))
			p := newPhone(r)
			if !row.turned {
				p.turned = 0
			}
			if p.sign < 0 {
				signs++
			}
			tilt, skew := 5*r.NormFloat64()*degree, 5*r.NormFloat64()*degree
			truth := tilt
			if row.pose == SkewOnBack {
				truth = skew
			}
			a := p.record(24, 20, tilt, skew, row.a).hold(t, row.pose, p.sign)
			b := p.record(24, 20, tilt, skew, row.b).hold(t, row.pose, p.sign)
			if !a.Enough || !b.Enough {
				t.Fatalf("24 s are not enough: %+v %+v", a, b)
			}
			rejected += a.Shaky + b.Shaky
			angle, _, u := TwoFace(a.Face, b.Face)
			u = WithScale(u, PhoneScale, angle)
			worst = math.Max(worst, u)
			if math.Abs(angle-truth) <= 2*u {
				within++
			}
			if math.Abs(a.Mean-truth) <= 2*u {
				alone++
			}
		}
		t.Logf("%s: %d of 100 within 2u, u at most %.2f°; one face alone %d; %d of 96200 samples rejected, %d phones of the opposite sign", row.name, within, worst/degree, alone, rejected, signs)
		if within < 93 {
			t.Errorf("%s: %d of 100 within 2u", row.name, within)
		}
		if alone > 60 || worst > 0.25*degree {
			t.Errorf("%s: a bias that one face shows %d times in 100, u up to %v°: the trial is too easy", row.name, 100-alone, worst/degree)
		}
		if rejected == 0 || signs < 30 || signs > 70 {
			t.Errorf("%s: %d rejected, %d of the opposite sign", row.name, rejected, signs)
		}
	}
}

// A phone whose zeros lengthen gravity is not shaken for that.
func TestHoldTakesThePhonesOwnGravity(t *testing.T) {
	var s []Sample
	for i := range 100 {
		g := standardGravity + 0.4
		if i%10 == 0 {
			g += 0.5
		}
		s = append(s, Sample{float64(i) / 20, degree, g})
	}
	if h, ok := Hold(s); !ok || h.Shaky != 10 {
		t.Errorf("%+v %v", h, ok)
	}
}

// The traces that the page's test plays to the page are what the simulator makes.
// After a change: go test ./calc/peak -run TestTraces -traces
func TestTraces(t *testing.T) {
	type file struct {
		Says    string  `json:"says"`
		TiltDeg float64 `json:"tilt_deg"`
		SkewDeg float64 `json:"skew_deg"`
		UpSign  float64 `json:"up_sign"`
		FaceUp  trace   `json:"face_up"` // rows of t_s, x, y, z in m/s²
		A       trace   `json:"a"`
		B       trace   `json:"b"`
	}
	for _, row := range []struct {
		name string
		seed uint64
		sign float64
		pose Pose
		a, b matrix
	}{{"tilt", 5, -1, TiltByEdge, leftEdge, rightEdge}, {"skew", 6, 1, SkewOnBack, onBack, onBackTurned}} {
		p := newPhone(rand.New(rand.NewPCG(row.seed, 72)))
		p.sign, p.turned = row.sign, 0
		tr := file{Says: "made by the simulator of calc/peak/gravity_test.go; not a recording of a real phone", TiltDeg: -3.2, SkewDeg: 4.7, UpSign: row.sign}
		// On its back on something level: x right, y forward, z up.
		calm := p
		calm.knocks, calm.sway = 0, 0
		tr.FaceUp = calm.record(2, 10, 0, 0, matrix{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}})
		tr.A = p.record(22, 20, tr.TiltDeg*degree, tr.SkewDeg*degree, row.a)
		tr.B = p.record(22, 20, tr.TiltDeg*degree, tr.SkewDeg*degree, row.b)
		for _, rows := range []trace{tr.FaceUp, tr.A, tr.B} {
			for i := range rows {
				for j := range rows[i] {
					rows[i][j] = math.Round(rows[i][j]*1000) / 1000
				}
			}
		}
		path := filepath.Join("..", "..", "testdata", "traces", row.name+".json")
		want, err := json.Marshal(tr)
		if err != nil {
			t.Fatal(err)
		}
		if *writeTraces {
			if err := os.WriteFile(path, append(want, '\n'), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		kept, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		if string(kept) != string(want)+"\n" {
			t.Errorf("%s is not what the simulator makes", path)
		}
		truth := tr.TiltDeg
		if row.pose == SkewOnBack {
			truth = tr.SkewDeg
		}
		angle, bias, u := TwoFace(tr.A.hold(t, row.pose, row.sign).Face, tr.B.hold(t, row.pose, row.sign).Face)
		t.Logf("%s: %.3f° ± %.3f°, bias %.3f°, truth %v°", row.name, angle/degree, u/degree, bias/degree, truth)
		near(t, row.name, angle/degree, truth, 2*u/degree)
	}
}
