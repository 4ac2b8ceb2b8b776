package db

import (
	"fmt"
	"strings"
	"testing"
)

// The log beside the yardstick: the same texts put into one plain table with the same durability and one unique index,
// 50 a transaction. What the log does more is hashes, chains, checks and what is derived.
func BenchmarkLogInBatchesOf50(b *testing.B) {
	s := openBench(b)
	p := newPhone(s.tam)
	batch := make([]Incoming, 50)
	b.ResetTimer()
	n := 0
	for b.Loop() {
		b.StopTimer()
		for i := range batch {
			batch[i] = p.write(s.job, ReadingTaken, skewBody)
		}
		b.StartTimer()
		s.stored(s.tam, batch...)
		n += len(batch)
	}
	b.ReportMetric(float64(n)/b.Elapsed().Seconds(), "entries/s")
}

func BenchmarkPlainInsertsInBatchesOf50(b *testing.B) {
	s := openBench(b)
	if _, err := s.write.Exec("CREATE TABLE plain (seq INTEGER PRIMARY KEY, id TEXT NOT NULL UNIQUE, raw TEXT NOT NULL) STRICT"); err != nil {
		b.Fatal(err)
	}
	p := newPhone(s.tam)
	text := p.write(s.job, ReadingTaken, skewBody).Raw
	n := 0
	for b.Loop() {
		tx, err := s.write.Begin()
		if err != nil {
			b.Fatal(err)
		}
		insert, err := tx.Prepare("INSERT INTO plain (id, raw) VALUES (?, ?)")
		if err != nil {
			b.Fatal(err)
		}
		for range 50 {
			n++
			if _, err := insert.Exec(fmt.Sprintf("%036d", n), text); err != nil {
				b.Fatal(err)
			}
		}
		if err := tx.Commit(); err != nil {
			b.Fatal(err)
		}
	}
	b.ReportMetric(float64(n)/b.Elapsed().Seconds(), "entries/s")
}

func BenchmarkReadEntry(b *testing.B) {
	raw := newPhone(Person{ID: strings.Repeat("a", 36)}).write(newID(), ReadingTaken, skewBody).Raw
	b.SetBytes(int64(len(raw)))
	for b.Loop() {
		if _, err := ReadEntry(raw); err != nil {
			b.Fatal(err)
		}
	}
}

// What a stranger may send: the reader of entries never panics, and what it takes it takes again.
func FuzzReadEntry(f *testing.F) {
	p := newPhone(Person{ID: newID()})
	for kind, body := range map[string]string{NoteAdded: note("x"), ReadingTaken: skewBody, JobHandedIn: handBody, CautionConfirmed: cautionOne,
		JobPlanned: `{"site":"s","title":"t","crew":"c","mounts":[{"id":"m","name":"n","sheet":{}}]}`, "job.deleted": "{}"} {
		f.Add(p.write(newID(), kind, body).Raw)
	}
	f.Add(`{"id":null}`)
	f.Add(`{"body":{"body":{}}}`)
	f.Fuzz(func(t *testing.T, raw string) {
		e, err := ReadEntry(raw)
		if err != nil {
			if _, is := err.(*Refusal); !is {
				t.Fatalf("an error of another kind: %v", err)
			}
			return
		}
		again, err := ReadEntry(raw)
		if err != nil || again.ID != e.ID || !IsID(e.ID) || e.DeviceSeq < 1 || len(e.Body) == 0 {
			t.Fatalf("%+v and %+v (%v)", e, again, err)
		}
		if _, err := e.ReadBody(); err != nil {
			t.Fatalf("the body of an entry that was read: %v", err)
		}
	})
}
