package sheet

import "crossplumb/calc/codec"

// Version is the one version of the document that is read.
const Version = 1

// MaxPorts is how many ports one end may have. Today's radios end at eight.
const MaxPorts = 8

// MaxReadings bounds the readings of one quantity in one state.
const MaxReadings = 200

// Read decodes a mount sheet. Everything it returns is within range and
// consistent; a problem names the field and what to change.
func Read(v *codec.Value) (*Sheet, *codec.Problem) {
	f := codec.Open(v)
	f.Number("sheet", codec.Range{Min: Version, Max: Version, Whole: true, Suggestion: "this program reads version 1"})
	s := &Sheet{Title: f.MaybeText("title")}
	sub := func(name string, read func(*codec.Value) *codec.Problem) {
		if c := f.Child(name); c != nil {
			f.Fail(read(c))
		}
	}
	sub("radio", func(c *codec.Value) (p *codec.Problem) { s.Radio, p = readRadio(c); return })
	sub("near", func(c *codec.Value) (p *codec.Problem) { s.Near, p = readMount(c); return })
	sub("far", func(c *codec.Value) (p *codec.Problem) { s.Far, p = readMount(c); return })
	sub("path", func(c *codec.Value) (p *codec.Problem) { s.Path, p = readPath(c); return })
	sub("surroundings", func(c *codec.Value) (p *codec.Problem) { s.Surroundings, p = readSurroundings(c); return })
	landmarks, lp := readLandmarks(f.MaybeItems("landmarks", 0, MaxLandmarks))
	s.Landmarks = landmarks
	f.Fail(lp)
	if figures := f.Maybe("radio_figures"); figures != nil {
		s.RadioFigures = figures.Free()
	}
	limits, p := readLimits(f.MaybeItems("limits", 0, len(LimitKinds())))
	s.Limits = limits
	f.Fail(p)
	if p := f.Done(); p != nil {
		return nil, p
	}
	if !v.Described() {
		if p := s.check(v); p != nil {
			return nil, p
		}
	}
	return s, nil
}

func readRadio(v *codec.Value) (Radio, *codec.Problem) {
	f := codec.Open(v)
	r := Radio{
		FrequencyMHz:  f.Number("frequency_mhz", FrequencyMHz),
		BandwidthMHz:  f.MaybeNumber("bandwidth_mhz", codec.Above(0, 10000)),
		Combining:     f.Truth("combining"),
		Power:         f.MaybeChoice("power", PerChain, Shared),
		TxPowerDBm:    f.MaybeNumbers("tx_power_dbm", 1, MaxPorts, codec.Between(-60, 80)),
		NoiseFigureDB: f.MaybeNumber("noise_figure_db", codec.Between(0, 40)),
		SNRDB:         f.MaybeNumber("snr_db", SNRDB),
	}
	if r.Power == "" {
		r.Power = PerChain
	}
	for _, item := range f.MaybeItems("links", 1, MaxPorts) {
		l := codec.Open(item)
		r.Links = append(r.Links, Link{Near: l.Text("near"), Far: l.Text("far")})
		f.Fail(l.Done())
	}
	return r, f.Done()
}

// FrequencyMHz is the range of carrier frequencies: from the lowest land-mobile
// bands to the highest licensed point-to-point ones.
var FrequencyMHz = codec.Range{Min: 10, Max: 300000, Suggestion: "the carrier frequency in MHz"}

// SNRDB is the range of a signal-to-noise ratio that a radio can report.
var SNRDB = codec.Between(-40, 80)

func readMount(v *codec.Value) (Mount, *codec.Problem) {
	f := codec.Open(v)
	var m Mount
	items := f.Items("antennas", 1, MaxPorts)
	ports := 0
	for _, item := range items {
		a, p := readAntenna(item)
		if p != nil {
			return m, p
		}
		m.Antennas = append(m.Antennas, a)
		if ports += len(a.Elements); ports > MaxPorts {
			return m, item.Refuse(codec.TooLarge, "one end may have at most 8 ports together")
		}
	}
	return m, f.Done()
}

func readAntenna(v *codec.Value) (Antenna, *codec.Problem) {
	f := codec.Open(v)
	a := Antenna{ID: f.Text("id")}
	if a.ID == "" && f.Problem() == nil && !v.Described() {
		f.Fail(f.Refuse("id", codec.MissingField, "each antenna needs a name, such as A"))
	}
	if c := f.Child("pattern"); c != nil {
		p := readPattern(c, &a.Pattern)
		f.Fail(p)
	}
	if c := f.Maybe("size_mm"); c != nil {
		s := codec.Open(c)
		a.SizeMM = &Size{WidthMM: s.Number("width", codec.Above(0, 20000)), HeightMM: s.Number("height", codec.Above(0, 20000))}
		f.Fail(s.Done())
	}
	a.ElectricalTiltDeg = f.NumberOr("electrical_tilt_deg", 0, codec.Between(-90, 90))
	if c := f.Maybe("level_datum"); c != nil {
		d := codec.Open(c)
		a.LevelDatum = &LevelDatum{
			Surface:       d.MaybeText("surface"),
			SkewOffsetDeg: d.NumberOr("skew_offset_deg", 0, codec.Between(-180, 180)),
			TiltOffsetDeg: d.NumberOr("tilt_offset_deg", 0, codec.Between(-180, 180)),
		}
		f.Fail(d.Done())
	}
	for _, item := range f.Items("elements", 1, MaxPorts) {
		e, p := readElement(item)
		f.Fail(p)
		a.Elements = append(a.Elements, e)
	}
	if c := f.Child("position_mm"); c != nil {
		f.Fail(readPositions(c, &a.Position))
	}
	symmetric := a.Symmetric() && !v.Described()
	var c *codec.Value
	if symmetric || v.Described() {
		c = f.Maybe("azimuth")
	} else {
		c = f.Child("azimuth")
	}
	if c != nil {
		f.Fail(readAngles(c, &a.Azimuth, azimuth))
	}
	if c := f.Child("tilt"); c != nil {
		f.Fail(readAngles(c, &a.Tilt, tilt))
	}
	if c := f.Child("skew"); c != nil {
		f.Fail(readAngles(c, &a.Skew, skew))
	}
	return a, f.Done()
}

func readPattern(v *codec.Value, to *Pattern) *codec.Problem {
	f := codec.Open(v)
	to.Kind = f.Choice("kind", Panel, Omni, Dipole, Dish, SampledCuts, Isotropic)
	to.GainDBi = f.MaybeNumber("gain_dbi", codec.Between(-20, 70))
	to.BeamwidthAzDeg = f.MaybeNumber("beamwidth_az_deg", codec.Above(0, 360))
	to.BeamwidthElDeg = f.MaybeNumber("beamwidth_el_deg", codec.Above(0, 180))
	to.FrontToBackDB = f.MaybeNumber("front_to_back_db", codec.Above(0, 90))
	to.SidelobeDB = f.MaybeNumber("sidelobe_db", codec.Above(0, 90))
	to.DiameterM = f.MaybeNumber("diameter_m", codec.Above(0, 20))
	if c := f.Maybe("cuts"); c != nil {
		g := codec.Open(c)
		to.Cuts = &Cuts{}
		for _, half := range []struct {
			name string
			to   *Cut
			end  float64
		}{{"azimuth", &to.Cuts.Azimuth, 180}, {"elevation", &to.Cuts.Elevation, 90}} {
			if h := g.Child(half.name); h != nil {
				g.Fail(readCut(h, half.to, half.end))
			}
		}
		f.Fail(g.Done())
	}
	if p := f.Done(); p != nil || v.Described() {
		return p
	}
	need := func(name string, have bool) {
		if !have {
			f.Fail(f.Refuse(name, codec.MissingField, "a pattern of kind \""+to.Kind+"\" needs this figure from the antenna's data sheet"))
		}
	}
	switch to.Kind {
	case Panel:
		need("gain_dbi", to.GainDBi != nil)
		need("beamwidth_az_deg", to.BeamwidthAzDeg != nil)
		need("beamwidth_el_deg", to.BeamwidthElDeg != nil)
	case Omni:
		need("gain_dbi", to.GainDBi != nil)
		need("beamwidth_el_deg", to.BeamwidthElDeg != nil)
	case Dish:
		need("gain_dbi", to.GainDBi != nil)
		need("beamwidth_az_deg", to.BeamwidthAzDeg != nil || to.DiameterM != nil)
	case SampledCuts:
		need("gain_dbi", to.GainDBi != nil)
		need("cuts", to.Cuts != nil)
	}
	return f.Problem()
}

func readCut(v *codec.Value, to *Cut, end float64) *codec.Problem {
	f := codec.Open(v)
	to.AnglesDeg = f.Numbers("angles_deg", 3, 3601, codec.Between(-end, end))
	to.LevelsDB = f.Numbers("levels_db", 3, 3601, codec.Between(-100, 0))
	if p := f.Done(); p != nil || v.Described() {
		return p
	}
	if len(to.LevelsDB) != len(to.AnglesDeg) {
		return f.Refuse("levels_db", codec.Impossible, "must hold one level for each angle")
	}
	for i := 1; i < len(to.AnglesDeg); i++ {
		if to.AnglesDeg[i] <= to.AnglesDeg[i-1] {
			return v.Get("angles_deg").Items[i].Refuse(codec.Impossible, "angles must rise from one to the next")
		}
	}
	return nil
}

func readElement(v *codec.Value) (Element, *codec.Problem) {
	f := codec.Open(v)
	e := Element{
		Port:         f.Text("port"),
		SlantDeg:     f.Number("slant_deg", codec.Between(-180, 180)),
		XPDDB:        f.MaybeNumber("xpd_db", codec.Between(0, 80)),
		AxialRatioDB: f.MaybeNumber("axial_ratio_db", codec.Between(0, 100)),
		Hand:         f.MaybeChoice("hand", "right", "left"),
	}
	if c := f.Maybe("offset_mm"); c != nil {
		o := codec.Open(c)
		r := codec.Between(-20000, 20000)
		e.OffsetMM = Vector{o.NumberOr("right", 0, r), o.NumberOr("up", 0, r), o.NumberOr("forward", 0, r)}
		f.Fail(o.Done())
	}
	if p := f.Done(); p != nil || v.Described() {
		return e, p
	}
	if e.Port == "" {
		return e, f.Refuse("port", codec.MissingField, "each port needs its label")
	}
	if (e.AxialRatioDB == nil) != (e.Hand == "") {
		return e, f.Refuse("hand", codec.Impossible, "axial_ratio_db and hand belong together: give both, or null for both where the port is linear")
	}
	return e, nil
}

func readPath(v *codec.Value) (Path, *codec.Problem) {
	f := codec.Open(v)
	p := Path{
		BearingDeg:   f.Number("bearing_deg", codec.Between(0, 360)),
		ElevationDeg: f.NumberOr("elevation_deg", 0, codec.Between(-89, 89)),
		DistanceM:    f.Number("distance_m", codec.Range{Min: 1, Max: 1e6, Suggestion: "the distance between the ends in metres"}),
		HeightDatum:  f.MaybeText("height_datum"),
		KFactor:      f.MaybeNumber("k_factor", codec.Range{Min: 0.2, Max: 100, Suggestion: "the effective earth radius factor, 4/3 in the median atmosphere"}),
		AboveGroundM: f.MaybeNumber("above_ground_m", codec.Range{Min: 0, OpenMin: true, Max: 10000, Suggestion: "metres of the antennas above the ground they cover"}),
	}
	for _, end := range []struct {
		name string
		to   **Place
	}{{"near_at", &p.NearAt}, {"far_at", &p.FarAt}} {
		if c := f.Maybe(end.name); c != nil {
			place, problem := readPlace(c)
			f.Fail(problem)
			*end.to = place
		}
	}
	length := p.DistanceM
	if f.Problem() != nil {
		length = 0
	}
	for _, item := range f.MaybeItems("obstacles", 0, MaxObstacles) {
		o, problem := readObstacle(item, length)
		f.Fail(problem)
		p.Obstacles = append(p.Obstacles, o)
	}
	// Obstacles alone do not ask for it: a crew that notes one cannot mend the plan.
	if f.Problem() == nil && !v.Described() && (p.NearAt != nil || p.FarAt != nil) && p.HeightDatum == "" {
		f.Fail(f.Refuse("height_datum", codec.MissingField, "name what all heights are measured from, as in \"WGS 84 ellipsoid\" or \"mean sea level\""))
	}
	return p, f.Done()
}

func readSurroundings(v *codec.Value) (Surroundings, *codec.Problem) {
	f := codec.Open(v)
	s := Surroundings{Sight: f.Truth("sight")}
	if c := f.Maybe("class"); c != nil {
		g := codec.Open(c)
		s.Class = &Class{
			Standard: g.Choice("standard", ClassStandard),
			Edition:  g.Choice("edition", ClassEdition),
			Scenario: g.Choice("scenario", "RMa", "UMa", "UMi", "InH"),
			MastEnd:  g.MaybeChoice("mast_end", "near", "far"),
		}
		if s.Class.MastEnd == "" {
			s.Class.MastEnd = "near"
		}
		f.Fail(g.Done())
	}
	if c := f.Maybe("spreads"); c != nil {
		g := codec.Open(c)
		s.Spreads = &Spreads{
			KDB:      g.MaybeNumber("k_db", codec.Between(-40, 60)),
			XPRDB:    g.Number("xpr_db", codec.Between(-20, 60)),
			Spectrum: g.MaybeChoice("spectrum", "laplacian", "gaussian", "vonmises"),
		}
		if s.Spreads.Spectrum == "" {
			s.Spreads.Spectrum = "laplacian"
		}
		spread := codec.Range{Min: 0.1, Max: 60, Suggestion: "the standard deviation of the arrival angles; where nothing scatters at all, state sight and a high k_db"}
		for _, end := range []struct {
			name string
			to   *Spread
		}{{"near", &s.Spreads.Near}, {"far", &s.Spreads.Far}} {
			if h := g.Child(end.name); h != nil {
				e := codec.Open(h)
				*end.to = Spread{AzimuthDeg: e.Number("azimuth_deg", spread), ElevationDeg: e.Number("elevation_deg", spread)}
				g.Fail(e.Done())
			}
		}
		f.Fail(g.Done())
		if !v.Described() && f.Problem() == nil {
			switch {
			case s.Sight && s.Spreads.KDB == nil:
				f.Fail(g.Refuse("k_db", codec.MissingField, "with sight the Ricean factor must be stated"))
			case !s.Sight && s.Spreads.KDB != nil:
				f.Fail(g.Refuse("k_db", codec.Impossible, "without sight there is no Ricean factor; leave it null or set sight to true"))
			}
		}
	}
	for _, item := range f.MaybeItems("reflectors", 1, 64) {
		g := codec.Open(item)
		s.Reflectors = append(s.Reflectors, Reflector{
			Name:        g.MaybeText("name"),
			BearingDeg:  g.Number("bearing_deg", codec.Between(0, 360)),
			DistanceM:   g.Number("distance_m", codec.Above(0, 1e6)),
			HeightM:     g.NumberOr("height_m", 0, codec.Between(-10000, 10000)),
			AmplitudeDB: g.Number("amplitude_db", codec.Between(-80, 20)),
		})
		f.Fail(g.Done())
	}
	if p := f.Done(); p != nil || v.Described() {
		return s, p
	}
	n := 0
	for _, have := range []bool{s.Class != nil, s.Spreads != nil, s.Reflectors != nil} {
		if have {
			n++
		}
	}
	if n == 0 {
		return s, v.Refuse(codec.MissingField, "state the surroundings by one of class, spreads or reflectors")
	}
	if n > 1 {
		return s, v.Refuse(codec.Impossible, "state the surroundings by only one of class, spreads and reflectors")
	}
	return s, nil
}
