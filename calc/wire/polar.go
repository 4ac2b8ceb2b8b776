package wire

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/polar"
)

func polarOperations() []operation {
	return []operation{
		{"polarization.loss", polarizationLoss, []string{"IEEE Std 145", "Balanis, Antenna Theory, ch. 2"}},
	}
}

const degree = math.Pi / 180

// readPort reads a port as it stands in the small operations: slant, skew and
// ellipse together.
func readPort(f *codec.Fields) polar.Port {
	p := polar.Port{
		SlantRad: f.Number("slant_deg", codec.Between(-180, 180)) * degree,
		SkewRad:  f.NumberOr("skew_deg", 0, codec.Between(-180, 180)) * degree,
	}
	axial, hand := f.MaybeNumber("axial_ratio_db", codec.Between(0, 100)), f.MaybeChoice("hand", "right", "left")
	if (axial == nil) != (hand == "") {
		f.Fail(f.Refuse("hand", codec.Impossible, "axial_ratio_db and hand belong together: give both, or null for both where the port is linear"))
	}
	if axial != nil {
		p.Axial, p.LeftHand = polar.AxialFromDB(*axial), hand == "left"
	}
	return p
}

func polarizationLoss(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	var ends [2]polar.Port
	for i, name := range [2]string{"near", "far"} {
		if c := f.Child(name); c != nil {
			g := codec.Open(c)
			ends[i] = readPort(g)
			f.Fail(g.Done())
		}
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	factor := polar.LossFactor(ends[0], ends[1])
	blind := factor < polar.Blind
	loss := codec.Nothing()
	if blind {
		factor = 0
	} else {
		loss = codec.Num(math.Max(0, -10*math.Log10(factor)))
	}
	return codec.Obj(codec.M("factor", codec.Num(factor)), codec.M("loss_db", loss), codec.M("blind", codec.Truth(blind))), nil
}
