package fault

import (
	"math"
	"slices"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// ApartFor is Mahalanobis' distance from which two candidates count as told apart:
// two equal normal clouds so far apart are confused in 1.2 % of cases (Φ(−4.5/2)).
const ApartFor = 4.5

// Ranked is one candidate with its odds.
type Ranked struct {
	Code       string
	Port       string // near port of the chain it is about; empty: none
	End        string // "near", "far", or empty where the figures do not tell
	Odds       float64
	Amount     float64 // its likeliest size; 0 where it has none
	Unit       string
	Distance   float64 // of the figures from what it predicts at that size, Mahalanobis
	Predicts   []Predicted
	CannotTell []string // the names of the candidates whose predictions lie within ApartFor
	Text       string
	CheckNext  string
}

// Name tells candidates of one code apart: "feeder_lossy 1", "interference near".
func (r *Ranked) Name() string {
	name := r.Code
	if r.Port != "" {
		name += " " + r.Port
	}
	if r.Code == Interference || r.Code == WrongPower || r.Code == Imbalance {
		name += " " + r.End
	}
	return name
}

// Predicted is one figure as a candidate predicts it beside what was read.
type Predicted struct {
	End, Port, Figure      string
	Value, Doubt, Measured float64
}

// Ranking is what the figures say.
type Ranking struct {
	Candidates []Ranked // likeliest first
	Figures    int      // how many entered
	// NoneFits: even the best candidate is farther off than chance in a thousand.
	NoneFits bool
	// Sound is what a link with nothing wrong would show, whatever ranks first.
	Sound   []Predicted
	Remarks []string
}

// listed is how likely a candidate must be to be shown in full.
const listed = 1e-3

// Rank ranks what may be wrong with the link of a sheet that has radio figures.
// v is the sheet's document, for the paths of what is refused.
func Rank(s *sheet.Sheet, v *codec.Value) (*Ranking, *codec.Problem) {
	if s.RadioFigures == nil {
		return nil, &codec.Problem{Code: codec.MissingField, Field: "radio_figures", Message: "there are no radio figures in this sheet; read levels, noise or signal-to-noise ratio, streams and modulation off the radio's page"}
	}
	f, p := Read(s.RadioFigures, s)
	if p != nil {
		return nil, p
	}
	l, p := newLink(s, f, v)
	if p != nil {
		return nil, p
	}
	if l.noise == nil && f.needsNoise() {
		return nil, &codec.Problem{Code: codec.MissingField, Field: "radio.bandwidth_mhz", Message: "noise, signal-to-noise ratio, modulation, streams and ports that hear nothing can only be judged against the channel's width; give it"}
	}
	o := l.observe(f)
	if len(o) == 0 {
		return nil, s.RadioFigures.Refuse(codec.MissingField, "none of these figures can be compared with this radio; give at least received levels")
	}
	r, _ := l.rank(o, f)
	return r, nil
}

// needsNoise tells whether any figure is judged against the noise floor.
func (f *Figures) needsNoise() bool {
	for _, page := range f.Ends {
		if page == nil {
			continue
		}
		if page.Modulation != nil || page.Streams != nil {
			return true
		}
		for _, c := range page.Ports {
			if !c.Heard || c.NoiseDBm != nil || c.SNRDB != nil {
				return true
			}
		}
	}
	return false
}

// fitted is a candidate with what the figures make of it.
type fitted struct {
	candidate
	log      float64     // log of prior times likelihood
	best     int         // likeliest size
	predicts [][]float64 // what each size predicts
	bestLog  float64
	distance float64    // of the figures from what the likeliest size predicts
	cloud    *cloud     // about that prediction
	endOdds  [2]float64 // of sizes that name an end
}

func (l *link) rank(o []observation, f *Figures) (*Ranking, []fitted) {
	y := make([]float64, len(o))
	for i := range o {
		y[i] = o[i].value
	}
	all, seen := l.candidates(f), sky{}
	fits := make([]fitted, len(all))
	for i := range all {
		fits[i] = l.fit(&all[i], o, f, y, seen)
	}
	top := math.Inf(-1)
	for i := range fits {
		top = math.Max(top, fits[i].log)
	}
	sum := 0.0
	for i := range fits {
		sum += math.Exp(fits[i].log - top)
	}
	slices.SortStableFunc(fits, func(a, b fitted) int {
		switch {
		case a.log > b.log:
			return -1
		case a.log < b.log:
			return 1
		}
		return 0
	})
	r := &Ranking{Figures: len(o)}
	nearest := math.Inf(1)
	for i := range fits {
		nearest = math.Min(nearest, fits[i].distance)
	}
	for i := range fits {
		odds := math.Exp(fits[i].log-top) / sum
		if odds < listed && i > 2 {
			break
		}
		r.Candidates = append(r.Candidates, l.ranked(&fits[i], odds, o, f))
	}
	for i := range fits {
		if fits[i].code == Nothing {
			r.Sound = l.ranked(&fits[i], 0, o, f).Predicts
		}
	}
	for i := range r.Candidates {
		for k := range r.Candidates {
			if k != i && fits[i].apart(&fits[k]) < ApartFor {
				r.Candidates[i].CannotTell = append(r.Candidates[i].CannotTell, r.Candidates[k].Name())
			}
		}
	}
	r.NoneFits = nearest*nearest > chiSquared(len(o))
	r.Remarks = l.remarks(o, f)
	return r, fits
}

// fit works out what a candidate makes of the figures y.
func (l *link) fit(c *candidate, o []observation, f *Figures, y []float64, seen sky) fitted {
	out := fitted{candidate: *c, log: math.Inf(-1), bestLog: math.Inf(-1), predicts: make([][]float64, len(c.sizes))}
	logs := make([]float64, len(c.sizes))
	for k := range c.sizes {
		view := l.predict(&c.sizes[k].state)
		out.predicts[k] = view.expect(o, f)
		cloud := l.cloud(o, &view, seen)
		d := cloud.white.distance(y, out.predicts[k])
		logs[k] = math.Log(c.sizes[k].weight) - d*d/2 - cloud.logDet + math.Log(l.plain(c, &view, f))
		if logs[k] > out.bestLog {
			out.best, out.bestLog, out.distance, out.cloud = k, logs[k], d, cloud
		}
	}
	sum := 0.0
	for k := range logs {
		part := math.Exp(logs[k] - out.bestLog)
		sum += part
		if e := c.sizes[k].end; e != nil {
			out.endOdds[*e] += part
		}
	}
	out.log = math.Log(c.prior) + out.bestLog + math.Log(sum)
	return out
}

// apart is the least distance from what this candidate predicts at its likeliest
// size to anything that another can predict.
func (f *fitted) apart(other *fitted) float64 {
	least := math.Inf(1)
	for _, theirs := range other.predicts {
		least = math.Min(least, f.cloud.white.distance(f.predicts[f.best], theirs))
	}
	return least
}

// endKnown is how sure the figures must be of the end of a fault before it is
// named.
const endKnown = 0.9

func (l *link) ranked(f *fitted, odds float64, o []observation, figures *Figures) Ranked {
	best := f.sizes[f.best]
	r := Ranked{Code: f.code, Odds: odds, Amount: best.amount, Unit: best.unit, Distance: f.distance}
	if f.chain >= 0 {
		r.Port = l.ports[Near][f.chain].label
	}
	switch whole := f.endOdds[Near] + f.endOdds[Far]; {
	case f.end != nil:
		r.End = f.end.String()
	case whole > 0 && f.endOdds[Near] > endKnown*whole:
		r.End = Near.String()
	case whole > 0 && f.endOdds[Far] > endKnown*whole:
		r.End = Far.String()
	}
	y, view := f.predicts[f.best], l.predict(&best.state)
	doubts := l.covariance(o, &view)
	for k, ob := range o {
		p := Predicted{End: ob.end.String(), Figure: kindNames[ob.kind], Value: y[k], Doubt: doubts.doubt(k), Measured: ob.value}
		if ob.port >= 0 {
			p.Port = l.ports[ob.end][ob.port].label
		}
		if ob.kind == swing { // kept as a logarithm
			p.Value, p.Measured = math.Exp(y[k]), math.Exp(ob.value)
			p.Doubt *= p.Value
		}
		r.Predicts = append(r.Predicts, p)
	}
	r.Text, r.CheckNext = l.words(&r, f)
	return r
}

// chiSquared is the square of the distance that n figures of the right candidate
// exceed once in a thousand, by Wilson and Hilferty's approximation (Abramowitz
// and Stegun, 26.4.17), good to 2 % from n = 3.
func chiSquared(n int) float64 {
	const z = 3.0902 // Φ(z) = 0.999
	k := 2 / (9 * float64(n))
	return float64(n) * math.Pow(1-k+z*math.Sqrt(k), 3)
}

func (l *link) remarks(o []observation, f *Figures) []string {
	out := []string{}
	if f.PowerControlOff == nil {
		out = append(out, "Is automatic transmit power control off at both ends? While it is on, levels mean nothing.")
	}
	have := map[kind]bool{}
	for _, ob := range o {
		have[ob.kind] = true
	}
	for e, page := range f.Ends {
		if page == nil {
			out = append(out, "Only one end's figures are here: a fault of the path looks like one of the other end's transmitter until the "+End(e).String()+" end's page is read.")
		}
	}
	if l.tied && len(l.ports[Near]) > 1 && !have[xpi] {
		out = append(out, "Without the cross-polar discrimination of each port a side lobe can not be told from an obstructed path; read it where the radio shows it.")
	}
	if !have[snr] && !have[noise] {
		out = append(out, "Without noise or signal-to-noise ratio interference can not be seen.")
	}
	if !have[swing] {
		out = append(out, "Watch each level for a minute and give its swing: a contact that comes and goes shows there.")
	}
	if !l.tied {
		out = append(out, "This radio combines its chains: swapped ports and a skew common to the pair cost it nothing and are not seen in its figures.")
	}
	if l.figureAssumed && l.noise != nil {
		out = append(out, "The sheet states no noise figure; 6 dB is taken, with a doubt of 2 dB.")
	}
	return out
}
