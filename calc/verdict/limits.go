package verdict

import (
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/polar"
	"crossplumb/calc/sheet"
)

// judgeOf computes what one limit is about from the numbers of all bodies.
type judgeOf func(x []float64) float64

// limit is one limit made ready.
type limit struct {
	sheet.Limit
	kind   sheet.LimitKind
	value  judgeOf // nil: not applicable, not judged, or a metric of the stream computation
	flows  bool    // a metric of the stream computation
	metric metric
	whyNot string // why it does not apply to this mount
	whoNot string // why it applies but could not be judged
}

// margin is how far a value is on the good side.
func (l *limit) margin(v float64) float64 {
	if l.AtLeast {
		return v - l.Value
	}
	return l.Value - v
}

// met tells whether a value holds the limit.
func (l *limit) met(v float64) bool { return l.margin(v) >= 0 }

// judged tells whether the limit has a value.
func (l *limit) judged() bool { return l.value != nil || l.flows }

// limits makes the sheet's limits ready, in the order of a report.
func (m *model) limits() []limit {
	var out []limit
	for _, kind := range sheet.LimitKinds() {
		for _, l := range m.sheet.Limits {
			if l.Name == kind.Name {
				ready := limit{Limit: l, kind: kind}
				m.prepare(&ready)
				out = append(out, ready)
			}
		}
	}
	return out
}

func (m *model) prepare(l *limit) {
	switch l.Name {
	case sheet.CrossTalk:
		switch {
		case m.sheet.Radio.Combining:
			l.whyNot = "this radio combines its chains: it undoes a rotation common to the ports by itself"
		case m.linked() < 2:
			l.whyNot = "fewer than two ports are tied, so that no other stream disturbs"
		default:
			l.value = m.crossTalk()
		}
	case sheet.PairAngleError:
		if pairs := m.squarePairs(); len(pairs) == 0 {
			l.whyNot = "no two ports of this end are planned at right angles"
		} else {
			l.value = m.pairAngleError(pairs)
		}
	case sheet.PointingLoss:
		l.value = m.pointingLoss()
	case sheet.SkewDeviation:
		l.value = m.deviation(skew)
	case sheet.TiltDeviation:
		l.value = m.deviation(tilt)
	case sheet.AzimuthDeviation:
		all := true
		for i := range m.near {
			all = all && m.bodies[i].symmetric
		}
		if all {
			l.whyNot = "these antennas have no azimuth of their own"
		} else {
			l.value = m.deviation(azimuth)
		}
	case sheet.PositionDeviation:
		if m.near < 2 {
			l.whyNot = "the only antenna is the datum that positions are measured from"
		} else {
			l.value = m.displacement()
		}
	default:
		l.metric, l.flows = metricOf(l.Name)
	}
}

func (m *model) linked() int {
	n := 0
	for _, j := range m.link {
		if j >= 0 {
			n++
		}
	}
	return n
}

// crossTalk is the lowest ratio in dB of a receiving port's own stream to the
// others that it takes in, over the tied ports of both ends:
//
//	XPI = |c_own|² g_own² / Σ (|c|² + (L_rx + L_tx)(1 − |c|²)) g²
//
// the sum over the other sending ports, c the coupling through the mirror, g the
// amplitude of the sender's pattern toward the receiver, L = 10^(−X/10) the
// discriminations. For a pair skewed by δ it is 1/(tan²δ + Σ 10^(−X/10)).
// +Inf where nothing disturbs at all.
func (m *model) crossTalk() judgeOf {
	type tied struct{ near, far int }
	var ties []tied
	for i, j := range m.link {
		if j >= 0 {
			ties = append(ties, tied{i, j})
		}
	}
	n := len(ties)
	several := [2]bool{m.near > 1, len(m.bodies)-m.near > 1}
	beams := m.beams()
	e := [2][][2]complex128{make([][2]complex128, n), make([][2]complex128, n)}
	gain := [2][]float64{make([]float64, n), make([]float64, n)}
	power := make([]float64, n*n)
	return func(x []float64) float64 {
		for k, t := range ties {
			for end, p := range [2]*port{&m.ports[0][t.near], &m.ports[1][t.far]} {
				e[end][k] = m.polarization(p, x).Unit()
				gain[end][k] = 1
				if several[end] {
					gain[end][k] = math.Pow(10, -beams[p.body].loss(x)/10)
				}
			}
		}
		for i := range n {
			for j := range n {
				c := e[0][i][0]*e[1][j][0] - e[0][i][1]*e[1][j][1]
				power[i*n+j] = math.Min(1, real(c)*real(c)+imag(c)*imag(c))
			}
		}
		worst := math.Inf(1)
		for rx := range n {
			for end := range 2 { // which end receives
				other := 1 - end
				own, disturbing := 0.0, 0.0
				for tx := range n {
					c := power[rx*n+tx]
					if end == 1 {
						c = power[tx*n+rx]
					}
					g := gain[other][tx]
					if tx == rx {
						own = c * g
						continue
					}
					if c < polar.Blind { // rounding of a true right angle
						c = 0
					}
					leak := m.leak(end, ties[rx].near, ties[rx].far) + m.leak(other, ties[tx].near, ties[tx].far)
					disturbing += (c + leak*(1-c)) * g
				}
				worst = math.Min(worst, own/disturbing)
			}
		}
		return 10 * math.Log10(math.Max(worst, polar.Blind))
	}
}

// leak is the discrimination of the near or far one of two tied ports.
func (m *model) leak(end, near, far int) float64 {
	if end == 0 {
		return m.ports[0][near].Leak
	}
	return m.ports[1][far].Leak
}

// squarePairs are the near ports that are planned at right angles: nearer to 90°
// than to 0°, linear both.
func (m *model) squarePairs() [][2]int {
	var out [][2]int
	for i := range m.ports[0] {
		for j := range i {
			a, b := &m.ports[0][i], &m.ports[0][j]
			if a.Axial != 0 || b.Axial != 0 {
				continue
			}
			if d := polar.AngleBetween(m.polarization(a, m.plan), m.polarization(b, m.plan)); math.Abs(d-math.Pi/2) < math.Pi/4 {
				out = append(out, [2]int{j, i})
			}
		}
	}
	return out
}

// pairAngleError is the largest |ε| in degrees, 90° + ε being the angle between
// two near ports that are planned at right angles.
func (m *model) pairAngleError(pairs [][2]int) judgeOf {
	return func(x []float64) float64 {
		worst := 0.0
		for _, p := range pairs {
			a, b := &m.ports[0][p[0]], &m.ports[0][p[1]]
			worst = math.Max(worst, math.Abs(polar.AngleBetween(m.polarization(a, x), m.polarization(b, x))-math.Pi/2))
		}
		return worst / degree
	}
}

// beam is a body's pattern ready to be looked at from the other end.
type beam struct {
	m        *model
	body     int
	sin, cos float64 // of the elevation of the other end, straight ahead
	pattern  *antenna.Pattern
}

// beams prepares the pattern of every body.
func (m *model) beams() []beam {
	out := make([]beam, len(m.bodies))
	for i := range m.bodies {
		rise := m.rise[0]
		if m.bodies[i].far {
			rise = m.rise[1]
		}
		out[i] = beam{m: m, body: i, pattern: m.bodies[i].shape}
		out[i].sin, out[i].cos = math.Sincos(rise)
	}
	return out
}

// loss in dB of the pattern toward the other end against the top of the main lobe:
// the direction of the other end, turned back by azimuth, tilt and skew into the
// body's own frame (see package antenna), there as azimuth and elevation.
func (b *beam) loss(x []float64) float64 {
	sk, ck := math.Sincos(x[b.m.at(b.body, skew)])
	lean := x[b.m.at(b.body, tilt)]
	if b.m.bodies[b.body].symmetric {
		lean = -lean // read as a lean forward; see model.body
	}
	st, ct := math.Sincos(lean)
	sa, ca := math.Sincos(x[b.m.at(b.body, azimuth)])
	r, f := -b.cos*sa, b.cos*ca
	u, f := b.sin*ct-f*st, f*ct+b.sin*st
	r, u = r*ck-u*sk, u*ck+r*sk
	return b.pattern.Attenuation(math.Atan2(r, f), math.Asin(math.Min(math.Max(u, -1), 1)))
}

// pointingLoss is the largest loss in dB, over the near antennas, of the pattern
// toward the far end against the top of the main lobe.
func (m *model) pointingLoss() judgeOf {
	beams := m.beams()[:m.near]
	return func(x []float64) float64 {
		worst := 0.0
		for i := range beams {
			worst = math.Max(worst, beams[i].loss(x))
		}
		return worst
	}
}

// deviation is the largest difference in degrees between an angle and its plan
// over the near antennas.
func (m *model) deviation(q quantity) judgeOf {
	return func(x []float64) float64 {
		worst := 0.0
		for i := range m.near {
			if at := m.at(i, q); !(q == azimuth && m.bodies[i].symmetric) {
				worst = math.Max(worst, math.Abs(wrap(x[at]-m.plan[at])))
			}
		}
		return worst / degree
	}
}

// displacement is the largest distance in mm of a near antenna from its planned
// position.
func (m *model) displacement() judgeOf {
	return func(x []float64) float64 {
		worst := 0.0
		for i := 1; i < m.near; i++ {
			d := func(q quantity) float64 { return x[m.at(i, q)] - m.plan[m.at(i, q)] }
			worst = math.Max(worst, math.Hypot(math.Hypot(d(right), d(up)), d(forward)))
		}
		return worst * 1000
	}
}
