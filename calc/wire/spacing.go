package wire

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/scatter"
	"crossplumb/calc/sheet"
)

func spacingOperations() []operation {
	return []operation{
		{"spacing.wavelengths", spacingWavelengths, []string{"Balanis, Antenna Theory, ch. 6", "SI Brochure (speed of light)"}},
		{"scatter.correlation", scatterCorrelation, []string{"Abramowitz and Stegun 9.1.42-45", "Abdi and Kaveh 2002", "Salz and Winters 1994"}},
	}
}

func spacingWavelengths(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	r := sheet.Radio{FrequencyMHz: f.Number("frequency_mhz", sheet.FrequencyMHz)}
	var mm [3]float64
	if c := f.Child("spacing_mm"); c != nil {
		g := codec.Open(c)
		for i, axis := range [3]string{"right", "up", "forward"} {
			mm[i] = g.NumberOr(axis, 0, codec.Between(-1e6, 1e6))
		}
		f.Fail(g.Done())
	}
	off := f.NumberOr("off_broadside_deg", 0, codec.Between(-180, 180))
	if p := f.Done(); p != nil {
		return nil, p
	}
	wavelength := r.WavelengthM() * 1000
	s := scatter.Spacing{Right: mm[0] / wavelength, Up: mm[1] / wavelength, Forward: mm[2] / wavelength}
	width := codec.Nothing()
	if rad, ok := scatter.TwoElementBeamwidth(s.Length()); ok {
		width = codec.Num(rad / degree)
	}
	lobes := codec.Seq()
	for _, a := range scatter.GratingLobes(s.Length(), 8) {
		lobes.Items = append(lobes.Items, codec.Num(a/degree))
	}
	return codec.Obj(
		codec.M("wavelength_mm", codec.Num(wavelength)),
		codec.M("wavelengths", codec.Obj(codec.M("right", codec.Num(s.Right)), codec.M("up", codec.Num(s.Up)), codec.M("forward", codec.Num(s.Forward)))),
		codec.M("length_wavelengths", codec.Num(s.Length())),
		codec.M("effective_wavelengths", codec.Num(s.Effective(off*degree))),
		codec.M("two_element_beamwidth_deg", width),
		codec.M("grating_lobes_deg", lobes),
	), nil
}

func scatterCorrelation(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	d := f.Number("spacing_wavelengths", codec.Between(0, 1000))
	kind := f.Choice("spectrum", "uniform2d", "uniform3d", "laplacian", "gaussian", "vonmises", "uniform")
	spread := f.MaybeNumber("spread_deg", codec.Range{Min: 0, OpenMin: true, Max: 180, Suggestion: "the standard deviation of the arrival angles before they are cut at 180° either side; where all arrivals are one, use a small spread such as 0.001"})
	kappa := f.MaybeNumber("kappa", codec.Between(0, 1e9))
	turning := kind != "uniform2d" && kind != "uniform3d"
	off := f.NumberOr("off_broadside_deg", 0, codec.Between(-180, 180))
	if p := f.Done(); p != nil {
		return nil, p
	}
	var s scatter.Spectrum
	switch {
	case kappa != nil && kind != "vonmises":
		return nil, f.Refuse("kappa", codec.Impossible, "kappa belongs to the spectrum \"vonmises\"; give spread_deg instead")
	case kappa != nil && spread != nil:
		return nil, f.Refuse("kappa", codec.Impossible, "give spread_deg or kappa, not both")
	case turning && kappa == nil && spread == nil:
		return nil, f.Refuse("spread_deg", codec.MissingField, "this spectrum needs its spread")
	case !turning && spread != nil:
		return nil, f.Refuse("spread_deg", codec.Impossible, "a spectrum from all round has no spread; leave it null")
	}
	if spread != nil {
		s.SpreadRad = *spread * degree
	}
	switch kind {
	case "uniform2d":
		s.Kind = scatter.SpectrumUniform2D
	case "uniform3d":
		s.Kind = scatter.SpectrumUniform3D
	case "laplacian":
		s.Kind = scatter.SpectrumLaplacian
	case "gaussian":
		s.Kind = scatter.SpectrumGaussian
	case "uniform":
		s.Kind = scatter.SpectrumSector
		if s.SpreadRad > scatter.SpectrumSectorMaxRad {
			return nil, f.Refuse("spread_deg", codec.OutOfRange, "a uniform sector spreads at most 103.9°; use \"uniform2d\" for all round")
		}
	case "vonmises":
		s.Kind = scatter.SpectrumVonMises
		if kappa != nil {
			s.Kappa = *kappa
		} else if s.Kappa = scatter.KappaOfSpread(s.SpreadRad); s.Kappa > 1e9 {
			return nil, f.Refuse("spread_deg", codec.OutOfRange, "must be at least 0.002 for this spectrum")
		}
	}
	rho := scatter.Correlation(s, d, off*degree)
	envelope := scatter.Envelope(rho)
	return codec.Obj(
		codec.M("rho_re", codec.Num(real(rho))),
		codec.M("rho_im", codec.Num(imag(rho))),
		codec.M("rho_abs", codec.Num(math.Hypot(real(rho), imag(rho)))),
		codec.M("envelope", codec.Num(envelope)),
	), nil
}
