package server

import (
	"context"
	json "encoding/json/v2"
	"errors"
	"net/http"
	"time"

	"github.com/gofiber/fiber/v2"

	"crossplumb/calc/wire"
	"crossplumb/db"
)

// maxEntries is how many entries one batch may have.
const maxEntries = 50

type headBody struct {
	Seq  int64  `json:"seq"`
	Hash string `json:"hash"`
}

type answerBody struct {
	ID     string  `json:"id"`
	Status string  `json:"status"`
	Seq    *int64  `json:"seq"`
	Code   *string `json:"code"`
	Reason *string `json:"reason"`
}

// POST /api/entries takes a batch from a phone. All of it is on disk before the answer goes out; each entry has its own.
func (s *Server) takeEntries(c *fiber.Ctx) error {
	var in struct {
		Entries *[]struct {
			Raw  *string `json:"raw"`
			Hash *string `json:"hash"`
		} `json:"entries"`
		SentAt *string `json:"sent_at"`
	}
	if err := decode(c, maxAPIBody, &in); err != nil {
		return err
	}
	switch {
	case in.Entries == nil || len(*in.Entries) == 0:
		return missing("entries")
	case len(*in.Entries) > maxEntries:
		return &problem{Status: http.StatusRequestEntityTooLarge, Code: "too_large", Field: "entries", Detail: "a batch has 50 entries at most"}
	case in.SentAt == nil:
		return missing("sent_at")
	}
	sent, err := time.Parse(time.RFC3339, *in.SentAt)
	if err != nil {
		return outOfRange("sent_at", "sent_at is an RFC 3339 time")
	}
	batch := make([]db.Incoming, len(*in.Entries))
	for i, e := range *in.Entries {
		if e.Raw == nil {
			return missing("entries[" + itoa(i) + "].raw")
		}
		if e.Hash == nil {
			return missing("entries[" + itoa(i) + "].hash")
		}
		batch[i] = db.Incoming{Raw: *e.Raw, Hash: *e.Hash}
	}
	ctx, done := s.patience()
	defer done()
	if err := s.raiseObjections(ctx, batch); err != nil {
		return err
	}
	receipt, err := s.cfg.Store.Append(ctx, person(c), sent.UnixMilli(), batch)
	if err != nil {
		return err
	}
	if len(receipt.Jobs) > 0 {
		s.judge.nudge()
	}
	out := struct {
		Answers []answerBody `json:"answers"`
		Epoch   int64        `json:"epoch"`
		Head    headBody     `json:"head"`
	}{Epoch: receipt.Epoch, Head: headBody(receipt.Head)}
	for _, a := range receipt.Answers {
		line := answerBody{ID: a.ID, Status: string(a.Status)}
		if a.Status == db.Quarantined {
			line.Code, line.Reason = &a.Code, &a.Reason
		} else {
			line.Seq = &a.Seq
		}
		out.Answers = append(out.Answers, line)
	}
	return answer(c, http.StatusOK, out)
}

// raiseObjections asks calc about what the database cannot judge: whether a plan's sheets can be read, and whether a
// reading fits its sheet. What does not would stop every later verdict of that mount, so it is set apart.
func (s *Server) raiseObjections(ctx context.Context, batch []db.Incoming) error {
	plans := map[string]db.Plan{}
	for i := range batch {
		e, err := db.ReadEntry(batch[i].Raw)
		if err != nil {
			continue // the database says what is wrong with it
		}
		content, err := e.ReadBody()
		if err != nil {
			continue
		}
		if plan, is := content.(*db.Plan); is {
			if p := checkSheets(*plan); p != nil {
				batch[i].Objection = "a sheet of the plan cannot be read: " + p.Field + ": " + p.Message
				continue
			}
			plans[e.Job] = *plan
			continue
		}
		if !laidOverSheet(e.Kind) {
			continue
		}
		plan, known := plans[e.Job]
		if !known {
			plan, err = s.cfg.Store.Plan(ctx, e.Job)
			if errors.Is(err, db.ErrNotFound) {
				continue
			}
			if err != nil {
				return err
			}
			plans[e.Job] = plan
		}
		for _, m := range plan.Mounts {
			if m.ID != e.Mount {
				continue
			}
			if _, p := fold(m.Sheet, []db.Entry{e}); p != nil {
				batch[i].Objection = "the entry does not fit the mount's sheet: " + p.Field + ": " + p.Message
			}
		}
	}
	return nil
}

// laidOverSheet tells the kinds that mount.fold lays over a sheet.
func laidOverSheet(kind string) bool {
	switch kind {
	case db.ReadingTaken, db.ReadingWithdrawn, db.BoltMoved, db.PowerControlConfirmed, db.FiguresRead, db.ObstacleWasNoted:
		return true
	}
	return false
}

// checkSheets reads every sheet of a plan; the field names the mount.
func checkSheets(plan db.Plan) *wire.Problem {
	for i, m := range plan.Mounts {
		if _, p := fold(m.Sheet, nil); p != nil {
			field := "mounts[" + itoa(i) + "].sheet"
			if p.Field != "" {
				field += "." + trimSheet(p.Field)
			}
			return &wire.Problem{Code: p.Code, Field: field, Message: p.Message}
		}
	}
	return nil
}

type entryBody struct {
	Seq          int64   `json:"seq"`
	ReceivedAt   string  `json:"received_at"`
	SentAt       *string `json:"sent_at"`
	AuthorName   string  `json:"author_name"`
	UploaderName string  `json:"uploader_name"`
	Raw          string  `json:"raw"`
}

func entriesOf(list []db.LogEntry) []entryBody {
	out := make([]entryBody, 0, len(list))
	for _, e := range list {
		line := entryBody{Seq: e.Seq, ReceivedAt: stamp(e.ReceivedAt), AuthorName: e.AuthorName, UploaderName: e.UploaderName,
			Raw: e.Raw}
		if e.SentAt != nil {
			at := stamp(*e.SentAt)
			line.SentAt = &at
		}
		out = append(out, line)
	}
	return out
}

// GET /api/entries?after=&limit= is the log from a cursor on, of the jobs that the person may see.
func (s *Server) listEntries(c *fiber.Ctx) error {
	if err := knownQuery(c, "after", "limit"); err != nil {
		return err
	}
	after, err := wholeNumber(c, "after", 0, 0, 1<<53)
	if err != nil {
		return err
	}
	limit, err := wholeNumber(c, "limit", 200, 1, 1000)
	if err != nil {
		return err
	}
	ctx, done := s.patience()
	defer done()
	list, next, err := s.cfg.Store.EntriesAfter(ctx, person(c), after, int(limit))
	if err != nil {
		return err
	}
	state, err := s.cfg.Store.State(ctx)
	if err != nil {
		return err
	}
	return answer(c, http.StatusOK, map[string]any{
		"entries": entriesOf(list), "next": next, "epoch": state.Epoch, "head": headBody(state.Head),
	})
}

type deviceBody struct {
	MaxContiguousSeq int64  `json:"max_contiguous_seq"`
	Hash             string `json:"hash"`
	HighestSeq       int64  `json:"highest_seq"`
}

// GET /api/state tells which database this is and how far it has the entries of the caller's devices. ?device= asks
// for one device, whoever used it.
func (s *Server) showState(c *fiber.Ctx) error {
	if err := knownQuery(c, "device"); err != nil {
		return err
	}
	ctx, done := s.patience()
	defer done()
	state, err := s.cfg.Store.State(ctx)
	if err != nil {
		return err
	}
	var list []db.Device
	if device := c.Query("device"); device != "" {
		one, err := s.cfg.Store.Device(ctx, device)
		switch {
		case err == nil:
			list = []db.Device{one}
		case !errors.Is(err, db.ErrNotFound):
			return err
		}
	} else if list, err = s.cfg.Store.Devices(ctx, person(c).ID); err != nil {
		return err
	}
	devices := map[string]deviceBody{}
	for _, d := range list {
		devices[d.Device] = deviceBody{MaxContiguousSeq: d.ContiguousSeq, Hash: d.ContiguousHash, HighestSeq: d.HighestSeq}
	}
	return answer(c, http.StatusOK, map[string]any{
		"instance": state.Instance, "epoch": state.Epoch, "head": headBody(state.Head), "devices": devices,
	})
}

// GET /api/quarantine lists what could not be taken into the log, with the reason.
func (s *Server) listQuarantine(c *fiber.Ctx) error {
	if err := knownQuery(c, "limit"); err != nil {
		return err
	}
	limit, err := wholeNumber(c, "limit", 500, 1, 5000)
	if err != nil {
		return err
	}
	ctx, done := s.patience()
	defer done()
	list, err := s.cfg.Store.Quarantine(ctx, int(limit))
	if err != nil {
		return err
	}
	type apartBody struct {
		ID           string  `json:"id"`
		Job          *string `json:"job"`
		Code         string  `json:"code"`
		Reason       string  `json:"reason"`
		ReceivedAt   string  `json:"received_at"`
		AuthorName   *string `json:"author_name"`
		UploaderName string  `json:"uploader_name"`
		Raw          string  `json:"raw"`
		Settled      bool    `json:"settled"`
	}
	out := make([]apartBody, 0, len(list))
	for _, a := range list {
		out = append(out, apartBody{ID: a.ID, Job: orNil(a.Job), Code: a.Code, Reason: a.Reason, ReceivedAt: stamp(a.ReceivedAt),
			AuthorName: orNil(a.AuthorName), UploaderName: a.Uploader, Raw: a.Raw, Settled: a.Settled})
	}
	return answer(c, http.StatusOK, map[string]any{"entries": out})
}

func orNil(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

// fold lays entries over a sheet through the door; the answer is the folded sheet's JSON.
func fold(sheet []byte, entries []db.Entry) ([]byte, *wire.Problem) {
	type line struct {
		ID    string  `json:"id"`
		Kind  string  `json:"kind"`
		Mount *string `json:"mount"`
		Body  rawJSON `json:"body"`
	}
	in := struct {
		Sheet   rawJSON `json:"sheet"`
		Entries []line  `json:"entries"`
	}{Sheet: sheet, Entries: []line{}}
	for _, e := range entries {
		in.Entries = append(in.Entries, line{ID: e.ID, Kind: e.Kind, Mount: orNil(e.Mount), Body: rawJSON(e.Body)})
	}
	text, err := json.Marshal(in)
	if err != nil {
		return nil, &wire.Problem{Code: "malformed", Field: "sheet", Message: "the sheet is not JSON"}
	}
	out, p := wire.Reckon("mount.fold", text)
	if p != nil {
		return nil, p
	}
	var folded struct {
		Sheet rawJSON `json:"sheet"`
	}
	if err := json.Unmarshal(out, &folded); err != nil {
		return nil, &wire.Problem{Code: "internal", Message: "the folded sheet cannot be read"}
	}
	return folded.Sheet, nil
}
