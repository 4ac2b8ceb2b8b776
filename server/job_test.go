package server

import (
	json "encoding/json/v2"
	"fmt"
	"os/exec"
	"strings"
	"testing"
	"time"

	"crossplumb/calc/wire"
	"crossplumb/db"
)

// A job's way from the desk to the mast and back, over HTTP alone.
func TestAJobFromPlanToSignOff(t *testing.T) {
	s := openSite(t)
	desk, tam, odd := s.cookie(s.desk), s.cookie(s.tam), s.cookie(s.odd)
	id := newID()
	issue := call{method: "POST", path: "/api/jobs", cookie: desk, status: 201, body: `{"id":"` + id + `","site":"Gannet Head","title":"North-east",
		"crew":"north","visit_on":"2026-12-01","access":null,"emergency":"channel 4","lat_deg":46.1,"lon_deg":-31.4,
		"mounts":[{"id":"m1","name":"north-east","sheet":` + string(plannedSheet(t)) + `}]}`}
	s.do(issue)
	issue.status = 200 // the same again
	s.do(issue)
	issue.body, issue.status, issue.code = strings.Replace(issue.body, "Gannet Head", "Gannet Hill", 1), 409, "id_reused"
	s.do(issue)

	summary := func(cookie string) *jobBody {
		t.Helper()
		var list struct{ Jobs []jobBody }
		s.do(call{method: "GET", path: "/api/jobs", cookie: cookie, status: 200}).into(t, &list)
		for _, j := range list.Jobs {
			if j.ID == id {
				return &j
			}
		}
		return nil
	}
	page := func() jobPageTest {
		t.Helper()
		var p jobPageTest
		s.do(call{method: "GET", path: "/api/jobs/" + id, cookie: tam, status: 200}).into(t, &p)
		return p
	}
	if j := summary(tam); j == nil || j.Stage != "issued" || len(j.Words) != 0 || *j.VisitOn != "2026-12-01" {
		t.Fatalf("issued: %+v", j)
	}
	if j := summary(odd); j != nil {
		t.Fatalf("another crew sees %+v", j)
	}
	s.do(call{method: "GET", path: "/api/jobs/" + id, cookie: odd, status: 404, code: "not_found"})

	d := newDevice(s.tam)
	send := func(entries ...db.Incoming) {
		t.Helper()
		s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: upload(entries...), status: 200, hasNot: []string{"quarantined"}})
	}
	send(d.write(id, "", db.CautionConfirmed, `{"caution":"height","version":1,"name":"Tam"}`))
	skew := d.write(id, "m1", db.ReadingTaken, reading("skew", "as_found", "9.5", "0.2"))
	send(skew, d.write(id, "m1", db.ReadingTaken, reading("tilt", "as_found", "0.4", "0.2")),
		d.write(id, "m1", db.ReadingTaken, reading("azimuth", "as_found", "47.3", "1")))
	p := page()
	if p.Job.Stage != "under way" || p.Mounts[0].Verdict == nil || p.Mounts[0].Verdict.Judged != "as_found" || p.Job.Words["m1"] != p.Mounts[0].Verdict.Word {
		t.Fatalf("under way: %+v, mount %+v", p.Job, p.Mounts[0])
	}
	// The verdict is what calc says of the folded sheet, word for word.
	direct, problem := wire.Reckon("mount.verdict", p.Mounts[0].Sheet)
	if problem != nil {
		t.Fatal(problem)
	}
	var said struct {
		Word        string
		Probability float64
	}
	if err := json.Unmarshal(direct, &said, json.MatchCaseInsensitiveNames(true)); err != nil || said.Word != p.Mounts[0].Verdict.Word || said.Probability != p.Mounts[0].Verdict.Probability {
		t.Errorf("the page says %+v, calc %+v (%v)", p.Mounts[0].Verdict, said, err)
	}
	if said.Word != "no-go" {
		t.Errorf("9.5 degrees on a radio that ties port to port is %q", said.Word)
	}
	// The bolt moves, the as left reading comes; a reading that is taken back no longer counts.
	moved := d.write(id, "m1", db.BoltMoved, `{"antenna":"A","quantity":"skew"}`)
	wrong := d.write(id, "m1", db.ReadingTaken, reading("skew", "as_left", "40", "0.2"))
	wrongEntry, _ := db.ReadEntry(wrong.Raw)
	send(wrong, moved, // in whatever order they come, the device's own numbers count
		d.write(id, "m1", db.ReadingTaken, reading("tilt", "as_left", "0.4", "0.2")),
		d.write(id, "m1", db.ReadingTaken, reading("azimuth", "as_left", "47.3", "1")))
	before := page()
	send(d.write(id, "m1", db.ReadingWithdrawn, `{"withdraws":"`+wrongEntry.ID+`"}`), d.write(id, "m1", db.ReadingTaken, reading("skew", "as_left", "0.1", "0.2")))
	after := page()
	if before.Mounts[0].Verdict.Word != "no-go" || after.Mounts[0].Verdict.Word == "no-go" || after.Mounts[0].Verdict.Judged != "as_left" {
		t.Errorf("before the withdrawal %+v, after %+v", before.Mounts[0].Verdict, after.Mounts[0].Verdict)
	}
	send(d.write(id, "", db.JobHandedIn, `{"remark":"done","open":[],"verdicts":[]}`))
	handed := page()
	if handed.Job.Stage != "handed in" || handed.Job.HandedInAt == nil || *handed.Job.Remark != "done" {
		t.Fatalf("handed in: %+v", handed.Job)
	}
	decision := func(what, remark string, base int64) string {
		return fmt.Sprintf(`{"id":"%s","decision":"%s","remark":%s,"base_seq":%d}`, newID(), what, remark, base)
	}
	at := "/api/jobs/" + id + "/decision"
	s.rows(t, []call{
		{name: "a decision that is none", method: "POST", path: at, cookie: desk, body: decision("approve", "null", handed.Job.StageSeq), status: 400, code: "out_of_range", field: "decision"},
		{name: "sent back without a remark", method: "POST", path: at, cookie: desk, body: decision("send back", "null", handed.Job.StageSeq), status: 400, code: "missing_field", field: "remark"},
		{name: "on an older state", method: "POST", path: at, cookie: desk, body: decision("sign off", "null", handed.Job.StageSeq-1), status: 409, code: "stale"},
		{name: "without a base", method: "POST", path: at, cookie: desk, body: `{"id":"` + newID() + `","decision":"sign off"}`, status: 400, code: "missing_field", field: "base_seq"},
		{name: "on a job that is not there", method: "POST", path: "/api/jobs/" + newID() + "/decision", cookie: desk, body: decision("sign off", "null", 1), status: 404, code: "unknown_job"},
	})
	s.do(call{method: "POST", path: at, cookie: desk, body: decision("send back", `"read the tilt again"`, handed.Job.StageSeq), status: 200, has: []string{"sent back"}})
	if j := summary(tam); j.Stage != "sent back" || *j.Remark != "read the tilt again" {
		t.Errorf("sent back: %+v", j)
	}
	send(d.write(id, "m1", db.ReadingTaken, reading("tilt", "as_left", "0.3", "0.1")), d.write(id, "", db.JobHandedIn, `{"remark":null,"open":[],"verdicts":[]}`))
	again := page()
	last := decision("sign off", "null", again.Job.StageSeq)
	s.do(call{method: "POST", path: at, cookie: desk, body: last, status: 200, has: []string{"signed off"}})
	s.do(call{method: "POST", path: at, cookie: desk, body: last, status: 200, has: []string{"signed off"}}) // a repeated click
	s.do(call{method: "POST", path: at, cookie: desk, body: decision("send back", `"no"`, again.Job.StageSeq), status: 409, code: "signed_off"})
	s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: upload(d.write(id, "m1", db.ReadingTaken, reading("tilt", "as_left", "0.3", "0.1"))), status: 200,
		has: []string{"quarantined", "signed_off"}})
	if p := page(); p.Quarantined != 1 || p.Job.Stage != "signed off" {
		t.Errorf("at the end: %+v", p.Job)
	}
	proof, err := s.store.Prove(t.Context())
	if err != nil || len(proof.Faults) > 0 {
		t.Errorf("proof %+v (%v)", proof, err)
	}
}

// The list has the words of jobs that nobody has opened: they are judged beside the requests.
func TestTheListHasWordsWithoutOpeningJobs(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	d := newDevice(s.tam)
	send := func(skew string) {
		s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: upload(d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", skew, "0.1"))), status: 200})
	}
	word := func() string {
		var list struct{ Jobs []jobBody }
		s.do(call{method: "GET", path: "/api/jobs", cookie: tam, status: 200}).into(t, &list)
		return list.Jobs[0].Words["m1"]
	}
	wait := func(want string) {
		t.Helper()
		for range 100 {
			if word() == want {
				return
			}
			time.Sleep(50 * time.Millisecond)
		}
		t.Fatalf("the list says %q, want %q", word(), want)
	}
	if got := word(); got != "" {
		t.Errorf("before any reading the list says %q", got)
	}
	send("15")
	wait("no-go")
}

// A kept verdict is used as long as it is about the same readings and of the same version, and not longer.
func TestAKeptVerdictIsNotOlderThanTheReadings(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	d := newDevice(s.tam)
	send := func(in db.Incoming) {
		s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: upload(in), status: 200, has: []string{"stored"}})
	}
	page := func() jobPageTest {
		var p jobPageTest
		s.do(call{method: "GET", path: "/api/jobs/" + s.job, cookie: tam, status: 200}).into(t, &p)
		return p
	}
	send(d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", "15", "0.1")))
	page()
	kept, err := s.store.VerdictOf(t.Context(), s.job, "m1")
	if err != nil || kept.Word != "no-go" || kept.Version != wire.Version {
		t.Fatalf("kept %+v (%v)", kept, err)
	}
	// A mark in what is kept shows whether it is used.
	kept.Answer = strings.Replace(kept.Answer, `"no-go"`, `"go"`, 1)
	if err := s.store.KeepVerdict(t.Context(), kept); err != nil {
		t.Fatal(err)
	}
	if p := page(); p.Mounts[0].Verdict.Word != "go" {
		t.Error("the kept verdict is not used")
	}
	send(d.write(s.job, "", db.NoteAdded, `{"text":"x"}`))
	if p := page(); p.Mounts[0].Verdict.Word != "go" {
		t.Error("a note made it compute again")
	}
	kept.Version = "0"
	if err := s.store.KeepVerdict(t.Context(), kept); err != nil {
		t.Fatal(err)
	}
	if p := page(); p.Mounts[0].Verdict.Word != "no-go" {
		t.Error("a verdict of another version is used")
	}
	send(d.write(s.job, "m1", db.BoltMoved, `{"antenna":"A","quantity":"skew"}`))
	page()
	if after, err := s.store.VerdictOf(t.Context(), s.job, "m1"); err != nil || after.ReadingsSeq <= kept.ReadingsSeq {
		t.Errorf("after a moved bolt %+v (%v)", after, err)
	}
}

func TestCalcOverHTTPIsTheDoor(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	in := `{"frequency_mhz":5800,"spacing_mm":{"right":100,"up":0,"forward":0},"off_broadside_deg":0}`
	a := s.do(call{method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: in, status: 200})
	want, problem := wire.Reckon("spacing.wavelengths", []byte(in))
	if problem != nil || a.body != string(want) {
		t.Errorf("over HTTP %s, through the door %s (%v)", a.body, want, problem)
	}
	s.do(call{method: "GET", path: "/api/calc", cookie: tam, status: 200, has: []string{`"mount.verdict"`, `"spacing.wavelengths"`}})
	s.rows(t, []call{
		{name: "out of range", method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: strings.Replace(in, "5800", "-3", 1), status: 422, code: "out_of_range", field: "frequency_mhz"},
		{name: "a missing field", method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: `{}`, status: 422, code: "missing_field", field: "frequency_mhz"},
		{name: "an unknown field", method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: strings.Replace(in, "{", `{"colour":1,`, 1), status: 422, code: "unknown_field", field: "colour"},
		{name: "no JSON", method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: `abc`, status: 422, code: "malformed", field: ""},
		{name: "too long", method: "POST", path: "/api/calc/spacing.wavelengths", cookie: tam, body: strings.Repeat(" ", maxCalcBody+1), status: 413, code: "too_large"},
	})
}

func TestHealthSaysWhetherTheLogCanBeWritten(t *testing.T) {
	s := openSite(t, func(c *Config) { c.Demo = true })
	s.do(call{method: "GET", path: "/healthz", status: 200, has: []string{`"ok"`, `"demo":true`}})
	s.store.Close()
	s.do(call{method: "GET", path: "/healthz", status: 503, code: "unhealthy", hasNot: []string{"sql"}})
}

// The server stands between: it may know db, calc/wire and static, and nothing else of ours.
func TestWall(t *testing.T) {
	out, err := exec.Command("go", "list", "-tags", "sqlite_omit_load_extension", "-f", `{{join .Imports "\n"}}`, ".").Output()
	if err != nil {
		t.Fatal(err)
	}
	allowed := map[string]bool{"crossplumb/db": true, "crossplumb/calc/wire": true, "crossplumb/calc/wire/schema": true, "crossplumb/static": true}
	ours := 0
	for _, dep := range strings.Fields(string(out)) {
		if strings.HasPrefix(dep, "crossplumb/") {
			ours++
			if !allowed[dep] {
				t.Errorf("server imports %s", dep)
			}
		}
		if strings.HasPrefix(dep, "gonum.org/") || strings.Contains(dep, "sqlite") || dep == "database/sql" {
			t.Errorf("server imports %s", dep)
		}
	}
	if ours < 3 {
		t.Errorf("only %d of our packages: the list is not what it should be", ours)
	}
}
