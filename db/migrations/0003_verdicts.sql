-- What calc answered for a mount at a point of its log: kept so that lists can show the word without computing.
-- This package does not read the answers. They are not part of the record and may be dropped at any time.
CREATE TABLE verdicts (
  job          TEXT    NOT NULL,
  mount        TEXT    NOT NULL,
  readings_seq INTEGER NOT NULL,
  version      TEXT    NOT NULL,
  word         TEXT,
  answer       TEXT    NOT NULL CHECK (json_valid(answer)),
  PRIMARY KEY (job, mount)
) STRICT, WITHOUT ROWID;
