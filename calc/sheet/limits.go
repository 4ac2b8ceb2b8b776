package sheet

import "crossplumb/calc/codec"

// LimitKind is what a sheet can ask for.
type LimitKind struct {
	Name    string
	AtLeast bool
	Unit    string
	Range   codec.Range
}

// The names of the limits.
const (
	EffectiveStreams  = "effective_streams"
	RateShare         = "rate_share"
	EnvelopeCorr      = "envelope_correlation"
	PointingLoss      = "pointing_loss_db"
	CrossTalk         = "crosstalk_db"
	ChainImbalance    = "chain_imbalance_db"
	PairAngleError    = "pair_angle_error_deg"
	SkewDeviation     = "skew_deviation_deg"
	TiltDeviation     = "tilt_deviation_deg"
	AzimuthDeviation  = "azimuth_deviation_deg"
	PositionDeviation = "position_deviation_mm"
)

// LimitKinds returns every limit that a sheet can name, in the order of a report.
func LimitKinds() []LimitKind {
	return []LimitKind{
		{EffectiveStreams, true, "streams", codec.Between(0, 8)},
		{RateShare, true, "of planned", codec.Between(0, 1)},
		{CrossTalk, true, "dB", codec.Between(0, 60)},
		{EnvelopeCorr, false, "", codec.Above(0, 1)},
		{PointingLoss, false, "dB", codec.Above(0, 60)},
		{ChainImbalance, false, "dB", codec.Above(0, 60)},
		{PairAngleError, false, "deg", codec.Above(0, 90)},
		{SkewDeviation, false, "deg", codec.Above(0, 90)},
		{TiltDeviation, false, "deg", codec.Above(0, 90)},
		{AzimuthDeviation, false, "deg", codec.Above(0, 180)},
		{PositionDeviation, false, "mm", codec.Above(0, 100000)},
	}
}

func readLimits(items []*codec.Value) ([]Limit, *codec.Problem) {
	kinds := LimitKinds()
	names := make([]string, len(kinds))
	for i := range kinds {
		names[i] = kinds[i].Name
	}
	limits := make([]Limit, 0, len(items))
	seen := map[string]bool{}
	for _, item := range items {
		f := codec.Open(item)
		name := f.Choice("name", names...)
		least, most := f.MaybeNumber("at_least", codec.Any), f.MaybeNumber("at_most", codec.Any)
		l := Limit{Name: name, Reason: f.MaybeText("reason"), Field: item.Path()}
		if p := f.Done(); p != nil {
			return nil, p
		}
		if seen[name] {
			return nil, f.Refuse("name", codec.Impossible, "this limit stands twice; keep one")
		}
		seen[name] = true
		for _, k := range kinds {
			if k.Name != name {
				continue
			}
			want, other, x := "at_most", "at_least", most
			if k.AtLeast {
				want, other, x = "at_least", "at_most", least
			}
			if least != nil && most != nil || x == nil && (least != nil || most != nil) {
				return nil, f.Refuse(other, codec.Impossible, name+" is limited by "+want+" alone")
			}
			if x == nil {
				return nil, f.Refuse(want, codec.MissingField, "this limit needs its number")
			}
			number, p := item.Get(want).AsNumber(k.Range)
			if p != nil && !item.Described() {
				return nil, p
			}
			l.AtLeast, l.Value = k.AtLeast, number
		}
		limits = append(limits, l)
	}
	return limits, nil
}
