package db

import (
	"context"
	"database/sql"
	"fmt"
)

// The stages of a job.
const (
	StageDrafted   = "drafted"
	StageIssued    = "issued"
	StageUnderWay  = "under way"
	StageHandedIn  = "handed in"
	StageSignedOff = "signed off"
	StageSentBack  = "sent back"
)

// deriver brings the derived tables up to date within one transaction. What it makes follows from the log and the
// quarantine alone: no clock, no person, nothing that a replay could see differently; Rebuild uses it too. It holds
// what it touched in memory and writes each row once, in flush.
type deriver struct {
	ctx        context.Context
	tx         *sql.Tx
	statements map[string]*sql.Stmt
	jobs       map[string]*jobState
	devices    map[string]*deviceState
}

// jobState is a job's row as it stands within the transaction.
type jobState struct {
	Job
	changed bool
	mounts  map[string]bool // nil: not asked yet
}

// deviceState is a device's row as it stands within the transaction.
type deviceState struct {
	contiguous     int64
	contiguousHash string
	highest        int64
	changed        bool
	people         map[string]bool
	// The entry that was last put into the log within this transaction; 0 for none.
	storedSeq  int64
	storedHash string
}

// newDeriver works within a transaction that ends with its own context; its statements do not watch the context again,
// which would cost the driver a goroutine for each.
func newDeriver(ctx context.Context, tx *sql.Tx) *deriver {
	return &deriver{ctx: context.WithoutCancel(ctx), tx: tx, statements: map[string]*sql.Stmt{}, jobs: map[string]*jobState{}, devices: map[string]*deviceState{}}
}

// statement prepares a query once a transaction; the transaction closes it.
func (d *deriver) statement(query string) (*sql.Stmt, error) {
	if s, there := d.statements[query]; there {
		return s, nil
	}
	s, err := d.tx.PrepareContext(d.ctx, query)
	if err != nil {
		return nil, err
	}
	d.statements[query] = s
	return s, nil
}

func (d *deriver) exec(query string, args ...any) error {
	s, err := d.statement(query)
	if err != nil {
		return err
	}
	_, err = s.ExecContext(d.ctx, args...)
	return err
}

// scanner is one row to be read.
type scanner interface{ Scan(into ...any) error }

type failed struct{ err error }

func (f failed) Scan(...any) error { return f.err }

func (d *deriver) row(query string, args ...any) scanner {
	s, err := d.statement(query)
	if err != nil {
		return failed{err}
	}
	return s.QueryRowContext(d.ctx, args...)
}

func (d *deriver) job(id string) (*jobState, error) {
	if j, there := d.jobs[id]; there {
		return j, nil
	}
	job, err := jobByID(d.ctx, d.tx, id)
	if err != nil {
		return nil, err
	}
	d.jobs[id] = &jobState{Job: job}
	return d.jobs[id], nil
}

func (d *deriver) hasMount(j *jobState, mount string) (bool, error) {
	if j.mounts == nil {
		rows, err := d.tx.QueryContext(d.ctx, "SELECT id FROM mounts WHERE job = ?", j.ID)
		if err != nil {
			return false, err
		}
		ids, err := collect(rows, func(s *string) []any { return []any{s} })
		if err != nil {
			return false, err
		}
		j.mounts = map[string]bool{}
		for _, id := range ids {
			j.mounts[id] = true
		}
	}
	return j.mounts[mount], nil
}

func (d *deriver) device(id string) (*deviceState, error) {
	if s, there := d.devices[id]; there {
		return s, nil
	}
	s := &deviceState{people: map[string]bool{}}
	err := d.row("SELECT contiguous_seq, contiguous_hash, highest_seq FROM devices WHERE device = ?", id).
		Scan(&s.contiguous, &s.contiguousHash, &s.highest)
	if err != nil && err != sql.ErrNoRows {
		return nil, err
	}
	d.devices[id] = s
	return s, nil
}

// entered takes note of an entry that was put into the log.
//
// A decision names the stage_seq that it was made on. stage_seq is therefore the last entry that a supervisor must
// have seen before deciding: the one that made the stage, and, on a job that is handed in, whatever came later.
func (d *deriver) entered(seq int64, e Entry, content any, hash, uploader string) error {
	if err := d.arrived(e.Device, e.DeviceSeq, hash, uploader, true); err != nil {
		return err
	}
	if e.Kind == JobPlanned {
		return d.planned(seq, e, content.(*Plan))
	}
	job, err := d.job(e.Job)
	if err != nil {
		return fmt.Errorf("job %s of entry %d: %w", e.Job, seq, err)
	}
	job.changed = true
	job.HeadSeq = seq
	job.Entries++
	stage := job.Stage
	switch e.Kind {
	case ReadingTaken, ReadingWithdrawn, BoltMoved, PowerControlConfirmed, FiguresRead, ObstacleWasNoted:
		// What is laid over the sheet: whatever was computed from it before is about less than is known now.
		job.ReadingsSeq = seq
	}
	switch e.Kind {
	case JobIssued:
		if stage == StageDrafted {
			stage = StageIssued
		}
	case CautionConfirmed, ReadingTaken, BoltMoved, LevelStepped, FiguresRead:
		if stage == StageIssued || stage == StageSentBack {
			stage = StageUnderWay
		}
	case JobHandedIn:
		stage = StageHandedIn
		job.Remark = content.(*HandedIn).Remark
		job.HandedInAt = &e.At
	case JobSentBack:
		stage = StageSentBack
		job.Remark = content.(*Decision).Remark
	case JobSignedOff:
		stage = StageSignedOff
		job.Remark = content.(*Decision).Remark
	}
	if stage != job.Stage || stage == StageHandedIn {
		job.Stage, job.StageSeq = stage, seq
	}
	return nil
}

// planned makes the job's row at once: its mounts point to it.
func (d *deriver) planned(seq int64, e Entry, plan *Plan) error {
	job := &jobState{mounts: map[string]bool{}, Job: Job{ID: e.Job, Site: plan.Site, Title: plan.Title, Crew: plan.Crew,
		VisitOn: plan.VisitOn, Stage: StageDrafted, StageSeq: seq, PlannedSeq: seq, HeadSeq: seq, ReadingsSeq: seq, Entries: 1}}
	if err := d.row("SELECT count(*) FROM quarantine WHERE job = ?", e.Job).Scan(&job.Quarantined); err != nil {
		return err
	}
	if err := d.exec(`
		INSERT INTO jobs (id, site, title, crew, visit_on, stage, stage_seq, planned_seq, head_seq, readings_seq, entries,
			quarantined)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		job.ID, job.Site, job.Title, job.Crew, job.VisitOn, job.Stage, seq, seq, seq, seq, job.Entries, job.Quarantined); err != nil {
		return fmt.Errorf("job: %w", err)
	}
	for i, m := range plan.Mounts {
		if err := d.exec("INSERT INTO mounts (job, place, id, name) VALUES (?, ?, ?, ?)", e.Job, i, m.ID, m.Name); err != nil {
			return fmt.Errorf("mount: %w", err)
		}
		job.mounts[m.ID] = true
	}
	d.jobs[e.Job] = job
	return nil
}

// setAside takes note of an entry that was put into quarantine; job and device are "" where they are not known.
func (d *deriver) setAside(job, device string, deviceSeq int64, hash, uploader string) error {
	if job != "" {
		j, err := d.job(job)
		if err != nil {
			return err
		}
		j.Quarantined++
		j.changed = true
	}
	if device == "" {
		return nil
	}
	return d.arrived(device, deviceSeq, hash, uploader, false)
}

// arrived takes note that a number of a device is here, in the log or set apart. What is in the log stands before what
// was set apart under the same number, and of several that were set apart stands the first.
func (d *deriver) arrived(device string, seq int64, hash, uploader string, inLog bool) error {
	s, err := d.device(device)
	if err != nil {
		return err
	}
	s.changed = true
	s.people[uploader] = true
	if inLog {
		s.storedSeq, s.storedHash = seq, hash
	}
	s.highest = max(s.highest, seq)
	switch {
	case seq == s.contiguous && inLog:
		s.contiguousHash = hash
	case seq == s.contiguous+1:
		s.contiguous, s.contiguousHash = seq, hash
		// And those after it that were here before it.
		for s.contiguous < s.highest {
			next := ""
			err := d.row(`
				SELECT hash FROM (
					SELECT hash, 0 AS n FROM entries WHERE device = ?1 AND device_seq = ?2
					UNION ALL SELECT raw_hash, n FROM quarantine WHERE device = ?1 AND device_seq = ?2)
				ORDER BY n LIMIT 1`, device, s.contiguous+1).Scan(&next)
			if err == sql.ErrNoRows {
				break
			}
			if err != nil {
				return err
			}
			s.contiguous, s.contiguousHash = s.contiguous+1, next
		}
	}
	return nil
}

// flush writes what changed. Before it the tables are behind; nobody sees that, the transaction is not over.
func (d *deriver) flush() error {
	for id, j := range d.jobs {
		if !j.changed {
			continue
		}
		j.changed = false
		if err := d.exec(`
			UPDATE jobs SET stage = ?, stage_seq = ?, head_seq = ?, readings_seq = ?, entries = ?, quarantined = ?, remark = ?,
				handed_in_at = ? WHERE id = ?`,
			j.Stage, j.StageSeq, j.HeadSeq, j.ReadingsSeq, j.Entries, j.Quarantined, j.Remark, j.HandedInAt, id); err != nil {
			return fmt.Errorf("job: %w", err)
		}
	}
	for id, s := range d.devices {
		if !s.changed {
			continue
		}
		s.changed = false
		if err := d.exec(`
			INSERT INTO devices (device, contiguous_seq, contiguous_hash, highest_seq) VALUES (?, ?, ?, ?)
			ON CONFLICT (device) DO UPDATE SET contiguous_seq = excluded.contiguous_seq,
				contiguous_hash = excluded.contiguous_hash, highest_seq = excluded.highest_seq`,
			id, s.contiguous, s.contiguousHash, s.highest); err != nil {
			return fmt.Errorf("device: %w", err)
		}
		for person := range s.people {
			if err := d.exec("INSERT INTO device_people (person, device) VALUES (?, ?) ON CONFLICT DO NOTHING", person, id); err != nil {
				return fmt.Errorf("device: %w", err)
			}
		}
	}
	return nil
}
