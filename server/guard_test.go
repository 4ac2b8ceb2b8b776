package server

import (
	"bytes"
	"compress/gzip"
	"context"
	"errors"
	"fmt"
	"net"
	"net/http"
	"strings"
	"testing"
	"time"

	"github.com/gofiber/fiber/v2"
	sqlite3 "github.com/mattn/go-sqlite3"
)

// A write that a stranger's page could make a browser send is refused before anything reads it.
func TestWritesComeFromOurOwnPages(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	good := upload(newDevice(s.tam).write(s.job, "", "note.added", `{"text":"x"}`))
	host := strings.TrimPrefix(s.url, "http://")
	with := func(headers ...string) map[string]string {
		m := map[string]string{}
		for i := 0; i < len(headers); i += 2 {
			m[headers[i]] = headers[i+1]
		}
		return m
	}
	before := s.contents()
	for _, c := range []struct {
		name    string
		headers map[string]string
		status  int
		code    string
	}{
		{"from another site", with("Sec-Fetch-Site", "cross-site"), 403, "cross_origin"},
		{"from a sister of our site", with("Sec-Fetch-Site", "same-site"), 403, "cross_origin"},
		{"an old browser, another origin", with("Sec-Fetch-Site", "", "Origin", "https://elsewhere.example"), 403, "cross_origin"},
		{"an old browser, another port", with("Sec-Fetch-Site", "", "Origin", "http://127.0.0.1:1"), 403, "cross_origin"},
		{"an old browser, a hidden origin", with("Sec-Fetch-Site", "", "Origin", "null"), 403, "cross_origin"},
		{"without our header", with("X-Crossplumb", ""), 403, "header_missing"},
		{"with another value in it", with("X-Crossplumb", "yes"), 403, "header_missing"},
		{"as a form", with("Content-Type", "application/x-www-form-urlencoded"), 415, "content_type"},
		{"as plain text", with("Content-Type", "text/plain"), 415, "content_type"},
		{"as no type", with("Content-Type", ""), 415, "content_type"},
		{"compressed, says it", with("Content-Encoding", "gzip"), 415, "content_encoding"},
		{"compressed twice, says it", with("Content-Encoding", "identity"), 415, "content_encoding"},
	} {
		t.Run(c.name, func(t *testing.T) {
			here := *s
			here.TB = t
			here.do(call{method: "POST", path: "/api/entries", cookie: tam, body: good, headers: c.headers, status: c.status, code: c.code})
		})
	}
	if after := s.contents(); fmt.Sprint(after) != fmt.Sprint(before) {
		t.Fatalf("stored %v, before %v", after, before)
	}
	for name, headers := range map[string]map[string]string{
		"our own page":                   nil,
		"our own page, an old browser":   with("Sec-Fetch-Site", "", "Origin", s.url),
		"a program":                      with("Sec-Fetch-Site", ""),
		"the type with a character set":  with("Content-Type", "application/json; charset=utf-8"),
		"behind a proxy that keeps Host": with("Host", "mast.example.org", "Sec-Fetch-Site", "", "Origin", "https://mast.example.org"),
	} {
		t.Run(name, func(t *testing.T) {
			here := *s
			here.TB = t
			here.do(call{method: "POST", path: "/api/entries", cookie: tam, body: good, headers: headers, status: 200})
		})
	}
	_ = host
}

// A small compressed body that would unpack to a large one is not unpacked.
func TestACompressedBodyIsNotOpened(t *testing.T) {
	s := openSite(t)
	var packed bytes.Buffer
	w := gzip.NewWriter(&packed)
	w.Write(bytes.Repeat([]byte(" "), 64<<20))
	w.Close()
	s.do(call{method: "POST", path: "/api/calc/spacing.wavelengths", cookie: s.cookie(s.tam), body: packed.String(),
		headers: map[string]string{"Content-Encoding": "gzip"}, status: 415, code: "content_encoding"})
}

func TestEveryAnswerIsGuarded(t *testing.T) {
	for _, secure := range []bool{false, true} {
		s := openSite(t, func(c *Config) { c.Secure = secure })
		for _, path := range []string{"/", "/desk", "/healthz", "/api/jobs", "/api/nothing", "/nothing", "/gen/x.js"} {
			a := s.do(call{method: "GET", path: path})
			for name, want := range map[string]string{
				"Content-Security-Policy":      "script-src 'self' 'wasm-unsafe-eval'; style-src 'self'",
				"Permissions-Policy":           "accelerometer=(self), gyroscope=(self), magnetometer=(self), geolocation=(self), camera=(self)",
				"Referrer-Policy":              "same-origin",
				"X-Content-Type-Options":       "nosniff",
				"Cross-Origin-Opener-Policy":   "same-origin",
				"Cross-Origin-Resource-Policy": "same-origin",
			} {
				if got := a.header.Get(name); !strings.Contains(got, want) {
					t.Errorf("%s: %s is %q", path, name, got)
				}
			}
			for _, must := range []string{"default-src 'none'", "frame-ancestors 'none'", "base-uri 'none'", "object-src 'none'"} {
				if !strings.Contains(a.header.Get("Content-Security-Policy"), must) {
					t.Errorf("%s: the policy lacks %s", path, must)
				}
			}
			if strict := a.header.Get("Strict-Transport-Security"); (strict != "") != secure {
				t.Errorf("%s, https %v: Strict-Transport-Security is %q", path, secure, strict)
			}
			if strings.HasPrefix(path, "/api") && a.header.Get("Cache-Control") != "no-store" {
				t.Errorf("%s: Cache-Control is %q", path, a.header.Get("Cache-Control"))
			}
			if a.header.Get("Server") != "" {
				t.Errorf("%s: Server is %q", path, a.header.Get("Server"))
			}
		}
	}
}

func TestWhatIsNotThere(t *testing.T) {
	s := openSite(t)
	tam := s.cookie(s.tam)
	s.rows(t, []call{
		{name: "an API address that is none", method: "GET", path: "/api/job", cookie: tam, status: 404, code: "not_found"},
		{name: "an API address in capitals", method: "GET", path: "/api/Jobs", cookie: tam, status: 404, code: "not_found"},
		{name: "an API address with a stroke behind it", method: "GET", path: "/api/jobs/", cookie: tam, status: 404, code: "not_found"},
		{name: "a page that is none", method: "GET", path: "/nothing", status: 404, code: "not_found"},
		{name: "a script that was not built", method: "GET", path: "/gen/phone-ABCDEFGH.js", status: 404, code: "not_found", hasNot: []string{"<"}},
		{name: "a way up", method: "GET", path: "/gen/../../go.mod", status: 404, code: "not_found"},
		{name: "a method that is none of this address's", method: "PUT", path: "/api/jobs", cookie: tam, status: 405, code: "method_not_allowed"},
		{name: "a job's id that is none", method: "GET", path: "/api/jobs/1", cookie: tam, status: 404, code: "not_found"},
		{name: "a job's id in other spelling", method: "GET", path: "/api/jobs/" + strings.ToUpper(s.job), cookie: tam, status: 404, code: "not_found"},
		{name: "a parameter that the address does not know", method: "GET", path: "/api/jobs?crew=north", cookie: tam, status: 400, code: "unknown_field", field: "crew"},
		{name: "a stage that is none", method: "GET", path: "/api/jobs?stage=done", cookie: tam, status: 400, code: "out_of_range", field: "stage"},
		{name: "a limit that is too much", method: "GET", path: "/api/entries?limit=100000", cookie: tam, status: 400, code: "out_of_range", field: "limit"},
		{name: "an operation that is none", method: "POST", path: "/api/calc/wind.load", cookie: tam, body: "{}", status: 404, code: "unknown_operation"},
	})
	a := s.do(call{method: "PUT", path: "/api/jobs", cookie: tam, status: 405})
	if allow := a.header.Get("Allow"); !strings.Contains(allow, "GET") || !strings.Contains(allow, "POST") {
		t.Errorf("Allow is %q", allow)
	}
}

// A fault of ours ends neither the process nor in the client's hands.
func TestAPanicBecomesAProblemWithoutItsText(t *testing.T) {
	s := openSiteWith(t, func(srv *Server) {
		srv.app.Get("/panic", func(*fiber.Ctx) error { panic("the secret of the house") })
		srv.app.Get("/fails", func(*fiber.Ctx) error { return fmt.Errorf("the secret of the house") })
	})
	for _, path := range []string{"/panic", "/fails"} {
		a := s.do(call{method: "GET", path: path, status: 500, code: "internal", hasNot: []string{"secret", "goroutine", ".go"}})
		if !strings.Contains(s.log.String(), a.header.Get("X-Request-Id")) {
			t.Errorf("%s: the log does not have the request's id", path)
		}
	}
	if !strings.Contains(s.log.String(), "the secret of the house") {
		t.Error("the log does not have the fault")
	}
	s.do(call{method: "GET", path: "/healthz", status: 200})
}

// A body that is larger than the server reads at all, over a real socket.
func TestABodyBeyondAllBounds(t *testing.T) {
	s := openSite(t)
	for _, size := range []int{maxAPIBody + 1, maxBody + 1, 8 << 20} {
		r, err := http.NewRequest("POST", s.url+"/api/entries", bytes.NewReader(bytes.Repeat([]byte(" "), size)))
		if err != nil {
			t.Fatal(err)
		}
		r.Header.Set("Content-Type", "application/json")
		r.Header.Set("X-Crossplumb", "1")
		r.Header.Set("Cookie", s.cookie(s.tam))
		response, err := s.client.Do(r)
		if err != nil {
			// The server closed before all was sent: as good a refusal, and nothing was read.
			continue
		}
		if kind := response.Header.Get("Content-Type"); response.StatusCode != 413 || kind != "application/problem+json" {
			t.Errorf("%d bytes: status %d as %q", size, response.StatusCode, kind)
		}
		response.Body.Close()
	}
	s.do(call{method: "GET", path: "/healthz", status: 200})
}

// Browsers open connections before they need them. A shutdown must not wait for those, and must wait for what has
// begun.
func TestShutdownEndsWithSilentConnections(t *testing.T) {
	started, release := make(chan struct{}), make(chan struct{})
	s := openSiteWith(t, func(srv *Server) {
		srv.app.Get("/slow", func(c *fiber.Ctx) error {
			close(started)
			<-release
			return c.SendString("done")
		})
	})
	for range 3 {
		conn, err := net.Dial("tcp", strings.TrimPrefix(s.url, "http://"))
		if err != nil {
			t.Fatal(err)
		}
		defer conn.Close()
	}
	got := make(chan string, 1)
	go func() {
		response, err := http.Get(s.url + "/slow")
		if err != nil {
			got <- err.Error()
			return
		}
		defer response.Body.Close()
		var b bytes.Buffer
		b.ReadFrom(response.Body)
		got <- b.String()
	}()
	<-started
	ended := make(chan error, 1)
	begin := time.Now()
	go func() { ended <- s.server.Shutdown() }()
	time.Sleep(300 * time.Millisecond)
	close(release)
	if text := <-got; text != "done" {
		t.Errorf("the request in flight got %q", text)
	}
	if err := <-ended; err != nil {
		t.Error(err)
	}
	if took := time.Since(begin); took > 9*time.Second {
		t.Errorf("it took %v", took)
	}
}

// Fiber uses a request's memory for the next one. Our handlers keep nothing, and should one ever do, what it keeps must
// stay what it was.
func TestTextsOfARequestStay(t *testing.T) {
	var kept []string
	s := openSiteWith(t, func(srv *Server) {
		srv.app.Get("/kept/:word", func(c *fiber.Ctx) error {
			kept = append(kept, c.Params("word"), c.Query("q"), c.Get("X-Word"))
			return c.SendStatus(http.StatusNoContent)
		})
	})
	var want []string
	for _, word := range []string{"aaaa", "bbbb", "cccc", "dddd"} {
		s.do(call{method: "GET", path: "/kept/" + word + "?q=" + word, headers: map[string]string{"X-Word": word}, status: 204})
		want = append(want, word, word, word)
	}
	if fmt.Sprint(kept) != fmt.Sprint(want) {
		t.Errorf("kept %v, want %v", kept, want)
	}
}

// A database that cannot write, a lock that does not end, and time that runs out are told apart from faults of ours.
func TestFailuresOfTheDatabaseAreNamed(t *testing.T) {
	for _, c := range []struct {
		err    error
		status int
		code   string
	}{
		{sqlite3.Error{Code: sqlite3.ErrFull}, 507, "storage_full"},
		{fmt.Errorf("commit: %w", sqlite3.Error{Code: sqlite3.ErrIoErr}), 507, "storage_full"},
		{sqlite3.Error{Code: sqlite3.ErrReadonly}, 507, "storage_full"},
		{sqlite3.Error{Code: sqlite3.ErrBusy}, 503, "busy"},
		{context.DeadlineExceeded, 503, "busy"},
		{sqlite3.Error{Code: sqlite3.ErrCorrupt}, 500, "internal"},
		{errors.New("anything"), 500, "internal"},
	} {
		if p := asProblem(c.err); p.Status != c.status || p.Code != c.code {
			t.Errorf("%v becomes %d %s, want %d %s", c.err, p.Status, p.Code, c.status, c.code)
		}
	}
}
