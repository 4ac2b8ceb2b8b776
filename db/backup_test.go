package db

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"sync/atomic"
	"testing"
	"time"
)

// A backup that is taken while phones send holds everything that was acknowledged before it began, and is whole.
func TestABackupDuringWritesIsWhole(t *testing.T) {
	b := openBench(t)
	var acked atomic.Int64
	stop, stopped := make(chan struct{}), make(chan error, 1)
	p := newPhone(b.tam)
	go func() {
		for {
			select {
			case <-stop:
				stopped <- nil
				return
			default:
			}
			r, err := b.Append(context.Background(), b.tam, 0, []Incoming{p.write(b.job, NoteAdded, note(strings.Repeat("x", 400)))})
			if err != nil {
				stopped <- err
				return
			}
			acked.Store(r.Head.Seq)
		}
	}()
	for acked.Load() < 50 {
		time.Sleep(time.Millisecond)
	}
	folder := t.TempDir()
	for i := range 5 {
		before := acked.Load()
		to := filepath.Join(folder, fmt.Sprint("backup", i, ".db"))
		proof, err := b.Backup(t.Context(), to)
		if err != nil {
			t.Fatal(err)
		}
		if proof.Head.Seq < before {
			t.Errorf("backup %d ends at %d, %d was acknowledged", i, proof.Head.Seq, before)
		}
		again, err := ProveFile(t.Context(), to)
		if err != nil || again.Head != proof.Head || len(again.Faults) != 0 {
			t.Errorf("backup %d: %+v (%v)", i, again, err)
		}
	}
	close(stop)
	if err := <-stopped; err != nil {
		t.Fatal(err)
	}
	names, err := os.ReadDir(folder)
	if err != nil || len(names) != 5 {
		t.Errorf("%v (%v): there is to be nothing but the backups", names, err)
	}
	b.proved()
}

func TestABackupReplacesNothing(t *testing.T) {
	b := openBench(t)
	to := filepath.Join(t.TempDir(), "backup.db")
	if err := os.WriteFile(to, []byte("something"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := b.Backup(t.Context(), to); err == nil {
		t.Fatal("it replaced a file")
	}
	if text, _ := os.ReadFile(to); string(text) != "something" {
		t.Error("the file is gone")
	}
}

// Yesterday's backup comes back: phones see the higher epoch, send again, and everything is there.
func TestARestoredServerIsToldAgain(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	old := []Incoming{p.write(b.job, ReadingTaken, skewBody), p.write(b.job, NoteAdded, note("before"))}
	b.stored(b.tam, old...)
	token, _, err := b.Begin(t.Context(), b.tam)
	if err != nil {
		t.Fatal(err)
	}
	backup := filepath.Join(t.TempDir(), "backup.db")
	if _, err := b.Backup(t.Context(), backup); err != nil {
		t.Fatal(err)
	}
	b.step(p, "hand in")
	b.step(p, "sign off") // the desk's own entries after the backup are lost with it
	late := []Incoming{p.write(b.job, NoteAdded, note("after"))}
	lost := b.count("SELECT count(*) FROM entries")
	handed := b.phoneLog(p.device)
	before, err := b.State(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	desk, err := metaValue(t.Context(), b.read, "desk_device")
	if err != nil {
		t.Fatal(err)
	}
	b.Close()

	now := b.clock.now().Add(time.Hour)
	result, err := Restore(t.Context(), backup, b.path, now)
	if err != nil {
		t.Fatal(err)
	}
	if result.Epoch != before.Epoch+1 || result.Kept == "" || result.Proof.Head.Seq >= before.Head.Seq {
		t.Errorf("restored %+v", result)
	}
	if kept, err := ProveFile(t.Context(), result.Kept); err != nil || kept.Entries != int64(lost) {
		t.Errorf("what was there: %+v (%v), want %d entries", kept, err, lost)
	}
	b.open()
	state, err := b.State(t.Context())
	if err != nil || state.Instance != before.Instance || state.Epoch != before.Epoch+1 || state.Head != result.Proof.Head {
		t.Errorf("state %+v (%v)", state, err)
	}
	if now, err := metaValue(t.Context(), b.read, "desk_device"); err != nil || now == desk {
		t.Errorf("the desk goes on with the chain of %s (%v), whose numbers after the backup are known elsewhere", now, err)
	}
	if _, _, err := b.Session(t.Context(), token); !errors.Is(err, ErrNoSession) {
		t.Errorf("a session outlived the restore: %v", err)
	}
	if d, err := b.Device(t.Context(), p.device); err != nil || d.ContiguousSeq != 2 {
		t.Errorf("device %+v (%v)", d, err)
	}
	// The phone sends all it has; what the backup has is known.
	r := b.append(b.tam, append(append(append([]Incoming{}, old...), handed...), late...)...)
	for i, a := range r.Answers {
		if want := map[bool]Status{true: Duplicate, false: Stored}[i < 2]; a.Status != want {
			t.Errorf("entry %d is %s (%s), want %s", i, a.Status, a.Reason, want)
		}
	}
	if j := b.jobNow(); j.Stage != StageHandedIn {
		t.Errorf("the job is %s", j.Stage)
	}
	b.step(p, "sign off") // the desk decides again, on a chain of its own
	b.proved()
	if again, err := Restore(t.Context(), backup, b.path+"-other", now); err != nil || again.Epoch != 2 || again.Kept != "" {
		t.Errorf("to a new place: %+v (%v)", again, err)
	}
}

// phoneLog is what a phone has kept of its own hand-in, as a test can get it back.
func (b *bench) phoneLog(device string) []Incoming {
	b.Helper()
	rows, err := b.read.QueryContext(b.Context(), "SELECT raw FROM entries WHERE device = ? AND kind = 'job.handed_in' ORDER BY seq", device)
	if err != nil {
		b.Fatal(err)
	}
	texts, err := collect(rows, func(s *string) []any { return []any{s} })
	if err != nil {
		b.Fatal(err)
	}
	var list []Incoming
	for _, text := range texts {
		list = append(list, raw(text))
	}
	return list
}

func TestADamagedBackupIsNotRestored(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	for range 60 {
		b.stored(b.tam, p.write(b.job, NoteAdded, note(strings.Repeat("x", 700))))
	}
	folder := t.TempDir()
	good := filepath.Join(folder, "backup.db")
	if _, err := b.Backup(t.Context(), good); err != nil {
		t.Fatal(err)
	}
	whole, err := os.ReadFile(good)
	if err != nil {
		t.Fatal(err)
	}
	b.Close()
	before, err := os.ReadFile(b.path)
	if err != nil {
		t.Fatal(err)
	}
	for name, bytes := range map[string][]byte{
		"cut short":    whole[:len(whole)/2],
		"empty":        {},
		"no database":  []byte(strings.Repeat("not a database ", 1000)),
		"text changed": []byte(strings.ReplaceAll(string(whole), "xxxxxxxx", "yyyyyyyy")),
	} {
		t.Run(name, func(t *testing.T) {
			bad := filepath.Join(t.TempDir(), "bad.db")
			if err := os.WriteFile(bad, bytes, 0o600); err != nil {
				t.Fatal(err)
			}
			if result, err := Restore(t.Context(), bad, b.path, time.Now()); err == nil {
				t.Fatalf("it was restored: %+v", result)
			}
			if after, err := os.ReadFile(b.path); err != nil || string(after) != string(before) {
				t.Error("the database that was there changed")
			}
		})
	}
	if _, err := Restore(t.Context(), filepath.Join(folder, "none.db"), b.path, time.Now()); err == nil {
		t.Error("a file that is not there was restored")
	}
}

// A full disk refuses loudly, stores nothing, and is forgotten when there is room again, without a restart.
func TestAFullDisk(t *testing.T) {
	b := openBench(t)
	var pages int
	if err := b.write.QueryRow("PRAGMA page_count").Scan(&pages); err != nil {
		t.Fatal(err)
	}
	room := func(n int) {
		t.Helper()
		var set int
		if err := b.write.QueryRow(fmt.Sprint("PRAGMA max_page_count = ", n)).Scan(&set); err != nil || set != n {
			t.Fatalf("room for %d pages (%v)", set, err)
		}
	}
	room(pages + 2)
	p := newPhone(b.tam)
	batch := []Incoming{p.write(b.job, NoteAdded, note(strings.Repeat("x", 3900))), p.write(b.job, NoteAdded, note(strings.Repeat("y", 3900))),
		p.write(b.job, NoteAdded, note(strings.Repeat("z", 3900))), p.write(b.job, NoteAdded, note(strings.Repeat("w", 3900)))}
	before := b.dump()
	_, err := b.Append(t.Context(), b.tam, 0, batch)
	if !IsFull(err) {
		t.Fatalf("got %v, want one that IsFull knows", err)
	}
	if b.dump() != before {
		t.Error("a part of it is there")
	}
	room(1 << 20)
	b.stored(b.tam, batch...)
	b.proved()
}
