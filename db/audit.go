package db

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"strconv"
)

// audit writes down what was done to the system itself. Like the log of entries it only grows, each line bound to the
// one before.
func (s *Store) audit(ctx context.Context, tx *sql.Tx, person, action, detail string) error {
	var before string
	err := tx.QueryRowContext(ctx, "SELECT chain FROM audit ORDER BY n DESC LIMIT 1").Scan(&before)
	if err != nil && err != sql.ErrNoRows {
		return err
	}
	at := s.nowMs()
	_, err = tx.ExecContext(ctx, "INSERT INTO audit (at_ms, person, action, detail, chain) VALUES (?, ?, ?, ?, ?)",
		at, orNull(person), action, detail, auditHash(before, at, person, action, detail))
	return err
}

func auditHash(before string, atMs int64, person, action, detail string) string {
	sum := sha256.Sum256([]byte(before + "\n" + strconv.FormatInt(atMs, 10) + "\n" + strconv.Quote(person) + "\n" +
		strconv.Quote(action) + "\n" + strconv.Quote(detail)))
	return hex.EncodeToString(sum[:])
}
