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
// whole or in part, from as many sides at once as may be, changes nothing and is answered with the same numbers. What
// was set apart before is looked at anew: when what stood against it is gone, it goes into the log.
// sentMs is the device's clock when it sent (0 = unknown), kept to tell how far clocks are apart; nothing is ordered by it.
func (s *Store) Append(ctx context.Context, by Person, sentMs int64, batch []Incoming) (Receipt, error) {
	arrivals := make([]arrival, len(batch))
	for i, in := range batch {
		if err := arrivals[i].read(in); err != nil {
			return Receipt{}, err
		}
	}
	var r Receipt
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		w, err := s.newWriter(ctx, tx, by, sentMs)
		if err != nil {
			return err
		}
		answers := make([]Answer, len(batch))
		for _, i := range deviceOrder(arrivals) {
			if answers[i], err = w.take(arrivals[i]); err != nil {
				return err
			}
		}
		r = Receipt{Answers: answers, Epoch: w.epoch, Head: w.head, Jobs: w.jobsGrown}
		return w.flush()
	})
	if err != nil {
		return Receipt{}, err
	}
	return r, nil
}

// arrival is an entry as it came, read once.
type arrival struct {
	Incoming
	hash    string // of the text as it came
	entry   Entry
	content any
	refusal *Refusal // why it cannot be read
}

func (a *arrival) read(in Incoming) error {
	a.Incoming, a.hash = in, HashOf(in.Raw)
	var err error
	a.entry, a.content, err = readEntry(in.Raw)
	if err != nil && !errors.As(err, &a.refusal) {
		return err
	}
	return nil
}

// deviceOrder is the order in which a batch is taken: a device's entries by their own numbers, whatever order the
// network gave them, devices in the order of their first entry.
func deviceOrder(batch []arrival) []int {
	first := map[string]int{}
	order := make([]int, len(batch))
	for i, a := range batch {
		order[i] = i
		if _, seen := first[a.entry.Device]; !seen {
			first[a.entry.Device] = i
		}
	}
	sort.SliceStable(order, func(i, k int) bool {
		p, q := batch[order[i]].entry, batch[order[k]].entry
		if first[p.Device] != first[q.Device] {
			return first[p.Device] < first[q.Device]
		}
		return p.DeviceSeq < q.DeviceSeq
	})
	return order
}

// writer is one writing transaction on the log.
type writer struct {
	*deriver
	by        Person
	nowMs     int64
	sentMs    sql.NullInt64
	epoch     int64
	head      Head
	desk      string // the device under which this server writes
	jobsGrown []string
	authors   map[string]*Person // nil: nobody
}

func (s *Store) newWriter(ctx context.Context, tx *sql.Tx, by Person, sentMs int64) (*writer, error) {
	w := &writer{deriver: newDeriver(ctx, tx), by: by, nowMs: s.nowMs(),
		sentMs: sql.NullInt64{Int64: sentMs, Valid: sentMs != 0}, authors: map[string]*Person{}}
	var err error
	if w.epoch, err = epoch(ctx, tx); err != nil {
		return nil, err
	}
	if w.desk, err = metaValue(ctx, tx, "desk_device"); err != nil {
		return nil, err
	}
	w.head, err = head(ctx, tx)
	return w, err
}

// take stores one entry, or recognises it, or sets it apart. The error is of the database; a bad entry is an Answer.
func (w *writer) take(a arrival) (Answer, error) {
	answer := Answer{ID: a.entry.ID}
	refusal := a.refusal
	if a.hash != a.Hash {
		// Before anything else: of bytes that are not what the device hashed, nothing can be believed.
		refusal = refuse(HashMismatch, "the hash sent with the entry is not the hash of its text")
	}
	if refusal == nil {
		seq, stored, err := w.known(a.entry.ID)
		switch {
		case err != nil:
			return answer, err
		case stored == a.hash:
			answer.Status, answer.Seq = Duplicate, seq
			return answer, nil
		case stored != "":
			refusal = refuse(IDReused, "an entry with this id and other content is in the log")
		}
	}
	if refusal == nil && a.entry.Device == w.desk {
		// Every phone that pulled a plan knows the name. A number taken here would be missing to the desk's own next entry.
		refusal = refuse(NotAllowed, "this device is the server's own; what is uploaded comes from another one")
	}
	var err error
	if refusal == nil {
		if refusal, err = w.objection(a.entry, a.content, a.hash); err != nil {
			return answer, err
		}
	}
	if refusal == nil && a.Objection != "" {
		refusal = refuse(Unreadable, "%s", a.Objection)
	}
	if refusal != nil {
		answer.Status, answer.Code, answer.Reason = Quarantined, refusal.Code, refusal.Reason
		return answer, w.setApart(a, refusal)
	}
	answer.Status = Stored
	answer.Seq, err = w.store(a.entry, a.content, a.Raw, a.hash)
	return answer, err
}

// known finds an id in the log; hash is "" when it is not there.
func (w *writer) known(id string) (seq int64, hash string, err error) {
	err = w.row("SELECT seq, hash FROM entries WHERE id = ?", id).Scan(&seq, &hash)
	if err == sql.ErrNoRows {
		err = nil
	}
	return seq, hash, err
}

// objection is why a well-formed entry cannot be in the log, or nil.
func (w *writer) objection(e Entry, content any, hash string) (*Refusal, error) {
	if refusal, err := w.chainObjection(e, hash); refusal != nil || err != nil {
		return refusal, err
	}
	author, err := w.author(e.Author)
	if err != nil {
		return nil, err
	}
	if author == nil {
		return refuse(UnknownAuthor, "nobody has the id %q", clip(e.Author)), nil
	}
	if e.supervisorOnly() {
		// What a supervisor decides is uploaded by the same supervisor; nobody carries it for him.
		if author.Role != Supervisor || w.by.ID != author.ID {
			return refuse(NotAllowed, "%s is for a supervisor to write", e.Kind), nil
		}
	}
	return w.jobObjection(e, content)
}

func (w *writer) author(id string) (*Person, error) {
	if p, asked := w.authors[id]; asked {
		return p, nil
	}
	p, err := personByID(w.ctx, w.tx, id)
	switch {
	case err == ErrNotFound:
		w.authors[id] = nil
	case err != nil:
		return nil, err
	default:
		w.authors[id] = &p
	}
	return w.authors[id], nil
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
	d, err := w.device(e.Device)
	if err != nil {
		return nil, err
	}
	if e.DeviceSeq > d.highest {
		// Nothing of this number or after it ever came, so only the one before can stand against it.
		before, _, err := w.onDevice(e.Device, e.DeviceSeq-1, d)
		if err != nil {
			return nil, err
		}
		if before != "" && before != e.Prev {
			return refuse(ChainBroken, "the entry before it on this device has another hash than prev says"), nil
		}
		return nil, nil
	}
	var hashes, prevs [3]string
	for i := range hashes {
		if hashes[i], prevs[i], err = w.onDevice(e.Device, e.DeviceSeq-1+int64(i), nil); err != nil {
			return nil, err
		}
	}
	switch {
	case hashes[1] != "":
		return refuse(DeviceSeqReused, "this device wrote another entry with number %d", e.DeviceSeq), nil
	case hashes[0] != "" && hashes[0] != e.Prev:
		return refuse(ChainBroken, "the entry before it on this device has another hash than prev says"), nil
	case hashes[2] != "" && prevs[2] != hash:
		return refuse(ChainBroken, "the entry after it on this device follows another one"), nil
	}
	return nil, nil
}

// onDevice finds a device's entry in the log; hash is "" when it is not there. last, if given, may know it.
func (w *writer) onDevice(device string, seq int64, last *deviceState) (hash, prev string, err error) {
	if last != nil && last.storedSeq == seq && seq > 0 {
		return last.storedHash, "", nil
	}
	err = w.row("SELECT hash, prev FROM entries WHERE device = ? AND device_seq = ?", device, seq).Scan(&hash, &prev)
	if err == sql.ErrNoRows {
		err = nil
	}
	return hash, prev, err
}

func (w *writer) jobObjection(e Entry, content any) (*Refusal, error) {
	if e.Job == "" {
		return refuse(UnknownJob, "the entry belongs to no job"), nil
	}
	job, err := w.job(e.Job)
	switch {
	case err == ErrNotFound && e.Kind == JobPlanned:
		return nil, nil
	case err == ErrNotFound:
		return refuse(UnknownJob, "no such job is known here"), nil
	case err != nil:
		return nil, err
	case !w.by.MaySee(job.Job):
		// In the same words as for a job that is not there: a stranger does not learn that it is.
		return refuse(UnknownJob, "no such job is known here"), nil
	case e.Kind == JobPlanned:
		return refuse(AlreadyPlanned, "the job is planned already"), nil
	case job.Stage == StageSignedOff:
		return refuse(SignedOff, "the job was signed off before this arrived"), nil
	}
	if e.Mount != "" {
		there, err := w.hasMount(job, e.Mount)
		if err != nil {
			return nil, err
		}
		if !there {
			return refuse(UnknownMount, "the job has no mount %q", clip(e.Mount)), nil
		}
	}
	if decision, is := content.(*Decision); is {
		if job.Stage != StageHandedIn {
			return refuse(NotHandedIn, "the job is not handed in, it is %s", job.Stage), nil
		}
		if decision.BaseSeq != job.StageSeq {
			return refuse(Stale, "the job has changed since: the decision was made on %d, the job stands at %d",
				decision.BaseSeq, job.StageSeq), nil
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

func (w *writer) store(e Entry, content any, raw, hash string) (int64, error) {
	seq := w.head.Seq + 1
	chain := ChainHash(w.head.Hash, seq, w.nowMs, w.by.ID, raw)
	if err := w.exec(`
		INSERT INTO entries (seq, id, device, device_seq, prev, hash, job, mount, kind, schema, author, uploader,
			received_ms, sent_ms, raw, chain)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		seq, e.ID, e.Device, e.DeviceSeq, e.Prev, hash, e.Job, orNull(e.Mount), e.Kind, e.Schema, e.Author, w.by.ID,
		w.nowMs, w.sentMs, raw, chain); err != nil {
		return 0, fmt.Errorf("entry: %w", err)
	}
	if err := w.entered(seq, e, content, hash, w.by.ID); err != nil {
		return 0, err
	}
	w.head = Head{Seq: seq, Hash: chain}
	if !among(e.Job, w.jobsGrown) {
		w.jobsGrown = append(w.jobsGrown, e.Job)
	}
	return seq, nil
}

// setApart keeps what cannot be in the log. The very same delivery is kept once.
func (w *writer) setApart(a arrival, why *Refusal) error {
	e := a.entry
	// The job is noted only where the uploader may see it, so that nobody fills the lists of strangers' jobs.
	noted := ""
	if e.Job != "" {
		switch job, err := w.job(e.Job); {
		case err == nil && w.by.MaySee(job.Job):
			noted = e.Job
		case err != nil && err != ErrNotFound:
			return err
		}
	}
	device, deviceSeq := e.Device, e.DeviceSeq
	if !isUUID(device, 0) || deviceSeq < 1 || device == w.desk {
		device, deviceSeq = "", 0
	}
	result, err := w.tx.ExecContext(w.ctx, `
		INSERT INTO quarantine (id, device, device_seq, job, code, reason, author, uploader, received_ms, sent_ms,
			claimed_hash, raw_hash, raw)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT (raw_hash, claimed_hash) DO NOTHING`,
		orNull(e.ID), orNull(device), sql.NullInt64{Int64: deviceSeq, Valid: deviceSeq > 0}, orNull(noted), why.Code,
		why.Reason, orNull(e.Author), w.by.ID, w.nowMs, w.sentMs, clipHash(a.Hash), a.hash, a.Raw)
	if err != nil {
		return fmt.Errorf("quarantine: %w", err)
	}
	if n, err := result.RowsAffected(); err != nil || n == 0 {
		return err
	}
	return w.setAside(noted, device, deviceSeq, a.hash, w.by.ID)
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
