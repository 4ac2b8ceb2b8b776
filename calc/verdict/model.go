package verdict

import (
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/codec"
	"crossplumb/calc/doubt"
	"crossplumb/calc/polar"
	"crossplumb/calc/sheet"
)

// quantity is one of the six numbers that say how an antenna hangs.
type quantity int

const (
	skew quantity = iota
	tilt
	azimuth
	right
	up
	forward
	quantities // how many
)

// String is the quantity as entries and answers name it: the three axes are one
// reading, position.
func (q quantity) String() string {
	switch q {
	case skew:
		return "skew"
	case tilt:
		return "tilt"
	case azimuth:
		return "azimuth"
	}
	return "position"
}

func (q quantity) angular() bool { return q <= azimuth }

// model is a sheet made ready for computing: SI, radians, each end in its own
// frame with the path straight ahead.
type model struct {
	sheet  *sheet.Sheet
	near   int // antennas at this end; the far ones follow
	bodies []body
	ports  [2][]port  // near, far, in the order of the sheet
	link   []int      // far port of each near port, −1 where none
	plan   []float64  // planned numbers, quantities for each body
	rise   [2]float64 // elevation of the other end, rad
}

// body is what does not hang on bolts.
type body struct {
	far       bool
	antenna   *sheet.Antenna
	symmetric bool
	datum     bool // position taken as exact
	shape     *antenna.Pattern
	ports     []antenna.Port
}

type port struct {
	polar.Ellipse
	label string
	body  int
}

func (m *model) at(b int, q quantity) int { return b*int(quantities) + int(q) }

// angleToward brings an angle in radians into −π … π.
func wrap(rad float64) float64 { return math.Remainder(rad, 2*math.Pi) }

func newModel(s *sheet.Sheet) *model {
	m := &model{sheet: s, near: len(s.Near.Antennas)}
	m.rise = [2]float64{s.Path.ElevationDeg * degree, -s.Path.ElevationDeg * degree}
	for e, end := range [2]*sheet.Mount{&s.Near, &s.Far} {
		for i := range end.Antennas {
			a := &end.Antennas[i]
			b := len(m.bodies)
			made := body{far: e == 1, antenna: a, symmetric: a.Symmetric(), datum: i == 0, ports: portsOf(a)}
			made.shape = made.pattern(s.Radio.WavelengthM())
			m.bodies = append(m.bodies, made)
			for j := range a.Elements {
				m.ports[e] = append(m.ports[e], newPort(&a.Elements[j], b))
			}
			m.plan = append(m.plan, make([]float64, quantities)...)
			p := m.plan[b*int(quantities):]
			p[skew], p[tilt] = a.Skew.Planned.Deg*degree, a.Tilt.Planned.Deg*degree
			if !a.Symmetric() {
				p[azimuth] = wrap((a.Azimuth.Planned.Deg - m.bearing(e == 1)) * degree)
			}
			place := &a.Position.Planned
			p[right], p[up], p[forward] = *place.Right/1000, *place.Up/1000, *place.Forward/1000
		}
	}
	m.link = m.pair()
	return m
}

// bearing is the true bearing of an end's forward, in degrees.
func (m *model) bearing(far bool) float64 {
	if far {
		return math.Mod(m.sheet.Path.BearingDeg+180, 360)
	}
	return m.sheet.Path.BearingDeg
}

func newPort(e *sheet.Element, b int) port {
	p := port{label: e.Port, body: b}
	p.SlantRad = e.SlantDeg * degree
	if e.AxialRatioDB != nil {
		p.Axial, p.LeftHand = polar.AxialFromDB(*e.AxialRatioDB), e.Hand == "left"
	}
	if e.XPDDB != nil {
		p.Leak = polar.LeakFromDB(*e.XPDDB)
	}
	return p
}

// polarization is a port turned by its body's skew.
func (m *model) polarization(p *port, x []float64) polar.Port {
	turned := p.Port
	turned.SkewRad = x[m.at(p.body, skew)]
	return turned
}

// pair ties the ports: by the sheet's links, else by the assignment of largest
// coupling of the plan, equal sums going label to label and then in order.
func (m *model) pair() []int {
	link := make([]int, len(m.ports[0]))
	for i := range link {
		link[i] = -1
	}
	if m.sheet.Radio.Links != nil {
		for _, l := range m.sheet.Radio.Links {
			for i := range m.ports[0] {
				for j := range m.ports[1] {
					if m.ports[0][i].label == l.Near && m.ports[1][j].label == l.Far {
						link[i] = j
					}
				}
			}
		}
		return link
	}
	n, f := len(m.ports[0]), len(m.ports[1])
	worth := make([][]float64, n)
	for i := range worth {
		worth[i] = make([]float64, f)
		for j := range worth[i] {
			worth[i][j] = polar.LossFactor(m.polarization(&m.ports[0][i], m.plan), m.polarization(&m.ports[1][j], m.plan))
			if m.ports[0][i].label == m.ports[1][j].label {
				worth[i][j] += 1e-6 // only to break ties
			}
			if i == j {
				worth[i][j] += 1e-9
			}
		}
	}
	// Best assignment over subsets of far ports: 8·2⁸ steps at most. A near port may
	// stay alone where the far end has fewer.
	type state struct {
		sum  float64
		link []int
	}
	best := map[int]state{0: {0, nil}}
	for i := range n {
		next := map[int]state{}
		keep := func(taken int, s state) {
			if old, ok := next[taken]; !ok || s.sum > old.sum {
				next[taken] = s
			}
		}
		for taken := range 1 << f {
			s, ok := best[taken]
			if !ok {
				continue
			}
			keep(taken, state{s.sum, append(s.link[:len(s.link):len(s.link)], -1)})
			for j := range f {
				if taken>>j&1 == 0 {
					keep(taken|1<<j, state{s.sum + worth[i][j], append(s.link[:len(s.link):len(s.link)], j)})
				}
			}
		}
		best = next
	}
	top := state{sum: -1}
	for taken := range 1 << f {
		if s, ok := best[taken]; ok && s.sum > top.sum {
			top = s
		}
	}
	return top.link
}

// belief is what one state of the mount is known to be.
type belief struct {
	state      sheet.State
	est        []doubt.Estimate // one for each number of each body
	measured   []bool           // read, or exact by convention
	readings   int              // of the near end
	stands     bool             // there is something to judge: readings, or a bolt that moved
	looks      []int            // readings pooled for each number
	incomplete bool             // a reading of the near end is missing

	surface *surface // of the stream metrics, built when first needed
	only    []bool   // the numbers that it has axes for; nil: all
}

// believe pools the readings of a state. What was not read is the plan, with the
// doubt of a hand without a tool at this end and of an unseen crew at the far one.
// The far end is always taken in its latest state that has readings.
func (m *model) believe(state sheet.State) (*belief, *codec.Problem) {
	n := len(m.plan)
	b := &belief{state: state, est: make([]doubt.Estimate, n), measured: make([]bool, n), looks: make([]int, n)}
	for i := range m.bodies {
		body, st, eye := &m.bodies[i], state, hungByEye
		if body.far {
			st, eye = latest(body.antenna), farPlan
		}
		for q := range quantities {
			at := m.at(i, q)
			b.est[at].Value = m.plan[at]
			if q == azimuth && body.symmetric || !q.angular() && body.datum {
				b.measured[at] = true
				continue
			}
			readings, p := m.readings(i, q, st)
			if p != nil {
				return nil, p
			}
			if len(readings) == 0 {
				b.est[at].Random = eye.of(q)
				continue
			}
			b.est[at] = doubt.Pool(readings)
			b.measured[at], b.looks[at] = true, len(readings)
			if !body.far {
				b.readings += len(readings)
			}
		}
		if at := m.at(i, right); !body.datum && (b.measured[at] || b.measured[at+1] || b.measured[at+2]) {
			for q := right; q <= forward; q++ {
				if !b.measured[m.at(i, q)] {
					b.est[m.at(i, q)].Random = onTheBarMM / 1000.0
				}
			}
		}
		m.correctLevel(b, i, st)
	}
	b.stands = b.readings > 0 || state == sheet.AsLeft && m.turned()
	b.incomplete = len(m.missing(b)) > 0
	return b, m.apart(b)
}

// turned tells whether a near bolt moved and was not read again.
func (m *model) turned() bool {
	for i := range m.near {
		a := m.bodies[i].antenna
		if a.Skew.Turned || a.Tilt.Turned || a.Azimuth.Turned || a.Position.Turned {
			return true
		}
	}
	return false
}

// latest is the latest state of an antenna that has any reading.
func latest(a *sheet.Antenna) sheet.State {
	for _, st := range [2]sheet.State{sheet.AsLeft, sheet.AsFound} {
		if len(a.Skew.At(st))+len(a.Tilt.At(st))+len(a.Azimuth.At(st))+len(a.Position.At(st)) > 0 {
			return st
		}
	}
	return sheet.Planned
}

// readings are those of one number in one state, in SI, angles near the plan so
// that 359° and 1° pool to 0°.
func (m *model) readings(i int, q quantity, state sheet.State) ([]doubt.Reading, *codec.Problem) {
	if state == sheet.Planned {
		return nil, nil
	}
	body := &m.bodies[i]
	plan := m.plan[m.at(i, q)]
	var out []doubt.Reading
	add := func(value, u float64, how *sheet.How, axis string) {
		source := how.Instrument
		if source == "" {
			source = "the " + how.Method // nobody named it: all such are one
		}
		out = append(out, doubt.Reading{Value: value, U: u, Source: source + "/" + axis, Share: biasShare(how.Method)})
	}
	if q.angular() {
		states := [3]*sheet.AngleStates{&body.antenna.Skew, &body.antenna.Tilt, &body.antenna.Azimuth}[q]
		for _, r := range states.At(state) {
			v := r.Deg * degree
			if d := body.antenna.LevelDatum; d != nil && (r.Method == "level" || r.Method == "phone") {
				v -= [3]float64{d.SkewOffsetDeg, d.TiltOffsetDeg, 0}[q] * degree
			}
			if q == azimuth {
				v -= m.bearing(body.far) * degree
			}
			if q != tilt {
				v = plan + wrap(v-plan)
			}
			add(v, r.UDeg*degree, &r.How, q.String())
		}
		return out, nil
	}
	axis := [3]string{"right", "up", "forward"}[q-right]
	for _, r := range body.antenna.Position.At(state) {
		if v := [3]*float64{r.Right, r.Up, r.Forward}[q-right]; v != nil {
			add(*v/1000, r.UMM/1000, &r.How, axis)
		}
	}
	return out, nil
}

// correctLevel turns what a level on a tilted panel's edge reads into its skew: it
// reads asin(sin skew · cos tilt).
func (m *model) correctLevel(b *belief, i int, state sheet.State) {
	body := &m.bodies[i]
	rs := body.antenna.Skew.At(state)
	if state == sheet.Planned || body.symmetric || len(rs) == 0 {
		return
	}
	for _, r := range rs {
		if r.Method != "level" && r.Method != "phone" {
			return // mixed methods: the correction is below what they disagree by
		}
	}
	e := &b.est[m.at(i, skew)]
	s := math.Sin(e.Value) / math.Cos(b.est[m.at(i, tilt)].Value)
	if math.Abs(e.Value) < math.Pi/2 && math.Abs(s) < 1 {
		e.Value = math.Asin(s)
	}
}

// apart refuses readings that put two antennas in one place.
func (m *model) apart(b *belief) *codec.Problem {
	for i := range m.near {
		for j := range i {
			if m.distance(b.values(), i, j) < 0.001 {
				return &codec.Problem{
					Code: codec.Impossible, Field: "near.antennas[" + itoa(i) + "].position_mm." + b.state.String(),
					Message: "the readings put this antenna in the place of " + m.bodies[j].antenna.ID + "; measure its position again",
				}
			}
		}
	}
	return nil
}

func (b *belief) values() []float64 {
	x := make([]float64, len(b.est))
	for i := range b.est {
		x[i] = b.est[i].Value
	}
	return x
}

func (m *model) distance(x []float64, i, j int) float64 {
	d := func(q quantity) float64 { return x[m.at(i, q)] - x[m.at(j, q)] }
	return math.Hypot(math.Hypot(d(right), d(up)), d(forward))
}

// Missing is a reading that a complete state needs and this one lacks.
type Missing struct {
	Antenna, Quantity string
	ByCompass         bool // read, but it rests on a compass
}

// missing lists the near readings that are not there.
func (m *model) missing(b *belief) []Missing {
	var out []Missing
	for i := range m.near {
		for _, q := range [4]quantity{skew, tilt, azimuth, right} {
			have := b.measured[m.at(i, q)]
			if q == right { // one axis is a reading; the others keep the doubt of the eye
				have = have || b.measured[m.at(i, up)] || b.measured[m.at(i, forward)]
			}
			steel := q == azimuth && have && m.compassOnly(i, b.state)
			if !have || steel {
				out = append(out, Missing{m.bodies[i].antenna.ID, q.String(), steel})
			}
		}
	}
	return out
}

// farFromPlan tells whether anything of the far end is taken from its plan.
func (m *model) farFromPlan(b *belief) bool {
	for i := m.near; i < len(m.bodies); i++ {
		for q := range quantities {
			if !b.measured[m.at(i, q)] {
				return true
			}
		}
	}
	return false
}

func itoa(n int) string { return string(codec.AppendNumber(nil, float64(n))) }
