package sheet

import "crossplumb/calc/codec"

// Place is a point on the earth, as it is surveyed or read off a map.
type Place struct {
	LatDeg, LonDeg float64
	HeightM        float64  // above the path's height datum
	UM             *float64 // standard uncertainty in each of east and north; nil where not stated
}

// Landmark is a known point that can be seen from the near mount.
type Landmark struct {
	Name string
	Place
}

// Obstacle is something that stands in or near the path.
type Obstacle struct {
	Name string
	AtM  float64  // from the near end, along the ground
	TopM float64  // its top, above the path's height datum
	UM   *float64 // standard uncertainty of its top; nil where not stated
}

// MaxObstacles and MaxLandmarks bound the lists of one sheet.
const (
	MaxObstacles = 200
	MaxLandmarks = 50
)

// Ranges that a place and a path's heights take, each with what to change.
var (
	latitude  = codec.Range{Min: -90, Max: 90, Suggestion: "degrees north, minus for south"}
	longitude = codec.Range{Min: -180, Max: 360, Suggestion: "degrees east, minus for west"}
	heightM   = codec.Range{Min: -1000, Max: 30000, Suggestion: "metres above the height datum"}
	placeUM   = codec.Range{Min: 0, Max: 10000, Suggestion: "the standard uncertainty in each of east and north"}
)

func placeFields(f *codec.Fields) Place {
	return Place{
		LatDeg:  f.Number("lat_deg", latitude),
		LonDeg:  f.Number("lon_deg", longitude),
		HeightM: f.Number("height_m", heightM),
		UM:      f.MaybeNumber("u_m", placeUM),
	}
}

func readPlace(v *codec.Value) (*Place, *codec.Problem) {
	f := codec.Open(v)
	p := placeFields(f)
	return &p, f.Done()
}

func readLandmarks(items []*codec.Value) ([]Landmark, *codec.Problem) {
	var out []Landmark
	for _, item := range items {
		f := codec.Open(item)
		l := Landmark{Name: f.Text("name")}
		l.Place = placeFields(f)
		if f.Problem() == nil && !item.Described() && l.Name == "" {
			f.Fail(f.Refuse("name", codec.MissingField, "a landmark needs a name that the crew knows it by"))
		}
		if p := f.Done(); p != nil {
			return nil, p
		}
		out = append(out, l)
	}
	return out, nil
}

// readObstacle decodes one obstacle; length is the path's, 0 where it is not known.
func readObstacle(v *codec.Value, length float64) (Obstacle, *codec.Problem) {
	f := codec.Open(v)
	o := Obstacle{
		Name: f.MaybeText("name"),
		AtM:  f.Number("at_m", codec.Range{Min: 0, OpenMin: true, Max: 1e6, Suggestion: "metres from the near end"}),
		TopM: f.Number("top_m", heightM),
		UM:   f.MaybeNumber("u_m", codec.Between(0, 1000)),
	}
	if f.Problem() == nil && !v.Described() && length > 0 && o.AtM >= length {
		f.Fail(f.Refuse("at_m", codec.OutOfRange, "lies at or beyond the far end; measure from the near end, or take it out"))
	}
	return o, f.Done()
}
