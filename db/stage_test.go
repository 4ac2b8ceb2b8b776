package db

import (
	"errors"
	"fmt"
	"testing"
)

// Each row is a job's life in entries, and the stage after each.
func TestStages(t *testing.T) {
	for _, c := range []struct {
		name  string
		steps []string // what happens
		want  []string // the stage afterwards
	}{
		{"from issue to sign-off", []string{"note", "caution", "reading", "hand in", "sign off"},
			[]string{StageIssued, StageUnderWay, StageUnderWay, StageHandedIn, StageSignedOff}},
		{"sent back, taken up again, handed in again", []string{"reading", "hand in", "send back", "note", "reading", "hand in", "sign off"},
			[]string{StageUnderWay, StageHandedIn, StageSentBack, StageSentBack, StageUnderWay, StageHandedIn, StageSignedOff}},
		{"a bolt moved first", []string{"bolt"}, []string{StageUnderWay}},
		{"handed in without a reading", []string{"hand in"}, []string{StageHandedIn}},
		{"a late reading leaves it handed in", []string{"hand in", "reading"}, []string{StageHandedIn, StageHandedIn}},
		{"handed in twice", []string{"hand in", "hand in"}, []string{StageHandedIn, StageHandedIn}},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := openBench(t)
			p := newPhone(b.tam)
			if j := b.jobNow(); j.Stage != StageIssued || j.Entries != 2 {
				t.Fatalf("at first: %+v", j)
			}
			for i, step := range c.steps {
				before := b.jobNow()
				b.step(p, step)
				after := b.jobNow()
				if after.Stage != c.want[i] {
					t.Fatalf("after %q the job is %s, want %s", step, after.Stage, c.want[i])
				}
				if after.HeadSeq <= before.HeadSeq || after.Entries != before.Entries+1 {
					t.Errorf("after %q: head %d → %d, entries %d → %d", step, before.HeadSeq, after.HeadSeq, before.Entries, after.Entries)
				}
				if moved := after.ReadingsSeq != before.ReadingsSeq; moved != (step == "reading" || step == "bolt") {
					t.Errorf("after %q: readings_seq %d → %d", step, before.ReadingsSeq, after.ReadingsSeq)
				}
			}
			b.proved()
		})
	}
}

func (b *bench) step(p *phone, step string) {
	b.Helper()
	decide := func(kind string, remark *string) {
		b.Helper()
		if _, err := b.AppendDesk(b.Context(), b.desk, []DeskEntry{{ID: newID(), Job: b.job, Kind: kind,
			Body: Decision{Remark: remark, BaseSeq: b.jobNow().StageSeq}}}); err != nil {
			b.Fatal(err)
		}
	}
	why := "read the tilt again"
	switch step {
	case "note":
		b.stored(b.tam, p.write(b.job, NoteAdded, note("x")))
	case "caution":
		b.stored(b.tam, p.write(b.job, CautionConfirmed, cautionOne))
	case "reading":
		b.stored(b.tam, p.write(b.job, ReadingTaken, skewBody))
	case "bolt":
		b.stored(b.tam, p.write(b.job, BoltMoved, `{"antenna":"A","quantity":"skew"}`))
	case "hand in":
		b.stored(b.tam, p.write(b.job, JobHandedIn, handBody))
	case "sign off":
		decide(JobSignedOff, nil)
	case "send back":
		decide(JobSentBack, &why)
		if j := b.jobNow(); j.Remark == nil || *j.Remark != why {
			b.Errorf("the remark is %v", j.Remark)
		}
	default:
		b.Fatalf("no step %q", step)
	}
}

func TestADecisionIsMadeOnce(t *testing.T) {
	b := openBench(t)
	b.step(newPhone(b.tam), "hand in")
	decision := DeskEntry{ID: newID(), Job: b.job, Kind: JobSignedOff, Body: Decision{BaseSeq: b.jobNow().StageSeq}}
	first, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{decision})
	if err != nil || first.Answers[0].Status != Stored {
		t.Fatalf("%+v (%v)", first, err)
	}
	again, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{decision})
	if err != nil || again.Answers[0].Status != Duplicate || again.Answers[0].Seq != first.Answers[0].Seq {
		t.Fatalf("again: %+v (%v)", again, err)
	}
	var refusal *Refusal
	other := decision
	other.Kind = JobSentBack
	other.Body = Decision{Remark: ptr("no"), BaseSeq: 1}
	if _, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{other}); !errors.As(err, &refusal) || refusal.Code != IDReused {
		t.Fatalf("another decision under the same id: %v", err)
	}
	other.ID = newID()
	if _, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{other}); !errors.As(err, &refusal) || refusal.Code != SignedOff {
		t.Fatalf("a decision on a signed job: %v", err)
	}
	if n := b.count("SELECT count(*) FROM quarantine"); n != 0 {
		t.Errorf("the desk's refusals were set apart: %d", n)
	}
}

func ptr[T any](v T) *T { return &v }

// What the desk writes is all there or not at all: a plan without its issue would be invisible to its crew.
func TestDeskEntriesAreWholeOrNotThere(t *testing.T) {
	b := openBench(t)
	before := b.dump()
	job := newID()
	_, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{
		{ID: newID(), Job: job, Kind: JobPlanned, Body: Plan{Site: "s", Title: "t", Crew: "north",
			Mounts: []PlannedMount{{ID: "m", Name: "n", Sheet: []byte("{}")}}}},
		{ID: newID(), Job: job, Kind: JobSignedOff, Body: Decision{BaseSeq: 1}},
	})
	if err == nil {
		t.Fatal("it was taken")
	}
	if after := b.dump(); after != before {
		t.Errorf("a part of it is there:\n%s", after)
	}
}

func TestWhoSeesWhichJob(t *testing.T) {
	b := openBench(t)
	drafted := newID()
	if _, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{{ID: newID(), Job: drafted, Kind: JobPlanned,
		Body: Plan{Site: "s", Title: "t", Crew: "north", Mounts: []PlannedMount{{ID: "m", Name: "n", Sheet: []byte("{}")}}}}}); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		who  Person
		want int
		job  string
		sees bool
	}{
		{b.desk, 2, b.job, true}, {b.desk, 2, drafted, true},
		{b.tam, 1, b.job, true}, {b.tam, 1, drafted, false},
		{b.other, 0, b.job, false},
		{Person{Role: Climber}, 0, b.job, false}, {Person{}, 0, b.job, false},
	} {
		list, err := b.Jobs(t.Context(), JobsAsked{By: c.who})
		if err != nil || len(list) != c.want {
			t.Errorf("%s %q sees %d jobs (%v), want %d", c.who.Role, c.who.Name, len(list), err, c.want)
		}
		if _, err := b.Job(t.Context(), c.who, c.job); (err == nil) != c.sees || err != nil && err != ErrNotFound {
			t.Errorf("%s %q, job %s: %v", c.who.Role, c.who.Name, c.job, err)
		}
	}
	for stage, want := range map[string]int{StageIssued: 1, StageDrafted: 1, StageSignedOff: 0} {
		if list, err := b.Jobs(t.Context(), JobsAsked{By: b.desk, Stage: stage}); err != nil || len(list) != want {
			t.Errorf("%s: %d jobs (%v), want %d", stage, len(list), err, want)
		}
	}
}

// A cursor over the log gives every entry that the person may see once, whatever the page size.
func TestTheCursorSkipsNothing(t *testing.T) {
	b := openBench(t)
	south := newID()
	b.issue(south, "south")
	tam, odd := newPhone(b.tam), newPhone(b.other)
	for i := range 30 {
		if i%3 == 0 {
			b.stored(b.other, odd.write(south, NoteAdded, note(fmt.Sprint(i))))
		} else {
			b.stored(b.tam, tam.write(b.job, NoteAdded, note(fmt.Sprint(i))))
		}
	}
	for _, c := range []struct {
		who  Person
		want int
	}{{b.desk, 34}, {b.tam, 22}, {b.other, 12}} {
		for _, limit := range []int{1, 7, 1000} {
			seen := map[int64]bool{}
			var after int64
			for page := 0; ; page++ {
				list, next, err := b.EntriesAfter(t.Context(), c.who, after, limit)
				if err != nil {
					t.Fatal(err)
				}
				for _, e := range list {
					if seen[e.Seq] || e.Seq <= after || e.Seq > next {
						t.Fatalf("seq %d twice or outside (%d, %d]", e.Seq, after, next)
					}
					seen[e.Seq] = true
				}
				if next == after {
					break
				}
				after = next
			}
			if len(seen) != c.want {
				t.Errorf("%s with pages of %d sees %d entries, want %d", c.who.Name, limit, len(seen), c.want)
			}
		}
	}
}
