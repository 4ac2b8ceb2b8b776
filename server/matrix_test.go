package server

import (
	"fmt"
	"net/http"
	"strings"
	"testing"
	"time"

	"crossplumb/db"
)

// who asks, in the order of the columns of the matrix.
var askers = []string{"anonymous", "climber of the crew", "climber of another crew", "supervisor", "expired session", "disabled"}

// row is what a route answers to each.
type row struct {
	path string // an address of this route; JOB stands for the job's id
	body func(s *site) string
	want [6]int
}

// The whole matrix. A route that is not in it fails the test.
func matrix() map[string]row {
	none := func(*site) string { return "" }
	empty := func(*site) string { return "{}" }
	signedIn := func(path string) row { return row{path, none, [6]int{401, 200, 200, 200, 401, 401}} }
	deskOnly := func(path string, body func(*site) string, fine int) row {
		return row{path, body, [6]int{401, 403, 403, fine, 401, 401}}
	}
	everybody := func(path string, status int) row {
		return row{path, none, [6]int{status, status, status, status, status, status}}
	}
	return map[string]row{
		"GET /healthz":       everybody("/healthz", 200),
		"GET /":              everybody("/", 503), // not built in this test
		"GET /desk":          everybody("/desk", 503),
		"GET /sw.js":         everybody("/sw.js", 404),
		"GET /manifest.json": everybody("/manifest.json", 404),
		"GET /gen/*":         everybody("/gen/phone.js", 404),

		"POST /api/session": {"/api/session", func(*site) string { return `{"name":"Ilse","passphrase":"` + passphrase + `"}` },
			[6]int{200, 200, 200, 200, 200, 200}},
		"GET /api/session":    signedIn("/api/session"),
		"DELETE /api/session": {"/api/session", empty, [6]int{401, 204, 204, 204, 401, 401}},

		"GET /api/calc":            signedIn("/api/calc"),
		"GET /api/calc/:op/schema": signedIn("/api/calc/spacing.wavelengths/schema"),
		"POST /api/calc/:op": {"/api/calc/spacing.wavelengths", func(*site) string {
			return `{"frequency_mhz":5800,"spacing_mm":{"right":100,"up":0,"forward":0},"off_broadside_deg":0}`
		}, [6]int{401, 200, 200, 200, 401, 401}},

		"POST /api/entries": {"/api/entries", func(s *site) string {
			return upload(newDevice(s.tam).write(s.job, "", db.NoteAdded, `{"text":"x"}`))
		}, [6]int{401, 200, 200, 200, 401, 401}},
		"GET /api/entries": signedIn("/api/entries"),
		"GET /api/state":   signedIn("/api/state"),

		"GET /api/jobs": signedIn("/api/jobs"),
		"POST /api/jobs": deskOnly("/api/jobs", func(s *site) string {
			return `{"id":"` + newID() + `","site":"s","title":"t","crew":"north","mounts":[{"id":"m1","name":"n","sheet":` + string(plannedSheet(s)) + `}]}`
		}, 201),
		"GET /api/jobs/:id": {"/api/jobs/JOB", none, [6]int{401, 200, 404, 200, 401, 401}},
		"POST /api/jobs/:id/decision": deskOnly("/api/jobs/JOB/decision", func(s *site) string {
			return `{"id":"` + newID() + `","decision":"sign off","remark":null,"base_seq":1}`
		}, 409), // the job is not handed in

		"GET /api/quarantine":          deskOnly("/api/quarantine", none, 200),
		"GET /api/people":              deskOnly("/api/people", none, 200),
		"POST /api/people/invitations": deskOnly("/api/people/invitations", func(*site) string { return `{"role":"climber","crew":"north"}` }, 201),
		"GET /api/openapi.json":        signedIn("/api/openapi.json"),
	}
}

func TestWhoMayDoWhat(t *testing.T) {
	s := openSite(t)
	table := matrix()
	cookies := map[string]func() string{
		"anonymous":               func() string { return "" },
		"climber of the crew":     func() string { return s.cookie(s.tam) },
		"climber of another crew": func() string { return s.cookie(s.odd) },
		"supervisor":              func() string { return s.cookie(s.desk) },
		"expired session": func() string {
			c := s.cookie(s.desk)
			s.clock.pass(13 * time.Hour)
			return c
		},
		"disabled": func() string {
			p := s.person("Gone "+newID(), db.Supervisor, "")
			c := s.cookie(p)
			if err := s.store.Disable(t.Context(), p.ID); err != nil {
				t.Fatal(err)
			}
			return c
		},
	}
	cells := 0
	for _, route := range s.server.Routes() {
		key := route.Method + " " + route.Path
		r, there := table[key]
		if !there {
			t.Errorf("%s has no row in the matrix", key)
			continue
		}
		delete(table, key)
		for i, asker := range askers {
			t.Run(key+" by "+asker, func(t *testing.T) {
				here := *s
				here.TB = t
				here.do(call{method: route.Method, path: strings.Replace(r.path, "JOB", s.job, 1), cookie: cookies[asker](),
					body: r.body(&here), status: r.want[i]})
			})
			cells++
		}
	}
	for key := range table {
		t.Errorf("%s has a row and is no route", key)
	}
	if want := len(matrix()) * len(askers); cells != want {
		t.Errorf("%d cells were tried, want %d", cells, want)
	}
}

// What nobody may do leaves no trace, whoever asks.
func TestWhatIsNotAllowedStoresNothing(t *testing.T) {
	s := openSite(t)
	before := s.contents()
	for key, r := range matrix() {
		method, _, _ := strings.Cut(key, " ")
		if method == http.MethodGet || key == "POST /api/session" {
			continue
		}
		for i, cookie := range []string{"", "sid=made-up", "sid=" + strings.Repeat("A", 43)} {
			s.do(call{name: fmt.Sprint(i), method: method, path: strings.Replace(r.path, "JOB", s.job, 1), cookie: cookie, body: r.body(s), status: 401, code: "sign_in"})
		}
	}
	if after := s.contents(); fmt.Sprint(after) != fmt.Sprint(before) {
		t.Errorf("stored %v, before %v", after, before)
	}
}

func TestAClimberCannotDecideByAnyWay(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	d := newDevice(s.tam)
	s.do(call{method: "POST", path: "/api/entries", cookie: tam, body: upload(d.write(s.job, "", db.JobHandedIn, `{"remark":null,"open":[],"verdicts":[]}`)), status: 200})
	job, err := s.store.Job(t.Context(), s.desk, s.job)
	if err != nil {
		t.Fatal(err)
	}
	body := fmt.Sprintf(`{"remark":null,"base_seq":%d}`, job.StageSeq)
	for name, in := range map[string]db.Incoming{
		"in his own name":      d.write(s.job, "", db.JobSignedOff, body),
		"in a supervisor's":    newDevice(s.desk).write(s.job, "", db.JobSignedOff, body),
		"sending back as well": newDevice(s.tam).write(s.job, "", db.JobSentBack, fmt.Sprintf(`{"remark":"x","base_seq":%d}`, job.StageSeq)),
	} {
		s.do(call{name: name, method: "POST", path: "/api/entries", cookie: tam, body: upload(in), status: 200,
			has: []string{`"status":"quarantined"`, `"code":"not_allowed"`}})
	}
	s.do(call{method: "POST", path: "/api/jobs/" + s.job + "/decision", cookie: tam, status: 403, code: "not_allowed",
		body: fmt.Sprintf(`{"id":"%s","decision":"sign off","remark":null,"base_seq":%d}`, newID(), job.StageSeq)})
	if after, err := s.store.Job(t.Context(), s.desk, s.job); err != nil || after.Stage != db.StageHandedIn {
		t.Errorf("the job is %s (%v)", after.Stage, err)
	}
}
