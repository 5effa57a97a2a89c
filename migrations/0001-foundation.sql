-- Times are epoch milliseconds. Every table is STRICT; ANY keeps a double as it came, also -0.

CREATE TABLE site (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  id TEXT NOT NULL UNIQUE,
  folded_name TEXT NOT NULL, -- lower case, for the search
  created_at INTEGER NOT NULL,
  updated_at INTEGER NOT NULL,
  revision INTEGER NOT NULL
) STRICT;

-- Beside the site, so that a new revision does not write the whole sheet again.
CREATE TABLE sheet (
  site INTEGER PRIMARY KEY REFERENCES site (num) ON DELETE CASCADE,
  body TEXT NOT NULL
) STRICT;

CREATE TABLE sheet_history (
  num INTEGER PRIMARY KEY,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  at INTEGER NOT NULL,
  by TEXT NOT NULL,
  before TEXT NOT NULL
) STRICT;
CREATE INDEX sheet_history_site ON sheet_history (site);

-- One row per channel that was ever on the sheet, with the extent of its readings. The bounds of the recent rows may be
-- wider than the rows, never narrower.
CREATE TABLE channel (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  ref TEXT NOT NULL,
  listed INTEGER NOT NULL, -- 1 while it is on the sheet
  count INTEGER NOT NULL DEFAULT 0,
  first INTEGER,
  last INTEGER,
  recent INTEGER NOT NULL DEFAULT 0,
  recent_first INTEGER,
  recent_last INTEGER,
  UNIQUE (site, ref)
) STRICT;

-- The resting place of readings: one block per channel and hour; key = channel * 2^21 + hours since the epoch.
-- Its summary stands apart from the packed readings: a wide chart reads a hundredth of the file.
CREATE TABLE block (
  key INTEGER PRIMARY KEY,
  n INTEGER NOT NULL,
  t_first INTEGER NOT NULL,
  t_last INTEGER NOT NULL,
  v_first ANY NOT NULL,
  v_last ANY NOT NULL,
  v_min ANY NOT NULL,
  t_min INTEGER NOT NULL,
  v_max ANY NOT NULL,
  t_max INTEGER NOT NULL,
  sum ANY NOT NULL
) STRICT;

CREATE TABLE packed (
  key INTEGER PRIMARY KEY, -- of the block
  n INTEGER NOT NULL,
  crc INTEGER NOT NULL, -- CRC-32 of the data
  data BLOB NOT NULL
) STRICT;

-- Readings that came lately and in small numbers. A (channel, t) lives here or in a block, never in both.
-- Time first: the rows of one second lie side by side, which keeps the log of a live logger short.
CREATE TABLE recent (
  t INTEGER NOT NULL,
  channel INTEGER NOT NULL,
  v ANY NOT NULL,
  PRIMARY KEY (t, channel)
) STRICT, WITHOUT ROWID;

CREATE TABLE record (
  id TEXT PRIMARY KEY,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  kind TEXT NOT NULL,
  t_from INTEGER NOT NULL,
  t_to INTEGER NOT NULL,
  body TEXT NOT NULL,
  recorded_at INTEGER NOT NULL,
  recorded_by TEXT NOT NULL,
  corrections INTEGER NOT NULL DEFAULT 0
) STRICT, WITHOUT ROWID;
CREATE INDEX record_time ON record (site, kind, t_from, id);

-- SHA-256 of every body a record has had: whoever posts one of them again repeats that record.
CREATE TABLE record_key (
  site INTEGER NOT NULL,
  kind TEXT NOT NULL,
  hash BLOB NOT NULL,
  record TEXT NOT NULL REFERENCES record (id) ON DELETE CASCADE,
  PRIMARY KEY (site, kind, hash)
) STRICT, WITHOUT ROWID;
CREATE INDEX record_key_record ON record_key (record);

-- What stood there before a correction or deletion; outlives the record.
CREATE TABLE record_history (
  num INTEGER PRIMARY KEY,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  kind TEXT NOT NULL,
  record TEXT NOT NULL,
  at INTEGER NOT NULL,
  by TEXT NOT NULL,
  action TEXT NOT NULL,
  before TEXT NOT NULL
) STRICT;
CREATE INDEX record_history_record ON record_history (site, kind, record);

CREATE TABLE access_key (
  id TEXT PRIMARY KEY,
  site INTEGER REFERENCES site (num) ON DELETE CASCADE,
  role TEXT NOT NULL,
  label TEXT NOT NULL,
  hash BLOB NOT NULL UNIQUE,
  created_at INTEGER NOT NULL,
  created_by TEXT NOT NULL,
  last_used_at INTEGER,
  ended_at INTEGER,
  ended_by TEXT
) STRICT, WITHOUT ROWID;
CREATE INDEX access_key_site ON access_key (site);

CREATE TABLE session (
  hash BLOB PRIMARY KEY,
  access_key TEXT NOT NULL REFERENCES access_key (id) ON DELETE CASCADE,
  created_at INTEGER NOT NULL,
  expires_at INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
CREATE INDEX session_access_key ON session (access_key);

CREATE TABLE findings (
  num INTEGER PRIMARY KEY,
  hash TEXT NOT NULL UNIQUE,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  at INTEGER NOT NULL,
  body TEXT NOT NULL
) STRICT;
CREATE INDEX findings_site ON findings (site);
