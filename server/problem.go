package server

import (
	"context"
	json "encoding/json/v2"
	"errors"
	"log/slog"
	"net/http"
	"strconv"
	"time"

	"github.com/gofiber/fiber/v2"

	"crossplumb/calc/wire"
	"crossplumb/db"
)

// problem is an error whose text was written for the client (RFC 9457). Programs branch on Code.
type problem struct {
	Status     int
	Code       string
	Field      string
	Detail     string
	RetryAfter time.Duration
	// Cause is for the log alone.
	Cause error
}

func (p *problem) Error() string {
	if p.Cause != nil {
		return p.Code + ": " + p.Cause.Error()
	}
	return p.Code + ": " + p.Detail
}

func refused(status int, code, detail string) *problem {
	return &problem{Status: status, Code: code, Detail: detail}
}

// problemBody is a problem as it goes out.
type problemBody struct {
	Type      string `json:"type"`
	Title     string `json:"title"`
	Status    int    `json:"status"`
	Detail    string `json:"detail"`
	Code      string `json:"code"`
	Field     string `json:"field"`
	RequestID string `json:"request_id"`
}

// asProblem gives every error its status and its words. What is not known here is a fault of ours: it goes to the log,
// and the client learns only that there was one.
func asProblem(err error) *problem {
	var p *problem
	var calc *wire.Problem
	var refusal *db.Refusal
	var fiberErr *fiber.Error
	switch {
	case errors.As(err, &p):
		return p
	case errors.As(err, &calc):
		return &problem{Status: http.StatusUnprocessableEntity, Code: calc.Code, Field: calc.Field, Detail: calc.Message}
	case errors.As(err, &refusal):
		return &problem{Status: statusOf(refusal.Code), Code: refusal.Code, Detail: refusal.Reason}
	case errors.Is(err, db.ErrNotFound):
		return refused(http.StatusNotFound, "not_found", "there is nothing here under this name")
	case errors.Is(err, db.ErrInvitation):
		return refused(http.StatusForbidden, "invitation", "this invitation was used, has run out, or never was; ask for a new one")
	case errors.Is(err, db.ErrNameTaken):
		return &problem{Status: http.StatusConflict, Code: "name_taken", Field: "name", Detail: "somebody of this name is there already; choose another"}
	case db.IsFull(err):
		return &problem{Status: http.StatusInsufficientStorage, Code: "storage_full", RetryAfter: time.Minute,
			Detail: "the server's disk is full or cannot be written; nothing was stored, keep what you have"}
	case errors.Is(err, context.DeadlineExceeded), errors.Is(err, context.Canceled), db.IsBusy(err):
		return &problem{Status: http.StatusServiceUnavailable, Code: "busy", RetryAfter: 5 * time.Second,
			Detail: "the server is busy or stopping; nothing was stored, try again"}
	case errors.As(err, &fiberErr):
		return fromFiber(fiberErr.Code)
	}
	return refused(http.StatusInternalServerError, "internal", "a fault of the server; its log has more under this request_id")
}

// fromFiber puts the router's own refusals into words; their text is not passed on.
func fromFiber(status int) *problem {
	switch status {
	case http.StatusNotFound:
		return refused(status, "not_found", "there is nothing here under this address")
	case http.StatusMethodNotAllowed:
		return refused(status, "method_not_allowed", "this address does not know this method")
	case http.StatusRequestEntityTooLarge:
		return refused(status, "too_large", "the request is larger than the server takes")
	case http.StatusRequestHeaderFieldsTooLarge:
		return refused(status, "too_large", "the request's header is larger than the server takes")
	case http.StatusRequestTimeout:
		return refused(status, "timeout", "the request did not arrive in time")
	}
	if status >= 400 && status < 500 {
		return refused(status, "malformed", "the request cannot be read")
	}
	return refused(http.StatusInternalServerError, "internal", "a fault of the server; its log has more under this request_id")
}

func statusOf(refusal string) int {
	switch refusal {
	case db.Malformed, db.UnknownKind:
		return http.StatusBadRequest
	case db.NotAllowed, db.UnknownAuthor:
		return http.StatusForbidden
	case db.UnknownJob, db.UnknownMount:
		return http.StatusNotFound
	}
	return http.StatusConflict
}

// writeError is the one place where an error becomes an answer, and a fault of ours a line in the log.
func (s *Server) writeError(c *fiber.Ctx, err error) error {
	p := asProblem(err)
	if p.Status >= 500 {
		s.cfg.Log.Error("request failed", slog.String("request_id", requestID(c)), slog.String("method", c.Method()),
			slog.String("path", c.Path()), slog.Int("status", p.Status), slog.String("error", err.Error()))
	}
	text, err := json.Marshal(problemBody{
		Type: "about:blank", Title: http.StatusText(p.Status), Status: p.Status, Detail: p.Detail,
		Code: p.Code, Field: p.Field, RequestID: requestID(c),
	})
	if err != nil {
		return err
	}
	if p.RetryAfter > 0 {
		c.Set(fiber.HeaderRetryAfter, strconv.Itoa(int((p.RetryAfter+time.Second-1)/time.Second)))
	}
	c.Set(fiber.HeaderContentType, "application/problem+json")
	c.Set(fiber.HeaderCacheControl, "no-store")
	return c.Status(p.Status).Send(text)
}
