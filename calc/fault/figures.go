package fault

import (
	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// Figures are what the radios' own pages show, the sheet's radio_figures.
type Figures struct {
	PowerControlOff *bool // nil: not asked yet
	ExpectedDBm     *float64
	ExpectedUDB     *float64
	Ends            [2]*Page // by End; nil where nobody read that page
}

// Page is the page of one radio.
type Page struct {
	Ports         []Chain // one for each of this end's ports that was read
	Streams       *float64
	Modulation    *float64 // bits per symbol
	ModulationMax float64  // the radio's highest
	PeerAsPlanned *bool    // does the page name the planned far radio
	FrequencyMHz  *float64
	BandwidthMHz  *float64
	TxPowerDBm    *float64
}

// Chain is what a page shows of one port.
type Chain struct {
	Port         string
	Heard        bool // false: the page shows no signal here
	LevelDBm     *float64
	NoiseDBm     *float64
	SNRDB        *float64
	XPIDB        *float64 // own stream over the other, where the radio shows it
	SwingDB      *float64 // standard deviation of the level while it was watched
	ReturnLossDB *float64
}

// DefaultModulationMax is 256 states, the highest that most outdoor radios
// reach; common practice.
const DefaultModulationMax = 8

// Ranges of the figures, each with what to change.
var (
	levelRange = codec.Range{Min: -150, Max: 0, Suggestion: "received levels are negative dBm: −55, not 55"}
	noiseRange = codec.Range{Min: -150, Max: 0, Suggestion: "noise is negative dBm: −90, not 90"}
)

// Read decodes a sheet's radio_figures strictly.
func Read(v *codec.Value, s *sheet.Sheet) (*Figures, *codec.Problem) {
	f := codec.Open(v)
	out := &Figures{}
	if off := f.Maybe("power_control_off"); off != nil {
		b, p := off.AsTruth()
		f.Fail(p)
		out.PowerControlOff = &b
		if !v.Described() && p == nil && !b {
			f.Fail(f.Refuse("power_control_off", codec.Impossible, "automatic transmit power control moves the levels, so they mean nothing: switch it off at both ends and read again"))
		}
	}
	out.ExpectedDBm = f.MaybeNumber("expected_level_dbm", levelRange)
	out.ExpectedUDB = f.MaybeNumber("expected_u_db", codec.Above(0, 40))
	for end, m := range [2]*sheet.Mount{&s.Near, &s.Far} {
		c := f.Maybe(End(end).String())
		if c == nil {
			continue
		}
		page, p := readPage(c, m)
		f.Fail(p)
		out.Ends[end] = page
	}
	if p := f.Done(); p != nil || v.Described() {
		return out, p
	}
	if out.Ends[Near] == nil && out.Ends[Far] == nil {
		return nil, f.Refuse("near", codec.MissingField, "give the figures of at least one end")
	}
	if (out.ExpectedDBm == nil) != (out.ExpectedUDB == nil) {
		return nil, f.Refuse("expected_u_db", codec.Impossible, "an expected level and its doubt belong together: give both, or neither")
	}
	return out, nil
}

func readPage(v *codec.Value, m *sheet.Mount) (*Page, *codec.Problem) {
	f := codec.Open(v)
	page := &Page{}
	labels := map[string]bool{}
	for i := range m.Antennas {
		for j := range m.Antennas[i].Elements {
			labels[m.Antennas[i].Elements[j].Port] = true
		}
	}
	for _, item := range f.Items("ports", 1, sheet.MaxPorts) {
		c, p := readChain(item)
		f.Fail(p)
		if p == nil && !v.Described() && f.Problem() == nil {
			if known := labels[c.Port]; !known {
				f.Fail(item.Get("port").Refuse(codec.Impossible, "the sheet has no port of this label at this end"))
			}
			for _, other := range page.Ports {
				if other.Port == c.Port {
					f.Fail(item.Get("port").Refuse(codec.Impossible, "this port stands twice; keep one"))
				}
			}
		}
		page.Ports = append(page.Ports, c)
	}
	page.Streams = f.MaybeNumber("streams", codec.Whole(0, sheet.MaxPorts))
	page.Modulation = f.MaybeNumber("modulation_bits", codec.Range{Min: 0, Max: 14, Suggestion: "bits per symbol: 2 for QPSK, 8 for 256-QAM"})
	page.ModulationMax = f.NumberOr("modulation_max_bits", DefaultModulationMax, codec.Between(1, 14))
	if peer := f.Maybe("peer_as_planned"); peer != nil {
		b, p := peer.AsTruth()
		f.Fail(p)
		page.PeerAsPlanned = &b
	}
	page.FrequencyMHz = f.MaybeNumber("frequency_mhz", sheet.FrequencyMHz)
	page.BandwidthMHz = f.MaybeNumber("bandwidth_mhz", codec.Above(0, 10000))
	page.TxPowerDBm = f.MaybeNumber("tx_power_dbm", codec.Between(-60, 80))
	return page, f.Done()
}

func readChain(v *codec.Value) (Chain, *codec.Problem) {
	f := codec.Open(v)
	c := Chain{
		Port:         f.Text("port"),
		Heard:        f.TruthOr("heard", true),
		LevelDBm:     f.MaybeNumber("level_dbm", levelRange),
		NoiseDBm:     f.MaybeNumber("noise_dbm", noiseRange),
		SNRDB:        f.MaybeNumber("snr_db", sheet.SNRDB),
		XPIDB:        f.MaybeNumber("xpi_db", codec.Between(-60, 60)),
		SwingDB:      f.MaybeNumber("swing_db", codec.Between(0, 60)),
		ReturnLossDB: f.MaybeNumber("return_loss_db", codec.Range{Min: 0, Max: 60, Suggestion: "a return loss is given as a positive number"}),
	}
	if p := f.Done(); p != nil || v.Described() {
		return c, p
	}
	switch {
	case !c.Heard && (c.LevelDBm != nil || c.SNRDB != nil || c.XPIDB != nil || c.SwingDB != nil):
		return c, f.Refuse("heard", codec.Impossible, "a port that hears nothing has no level, signal-to-noise ratio, discrimination or swing; take them out or say heard")
	case c.Heard && c.LevelDBm == nil && c.SNRDB == nil && c.NoiseDBm == nil && c.XPIDB == nil && c.ReturnLossDB == nil:
		return c, f.Refuse("level_dbm", codec.MissingField, "give at least the received level of this port, or say that it hears nothing (heard: false)")
	}
	return c, nil
}
