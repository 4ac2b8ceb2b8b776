package peak

import (
	"math"
	"slices"
)

// Search is a peak search: levels read while an antenna is stepped through
// angles, and what is known besides.
type Search struct {
	Angles, Levels []float64 // radians and dBm, in the order they were read
	Beamwidth      float64   // half-power beamwidth in the plane of the search; 0 where not known
	Expected       *float64  // dBm; nil where not known
	ExpectedDoubt  float64   // dB, standard uncertainty
	LevelDoubt     float64   // dB, standard uncertainty of one reading; DefaultLevelDoubt where not known
}

// DefaultLevelDoubt is the standard uncertainty of one level as a radio shows it:
// steps of 1 dB (0.29) and some flutter. Common practice.
const DefaultLevelDoubt = 0.5

// window is how far below the best level the form of the main lobe holds, dB.
// There −12(θ/θ₃)² and the pattern of a uniform line source part by 0.5 dB.
const window = 6.0

// The words for a lobe.
const (
	Main   = "main"
	Side   = "side"
	Unsure = "unsure"
)

// Want is something more to take.
type Want string

// What a search may lack.
const (
	WantMore      Want = "more" // too few readings
	WantBothSides Want = "both sides"
	WantWider     Want = "wider" // flat: too narrow a sweep for the beam
	WantCalm      Want = "calm"  // too noisy
	WantBeamwidth Want = "beamwidth"
	WantLevel     Want = "expected level"
	WantFarther   Want = "farther" // it is a side lobe, or may be: look for a higher peak
)

// Result is what a search shows. Peak is nil where the readings do not tell it.
type Result struct {
	Peak       *float64 // the angle of the strongest signal
	PeakDoubt  float64
	Level      float64 // dBm at the peak; the best reading where there is no peak
	LevelDoubt float64
	Width      *float64 // half-power width of the lobe as fitted
	WidthDoubt float64
	Lobe       string
	MainOdds   float64
	Noise      float64 // standard deviation of one reading as found, dB
	Used       []bool  // which readings the fit took
	Wants      []Want
	curve      *parabola
	centre     float64
}

// confident is how sure a word is that is not "unsure".
const confident = 0.95

// noisy is the standard deviation of one level, dB, above which readings should
// be repeated; common practice.
const noisy = 1.5

// Fit finds the peak. The readings within 6 dB of the best, in one piece around
// it, are fitted to the form of a main lobe,
//
//	L = P − 12 ((θ − θ₀)/θ₃)²
//
// by least squares; a known beamwidth takes part as one more observation of the
// curvature (10 % doubt of the beamwidth). The noise is pooled from the residuals and the stated
// doubt of a reading, which counts as three degrees of freedom. Main or side lobe
// is told by width and level (a side lobe is about half as wide, and at least
// 13.3 dB lower): "main" or "side" from 95 % odds. Without a known beamwidth the
// word is "unsure", unless the level is more than 3u below what is expected.
//
// Angles and Levels have equal length of at least one.
func (s Search) Fit() Result {
	n := len(s.Angles)
	best := 0
	for i, l := range s.Levels {
		if l > s.Levels[best] {
			best = i
		}
	}
	centre := s.Angles[best]
	x := make([]float64, n) // from the best reading, the short way round
	order := make([]int, n)
	for i, a := range s.Angles {
		x[i], order[i] = math.Remainder(a-centre, 2*math.Pi), i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		switch {
		case x[i] < x[j]:
			return -1
		case x[i] > x[j]:
			return 1
		}
		return 0
	})
	here := slices.Index(order, best)
	first, last := here, here
	within := func(i int) bool { return s.Levels[order[i]] >= s.Levels[best]-window }
	for first > 0 && within(first-1) {
		first--
	}
	for last < n-1 && within(last+1) {
		last++
	}
	r := Result{Used: make([]bool, n), Level: s.Levels[best], LevelDoubt: s.LevelDoubt, Lobe: Unsure, MainOdds: priorMain, Noise: s.LevelDoubt, centre: centre}
	var xs, ys []float64
	for _, i := range order[first : last+1] {
		r.Used[i] = true
		xs, ys = append(xs, x[i]), append(ys, s.Levels[i])
	}
	lo, hi := xs[0], xs[len(xs)-1]
	distinct := 1
	for i := 1; i < len(xs); i++ {
		if xs[i] > xs[i-1] {
			distinct++
		}
	}

	// First without leaning on the beamwidth: the width must speak for itself when
	// the lobe is named.
	free, okFree := fitParabola(xs, ys, 0, 0, s.LevelDoubt)
	if okFree {
		r.Noise = free.noise
	}
	if okFree && distinct >= 3 {
		r.MainOdds = mainOdds(free, s)
	} else if s.Expected != nil {
		// The level alone.
		alone := s
		alone.Beamwidth = 0
		r.MainOdds = mainOdds(parabola{top: s.Levels[best], uTop: s.LevelDoubt}, alone)
	}
	bent := okFree && free.c < 0 && free.c+2*free.uc < 0
	r.Lobe = s.word(r.MainOdds, free, okFree && distinct >= 3 && bent)

	// Then with all that is known.
	use, ok := free, okFree && distinct >= 3
	if s.Beamwidth > 0 {
		c0, share := -12/(s.Beamwidth*s.Beamwidth), 2*beamwidthDoubt
		switch r.Lobe {
		case Side:
			c0, share = c0/(sideWidth*sideWidth), 2*sideWidthDoubt/sideWidth
		case Unsure:
			share = 1
		}
		use, ok = fitParabola(xs, ys, c0, share*-c0, s.LevelDoubt)
		ok = ok && distinct >= 2
	}
	if ok && use.c+2*use.uc < 0 {
		top := -use.b / (2 * use.c)
		doubt := use.peakDoubt()
		width := math.Sqrt(-12 / use.c)
		// A peak far outside of what was swept is a guess.
		if top > lo-width/2 && top < hi+width/2 && doubt < width/2 {
			peak := centre + top
			r.Peak, r.PeakDoubt = &peak, doubt
			r.Level, r.LevelDoubt = use.top, use.uTop
			r.Width, r.WidthDoubt = &width, width*use.uc/(2*-use.c)
			curve := use
			r.curve = &curve
		}
	}
	r.Wants = s.wants(r, xs, ys, distinct)
	return r
}

// word names the lobe from its odds.
func (s Search) word(odds float64, free parabola, fitted bool) string {
	if s.Beamwidth <= 0 || !fitted {
		// The level alone: low by more than 3u, and as a side lobe would be.
		if s.Expected == nil || s.Beamwidth > 0 {
			return Unsure
		}
		low := *s.Expected - free.top
		if fitted && low > 3*math.Hypot(s.ExpectedDoubt, free.uTop) && odds < 0.5 {
			return Side
		}
		return Unsure
	}
	switch {
	case odds >= confident:
		return Main
	case odds <= 1-confident:
		return Side
	}
	return Unsure
}

// wants tells what more to take.
func (s Search) wants(r Result, xs, ys []float64, distinct int) []Want {
	var w []Want
	if len(xs) < 5 || distinct < 3 {
		w = append(w, WantMore)
	}
	lowest := slices.Min(ys)
	if r.Peak == nil || r.Level-lowest < 2.5 {
		w = append(w, WantWider)
	}
	if r.Peak != nil {
		at := *r.Peak - r.centre
		left, right := 0, 0
		for _, x := range xs {
			if x < at-r.PeakDoubt {
				left++
			}
			if x > at+r.PeakDoubt {
				right++
			}
		}
		if left < 2 || right < 2 {
			w = append(w, WantBothSides)
		}
	} else if xs[0] == 0 || xs[len(xs)-1] == 0 { // the best reading is at an end
		w = append(w, WantBothSides)
	}
	if r.Noise > noisy {
		w = append(w, WantCalm)
	}
	if r.Lobe != Main {
		if s.Beamwidth <= 0 {
			w = append(w, WantBeamwidth)
		}
		if s.Expected == nil {
			w = append(w, WantLevel)
		}
		w = append(w, WantFarther)
	}
	return w
}

// LevelAt is the fitted level at an angle, dBm; ok is false where there is no
// fit.
func (r Result) LevelAt(angle float64) (level float64, ok bool) {
	if r.curve == nil {
		return 0, false
	}
	x := math.Remainder(angle-r.centre, 2*math.Pi)
	return r.curve.a + x*(r.curve.b+x*r.curve.c), true
}
