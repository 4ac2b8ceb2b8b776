package verdict

import (
	"math"

	"crossplumb/calc/antenna"
	"crossplumb/calc/codec"
	"crossplumb/calc/scatter"
	"crossplumb/calc/sheet"
	"crossplumb/calc/stream"
)

// body is the antenna as package antenna hangs it. Omnis, which have no boresight,
// are read by their lean: forward is the tilt of package antenna the other way.
func (m *model) body(i int, x []float64) antenna.Body {
	b := &m.bodies[i]
	get := func(q quantity) float64 { return x[m.at(i, q)] }
	out := antenna.Body{
		Pattern: b.shape, Ports: b.ports,
		Right: get(right), Up: get(up), Forward: get(forward),
		Azimuth: get(azimuth), Tilt: get(tilt), Skew: get(skew),
	}
	if b.symmetric {
		out.Tilt = -out.Tilt
	}
	return out
}

// hang hangs all bodies at x, near ones first.
func (m *model) hang(x []float64) (near, far []antenna.Body) {
	for i := range m.bodies {
		if m.bodies[i].far {
			far = append(far, m.body(i, x))
		} else {
			near = append(near, m.body(i, x))
		}
	}
	return near, far
}

// portsOf are the ports of an antenna as package antenna takes them.
func portsOf(a *sheet.Antenna) []antenna.Port {
	out := make([]antenna.Port, len(a.Elements))
	for i := range out {
		e := &a.Elements[i]
		p := antenna.Port{
			Name: e.Port, Slant: e.SlantDeg * degree,
			Right: e.OffsetMM.Right / 1000, Up: e.OffsetMM.Up / 1000, Forward: e.OffsetMM.Forward / 1000,
		}
		if e.XPDDB != nil {
			p.Leak = math.Pow(10, -*e.XPDDB/20)
		}
		if e.AxialRatioDB != nil {
			p.Axial, p.Hand = math.Pow(10, -*e.AxialRatioDB/20), antenna.Right
			if e.Hand == "left" {
				p.Hand = antenna.Left
			}
		}
		out[i] = p
	}
	return out
}

// surroundings are the sheet's surroundings as spectra: for a class the case asked
// for, else the same whatever the case.
func (m *model) surroundings(which scatter.Case) (scatter.Surroundings, *codec.Problem) {
	s := &m.sheet.Surroundings
	rise := m.rise[0]
	switch {
	case s.Class != nil:
		c := scatter.Class{
			Sight: s.Sight, CarrierGHz: m.sheet.Radio.FrequencyMHz / 1000,
			Distance: m.sheet.Path.DistanceM * math.Cos(rise),
			Scenario: map[string]scatter.Scenario{"RMa": scatter.RuralMacro, "UMa": scatter.UrbanMacro, "UMi": scatter.UrbanMicro, "InH": scatter.IndoorOffice}[s.Class.Scenario],
		}
		if err := c.Check(); err != nil {
			return scatter.Surroundings{}, &codec.Problem{Code: codec.NotModelled, Field: "surroundings.class", Message: err.Error()}
		}
		return c.Surroundings(which, s.Class.MastEnd == "near", rise), nil
	case s.Spreads != nil:
		out := scatter.Surroundings{Sight: s.Sight, XPR: math.Pow(10, s.Spreads.XPRDB/10)}
		if s.Spreads.KDB != nil {
			out.K = math.Pow(10, *s.Spreads.KDB/10)
		}
		form := map[string]scatter.Form{"laplacian": scatter.Laplacian, "gaussian": scatter.Gaussian, "vonmises": scatter.VonMises}[s.Spreads.Spectrum]
		angular := func(p *sheet.Spread, rise float64) scatter.Angular {
			return scatter.Angular{
				AzimuthForm: form, ElevationForm: form,
				AzimuthSpread: p.AzimuthDeg * degree, ElevationSpread: p.ElevationDeg * degree, ElevationMean: rise,
			}
		}
		out.Near, out.Far = angular(&s.Spreads.Near, rise), angular(&s.Spreads.Far, -rise)
		return out, nil
	}
	out := scatter.Surroundings{Sight: s.Sight}
	for _, r := range s.Reflectors {
		sin, cos := math.Sincos((r.BearingDeg - m.sheet.Path.BearingDeg) * degree)
		out.Reflectors = append(out.Reflectors, scatter.Reflector{
			Right: r.DistanceM * sin, Forward: r.DistanceM * cos, Up: r.HeightM, Amplitude: math.Pow(10, r.AmplitudeDB/20),
		})
	}
	return out, nil
}

// boltzmann290DBm is the noise power of a matched source at 290 K in one hertz, in
// dBm: 10 lg(k·290 K/1 mW), k exact by the definition of the kelvin (BIPM, SI
// Brochure, 9th edition).
var boltzmann290DBm = 10 * math.Log10(1.380649e-23*290*1000)

// budgetSNR is ρ from transmit power, gains, free space and noise, where no radio
// has measured it yet:
//
//	ρ = P G G (λ/4πD)² / (k T B F)
//
// as a power ratio; for shared power P is the sum of the chains. A problem says
// what is missing.
func (m *model) budgetSNR() (float64, *codec.Problem) {
	r := &m.sheet.Radio
	if r.TxPowerDBm == nil || r.NoiseFigureDB == nil || r.BandwidthMHz == nil {
		return 0, &codec.Problem{
			Code: codec.MissingField, Field: "radio.snr_db",
			Message: "state the measured snr_db, or tx_power_dbm, noise_figure_db and bandwidth_mhz to reckon it from",
		}
	}
	sum := 0.0
	for _, dbm := range r.TxPowerDBm {
		sum += math.Pow(10, dbm/10)
	}
	if sum /= float64(len(r.TxPowerDBm)); r.Power == sheet.Shared {
		sum *= float64(len(m.ports[0]))
	}
	db := 10*math.Log10(sum) + m.meanGain(false) + m.meanGain(true) +
		20*math.Log10(r.WavelengthM()/(4*math.Pi*m.sheet.Path.DistanceM)) -
		boltzmann290DBm - 10*math.Log10(*r.BandwidthMHz*1e6) - *r.NoiseFigureDB
	return math.Pow(10, db/10), nil
}

// meanGain is the gain in dBi of an end's antennas, the mean where they differ. A
// half-wave dipole has 2.15 dBi (Balanis, Antenna Theory, ch. 4).
func (m *model) meanGain(far bool) float64 {
	sum, n := 0.0, 0.0
	for i := range m.bodies {
		if m.bodies[i].far != far {
			continue
		}
		p := &m.bodies[i].antenna.Pattern
		switch {
		case p.GainDBi != nil:
			sum += *p.GainDBi
		case p.Kind == sheet.Dipole:
			sum += 2.15
		}
		n++
	}
	return sum / n
}

// setup is all of the link that does not hang on bolts. The measured signal-to-noise
// ratio is turned once into ρ by the mean E|h|² of the tied ports in the geometry
// that it was measured with: ρ = SNR/E|h|², for shared power N times that.
func (m *model) setup(measuredAt []float64) (stream.Setup, *codec.Problem) {
	s := stream.Setup{
		Wavelength: m.sheet.Radio.WavelengthM(), Distance: m.sheet.Path.DistanceM, Elevation: m.rise[0], SNR: 1,
	}
	if m.sheet.Radio.Power == sheet.Shared {
		s.Power = stream.Shared
	}
	var p *codec.Problem
	if s.Around, p = m.surroundings(scatter.Median); p != nil {
		return s, p
	}
	if m.sheet.Radio.SNRDB == nil {
		s.SNR, p = m.budgetSNR()
		return s, p
	}
	near, far := m.hang(m.plan)
	atNear, atFar := m.hang(measuredAt)
	mean, err := stream.MeanPowers(s, near, far, atNear, atFar)
	if err != nil {
		return s, &codec.Problem{Code: codec.NotModelled, Message: err.Error()}
	}
	power, n := 0.0, 0.0
	for i, j := range m.link {
		if j >= 0 {
			power += mean[j][i]
			n++
		}
	}
	if !(power/n > 1e-8) {
		return s, &codec.Problem{Code: codec.Impossible, Field: "radio.snr_db", Message: "the tied ports receive nothing of each other as measured; check links, slants and the readings"}
	}
	s.SNR = math.Pow(10, *m.sheet.Radio.SNRDB/10) / (power / n)
	if s.Power == stream.Shared {
		s.SNR *= float64(len(m.ports[0]))
	}
	return s, nil
}

// Link is a sheet as the stream engine takes it: the setup and the bodies of both
// ends in each state.
type Link struct {
	Setup     stream.Setup
	Near, Far [3][]antenna.Body // by sheet.State
	Measured  [3]bool           // whether the state has a reading of the near end; planned always
	Ties      []int             // far port of each near port, −1 where none
}

// NewLink makes a sheet ready for the stream engine. Bodies hang at the best
// estimates; what a state has no reading of hangs as planned.
func NewLink(s *sheet.Sheet) (*Link, *codec.Problem) {
	m := newModel(s)
	l := &Link{Ties: m.link}
	measuredAt := m.plan
	for st := sheet.Planned; st <= sheet.AsLeft; st++ {
		b, p := m.believe(st)
		if p != nil {
			return nil, p
		}
		x := b.values()
		if st == sheet.Planned {
			x = m.plan
		}
		l.Near[st], l.Far[st] = m.hang(x)
		l.Measured[st] = st == sheet.Planned || b.readings > 0
		if st == sheet.AsFound && b.readings > 0 {
			measuredAt = x
		}
	}
	var p *codec.Problem
	l.Setup, p = m.setup(measuredAt)
	return l, p
}
