package server

import (
	"bytes"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"fmt"
	"io"
	"net/http"
	"strings"
	"sync"
	"testing"

	"github.com/google/uuid"

	"crossplumb/db"
)

// Requests that cannot be right get a problem that says what, and leave nothing behind.
func TestWhatCannotBeReadStoresNothing(t *testing.T) {
	s := openSite(t)
	tam, desk := s.cookie(s.tam), s.cookie(s.desk)
	d := newDevice(s.tam)
	one := d.write(s.job, "", db.NoteAdded, `{"text":"x"}`)
	rawText, _ := json.Marshal(one.Raw)
	many := make([]db.Incoming, maxEntries+1)
	for i := range many {
		many[i] = one
	}
	sheet := string(plannedSheet(t))
	job := func(change string) string {
		return `{"id":"` + newID() + `","site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":` + sheet + `}]` + change + `}`
	}
	before := s.contents()
	entries := func(name, body string, status int, code, field string) call {
		return call{name: "entries: " + name, method: "POST", path: "/api/entries", cookie: tam, body: body, status: status, code: code, field: field}
	}
	jobs := func(name, body string, status int, code, field string) call {
		return call{name: "jobs: " + name, method: "POST", path: "/api/jobs", cookie: desk, body: body, status: status, code: code, field: field}
	}
	s.rows(t, []call{
		entries("nothing", "", 400, "malformed", ""),
		entries("no JSON", "entries", 400, "malformed", ""),
		entries("JSON cut short", upload(one)[:80], 400, "malformed", ""),
		entries("two values", upload(one)+"{}", 400, "malformed", ""),
		entries("a list", "[]", 400, "wrong_type", ""),
		entries("an unknown field", strings.Replace(upload(one), `"sent_at"`, `"colour":1,"sent_at"`, 1), 400, "unknown_field", "colour"),
		entries("an unknown field within", strings.Replace(upload(one), `"hash"`, `"colour":1,"hash"`, 1), 400, "unknown_field", "entries[0].colour"),
		entries("a field in capitals", strings.Replace(upload(one), `"sent_at"`, `"Sent_At"`, 1), 400, "unknown_field", "Sent_At"),
		entries("a field twice", strings.Replace(upload(one), `"sent_at"`, `"sent_at":"2026-11-30T10:00:01Z","sent_at"`, 1), 400, "malformed", "sent_at"),
		entries("no entries", `{"entries":[],"sent_at":"2026-11-30T10:00:01Z"}`, 400, "missing_field", "entries"),
		entries("entries missing", `{"sent_at":"2026-11-30T10:00:01Z"}`, 400, "missing_field", "entries"),
		entries("a text missing", `{"entries":[{"hash":"x"}],"sent_at":"2026-11-30T10:00:01Z"}`, 400, "missing_field", "entries[0].raw"),
		entries("a hash missing", `{"entries":[{"raw":`+string(rawText)+`}],"sent_at":"2026-11-30T10:00:01Z"}`, 400, "missing_field", "entries[0].hash"),
		entries("a text that is an object", `{"entries":[{"raw":{},"hash":"x"}],"sent_at":"2026-11-30T10:00:01Z"}`, 400, "wrong_type", "entries[0].raw"),
		entries("no time", strings.Replace(upload(one), `2026-11-30T10:00:01+01:00`, `now`, 1), 400, "out_of_range", "sent_at"),
		entries("too many", upload(many...), 413, "too_large", "entries"),
		entries("too long", strings.Replace(upload(one), `"sent_at"`, strings.Repeat(" ", maxAPIBody)+`"sent_at"`, 1), 413, "too_large", ""),
		entries("bytes that are no UTF-8", strings.Replace(upload(one), "note.added", "note\xff", 1), 400, "malformed", ""),
		entries("nested without end", `{"entries":`+strings.Repeat("[", 20000), 400, "wrong_type", "entries[0]"),

		jobs("no id", `{"site":"s","title":"t","crew":"north","mounts":[]}`, 400, "missing_field", "id"),
		jobs("an id of another version", `{"id":"`+uuid.NewString()+job("")[len(`{"id":"`)+36:], 400, "out_of_range", "id"),
		jobs("no mounts", strings.Replace(job(""), `"mounts":[`, `"mounts":null,"access":null,"x":[`, 1), 400, "unknown_field", "x"),
		jobs("an unknown field", job(`,"colour":1`), 400, "unknown_field", "colour"),
		jobs("an unknown field in a mount", strings.Replace(job(""), `"name":"n"`, `"name":"n","colour":1`, 1), 400, "unknown_field", "mounts[0].colour"),
		jobs("a date that is none", job(`,"visit_on":"tomorrow"`), 400, "malformed", ""),
		jobs("half a place", job(`,"lat_deg":46`), 400, "malformed", ""),
		jobs("a sheet with an impossible skew", strings.Replace(job(""), sheet, string(plannedSheet(t, func(a map[string]any) {
			a["skew"].(map[string]any)["planned"].(map[string]any)["value"] = 400
		})), 1), 422, "out_of_range", "mounts[0].sheet.near.antennas[0].skew.planned.value"),
		jobs("a sheet of another version", strings.Replace(job(""), `"sheet":1`, `"sheet":2`, 1), 422, "out_of_range", "mounts[0].sheet.sheet"),
		jobs("a sheet with an unknown field", strings.Replace(job(""), `"sheet":1`, `"sheet":1,"colour":1`, 1), 422, "unknown_field", "mounts[0].sheet.colour"),
	})
	if after := s.contents(); fmt.Sprint(after) != fmt.Sprint(before) {
		t.Errorf("stored %v, before %v", after, before)
	}
}

func TestABatchIsAnsweredEntryByEntry(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	d := newDevice(s.tam)
	note, skew := d.write(s.job, "", db.NoteAdded, `{"text":"å – x"}`), d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", "6.2", "0.3"))
	body := upload(note, skew)
	var first, again struct {
		Answers []answerBody
		Epoch   int64
		Head    headBody
	}
	s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: body, status: 200}).into(t, &first)
	s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: body, status: 200}).into(t, &again)
	for i := range first.Answers {
		if first.Answers[i].Status != "stored" || again.Answers[i].Status != "duplicate" || *first.Answers[i].Seq != *again.Answers[i].Seq {
			t.Errorf("first %+v, again %+v", first.Answers[i], again.Answers[i])
		}
	}
	if first.Head != again.Head || first.Epoch != 1 {
		t.Errorf("heads %+v and %+v", first.Head, again.Head)
	}
	// What comes back is what was sent, byte for byte.
	var page struct {
		Entries []entryBody
		Next    int64
	}
	s.do(call{method: "GET", path: "/api/entries?after=2", cookie: tam, status: 200}).into(t, &page)
	if len(page.Entries) != 2 || page.Entries[0].Raw != note.Raw || page.Entries[1].Raw != skew.Raw || page.Entries[0].AuthorName != "Tam" {
		t.Errorf("pulled %+v", page.Entries)
	}
	if page.Entries[0].UploaderName != "Tam" {
		t.Errorf("uploaded by %q", page.Entries[0].UploaderName)
	}
	// Whoever is signed in may carry what Tam wrote, but the log says so.
	s.do(call{method: "POST", path: "/api/entries", cookie: s.cookie(s.desk), status: 200, has: []string{`"stored"`},
		body: upload(newDevice(s.tam).write(s.job, "", db.NoteAdded, `{"text":"carried"}`))})
	for _, path := range []string{"/api/entries?after=4", "/api/jobs/" + s.job} {
		s.do(call{method: "GET", path: path, cookie: tam, status: 200}).into(t, &page)
		if last := page.Entries[len(page.Entries)-1]; last.AuthorName != "Tam" || last.UploaderName != s.desk.Name {
			t.Errorf("%s: carried by %q for %q", path, last.UploaderName, last.AuthorName)
		}
	}
	var state struct {
		Devices map[string]deviceBody
		Head    headBody
	}
	s.do(call{method: "GET", path: "/api/state", cookie: tam, status: 200}).into(t, &state)
	if got := state.Devices[d.id]; got.MaxContiguousSeq != 2 || got.Hash != skew.Hash || state.Head.Seq != first.Head.Seq+1 {
		t.Errorf("state %+v", state)
	}
	s.do(call{method: "GET", path: "/api/state", cookie: s.cookie(s.odd), status: 200, hasNot: []string{d.id}})
	s.do(call{method: "GET", path: "/api/state?device=" + d.id, cookie: s.cookie(s.odd), status: 200, has: []string{d.id}})
}

// What calc cannot read would stop every later verdict: it is set apart, the rest goes in.
func TestEntriesThatDoNotFitTheSheetAreSetApart(t *testing.T) {
	s := openSite(t)
	d := newDevice(s.tam)
	batch := []db.Incoming{
		d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", "400", "0.3")),
		d.write(s.job, "m1", db.ReadingTaken, strings.Replace(reading("skew", "as_found", "4", "0.3"), `"A"`, `"Z"`, 1)),
		d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", "4", "0")),
		d.write(s.job, "m1", db.ReadingTaken, strings.Replace(reading("azimuth", "as_found", "4", "1"), `"true"`, `"magnetic"`, 1)),
		d.write(s.job, "m1", db.BoltMoved, `{"antenna":"Z","quantity":"skew"}`),
		d.write(s.job, "m1", db.ReadingTaken, reading("skew", "as_found", "4", "0.3")),
	}
	var answer struct{ Answers []answerBody }
	s.do(call{method: "POST", path: "/api/entries", cookie: s.cookie(s.tam), body: upload(batch...), status: 200}).into(t, &answer)
	for i, a := range answer.Answers {
		if want := map[bool]string{true: "stored", false: "quarantined"}[i == len(batch)-1]; a.Status != want {
			t.Errorf("entry %d is %s (%v), want %s", i, a.Status, a.Reason, want)
		}
	}
	a := s.do(call{method: "GET", path: "/api/quarantine", cookie: s.cookie(s.desk), status: 200})
	var list struct {
		Entries []struct{ Raw, Code, Reason string }
	}
	a.into(t, &list)
	if len(list.Entries) != 5 || list.Entries[4].Raw != batch[0].Raw || list.Entries[4].Code != db.Unreadable {
		t.Errorf("quarantine %+v", list)
	}
	var page jobPageTest
	s.do(call{method: "GET", path: "/api/jobs/" + s.job, cookie: s.cookie(s.desk), status: 200}).into(t, &page)
	if page.Quarantined != 5 || page.Mounts[0].Problem != nil || page.Mounts[0].Verdict == nil {
		t.Errorf("quarantined %d, problem %v", page.Quarantined, page.Mounts[0].Problem)
	}
}

// A plan that a supervisor's phone uploads goes through the same eyes as one from the desk.
func TestAPlanWithAnUnreadableSheetIsSetApart(t *testing.T) {
	s := openSite(t)
	d := newDevice(s.desk)
	job := newID()
	plan := `{"site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":{"sheet":1}}]}`
	s.do(call{method: "POST", path: "/api/entries", cookie: s.cookie(s.desk), body: upload(d.write(job, "", db.JobPlanned, plan)),
		status: 200, has: []string{`"quarantined"`, db.Unreadable}})
	good := `{"site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":` + string(plannedSheet(t)) + `}]}`
	s.do(call{method: "POST", path: "/api/entries", cookie: s.cookie(s.desk),
		body:   upload(d.write(job, "", db.JobPlanned, good), d.write(job, "", db.JobIssued, `{}`), d.write(job, "m1", db.ReadingTaken, reading("skew", "as_found", "400", "1"))),
		status: 200, has: []string{`"stored"`, db.Unreadable}})
}

// Many phones at once over few connections: the memory of one request is the next one's. Every entry must come back as
// it was sent, under the author who sent it.
func TestRequestsDoNotShareTheirText(t *testing.T) {
	s := openSite(t)
	const phones, batches = 6, 12
	sent := make([]map[string]string, phones)
	var wg sync.WaitGroup
	for i := range phones {
		sent[i] = map[string]string{}
		who := s.person(fmt.Sprint("Climber ", i), db.Climber, "north")
		cookie, d := s.cookie(who), newDevice(who)
		wg.Go(func() {
			for k := range batches {
				text := strings.Repeat(string(rune('a'+i)), 200+100*k)
				in := d.write(s.job, "", db.NoteAdded, `{"text":"`+text+`"}`)
				sent[i][in.Hash] = in.Raw
				r, err := http.NewRequest("POST", s.url+"/api/entries", strings.NewReader(upload(in)))
				if err != nil {
					t.Error(err)
					return
				}
				for name, value := range map[string]string{"Content-Type": "application/json", "X-Crossplumb": "1", "Cookie": cookie} {
					r.Header.Set(name, value)
				}
				response, err := s.client.Do(r)
				if err != nil {
					t.Error(err)
					return
				}
				body, _ := io.ReadAll(response.Body)
				response.Body.Close()
				if response.StatusCode != 200 || !bytes.Contains(body, []byte(`"stored"`)) {
					t.Errorf("%d %s", response.StatusCode, body)
				}
			}
		})
	}
	wg.Wait()
	back := map[string]string{}
	for after := int64(0); ; {
		var page struct {
			Entries []entryBody
			Next    int64
		}
		s.do(call{method: "GET", path: fmt.Sprintf("/api/entries?after=%d&limit=13", after), cookie: s.cookie(s.tam), status: 200}).into(t, &page)
		for _, e := range page.Entries {
			back[db.HashOf(e.Raw)] = e.Raw
		}
		if page.Next == after {
			break
		}
		after = page.Next
	}
	for i := range sent {
		for hash, raw := range sent[i] {
			if back[hash] != raw {
				t.Fatalf("an entry of phone %d did not come back as it was sent", i)
			}
		}
	}
	proof, err := s.store.Prove(t.Context())
	if err != nil || len(proof.Faults) != 0 || proof.Entries != 2+phones*batches {
		t.Errorf("proof %+v (%v)", proof, err)
	}
}

func TestParallelDuplicateDeliveryStoresOnce(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	d := newDevice(s.tam)
	var batch []db.Incoming
	for i := range 10 {
		batch = append(batch, d.write(s.job, "", db.NoteAdded, fmt.Sprintf(`{"text":"%d"}`, i)))
	}
	body := upload(batch...)
	var wg sync.WaitGroup
	stored := make([]int, 8)
	for i := range stored {
		wg.Go(func() {
			stored[i] = strings.Count(s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: body, status: 200}).body, `"stored"`)
		})
	}
	wg.Wait()
	total := 0
	for _, n := range stored {
		total += n
	}
	if total != len(batch) {
		t.Errorf("%d were stored, want %d", total, len(batch))
	}
	if n := s.contents()["entries"]; n != int64(2+len(batch)) {
		t.Errorf("%d entries, want %d", n, 2+len(batch))
	}
}

// jobPageTest is what a test reads of a job's page.
type jobPageTest struct {
	Job     jobBody
	Plan    struct{ Mounts []db.PlannedMount }
	Entries []entryBody
	Mounts  []struct {
		ID      string
		Sheet   jsontext.Value
		Verdict *struct {
			Word        string
			Judged      string
			Probability float64
			Reason      struct{ Code, Text string }
		}
		Problem *struct{ Code, Field, Message string }
	}
	Quarantined int64
}
