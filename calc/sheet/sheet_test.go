package sheet_test

import (
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// job reads a sheet of testdata/jobs.
func job(t testing.TB, name string) *codec.Value {
	t.Helper()
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", name+".json"))
	if err != nil {
		t.Fatal(err)
	}
	v, p := codec.Parse(in)
	if p != nil {
		t.Fatal(p)
	}
	return v
}

// at walks a path like near.antennas[0].skew and returns the object above its last
// name.
func at(t testing.TB, v *codec.Value, path string) (*codec.Value, string) {
	t.Helper()
	parts := strings.Split(strings.NewReplacer("[", ".", "]", "").Replace(path), ".")
	for i, name := range parts[:len(parts)-1] {
		next := v.Get(name)
		if v.Kind == codec.List {
			next = v.Items[int(name[0]-'0')]
		}
		if next == nil {
			t.Fatalf("no %s in %s", parts[:i+1], path)
		}
		v = next
	}
	return v, parts[len(parts)-1]
}

// with returns the sheet with the value at a path replaced; an empty text takes
// the field away.
func with(t testing.TB, name, path, json string) *codec.Value {
	t.Helper()
	doc := job(t, name)
	above, last := at(t, doc, path)
	if json == "" {
		for i := range above.Members {
			if above.Members[i].Name == last {
				above.Members = append(above.Members[:i], above.Members[i+1:]...)
				break
			}
		}
	} else {
		v, p := codec.Parse([]byte(json))
		if p != nil {
			t.Fatal(p)
		}
		above.Set(last, v)
	}
	out, p := codec.Marshal(doc)
	if p != nil {
		t.Fatal(p)
	}
	again, p := codec.Parse(out)
	if p != nil {
		t.Fatal(p)
	}
	return again
}

func TestEveryJobReads(t *testing.T) {
	names, err := filepath.Glob(filepath.Join("..", "..", "testdata", "jobs", "*.json"))
	if err != nil || len(names) < 6 {
		t.Fatalf("%d jobs, %v", len(names), err)
	}
	for _, name := range names {
		if _, p := sheet.Read(job(t, strings.TrimSuffix(filepath.Base(name), ".json"))); p != nil {
			t.Errorf("%s: %v", name, p)
		}
	}
}

func TestSheetRefuses(t *testing.T) {
	const two = "two-crossed-panels"
	many := `[` + strings.Repeat(`{"port":"1","slant_deg":45},`, 9999) + `{"port":"1","slant_deg":45}]`
	for _, row := range []struct{ name, path, json, code, field string }{
		{"skew of 400°", "near.antennas[0].skew.as_left[0].value", `400`, codec.OutOfRange, "near.antennas[0].skew.as_left[0].value"},
		{"a reading in words", "near.antennas[0].skew.as_left[0].value", `"abc"`, codec.WrongType, "near.antennas[0].skew.as_left[0].value"},
		{"NaN as text", "near.antennas[0].skew.as_left[0].value", `"NaN"`, codec.WrongType, "near.antennas[0].skew.as_left[0].value"},
		{"reading without doubt", "near.antennas[0].skew.as_left[0].u", `0`, codec.OutOfRange, "near.antennas[0].skew.as_left[0].u"},
		{"reading without its doubt stated", "near.antennas[0].skew.as_left[0].u", ``, codec.MissingField, "near.antennas[0].skew.as_left[0].u"},
		{"reading without unit", "near.antennas[0].skew.as_left[0].unit", ``, codec.MissingField, "near.antennas[0].skew.as_left[0].unit"},
		{"reading in another unit", "near.antennas[0].skew.as_left[0].unit", `"rad"`, codec.OutOfRange, "near.antennas[0].skew.as_left[0].unit"},
		{"plan with doubt", "near.antennas[0].skew.planned.u", `0.3`, codec.OutOfRange, "near.antennas[0].skew.planned.u"},
		{"magnetic bearing", "near.antennas[0].azimuth.as_left[0].north", `"magnetic"`, codec.OutOfRange, "near.antennas[0].azimuth.as_left[0].north"},
		{"bearing without its north", "near.antennas[0].azimuth.as_left[0].north", ``, codec.MissingField, "near.antennas[0].azimuth.as_left[0].north"},
		{"a skew with a north", "near.antennas[0].skew.as_left[0].north", `"true"`, codec.Impossible, "near.antennas[0].skew.as_left[0].north"},
		{"a panel without azimuth", "near.antennas[0].azimuth", ``, codec.MissingField, "near.antennas[0].azimuth"},
		{"no plan of the skew", "near.antennas[0].skew.planned", ``, codec.MissingField, "near.antennas[0].skew.planned"},
		{"time without offset", "near.antennas[0].skew.as_left[0].at", `"2026-11-30T09:12:00"`, codec.OutOfRange, "near.antennas[0].skew.as_left[0].at"},
		{"position with no axis", "near.antennas[1].position_mm.as_left[0].value", `{"right":null}`, codec.MissingField, "near.antennas[1].position_mm.as_left[0].value"},
		{"two antennas in one place", "near.antennas[1].position_mm.planned.value", `{"right":0,"up":0,"forward":0}`, codec.Impossible, "near.antennas[1].position_mm.planned.value"},
		{"two elements in one place", "near.antennas[0].elements[1].slant_deg", `-135`, codec.Impossible, "near.antennas[0].elements[1]"},
		{"two ports of one label", "near.antennas[1].elements[0].port", `"1"`, codec.Impossible, "near.antennas[1].elements[0].port"},
		{"two antennas of one name", "near.antennas[1].id", `"A"`, codec.Impossible, "near.antennas[1].id"},
		{"10,000 elements", "near.antennas[0].elements", many, codec.TooLarge, "near.antennas[0].elements"},
		{"nine ports", "near.antennas[0].elements", `[{"port":"a","slant_deg":0},{"port":"b","slant_deg":10},{"port":"c","slant_deg":20},{"port":"d","slant_deg":30},{"port":"e","slant_deg":40},{"port":"f","slant_deg":50},{"port":"g","slant_deg":60}]`, codec.TooLarge, "near.antennas[1]"},
		{"hand without axial ratio", "near.antennas[0].elements[0].hand", `"left"`, codec.Impossible, "near.antennas[0].elements[0].hand"},
		{"no antenna", "near.antennas", `[]`, codec.OutOfRange, "near.antennas"},
		{"zero spread", "surroundings.spreads.near.azimuth_deg", `0`, codec.OutOfRange, "surroundings.spreads.near.azimuth_deg"},
		{"spread above 60°", "surroundings.spreads.near.azimuth_deg", `61`, codec.OutOfRange, "surroundings.spreads.near.azimuth_deg"},
		{"sight without its factor", "surroundings.spreads.k_db", `null`, codec.MissingField, "surroundings.spreads.k_db"},
		{"factor without sight", "surroundings.sight", `false`, codec.Impossible, "surroundings.spreads.k_db"},
		{"no surroundings", "surroundings.spreads", `null`, codec.MissingField, "surroundings"},
		{"two kinds of surroundings", "surroundings.reflectors", `[{"bearing_deg":20,"distance_m":340,"amplitude_db":-9}]`, codec.Impossible, "surroundings"},
		{"another edition", "surroundings.class", `{"standard":"3GPP TR 38.901","edition":"V17.0.0","scenario":"RMa"}`, codec.OutOfRange, "surroundings.class.edition"},
		{"link to no port", "radio.links", `[{"near":"1","far":"9"}]`, codec.Impossible, "radio.links[0].far"},
		{"port linked twice", "radio.links", `[{"near":"1","far":"1"},{"near":"1","far":"2"}]`, codec.Impossible, "radio.links[1].near"},
		{"limit the wrong way", "limits[0].at_most", `3`, codec.Impossible, "limits[0].at_most"},
		{"limit without number", "limits[0].at_least", ``, codec.MissingField, "limits[0].at_least"},
		{"limit out of range", "limits[1].at_least", `1.5`, codec.OutOfRange, "limits[1].at_least"},
		{"limit twice", "limits[1].name", `"effective_streams"`, codec.Impossible, "limits[1].name"},
		{"no such limit", "limits[1].name", `"beauty"`, codec.OutOfRange, "limits[1].name"},
		{"wrong version", "sheet", `2`, codec.OutOfRange, "sheet"},
		{"unknown field", "path.colour", `"red"`, codec.UnknownField, "path.colour"},
		{"no distance", "path.distance_m", `0`, codec.OutOfRange, "path.distance_m"},
		{"panel without its beamwidth", "near.antennas[0].pattern.beamwidth_el_deg", `null`, codec.MissingField, "near.antennas[0].pattern.beamwidth_el_deg"},
		{"cuts that do not rise", "near.antennas[0].pattern", `{"kind":"cuts","gain_dbi":17,"cuts":{"azimuth":{"angles_deg":[-10,0,0],"levels_db":[-3,0,-3]},"elevation":{"angles_deg":[-4,0,4],"levels_db":[-3,0,-3]}}}`, codec.Impossible, "near.antennas[0].pattern.cuts.azimuth.angles_deg[2]"},
		{"powers for another number of chains", "radio.tx_power_dbm", `[20,20,20]`, codec.Impossible, "radio.tx_power_dbm"},
	} {
		t.Run(row.name, func(t *testing.T) {
			_, p := sheet.Read(with(t, two, row.path, row.json))
			if p == nil {
				t.Fatal("read")
			}
			if p.Code != row.code || p.Field != row.field {
				t.Errorf("got %v, want %s at %q", p, row.code, row.field)
			}
		})
	}
}

func TestASingleReadingMayStandForAList(t *testing.T) {
	doc := with(t, "two-crossed-panels", "near.antennas[0].skew.as_left", `{"value":1.5,"unit":"deg","u":0.3,"method":"level"}`)
	s, p := sheet.Read(doc)
	if p != nil {
		t.Fatal(p)
	}
	if r := s.Near.Antennas[0].Skew.AsLeft; len(r) != 1 || r[0].Deg != 1.5 || r[0].UDeg != 0.3 || r[0].Method != "level" {
		t.Errorf("read %+v", r)
	}
}

func fold(t *testing.T, doc *codec.Value, entries string) (*sheet.Sheet, *codec.Problem) {
	t.Helper()
	v, p := codec.Parse([]byte(entries))
	if p != nil {
		t.Fatal(p)
	}
	out, p := sheet.Fold(doc, v.Items)
	if p != nil {
		return nil, p
	}
	text, p := codec.Marshal(out)
	if p != nil {
		t.Fatal(p)
	}
	again, p := codec.Parse(text)
	if p != nil {
		t.Fatal(p)
	}
	s, p := sheet.Read(again)
	if p != nil {
		t.Fatalf("the folded sheet is refused: %v", p)
	}
	return s, nil
}

func taken(id, phase, antenna string, value string) string {
	return `{"kind":"reading.taken","id":"` + id + `","mount":"m1","body":{"phase":"` + phase + `","antenna":"` + antenna + `","quantity":"skew","reading":{"value":` + value + `,"unit":"deg","u":0.3,"method":"level"},"typed":"` + value + `"}}`
}

func TestFold(t *testing.T) {
	plan := with(t, "two-crossed-panels", "near.antennas[1].skew.as_left", `null`)
	const move = `{"kind":"bolt.moved","body":{"antenna":"B","quantity":"skew"}}`
	for _, row := range []struct {
		name    string
		entries []string
		left    []float64 // as-left skews of B
		found   int       // as-found skews of B, one stands in the sheet
	}{
		{"nothing", nil, nil, 1},
		{"readings pool", []string{taken("1", "as_left", "B", "6.2"), taken("2", "as_left", "B", "6.0")}, []float64{6.2, 6.0}, 1},
		{"other kinds are passed over", []string{`{"kind":"note.added","body":{"text":"wind"}}`, taken("1", "as_left", "B", "6.2"), `{"kind":"job.issued"}`}, []float64{6.2}, 1},
		{"a moved bolt drops what was left", []string{taken("1", "as_left", "B", "6.2"), move, taken("2", "as_left", "B", "0.1")}, []float64{0.1}, 1},
		{"a bolt moved last leaves nothing", []string{taken("1", "as_left", "B", "6.2"), move}, nil, 1},
		{"a moved bolt leaves what was found", []string{taken("1", "as_found", "B", "7"), move}, nil, 2},
		{"a moved bolt of another antenna does nothing", []string{taken("1", "as_left", "B", "6.2"), `{"kind":"bolt.moved","body":{"antenna":"A","quantity":"skew"}}`}, []float64{6.2}, 1},
		{"a withdrawn reading", []string{taken("1", "as_left", "B", "6.2"), taken("2", "as_left", "B", "6.0"), `{"kind":"reading.withdrawn","body":{"withdraws":"1"}}`}, []float64{6.0}, 1},
		{"withdrawn after the bolt moved", []string{taken("1", "as_left", "B", "6.2"), move, `{"kind":"reading.withdrawn","body":{"withdraws":"1"}}`}, nil, 1},
	} {
		t.Run(row.name, func(t *testing.T) {
			before, _ := codec.Marshal(plan)
			s, p := fold(t, plan, "["+strings.Join(row.entries, ",")+"]")
			if p != nil {
				t.Fatal(p)
			}
			b := &s.Near.Antennas[1]
			if len(b.Skew.AsLeft) != len(row.left) || len(b.Skew.AsFound) != row.found {
				t.Fatalf("as left %+v, as found %+v", b.Skew.AsLeft, b.Skew.AsFound)
			}
			if turned := len(row.left) == 0 && slices.Contains(row.entries, move); b.Skew.Turned != turned {
				t.Errorf("turned %v, want %v", b.Skew.Turned, turned)
			}
			for i, want := range row.left {
				if b.Skew.AsLeft[i].Deg != want {
					t.Errorf("as left %+v, want %v", b.Skew.AsLeft, row.left)
				}
			}
			if after, _ := codec.Marshal(plan); string(after) != string(before) {
				t.Error("folding changed the sheet it was given")
			}
		})
	}
}

func TestFoldRefuses(t *testing.T) {
	plan := job(t, "two-crossed-panels")
	for _, row := range []struct{ name, entry, code, field string }{
		{"impossible reading", taken("1", "as_left", "B", "400"), codec.OutOfRange, "[0].body.reading.value"},
		{"unknown antenna", taken("1", "as_left", "C", "4"), codec.Impossible, "[0].body.antenna"},
		{"unknown phase", taken("1", "planned", "B", "4"), codec.OutOfRange, "[0].body.phase"},
		{"no body", `{"kind":"reading.taken"}`, codec.MissingField, "[0]"},
		{"unknown field", `{"kind":"bolt.moved","body":{"antenna":"A","quantity":"skew","turns":3}}`, codec.UnknownField, "[0].body.turns"},
	} {
		if _, p := fold(t, plan, "["+row.entry+"]"); p == nil || p.Code != row.code || p.Field != row.field {
			t.Errorf("%s: %v, want %s at %q", row.name, p, row.code, row.field)
		}
	}
}
