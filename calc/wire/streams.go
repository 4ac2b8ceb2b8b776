package wire

import (
	"math"

	"crossplumb/calc/codec"
	"crossplumb/calc/scatter"
	"crossplumb/calc/sheet"
	"crossplumb/calc/stream"
	"crossplumb/calc/verdict"
)

func streamsOperations() []operation {
	return []operation{{"mount.streams", mountStreams, []string{
		scatter.ClassSource, "Telatar, Eur. Trans. Telecommun. 10 (1999)", "Shiu et al. 2000 (effective streams)",
		"Balanis, Antenna Theory, ch. 8 (mutual impedance)", "Bøhagen, Orten and Øien 2007 (exact distances)",
	}}}
}

// beamStep is the step of the beams' azimuths; a 4-wavelength array has lobes of 7°.
const beamStep = 1

func mountStreams(v *codec.Value) (answer, *Problem) {
	s, p := sheet.Read(v)
	if p != nil {
		return nil, p
	}
	link, p := verdict.NewLink(s)
	if p != nil {
		return nil, p
	}
	engine, err := stream.New(link.Setup, link.Near[sheet.Planned], link.Far[sheet.Planned])
	if err != nil {
		return nil, &Problem{Code: codec.NotModelled, Message: err.Error()}
	}
	near, far := labels(&s.Near), labels(&s.Far)
	out := codec.Obj(
		codec.M("sight", codec.Truth(s.Surroundings.Sight)),
		codec.M("snr_db", codec.Num(decibels(link.Setup.SNR))),
		codec.M("power", codec.Str(s.Radio.Power)),
		codec.M("near_ports", codec.Strs(near)),
		codec.M("far_ports", codec.Strs(far)),
	)
	rates := codec.Obj()
	judged := sheet.Planned
	var last stream.Result
	states := codec.Obj()
	for st := sheet.Planned; st <= sheet.AsLeft; st++ {
		if !link.Measured[st] {
			rates.Set(st.String(), codec.Nothing())
			states.Set(st.String(), codec.Nothing())
			continue
		}
		r := engine.Planned()
		if st != sheet.Planned {
			r = engine.Evaluate(link.Near[st], link.Far[st])
		}
		detail := engine.Detail(link.Near[st], link.Far[st])
		rates.Set(st.String(), codec.Num(r.BitsPerSHz))
		states.Set(st.String(), streamState(&r, &detail, near, far))
		judged, last = st, r
	}
	out.Set("judged", codec.Str(judged.String()))
	out.Set("bits_per_s_hz", rates)
	out.Set("rate_multiple", codec.Num(last.RateMultiple))
	out.Set("effective_streams", codec.Num(last.EffectiveStreams))
	out.Set("states", states)
	var azimuths, degrees []float64
	for d := -180; d <= 180; d += beamStep {
		degrees = append(degrees, float64(d))
		azimuths = append(azimuths, float64(d)*degree)
	}
	out.Set("beam_azimuths_deg", codec.Nums(degrees))
	for _, end := range []struct {
		name string
		near bool
	}{{"near_streams", true}, {"far_streams", false}} {
		list, err := engine.Streams(link.Near[judged], link.Far[judged], end.near, azimuths)
		if err != nil {
			return nil, &Problem{Code: codec.Internal, Message: err.Error()}
		}
		out.Set(end.name, streamList(list))
	}
	out.Set("cases", classCases(s, link, judged))
	out.Set("notes", codec.Strs(streamNotes(s, engine)))
	return out, nil
}

func labels(m *sheet.Mount) []string {
	var out []string
	for i := range m.Antennas {
		for j := range m.Antennas[i].Elements {
			out = append(out, m.Antennas[i].Elements[j].Port)
		}
	}
	return out
}

func streamState(r *stream.Result, d *stream.Detail, near, far []string) *codec.Value {
	power := codec.Seq()
	for _, row := range r.MeanPower {
		line := codec.Seq()
		for _, x := range row {
			line.Items = append(line.Items, codec.Num(decibels(math.Max(x, 1e-20))))
		}
		power.Items = append(power.Items, line)
	}
	envelope := func(x float64) *codec.Value {
		if x < 0 {
			return codec.Nothing()
		}
		return codec.Num(x)
	}
	return codec.Obj(
		codec.M("bits_per_s_hz", codec.Num(r.BitsPerSHz)),
		codec.M("standard_error", codec.Num(r.StandardError)),
		codec.M("effective_streams", codec.Num(r.EffectiveStreams)),
		codec.M("single_chain_bits_per_s_hz", codec.Num(r.SingleChain)),
		codec.M("best_pair", codec.Obj(codec.M("near", codec.Str(near[r.BestPair[0]])), codec.M("far", codec.Str(far[r.BestPair[1]])))),
		codec.M("rate_multiple", codec.Num(r.RateMultiple)),
		codec.M("condition_db", codec.Num(d.ConditionDB)),
		codec.M("near_envelope", envelope(r.NearEnvelope)),
		codec.M("far_envelope", envelope(r.FarEnvelope)),
		codec.M("mean_power_db", power),
		codec.M("near_pointing_loss_db", codec.Nums(r.NearPointing)),
		codec.M("far_pointing_loss_db", codec.Nums(r.FarPointing)),
		codec.M("near_correlation", matrix(d.NearCorrelation, len(near))),
		codec.M("far_correlation", matrix(d.FarCorrelation, len(far))),
		codec.M("near_covariance_v", matrix(d.NearV, len(near))),
		codec.M("near_covariance_h", matrix(d.NearH, len(near))),
		codec.M("far_covariance_v", matrix(d.FarV, len(far))),
		codec.M("far_covariance_h", matrix(d.FarH, len(far))),
	)
}

// matrix is rows of [re, im], null for none.
func matrix(r []complex128, n int) *codec.Value {
	if r == nil {
		return codec.Nothing()
	}
	rows := codec.Seq()
	for i := range n {
		row := codec.Seq()
		for j := range n {
			row.Items = append(row.Items, pairOf(r[i*n+j]))
		}
		rows.Items = append(rows.Items, row)
	}
	return rows
}

func pairOf(z complex128) *codec.Value {
	return codec.Seq(codec.Num(real(z)+0), codec.Num(imag(z)+0)) // + 0 turns −0 into 0
}

func streamList(list []stream.Stream) *codec.Value {
	out := codec.Seq()
	for _, s := range list {
		weights := codec.Seq()
		for _, w := range s.Weights {
			weights.Items = append(weights.Items, pairOf(w))
		}
		beam := make([]float64, len(s.Beam))
		for i, b := range s.Beam {
			beam[i] = math.Round(b*100) / 100 // drawn, not computed with
		}
		out.Items = append(out.Items, codec.Obj(
			codec.M("gain_db", codec.Num(decibels(math.Max(s.Gain, 1e-20)))),
			codec.M("share", codec.Num(s.Share)),
			codec.M("weights", weights),
			codec.M("beam_db", codec.Nums(beam)),
		))
	}
	return out
}

// classCases are rate and streams of the state judged in the 10 % and 90 % cases of a class; null without one.
func classCases(s *sheet.Sheet, link *verdict.Link, judged sheet.State) *codec.Value {
	class := s.Surroundings.Class
	if class == nil {
		return codec.Nothing()
	}
	c := scatter.Class{
		Sight: s.Surroundings.Sight, CarrierGHz: s.Radio.FrequencyMHz / 1000,
		Distance: link.Setup.Distance * math.Cos(link.Setup.Elevation),
		Scenario: scatter.ScenarioOf(class.Scenario),
	}
	out := codec.Seq()
	for _, which := range []struct {
		name string
		scatter.Case
	}{{"10 % (narrow)", scatter.Narrow}, {"50 % (median)", scatter.Median}, {"90 % (wide)", scatter.Wide}} {
		a := c.Angles(which.Case)
		setup := link.Setup
		setup.Around = c.Surroundings(which.Case, class.MastEnd == "near", setup.Elevation)
		mast, user := codec.Obj(codec.M("azimuth_deg", codec.Num(a.ASD)), codec.M("elevation_deg", codec.Num(a.ZSD))), codec.Obj(codec.M("azimuth_deg", codec.Num(a.ASA)), codec.M("elevation_deg", codec.Num(a.ZSA)))
		k := codec.Nothing()
		if s.Surroundings.Sight {
			k = codec.Num(a.KdB)
		}
		item := codec.Obj(codec.M("case", codec.Str(which.name)), codec.M("mast_spread", mast), codec.M("user_spread", user), codec.M("k_db", k), codec.M("xpr_db", codec.Num(a.XPRdB)))
		if r, ok := atCase(setup, link, judged); ok {
			item.Set("bits_per_s_hz", codec.Num(r.BitsPerSHz))
			item.Set("standard_error", codec.Num(r.StandardError))
			item.Set("effective_streams", codec.Num(r.EffectiveStreams))
		}
		out.Items = append(out.Items, item)
	}
	return out
}

func atCase(setup stream.Setup, link *verdict.Link, judged sheet.State) (stream.Result, bool) {
	e, err := stream.New(setup, link.Near[sheet.Planned], link.Far[sheet.Planned])
	if err != nil {
		return stream.Result{}, false
	}
	if judged == sheet.Planned {
		return e.Planned(), true
	}
	return e.Evaluate(link.Near[judged], link.Far[judged]), true
}

// streamNotes say what the figures leave out.
func streamNotes(s *sheet.Sheet, e *stream.Engine) []string {
	var out []string
	if s.Surroundings.Class != nil {
		out = append(out, "The class is made for a mast and a user's device. For mast to mast, state typed spreads or survey the reflectors.")
	}
	near, far := e.Coupled()
	for _, end := range []struct {
		name    string
		coupled bool
		m       *sheet.Mount
	}{{"near", near, &s.Near}, {"far", far, &s.Far}} {
		switch {
		case end.coupled:
			out = append(out, "Mutual coupling of the dipoles at the "+end.name+" end is part of the figures.")
		case closer(end.m, s.Radio.WavelengthM()):
			out = append(out, "Antennas at the "+end.name+" end stand less than half a wavelength apart. Their mutual coupling is not modelled: it costs efficiency and changes the correlation.")
		}
	}
	if len(s.Surroundings.Reflectors) > 0 {
		out = append(out, "Each reflector's phase, and whether it turns vertical against horizontal, is taken as unknown.")
	}
	return out
}

// closer tells whether two antennas are planned less than half a wavelength apart.
func closer(m *sheet.Mount, wavelength float64) bool {
	for i := range m.Antennas {
		for j := range i {
			a, b := m.Antennas[i].Position.Planned, m.Antennas[j].Position.Planned
			d := math.Hypot(math.Hypot(*a.Right-*b.Right, *a.Up-*b.Up), *a.Forward-*b.Forward) / 1000
			if d < wavelength/2*(1-1e-9) {
				return true
			}
		}
	}
	return false
}
