package server

import (
	"fmt"
	"log/slog"
	"net/http"
	"net/url"
	"runtime/debug"
	"strings"
	"time"

	"github.com/gofiber/fiber/v2"
	"github.com/google/uuid"
)

// Keys of what travels with a request.
const (
	keyRequestID = "request id"
	keyPerson    = "person"
	keyUntil     = "until"
)

func requestID(c *fiber.Ctx) string {
	id, _ := c.Locals(keyRequestID).(string)
	return id
}

// logged gives each request an id and one line in the log, without bodies. Errors become answers here already, so that
// the line has the status that went out.
func (s *Server) logged(c *fiber.Ctx) error {
	start := time.Now()
	id := uuid.NewString()
	c.Locals(keyRequestID, id)
	c.Set(fiber.HeaderXRequestID, id)
	if err := c.Next(); err != nil {
		if err := s.writeError(c, err); err != nil {
			return err
		}
	}
	line := []any{slog.String("request_id", id), slog.String("method", c.Method()), slog.String("path", c.Path()),
		slog.Int("status", c.Response().StatusCode()), slog.Duration("took", time.Since(start))}
	if p, known := c.Locals(keyPerson).(who); known {
		line = append(line, slog.String("person", p.ID))
	}
	s.cfg.Log.Debug("request", line...)
	return nil
}

// recovered turns a panic of a handler into an error with its stack; without it the whole process would end.
func (s *Server) recovered(c *fiber.Ctx) (err error) {
	defer func() {
		if fault := recover(); fault != nil {
			err = fmt.Errorf("panic: %v\n%s", fault, debug.Stack())
		}
	}()
	return c.Next()
}

// secured sets what a browser is told about every answer. 'wasm-unsafe-eval' lets the calculations be compiled, not
// scripts. The permissions let the phone's own sensors and camera work: the usual lock-down list would end them.
func secured(https bool) fiber.Handler {
	const policy = "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; style-src 'self'; " +
		"img-src 'self' blob: data:; connect-src 'self'; font-src 'self'; manifest-src 'self'; worker-src 'self'; " +
		"form-action 'self'; frame-ancestors 'none'; base-uri 'none'; object-src 'none'"
	const permissions = "accelerometer=(self), gyroscope=(self), magnetometer=(self), geolocation=(self), camera=(self), " +
		"screen-wake-lock=(self), microphone=(), payment=(), usb=()"
	return func(c *fiber.Ctx) error {
		c.Set(fiber.HeaderContentSecurityPolicy, policy)
		c.Set("Permissions-Policy", permissions)
		c.Set(fiber.HeaderReferrerPolicy, "same-origin")
		c.Set(fiber.HeaderXContentTypeOptions, "nosniff")
		c.Set("Cross-Origin-Opener-Policy", "same-origin")
		c.Set("Cross-Origin-Resource-Policy", "same-origin")
		if https {
			c.Set(fiber.HeaderStrictTransportSecurity, "max-age=31536000; includeSubDomains")
		}
		return c.Next()
	}
}

// apiOnly holds for every address under /api, read or written.
func apiOnly(c *fiber.Ctx) error {
	c.Set(fiber.HeaderCacheControl, "no-store")
	// The size limit counts the compressed bytes, and reading the body would unpack any number of them.
	if c.Get(fiber.HeaderContentEncoding) != "" {
		return refused(http.StatusUnsupportedMediaType, "content_encoding", "send the request without Content-Encoding")
	}
	return c.Next()
}

// writesGuarded lets a write through only from our own pages or from a program, never from a stranger's page: a
// browser tells where a request comes from, and a stranger's form can set neither our header nor our content type.
// Fiber's own tokens live in memory for an hour and would end an outbox of weeks.
func writesGuarded(c *fiber.Ctx) error {
	switch c.Method() {
	case fiber.MethodGet, fiber.MethodHead:
		return c.Next()
	}
	if site := c.Get("Sec-Fetch-Site"); site != "" {
		if site != "same-origin" && site != "none" {
			return refused(http.StatusForbidden, "cross_origin", "this request comes from another site")
		}
	} else if origin := c.Get(fiber.HeaderOrigin); origin != "" {
		if at, err := url.Parse(origin); err != nil || at.Host == "" || at.Host != string(c.Request().Host()) {
			return refused(http.StatusForbidden, "cross_origin", "this request comes from another site")
		}
	}
	if c.Get("X-Crossplumb") != "1" {
		return refused(http.StatusForbidden, "header_missing", "a write needs the header X-Crossplumb: 1")
	}
	kind, _, _ := strings.Cut(c.Get(fiber.HeaderContentType), ";")
	if !strings.EqualFold(strings.TrimSpace(kind), fiber.MIMEApplicationJSON) {
		return refused(http.StatusUnsupportedMediaType, "content_type", "a write needs Content-Type: application/json")
	}
	return c.Next()
}
