package db

import (
	"bufio"
	"context"
	"database/sql"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// The child of these tests is this test program itself, started with the folder in its environment.
const (
	childPath = "CROSSPLUMB_TEST_CHILD_PATH"
	childJob  = "CROSSPLUMB_TEST_CHILD_JOB"
	childWho  = "CROSSPLUMB_TEST_CHILD_WHO"
	childDies = "CROSSPLUMB_TEST_CHILD_DIES"
)

func TestMain(m *testing.M) {
	if path := os.Getenv(childPath); path != "" {
		if err := child(path); err != nil {
			fmt.Println("failed", err)
			os.Exit(1)
		}
		return
	}
	os.Exit(m.Run())
}

// child writes batches until it is killed, and says on its output what it is about to write and what was acknowledged.
func child(path string) error {
	ctx := context.Background()
	s, err := Open(ctx, Config{Path: path, App: "child"})
	if err != nil {
		return err
	}
	by, err := personByID(ctx, s.read, os.Getenv(childWho))
	if err != nil {
		return err
	}
	p := newPhone(by)
	out := bufio.NewWriter(os.Stdout)
	say := func(what string, batch []Incoming) {
		for _, in := range batch {
			fmt.Fprintln(out, what, in.Hash)
		}
		out.Flush()
	}
	dies := os.Getenv(childDies)
	for n := 0; ; n++ {
		batch := make([]Incoming, 1+n%5)
		for i := range batch {
			batch[i] = p.write(os.Getenv(childJob), NoteAdded, note(fmt.Sprintf("%d %d %s", n, i, strings.Repeat("x", n%300))))
		}
		say("tries", batch)
		if n == 3 {
			switch dies {
			case "before commit":
				// All is written, the commit is not: as if the power went at that moment.
				err := s.inTx(ctx, func(tx *sql.Tx) error {
					w, err := s.newWriter(ctx, tx, by, 0)
					if err != nil {
						return err
					}
					for _, in := range batch {
						var a arrival
						if err := a.read(in); err != nil {
							return err
						}
						if _, err := w.take(a); err != nil {
							return err
						}
					}
					if err := w.flush(); err != nil {
						return err
					}
					return syscall.Kill(os.Getpid(), syscall.SIGKILL)
				})
				return fmt.Errorf("it lives: %v", err)
			case "after commit":
				if _, err := s.Append(ctx, by, 0, batch); err != nil {
					return err
				}
				return syscall.Kill(os.Getpid(), syscall.SIGKILL)
			}
		}
		if _, err := s.Append(ctx, by, 0, batch); err != nil {
			return err
		}
		say("acked", batch)
	}
}

// killed runs a child, kills it a while after at least enough entries were acknowledged unless it dies by itself, and
// returns what it tried and what it was told is stored.
func (b *bench) killed(dies string, enough int, after time.Duration) (tried, acked []string) {
	b.Helper()
	self, err := os.Executable()
	if err != nil {
		b.Fatal(err)
	}
	cmd := exec.Command(self)
	cmd.Env = append(os.Environ(), childPath+"="+b.path, childJob+"="+b.job, childWho+"="+b.tam.ID, childDies+"="+dies)
	cmd.Stderr = os.Stderr
	pipe, err := cmd.StdoutPipe()
	if err != nil {
		b.Fatal(err)
	}
	if err := cmd.Start(); err != nil {
		b.Fatal(err)
	}
	first := make(chan struct{})
	if dies == "" {
		go func() {
			<-first // it has begun to write
			time.Sleep(after)
			cmd.Process.Signal(syscall.SIGKILL)
		}()
	}
	for lines := bufio.NewScanner(pipe); lines.Scan(); {
		what, hash, _ := strings.Cut(lines.Text(), " ")
		switch what {
		case "tries":
			tried = append(tried, hash)
		case "acked":
			if acked = append(acked, hash); len(acked) == enough {
				close(first)
			}
		default:
			b.Errorf("the child says: %s", lines.Text())
		}
	}
	if err := cmd.Wait(); err == nil || !strings.Contains(err.Error(), "killed") {
		b.Fatalf("the child was to be killed, it ended with: %v", err)
	}
	return tried, acked
}

// checkSet is the checker: everything acknowledged is there, nothing that was never tried, nothing twice, and each
// device's entries in their order.
func (b *bench) checkSet(tried, acked []string) {
	b.Helper()
	attempted := map[string]bool{}
	for _, h := range tried {
		attempted[h] = true
	}
	rows, err := b.read.QueryContext(b.Context(), "SELECT hash FROM entries WHERE kind = 'note.added' ORDER BY seq")
	if err != nil {
		b.Fatal(err)
	}
	list, err := collect(rows, func(s *string) []any { return []any{s} })
	if err != nil {
		b.Fatal(err)
	}
	present := map[string]int{}
	for _, h := range list {
		present[h]++
		if !attempted[h] {
			b.Errorf("%s is there and nobody wrote it", h)
		}
		if present[h] > 1 {
			b.Errorf("%s is there %d times", h, present[h])
		}
	}
	lost := 0
	for _, h := range acked {
		if present[h] == 0 {
			lost++
		}
	}
	if lost > 0 {
		b.Errorf("%d of %d acknowledged entries are lost", lost, len(acked))
	}
	if n := b.count(`SELECT count(*) FROM entries e JOIN entries f ON f.device = e.device AND f.device_seq = e.device_seq + 1 AND f.seq < e.seq`); n != 0 {
		b.Errorf("%d entries stand before the one that they follow", n)
	}
	b.proved()
}

// TestKilledAtRandom is the short version of many rounds: a writing process gets SIGKILL at a random moment, and what
// it was told is stored must be there, whole batches, each once.
func TestKilledAtRandom(t *testing.T) {
	rounds := 12
	if testing.Short() {
		rounds = 3
	}
	b := openBench(t)
	b.Close()
	random := rand.New(rand.NewPCG(7, 7))
	var tried, acked []string
	for range rounds {
		more, told := b.killed("", 1, time.Duration(random.IntN(60_000))*time.Microsecond)
		tried, acked = append(tried, more...), append(acked, told...)
	}
	b.open()
	b.checkSet(tried, acked)
	if len(acked) < rounds {
		t.Errorf("only %d entries were acknowledged in %d rounds: the test shows too little", len(acked), rounds)
	}
	t.Logf("%d rounds, %d entries tried, %d acknowledged, none lost", rounds, len(tried), len(acked))
}

func TestKilledBetweenInsertAndCommit(t *testing.T) {
	b := openBench(t)
	b.Close()
	tried, acked := b.killed("before commit", 0, 0)
	b.open()
	b.checkSet(tried, acked)
	if n := b.count("SELECT count(*) FROM entries WHERE kind = 'note.added'"); n != len(acked) || len(tried) != len(acked)+4 {
		t.Errorf("%d are there, %d acknowledged, %d tried: the batch that was not committed is to be absent", n, len(acked), len(tried))
	}
}

func TestKilledAfterCommitBeforeTheAnswer(t *testing.T) {
	b := openBench(t)
	b.Close()
	tried, acked := b.killed("after commit", 0, 0)
	b.open()
	b.checkSet(tried, acked)
	if n := b.count("SELECT count(*) FROM entries WHERE kind = 'note.added'"); n != len(tried) || len(tried) != len(acked)+4 {
		t.Fatalf("%d are there, %d tried, %d acknowledged: the committed batch is to be there", n, len(tried), len(acked))
	}
	// The phone did not hear of it and sends it again.
	rows, err := b.read.QueryContext(t.Context(), "SELECT raw FROM entries WHERE kind = 'note.added' ORDER BY seq DESC LIMIT 4")
	if err != nil {
		t.Fatal(err)
	}
	texts, err := collect(rows, func(s *string) []any { return []any{s} })
	if err != nil {
		t.Fatal(err)
	}
	var batch []Incoming
	for _, text := range texts {
		batch = append(batch, raw(text))
	}
	for _, a := range b.append(b.tam, batch...).Answers {
		if a.Status != Duplicate {
			t.Errorf("answer %+v, want duplicate", a)
		}
	}
	b.checkSet(tried, tried)
}

// TestTornWAL cuts and flips the tail of the write-ahead log, as a power cut may leave it: the database opens whole
// without what was torn, or refuses; it never opens with half a transaction.
func TestTornWAL(t *testing.T) {
	b := openBench(t)
	b.Close()
	if _, acked := b.killed("", 40, 0); len(acked) == 0 {
		t.Fatal("nothing was written")
	}
	wal, err := os.ReadFile(b.path + "-wal")
	if err != nil || len(wal) < 40_000 {
		t.Fatalf("a WAL of %d bytes (%v): there is nothing to tear", len(wal), err)
	}
	file, err := os.ReadFile(b.path)
	if err != nil {
		t.Fatal(err)
	}
	whole := -1
	for _, c := range []struct {
		name string
		tear func([]byte) []byte
	}{
		{"untouched", func(w []byte) []byte { return w }},
		{"cut in the middle of a frame", func(w []byte) []byte { return w[:len(w)-3000] }},
		{"cut in half", func(w []byte) []byte { return w[:len(w)/2] }},
		{"a bit flipped near the end", func(w []byte) []byte { w[len(w)-2000] ^= 1; return w }},
		{"a bit flipped in the middle", func(w []byte) []byte { w[len(w)/2] ^= 1; return w }},
		{"the header gone", func(w []byte) []byte { return append(make([]byte, 32), w[32:]...) }},
		{"all gone", func(w []byte) []byte { return nil }},
	} {
		t.Run(c.name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "crossplumb.db")
			for name, bytes := range map[string][]byte{path: file, path + "-wal": c.tear(append([]byte{}, wal...))} {
				if err := os.WriteFile(name, bytes, 0o600); err != nil {
					t.Fatal(err)
				}
			}
			torn := &bench{TB: t, clock: newClock(), path: path, desk: b.desk, tam: b.tam, job: b.job}
			s, err := Open(t.Context(), Config{Path: path})
			if err != nil {
				t.Logf("refused: %v", err)
				return
			}
			torn.Store = s
			t.Cleanup(func() { s.Close() })
			torn.proved()
			n := torn.count("SELECT count(*) FROM entries")
			if whole < 0 {
				whole = n
			}
			if n > whole {
				t.Errorf("%d entries out of a torn log, %d out of the whole one", n, whole)
			}
			if c.name == "untouched" && n < 10 {
				t.Errorf("only %d entries: the test shows too little", n)
			}
		})
	}
}
