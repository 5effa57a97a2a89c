-- What a site wants to be told and how; the secret that signs its webhook stands apart from what is read back.
CREATE TABLE alert_settings (
  site INTEGER PRIMARY KEY REFERENCES site (num) ON DELETE CASCADE,
  body TEXT NOT NULL,
  webhook_secret TEXT,
  since INTEGER NOT NULL,
  updated_at INTEGER NOT NULL,
  updated_by TEXT NOT NULL
) STRICT;

-- Something that is worth telling, from when it was noticed until it was over.
CREATE TABLE matter (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  id TEXT NOT NULL UNIQUE,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  key TEXT NOT NULL,
  kind TEXT NOT NULL,
  opened_at INTEGER NOT NULL,
  closed_at INTEGER,
  text TEXT NOT NULL,
  figures TEXT NOT NULL
) STRICT;
CREATE UNIQUE INDEX matter_open ON matter (site, key) WHERE closed_at IS NULL;
CREATE INDEX matter_site ON matter (site, num);

-- The outbox: written in the transaction that opens the matters it tells.
CREATE TABLE alert_message (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  id TEXT NOT NULL UNIQUE,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  kind TEXT NOT NULL,
  created_at INTEGER NOT NULL
) STRICT;
CREATE INDEX alert_message_site ON alert_message (site, num);

CREATE TABLE alert_message_matter (
  message INTEGER NOT NULL REFERENCES alert_message (num) ON DELETE CASCADE,
  matter INTEGER NOT NULL REFERENCES matter (num) ON DELETE CASCADE,
  PRIMARY KEY (message, matter)
) STRICT, WITHOUT ROWID;
CREATE INDEX alert_message_matter_matter ON alert_message_matter (matter);

CREATE TABLE alert_delivery (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  message INTEGER NOT NULL REFERENCES alert_message (num) ON DELETE CASCADE,
  way TEXT NOT NULL,
  target TEXT NOT NULL,
  state TEXT NOT NULL,
  attempts INTEGER NOT NULL DEFAULT 0,
  next_at INTEGER NOT NULL,
  tried_at INTEGER,
  done_at INTEGER,
  error TEXT
) STRICT;
CREATE INDEX alert_delivery_message ON alert_delivery (message);
CREATE INDEX alert_delivery_waiting ON alert_delivery (num) WHERE state = 'waiting';

-- How long it usually takes until a channel posts again, so that a start of the server need not learn it anew.
CREATE TABLE posting_pace (
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  channel TEXT NOT NULL,
  gap_ms INTEGER NOT NULL,
  PRIMARY KEY (site, channel)
) STRICT, WITHOUT ROWID;

-- Messages of a broker that could not be taken, equal ones counted.
CREATE TABLE refused_message (
  num INTEGER PRIMARY KEY AUTOINCREMENT,
  site INTEGER NOT NULL REFERENCES site (num) ON DELETE CASCADE,
  topic TEXT NOT NULL,
  why TEXT NOT NULL,
  count INTEGER NOT NULL,
  first_at INTEGER NOT NULL,
  last_at INTEGER NOT NULL,
  bytes INTEGER NOT NULL,
  sample TEXT NOT NULL,
  UNIQUE (site, topic, why)
) STRICT;

-- When a message whose times count from now came first: delivered again, it still means that moment.
CREATE TABLE message_arrival (
  digest BLOB PRIMARY KEY,
  at INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
