package main

import (
	"database/sql"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"crossplumb/calc/wire"
	"crossplumb/db"
	"crossplumb/server"
)

// cheapCost lets tests furnish a demo quickly.
var cheapCost = server.HashCost{MemoryKiB: 64, Passes: 1, Lanes: 1}

// furnished is a demo in a fresh folder.
func furnished(t *testing.T, seed uint64, today time.Time) *db.Store {
	t.Helper()
	clock := &demoClock{at: today}
	store, err := db.Open(t.Context(), db.Config{Path: filepath.Join(t.TempDir(), databaseName), Now: clock.now, App: "test"})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { store.Close() })
	if err := simulate(t.Context(), store, clock, seed, cheapCost, today); err != nil {
		t.Fatal(err)
	}
	return store
}

var demoDay = time.Date(2026, 11, 30, 15, 0, 0, 0, time.UTC)

// said is what a test reads of a verdict.
type said struct {
	Word        string
	Probability float64
	Judged      string
	Reason      struct {
		Code                     string
		Limit, Antenna, Quantity *string
		Text                     string
	}
	Deciding *struct {
		Antenna, Quantity string
	}
	Limits []struct {
		Name        string
		Probability *float64
	}
	Remedies []struct {
		Antenna, Quantity string
		WordAfter         string `json:"word_after"`
	}
	Missing []struct{ Antenna, Quantity string }
}

func verdictOn(t *testing.T, store *db.Store, job db.Job, m mountRun) said {
	t.Helper()
	log, err := store.JobLog(t.Context(), job.ID, job.HeadSeq)
	if err != nil {
		t.Fatal(err)
	}
	answer, problem := server.JudgeMount(m.id, m.sheet.text(), log)
	if problem != nil {
		t.Fatalf("%s %s: %v", job.Site, m.id, problem)
	}
	var v said
	if err := json.Unmarshal(answer, &v, json.MatchCaseInsensitiveNames(true)); err != nil {
		t.Fatal(err)
	}
	return v
}

func jobAt(t *testing.T, store *db.Store, site string) db.Job {
	t.Helper()
	list, err := store.Jobs(t.Context(), db.JobsAsked{By: db.Person{Role: db.Supervisor}})
	if err != nil {
		t.Fatal(err)
	}
	for _, j := range list {
		if j.Site == site {
			return j
		}
	}
	t.Fatalf("no job at %s", site)
	return db.Job{}
}

// What the simulator planted in each mount is what the verdict finds, and where nothing is wrong it finds nothing.
func TestTheToolFindsWhatWasPlanted(t *testing.T) {
	store := furnished(t, demoSeed, demoDay)
	judged := 0
	for _, v := range demoVisits() {
		job := jobAt(t, store, v.site)
		if job.Stage != v.until {
			t.Errorf("%s is %s, want %s", v.site, job.Stage, v.until)
		}
		for _, m := range v.mounts {
			if m.found == nil {
				continue
			}
			t.Run(v.site+" "+m.id, func(t *testing.T) {
				judged++
				got := verdictOn(t, store, job, m)
				if got.Word != m.planted.word {
					t.Fatalf("it says %q (%v, %+v), planted is %q", got.Word, got.Probability, got.Reason, m.planted.word)
				}
				is := func(p *string, want string) bool { return want == "" || p != nil && *p == want }
				switch m.planted.word {
				case "go":
					if len(got.Missing) != 0 {
						t.Errorf("missing %v", got.Missing)
					}
				case "no-go":
					if !is(got.Reason.Limit, m.planted.limit) || !is(got.Reason.Antenna, m.planted.antenna) || !is(got.Reason.Quantity, m.planted.quantity) {
						t.Errorf("it blames %+v, planted is %+v", got.Reason, m.planted)
					}
					if len(got.Remedies) == 0 || got.Remedies[0].Antenna != m.planted.antenna || got.Remedies[0].Quantity != m.planted.quantity || got.Remedies[0].WordAfter != "go" {
						t.Errorf("the first remedy is %+v, planted is %+v", got.Remedies, m.planted)
					}
				case "measure again":
					found := got.Deciding != nil && got.Deciding.Antenna == m.planted.antenna && got.Deciding.Quantity == m.planted.quantity
					for _, missing := range got.Missing {
						found = found || missing.Antenna == m.planted.antenna && missing.Quantity == m.planted.quantity
					}
					if !found {
						t.Errorf("it asks for %+v, missing %+v (%+v); planted is %+v", got.Deciding, got.Missing, got.Reason, m.planted)
					}
				}
			})
		}
	}
	if judged < 7 {
		t.Errorf("%d mounts were judged", judged)
	}
}

// Every sheet of the demo can be judged as planned, and hangs right if it hangs as planned.
func TestEveryPlanOfTheDemoHoldsByItself(t *testing.T) {
	for _, v := range demoVisits() {
		for _, m := range v.mounts {
			t.Run(v.site+" "+m.id, func(t *testing.T) {
				ideal := m
				ideal.angles, ideal.tape = instrument{method: "level", step: 0.001, u: 0.05}, instrument{method: "tape", step: 1, u: 1}
				hangs := map[string]truth{}
				for _, a := range m.sheet.Near.Antennas {
					hangs[a.ID] = truth{skew: a.Skew.Planned.Value.(float64), tilt: a.Tilt.Planned.Value.(float64), place: a.PositionMM.Planned.Value.(offsets)}
					if a.Azimuth != nil {
						h := hangs[a.ID]
						h.azimuth = a.Azimuth.Planned.Value.(float64)
						hangs[a.ID] = h
					}
				}
				sheet := withReadings(m.sheet, hangs)
				answer, problem := wire.Reckon("mount.verdict", sheet)
				if problem != nil {
					t.Fatal(problem)
				}
				var v said
				if err := json.Unmarshal(answer, &v, json.MatchCaseInsensitiveNames(true)); err != nil {
					t.Fatal(err)
				}
				if v.Judged != "as_left" || len(v.Missing) != 0 || v.Word == "no-go" {
					t.Errorf("hung as planned: %+v", v)
				}
			})
		}
	}
}

// withReadings puts one exact reading of everything into the as left state of a sheet.
func withReadings(s sheet, hangs map[string]truth) jsontext.Value {
	near := end{}
	for _, a := range s.Near.Antennas {
		h := hangs[a.ID]
		angle := func(v float64, north bool) []reading {
			r := reading{Value: v, Unit: "deg", U: ptr(0.05), Method: "level"}
			if north {
				r.North = ptr("true")
			}
			return []reading{r}
		}
		a.Skew.AsLeft, a.Tilt.AsLeft = angle(h.skew, false), angle(h.tilt, false)
		if a.Azimuth != nil {
			azimuth := *a.Azimuth
			azimuth.AsLeft = angle(h.azimuth, true)
			a.Azimuth = &azimuth
		}
		if len(near.Antennas) > 0 {
			a.PositionMM.AsLeft = []reading{{Value: h.place, Unit: "mm", U: ptr(1.0), Method: "tape"}}
		}
		near.Antennas = append(near.Antennas, a)
	}
	s.Near = near
	return s.text()
}

// The demo is a record like any other: chains hold, what is derived follows.
func TestTheDemoIsProved(t *testing.T) {
	store := furnished(t, demoSeed, demoDay)
	proof, err := store.Prove(t.Context())
	if err != nil || len(proof.Faults) != 0 || len(proof.Gaps) != 0 || proof.Quarantined != 0 || proof.Entries < 60 {
		t.Errorf("proof %+v (%v)", proof, err)
	}
	if differences, err := store.Rebuild(t.Context(), false); err != nil || len(differences) != 0 {
		t.Errorf("differences %v (%v)", differences, err)
	}
}

// The same seed and day make the same readings; nothing arrives in the future.
func TestTheDemoIsTheSameEachTime(t *testing.T) {
	texts := func() []string {
		store := furnished(t, demoSeed, demoDay)
		log, _, err := store.EntriesAfter(t.Context(), db.Person{Role: db.Supervisor}, 0, 1000)
		if err != nil {
			t.Fatal(err)
		}
		var list []string
		for _, l := range log {
			e, err := db.ReadEntry(l.Raw)
			if err != nil {
				t.Fatal(err)
			}
			if at, err := time.Parse(time.RFC3339, e.At); err != nil || at.After(demoDay) || l.ReceivedAt.After(demoDay) {
				t.Errorf("entry %d is of %s, received %s (%v)", l.Seq, e.At, l.ReceivedAt, err)
			}
			if e.Kind == db.ReadingTaken {
				list = append(list, string(e.Body))
			}
		}
		return list
	}
	first, second := texts(), texts()
	if len(first) < 30 || len(first) != len(second) {
		t.Fatalf("%d and %d readings", len(first), len(second))
	}
	for i := range first {
		var a, b map[string]any
		if json.Unmarshal([]byte(first[i]), &a) != nil || json.Unmarshal([]byte(second[i]), &b) != nil || first[i] != second[i] {
			t.Errorf("reading %d: %s and %s", i, first[i], second[i])
		}
	}
}

// The demo of another version is called what it is, kept until --fresh is said, and then taken away; a real database never is.
func TestTheDemoOfAnotherVersionIsNamed(t *testing.T) {
	for name, alter := range map[string]string{
		"a mark that this version does not have": "UPDATE meta SET value = 'yes' WHERE key = 'demo'",
		"a schema with other text":               "UPDATE migrations SET sum = 'other' WHERE number = 1",
		"a newer schema":                         "INSERT INTO migrations (number, name, sum, applied_ms) VALUES (99, 'later', 'x', 0)",
	} {
		t.Run(name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), databaseName)
			store, err := db.Open(t.Context(), db.Config{Path: path})
			if err != nil {
				t.Fatal(err)
			}
			if err := store.MarkDemo(t.Context(), db.DemoWhole); err != nil {
				t.Fatal(err)
			}
			if _, err := store.AddPerson(t.Context(), "Ilse Marrow", db.Supervisor, "", "stored"); err != nil {
				t.Fatal(err)
			}
			store.Close()
			change := func(statement string) {
				t.Helper()
				pool, err := sql.Open("sqlite3", path)
				if err != nil {
					t.Fatal(err)
				}
				defer pool.Close()
				if _, err := pool.ExecContext(t.Context(), statement); err != nil {
					t.Fatal(err)
				}
			}
			change(alter)
			got := crossplumb(t, "", "demo", "--data", filepath.Dir(path), "--listen", "127.0.0.1:0")
			if got.code != 1 || !strings.Contains(got.err, "made by another version") || !strings.Contains(got.err, "--fresh") || strings.Contains(got.err, "not the demo's") {
				t.Errorf("it says %+v", got)
			}
			if _, err := os.Stat(path); err != nil {
				t.Errorf("it was not left: %v", err)
			}
			if err := furnish(t.Context(), path, demoDay); !errors.Is(err, errOtherDemo) {
				t.Errorf("furnish: %v", err)
			}
			change("UPDATE meta SET key = 'demo-not' WHERE key = 'demo'")
			if err := removeDemo(t.Context(), path); err == nil || !strings.Contains(err.Error(), "not the demo's") {
				t.Errorf("--fresh on what is no demo: %v", err)
			}
			change("UPDATE meta SET key = 'demo' WHERE key = 'demo-not'")
			if err := removeDemo(t.Context(), path); err != nil {
				t.Errorf("--fresh: %v", err)
			}
			if _, err := os.Stat(path); !errors.Is(err, os.ErrNotExist) {
				t.Errorf("--fresh left it: %v", err)
			}
		})
	}
}
