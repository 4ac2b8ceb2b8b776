package db

import (
	"context"
	"database/sql"
	"embed"
	"errors"
	"fmt"
	"net/url"
	"path/filepath"
	"time"

	_ "github.com/mattn/go-sqlite3" // the driver "sqlite3"
)

// Config names everything that a Store depends on.
type Config struct {
	// Path of the database file; its folder must exist and lie on a local disk (WAL needs shared memory).
	Path string
	// Now is the clock; nil is time.Now.
	Now func() time.Time
	// App is written into entries that are made on the server.
	App string
}

// Store is the open database.
type Store struct {
	path  string
	write *sql.DB
	read  *sql.DB
	now   func() time.Time
	app   string
}

// readers is how many reads may run beside each other. Each holds a snapshot and a page cache (2 MB by default), and a
// page of one job takes well under a millisecond, so a few are enough.
const readers = 4

//go:embed migrations/*.sql
var migrations embed.FS

// Open opens or creates the database, brings its schema up to date, and checks that it is what this program relies on.
// It fails rather than run on a connection that could lose an acknowledged entry.
func Open(ctx context.Context, cfg Config) (*Store, error) {
	return open(ctx, cfg, writerOptions, readerOptions)
}

// The driver sends these to every connection it opens; that is why they stand in the name and not in an Exec.
// _txlock=immediate: a transaction that reads first and writes later fails at once when another wrote in between, and
// no timeout helps against that. _recursive_triggers=1: else INSERT OR REPLACE would go past the trigger that keeps
// entries from being removed.
var (
	writerOptions = url.Values{
		"_journal_mode": {"WAL"}, "_synchronous": {"FULL"}, "_busy_timeout": {"5000"},
		"_foreign_keys": {"on"}, "_txlock": {"immediate"}, "_recursive_triggers": {"1"},
	}
	readerOptions = url.Values{
		"_journal_mode": {"WAL"}, "_synchronous": {"FULL"}, "_busy_timeout": {"5000"},
		"_foreign_keys": {"on"}, "_query_only": {"1"},
	}
)

func open(ctx context.Context, cfg Config, writer, reader url.Values) (_ *Store, err error) {
	path, err := filepath.Abs(cfg.Path)
	if err != nil {
		return nil, err
	}
	s := &Store{path: path, now: cfg.Now, app: cfg.App}
	if s.now == nil {
		s.now = time.Now
	}
	defer func() {
		if err != nil {
			s.Close()
		}
	}()
	if s.write, err = sql.Open("sqlite3", dsn(path, writer)); err != nil {
		return nil, err
	}
	s.write.SetMaxOpenConns(1)
	s.write.SetConnMaxLifetime(0)
	if err = migrate(ctx, s.write, migrations, s.nowMs()); err != nil {
		return nil, err
	}
	// The pool of readers is opened after the file is there and in WAL mode.
	if s.read, err = sql.Open("sqlite3", dsn(path, reader)); err != nil {
		return nil, err
	}
	s.read.SetMaxOpenConns(readers)
	s.read.SetMaxIdleConns(readers)
	s.read.SetConnMaxLifetime(0)
	if err = s.selfCheck(ctx); err != nil {
		return nil, err
	}
	if err = s.found(ctx); err != nil {
		return nil, err
	}
	return s, nil
}

func dsn(path string, options url.Values) string {
	return (&url.URL{Scheme: "file", Path: path, RawQuery: options.Encode()}).String()
}

// Close closes all connections; where they are the last on the file, SQLite folds the write-ahead log into it. Stop
// whoever calls the store first.
func (s *Store) Close() error {
	var errs []error
	if s.read != nil {
		errs = append(errs, s.read.Close())
	}
	if s.write != nil {
		errs = append(errs, s.write.Close())
	}
	return errors.Join(errs...)
}

// Ping tells whether the log can be written: it takes and gives back the writing transaction.
func (s *Store) Ping(ctx context.Context) error {
	tx, err := s.write.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	return tx.Rollback()
}

func (s *Store) nowMs() int64 { return s.now().UnixMilli() }

// inTx runs fn in one immediate transaction. An error from fn, or a panic, leaves nothing behind.
func (s *Store) inTx(ctx context.Context, fn func(tx *sql.Tx) error) error {
	tx, err := s.write.BeginTx(ctx, nil)
	if err != nil {
		return fmt.Errorf("begin: %w", err)
	}
	defer tx.Rollback() // after Commit this does nothing
	if err := fn(tx); err != nil {
		return err
	}
	if err := tx.Commit(); err != nil {
		return fmt.Errorf("commit: %w", err)
	}
	return nil
}
