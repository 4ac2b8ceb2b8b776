package wire

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"crossplumb/calc/aim"
	"crossplumb/calc/codec"
	"crossplumb/calc/peak"
)

func peakOperations() []operation {
	return []operation{
		{"peak.fit", peakFit, []string{"main-lobe form −12(θ/θ₃dB)² of 3GPP TR 38.901 table 7.3-1", "Balanis, Antenna Theory, tables 12.1 and 12.2 (side lobes of uniform apertures)", "JCGM 100:2008", "odds of a side lobe beforehand 0.3, doubt of a beamwidth 10 %: common practice"}},
		{"tilt.twoface", tiltTwoFace, []string{"reversal of an instrument, common practice of surveying", "JCGM 100:2008", "floor 0.1°: common practice"}},
		{"tilt.face", tiltFace, []string{"variance of the mean of a first-order autoregressive series", "W3C Device Orientation and Motion (axes and sign of an acceleration)", "limits of shake, sway and stillness: common practice"}},
	}
}

// receivedLevel is the range of a received level. A radio overloads long before 0
// dBm, so a positive one has lost its sign.
var receivedLevel = codec.Range{Min: -150, Max: 0, Suggestion: "received levels are negative dBm: −55, not 55"}

// How many levels one search, and how many readings one face may have.
const (
	maxLevels  = 500
	maxSamples = 20000
)

func peakFit(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	angles := f.Numbers("angles_deg", 1, maxLevels, codec.Range{Min: -360, Max: 360})
	levels := f.Numbers("levels_dbm", 1, maxLevels, receivedLevel)
	beamwidth := f.MaybeNumber("beamwidth_deg", codec.Range{Min: 0.05, Max: 180, Suggestion: "the half-power beamwidth in the plane of the search"})
	expected := f.MaybeNumber("expected_level_dbm", receivedLevel)
	expectedDoubt := f.MaybeNumber("expected_u_db", codec.Above(0, 40))
	levelDoubt := f.NumberOr("level_u_db", peak.DefaultLevelDoubt, codec.Range{Min: 0.05, Max: 20, Suggestion: "the standard uncertainty of one reading"})
	off := f.Maybe("power_control_off")
	controlled, problem := off.AsTruth()
	f.Fail(problem)
	if !v.Described() && f.Problem() == nil {
		switch {
		case len(angles) != len(levels):
			f.Fail(f.Refuse("levels_dbm", codec.Impossible, "there must be one level for each angle"))
		case off != nil && !controlled:
			f.Fail(f.Refuse("power_control_off", codec.Impossible, "automatic transmit power control holds the level while you turn, so levels mean nothing: switch it off at both ends first"))
		case expected != nil && expectedDoubt == nil:
			f.Fail(f.Refuse("expected_u_db", codec.MissingField, "an expected level needs its standard uncertainty"))
		case expected == nil && expectedDoubt != nil:
			f.Fail(f.Refuse("expected_level_dbm", codec.MissingField, "a doubt without the expected level says nothing; give both or neither"))
		}
	}
	if p := f.Done(); p != nil {
		return nil, p
	}
	if v.Described() {
		angles, levels = []float64{0}, []float64{-50}
	}
	s := peak.Search{Levels: levels, LevelDoubt: levelDoubt, Expected: expected, Angles: make([]float64, len(angles))}
	negative := false
	for i, a := range angles {
		s.Angles[i] = a * degree
		negative = negative || a < 0
	}
	if beamwidth != nil {
		s.Beamwidth = *beamwidth * degree
	}
	if expectedDoubt != nil {
		s.ExpectedDoubt = *expectedDoubt
	}
	r := s.Fit()
	// The answer counts round the circle as the readings did.
	show := func(a float64) *codec.Value {
		if negative {
			return deg(aim.HalfTurn(a))
		}
		return deg(aim.Turn(a))
	}
	out := codec.Obj(
		codec.M("peak_deg", codec.Nothing()),
		codec.M("peak_u_deg", codec.Nothing()),
		codec.M("peak_level_dbm", codec.Num(r.Level)),
		codec.M("peak_level_u_db", codec.Num(r.LevelDoubt)),
		codec.M("from_last_deg", codec.Nothing()),
		codec.M("width_deg", codec.Nothing()),
		codec.M("width_u_deg", codec.Nothing()),
		codec.M("lobe", codec.Str(r.Lobe)),
		codec.M("odds_main", codec.Num(r.MainOdds)),
		codec.M("noise_db", codec.Num(r.Noise)),
	)
	if r.Peak != nil {
		out.Set("peak_deg", show(*r.Peak))
		out.Set("peak_u_deg", deg(r.PeakDoubt))
		out.Set("from_last_deg", deg(aim.HalfTurn(*r.Peak-s.Angles[len(angles)-1])))
		out.Set("width_deg", deg(*r.Width))
		out.Set("width_u_deg", deg(r.WidthDoubt))
	}
	used, curve := codec.Seq(), codec.Seq()
	for _, u := range r.Used {
		used.Items = append(used.Items, codec.Truth(u))
	}
	if r.Peak != nil {
		const steps = 24
		for i := -steps / 2; i <= steps/2; i++ {
			a := *r.Peak + float64(i)/steps*1.5*(*r.Width)
			level, _ := r.LevelAt(a)
			curve.Items = append(curve.Items, codec.Obj(codec.M("angle_deg", show(a)), codec.M("level_dbm", codec.Num(level))))
		}
	}
	out.Set("used", used)
	best := slices.Max(levels)
	leftOut := codec.Seq()
	for i, u := range r.Used {
		if u {
			continue
		}
		why := decimal(best-levels[i]) + " dB below the best level: what lies more than " + decimal(peak.Window) + " dB down is no part of the fit to the main lobe."
		if r.Beyond[i] {
			why = "Past a reading more than " + decimal(peak.Window) + " dB down: it may belong to another lobe."
		}
		leftOut.Items = append(leftOut.Items, codec.Obj(codec.M("angle_deg", codec.Num(angles[i])), codec.M("level_dbm", codec.Num(levels[i])), codec.M("why", codec.Str(why))))
	}
	out.Set("left_out", leftOut)
	out.Set("curve", curve)
	take := codec.Seq()
	want := func(code, text string) {
		take.Items = append(take.Items, codec.Obj(codec.M("code", codec.Str(code)), codec.M("text", codec.Str(text))))
	}
	if off == nil {
		want("power control", "Is automatic transmit power control off at both ends? While it is on, levels mean nothing.")
	}
	for _, w := range r.Wants {
		want(string(w), wantText(w, r, s, show))
	}
	if expected != nil && r.Level > *expected+3*math.Hypot(*expectedDoubt, r.LevelDoubt) {
		want("too high", "The level is higher than expected by more than its doubt: check transmit power, gains and distance that the expected level was made from.")
	}
	out.Set("take_more", take)
	out.Set("enough", codec.Truth(len(r.Wants) == 0))
	return out, nil
}

// decimal writes a figure of a sentence to a tenth.
func decimal(x float64) string {
	return strconv.FormatFloat(math.Round(x*10)/10, 'f', -1, 64)
}

func wantText(w peak.Want, r peak.Result, s peak.Search, show func(float64) *codec.Value) string {
	at := func(a float64) string { return decimal(show(a).Num) + "°" }
	switch w {
	case peak.WantMore:
		return "Too few readings: take at least five within 6 dB of the best, at three angles or more."
	case peak.WantBothSides:
		return bothSidesText(r, s, at)
	case peak.WantWider:
		return "Too flat on both sides: step wider, until the level is 3 dB lower on each."
	case peak.WantFiner:
		return "Between " + at(r.Gap[0]) + " and " + at(r.Gap[1]) + " the level falls past 6 dB in one step: take smaller steps there."
	case peak.WantAgain:
		return "The level falls on both sides, but the readings scatter too much for a peak: read each angle again, and in between."
	case peak.WantCalm:
		return "Too noisy: read each angle again, wait for the wind to drop."
	case peak.WantCheck:
		return "The lobe is " + decimal(*r.Width/degree) + "° wide and the beamwidth is given as " + decimal(s.Beamwidth/degree) + "°: check which antenna and plane that is of. The peak is told without it."
	case peak.WantBeamwidth:
		return "Give the half-power beamwidth of the antenna in this plane: its width tells a main lobe from a side lobe."
	case peak.WantLevel:
		return "Give the expected level with its doubt: a side lobe is at least 13 dB low."
	case peak.WantFarther:
		return "This may be a side lobe: sweep two beamwidths to each side and look for a higher peak."
	}
	return string(w)
}

// bothSidesText tells which side of the peak is short, and how far to go on there
// where a width tells it.
func bothSidesText(r peak.Result, s peak.Search, at func(float64) string) string {
	sides := [2]string{"towards lower angles", "towards higher angles"}
	var told []string
	best := s.Angles[0]
	for i, l := range s.Levels {
		if l == slices.Max(s.Levels) {
			best = s.Angles[i]
			break
		}
	}
	for k, short := range r.Short {
		if !short {
			continue
		}
		// The outermost reading of the fit on this side.
		outer := best
		for i, a := range s.Angles {
			if off := math.Remainder(a-outer, 2*math.Pi); r.Used[i] && (off > 0) == (k == 1) && off != 0 {
				outer = a
			}
		}
		text := sides[k] + ", past " + at(outer) + ", until the level is 3 dB lower"
		for _, to := range r.GoTo {
			if off := math.Remainder(to-outer, 2*math.Pi); off != 0 && (off > 0) == (k == 1) {
				text += " (about " + decimal(math.Abs(off)/degree) + "° more, to " + at(to) + ")"
			}
		}
		told = append(told, text)
	}
	return "The peak is not boxed in: go on " + strings.Join(told, "; and ") + ". At least two readings belong on each side."
}

// faceAngle is what a level or a phone reads on one face.
var faceAngle = codec.Range{Min: -90, Max: 90, Suggestion: "read from the nearer of level and plumb, so that it stays within ±90°"}

func tiltTwoFace(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	spread := codec.Range{Min: 0, Max: 45, Suggestion: "the standard deviation of the readings with this face"}
	count := codec.Range{Min: 1, Max: 1e6, Suggestion: "how many independent readings"}
	// A face is given as what was read on it, or as the mean of that with its spread and count.
	read := func(face string) peak.Face {
		mean := f.MaybeNumber("face_"+face+"_deg", faceAngle)
		given := peak.Face{
			Spread: f.NumberOr("spread_"+face+"_deg", 0, spread) * degree,
			Count:  f.NumberOr("count_"+face, 1, count),
		}
		readings := f.MaybeNumbers("readings_"+face+"_deg", 1, maxSamples, faceAngle)
		switch {
		case v.Described() || f.Problem() != nil:
		case mean == nil && readings == nil:
			f.Fail(f.Refuse("face_"+face+"_deg", codec.MissingField, "give what was read on this face, or the mean of it"))
		case mean != nil && readings != nil:
			f.Fail(f.Refuse("readings_"+face+"_deg", codec.Impossible, "give the readings of this face or their mean, not both"))
		case readings != nil && (given.Spread != 0 || given.Count != 1):
			f.Fail(f.Refuse("readings_"+face+"_deg", codec.Impossible, "the readings speak for their own spread and count; leave those out"))
		case readings != nil:
			angles := make([]float64, len(readings))
			for i, x := range readings {
				angles[i] = x * degree
			}
			return peak.FaceOf(angles)
		case mean != nil:
			given.Mean = *mean * degree
		}
		return given
	}
	a, b := read("a"), read("b")
	scale := f.NumberOr("u_scale", 0, codec.Range{Min: 0, Max: 1, Suggestion: "standard uncertainty of the instrument's scale as a share of the angle; tilt.face tells a phone's"})
	tilt := f.MaybeNumber("edge_tilt_deg", codec.Between(-80, 80))
	if p := f.Done(); p != nil {
		return nil, p
	}
	angle, bias, u := peak.TwoFace(a, b)
	u = peak.WithScale(u, scale, angle)
	out := codec.Obj(
		codec.M("tilt_deg", deg(angle)),
		codec.M("bias_deg", deg(bias)),
		codec.M("u_deg", deg(u)),
		codec.M("skew_deg", codec.Nothing()),
		codec.M("skew_u_deg", codec.Nothing()),
	)
	if tilt != nil {
		skew, ok := aim.SkewFromEdge(angle, *tilt*degree)
		if !ok {
			return nil, f.Refuse("edge_tilt_deg", codec.Impossible, "no skew reads this much across an edge that is tilted so far; check both")
		}
		// dskew/dlevel = cos level / (cos tilt cos skew)
		grown := u * math.Cos(angle) / math.Max(1e-3, math.Cos(*tilt*degree)*math.Cos(skew))
		out.Set("skew_deg", deg(skew))
		out.Set("skew_u_deg", deg(grown))
	}
	return out, nil
}

// poses are the ways to hold a phone, by the names that the door has for them.
var poses = map[string]peak.Pose{"face_up": peak.FaceUp, "skew": peak.SkewOnBack, "tilt_by_edge": peak.TiltByEdge, "tilt": peak.TiltOnBack}

// componentRange holds what a phone's accelerometer can give along one axis.
var componentRange = codec.Range{Min: -200, Max: 200, Suggestion: "accelerationIncludingGravity along this axis, m/s²"}

// faceSamples reads what was sampled on one face: angles of an instrument that gives
// angles, or the accelerations of a phone and how it is held. turned is how many
// samples say nothing because the phone is not held so; sign is what a phone lying
// face up tells, 0 otherwise.
func faceSamples(v *codec.Value, f *codec.Fields) (samples []peak.Sample, turned int, sign float64) {
	times := f.Numbers("t_s", 1, maxSamples, codec.Range{Min: -1e9, Max: 1e9, Suggestion: "seconds"})
	angles := f.MaybeNumbers("angles_deg", 1, maxSamples, faceAngle)
	gravity := f.MaybeNumbers("g_m_s2", 1, maxSamples, codec.Range{Min: 0, OpenMin: true, Max: 200, Suggestion: "the length of the acceleration, gravity in it"})
	names := [3]string{"ax_m_s2", "ay_m_s2", "az_m_s2"}
	var along [3][]float64
	for i, name := range names {
		along[i] = f.MaybeNumbers(name, 1, maxSamples, componentRange)
	}
	axis := f.MaybeChoice("axis", "tilt_by_edge", "skew", "tilt", "face_up")
	up := f.MaybeNumber("up_sign", codec.Range{Min: -1, Max: 1, Whole: true, Suggestion: "1 or −1, as a phone that lies face up told"})
	refuse := func(name, code, message string) { f.Fail(f.Refuse(name, code, message)) }
	if v.Described() || f.Problem() != nil {
		return nil, 0, 0
	}
	for i := 1; i < len(times); i++ {
		if times[i] < times[i-1] {
			refuse("t_s", codec.Impossible, "the times must not run backwards")
			return nil, 0, 0
		}
	}
	raw := false
	for i := range along {
		raw = raw || along[i] != nil
	}
	if !raw {
		switch {
		case angles == nil:
			refuse("angles_deg", codec.MissingField, "give the angles that were read, or the accelerations ax_m_s2, ay_m_s2 and az_m_s2 with axis")
		case axis != "":
			refuse("axis", codec.Impossible, "angles are read as they are; axis goes with accelerations")
		case up != nil:
			refuse("up_sign", codec.Impossible, "angles are read as they are; up_sign goes with accelerations")
		case len(times) != len(angles):
			refuse("angles_deg", codec.Impossible, "there must be one angle for each time")
		case gravity != nil && len(gravity) != len(angles):
			refuse("g_m_s2", codec.Impossible, "there must be one acceleration for each angle, or none at all")
		}
		if f.Problem() != nil {
			return nil, 0, 0
		}
		samples = make([]peak.Sample, len(times))
		for i := range samples {
			samples[i] = peak.Sample{Time: times[i], Angle: angles[i] * degree}
			if gravity != nil {
				samples[i].Gravity = gravity[i]
			}
		}
		return samples, 0, 0
	}
	for i, name := range names {
		switch {
		case along[i] == nil:
			refuse(name, codec.MissingField, "an acceleration has three components; give this one too")
		case len(along[i]) != len(times):
			refuse(name, codec.Impossible, "there must be one acceleration for each time")
		}
	}
	pose := poses[axis]
	switch {
	case angles != nil:
		refuse("angles_deg", codec.Impossible, "give angles or accelerations, not both")
	case gravity != nil:
		refuse("g_m_s2", codec.Impossible, "its length comes out of the components; leave it out")
	case axis == "":
		refuse("axis", codec.MissingField, "say how the phone is held: tilt_by_edge, skew, tilt or face_up")
	case pose == peak.FaceUp && up != nil:
		refuse("up_sign", codec.Impossible, "a phone that lies face up tells the sign; leave it out")
	case pose != peak.FaceUp && up == nil:
		refuse("up_sign", codec.MissingField, "phones differ in the sign of gravity: lay it face up once, axis face_up gives the sign")
	case up != nil && *up == 0:
		refuse("up_sign", codec.OutOfRange, "1 or −1, as a phone that lies face up told")
	}
	if f.Problem() != nil {
		return nil, 0, 0
	}
	accelerations := make([]peak.Acceleration, len(times))
	for i := range times {
		accelerations[i] = peak.Acceleration{X: along[0][i], Y: along[1][i], Z: along[2][i]}
	}
	way := 1.0
	if up != nil {
		way = *up
	}
	for i, a := range accelerations {
		angle, ok := pose.Angle(a, way)
		if !ok {
			turned++
			continue
		}
		samples = append(samples, peak.Sample{Time: times[i], Angle: angle, Gravity: a.Length()})
	}
	if len(samples) == 0 && pose != peak.FaceUp {
		refuse("axis", codec.Impossible, "the phone lies flat: hold it upright against the antenna")
		return nil, 0, 0
	}
	if pose == peak.FaceUp {
		var told bool
		if sign, told = peak.UpSign(accelerations); !told {
			refuse("axis", codec.Impossible, "the phone does not lie still on its back: lay it down, screen up")
		}
	}
	return samples, turned, sign
}

// tiltFace makes one face's mean out of samples. What a phone's accelerations mean,
// with the signs, stands beside peak.Pose.
func tiltFace(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	samples, turned, sign := faceSamples(v, f)
	if p := f.Done(); p != nil || v.Described() {
		return codec.Obj(), p
	}
	h, ok := peak.Hold(samples)
	if !ok {
		shaken := "g_m_s2"
		if v.Get("ax_m_s2") != nil {
			shaken = "ax_m_s2"
		}
		return nil, f.Refuse(shaken, codec.Impossible, "every sample was shaken: rest the phone on the antenna and take your hand away")
	}
	text := "Enough."
	switch {
	case h.Enough:
	case h.Duration < peak.StillSeconds:
		text = "Hold on: three seconds if the mast is still, twenty if it sways."
	default:
		text = "The mast sways or the phone moves: hold on for twenty seconds, or type the reading of a level."
	}
	out := codec.Obj(
		codec.M("mean_deg", deg(h.Mean)),
		codec.M("spread_deg", deg(h.Spread)),
		codec.M("count", codec.Num(h.Count)),
		codec.M("used", codec.Int(h.Used)),
		codec.M("rejected", codec.Int(h.Shaky+turned)),
		codec.M("duration_s", codec.Num(h.Duration)),
		codec.M("drift_deg", deg(h.Drift)),
		codec.M("still", codec.Truth(h.Still)),
		codec.M("enough", codec.Truth(h.Enough)),
		codec.M("seconds_needed", codec.Num(h.Needed())),
		codec.M("up_sign", codec.Nothing()),
		codec.M("u_scale", codec.Num(0)),
		codec.M("text", codec.Str(text)),
	)
	if v.Get("ax_m_s2") != nil {
		out.Set("u_scale", codec.Num(peak.PhoneScale))
	}
	if sign != 0 {
		out.Set("up_sign", codec.Num(sign))
	}
	return out, nil
}
