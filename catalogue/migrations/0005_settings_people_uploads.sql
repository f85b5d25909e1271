-- What a keeper chose for this catalogue; a setting without a row has the
-- program's default. Each change is a revision of the record setting:NAME, so
-- that it has a date, a person and a reason, and changes the catalogue's
-- revision.
CREATE TABLE settings (
  name TEXT PRIMARY KEY CHECK (length(name) BETWEEN 1 AND 64), -- as in the settings file
  value TEXT NOT NULL CHECK (json_valid(value) AND length(value) <= 200000) -- its value, JSON
) STRICT, WITHOUT ROWID;

-- The settings that a frozen analysis was answered with: run again, it uses
-- these, not those of today.
CREATE TABLE analysis_settings (
  analysis TEXT PRIMARY KEY REFERENCES analyses (name), -- the analysis
  settings TEXT NOT NULL CHECK (json_valid(settings)) -- the settings file of that day, JSON
) STRICT, WITHOUT ROWID;
CREATE TRIGGER analysis_settings_stay BEFORE UPDATE ON analysis_settings BEGIN SELECT RAISE (ABORT, 'the settings of an analysis are never changed'); END;
CREATE TRIGGER analysis_settings_last BEFORE DELETE ON analysis_settings BEGIN SELECT RAISE (ABORT, 'the settings of an analysis are never deleted'); END;

-- And those of a release: pages that show the release use them.
CREATE TABLE release_settings (
  release_id INTEGER PRIMARY KEY REFERENCES releases (id), -- the release
  settings TEXT NOT NULL CHECK (json_valid(settings)) -- the settings file of that day, JSON
) STRICT;
CREATE TRIGGER release_settings_stay BEFORE UPDATE ON release_settings BEGIN SELECT RAISE (ABORT, 'the settings of a release are never changed'); END;
CREATE TRIGGER release_settings_last BEFORE DELETE ON release_settings BEGIN SELECT RAISE (ABORT, 'the settings of a release are never deleted'); END;

-- One-time links that make an account of a role. The row stays when the link
-- is used, so that who invited whom can be read.
CREATE TABLE invitations (
  id INTEGER PRIMARY KEY, -- internal number
  token_hash BLOB NOT NULL UNIQUE, -- SHA-256 of the token in the address
  role TEXT NOT NULL CHECK (role IN ('contributor', 'curator', 'keeper')), -- of the account it makes
  note TEXT NOT NULL DEFAULT '' CHECK (length(note) <= 200), -- for whom it is, in the keeper's words
  invited_by INTEGER REFERENCES accounts (id), -- who made it, NULL for the command line
  created_at TEXT NOT NULL, -- when it was made
  expires_at TEXT NOT NULL, -- when it ends unused
  ended_at TEXT NOT NULL DEFAULT '', -- when it was used or taken back, '' while it is open
  account_id INTEGER REFERENCES accounts (id) -- the account made with it, NULL if none
) STRICT;

-- People who registered by themselves. Until one is let in, the account can
-- sign in and keep drafts, and sends nothing.
CREATE TABLE registrations (
  account_id INTEGER PRIMARY KEY REFERENCES accounts (id), -- the account
  about TEXT NOT NULL DEFAULT '' CHECK (length(about) <= 2000), -- who the person is, in their own words
  state TEXT NOT NULL DEFAULT 'waiting' CHECK (state IN ('waiting', 'approved', 'refused')), -- what was decided
  decided_by INTEGER REFERENCES accounts (id), -- who decided, NULL while it waits
  decided_at TEXT NOT NULL DEFAULT '', -- when, '' while it waits
  why TEXT NOT NULL DEFAULT '' CHECK (length(why) <= 2000) -- the reason given
) STRICT;
CREATE INDEX registrations_state ON registrations (state);

-- Files on their way to review: sent, matched, checked row by row beside the
-- requests, then sent on as one batch or dropped.
CREATE TABLE uploads (
  id INTEGER PRIMARY KEY, -- internal number
  account_id INTEGER NOT NULL REFERENCES accounts (id), -- who sent it
  name TEXT NOT NULL CHECK (length(name) BETWEEN 1 AND 200), -- of the file
  bytes INTEGER NOT NULL CHECK (bytes >= 0), -- its length
  state TEXT NOT NULL CHECK (state IN ('matching', 'checking', 'checked', 'sent', 'failed')), -- how far it has come
  why TEXT NOT NULL DEFAULT '' CHECK (length(why) <= 2000), -- what the file is, in the sender's words
  reading TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(reading)), -- how it is read: encoding, separator, numbers, columns, licence, JSON
  seen TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(seen)), -- what a first look at it found, JSON
  rows_read INTEGER NOT NULL DEFAULT 0, -- rows checked so far
  bytes_read INTEGER NOT NULL DEFAULT 0, -- bytes read so far
  report TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(report)), -- counts of the check, JSON
  batch_id INTEGER REFERENCES batches (id), -- the batch it became, NULL before
  created_at TEXT NOT NULL, -- when it arrived
  updated_at TEXT NOT NULL -- when something about it last changed
) STRICT;
CREATE INDEX uploads_account ON uploads (account_id, id);

-- The file itself, in pieces, until it is sent on or dropped.
CREATE TABLE upload_pieces (
  upload_id INTEGER NOT NULL REFERENCES uploads (id) ON DELETE CASCADE, -- the file
  n INTEGER NOT NULL, -- order of the piece, from 0
  bytes BLOB NOT NULL, -- as sent
  PRIMARY KEY (upload_id, n)
) STRICT;

-- Rows that passed the check, as the submissions they will become.
CREATE TABLE upload_rows (
  upload_id INTEGER NOT NULL REFERENCES uploads (id) ON DELETE CASCADE, -- the file
  line INTEGER NOT NULL, -- its line
  measurement TEXT NOT NULL, -- public id of the record it changes; '' when new
  proposed TEXT NOT NULL CHECK (json_valid(proposed)), -- the row as proposed: column -> text, JSON
  base TEXT NOT NULL CHECK (base = '' OR json_valid(base)), -- the accepted row it was compared with, JSON; '' when new
  base_revision INTEGER NOT NULL, -- revision of that row
  fingerprint BLOB NOT NULL, -- SHA-256 of the proposed row
  PRIMARY KEY (upload_id, line)
) STRICT, WITHOUT ROWID;

-- What the check had to say.
CREATE TABLE upload_remarks (
  upload_id INTEGER NOT NULL REFERENCES uploads (id) ON DELETE CASCADE, -- the file
  n INTEGER NOT NULL, -- order of the remark
  kind TEXT NOT NULL CHECK (kind IN ('problem', 'warning', 'conversion')), -- refused, odd, or read in another unit
  line INTEGER NOT NULL, -- of the file, 0 when it is about no line
  column_name TEXT NOT NULL, -- as the header names it
  value TEXT NOT NULL, -- of the cell, shortened
  message TEXT NOT NULL, -- what is the matter
  expected TEXT NOT NULL, -- what would do
  PRIMARY KEY (upload_id, n)
) STRICT, WITHOUT ROWID;
CREATE INDEX upload_remarks_kind ON upload_remarks (upload_id, kind, n);
