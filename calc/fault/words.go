package fault

import "math"

// about rounds a size for a sentence.
func about(x float64) string { return number(math.Round(x)) }

// words says what a candidate means and what to check next.
func (l *link) words(r *Ranked, f *fitted) (text, next string) {
	chain := ""
	if f.chain >= 0 {
		chain = "the chain of near port " + r.Port + " and far port " + l.ports[Far][l.mate[Near][f.chain]].label
	}
	where := "at one of its ends, which the figures do not tell"
	if r.End != "" {
		where = "at the " + r.End + " end"
	}
	size := f.sizes[f.best]
	switch f.code {
	case Nothing:
		return "The figures are what this mount should give, within their doubt.", "Nothing. Write the figures down as they are."
	case SideLobe:
		return "One antenna is locked on a side lobe: every chain is about " + about(r.Amount) + " dB low in both directions and the polarizations mix.",
			"Search the peak again, two beamwidths to each side and up and down, at one end and then the other."
	case Obstructed:
		return "Something stands in the path: every chain is about " + about(r.Amount) + " dB low in both directions.",
			"Look along the boresight; check the path's profile for trees, cranes and new buildings."
	case Swapped:
		a, b := l.ports[Near][size.state.swapped[0]].label, l.ports[Near][size.state.swapped[1]].label
		return "Ports " + a + " and " + b + " have changed places at one end: each receives the other's stream.",
			"Follow both feeders from radio to antenna and change them over at one end, not at both."
	case Skewed:
		return "An antenna is turned about its boresight by about " + about(r.Amount) + "°, more than its readings say: the streams cross-talk, the levels stay.",
			"Read the skew of each antenna again, at both ends."
	case Lossy:
		return "The feeder of " + chain + " loses about " + about(r.Amount) + " dB more than it should, " + where + ".",
			"Transmitter off, locked and tagged: check connectors, torque and bends of that feeder; change its jumper for a known good one."
	case Open:
		return "The feeder of " + chain + " is open or not connected, " + where + ".",
			"Transmitter off, locked and tagged: check that both plugs of that feeder are on, and measure it through."
	case Wet:
		return "There is water in the feeder of " + chain + ", " + where + ": it loses about " + about(r.Amount) + " dB and reflects.",
			"Transmitter off, locked and tagged: open the connector seals of that feeder, look for water, compare with a dry day."
	case Intermittent:
		return "A contact in the feeder of " + chain + " comes and goes, " + where + ".",
			"Transmitter off, locked and tagged: move connector after connector by hand while someone below watches the level after switching on again."
	case WrongFar:
		return "This end hears another antenna than the planned one, and the planned far end does not hear this one.",
			"Read the name of the far radio on the page; check bearing and elevation against the plan."
	case Imbalance:
		return "One transmitter or receiver of " + chain + " is about " + about(r.Amount) + " dB off as received at the " + r.End + " end, in this direction only.",
			"Compare the set power of each chain at the other end; change the two chains over at one radio and see whether the fault goes with it."
	case Interference:
		return "The " + r.End + " end receives interference: levels are good, the noise is about " + about(r.Amount) + " dB up.",
			"Transmitters off at the other end: read the noise that stays; scan the channel and try another."
	case WrongPower:
		way := "low"
		if sign(size.state.allTx) > 0 {
			way = "high"
		}
		return "The " + r.End + " end transmits about " + about(r.Amount) + " dB too " + way + ".",
			"Read the set transmit power at the " + r.End + " end, and whether it is per chain or for all together."
	case WrongChannel:
		return "The two radios are not on the planned channel.", "Read frequency and channel number at both ends."
	case WrongWidth:
		return "The channel is " + number(r.Amount) + " times as wide as planned.", "Read the channel width at both ends."
	}
	panic("fault: a candidate without words")
}

func sign(x [2]float64) float64 { return x[0] + x[1] }
