package server

import (
	"net/http"

	"github.com/gofiber/fiber/v2"
)

// GET /healthz tells that the process answers and that a writing transaction can be begun. It does not write, so that a
// stranger cannot make it sync the disk; a full disk shows as 507 on uploads. It is open to everybody and says nothing
// else.
func (s *Server) health(c *fiber.Ctx) error {
	if err := knownQuery(c); err != nil {
		return err
	}
	ctx, done := s.patience()
	defer done()
	if err := s.cfg.Store.Ping(ctx); err != nil {
		return &problem{Status: http.StatusServiceUnavailable, Code: "unhealthy", Detail: "no transaction can be begun on the database; the server's own log says why", Cause: err}
	}
	c.Set(fiber.HeaderCacheControl, "no-store")
	return answer(c, http.StatusOK, map[string]any{"status": "ok", "demo": s.cfg.Demo})
}
