package wire

import (
	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
	"crossplumb/calc/verdict"
)

func mountOperations() []operation {
	return []operation{
		{"mount.verdict", mountVerdict, []string{
			"JCGM 100:2008", "JCGM 101:2008", "JCGM 106:2012", "IEEE Std 145", "3GPP TR 38.901 V16.1.0",
			"default doubts, instrument bias shares and cross-talk sums: common practice",
		}},
		{"mount.fold", mountFold, []string{"pooling of all readings since the bolt last moved: common practice"}},
	}
}

// maxEntries bounds the entries of one mount that are folded at once.
const maxEntries = 10000

func mountFold(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	doc := f.Child("sheet")
	entries := f.Items("entries", 0, maxEntries)
	if p := f.Done(); p != nil {
		return nil, p
	}
	folded, p := sheet.Fold(doc, entries)
	if p != nil {
		return nil, p
	}
	return codec.Obj(codec.M("sheet", folded)), nil
}

func mountVerdict(v *codec.Value) (answer, *Problem) {
	s, p := sheet.Read(v)
	if p != nil || v.Described() {
		return nil, p
	}
	judged, p := verdict.Judge(s)
	if p != nil {
		return nil, p
	}
	return verdictAnswer(judged), nil
}

func verdictAnswer(v *verdict.Verdict) answer {
	remedies := codec.Seq()
	for _, r := range v.Remedies {
		remedies.Items = append(remedies.Items, codec.Obj(
			codec.M("antenna", codec.Str(r.Antenna)), codec.M("quantity", codec.Str(r.Quantity)), codec.M("axis", codec.MaybeStr(r.Axis)),
			codec.M("change", codec.Num(r.Change)), codec.M("unit", codec.Str(r.Unit)), codec.M("direction", codec.Str(r.Direction)),
			codec.M("text", codec.Str(r.Text)), codec.M("limit", codec.Str(r.Limit)),
			codec.M("from", codec.MaybeNum(r.From)), codec.M("to", codec.MaybeNum(r.To)),
			codec.M("word_after", codec.Str(r.WordAfter)), codec.M("probability_after", codec.Num(r.ProbabilityAfter)),
		))
	}
	missing := codec.Seq()
	for _, m := range v.Missing {
		why := "not read"
		if m.ByCompass {
			why = "compass only"
		}
		missing.Items = append(missing.Items, codec.Obj(codec.M("antenna", codec.Str(m.Antenna)), codec.M("quantity", codec.Str(m.Quantity)), codec.M("why", codec.Str(why))))
	}
	planned := codec.Seq()
	for _, x := range v.Planned {
		planned.Items = append(planned.Items, codec.Obj(codec.M("name", codec.Str(x.Name)), codec.M("value", codec.MaybeNum(x.Value))))
	}
	deciding := codec.Nothing()
	if d := v.Deciding; d != nil {
		deciding = codec.Obj(
			codec.M("antenna", codec.Str(d.Antenna)), codec.M("quantity", codec.Str(d.Quantity)), codec.M("unit", codec.Str(d.Unit)),
			codec.M("u", codec.Num(d.U)), codec.M("u_needed", codec.MaybeNum(d.UNeeded)),
		)
	}
	notJudged := codec.Seq()
	for _, n := range v.NotJudged {
		notJudged.Items = append(notJudged.Items, codec.Obj(codec.M("limit", codec.Str(n.Limit)), codec.M("why", codec.Str(n.Why))))
	}
	return codec.Obj(
		codec.M("word", codec.Str(v.Word)),
		codec.M("probability", codec.Num(v.Probability)),
		codec.M("judged", codec.Str(v.Judged.String())),
		codec.M("reason", codec.Obj(
			codec.M("code", codec.Str(v.Reason.Code)), codec.M("limit", codec.MaybeStr(v.Reason.Limit)),
			codec.M("antenna", codec.MaybeStr(v.Reason.Antenna)), codec.M("quantity", codec.MaybeStr(v.Reason.Quantity)),
			codec.M("text", codec.Str(v.Reason.Text)),
		)),
		codec.M("deciding", deciding),
		codec.M("limits", limitsAnswer(v.Limits)),
		codec.M("remedies", remedies),
		codec.M("missing", missing),
		codec.M("states", codec.Obj(
			codec.M("planned", codec.Obj(codec.M("values", planned))),
			codec.M("as_found", stateAnswer(v.AsFound)),
			codec.M("as_left", stateAnswer(v.AsLeft)),
		)),
		codec.M("geometry", geometryAnswer(&v.Geometry)),
		codec.M("far_from_plan", codec.Truth(v.FarFromPlan)),
		codec.M("surroundings", codec.Obj(codec.M("text", codec.Str(v.Around)), codec.M("sight", codec.Truth(v.Sight)))),
		codec.M("not_judged", notJudged),
	)
}

func limitsAnswer(limits []verdict.LimitOutcome) *codec.Value {
	out := codec.Seq()
	for _, l := range limits {
		out.Items = append(out.Items, codec.Obj(
			codec.M("name", codec.Str(l.Name)), codec.M("sense", codec.Str(l.Sense)), codec.M("limit", codec.Num(l.Limit)), codec.M("unit", codec.Str(l.Unit)),
			codec.M("value", codec.MaybeNum(l.Value)), codec.M("u", codec.MaybeNum(l.U)), codec.M("low", codec.MaybeNum(l.Low)), codec.M("high", codec.MaybeNum(l.High)),
			codec.M("margin", codec.MaybeNum(l.Margin)), codec.M("probability", codec.MaybeNum(l.Chance)),
			codec.M("applicable", codec.Truth(l.Applicable)), codec.M("why_not", codec.MaybeStr(l.WhyNot)),
		))
	}
	return out
}

func stateAnswer(s *verdict.StateOutcome) *codec.Value {
	if s == nil {
		return codec.Nothing()
	}
	return codec.Obj(codec.M("word", codec.Str(s.Word)), codec.M("probability", codec.Num(s.Probability)), codec.M("limits", limitsAnswer(s.Limits)))
}

func geometryAnswer(g *verdict.Geometry) *codec.Value {
	antennas := codec.Seq()
	for _, a := range g.Antennas {
		antennas.Items = append(antennas.Items, codec.Obj(
			codec.M("id", codec.Str(a.ID)), codec.M("planned", placeAnswer(&a.Planned, false)),
			codec.M("as_found", placeAnswer(a.AsFound, true)), codec.M("as_left", placeAnswer(a.AsLeft, true)),
		))
	}
	spacings := codec.Seq()
	for _, s := range g.Spacings {
		spacings.Items = append(spacings.Items, codec.Obj(
			codec.M("from", codec.Str(s.From)), codec.M("to", codec.Str(s.To)), codec.M("mm", codec.Num(s.MM)), codec.M("wavelengths", codec.Num(s.Wavelengths)),
		))
	}
	return codec.Obj(codec.M("antennas", antennas), codec.M("wavelength_mm", codec.Num(g.WavelengthMM)), codec.M("spacings", spacings))
}

func placeAnswer(p *verdict.Place, doubt bool) *codec.Value {
	if p == nil {
		return codec.Nothing()
	}
	out := codec.Obj(
		codec.M("right_mm", codec.Num(p.RightMM)), codec.M("up_mm", codec.Num(p.UpMM)), codec.M("forward_mm", codec.Num(p.ForwardMM)),
		codec.M("azimuth_deg", codec.Num(p.AzimuthDeg)), codec.M("tilt_deg", codec.Num(p.TiltDeg)), codec.M("skew_deg", codec.Num(p.SkewDeg)),
	)
	if doubt {
		out.Members = append(out.Members,
			codec.M("u_right_mm", codec.Num(p.URightMM)), codec.M("u_up_mm", codec.Num(p.UUpMM)), codec.M("u_forward_mm", codec.Num(p.UForwardMM)),
			codec.M("u_azimuth_deg", codec.Num(p.UAzimuthDeg)), codec.M("u_tilt_deg", codec.Num(p.UTiltDeg)), codec.M("u_skew_deg", codec.Num(p.USkewDeg)),
		)
	}
	return out
}
