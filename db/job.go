package db

import (
	"context"
	"database/sql"
	"fmt"
	"strings"
	"time"
)

// Job is one row of the list of jobs.
type Job struct {
	ID          string
	Site        string
	Title       string
	Crew        string
	VisitOn     *string
	Stage       string
	StageSeq    int64 // what a decision names as its base
	PlannedSeq  int64
	HeadSeq     int64
	ReadingsSeq int64 // the last entry that can change a verdict
	Entries     int64
	Quarantined int64
	Remark      *string
	HandedInAt  *string
	Mounts      []Mount
	// Words holds the last stored word of each mount, by mount id.
	Words map[string]string
}

// Mount is a mount's id and name.
type Mount struct{ ID, Name string }

const jobColumns = `id, site, title, crew, visit_on, stage, stage_seq, planned_seq, head_seq, readings_seq, entries,
	quarantined, remark, handed_in_at`

func scanJob(row interface{ Scan(...any) error }) (Job, error) {
	var j Job
	err := row.Scan(&j.ID, &j.Site, &j.Title, &j.Crew, &j.VisitOn, &j.Stage, &j.StageSeq, &j.PlannedSeq, &j.HeadSeq,
		&j.ReadingsSeq, &j.Entries, &j.Quarantined, &j.Remark, &j.HandedInAt)
	return j, err
}

func jobByID(ctx context.Context, q queryer, id string) (Job, error) {
	j, err := scanJob(q.QueryRowContext(ctx, "SELECT "+jobColumns+" FROM jobs WHERE id = ?", id))
	if err == sql.ErrNoRows {
		return j, ErrNotFound
	}
	return j, err
}

// JobsAsked says which jobs are wanted.
type JobsAsked struct {
	By    Person
	Stage string // "" = all
}

// maxJobs bounds one list. A crew never has that many open jobs; a desk that does asks by stage.
const maxJobs = 2000

// Jobs lists what this person may see, the latest first.
func (s *Store) Jobs(ctx context.Context, asked JobsAsked) ([]Job, error) {
	var where []string
	var args []any
	if asked.By.Role != Supervisor {
		where = append(where, "crew = ?", "stage <> ?")
		args = append(args, asked.By.Crew, StageDrafted)
	}
	if asked.Stage != "" {
		where = append(where, "stage = ?")
		args = append(args, asked.Stage)
	}
	query := "SELECT " + jobColumns + " FROM jobs"
	if len(where) > 0 {
		query += " WHERE " + strings.Join(where, " AND ")
	}
	rows, err := s.read.QueryContext(ctx, query+fmt.Sprintf(" ORDER BY head_seq DESC LIMIT %d", maxJobs), args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []Job
	for rows.Next() {
		j, err := scanJob(rows)
		if err != nil {
			return nil, err
		}
		list = append(list, j)
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	rows.Close()
	for i := range list {
		if err := s.fillMounts(ctx, &list[i]); err != nil {
			return nil, err
		}
	}
	return list, nil
}

// Job answers for one job; ErrNotFound also where the person may not see it.
func (s *Store) Job(ctx context.Context, by Person, id string) (Job, error) {
	j, err := jobByID(ctx, s.read, id)
	if err != nil {
		return j, err
	}
	if !by.MaySee(j) {
		return Job{}, ErrNotFound
	}
	return j, s.fillMounts(ctx, &j)
}

func (s *Store) fillMounts(ctx context.Context, j *Job) error {
	rows, err := s.read.QueryContext(ctx, `
		SELECT mounts.id, mounts.name, verdicts.word FROM mounts
		LEFT JOIN verdicts ON verdicts.job = mounts.job AND verdicts.mount = mounts.id
		WHERE mounts.job = ? ORDER BY mounts.place`, j.ID)
	if err != nil {
		return err
	}
	defer rows.Close()
	j.Words = map[string]string{}
	for rows.Next() {
		var m Mount
		var word sql.NullString
		if err := rows.Scan(&m.ID, &m.Name, &word); err != nil {
			return err
		}
		j.Mounts = append(j.Mounts, m)
		if word.Valid {
			j.Words[m.ID] = word.String
		}
	}
	return rows.Err()
}

// LogEntry is an entry as it stands in the log.
type LogEntry struct {
	Seq        int64
	ReceivedAt time.Time
	SentAt     *time.Time // the device's clock when it sent, where it said so
	AuthorName string
	// UploaderName is who was signed in where it came from: an entry may be carried for its author.
	UploaderName string
	Raw          string
}

// JobLog is the log of one job up to upTo, in order of seq.
func (s *Store) JobLog(ctx context.Context, job string, upTo int64) ([]LogEntry, error) {
	return s.logRows(ctx, `
		SELECT e.seq, e.received_ms, e.sent_ms, coalesce(p.name, ''), coalesce(u.name, ''), e.raw
		FROM entries e LEFT JOIN people p ON p.id = e.author LEFT JOIN people u ON u.id = e.uploader WHERE e.job = ? AND e.seq <= ? ORDER BY e.seq`, job, upTo)
}

// Plan is the job's plan and the text it stands in.
func (s *Store) Plan(ctx context.Context, job string) (Plan, error) {
	var raw string
	err := s.read.QueryRowContext(ctx,
		"SELECT raw FROM entries WHERE seq = (SELECT planned_seq FROM jobs WHERE id = ?)", job).Scan(&raw)
	if err == sql.ErrNoRows {
		return Plan{}, ErrNotFound
	}
	if err != nil {
		return Plan{}, err
	}
	e, err := ReadEntry(raw)
	if err != nil {
		return Plan{}, fmt.Errorf("plan of job %s: %w", job, err)
	}
	content, err := e.ReadBody()
	if err != nil {
		return Plan{}, fmt.Errorf("plan of job %s: %w", job, err)
	}
	return *content.(*Plan), nil
}

// EntriesAfter is the log after a cursor, as far as this person may see it. next is where to go on: it moves past
// entries of other crews too, so that nobody reads them again and again.
func (s *Store) EntriesAfter(ctx context.Context, by Person, after int64, limit int) (list []LogEntry, next int64, err error) {
	// The end is read first: an entry that comes in between is then left for the next page instead of skipped.
	end, err := head(ctx, s.read)
	if err != nil {
		return nil, after, err
	}
	if by.Role == Supervisor {
		list, err = s.logRows(ctx, `
			SELECT e.seq, e.received_ms, e.sent_ms, coalesce(p.name, ''), coalesce(u.name, ''), e.raw
			FROM entries e LEFT JOIN people p ON p.id = e.author LEFT JOIN people u ON u.id = e.uploader
			WHERE e.seq > ? AND e.seq <= ? ORDER BY e.seq LIMIT ?`, after, end.Seq, limit)
	} else {
		list, err = s.logRows(ctx, `
			SELECT e.seq, e.received_ms, e.sent_ms, coalesce(p.name, ''), coalesce(u.name, ''), e.raw
			FROM entries e JOIN jobs j ON j.id = e.job
			LEFT JOIN people p ON p.id = e.author LEFT JOIN people u ON u.id = e.uploader
			WHERE e.seq > ? AND e.seq <= ? AND j.crew = ? AND j.stage <> 'drafted' ORDER BY e.seq LIMIT ?`,
			after, end.Seq, by.Crew, limit)
	}
	if err != nil {
		return nil, after, err
	}
	switch {
	case len(list) == limit:
		next = list[len(list)-1].Seq
	case end.Seq > after:
		next = end.Seq
	default:
		next = after
	}
	return list, next, nil
}

func (s *Store) logRows(ctx context.Context, query string, args ...any) ([]LogEntry, error) {
	rows, err := s.read.QueryContext(ctx, query, args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []LogEntry
	for rows.Next() {
		var e LogEntry
		var received int64
		var sent sql.NullInt64
		if err := rows.Scan(&e.Seq, &received, &sent, &e.AuthorName, &e.UploaderName, &e.Raw); err != nil {
			return nil, err
		}
		e.ReceivedAt = timeOf(received)
		if sent.Valid {
			at := timeOf(sent.Int64)
			e.SentAt = &at
		}
		list = append(list, e)
	}
	return list, rows.Err()
}

// Apart is an entry in quarantine.
type Apart struct {
	N          int64
	ID         string
	Job        string
	Code       string
	Reason     string
	ReceivedAt time.Time
	AuthorName string
	Uploader   string
	Raw        string
	// Settled: the same text is in the log by now; it was sent again after what stood against it was gone.
	Settled bool
}

// Quarantine lists what was set apart, the latest first.
func (s *Store) Quarantine(ctx context.Context, limit int) ([]Apart, error) {
	rows, err := s.read.QueryContext(ctx, `
		SELECT q.n, coalesce(q.id, ''), coalesce(q.job, ''), q.code, q.reason, q.received_ms, coalesce(a.name, ''),
			coalesce(u.name, ''), q.raw, EXISTS (SELECT 1 FROM entries e WHERE e.id = q.id AND e.hash = q.raw_hash)
		FROM quarantine q LEFT JOIN people a ON a.id = q.author LEFT JOIN people u ON u.id = q.uploader
		ORDER BY q.n DESC LIMIT ?`, limit)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []Apart
	for rows.Next() {
		var a Apart
		var received int64
		if err := rows.Scan(&a.N, &a.ID, &a.Job, &a.Code, &a.Reason, &received, &a.AuthorName, &a.Uploader, &a.Raw, &a.Settled); err != nil {
			return nil, err
		}
		a.ReceivedAt = timeOf(received)
		list = append(list, a)
	}
	return list, rows.Err()
}

// InDeviceOrder puts a job's log into the order in which it is to be read: by arrival, but each device's entries by
// their own numbers, so that a batch that came late does not make a bolt move after the reading that followed it.
func InDeviceOrder(entries []Entry) []Entry {
	places := map[string][]int{}
	for i, e := range entries {
		places[e.Device] = append(places[e.Device], i)
	}
	ordered := make([]Entry, len(entries))
	for _, at := range places {
		own := make([]Entry, len(at))
		for i, place := range at {
			own[i] = entries[place]
		}
		// Insertion sort: a device's entries are nearly always in order already.
		for i := 1; i < len(own); i++ {
			for k := i; k > 0 && own[k-1].DeviceSeq > own[k].DeviceSeq; k-- {
				own[k-1], own[k] = own[k], own[k-1]
			}
		}
		for i, place := range at {
			ordered[place] = own[i]
		}
	}
	return ordered
}
