package wire

import (
	"errors"
	"math"
	"strconv"

	"crossplumb/calc/aim"
	"crossplumb/calc/codec"
	"crossplumb/calc/peak"
	"crossplumb/calc/sheet"
)

func aimOperations() []operation {
	const (
		wgs84  = "WGS 84 (NGA.STND.0036)"
		karney = "Karney, J. Geodesy 87 (2013) 43–55"
		spa    = "Reda and Andreas, NREL/TP-560-34302, rev. 2008"
		wmm    = "WMM2025, NOAA NCEI and BGS, technical report 2024"
	)
	return []operation{
		{"aim.target", aimTarget, []string{wgs84, karney, "ITU-R P.310 (mean earth radius, k)"}},
		{"aim.compass", aimCompass, []string{wmm}},
		{"aim.sun", aimSun, []string{spa}},
		{"aim.sight", aimSight, []string{spa, wgs84, "side cosine rule of the spherical triangle", "JCGM 100:2008", "0.1° of sighting: common practice"}},
		{"aim.path", aimPath, []string{"ITU-R P.525-4", "ITU-R P.526-15, sections 2 and 4.1", "Deygout, IEEE Trans. AP 14 (1966) 480–489", "default doubts: common practice"}},
		{"aim.sector", aimSector, []string{"flat ground, h/tan(tilt ∓ θ/2)"}},
		{"aim.lean", aimLean, []string{"rotation of a small lean, common practice"}},
	}
}

// The ranges of the fields that several operations share.
var (
	latitude  = codec.Range{Min: -90, Max: 90, Suggestion: "degrees north, minus for south"}
	longitude = codec.Range{Min: -180, Max: 360, Suggestion: "degrees east, minus for west"}
	height    = codec.Range{Min: -1000, Max: 30000, Suggestion: "metres above the datum"}
	bearing   = codec.Range{Min: 0, Max: 360, Suggestion: "degrees clockwise from true north"}
	kFactor   = codec.Range{Min: 0.2, Max: 100, Suggestion: "the effective earth radius factor, 4/3 in the median atmosphere"}
)

func deg(radians float64) *codec.Value { return codec.Num(radians / degree) }

func metresOrNull(x float64) *codec.Value {
	if math.IsInf(x, 0) {
		return codec.Nothing()
	}
	return codec.Num(x)
}

// readPlace reads lat_deg, lon_deg and height_m.
func readPlace(f *codec.Fields, heights codec.Range) aim.Position {
	return aim.Position{
		Lat:    f.Number("lat_deg", latitude) * degree,
		Lon:    f.Number("lon_deg", longitude) * degree,
		Height: f.Number("height_m", heights),
	}
}

// refusePole refuses the two places where a direction has no name.
func refusePole(f *codec.Fields, p aim.Position) {
	if math.Cos(p.Lat) < 1e-12 {
		f.Fail(f.Refuse("lat_deg", codec.Impossible, aim.ErrPole.Error()))
	}
}

func readEnd(f *codec.Fields, name string) (aim.End, *codec.Fields) {
	c := f.Child(name)
	if c == nil {
		return aim.End{}, nil
	}
	g := codec.Open(c)
	e := aim.End{
		Position: readPlace(g, height),
		Doubt:    g.NumberOr("u_m", aim.DefaultPositionDoubt, codec.Range{Min: 0, Max: 10000, Suggestion: "the standard uncertainty in each of east and north"}),
	}
	f.Fail(g.Done())
	return e, g
}

// endsProblem turns what package aim refuses about two ends into a problem with
// its field.
func endsProblem(f, from *codec.Fields, to string, err error) *Problem {
	if errors.Is(err, aim.ErrPole) {
		return from.Refuse("lat_deg", codec.Impossible, err.Error())
	}
	code := codec.Impossible
	if errors.Is(err, aim.ErrNearAntipode) {
		code = codec.NotModelled
	}
	return f.Refuse(to, code, err.Error())
}

// farthestRay is how far the formula for the bent ray is trusted: beyond, no two
// masts or mountains see each other through a median atmosphere.
const farthestRay = 600_000.0

func aimTarget(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	from, fromFields := readEnd(f, "from")
	to, _ := readEnd(f, "to")
	datum := f.Text("height_datum")
	k := f.NumberOr("k_factor", aim.StandardK, kFactor)
	if f.Problem() == nil && !v.Described() && datum == "" {
		f.Fail(f.Refuse("height_datum", codec.MissingField, "name what both heights are measured from, as in \"WGS 84 ellipsoid\" or \"mean sea level\""))
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	t, err := aim.Aim(from, to, k)
	if err != nil {
		return nil, endsProblem(f, fromFields, "to", err)
	}
	back := aim.Sight(to.Position, from.Position)
	remarks := []string{}
	if t.Distance > farthestRay {
		remarks = append(remarks, "No two masts see each other over this distance; the elevation of the bent ray is not to be trusted.")
	}
	if t.BearingDoubt > 1*degree {
		remarks = append(remarks, "The positions are too rough for this short distance: the bearing is not known to a degree. Sight the far end, or measure the positions better.")
	}
	backBearing := deg(back.Bearing)
	if math.Cos(to.Lat) < 1e-12 {
		backBearing = codec.Nothing()
	}
	return codec.Obj(
		codec.M("true_bearing_deg", deg(t.TrueBearing)),
		codec.M("geodesic_bearing_deg", deg(t.GeodesicBearing)),
		codec.M("geometric_elevation_deg", deg(t.GeometricElevation)),
		codec.M("elevation_deg", deg(t.Elevation)),
		codec.M("distance_m", codec.Num(t.Distance)),
		codec.M("slant_range_m", codec.Num(t.SlantRange)),
		codec.M("u_bearing_deg", deg(t.BearingDoubt)),
		codec.M("back_bearing_deg", backBearing),
		codec.M("back_elevation_deg", deg(back.Elevation+aim.RayBend(t.Distance, k))),
		codec.M("height_datum", codec.Str(datum)),
		codec.M("k_factor", codec.Num(k)),
		codec.M("remarks", codec.Strs(remarks)),
	), nil
}

// readYear reads a time as exactly one of date and decimal_year.
func readYear(f *codec.Fields, described bool) float64 {
	const first, last = 2020.0, 2035.0
	date := f.MaybeText("date")
	decimal := f.MaybeNumber("decimal_year", codec.Range{Min: first, Max: last, Suggestion: "the model is made for 2025.0 to 2030.0"})
	switch {
	case described || f.Problem() != nil:
	case date != "" && decimal != nil:
		f.Fail(f.Refuse("decimal_year", codec.Impossible, "give the time once: date or decimal_year, not both"))
	case decimal != nil:
		return *decimal
	case date == "":
		f.Fail(f.Refuse("date", codec.MissingField, "give the day as date (2026-11-30) or decimal_year: the declination moves"))
	default:
		t, ok := aim.ParseDate(date)
		if !ok {
			t, ok = aim.ParseTime(date)
		}
		year := t.DecimalYear()
		switch {
		case !ok:
			f.Fail(f.Refuse("date", codec.OutOfRange, "must be a day that exists, like 2026-11-30"))
		case year < first || year > last:
			f.Fail(f.Refuse("date", codec.OutOfRange, "must lie from 2020 to 2035; the model is made for 2025.0 to 2030.0"))
		default:
			return year
		}
	}
	return 2026
}

func aimCompass(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	p := readPlace(f, codec.Range{Min: -1000, Max: 850000, Suggestion: "the model is made for 1 km below to 850 km above the ellipsoid"})
	year := readYear(f, v.Described())
	readings := f.MaybeNumbers("compass_deg", 1, 200, codec.Range{Min: 0, Max: 360, Suggestion: "the compass's own bearing, from magnetic north"})
	refusePole(f, p)
	if problem := f.Done(); problem != nil {
		return nil, problem
	}
	m := aim.Magnetic(p, year)
	h := m.Horizontal()
	var whyNot, caution string
	switch {
	case year >= 2030:
		whyNot = "WMM2025 ended at 2030.0. The figures are its straight lines drawn on, with an error nobody states; get the release of this program with the next model."
	case !aim.WithinModel(year):
		whyNot = "WMM2025 begins at 2025.0. The figures are its straight lines drawn back, with an error nobody states."
	case h < aim.BlackoutBelow:
		whyNot = "Too near a magnetic pole: the horizontal field is below 2000 nT and a compass is of no use here. Use the sun or a landmark."
	case h < aim.CautionBelow:
		caution = "Near a magnetic pole: the horizontal field is below 6000 nT and a compass is sluggish and easily led astray."
	}
	out := codec.Obj(
		codec.M("declination_deg", deg(m.Declination())),
		codec.M("inclination_deg", deg(m.Inclination())),
		codec.M("total_nt", codec.Num(m.Total())),
		codec.M("horizontal_nt", codec.Num(h)),
		codec.M("uncertainty_deg", deg(m.DeclinationDoubt())),
		codec.M("change_deg_per_year", deg(m.DeclinationRate())),
		codec.M("model", codec.Str(aim.MagneticModel)),
		codec.M("decimal_year", codec.Num(year)),
		codec.M("valid_until", codec.Num(2030)),
		codec.M("valid", codec.Truth(whyNot == "")),
		codec.M("why_not", codec.MaybeStr(whyNot)),
		codec.M("caution", codec.MaybeStr(caution)),
		codec.M("bearing", codec.Nothing()),
	)
	if readings == nil || v.Described() {
		return out, nil
	}
	radians := make([]float64, len(readings))
	for i, r := range readings {
		radians[i] = r * degree
	}
	mean, ok := peak.VectorMean(radians)
	if !ok {
		return nil, f.Refuse("compass_deg", codec.Impossible, "these bearings point all round and have no mean; the steel has the compass, use the sun or a landmark")
	}
	out.Set("bearing", codec.Obj(
		codec.M("true_bearing_deg", deg(aim.Turn(mean.Angle+m.Declination()))),
		codec.M("magnetic_bearing_deg", deg(aim.Turn(mean.Angle))),
		codec.M("u_deg", deg(math.Hypot(math.Hypot(mean.Doubt, compassDoubt), m.DeclinationDoubt()))),
		codec.M("tag", codec.Str("gross-error check only")),
		codec.M("text", codec.Str("Steel turns a compass by tens of degrees and no figure here knows of it: this bearing may catch a gross error, and is never enough by itself for go on azimuth.")),
	))
	return out, nil
}

// compassDoubt is the standard uncertainty of a hand compass well away from
// steel, common practice.
const compassDoubt = 2 * degree

// readAir reads pressure and temperature, or takes those of refraction tables.
func readAir(f *codec.Fields) aim.Air {
	return aim.Air{
		PressureHPa:  f.NumberOr("pressure_hpa", aim.StandardAir.PressureHPa, codec.Between(300, 1100)),
		TemperatureC: f.NumberOr("temperature_c", aim.StandardAir.TemperatureC, codec.Between(-90, 60)),
	}
}

// readSunTime reads a time for which the sun is computed.
func readSunTime(f *codec.Fields, described bool) aim.Instant {
	s := f.Text("time")
	if described || f.Problem() != nil {
		return aim.Date(2026, 11, 30, 9*3600)
	}
	t, ok := aim.ParseTime(s)
	switch {
	case !ok:
		f.Fail(f.Refuse("time", codec.OutOfRange, "must be a time with its offset, like 2026-11-30T09:12:00+01:00"))
	case t < aim.Date(2000, 1, 1, 0) || t >= aim.Date(2101, 1, 1, 0):
		f.Fail(f.Refuse("time", codec.OutOfRange, "must lie from 2000 to 2100; check the clock of this phone"))
	}
	return t
}

func aimSun(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	p := readPlace(f, height)
	t := readSunTime(f, v.Described())
	air := readAir(f)
	refusePole(f, p)
	if problem := f.Done(); problem != nil {
		return nil, problem
	}
	s := aim.SunAt(p, t, air)
	shadow := deg(aim.Turn(s.Azimuth + math.Pi))
	_, err := aim.SunReference(p, t, 0, air)
	whyNot := ""
	if err != nil {
		whyNot = err.Error()
		if errors.Is(err, aim.ErrBelowHorizon) {
			shadow = codec.Nothing()
		}
	}
	return codec.Obj(
		codec.M("azimuth_deg", deg(s.Azimuth)),
		codec.M("elevation_deg", deg(s.Elevation)),
		codec.M("apparent_elevation_deg", deg(s.ApparentElevation)),
		codec.M("shadow_azimuth_deg", shadow),
		codec.M("azimuth_rate_deg_per_min", codec.Num(60*aim.SunRate(p, t)/degree)),
		codec.M("usable", codec.Truth(err == nil)),
		codec.M("why_not", codec.MaybeStr(whyNot)),
		codec.M("caution", codec.Str(aim.SunCaution)),
	), nil
}

// Default doubts of a sight, standard uncertainties; common practice.
const (
	sightAngleDoubt = 1.0 // degrees, an angle read off a card or a phone
	sightLevelDoubt = 0.5 // degrees, a plane levelled by eye on a small bubble
	sightTimeDoubt  = 5.0 // seconds, a phone's clock after a day without coverage
)

func aimSight(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	kind := f.Choice("reference", "sun", "landmark")
	how := f.Choice("how", "shadow", "horizontal", "space")
	angle := f.Number("angle_deg", codec.Range{Min: -360, Max: 360, Suggestion: "degrees clockwise, as seen from above, from the reference to the boresight"})
	angleDoubt := f.NumberOr("u_angle_deg", sightAngleDoubt, codec.Above(0, 90))
	levelDoubt := f.NumberOr("u_level_deg", sightLevelDoubt, codec.Between(0, 45))
	side := f.MaybeChoice("side", "right", "left")
	boresight := f.NumberOr("boresight_elevation_deg", 0, codec.Between(-60, 60))
	sunField, landmarkField := f.Maybe("sun"), f.Maybe("landmark")
	described := v.Described()
	if !described && f.Problem() == nil {
		switch {
		case kind == "sun" && sunField == nil:
			f.Fail(f.Refuse("sun", codec.MissingField, "a sun sight needs place and time"))
		case kind == "landmark" && landmarkField == nil:
			f.Fail(f.Refuse("landmark", codec.MissingField, "a landmark sight needs both positions"))
		case kind == "sun" && landmarkField != nil:
			f.Fail(f.Refuse("landmark", codec.Impossible, "this is a sun sight; take the landmark out"))
		case kind == "landmark" && sunField != nil:
			f.Fail(f.Refuse("sun", codec.Impossible, "this is a landmark sight; take the sun out"))
		case kind == "landmark" && how == "shadow":
			f.Fail(f.Refuse("how", codec.Impossible, "a landmark throws no shadow; read the angle as horizontal or space"))
		case how == "space" && side == "":
			f.Fail(f.Refuse("side", codec.MissingField, "an angle in space does not tell left from right: say on which side of the reference the boresight lies"))
		case how != "space" && side != "":
			f.Fail(f.Refuse("side", codec.Impossible, "only an angle in space needs a side; this one has its sign"))
		case how == "space" && (angle < 0 || angle > 180):
			f.Fail(f.Refuse("angle_deg", codec.OutOfRange, "an angle in space is from 0 to 180; its side is told by side"))
		}
	}
	var (
		ref     aim.Reference
		problem *Problem
	)
	if sunField != nil && (described || f.Problem() == nil) {
		ref, problem = readSunReference(sunField)
		f.Fail(problem)
	}
	if landmarkField != nil && (described || f.Problem() == nil) {
		ref, problem = readLandmarkReference(landmarkField)
		f.Fail(problem)
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	reading := aim.Reading{Angle: angle * degree, AngleDoubt: angleDoubt * degree, LevelDoubt: levelDoubt * degree}
	var (
		azimuth, u float64
		err        error
	)
	switch how {
	case "space":
		azimuth, u, err = ref.BoresightFromSpace(reading, boresight*degree, side == "right")
	case "shadow":
		reading.Angle += math.Pi
		fallthrough
	default:
		azimuth, u, err = ref.Boresight(reading)
	}
	switch {
	case errors.Is(err, aim.ErrSteep):
		return nil, f.Refuse(kind, codec.NotModelled, err.Error())
	case errors.Is(err, aim.ErrTooClose):
		return nil, f.Refuse("angle_deg", codec.NotModelled, err.Error())
	case err != nil:
		return nil, f.Refuse("angle_deg", codec.Impossible, err.Error())
	}
	caution := codec.Nothing()
	if kind == "sun" {
		caution = codec.Str(aim.SunCaution)
	}
	return codec.Obj(
		codec.M("azimuth_deg", deg(azimuth)),
		codec.M("u_deg", deg(u)),
		codec.M("north", codec.Str("true")),
		codec.M("reference", codec.Str(kind)),
		codec.M("reference_azimuth_deg", deg(ref.Azimuth)),
		codec.M("reference_elevation_deg", deg(ref.Elevation)),
		codec.M("u_reference_deg", deg(ref.Doubt)),
		codec.M("caution", caution),
	), nil
}

func readSunReference(v *codec.Value) (aim.Reference, *Problem) {
	f := codec.Open(v)
	p := readPlace(f, height)
	t := readSunTime(f, v.Described())
	timeDoubt := f.NumberOr("u_time_s", sightTimeDoubt, codec.Between(0, 3600))
	air := readAir(f)
	refusePole(f, p)
	if problem := f.Done(); problem != nil || v.Described() {
		return aim.Reference{}, problem
	}
	ref, err := aim.SunReference(p, t, timeDoubt, air)
	if err != nil {
		return ref, f.Refuse("time", codec.Impossible, err.Error())
	}
	return ref, nil
}

func readLandmarkReference(v *codec.Value) (aim.Reference, *Problem) {
	f := codec.Open(v)
	from, fromFields := readEnd(f, "from")
	to, _ := readEnd(f, "to")
	k := f.NumberOr("k_factor", aim.StandardK, kFactor)
	if problem := f.Done(); problem != nil || v.Described() {
		return aim.Reference{}, problem
	}
	ref, err := aim.LandmarkReference(from, to, k)
	if err != nil {
		return ref, endsProblem(f, fromFields, "to", err)
	}
	return ref, nil
}

// Default doubts of an expected level, standard uncertainties in dB; common
// practice.
const (
	powerDoubt  = 1.0 // transmit power against its setting
	gainDoubt   = 0.5 // one antenna's gain against its data sheet
	lossDoubt   = 0.3 // the feeders of one end
	airDoubt    = 1.0 // the slow swing of a clear path
	topDoubtM   = 2.0 // metres, an obstacle's top from a map or by eye
	clearShare  = 0.6 // of the first Fresnel zone free: as good as free space (P.526 and common practice)
	profileSpan = 32  // pieces of the profile for drawing
	rainAbove   = 10_000
)

func aimPath(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	frequency := f.Number("frequency_mhz", sheet.FrequencyMHz)
	p := aim.Path{
		Wavelength: aim.LightSpeed / (frequency * 1e6),
		Distance:   f.Number("distance_m", codec.Range{Min: 0, OpenMin: true, Max: 1e6, Suggestion: "metres along the ground"}),
		NearHeight: f.Number("near_height_m", height),
		FarHeight:  f.Number("far_height_m", height),
	}
	k, gradient := f.MaybeNumber("k_factor", kFactor), f.MaybeNumber("delta_n", codec.Range{Min: -300, Max: 150, Suggestion: "median refractivity gradient in N-units per km, 45 where nothing better is known"})
	power := f.MaybeNumber("tx_power_dbm", codec.Between(-60, 80))
	powers := f.MaybeNumbers("tx_powers_dbm", 1, sheet.MaxPorts, codec.Between(-60, 80))
	shared := f.MaybeNumber("tx_power_shared_dbm", codec.Between(-60, 80))
	chains := f.NumberOr("chains", 1, codec.Whole(1, sheet.MaxPorts))
	gain := codec.Between(-40, 80)
	nearGain, farGain := f.MaybeNumber("near_gain_dbi", gain), f.MaybeNumber("far_gain_dbi", gain)
	loss := codec.Range{Min: 0, Max: 60, Suggestion: "a loss is given as a positive number"}
	nearLoss, farLoss := f.NumberOr("near_loss_db", 0, loss), f.NumberOr("far_loss_db", 0, loss)
	doubt := codec.Between(0, 30)
	uPower, uGain := f.NumberOr("u_power_db", powerDoubt, doubt), f.NumberOr("u_gain_db", gainDoubt, doubt)
	uLoss, uAir := f.NumberOr("u_loss_db", lossDoubt, doubt), f.NumberOr("u_path_db", airDoubt, doubt)
	var (
		obstacles []aim.Obstacle
		names     []string
	)
	for _, item := range f.MaybeItems("obstacles", 0, 200) {
		g := codec.Open(item)
		names = append(names, g.MaybeText("name"))
		o := aim.Obstacle{
			At:    g.Number("at_m", codec.Range{Min: 0, OpenMin: true, Max: 1e6, Suggestion: "metres from the near end"}),
			Top:   g.Number("top_m", height),
			Doubt: g.NumberOr("u_m", topDoubtM, codec.Between(0, 1000)),
		}
		if g.Problem() == nil && !v.Described() && f.Problem() == nil && o.At < p.Distance && min(o.At, p.Distance-o.At) < p.Wavelength {
			g.Fail(g.Refuse("at_m", codec.NotModelled, "stands within a wavelength of an antenna, where no knife edge is; take it out and look at the antenna's own surroundings"))
		}
		if g.Problem() == nil && !v.Described() && f.Problem() == nil && o.At >= p.Distance {
			g.Fail(g.Refuse("at_m", codec.OutOfRange, "lies at or beyond the far end, "+strconv.FormatFloat(p.Distance, 'f', -1, 64)+" m away; measure from the near end, or take it out"))
		}
		f.Fail(g.Done())
		obstacles = append(obstacles, o)
	}
	p.K = aim.StandardK
	switch {
	case v.Described() || f.Problem() != nil:
	case k != nil && gradient != nil:
		f.Fail(f.Refuse("delta_n", codec.Impossible, "give the bend of the ray once: k_factor or delta_n, not both"))
	case k != nil:
		p.K = *k
	case gradient != nil:
		p.K = aim.EffectiveRadius(*gradient) / aim.MeanEarthRadius
	}
	if !v.Described() && f.Problem() == nil {
		if power != nil && powers != nil {
			f.Fail(f.Refuse("tx_powers_dbm", codec.Impossible, "give the power once: tx_power_dbm for one chain, tx_powers_dbm for several"))
		}
		if shared != nil && (power != nil || powers != nil) {
			f.Fail(f.Refuse("tx_power_shared_dbm", codec.Impossible, "give the power once: what all chains share, or the power of each"))
		}
		if p.Distance < p.Wavelength {
			f.Fail(f.Refuse("distance_m", codec.NotModelled, "the ends are within a wavelength of each other"))
		}
	}
	if problem := f.Done(); problem != nil {
		return nil, problem
	}

	if shared != nil { // each chain has its n-th part
		powers = make([]float64, int(chains))
		for i := range powers {
			powers[i] = *shared - 10*math.Log10(chains)
		}
	}
	free := aim.FreeSpaceLoss(p.SlantRange(), p.Wavelength)
	diffraction, edges := p.Diffraction(obstacles)
	uDiffraction := p.DiffractionDoubt(obstacles)
	method := "none"
	switch {
	case edges == 1:
		method = "one knife edge, ITU-R P.526"
	case edges > 1:
		method = "main edge and the worst on each side of it (Deygout 1966)"
	}
	list := codec.Seq()
	clear := true
	for i, o := range obstacles {
		c := p.At(o)
		clear = clear && c.Clearance >= clearShare*c.Fresnel
		list.Items = append(list.Items, codec.Obj(
			codec.M("name", codec.MaybeStr(names[i])),
			codec.M("at_m", codec.Num(o.At)),
			codec.M("top_m", codec.Num(o.Top)),
			codec.M("bulge_m", codec.Num(c.Bulge)),
			codec.M("line_m", codec.Num(c.Line)),
			codec.M("fresnel_radius_m", codec.Num(c.Fresnel)),
			codec.M("clearance_m", codec.Num(c.Clearance)),
			codec.M("clearance_share", codec.Num(c.Clearance/c.Fresnel)),
			codec.M("u_clearance_m", codec.Num(o.Doubt)),
			codec.M("nu", codec.Num(c.Nu)),
			codec.M("knife_edge_loss_db", codec.Num(c.Loss)),
		))
	}
	clearOrUnknown := codec.Truth(clear)
	if len(obstacles) == 0 {
		clearOrUnknown = codec.Nothing()
	}
	out := codec.Obj(
		codec.M("wavelength_m", codec.Num(p.Wavelength)),
		codec.M("k_factor", codec.Num(p.K)),
		codec.M("slant_range_m", codec.Num(p.SlantRange())),
		codec.M("free_space_loss_db", codec.Num(free)),
		codec.M("obstacles", list),
		codec.M("diffraction_loss_db", codec.Num(diffraction)),
		codec.M("diffraction_method", codec.Str(method)),
		codec.M("clear", clearOrUnknown),
		codec.M("expected_level_dbm", codec.Nothing()),
		codec.M("expected_levels_dbm", codec.Nothing()),
		codec.M("u_db", codec.Nothing()),
	)
	if nearGain != nil && farGain != nil {
		passive := *nearGain + *farGain - nearLoss - farLoss - free - diffraction
		if power != nil {
			out.Set("expected_level_dbm", codec.Num(*power+passive))
		}
		if powers != nil {
			levels := make([]float64, len(powers))
			for i, w := range powers {
				levels[i] = w + passive
			}
			out.Set("expected_levels_dbm", codec.Nums(levels))
		}
		if power != nil || powers != nil {
			u := math.Sqrt(uPower*uPower + 2*uGain*uGain + 2*uLoss*uLoss + uAir*uAir + uDiffraction*uDiffraction)
			out.Set("u_db", codec.Num(u))
		}
	}
	out.Set("profile", profile(p))
	out.Set("remarks", codec.Strs(pathRemarks(p, frequency, obstacles, clear)))
	return out, nil
}

// profile is the path for drawing: bulge, line and first Fresnel zone at even
// steps.
func profile(p aim.Path) *codec.Value {
	points := codec.Seq()
	for i := 0; i <= profileSpan; i++ {
		at := p.Distance * float64(i) / profileSpan
		points.Items = append(points.Items, codec.Obj(
			codec.M("at_m", codec.Num(at)),
			codec.M("bulge_m", codec.Num(aim.Bulge(at, p.Distance-at, p.K))),
			codec.M("line_m", codec.Num(p.NearHeight+(p.FarHeight-p.NearHeight)*at/p.Distance)),
			codec.M("fresnel_radius_m", codec.Num(aim.Fresnel(1, p.Wavelength, at, p.Distance-at))),
		))
	}
	return points
}

func pathRemarks(p aim.Path, frequencyMHz float64, obstacles []aim.Obstacle, clear bool) []string {
	remarks := []string{}
	if frequencyMHz > rainAbove {
		remarks = append(remarks, "Above 10 GHz rain and the gases of the air take part; neither is modelled here.")
	}
	if len(obstacles) == 0 {
		remarks = append(remarks, "No obstacle is listed, so none is counted: ground, trees and buildings along the path are not known here.")
	} else if !clear {
		remarks = append(remarks, "At least one obstacle reaches into six tenths of the first Fresnel zone.")
	}
	lowest := math.Inf(1)
	for i := 0; i <= profileSpan; i++ {
		at := p.Distance * float64(i) / profileSpan
		lowest = min(lowest, p.NearHeight+(p.FarHeight-p.NearHeight)*at/p.Distance-aim.Bulge(at, p.Distance-at, p.K))
	}
	if lowest < 0 && min(p.NearHeight, p.FarHeight) >= 0 {
		remarks = append(remarks, "The earth's bulge alone rises above the line: where the heights are above sea level, the ends do not see each other.")
	}
	return remarks
}

func aimSector(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	h := f.Number("height_m", codec.Range{Min: 0, OpenMin: true, Max: 10000, Suggestion: "metres of the antenna above the ground it covers"})
	tilt := f.Number("tilt_deg", codec.Range{Min: -90, Max: 90, Suggestion: "elevation of the boresight with electrical tilt in it, down is negative"})
	width := f.Number("beamwidth_deg", codec.Range{Min: 0, OpenMin: true, Max: 180, Suggestion: "the vertical half-power beamwidth"})
	if p := f.Done(); p != nil {
		return nil, p
	}
	s := aim.Sector(h, tilt*degree, width*degree)
	text := "The whole beam meets the ground."
	switch {
	case math.IsInf(s.Inner, 1):
		text = "The whole beam is at or above the horizon: it covers no ground."
	case math.IsInf(s.Outer, 1):
		text = "The upper edge is at or above the horizon: the beam has no outer edge on the ground."
	}
	return codec.Obj(
		codec.M("inner_edge_m", metresOrNull(s.Inner)),
		codec.M("centre_m", metresOrNull(s.Centre)),
		codec.M("outer_edge_m", metresOrNull(s.Outer)),
		codec.M("text", codec.Str(text)),
	), nil
}

func aimLean(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	lean := f.MaybeNumber("lean_deg", codec.Range{Min: 0, Max: 15, Suggestion: "how far the mast is off plumb; which way is told by toward_deg"})
	toward := f.MaybeNumber("toward_deg", bearing)
	type axis struct{ lean, toward float64 }
	var axes []axis
	for _, item := range f.MaybeItems("axes", 2, 2) {
		g := codec.Open(item)
		axes = append(axes, axis{g.Number("lean_deg", codec.Between(-15, 15)) * degree, g.Number("toward_deg", bearing) * degree})
		f.Fail(g.Done())
	}
	azimuth := f.Number("mount_azimuth_deg", bearing) * degree
	var l, way float64
	switch {
	case v.Described() || f.Problem() != nil:
	case axes != nil && (lean != nil || toward != nil):
		f.Fail(f.Refuse("axes", codec.Impossible, "give the lean once: lean_deg with toward_deg, or two axes"))
	case axes != nil:
		ok := false
		if l, way, ok = aim.LeanFromAxes(axes[0].lean, axes[0].toward, axes[1].lean, axes[1].toward); !ok {
			f.Fail(f.Refuse("axes", codec.Impossible, "the two planes are nearly one; read the lean in planes at right angles"))
		}
	case lean == nil:
		f.Fail(f.Refuse("lean_deg", codec.MissingField, "give the lean with toward_deg, or as two axes"))
	case toward == nil:
		f.Fail(f.Refuse("toward_deg", codec.MissingField, "give the bearing that the mast leans toward"))
	default:
		l, way = *lean*degree, *toward*degree
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	tilt, skew := aim.Lean(l, way, azimuth)
	return codec.Obj(
		codec.M("tilt_deg", deg(tilt)),
		codec.M("skew_deg", deg(skew)),
		codec.M("lean_deg", deg(l)),
		codec.M("toward_deg", deg(way)),
		codec.M("text", codec.Str("Only for values set by the mast's own scale or on the ground: a level held on the antenna has the lean in its reading already.")),
	), nil
}
