package db

import (
	"context"
	"database/sql"
	"strconv"

	"github.com/google/uuid"
)

// Head is the last entry of the log: who keeps it can tell later that nothing before it was changed.
type Head struct {
	Seq  int64
	Hash string // the chain value of that entry, "" for an empty log
}

// State is what a phone compares with its own.
type State struct {
	// Instance names this database; another instance knows nothing of what this one acknowledged.
	Instance string
	// Epoch counts restored backups: after a higher one a phone offers again what the server no longer has.
	Epoch int64
	Head  Head
}

// found writes what a new database needs once.
func (s *Store) found(ctx context.Context) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		for key, value := range map[string]string{
			"instance": uuid.NewString(),
			"epoch":    "1",
			// Entries made on the server have a device of their own, with a chain like any phone's.
			"desk_device": uuid.NewString(),
		} {
			if _, err := tx.ExecContext(ctx, "INSERT INTO meta (key, value) VALUES (?, ?) ON CONFLICT (key) DO NOTHING",
				key, value); err != nil {
				return err
			}
		}
		return nil
	})
}

// queryer is what *sql.DB and *sql.Tx have in common for reading.
type queryer interface {
	QueryRowContext(ctx context.Context, query string, args ...any) *sql.Row
	QueryContext(ctx context.Context, query string, args ...any) (*sql.Rows, error)
}

func metaValue(ctx context.Context, q queryer, key string) (string, error) {
	var value string
	err := q.QueryRowContext(ctx, "SELECT value FROM meta WHERE key = ?", key).Scan(&value)
	return value, err
}

func epoch(ctx context.Context, q queryer) (int64, error) {
	value, err := metaValue(ctx, q, "epoch")
	if err != nil {
		return 0, err
	}
	return strconv.ParseInt(value, 10, 64)
}

func head(ctx context.Context, q queryer) (Head, error) {
	var h Head
	err := q.QueryRowContext(ctx, "SELECT seq, chain FROM entries ORDER BY seq DESC LIMIT 1").Scan(&h.Seq, &h.Hash)
	if err == sql.ErrNoRows {
		return Head{}, nil
	}
	return h, err
}

// State answers where the log stands.
func (s *Store) State(ctx context.Context) (State, error) {
	var st State
	var err error
	if st.Instance, err = metaValue(ctx, s.read, "instance"); err != nil {
		return st, err
	}
	if st.Epoch, err = epoch(ctx, s.read); err != nil {
		return st, err
	}
	st.Head, err = head(ctx, s.read)
	return st, err
}

// Device is how far the server has one device's entries without a gap.
type Device struct {
	Device         string
	ContiguousSeq  int64
	ContiguousHash string
	HighestSeq     int64
}

// Devices lists the devices from which this person ever uploaded.
func (s *Store) Devices(ctx context.Context, person string) ([]Device, error) {
	rows, err := s.read.QueryContext(ctx, `
		SELECT device, contiguous_seq, contiguous_hash, highest_seq FROM devices
		WHERE device IN (SELECT device FROM device_people WHERE person = ?) ORDER BY device`, person)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []Device
	for rows.Next() {
		var d Device
		if err := rows.Scan(&d.Device, &d.ContiguousSeq, &d.ContiguousHash, &d.HighestSeq); err != nil {
			return nil, err
		}
		list = append(list, d)
	}
	return list, rows.Err()
}

// Device answers for one device, ErrNotFound when nothing of it ever arrived.
func (s *Store) Device(ctx context.Context, device string) (Device, error) {
	d := Device{Device: device}
	err := s.read.QueryRowContext(ctx,
		"SELECT contiguous_seq, contiguous_hash, highest_seq FROM devices WHERE device = ?", device).
		Scan(&d.ContiguousSeq, &d.ContiguousHash, &d.HighestSeq)
	if err == sql.ErrNoRows {
		return d, ErrNotFound
	}
	return d, err
}

// What a database is besides a real one: a demo that is being furnished, or one that is.
const (
	DemoBegun = "begun"
	DemoWhole = "whole"
)

// MarkDemo says for good that what is in here was invented.
func (s *Store) MarkDemo(ctx context.Context, state string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx,
			"INSERT INTO meta (key, value) VALUES ('demo', ?) ON CONFLICT (key) DO UPDATE SET value = excluded.value", state)
		return err
	})
}

// Demo is what MarkDemo said last, "" for a real database.
func (s *Store) Demo(ctx context.Context) (string, error) {
	state, err := metaValue(ctx, s.read, "demo")
	if err == sql.ErrNoRows {
		return "", nil
	}
	return state, err
}

// DemoMark reads what Demo does from a file whose schema need not be this program's: the database of an older or a newer
// version can still say whether it is a demo. The file is not changed.
func DemoMark(ctx context.Context, path string) (string, error) {
	s, err := openToRead(path)
	if err != nil {
		return "", err
	}
	defer s.read.Close()
	return s.Demo(ctx)
}
