package server

import (
	"errors"
	"log/slog"
	"net/http"
	"time"

	"github.com/gofiber/fiber/v2"

	"crossplumb/db"
)

// who is the person of a request.
type who = db.Person

// cookieName: with https the prefix binds the cookie to this host, this path and https; without (a demo on the same
// machine) browsers would refuse the prefix.
func (s *Server) cookieName() string {
	if s.cfg.Secure {
		return "__Host-sid"
	}
	return "sid"
}

// anybody lets through whoever is signed in.
func (s *Server) anybody(next fiber.Handler) fiber.Handler {
	return func(c *fiber.Ctx) error {
		token := c.Cookies(s.cookieName())
		if token == "" {
			return signInFirst()
		}
		ctx, done := s.patience()
		defer done()
		person, until, err := s.cfg.Store.Session(ctx, token)
		if errors.Is(err, db.ErrNoSession) {
			return signInFirst()
		}
		if err != nil {
			return err
		}
		c.Locals(keyPerson, person)
		c.Locals(keyUntil, until)
		return next(c)
	}
}

// supervisor lets through supervisors only.
func (s *Server) supervisor(next fiber.Handler) fiber.Handler {
	return s.anybody(func(c *fiber.Ctx) error {
		if person(c).Role != db.Supervisor {
			return refused(http.StatusForbidden, "not_allowed", "this is for a supervisor to do")
		}
		return next(c)
	})
}

func signInFirst() *problem {
	return refused(http.StatusUnauthorized, "sign_in", "sign in first; what waits on the phone is kept")
}

// person is who is signed in; only behind anybody or supervisor.
func person(c *fiber.Ctx) who { return c.Locals(keyPerson).(who) }

type userBody struct {
	ID   string  `json:"id"`
	Name string  `json:"name"`
	Role string  `json:"role"`
	Crew *string `json:"crew"`
}

type sessionBody struct {
	User  userBody `json:"user"`
	Until string   `json:"until"`
}

func userOf(p db.Person) userBody {
	u := userBody{ID: p.ID, Name: p.Name, Role: p.Role}
	if p.Crew != "" {
		u.Crew = &p.Crew
	}
	return u
}

func stamp(t time.Time) string { return t.UTC().Format("2006-01-02T15:04:05.000Z") }

// POST /api/session signs in by name and passphrase, or uses an invitation once to become somebody.
func (s *Server) signIn(c *fiber.Ctx) error {
	var in struct {
		Invitation *string `json:"invitation"`
		Name       *string `json:"name"`
		Passphrase *string `json:"passphrase"`
	}
	if err := decode(c, 8<<10, &in); err != nil {
		return err
	}
	switch {
	case in.Name == nil || db.TidyName(*in.Name) == "":
		return missing("name")
	case in.Passphrase == nil || *in.Passphrase == "":
		return missing("passphrase")
	case len(*in.Passphrase) > longestPassphrase:
		return outOfRange("passphrase", "a passphrase has 256 bytes at most")
	}
	var p db.Person
	var err error
	if in.Invitation != nil {
		p, err = s.accept(*in.Invitation, *in.Name, *in.Passphrase)
	} else {
		p, err = s.recognise(*in.Name, *in.Passphrase)
	}
	if err != nil {
		return err
	}
	ctx, done := s.patience()
	defer done()
	// A new token at each sign-in; the one that the browser had ends.
	if old := c.Cookies(s.cookieName()); old != "" {
		if err := s.cfg.Store.End(ctx, old); err != nil {
			return err
		}
	}
	token, until, err := s.cfg.Store.Begin(ctx, p)
	if err != nil {
		return err
	}
	s.setCookie(c, token, int(db.LifeOf(p.Role).Whole/time.Second))
	return answer(c, http.StatusOK, sessionBody{User: userOf(p), Until: stamp(until)})
}

// recognise checks a passphrase. A name that nobody has takes as long and gets the same answer.
func (s *Server) recognise(name, passphrase string) (db.Person, error) {
	ctx, done := s.patience()
	defer done()
	wait, err := s.cfg.Store.Try(ctx, name)
	if err != nil {
		return db.Person{}, err
	}
	if wait > 0 {
		return db.Person{}, &problem{Status: http.StatusTooManyRequests, Code: "too_many_attempts", RetryAfter: wait,
			Detail: "too many wrong passphrases for this name; wait a little and try again"}
	}
	p, stored, err := s.cfg.Store.Credentials(ctx, name)
	known := err == nil
	if errors.Is(err, db.ErrNotFound) {
		stored, err = s.dummy, nil
	}
	if err != nil {
		return db.Person{}, err
	}
	leave, err := s.hashTurn(ctx)
	if err != nil {
		return db.Person{}, err
	}
	same, weaker, err := s.cfg.Passphrases.matches(passphrase, stored)
	renewed := ""
	if err == nil && same && known && weaker {
		renewed = s.cfg.Passphrases.Hash(passphrase)
	}
	leave()
	if err != nil {
		return db.Person{}, err
	}
	if !same || !known {
		s.noteFailure(p, known)
		return db.Person{}, refused(http.StatusUnauthorized, "wrong_passphrase", "name and passphrase do not belong together")
	}
	if renewed != "" {
		if err := s.cfg.Store.ReplacePassphrase(ctx, p.ID, renewed); err != nil {
			return db.Person{}, err
		}
	}
	return p, s.cfg.Store.Succeeded(ctx, name)
}

// noteFailure writes a failed sign-in down, beside the request: the time that it takes would tell a stranger whether the
// name is there. A name that nobody has goes to the log only, since strangers could fill the audit with such.
func (s *Server) noteFailure(p db.Person, known bool) {
	s.beside.Go(func() {
		if !known {
			s.cfg.Log.Info("sign-in failed", slog.String("name", "nobody's"))
			return
		}
		ctx, done := s.patience()
		defer done()
		if err := s.cfg.Store.Failed(ctx, p.ID); err != nil {
			s.cfg.Log.Warn("failed sign-in not written down", slog.String("error", err.Error()))
		}
	})
}

func (s *Server) accept(invitation, name, passphrase string) (db.Person, error) {
	if p := checkNewPassphrase(passphrase, name); p != nil {
		return db.Person{}, p
	}
	ctx, done := s.patience()
	defer done()
	// Asked first, so that strangers without an invitation cannot make the server hash.
	open, err := s.cfg.Store.InvitationOpen(ctx, invitation)
	if err != nil {
		return db.Person{}, err
	}
	if !open {
		return db.Person{}, db.ErrInvitation
	}
	leave, err := s.hashTurn(ctx)
	if err != nil {
		return db.Person{}, err
	}
	stored := s.cfg.Passphrases.Hash(passphrase)
	leave()
	return s.cfg.Store.Accept(ctx, invitation, name, stored)
}

// GET /api/session tells who is signed in and until when.
func (s *Server) showSession(c *fiber.Ctx) error {
	return answer(c, http.StatusOK, sessionBody{User: userOf(person(c)), Until: stamp(c.Locals(keyUntil).(time.Time))})
}

// DELETE /api/session signs out. The phone's own store is the phone's business: what waits there is not lost.
func (s *Server) signOut(c *fiber.Ctx) error {
	ctx, done := s.patience()
	defer done()
	if err := s.cfg.Store.End(ctx, c.Cookies(s.cookieName())); err != nil {
		return err
	}
	s.setCookie(c, "", -1)
	return c.SendStatus(http.StatusNoContent)
}

// setCookie always says how long: a cookie without an age ends with the window on some phones.
func (s *Server) setCookie(c *fiber.Ctx, token string, seconds int) {
	cookie := fiber.Cookie{Name: s.cookieName(), Value: token, Path: "/", MaxAge: seconds, HTTPOnly: true,
		Secure: s.cfg.Secure, SameSite: fiber.CookieSameSiteLaxMode}
	if seconds < 0 {
		cookie.Expires = time.Unix(0, 0)
	}
	c.Cookie(&cookie)
}
