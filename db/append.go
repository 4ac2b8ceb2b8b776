package db

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"errors"
	"fmt"
	"sort"
	"strconv"
	"time"
)

// Incoming is one entry as a device sent it.
type Incoming struct {
	Raw  string
	Hash string // what the device says that the hash of Raw is
	// Objection, when not empty, is why the caller cannot accept the entry, in words: it is then set apart. It is asked
	// last, so that a repeated delivery is answered as such.
	Objection string
}

// Status is what became of an entry.
type Status string

// Stored: it is in the log, on disk. Duplicate: it was there already, the very same bytes. Quarantined: it is kept, but
// a person has to look at it.
const (
	Stored      Status = "stored"
	Duplicate   Status = "duplicate"
	Quarantined Status = "quarantined"
)

// Answer is what became of one entry. ID is "" where the text did not let it be read.
type Answer struct {
	ID     string
	Status Status
	Seq    int64 // 0 when quarantined
	Code   string
	Reason string
}

// Receipt answers a batch, in the order in which it came.
type Receipt struct {
	Answers []Answer
	Epoch   int64
	Head    Head
	// Jobs are those whose log grew.
	Jobs []string
}

// Append takes a batch into the log in one transaction: afterwards all of it is on disk or none. The same batch again,
// whole or in part, from as many sides at once as may be, changes nothing and is answered with the same numbers.
// sentMs is the device's clock when it sent (0 = unknown), kept to tell how far clocks are apart; nothing is ordered by it.
func (s *Store) Append(ctx context.Context, by Person, sentMs int64, batch []Incoming) (Receipt, error) {
	var r Receipt
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		w, err := s.newWriter(ctx, tx, by, sentMs)
		if err != nil {
			return err
		}
		answers := make([]Answer, len(batch))
		for _, i := range deviceOrder(batch) {
			if answers[i], err = w.take(batch[i]); err != nil {
				return err
			}
		}
		r = Receipt{Answers: answers, Epoch: w.epoch, Head: w.head, Jobs: w.jobs}
		return nil
	})
	return r, err
}

// deviceOrder is the order in which a batch is taken: a device's entries by their own numbers, whatever order the
// network gave them, devices in the order of their first entry.
func deviceOrder(batch []Incoming) []int {
	type place struct {
		device string
		seq    int64
		first  int
	}
	places := make([]place, len(batch))
	first := map[string]int{}
	for i, in := range batch {
		e, _ := ReadEntry(in.Raw)
		if _, seen := first[e.Device]; !seen {
			first[e.Device] = i
		}
		places[i] = place{e.Device, e.DeviceSeq, first[e.Device]}
	}
	order := make([]int, len(batch))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool {
		p, q := places[order[a]], places[order[b]]
		if p.first != q.first {
			return p.first < q.first
		}
		return p.seq < q.seq
	})
	return order
}

// writer is one writing transaction on the log.
type writer struct {
	ctx    context.Context
	tx     *sql.Tx
	by     Person
	nowMs  int64
	sentMs sql.NullInt64
	epoch  int64
	head   Head
	jobs   []string
}

func (s *Store) newWriter(ctx context.Context, tx *sql.Tx, by Person, sentMs int64) (*writer, error) {
	w := &writer{ctx: ctx, tx: tx, by: by, nowMs: s.nowMs(), sentMs: sql.NullInt64{Int64: sentMs, Valid: sentMs != 0}}
	var err error
	if w.epoch, err = epoch(ctx, tx); err != nil {
		return nil, err
	}
	w.head, err = head(ctx, tx)
	return w, err
}

// take stores one entry, or recognises it, or sets it apart. The error is of the database; a bad entry is an Answer.
func (w *writer) take(in Incoming) (Answer, error) {
	e, err := ReadEntry(in.Raw)
	answer := Answer{ID: e.ID}
	raw := HashOf(in.Raw)
	var refusal *Refusal
	switch {
	case err != nil && !errors.As(err, &refusal):
		return answer, err
	case raw != in.Hash:
		// Before anything else: of bytes that are not what the device hashed, nothing can be believed.
		refusal = refuse(HashMismatch, "the hash sent with the entry is not the hash of its text")
	case refusal == nil:
		seq, known, err := w.known(e, raw)
		if err != nil {
			return answer, err
		}
		if known {
			answer.Status, answer.Seq = Duplicate, seq
			return answer, nil
		}
	}
	if answer, done, err := w.knownApart(answer, raw, in.Hash); done || err != nil {
		return answer, err
	}
	if refusal == nil {
		if refusal, err = w.objection(e, raw); err != nil {
			return answer, err
		}
	}
	if refusal == nil && in.Objection != "" {
		refusal = refuse(Unreadable, "%s", in.Objection)
	}
	if refusal != nil {
		answer.Status, answer.Code, answer.Reason = Quarantined, refusal.Code, refusal.Reason
		return answer, w.setApart(e, in, raw, refusal)
	}
	answer.Status = Stored
	answer.Seq, err = w.store(e, in.Raw, raw)
	return answer, err
}

// known finds the very same entry in the log.
func (w *writer) known(e Entry, hash string) (seq int64, same bool, err error) {
	var stored string
	err = w.tx.QueryRowContext(w.ctx, "SELECT seq, hash FROM entries WHERE id = ?", e.ID).Scan(&seq, &stored)
	if err == sql.ErrNoRows {
		return 0, false, nil
	}
	return seq, err == nil && stored == hash, err
}

// knownApart finds the very same delivery in quarantine: it gets the same answer again and is not kept twice.
func (w *writer) knownApart(answer Answer, rawHash, claimed string) (Answer, bool, error) {
	err := w.tx.QueryRowContext(w.ctx,
		"SELECT code, reason FROM quarantine WHERE raw_hash = ? AND claimed_hash = ?", rawHash, clipHash(claimed)).
		Scan(&answer.Code, &answer.Reason)
	if err == sql.ErrNoRows {
		return answer, false, nil
	}
	answer.Status = Quarantined
	return answer, err == nil, err
}

// objection is why a well-formed entry cannot be in the log, or nil.
func (w *writer) objection(e Entry, hash string) (*Refusal, error) {
	var other string
	switch err := w.tx.QueryRowContext(w.ctx, "SELECT hash FROM entries WHERE id = ?", e.ID).Scan(&other); {
	case err == nil: // known() has seen to the case that it is the same
		return refuse(IDReused, "an entry with this id and other content is in the log"), nil
	case err != sql.ErrNoRows:
		return nil, err
	}
	if refusal, err := w.chainObjection(e, hash); refusal != nil || err != nil {
		return refusal, err
	}
	author, err := personByID(w.ctx, w.tx, e.Author)
	if err == ErrNotFound {
		return refuse(UnknownAuthor, "nobody has the id %q", clip(e.Author)), nil
	} else if err != nil {
		return nil, err
	}
	if e.supervisorOnly() {
		// What a supervisor decides is uploaded by the same supervisor; nobody carries it for him.
		if author.Role != Supervisor || w.by.ID != author.ID {
			return refuse(NotAllowed, "%s is for a supervisor to write", e.Kind), nil
		}
	}
	return w.jobObjection(e)
}

func (e Entry) supervisorOnly() bool {
	switch e.Kind {
	case JobPlanned, JobIssued, JobSentBack, JobSignedOff:
		return true
	}
	return false
}

// chainObjection checks the entry against its neighbours on the same device. A gap is no objection: what is missing may
// still come, and State says what is missing. An entry whose neighbour was set apart is not measured by it: one bad
// entry must not block those behind it.
func (w *writer) chainObjection(e Entry, hash string) (*Refusal, error) {
	neighbour := func(seq int64) (hash, prev string, err error) {
		err = w.tx.QueryRowContext(w.ctx, "SELECT hash, prev FROM entries WHERE device = ? AND device_seq = ?",
			e.Device, seq).Scan(&hash, &prev)
		if err == sql.ErrNoRows {
			err = nil
		}
		return
	}
	taken, _, err := neighbour(e.DeviceSeq)
	if err != nil {
		return nil, err
	}
	if taken != "" {
		return refuse(DeviceSeqReused, "this device wrote another entry with number %d", e.DeviceSeq), nil
	}
	before, _, err := neighbour(e.DeviceSeq - 1)
	if err != nil {
		return nil, err
	}
	if before != "" && before != e.Prev {
		return refuse(ChainBroken, "the entry before it on this device has another hash than prev says"), nil
	}
	after, prev, err := neighbour(e.DeviceSeq + 1)
	if err != nil {
		return nil, err
	}
	if after != "" && prev != hash {
		return refuse(ChainBroken, "the entry after it on this device follows another one"), nil
	}
	return nil, nil
}

func (w *writer) jobObjection(e Entry) (*Refusal, error) {
	if e.Job == "" {
		return refuse(UnknownJob, "the entry belongs to no job"), nil
	}
	job, err := jobByID(w.ctx, w.tx, e.Job)
	switch {
	case err == ErrNotFound && e.Kind == JobPlanned:
		return nil, nil
	case err == ErrNotFound:
		return refuse(UnknownJob, "no such job is known here"), nil
	case err != nil:
		return nil, err
	case !w.by.MaySee(job):
		// In the same words as for a job that is not there: a stranger does not learn that it is.
		return refuse(UnknownJob, "no such job is known here"), nil
	case e.Kind == JobPlanned:
		return refuse(AlreadyPlanned, "the job is planned already"), nil
	case job.Stage == StageSignedOff:
		return refuse(SignedOff, "the job was signed off before this arrived"), nil
	}
	if e.Mount != "" {
		var there int
		if err := w.tx.QueryRowContext(w.ctx, "SELECT count(*) FROM mounts WHERE job = ? AND id = ?", e.Job, e.Mount).
			Scan(&there); err != nil {
			return nil, err
		}
		if there == 0 {
			return refuse(UnknownMount, "the job has no mount %q", clip(e.Mount)), nil
		}
	}
	if e.Kind == JobSentBack || e.Kind == JobSignedOff {
		content, err := e.ReadBody()
		if err != nil {
			return nil, err
		}
		if job.Stage != StageHandedIn {
			return refuse(NotHandedIn, "the job is not handed in, it is %s", job.Stage), nil
		}
		if base := content.(*Decision).BaseSeq; base != job.StageSeq {
			return refuse(Stale, "the job has changed since: the decision was made on %d, the job stands at %d",
				base, job.StageSeq), nil
		}
	}
	return nil, nil
}

// ChainHash is the server's chain: it binds an entry to all before it, to when it arrived and to who brought it.
//
//	chain_n = SHA-256(chain_{n-1} "\n" seq "\n" received "\n" uploader "\n" raw)
//
// with chain values in hex, numbers in decimal, chain_0 empty. It finds edits, gaps and changed order. It cannot find
// a tail that was cut off, nor a whole log written anew; whoever kept a Head can.
func ChainHash(before string, seq, receivedMs int64, uploader, raw string) string {
	h := sha256.New()
	h.Write([]byte(before + "\n" + strconv.FormatInt(seq, 10) + "\n" + strconv.FormatInt(receivedMs, 10) + "\n" + uploader + "\n"))
	h.Write([]byte(raw))
	return hex.EncodeToString(h.Sum(nil))
}

func (w *writer) store(e Entry, raw, hash string) (int64, error) {
	seq := w.head.Seq + 1
	chain := ChainHash(w.head.Hash, seq, w.nowMs, w.by.ID, raw)
	if _, err := w.tx.ExecContext(w.ctx, `
		INSERT INTO entries (seq, id, device, device_seq, prev, hash, job, mount, kind, schema, author, uploader,
			received_ms, sent_ms, raw, chain)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		seq, e.ID, e.Device, e.DeviceSeq, e.Prev, hash, e.Job, orNull(e.Mount), e.Kind, e.Schema, e.Author, w.by.ID,
		w.nowMs, w.sentMs, raw, chain); err != nil {
		return 0, fmt.Errorf("entry: %w", err)
	}
	if err := deriveFromEntry(w.ctx, w.tx, seq, e); err != nil {
		return 0, err
	}
	if err := deriveReceipt(w.ctx, w.tx, e.Device, e.DeviceSeq, hash, w.by.ID, seq); err != nil {
		return 0, err
	}
	w.head = Head{Seq: seq, Hash: chain}
	for _, job := range w.jobs {
		if job == e.Job {
			return seq, nil
		}
	}
	w.jobs = append(w.jobs, e.Job)
	return seq, nil
}

func (w *writer) setApart(e Entry, in Incoming, rawHash string, why *Refusal) error {
	// The job is noted only where the uploader may see it, so that nobody fills the lists of strangers' jobs.
	job := ""
	if e.Job != "" {
		switch known, err := jobByID(w.ctx, w.tx, e.Job); {
		case err == nil && w.by.MaySee(known):
			job = e.Job
		case err != nil && err != ErrNotFound:
			return err
		}
	}
	device, deviceSeq := e.Device, e.DeviceSeq
	if !isUUID(device, 0) || deviceSeq < 1 {
		device, deviceSeq = "", 0
	}
	if _, err := w.tx.ExecContext(w.ctx, `
		INSERT INTO quarantine (id, device, device_seq, job, code, reason, author, uploader, received_ms, sent_ms,
			claimed_hash, raw_hash, raw)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		orNull(e.ID), orNull(device), sql.NullInt64{Int64: deviceSeq, Valid: deviceSeq > 0}, orNull(job), why.Code,
		why.Reason, orNull(e.Author), w.by.ID, w.nowMs, w.sentMs, clipHash(in.Hash), rawHash, in.Raw); err != nil {
		return fmt.Errorf("quarantine: %w", err)
	}
	return deriveFromQuarantine(w.ctx, w.tx, job, device, deviceSeq, rawHash, w.by.ID)
}

func orNull(s string) sql.NullString { return sql.NullString{String: s, Valid: s != ""} }

// clipHash bounds what is kept of a claimed hash, which may be any text.
func clipHash(s string) string {
	if len(s) > 64 {
		return s[:64]
	}
	return s
}

// timeOf is a stored time.
func timeOf(ms int64) time.Time { return time.UnixMilli(ms).UTC() }
