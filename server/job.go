package server

import (
	"context"
	"net/http"
	"net/url"
	"strings"

	"github.com/gofiber/fiber/v2"
	"github.com/google/uuid"

	"crossplumb/db"
)

type mountName struct {
	ID   string `json:"id"`
	Name string `json:"name"`
}

type jobBody struct {
	ID         string            `json:"id"`
	Site       string            `json:"site"`
	Title      string            `json:"title"`
	Crew       string            `json:"crew"`
	Stage      string            `json:"stage"`
	StageSeq   int64             `json:"stage_seq"`
	VisitOn    *string           `json:"visit_on"`
	Mounts     []mountName       `json:"mounts"`
	HeadSeq    int64             `json:"head_seq"`
	Entries    int64             `json:"entries"`
	Remark     *string           `json:"remark"`
	HandedInAt *string           `json:"handed_in_at"`
	Words      map[string]string `json:"words"`
}

func summaryOf(j db.Job) jobBody {
	b := jobBody{ID: j.ID, Site: j.Site, Title: j.Title, Crew: j.Crew, Stage: j.Stage, StageSeq: j.StageSeq,
		VisitOn: j.VisitOn, Mounts: []mountName{}, HeadSeq: j.HeadSeq, Entries: j.Entries, Remark: j.Remark,
		HandedInAt: j.HandedInAt, Words: j.Words}
	for _, m := range j.Mounts {
		b.Mounts = append(b.Mounts, mountName(m))
	}
	return b
}

var stages = []string{db.StageDrafted, db.StageIssued, db.StageUnderWay, db.StageHandedIn, db.StageSignedOff, db.StageSentBack}

// GET /api/jobs?stage= lists the jobs that the person may see.
func (s *Server) listJobs(c *fiber.Ctx) error {
	if err := knownQuery(c, "stage"); err != nil {
		return err
	}
	asked := db.JobsAsked{By: person(c), Stage: c.Query("stage")}
	if asked.Stage != "" && !contains(stages, asked.Stage) {
		return outOfRange("stage", "a stage is one of: "+strings.Join(stages, ", "))
	}
	ctx, done := s.patience()
	defer done()
	list, err := s.cfg.Store.Jobs(ctx, asked)
	if err != nil {
		return err
	}
	out := make([]jobBody, 0, len(list))
	for _, j := range list {
		out = append(out, summaryOf(j))
	}
	return answer(c, http.StatusOK, map[string]any{"jobs": out})
}

func contains(list []string, s string) bool {
	for _, one := range list {
		if one == s {
			return true
		}
	}
	return false
}

type jobPageBody struct {
	Job         jobBody       `json:"job"`
	Plan        db.Plan       `json:"plan"`
	Entries     []entryBody   `json:"entries"`
	Mounts      []judgedMount `json:"mounts"`
	Quarantined int64         `json:"quarantined"`
}

// GET /api/jobs/:id is everything about one job: plan, log, and each mount judged.
func (s *Server) showJob(c *fiber.Ctx) error {
	if err := knownQuery(c); err != nil {
		return err
	}
	id, err := url.PathUnescape(c.Params("id"))
	if err != nil || !db.IsID(id) {
		return db.ErrNotFound
	}
	ctx, done := s.patience()
	defer done()
	page, err := s.jobPage(ctx, person(c), id)
	if err != nil {
		return err
	}
	return answer(c, http.StatusOK, page)
}

func (s *Server) jobPage(ctx context.Context, by db.Person, id string) (jobPageBody, error) {
	// The log is read up to what the row says: one entry more would keep a verdict under the wrong number.
	job, err := s.cfg.Store.Job(ctx, by, id)
	if err != nil {
		return jobPageBody{}, err
	}
	plan, err := s.cfg.Store.Plan(ctx, id)
	if err != nil {
		return jobPageBody{}, err
	}
	log, err := s.cfg.Store.JobLog(ctx, id, job.HeadSeq)
	if err != nil {
		return jobPageBody{}, err
	}
	mounts, err := s.mountsOf(ctx, job, plan, log)
	if err != nil {
		return jobPageBody{}, err
	}
	summary := summaryOf(job)
	for _, m := range mounts {
		if word := wordOf(m.Verdict); word != "" {
			summary.Words[m.ID] = word
		}
	}
	return jobPageBody{Job: summary, Plan: plan, Entries: entriesOf(log), Mounts: mounts, Quarantined: job.Quarantined}, nil
}

// POST /api/jobs plans a job and issues it to its crew. The same request again does nothing and is answered alike.
func (s *Server) issueJob(c *fiber.Ctx) error {
	var in struct {
		ID        *string            `json:"id"`
		Site      *string            `json:"site"`
		Title     *string            `json:"title"`
		Crew      *string            `json:"crew"`
		VisitOn   *string            `json:"visit_on"`
		Access    *string            `json:"access"`
		Emergency *string            `json:"emergency"`
		LatDeg    *float64           `json:"lat_deg"`
		LonDeg    *float64           `json:"lon_deg"`
		Mounts    *[]db.PlannedMount `json:"mounts"`
	}
	if err := decode(c, maxAPIBody, &in); err != nil {
		return err
	}
	for _, field := range []struct {
		name string
		text *string
	}{{"id", in.ID}, {"site", in.Site}, {"title", in.Title}, {"crew", in.Crew}} {
		if field.text == nil || strings.TrimSpace(*field.text) == "" {
			return missing(field.name)
		}
	}
	if !db.IsID(*in.ID) {
		return outOfRange("id", "id is a UUID of version 7 in lower case, made by whoever plans")
	}
	if in.Mounts == nil || len(*in.Mounts) == 0 {
		return missing("mounts")
	}
	plan := db.Plan{Site: *in.Site, Title: *in.Title, Crew: *in.Crew, VisitOn: in.VisitOn, Access: in.Access,
		Emergency: in.Emergency, LatDeg: in.LatDeg, LonDeg: in.LonDeg, Mounts: *in.Mounts}
	if p := checkSheets(plan); p != nil {
		return p
	}
	ctx, done := s.patience()
	defer done()
	// The entries' ids follow from the job's, so that a repeated request meets its own entries.
	receipt, err := s.cfg.Store.AppendDesk(ctx, person(c), []db.DeskEntry{
		{ID: entryIDFor(*in.ID, db.JobPlanned), Job: *in.ID, Kind: db.JobPlanned, Body: plan},
		{ID: entryIDFor(*in.ID, db.JobIssued), Job: *in.ID, Kind: db.JobIssued, Body: struct{}{}},
	})
	if err != nil {
		return err
	}
	s.judge.nudge()
	job, err := s.cfg.Store.Job(ctx, person(c), *in.ID)
	if err != nil {
		return err
	}
	status := http.StatusCreated
	if receipt.Answers[0].Status == db.Duplicate {
		status = http.StatusOK
	}
	return answer(c, status, map[string]any{"job": summaryOf(job)})
}

// entryIDFor makes the id of an entry that a request about a job stands for: version 7 with the job's own time, the
// rest from a hash of job and kind.
func entryIDFor(job, kind string) string {
	id := uuid.MustParse(job)
	name := uuid.NewSHA1(id, []byte(kind))
	copy(id[6:], name[6:])
	id[6] = id[6]&0x0f | 0x70
	id[8] = id[8]&0x3f | 0x80
	return id.String()
}

// POST /api/jobs/:id/decision signs a job off or sends it back. base_seq is the stage_seq that the supervisor looked at:
// if something came in since, the answer is 409 and nothing is decided.
func (s *Server) decide(c *fiber.Ctx) error {
	job, err := url.PathUnescape(c.Params("id"))
	if err != nil || !db.IsID(job) {
		return db.ErrNotFound
	}
	var in struct {
		ID       *string `json:"id"`
		Decision *string `json:"decision"`
		Remark   *string `json:"remark"`
		BaseSeq  *int64  `json:"base_seq"`
	}
	if err := decode(c, maxAPIBody, &in); err != nil {
		return err
	}
	switch {
	case in.ID == nil:
		return missing("id")
	case !db.IsID(*in.ID):
		return outOfRange("id", "id is a UUID of version 7 in lower case, made once for this decision")
	case in.Decision == nil:
		return missing("decision")
	case in.BaseSeq == nil:
		return missing("base_seq")
	}
	var kind string
	switch *in.Decision {
	case "sign off":
		kind = db.JobSignedOff
		if in.Remark != nil && strings.TrimSpace(*in.Remark) == "" {
			in.Remark = nil
		}
	case "send back":
		kind = db.JobSentBack
		if in.Remark == nil || strings.TrimSpace(*in.Remark) == "" {
			return &problem{Status: http.StatusBadRequest, Code: "missing_field", Field: "remark", Detail: "a job goes back with a remark that says why"}
		}
	default:
		return outOfRange("decision", `a decision is "sign off" or "send back"`)
	}
	ctx, done := s.patience()
	defer done()
	if _, err := s.cfg.Store.AppendDesk(ctx, person(c), []db.DeskEntry{
		{ID: *in.ID, Job: job, Kind: kind, Body: db.Decision{Remark: in.Remark, BaseSeq: *in.BaseSeq}},
	}); err != nil {
		return err
	}
	after, err := s.cfg.Store.Job(ctx, person(c), job)
	if err != nil {
		return err
	}
	return answer(c, http.StatusOK, map[string]any{"job": summaryOf(after)})
}
