package fault

import (
	"encoding/binary"
	"math"
)

// kind is what sort of figure an observation is.
type kind int

const (
	level kind = iota
	snr
	noise
	xpi
	swing
	returnLoss
	modulation
	kinds
)

var kindNames = [kinds]string{"level_dbm", "snr_db", "noise_dbm", "xpi_db", "swing_db", "return_loss_db", "modulation_bits"}

// observation is one figure that a page shows.
type observation struct {
	kind  kind
	end   End
	port  int // −1 for the modulation, which is of the page
	value float64
}

// Doubts of the figures, standard uncertainties. All are common practice; the
// pages of radios state none.
const (
	pathDoubt       = 1.3 // dB: gains of both antennas, feeders, the swing of a clear path; common to everything
	chainGainDoubt  = 0.5 // dB: of one chain against the others, the same both ways
	txDoubt         = 1.0 // dB: of one radio's transmit power
	txChainDoubt    = 0.5 // dB: of one of its chains
	rxDoubt         = 1.5 // dB: calibration of one radio's level reading; not in its signal-to-noise ratio
	figureDoubt     = 1.0 // dB: of one radio's noise figure, where the sheet states it
	figureAssumedDB = 2.0 // dB: where it does not
	figureChain     = 0.5 // dB: of one of its receivers
	readingDoubt    = 0.6 // dB: steps of 1 dB (0.29) and flutter
	xpiDoubt        = 3.0 // dB: a small power beside a large one
	swingDoubt      = 0.5 // of the natural logarithm of a swing
	returnLossDoubt = 2.5 // dB
	modulationDoubt = 1.2 // bits per symbol: one step, and the radio's own caution
	// A ratio near zero is cut off there by the page, so its doubt is its own.
	clippedBelow = 2.0 // dB
	clippedDoubt = 1.5 // dB
)

// swingFloor keeps the logarithm of a swing that reads zero, dB.
const swingFloor = 0.1

// observe lists what the pages show as one vector. A port that hears nothing
// shows the noise as its level and no ratio.
func (l *link) observe(f *Figures) []observation {
	var out []observation
	for end, page := range f.Ends {
		if page == nil {
			continue
		}
		e := End(end)
		for _, c := range page.Ports {
			i := find(l.ports[end], c.Port)
			add := func(k kind, x *float64) {
				if x != nil {
					out = append(out, observation{k, e, i, *x})
				}
			}
			if !c.Heard {
				zero := 0.0
				add(level, l.noise)
				add(snr, &zero)
			}
			add(level, c.LevelDBm)
			if l.noise != nil { // without a bandwidth no ratio can be expected
				add(snr, c.SNRDB)
				add(noise, c.NoiseDBm)
			}
			if l.tied && len(l.ports[end]) > 1 {
				add(xpi, c.XPIDB)
			}
			if c.SwingDB != nil {
				s := math.Log(math.Max(*c.SwingDB, swingFloor))
				add(swing, &s)
			}
			add(returnLoss, c.ReturnLossDB)
		}
		if page.Modulation != nil && l.noise != nil {
			out = append(out, observation{modulation, e, -1, *page.Modulation})
		}
	}
	return out
}

// expect turns a view into the vector that would be observed.
func (v *view) expect(o []observation, f *Figures) []float64 {
	y := make([]float64, len(o))
	for k, ob := range o {
		if ob.kind == modulation {
			y[k] = math.Min(v.modulation[ob.end], f.Ends[ob.end].ModulationMax)
			continue
		}
		r := v.ports[ob.end][ob.port]
		switch ob.kind {
		case level:
			y[k] = r.level
		case snr:
			y[k] = r.snr
		case noise:
			y[k] = r.noise
		case xpi:
			y[k] = math.Max(-60, math.Min(60, r.xpi))
		case swing:
			y[k] = math.Log(math.Max(r.swing, swingFloor))
		case returnLoss:
			y[k] = r.returnLoss
		}
	}
	return y
}

// covariance of the observations about a view: what figures have in common (path,
// powers, calibrations, noise figures) stands in several of them, with its sign
// and as far as the figure follows it there.
func (l *link) covariance(o []observation, v *view) covariance {
	n := len(l.ports[Near]) + len(l.ports[Far])
	// Latent causes: path; per end tx, rx, noise figure; per port gain, tx, figure.
	const perEnd, perPort = 3, 3
	width := 1 + 2*perEnd + n*perPort
	atEnd := func(e End, which int) int { return 1 + int(e)*perEnd + which }
	atPort := func(e End, i, which int) int {
		if e == Far {
			i += len(l.ports[Near])
		}
		return 1 + 2*perEnd + i*perPort + which
	}
	figure := figureDoubt
	if l.figureAssumed {
		figure = figureAssumedDB
	}
	count := len(o)
	if len(l.load) != count*width {
		l.load, l.own = make([]float64, count*width), make([]float64, count)
	}
	load, own := l.load, l.own
	clear(load)
	for k, ob := range o {
		mine := load[k*width : k*width+width]
		signal := func(follows float64) {
			mine[0] = follows * l.pathDoubt
			mine[atEnd(ob.end.other(), 0)] = follows * txDoubt
			i, e := ob.port, ob.end
			if j := l.mate[e][i]; j >= 0 {
				mine[atPort(e.other(), j, 1)] = follows * txChainDoubt
				if e == Far { // one gain for a chain, kept at its near port
					i, e = j, Near
				}
			}
			mine[atPort(e, i, 0)] = follows * chainGainDoubt
		}
		figures := func(follows float64) {
			mine[atEnd(ob.end, 2)] = follows * figure
			mine[atPort(ob.end, ob.port, 2)] = follows * figureChain
		}
		own[k] = readingDoubt
		var r reading
		if ob.port >= 0 {
			r = v.ports[ob.end][ob.port]
		}
		switch ob.kind {
		case level:
			signal(r.levelFollows)
			figures(1 - r.levelFollows)
			mine[atEnd(ob.end, 1)] = rxDoubt
		case snr:
			signal(r.snrFollows)
			figures(-r.snrFollows)
			if r.snr < clippedBelow {
				own[k] = clippedDoubt
			}
		case noise:
			mine[atEnd(ob.end, 1)] = rxDoubt
			figures(1)
		case xpi:
			own[k] = xpiDoubt
		case swing:
			own[k] = swingDoubt
		case returnLoss:
			own[k] = returnLossDoubt
		case modulation:
			own[k] = modulationDoubt
		}
	}
	c := make([]float64, count*count)
	// Few figures share a cause: add up cause by cause, the lower half only.
	members := make([]int, 0, count)
	for q := range width {
		members = members[:0]
		for k := range count {
			if load[k*width+q] != 0 {
				members = append(members, k)
			}
		}
		for a, i := range members {
			for _, j := range members[:a+1] {
				c[i*count+j] += load[i*width+q] * load[j*width+q]
			}
		}
	}
	for k := range count {
		c[k*count+k] += own[k] * own[k]
	}
	return covariance{count, c}
}

// covariance is a symmetric matrix of which the lower half is filled.
type covariance struct {
	n int
	c []float64
}

// doubt is the standard uncertainty of figure k.
func (c covariance) doubt(k int) float64 { return math.Sqrt(c.c[k*c.n+k]) }

// whitener turns differences of figures into ones of unit variance without
// correlation: z = L⁻¹ d with Σ = L Lᵀ (Cholesky). Gonum's matrices would weigh 155
// kB on the phone, packed, for these forty lines.
type whitener struct {
	n int
	l []float64
}

// newWhitener decomposes a positive definite matrix, which it uses up. The
// covariance above is one: each figure has a doubt of its own.
func newWhitener(c covariance) whitener {
	n, l := c.n, c.c // in place: L fills the half that Σ fills
	for i := range n {
		row := l[i*n : i*n+n]
		for j := 0; j <= i; j++ {
			other := l[j*n : j*n+n]
			sum := row[j]
			for k := range j {
				sum -= row[k] * other[k]
			}
			if i == j {
				row[i] = math.Sqrt(sum)
			} else {
				row[j] = sum / other[j]
			}
		}
	}
	return whitener{n, l}
}

// logDet is ½ log det Σ.
func (w whitener) logDet() float64 {
	sum := 0.0
	for i := range w.n {
		sum += math.Log(w.l[i*w.n+i])
	}
	return sum
}

// distance is Mahalanobis' distance of two vectors of figures, √(dᵀ Σ⁻¹ d).
func (w whitener) distance(a, b []float64) float64 {
	z := make([]float64, w.n)
	sum := 0.0
	for i := range z {
		row := w.l[i*w.n : i*w.n+w.n]
		d := a[i] - b[i]
		for k := range i {
			d -= row[k] * z[k]
		}
		z[i] = d / row[i]
		sum += z[i] * z[i]
	}
	return math.Sqrt(sum)
}

// cloud is the doubt about one prediction.
type cloud struct {
	white  whitener
	logDet float64
}

// sky keeps the clouds of one ranking: the doubt hangs only on how far the figures
// follow the signal, which is the same for a feeder that is lossy and one that is
// wet.
type sky map[string]*cloud

func (l *link) cloud(o []observation, v *view, seen sky) *cloud {
	key := make([]byte, 0, 256)
	for e := range v.ports {
		for i := range v.ports[e] {
			r := &v.ports[e][i]
			key = binary.LittleEndian.AppendUint64(key, math.Float64bits(r.levelFollows))
			key = binary.LittleEndian.AppendUint64(key, math.Float64bits(r.snrFollows))
			if r.snr < clippedBelow {
				key = append(key, 1)
			} else {
				key = append(key, 0)
			}
		}
	}
	if c := seen[string(key)]; c != nil {
		return c
	}
	white := newWhitener(l.covariance(o, v))
	c := &cloud{white, white.logDet()}
	seen[string(key)] = c
	return c
}
