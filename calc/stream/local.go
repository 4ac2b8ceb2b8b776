package stream

import (
	"math"

	"crossplumb/calc/antenna"
)

// localReplicates × localPoints random points serve Local: enough for the difference of two like channels, whose errors
// cancel (TestLocalAgainstEvaluate holds what is left).
const (
	localReplicates = 2
	localPoints     = 32
)

// Local evaluates many geometries near one: draws of doubtful readings, turns of a bolt. It compares each with the
// anchor geometry on few common random points and a coarse quadrature, so that the errors of both cancel as far as the
// two are alike, and adds the difference to the anchor's accurate answer.
type Local struct {
	e             *Engine
	anchor        Result
	coarse        Result                   // the anchor by the same means
	bits, streams [localReplicates]float64 // of the anchor by the same means
}

// Around makes a Local about the given geometry. The anchor's accurate answer is Anchor.
func (e *Engine) Around(near, far []antenna.Body) *Local {
	l := &Local{e: e, anchor: e.Evaluate(near, far)}
	e.load(near, far, true)
	l.coarse = e.describe(near, far, false)
	l.bits, l.streams = e.few()
	return l
}

// few is the mean rate and streams of the loaded channel over the first points of some replicates.
func (e *Engine) few() (bits, streams [localReplicates]float64) {
	if !e.channel.random {
		e.channel.hold()
		b, d := e.channel.rate(e.rho)
		for r := range bits {
			bits[r], streams[r] = b, d
		}
		return bits, streams
	}
	e.points.upTo(localPoints, nil)
	size := e.points.rows * e.points.cols
	for r := range bits {
		w := e.points.draws[r][0].w
		for i := range localPoints {
			e.channel.at(w[i*size:][:size])
			b, d := e.channel.rate(e.rho)
			bits[r] += b / localPoints
			streams[r] += d / localPoints
		}
	}
	return bits, streams
}

// Anchor is the accurate result for the geometry the Local was made about.
func (l *Local) Anchor() Result { return l.anchor }

// Evaluate computes a geometry near the anchor. StandardError is that of the difference to the anchor; what the anchor
// itself is uncertain by comes on top and is the same for all.
func (l *Local) Evaluate(near, far []antenna.Body) Result {
	e := l.e
	e.load(near, far, true)
	r := e.describe(near, far, false)
	r.BitsPerSHz, r.StandardError, r.EffectiveStreams, r.StreamsError = l.difference()
	l.level(&r)
	e.finish(&r)
	return r
}

// level takes out of r what the coarse quadrature does to the anchor: differences of rates and envelopes, ratios of
// powers.
func (l *Local) level(r *Result) {
	a, c := &l.anchor, &l.coarse
	if c.MeanPower == nil { // no anchor
		return
	}
	r.SingleChain = math.Max(r.SingleChain+a.SingleChain-c.SingleChain, 0)
	envelope := func(r *float64, a, c float64) {
		if *r >= 0 && a >= 0 && c >= 0 {
			*r = math.Min(math.Max(*r+a-c, 0), 1)
		}
	}
	envelope(&r.NearEnvelope, a.NearEnvelope, c.NearEnvelope)
	envelope(&r.FarEnvelope, a.FarEnvelope, c.FarEnvelope)
	for f := range r.MeanPower {
		for n := range r.MeanPower[f] {
			// A port that receives next to nothing at the anchor keeps its own figure: a ratio there says nothing.
			if x, y := a.MeanPower[f][n], c.MeanPower[f][n]; x > 1e-6 && y > 1e-6 {
				r.MeanPower[f][n] *= x / y
			}
		}
	}
}

func (l *Local) difference() (bits, bitsError, streams, streamsError float64) {
	b, d := l.e.few()
	for i := range b {
		b[i] -= l.bits[i]
		d[i] -= l.streams[i]
	}
	bits, bitsError = few(&b)
	streams, streamsError = few(&d)
	return l.anchor.BitsPerSHz + bits, bitsError, l.anchor.EffectiveStreams + streams, streamsError
}

func few(x *[localReplicates]float64) (m, se float64) {
	m = mean(x[:])
	for _, v := range x {
		se += (v - m) * (v - m)
	}
	return m, math.Sqrt(se / (localReplicates * (localReplicates - 1)))
}
