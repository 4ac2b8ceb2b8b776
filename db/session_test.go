package db

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"sync"
	"testing"
	"time"
)

func TestSessionsEnd(t *testing.T) {
	day := 24 * time.Hour
	for _, c := range []struct {
		name  string
		role  string
		waits []time.Duration // between uses; the last one decides
		alive bool
	}{
		{"a climber after 29 days out of coverage", Climber, []time.Duration{29 * day}, true},
		{"a climber after 30 days", Climber, []time.Duration{30 * day}, false},
		{"a climber in use for 89 days", Climber, []time.Duration{29 * day, 29 * day, 29 * day, 2 * day}, true},
		{"a climber in use for 90 days", Climber, []time.Duration{29 * day, 29 * day, 29 * day, 3 * day}, false},
		{"a supervisor after 11 hours", Supervisor, []time.Duration{11 * time.Hour}, true},
		{"a supervisor after 12 hours", Supervisor, []time.Duration{12 * time.Hour}, false},
		{"a supervisor who comes back each morning of an hour", Supervisor, []time.Duration{11 * time.Hour, 11 * time.Hour, 11 * time.Hour}, true},
	} {
		t.Run(c.name, func(t *testing.T) {
			b := openBench(t)
			who := b.tam
			if c.role == Supervisor {
				who = b.desk
			}
			token, until, err := b.Begin(t.Context(), who)
			if err != nil {
				t.Fatal(err)
			}
			if want := b.clock.now().Add(LifeOf(c.role).Idle); !until.Equal(want) {
				t.Errorf("until %v, want %v", until, want)
			}
			for i, wait := range c.waits {
				b.clock.pass(wait)
				p, until, err := b.Session(t.Context(), token)
				last := i == len(c.waits)-1
				if want := !last || c.alive; (err == nil) != want {
					t.Fatalf("after wait %d: %v", i, err)
				}
				if err != nil {
					if !errors.Is(err, ErrNoSession) {
						t.Errorf("got %v, want ErrNoSession", err)
					}
					continue
				}
				if p != who {
					t.Errorf("it is %+v", p)
				}
				if !until.After(b.clock.now()) {
					t.Errorf("until %v lies in the past", until)
				}
			}
		})
	}
}

func TestATokenIsNowhereInTheFile(t *testing.T) {
	b := openBench(t)
	session, _, err := b.Begin(t.Context(), b.tam)
	if err != nil {
		t.Fatal(err)
	}
	invitation, _, err := b.Invite(t.Context(), b.desk.ID, Climber, "north")
	if err != nil {
		t.Fatal(err)
	}
	if len(session) < 43 || len(invitation) < 43 || session == invitation { // 32 bytes in base64
		t.Fatalf("tokens %q and %q", session, invitation)
	}
	for _, table := range []string{"sessions", "invitations", "audit", "people", "meta"} {
		rows, err := b.read.Query("SELECT * FROM " + table)
		if err != nil {
			t.Fatal(err)
		}
		columns, err := rows.Columns()
		if err != nil {
			t.Fatal(err)
		}
		for rows.Next() {
			values := make([]any, len(columns))
			for i := range values {
				values[i] = new(any)
			}
			if err := rows.Scan(values...); err != nil {
				t.Fatal(err)
			}
			for i, v := range values {
				if text := fmt.Sprint(*v.(*any)); strings.Contains(text, session) || strings.Contains(text, invitation) {
					t.Errorf("%s.%s holds a token", table, columns[i])
				}
			}
		}
		rows.Close()
	}
}

func TestSigningOutAndDisabling(t *testing.T) {
	b := openBench(t)
	one, _, err := b.Begin(t.Context(), b.tam)
	if err != nil {
		t.Fatal(err)
	}
	two, _, err := b.Begin(t.Context(), b.tam)
	if err != nil {
		t.Fatal(err)
	}
	if err := b.End(t.Context(), one); err != nil {
		t.Fatal(err)
	}
	if _, _, err := b.Session(t.Context(), one); !errors.Is(err, ErrNoSession) {
		t.Errorf("signed out: %v", err)
	}
	if _, _, err := b.Session(t.Context(), two); err != nil {
		t.Errorf("the other phone: %v", err)
	}
	if err := b.Disable(t.Context(), b.tam.ID); err != nil {
		t.Fatal(err)
	}
	if _, _, err := b.Session(t.Context(), two); !errors.Is(err, ErrNoSession) {
		t.Errorf("disabled: %v", err)
	}
	if _, _, err := b.Credentials(t.Context(), "Tam"); !errors.Is(err, ErrNotFound) {
		t.Errorf("disabled, by name: %v", err)
	}
	if err := b.End(t.Context(), "no such token"); err != nil {
		t.Error(err)
	}
}

func TestAnInvitationWorksOnce(t *testing.T) {
	b := openBench(t)
	token, until, err := b.Invite(t.Context(), b.desk.ID, Climber, "north")
	if err != nil {
		t.Fatal(err)
	}
	if want := b.clock.now().Add(72 * time.Hour); !until.Equal(want) {
		t.Errorf("until %v, want %v", until, want)
	}
	const sides = 8
	people := make([]Person, sides)
	errs := make([]error, sides)
	var wg sync.WaitGroup
	for i := range sides {
		wg.Go(func() { people[i], errs[i] = b.Accept(context.Background(), token, fmt.Sprint("New ", i), "x") })
	}
	wg.Wait()
	made := 0
	for i := range sides {
		switch {
		case errs[i] == nil:
			made++
			if people[i].Role != Climber || people[i].Crew != "north" {
				t.Errorf("made %+v", people[i])
			}
		case !errors.Is(errs[i], ErrInvitation):
			t.Error(errs[i])
		}
	}
	if made != 1 {
		t.Errorf("%d people came of one invitation", made)
	}
}

// A server that starts twice on an empty database prints two links; only the later one may work, also after somebody
// came in by it. What a supervisor invited is not touched.
func TestTheFirstInvitationWithdrawsTheOneBefore(t *testing.T) {
	b := openBench(t)
	kept, _, err := b.Invite(t.Context(), b.desk.ID, Supervisor, "")
	if err != nil {
		t.Fatal(err)
	}
	crew, _, err := b.Invite(t.Context(), "", Climber, "north")
	if err != nil {
		t.Fatal(err)
	}
	old, _, err := b.InviteFirst(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	latest, _, err := b.InviteFirst(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := b.Accept(t.Context(), old, "Old", "x"); !errors.Is(err, ErrInvitation) {
		t.Errorf("the link of the first start: %v", err)
	}
	for name, token := range map[string]string{"Latest": latest, "Kept": kept, "Crew": crew} {
		if _, err := b.Accept(t.Context(), token, name, "x"); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
	b.proved()
}

func TestAnInvitationRunsOut(t *testing.T) {
	b := openBench(t)
	token, _, err := b.Invite(t.Context(), "", Supervisor, "")
	if err != nil {
		t.Fatal(err)
	}
	b.clock.pass(72*time.Hour - time.Millisecond)
	if open, err := b.InvitationOpen(t.Context(), token); err != nil || !open {
		t.Errorf("a moment before: %v (%v)", open, err)
	}
	b.clock.pass(time.Millisecond)
	if open, err := b.InvitationOpen(t.Context(), token); err != nil || open {
		t.Errorf("after 72 hours: %v (%v)", open, err)
	}
	if _, err := b.Accept(t.Context(), token, "Late", "x"); !errors.Is(err, ErrInvitation) {
		t.Errorf("after 72 hours: %v", err)
	}
}

func TestANameThatIsTakenLeavesTheInvitationOpen(t *testing.T) {
	b := openBench(t)
	token, _, err := b.Invite(t.Context(), "", Climber, "north")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := b.Accept(t.Context(), token, "  TAM ", "x"); !errors.Is(err, ErrNameTaken) {
		t.Fatalf("a name in other case: %v", err)
	}
	if p, err := b.Accept(t.Context(), token, "  Tam   the  second ", "x"); err != nil || p.Name != "Tam the second" {
		t.Fatalf("%+v (%v)", p, err)
	}
}

func TestWrongPassphrasesWait(t *testing.T) {
	b := openBench(t)
	try := func() time.Duration {
		t.Helper()
		wait, err := b.Try(t.Context(), " tAm ")
		if err != nil {
			t.Fatal(err)
		}
		return wait
	}
	for i := range freeTries {
		if wait := try(); wait != 0 {
			t.Fatalf("try %d waits %v", i+1, wait)
		}
	}
	// Then 1, 2, 4 … seconds, five minutes at most.
	for i, want := range []time.Duration{1, 2, 4, 8, 16, 32, 64, 128, 256, 300, 300, 300} {
		want *= time.Second
		if wait := try(); wait != want {
			t.Fatalf("after %d more: %v, want %v", i, wait, want)
		}
		b.clock.pass(want - time.Millisecond)
		if wait := try(); wait != time.Millisecond {
			t.Fatalf("a moment too early: %v", wait)
		}
		b.clock.pass(time.Millisecond)
		if wait := try(); wait != 0 {
			t.Fatalf("after the wait: %v", wait)
		}
	}
	if wait, err := b.Try(t.Context(), "Ilse"); err != nil || wait != 0 {
		t.Errorf("another name waits %v (%v)", wait, err)
	}
	if err := b.Succeeded(t.Context(), "TAM"); err != nil {
		t.Fatal(err)
	}
	if wait := try(); wait != 0 {
		t.Errorf("after a success: %v", wait)
	}
}

// On a full disk people can still look things up.
func TestASessionOutlivesAFullDisk(t *testing.T) {
	b := openBench(t)
	token, _, err := b.Begin(t.Context(), b.tam)
	if err != nil {
		t.Fatal(err)
	}
	b.clock.pass(seenEvery)
	if _, err := b.write.Exec("CREATE TEMP TRIGGER full BEFORE UPDATE ON main.sessions BEGIN SELECT RAISE(ABORT, 'x'); END"); err != nil {
		t.Fatal(err)
	}
	if _, _, err := b.Session(t.Context(), token); err == nil {
		t.Fatal("an error that is none of the disk's was passed over")
	}
	if _, err := b.write.Exec("DROP TRIGGER full; PRAGMA query_only = on"); err != nil {
		t.Fatal(err)
	}
	if p, _, err := b.Session(t.Context(), token); err != nil || p != b.tam {
		t.Errorf("%+v (%v)", p, err)
	}
}
