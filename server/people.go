package server

import (
	"net/http"
	"strings"

	"github.com/gofiber/fiber/v2"

	"crossplumb/db"
)

// GET /api/people lists who may sign in.
func (s *Server) listPeople(c *fiber.Ctx) error {
	ctx, done := s.patience()
	defer done()
	list, err := s.cfg.Store.People(ctx)
	if err != nil {
		return err
	}
	out := make([]userBody, 0, len(list))
	for _, p := range list {
		out = append(out, userOf(p))
	}
	return answer(c, http.StatusOK, map[string]any{"people": out})
}

// POST /api/people/invitations makes a link that works once, for one person, for 72 hours.
func (s *Server) invite(c *fiber.Ctx) error {
	var in struct {
		Role *string `json:"role"`
		Crew *string `json:"crew"`
	}
	if err := decode(c, 8<<10, &in); err != nil {
		return err
	}
	crew := ""
	if in.Crew != nil {
		crew = strings.Join(strings.Fields(*in.Crew), " ")
	}
	switch {
	case in.Role == nil:
		return missing("role")
	case *in.Role != db.Climber && *in.Role != db.Supervisor:
		return outOfRange("role", "a role is climber or supervisor")
	case *in.Role == db.Climber && crew == "":
		return missing("crew")
	case len(crew) > 200:
		return outOfRange("crew", "a crew's name has 200 bytes at most")
	}
	ctx, done := s.patience()
	defer done()
	token, until, err := s.cfg.Store.Invite(ctx, person(c).ID, *in.Role, crew)
	if err != nil {
		return err
	}
	return answer(c, http.StatusCreated, map[string]string{"link": InvitationLink(s.origin(c), *in.Role, token), "until": stamp(until)})
}

// InvitationLink is where an invitation is used. The token stands after #, which browsers do not send: it comes into no
// server's log.
func InvitationLink(origin, role, token string) string {
	page := "/"
	if role == db.Supervisor {
		page = "/desk"
	}
	return strings.TrimSuffix(origin, "/") + page + "#invitation=" + token
}

// origin is what people type to come here.
func (s *Server) origin(c *fiber.Ctx) string {
	if s.cfg.Origin != "" {
		return s.cfg.Origin
	}
	scheme := "http"
	if s.cfg.Secure {
		scheme = "https"
	}
	return scheme + "://" + string(c.Request().Host())
}
