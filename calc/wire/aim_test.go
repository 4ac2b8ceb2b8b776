package wire

import (
	"encoding/json"
	"fmt"
	"math"
	"strconv"
	"strings"
	"testing"

	"crossplumb/testdata/published"
)

// ask runs an operation that must answer and returns the answer's fields.
func ask(t testing.TB, op, in string) map[string]any {
	t.Helper()
	out, p := Reckon(op, []byte(in))
	if p != nil {
		t.Fatalf("%s of %s: %v", op, in, p)
	}
	var answer map[string]any
	if err := json.Unmarshal(out, &answer); err != nil {
		t.Fatalf("%s answered %s: %v", op, out, err)
	}
	return answer
}

func figure(t testing.TB, answer map[string]any, name string) float64 {
	t.Helper()
	x, ok := answer[name].(float64)
	if !ok {
		t.Fatalf("%s is %v", name, answer[name])
	}
	return x
}

func within(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if d := got - want; !(d <= tolerance && d >= -tolerance) {
		t.Errorf("%s: got %.10g, want %.10g ± %g", what, got, want, tolerance)
	}
}

func cell(t testing.TB, row map[string]string, name string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(row[name], 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// The tables again, through the door, at the tolerances that the design asks for.
func TestAimTargetAgainstTables(t *testing.T) {
	for _, r := range published.Table(t, "enu.csv") {
		a := ask(t, "aim.target", fmt.Sprintf(`{"from":{"lat_deg":%s,"lon_deg":%s,"height_m":%s,"u_m":5},"to":{"lat_deg":%s,"lon_deg":%s,"height_m":%s,"u_m":5},"height_datum":"WGS 84 ellipsoid","k_factor":1}`,
			r["observer_lat_deg"], r["observer_lon_deg"], r["observer_h_m"], r["target_lat_deg"], r["target_lon_deg"], r["target_h_m"]))
		// 1e-6°, and what the table's metres, rounded to 0.1 mm, leave open.
		angle := 1e-6 + 1e-4/cell(t, r, "slant_range_m")/degree
		within(t, "bearing", figure(t, a, "true_bearing_deg"), cell(t, r, "azimuth_from_enu_deg"), angle)
		within(t, "elevation", figure(t, a, "geometric_elevation_deg"), cell(t, r, "elevation_geometric_deg"), angle)
		within(t, "range", figure(t, a, "slant_range_m"), cell(t, r, "slant_range_m"), 1e-3)
		// At k = 1 the ray is straight.
		within(t, "no air", figure(t, a, "elevation_deg"), figure(t, a, "geometric_elevation_deg"), 0)
	}
	for _, r := range published.Table(t, "geodesic.csv") {
		a := ask(t, "aim.target", fmt.Sprintf(`{"from":{"lat_deg":%s,"lon_deg":%s,"height_m":0},"to":{"lat_deg":%s,"lon_deg":%s,"height_m":0},"height_datum":"ellipsoid"}`,
			r["lat1_deg"], r["lon1_deg"], r["lat2_deg"], r["lon2_deg"]))
		within(t, "geodesic bearing", math.Remainder(figure(t, a, "geodesic_bearing_deg")-cell(t, r, "azi1_deg"), 360), 0, 1e-6)
		s := figure(t, a, "distance_m")
		within(t, "distance", s, cell(t, r, "s12_m"), 1e-3)
		within(t, "bent ray", figure(t, a, "elevation_deg")-figure(t, a, "geometric_elevation_deg"), 0.25*s/(2*6371000)/degree, 1e-9)
	}
}

func TestAimCompassAgainstTables(t *testing.T) {
	for _, name := range []string{"wmm2025_testvalues.csv", "wmm2025_report_table.csv"} {
		for _, r := range published.Table(t, name) {
			a := ask(t, "aim.compass", fmt.Sprintf(`{"lat_deg":%s,"lon_deg":%s,"height_m":%g,"decimal_year":%s}`, r["lat_deg"], r["lon_deg_east"], 1000*cell(t, r, "height_km_wgs84"), r["decimal_year"]))
			within(t, "declination", figure(t, a, "declination_deg"), cell(t, r, "declination_deg"), 0.005+1e-9)
			within(t, "inclination", figure(t, a, "inclination_deg"), cell(t, r, "inclination_deg"), 0.005+1e-9)
			within(t, "total", figure(t, a, "total_nt"), cell(t, r, "F_nT"), 0.051)
			within(t, "horizontal", figure(t, a, "horizontal_nt"), cell(t, r, "H_nT"), 0.051)
			if want := cell(t, r, "H_nT") >= 2000; a["valid"] != want {
				t.Errorf("valid %v at %s nT", a["valid"], r["H_nT"])
			}
		}
	}
}

func TestAimCompassSaysWhenTheModelEnds(t *testing.T) {
	for _, row := range []struct {
		when  string
		valid bool
	}{
		{`"date":"2029-12-31"`, true}, {`"date":"2030-01-01"`, false}, {`"decimal_year":2030`, false}, {`"decimal_year":2033.5`, false},
		{`"decimal_year":2025`, true}, {`"date":"2024-12-31"`, false}, {`"date":"2026-11-30T09:12:00+01:00"`, true},
	} {
		a := ask(t, "aim.compass", `{"lat_deg":48,"lon_deg":16,"height_m":200,`+row.when+`}`)
		if a["valid"] != row.valid {
			t.Errorf("%s: valid %v", row.when, a["valid"])
		}
		if why, _ := a["why_not"].(string); row.valid != (why == "") {
			t.Errorf("%s: why not %q", row.when, why)
		}
	}
	a := ask(t, "aim.compass", `{"lat_deg":48,"lon_deg":16,"height_m":200,"date":"2026-11-30","compass_deg":[359,1,3]}`)
	b := a["bearing"].(map[string]any)
	within(t, "mean across north", b["magnetic_bearing_deg"].(float64), 1, 1e-9)
	within(t, "true", b["true_bearing_deg"].(float64), 1+figure(t, a, "declination_deg"), 1e-9)
	if b["tag"] != "gross-error check only" {
		t.Errorf("a compass bearing without its tag: %v", b)
	}
}

func TestAimSunAgainstTable(t *testing.T) {
	for _, r := range published.Table(t, "solar_azel.csv") {
		a := ask(t, "aim.sun", fmt.Sprintf(`{"lat_deg":%s,"lon_deg":%s,"height_m":%s,"time":"%s"}`, r["lat_deg"], r["lon_deg_east"], r["height_m_ellipsoid"], r["utc"]))
		e := cell(t, r, "elevation_geometric_deg")
		tolerance := 0.01
		if e > 75 {
			tolerance *= math.Cos(75*degree) / math.Cos(e*degree)
		}
		within(t, "azimuth", math.Remainder(figure(t, a, "azimuth_deg")-cell(t, r, "azimuth_true_deg"), 360), 0, tolerance)
		within(t, "elevation", figure(t, a, "elevation_deg"), e, 0.01)
		if caution, _ := a["caution"].(string); !strings.Contains(caution, "Never look at the sun") || !strings.Contains(caution, "optic") || !strings.Contains(caution, "shadow") {
			t.Errorf("caution: %q", caution)
		}
		if low := e < 0.3 || e > 60; a["usable"] == low && math.Abs(e) > 1 && math.Abs(e-60) > 0.1 {
			t.Errorf("at %v° usable is %v", e, a["usable"])
		}
	}
}

func TestAimSight(t *testing.T) {
	const place = `"lat_deg":48.2082,"lon_deg":16.3738,"height_m":170,"time":"2026-11-30T10:00:00+01:00"`
	sun := ask(t, "aim.sun", `{`+place+`}`)
	az, el, rate := figure(t, sun, "azimuth_deg"), figure(t, sun, "apparent_elevation_deg"), figure(t, sun, "azimuth_rate_deg_per_min")/60
	sight := func(rest string) map[string]any {
		return ask(t, "aim.sight", `{"reference":"sun","sun":{`+place+`,"u_time_s":10},"u_angle_deg":0.5,"u_level_deg":0.4,`+rest+`}`)
	}
	flat := sight(`"how":"horizontal","angle_deg":-95`)
	within(t, "horizontal", math.Remainder(figure(t, flat, "azimuth_deg")-(az-95), 360), 0, 1e-9)
	u := math.Sqrt(0.25 + math.Pow(math.Tan(el*degree)*0.4, 2) + math.Pow(rate*10, 2) + 0.01)
	within(t, "doubt", figure(t, flat, "u_deg"), u, 1e-9)
	shadow := sight(`"how":"shadow","angle_deg":85`)
	within(t, "shadow", figure(t, shadow, "azimuth_deg"), figure(t, flat, "azimuth_deg"), 1e-9)
	if c, _ := shadow["caution"].(string); !strings.Contains(c, "Never look at the sun") {
		t.Errorf("caution %q", c)
	}
	// In space: 95° to the left in the plane, boresight 3° down.
	gamma := math.Acos(math.Cos(el*degree)*math.Cos(-3*degree)*math.Cos(95*degree)+math.Sin(el*degree)*math.Sin(-3*degree)) / degree
	space := sight(fmt.Sprintf(`"how":"space","side":"left","boresight_elevation_deg":-3,"angle_deg":%.12f`, gamma))
	within(t, "space", figure(t, space, "azimuth_deg"), figure(t, flat, "azimuth_deg"), 1e-6)

	landmark := ask(t, "aim.sight", `{"reference":"landmark","how":"horizontal","angle_deg":10,"u_angle_deg":0.3,
		"landmark":{"from":{"lat_deg":47,"lon_deg":8,"height_m":400,"u_m":3},"to":{"lat_deg":47,"lon_deg":8.05,"height_m":420,"u_m":2}}}`)
	within(t, "landmark", figure(t, landmark, "azimuth_deg"), figure(t, landmark, "reference_azimuth_deg")+10, 1e-9)
	if landmark["caution"] != nil {
		t.Errorf("a landmark needs no caution of the sun: %v", landmark["caution"])
	}
}

func TestAimPath(t *testing.T) {
	a := ask(t, "aim.path", `{"frequency_mhz":6000,"distance_m":10000,"near_height_m":50,"far_height_m":70,"obstacles":[{"name":"ridge","at_m":5000,"top_m":52,"u_m":1}],
		"tx_power_dbm":20,"near_gain_dbi":28,"far_gain_dbi":30,"near_loss_db":1,"far_loss_db":0.5}`)
	// By hand: √(10000² + 20²) = 10000.02 m; 20 log(4π·10000.02/0.0499654) = 128.0108 dB.
	within(t, "free space", figure(t, a, "free_space_loss_db"), 128.0108, 5e-4)
	within(t, "level", figure(t, a, "expected_level_dbm"), 20+28+30-1.5-128.0108, 5e-4)
	within(t, "doubt", figure(t, a, "u_db"), math.Sqrt(1+2*0.25+2*0.09+1), 0.05)
	o := a["obstacles"].([]any)[0].(map[string]any)
	within(t, "clearance", o["clearance_m"].(float64), 6.5285, 1e-4)
	within(t, "zone", o["fresnel_radius_m"].(float64), 11.1765, 1e-4)
	if a["clear"] != false {
		t.Error("58 % of the zone is called clear")
	}
	if b := ask(t, "aim.path", `{"frequency_mhz":24000,"distance_m":10000,"near_height_m":50,"far_height_m":70}`); b["expected_level_dbm"] != nil || b["clear"] != nil || !strings.Contains(fmt.Sprint(b["remarks"]), "rain") {
		t.Errorf("no powers, no obstacles, 24 GHz: %v %v %v", b["expected_level_dbm"], b["clear"], b["remarks"])
	}
	// 23 dBm over four chains are 17 dBm each (10 log 4 = 6.02).
	s := ask(t, "aim.path", `{"frequency_mhz":6000,"distance_m":10000,"near_height_m":50,"far_height_m":50,"tx_power_shared_dbm":23,"chains":4,"near_gain_dbi":28,"far_gain_dbi":30}`)
	one := ask(t, "aim.path", `{"frequency_mhz":6000,"distance_m":10000,"near_height_m":50,"far_height_m":50,"tx_power_dbm":23,"near_gain_dbi":28,"far_gain_dbi":30}`)
	quarters := s["expected_levels_dbm"].([]any)
	if len(quarters) != 4 || math.Abs(quarters[3].(float64)-one["expected_level_dbm"].(float64)+6.0206) > 1e-4 {
		t.Errorf("shared power: %v beside %v", quarters, one["expected_level_dbm"])
	}
	c := ask(t, "aim.path", `{"frequency_mhz":6000,"distance_m":10000,"near_height_m":50,"far_height_m":70,"delta_n":45,"tx_powers_dbm":[20,17],"near_gain_dbi":28,"far_gain_dbi":30}`)
	within(t, "k of 45 N-units", figure(t, c, "k_factor"), 8930.776786/6371, 1e-9)
	levels := c["expected_levels_dbm"].([]any)
	within(t, "second chain", levels[0].(float64)-levels[1].(float64), 3, 1e-12)
}

func TestAimSectorAndLean(t *testing.T) {
	s := ask(t, "aim.sector", `{"height_m":30,"tilt_deg":-5,"beamwidth_deg":8}`)
	within(t, "inner", figure(t, s, "inner_edge_m"), 30/math.Tan(9*degree), 1e-9)
	within(t, "outer", figure(t, s, "outer_edge_m"), 30/math.Tan(1*degree), 1e-9)
	if s := ask(t, "aim.sector", `{"height_m":30,"tilt_deg":0,"beamwidth_deg":8}`); s["outer_edge_m"] != nil || s["centre_m"] != nil || s["inner_edge_m"] == nil {
		t.Errorf("no tilt: %v", s)
	}
	l := ask(t, "aim.lean", `{"lean_deg":2,"toward_deg":100,"mount_azimuth_deg":10}`)
	within(t, "tilt", figure(t, l, "tilt_deg"), 0, 1e-12)
	within(t, "skew", figure(t, l, "skew_deg"), 2, 1e-12)
	l = ask(t, "aim.lean", `{"axes":[{"lean_deg":-1,"toward_deg":0},{"lean_deg":1,"toward_deg":90}],"mount_azimuth_deg":135}`)
	within(t, "tilt of two axes", figure(t, l, "tilt_deg"), -math.Sqrt2, 1e-9)
	within(t, "toward", figure(t, l, "toward_deg"), 135, 1e-9)
}

func TestPeakAndTilt(t *testing.T) {
	p := ask(t, "peak.fit", `{"angles_deg":[44,45,46,47,48,49,50],"levels_dbm":[-54,-51,-49,-48,-49,-51,-54],"beamwidth_deg":4,"expected_level_dbm":-48,"expected_u_db":2,"power_control_off":true}`)
	within(t, "peak", figure(t, p, "peak_deg"), 47, 0.05)
	within(t, "bolt back", figure(t, p, "from_last_deg"), -3, 0.05)
	if p["lobe"] != "main" || p["enough"] != true {
		t.Errorf("%v %v", p["lobe"], p["take_more"])
	}
	p = ask(t, "peak.fit", `{"angles_deg":[358,359,0,1,2],"levels_dbm":[-52,-50,-49,-50,-52]}`)
	within(t, "across north", math.Remainder(figure(t, p, "peak_deg"), 360), 0, 0.05)
	if p["lobe"] != "unsure" || !strings.Contains(fmt.Sprint(p["take_more"]), "power control") {
		t.Errorf("nothing known: %v %v", p["lobe"], p["take_more"])
	}
	f := ask(t, "tilt.twoface", `{"face_a_deg":1.7,"face_b_deg":-3.3,"spread_a_deg":0.2,"spread_b_deg":0.2,"count_a":8,"count_b":8,"edge_tilt_deg":-8}`)
	within(t, "tilt", figure(t, f, "tilt_deg"), 2.5, 1e-9)
	within(t, "bias", figure(t, f, "bias_deg"), -0.8, 1e-9)
	within(t, "skew", math.Asin(math.Sin(figure(t, f, "skew_deg")*degree)*math.Cos(8*degree))/degree, 2.5, 1e-9)
	h := ask(t, "tilt.face", `{"t_s":[0,1,2,3],"angles_deg":[2,2.02,1.98,2],"g_m_s2":[9.81,9.8,9.79,9.81]}`)
	within(t, "held", figure(t, h, "mean_deg"), 2, 1e-9)
	if h["enough"] != true {
		t.Errorf("three still seconds: %v", h)
	}
}

// Every bad input is a clear message that names its field; none is NaN.
func TestAimRefuses(t *testing.T) {
	const end = `{"lat_deg":47,"lon_deg":8,"height_m":400}`
	const other = `{"lat_deg":47.01,"lon_deg":8,"height_m":400}`
	const path = `"frequency_mhz":6000,"distance_m":10000,"near_height_m":50,"far_height_m":70`
	const vienna = `"lat_deg":48.2,"lon_deg":16.4,"height_m":170`
	for _, row := range []struct{ name, op, in, code, field string }{
		{"at the pole", "aim.target", `{"from":{"lat_deg":90,"lon_deg":8,"height_m":0},"to":` + end + `,"height_datum":"e"}`, "impossible", "from.lat_deg"},
		{"at the other pole", "aim.target", `{"from":{"lat_deg":-90,"lon_deg":8,"height_m":0},"to":` + end + `,"height_datum":"e"}`, "impossible", "from.lat_deg"},
		{"both ends at one point", "aim.target", `{"from":` + end + `,"to":` + end + `,"height_datum":"e"}`, "impossible", "to"},
		{"one above the other", "aim.target", `{"from":` + end + `,"to":{"lat_deg":47,"lon_deg":8,"height_m":500},"height_datum":"e"}`, "impossible", "to"},
		{"antipode", "aim.target", `{"from":` + end + `,"to":{"lat_deg":-47,"lon_deg":-172,"height_m":0},"height_datum":"e"}`, "not_modelled", "to"},
		{"latitude of 91", "aim.target", `{"from":{"lat_deg":91,"lon_deg":8,"height_m":0},"to":` + end + `,"height_datum":"e"}`, "out_of_range", "from.lat_deg"},
		{"no datum", "aim.target", `{"from":` + end + `,"to":` + other + `}`, "missing_field", "height_datum"},
		{"empty datum", "aim.target", `{"from":` + end + `,"to":` + other + `,"height_datum":""}`, "missing_field", "height_datum"},
		{"k of nothing", "aim.target", `{"from":` + end + `,"to":` + other + `,"height_datum":"e","k_factor":0}`, "out_of_range", "k_factor"},
		{"negative doubt", "aim.target", `{"from":{"lat_deg":47,"lon_deg":8,"height_m":0,"u_m":-1},"to":` + other + `,"height_datum":"e"}`, "out_of_range", "from.u_m"},
		{"unknown field", "aim.target", `{"from":{"lat_deg":47,"lon_deg":8,"height_m":0,"alt":1},"to":` + other + `,"height_datum":"e"}`, "unknown_field", "from.alt"},
		{"year 1900", "aim.compass", `{` + vienna + `,"decimal_year":1900}`, "out_of_range", "decimal_year"},
		{"date in 2040", "aim.compass", `{` + vienna + `,"date":"2040-01-01"}`, "out_of_range", "date"},
		{"no such day", "aim.compass", `{` + vienna + `,"date":"2026-02-30"}`, "out_of_range", "date"},
		{"no time", "aim.compass", `{` + vienna + `}`, "missing_field", "date"},
		{"two times", "aim.compass", `{` + vienna + `,"date":"2026-01-01","decimal_year":2026}`, "impossible", "decimal_year"},
		{"compass at the pole", "aim.compass", `{"lat_deg":90,"lon_deg":0,"height_m":0,"decimal_year":2026}`, "impossible", "lat_deg"},
		{"too high", "aim.compass", `{"lat_deg":0,"lon_deg":0,"height_m":850001,"decimal_year":2026}`, "out_of_range", "height_m"},
		{"compass all round", "aim.compass", `{` + vienna + `,"decimal_year":2026,"compass_deg":[0,180]}`, "impossible", "compass_deg"},
		{"sun at the pole", "aim.sun", `{"lat_deg":-90,"lon_deg":0,"height_m":0,"time":"2026-01-01T00:00:00Z"}`, "impossible", "lat_deg"},
		{"time without offset", "aim.sun", `{` + vienna + `,"time":"2026-01-01T00:00:00"}`, "out_of_range", "time"},
		{"year 1999", "aim.sun", `{` + vienna + `,"time":"1999-12-31T23:59:59Z"}`, "out_of_range", "time"},
		{"year 2101", "aim.sun", `{` + vienna + `,"time":"2101-01-01T00:00:00Z"}`, "out_of_range", "time"},
		{"sun below the horizon", "aim.sight", `{"reference":"sun","how":"shadow","angle_deg":10,"sun":{` + vienna + `,"time":"2026-11-30T00:00:00Z"}}`, "impossible", "sun.time"},
		{"sun overhead", "aim.sight", `{"reference":"sun","how":"shadow","angle_deg":10,"sun":{"lat_deg":0,"lon_deg":0,"height_m":0,"time":"2026-03-20T12:07:00Z"}}`, "impossible", "sun.time"},
		{"shadow of a landmark", "aim.sight", `{"reference":"landmark","how":"shadow","angle_deg":10,"landmark":{"from":` + end + `,"to":` + other + `}}`, "impossible", "how"},
		{"landmark at the mast", "aim.sight", `{"reference":"landmark","how":"horizontal","angle_deg":10,"landmark":{"from":` + end + `,"to":` + end + `}}`, "impossible", "landmark.to"},
		{"landmark overhead", "aim.sight", `{"reference":"landmark","how":"horizontal","angle_deg":10,"landmark":{"from":` + end + `,"to":{"lat_deg":47.0001,"lon_deg":8,"height_m":900}}}`, "not_modelled", "landmark"},
		{"space angle without its side", "aim.sight", `{"reference":"landmark","how":"space","angle_deg":60,"landmark":{"from":` + end + `,"to":` + other + `}}`, "missing_field", "side"},
		{"space angle within 15°", "aim.sight", `{"reference":"landmark","how":"space","side":"left","angle_deg":14,"landmark":{"from":` + end + `,"to":` + other + `}}`, "not_modelled", "angle_deg"},
		{"no such triangle", "aim.sight", `{"reference":"landmark","how":"space","side":"left","boresight_elevation_deg":50,"angle_deg":20,"landmark":{"from":` + end + `,"to":` + other + `}}`, "impossible", "angle_deg"},
		{"sun sight without the sun", "aim.sight", `{"reference":"sun","how":"shadow","angle_deg":10}`, "missing_field", "sun"},
		{"no doubt at all", "aim.sight", `{"reference":"landmark","how":"horizontal","angle_deg":1,"u_angle_deg":0,"landmark":{"from":` + end + `,"to":` + other + `}}`, "out_of_range", "u_angle_deg"},
		{"obstacle beyond the path", "aim.path", `{` + path + `,"obstacles":[{"at_m":10001,"top_m":0}]}`, "out_of_range", "obstacles[0].at_m"},
		{"obstacle at the far end", "aim.path", `{` + path + `,"obstacles":[{"at_m":10000,"top_m":0}]}`, "out_of_range", "obstacles[0].at_m"},
		{"obstacle behind", "aim.path", `{` + path + `,"obstacles":[{"at_m":5,"top_m":1},{"at_m":-5,"top_m":0}]}`, "out_of_range", "obstacles[1].at_m"},
		{"obstacle on the antenna", "aim.path", `{` + path + `,"obstacles":[{"at_m":0.001,"top_m":0}]}`, "not_modelled", "obstacles[0].at_m"},
		{"no way", "aim.path", `{"frequency_mhz":6000,"distance_m":0,"near_height_m":50,"far_height_m":70}`, "out_of_range", "distance_m"},
		{"loss with a sign", "aim.path", `{` + path + `,"near_loss_db":-1}`, "out_of_range", "near_loss_db"},
		{"k twice", "aim.path", `{` + path + `,"k_factor":1,"delta_n":40}`, "impossible", "delta_n"},
		{"sector at ground", "aim.sector", `{"height_m":0,"tilt_deg":-5,"beamwidth_deg":8}`, "out_of_range", "height_m"},
		{"lean without its way", "aim.lean", `{"lean_deg":2,"mount_azimuth_deg":10}`, "missing_field", "toward_deg"},
		{"no lean", "aim.lean", `{"mount_azimuth_deg":10}`, "missing_field", "lean_deg"},
		{"axes that are one", "aim.lean", `{"axes":[{"lean_deg":1,"toward_deg":0},{"lean_deg":1,"toward_deg":185}],"mount_azimuth_deg":0}`, "impossible", "axes"},
		{"lean of 40", "aim.lean", `{"lean_deg":40,"toward_deg":0,"mount_azimuth_deg":10}`, "out_of_range", "lean_deg"},
		{"levels in the wrong sign", "peak.fit", `{"angles_deg":[0,1,2],"levels_dbm":[55,54,56]}`, "out_of_range", "levels_dbm[0]"},
		{"expected in the wrong sign", "peak.fit", `{"angles_deg":[0],"levels_dbm":[-55],"expected_level_dbm":50,"expected_u_db":2}`, "out_of_range", "expected_level_dbm"},
		{"a level too few", "peak.fit", `{"angles_deg":[0,1,2],"levels_dbm":[-55,-54]}`, "impossible", "levels_dbm"},
		{"no levels", "peak.fit", `{"angles_deg":[],"levels_dbm":[]}`, "out_of_range", "angles_deg"},
		{"power control on", "peak.fit", `{"angles_deg":[0,1,2],"levels_dbm":[-55,-54,-55],"power_control_off":false}`, "impossible", "power_control_off"},
		{"expected without doubt", "peak.fit", `{"angles_deg":[0],"levels_dbm":[-55],"expected_level_dbm":-50}`, "missing_field", "expected_u_db"},
		{"face of 100", "tilt.twoface", `{"face_a_deg":100,"face_b_deg":0}`, "out_of_range", "face_a_deg"},
		{"nothing read on a face", "tilt.twoface", `{"readings_a_deg":[1.7]}`, "missing_field", "face_b_deg"},
		{"readings and their mean", "tilt.twoface", `{"face_a_deg":1.7,"readings_a_deg":[1.7],"face_b_deg":0}`, "impossible", "readings_a_deg"},
		{"readings with a count of their own", "tilt.twoface", `{"readings_a_deg":[1.7],"count_a":3,"face_b_deg":0}`, "impossible", "readings_a_deg"},
		{"edge that can not be", "tilt.twoface", `{"face_a_deg":80,"face_b_deg":-80,"edge_tilt_deg":40}`, "impossible", "edge_tilt_deg"},
		{"all shaken", "tilt.face", `{"t_s":[0,1],"angles_deg":[1,1],"g_m_s2":[12,5]}`, "impossible", "g_m_s2"},
		{"neither angles nor accelerations", "tilt.face", `{"t_s":[0]}`, "missing_field", "angles_deg"},
		{"two components", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"axis":"skew","up_sign":1}`, "missing_field", "az_m_s2"},
		{"a component too short", "tilt.face", `{"t_s":[0,1],"ax_m_s2":[0,0],"ay_m_s2":[9.8],"az_m_s2":[0,0],"axis":"skew","up_sign":1}`, "impossible", "ay_m_s2"},
		{"no axis", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"up_sign":1}`, "missing_field", "axis"},
		{"no sign", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"skew"}`, "missing_field", "up_sign"},
		{"sign of nought", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"skew","up_sign":0}`, "out_of_range", "up_sign"},
		{"sign of half", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"skew","up_sign":0.5}`, "out_of_range", "up_sign"},
		{"sign of what tells it", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[0],"az_m_s2":[9.8],"axis":"face_up","up_sign":1}`, "impossible", "up_sign"},
		{"angles and accelerations", "tilt.face", `{"t_s":[0],"angles_deg":[1],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"skew","up_sign":1}`, "impossible", "angles_deg"},
		{"lengths and accelerations", "tilt.face", `{"t_s":[0],"g_m_s2":[9.8],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"skew","up_sign":1}`, "impossible", "g_m_s2"},
		{"axis of angles", "tilt.face", `{"t_s":[0],"angles_deg":[1],"axis":"skew"}`, "impossible", "axis"},
		{"no such axis", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"roll","up_sign":1}`, "out_of_range", "axis"},
		{"flat where upright", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[0],"az_m_s2":[9.8],"axis":"skew","up_sign":1}`, "impossible", "axis"},
		{"upright where flat", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[9.8],"az_m_s2":[0],"axis":"face_up"}`, "impossible", "axis"},
		{"falling", "tilt.face", `{"t_s":[0],"ax_m_s2":[0],"ay_m_s2":[3],"az_m_s2":[0],"axis":"skew","up_sign":1}`, "impossible", "ax_m_s2"},
		{"scale of 2", "tilt.twoface", `{"face_a_deg":1,"face_b_deg":0,"u_scale":2}`, "out_of_range", "u_scale"},
		{"time backwards", "tilt.face", `{"t_s":[1,0],"angles_deg":[1,1]}`, "impossible", "t_s"},
	} {
		t.Run(row.name, func(t *testing.T) {
			out, p := Reckon(row.op, []byte(row.in))
			if p == nil {
				t.Fatalf("answered %s", out)
			}
			if p.Code != row.code || p.Field != row.field {
				t.Errorf("got %s at %q (%s), want %s at %q", p.Code, p.Field, p.Message, row.code, row.field)
			}
			if len(p.Message) < 15 {
				t.Errorf("the message says too little: %q", p.Message)
			}
		})
	}
}

// A mount at 89.99° north is no excuse.
func TestAimNearThePole(t *testing.T) {
	for _, lat := range []string{"89.99", "-89.99", "89.9999999"} {
		ask(t, "aim.target", `{"from":{"lat_deg":`+lat+`,"lon_deg":10,"height_m":0},"to":{"lat_deg":`+lat+`,"lon_deg":-170,"height_m":30},"height_datum":"e"}`)
		ask(t, "aim.compass", `{"lat_deg":`+lat+`,"lon_deg":10,"height_m":0,"decimal_year":2026.5}`)
		ask(t, "aim.sun", `{"lat_deg":`+lat+`,"lon_deg":10,"height_m":0,"time":"2026-06-21T12:00:00Z"}`)
	}
	// From anywhere to the pole itself: north, and no bearing back.
	a := ask(t, "aim.target", `{"from":{"lat_deg":89.5,"lon_deg":10,"height_m":0},"to":{"lat_deg":90,"lon_deg":77,"height_m":30},"height_datum":"e"}`)
	within(t, "to the pole", math.Remainder(figure(t, a, "true_bearing_deg"), 360), 0, 1e-6)
	if a["back_bearing_deg"] != nil {
		t.Errorf("a bearing from the pole: %v", a["back_bearing_deg"])
	}
}

// What a person is told of a short search: which side wants more and how far, what was
// left out and why, and "flat" only where it is flat. Levels of −12(θ/θ₃)² about 72° by
// hand, rounded to 0.1 dB.
func TestPeakTellsWhichSide(t *testing.T) {
	for _, row := range []struct {
		name, ask string
		says      []string
		not       []string
		leftOut   int
		peak      bool
	}{
		// θ₃ = 6°: 68° lies 5.3 dB down, 67° 8.3 dB, 74.8° 2.6 dB.
		{"boxed in", `{"angles_deg":[67,68,70,72,74,74.8],"levels_dbm":[-56.3,-53.3,-49.3,-48,-49.3,-50.6],"beamwidth_deg":6}`, []string{"8.3 dB below the best level"}, []string{"flat", "boxed in"}, 1, true},
		{"a beamwidth of another antenna", `{"angles_deg":[68,70,71,72,73,74],"levels_dbm":[-56.2,-52,-51,-48,-48.9,-50.7],"beamwidth_deg":10}`, []string{"the beamwidth is given as 10°", "8.2 dB below the best level"}, []string{"flat"}, 1, true},
		{"the right side short", `{"angles_deg":[68,69,70,71,72],"levels_dbm":[-53.3,-51,-49.3,-48.3,-48],"beamwidth_deg":6}`, []string{"go on towards higher angles, past 72°, until the level is 3 dB lower (about 3° more, to 75°)"}, []string{"flat", "lower angles"}, 0, true},
		{"the left side short, across north", `{"angles_deg":[0,1,2,3,4],"levels_dbm":[-48,-48.3,-49.3,-51,-53.3],"beamwidth_deg":6}`, []string{"go on towards lower angles, past 0°, until the level is 3 dB lower (about 3° more, to 357°)"}, []string{"flat", "higher angles"}, 0, true},
		{"one long step", `{"angles_deg":[67,71,71.5,72,72.5,73],"levels_dbm":[-56.3,-48.3,-48.1,-48,-48.1,-48.3],"beamwidth_deg":6}`, []string{"Between 71° and 67° the level falls past 6 dB", "past 73°"}, []string{"flat"}, 1, false},
		{"flat", `{"angles_deg":[71,71.5,72,72.5,73],"levels_dbm":[-48.3,-48.1,-48,-48.1,-48.3],"beamwidth_deg":6}`, []string{"Too flat on both sides"}, nil, 0, false},
		{"a second lobe", `{"angles_deg":[60,64,68,70,72,74,76],"levels_dbm":[-53,-60,-53.3,-49.3,-48,-49.3,-53.3],"beamwidth_deg":6}`, []string{"Past a reading more than 6 dB down", "12 dB below the best level"}, []string{"flat"}, 2, true},
	} {
		p := ask(t, "peak.fit", row.ask)
		told := fmt.Sprint(p["take_more"], p["left_out"])
		for _, s := range row.says {
			if !strings.Contains(told, s) {
				t.Errorf("%s: %q is not said: %s", row.name, s, told)
			}
		}
		for _, s := range row.not {
			if strings.Contains(told, s) {
				t.Errorf("%s: %q is said: %s", row.name, s, told)
			}
		}
		if n := len(p["left_out"].([]any)); n != row.leftOut {
			t.Errorf("%s: %d left out, not %d", row.name, n, row.leftOut)
		}
		if row.peak && p["peak_deg"] == nil {
			t.Errorf("%s: no peak: %s", row.name, told)
		}
	}
}
