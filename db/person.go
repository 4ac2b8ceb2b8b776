package db

import (
	"context"
	"crypto/rand"
	"crypto/sha256"
	"database/sql"
	"encoding/base64"
	"encoding/hex"
	"strings"
	"time"

	"github.com/google/uuid"
	sqlite3 "github.com/mattn/go-sqlite3"
)

// The roles.
const (
	Climber    = "climber"
	Supervisor = "supervisor"
)

// Person is who acts. A climber belongs to one crew; a supervisor sees every job.
type Person struct {
	ID   string
	Name string
	Role string
	Crew string // "" for a supervisor without one
}

// MaySee is the one rule of who sees a job: supervisors all, climbers what was issued to their own crew.
func (p Person) MaySee(j Job) bool {
	return p.Role == Supervisor || p.Role == Climber && p.Crew != "" && p.Crew == j.Crew && j.Stage != StageDrafted
}

// nameKey is under what a name is unique and found: without regard to case and spaces.
func nameKey(name string) string { return strings.ToLower(strings.Join(strings.Fields(name), " ")) }

// TidyName is a name as it is kept, "" where it cannot be one.
func TidyName(name string) string {
	tidy := strings.Join(strings.Fields(name), " ")
	if tidy == "" || len(tidy) > maxName {
		return ""
	}
	return tidy
}

const personColumns = "id, name, role, coalesce(crew, '')"

func personByID(ctx context.Context, q queryer, id string) (Person, error) {
	var p Person
	err := q.QueryRowContext(ctx, "SELECT "+personColumns+" FROM people WHERE id = ?", id).
		Scan(&p.ID, &p.Name, &p.Role, &p.Crew)
	if err == sql.ErrNoRows {
		return p, ErrNotFound
	}
	return p, err
}

// People lists everybody by name.
func (s *Store) People(ctx context.Context) ([]Person, error) {
	rows, err := s.read.QueryContext(ctx, "SELECT "+personColumns+" FROM people WHERE disabled_ms IS NULL ORDER BY name_key")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var list []Person
	for rows.Next() {
		var p Person
		if err := rows.Scan(&p.ID, &p.Name, &p.Role, &p.Crew); err != nil {
			return nil, err
		}
		list = append(list, p)
	}
	return list, rows.Err()
}

// Anybody tells whether there is a person at all.
func (s *Store) Anybody(ctx context.Context) (bool, error) {
	var n int
	err := s.read.QueryRowContext(ctx, "SELECT EXISTS (SELECT 1 FROM people)").Scan(&n)
	return n == 1, err
}

// Credentials finds a person by name with the stored form of the passphrase; ErrNotFound also for who is disabled.
func (s *Store) Credentials(ctx context.Context, name string) (Person, string, error) {
	var p Person
	var stored string
	err := s.read.QueryRowContext(ctx,
		"SELECT "+personColumns+", passphrase FROM people WHERE name_key = ? AND disabled_ms IS NULL", nameKey(name)).
		Scan(&p.ID, &p.Name, &p.Role, &p.Crew, &stored)
	if err == sql.ErrNoRows {
		return p, "", ErrNotFound
	}
	return p, stored, err
}

// ReplacePassphrase stores another form of the passphrase.
func (s *Store) ReplacePassphrase(ctx context.Context, person, stored string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, "UPDATE people SET passphrase = ? WHERE id = ?", stored, person)
		return err
	})
}

// Disable ends what a person may do: every session at once, and signing in from now on.
func (s *Store) Disable(ctx context.Context, person string) error {
	return s.inTx(ctx, func(tx *sql.Tx) error {
		if _, err := tx.ExecContext(ctx, "UPDATE people SET disabled_ms = ? WHERE id = ?", s.nowMs(), person); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, "DELETE FROM sessions WHERE person = ?", person); err != nil {
			return err
		}
		return s.audit(ctx, tx, person, "person disabled", "")
	})
}

// AddPerson makes a person without an invitation; for the demo and for tests.
func (s *Store) AddPerson(ctx context.Context, name, role, crew, storedPassphrase string) (Person, error) {
	var p Person
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		var err error
		p, err = s.addPerson(ctx, tx, name, role, crew, storedPassphrase)
		return err
	})
	return p, err
}

func (s *Store) addPerson(ctx context.Context, tx *sql.Tx, name, role, crew, storedPassphrase string) (Person, error) {
	p := Person{ID: uuid.NewString(), Name: TidyName(name), Role: role, Crew: crew}
	_, err := tx.ExecContext(ctx, `
		INSERT INTO people (id, name, name_key, passphrase, role, crew, created_ms) VALUES (?, ?, ?, ?, ?, ?, ?)`,
		p.ID, p.Name, nameKey(p.Name), storedPassphrase, p.Role, orNull(p.Crew), s.nowMs())
	if isUnique(err) {
		return p, ErrNameTaken
	}
	return p, err
}

// isUnique tells by the code, never by the text, that a UNIQUE column has the value already.
func isUnique(err error) bool {
	e, ok := err.(sqlite3.Error)
	return ok && e.ExtendedCode == sqlite3.ErrConstraintUnique
}

// newToken makes a secret of 256 bits from the system's generator.
func newToken() string {
	var b [32]byte
	rand.Read(b[:]) // never fails: crypto/rand ends the process instead
	return base64.RawURLEncoding.EncodeToString(b[:])
}

func tokenHash(token string) string {
	sum := sha256.Sum256([]byte(token))
	return hex.EncodeToString(sum[:])
}

// InvitationLife is how long an invitation can be used.
const InvitationLife = 72 * time.Hour

// Invite makes an invitation and returns its token, which is nowhere else. by is "" for one made at the machine itself.
func (s *Store) Invite(ctx context.Context, by, role, crew string) (token string, until time.Time, err error) {
	token = newToken()
	now := s.nowMs()
	until = timeOf(now).Add(InvitationLife)
	err = s.inTx(ctx, func(tx *sql.Tx) error { return s.invite(ctx, tx, token, by, role, crew, now, until) })
	return token, until, err
}

// InviteFirst makes the invitation of the first supervisor and withdraws those that were made at the machine for a
// supervisor before and not used: each start on an empty database prints one, and an older one, read from a log, must
// not open the door once somebody is inside.
func (s *Store) InviteFirst(ctx context.Context) (token string, until time.Time, err error) {
	token = newToken()
	now := s.nowMs()
	until = timeOf(now).Add(InvitationLife)
	err = s.inTx(ctx, func(tx *sql.Tx) error {
		result, err := tx.ExecContext(ctx,
			"UPDATE invitations SET used_ms = ? WHERE made_by IS NULL AND role = ? AND used_ms IS NULL", now, Supervisor)
		if err != nil {
			return err
		}
		if n, err := result.RowsAffected(); err != nil {
			return err
		} else if n > 0 {
			if err := s.audit(ctx, tx, "", "invitations withdrawn", Supervisor); err != nil {
				return err
			}
		}
		return s.invite(ctx, tx, token, "", Supervisor, "", now, until)
	})
	return token, until, err
}

func (s *Store) invite(ctx context.Context, tx *sql.Tx, token, by, role, crew string, nowMs int64, until time.Time) error {
	if _, err := tx.ExecContext(ctx, `
		INSERT INTO invitations (token_hash, role, crew, made_by, made_ms, until_ms) VALUES (?, ?, ?, ?, ?, ?)`,
		tokenHash(token), role, orNull(crew), orNull(by), nowMs, until.UnixMilli()); err != nil {
		return err
	}
	return s.audit(ctx, tx, by, "invitation made", role+" "+crew)
}

// InvitationOpen tells whether a token can still be used, before an expensive hash is made for it.
func (s *Store) InvitationOpen(ctx context.Context, token string) (bool, error) {
	var n int
	err := s.read.QueryRowContext(ctx,
		"SELECT count(*) FROM invitations WHERE token_hash = ? AND used_ms IS NULL AND until_ms > ?",
		tokenHash(token), s.nowMs()).Scan(&n)
	return n == 1, err
}

// Accept uses an invitation once: the person is made and the invitation spent in one transaction.
func (s *Store) Accept(ctx context.Context, token, name, storedPassphrase string) (Person, error) {
	var p Person
	err := s.inTx(ctx, func(tx *sql.Tx) error {
		var role, crew string
		err := tx.QueryRowContext(ctx, `
			SELECT role, coalesce(crew, '') FROM invitations WHERE token_hash = ? AND used_ms IS NULL AND until_ms > ?`,
			tokenHash(token), s.nowMs()).Scan(&role, &crew)
		if err == sql.ErrNoRows {
			return ErrInvitation
		}
		if err != nil {
			return err
		}
		if p, err = s.addPerson(ctx, tx, name, role, crew, storedPassphrase); err != nil {
			return err
		}
		if _, err := tx.ExecContext(ctx, "UPDATE invitations SET used_ms = ?, used_by = ? WHERE token_hash = ?",
			s.nowMs(), p.ID, tokenHash(token)); err != nil {
			return err
		}
		return s.audit(ctx, tx, p.ID, "invitation accepted", role)
	})
	return p, err
}
