package verdict

import (
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/sheet"
)

// pattern is the antenna's pattern as package antenna computes it. Figures that a
// data sheet leaves out are those of 3GPP TR 38.901 V16.1.0 table 7.3-1 (30 dB).
func (b *body) pattern(wavelength float64) *antenna.Pattern {
	p := &b.antenna.Pattern
	or := func(x *float64, otherwise float64) float64 {
		if x != nil {
			return *x
		}
		return otherwise
	}
	out := antenna.Pattern{
		BeamwidthAz: or(p.BeamwidthAzDeg, 0) * degree, BeamwidthEl: or(p.BeamwidthElDeg, 0) * degree,
		FrontToBack: or(p.FrontToBackDB, 30), Sidelobe: or(p.SidelobeDB, 30),
		ElectricalTilt: b.antenna.ElectricalTiltDeg * degree,
	}
	switch p.Kind {
	case sheet.Panel:
		out.Kind = antenna.Panel
	case sheet.Omni:
		out.Kind = antenna.Omni
	case sheet.Dipole:
		out.Kind = antenna.Dipole
	case sheet.Dish:
		out.Kind = antenna.Dish
		out.Sidelobe = math.Min(out.Sidelobe, out.FrontToBack)
		if p.BeamwidthAzDeg == nil && p.DiameterM != nil {
			out.BeamwidthAz = antenna.DishBeamwidth(*p.DiameterM / wavelength)
		}
	case sheet.SampledCuts:
		tilted := out.ElectricalTilt
		out, _ = antenna.NewCuts(samples(&p.Cuts.Azimuth), samples(&p.Cuts.Elevation)) // the sheet has checked the cuts
		out.ElectricalTilt = tilted
	default:
		out.Kind = antenna.Isotropic
	}
	return &out
}

func samples(c *sheet.Cut) []antenna.Sample {
	out := make([]antenna.Sample, len(c.AnglesDeg))
	for i := range out {
		out[i] = antenna.Sample{Angle: c.AnglesDeg[i] * degree, Level: c.LevelsDB[i]}
	}
	return out
}
