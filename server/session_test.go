package server

import (
	"fmt"
	"net/http"
	"os"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"
)

func signInBody(name, pass string) string {
	return fmt.Sprintf(`{"name":%q,"passphrase":%q}`, name, pass)
}

func TestSigningIn(t *testing.T) {
	s := openSite(t)
	a := s.do(call{method: "POST", path: "/api/session", body: signInBody(" ilse ", passphrase), status: 200, has: []string{`"supervisor"`, `"Ilse"`}})
	set := a.header.Get("Set-Cookie")
	for _, must := range []string{"sid=", "HttpOnly", "SameSite=Lax", "path=/", "max-age="} {
		if !strings.Contains(set, must) {
			t.Errorf("the cookie lacks %s: %s", must, set)
		}
	}
	cookie, _, _ := strings.Cut(set, ";")
	s.do(call{method: "GET", path: "/api/session", cookie: cookie, status: 200, has: []string{`"Ilse"`}})
	// Signing in again ends the session that this browser had.
	b := s.do(call{method: "POST", path: "/api/session", cookie: cookie, body: signInBody("Tam", passphrase), status: 200, has: []string{`"climber"`, `"north"`}})
	s.do(call{method: "GET", path: "/api/session", cookie: cookie, status: 401, code: "sign_in"})
	cookie, _, _ = strings.Cut(b.header.Get("Set-Cookie"), ";")
	out := s.do(call{method: "DELETE", path: "/api/session", cookie: cookie, body: "{}", status: 204})
	if set := out.header.Get("Set-Cookie"); !strings.Contains(set, "sid=;") && !strings.Contains(set, "sid=; ") {
		t.Errorf("signing out sets %q", set)
	}
	s.do(call{method: "GET", path: "/api/session", cookie: cookie, status: 401, code: "sign_in"})
}

func TestTheCookieIsBoundToHTTPS(t *testing.T) {
	s := openSite(t, func(c *Config) { c.Secure = true })
	a := s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 200})
	set := a.header.Get("Set-Cookie")
	for _, must := range []string{"__Host-sid=", "secure", "HttpOnly", "path=/"} {
		if !strings.Contains(set, must) {
			t.Errorf("the cookie lacks %s: %s", must, set)
		}
	}
	if strings.Contains(strings.ToLower(set), "domain=") {
		t.Errorf("the cookie is for a domain: %s", set)
	}
	cookie, _, _ := strings.Cut(set, ";")
	s.do(call{method: "GET", path: "/api/session", cookie: cookie, status: 200})
	s.do(call{method: "GET", path: "/api/session", cookie: strings.TrimPrefix(cookie, "__Host-"), status: 401})
}

// Whoever does not know the passphrase learns nothing else, and not whether the name is there.
func TestNotSigningIn(t *testing.T) {
	s := openSite(t)
	wrong := s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", "something else"), status: 401, code: "wrong_passphrase"})
	nobody := s.do(call{method: "POST", path: "/api/session", body: signInBody("Nobody", passphrase), status: 401, code: "wrong_passphrase"})
	strip := func(a answered) string { return strings.ReplaceAll(a.body, a.header.Get("X-Request-Id"), "") }
	if strip(wrong) != strip(nobody) {
		t.Errorf("a wrong passphrase: %s\nan unknown name: %s", wrong.body, nobody.body)
	}
	s.rows(t, []call{
		{name: "no name", method: "POST", path: "/api/session", body: `{"passphrase":"x"}`, status: 400, code: "missing_field", field: "name"},
		{name: "a name of spaces", method: "POST", path: "/api/session", body: signInBody("  ", "x"), status: 400, code: "missing_field", field: "name"},
		{name: "no passphrase", method: "POST", path: "/api/session", body: `{"name":"Ilse"}`, status: 400, code: "missing_field", field: "passphrase"},
		{name: "an endless passphrase", method: "POST", path: "/api/session", body: signInBody("Ilse", strings.Repeat("x", 300)), status: 400, code: "out_of_range", field: "passphrase"},
		{name: "a passphrase that is a number", method: "POST", path: "/api/session", body: `{"name":"Ilse","passphrase":1}`, status: 400, code: "wrong_type", field: "passphrase"},
		{name: "an unknown field", method: "POST", path: "/api/session", body: `{"name":"Ilse","passphrase":"x","role":"supervisor"}`, status: 400, code: "unknown_field", field: "role"},
		{name: "the passphrase in other case", method: "POST", path: "/api/session", body: signInBody("Ilse", strings.ToUpper(passphrase)), status: 401, code: "wrong_passphrase"},
	})
}

func TestGuessingIsSlow(t *testing.T) {
	s := openSite(t)
	guess := call{method: "POST", path: "/api/session", body: signInBody("Ilse", "a wrong one")}
	for i := range 3 {
		if a := s.do(guess); a.status != 401 {
			t.Fatalf("guess %d: %d", i+1, a.status)
		}
	}
	a := s.do(guess)
	if a.status != 429 || a.header.Get("Retry-After") != "1" {
		t.Fatalf("the fourth guess: %d, Retry-After %q", a.status, a.header.Get("Retry-After"))
	}
	// The right one waits as well, and is then taken: nobody is locked out for good.
	right := call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 429, code: "too_many_attempts"}
	s.do(right)
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Tam", passphrase), status: 200}) // others do not wait
	s.clock.pass(time.Second)
	right.status, right.code = 200, ""
	s.do(right)
	guess.status = 401
	s.do(guess) // after a success it begins anew
	// A name that nobody has waits alike.
	for range 3 {
		s.do(call{method: "POST", path: "/api/session", body: signInBody("Nobody", "x"), status: 401})
	}
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Nobody", "x"), status: 429})
}

// Many guesses at once must not outrun the count.
func TestGuessingInParallelIsNoFaster(t *testing.T) {
	s := openSite(t)
	var wg sync.WaitGroup
	statuses := make([]int, 24)
	for i := range statuses {
		wg.Go(func() {
			statuses[i] = s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", "wrong "+strconv.Itoa(i))}).status
		})
	}
	wg.Wait()
	checked := 0
	for _, status := range statuses {
		if status == http.StatusUnauthorized {
			checked++
		}
	}
	if checked != 3 {
		t.Errorf("%d guesses were checked at once, want 3", checked)
	}
}

func TestAnInvitationFromLinkToSession(t *testing.T) {
	s := openSite(t)
	for role, page := range map[string]string{"climber": "/#invitation=", "supervisor": "/desk#invitation="} {
		crew := "null"
		if role == "climber" {
			crew = `"east"`
		}
		var made struct{ Link, Until string }
		s.do(call{method: "POST", path: "/api/people/invitations", cookie: s.cookie(s.desk), body: `{"role":"` + role + `","crew":` + crew + `}`, status: 201}).into(t, &made)
		token, found := strings.CutPrefix(made.Link, s.url+page)
		if !found || len(token) < 43 {
			t.Fatalf("the link is %q", made.Link)
		}
		body := func(name, pass string) string {
			return fmt.Sprintf(`{"invitation":%q,"name":%q,"passphrase":%q}`, token, name, pass)
		}
		s.do(call{method: "POST", path: "/api/session", body: body("New "+role, "short"), status: 400, code: "out_of_range", field: "passphrase"})
		s.do(call{method: "POST", path: "/api/session", body: body("New "+role, strings.Repeat("a", 20)), status: 400, code: "out_of_range", field: "passphrase"})
		s.do(call{method: "POST", path: "/api/session", body: body("Ilse", passphrase), status: 409, code: "name_taken", field: "name"})
		a := s.do(call{method: "POST", path: "/api/session", body: body("New "+role, passphrase), status: 200, has: []string{`"` + role + `"`}})
		cookie, _, _ := strings.Cut(a.header.Get("Set-Cookie"), ";")
		s.do(call{method: "GET", path: "/api/session", cookie: cookie, status: 200, has: []string{"New " + role}})
		s.do(call{method: "POST", path: "/api/session", body: body("Another", passphrase), status: 403, code: "invitation"})
		s.do(call{method: "POST", path: "/api/session", body: signInBody("new "+role, passphrase), status: 200})
	}
	s.rows(t, []call{
		{name: "a role that is none", method: "POST", path: "/api/people/invitations", cookie: s.cookie(s.desk), body: `{"role":"owner","crew":"x"}`, status: 400, code: "out_of_range", field: "role"},
		{name: "a climber without a crew", method: "POST", path: "/api/people/invitations", cookie: s.cookie(s.desk), body: `{"role":"climber","crew":null}`, status: 400, code: "missing_field", field: "crew"},
		{name: "no role", method: "POST", path: "/api/people/invitations", cookie: s.cookie(s.desk), body: `{}`, status: 400, code: "missing_field", field: "role"},
		{name: "an invitation that never was", method: "POST", path: "/api/session", body: `{"invitation":"x","name":"X","passphrase":"` + passphrase + `"}`, status: 403, code: "invitation"},
	})
}

func TestInvitationsUseTheNamedOrigin(t *testing.T) {
	s := openSite(t, func(c *Config) { c.Origin = "https://mast.example.org" })
	s.do(call{method: "POST", path: "/api/people/invitations", cookie: s.cookie(s.desk), body: `{"role":"climber","crew":"east"}`,
		headers: map[string]string{"Host": "evil.example", "Sec-Fetch-Site": ""}, status: 201, has: []string{"https://mast.example.org/#invitation="}, hasNot: []string{"evil"}})
}

func TestPassphraseForms(t *testing.T) {
	stored := cheap.Hash(passphrase)
	if !strings.HasPrefix(stored, "$argon2id$v=19$m=64,t=1,p=1$") || stored == cheap.Hash(passphrase) {
		t.Errorf("stored as %s: the form, or its salt, is not right", stored)
	}
	if same, weaker, err := cheap.matches(passphrase, stored); !same || weaker || err != nil {
		t.Errorf("the right one: %v %v %v", same, weaker, err)
	}
	if same, _, err := cheap.matches(passphrase+" ", stored); same || err != nil {
		t.Errorf("a wrong one: %v %v", same, err)
	}
	dearer := HashCost{MemoryKiB: 128, Passes: 2, Lanes: 1}
	if same, weaker, err := dearer.matches(passphrase, stored); !same || !weaker || err != nil {
		t.Errorf("under a dearer rule: %v %v %v", same, weaker, err)
	}
	for _, damaged := range []string{"", "x", "$argon2id$v=19$m=64,t=1,p=1$AAAA", "$argon2i$v=19$m=64,t=1,p=1$AAAA$AAAA", strings.Replace(stored, "v=19", "v=16", 1), strings.Replace(stored, "m=64", "m=x", 1)} {
		if same, _, err := cheap.matches(passphrase, damaged); same || err == nil {
			t.Errorf("%q is taken", damaged)
		}
	}
	if budget := hashesAtOnce * PassphraseCost.MemoryKiB; budget > 128<<10 {
		t.Errorf("signing in may take %d KiB at once", budget)
	}
	if PassphraseCost.MemoryKiB < 64<<10 || PassphraseCost.Passes < 3 {
		t.Errorf("a guess costs too little: %+v", PassphraseCost)
	}
}

// A passphrase that was stored under a cheaper rule is stored anew at the next sign-in.
// The pages say how short a passphrase may be before they ask; what they say must be what the server takes.
func TestThePagesNameTheShortestPassphrase(t *testing.T) {
	for file, line := range map[string]string{
		"../static/src/phone/SignIn.tsx": "const shortestPassphrase = %d;",
		"../static/src/desk/SignIn.tsx":  "const shortest = %d;",
		"../static/src/words/en.ts":      "'enter.too-short': 'At least %d characters;",
	} {
		text, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if want := fmt.Sprintf(line, shortestPassphrase); !strings.Contains(string(text), want) {
			t.Errorf("%s does not have %q", file, want)
		}
	}
}

func TestAWeakPassphraseIsStoredAnew(t *testing.T) {
	s := openSite(t, func(c *Config) { c.Passphrases = HashCost{MemoryKiB: 128, Passes: 2, Lanes: 1} })
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 200})
	_, stored, err := s.store.Credentials(t.Context(), "Ilse")
	if err != nil || !strings.Contains(stored, "m=128,t=2") {
		t.Errorf("stored as %q (%v)", stored, err)
	}
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 200})
}

// However many sign in at once, only two hashes run; the rest waits its turn.
func TestHashesRunTwoAtATime(t *testing.T) {
	s := openSite(t, func(c *Config) { c.Patience = 300 * time.Millisecond })
	for range 2 { // 128 MiB, whoever comes
		leave, err := s.server.hashTurn(t.Context())
		if err != nil {
			t.Fatal(err)
		}
		defer leave()
	}
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 503, code: "busy"})
}

func TestSignInsAreAudited(t *testing.T) {
	s := openSite(t)
	before := s.contents()["audit"]
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", passphrase), status: 200})
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Ilse", "wrong"), status: 401})
	s.do(call{method: "POST", path: "/api/session", body: signInBody("Nobody", "wrong"), status: 401}) // strangers do not fill the audit
	s.server.beside.Wait()
	if after := s.contents()["audit"]; after != before+2 {
		t.Errorf("%d lines of audit, want 2 more than %d", after, before)
	}
	for _, secret := range []string{passphrase, "wrong"} {
		if strings.Contains(s.log.String(), secret) {
			t.Errorf("the log holds %q", secret)
		}
	}
}
