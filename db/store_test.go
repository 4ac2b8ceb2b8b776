package db

import (
	"database/sql"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"fmt"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"testing/fstest"
	"time"

	"github.com/google/uuid"
)

// testClock is a clock that tests turn.
type testClock struct {
	mu sync.Mutex
	at time.Time
}

func newClock() *testClock {
	return &testClock{at: time.Date(2026, 11, 30, 9, 0, 0, 0, time.UTC)}
}

func (c *testClock) now() time.Time {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.at
}

func (c *testClock) pass(d time.Duration) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.at = c.at.Add(d)
}

// bench is a store with people in it and one issued job.
type bench struct {
	testing.TB
	*Store
	clock            *testClock
	path             string
	desk, tam, other Person
	job              string
}

// openBench opens a fresh database with a supervisor, a climber of each of two crews, and a job issued to the first.
func openBench(t testing.TB) *bench {
	t.Helper()
	b := &bench{TB: t, clock: newClock(), path: filepath.Join(t.TempDir(), "crossplumb.db")}
	b.open()
	b.desk = b.person("Ilse", Supervisor, "")
	b.tam = b.person("Tam", Climber, "north")
	b.other = b.person("Odd", Climber, "south")
	b.job = newID()
	b.issue(b.job, "north")
	return b
}

func (b *bench) open() {
	b.Helper()
	s, err := Open(b.Context(), Config{Path: b.path, Now: b.clock.now, App: "test"})
	if err != nil {
		b.Fatal(err)
	}
	b.Store = s
	b.Cleanup(func() { s.Close() })
}

func (b *bench) person(name, role, crew string) Person {
	b.Helper()
	p, err := b.AddPerson(b.Context(), name, role, crew, "x")
	if err != nil {
		b.Fatal(err)
	}
	return p
}

func (b *bench) issue(job, crew string) {
	b.Helper()
	plan := Plan{Site: "Site", Title: "Title", Crew: crew, Mounts: []PlannedMount{{ID: "m1", Name: "north", Sheet: jsontext.Value(`{"sheet":1}`)}}}
	if _, err := b.AppendDesk(b.Context(), b.desk, []DeskEntry{
		{ID: newID(), Job: job, Kind: JobPlanned, Body: plan},
		{ID: newID(), Job: job, Kind: JobIssued, Body: struct{}{}},
	}); err != nil {
		b.Fatal(err)
	}
}

func newID() string { return uuid.Must(uuid.NewV7()).String() }

// phone writes entries as a device does.
type phone struct {
	device string
	author string
	seq    int64
	prev   string
}

func newPhone(author Person) *phone { return &phone{device: uuid.NewString(), author: author.ID} }

// change is what a test does to an entry's fields before it is written.
type change func(map[string]any)

func set(field string, value any) change { return func(e map[string]any) { e[field] = value } }

func (p *phone) write(job, kind, body string, changes ...change) Incoming {
	p.seq++
	entry := map[string]any{
		"id": newID(), "device": p.device, "device_seq": p.seq, "prev": p.prev, "job": job, "mount": nil, "kind": kind,
		"schema": 1, "at": "2026-11-30T10:00:00+01:00", "mono_ms": 1234.5, "author": p.author, "app": "test",
		"body": jsontext.Value(body),
	}
	switch kind {
	case ReadingTaken, BoltMoved:
		entry["mount"] = "m1"
	}
	for _, c := range changes {
		c(entry)
	}
	raw, err := json.Marshal(entry, json.Deterministic(true))
	if err != nil {
		panic(err)
	}
	p.prev = HashOf(string(raw))
	return Incoming{Raw: string(raw), Hash: p.prev}
}

const (
	skewBody   = `{"phase":"as_found","antenna":"A","quantity":"skew","reading":{"value":6.2,"unit":"deg","u":0.3,"method":"level"},"typed":"6,2"}`
	handBody   = `{"remark":null,"open":[],"verdicts":[{"mount":"m1","phase":"as_found","word":"no-go","probability":0.01,"method":{"version":"1"}}]}`
	cautionOne = `{"caution":"height","version":1,"name":"Tam"}`
)

func note(text string) string { return fmt.Sprintf(`{"text":%q}`, text) }

func (b *bench) append(by Person, batch ...Incoming) Receipt {
	b.Helper()
	r, err := b.Append(b.Context(), by, 0, batch)
	if err != nil {
		b.Fatal(err)
	}
	return r
}

// stored appends and insists that all of it went into the log.
func (b *bench) stored(by Person, batch ...Incoming) Receipt {
	b.Helper()
	r := b.append(by, batch...)
	for i, a := range r.Answers {
		if a.Status != Stored {
			b.Fatalf("entry %d is %s (%s: %s), want stored", i, a.Status, a.Code, a.Reason)
		}
	}
	return r
}

func (b *bench) count(query string, args ...any) int {
	b.Helper()
	var n int
	if err := b.read.QueryRowContext(b.Context(), query, args...).Scan(&n); err != nil {
		b.Fatal(err)
	}
	return n
}

func (b *bench) jobNow() Job {
	b.Helper()
	j, err := b.Job(b.Context(), b.desk, b.job)
	if err != nil {
		b.Fatal(err)
	}
	return j
}

func TestStartRefusesAConnectionThatCouldLoseEntries(t *testing.T) {
	with := func(from url.Values, key, value string) url.Values {
		changed := url.Values{}
		for k, v := range from {
			changed[k] = v
		}
		changed.Set(key, value)
		return changed
	}
	for _, c := range []struct {
		name           string
		writer, reader url.Values
		want           string
	}{
		{"synchronous=NORMAL, the driver's own default", with(writerOptions, "_synchronous", "NORMAL"), readerOptions, "synchronous=1"},
		{"foreign keys off", with(writerOptions, "_foreign_keys", "off"), readerOptions, "foreign_keys=0"},
		{"no WAL", with(writerOptions, "_journal_mode", "DELETE"), with(readerOptions, "_journal_mode", "DELETE"), "journal_mode=delete"},
		{"readers that can write", writerOptions, with(readerOptions, "_query_only", "0"), "query_only=0"},
		{"no patience with another process", with(writerOptions, "_busy_timeout", "0"), readerOptions, "busy_timeout=0"},
	} {
		t.Run(c.name, func(t *testing.T) {
			s, err := open(t.Context(), Config{Path: filepath.Join(t.TempDir(), "x.db")}, c.writer, c.reader)
			if err == nil {
				s.Close()
				t.Fatal("it opened")
			}
			if !strings.Contains(err.Error(), c.want) {
				t.Errorf("it says %q, want %q in it", err, c.want)
			}
		})
	}
}

func TestStartRefusesOldSQLite(t *testing.T) {
	for version, fine := range map[string]bool{
		"3.51.3": true, "3.51.4": true, "3.52.0": true, "4.0.0": true, "3.54.1": true,
		"3.51.2": false, "3.50.9": false, "3.7.0": false, "2.99.99": false, "new": false, "": false,
	} {
		if err := checkVersion(version); (err == nil) != fine {
			t.Errorf("version %q: %v", version, err)
		}
	}
}

func TestStartRefusesADamagedFile(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	for range 200 { // enough pages that one in the middle is of some table
		b.stored(b.tam, p.write(b.job, NoteAdded, note(strings.Repeat("x", 500))))
	}
	b.Close()
	file, err := os.ReadFile(b.path)
	if err != nil {
		t.Fatal(err)
	}
	for i := len(file) / 2; i < len(file)/2+8192; i++ {
		file[i] = 0xA5
	}
	if err := os.WriteFile(b.path, file, 0o600); err != nil {
		t.Fatal(err)
	}
	if s, err := Open(t.Context(), Config{Path: b.path}); err == nil {
		s.Close()
		t.Fatal("it opened a file with 8 KiB overwritten")
	}
}

func TestStartRefusesANewerSchema(t *testing.T) {
	b := openBench(t)
	if _, err := b.write.Exec("INSERT INTO migrations (number, name, sum, applied_ms) VALUES (9999, 'x', 'x', 0)"); err != nil {
		t.Fatal(err)
	}
	b.Close()
	if _, err := Open(t.Context(), Config{Path: b.path}); !errors.Is(err, ErrNewer) {
		t.Fatalf("got %v, want ErrNewer", err)
	}
}

func TestMigrations(t *testing.T) {
	pool := func(t *testing.T) *sql.DB {
		p, err := sql.Open("sqlite3", dsn(filepath.Join(t.TempDir(), "x.db"), writerOptions))
		if err != nil {
			t.Fatal(err)
		}
		p.SetMaxOpenConns(1)
		t.Cleanup(func() { p.Close() })
		return p
	}
	file := func(text string) *fstest.MapFile { return &fstest.MapFile{Data: []byte(text)} }
	t.Run("each once, in order", func(t *testing.T) {
		p := pool(t)
		files := fstest.MapFS{"migrations/0001_a.sql": file("CREATE TABLE a (x INTEGER) STRICT; INSERT INTO a VALUES (1);")}
		for range 2 {
			if err := migrate(t.Context(), p, files, 1); err != nil {
				t.Fatal(err)
			}
		}
		files["migrations/0002_b.sql"] = file("INSERT INTO a VALUES (2);")
		if err := migrate(t.Context(), p, files, 1); err != nil {
			t.Fatal(err)
		}
		var n int
		if err := p.QueryRow("SELECT count(*) FROM a").Scan(&n); err != nil || n != 2 {
			t.Fatalf("%d rows (%v), want 2", n, err)
		}
	})
	t.Run("an edited one is refused", func(t *testing.T) {
		p := pool(t)
		if err := migrate(t.Context(), p, fstest.MapFS{"migrations/0001_a.sql": file("CREATE TABLE a (x INTEGER) STRICT;")}, 1); err != nil {
			t.Fatal(err)
		}
		if err := migrate(t.Context(), p, fstest.MapFS{"migrations/0001_a.sql": file("CREATE TABLE a (y INTEGER) STRICT;")}, 1); err == nil {
			t.Fatal("it was taken")
		}
	})
	t.Run("a failing one leaves nothing of itself", func(t *testing.T) {
		p := pool(t)
		err := migrate(t.Context(), p, fstest.MapFS{"migrations/0001_a.sql": file("CREATE TABLE a (x INTEGER) STRICT; CREATE TABLE a (x INTEGER) STRICT;")}, 1)
		if err == nil {
			t.Fatal("it was taken")
		}
		var n int
		if err := p.QueryRow("SELECT count(*) FROM sqlite_schema WHERE name = 'a'").Scan(&n); err != nil || n != 0 {
			t.Fatalf("table a is there (%d, %v)", n, err)
		}
	})
	t.Run("a gap in the numbers is refused", func(t *testing.T) {
		if _, err := readMigrations(fstest.MapFS{"migrations/0002_a.sql": file("")}); err == nil {
			t.Fatal("it was taken")
		}
	})
}

func TestTheLogOnlyGrows(t *testing.T) {
	b := openBench(t)
	p := newPhone(b.tam)
	b.stored(b.tam, p.write(b.job, NoteAdded, note("one")))
	b.append(b.tam, p.write(newID(), NoteAdded, note("no such job")))
	if _, _, err := b.Invite(t.Context(), "", Supervisor, ""); err != nil { // a line of audit
		t.Fatal(err)
	}
	for _, statement := range []string{
		"UPDATE entries SET raw = '{}'", "DELETE FROM entries", "UPDATE quarantine SET reason = ''", "DELETE FROM quarantine",
		"UPDATE audit SET action = ''", "DELETE FROM audit",
		"INSERT OR REPLACE INTO entries SELECT * FROM entries WHERE seq = 1",
		"INSERT OR REPLACE INTO quarantine SELECT * FROM quarantine WHERE n = 1",
	} {
		if _, err := b.write.Exec(statement); err == nil || !strings.Contains(err.Error(), "append-only") {
			t.Errorf("%s: %v", statement, err)
		}
	}
}

func TestTablesAreStrict(t *testing.T) {
	b := openBench(t)
	rows, err := b.read.Query("SELECT name FROM pragma_table_list WHERE schema = 'main' AND type = 'table' AND strict = 0 AND name NOT LIKE 'sqlite_%'")
	if err != nil {
		t.Fatal(err)
	}
	loose, err := collect(rows, func(s *string) []any { return []any{s} })
	if err != nil {
		t.Fatal(err)
	}
	if len(loose) > 0 {
		t.Errorf("these tables take any type: %v", loose)
	}
	if _, err := b.write.Exec("INSERT INTO sign_in_attempts (name_key, failed, last_ms) VALUES ('a', 'three', 0)"); err == nil {
		t.Error("text went into a column of whole numbers")
	}
}

func TestReadersCannotWrite(t *testing.T) {
	b := openBench(t)
	for range readers * 2 {
		if _, err := b.read.Exec("DELETE FROM sessions"); err == nil {
			t.Fatal("a reading connection wrote")
		}
	}
}

func TestANewDatabaseHasANewName(t *testing.T) {
	a, b := openBench(t), openBench(t)
	first, err := a.State(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	second, err := b.State(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if first.Instance == second.Instance || first.Epoch != 1 {
		t.Errorf("instances %q and %q, epoch %d", first.Instance, second.Instance, first.Epoch)
	}
	a.Close()
	a.open()
	again, err := a.State(t.Context())
	if err != nil || again != first {
		t.Errorf("after opening again: %+v (%v), before: %+v", again, err, first)
	}
}
