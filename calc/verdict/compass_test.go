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
}
