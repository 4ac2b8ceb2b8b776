package wire

import (
	"crossplumb/calc/codec"
	"crossplumb/calc/fault"
	"crossplumb/calc/sheet"
)

func faultOperations() []operation {
	return []operation{
		{"fault.rank", faultRank, []string{"ITU-R P.525-4 (free space)", "Bayes' rule over forward models", "JCGM 100:2008", "priors, sizes of faults and doubts of radio figures: judgement and common practice (calc/fault)"}},
	}
}

func faultRank(v *codec.Value) (answer, *Problem) {
	s, p := sheet.Read(v)
	if v.Described() { // the sheet leaves its figures to be read here
		_, _ = fault.Read(codec.Open(v).Maybe("radio_figures"), &sheet.Sheet{})
		return codec.Obj(), nil
	}
	if p != nil {
		return nil, p
	}
	r, p := fault.Rank(s, v)
	if p != nil {
		return nil, p
	}
	list := codec.Seq()
	for i := range r.Candidates {
		c := &r.Candidates[i]
		amount := codec.Nothing()
		if c.Unit != "" {
			amount = codec.Num(c.Amount)
		}
		list.Items = append(list.Items, codec.Obj(
			codec.M("code", codec.Str(c.Code)),
			codec.M("name", codec.Str(c.Name())),
			codec.M("port", codec.MaybeStr(c.Port)),
			codec.M("end", codec.MaybeStr(c.End)),
			codec.M("odds", codec.Num(c.Odds)),
			codec.M("amount", amount),
			codec.M("unit", codec.MaybeStr(c.Unit)),
			codec.M("distance", codec.Num(c.Distance)),
			codec.M("text", codec.Str(c.Text)),
			codec.M("check_next", codec.Str(c.CheckNext)),
			codec.M("cannot_tell_from", codec.Strs(c.CannotTell)),
			codec.M("predicts", predictedAnswer(c.Predicts)),
		))
	}
	return codec.Obj(
		codec.M("candidates", list),
		codec.M("expected", predictedAnswer(r.Sound)),
		codec.M("figures", codec.Int(r.Figures)),
		codec.M("none_fits", codec.Truth(r.NoneFits)),
		codec.M("told_apart_from", codec.Num(fault.ApartFor)),
		codec.M("remarks", codec.Strs(r.Remarks)),
	), nil
}

// predictedAnswer is each figure as predicted, with its doubt, beside what was read.
func predictedAnswer(predicted []fault.Predicted) *codec.Value {
	out := codec.Seq()
	for _, q := range predicted {
		out.Items = append(out.Items, codec.Obj(
			codec.M("end", codec.Str(q.End)),
			codec.M("port", codec.MaybeStr(q.Port)),
			codec.M("figure", codec.Str(q.Figure)),
			codec.M("predicted", codec.Num(q.Value)),
			codec.M("u", codec.Num(q.Doubt)),
			codec.M("measured", codec.Num(q.Measured)),
		))
	}
	return out
}
