package wire

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"
)

// faulty returns a job's sheet with radio figures put in and its links label to
// label by the mirror; change edits the decoded document.
func faulty(t testing.TB, figures string, change func(map[string]any)) []byte {
	t.Helper()
	raw, err := os.ReadFile("../../testdata/jobs/crossed-pair-go.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc map[string]any
	if err := json.Unmarshal(raw, &doc); err != nil {
		t.Fatal(err)
	}
	if figures != "" {
		var f any
		if err := json.Unmarshal([]byte(figures), &f); err != nil {
			t.Fatal(err)
		}
		doc["radio_figures"] = f
	}
	if change != nil {
		change(doc)
	}
	out, err := json.Marshal(doc)
	if err != nil {
		t.Fatal(err)
	}
	return out
}

func best(t testing.TB, doc []byte) (map[string]any, []any) {
	t.Helper()
	a := ask(t, "fault.rank", string(doc))
	list := a["candidates"].([]any)
	sum := 0.0
	for _, c := range list {
		sum += c.(map[string]any)["odds"].(float64)
	}
	if sum > 1+1e-9 || sum < 0.9 {
		t.Errorf("the odds listed add up to %v", sum)
	}
	return list[0].(map[string]any), list
}

// The sheet: 5.8 GHz, 40 MHz, 20 dBm, 17 dBi at both ends, 1.9 km. By hand: free
// space 20 log(4π·1900/0.051688) = 113.29 dB, so −59.3 dBm; noise −174 + 76 + 6 =
// −92 dBm; ratio 32.7 dB before cross-talk.
const healthy = `{"power_control_off":true,
	"near":{"ports":[{"port":"1","level_dbm":-59,"noise_dbm":-92,"snr_db":25,"xpi_db":26},{"port":"2","level_dbm":-60,"noise_dbm":-92,"snr_db":25,"xpi_db":25}],"streams":2},
	"far":{"ports":[{"port":"1","level_dbm":-59,"noise_dbm":-92,"snr_db":25,"xpi_db":26},{"port":"2","level_dbm":-59,"noise_dbm":-91,"snr_db":24,"xpi_db":25}],"streams":2}}`

func TestFaultRankByHand(t *testing.T) {
	first, _ := best(t, faulty(t, healthy, nil))
	if first["code"] != "nothing_stands_out" {
		t.Fatalf("healthy figures: %v (%v)", first["code"], first["text"])
	}
	for _, p := range first["predicts"].([]any) {
		q := p.(map[string]any)
		switch q["figure"] {
		case "level_dbm":
			within(t, "level", q["predicted"].(float64), -59.3, 0.3)
		case "noise_dbm":
			within(t, "noise", q["predicted"].(float64), -92, 0.1)
		}
	}
	for _, row := range []struct{ name, code, port, end string }{
		{"every level 17 dB low at both ends, discrimination gone", "side_lobe", "", ""},
		{"chain 2 10 dB low both ways, return loss of the near feeder poor and its level moving", "feeder_wet", "2", "near"},
		{"the noise of the near end 15 dB up", "interference", "", "near"},
		{"levels 10 dB low at the near end only", "wrong_power", "", "far"},
	} {
		var f map[string]any
		if err := json.Unmarshal([]byte(healthy), &f); err != nil {
			t.Fatal(err)
		}
		port := func(end string, i int) map[string]any {
			return f[end].(map[string]any)["ports"].([]any)[i].(map[string]any)
		}
		add := func(m map[string]any, name string, by float64) { m[name] = m[name].(float64) + by }
		switch row.code {
		case "side_lobe":
			for _, end := range []string{"near", "far"} {
				for i := range 2 {
					add(port(end, i), "level_dbm", -17)
					port(end, i)["snr_db"], port(end, i)["xpi_db"] = 9.0, 10.0
				}
			}
		case "feeder_wet":
			// The loss is at the near end: the near port hears its own stream and the
			// other's equally weaker, the far end hears one stream weaker.
			add(port("near", 1), "level_dbm", -10)
			port("near", 1)["snr_db"], port("near", 1)["swing_db"], port("near", 1)["return_loss_db"] = 21.0, 0.9, 8.0
			port("near", 0)["swing_db"], port("near", 0)["return_loss_db"] = 0.3, 21.0
			// The link of near 2 is with far 1.
			add(port("far", 0), "level_dbm", -10)
			port("far", 0)["snr_db"], port("far", 0)["xpi_db"], port("far", 0)["swing_db"] = 15.0, 15.0, 0.9
			port("far", 1)["xpi_db"] = 34.0
			port("far", 1)["snr_db"] = 30.0
		case "wrong_power":
			for i := range 2 {
				add(port("near", i), "level_dbm", -10)
				port("near", i)["snr_db"] = 20.0
			}
		case "interference":
			for i := range 2 {
				add(port("near", i), "noise_dbm", 15)
				port("near", i)["snr_db"] = 17.0
			}
		}
		raw, _ := json.Marshal(f)
		first, list := best(t, faulty(t, string(raw), nil))
		if first["code"] != row.code {
			t.Errorf("%s: %v (%v), then %v", row.name, first["name"], first["odds"], list[1].(map[string]any)["name"])
			continue
		}
		if row.port != "" && first["port"] != row.port {
			t.Errorf("%s: port %v", row.name, first["port"])
		}
		if row.end != "" && first["end"] != row.end {
			t.Errorf("%s: end %v", row.name, first["end"])
		}
		if first["check_next"] == "" || first["text"] == "" {
			t.Errorf("%s: no words", row.name)
		}
	}
}

// What a sound link would show stands in every answer, also where the figures are so
// far off that it is not listed among the candidates. By hand: −59.3 dBm.
func TestFaultRankAlwaysTellsWhatASoundLinkShows(t *testing.T) {
	far := strings.ReplaceAll(strings.ReplaceAll(healthy, "-59", "-94"), "-60", "-95")
	for _, figures := range []string{healthy, far} {
		expected := ask(t, "fault.rank", string(faulty(t, figures, nil)))["expected"].([]any)
		levels := 0
		for _, e := range expected {
			if p := e.(map[string]any); p["figure"] == "level_dbm" {
				levels++
				if got := p["predicted"].(float64); math.Abs(got+59.3) > 0.3 {
					t.Errorf("%v port %v: a sound link is expected at %v dBm", p["end"], p["port"], got)
				}
			}
		}
		if levels != 4 {
			t.Errorf("%d levels are expected", levels)
		}
	}
}

// Where the figures do not tell, the odds are shared and it is said.
func TestFaultRankSharesTheOdds(t *testing.T) {
	figures := `{"power_control_off":true,"near":{"ports":[{"port":"1","level_dbm":-77},{"port":"2","level_dbm":-77}]},"far":{"ports":[{"port":"1","level_dbm":-77},{"port":"2","level_dbm":-77}]}}`
	first, list := best(t, faulty(t, figures, nil))
	codes := map[string]float64{}
	for _, c := range list {
		m := c.(map[string]any)
		codes[m["code"].(string)] += m["odds"].(float64)
	}
	if codes["side_lobe"] < 0.1 || codes["path_obstructed"] < 0.1 {
		t.Errorf("levels alone can not tell a side lobe from an obstructed path: %v", codes)
	}
	if len(first["cannot_tell_from"].([]any)) == 0 {
		t.Error("not said that others can not be told from the first")
	}
	a := ask(t, "fault.rank", string(faulty(t, figures, nil)))
	if !strings.Contains(strings.ToLower(jsonText(a["remarks"])), "discrimination") {
		t.Errorf("remarks do not say what would tell: %v", a["remarks"])
	}
}

func jsonText(v any) string {
	b, _ := json.Marshal(v)
	return string(b)
}

// Settings off the page.
func TestFaultRankReadsSettings(t *testing.T) {
	for _, row := range []struct{ name, field, code string }{
		{"half the channel's width", `"bandwidth_mhz":20`, "wrong_width"},
		{"another channel", `"frequency_mhz":5840`, "wrong_channel"},
	} {
		f := strings.Replace(healthy, `"near":{`, `"near":{`+row.field+`,`, 1)
		if row.code == "wrong_width" { // noise 3 dB down, ratio limited by cross-talk
			f = strings.ReplaceAll(f, `"noise_dbm":-92`, `"noise_dbm":-95`)
			f = strings.ReplaceAll(f, `"noise_dbm":-91`, `"noise_dbm":-95`)
		}
		first, _ := best(t, faulty(t, f, nil))
		if first["code"] != row.code {
			t.Errorf("%s: %v %v", row.name, first["name"], first["odds"])
		}
	}
}

func TestFaultRankRefuses(t *testing.T) {
	drop := func(where, name string) func(map[string]any) {
		return func(doc map[string]any) { delete(doc[where].(map[string]any), name) }
	}
	const one = `{"near":{"ports":[{"port":"1","level_dbm":-60}]}}`
	for _, row := range []struct {
		name, figures string
		change        func(map[string]any)
		code, field   string
	}{
		{"no figures", "", func(d map[string]any) { delete(d, "radio_figures") }, "missing_field", "radio_figures"},
		{"neither end", `{}`, nil, "missing_field", "radio_figures.near"},
		{"level in the wrong sign", `{"near":{"ports":[{"port":"1","level_dbm":60}]}}`, nil, "out_of_range", "radio_figures.near.ports[0].level_dbm"},
		{"noise in the wrong sign", `{"near":{"ports":[{"port":"1","noise_dbm":90}]}}`, nil, "out_of_range", "radio_figures.near.ports[0].noise_dbm"},
		{"return loss in the wrong sign", `{"near":{"ports":[{"port":"1","level_dbm":-60,"return_loss_db":-14}]}}`, nil, "out_of_range", "radio_figures.near.ports[0].return_loss_db"},
		{"no such port", `{"near":{"ports":[{"port":"7","level_dbm":-60}]}}`, nil, "impossible", "radio_figures.near.ports[0].port"},
		{"a port twice", `{"near":{"ports":[{"port":"1","level_dbm":-60},{"port":"1","level_dbm":-61}]}}`, nil, "impossible", "radio_figures.near.ports[1].port"},
		{"nothing of a port", `{"near":{"ports":[{"port":"1"}]}}`, nil, "missing_field", "radio_figures.near.ports[0].level_dbm"},
		{"deaf with a level", `{"near":{"ports":[{"port":"1","heard":false,"level_dbm":-60}]}}`, nil, "impossible", "radio_figures.near.ports[0].heard"},
		{"power control on", `{"power_control_off":false,"near":{"ports":[{"port":"1","level_dbm":-60}]}}`, nil, "impossible", "radio_figures.power_control_off"},
		{"expected without doubt", `{"expected_level_dbm":-60,"near":{"ports":[{"port":"1","level_dbm":-60}]}}`, nil, "impossible", "radio_figures.expected_u_db"},
		{"unknown figure", `{"near":{"ports":[{"port":"1","rssi":-60}]}}`, nil, "unknown_field", "radio_figures.near.ports[0].rssi"},
		{"no transmit power", one, drop("radio", "tx_power_dbm"), "missing_field", "radio.tx_power_dbm"},
		{"ratio without a width", `{"near":{"ports":[{"port":"1","snr_db":20}]}}`, drop("radio", "bandwidth_mhz"), "missing_field", "radio.bandwidth_mhz"},
		{"deaf without a width", `{"near":{"ports":[{"port":"1","heard":false}]}}`, drop("radio", "bandwidth_mhz"), "missing_field", "radio.bandwidth_mhz"},
	} {
		t.Run(row.name, func(t *testing.T) {
			out, p := Reckon("fault.rank", faulty(t, row.figures, row.change))
			if p == nil {
				t.Fatalf("answered %s", out)
			}
			if p.Code != row.code || p.Field != row.field {
				t.Errorf("got %s at %q (%s), want %s at %q", p.Code, p.Field, p.Message, row.code, row.field)
			}
		})
	}
	// Levels alone need no width.
	best(t, faulty(t, one, drop("radio", "bandwidth_mhz")))
	best(t, faulty(t, one, drop("radio", "noise_figure_db")))
	best(t, faulty(t, `{"expected_level_dbm":-60,"expected_u_db":2,"near":{"ports":[{"port":"1","level_dbm":-60},{"port":"2","heard":false}],"streams":1,"modulation_bits":6}}`, drop("radio", "tx_power_dbm")))
}

// Every job's sheet can be ranked, whatever its antennas.
func TestFaultRankTakesEveryJob(t *testing.T) {
	files, err := os.ReadDir("../../testdata/jobs")
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range files {
		raw, err := os.ReadFile("../../testdata/jobs/" + file.Name())
		if err != nil {
			t.Fatal(err)
		}
		var doc map[string]any
		if err := json.Unmarshal(raw, &doc); err != nil {
			t.Fatal(err)
		}
		if doc["near"] == nil {
			continue
		}
		label := doc["near"].(map[string]any)["antennas"].([]any)[0].(map[string]any)["elements"].([]any)[0].(map[string]any)["port"]
		doc["radio_figures"] = map[string]any{"near": map[string]any{"ports": []any{map[string]any{"port": label, "level_dbm": -60.0}}}}
		if r := doc["radio"].(map[string]any); r["tx_power_dbm"] == nil {
			r["tx_power_dbm"] = []any{20.0}
		}
		out, _ := json.Marshal(doc)
		if a, p := Reckon("fault.rank", out); p != nil {
			t.Errorf("%s: %v", file.Name(), p)
		} else if !json.Valid(a) || math.IsNaN(float64(len(a))) {
			t.Errorf("%s: %s", file.Name(), a)
		}
	}
}

func FuzzFault(f *testing.F) {
	f.Add(-59.0, -92.0, 25.0, 26.0, 0.3, 20.0, 2.0, uint8(3))
	f.Add(-150.0, 0.0, 80.0, -60.0, 0.0, 0.0, 0.0, uint8(0))
	f.Add(0.0, -150.0, -40.0, 60.0, 60.0, 60.0, 8.0, uint8(7))
	raw, err := os.ReadFile("../../testdata/jobs/crossed-pair-go.json")
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, level, noise, snr, xpi, swing, loss, streams float64, kind uint8) {
		var doc map[string]any
		if err := json.Unmarshal(raw, &doc); err != nil {
			t.Fatal(err)
		}
		clean := func(x float64) any {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				return nil
			}
			return x
		}
		port := map[string]any{"port": "1", "level_dbm": clean(level), "noise_dbm": clean(noise), "snr_db": clean(snr), "xpi_db": clean(xpi), "swing_db": clean(swing), "return_loss_db": clean(loss)}
		page := map[string]any{"ports": []any{port}, "streams": clean(streams), "modulation_bits": clean(streams)}
		doc["radio_figures"] = map[string]any{[]string{"near", "far"}[kind&1]: page}
		doc["radio"].(map[string]any)["combining"] = kind&2 != 0
		if kind&4 != 0 {
			port = map[string]any{"port": "1", "heard": false, "noise_dbm": clean(noise)}
			page["ports"] = []any{port}
		}
		in, err := json.Marshal(doc)
		if err != nil {
			t.Fatal(err)
		}
		sound(t, "fault.rank", in)
	})
}
