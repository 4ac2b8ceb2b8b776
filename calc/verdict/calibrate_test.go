package verdict

import (
	"flag"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"sort"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mathext"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// calibrate is how many simulated mounts TestCalibration judges:
//
//	go test ./calc/verdict -run '^TestCalibration$' -count=1 -v -timeout 2h -calibrate 10000
//
// prints the table of the method page. Without the flag a smaller population keeps
// the promise from breaking unseen.
var calibrate = flag.Int("calibrate", 0, "simulated mounts for the calibration table; 0 is a quick look")

// kind is one kind of mount to simulate.
type kind struct {
	name  string
	job   string
	limit string  // the limit whose true margin is drawn
	tape  float64 // doubt of its tape readings, m
}

// kinds of mount, each with each limit that it can be judged by.
var kinds = []kind{
	{"crossed pair, tied radio", "crossed-pair-go", sheet.CrossTalk, 0.003},
	{"crossed pair, tied radio", "crossed-pair-go", sheet.PointingLoss, 0.003},
	{"crossed pair, tied radio", "crossed-pair-go", sheet.SkewDeviation, 0.003},
	{"crossed pair, combining radio", "crossed-pair-skewed-combining", sheet.RateShare, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.EffectiveStreams, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.RateShare, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.ChainImbalance, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.PairAngleError, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.PointingLoss, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.TiltDeviation, 0.003},
	{"two crossed panels", "two-crossed-panels", sheet.PositionDeviation, 0.003},
	{"two omnis", "two-omnis-half-wavelength", sheet.EffectiveStreams, 0.001},
	{"two omnis", "two-omnis-half-wavelength", sheet.EnvelopeCorr, 0.001},
	{"two omnis", "two-omnis-half-wavelength", sheet.PositionDeviation, 0.001},
}

// dice are the seeded random numbers of the simulation: the table comes out the
// same each time.
type dice uint64

func (d *dice) uniform() float64 {
	*d += 0x9e3779b97f4a7c15
	z := uint64(*d)
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return (float64((z^z>>31)>>11) + 0.5) / (1 << 53)
}

func (d *dice) between(lo, hi float64) float64 { return lo + (hi-lo)*d.uniform() }

func (d *dice) normal() float64 {
	return math.Sqrt(-2*math.Log(d.uniform())) * math.Cos(2*math.Pi*d.uniform())
}

// simulated is one mount with known truth.
type simulated struct {
	j      *judge
	truth  []float64
	dice   *dice
	bias   map[string]float64 // of each instrument and quantity, in units of its own u
	state  *belief
	sheet  *sheet.Sheet
	limit  *limit
	kind   kind
	passes bool // in truth
}

const level3 = "level 3"

// methods of the simulated crew: which instrument reads what, how well.
var methods = map[quantity]struct {
	method, instrument string
	u                  float64 // rad; of a tape see kind
}{
	skew: {"level", level3, 0.4 * degree}, tilt: {"level", level3, 0.4 * degree}, azimuth: {"sun", "phone 2", 1.5 * degree},
	right: {"tape", "tape 1", 0}, up: {"tape", "tape 1", 0}, forward: {"tape", "tape 1", 0},
}

// simulate hangs a mount: true deviations far wider than the readings are good for,
// so that the readings and not the habit of crews decide; reads it once or a few
// times; and sets the limit so that the true margin is uniform within ±4u. ok is
// false where that limit would be no limit at all, such as less than none.
func simulate(t testing.TB, k kind, flows map[kind]*flow, d *dice) (m *simulated, ok bool) {
	s := load(t, k.job)
	s.Limits = []sheet.Limit{{Name: k.limit, Value: 1}}
	for _, known := range sheet.LimitKinds() {
		if known.Name == k.limit {
			s.Limits[0].AtLeast = known.AtLeast
		}
	}
	if _, flowing := metricOf(k.limit); !flowing || flows[k] != nil {
		s.Radio.NoiseFigureDB, s.Radio.SNRDB = nil, nil // the stream computation is here already, or not needed
	}
	for i := range s.Far.Antennas {
		if d.uniform() < 0.5 { // half the far ends were not measured
			a := &s.Far.Antennas[i]
			a.Skew.AsLeft, a.Tilt.AsLeft, a.Azimuth.AsLeft, a.Position.AsLeft = nil, nil, nil, nil
		}
	}
	j, p := newJudge(s)
	if p != nil {
		t.Fatal(p)
	}
	far, p := j.believe(sheet.AsLeft)
	if p != nil {
		t.Fatal(p)
	}
	if _, flowing := metricOf(k.limit); flowing {
		if flows[k] == nil {
			flows[k] = j.flow
		}
		j.flow, j.limits[0].flows, j.limits[0].whoNot = flows[k], true, ""
	}
	m = &simulated{j: j, kind: k, dice: d, sheet: s, limit: &j.limits[0], bias: map[string]float64{}}
	m.truth = append([]float64(nil), j.plan...)
	// The far end as its own belief says: readings or plan with default doubt.
	sp := spreadOf(far)
	z := make([]float64, sp.dims)
	for i := range z {
		z[i] = d.normal()
	}
	drawn := make([]float64, len(sp.base))
	sp.draw(z, drawn)
	for at := range m.truth {
		if at >= j.at(j.near, 0) {
			m.truth[at] = drawn[at]
			continue
		}
		q := quantity(at % int(quantities))
		b := &j.bodies[at/int(quantities)]
		if q == azimuth && b.symmetric || !q.angular() && b.datum {
			continue
		}
		m.truth[at] += d.between(-10, 10) * m.u(q)
	}
	for i := range s.Near.Antennas {
		a := &s.Near.Antennas[i]
		a.Skew.AsLeft, a.Tilt.AsLeft, a.Azimuth.AsLeft, a.Position.AsLeft = nil, nil, nil, nil
	}
	for n := 1 + int(3*d.uniform()); n > 0; n-- {
		m.read()
	}
	o := m.judge()
	u := o.summary[0].U
	var v float64
	if m.limit.flows {
		v = j.flow.metric(m.limit.metric, j.flow.exact(m.truth))
	} else {
		v = m.limit.value(m.truth)
	}
	margin := d.between(-4, 4) * u
	m.limit.Limit.Value = v + margin
	if m.limit.AtLeast {
		m.limit.Limit.Value = v - margin
	}
	r := m.limit.kind.Range
	if l := m.limit.Limit.Value; !(l > r.Min && l < r.Max) || math.IsInf(v, 0) {
		return nil, false
	}
	m.passes = margin >= 0
	return m, true
}

// u is how well the crew reads a quantity.
func (m *simulated) u(q quantity) float64 {
	if !q.angular() {
		return m.kind.tape
	}
	return methods[q].u
}

// read takes one more reading of everything at the near end.
func (m *simulated) read() {
	reading := func(at int, q quantity) float64 {
		how := methods[q]
		source := how.instrument + q.String() + q.axis()
		if _, known := m.bias[source]; !known {
			m.bias[source] = m.dice.normal()
		}
		share := biasShare(how.method)
		return m.truth[at] + m.u(q)*(math.Sqrt(share)*m.bias[source]+math.Sqrt(1-share)*m.dice.normal())
	}
	how := func(q quantity) sheet.How {
		return sheet.How{Method: methods[q].method, Instrument: methods[q].instrument}
	}
	for i := range m.sheet.Near.Antennas {
		a := &m.sheet.Near.Antennas[i]
		for q, st := range map[quantity]*sheet.AngleStates{skew: &a.Skew, tilt: &a.Tilt, azimuth: &a.Azimuth} {
			if q == azimuth && a.Symmetric() {
				continue
			}
			deg := reading(m.j.at(i, q), q) / degree
			if q == azimuth {
				deg += m.j.bearing(false)
			}
			st.AsLeft = append(st.AsLeft, sheet.Angle{Deg: deg, UDeg: m.u(q) / degree, How: how(q)})
		}
		if i > 0 {
			var mm [3]float64
			for k := range mm {
				q := right + quantity(k)
				mm[k] = reading(m.j.at(i, q), q) * 1000
			}
			a.Position.AsLeft = append(a.Position.AsLeft, sheet.Position{Right: &mm[0], Up: &mm[1], Forward: &mm[2], UMM: m.u(right) * 1000, How: how(right)})
		}
	}
}

func (m *simulated) judge() *outcome {
	b, p := m.j.believe(sheet.AsLeft)
	if p != nil {
		panic(p)
	}
	m.state = b
	return m.j.run(b)
}

func load(t testing.TB, name string) *sheet.Sheet {
	t.Helper()
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	doc, p := codec.Parse(in)
	if p != nil {
		t.Fatal(p)
	}
	s, p := sheet.Read(doc)
	if p != nil {
		t.Fatal(p)
	}
	return s
}

// upperBound is the 95 % upper bound of a share of which k of n were seen (Clopper
// and Pearson 1934).
func upperBound(k, n int) float64 {
	if n == 0 || k == n {
		return 1
	}
	return mathext.InvRegIncBeta(float64(k+1), float64(n-k), 0.95)
}

// tally counts verdicts against truth.
type tally struct {
	mounts, goes, falseGo, noes, falseNo int
	until, untilFalse                    int // go within ten tries, and false
}

func (a *tally) add(b tally) {
	a.mounts += b.mounts
	a.goes, a.falseGo = a.goes+b.goes, a.falseGo+b.falseGo
	a.noes, a.falseNo = a.noes+b.noes, a.falseNo+b.falseNo
	a.until, a.untilFalse = a.until+b.until, a.untilFalse+b.untilFalse
}

// TestCalibration keeps the verdict to its promise (issue of the physics): of the
// mounts called go at most 5 % truly fail, of those called no-go at most 5 % truly
// pass, by the 95 % upper bound of each share; and a crew that measures again until
// it says go does not get more.
func TestCalibration(t *testing.T) {
	n := *calibrate
	if n == 0 {
		n = 48 * len(kinds)
	}
	per := map[string]*tally{}
	var all tally
	type bin struct {
		mounts, pass int
		stated       float64
	}
	bins := make([]bin, 10)
	d := dice(20261201)
	flows := map[kind]*flow{}
	for i := range n {
		k := kinds[i%len(kinds)]
		if _, flowing := metricOf(k.limit); flowing && *calibrate == 0 && i/len(kinds)%12 != 0 {
			continue // these take a hundred times as long
		}
		var m *simulated
		for ok := false; !ok; {
			m, ok = simulate(t, k, flows, &d)
		}
		one := tally{mounts: 1}
		o := m.judge()
		b := &bins[min(int(o.joint*10), 9)]
		b.mounts++
		b.stated += o.joint
		if m.passes {
			b.pass++
		}
		switch wordOf(o.joint) {
		case Go:
			one.goes++
			if !m.passes {
				one.falseGo++
			}
		case NoGo:
			one.noes++
			if m.passes {
				one.falseNo++
			}
		}
		for try := 0; ; try++ {
			if wordOf(o.joint) == Go {
				one.until++
				if !m.passes {
					one.untilFalse++
				}
				break
			}
			if try == 9 {
				break
			}
			m.read()
			o = m.judge()
		}
		name := k.name + ", " + nameOf(k.limit)
		if per[name] == nil {
			per[name] = &tally{}
		}
		per[name].add(one)
		all.add(one)
	}

	var out strings.Builder
	percent := func(k, n int) string {
		if n == 0 {
			return "–"
		}
		return fmt.Sprintf("%.1f %% (≤ %.1f %%)", 100*float64(k)/float64(n), 100*upperBound(k, n))
	}
	row := func(name string, a *tally) {
		fmt.Fprintf(&out, "| %s | %d | %d | %s | %d | %s | %.0f %% | %s |\n", name, a.mounts, a.goes, percent(a.falseGo, a.goes), a.noes, percent(a.falseNo, a.noes),
			100*float64(a.mounts-a.goes-a.noes)/float64(a.mounts), percent(a.untilFalse, a.until))
	}
	fmt.Fprintf(&out, "| kind of mount, limit | mounts | go | of these truly fail | no-go | of these truly pass | measure again | truly fail of go after up to ten tries |\n|---|---|---|---|---|---|---|---|\n")
	var names []string
	for name := range per {
		names = append(names, name)
	}
	sort.Strings(names)
	for _, name := range names {
		row(name, per[name])
	}
	row("**all**", &all)
	fmt.Fprintf(&out, "\n| stated probability | mounts | mean stated | truly pass |\n|---|---|---|---|\n")
	for i, b := range bins {
		if b.mounts > 0 {
			fmt.Fprintf(&out, "| %.1f to %.1f | %d | %.3f | %.3f |\n", float64(i)/10, float64(i+1)/10, b.mounts, b.stated/float64(b.mounts), float64(b.pass)/float64(b.mounts))
		}
	}
	if *calibrate > 0 {
		fmt.Println(out.String())
	} else {
		t.Log("\n" + out.String())
	}
	for _, share := range []struct {
		what string
		k, n int
	}{
		{"called go and truly failing", all.falseGo, all.goes},
		{"called no-go and truly passing", all.falseNo, all.noes},
		{"called go within ten tries and truly failing", all.untilFalse, all.until},
	} {
		if share.n < all.mounts/10 {
			t.Errorf("%s: only %d of %d mounts to judge by", share.what, share.n, all.mounts)
		}
		b := upperBound(share.k, share.n)
		if *calibrate == 0 { // too few mounts for the bound: the share itself
			b = float64(share.k) / float64(max(share.n, 1))
		}
		if b > 0.05 {
			t.Errorf("%s: %d of %d, at most %.1f %%, promised 5 %%", share.what, share.k, share.n, 100*b)
		}
	}
}
