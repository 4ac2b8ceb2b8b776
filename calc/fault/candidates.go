package fault

import (
	"math"
	"strconv"
)

// The codes of the candidates.
const (
	Nothing      = "nothing_stands_out"
	SideLobe     = "side_lobe"
	Swapped      = "ports_swapped"
	Lossy        = "feeder_lossy"
	Open         = "feeder_open"
	Wet          = "feeder_wet"
	Intermittent = "feeder_intermittent"
	Skewed       = "pair_skewed"
	Obstructed   = "path_obstructed"
	WrongFar     = "wrong_far_antenna"
	Imbalance    = "chains_out_of_balance"
	Interference = "interference"
	WrongPower   = "wrong_power"
	WrongChannel = "wrong_channel"
	WrongWidth   = "wrong_width"
)

// candidate is one thing that may be wrong, over all the sizes it may have.
type candidate struct {
	code  string
	chain int  // near port of the chain it is about; −1: none in particular
	end   *End // nil: none in particular
	prior float64
	sizes []size
}

// size is one size of a fault with its share of the prior and a word for it.
type size struct {
	weight float64
	state  state
	amount float64 // in unit, for the person; 0 where it has none
	unit   string
	end    *End // at which end, where the figures may tell
}

// Priors: how often each is what is wrong when a link comes up for the first
// time. Judgement; they matter only where the figures do not.
const (
	priorNothing      = 0.30
	priorSideLobe     = 0.10
	priorSwapped      = 0.08
	priorLossy        = 0.10
	priorOpen         = 0.05
	priorWet          = 0.05
	priorIntermittent = 0.05
	priorSkewed       = 0.07
	priorObstructed   = 0.07
	priorWrongFar     = 0.03
	priorImbalance    = 0.03
	priorInterference = 0.07
	priorWrongPower   = 0.05
	priorWrongChannel = 0.02
	priorWrongWidth   = 0.03
)

// What the models of the faults stand on; common practice unless a source is
// named.
const (
	typicalSidelobe  = 18.0 // dB below the main lobe, between the uniform apertures' bounds of 13.3 and 17.6 and a good dish's 25
	sidelobeSpread   = 3.0  // dB about a data sheet's level: side lobes differ, and the lock is not on their top
	wetReturnLoss    = 8.0  // dB
	openReturnLoss   = 3.0  // dB, what the feeder's own loss leaves of a total reflection
	shakyReturnLoss  = 10.0 // dB
	wetSwing         = 0.8  // dB, water moves slowly
	shakySwing       = 5.0  // dB, a contact that comes and goes
	obstructedSwing  = 1.2  // dB, leaves and diffraction
	returnLossByLoss = 2.0  // a lossy feeder hides its antenna: 2 dB more return loss for each dB
)

// sideLobeLeaks is the discrimination that is left in a side lobe, dB: patterns of
// the two polarizations part outside of the main lobe.
var sideLobeLeaks = []float64{7, 10, 13, 17}

// candidates lists everything that may be wrong with this link.
func (l *link) candidates(f *Figures) []candidate {
	out := []candidate{{code: Nothing, chain: -1, prior: priorNothing, sizes: []size{{weight: 1}}}}
	out = append(out, l.lobeAndPath()...)
	out = append(out, l.polarizations()...)
	out = append(out, l.feeders()...)
	out = append(out, l.radios()...)
	l.settings(out, f)
	for i := range out {
		sum := 0.0
		for _, s := range out[i].sizes {
			sum += s.weight
		}
		for k := range out[i].sizes {
			out[i].sizes[k].weight /= sum
		}
	}
	return out
}

// lobeAndPath: what takes the same from every chain in both directions.
func (l *link) lobeAndPath() []candidate {
	var out []candidate
	if len(l.sidelobes) > 0 {
		c := candidate{code: SideLobe, chain: -1, prior: priorSideLobe}
		lowest := l.sidelobes[0]
		for _, s := range l.sidelobes {
			lowest = math.Min(lowest, s)
		}
		for x := 13.0; x <= 35; x += 2 {
			z := (x - lowest - sidelobeSpread/2) / sidelobeSpread
			for _, d := range sideLobeLeaks {
				c.sizes = append(c.sizes, size{weight: math.Exp(-z*z/2) + 0.02, amount: x, unit: "dB", state: state{pathLoss: x, crossLeak: decibel(-d)}})
			}
		}
		out = append(out, c)
	}
	c := candidate{code: Obstructed, chain: -1, prior: priorObstructed}
	for x := 5.0; x <= 41; x += 2 {
		for _, swing := range []float64{steadySwing, obstructedSwing} {
			c.sizes = append(c.sizes, size{weight: 1, amount: x, unit: "dB", state: state{pathLoss: x, swing: swing}})
		}
	}
	return append(out, c)
}

// polarizations: what turns or changes ports.
func (l *link) polarizations() []candidate {
	var out []candidate
	if l.tied && len(l.ports[Near]) > 1 {
		c := candidate{code: Swapped, chain: -1, prior: priorSwapped}
		for a := range l.ports[Near] {
			for b := range a {
				c.sizes = append(c.sizes, size{weight: 1, state: state{swapped: [2]int{b, a}}})
			}
		}
		out = append(out, c)
	}
	c := candidate{code: Skewed, chain: -1, prior: priorSkewed}
	antennas := 0
	for _, p := range l.ports[Near] {
		antennas = max(antennas, p.antenna+1)
	}
	for a := range antennas {
		for _, d := range []float64{6, 8, 10, 12, 15, 18, 21, 25, 30, 35, 40, 45} {
			for _, sign := range []float64{-1, 1} {
				c.sizes = append(c.sizes, size{weight: 1, amount: d, unit: "deg", state: state{skew: sign * d * degree, skewed: a}})
			}
		}
	}
	return append(out, c)
}

// feeders: what is wrong with one feeder of one chain, at either end.
func (l *link) feeders() []candidate {
	var out []candidate
	for i := range l.ports[Near] {
		j := l.mate[Near][i]
		if j < 0 {
			continue
		}
		one := func(code string, prior float64, feeds []feed) {
			c := candidate{code: code, chain: i, prior: prior / float64(l.n)}
			for e, p := range [2]int{i, j} {
				at := End(e)
				for _, f := range feeds {
					s := size{weight: 1, amount: f.loss, unit: "dB", end: &at}
					s.state.feeder[e] = map[int]feed{p: f}
					c.sizes = append(c.sizes, s)
				}
			}
			out = append(out, c)
		}
		var lossy, open, wet, shaky []feed
		for x := 3.0; x <= 18; x += 1.5 {
			lossy = append(lossy, feed{loss: x, returnLoss: math.Min(40, goodReturnLoss+returnLossByLoss*x)})
			wet = append(wet, feed{loss: x, swing: wetSwing, returnLoss: wetReturnLoss})
		}
		for x := 22.0; x <= 62; x += 4 {
			open = append(open, feed{loss: x, returnLoss: openReturnLoss})
		}
		for x := 0.0; x <= 30; x += 3 {
			shaky = append(shaky, feed{loss: x, swing: shakySwing, returnLoss: shakyReturnLoss})
		}
		one(Lossy, priorLossy, lossy)
		one(Open, priorOpen, open)
		one(Wet, priorWet, wet)
		one(Intermittent, priorIntermittent, shaky)
	}
	return out
}

// radios: what is wrong in a radio, its setting, or the air about its receiver.
func (l *link) radios() []candidate {
	var out []candidate
	sizes := func(values []float64, make func(x float64) state, unit string) []size {
		var s []size
		for _, x := range values {
			s = append(s, size{weight: 1, amount: math.Abs(x), unit: unit, state: make(x)})
		}
		return s
	}
	span := func(from, to, step float64, both bool) []float64 {
		var v []float64
		for x := from; x <= to; x += step {
			v = append(v, x)
			if both {
				v = append(v, -x)
			}
		}
		return v
	}
	for e := range l.ports {
		end := End(e)
		// Levels at this end tell of the transmitters at the other.
		out = append(out, candidate{code: WrongPower, chain: -1, end: ptr(end.other()), prior: priorWrongPower / 2,
			sizes: sizes(span(4, 24, 2, true), func(x float64) state {
				var s state
				s.allTx[end.other()] = x
				return s
			}, "dB")})
		for i := range l.ports[Near] {
			j := l.mate[Near][i]
			if j < 0 || l.n < 2 {
				continue
			}
			here, there := i, j
			if end == Far {
				here, there = j, i
			}
			c := candidate{code: Imbalance, chain: i, end: ptr(end), prior: priorImbalance / 2 / float64(l.n)}
			for _, x := range span(4, 16, 1.5, true) {
				var weak, reads state
				weak.txOff[end.other()] = map[int]float64{there: x}
				reads.rxOff[end] = map[int]float64{here: x}
				c.sizes = append(c.sizes, size{weight: 1, amount: math.Abs(x), unit: "dB", state: weak}, size{weight: 0.5, amount: math.Abs(x), unit: "dB", state: reads})
			}
			out = append(out, c)
		}
		c := candidate{code: Interference, chain: -1, end: ptr(end), prior: priorInterference / 2}
		rises := span(5, 35, 3, false)
		for _, r := range rises {
			all := state{}
			all.rise[end] = map[int]float64{}
			for p := range l.ports[e] {
				all.rise[end][p] = r
			}
			c.sizes = append(c.sizes, size{weight: 1, amount: r, unit: "dB", state: all})
			for p := range l.ports[e] {
				if len(l.ports[e]) < 2 {
					continue
				}
				// An interferer has a polarization of its own: one port takes more.
				for _, less := range []float64{5, 10, 20, 40} {
					s := state{}
					s.rise[end] = map[int]float64{}
					for q := range l.ports[e] {
						s.rise[end][q] = math.Max(0, r-less)
					}
					s.rise[end][p] = r
					c.sizes = append(c.sizes, size{weight: 1 / float64(len(l.ports[e])), amount: r, unit: "dB", state: s})
				}
			}
		}
		out = append(out, c)
	}
	far := candidate{code: WrongFar, chain: -1, prior: priorWrongFar}
	for _, x := range span(-6, 36, 3, false) {
		for _, d := range []float64{3, 10, 20, 30} {
			// We hear somebody; the planned far end does not hear us.
			far.sizes = append(far.sizes, size{weight: 1, amount: x, unit: "dB", state: state{pathLoss: x, crossLeak: decibel(-d), deaf: [2]bool{false, true}}})
		}
	}
	out = append(out, far)

	channel := candidate{code: WrongChannel, chain: -1, prior: priorWrongChannel}
	channel.sizes = append(channel.sizes, size{weight: 2, state: state{deaf: [2]bool{true, true}}})
	out = append(out, channel)

	width := candidate{code: WrongWidth, chain: -1, prior: priorWrongWidth}
	for _, times := range []float64{0.25, 0.5, 2, 4} {
		width.sizes = append(width.sizes, size{weight: 1, amount: times, unit: "times", state: state{riseAll: 10 * math.Log10(times)}})
	}
	return append(out, width)
}

// settings adds what follows from settings that a page shows to be other than
// planned: the size is then known.
func (l *link) settings(all []candidate, f *Figures) {
	const sure = 20 // against the sizes that are only possible
	for e, page := range f.Ends {
		if page == nil {
			continue
		}
		for i := range all {
			c := &all[i]
			switch c.code {
			case WrongChannel:
				if l.offChannel(page) { // both ends may be on it together, and then all is well but the plan
					c.sizes = append(c.sizes, size{weight: 1})
				}
			case WrongWidth:
				if l.offWidth(page) {
					times := *page.BandwidthMHz / l.bandwidthMHz
					c.sizes = append(c.sizes, size{weight: sure, amount: times, unit: "times", state: state{riseAll: 10 * math.Log10(times)}})
				}
			case WrongPower:
				if *c.end == End(e) && l.offPower(page, End(e)) {
					off := *page.TxPowerDBm - l.tx[e][0]
					s := size{weight: sure, amount: math.Abs(off), unit: "dB"}
					s.state.allTx[e] = off
					c.sizes = append(c.sizes, s)
				}
			}
		}
	}
}

// offChannel: farther from the planned centre than a quarter of the channel, or
// 10 kHz where no width is stated.
func (l *link) offChannel(page *Page) bool {
	return page.FrequencyMHz != nil && math.Abs(*page.FrequencyMHz-l.frequencyMHz) > math.Max(0.25*l.bandwidthMHz, 0.01)
}

// offWidth: by more than a fifth; radios round their widths.
func (l *link) offWidth(page *Page) bool {
	return page.BandwidthMHz != nil && l.bandwidthMHz > 0 && math.Abs(*page.BandwidthMHz-l.bandwidthMHz) > 0.2*l.bandwidthMHz
}

// offPower: by more than 2 dB, twice the doubt of a transmit power.
func (l *link) offPower(page *Page, e End) bool {
	return page.TxPowerDBm != nil && l.expected == nil && math.Abs(*page.TxPowerDBm-l.tx[e][0]) > 2*txDoubt
}

func ptr(e End) *End { return &e }

// plain are the odds of what a page shows that is not a measured figure.
func (l *link) plain(c *candidate, v *view, f *Figures) float64 {
	odds := 1.0
	for e, page := range f.Ends {
		if page == nil {
			continue
		}
		if page.Streams != nil && l.noise != nil {
			// A radio may start with fewer streams than it could carry.
			if *page.Streams == v.streams[e] {
				odds *= 0.9
			} else {
				odds *= 0.1 / float64(max(1, len(l.ports[e])))
			}
		}
		if page.PeerAsPlanned != nil && End(e) == Near {
			odds *= told(*page.PeerAsPlanned == (c.code != WrongFar))
		}
		// How often the page shows a setting off: nearly always where it is what is
		// wrong and this end's page shows it, else only by misreading.
		mark := func(read *float64, off bool, code string, share float64) {
			if read == nil {
				return
			}
			p := misread
			if c.code == code {
				p = share
			}
			if off {
				odds *= p
			} else {
				odds *= 1 - p
			}
		}
		mark(page.FrequencyMHz, l.offChannel(page), WrongChannel, 0.6) // or at the other end
		mark(page.BandwidthMHz, l.offWidth(page), WrongWidth, 0.9)
		if l.expected == nil {
			share := misread
			if c.end != nil && *c.end == End(e) {
				share = 0.9
			}
			mark(page.TxPowerDBm, l.offPower(page, End(e)), WrongPower, share)
		}
	}
	return odds
}

// misread is how often a plain statement of a page is misread or mistyped;
// judgement.
const misread = 0.01

// told is the odds of a plain statement that fits, or does not.
func told(fits bool) float64 {
	if fits {
		return 1 - misread
	}
	return misread
}

func number(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }
