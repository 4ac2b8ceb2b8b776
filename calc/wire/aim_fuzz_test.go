package wire

import (
	"encoding/json"
	"fmt"
	"strings"
	"testing"
)

// sound holds what is true of every answer and every problem of the door:
// exactly one of them, an answer that is JSON (so finite), a problem that says
// something, and never a fault of ours.
func sound(t *testing.T, op string, in []byte) {
	out, p := Reckon(op, in)
	switch {
	case p == nil && !json.Valid(out):
		t.Fatalf("%s of %s answered %q", op, in, out)
	case p != nil && out != nil:
		t.Fatalf("%s of %s answered %s and refused with %v", op, in, out, p)
	case p != nil && (p.Message == "" || p.Code == "" || p.Code == "internal"):
		t.Fatalf("%s of %s: %v", op, in, p)
	}
}

func fuzz(f *testing.F, seeds map[string][]string) {
	for op, list := range seeds {
		for _, in := range list {
			f.Add(op, []byte(in))
		}
	}
	f.Fuzz(func(t *testing.T, op string, in []byte) {
		if _, known := seeds[op]; !known {
			return // another topic's target asks that one
		}
		sound(t, op, in)
	})
}

func FuzzAim(f *testing.F) {
	fuzz(f, map[string][]string{
		"aim.target":  {`{"from":{"lat_deg":89.99,"lon_deg":180,"height_m":1e3,"u_m":0},"to":{"lat_deg":-89.99,"lon_deg":-180,"height_m":0},"height_datum":"e","k_factor":0.2}`},
		"aim.compass": {`{"lat_deg":89.99,"lon_deg":360,"height_m":850000,"decimal_year":2029.99,"compass_deg":[1,359]}`, `{"lat_deg":1,"lon_deg":1,"height_m":0,"date":"2028-02-29"}`},
		"aim.sun":     {`{"lat_deg":-89.9,"lon_deg":-180,"height_m":0,"time":"2026-06-21T12:00:00.5+14:00","pressure_hpa":300,"temperature_c":-90}`},
		"aim.sight": {`{"reference":"sun","how":"space","side":"left","angle_deg":60,"boresight_elevation_deg":-3,"sun":{"lat_deg":48,"lon_deg":16,"height_m":1,"time":"2026-11-30T10:00:00Z","u_time_s":3600}}`,
			`{"reference":"landmark","how":"horizontal","angle_deg":-360,"landmark":{"from":{"lat_deg":1,"lon_deg":1,"height_m":0},"to":{"lat_deg":1.1,"lon_deg":1,"height_m":0}}}`},
		"aim.path":   {`{"frequency_mhz":300000,"distance_m":1e6,"near_height_m":-1000,"far_height_m":30000,"k_factor":0.2,"tx_powers_dbm":[20],"near_gain_dbi":30,"far_gain_dbi":30,"obstacles":[{"at_m":1,"top_m":3},{"at_m":1.0000001,"top_m":30000,"u_m":1000}]}`},
		"aim.sector": {`{"height_m":1e-300,"tilt_deg":-4,"beamwidth_deg":8}`},
		"aim.lean":   {`{"axes":[{"lean_deg":1,"toward_deg":0},{"lean_deg":-15,"toward_deg":21}],"mount_azimuth_deg":1}`},
	})
}

func FuzzPeak(f *testing.F) {
	fuzz(f, map[string][]string{
		"peak.fit":     {`{"angles_deg":[0,1e-9,2,-360,4],"levels_dbm":[-55,-54,-150,0,-57],"beamwidth_deg":0.05,"expected_level_dbm":0,"expected_u_db":1e-9,"level_u_db":20}`},
		"tilt.twoface": {`{"face_a_deg":-90,"face_b_deg":90,"spread_a_deg":45,"count_a":3.0000001,"edge_tilt_deg":0}`, `{"face_a_deg":90,"face_b_deg":-90,"edge_tilt_deg":0}`},
		"tilt.face":    {`{"t_s":[0,0,0,1e9],"angles_deg":[90,-90,90,1e-300],"g_m_s2":[9.8,9.9,9.7,9.81]}`},
	})
}

// FuzzAimNumbers fills well-formed questions with figures: bytes alone seldom get
// past the decoder.
func FuzzAimNumbers(f *testing.F) {
	f.Add(uint8(0), 89.99, 179.9, 0.0, 89.99, -179.9, 5.0)
	f.Add(uint8(1), 0.0, 0.0, -1000.0, 2029.9, 3.0, 5.0)
	f.Add(uint8(3), 48.0, 16.0, 60.0, -3.0, 0.5, 40.0)
	f.Add(uint8(4), 6000.0, 1e4, 5e3, 40.0, 50.0, 4999.0)
	f.Add(uint8(7), -1.0, 0.0, 1e-9, -50.0, -56.0, 3.0)
	templates := []struct{ op, form string }{
		{"aim.target", `{"from":{"lat_deg":%v,"lon_deg":%v,"height_m":%v},"to":{"lat_deg":%v,"lon_deg":%v,"height_m":0,"u_m":%v},"height_datum":"e"}`},
		{"aim.compass", `{"lat_deg":%v,"lon_deg":%v,"height_m":%v,"decimal_year":%v,"compass_deg":[%v,%v]}`},
		{"aim.sun", `{"lat_deg":%v,"lon_deg":%v,"height_m":%v,"time":"2026-06-21T12:00:00Z","pressure_hpa":%v,"temperature_c":%v}`},
		{"aim.sight", `{"reference":"landmark","how":"space","side":"left","landmark":{"from":{"lat_deg":%v,"lon_deg":%v,"height_m":0},"to":{"lat_deg":47,"lon_deg":8,"height_m":0}},"angle_deg":%v,"boresight_elevation_deg":%v,"u_angle_deg":%v,"u_level_deg":%v}`},
		{"aim.path", `{"frequency_mhz":%v,"distance_m":%v,"near_height_m":30,"far_height_m":40,"obstacles":[{"at_m":%v,"top_m":%v,"u_m":%v},{"at_m":%v,"top_m":35}],"tx_power_dbm":20,"near_gain_dbi":20,"far_gain_dbi":20}`},
		{"aim.sector", `{"height_m":%v,"tilt_deg":%v,"beamwidth_deg":%v}`},
		{"aim.lean", `{"axes":[{"lean_deg":%v,"toward_deg":%v},{"lean_deg":%v,"toward_deg":%v}],"mount_azimuth_deg":%v}`},
		{"peak.fit", `{"angles_deg":[%v,%v,%v,0,1],"levels_dbm":[%v,%v,-51,-52,-50],"beamwidth_deg":%v}`},
		{"tilt.twoface", `{"face_a_deg":%v,"face_b_deg":%v,"spread_a_deg":%v,"count_a":%v,"edge_tilt_deg":%v}`},
		{"tilt.face", `{"t_s":[0,%v,%v],"angles_deg":[%v,%v,%v]}`},
	}
	f.Fuzz(func(t *testing.T, which uint8, a, b, c, d, e, g float64) {
		q := templates[int(which)%len(templates)]
		args := []any{a, b, c, d, e, g}
		sound(t, q.op, []byte(fmt.Sprintf(q.form, args[:strings.Count(q.form, "%v")]...)))
	})
}
