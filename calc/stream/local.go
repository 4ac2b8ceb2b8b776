package stream

import "crossplumb/calc/antenna"

// Local evaluates many geometries near one: draws of doubtful readings, turns of a bolt. It compares each with the
// anchor geometry on few common random points and a coarse quadrature, so that the errors of both cancel as far as the
// two are alike, and adds the difference to the anchor's accurate answer.
type Local struct {
	e      *Engine
	anchor Result
	base   samples
}

// Around makes a Local about the given geometry. The anchor's accurate answer is Anchor.
func (e *Engine) Around(near, far []antenna.Body) *Local {
	return e.local(near, far, e.Evaluate(near, far))
}

func (e *Engine) local(near, far []antenna.Body, anchor Result) *Local {
	l := &Local{e: e, anchor: anchor}
	e.load(near, far, true)
	if e.channel.random {
		e.extend(&l.base, localPoints)
	}
	return l
}

// Anchor is the accurate result for the geometry the Local was made about.
func (l *Local) Anchor() Result { return l.anchor }

// Evaluate computes a geometry near the anchor. StandardError is that of the difference to the anchor; what the anchor
// itself is uncertain by comes on top and is the same for all.
func (l *Local) Evaluate(near, far []antenna.Body) Result {
	e := l.e
	e.load(near, far, true)
	r := e.describe(near, far)
	if !e.channel.random {
		e.channel.hold()
		r.BitsPerSHz, r.EffectiveStreams = e.channel.rate(e.rho)
		e.finish(&r)
		return r
	}
	var s samples
	e.extend(&s, localPoints)
	if l.base.n == 0 {
		r.BitsPerSHz, r.StandardError = overReplicates(&s.bits)
		r.EffectiveStreams, r.StreamsError = overReplicates(&s.streams)
		e.finish(&r)
		return r
	}
	var bits, streams [replicates]float64
	for i := range replicates {
		bits[i] = mean(s.bits[i]) - mean(l.base.bits[i])
		streams[i] = mean(s.streams[i]) - mean(l.base.streams[i])
	}
	r.BitsPerSHz, r.StandardError = meanAndError(&bits)
	r.EffectiveStreams, r.StreamsError = meanAndError(&streams)
	r.BitsPerSHz += l.anchor.BitsPerSHz
	r.EffectiveStreams += l.anchor.EffectiveStreams
	e.finish(&r)
	return r
}
