-- Every stored centreline measured again with one set of settings, beside what
-- was stored. A recomputation goes on after a stop: a line without a value has
-- not been reached yet.
CREATE TABLE recomputations (
  name TEXT PRIMARY KEY CHECK (length(name) BETWEEN 1 AND 80), -- in its address: small letters, digits, hyphens
  title TEXT NOT NULL CHECK (length(title) BETWEEN 1 AND 200), -- as typed
  why TEXT NOT NULL DEFAULT '' CHECK (length(why) <= 2000), -- what it is for
  settings TEXT NOT NULL CHECK (json_valid(settings)), -- the planform settings of all lines, JSON
  state TEXT NOT NULL CHECK (state IN ('running', 'cancelled', 'done')), -- where it stands
  last_line INTEGER NOT NULL, -- number of the newest line it is about
  revision INTEGER NOT NULL, -- of the catalogue when it was asked for
  program TEXT NOT NULL, -- version of the program that was asked
  account_id INTEGER REFERENCES accounts (id), -- who asked for it; NULL = the command line
  created_at TEXT NOT NULL, -- when it was asked for
  ended_at TEXT NOT NULL DEFAULT '' -- when it was done or cancelled last, '' while it runs
) STRICT, WITHOUT ROWID;
CREATE TRIGGER recomputations_stay BEFORE UPDATE OF name, title, why, settings, last_line, revision, program, account_id, created_at ON recomputations
BEGIN SELECT RAISE (ABORT, 'a recomputation keeps its settings'); END;
CREATE TRIGGER recomputations_done BEFORE UPDATE ON recomputations WHEN old.state = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never changed'); END;
CREATE TRIGGER recomputations_last BEFORE DELETE ON recomputations WHEN old.state = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never deleted'); END;

CREATE TABLE recomputed_values (
  recomputation TEXT NOT NULL REFERENCES recomputations (name) ON DELETE CASCADE, -- what it is part of
  centreline_id INTEGER NOT NULL REFERENCES centrelines (id), -- the line
  system TEXT NOT NULL, -- slug of its system
  measurement TEXT NOT NULL, -- the measurement the line stands for, '' if none
  recorded REAL, -- sinuosity in the record of that measurement, NULL without one
  recorded_kind TEXT NOT NULL, -- and its kind
  old_reach REAL, -- as recorded, where the record is of the reach; the old levels are NULL where unknown
  old_mean REAL, -- mean of the windows stored beside the line; without any, as recorded, and so for the next two
  old_p90 REAL, -- 90th percentile of the stored windows
  old_peak REAL, -- largest of the stored windows
  old_standardised REAL, -- expected largest of k of the stored windows, with the k of this recomputation
  old_windows INTEGER NOT NULL, -- stored windows
  new_reach REAL, -- with the settings of this recomputation, as are all that follow
  new_mean REAL, -- mean of the windows
  new_p90 REAL, -- 90th percentile of the windows
  new_peak REAL, -- largest of the windows
  new_standardised REAL, -- expected largest of k windows, NULL with fewer than k
  new_low REAL, -- least peak under half and double the window and the smoothing
  new_high REAL, -- largest peak under them
  window_m REAL, -- mean length of the windows, m
  sinuosities TEXT NOT NULL CHECK (json_valid(sinuosities)), -- sinuosity of each window, JSON array
  settings TEXT NOT NULL CHECK (json_valid(settings)), -- the settings in full as this line was measured with, JSON
  remark TEXT NOT NULL, -- why it could not be measured, or what to keep in mind
  PRIMARY KEY (recomputation, centreline_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX recomputed_values_line ON recomputed_values (centreline_id);
CREATE TRIGGER recomputed_values_stay BEFORE UPDATE ON recomputed_values BEGIN SELECT RAISE (ABORT, 'recomputed values are never changed'); END;
CREATE TRIGGER recomputed_values_done BEFORE INSERT ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = new.recomputation) IS NOT 'running'
BEGIN SELECT RAISE (ABORT, 'this recomputation does not run'); END;
CREATE TRIGGER recomputed_values_last BEFORE DELETE ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = old.recomputation) = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never deleted'); END;
