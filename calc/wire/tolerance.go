package wire

import (
	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
	"crossplumb/calc/verdict"
)

func toleranceOperations() []operation {
	return []operation{
		{"mount.tolerances", mountTolerances, []string{"JCGM 101:2008", "JCGM 106:2012", "doubts of the planned methods: common practice"}},
	}
}

func mountTolerances(v *codec.Value) (answer, *Problem) {
	s, p := sheet.Read(v)
	if p != nil || v.Described() {
		return nil, p
	}
	t, p := verdict.Tolerate(s)
	if p != nil {
		return nil, p
	}
	box := codec.Seq()
	for _, b := range t.Box {
		box.Items = append(box.Items, codec.Obj(
			codec.M("antenna", codec.Str(b.Antenna)), codec.M("quantity", codec.Str(b.Quantity)), codec.M("axis", codec.MaybeStr(b.Axis)),
			codec.M("unit", codec.Str(b.Unit)), codec.M("u", codec.Num(b.U)),
			codec.M("together", codec.MaybeNum(b.Together)), codec.M("alone", codec.MaybeNum(b.Alone)),
		))
	}
	corner := codec.Nothing()
	if t.PlanIsGo {
		corner = codec.Obj(codec.M("deviations", codec.Nums(t.WorstCorner)), codec.M("probability", codec.Num(t.CornerProbability)))
	}
	return codec.Obj(
		codec.M("plan_is_go", codec.Truth(t.PlanIsGo)),
		codec.M("plan_probability", codec.Num(t.Probability)),
		codec.M("box", box),
		codec.M("worst_corner", corner),
		codec.M("binding_limit", codec.MaybeStr(t.Binding)),
	), nil
}
