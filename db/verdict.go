package db

import (
	"context"
	"database/sql"
)

// Verdict is what calc answered for a mount as its log stood at ReadingsSeq.
type Verdict struct {
	Job         string
	Mount       string
	ReadingsSeq int64
	Version     string
	Word        string // "" where lists are to show none
	Answer      string // JSON: a verdict or a problem
}

// VerdictOf is the stored verdict, ErrNotFound when there is none.
func (s *Store) VerdictOf(ctx context.Context, job, mount string) (Verdict, error) {
	v := Verdict{Job: job, Mount: mount}
	var word sql.NullString
	err := s.read.QueryRowContext(ctx,
		"SELECT readings_seq, version, word, answer FROM verdicts WHERE job = ? AND mount = ?", job, mount).
		Scan(&v.ReadingsSeq, &v.Version, &word, &v.Answer)
	if err == sql.ErrNoRows {
		return v, ErrNotFound
	}
	v.Word = word.String
	return v, err
}

// KeepVerdict stores a verdict, unless a later one of the same version is there.
func (s *Store) KeepVerdict(ctx context.Context, v Verdict) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `
			INSERT INTO verdicts (job, mount, readings_seq, version, word, answer) VALUES (?, ?, ?, ?, ?, ?)
			ON CONFLICT (job, mount) DO UPDATE
				SET readings_seq = excluded.readings_seq, version = excluded.version, word = excluded.word, answer = excluded.answer
				WHERE excluded.readings_seq >= verdicts.readings_seq OR excluded.version <> verdicts.version`,
			v.Job, v.Mount, v.ReadingsSeq, v.Version, orNull(v.Word), v.Answer)
		return err
	})
}

// Unjudged lists jobs that have no verdict of this version as their log stands, at most limit of them.
func (s *Store) Unjudged(ctx context.Context, version string, limit int) ([]string, error) {
	rows, err := s.read.QueryContext(ctx, `
		SELECT DISTINCT jobs.id FROM jobs JOIN mounts ON mounts.job = jobs.id
		LEFT JOIN verdicts v ON v.job = jobs.id AND v.mount = mounts.id
		WHERE v.job IS NULL OR v.readings_seq < jobs.readings_seq OR v.version <> ? LIMIT ?`, version, limit)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []string
	for rows.Next() {
		var id string
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		list = append(list, id)
	}
	return list, rows.Err()
}
