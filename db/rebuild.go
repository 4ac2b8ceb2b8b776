package db

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
)

// derived are the tables that follow from entries and quarantine, in an order in which they can be emptied.
var derived = []string{"mounts", "jobs", "devices", "device_people"}

// Difference says that a derived table did not come out as it stood.
type Difference struct {
	Table string
	// Lost rows stood there and do not follow from the log; New rows follow from the log and did not stand there.
	Lost, New int64
}

func (d Difference) String() string {
	return fmt.Sprintf("%s: %d rows stood there that do not follow from the log, %d follow that did not stand there",
		d.Table, d.Lost, d.New)
}

// errLeaveAsIs ends a transaction that was only to look.
var errLeaveAsIs = errors.New("nothing to keep")

// Rebuild empties the derived tables, makes them again from the log, and compares. With keep they then stand as the
// log has them; without, everything is left as it was. No difference is an empty list. It holds the writing transaction
// all the while: use it on a server that is stopped.
func (s *Store) Rebuild(ctx context.Context, keep bool) ([]Difference, error) {
	var differences []Difference
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		// A table may have been damaged in any way; what is inserted is checked again at commit.
		if _, err := tx.ExecContext(ctx, "PRAGMA defer_foreign_keys = on"); err != nil {
			return err
		}
		for _, table := range derived {
			if _, err := tx.ExecContext(ctx, "CREATE TEMP TABLE before_"+table+" AS SELECT * FROM main."+table); err != nil {
				return err
			}
			if _, err := tx.ExecContext(ctx, "DELETE FROM "+table); err != nil {
				return err
			}
		}
		if err := replay(ctx, tx); err != nil {
			return err
		}
		for _, table := range derived {
			d := Difference{Table: table}
			const count = "SELECT count(*) FROM (SELECT * FROM %s EXCEPT SELECT * FROM %s)"
			if err := tx.QueryRowContext(ctx, fmt.Sprintf(count, "temp.before_"+table, "main."+table)).Scan(&d.Lost); err != nil {
				return err
			}
			if err := tx.QueryRowContext(ctx, fmt.Sprintf(count, "main."+table, "temp.before_"+table)).Scan(&d.New); err != nil {
				return err
			}
			if d.Lost != 0 || d.New != 0 {
				differences = append(differences, d)
			}
			if _, err := tx.ExecContext(ctx, "DROP TABLE temp.before_"+table); err != nil {
				return err
			}
		}
		if !keep {
			return errLeaveAsIs
		}
		return nil
	})
	if err == errLeaveAsIs {
		err = nil
	}
	return differences, err
}

// page is how many rows are read before they are worked on: reading on while writing would wait for itself, since
// there is one writing connection.
const page = 500

func replay(ctx context.Context, tx *sql.Tx) error {
	type logged struct {
		seq                 int64
		raw, hash, uploader string
	}
	for after := int64(0); ; {
		rows, err := tx.QueryContext(ctx,
			"SELECT seq, raw, hash, uploader FROM entries WHERE seq > ? ORDER BY seq LIMIT ?", after, page)
		if err != nil {
			return err
		}
		batch, err := collect(rows, func(l *logged) []any { return []any{&l.seq, &l.raw, &l.hash, &l.uploader} })
		if err != nil {
			return err
		}
		d := newDeriver(ctx, tx)
		for _, l := range batch {
			e, content, err := readEntry(l.raw)
			if err != nil {
				return fmt.Errorf("entry %d: %w", l.seq, err)
			}
			if err := d.entered(l.seq, e, content, l.hash, l.uploader); err != nil {
				return err
			}
			after = l.seq
		}
		if err := d.flush(); err != nil {
			return err
		}
		if len(batch) < page {
			break
		}
	}
	type apart struct {
		n                 int64
		device            sql.NullString
		deviceSeq         sql.NullInt64
		rawHash, uploader string
	}
	for after := int64(0); ; {
		rows, err := tx.QueryContext(ctx,
			"SELECT n, device, device_seq, raw_hash, uploader FROM quarantine WHERE n > ? ORDER BY n LIMIT ?", after, page)
		if err != nil {
			return err
		}
		batch, err := collect(rows, func(a *apart) []any { return []any{&a.n, &a.device, &a.deviceSeq, &a.rawHash, &a.uploader} })
		if err != nil {
			return err
		}
		d := newDeriver(ctx, tx)
		for _, a := range batch {
			// The count by job was taken when the job's row was made.
			if err := d.setAside("", a.device.String, a.deviceSeq.Int64, a.rawHash, a.uploader); err != nil {
				return err
			}
			after = a.n
		}
		if err := d.flush(); err != nil {
			return err
		}
		if len(batch) < page {
			return nil
		}
	}
}

// collect reads all rows and closes them.
func collect[T any](rows *sql.Rows, fields func(*T) []any) ([]T, error) {
	defer rows.Close()
	var list []T
	for rows.Next() {
		var one T
		if err := rows.Scan(fields(&one)...); err != nil {
			return nil, err
		}
		list = append(list, one)
	}
	return list, rows.Err()
}
