package verdict_test

import (
	"strings"
	"testing"

	"crossplumb/calc/sheet"
	"crossplumb/calc/verdict"
)

// A compass finds gross errors only: however small a doubt is written beside it, alone
// it never makes go; beside a sight it takes nothing away.
func TestACompassAloneIsNeverGo(t *testing.T) {
	s := job(t, "crossed-pair-go")
	azimuth := &s.Near.Antennas[0].Azimuth
	if v := judged(t, s); v.Word != verdict.Go || len(azimuth.AsLeft) == 0 {
		t.Fatalf("%s before, with %d readings", v.Word, len(azimuth.AsLeft))
	}
	sighted := azimuth.AsLeft[0]
	byCompass := sheet.Angle{Deg: sighted.Deg, UDeg: 0.5, How: sheet.How{Method: "compass"}}
	azimuth.AsLeft = []sheet.Angle{byCompass, byCompass}
	v := judged(t, s)
	if v.Word != verdict.MeasureAgain || v.Reason.Code != verdict.MissingReading || !strings.Contains(v.Reason.Text, "compass") {
		t.Errorf("by compass alone: %s, %+v", v.Word, v.Reason)
	}
	if len(v.Missing) != 1 || !v.Missing[0].ByCompass || v.Missing[0].Quantity != "azimuth" {
		t.Errorf("missing %+v", v.Missing)
	}
	azimuth.AsLeft = []sheet.Angle{byCompass, sighted}
	if v := judged(t, s); v.Word != verdict.Go || len(v.Missing) != 0 {
		t.Errorf("compass and sight: %s, missing %+v", v.Word, v.Missing)
	}
	for _, method := range []string{"Compass", "magnetic compass", "phone"} { // by whatever name
		by := byCompass
		by.Method = method
		azimuth.AsLeft = []sheet.Angle{by}
		if v := judged(t, s); v.Word != verdict.MeasureAgain || len(v.Missing) != 1 {
			t.Errorf("by %q alone: %s, missing %+v", method, v.Word, v.Missing)
		}
	}
}

// A sight so rough that it says nothing does not lend its name to a compass: go must
// come out with the compass left away too.
func TestARoughSightDoesNotLendItsNameToACompass(t *testing.T) {
	s := job(t, "crossed-pair-go")
	s.Limits = []sheet.Limit{{Name: sheet.AzimuthDeviation, Value: 3}}
	azimuth := &s.Near.Antennas[0].Azimuth
	read := func(method string, u float64) sheet.Angle {
		return sheet.Angle{Deg: azimuth.Planned.Deg, UDeg: u, How: sheet.How{Method: method}}
	}
	for _, row := range []struct {
		readings []sheet.Angle
		word     string
		steel    int
	}{
		{[]sheet.Angle{read("sun", 1)}, verdict.Go, 0},
		{[]sheet.Angle{read("compass", 1), read("sun", 20)}, verdict.MeasureAgain, 1},
		{[]sheet.Angle{read("compass", 1), read("sun", 1)}, verdict.Go, 0},
	} {
		azimuth.AsLeft = row.readings
		v := judged(t, s)
		if v.Word != row.word || len(v.Missing) != row.steel {
			t.Errorf("%+v: %s (%.3f), missing %+v", row.readings, v.Word, v.Probability, v.Missing)
		}
		if row.steel > 0 && (v.Reason.Code != verdict.MissingReading || !v.Missing[0].ByCompass || v.Missing[0].Quantity != "azimuth" || v.AsLeft.Word != v.Word) {
			t.Errorf("%+v, as left %s, missing %+v", v.Reason, v.AsLeft.Word, v.Missing)
		}
	}
}
