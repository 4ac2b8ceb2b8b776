package db

import (
	"context"
	"database/sql"
	"time"
)

// SessionLife is how long a session lasts: idle without a request, and whole from sign-in on.
type SessionLife struct{ Idle, Whole time.Duration }

// LifeOf is long for climbers, whose phones are out of coverage for weeks and who sign in with gloves on, and short at
// the desk, where decisions are made.
func LifeOf(role string) SessionLife {
	if role == Climber {
		return SessionLife{Idle: 30 * 24 * time.Hour, Whole: 90 * 24 * time.Hour}
	}
	return SessionLife{Idle: 12 * time.Hour, Whole: 30 * 24 * time.Hour}
}

// seenEvery is how often a session in use is written down. Writing on each request would cost a sync each.
const seenEvery = 5 * time.Minute

// Begin starts a session and returns its token, which is nowhere else, and until when it lasts if it is not used.
func (s *Store) Begin(ctx context.Context, p Person) (token string, until time.Time, err error) {
	token = newToken()
	now := s.nowMs()
	err = s.inTx(ctx, func(tx *sql.Tx) error {
		if err := s.dropEnded(ctx, tx); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, "INSERT INTO sessions (token_hash, person, created_ms, seen_ms) VALUES (?, ?, ?, ?)",
			tokenHash(token), p.ID, now, now); err != nil {
			return err
		}
		return s.audit(ctx, tx, p.ID, "signed in", "")
	})
	return token, timeOf(now).Add(LifeOf(p.Role).Idle), err
}

// dropEnded removes sessions that no role could use any more.
func (s *Store) dropEnded(ctx context.Context, tx *sql.Tx) error {
	_, err := tx.ExecContext(ctx, "DELETE FROM sessions WHERE created_ms < ?", s.now().Add(-LifeOf(Climber).Whole).UnixMilli())
	return err
}

// Session finds who a token belongs to and until when it lasts; ErrNoSession when it does not, not any more, or the
// person is disabled.
func (s *Store) Session(ctx context.Context, token string) (Person, time.Time, error) {
	var p Person
	var created, seen int64
	err := s.read.QueryRowContext(ctx, `
		SELECT people.id, people.name, people.role, coalesce(people.crew, ''), sessions.created_ms, sessions.seen_ms
		FROM sessions JOIN people ON people.id = sessions.person
		WHERE sessions.token_hash = ? AND people.disabled_ms IS NULL`, tokenHash(token)).
		Scan(&p.ID, &p.Name, &p.Role, &p.Crew, &created, &seen)
	if err == sql.ErrNoRows {
		return Person{}, time.Time{}, ErrNoSession
	}
	if err != nil {
		return Person{}, time.Time{}, err
	}
	now, life := s.now(), LifeOf(p.Role)
	end := timeOf(created).Add(life.Whole)
	if !now.Before(timeOf(seen).Add(life.Idle)) || !now.Before(end) {
		return Person{}, time.Time{}, ErrNoSession
	}
	if now.Sub(timeOf(seen)) >= seenEvery {
		if err := s.inTx(ctx, func(tx *sql.Tx) error {
			_, err := tx.ExecContext(ctx, "UPDATE sessions SET seen_ms = ? WHERE token_hash = ?", now.UnixMilli(), tokenHash(token))
			return err
		}); err != nil && !IsFull(err) && !IsBusy(err) {
			// On a full disk people can still read, and a session that was not written down as seen is still theirs.
			return Person{}, time.Time{}, err
		}
	}
	until := now.Add(life.Idle).UTC()
	if end.Before(until) {
		until = end
	}
	return p, until, nil
}

// End ends a session; a token that is unknown is no error.
func (s *Store) End(ctx context.Context, token string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		var person string
		err := tx.QueryRowContext(ctx, "DELETE FROM sessions WHERE token_hash = ? RETURNING person", tokenHash(token)).Scan(&person)
		if err == sql.ErrNoRows {
			return nil
		}
		if err != nil {
			return err
		}
		return s.audit(ctx, tx, person, "signed out", "")
	})
}

// A wrong passphrase costs nothing the first three times (gloves), then twice as long each time, five minutes at most:
// a guesser gets under 300 tries a day, and nobody is ever locked out for good.
const (
	freeTries  = 3
	firstWait  = time.Second
	longestTry = 5 * time.Minute
)

// forgetAfter an hour without an attempt the count begins anew: that gives a guesser about eleven tries in 69 minutes,
// no more than waiting does, and bounds what strangers can fill the table with.
const forgetAfter = time.Hour

func waitAfter(failed int) time.Duration {
	if failed < freeTries {
		return 0
	}
	wait := firstWait
	for range failed - freeTries {
		if wait *= 2; wait >= longestTry {
			return longestTry
		}
	}
	return wait
}

// Try counts an attempt to sign in under a name before it is checked, so that many at once cannot outrun the count.
// When it is too early it returns how long to wait, and the attempt is not counted.
func (s *Store) Try(ctx context.Context, name string) (wait time.Duration, err error) {
	err = s.inTx(ctx, func(tx *sql.Tx) error {
		now := s.now()
		var failed int
		var last int64
		err := tx.QueryRowContext(ctx, "SELECT failed, last_ms FROM sign_in_attempts WHERE name_key = ?", nameKey(name)).
			Scan(&failed, &last)
		if err != nil && err != sql.ErrNoRows {
			return err
		}
		if early := timeOf(last).Add(waitAfter(failed)).Sub(now); failed > 0 && early > 0 {
			wait = early
			return nil
		}
		if _, err := tx.ExecContext(ctx, "DELETE FROM sign_in_attempts WHERE last_ms < ?", now.Add(-forgetAfter).UnixMilli()); err != nil {
			return err
		}
		_, err = tx.ExecContext(ctx, `
			INSERT INTO sign_in_attempts (name_key, failed, last_ms) VALUES (?, 1, ?)
			ON CONFLICT (name_key) DO UPDATE SET failed = failed + 1, last_ms = excluded.last_ms`,
			nameKey(name), now.UnixMilli())
		return err
	})
	return wait, err
}

// Succeeded forgets the failed attempts under a name.
func (s *Store) Succeeded(ctx context.Context, name string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, "DELETE FROM sign_in_attempts WHERE name_key = ?", nameKey(name))
		return err
	})
}

// Failed writes into the audit that somebody tried to sign in as this person.
func (s *Store) Failed(ctx context.Context, person string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error { return s.audit(ctx, tx, person, "sign-in failed", "") })
}
