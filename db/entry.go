package db

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"math"
	"strings"
	"time"

	"github.com/google/uuid"
)

// Entry is the text of one entry, read. Its fields are those of the text; nothing is added or repaired.
type Entry struct {
	ID        string
	Device    string
	DeviceSeq int64
	Prev      string // hash of the device's entry before, "" for the first
	Job       string // "" where the text has null
	Mount     string // "" where the text has null
	Kind      string
	Schema    int
	At        string // RFC 3339 as the device had it
	MonoMs    float64
	Author    string
	App       string
	Body      jsontext.Value
}

// The kinds of entries.
const (
	JobPlanned       = "job.planned"
	JobIssued        = "job.issued"
	CautionConfirmed = "caution.confirmed"
	ReadingTaken     = "reading.taken"
	ReadingWithdrawn = "reading.withdrawn"
	BoltMoved        = "bolt.moved"
	NoteAdded        = "note.added"
	JobHandedIn      = "job.handed_in"
	JobSentBack      = "job.sent_back"
	JobSignedOff     = "job.signed_off"

	LevelStepped          = "level.stepped"
	PowerControlConfirmed = "power_control.confirmed"
	PeakFitted            = "peak.fitted"
	FiguresRead           = "figures.read"
	SightWasTaken         = "sight.taken"
	LeanWasRead           = "lean.read"
	ObstacleWasNoted      = "obstacle.noted"
)

// HashOf is the hash of an entry: SHA-256 over its bytes as the device wrote them, in hex.
func HashOf(raw string) string {
	sum := sha256.Sum256([]byte(raw))
	return hex.EncodeToString(sum[:])
}

// envelope is Entry on the wire. Every field must be there; a pointer tells absent from zero, and the two that may be
// null are read as text first, because null and absent are not the same.
type envelope struct {
	ID        *string        `json:"id"`
	Device    *string        `json:"device"`
	DeviceSeq *int64         `json:"device_seq"`
	Prev      *string        `json:"prev"`
	Job       jsontext.Value `json:"job"`
	Mount     jsontext.Value `json:"mount"`
	Kind      *string        `json:"kind"`
	Schema    *int           `json:"schema"`
	At        *string        `json:"at"`
	MonoMs    *float64       `json:"mono_ms"`
	Author    *string        `json:"author"`
	App       *string        `json:"app"`
	Body      jsontext.Value `json:"body"`
}

// maxNames bounds texts that are names of things: sites, crews, instruments. maxText bounds what a person writes.
const (
	maxName = 200
	maxText = 4000
)

// maxDeviceSeq is the largest whole number that a phone's JavaScript counts to without a gap (ECMA-262,
// Number.MAX_SAFE_INTEGER). Near the end of int64 the numbers beside one's own would not exist.
const maxDeviceSeq = 1<<53 - 1

// ReadEntry reads the text of an entry. The error is a *Refusal; the Entry holds what could be read even then, so that
// a quarantined text can be found by its job and device.
func ReadEntry(raw string) (Entry, error) {
	e, _, err := readEntry(raw)
	return e, err
}

// readEntry returns the body as well, as ReadBody does.
func readEntry(raw string) (Entry, any, error) {
	var env envelope
	// Names twice in one object, names in other case, and bytes that are not UTF-8 are errors here: two readers of the
	// same text must not come to different entries.
	err := json.Unmarshal([]byte(raw), &env, json.RejectUnknownMembers(true))
	e := Entry{
		ID: text(env.ID), Device: text(env.Device), Prev: text(env.Prev), Kind: text(env.Kind), At: text(env.At),
		Author: text(env.Author), App: text(env.App), Body: env.Body,
	}
	if env.DeviceSeq != nil {
		e.DeviceSeq = *env.DeviceSeq
	}
	if env.Schema != nil {
		e.Schema = *env.Schema
	}
	if env.MonoMs != nil {
		e.MonoMs = *env.MonoMs
	}
	job, jobErr := textOrNull(env.Job)
	mount, mountErr := textOrNull(env.Mount)
	e.Job, e.Mount = job, mount
	switch {
	case err != nil:
		return e, nil, refuse(Malformed, "the entry is not JSON of the agreed form: %s", plain(err))
	case env.ID == nil || env.Device == nil || env.DeviceSeq == nil || env.Prev == nil || env.Job == nil ||
		env.Mount == nil || env.Kind == nil || env.Schema == nil || env.At == nil || env.MonoMs == nil ||
		env.Author == nil || env.App == nil || env.Body == nil:
		return e, nil, refuse(Malformed, "the entry lacks one of its fields")
	case jobErr != nil || mountErr != nil:
		return e, nil, refuse(Malformed, "job and mount are text or null")
	case !isUUID(e.ID, 7):
		return e, nil, refuse(Malformed, "id is not a UUID of version 7 in lower case")
	case !isUUID(e.Device, 0):
		return e, nil, refuse(Malformed, "device is not a UUID in lower case")
	case e.DeviceSeq < 1 || e.DeviceSeq > maxDeviceSeq:
		return e, nil, refuse(Malformed, "device_seq counts from 1, and no phone counts beyond 2^53")
	case e.DeviceSeq == 1 && e.Prev != "":
		return e, nil, refuse(Malformed, "the first entry of a device has no entry before it, so prev is empty")
	case e.DeviceSeq > 1 && !isHash(e.Prev):
		return e, nil, refuse(Malformed, "prev is not a hash")
	case e.Job != "" && !isUUID(e.Job, 7):
		return e, nil, refuse(Malformed, "job is not a UUID of version 7 in lower case")
	case len(e.Mount) > maxName:
		return e, nil, refuse(Malformed, "mount is too long")
	case math.IsNaN(e.MonoMs) || e.MonoMs < 0:
		return e, nil, refuse(Malformed, "mono_ms is not a time since something")
	case e.Author == "" || len(e.Author) > maxName:
		return e, nil, refuse(Malformed, "author is missing or too long")
	case len(e.App) > maxName:
		return e, nil, refuse(Malformed, "app is too long")
	}
	if _, err := time.Parse(time.RFC3339, e.At); err != nil {
		return e, nil, refuse(Malformed, "at is not an RFC 3339 time")
	}
	if e.Schema != 1 {
		return e, nil, refuse(UnknownKind, "schema %d of %q is not known here", e.Schema, e.Kind)
	}
	content, err := e.ReadBody()
	return e, content, err
}

func text(p *string) string {
	if p == nil {
		return ""
	}
	return *p
}

func textOrNull(v jsontext.Value) (string, error) {
	if v == nil || v.Kind() == 'n' {
		return "", nil
	}
	var s string
	err := json.Unmarshal(v, &s)
	if err == nil && s == "" {
		err = errors.New("empty text")
	}
	return s, err
}

// isUUID takes one spelling only, since ids are compared as text. version 0 takes any.
func isUUID(s string, version uuid.Version) bool {
	if len(s) != 36 || strings.ToLower(s) != s {
		return false
	}
	u, err := uuid.Parse(s)
	return err == nil && (version == 0 || u.Version() == version && u.Variant() == uuid.RFC4122)
}

// IsID tells whether s can be the id of an entry or a job: a UUID of version 7 in lower case.
func IsID(s string) bool { return isUUID(s, 7) }

func isHash(s string) bool {
	if len(s) != 64 {
		return false
	}
	for i := range len(s) {
		if c := s[i]; (c < '0' || c > '9') && (c < 'a' || c > 'f') {
			return false
		}
	}
	return true
}

// plain is a decoder's error without the name of the Go type that it would have filled.
func plain(err error) string {
	var semantic *json.SemanticError
	if errors.As(err, &semantic) {
		where := string(semantic.JSONPointer)
		if errors.Is(err, json.ErrUnknownName) {
			return "unknown name " + where
		}
		return "wrong type at " + where
	}
	var syntactic *jsontext.SyntacticError
	if errors.As(err, &syntactic) {
		if errors.Is(err, jsontext.ErrDuplicateName) {
			return "a name twice at " + string(syntactic.JSONPointer)
		}
		return "syntax at " + string(syntactic.JSONPointer)
	}
	return "unreadable"
}
