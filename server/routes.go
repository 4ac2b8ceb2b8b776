package server

import "github.com/gofiber/fiber/v2"

// routes is every route, one a line. Who may call it stands beside it; a route without a row in the authorisation
// matrix of the tests, or without a description in openapi.json, fails them.
func (s *Server) routes() {
	s.app.Use(s.logged, s.recovered, secured(s.cfg.Secure))

	s.app.Get("/healthz", s.health)

	api := s.app.Group("/api", apiOnly, writesGuarded)
	api.Post("/session", s.signIn)
	api.Get("/session", s.anybody(s.showSession))
	api.Delete("/session", s.anybody(s.signOut))

	api.Get("/calc", s.anybody(s.listOperations))
	api.Get("/calc/:op/schema", s.anybody(s.showSchema))
	api.Post("/calc/:op", s.anybody(s.calculate))

	api.Post("/entries", s.anybody(s.takeEntries))
	api.Get("/entries", s.anybody(s.listEntries))
	api.Get("/state", s.anybody(s.showState))

	api.Get("/jobs", s.anybody(s.listJobs))
	api.Post("/jobs", s.supervisor(s.issueJob))
	api.Get("/jobs/:id", s.anybody(s.showJob))
	api.Post("/jobs/:id/decision", s.supervisor(s.decide))

	api.Get("/quarantine", s.supervisor(s.listQuarantine))
	api.Get("/people", s.supervisor(s.listPeople))
	api.Post("/people/invitations", s.supervisor(s.invite))
	api.Get("/openapi.json", s.anybody(s.showOpenAPI))

	s.app.Get("/", s.page)
	s.app.Get("/desk", s.page)
	s.app.Get("/sw.js", s.page)
	s.app.Get("/manifest.json", s.page)
	s.app.Get("/gen/*", s.page)
}

// Route is one line of the above, for the tests that ask for each.
type Route struct{ Method, Path string }

// Routes lists what was registered, read back from the router.
func (s *Server) Routes() []Route {
	var list []Route
	for _, r := range s.app.GetRoutes(true) {
		if r.Method != fiber.MethodHead { // each GET comes with one
			list = append(list, Route{r.Method, r.Path})
		}
	}
	return list
}
