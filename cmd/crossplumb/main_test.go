package main

import (
	"bufio"
	"bytes"
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	json "encoding/json/v2"
	"encoding/pem"
	"fmt"
	"io"
	"math/big"
	mathrand "math/rand/v2"
	"net"
	"net/http"
	"net/http/cookiejar"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/google/uuid"

	"crossplumb/db"
)

// runAs makes this test program be crossplumb itself: the children of these tests.
const runAs = "TEST_RUNS_AS_CROSSPLUMB"

func TestMain(m *testing.M) {
	if os.Getenv(runAs) != "" {
		os.Unsetenv(runAs)
		main()
		return
	}
	os.Exit(m.Run())
}

// result is how a command ended.
type result struct {
	code     int
	out, err string
}

// crossplumb runs a command in this process.
func crossplumb(t *testing.T, stdin string, args ...string) result {
	t.Helper()
	var out, errs bytes.Buffer
	code := run(t.Context(), args, streams{strings.NewReader(stdin), &out, &errs})
	return result{code, out.String(), errs.String()}
}

// child is crossplumb as a process of its own.
type child struct {
	testing.TB
	cmd  *exec.Cmd
	url  string
	mu   sync.Mutex
	text strings.Builder
	done chan struct{}
}

// start starts a serving command and waits until it listens.
func start(t testing.TB, args ...string) *child {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	c := &child{TB: t, cmd: exec.Command(self, args...), done: make(chan struct{})}
	c.cmd.Env = append(os.Environ(), runAs+"=1")
	out, err := c.cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	c.cmd.Stderr = os.Stderr
	if err := c.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	listening := make(chan string, 1)
	go func() {
		defer close(c.done)
		for lines := bufio.NewScanner(out); lines.Scan(); {
			c.mu.Lock()
			c.text.WriteString(lines.Text() + "\n")
			c.mu.Unlock()
			if url, found := strings.CutPrefix(lines.Text(), "listening on "); found {
				listening <- url
			}
		}
	}()
	t.Cleanup(func() {
		if c.cmd.ProcessState == nil {
			c.cmd.Process.Kill()
			c.cmd.Wait()
		}
	})
	select {
	case c.url = <-listening:
	case <-c.done:
		t.Fatalf("%v ended before it listened: %s", args, c.said())
	case <-time.After(30 * time.Second):
		t.Fatalf("%v does not listen: %s", args, c.said())
	}
	return c
}

func (c *child) said() string {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.text.String()
}

// end sends a signal and returns how the process ended and how long that took.
func (c *child) end(signal syscall.Signal) (error, time.Duration) {
	c.Helper()
	begin := time.Now()
	if err := c.cmd.Process.Signal(signal); err != nil {
		c.Fatal(err)
	}
	<-c.done
	return c.cmd.Wait(), time.Since(begin)
}

// browser keeps cookies and speaks like our pages.
type browser struct {
	client http.Client
	url    string
}

func newBrowser(url string) *browser {
	jar, _ := cookiejar.New(nil)
	return &browser{client: http.Client{Jar: jar, Timeout: 20 * time.Second}, url: url}
}

func (b *browser) ask(method, path, body string) (int, string, error) {
	r, err := http.NewRequest(method, b.url+path, strings.NewReader(body))
	if err != nil {
		return 0, "", err
	}
	if method != "GET" {
		r.Header.Set("Content-Type", "application/json")
		r.Header.Set("X-Crossplumb", "1")
	}
	response, err := b.client.Do(r)
	if err != nil {
		return 0, "", err
	}
	defer response.Body.Close()
	text, err := io.ReadAll(response.Body)
	return response.StatusCode, string(text), err
}

func TestTheCommandLine(t *testing.T) {
	empty := t.TempDir()
	for _, c := range []struct {
		name string
		args []string
		code int
		out  string // in stdout
		err  string // in stderr
	}{
		{"nothing", nil, 2, "", "crossplumb serve"},
		{"help", []string{"help"}, 0, "never says that a climb", ""},
		{"a command that is none", []string{"launch"}, 2, "", `no command "launch"`},
		{"the version", []string{"version"}, 0, "crossplumb unreleased", ""},
		{"help of a command", []string{"serve", "--help"}, 0, "", "-tls-cert"},
		{"a flag that is none", []string{"serve", "--port", "1"}, 2, "", "flag provided but not defined"},
		{"a word too many", []string{"serve", "--data", "x", "now"}, 2, "", "one word too many"},
		{"serve without a folder", []string{"serve"}, 2, "", "--data"},
		{"serve on no address", []string{"serve", "--data", "x", "--listen", "8480"}, 2, "", "not an address"},
		{"serve to the world without https", []string{"serve", "--data", "x", "--listen", "0.0.0.0:8480"}, 2, "", "phones need https"},
		{"serve with half a certificate", []string{"serve", "--data", "x", "--tls-cert", "a"}, 2, "", "come together"},
		{"serve with a certificate behind a proxy", []string{"serve", "--data", "x", "--tls-cert", "a", "--tls-key", "b", "--proxy", "127.0.0.1"}, 2, "", "either"},
		{"serve with a certificate that is not there", []string{"serve", "--data", empty, "--tls-cert", "a", "--tls-key", "b"}, 1, "", "certificate"},
		{"serve under an origin that is none", []string{"serve", "--data", "x", "--origin", "mast.example.org"}, 2, "", "not an address"},
		{"a demo for the world", []string{"demo", "--listen", "0.0.0.0:8480"}, 2, "", "this machine only"},
		{"a demo for a name", []string{"demo", "--listen", "mast.example.org:8480"}, 2, "", "this machine only"},
		{"an invitation without a folder", []string{"invite"}, 2, "", "--data"},
		{"an invitation for an owner", []string{"invite", "--data", "x", "--role", "owner"}, 2, "", "climber or supervisor"},
		{"an invitation without a crew", []string{"invite", "--data", "x"}, 2, "", "--crew"},
		{"an invitation to a folder that is not there", []string{"invite", "--data", filepath.Join(empty, "no"), "--crew", "north"}, 1, "", "no database"},
		{"proving nothing", []string{"prove", "--data", filepath.Join(empty, "no")}, 1, "", "no database"},
		{"a backup to nowhere", []string{"backup", "--data", "x"}, 2, "", "--to"},
		{"a restore from nowhere", []string{"restore", "--data", "x"}, 2, "", "--from"},
		{"a restore from a file that is not there", []string{"restore", "--data", empty, "--from", filepath.Join(empty, "no")}, 1, "", "no"},
		{"an operation that is none", []string{"reckon", "wind.load"}, 2, "", "unknown_operation"},
		{"a sheet that is not there", []string{"judge", filepath.Join(empty, "no.json")}, 3, "", "no.json"},
	} {
		t.Run(c.name, func(t *testing.T) {
			got := crossplumb(t, "{}", c.args...)
			if got.code != c.code || !strings.Contains(got.out, c.out) || !strings.Contains(got.err, c.err) {
				t.Errorf("status %d, want %d\nout: %s\nerr: %s", got.code, c.code, got.out, got.err)
			}
		})
	}
	if _, err := os.Stat(filepath.Join(empty, "no")); err == nil {
		t.Error("a folder was made by asking about it")
	}
}

func TestTheEnvironmentStandsForFlags(t *testing.T) {
	var out, errs bytes.Buffer
	io := streams{strings.NewReader(""), &out, &errs}
	t.Setenv("CROSSPLUMB_DATA", "/var/lib/x")
	t.Setenv("CROSSPLUMB_LISTEN", "127.0.0.1:9")
	cfg, err := parseServe([]string{"--listen", "127.0.0.1:8"}, io)
	if err != nil || cfg.data != "/var/lib/x" || cfg.listen != "127.0.0.1:8" {
		t.Errorf("%+v (%v)", cfg, err)
	}
	t.Setenv("CROSSPLUMB_LISTNE", "127.0.0.1:9")
	if _, err := parseServe(nil, io); err == nil || !strings.Contains(err.Error(), "CROSSPLUMB_LISTNE") {
		t.Errorf("a misspelt variable: %v", err)
	}
}

// What judge and reckon say is what the files of testdata promise.
func TestJudgeAndReckonAreWiredIn(t *testing.T) {
	for file, code := range map[string]int{"crossed-pair-go.json": 0, "crossed-pair-no-go.json": 1, "crossed-pair-measure-again.json": 2} {
		if got := crossplumb(t, "", "judge", filepath.Join("..", "..", "testdata", "jobs", file)); got.code != code || got.out == "" {
			t.Errorf("%s: status %d, want %d\n%s%s", file, got.code, code, got.out, got.err)
		}
	}
	got := crossplumb(t, `{"frequency_mhz":5800,"spacing_mm":{"right":100,"up":0,"forward":0},"off_broadside_deg":0}`, "reckon", "spacing.wavelengths")
	if got.code != 0 || !strings.Contains(got.out, "wavelength_mm") {
		t.Errorf("%+v", got)
	}
}

// The first supervisor comes in by a link that works once, the next start prints none.
func TestTheWayIntoAnEmptyDatabase(t *testing.T) {
	data := filepath.Join(t.TempDir(), "data")
	c := start(t, "serve", "--data", data, "--listen", "127.0.0.1:0")
	_, token, found := strings.Cut(c.said(), c.url+"/desk#invitation=")
	if !found {
		t.Fatalf("no link: %s", c.said())
	}
	token, _, _ = strings.Cut(token, "\n")
	b := newBrowser(c.url)
	body := fmt.Sprintf(`{"invitation":%q,"name":"Ilse","passphrase":"seven gulls on a ridge"}`, token)
	if status, text, err := b.ask("POST", "/api/session", body); err != nil || status != 200 || !strings.Contains(text, "supervisor") {
		t.Fatalf("%d %s (%v)", status, text, err)
	}
	if status, text, err := newBrowser(c.url).ask("POST", "/api/session", body); err != nil || status != 403 {
		t.Fatalf("the link again: %d %s (%v)", status, text, err)
	}
	if status, text, _ := b.ask("GET", "/healthz", ""); status != 200 || !strings.Contains(text, `"demo":false`) {
		t.Errorf("health: %d %s", status, text)
	}
	// A second server on the same folder would believe to be the only one.
	if got := crossplumb(t, "", "serve", "--data", data, "--listen", "127.0.0.1:0"); got.code != 1 || !strings.Contains(got.err, "another crossplumb") {
		t.Errorf("a second server: %+v", got)
	}
	if got := crossplumb(t, "", "prove", "--data", data, "--rebuild"); got.code != 1 || !strings.Contains(got.err, "another crossplumb") {
		t.Errorf("a rebuild beside the server: %+v", got)
	}
	// invite and prove work beside it.
	invited := crossplumb(t, "", "invite", "--data", data, "--crew", "north", "--origin", c.url)
	link, _, _ := strings.Cut(invited.out, "\n")
	_, token, found = strings.Cut(link, "/#invitation=")
	if invited.code != 0 || !found {
		t.Fatalf("invite: %+v", invited)
	}
	body = fmt.Sprintf(`{"invitation":%q,"name":"Tam","passphrase":"rope and rain and rivets"}`, token)
	if status, text, err := newBrowser(c.url).ask("POST", "/api/session", body); err != nil || status != 200 || !strings.Contains(text, `"crew":"north"`) {
		t.Fatalf("%d %s (%v)", status, text, err)
	}
	if got := crossplumb(t, "", "prove", "--data", data); got.code != 0 || !strings.Contains(got.out, "proved") {
		t.Errorf("prove: %+v", got)
	}
	if err, took := c.end(syscall.SIGTERM); err != nil || took > 10*time.Second {
		t.Errorf("SIGTERM: %v after %v", err, took)
	}
	c = start(t, "serve", "--data", data, "--listen", "127.0.0.1:0")
	if strings.Contains(c.said(), "invitation") {
		t.Errorf("another link: %s", c.said())
	}
	if status, _, err := newBrowser(c.url).ask("POST", "/api/session", `{"name":"Ilse","passphrase":"seven gulls on a ridge"}`); err != nil || status != 200 {
		t.Errorf("signing in after the restart: %d (%v)", status, err)
	}
}

func TestTheDemoSaysWhatItIs(t *testing.T) {
	data := filepath.Join(t.TempDir(), "demo")
	begin := time.Now()
	c := start(t, "demo", "--data", data, "--listen", "127.0.0.1:0")
	t.Logf("the demo listens after %v", time.Since(begin).Round(time.Millisecond))
	for _, must := range []string{"This is a demo", "invented", demoCompany, demoIsland, c.url + "/desk", "Tam Verrill", "seven gulls on a ridge", "never says that a climb"} {
		if !strings.Contains(c.said(), must) {
			t.Errorf("it does not say %q:\n%s", must, c.said())
		}
	}
	for _, p := range demoPeople {
		b := newBrowser(c.url)
		if status, text, err := b.ask("POST", "/api/session", fmt.Sprintf(`{"name":%q,"passphrase":%q}`, p.name, p.passphrase)); err != nil || status != 200 {
			t.Fatalf("%s: %d %s (%v)", p.name, status, text, err)
		}
		var list struct {
			Jobs []struct{ ID, Stage, Crew string }
		}
		_, text, err := b.ask("GET", "/api/jobs", "")
		if err != nil || json.Unmarshal([]byte(text), &list, json.MatchCaseInsensitiveNames(true)) != nil {
			t.Fatalf("%s (%v)", text, err)
		}
		for _, j := range list.Jobs {
			if p.crew != "" && j.Crew != p.crew {
				t.Errorf("%s sees a job of %s", p.name, j.Crew)
			}
		}
		if p.role == db.Supervisor && len(list.Jobs) != len(demoVisits()) {
			t.Errorf("%d jobs", len(list.Jobs))
		}
	}
	if status, text, _ := newBrowser(c.url).ask("GET", "/healthz", ""); status != 200 || !strings.Contains(text, `"demo":true`) {
		t.Errorf("health: %d %s", status, text)
	}
	if err, _ := c.end(syscall.SIGKILL); err == nil {
		t.Error("it was to be killed")
	}
	// The folder is kept, furnished once, and never served for real.
	c = start(t, "demo", "--data", data, "--listen", "127.0.0.1:0")
	if err, took := c.end(syscall.SIGTERM); err != nil || took > 10*time.Second {
		t.Errorf("SIGTERM: %v after %v", err, took)
	}
	if got := crossplumb(t, "", "serve", "--data", data, "--listen", "127.0.0.1:0"); got.code != 1 || !strings.Contains(got.err, "holds the demo") {
		t.Errorf("serve on the demo: %+v", got)
	}
	if got := crossplumb(t, "", "prove", "--data", data, "--rebuild"); got.code != 0 || !strings.Contains(got.out, "came out the same") {
		t.Errorf("prove --rebuild: %+v", got)
	}
	real := filepath.Join(t.TempDir(), "real")
	s := start(t, "serve", "--data", real, "--listen", "127.0.0.1:0")
	_, token, _ := strings.Cut(s.said(), "#invitation=")
	token, _, _ = strings.Cut(token, "\n")
	if status, text, err := newBrowser(s.url).ask("POST", "/api/session", fmt.Sprintf(`{"invitation":%q,"name":"A","passphrase":"long enough for it"}`, token)); err != nil || status != 200 {
		t.Fatalf("%d %s (%v)", status, text, err)
	}
	s.end(syscall.SIGTERM)
	if got := crossplumb(t, "", "demo", "--data", real, "--listen", "127.0.0.1:0"); got.code != 1 || !strings.Contains(got.err, "not the demo's") {
		t.Errorf("a demo over real jobs: %+v", got)
	}
}

// Without a folder the demo is kept where it finds itself again, a second one beside it passes, and what cannot be used
// any more is furnished anew.
func TestTheDemoFindsItselfAgain(t *testing.T) {
	cache := t.TempDir()
	t.Setenv("XDG_CACHE_HOME", cache)
	instance := func(c *child) (name string, passes bool) {
		t.Helper()
		b := newBrowser(c.url)
		if status, text, err := b.ask("POST", "/api/session", `{"name":"Ilse Marrow","passphrase":"seven gulls on a ridge"}`); err != nil || status != 200 {
			t.Fatalf("%d %s (%v)", status, text, err)
		}
		_, text, err := b.ask("GET", "/api/state", "")
		var state struct{ Instance string }
		if err != nil || json.Unmarshal([]byte(text), &state, json.MatchCaseInsensitiveNames(true)) != nil {
			t.Fatalf("%s (%v)", text, err)
		}
		return state.Instance, strings.Contains(c.said(), "goes when it ends")
	}
	begin := func(args ...string) *child {
		return start(t, append([]string{"demo", "--listen", "127.0.0.1:0"}, args...)...)
	}
	first := begin()
	name, passes := instance(first)
	if passes || !strings.Contains(first.said(), cache) {
		t.Errorf("the first demo is not kept in %s: %s", cache, first.said())
	}
	beside := begin()
	other, passes := instance(beside)
	if other == name || !passes {
		t.Errorf("the second is %s, passes %v", other, passes)
	}
	beside.end(syscall.SIGTERM)
	first.end(syscall.SIGKILL)
	again := begin()
	if got, _ := instance(again); got != name {
		t.Errorf("after a kill it is %s, was %s", got, name)
	}
	again.end(syscall.SIGTERM)
	fresh := begin("--fresh")
	second, _ := instance(fresh)
	if second == name {
		t.Error("--fresh left it as it was")
	}
	fresh.end(syscall.SIGTERM)

	path := filepath.Join(cache, "crossplumb-demo", databaseName)
	change := func(do func(*db.Store)) {
		t.Helper()
		store, err := db.Open(t.Context(), db.Config{Path: path})
		if err != nil {
			t.Fatal(err)
		}
		do(store)
		store.Close()
	}
	change(func(s *db.Store) { s.MarkDemo(t.Context(), db.DemoBegun) }) // as a start that was killed leaves it
	third := begin()
	name, _ = instance(third)
	if name == second {
		t.Error("a demo that was half furnished was taken")
	}
	third.end(syscall.SIGTERM)
	real := filepath.Join(t.TempDir(), "real")
	s := start(t, "serve", "--data", real, "--listen", "127.0.0.1:0")
	s.end(syscall.SIGTERM)
	if got := crossplumb(t, "", "demo", "--data", real, "--fresh", "--listen", "127.0.0.1:0"); got.code != 1 || !strings.Contains(got.err, "not the demo's") {
		t.Errorf("--fresh on a real database: %+v", got)
	}
	if _, err := os.Stat(filepath.Join(real, databaseName)); err != nil {
		t.Errorf("the real database: %v", err)
	}
}

// sentEntries writes what a phone sends.
func sentEntries(d *testDevice, n int) (body string, hashes []string) {
	type sent struct {
		Raw  string `json:"raw"`
		Hash string `json:"hash"`
	}
	var list []sent
	for range n {
		d.seq++
		raw := fmt.Sprintf(`{"id":%q,"device":%q,"device_seq":%d,"prev":%q,"job":%q,"mount":null,"kind":"note.added","schema":1,`+
			`"at":"2026-11-30T10:00:00+01:00","mono_ms":1,"author":%q,"app":"test","body":{"text":"note %d"}}`,
			uuid.Must(uuid.NewV7()), d.id, d.seq, d.prev, d.job, d.author, d.seq)
		d.prev = db.HashOf(raw)
		list = append(list, sent{raw, d.prev})
		hashes = append(hashes, d.prev)
	}
	text, err := json.Marshal(map[string]any{"entries": list, "sent_at": "2026-11-30T10:00:01+01:00"})
	if err != nil {
		panic(err)
	}
	return string(text), hashes
}

type testDevice struct {
	id, job, author, prev string
	seq                   int
}

// The whole server is killed while phones send, again and again: whatever was answered is there afterwards, once, and
// the session outlives it. What was not answered is sent again and is then there once too.
func TestTheServerKilledWhilePhonesSend(t *testing.T) {
	rounds := 6
	if testing.Short() {
		rounds = 2
	}
	data := filepath.Join(t.TempDir(), "data")
	c := start(t, "demo", "--data", data, "--listen", "127.0.0.1:0")
	address := strings.TrimPrefix(c.url, "http://")
	b := newBrowser(c.url)
	_, text, err := b.ask("POST", "/api/session", `{"name":"Tam Verrill","passphrase":"rope and rain and rivets"}`)
	if err != nil {
		t.Fatal(err)
	}
	var who struct{ User struct{ ID string } }
	if err := json.Unmarshal([]byte(text), &who, json.MatchCaseInsensitiveNames(true)); err != nil {
		t.Fatal(err)
	}
	_, text, err = b.ask("GET", "/api/jobs?stage=issued", "")
	if err != nil {
		t.Fatal(err)
	}
	var list struct{ Jobs []struct{ ID string } }
	if err := json.Unmarshal([]byte(text), &list, json.MatchCaseInsensitiveNames(true)); err != nil || len(list.Jobs) == 0 {
		t.Fatalf("%s (%v)", text, err)
	}
	d := &testDevice{id: uuid.NewString(), job: list.Jobs[0].ID, author: who.User.ID}
	random := mathrand.New(mathrand.NewPCG(3, 3))
	var all, acked []string
	var waiting []string // bodies that were not answered
	for range rounds {
		ended := make(chan struct{})
		after := time.Duration(random.IntN(150_000)) * time.Microsecond
		go func() {
			time.Sleep(after)
			c.cmd.Process.Signal(syscall.SIGKILL)
			close(ended)
		}()
		for {
			body, hashes := sentEntries(d, 1+random.IntN(8))
			all = append(all, hashes...)
			status, text, err := b.ask("POST", "/api/entries", body)
			if err != nil {
				waiting = append(waiting, body) // whether it arrived is not known
				break
			}
			if status != 200 || strings.Contains(text, "quarantined") {
				t.Fatalf("%d %s", status, text)
			}
			acked = append(acked, hashes...)
		}
		<-ended
		<-c.done
		c.cmd.Wait()
		c = start(t, "demo", "--data", data, "--listen", address)
		have := entriesOf(t, b, d.id)
		for _, h := range acked {
			if have[h] != 1 {
				t.Fatalf("an acknowledged entry is there %d times", have[h])
			}
		}
		for _, body := range waiting {
			if status, text, err := b.ask("POST", "/api/entries", body); err != nil || status != 200 || strings.Contains(text, "quarantined") {
				t.Fatalf("sent again: %d %s (%v)", status, text, err)
			}
		}
		waiting = nil
		acked = append([]string{}, all...)
	}
	have := entriesOf(t, b, d.id)
	for _, h := range all {
		if have[h] != 1 {
			t.Errorf("an entry is there %d times", have[h])
		}
	}
	if len(have) != len(all) {
		t.Errorf("%d entries are there, %d were sent", len(have), len(all))
	}
	if err, took := c.end(syscall.SIGTERM); err != nil || took > 10*time.Second {
		t.Errorf("SIGTERM: %v after %v", err, took)
	}
	if got := crossplumb(t, "", "prove", "--data", data, "--rebuild"); got.code != 0 {
		t.Errorf("prove: %+v", got)
	}
	t.Logf("%d rounds, %d entries, none lost, none twice", rounds, len(all))
}

func entriesOf(t *testing.T, b *browser, device string) map[string]int {
	t.Helper()
	have := map[string]int{}
	for after := int64(0); ; {
		_, text, err := b.ask("GET", fmt.Sprintf("/api/entries?after=%d&limit=100", after), "")
		if err != nil {
			t.Fatal(err)
		}
		var page struct {
			Entries []struct{ Raw string }
			Next    int64
		}
		if err := json.Unmarshal([]byte(text), &page, json.MatchCaseInsensitiveNames(true)); err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		for _, e := range page.Entries {
			if strings.Contains(e.Raw, device) {
				have[db.HashOf(e.Raw)]++
			}
		}
		if page.Next == after {
			return have
		}
		after = page.Next
	}
}

// A backup from a running server, put back after more came in: the phone that sends everything again makes it whole.
func TestBackupAndRestore(t *testing.T) {
	folder := t.TempDir()
	data, backup := filepath.Join(folder, "data"), filepath.Join(folder, "backup.db")
	c := start(t, "demo", "--data", data, "--listen", "127.0.0.1:0")
	address := strings.TrimPrefix(c.url, "http://")
	b := newBrowser(c.url)
	signIn := func() string {
		t.Helper()
		_, text, err := b.ask("POST", "/api/session", `{"name":"Tam Verrill","passphrase":"rope and rain and rivets"}`)
		var who struct{ User struct{ ID string } }
		if err != nil || json.Unmarshal([]byte(text), &who, json.MatchCaseInsensitiveNames(true)) != nil {
			t.Fatalf("%s (%v)", text, err)
		}
		return who.User.ID
	}
	author := signIn()
	var list struct{ Jobs []struct{ ID string } }
	if _, text, err := b.ask("GET", "/api/jobs?stage=issued", ""); err != nil || json.Unmarshal([]byte(text), &list, json.MatchCaseInsensitiveNames(true)) != nil {
		t.Fatalf("%s (%v)", text, err)
	}
	d := &testDevice{id: uuid.NewString(), job: list.Jobs[0].ID, author: author}
	early, first := sentEntries(d, 5)
	late, second := sentEntries(d, 5)
	if status, _, err := b.ask("POST", "/api/entries", early); err != nil || status != 200 {
		t.Fatal(status, err)
	}
	if got := crossplumb(t, "", "backup", "--data", data, "--to", backup); got.code != 0 || !strings.Contains(got.out, "proved") {
		t.Fatalf("backup: %+v", got)
	}
	if got := crossplumb(t, "", "backup", "--data", data, "--to", backup); got.code != 1 || !strings.Contains(got.err, "replaces nothing") {
		t.Errorf("a backup over a backup: %+v", got)
	}
	if status, _, err := b.ask("POST", "/api/entries", late); err != nil || status != 200 {
		t.Fatal(status, err)
	}
	if got := crossplumb(t, "", "restore", "--data", data, "--from", backup); got.code != 1 || !strings.Contains(got.err, "another crossplumb") {
		t.Errorf("a restore under a running server: %+v", got)
	}
	c.end(syscall.SIGTERM)
	if got := crossplumb(t, "", "restore", "--data", data, "--from", backup); got.code != 0 || !strings.Contains(got.out, "epoch 2") {
		t.Fatalf("restore: %+v", got)
	}
	c = start(t, "demo", "--data", data, "--listen", address)
	if status, _, err := b.ask("GET", "/api/state", ""); err != nil || status != 401 {
		t.Errorf("the old session answers %d (%v)", status, err)
	}
	signIn()
	if _, text, err := b.ask("GET", "/api/state", ""); err != nil || !strings.Contains(text, `"epoch":2`) || !strings.Contains(text, `"max_contiguous_seq":5`) {
		t.Errorf("state %s (%v)", text, err)
	}
	for _, body := range []string{early, late} {
		if status, text, err := b.ask("POST", "/api/entries", body); err != nil || status != 200 || strings.Contains(text, "quarantined") {
			t.Errorf("sent again: %d %s (%v)", status, text, err)
		}
	}
	have := entriesOf(t, b, d.id)
	for _, h := range append(first, second...) {
		if have[h] != 1 {
			t.Errorf("an entry is there %d times", have[h])
		}
	}
	c.end(syscall.SIGTERM)
	if got := crossplumb(t, "", "prove", "--data", data, "--rebuild"); got.code != 0 {
		t.Errorf("prove: %+v", got)
	}
}

// A renewed certificate is served without a restart, one that cannot be read leaves the old one.
func TestTheCertificateIsReadAgain(t *testing.T) {
	folder := t.TempDir()
	cert, key := filepath.Join(folder, "cert.pem"), filepath.Join(folder, "key.pem")
	writeCertificate(t, cert, key, 1)
	w := &certificateFile{cert: cert, key: key}
	if err := w.load(); err != nil {
		t.Fatal(err)
	}
	serial := func() int64 {
		t.Helper()
		pair, err := w.get(nil)
		if err != nil {
			t.Fatal(err)
		}
		leaf, err := x509.ParseCertificate(pair.Certificate[0])
		if err != nil {
			t.Fatal(err)
		}
		return leaf.SerialNumber.Int64()
	}
	writeCertificate(t, cert, key, 2)
	later := time.Now().Add(time.Minute)
	os.Chtimes(cert, later, later)
	if got := serial(); got != 1 {
		t.Errorf("looked at once: serial %d", got)
	}
	w.looked = time.Now().Add(-lookAgainEvery)
	if got := serial(); got != 2 {
		t.Errorf("after the renewal: serial %d", got)
	}
	os.WriteFile(cert, []byte("not a certificate"), 0o600)
	os.Chtimes(cert, later.Add(time.Minute), later.Add(time.Minute))
	w.looked = time.Now().Add(-lookAgainEvery)
	if got := serial(); got != 2 {
		t.Errorf("after a renewal that cannot be read: serial %d", got)
	}
}

func TestServingHTTPS(t *testing.T) {
	folder := t.TempDir()
	cert, key := filepath.Join(folder, "cert.pem"), filepath.Join(folder, "key.pem")
	pool := writeCertificate(t, cert, key, 1)
	c := start(t, "serve", "--data", filepath.Join(folder, "data"), "--listen", "127.0.0.1:0", "--tls-cert", cert, "--tls-key", key)
	if !strings.HasPrefix(c.url, "https://") || !strings.Contains(c.said(), c.url+"/desk#invitation=") {
		t.Fatalf("it says %s", c.said())
	}
	client := http.Client{Transport: &http.Transport{TLSClientConfig: &tls.Config{RootCAs: pool}}, Timeout: 10 * time.Second}
	response, err := client.Get(c.url + "/healthz")
	if err != nil {
		t.Fatal(err)
	}
	response.Body.Close()
	if response.StatusCode != 200 || response.Header.Get("Strict-Transport-Security") == "" {
		t.Errorf("%d, Strict-Transport-Security %q", response.StatusCode, response.Header.Get("Strict-Transport-Security"))
	}
	old := tls.Config{RootCAs: pool, MaxVersion: tls.VersionTLS11}
	if conn, err := tls.Dial("tcp", strings.TrimPrefix(c.url, "https://"), &old); err == nil {
		conn.Close()
		t.Error("TLS 1.1 is spoken")
	}
	if err, took := c.end(syscall.SIGTERM); err != nil || took > 10*time.Second {
		t.Errorf("SIGTERM: %v after %v", err, took)
	}
}

func writeCertificate(t *testing.T, certFile, keyFile string, serial int64) *x509.CertPool {
	t.Helper()
	private, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		t.Fatal(err)
	}
	template := &x509.Certificate{SerialNumber: big.NewInt(serial), Subject: pkix.Name{CommonName: "test"}, NotBefore: time.Now().Add(-time.Hour),
		NotAfter: time.Now().Add(time.Hour), IPAddresses: []net.IP{net.IPv4(127, 0, 0, 1)}, IsCA: true, BasicConstraintsValid: true,
		KeyUsage: x509.KeyUsageDigitalSignature | x509.KeyUsageCertSign}
	der, err := x509.CreateCertificate(rand.Reader, template, template, &private.PublicKey, private)
	if err != nil {
		t.Fatal(err)
	}
	keyDER, err := x509.MarshalECPrivateKey(private)
	if err != nil {
		t.Fatal(err)
	}
	certPEM := pem.EncodeToMemory(&pem.Block{Type: "CERTIFICATE", Bytes: der})
	for file, block := range map[string][]byte{certFile: certPEM, keyFile: pem.EncodeToMemory(&pem.Block{Type: "EC PRIVATE KEY", Bytes: keyDER})} {
		if err := os.WriteFile(file, block, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	pool := x509.NewCertPool()
	pool.AppendCertsFromPEM(certPEM)
	return pool
}
