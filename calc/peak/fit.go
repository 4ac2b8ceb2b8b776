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

// Window is how far below the best level the form of the main lobe holds, dB.
// There −12(θ/θ₃)² and the pattern of a uniform line source part by 0.5 dB.
const Window = 6.0

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
	WantWider     Want = "wider"           // flat on both sides: too narrow a sweep for the beam
	WantFiner     Want = "finer"           // it falls by more than 6 dB from one step to the next
	WantAgain     Want = "again"           // neither flat nor few, and the form does not settle
	WantCheck     Want = "check beamwidth" // the lobe is not as wide as the stated beamwidth makes it
	WantCalm      Want = "calm"            // too noisy
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
	Noise      float64   // standard deviation of one reading as found, dB
	Used       []bool    // which readings the fit took
	Beyond     []bool    // which lie within 6 dB of the best, but past one that does not
	GoTo       []float64 // WantBothSides: angles to go on to, at most one each side, where a width tells how far
	Short      [2]bool   // WantBothSides: the side of lower angles, of higher angles
	Gap        []float64 // WantFiner: the two angles between which to step
	Wants      []Want
	curve      *parabola
	centre     float64
}

// fallen is how far below its top a level must be for a side to be seen falling,
// dB: the half-power point less a reading's doubt.
const fallen = 2.5

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
	within := func(i int) bool { return s.Levels[order[i]] >= s.Levels[best]-Window }
	for first > 0 && within(first-1) {
		first--
	}
	for last < n-1 && within(last+1) {
		last++
	}
	r := Result{Used: make([]bool, n), Beyond: make([]bool, n), Level: s.Levels[best], LevelDoubt: s.LevelDoubt, Lobe: Unsure, MainOdds: priorMain, Noise: s.LevelDoubt, centre: centre}
	for i := range n {
		r.Beyond[order[i]] = (i < first || i > last) && within(i)
	}
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
	parts := false // from the stated beamwidth
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
	r.take(use, ok, lo, hi)
	if parts = r.Peak == nil && s.Beamwidth > 0 && bent && distinct >= 3; parts {
		// The readings bend by themselves, and the stated beamwidth flattens them: it is
		// not their lobe's. They are taken as if it were not known.
		r.take(free, true, lo, hi)
		parts = r.Peak != nil
	}
	// How far it falls to each side, and the first reading past the fit there.
	var edges [2]edge
	for k, i := range [2]int{first - 1, last + 1} {
		if i >= 0 && i < n {
			edges[k] = edge{there: true, x: x[order[i]], level: s.Levels[order[i]]}
		}
	}
	r.want(s, xs, ys, distinct, edges, parts)
	return r
}

// take enters a fit over lo to hi, where it shows a peak.
func (r *Result) take(fit parabola, ok bool, lo, hi float64) {
	if !ok || fit.c+2*fit.uc >= 0 {
		return
	}
	top, doubt := -fit.b/(2*fit.c), fit.peakDoubt()
	width := math.Sqrt(-12 / fit.c)
	// A peak far outside of what was swept is a guess.
	if top > lo-width/2 && top < hi+width/2 && doubt < width/2 {
		peak, u := r.centre+top, width*fit.uc/(2*-fit.c)
		r.Peak, r.PeakDoubt = &peak, doubt
		r.Level, r.LevelDoubt = fit.top, fit.uTop
		r.Width, r.WidthDoubt = &width, u
		r.curve = &fit
	}
}

// edge is the nearest reading that the fit left out on one side.
type edge struct {
	there    bool
	x, level float64
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

// want tells what more to take, and where.
func (r *Result) want(s Search, xs, ys []float64, distinct int, edges [2]edge, parts bool) {
	add := func(w Want) { r.Wants = append(r.Wants, w) }
	if len(xs) < 5 || distinct < 3 {
		add(WantMore)
	}
	at, margin := 0.0, 0.0
	if r.Peak != nil {
		at, margin = math.Remainder(*r.Peak-r.centre, 2*math.Pi), r.PeakDoubt
	}
	// By side, lower angles first: readings, the fall of those that the fit took, and
	// with the first one left out.
	var count [2]int
	var fall, whole [2]float64
	for i, x := range xs {
		side := 0
		switch {
		case x > at+margin:
			side = 1
		case x >= at-margin:
			continue
		}
		count[side]++
		fall[side] = math.Max(fall[side], r.Level-ys[i])
	}
	for k, e := range edges {
		whole[k] = fall[k]
		if e.there {
			whole[k] = math.Max(fall[k], r.Level-e.level)
		}
	}
	falls := [2]bool{whole[0] >= fallen, whole[1] >= fallen}
	seen := math.Max(fall[0], fall[1]) >= fallen
	if !falls[0] && !falls[1] {
		add(WantWider)
	}
	// A side is short that has too few readings and, without a peak or a fall that the
	// fit saw, one along which the level does not fall.
	short := [2]bool{}
	for k := range short {
		if r.Peak != nil {
			short[k] = count[k] < 2
		} else {
			short[k] = count[k] == 0
		}
		if (falls[0] || falls[1]) && (r.Peak == nil || !seen) {
			short[k] = short[k] || !falls[k]
		}
	}
	lo, hi := xs[0], xs[len(xs)-1]
	outer := [2]float64{lo, hi}
	// The level jumps past the 6 dB: the side has its end, and wants steps before it.
	gap := -1
	for k, e := range edges {
		if e.there && (short[k] || (!seen && falls[k] && (gap < 0 || whole[k] > whole[gap]))) {
			gap = k
		}
		short[k] = short[k] && !e.there
	}
	if short[0] || short[1] {
		add(WantBothSides)
		r.Short = short
		half := 0.0
		switch {
		case r.Width != nil:
			half = *r.Width / 2
		case s.Beamwidth > 0 && !parts:
			half = s.Beamwidth / 2
		}
		for k, sign := range [2]float64{-1, 1} {
			if to := at + sign*half; short[k] && half > 0 && sign*(to-outer[k]) > 0 {
				r.GoTo = append(r.GoTo, r.centre+to)
			}
		}
	}
	if gap >= 0 {
		add(WantFiner)
		r.Gap = []float64{r.centre + outer[gap], r.centre + edges[gap].x}
	}
	if r.Noise > noisy {
		add(WantCalm)
	}
	if parts {
		add(WantCheck)
	}
	if r.Peak == nil && len(r.Wants) == 0 {
		add(WantAgain)
	}
	if r.Lobe != Main {
		if s.Beamwidth <= 0 {
			add(WantBeamwidth)
		}
		if s.Expected == nil {
			add(WantLevel)
		}
		add(WantFarther)
	}
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
