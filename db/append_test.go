package db

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"strings"
	"sync"
	"testing"

	"github.com/google/uuid"
	"pgregory.net/rapid"
)

func TestAppendAnswersEachEntryInTheOrderItCame(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	one, two := p.write(b.job, CautionConfirmed, cautionOne), p.write(b.job, ReadingTaken, skewBody)
	bad := newPhone(b.tam).write(newID(), NoteAdded, note("unknown job"))
	r := b.append(b.tam, one, bad, two)
	want := []Status{Stored, Quarantined, Stored}
	for i, a := range r.Answers {
		e, _ := ReadEntry([]Incoming{one, bad, two}[i].Raw)
		if a.Status != want[i] || a.ID != e.ID {
			t.Errorf("answer %d: %+v, want %s for %s", i, a, want[i], e.ID)
		}
	}
	if r.Answers[2].Seq != r.Answers[0].Seq+1 || r.Head.Seq != r.Answers[2].Seq {
		t.Errorf("seq %d and %d, head %d", r.Answers[0].Seq, r.Answers[2].Seq, r.Head.Seq)
	}
	if r.Epoch != 1 || len(r.Jobs) != 1 || r.Jobs[0] != b.job {
		t.Errorf("receipt %+v", r)
	}
}

// The chain is reckoned here anew, from the formula as it stands in the agreement with the phones, not by the code
// under test.
func TestChainIsTheAgreedFormula(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	r := b.stored(b.tam, p.write(b.job, NoteAdded, note("å – 6,2°")), p.write(b.job, NoteAdded, note("two")))
	rows, err := b.read.Query("SELECT seq, received_ms, uploader, raw, chain FROM entries ORDER BY seq")
	if err != nil {
		t.Fatal(err)
	}
	defer rows.Close()
	before := ""
	for rows.Next() {
		var seq, received int64
		var uploader, raw, chain string
		if err := rows.Scan(&seq, &received, &uploader, &raw, &chain); err != nil {
			t.Fatal(err)
		}
		sum := sha256.Sum256([]byte(fmt.Sprintf("%s\n%d\n%d\n%s\n%s", before, seq, received, uploader, raw)))
		if before = hex.EncodeToString(sum[:]); before != chain {
			t.Fatalf("entry %d: chain %s, the formula gives %s", seq, chain, before)
		}
	}
	if r.Head.Hash != before {
		t.Errorf("head %s, last chain %s", r.Head.Hash, before)
	}
}

func TestTheSameBatchAgainChangesNothing(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	batch := []Incoming{p.write(b.job, CautionConfirmed, cautionOne), p.write(b.job, ReadingTaken, skewBody),
		newPhone(b.tam).write(newID(), NoteAdded, note("unknown job"))}
	first := b.append(b.tam, batch...)
	state, job := b.dump(), b.jobNow()
	second := b.append(b.tam, batch...)
	for i := range batch {
		want := first.Answers[i]
		if want.Status == Stored {
			want.Status = Duplicate
		}
		if second.Answers[i] != want {
			t.Errorf("answer %d: %+v, want %+v", i, second.Answers[i], want)
		}
	}
	if after := b.dump(); after != state {
		t.Errorf("something changed:\n%s\nbefore:\n%s", after, state)
	}
	if fmt.Sprint(b.jobNow()) != fmt.Sprint(job) || len(second.Jobs) != 0 {
		t.Errorf("the job changed: %+v", b.jobNow())
	}
}

// dump is all that the log and what follows from it hold.
func (b *bench) dump() string {
	b.Helper()
	var all strings.Builder
	for _, query := range []string{
		"SELECT seq || id || device || device_seq || hash || chain FROM entries ORDER BY seq",
		"SELECT n || raw_hash || code FROM quarantine ORDER BY n",
		"SELECT id || stage || stage_seq || ' ' || head_seq || ' ' || readings_seq || ' ' || entries || ' ' || quarantined FROM jobs ORDER BY id",
		"SELECT device || contiguous_seq || contiguous_hash || highest_seq FROM devices ORDER BY device",
		"SELECT person || device FROM device_people ORDER BY person, device",
	} {
		rows, err := b.read.QueryContext(b.Context(), query)
		if err != nil {
			b.Fatal(err)
		}
		lines, err := collect(rows, func(s *string) []any { return []any{s} })
		if err != nil {
			b.Fatal(err)
		}
		all.WriteString(strings.Join(lines, "\n") + "\n--\n")
	}
	return all.String()
}

func TestParallelDeliveryStoresOnce(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	var batch []Incoming
	for i := range 20 {
		batch = append(batch, p.write(b.job, NoteAdded, note(fmt.Sprint("note ", i))))
	}
	const sides = 8
	receipts := make([]Receipt, sides)
	errs := make([]error, sides)
	var wg sync.WaitGroup
	for i := range sides {
		wg.Go(func() { receipts[i], errs[i] = b.Append(context.Background(), b.tam, 0, batch) })
	}
	wg.Wait()
	if err := errors.Join(errs...); err != nil {
		t.Fatal(err)
	}
	for k := range batch {
		stored := 0
		for i := range sides {
			if receipts[i].Answers[k].Status == Stored {
				stored++
			}
			if receipts[i].Answers[k].Seq != receipts[0].Answers[k].Seq {
				t.Errorf("entry %d has seq %d and %d", k, receipts[i].Answers[k].Seq, receipts[0].Answers[k].Seq)
			}
		}
		if stored != 1 {
			t.Errorf("entry %d was stored %d times", k, stored)
		}
	}
	if n := b.count("SELECT count(*) FROM entries WHERE device = ?", p.device); n != len(batch) {
		t.Errorf("%d entries, want %d", n, len(batch))
	}
}

func TestABatchIsWholeOrNotThere(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	batch := []Incoming{p.write(b.job, NoteAdded, note("one")), p.write(b.job, NoteAdded, note("two")), p.write(b.job, NoteAdded, note("three"))}
	third, err := ReadEntry(batch[2].Raw)
	if err != nil {
		t.Fatal(err)
	}
	// The disk fails, so to say, at the third entry.
	if _, err := b.write.Exec(fmt.Sprintf(
		"CREATE TEMP TRIGGER fail BEFORE INSERT ON main.entries WHEN NEW.id = '%s' BEGIN SELECT RAISE(ABORT, 'no'); END", third.ID)); err != nil {
		t.Fatal(err)
	}
	before := b.dump()
	if r, err := b.Append(t.Context(), b.tam, 0, batch); err == nil {
		t.Fatalf("it was acknowledged: %+v", r)
	}
	if after := b.dump(); after != before {
		t.Fatalf("a part of the batch is there:\n%s", after)
	}
	if _, err := b.write.Exec("DROP TRIGGER fail"); err != nil {
		t.Fatal(err)
	}
	b.stored(b.tam, batch...)
}

func TestWhatIsSetApart(t *testing.T) {
	long := strings.Repeat("x", maxText+1)
	for _, c := range []struct {
		name string
		// make returns what is sent and by whom.
		make func(b *bench, p *phone) (Person, Incoming)
		code string
	}{
		{"a job that nobody knows", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(newID(), NoteAdded, note("x"))
		}, UnknownJob},
		{"no job", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("job", nil))
		}, UnknownJob},
		{"another crew's job, in the same words as one that nobody knows", func(b *bench, p *phone) (Person, Incoming) {
			return b.other, p.write(b.job, NoteAdded, note("x"), set("author", b.other.ID))
		}, UnknownJob},
		{"a mount that the plan does not have", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, ReadingTaken, skewBody, set("mount", "m9"))
		}, UnknownMount},
		{"an unknown kind", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, "job.deleted", `{}`)
		}, UnknownKind},
		{"an unknown schema", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("schema", 2))
		}, UnknownKind},
		{"an author that nobody is", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("author", "nobody"))
		}, UnknownAuthor},
		{"a hash that is not the text's", func(b *bench, p *phone) (Person, Incoming) {
			in := p.write(b.job, NoteAdded, note("x"))
			in.Hash = strings.Repeat("0", 64)
			return b.tam, in
		}, HashMismatch},
		{"a hash in capitals", func(b *bench, p *phone) (Person, Incoming) {
			in := p.write(b.job, NoteAdded, note("x"))
			in.Hash = strings.ToUpper(in.Hash)
			return b.tam, in
		}, HashMismatch},
		{"an id that is in the log with other content", func(b *bench, p *phone) (Person, Incoming) {
			one := p.write(b.job, NoteAdded, note("one"))
			b.stored(b.tam, one)
			e, _ := ReadEntry(one.Raw)
			return b.tam, p.write(b.job, NoteAdded, note("two"), set("id", e.ID))
		}, IDReused},
		{"a number that the device used for something else", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, NoteAdded, note("one")))
			p.seq, p.prev = 0, ""
			return b.tam, p.write(b.job, NoteAdded, note("two"))
		}, DeviceSeqReused},
		{"an entry that does not follow the one before it", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, NoteAdded, note("one")))
			p.prev = strings.Repeat("a", 64)
			return b.tam, p.write(b.job, NoteAdded, note("two"))
		}, ChainBroken},
		{"an entry that the one after it does not follow", func(b *bench, p *phone) (Person, Incoming) {
			p.write(b.job, NoteAdded, note("one"))
			b.stored(b.tam, p.write(b.job, NoteAdded, note("two")))
			p.seq, p.prev = 0, ""
			return b.tam, p.write(b.job, NoteAdded, note("another one"))
		}, ChainBroken},
		{"a climber who signs off", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, JobHandedIn, handBody))
			return b.tam, p.write(b.job, JobSignedOff, fmt.Sprintf(`{"remark":null,"base_seq":%d}`, b.jobNow().StageSeq))
		}, NotAllowed},
		{"a climber who carries a supervisor's decision", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, JobHandedIn, handBody))
			return b.tam, newPhone(b.desk).write(b.job, JobSignedOff, fmt.Sprintf(`{"remark":null,"base_seq":%d}`, b.jobNow().StageSeq))
		}, NotAllowed},
		{"a climber who plans", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(newID(), JobPlanned, `{"site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":{}}]}`)
		}, NotAllowed},
		{"a second plan", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(b.job, JobPlanned, `{"site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":{}}]}`)
		}, AlreadyPlanned},
		{"a decision on a job that is not handed in", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(b.job, JobSignedOff, fmt.Sprintf(`{"remark":null,"base_seq":%d}`, b.jobNow().StageSeq))
		}, NotHandedIn},
		{"a decision on what has changed since", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, JobHandedIn, handBody))
			base := b.jobNow().StageSeq
			b.stored(b.tam, p.write(b.job, ReadingTaken, skewBody)) // a second phone's reading came in
			return b.desk, newPhone(b.desk).write(b.job, JobSignedOff, fmt.Sprintf(`{"remark":null,"base_seq":%d}`, base))
		}, Stale},
		{"a reading after sign-off", func(b *bench, p *phone) (Person, Incoming) {
			b.stored(b.tam, p.write(b.job, JobHandedIn, handBody))
			b.stored(b.desk, newPhone(b.desk).write(b.job, JobSignedOff, fmt.Sprintf(`{"remark":null,"base_seq":%d}`, b.jobNow().StageSeq)))
			return b.tam, p.write(b.job, ReadingTaken, skewBody)
		}, SignedOff},
		{"what the caller objects to", func(b *bench, p *phone) (Person, Incoming) {
			in := p.write(b.job, ReadingTaken, skewBody)
			in.Objection = "the sheet has no such antenna"
			return b.tam, in
		}, Unreadable},

		{"text that is not JSON", func(b *bench, p *phone) (Person, Incoming) { return b.tam, raw(`{"id":`) }, Malformed},
		{"JSON of another shape", func(b *bench, p *phone) (Person, Incoming) { return b.tam, raw(`[1,2]`) }, Malformed},
		{"nothing", func(b *bench, p *phone) (Person, Incoming) { return b.tam, raw(``) }, Malformed},
		{"bytes that are not UTF-8", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, raw(strings.Replace(p.write(b.job, NoteAdded, note("abc")).Raw, "abc", "a\xffc", 1))
		}, Malformed},
		{"text after the end", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, raw(p.write(b.job, NoteAdded, note("x")).Raw + `{}`)
		}, Malformed},
		{"a name twice", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, raw(strings.Replace(p.write(b.job, NoteAdded, note("x")).Raw, `"schema":1`, `"schema":1,"schema":1`, 1))
		}, Malformed},
		{"an unknown field", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("colour", "red"))
		}, Malformed},
		{"a missing field", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), func(e map[string]any) { delete(e, "mono_ms") })
		}, Malformed},
		{"a field in capitals", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, raw(strings.Replace(p.write(b.job, NoteAdded, note("x")).Raw, `"author"`, `"Author"`, 1))
		}, Malformed},
		{"an id of another version", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("id", uuid.NewString()))
		}, Malformed},
		{"an id in capitals", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("id", strings.ToUpper(newID())))
		}, Malformed},
		{"device_seq 0", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("device_seq", 0))
		}, Malformed},
		{"a device_seq beyond what a phone counts", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("device_seq", int64(1)<<53), set("prev", strings.Repeat("a", 64)))
		}, Malformed},
		{"device_seq with a fraction", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("device_seq", 1.5))
		}, Malformed},
		{"a first entry that follows something", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("prev", strings.Repeat("a", 64)))
		}, Malformed},
		{"a later entry that follows nothing", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("device_seq", 2))
		}, Malformed},
		{"a time without its offset", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("at", "2026-11-30T10:00:00"))
		}, Malformed},
		{"a time before its clock began", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, note("x"), set("mono_ms", -1))
		}, Malformed},
		{"a body that is no object", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, `"text"`)
		}, Malformed},
		{"a body with an unknown field", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, NoteAdded, `{"text":"x","bold":true}`)
		}, Malformed},
		{"an empty note", func(b *bench, p *phone) (Person, Incoming) { return b.tam, p.write(b.job, NoteAdded, note("  ")) }, Malformed},
		{"an endless note", func(b *bench, p *phone) (Person, Incoming) { return b.tam, p.write(b.job, NoteAdded, note(long)) }, Malformed},
		{"a reading without a mount", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, ReadingTaken, skewBody, set("mount", nil))
		}, Malformed},
		{"a reading of something else", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, ReadingTaken, strings.Replace(skewBody, `"skew"`, `"colour"`, 1))
		}, Malformed},
		{"a reading in another phase", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, ReadingTaken, strings.Replace(skewBody, `"as_found"`, `"planned"`, 1))
		}, Malformed},
		{"a bare number for a reading", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, ReadingTaken, `{"phase":"as_found","antenna":"A","quantity":"skew","reading":6.2,"typed":"6,2"}`)
		}, Malformed},
		{"a word that is none", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, JobHandedIn, strings.Replace(handBody, "no-go", "fine", 1))
		}, Malformed},
		{"a probability above one", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, JobHandedIn, strings.Replace(handBody, "0.01", "1.01", 1))
		}, Malformed},
		{"a hand-in without its list of what is open", func(b *bench, p *phone) (Person, Incoming) {
			return b.tam, p.write(b.job, JobHandedIn, `{"remark":null,"verdicts":[]}`)
		}, Malformed},
		{"a job sent back without a word why", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(b.job, JobSentBack, `{"remark":" ","base_seq":2}`)
		}, Malformed},
		{"a plan with two mounts of one name", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(newID(), JobPlanned,
				`{"site":"s","title":"t","crew":"north","mounts":[{"id":"m","name":"n","sheet":{}},{"id":"m","name":"n","sheet":{}}]}`)
		}, Malformed},
		{"a plan without mounts", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(newID(), JobPlanned, `{"site":"s","title":"t","crew":"north","mounts":[]}`)
		}, Malformed},
		{"a plan for the 31st of November", func(b *bench, p *phone) (Person, Incoming) {
			return b.desk, newPhone(b.desk).write(newID(), JobPlanned,
				`{"site":"s","title":"t","crew":"north","visit_on":"2026-11-31","mounts":[{"id":"m","name":"n","sheet":{}}]}`)
		}, Malformed},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := openBench(t)
			by, in := c.make(b, newPhone(b.tam))
			entries, apart := b.count("SELECT count(*) FROM entries"), b.count("SELECT count(*) FROM quarantine")
			r := b.append(by, in)
			a := r.Answers[0]
			if a.Status != Quarantined || a.Code != c.code || a.Reason == "" || a.Seq != 0 {
				t.Fatalf("answer %+v, want quarantined as %s", a, c.code)
			}
			if n := b.count("SELECT count(*) FROM entries"); n != entries {
				t.Errorf("the log grew by %d", n-entries)
			}
			var kept string
			if err := b.read.QueryRow("SELECT raw FROM quarantine ORDER BY n DESC LIMIT 1").Scan(&kept); err != nil || kept != in.Raw {
				t.Errorf("kept %q (%v), sent %q", kept, err, in.Raw)
			}
			if again := b.append(by, in).Answers[0]; again != a {
				t.Errorf("sent again: %+v, before: %+v", again, a)
			}
			if n := b.count("SELECT count(*) FROM quarantine"); n != apart+1 {
				t.Errorf("%d in quarantine, want %d", n, apart+1)
			}
			b.proved()
		})
	}
}

func raw(text string) Incoming { return Incoming{Raw: text, Hash: HashOf(text)} }

// proved insists that the record holds and that what is derived follows from it.
func (b *bench) proved() {
	b.Helper()
	proof, err := b.Prove(b.Context())
	if err != nil {
		b.Fatal(err)
	}
	for _, fault := range proof.Faults {
		b.Errorf("fault: %s", fault)
	}
	differences, err := b.Rebuild(b.Context(), false)
	if err != nil {
		b.Fatal(err)
	}
	for _, d := range differences {
		b.Errorf("does not follow from the log: %s", d)
	}
}

// One entry that is set apart must not hold up those behind it, or a phone would stand still for ever.
func TestABadEntryDoesNotBlockThoseBehindIt(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	first := p.write(b.job, NoteAdded, note("one"))
	bad := p.write(newID(), NoteAdded, note("unknown job"))
	third := p.write(b.job, NoteAdded, note("three"))
	r := b.append(b.tam, first, bad, third)
	if r.Answers[0].Status != Stored || r.Answers[1].Status != Quarantined || r.Answers[2].Status != Stored {
		t.Fatalf("answers %+v", r.Answers)
	}
	d, err := b.Device(t.Context(), p.device)
	if err != nil || d.ContiguousSeq != 3 || d.ContiguousHash != third.Hash {
		t.Errorf("device %+v (%v), want 3 without a gap", d, err)
	}
	b.proved()
}

// Damage on the way: first the text with a wrong hash, then the right one. The right one counts.
func TestADamagedDeliveryIsMadeGoodByTheNext(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	in := p.write(b.job, NoteAdded, note("one"))
	damaged := Incoming{Raw: strings.Replace(in.Raw, "one", "0ne", 1), Hash: in.Hash}
	if a := b.append(b.tam, damaged).Answers[0]; a.Code != HashMismatch {
		t.Fatalf("answer %+v", a)
	}
	b.stored(b.tam, in)
	if d, err := b.Device(t.Context(), p.device); err != nil || d.ContiguousHash != in.Hash {
		t.Errorf("device %+v (%v), want the hash of what is in the log", d, err)
	}
	b.proved()
}

func TestAGapIsReportedAndThenCleared(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	one, two, three := p.write(b.job, NoteAdded, note("1")), p.write(b.job, NoteAdded, note("2")), p.write(b.job, NoteAdded, note("3"))
	b.stored(b.tam, one, three)
	d, err := b.Device(t.Context(), p.device)
	if err != nil || d.ContiguousSeq != 1 || d.ContiguousHash != one.Hash || d.HighestSeq != 3 {
		t.Fatalf("with a gap: %+v (%v)", d, err)
	}
	proof, err := b.Prove(t.Context())
	if err != nil || len(proof.Gaps) != 1 || proof.Gaps[0].Device != p.device || len(proof.Faults) != 0 {
		t.Fatalf("proof with a gap: %+v (%v)", proof, err)
	}
	b.stored(b.tam, two)
	d, err = b.Device(t.Context(), p.device)
	if err != nil || d.ContiguousSeq != 3 || d.ContiguousHash != three.Hash {
		t.Fatalf("without: %+v (%v)", d, err)
	}
	if proof, err = b.Prove(t.Context()); err != nil || len(proof.Gaps) != 0 {
		t.Fatalf("proof without: %+v (%v)", proof, err)
	}
}

// However the network cuts a device's entries into batches, orders and repeats them, the same is there in the end.
func TestAnyOrderOfDeliveryEndsAlike(t *testing.T) {
	b := openBench(t)
	rapid.Check(t, func(t *rapid.T) {
		job := newID()
		b.issue(job, "north")
		p := newPhone(b.tam)
		n := rapid.IntRange(1, 12).Draw(t, "entries")
		list := make([]Incoming, n)
		for i := range list {
			if rapid.Bool().Draw(t, "reading") {
				list[i] = p.write(job, ReadingTaken, skewBody)
			} else {
				list[i] = p.write(job, NoteAdded, note(fmt.Sprint("note ", i)))
			}
		}
		order := rapid.Permutation(append(append([]Incoming{}, list...), rapid.SliceOfN(rapid.SampledFrom(list), 0, 5).Draw(t, "again")...)).Draw(t, "order")
		for len(order) > 0 {
			cut := rapid.IntRange(1, len(order)).Draw(t, "batch")
			r, err := b.Append(context.Background(), b.tam, 0, order[:cut])
			if err != nil {
				t.Fatal(err)
			}
			for _, a := range r.Answers {
				if a.Status == Quarantined {
					t.Fatalf("set apart: %+v", a)
				}
			}
			order = order[cut:]
		}
		var read []Entry
		log, err := b.JobLog(context.Background(), job, 1<<53)
		if err != nil {
			t.Fatal(err)
		}
		for _, l := range log {
			e, err := ReadEntry(l.Raw)
			if err != nil {
				t.Fatal(err)
			}
			if e.Device == p.device {
				read = append(read, e)
			}
		}
		if len(read) != n {
			t.Fatalf("%d entries are there, %d were written", len(read), n)
		}
		for i, e := range InDeviceOrder(read) {
			if e.DeviceSeq != int64(i+1) {
				t.Fatalf("place %d holds entry %d", i+1, e.DeviceSeq)
			}
		}
		if d, err := b.Device(context.Background(), p.device); err != nil || d.ContiguousSeq != int64(n) || d.ContiguousHash != list[n-1].Hash {
			t.Fatalf("device %+v (%v)", d, err)
		}
	})
	b.proved()
}

func TestDeviceOrderKeepsOtherDevicesInPlace(t *testing.T) {
	a := func(seq int64) Entry { return Entry{Device: "a", DeviceSeq: seq} }
	z := func(seq int64) Entry { return Entry{Device: "z", DeviceSeq: seq} }
	got := InDeviceOrder([]Entry{a(2), z(1), a(1), z(3), a(3), z(2)})
	want := []Entry{a(1), z(1), a(2), z(2), a(3), z(3)}
	if fmt.Sprint(got) != fmt.Sprint(want) {
		t.Errorf("got %v, want %v", got, want)
	}
}

// Batches of several phones, as a second phone carries them: each device's entries by their own numbers, devices in the
// order in which they first appear.
func TestABatchIsTakenInDeviceOrder(t *testing.T) {
	b := openBench(t)
	p, q := newPhone(b.tam), newPhone(b.tam)
	p1, p2 := p.write(b.job, NoteAdded, note("p1")), p.write(b.job, NoteAdded, note("p2"))
	q1, q2 := q.write(b.job, NoteAdded, note("q1")), q.write(b.job, NoteAdded, note("q2"))
	arrivals := make([]arrival, 5)
	for i, in := range []Incoming{q2, p2, q1, raw("no entry"), p1} {
		if err := arrivals[i].read(in); err != nil {
			t.Fatal(err)
		}
	}
	if got := deviceOrder(arrivals); fmt.Sprint(got) != "[2 0 4 1 3]" {
		t.Errorf("taken in the order %v", got)
	}
	r := b.stored(b.tam, q2, p2, q1, p1)
	if a := r.Answers; !(a[2].Seq < a[0].Seq && a[0].Seq < a[3].Seq && a[3].Seq < a[1].Seq) {
		t.Errorf("seq %d %d %d %d", a[0].Seq, a[1].Seq, a[2].Seq, a[3].Seq)
	}
}

// Of two different texts that were set apart under one number, the first stands for it.
func TestTheFirstSetApartKeepsItsNumber(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	first := p.write(newID(), NoteAdded, note("unknown job"))
	p.seq, p.prev = 0, ""
	b.append(b.tam, first, p.write(newID(), NoteAdded, note("another unknown job")))
	if d, err := b.Device(t.Context(), p.device); err != nil || d.ContiguousHash != first.Hash {
		t.Errorf("device %+v (%v), want the hash of the first", d, err)
	}
	// The same where the number is reached later, when the one before it comes.
	q := newPhone(b.tam)
	one := q.write(b.job, NoteAdded, note("one"))
	two := q.write(newID(), NoteAdded, note("unknown job"))
	q.seq, q.prev = 1, one.Hash
	b.append(b.tam, two)
	b.append(b.tam, q.write(newID(), NoteAdded, note("another unknown job")))
	b.stored(b.tam, one)
	if d, err := b.Device(t.Context(), q.device); err != nil || d.ContiguousSeq != 2 || d.ContiguousHash != two.Hash {
		t.Errorf("device %+v (%v), want 2 with the hash of the first", d, err)
	}
	// What is in the log stands before what was set apart.
	r := newPhone(b.tam)
	one, two = r.write(b.job, NoteAdded, note("one")), r.write(b.job, NoteAdded, note("two"))
	b.append(b.tam, Incoming{Raw: strings.Replace(two.Raw, "two", "tw0", 1), Hash: two.Hash})
	b.stored(b.tam, two)
	b.stored(b.tam, one)
	if d, err := b.Device(t.Context(), r.device); err != nil || d.ContiguousSeq != 2 || d.ContiguousHash != two.Hash {
		t.Errorf("device %+v (%v), want 2 with the hash of what is in the log", d, err)
	}
	b.proved()
}

// What was set apart for a job that nobody knew goes into the log when it is sent again and the job is known.
func TestWhatWasSetApartIsLookedAtAnew(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	job := newID()
	in := p.write(job, NoteAdded, note("written before the desk was restored"))
	if a := b.append(b.tam, in).Answers[0]; a.Code != UnknownJob {
		t.Fatalf("answer %+v", a)
	}
	settled := func() bool {
		t.Helper()
		list, err := b.Quarantine(t.Context(), 10)
		if err != nil || len(list) != 1 {
			t.Fatalf("%+v (%v)", list, err)
		}
		return list[0].Settled
	}
	if settled() {
		t.Error("settled too early")
	}
	b.issue(job, "north")
	b.stored(b.tam, in)
	if !settled() {
		t.Error("not settled")
	}
	b.proved()
}

// Within one batch, too, an entry has to follow the one before it.
func TestTheChainIsCheckedWithinABatch(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	one := p.write(b.job, NoteAdded, note("one"))
	p.prev = strings.Repeat("a", 64)
	two := p.write(b.job, NoteAdded, note("follows another one"))
	r := b.append(b.tam, one, two)
	if r.Answers[0].Status != Stored || r.Answers[1].Code != ChainBroken {
		t.Errorf("answers %+v", r.Answers)
	}
	b.proved()
}

// The desk's device stands in every plan that a phone brings. Whoever wrote under its name could take the number of the
// desk's next entry, or the last number there is, and no job could be planned or signed off any more.
func TestNobodyWritesUnderTheDesksDevice(t *testing.T) {
	for _, seq := range []int64{2, 3, maxDeviceSeq} {
		b := openBench(t)
		b.stored(b.tam, newPhone(b.tam).write(b.job, JobHandedIn, handBody))
		var plan string
		if err := b.read.QueryRow("SELECT raw FROM entries WHERE kind = 'job.planned'").Scan(&plan); err != nil {
			t.Fatal(err)
		}
		e, err := ReadEntry(plan)
		if err != nil {
			t.Fatal(err)
		}
		p := newPhone(b.tam)
		bad := p.write(b.job, NoteAdded, note("x"), set("device", e.Device), set("device_seq", seq), set("prev", HashOf(plan)))
		if r := b.append(b.tam, bad); r.Answers[0].Status != Quarantined || r.Answers[0].Code != NotAllowed {
			t.Errorf("number %d: %+v", seq, r.Answers[0])
		}
		b.proved()
		if _, err := b.AppendDesk(t.Context(), b.desk, []DeskEntry{{ID: newID(), Job: b.job, Kind: JobSignedOff,
			Body: Decision{BaseSeq: b.jobNow().StageSeq}}}); err != nil {
			t.Errorf("after number %d the desk cannot sign off: %v", seq, err)
		}
		if proof, err := b.Prove(t.Context()); err != nil || len(proof.Gaps) > 0 {
			t.Errorf("number %d: the desk misses entries: %+v (%v)", seq, proof.Gaps, err)
		}
		b.proved()
	}
}
