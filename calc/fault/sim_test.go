package fault

import (
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// The simulator has its own physics: a matrix of complex amplitudes between two
// crossed pairs, turned and attenuated, and a receiver that adds up powers. It
// shares with the package under test the sheet and nothing else; sizes of faults
// are drawn from continuous ranges, the errors of readings have the heavy tails of
// Student's t, and every figure is rounded as a radio rounds it.

const simPorts = 2

type sim struct {
	r          *rand.Rand
	tied       bool
	mhz, km    float64
	power      float64
	gains      [2]float64
	width      float64
	figure     float64
	sidelobe   float64
	detailed   bool // the radio shows discrimination, swing and return loss too
	oneEnd     bool
	showsNames bool
}

func newSim(r *rand.Rand) *sim {
	return &sim{r: r, tied: r.IntN(3) > 0, mhz: 5000 + 800*r.Float64(), km: 0.3 + 8*r.Float64(), power: 15 + 8*r.Float64(), gains: [2]float64{17 + 8*r.Float64(), 17 + 8*r.Float64()},
		width: []float64{20, 40, 80}[r.IntN(3)], figure: 6, sidelobe: 15 + 7*r.Float64(), detailed: r.IntN(4) > 0, oneEnd: r.IntN(5) == 0, showsNames: r.IntN(2) == 0}
}

// truth is a fault with its sizes.
type truth struct {
	code  string
	chain int // −1
	end   int // −1
}

func (t truth) String() string {
	s := t.code
	if t.chain >= 0 {
		s += fmt.Sprintf(" %d", t.chain+1)
	}
	if t.end >= 0 {
		s += " " + End(t.end).String()
	}
	return s
}

// world is what is really there.
type world struct {
	field      [simPorts][simPorts]complex128 // near by far, amplitude
	deaf       [2]bool
	tx         [2][simPorts]float64
	noise      [2][simPorts]float64 // dBm
	swing      [simPorts]float64
	returnLoss [2][simPorts]float64
	peer       bool
	rx         [2][simPorts]float64
}

func (s *sim) between(lo, hi float64) float64 { return lo + (hi-lo)*s.r.Float64() }

// heavy is an error of unit standard deviation with the tails of Student's t of 6
// degrees of freedom.
func (s *sim) heavy() float64 {
	c := 0.0
	for range 6 {
		x := s.r.NormFloat64()
		c += x * x
	}
	return s.r.NormFloat64() / math.Sqrt(c/6) / math.Sqrt(6.0/4)
}

// build makes the world with one fault in it, without errors of reading.
func (s *sim) build(t truth, pathError float64, gainError, txError [simPorts]float64) world {
	var w world
	loss := 20*math.Log10(s.km) + 20*math.Log10(s.mhz) + 32.4478
	turn, swap := 0.0, false
	attenuate := [simPorts]float64{}
	extra, cross := 0.0, 0.0
	w.peer = true
	thermal := -173.975 + 10*math.Log10(s.width*1e6) + s.figure
	for e := range 2 {
		for i := range simPorts {
			w.tx[e][i] = s.power
			w.noise[e][i] = thermal
			w.returnLoss[e][i] = 20
		}
	}
	for i := range simPorts {
		w.swing[i] = 0.3
	}
	e, c := t.end, t.chain
	someEnd := s.r.IntN(2)
	switch t.code {
	case Nothing:
	case SideLobe:
		extra, cross = s.sidelobe+s.between(0, 6), math.Pow(10, -s.between(7, 15)/20)
	case Swapped:
		swap = true
	case Lossy:
		attenuate[c] = s.between(4, 16)
		w.returnLoss[someEnd][c] = math.Min(40, 20+2*attenuate[c])
	case Open:
		attenuate[c] = s.between(25, 50)
		w.returnLoss[someEnd][c] = s.between(2, 5)
	case Wet:
		attenuate[c] = s.between(4, 16)
		w.swing[c] = s.between(0.6, 1.1)
		w.returnLoss[someEnd][c] = s.between(6, 10)
	case Intermittent:
		attenuate[c] = s.between(0, 25)
		w.swing[c] = s.between(3, 8)
		w.returnLoss[someEnd][c] = s.between(7, 14)
	case Skewed:
		turn = s.between(8, 45) * math.Pi / 180
	case Obstructed:
		extra = s.between(6, 35)
		for i := range simPorts {
			w.swing[i] = s.between(0.3, 1.5)
		}
	case WrongFar:
		extra, cross = s.between(-5, 30), math.Pow(10, -s.between(3, 30)/20)
		w.deaf[Far], w.peer = true, false
	case Imbalance:
		x := s.between(5, 14)
		w.tx[1-e][c] -= x
	case Interference:
		rise := s.between(8, 32)
		less := s.between(0, 15) * float64(s.r.IntN(2))
		for i := range simPorts {
			w.noise[e][i] += rise
		}
		w.noise[e][s.r.IntN(simPorts)] -= math.Min(less, rise)
	case WrongPower:
		x := s.between(6, 22)
		if s.r.IntN(4) == 0 {
			x = -x / 2
		}
		for i := range simPorts {
			w.tx[e][i] -= x
		}
	case WrongChannel:
		w.deaf = [2]bool{true, true}
	case WrongWidth:
		x := []float64{-6.02, 6.02, 3.01, -3.01}[s.r.IntN(4)]
		for i := range simPorts {
			w.noise[0][i], w.noise[1][i] = w.noise[0][i]+x, w.noise[1][i]+x
		}
	default:
		panic(t.code)
	}
	// The pair at the near end sends V and H; the far end's are the same two in its
	// mirror, tied straight across. Leaks are in quadrature: their powers add.
	leak := complex(0, math.Sqrt(2*math.Pow(10, -3)+math.Pow(10, -3.2)))
	for i := range simPorts {
		n := i
		if swap {
			n = 1 - i
		}
		for j := range simPorts {
			a := complex(math.Cos(turn), 0)
			if n != j {
				a = complex(math.Sin(turn), 0)
			}
			if n != j {
				a += leak
				a += complex(0, cross)
			}
			lossy := i // a feeder at the near end dims a row, one at the far end a column
			if someEnd == int(Far) {
				lossy = j
			}
			db := s.gains[0] + s.gains[1] - loss - extra - attenuate[lossy] + pathError + gainError[i]
			w.field[i][j] = a * complex(math.Pow(10, db/20), 0)
		}
	}
	for e := range 2 {
		for i := range simPorts {
			w.tx[e][i] += txError[e]
		}
	}
	return w
}

// shown is what both pages would show without errors of reading.
type shown struct {
	level, snr, noise, xpi [2][simPorts]float64
	streams                [2]int
	heard                  [2][simPorts]bool
	// How far level and ratio follow the signal, for the doubt of the figures.
	levelFollows, snrFollows [2][simPorts]float64
}

func (s *sim) show(w world) shown {
	var out shown
	mw := func(dbm float64) float64 { return math.Pow(10, dbm/10) }
	for e := range 2 {
		for i := range simPorts {
			var p [simPorts]float64
			for j := range simPorts {
				a := w.field[i][j]
				if e == int(Far) {
					a = w.field[j][i]
				}
				p[j] = (real(a)*real(a) + imag(a)*imag(a)) * mw(w.tx[1-e][j])
				if w.deaf[e] {
					p[j] = 0
				}
			}
			n := mw(w.noise[e][i])
			out.level[e][i] = 10*math.Log10(p[0]+p[1]+n) + w.rx[e][i]
			out.noise[e][i] = w.noise[e][i]
			out.heard[e][i] = p[0]+p[1] > 0.3*n
			out.levelFollows[e][i] = (p[0] + p[1]) / (p[0] + p[1] + n)
			want, bother := p[i], p[1-i]
			out.xpi[e][i] = 10 * math.Log10((want+1e-18)/(bother+1e-18))
			if !s.tied {
				want, bother = want+bother, 0
			}
			evm := want * mw(-38)
			out.snr[e][i] = math.Max(0, 10*math.Log10(want/(n+bother+evm)+1e-9))
			if out.snr[e][i] > 0 {
				out.snrFollows[e][i] = n / (n + bother + evm)
			}
			if out.snr[e][i] >= 3 {
				out.streams[e]++
			}
		}
	}
	return out
}

// document makes the sheet with the figures as a crew would type them.
func (s *sim) document(w world) []byte {
	v := s.show(w)
	round := func(x, step float64) float64 { return math.Round(x/step) * step }
	calibration := [2]float64{1.5 * s.r.NormFloat64(), 1.5 * s.r.NormFloat64()}
	figure := [2]float64{1 * s.r.NormFloat64(), 1 * s.r.NormFloat64()}
	figures := map[string]any{"power_control_off": true}
	for e := range 2 {
		if s.oneEnd && e == 1 {
			continue
		}
		var ports []any
		for i := range simPorts {
			port := map[string]any{"port": fmt.Sprint(i + 1)}
			nf := figure[e] + 0.5*s.r.NormFloat64()
			snr := v.snr[e][i] - nf*v.snrFollows[e][i]
			heard := v.heard[e][i]
			port["heard"] = heard
			port["noise_dbm"] = round(v.noise[e][i]+calibration[e]+nf+0.5*s.heavy(), 1)
			if heard {
				port["level_dbm"] = math.Min(0, round(v.level[e][i]+calibration[e]+0.5*s.heavy(), 1))
				port["snr_db"] = round(math.Max(0, snr+0.5*s.heavy()), 1)
			}
			if s.detailed {
				port["return_loss_db"] = round(math.Max(0.5, w.returnLoss[e][i]+2*s.heavy()), 0.5)
				if heard {
					port["swing_db"] = round(math.Min(60, w.swing[i]*math.Exp(0.4*s.heavy())), 0.1)
					if s.tied {
						port["xpi_db"] = round(math.Max(-60, math.Min(60, v.xpi[e][i]+2.5*s.heavy())), 1)
					}
				}
			}
			ports = append(ports, port)
		}
		page := map[string]any{"ports": ports, "streams": v.streams[e]}
		if s.showsNames && e == 0 {
			page["peer_as_planned"] = w.peer
		}
		figures[End(e).String()] = page
	}
	state := func(x float64, unit string) map[string]any {
		return map[string]any{"planned": map[string]any{"value": x, "unit": unit}}
	}
	mount := func(gain, bearing float64, slants [2]float64) map[string]any {
		azimuth := state(bearing, "deg")
		azimuth["planned"].(map[string]any)["north"] = "true"
		var elements []any
		for i, slant := range slants {
			elements = append(elements, map[string]any{"port": fmt.Sprint(i + 1), "slant_deg": slant, "xpd_db": 30})
		}
		return map[string]any{"antennas": []any{map[string]any{
			"id": "A", "pattern": map[string]any{"kind": "dish", "gain_dbi": gain, "beamwidth_az_deg": 8, "beamwidth_el_deg": 8, "sidelobe_db": s.sidelobe},
			"elements":    elements,
			"position_mm": map[string]any{"planned": map[string]any{"value": map[string]any{"right": 0, "up": 0, "forward": 0}, "unit": "mm"}},
			"azimuth":     azimuth, "tilt": state(0, "deg"), "skew": state(0, "deg"),
		}}}
	}
	doc := map[string]any{
		"sheet": 1,
		"radio": map[string]any{"frequency_mhz": s.mhz, "bandwidth_mhz": s.width, "combining": !s.tied, "tx_power_dbm": []float64{s.power}, "noise_figure_db": s.figure,
			"links": []any{map[string]any{"near": "1", "far": "1"}, map[string]any{"near": "2", "far": "2"}}},
		"near": mount(s.gains[0], 40, [2]float64{45, -45}), "far": mount(s.gains[1], 220, [2]float64{-45, 45}),
		"path":          map[string]any{"bearing_deg": 40, "distance_m": 1000 * s.km},
		"surroundings":  map[string]any{"sight": true, "class": map[string]any{"standard": sheet.ClassStandard, "edition": sheet.ClassEdition, "scenario": "RMa"}},
		"radio_figures": figures,
	}
	out, err := json.Marshal(doc)
	if err != nil {
		panic(err)
	}
	return out
}

// truths are all the faults that are simulated.
func (s *sim) truths() []truth {
	out := []truth{{Nothing, -1, -1}, {SideLobe, -1, -1}, {Obstructed, -1, -1}, {WrongFar, -1, -1}, {WrongChannel, -1, -1}, {WrongWidth, -1, -1}, {Skewed, -1, -1}}
	if s.tied {
		out = append(out, truth{Swapped, -1, -1})
	}
	for i := range simPorts {
		for _, code := range []string{Lossy, Open, Wet, Intermittent} {
			out = append(out, truth{code, i, -1})
		}
		for e := range 2 {
			out = append(out, truth{Imbalance, i, e})
		}
	}
	for e := range 2 {
		out = append(out, truth{Interference, -1, e}, truth{WrongPower, -1, e})
	}
	return out
}

// means tells whether a candidate is this truth.
func (t truth) is(code, port, end string) bool {
	if code != t.code {
		return false
	}
	if t.chain >= 0 && port != fmt.Sprint(t.chain+1) {
		return false
	}
	return t.end < 0 || end == End(t.end).String()
}

func decode(t testing.TB, doc []byte) (*sheet.Sheet, *codec.Value) {
	t.Helper()
	v, p := codec.Parse(doc)
	if p != nil {
		t.Fatal(p)
	}
	s, p := sheet.Read(v)
	if p != nil {
		t.Fatalf("%v of %s", p, doc)
	}
	return s, v
}
