package sheet_test

import (
	"testing"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

// surveyed is the path of a sheet with coordinates, heights and one obstacle.
const surveyed = `{"bearing_deg": 47.3, "elevation_deg": 0.4, "distance_m": 1900,
	"near_at": {"lat_deg": 46.125, "lon_deg": -31.369, "height_m": 61, "u_m": 3},
	"far_at": {"lat_deg": 46.1366, "lon_deg": -31.351, "height_m": 74},
	"height_datum": "mean sea level", "k_factor": 1.33, "above_ground_m": 18,
	"obstacles": [{"name": "alders", "at_m": 700, "top_m": 52, "u_m": 2}]}`

func TestSurveyReads(t *testing.T) {
	doc := with(t, "crossed-pair-go", "path", surveyed)
	doc.Set("landmarks", parsed(t, `[{"name": "chapel", "lat_deg": 46.11, "lon_deg": -31.38, "height_m": 40, "u_m": null}]`))
	s, p := sheet.Read(doc)
	if p != nil {
		t.Fatal(p)
	}
	if s.Path.NearAt == nil || s.Path.NearAt.HeightM != 61 || *s.Path.NearAt.UM != 3 || s.Path.FarAt.UM != nil {
		t.Errorf("ends %+v %+v", s.Path.NearAt, s.Path.FarAt)
	}
	if o := s.Path.Obstacles; len(o) != 1 || o[0].Name != "alders" || o[0].AtM != 700 || o[0].TopM != 52 {
		t.Errorf("obstacles %+v", o)
	}
	if l := s.Landmarks; len(l) != 1 || l[0].Name != "chapel" || l[0].LonDeg != -31.38 {
		t.Errorf("landmarks %+v", l)
	}
}

func TestSurveyRefuses(t *testing.T) {
	for _, row := range []struct{ name, path, json, code, field string }{
		{"a latitude past the pole", "path.near_at.lat_deg", `91`, codec.OutOfRange, "path.near_at.lat_deg"},
		{"an end without its height", "path.far_at.height_m", ``, codec.MissingField, "path.far_at.height_m"},
		{"heights above nothing named", "path.height_datum", ``, codec.MissingField, "path.height_datum"},
		{"an obstacle behind the far end", "path.obstacles[0].at_m", `1900`, codec.OutOfRange, "path.obstacles[0].at_m"},
		{"an obstacle behind this end", "path.obstacles[0].at_m", `-5`, codec.OutOfRange, "path.obstacles[0].at_m"},
		{"an earth that bends the wrong way", "path.k_factor", `0`, codec.OutOfRange, "path.k_factor"},
		{"a name nobody knows", "path.near_at.altitude", `3`, codec.UnknownField, "path.near_at.altitude"},
	} {
		t.Run(row.name, func(t *testing.T) {
			doc := with(t, "crossed-pair-go", "path", surveyed)
			above, last := at(t, doc, row.path)
			if row.json == "" {
				for i := range above.Members {
					if above.Members[i].Name == last {
						above.Members = append(above.Members[:i], above.Members[i+1:]...)
						break
					}
				}
			} else {
				above.Set(last, parsed(t, row.json))
			}
			_, p := sheet.Read(again(t, doc))
			if p == nil || p.Code != row.code || p.Field != row.field {
				t.Errorf("%v, want %s at %s", p, row.code, row.field)
			}
		})
	}
	doc := job(t, "crossed-pair-go")
	doc.Set("landmarks", parsed(t, `[{"name": "", "lat_deg": 46, "lon_deg": -31, "height_m": 4}]`))
	if _, p := sheet.Read(again(t, doc)); p == nil || p.Field != "landmarks[0].name" {
		t.Errorf("a landmark without a name: %v", p)
	}
}

func parsed(t testing.TB, text string) *codec.Value {
	t.Helper()
	v, p := codec.Parse([]byte(text))
	if p != nil {
		t.Fatal(p)
	}
	return v
}

// again writes a document and reads it back, so that every value knows its path.
func again(t testing.TB, doc *codec.Value) *codec.Value {
	t.Helper()
	out, p := codec.Marshal(doc)
	if p != nil {
		t.Fatal(p)
	}
	return parsed(t, string(out))
}

func folded(t *testing.T, doc *codec.Value, entries string) *codec.Value {
	t.Helper()
	out, p := sheet.Fold(doc, parsed(t, entries).Items)
	if p != nil {
		t.Fatal(p)
	}
	if _, p := sheet.Read(again(t, out)); p != nil {
		t.Fatalf("what was folded does not read: %v", p)
	}
	return out
}

const (
	figuresNear = `{"id": "f1", "kind": "figures.read", "body": {"end": "near", "page": {"ports": [{"port": "1", "level_dbm": -61}]}, "typed": {"level-1": "-61"}}}`
	figuresLate = `{"id": "f2", "kind": "figures.read", "body": {"end": "near", "page": {"ports": [{"port": "1", "level_dbm": -52}]}}}`
	controlOff  = `{"id": "c1", "kind": "power_control.confirmed", "body": {"name": "Bea"}}`
)

func nearLevel(doc *codec.Value) float64 {
	ports := doc.Get("radio_figures").Get("near").Get("ports")
	if ports == nil {
		return 0
	}
	return ports.Items[0].Get("level_dbm").Num
}

func TestFoldPutsFiguresIntoTheSheet(t *testing.T) {
	doc := job(t, "crossed-pair-go")
	if got := nearLevel(folded(t, doc, "["+figuresNear+","+figuresLate+"]")); got != -52 {
		t.Errorf("the last page of an end counts: %v", got)
	}
	if got := nearLevel(folded(t, doc, "["+figuresNear+","+figuresLate+`,{"kind": "reading.withdrawn", "body": {"withdraws": "f2"}}]`)); got != -61 {
		t.Errorf("with the last page withdrawn the one before counts: %v", got)
	}
	out := folded(t, doc, "["+controlOff+","+figuresNear+"]")
	if off := out.Get("radio_figures").Get("power_control_off"); off == nil || !off.Truth {
		t.Error("power control confirmed off is not told")
	}
	if out := folded(t, doc, "["+controlOff+"]"); out.Get("radio_figures").Kind != codec.Null {
		t.Error("a confirmation without figures makes figures")
	}
	if doc.Get("radio_figures").Kind != codec.Null {
		t.Error("the document given was changed")
	}
}

func TestFoldAddsObstacles(t *testing.T) {
	doc := with(t, "crossed-pair-go", "path", surveyed)
	crane := `{"id": "o1", "kind": "obstacle.noted", "body": {"name": "crane", "at_m": 1200, "top_m": 71}}`
	list := folded(t, doc, "["+crane+"]").Get("path").Get("obstacles")
	if len(list.Items) != 2 || list.Items[1].Get("name").Str != "crane" {
		t.Errorf("%d obstacles", len(list.Items))
	}
	gone := folded(t, doc, "["+crane+`,{"kind": "reading.withdrawn", "body": {"withdraws": "o1"}}]`).Get("path").Get("obstacles")
	if len(gone.Items) != 1 {
		t.Errorf("withdrawn: %d obstacles", len(gone.Items))
	}
	bare := folded(t, job(t, "crossed-pair-go"), "["+crane+"]").Get("path").Get("obstacles")
	if len(bare.Items) != 1 {
		t.Errorf("where the plan has none: %d obstacles", len(bare.Items))
	}
	for _, none := range []string{`{"name": "crane", "at_m": 99999, "top_m": 71}`, `{"name": "crane", "at_m": 1200}`, `{"at_m": -3, "top_m": 9}`} {
		out := folded(t, doc, `[{"kind": "obstacle.noted", "body": `+none+`}]`)
		if n := len(out.Get("path").Get("obstacles").Items); n != 1 {
			t.Errorf("%s is no obstacle of this path: %d obstacles", none, n)
		}
	}
	for _, bad := range []string{
		`{"kind": "obstacle.noted"}`,
		`{"kind": "figures.read", "body": {"end": "middle", "page": {}}}`,
		`{"kind": "figures.read", "body": {"end": "near", "page": 3}}`,
	} {
		if _, p := sheet.Fold(doc, parsed(t, "["+bad+"]").Items); p == nil {
			t.Errorf("%s is taken", bad)
		}
	}
}

func TestFoldPassesOverSearchAndSight(t *testing.T) {
	doc := job(t, "crossed-pair-go")
	out := folded(t, doc, `[{"kind": "level.stepped", "body": {"antenna": "A", "axis": "azimuth", "angle_deg": 46, "level_dbm": -60}},
		{"kind": "sight.taken", "body": {"antenna": "A"}}, {"kind": "lean.read", "body": {}}, {"kind": "peak.fitted", "body": {}}]`)
	nothing, p := sheet.Fold(doc, nil)
	if p != nil {
		t.Fatal(p)
	}
	want, _ := codec.Marshal(nothing)
	if got, _ := codec.Marshal(out); string(got) != string(want) {
		t.Errorf("%s\nwant\n%s", got, want)
	}
}
