package verdict_test

import (
	"os"
	"path/filepath"
	"testing"

	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
	"crossplumb/calc/verdict"
)

// A mount that was go as found says nothing once a bolt of it moved: until that is
// read again the word is never go, however good what was found is.
func TestATurnedBoltIsNotJudgedAsFound(t *testing.T) {
	in, err := os.ReadFile(filepath.Join("..", "..", "testdata", "jobs", "crossed-pair-go.json"))
	if err != nil {
		t.Fatal(err)
	}
	doc, p := codec.Parse(in)
	if p != nil {
		t.Fatal(p)
	}
	a := doc.Get("near").Get("antennas").Items[0]
	for _, q := range []string{"skew", "tilt", "azimuth"} { // what was left good is taken as found
		a.Get(q).Set("as_found", a.Get(q).Get("as_left"))
		a.Get(q).Set("as_left", codec.Nothing())
	}
	after := func(entries string) *verdict.Verdict {
		t.Helper()
		log, p := codec.Parse([]byte(entries))
		if p != nil {
			t.Fatal(p)
		}
		folded, p := sheet.Fold(doc, log.Items)
		if p != nil {
			t.Fatal(p)
		}
		text, p := codec.Marshal(folded) // as the server and the phone hand it on
		if p != nil {
			t.Fatal(p)
		}
		again, p := codec.Parse(text)
		if p != nil {
			t.Fatal(p)
		}
		s, p := sheet.Read(again)
		if p != nil {
			t.Fatal(p)
		}
		return judged(t, s)
	}
	if v := after(`[]`); v.Word != verdict.Go || v.Judged != sheet.AsFound || v.AsLeft != nil {
		t.Fatalf("no bolt moved: %s as %v", v.Word, v.Judged)
	}
	v := after(`[{"kind":"bolt.moved","body":{"antenna":"A","quantity":"tilt"}}]`)
	if v.Word != verdict.MeasureAgain || v.Judged != sheet.AsLeft || v.Reason.Code != verdict.MissingReading {
		t.Errorf("a bolt moved, nothing read since: %s as %v, %+v", v.Word, v.Judged, v.Reason)
	}
	if v.AsFound == nil || v.AsFound.Word != verdict.Go {
		t.Errorf("as found it was go: %+v", v.AsFound)
	}
	v = after(`[{"kind":"bolt.moved","body":{"antenna":"A","quantity":"tilt"}},
		{"kind":"reading.taken","id":"1","body":{"phase":"as_left","antenna":"A","quantity":"tilt","reading":{"value":0,"unit":"deg","u":0.3,"method":"level"}}},
		{"kind":"reading.withdrawn","body":{"withdraws":"1"}}]`)
	if v.Word != verdict.MeasureAgain || v.Judged != sheet.AsLeft {
		t.Errorf("read since and taken back: %s as %v", v.Word, v.Judged)
	}
}
