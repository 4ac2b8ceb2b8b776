package db

import (
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"math"
	"strings"
	"time"
)

// Plan is the body of job.planned. A sheet is kept as text: calc knows what is in it.
type Plan struct {
	Site      string         `json:"site"`
	Title     string         `json:"title"`
	Crew      string         `json:"crew"`
	VisitOn   *string        `json:"visit_on"`
	Access    *string        `json:"access"`
	Emergency *string        `json:"emergency"`
	LatDeg    *float64       `json:"lat_deg"`
	LonDeg    *float64       `json:"lon_deg"`
	Mounts    []PlannedMount `json:"mounts"`
}

// PlannedMount is one mount of a plan.
type PlannedMount struct {
	ID    string         `json:"id"`
	Name  string         `json:"name"`
	Sheet jsontext.Value `json:"sheet"`
}

// Caution is the body of caution.confirmed.
type Caution struct {
	Caution string `json:"caution"`
	Version int    `json:"version"`
	Name    string `json:"name"`
}

// Taken is the body of reading.taken. The reading itself is calc's to judge.
type Taken struct {
	Phase    string         `json:"phase"`
	Antenna  string         `json:"antenna"`
	Quantity string         `json:"quantity"`
	Reading  jsontext.Value `json:"reading"`
	Typed    *string        `json:"typed"`
}

// Withdrawn is the body of reading.withdrawn: the id of the entry that it takes back.
type Withdrawn struct {
	Withdraws string `json:"withdraws"`
}

// Moved is the body of bolt.moved: readings as left of this antenna and quantity are stale from here on.
type Moved struct {
	Antenna  string `json:"antenna"`
	Quantity string `json:"quantity"`
}

// Note is the body of note.added.
type Note struct {
	Text string `json:"text"`
}

// HandedIn is the body of job.handed_in, with the words that the crew saw.
type HandedIn struct {
	Remark   *string         `json:"remark"`
	Open     []string        `json:"open"`
	Verdicts []HandedVerdict `json:"verdicts"`
}

// HandedVerdict is one mount's word as the phone had it.
type HandedVerdict struct {
	Mount       string         `json:"mount"`
	Phase       string         `json:"phase"`
	Word        string         `json:"word"`
	Probability *float64       `json:"probability"`
	Method      jsontext.Value `json:"method"`
}

// Decision is the body of job.sent_back and job.signed_off. BaseSeq is the stage_seq that the supervisor looked at.
type Decision struct {
	Remark  *string `json:"remark"`
	BaseSeq int64   `json:"base_seq"`
}

// maxMounts and maxSheet keep one plan within one request (256 KiB).
const (
	maxMounts = 24
	maxSheet  = 128 << 10
)

var (
	quantities = []string{"position", "azimuth", "tilt", "skew"}
	phases     = []string{"as_found", "as_left"}
	states     = []string{"planned", "as_found", "as_left"}
	words      = []string{"go", "no-go", "measure again"}
)

// ReadBody reads the body as its kind has it, and checks what can be checked without physics. The value is a pointer
// to one of the types above; the error is a *Refusal.
func (e Entry) ReadBody() (any, error) {
	switch e.Kind {
	case JobPlanned:
		return body(e, new(Plan), (*Plan).check, "site", "title", "crew", "mounts")
	case JobIssued:
		return body(e, new(struct{}), func(*struct{}) string { return "" })
	case CautionConfirmed:
		return body(e, new(Caution), func(c *Caution) string {
			if !named(c.Caution) || !named(c.Name) || c.Version < 1 {
				return "a confirmation has the caution, the version of its text and a name"
			}
			return ""
		})
	case ReadingTaken:
		return body(e, new(Taken), func(t *Taken) string {
			switch {
			case e.Mount == "":
				return "a reading belongs to a mount"
			case !among(t.Phase, phases):
				return "phase is as_found or as_left"
			case !named(t.Antenna):
				return "antenna is missing"
			case !among(t.Quantity, quantities):
				return "quantity is position, azimuth, tilt or skew"
			case t.Reading.Kind() != '{':
				return "reading is an object with value, unit and doubt"
			case t.Typed != nil && len(*t.Typed) > maxText:
				return "typed is too long"
			}
			return ""
		}, "reading")
	case ReadingWithdrawn:
		return body(e, new(Withdrawn), func(w *Withdrawn) string {
			if !IsID(w.Withdraws) {
				return "withdraws is the id of an entry"
			}
			return ""
		})
	case BoltMoved:
		return body(e, new(Moved), func(m *Moved) string {
			if e.Mount == "" || !named(m.Antenna) || !among(m.Quantity, quantities) {
				return "a moved bolt has mount, antenna and quantity"
			}
			return ""
		})
	case NoteAdded:
		return body(e, new(Note), func(n *Note) string {
			if strings.TrimSpace(n.Text) == "" || len(n.Text) > maxText {
				return "a note has some text, and not more than 4000 bytes"
			}
			return ""
		})
	case JobHandedIn:
		return body(e, new(HandedIn), (*HandedIn).check, "open", "verdicts")
	case JobSentBack:
		return body(e, new(Decision), func(d *Decision) string {
			if d.Remark == nil || strings.TrimSpace(*d.Remark) == "" || len(*d.Remark) > maxText {
				return "a job goes back with a remark that says why"
			}
			return ""
		}, "remark", "base_seq")
	case JobSignedOff:
		return body(e, new(Decision), func(d *Decision) string {
			if d.Remark != nil && len(*d.Remark) > maxText {
				return "the remark is too long"
			}
			return ""
		}, "remark", "base_seq")
	}
	if content, known, err := readAimBody(e); known {
		return content, err
	}
	return nil, refuse(UnknownKind, "kind %q is not known here", clip(e.Kind))
}

func body[B any](e Entry, into *B, check func(*B) string, required ...string) (any, error) {
	if e.Body.Kind() != '{' {
		return nil, refuse(Malformed, "body is not an object")
	}
	if err := json.Unmarshal(e.Body, into, json.RejectUnknownMembers(true)); err != nil {
		return nil, refuse(Malformed, "the body of %s is not as agreed: %s", e.Kind, plain(err))
	}
	if len(required) > 0 {
		var names map[string]jsontext.Value
		if err := json.Unmarshal(e.Body, &names); err != nil {
			return nil, refuse(Malformed, "the body of %s is not as agreed: %s", e.Kind, plain(err))
		}
		for _, name := range required {
			if _, there := names[name]; !there {
				return nil, refuse(Malformed, "the body of %s lacks %s", e.Kind, name)
			}
		}
	}
	if why := check(into); why != "" {
		return nil, refuse(Malformed, "%s", why)
	}
	return into, nil
}

func (p *Plan) check() string {
	switch {
	case !named(p.Site) || !named(p.Title) || !named(p.Crew):
		return "a plan names site, title and crew"
	case len(p.Mounts) == 0 || len(p.Mounts) > maxMounts:
		return "a plan has 1 to 24 mounts"
	case p.Access != nil && len(*p.Access) > maxText, p.Emergency != nil && len(*p.Emergency) > maxText:
		return "access and emergency are 4000 bytes at most"
	case p.LatDeg != nil && math.Abs(*p.LatDeg) > 90, p.LonDeg != nil && math.Abs(*p.LonDeg) > 180:
		return "lat_deg is within 90 and lon_deg within 180"
	case (p.LatDeg == nil) != (p.LonDeg == nil):
		return "lat_deg and lon_deg come together"
	}
	if p.VisitOn != nil {
		if _, err := time.Parse(time.DateOnly, *p.VisitOn); err != nil {
			return "visit_on is a date like 2026-11-30"
		}
	}
	seen := map[string]bool{}
	for _, m := range p.Mounts {
		switch {
		case !named(m.ID) || !named(m.Name):
			return "a mount has id and name"
		case seen[m.ID]:
			return "two mounts have the id " + m.ID
		case m.Sheet.Kind() != '{' || len(m.Sheet) > maxSheet:
			return "a mount has a sheet of 128 KiB at most"
		}
		seen[m.ID] = true
	}
	return ""
}

func (h *HandedIn) check() string {
	if h.Remark != nil && len(*h.Remark) > maxText {
		return "the remark is too long"
	}
	if len(h.Open) > 100 {
		return "open lists 100 things at most"
	}
	for _, o := range h.Open {
		if len(o) > maxText {
			return "a line of open is too long"
		}
	}
	if len(h.Verdicts) > maxMounts {
		return "verdicts has one line a mount"
	}
	for _, v := range h.Verdicts {
		if !named(v.Mount) || !among(v.Phase, states) || !among(v.Word, words) {
			return "a verdict has mount, phase and word"
		}
		if v.Probability != nil && (*v.Probability < 0 || *v.Probability > 1) {
			return "a probability is within 0 and 1"
		}
	}
	return ""
}

func named(s string) bool { return strings.TrimSpace(s) != "" && len(s) <= maxName }

func among(s string, list []string) bool {
	for _, one := range list {
		if s == one {
			return true
		}
	}
	return false
}

func clip(s string) string {
	if len(s) > 60 {
		return s[:60] + "…"
	}
	return s
}
