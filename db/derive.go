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

// Everything in this file follows from the log and the quarantine alone: no clock, no person, nothing that a replay
// could see differently. Rebuild calls the same functions.

// deriveFromEntry brings the derived tables up to date with an entry that is in the log.
//
// A decision names the stage_seq that it was made on. stage_seq is therefore the last entry that a supervisor must
// have seen before deciding: the one that made the stage, and, on a job that is handed in, whatever came later.
func deriveFromEntry(ctx context.Context, tx *sql.Tx, seq int64, e Entry) error {
	content, err := e.ReadBody()
	if err != nil {
		return err
	}
	if e.Kind == JobPlanned {
		return deriveJob(ctx, tx, seq, e, content.(*Plan))
	}
	job, err := jobByID(ctx, tx, e.Job)
	if err != nil {
		return fmt.Errorf("job %s of entry %d: %w", e.Job, seq, err)
	}
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
	_, err = tx.ExecContext(ctx, `
		UPDATE jobs SET stage = ?, stage_seq = ?, head_seq = ?, readings_seq = ?, entries = ?, remark = ?, handed_in_at = ?
		WHERE id = ?`,
		job.Stage, job.StageSeq, job.HeadSeq, job.ReadingsSeq, job.Entries, job.Remark, job.HandedInAt, job.ID)
	return err
}

func deriveJob(ctx context.Context, tx *sql.Tx, seq int64, e Entry, plan *Plan) error {
	if _, err := tx.ExecContext(ctx, `
		INSERT INTO jobs (id, site, title, crew, visit_on, stage, stage_seq, planned_seq, head_seq, readings_seq, entries,
			quarantined)
		VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?7, ?7, ?7, 1, (SELECT count(*) FROM quarantine WHERE job = ?1))`,
		e.Job, plan.Site, plan.Title, plan.Crew, plan.VisitOn, StageDrafted, seq); err != nil {
		return fmt.Errorf("job: %w", err)
	}
	for i, m := range plan.Mounts {
		if _, err := tx.ExecContext(ctx, "INSERT INTO mounts (job, place, id, name) VALUES (?, ?, ?, ?)",
			e.Job, i, m.ID, m.Name); err != nil {
			return fmt.Errorf("mount: %w", err)
		}
	}
	return nil
}

func deriveFromQuarantine(ctx context.Context, tx *sql.Tx, job, device string, deviceSeq int64, rawHash, uploader string) error {
	if job != "" {
		if _, err := tx.ExecContext(ctx, "UPDATE jobs SET quarantined = quarantined + 1 WHERE id = ?", job); err != nil {
			return err
		}
	}
	if device == "" {
		return nil
	}
	return deriveReceipt(ctx, tx, device, deviceSeq, rawHash, uploader, 0)
}

// deriveReceipt notes that number deviceSeq of a device has arrived; seq 0 = set apart. What is in the log stands
// before what was set apart under the same number, whichever came first.
func deriveReceipt(ctx context.Context, tx *sql.Tx, device string, deviceSeq int64, hash, uploader string, seq int64) error {
	if _, err := tx.ExecContext(ctx, `
		INSERT INTO receipts (device, device_seq, hash, uploader, seq) VALUES (?, ?, ?, ?, ?)
		ON CONFLICT (device, device_seq) DO UPDATE
			SET hash = excluded.hash, uploader = excluded.uploader, seq = excluded.seq
			WHERE receipts.seq IS NULL AND excluded.seq IS NOT NULL`,
		device, deviceSeq, hash, uploader, sql.NullInt64{Int64: seq, Valid: seq != 0}); err != nil {
		return fmt.Errorf("receipt: %w", err)
	}
	if _, err := tx.ExecContext(ctx, `
		INSERT INTO devices (device, contiguous_seq, contiguous_hash, highest_seq) VALUES (?1, 0, '', ?2)
		ON CONFLICT (device) DO UPDATE SET highest_seq = max(highest_seq, ?2)`, device, deviceSeq); err != nil {
		return fmt.Errorf("device: %w", err)
	}
	var contiguous int64
	if err := tx.QueryRowContext(ctx, "SELECT contiguous_seq FROM devices WHERE device = ?", device).Scan(&contiguous); err != nil {
		return err
	}
	last, lastHash := contiguous, ""
	if deviceSeq == contiguous || deviceSeq == contiguous+1 {
		// From here on: this one, and those after it that arrived before it. One at a time, since reading on while
		// writing would hold the only writing connection.
		for next := deviceSeq; ; next++ {
			var h string
			err := tx.QueryRowContext(ctx, "SELECT hash FROM receipts WHERE device = ? AND device_seq = ?", device, next).Scan(&h)
			if err == sql.ErrNoRows {
				break
			}
			if err != nil {
				return err
			}
			last, lastHash = next, h
		}
		if _, err := tx.ExecContext(ctx, "UPDATE devices SET contiguous_seq = ?, contiguous_hash = ? WHERE device = ?",
			last, lastHash, device); err != nil {
			return err
		}
	}
	return nil
}
