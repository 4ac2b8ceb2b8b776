package verdict

import (
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/scatter"
	"crossplumb/calc/sheet"
	"crossplumb/calc/stream"
)

// metric is one number of the stream computation that a limit is about.
type metric int

const (
	effectiveStreams metric = iota
	rateShare
	envelope
	imbalance
	metrics // how many
)

// metricOf tells which metric a limit is about; ok is false for the others.
func metricOf(limit string) (metric, bool) {
	switch limit {
	case sheet.EffectiveStreams:
		return effectiveStreams, true
	case sheet.RateShare:
		return rateShare, true
	case sheet.EnvelopeCorr:
		return envelope, true
	case sheet.ChainImbalance:
		return imbalance, true
	}
	return 0, false
}

// flow is the stream computation of one sheet. Its answers are responses: the
// numbers that the sheet's limits need and no others, all of them smooth in what
// bolts change. A limit's own number is read from a response by metric.
type flow struct {
	m       *model
	setup   stream.Setup
	engine  *stream.Engine
	planned stream.Result
	local   *stream.Local // about the geometry last anchored
	near    []antenna.Body
	far     []antenna.Body
	wanted  [metrics]bool
	first   [metrics]int // where a metric's numbers begin in a response
	size    int          // of a response
	ends    [2]int       // levels of each end's chains for a combining radio; ties and none for a tied one
}

// newFlow prepares the stream computation; an error says why the link is outside
// what it can compute.
func (m *model) newFlow(measuredAt []float64) (*flow, string) {
	setup, p := m.setup(measuredAt)
	if p != nil {
		return nil, p.Message
	}
	f := &flow{m: m, setup: setup}
	f.near, f.far = m.hang(m.plan)
	near, far := m.hang(m.plan)
	var err error
	if f.engine, err = stream.New(setup, near, far); err != nil {
		return nil, err.Error()
	}
	f.planned = f.engine.Planned()
	return f, ""
}

// want makes a metric part of every response.
func (f *flow) want(k metric) {
	if f.wanted[k] {
		return
	}
	f.wanted[k], f.first[k] = true, f.size
	f.size++
	if k == imbalance {
		f.ends = [2]int{f.m.linked(), 0}
		if f.m.sheet.Radio.Combining {
			f.ends = [2]int{len(f.m.ports[0]), len(f.m.ports[1])}
		}
		f.size += f.ends[0] + f.ends[1] - 1
	}
}

// place hangs the scratch bodies at x.
func (f *flow) place(x []float64) {
	for i := range f.m.bodies {
		b := f.m.body(i, x)
		if i < f.m.near {
			f.near[i] = b
		} else {
			f.far[i-f.m.near] = b
		}
	}
}

// of picks the response out of a result, against the planned rate.
func (f *flow) of(r *stream.Result, plannedBits float64) []float64 {
	out := make([]float64, f.size)
	if f.wanted[effectiveStreams] {
		out[f.first[effectiveStreams]] = r.EffectiveStreams
	}
	if f.wanted[rateShare] {
		out[f.first[rateShare]] = r.BitsPerSHz / plannedBits
	}
	if f.wanted[envelope] {
		out[f.first[envelope]] = r.NearEnvelope
	}
	if f.wanted[imbalance] {
		f.m.chainLevels(r.MeanPower, out[f.first[imbalance]:])
	}
	return out
}

// deadChainDB stands for the level of a chain that receives nothing: beyond every
// limit, and finite.
const deadChainDB = -200

// chainLevels writes the mean level of every chain in dB: for a radio that ties its
// ports one for each tie; for one that combines one for each port of either end,
// which receives from all of the other.
func (m *model) chainLevels(power [][]float64, out []float64) {
	db := func(p float64) float64 { return math.Max(10*math.Log10(p), deadChainDB) }
	n := 0
	if !m.sheet.Radio.Combining {
		for i, j := range m.link {
			if j >= 0 {
				out[n] = db(power[j][i])
				n++
			}
		}
		return
	}
	for i := range m.ports[0] {
		sum := 0.0
		for j := range m.ports[1] {
			sum += power[j][i]
		}
		out[n] = db(sum)
		n++
	}
	for j := range m.ports[1] {
		sum := 0.0
		for i := range m.ports[0] {
			sum += power[j][i]
		}
		out[n] = db(sum)
		n++
	}
}

// metric reads a limit's number from a response: itself, within its bounds, or for
// the imbalance the larger of the two ends' differences between their strongest and
// weakest chain.
func (f *flow) metric(k metric, response []float64) float64 {
	at := f.first[k]
	switch k {
	case imbalance:
		worst := 0.0
		for _, n := range f.ends {
			least, most := math.Inf(1), math.Inf(-1)
			for _, v := range response[at : at+n] {
				least, most = math.Min(least, v), math.Max(most, v)
			}
			worst, at = math.Max(worst, most-least), at+n
		}
		return worst
	case envelope:
		return math.Min(math.Max(response[at], 0), 1)
	}
	return math.Max(response[at], 0)
}

// exact is the accurate response at x, and makes x the anchor of what follows.
func (f *flow) exact(x []float64) []float64 {
	f.place(x)
	f.local = f.engine.Around(f.near, f.far)
	r := f.local.Anchor()
	return f.of(&r, f.planned.BitsPerSHz)
}

// accurate is the accurate response at x; the anchor stays where it is. For
// geometries too far from it for nearby.
func (f *flow) accurate(x []float64) []float64 {
	f.place(x)
	r := f.engine.Evaluate(f.near, f.far)
	return f.of(&r, f.planned.BitsPerSHz)
}

// nearby is the quick response at x against the last anchor.
func (f *flow) nearby(x []float64) []float64 {
	f.place(x)
	r := f.local.Evaluate(f.near, f.far)
	return f.of(&r, f.planned.BitsPerSHz)
}

// whyNot tells why a metric does not apply to this mount; empty where it does.
func (f *flow) whyNot(k metric) string {
	if k != envelope {
		return ""
	}
	around := &f.setup.Around
	switch {
	case len(around.Reflectors) > 0:
		return "surveyed reflectors stand for the scatter, and their paths are counted one by one"
	case around.Sight && around.K >= 10:
		return "the direct path carries ten times the scattered power or more (K ≥ 10 dB): correlation of what is left decides nothing"
	case f.planned.NearEnvelope < 0:
		return "no two ports of this end have one polarization in different places"
	}
	return ""
}

// cases are how the response at x moves from the median surroundings to the narrow
// and to the wide case of their class; nil where the surroundings are no class.
func (f *flow) cases(x []float64) [][]float64 {
	if f.m.sheet.Surroundings.Class == nil {
		return nil
	}
	var around []scatter.Surroundings
	for _, which := range []scatter.Case{scatter.Median, scatter.Narrow, scatter.Wide} {
		a, p := f.m.surroundings(which)
		if p != nil {
			return nil
		}
		around = append(around, a)
	}
	planNear, planFar := f.m.hang(f.m.plan)
	near, far := f.m.hang(x)
	rs, err := stream.Glance(f.setup, around, planNear, planFar, [][2][]antenna.Body{{planNear, planFar}, {near, far}})
	if err != nil {
		return nil
	}
	median := f.of(&rs[0][1], rs[0][0].BitsPerSHz)
	var out [][]float64
	for _, r := range rs[1:] {
		shift := f.of(&r[1], r[0].BitsPerSHz)
		for k := range shift {
			shift[k] -= median[k]
		}
		out = append(out, shift)
	}
	return out
}
