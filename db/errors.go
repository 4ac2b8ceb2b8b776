package db

import (
	"errors"
	"fmt"

	sqlite3 "github.com/mattn/go-sqlite3"
)

// What a caller may have to tell apart. Everything else that comes back is a fault of the database or of this code.
var (
	ErrNotFound   = errors.New("not found")
	ErrNameTaken  = errors.New("somebody of that name is there already")
	ErrInvitation = errors.New("this invitation does not exist, was used, or is older than it may be")
	ErrNoSession  = errors.New("no such session, or it has ended")
	ErrOtherText  = errors.New("was applied with other text than this program has")
	ErrNewer      = errors.New("the database was written by a newer crossplumb")
)

// Refusal is why an entry is not in the log. Programs branch on Code; Reason is for a person.
type Refusal struct {
	Code   string
	Reason string
}

func (r *Refusal) Error() string { return r.Code + ": " + r.Reason }

// The codes of a Refusal.
const (
	Malformed       = "malformed"
	UnknownKind     = "unknown_kind"
	HashMismatch    = "hash_mismatch"
	IDReused        = "id_reused"
	DeviceSeqReused = "device_seq_reused"
	ChainBroken     = "chain_broken"
	UnknownJob      = "unknown_job"
	UnknownMount    = "unknown_mount"
	UnknownAuthor   = "unknown_author"
	NotAllowed      = "not_allowed"
	AlreadyPlanned  = "already_planned"
	NotHandedIn     = "not_handed_in"
	Stale           = "stale"
	SignedOff       = "signed_off"
	Unreadable      = "unreadable" // the caller's objection
)

func refuse(code, format string, args ...any) *Refusal {
	return &Refusal{Code: code, Reason: fmt.Sprintf(format, args...)}
}

// IsFull tells that the disk would not take it: full, read-only or failing. Nothing of the transaction was stored.
func IsFull(err error) bool {
	var e sqlite3.Error
	return errors.As(err, &e) && (e.Code == sqlite3.ErrFull || e.Code == sqlite3.ErrIoErr || e.Code == sqlite3.ErrReadonly)
}

// IsBusy tells that another process held the database for too long, or that the time for it ran out.
func IsBusy(err error) bool {
	var e sqlite3.Error
	return errors.As(err, &e) && (e.Code == sqlite3.ErrBusy || e.Code == sqlite3.ErrLocked || e.Code == sqlite3.ErrInterrupt)
}
