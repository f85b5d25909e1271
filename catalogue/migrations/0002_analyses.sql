-- Analyses frozen under a name: the question, the rows it was asked of and the
-- digest of its answer, so that it can be run again to the same digits.
CREATE TABLE analyses (
  name TEXT PRIMARY KEY CHECK (length(name) BETWEEN 1 AND 80), -- in its address: small letters, digits, hyphens
  title TEXT NOT NULL CHECK (length(title) BETWEEN 1 AND 200), -- as typed
  why TEXT NOT NULL DEFAULT '' CHECK (length(why) <= 2000), -- what it is kept for
  question TEXT NOT NULL CHECK (length(question) <= 65536), -- settings, filter and seed, as the query of its address
  row_count INTEGER NOT NULL CHECK (row_count >= 0), -- rows considered
  rows BLOB NOT NULL, -- the rows considered, JSON in gzip
  digest TEXT NOT NULL CHECK (length(digest) = 64), -- SHA-256 of the answer's JSON document, hexadecimal
  program TEXT NOT NULL, -- version of the program that answered
  revision INTEGER NOT NULL, -- of the catalogue when it was frozen
  account_id INTEGER REFERENCES accounts (id), -- who froze it; NULL = the command line
  created_at TEXT NOT NULL -- when it was frozen
) STRICT, WITHOUT ROWID;
CREATE TRIGGER analyses_stay BEFORE UPDATE ON analyses BEGIN SELECT RAISE (ABORT, 'frozen analyses are never changed'); END;
CREATE TRIGGER analyses_last BEFORE DELETE ON analyses BEGIN SELECT RAISE (ABORT, 'frozen analyses are never deleted'); END;
