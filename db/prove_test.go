package db

import (
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// lived is a bench with a history: several phones, gaps, things set apart, decisions.
func lived(t testing.TB) *bench {
	b := openBench(t)
	p, q := newPhone(b.tam), newPhone(b.tam)
	b.stored(b.tam, p.write(b.job, CautionConfirmed, cautionOne), p.write(b.job, ReadingTaken, skewBody))
	b.append(b.tam, p.write(newID(), NoteAdded, note("unknown job")), p.write(b.job, NoteAdded, note("after it")))
	b.append(b.tam, p.write(b.job, "job.deleted", "{}"))
	lost := q.write(b.job, NoteAdded, note("still on the phone"))
	b.stored(b.tam, q.write(b.job, ReadingTaken, skewBody))
	_ = lost
	b.step(p, "hand in")
	b.step(p, "send back")
	b.step(p, "reading")
	return b
}

func TestARecordThatLivedIsProved(t *testing.T) {
	b := lived(t)
	b.proved()
	proof, err := b.Prove(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if want := b.count("SELECT count(*) FROM entries"); proof.Entries != int64(want) || want < 9 {
		t.Errorf("looked at %d entries, %d are there", proof.Entries, want)
	}
	if proof.Quarantined != 2 || len(proof.Gaps) != 1 {
		t.Errorf("quarantined %d, gaps %v", proof.Quarantined, proof.Gaps)
	}
	if h, err := head(t.Context(), b.read); err != nil || h != proof.Head {
		t.Errorf("head %v (%v), proof says %v", h, err, proof.Head)
	}
}

// Whoever has the file can drop the triggers. What is done then is found.
func TestProveFindsWhatWasDoneToTheFile(t *testing.T) {
	for _, c := range []struct{ name, do, finds string }{
		{"a text changed", "UPDATE entries SET raw = replace(raw, '6.2', '0.2') WHERE seq = 4", "entry 4: its text was changed"},
		{"a text and its hash changed", "UPDATE entries SET raw = replace(raw, '\"A\"', '\"B\"'), hash = 'HASH' WHERE seq = 4", "entry 4: the server's chain is broken"},
		{"an entry taken out", "DELETE FROM entries WHERE seq = 5", "entries 5 to 5 are missing"},
		{"two entries swapped", "UPDATE entries SET seq = CASE seq WHEN 4 THEN -5 WHEN 5 THEN -4 END WHERE seq IN (4, 5); UPDATE entries SET seq = -seq WHERE seq < 0", "chain is broken"},
		{"another uploader", "UPDATE entries SET uploader = 'somebody else' WHERE seq = 4", "entry 4: the server's chain is broken"},
		{"another time of arrival", "UPDATE entries SET received_ms = received_ms + 1 WHERE seq = 4", "entry 4: the server's chain is broken"},
		{"another job in the column", "UPDATE entries SET kind = 'note.added' WHERE seq = 4", "entry 4: its columns say other things"},
		{"a device's chain", "UPDATE entries SET prev = '' WHERE seq = 4", "does not follow the one before it"},
		{"a quarantined text", "UPDATE quarantine SET raw = raw || ' ' WHERE n = 1", "quarantined entry 1: its text was changed"},
		{"a line of audit", "UPDATE audit SET action = 'nothing' WHERE n = 1", "audit line 1"},
		{"a job that stands on no entry", "PRAGMA foreign_keys = off; UPDATE jobs SET stage_seq = 999; PRAGMA foreign_keys = on", "foreign key"},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := lived(t)
			if _, _, err := b.Invite(t.Context(), "", Supervisor, ""); err != nil {
				t.Fatal(err)
			}
			do := c.do
			if strings.Contains(do, "HASH") {
				var text string
				if err := b.read.QueryRow("SELECT replace(raw, '\"A\"', '\"B\"') FROM entries WHERE seq = 4").Scan(&text); err != nil {
					t.Fatal(err)
				}
				do = strings.Replace(do, "HASH", HashOf(text), 1)
			}
			for _, trigger := range []string{"entries_are_never_changed", "entries_are_never_removed", "quarantine_is_never_changed", "audit_is_never_changed"} {
				if _, err := b.write.Exec("DROP TRIGGER " + trigger); err != nil {
					t.Fatal(err)
				}
			}
			if _, err := b.write.Exec("PRAGMA foreign_keys = off; " + do + "; PRAGMA foreign_keys = on"); err != nil {
				t.Fatal(err)
			}
			proof, err := b.Prove(t.Context())
			if err != nil {
				t.Fatal(err)
			}
			if all := strings.Join(proof.Faults, "\n"); !strings.Contains(all, c.finds) {
				t.Errorf("it finds %q, want %q in it", all, c.finds)
			}
		})
	}
}

func TestRebuildMakesGoodWhatDoesNotFollowFromTheLog(t *testing.T) {
	for _, c := range []struct{ name, do, table string }{
		{"a stage set by hand", "UPDATE jobs SET stage = 'signed off'", "jobs"},
		{"a count", "UPDATE jobs SET entries = entries + 1", "jobs"},
		{"what was set apart", "UPDATE jobs SET quarantined = 0", "jobs"},
		{"a mount renamed", "UPDATE mounts SET name = 'south'", "mounts"},
		{"who uploaded", "DELETE FROM device_people", "device_people"},
		{"a device believed further", "UPDATE devices SET contiguous_seq = contiguous_seq + 1", "devices"},
		{"a table emptied", "DELETE FROM devices", "devices"},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := lived(t)
			good := b.dump()
			if _, err := b.write.Exec(c.do); err != nil {
				t.Fatal(err)
			}
			bad := b.dump()
			if bad == good && c.table != "mounts" {
				t.Fatal("the damage does nothing")
			}
			looked, err := b.Rebuild(t.Context(), false)
			if err != nil || len(looked) != 1 || looked[0].Table != c.table {
				t.Fatalf("looking finds %v (%v), want a difference in %s", looked, err, c.table)
			}
			if b.dump() != bad {
				t.Error("looking changed something")
			}
			if _, err := b.Rebuild(t.Context(), true); err != nil {
				t.Fatal(err)
			}
			if b.dump() != good {
				t.Error("it did not come out as the log has it")
			}
			b.proved()
		})
	}
}

// Whatever happens to jobs, what is derived on the way is what a replay derives.
func TestRebuildOfAnyHistoryComesOutTheSame(t *testing.T) {
	b := openBench(t)
	rapid.Check(t, func(t *rapid.T) {
		job := newID()
		b.issue(job, rapid.SampledFrom([]string{"north", "south"}).Draw(t, "crew"))
		phones := []*phone{newPhone(b.tam), newPhone(b.tam), newPhone(b.other)}
		for range rapid.IntRange(1, 15).Draw(t, "steps") {
			p := rapid.SampledFrom(phones).Draw(t, "phone")
			by := b.tam
			if p.author == b.other.ID {
				by = b.other
			}
			at := job
			if rapid.IntRange(0, 9).Draw(t, "stray") == 0 {
				at = newID()
			}
			step := rapid.SampledFrom([]string{NoteAdded, ReadingTaken, CautionConfirmed, BoltMoved, JobHandedIn, JobHandedIn, JobSignedOff, "lost", "decide", "decide", "decide"}).Draw(t, "step")
			body := map[string]string{NoteAdded: note("x"), ReadingTaken: skewBody, CautionConfirmed: cautionOne,
				BoltMoved: `{"antenna":"A","quantity":"skew"}`, JobHandedIn: handBody, JobSignedOff: `{"remark":null,"base_seq":1}`, "lost": note("x")}
			switch step {
			case "lost":
				p.write(at, NoteAdded, body[step])
			case "decide":
				j, err := b.Job(t.Context(), b.desk, job)
				if err != nil {
					t.Fatal(err)
				}
				kind := rapid.SampledFrom([]string{JobSentBack, JobSignedOff}).Draw(t, "decision")
				// What may not be decided is refused; that is part of the history too.
				_, _ = b.AppendDesk(t.Context(), b.desk, []DeskEntry{{ID: newID(), Job: job, Kind: kind, Body: Decision{Remark: ptr("why"), BaseSeq: j.StageSeq}}})
			default:
				if _, err := b.Append(t.Context(), by, 0, []Incoming{p.write(at, step, body[step])}); err != nil {
					t.Fatal(err)
				}
			}
		}
	})
	stages := 0
	for _, stage := range []string{StageIssued, StageUnderWay, StageHandedIn, StageSentBack, StageSignedOff} {
		if b.count("SELECT count(*) FROM jobs WHERE stage = ?", stage) > 0 {
			stages++
		}
	}
	if !testing.Short() && stages < 4 || b.count("SELECT count(*) FROM quarantine") == 0 {
		t.Errorf("the histories reach %d stages only, or nothing was set apart: the test shows too little", stages)
	}
	b.proved()
}
