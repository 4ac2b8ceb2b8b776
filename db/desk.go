package db

import (
	"context"
	"database/sql"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"time"
)

// DeskEntry is an entry to be made on the server for a supervisor at the desk.
type DeskEntry struct {
	ID   string
	Job  string
	Kind string
	Body any
}

// AppendDesk writes entries of the desk: all of them or none. An id that is in the log already with the same author,
// job, kind and body is left as it is, so that a repeated request does nothing twice. What may not be written comes
// back as a *Refusal; nothing of the desk is set apart, there is a person to tell.
func (s *Store) AppendDesk(ctx context.Context, by Person, entries []DeskEntry) (Receipt, error) {
	var r Receipt
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		w, err := s.newWriter(ctx, tx, by, 0)
		if err != nil {
			return err
		}
		r = Receipt{}
		for _, d := range entries {
			answer, err := w.takeDesk(s, d)
			if err != nil {
				return err
			}
			r.Answers = append(r.Answers, answer)
		}
		r.Epoch, r.Head, r.Jobs = w.epoch, w.head, w.jobsGrown
		return w.flush()
	})
	if err != nil {
		return Receipt{}, err
	}
	return r, nil
}

func (w *writer) takeDesk(s *Store, d DeskEntry) (Answer, error) {
	text, err := json.Marshal(d.Body, json.Deterministic(true))
	if err != nil {
		return Answer{}, err
	}
	var stored string
	var seq int64
	switch err := w.tx.QueryRowContext(w.ctx, "SELECT seq, raw FROM entries WHERE id = ?", d.ID).Scan(&seq, &stored); {
	case err == nil:
		before, err := ReadEntry(stored)
		if err != nil {
			return Answer{}, err
		}
		if before.Author != w.by.ID || before.Job != d.Job || before.Kind != d.Kind || string(before.Body) != string(text) {
			return Answer{}, refuse(IDReused, "an entry with this id and other content is in the log")
		}
		return Answer{ID: d.ID, Status: Duplicate, Seq: seq}, nil
	case err != sql.ErrNoRows:
		return Answer{}, err
	}
	env := deskEnvelope{
		ID: d.ID, Device: w.desk, DeviceSeq: 1, Job: d.Job, Kind: d.Kind, Schema: 1,
		At: s.now().Format(time.RFC3339), Author: w.by.ID, App: s.app, Body: rawJSON(text),
	}
	err = w.tx.QueryRowContext(w.ctx,
		"SELECT device_seq + 1, hash FROM entries WHERE device = ? ORDER BY device_seq DESC LIMIT 1", w.desk).
		Scan(&env.DeviceSeq, &env.Prev)
	if err != nil && err != sql.ErrNoRows {
		return Answer{}, err
	}
	raw, err := json.Marshal(env)
	if err != nil {
		return Answer{}, err
	}
	e, content, err := readEntry(string(raw))
	if err != nil {
		return Answer{}, err
	}
	hash := HashOf(string(raw))
	refusal, err := w.objection(e, content, hash)
	if err != nil {
		return Answer{}, err
	}
	if refusal != nil {
		return Answer{}, refusal
	}
	seq, err = w.store(e, content, string(raw), hash)
	return Answer{ID: d.ID, Status: Stored, Seq: seq}, err
}

// rawJSON is JSON that is written as it stands.
type rawJSON = jsontext.Value

// deskEnvelope is an entry that the server writes, in the same order of fields as a phone's.
type deskEnvelope struct {
	ID        string  `json:"id"`
	Device    string  `json:"device"`
	DeviceSeq int64   `json:"device_seq"`
	Prev      string  `json:"prev"`
	Job       string  `json:"job"`
	Mount     *string `json:"mount"`
	Kind      string  `json:"kind"`
	Schema    int     `json:"schema"`
	At        string  `json:"at"`
	MonoMs    int64   `json:"mono_ms"`
	Author    string  `json:"author"`
	App       string  `json:"app"`
	Body      rawJSON `json:"body"`
}
