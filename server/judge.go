package server

import (
	"context"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"log/slog"
	"strconv"
	"strings"
	"time"

	"crossplumb/calc/wire"
	"crossplumb/db"
)

// rawJSON is JSON that is passed on as it stands.
type rawJSON = jsontext.Value

func itoa(i int) string { return strconv.Itoa(i) }

// trimSheet takes the name that a folded sheet has at the door off a field.
func trimSheet(field string) string { return strings.TrimPrefix(field, "sheet.") }

// judgedMount is a mount with its readings laid over the plan, and what calc says of it.
type judgedMount struct {
	ID      string       `json:"id"`
	Name    string       `json:"name"`
	Sheet   rawJSON      `json:"sheet"`
	Verdict rawJSON      `json:"verdict"`
	Problem *calcProblem `json:"problem"`
}

type calcProblem struct {
	Code    string `json:"code"`
	Field   string `json:"field"`
	Message string `json:"message"`
}

// mountsOf folds and judges every mount of a job. A verdict is kept under the last entry that can change it and under
// the version of the calculations, so it is computed once.
func (s *Server) mountsOf(ctx context.Context, job db.Job, plan db.Plan, log []db.LogEntry) ([]judgedMount, error) {
	byMount, err := readingsByMount(log)
	if err != nil {
		return nil, err
	}
	list := make([]judgedMount, 0, len(plan.Mounts))
	for _, m := range plan.Mounts {
		judged := judgedMount{ID: m.ID, Name: m.Name, Sheet: rawJSON(m.Sheet), Verdict: rawJSON("null")}
		folded, p := fold(m.Sheet, byMount[m.ID])
		if p == nil {
			judged.Sheet = folded
			judged.Verdict, p = s.verdict(ctx, job, m.ID, folded)
		}
		if p != nil {
			judged.Verdict = rawJSON("null")
			judged.Problem = &calcProblem{Code: p.Code, Field: trimSheet(p.Field), Message: p.Message}
		}
		list = append(list, judged)
	}
	return list, nil
}

// readingsByMount sorts a job's log into what can change the verdict of each mount, in the order in which it is read.
func readingsByMount(log []db.LogEntry) (map[string][]db.Entry, error) {
	entries := make([]db.Entry, 0, len(log))
	for _, l := range log {
		e, err := db.ReadEntry(l.Raw)
		if err != nil {
			return nil, err
		}
		if laidOverSheet(e.Kind) {
			entries = append(entries, e)
		}
	}
	byMount := map[string][]db.Entry{}
	var everywhere []db.Entry
	for _, e := range db.InDeviceOrder(entries) {
		if e.Mount == "" { // a withdrawal may come without one; it names its reading by the entry's id
			everywhere = append(everywhere, e)
			continue
		}
		byMount[e.Mount] = append(byMount[e.Mount], e)
	}
	for mount := range byMount {
		byMount[mount] = append(byMount[mount], everywhere...)
	}
	return byMount, nil
}

// JudgeMount folds a job's log over one mount's planned sheet and asks calc for the verdict, as GET /api/jobs/:id does.
func JudgeMount(mount string, sheet []byte, log []db.LogEntry) ([]byte, *wire.Problem) {
	byMount, err := readingsByMount(log)
	if err != nil {
		return nil, &wire.Problem{Code: "malformed", Message: "an entry of the log cannot be read"}
	}
	folded, p := fold(sheet, byMount[mount])
	if p != nil {
		return nil, p
	}
	return wire.Reckon("mount.verdict", folded)
}

// wordOf reads the word that a list shows for a mount: "" where there is no verdict, and also where nothing was read
// yet and the plan alone was judged.
func wordOf(verdict rawJSON) string {
	var head *struct {
		Word   string `json:"word"`
		Judged string `json:"judged"`
	}
	if json.Unmarshal(verdict, &head) != nil || head == nil || head.Judged == "planned" {
		return ""
	}
	return head.Word
}

// verdict takes the stored answer or asks calc. A store that cannot be read or written costs time, not the answer.
func (s *Server) verdict(ctx context.Context, job db.Job, mount string, sheet []byte) (rawJSON, *wire.Problem) {
	kept, err := s.cfg.Store.VerdictOf(ctx, job.ID, mount)
	if err == nil && kept.ReadingsSeq == job.ReadingsSeq && kept.Version == wire.Version {
		var p calcProblem
		if json.Unmarshal([]byte(kept.Answer), &p) == nil && p.Code != "" {
			return nil, &wire.Problem{Code: p.Code, Field: p.Field, Message: p.Message}
		}
		return rawJSON(kept.Answer), nil
	}
	if err != nil && !errors.Is(err, db.ErrNotFound) {
		s.cfg.Log.Warn("stored verdict not read", slog.String("job", job.ID), slog.String("error", err.Error()))
	}
	out, p := wire.Reckon("mount.verdict", sheet)
	if p != nil && (p.Code == "internal" || p.Code == "unknown_operation") {
		return nil, p // a fault of this program: not kept, the next version may do better
	}
	keep := db.Verdict{Job: job.ID, Mount: mount, ReadingsSeq: job.ReadingsSeq, Version: wire.Version, Answer: string(out)}
	if p != nil {
		keep.Answer = string(p.JSON())
	} else {
		keep.Word = wordOf(out)
	}
	if err := s.cfg.Store.KeepVerdict(ctx, keep); err != nil {
		s.cfg.Log.Warn("verdict not kept", slog.String("job", job.ID), slog.String("error", err.Error()))
	}
	return out, p
}

// judge works through jobs whose log grew since they were last judged, one after another, so that the list of jobs
// shows words without computing them.
type judge struct {
	server *Server
	wake   chan struct{}
	done   chan struct{}
}

// nudge tells that some log grew; it never waits.
func (j *judge) nudge() {
	select {
	case j.wake <- struct{}{}:
	default:
	}
}

// settle is how long the judge lets a batch be followed by the next before it computes.
const settle = 200 * time.Millisecond

func (j *judge) run() {
	defer close(j.done)
	for {
		j.catchUp()
		select {
		case <-j.server.root.Done():
			return
		case <-j.wake:
		}
		select {
		case <-j.server.root.Done():
			return
		case <-time.After(settle):
		}
	}
}

// judgeAtOnce is how many jobs are listed before they are worked on.
const judgeAtOnce = 50

func (j *judge) catchUp() {
	tried := map[string]bool{}
	for {
		ctx, done := j.server.patience()
		jobs, err := j.server.cfg.Store.Unjudged(ctx, wire.Version, judgeAtOnce)
		done()
		if err != nil {
			if j.server.root.Err() == nil {
				j.server.cfg.Log.Warn("jobs to judge not listed", slog.String("error", err.Error()))
			}
			return
		}
		fresh := false
		for _, id := range jobs {
			if tried[id] || j.server.root.Err() != nil {
				continue
			}
			tried[id], fresh = true, true
			if err := j.judgeJob(id); err != nil && j.server.root.Err() == nil {
				j.server.cfg.Log.Warn("job not judged", slog.String("job", id), slog.String("error", err.Error()))
			}
		}
		if !fresh {
			return
		}
	}
}

func (j *judge) judgeJob(id string) error {
	ctx, done := j.server.patience()
	defer done()
	_, err := j.server.jobPage(ctx, db.Person{Role: db.Supervisor}, id)
	return err
}

func (j *judge) wait() {
	select {
	case <-j.done:
	case <-time.After(time.Second): // it was never started, or a long verdict is under way; nothing of it is lost
	}
}
