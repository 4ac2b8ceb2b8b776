package server

import (
	"bytes"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"io"
	"log/slog"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/google/uuid"

	"crossplumb/db"
	"crossplumb/static"
)

// cheap is a passphrase cost that lets tests sign in often.
var cheap = HashCost{MemoryKiB: 64, Passes: 1, Lanes: 1}

type testClock struct {
	mu sync.Mutex
	at time.Time
}

func (c *testClock) now() time.Time {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.at
}

func (c *testClock) pass(d time.Duration) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.at = c.at.Add(d)
}

// fakePages are pages without a build.
type fakePages map[string]*static.File

func (p fakePages) Get(path string) (*static.File, bool) {
	f, there := p[path]
	return f, there
}

// site is a server on a real listener with a real database, people, and one job issued to the first crew.
type site struct {
	testing.TB
	server *Server
	store  *db.Store
	clock  *testClock
	url    string
	log    *lockedBuffer
	client *http.Client

	desk, tam, odd db.Person
	job            string
}

type lockedBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *lockedBuffer) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lockedBuffer) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

const passphrase = "long enough for a test"

func openSite(t testing.TB, changes ...func(*Config)) *site {
	t.Helper()
	return openSiteWith(t, func(*Server) {}, changes...)
}

// openSiteWith lets a test add routes before the server listens.
func openSiteWith(t testing.TB, add func(*Server), changes ...func(*Config)) *site {
	t.Helper()
	s := &site{TB: t, clock: &testClock{at: time.Date(2026, 11, 30, 9, 0, 0, 0, time.UTC)}, log: &lockedBuffer{}}
	var err error
	s.store, err = db.Open(t.Context(), db.Config{Path: filepath.Join(t.TempDir(), "crossplumb.db"), Now: s.clock.now, App: "test"})
	if err != nil {
		t.Fatal(err)
	}
	cfg := Config{Store: s.store, Pages: fakePages{}, Passphrases: cheap,
		Log: slog.New(slog.NewJSONHandler(s.log, &slog.HandlerOptions{Level: slog.LevelDebug}))}
	for _, change := range changes {
		change(&cfg)
	}
	if s.server, err = New(cfg); err != nil {
		t.Fatal(err)
	}
	add(s.server)
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	s.url = "http://" + ln.Addr().String()
	served := make(chan error, 1)
	go func() { served <- s.server.Serve(ln) }()
	// One client for all: connections are kept, and Fiber uses the memory of one request for the next.
	s.client = &http.Client{Transport: &http.Transport{MaxIdleConnsPerHost: 4}, Timeout: 30 * time.Second,
		CheckRedirect: func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }}
	t.Cleanup(func() {
		s.client.CloseIdleConnections()
		if err := s.server.Shutdown(); err != nil {
			t.Errorf("shutdown: %v", err)
		}
		if err := <-served; err != nil {
			t.Errorf("serve: %v", err)
		}
		s.store.Close()
	})
	s.desk = s.person("Ilse", db.Supervisor, "")
	s.tam = s.person("Tam", db.Climber, "north")
	s.odd = s.person("Odd", db.Climber, "south")
	s.job = newID()
	s.issue(s.job, "north")
	return s
}

func (s *site) person(name, role, crew string) db.Person {
	s.Helper()
	p, err := s.store.AddPerson(s.Context(), name, role, crew, cheap.Hash(passphrase))
	if err != nil {
		s.Fatal(err)
	}
	return p
}

func (s *site) issue(job, crew string) {
	s.Helper()
	plan := db.Plan{Site: "Gannet Head", Title: "North-east", Crew: crew,
		Mounts: []db.PlannedMount{{ID: "m1", Name: "north-east", Sheet: plannedSheet(s)}}}
	if _, err := s.store.AppendDesk(s.Context(), s.desk, []db.DeskEntry{
		{ID: newID(), Job: job, Kind: db.JobPlanned, Body: plan}, {ID: newID(), Job: job, Kind: db.JobIssued, Body: struct{}{}},
	}); err != nil {
		s.Fatal(err)
	}
}

// plannedSheet is a sheet of testdata without its readings; changes are made to its first antenna.
func plannedSheet(t testing.TB, changes ...func(antenna map[string]any)) jsontext.Value {
	t.Helper()
	text, err := os.ReadFile("../testdata/jobs/crossed-pair-no-go.json")
	if err != nil {
		t.Fatal(err)
	}
	var sheet map[string]any
	if err := json.Unmarshal(text, &sheet); err != nil {
		t.Fatal(err)
	}
	for _, a := range sheet["near"].(map[string]any)["antennas"].([]any) {
		for _, q := range []string{"position_mm", "azimuth", "tilt", "skew"} {
			if states, is := a.(map[string]any)[q].(map[string]any); is {
				states["as_found"], states["as_left"] = nil, nil
			}
		}
	}
	for _, change := range changes {
		change(sheet["near"].(map[string]any)["antennas"].([]any)[0].(map[string]any))
	}
	text, err = json.Marshal(sheet, json.Deterministic(true))
	if err != nil {
		t.Fatal(err)
	}
	return text
}

func newID() string { return uuid.Must(uuid.NewV7()).String() }

// cookie signs a person in past the passphrase.
func (s *site) cookie(p db.Person) string {
	s.Helper()
	token, _, err := s.store.Begin(s.Context(), p)
	if err != nil {
		s.Fatal(err)
	}
	return "sid=" + token
}

// call is one request and what must come back.
type call struct {
	name    string
	method  string
	path    string
	cookie  string
	body    string
	headers map[string]string // over those that a page of ours sends; "" takes one away

	status int
	code   string // of the problem
	field  string
	has    []string // in the body
	hasNot []string
}

// answered is what came back.
type answered struct {
	status int
	header http.Header
	body   string
}

func (a answered) into(t testing.TB, v any) {
	t.Helper()
	if err := json.Unmarshal([]byte(a.body), v, json.MatchCaseInsensitiveNames(true)); err != nil {
		t.Fatalf("%v in %s", err, a.body)
	}
}

// do sends one request as a page of ours would, and holds the answer against openapi.json and against the row.
func (s *site) do(c call) answered {
	s.Helper()
	var body io.Reader
	if c.body != "" || c.method == http.MethodPost {
		body = strings.NewReader(c.body)
	}
	r, err := http.NewRequest(c.method, s.url+c.path, body)
	if err != nil {
		s.Fatal(err)
	}
	if c.method != http.MethodGet && c.method != http.MethodHead {
		r.Header.Set("Content-Type", "application/json")
		r.Header.Set("X-Crossplumb", "1")
		r.Header.Set("Sec-Fetch-Site", "same-origin")
	}
	if c.cookie != "" {
		r.Header.Set("Cookie", c.cookie)
	}
	for name, value := range c.headers {
		if name == "Host" {
			r.Host = value
		} else if r.Header.Del(name); value != "" {
			r.Header.Set(name, value)
		}
	}
	response, err := s.client.Do(r)
	if err != nil {
		s.Fatalf("%s %s: %v", c.method, c.path, err)
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	if err != nil {
		s.Fatal(err)
	}
	a := answered{response.StatusCode, response.Header, string(text)}
	s.asAgreed(c, a)
	if c.status != 0 && a.status != c.status {
		s.Errorf("%s %s: status %d, want %d: %s", c.method, c.path, a.status, c.status, clip(a.body))
	}
	if c.code != "" {
		var p problemBody
		if err := json.Unmarshal(text, &p); err != nil || p.Code != c.code || p.Field != c.field || p.Status != a.status || p.RequestID != a.header.Get("X-Request-Id") {
			s.Errorf("%s %s: problem %s, want code %q field %q", c.method, c.path, clip(a.body), c.code, c.field)
		}
		if kind := a.header.Get("Content-Type"); kind != "application/problem+json" {
			s.Errorf("%s %s: a problem as %q", c.method, c.path, kind)
		}
	}
	for _, part := range c.has {
		if !strings.Contains(a.body, part) {
			s.Errorf("%s %s: %q is not in %s", c.method, c.path, part, clip(a.body))
		}
	}
	for _, part := range c.hasNot {
		if strings.Contains(a.body, part) {
			s.Errorf("%s %s: %q is in %s", c.method, c.path, part, clip(a.body))
		}
	}
	return a
}

func clip(s string) string {
	if len(s) > 600 {
		return s[:600] + "…"
	}
	return s
}

// rows runs each call as a subtest.
func (s *site) rows(t *testing.T, calls []call) {
	for _, c := range calls {
		t.Run(c.name, func(t *testing.T) {
			row := *s
			row.TB = t
			row.do(c)
		})
	}
}

// device writes entries as a phone does.
type device struct {
	id     string
	author string
	seq    int64
	prev   string
}

func newDevice(p db.Person) *device { return &device{id: uuid.NewString(), author: p.ID} }

func (d *device) write(job, mount, kind, body string) db.Incoming {
	d.seq++
	entry := map[string]any{"id": newID(), "device": d.id, "device_seq": d.seq, "prev": d.prev, "job": job, "mount": nil,
		"kind": kind, "schema": 1, "at": "2026-11-30T10:00:00+01:00", "mono_ms": 5, "author": d.author, "app": "test",
		"body": jsontext.Value(body)}
	if mount != "" {
		entry["mount"] = mount
	}
	raw, err := json.Marshal(entry, json.Deterministic(true))
	if err != nil {
		panic(err)
	}
	d.prev = db.HashOf(string(raw))
	return db.Incoming{Raw: string(raw), Hash: d.prev}
}

// upload is the body of POST /api/entries.
func upload(entries ...db.Incoming) string {
	type sent struct {
		Raw  string `json:"raw"`
		Hash string `json:"hash"`
	}
	list := []sent{}
	for _, e := range entries {
		list = append(list, sent{e.Raw, e.Hash})
	}
	text, err := json.Marshal(map[string]any{"entries": list, "sent_at": "2026-11-30T10:00:01+01:00"})
	if err != nil {
		panic(err)
	}
	return string(text)
}

func reading(quantity, phase string, value, u string) string {
	north := ""
	if quantity == "azimuth" {
		north = `,"north":"true"`
	}
	return `{"phase":"` + phase + `","antenna":"A","quantity":"` + quantity + `","reading":{"value":` + value + `,"unit":"deg","u":` + u +
		`,"method":"level"` + north + `},"typed":"` + value + `"}`
}

// contents counts everything that a request could have stored.
func (s *site) contents() map[string]int64 {
	s.Helper()
	proof, err := s.store.Prove(s.Context())
	if err != nil {
		s.Fatal(err)
	}
	people, err := s.store.People(s.Context())
	if err != nil {
		s.Fatal(err)
	}
	return map[string]int64{"entries": proof.Entries, "quarantined": proof.Quarantined, "audit": proof.Audit, "people": int64(len(people))}
}
