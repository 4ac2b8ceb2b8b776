package verdict_test

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
	"crossplumb/calc/stream"
	"crossplumb/calc/verdict"
)

// job reads a sheet of testdata/jobs.
func job(t testing.TB, name string) *sheet.Sheet {
	t.Helper()
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	v, p := codec.Parse(in)
	if p != nil {
		t.Fatal(p)
	}
	s, p := sheet.Read(v)
	if p != nil {
		t.Fatal(p)
	}
	return s
}

func judged(t testing.TB, s *sheet.Sheet) *verdict.Verdict {
	t.Helper()
	v, p := verdict.Judge(s)
	if p != nil {
		t.Fatal(p)
	}
	return v
}

// outcome of one limit.
func outcome(t testing.TB, v *verdict.Verdict, name string) verdict.LimitOutcome {
	t.Helper()
	for _, l := range v.Limits {
		if l.Name == name {
			return l
		}
	}
	t.Fatalf("no limit %s", name)
	return verdict.LimitOutcome{}
}

// level is a reading of an angle with a level.
func level(deg, u float64, instrument string) sheet.Angle {
	return sheet.Angle{Deg: deg, UDeg: u, How: sheet.How{Method: "level", Instrument: instrument}}
}

func TestTheThreeWords(t *testing.T) {
	for _, row := range []struct{ job, word, code string }{
		{"crossed-pair-go", verdict.Go, verdict.AllMet},
		{"crossed-pair-no-go", verdict.NoGo, verdict.LimitMissed},
		{"crossed-pair-measure-again", verdict.MeasureAgain, verdict.Doubt},
	} {
		v := judged(t, job(t, row.job))
		if v.Word != row.word || v.Reason.Code != row.code || v.Judged != sheet.AsLeft {
			t.Errorf("%s: %s (%s) as %v, want %s (%s)", row.job, v.Word, v.Reason.Code, v.Judged, row.word, row.code)
		}
	}
}

// TestProbabilityIsTheTail: with one limit on one reading the probability is a
// tail of the normal distribution.
func TestProbabilityIsTheTail(t *testing.T) {
	s := job(t, "crossed-pair-go")
	for _, row := range []struct{ skew, u, limit float64 }{
		{1, 0.5, 2}, {2, 0.5, 2}, {1.4, 0.5, 2}, {1.2, 0.7, 2}, {-1.6, 0.3, 2}, {0, 1, 2}, {2.8, 0.5, 2},
	} {
		s.Limits = []sheet.Limit{{Name: sheet.SkewDeviation, Value: row.limit}}
		s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(row.skew, row.u, "level 3")}
		v := judged(t, s)
		below := func(x float64) float64 { return math.Erfc(-x/math.Sqrt2) / 2 }
		want := below((row.limit-row.skew)/row.u) - below((-row.limit-row.skew)/row.u)
		if math.Abs(v.Probability-want) > 0.003 {
			t.Errorf("%+v: probability %.4f, exact %.4f", row, v.Probability, want)
		}
	}
}

// TestAtTheGuard: the word changes where the probability passes 0.95 and 0.05,
// z = 1.645 standard uncertainties inside and outside the limit.
func TestAtTheGuard(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Limits = []sheet.Limit{{Name: sheet.SkewDeviation, Value: 4}}
	for _, row := range []struct {
		skew float64
		word string
	}{
		{4 - 0.5*1.75, verdict.Go}, {4 - 0.5*1.55, verdict.MeasureAgain}, {4, verdict.MeasureAgain},
		{4 + 0.5*1.55, verdict.MeasureAgain}, {4 + 0.5*1.75, verdict.NoGo},
	} {
		s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(row.skew, 0.5, "level 3")}
		if v := judged(t, s); v.Word != row.word {
			t.Errorf("skew %.3f ± 0.5, limit 4: %s (%.4f), want %s", row.skew, v.Word, v.Probability, row.word)
		}
	}
}

// TestMeasuringAgainPoolsAndDoesNotReplace: a mount exactly at its limit must not
// become go by trying ten times with the same level.
func TestMeasuringAgainPoolsAndDoesNotReplace(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Limits = []sheet.Limit{{Name: sheet.SkewDeviation, Value: 4}}
	bad := level(4.4, 0.5, "level 3")
	lucky := level(2.9, 0.5, "level 3")
	s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{lucky}
	if v := judged(t, s); v.Word != verdict.Go {
		t.Fatalf("the lucky reading alone: %s", v.Word)
	}
	s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{bad, bad, lucky}
	if v := judged(t, s); v.Word == verdict.Go {
		t.Errorf("a lucky third reading made it go (%.3f)", v.Probability)
	}
}

func TestAMissingReadingIsNeverGo(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Near.Antennas[0].Tilt.AsLeft = nil
	v := judged(t, s)
	if v.Word == verdict.Go || len(v.Missing) != 1 || v.Missing[0] != (verdict.Missing{Antenna: "A", Quantity: "tilt"}) {
		t.Errorf("%s, missing %v", v.Word, v.Missing)
	}
	if v.Reason.Code != verdict.MissingReading && v.Word != verdict.NoGo {
		t.Errorf("reason %+v", v.Reason)
	}
	s.Limits = []sheet.Limit{{Name: sheet.SkewDeviation, Value: 10}} // which the tilt has no part in
	if v := judged(t, s); v.Word != verdict.MeasureAgain || v.Probability < verdict.Guard || v.Reason.Code != verdict.MissingReading {
		t.Errorf("all limits hold, the tilt is not measured: %s (%.3f), %+v", v.Word, v.Probability, v.Reason)
	}
	s = job(t, "crossed-pair-go")
	for _, st := range []*sheet.AngleStates{&s.Near.Antennas[0].Skew, &s.Near.Antennas[0].Tilt, &s.Near.Antennas[0].Azimuth} {
		st.AsFound, st.AsLeft = nil, nil
	}
	if v := judged(t, s); v.Word == verdict.Go || v.Judged != sheet.Planned || len(v.Missing) != 3 || v.AsFound != nil {
		t.Errorf("a plan alone: %s as %v, missing %v", v.Word, v.Judged, v.Missing)
	}
}

// TestNobodyMeasuredIsNoFault: what nobody measured hangs as planned or does not;
// only readings can say no-go.
func TestNobodyMeasuredIsNoFault(t *testing.T) {
	s := job(t, "two-omnis-half-wavelength")
	s.Limits = s.Limits[2:] // position within 5 mm, hung by eye to 50
	s.Near.Antennas[1].Position.AsLeft = nil
	v := judged(t, s)
	if v.Word != verdict.MeasureAgain || v.Reason.Code != verdict.MissingReading || v.Reason.Quantity != "position" {
		t.Errorf("position not measured: %s, %+v", v.Word, v.Reason)
	}
	s = job(t, "crossed-pair-no-go")
	s.Near.Antennas[0].Tilt.AsLeft = nil
	if v := judged(t, s); v.Word != verdict.NoGo {
		t.Errorf("8° of skew measured, tilt not: %s, %+v", v.Word, v.Reason)
	}
}

// TestDoubtOfAnAxisNotTaped: an axis that nobody taped hangs on the bar that another
// axis was taped along, 10 mm; an antenna that nobody taped at all hangs by eye, 50 mm
// (both common practice).
func TestDoubtOfAnAxisNotTaped(t *testing.T) {
	s := job(t, "two-crossed-panels")
	b := &s.Near.Antennas[1].Position
	right := *b.Planned.Right
	b.AsLeft = []sheet.Position{{Right: &right, UMM: 3, How: sheet.How{Method: "tape"}}}
	v := judged(t, s)
	if g := v.Geometry.Antennas[1].AsLeft; math.Abs(g.URightMM-3) > 1e-9 || math.Abs(g.UUpMM-10) > 1e-9 || math.Abs(g.UForwardMM-10) > 1e-9 || len(v.Missing) != 0 {
		t.Errorf("taped along one axis: %+v, missing %v", g, v.Missing)
	}
	b.AsLeft = nil
	v = judged(t, s)
	if g := v.Geometry.Antennas[1].AsLeft; math.Abs(g.URightMM-50) > 1e-9 || math.Abs(g.UUpMM-50) > 1e-9 || len(v.Missing) != 1 {
		t.Errorf("not taped: %+v, missing %v", g, v.Missing)
	}
}

// TestTheSameSkewTwoRadios: 8° of common skew. The tied radio is disturbed, the
// combining one is not, and the tool says so instead of calling it a fault.
func TestTheSameSkewTwoRadios(t *testing.T) {
	tied := judged(t, job(t, "crossed-pair-no-go"))
	if l := outcome(t, tied, sheet.CrossTalk); tied.Word != verdict.NoGo || !l.Applicable || math.Abs(*l.Value-16.42) > 0.05 {
		t.Errorf("tied: %s, %+v", tied.Word, l)
	}
	s := job(t, "crossed-pair-no-go")
	s.Radio.Combining = true
	combining := judged(t, s)
	if l := outcome(t, combining, sheet.CrossTalk); combining.Word != verdict.Go || l.Applicable || l.WhyNot == "" {
		t.Errorf("combining: %s, %+v", combining.Word, l)
	}
}

// TestDecidingReading: the reading that decides is named, and with the doubt said
// to be needed the word does come out.
func TestDecidingReading(t *testing.T) {
	s := job(t, "crossed-pair-measure-again")
	v := judged(t, s)
	d := v.Deciding
	if d == nil || d.Antenna != "A" || d.Quantity != "skew" || d.UNeeded == nil {
		t.Fatalf("deciding %+v", d)
	}
	s.Near.Antennas[0].Skew.AsLeft[0].UDeg = *d.UNeeded * 0.98
	if w := judged(t, s); w.Word == verdict.MeasureAgain {
		t.Errorf("with ±%.3f° still %s (%.3f)", *d.UNeeded, w.Word, w.Probability)
	}
	s.Near.Antennas[0].Skew.AsLeft[0].UDeg = *d.UNeeded * 1.1
	if w := judged(t, s); w.Word != verdict.MeasureAgain {
		t.Errorf("with ±%.3f° already %s (%.3f)", *d.UNeeded*1.1, w.Word, w.Probability)
	}
}

// TestTheFarEndDecides: where the near readings are good and the far end is its
// plan, no near reading is blamed; not even a usual level's (common practice:
// ±0.3°), which no better level could turn into a word.
func TestTheFarEndDecides(t *testing.T) {
	for _, u := range []float64{0.05, 0.3} {
		s := job(t, "crossed-pair-go")
		s.Limits = []sheet.Limit{{Name: sheet.CrossTalk, AtLeast: true, Value: 24.5}}
		s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(0.1, u, "level 3")}
		f := &s.Far.Antennas[0]
		f.Skew.AsLeft, f.Tilt.AsLeft, f.Azimuth.AsLeft = nil, nil, nil
		v := judged(t, s)
		if v.Word != verdict.MeasureAgain || v.Deciding != nil || !v.FarFromPlan || !strings.Contains(v.Reason.Text, "the far end decides") {
			t.Errorf("±%g°: %s (%.3f), deciding %+v: %s", u, v.Word, v.Probability, v.Deciding, v.Reason.Text)
		}
	}
}

// TestRemediesDoWhatTheyPromise applies the first remedy to the sheet and judges
// again.
func TestRemediesDoWhatTheyPromise(t *testing.T) {
	for _, name := range []string{"crossed-pair-no-go", "crossed-pair-measure-again"} {
		s := job(t, name)
		v := judged(t, s)
		if len(v.Remedies) == 0 {
			t.Fatalf("%s: no remedy", name)
		}
		r := v.Remedies[0]
		if r.Quantity != "skew" || r.Antenna != "A" {
			t.Fatalf("%s: first remedy %+v", name, r)
		}
		s.Near.Antennas[0].Skew.AsLeft[0].Deg += r.Change
		after := judged(t, s)
		if after.Word != r.WordAfter || math.Abs(after.Probability-r.ProbabilityAfter) > 1e-3 {
			t.Errorf("%s: promised %s (%.4f), got %s (%.4f)", name, r.WordAfter, r.ProbabilityAfter, after.Word, after.Probability)
		}
		if got := outcome(t, after, r.Limit).Value; math.Abs(*got-*r.To) > 1e-3 {
			t.Errorf("%s: promised %s of %.3f, got %.3f", name, r.Limit, *r.To, *got)
		}
	}
}

// TestTheMirrorInTheVerdict: a skew at one end is undone by the same skew the
// other way in the far end's own view, not by the same sign.
func TestTheMirrorInTheVerdict(t *testing.T) {
	s := job(t, "crossed-pair-no-go")
	s.Limits = []sheet.Limit{{Name: sheet.CrossTalk, AtLeast: true, Value: 20}}
	far := &s.Far.Antennas[0].Skew
	far.AsLeft = []sheet.Angle{level(-8, 0.3, "level 7")}
	if v := judged(t, s); v.Word != verdict.Go {
		t.Errorf("8° clockwise here, 8° anticlockwise there: %s (%.3f), want go", v.Word, v.Probability)
	}
	far.AsLeft = []sheet.Angle{level(8, 0.3, "level 7")}
	if v := judged(t, s); v.Word != verdict.NoGo {
		t.Errorf("8° clockwise at both ends: %s (%.3f), want no-go: they add up", v.Word, v.Probability)
	}
}

// TestOneInstrumentIsOneBias: two antennas read by one level. Its bias turns both
// alike and leaves the angle between them alone.
func TestOneInstrumentIsOneBias(t *testing.T) {
	u := func(a, b string) float64 {
		s := job(t, "two-crossed-panels")
		s.Limits = []sheet.Limit{{Name: sheet.PairAngleError, Value: 5}}
		s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(0, 0.4, a)}
		s.Near.Antennas[1].Skew.AsLeft = []sheet.Angle{level(2, 0.4, b)}
		return *outcome(t, judged(t, s), sheet.PairAngleError).U
	}
	same, other := u("level 3", "level 3"), u("level 3", "level 9")
	// half of each variance is bias: 0.4·√(2·½) against 0.4·√2
	if math.Abs(same-0.4) > 0.01 || math.Abs(other-0.4*math.Sqrt2) > 0.01 {
		t.Errorf("angle error known to %.3f° by one level, %.3f° by two; want 0.400 and 0.566", same, other)
	}
}

// TestALevelOnATiltedEdge: on a panel tilted 20° a level on the side edge reads
// asin(sin skew · cos tilt).
func TestALevelOnATiltedEdge(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Near.Antennas[0].Tilt.AsLeft = []sheet.Angle{level(-20, 0.3, "level 3")}
	reads := math.Asin(math.Sin(5*math.Pi/180)*math.Cos(20*math.Pi/180)) * 180 / math.Pi
	s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(reads, 0.3, "level 3")}
	v := judged(t, s)
	if got := v.Geometry.Antennas[0].AsLeft.SkewDeg; math.Abs(got-5) > 1e-9 {
		t.Errorf("skew %.6f°, want 5", got)
	}
	s.Near.Antennas[0].LevelDatum = &sheet.LevelDatum{SkewOffsetDeg: 1.5, TiltOffsetDeg: 2}
	s.Near.Antennas[0].Tilt.AsLeft = []sheet.Angle{level(2, 0.3, "level 3")}
	s.Near.Antennas[0].Skew.AsLeft = []sheet.Angle{level(6.5, 0.3, "level 3")}
	v = judged(t, s)
	if g := v.Geometry.Antennas[0].AsLeft; math.Abs(g.SkewDeg-5) > 1e-9 || math.Abs(g.TiltDeg) > 1e-9 {
		t.Errorf("with the flat's own offset: skew %.4f° tilt %.4f°, want 5 and 0", g.SkewDeg, g.TiltDeg)
	}
}

func TestBearingsPoolAcrossNorth(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Path.BearingDeg = 0
	s.Near.Antennas[0].Azimuth.Planned.Deg = 0
	s.Near.Antennas[0].Azimuth.AsLeft = []sheet.Angle{level(359, 1, "a"), level(1, 1, "b")}
	s.Far.Antennas[0].Azimuth = sheet.AngleStates{Planned: sheet.Angle{Deg: 180}}
	v := judged(t, s)
	if got := v.Geometry.Antennas[0].AsLeft.AzimuthDeg; math.Min(got, 360-got) > 1e-9 {
		t.Errorf("359° and 1° pool to %g°", got)
	}
}

// TestAnOmniLeansForward: an omni's tilt is its lean to the front, which lowers its
// beam there: toward a far end above it loses, toward one below it gains. Both the
// pointing loss and the bodies of the stream computation take it so.
func TestAnOmniLeansForward(t *testing.T) {
	for _, row := range []struct{ rise, want float64 }{{5, 12 * 10 * 10 / (22.0 * 22)}, {-5, 0}} {
		s := job(t, "two-omnis-half-wavelength")
		s.Limits = []sheet.Limit{{Name: sheet.PointingLoss, Value: 1}}
		s.Path.ElevationDeg = row.rise
		for i := range s.Near.Antennas {
			s.Near.Antennas[i].Tilt.AsLeft = []sheet.Angle{level(5, 0.05, "level 3")}
			s.Near.Antennas[i].Skew.AsLeft = []sheet.Angle{level(0, 0.05, "level 3")}
		}
		if got := *outcome(t, judged(t, s), sheet.PointingLoss).Value; math.Abs(got-row.want) > 0.06 {
			t.Errorf("leaning 5° forward, far end at %g°: %.3f dB, want %.3f", row.rise, got, row.want)
		}
		link, p := verdict.NewLink(s)
		if p != nil {
			t.Fatal(p)
		}
		e, err := stream.New(link.Setup, link.Near[sheet.AsLeft], link.Far[sheet.AsLeft])
		if err != nil {
			t.Fatal(err)
		}
		if got := e.Planned().NearPointing[0]; math.Abs(got-row.want) > 0.01 {
			t.Errorf("the stream computation, far end at %g°: %.3f dB, want %.3f", row.rise, got, row.want)
		}
	}
}

// TestTheLeanOfARodInWords: a rod has no boresight to tilt up or down; what helps one
// that leans 6° forward and 4° to the right is to lean it back and to the left.
func TestTheLeanOfARodInWords(t *testing.T) {
	s := job(t, "two-omnis-half-wavelength")
	s.Limits = []sheet.Limit{{Name: sheet.TiltDeviation, Value: 2}, {Name: sheet.SkewDeviation, Value: 2}}
	for i := range s.Near.Antennas {
		s.Near.Antennas[i].Tilt.AsLeft = []sheet.Angle{level(0, 0.1, "level 3")}
		s.Near.Antennas[i].Skew.AsLeft = []sheet.Angle{level(0, 0.1, "level 3")}
	}
	b := &s.Near.Antennas[1]
	b.Tilt.AsLeft[0].Deg = 6
	if r := judged(t, s).Remedies[0]; r.Quantity != "tilt" || r.Change >= 0 || r.Direction != "back" || !strings.HasPrefix(r.Text, "Lean "+b.ID) || !strings.HasSuffix(r.Text, "° back") {
		t.Errorf("leaning forward: %+v", r)
	}
	b.Tilt.AsLeft[0].Deg, b.Skew.AsLeft[0].Deg = 0, 4
	if r := judged(t, s).Remedies[0]; r.Quantity != "skew" || r.Change >= 0 || r.Direction != "left" || !strings.HasSuffix(r.Text, "° to the left") {
		t.Errorf("leaning right: %+v", r)
	}
}

func TestReadingsInOnePlaceAreRefused(t *testing.T) {
	s := job(t, "two-crossed-panels")
	zero := 0.0
	s.Near.Antennas[1].Position.AsLeft = []sheet.Position{{Right: &zero, Up: &zero, Forward: &zero, UMM: 3, How: sheet.How{Method: "tape"}}}
	_, p := verdict.Judge(s)
	if p == nil || p.Code != codec.Impossible || p.Field != "near.antennas[1].position_mm.as_left" {
		t.Errorf("problem %v", p)
	}
}

func TestNoLimitThatApplies(t *testing.T) {
	s := job(t, "crossed-pair-skewed-combining")
	s.Limits = []sheet.Limit{{Name: sheet.CrossTalk, AtLeast: true, Value: 20}}
	if _, p := verdict.Judge(s); p == nil || p.Code != codec.Impossible || p.Field != "limits" {
		t.Errorf("problem %v", p)
	}
}

// The crossed pair that hangs 8° off on a radio that ties port to port.
func ExampleJudge() {
	in, _ := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", "crossed-pair-no-go.json"))
	doc, _ := codec.Parse(in)
	s, _ := sheet.Read(doc)
	v, _ := verdict.Judge(s)
	fmt.Println(v.Word + ": " + v.Reason.Text)
	fmt.Printf("%s: %.0f dB, %s\n", v.Remedies[0].Text, *v.Remedies[0].To, v.Remedies[0].WordAfter)
	// Output:
	// no-go: Cross-talk is 16.4 dB, the limit is at least 20.0 dB.
	// Turn A 8.2° anticlockwise: 27 dB, go
}

// BenchmarkJudge is the full verdict of each job: both states, doubt, remedies.
func BenchmarkJudge(b *testing.B) {
	for _, name := range []string{"crossed-pair-go", "crossed-pair-no-go", "crossed-pair-measure-again", "crossed-pair-skewed-combining", "two-omnis-half-wavelength", "two-crossed-panels", "four-crossed-panels"} {
		b.Run(name, func(b *testing.B) {
			s := job(b, name)
			for b.Loop() {
				judged(b, s)
			}
		})
	}
	b.Run("four-crossed-panels, nothing measured", func(b *testing.B) {
		s := job(b, "four-crossed-panels")
		for i := range s.Near.Antennas {
			a := &s.Near.Antennas[i]
			a.Skew.AsLeft, a.Tilt.AsLeft, a.Azimuth.AsLeft, a.Position.AsLeft = nil, nil, nil, nil
		}
		for b.Loop() {
			judged(b, s)
		}
	})
}
