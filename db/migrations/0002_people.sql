-- Who may do what. Of a token (session, invitation) only the SHA-256 is kept: who reads the database cannot sign in.

CREATE TABLE people (
  id          TEXT PRIMARY KEY CHECK (length(id) = 36),
  name        TEXT    NOT NULL,
  name_key    TEXT    NOT NULL UNIQUE,
  passphrase  TEXT    NOT NULL,
  role        TEXT    NOT NULL CHECK (role IN ('climber', 'supervisor')),
  crew        TEXT,
  created_ms  INTEGER NOT NULL,
  disabled_ms INTEGER,
  CHECK (role <> 'climber' OR crew IS NOT NULL)
) STRICT, WITHOUT ROWID;

CREATE TABLE sessions (
  token_hash TEXT PRIMARY KEY CHECK (length(token_hash) = 64),
  person     TEXT    NOT NULL REFERENCES people (id),
  created_ms INTEGER NOT NULL,
  seen_ms    INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

CREATE INDEX sessions_by_person ON sessions (person);

CREATE TABLE invitations (
  token_hash TEXT PRIMARY KEY CHECK (length(token_hash) = 64),
  role       TEXT    NOT NULL CHECK (role IN ('climber', 'supervisor')),
  crew       TEXT,
  made_by    TEXT    REFERENCES people (id),
  made_ms    INTEGER NOT NULL,
  until_ms   INTEGER NOT NULL,
  used_ms    INTEGER,
  used_by    TEXT    REFERENCES people (id),
  CHECK (role <> 'climber' OR crew IS NOT NULL)
) STRICT, WITHOUT ROWID;

-- Failed sign-ins by the name that was tried, whether such a person exists or not: both wait alike.
CREATE TABLE sign_in_attempts (
  name_key TEXT PRIMARY KEY,
  failed   INTEGER NOT NULL,
  last_ms  INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

-- What was done to the system itself (the jobs have their own log), chained like it.
CREATE TABLE audit (
  n      INTEGER PRIMARY KEY,
  at_ms  INTEGER NOT NULL,
  person TEXT,
  action TEXT    NOT NULL,
  detail TEXT    NOT NULL,
  chain  TEXT    NOT NULL CHECK (length(chain) = 64)
) STRICT;

CREATE TRIGGER audit_is_never_changed BEFORE UPDATE ON audit
BEGIN SELECT RAISE(ABORT, 'audit is append-only'); END;

CREATE TRIGGER audit_is_never_removed BEFORE DELETE ON audit
BEGIN SELECT RAISE(ABORT, 'audit is append-only'); END;
