package fault

import "math"

// state is a link with one thing wrong; its zero value has nothing wrong.
type state struct {
	pathLoss  float64         // dB, both directions, all chains
	crossLeak float64         // power that the path or lobe leaks across besides
	skew      float64         // radians, of one near antenna beside what the sheet knows
	skewed    int             // that antenna
	swapped   [2]int          // near ports that have changed places; equal: none
	feeder    [2]map[int]feed // by end and port
	txOff     [2]map[int]float64
	rxOff     [2]map[int]float64 // a receiver whose level reads wrong
	allTx     [2]float64         // all of an end's chains
	rise      [2]map[int]float64 // noise, dB
	riseAll   float64            // of both ends, with the width
	deaf      [2]bool            // hears nothing of this link
	swing     float64            // of all chains; 0: steady
}

// feed is one feeder with a fault.
type feed struct {
	loss       float64 // dB
	swing      float64 // dB; 0: steady
	returnLoss float64 // dB, as its own radio sees it; 0: like a good one
}

// What a sound installation shows; common practice.
const (
	steadySwing    = 0.3  // dB
	goodReturnLoss = 20.0 // dB
	// A receiver's own error vector: above this no radio shows a better ratio.
	bestSNR = 38.0
	// How far above noise and cross-talk a stream must be to be carried.
	streamNeeds = 3.0
	// Between a signal-to-noise ratio and the modulation that a radio chooses for it.
	modulationGap = 8.0
)

// reading is what a port would show.
type reading struct {
	level, snr, noise, xpi, swing, returnLoss float64
	// How far level and ratio follow the signal, dB per dB: a level not into the
	// noise, a ratio not where cross-talk or the receiver's own error limits it.
	levelFollows, snrFollows float64
}

// view is what both pages would show.
type view struct {
	ports      [2][]reading
	modulation [2]float64
	streams    [2]float64
}

// predict is the forward model: what both pages show of a link in this state.
func (l *link) predict(s *state) view {
	var v view
	near, far := len(l.ports[Near]), len(l.ports[Far])
	// Which element each near port is really on.
	element := func(i int) int {
		if s.swapped[0] != s.swapped[1] {
			switch i {
			case s.swapped[0]:
				return s.swapped[1]
			case s.swapped[1]:
				return s.swapped[0]
			}
		}
		return i
	}
	// Power gain of each near port to each far port, the same both ways.
	way := make([]float64, near*far)
	common := decibel(-s.pathLoss)
	for i := range near {
		on := element(i)
		row := common * power(s.feeder[Near][i].loss)
		for j := range far {
			c := l.coupled[on*far+j]
			if s.skew != 0 && l.ports[Near][on].antenna == s.skewed {
				c = l.coupling(on, j, s.skew)
			}
			way[i*far+j] = math.Min(c+s.crossLeak, 1) * l.reach[on*far+j] * row * power(s.feeder[Far][j].loss)
		}
	}
	for end := range v.ports {
		e := End(end)
		count := len(l.ports[end])
		v.ports[end] = make([]reading, count)
		sumSNR, heard := 0.0, 0.0
		sent := make([]float64, len(l.ports[e.other()]))
		for j := range sent {
			sent[j] = l.sent[e.other()][j] / power(s.txOff[e.other()][j]+s.allTx[e.other()])
		}
		for i := range count {
			noise := 0.0 // mW; where no bandwidth is known, no floor
			if l.noise != nil {
				noise = l.floor / power(s.rise[e][i]+s.riseAll)
			}
			own, others := 0.0, 0.0
			for j := range l.ports[e.other()] {
				at := i*far + j
				if e == Far {
					at = j*far + i
				}
				p := way[at] * sent[j]
				if s.deaf[e] {
					p = 0
				}
				if j == l.mate[e][i] {
					own += p
				} else {
					others += p
				}
			}
			r := &v.ports[end][i]
			const silence = 1e-18 // mW, −180 dBm: below every noise, for sheets without a bandwidth
			r.level = 10*math.Log10(own+others+noise+silence) + s.rxOff[e][i]
			r.noise = 10 * math.Log10(noise+silence)
			all := own + others
			disturbed := noise + silence
			if l.tied {
				disturbed += others
			} else {
				own += others // combined: every chain's power is of use
			}
			// The receiver's own error adds to noise and cross-talk.
			snr := own / (disturbed + own*ownError)
			r.snr = math.Max(0, 10*math.Log10(snr+1e-6))
			r.levelFollows = all / (all + noise + silence)
			r.snrFollows = (noise + silence) / (disturbed + own*ownError)
			if snr < 1 {
				r.snrFollows = 0 // the page shows 0
			}
			if l.tied {
				r.xpi = 10 * math.Log10((own+silence)/(others+silence))
			}
			r.swing = steadySwing
			if s.swing > 0 {
				r.swing = s.swing
			}
			r.returnLoss = goodReturnLoss
			for at, x := range [2]feed{s.feeder[e][i], l.mateFeed(s, e, i)} {
				if x.swing > 0 {
					r.swing = x.swing
				}
				if at == 0 && x.returnLoss > 0 {
					r.returnLoss = x.returnLoss
				}
			}
			if l.mate[e][i] >= 0 {
				heard++
				sumSNR += r.snr
				if r.snr >= streamNeeds {
					v.streams[end]++
				}
			}
		}
		// The radio's modulation follows the mean ratio of its chains.
		if heard > 0 {
			v.modulation[end] = math.Log2(1 + decibel(sumSNR/heard-modulationGap))
		}
	}
	return v
}

// mateFeed is the feeder at the other end of a port's chain.
func (l *link) mateFeed(s *state, e End, i int) feed {
	j := l.mate[e][i]
	if j < 0 {
		return feed{}
	}
	return s.feeder[e.other()][j]
}

// plannedMean is the mean over chains of the level that the sheet's powers, gains
// and free space give at the near end of antennas that look at each other, dBm.
func (l *link) plannedMean() float64 {
	sum := 0.0
	for i := range l.ports[Near] {
		if j := l.mate[Near][i]; j >= 0 {
			sum += l.tx[Far][j] + l.ports[Near][i].boresight + l.ports[Far][j].boresight - l.loss
		}
	}
	return sum / float64(l.n)
}

// decibel is the power ratio of so many dB.
func decibel(db float64) float64 { return math.Exp(db * math.Ln10 / 10) }

// power is what is left of a power after a loss in dB; mostly there is none.
func power(loss float64) float64 {
	if loss == 0 {
		return 1
	}
	return decibel(-loss)
}

// ownError is the receiver's own error as a power ratio, 10^(−bestSNR/10).
const ownError = 1.5848931924611134e-4
