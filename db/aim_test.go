package db

import (
	"encoding/json/jsontext"
	"errors"
	"testing"
)

func TestAimBodies(t *testing.T) {
	for _, row := range []struct {
		name, kind, body string
		fine             bool
	}{
		{"a step", LevelStepped, `{"antenna":"A","axis":"azimuth","search":1,"angle_deg":46.5,"level_dbm":-58,"typed":"-58"}`, true},
		{"a step of another axis", LevelStepped, `{"antenna":"A","axis":"skew","search":1,"angle_deg":46.5,"level_dbm":-58}`, false},
		{"a step of no search", LevelStepped, `{"antenna":"A","axis":"tilt","search":0,"angle_deg":1,"level_dbm":-58}`, false},
		{"a step without its level", LevelStepped, `{"antenna":"A","axis":"tilt","search":1,"angle_deg":1}`, false},
		{"control off", PowerControlConfirmed, `{"name":"Bea"}`, true},
		{"control off, said by nobody", PowerControlConfirmed, `{"name":" "}`, false},
		{"a peak", PeakFitted, `{"antenna":"A","axis":"tilt","search":2,"answer":{"peak_deg":0.4}}`, true},
		{"a peak in words", PeakFitted, `{"antenna":"A","axis":"tilt","search":2,"answer":"here"}`, false},
		{"figures", FiguresRead, `{"end":"far","page":{"ports":[]}}`, true},
		{"figures of no end", FiguresRead, `{"end":"middle","page":{}}`, false},
		{"figures as a list", FiguresRead, `{"end":"far","page":[]}`, false},
		{"a sight", SightWasTaken, `{"antenna":"A","phase":"as_left","reference":"sun","asked":{},"answer":{}}`, true},
		{"a sight at the moon", SightWasTaken, `{"antenna":"A","phase":"as_left","reference":"moon","asked":{},"answer":{}}`, false},
		{"a lean", LeanWasRead, `{"asked":{"axes":[]},"answer":{}}`, true},
		{"a lean without answer", LeanWasRead, `{"asked":{}}`, false},
		{"an obstacle", ObstacleWasNoted, `{"name":"crane","at_m":300,"top_m":41}`, true},
		{"an obstacle of unknown height", ObstacleWasNoted, `{"name":"crane","at_m":300}`, false},
		{"an obstacle with more than was agreed", ObstacleWasNoted, `{"at_m":300,"top_m":41,"colour":"red"}`, false},
	} {
		t.Run(row.name, func(t *testing.T) {
			e := Entry{Kind: row.kind, Mount: "m1", Body: jsontext.Value(row.body)}
			_, err := e.ReadBody()
			var refused *Refusal
			if row.fine && err != nil || !row.fine && !errors.As(err, &refused) {
				t.Errorf("%v", err)
			}
			e.Mount = ""
			if _, err := e.ReadBody(); err == nil {
				t.Error("taken without a mount")
			}
		})
	}
}
