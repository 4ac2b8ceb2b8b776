-- The record. `entries` is the one truth about jobs; everything under "derived" follows from it and from `quarantine`
-- and can be dropped and made again (Rebuild). Times are UTC in unix milliseconds; what a device wrote stays as text.

CREATE TABLE meta (
  key   TEXT PRIMARY KEY,
  value TEXT NOT NULL
) STRICT, WITHOUT ROWID;

-- One row an entry, as received. seq is given inside the one writing transaction, so commit order is seq order and a
-- cursor over seq never skips a row. raw is the device's own text, byte for byte: its hash is the device's hash.
CREATE TABLE entries (
  seq         INTEGER PRIMARY KEY,
  id          TEXT    NOT NULL UNIQUE CHECK (length(id) = 36),
  device      TEXT    NOT NULL CHECK (length(device) = 36),
  device_seq  INTEGER NOT NULL CHECK (device_seq >= 1),
  prev        TEXT    NOT NULL CHECK (length(prev) IN (0, 64)),
  hash        TEXT    NOT NULL CHECK (length(hash) = 64),
  job         TEXT    NOT NULL CHECK (length(job) = 36),
  mount       TEXT,
  kind        TEXT    NOT NULL,
  schema      INTEGER NOT NULL,
  author      TEXT    NOT NULL,
  uploader    TEXT    NOT NULL,
  received_ms INTEGER NOT NULL,
  sent_ms     INTEGER,
  raw         TEXT    NOT NULL CHECK (json_valid(raw)),
  chain       TEXT    NOT NULL CHECK (length(chain) = 64),
  UNIQUE (device, device_seq)
) STRICT;

CREATE INDEX entries_by_job ON entries (job, seq);

CREATE TRIGGER entries_are_never_changed BEFORE UPDATE ON entries
BEGIN SELECT RAISE(ABORT, 'entries are append-only'); END;

CREATE TRIGGER entries_are_never_removed BEFORE DELETE ON entries
BEGIN SELECT RAISE(ABORT, 'entries are append-only'); END;

-- What could not be taken into the log, kept word for word with the reason, for a person to look at. Fields that could
-- not be read are null. The same text with the same claimed hash is kept once.
CREATE TABLE quarantine (
  n            INTEGER PRIMARY KEY,
  id           TEXT,
  device       TEXT,
  device_seq   INTEGER,
  job          TEXT,
  code         TEXT    NOT NULL,
  reason       TEXT    NOT NULL,
  author       TEXT,
  uploader     TEXT    NOT NULL,
  received_ms  INTEGER NOT NULL,
  sent_ms      INTEGER,
  claimed_hash TEXT    NOT NULL,
  raw_hash     TEXT    NOT NULL CHECK (length(raw_hash) = 64),
  raw          TEXT    NOT NULL,
  UNIQUE (raw_hash, claimed_hash)
) STRICT;

CREATE INDEX quarantine_by_job ON quarantine (job, n);
CREATE INDEX quarantine_by_device ON quarantine (device, device_seq, n);

CREATE TRIGGER quarantine_is_never_changed BEFORE UPDATE ON quarantine
BEGIN SELECT RAISE(ABORT, 'quarantine is append-only'); END;

CREATE TRIGGER quarantine_is_never_removed BEFORE DELETE ON quarantine
BEGIN SELECT RAISE(ABORT, 'quarantine is append-only'); END;

-- Derived ---------------------------------------------------------------------------------------------------------

CREATE TABLE jobs (
  id            TEXT PRIMARY KEY,
  site          TEXT    NOT NULL,
  title         TEXT    NOT NULL,
  crew          TEXT    NOT NULL,
  visit_on      TEXT,
  stage         TEXT    NOT NULL CHECK (stage IN ('drafted', 'issued', 'under way', 'handed in', 'signed off', 'sent back')),
  stage_seq     INTEGER NOT NULL REFERENCES entries (seq),
  planned_seq   INTEGER NOT NULL REFERENCES entries (seq),
  head_seq      INTEGER NOT NULL REFERENCES entries (seq),
  readings_seq  INTEGER NOT NULL REFERENCES entries (seq),
  entries       INTEGER NOT NULL,
  quarantined   INTEGER NOT NULL,
  remark        TEXT,
  handed_in_at  TEXT
) STRICT, WITHOUT ROWID;

CREATE INDEX jobs_by_crew ON jobs (crew, stage);
CREATE INDEX jobs_by_stage ON jobs (stage);

CREATE TABLE mounts (
  job   TEXT    NOT NULL REFERENCES jobs (id),
  place INTEGER NOT NULL,
  id    TEXT    NOT NULL,
  name  TEXT    NOT NULL,
  PRIMARY KEY (job, place),
  UNIQUE (job, id)
) STRICT, WITHOUT ROWID;

-- contiguous_seq: numbers 1..contiguous_seq of the device are here without a gap, in the log or set apart;
-- contiguous_hash is that of the last.
CREATE TABLE devices (
  device          TEXT PRIMARY KEY,
  contiguous_seq  INTEGER NOT NULL,
  contiguous_hash TEXT    NOT NULL,
  highest_seq     INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

-- From which devices a person ever uploaded.
CREATE TABLE device_people (
  person TEXT NOT NULL,
  device TEXT NOT NULL,
  PRIMARY KEY (person, device)
) STRICT, WITHOUT ROWID;
