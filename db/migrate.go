package db

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"fmt"
	"io/fs"
	"sort"
	"strconv"
	"strings"
)

type migration struct {
	number int
	name   string
	sql    string
	sum    string
}

func readMigrations(files fs.FS) ([]migration, error) {
	names, err := fs.Glob(files, "migrations/*.sql")
	if err != nil {
		return nil, err
	}
	sort.Strings(names)
	var list []migration
	for i, name := range names {
		text, err := fs.ReadFile(files, name)
		if err != nil {
			return nil, err
		}
		base := strings.TrimPrefix(name, "migrations/")
		digits, _, _ := strings.Cut(base, "_")
		number, err := strconv.Atoi(digits)
		if err != nil || number != i+1 {
			return nil, fmt.Errorf("migration %s: numbers run 0001, 0002, … without gaps", base)
		}
		sum := sha256.Sum256(text)
		list = append(list, migration{number: number, name: base, sql: string(text), sum: hex.EncodeToString(sum[:])})
	}
	return list, nil
}

// migrate brings the schema up to date, each step once, in a transaction of its own: several statements in one Exec
// outside a transaction would leave the first ones behind on an error. A step that was applied is never edited; its
// checksum would differ and nothing opens.
func migrate(ctx context.Context, pool *sql.DB, files fs.FS, nowMs int64) error {
	list, err := readMigrations(files)
	if err != nil {
		return err
	}
	if _, err := pool.ExecContext(ctx, `CREATE TABLE IF NOT EXISTS migrations (
		number     INTEGER PRIMARY KEY,
		name       TEXT    NOT NULL,
		sum        TEXT    NOT NULL,
		applied_ms INTEGER NOT NULL
	) STRICT`); err != nil {
		return fmt.Errorf("migrations: %w", err)
	}
	var highest int
	if err := pool.QueryRowContext(ctx, "SELECT coalesce(max(number), 0) FROM migrations").Scan(&highest); err != nil {
		return err
	}
	if highest > len(list) {
		return fmt.Errorf("%w: its schema is %d, this program knows %d", ErrNewer, highest, len(list))
	}
	for _, m := range list {
		if err := m.apply(ctx, pool, nowMs); err != nil {
			return fmt.Errorf("migration %s: %w", m.name, err)
		}
	}
	return nil
}

func (m migration) apply(ctx context.Context, pool *sql.DB, nowMs int64) error {
	tx, err := pool.BeginTx(ctx, nil)
	if err != nil {
		return err
	}
	defer tx.Rollback()
	var applied string
	switch err := tx.QueryRowContext(ctx, "SELECT sum FROM migrations WHERE number = ?", m.number).Scan(&applied); {
	case err == nil && applied == m.sum:
		return nil
	case err == nil:
		return ErrOtherText
	case err != sql.ErrNoRows:
		return err
	}
	if _, err := tx.ExecContext(ctx, m.sql); err != nil {
		return err
	}
	if _, err := tx.ExecContext(ctx, "INSERT INTO migrations (number, name, sum, applied_ms) VALUES (?, ?, ?, ?)",
		m.number, m.name, m.sum, nowMs); err != nil {
		return err
	}
	return tx.Commit()
}
