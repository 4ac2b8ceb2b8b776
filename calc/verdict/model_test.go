package verdict

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/sheet"
)

// ported is a sheet with one antenna an end and the given slants, labelled 1, 2, ….
func ported(t testing.TB, near, far []float64) *sheet.Sheet {
	s := load(t, "crossed-pair-go")
	s.Radio.Links = nil
	for _, end := range []struct {
		a      *sheet.Antenna
		slants []float64
	}{{&s.Near.Antennas[0], near}, {&s.Far.Antennas[0], far}} {
		end.a.Elements = nil
		for i, slant := range end.slants {
			end.a.Elements = append(end.a.Elements, sheet.Element{Port: string(rune('1' + i)), SlantDeg: slant})
		}
	}
	return s
}

func TestPortsPairByLargestCoupling(t *testing.T) {
	for _, row := range []struct {
		name      string
		near, far []float64
		want      []int
	}{
		{"the mirror swaps equal ±45° labels", []float64{45, -45}, []float64{45, -45}, []int{1, 0}},
		{"horizontal and vertical go straight", []float64{0, 90}, []float64{0, 90}, []int{0, 1}},
		{"vertical and horizontal find each other", []float64{0, 90}, []float64{90, 0}, []int{1, 0}},
		{"all alike go label to label", []float64{0, 0.5, 0}, []float64{0, 0, 0.5}, []int{0, 1, 2}},
		{"four ports of two pairs", []float64{45, -45, 44, -44}, []float64{45, -45, 44, -44}, []int{1, 0, 3, 2}},
		{"more here than there: one stays alone", []float64{45, 0, -45}, []float64{45, -45}, []int{1, -1, 0}},
		{"fewer here than there", []float64{45}, []float64{45, -45}, []int{1}},
	} {
		if got := newModel(ported(t, row.near, row.far)).link; !slices.Equal(got, row.want) {
			t.Errorf("%s: %v, want %v", row.name, got, row.want)
		}
	}
}

func TestLinksAreTaken(t *testing.T) {
	s := ported(t, []float64{45, -45}, []float64{45, -45})
	s.Radio.Links = []sheet.Link{{Near: "1", Far: "1"}, {Near: "2", Far: "2"}}
	if got := newModel(s).link; !slices.Equal(got, []int{0, 1}) {
		t.Errorf("%v", got)
	}
	// … even where the mirror makes them blind: −100 dB, the floor, not a panic
	m := newModel(s)
	if got := m.crossTalk()(m.plan); got != -100 {
		t.Errorf("blind ties have %g dB", got)
	}
}

// TestCrossTalkInvariances on random skews and pairs of slants.
func TestCrossTalkInvariances(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		angle := rapid.Float64Range(-80, 80)
		slant, nearSkew, farSkew := angle.Draw(rt, "slant"), angle.Draw(rt, "near skew"), angle.Draw(rt, "far skew")
		xpd := rapid.Float64Range(15, 40).Draw(rt, "xpd")
		at := func(slants [2]float64, labels [2]string, near, far, mirror float64) float64 {
			s := ported(t, []float64{slants[0] * mirror, slants[1] * mirror}, []float64{-slants[0] * mirror, -slants[1] * mirror})
			for _, a := range []*sheet.Antenna{&s.Near.Antennas[0], &s.Far.Antennas[0]} {
				for i := range a.Elements {
					a.Elements[i].XPDDB, a.Elements[i].Port = &xpd, labels[i]
				}
			}
			s.Near.Antennas[0].Skew.Planned.Deg, s.Far.Antennas[0].Skew.Planned.Deg = near*mirror, far*mirror
			s.Radio.Links = []sheet.Link{{Near: labels[0], Far: labels[0]}, {Near: labels[1], Far: labels[1]}}
			m := newModel(s)
			return m.crossTalk()(m.plan)
		}
		square := [2]float64{slant, slant + 90}
		plain := [2]string{"1", "2"}
		want := at(square, plain, nearSkew, farSkew, 1)
		same := func(what string, got float64) {
			if math.Abs(got-want) > 1e-6 {
				rt.Fatalf("%s: %.9f dB, was %.9f", what, got, want)
			}
		}
		turn := angle.Draw(rt, "turn")
		same("both ends turned together", at(square, plain, nearSkew+turn, farSkew-turn, 1))
		same("ends exchanged", at(square, plain, farSkew, nearSkew, 1))
		same("everything mirrored", at(square, plain, nearSkew, farSkew, -1))
		same("ports relabelled", at([2]float64{slant + 90, slant}, plain, nearSkew, farSkew, 1))
		same("a port upside down", at([2]float64{slant + 180, slant + 90}, plain, nearSkew, farSkew, 1))
		d := (nearSkew + farSkew) * degree
		if c := math.Cos(d); c*c > 1e-6 {
			tan := math.Tan(d)
			same("the closed form", -10*math.Log10(tan*tan+2*math.Pow(10, -xpd/10)))
		}
	})
}

// TestFourPortsOfTwoPanels: two crossed panels an end, tied port to port. Like
// ports of the two panels disturb each other in full: 0 dB, whatever the skew.
func TestFourPortsOfTwoPanels(t *testing.T) {
	s := load(t, "two-crossed-panels")
	m := newModel(s)
	if got := m.crossTalk()(m.plan); got > 0 || got < -0.1 {
		t.Errorf("two panels tied port to port: %.3f dB, want just below 0", got)
	}
	if n := m.linked(); n != 4 {
		t.Errorf("%d ties", n)
	}
}
