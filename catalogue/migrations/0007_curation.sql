-- Curation: records taken out of the catalogue and put back, systems that are
-- one, proposals other than edits, and sample checks of imported files.

-- A measurement that was withdrawn. It stands here instead of in measurements,
-- so that no question meets it by mistake; its numbers are never given again.
CREATE TABLE withdrawn_measurements (
  id INTEGER PRIMARY KEY, -- the number it had in measurements
  measurement TEXT NOT NULL UNIQUE, -- its public id, never given to another
  system_id INTEGER NOT NULL REFERENCES systems (id), -- the system it belonged to
  record TEXT NOT NULL CHECK (json_valid(record)), -- as last accepted: column -> text, JSON
  instead TEXT NOT NULL DEFAULT '', -- public id of the measurement that stands for it, '' if none
  revision INTEGER NOT NULL, -- the revision that withdrew it
  created_at TEXT NOT NULL, -- when it was first accepted
  withdrawn_at TEXT NOT NULL -- when it was withdrawn
) STRICT;
CREATE INDEX withdrawn_measurements_system ON withdrawn_measurements (system_id);

-- A line that went with its measurement.
CREATE TABLE withdrawn_centrelines (
  id INTEGER PRIMARY KEY, -- the number it had in centrelines
  system_id INTEGER NOT NULL REFERENCES systems (id), -- the system it runs along
  measurement_id INTEGER, -- number of its measurement, NULL if it was the system's
  line TEXT NOT NULL CHECK (json_valid(line)), -- GeoJSON LineString, as in centrelines
  settings TEXT NOT NULL, -- planform settings, as in centrelines
  sinuosities TEXT NOT NULL, -- sinuosity of each window, as in centrelines
  created_at TEXT NOT NULL -- when it was stored
) STRICT;
CREATE INDEX withdrawn_centrelines_measurement ON withdrawn_centrelines (measurement_id);

-- A system that turned out to be another one. Its row stays, without
-- measurements, so that its slug is never given again and answers with the other.
CREATE TABLE merged_systems (
  system_id INTEGER PRIMARY KEY REFERENCES systems (id), -- the system that is no longer its own
  into_id INTEGER NOT NULL REFERENCES systems (id) CHECK (into_id <> system_id), -- the system it is part of now
  revision INTEGER NOT NULL, -- the revision that merged it
  merged_at TEXT NOT NULL -- when
) STRICT;
CREATE INDEX merged_systems_into ON merged_systems (into_id);

-- What a contribution asks for, beside an edit or a new record.
ALTER TABLE submissions ADD COLUMN act TEXT NOT NULL DEFAULT 'edit' CHECK (act IN ('edit', 'withdraw', 'restore')) /* put a record, take one out, or put one back */;
ALTER TABLE submissions ADD COLUMN instead TEXT NOT NULL DEFAULT '' /* of a withdrawal: the measurement that stands for it, '' if none */;

-- The rows of an imported file that a curator read before accepting all of it.
CREATE TABLE samples (
  id INTEGER PRIMARY KEY, -- internal number
  batch_id INTEGER NOT NULL REFERENCES batches (id), -- the file
  account_id INTEGER REFERENCES accounts (id), -- who read them, NULL for the command line
  at TEXT NOT NULL, -- when the file was accepted
  seed INTEGER NOT NULL, -- of the drawing
  total INTEGER NOT NULL CHECK (total > 0), -- rows that waited, from which they were drawn
  drawn TEXT NOT NULL CHECK (json_valid(drawn)) -- numbers of the submissions drawn and read, JSON array
) STRICT;
CREATE TRIGGER samples_stay BEFORE UPDATE ON samples BEGIN SELECT RAISE (ABORT, 'what was read is never changed'); END;
CREATE TRIGGER samples_last BEFORE DELETE ON samples BEGIN SELECT RAISE (ABORT, 'what was read is never deleted'); END;
ALTER TABLE change_sets ADD COLUMN sample_id INTEGER REFERENCES samples (id) /* the sample check it was accepted with, NULL if none */;
ALTER TABLE change_sets ADD COLUMN undoes INTEGER REFERENCES change_sets (id) /* the change set it takes back, NULL if none */;
CREATE INDEX change_sets_submission ON change_sets (submission_id) WHERE submission_id IS NOT NULL;
CREATE INDEX change_sets_undoes ON change_sets (undoes) WHERE undoes IS NOT NULL;

-- Recomputed values outlive their line: the number of a line that is withdrawn
-- later must not keep it from going.
CREATE TABLE recomputed_before AS SELECT * FROM recomputed_values;
DROP TABLE recomputed_values;
CREATE TABLE recomputed_values (
  recomputation TEXT NOT NULL REFERENCES recomputations (name) ON DELETE CASCADE, -- what it is part of
  centreline_id INTEGER NOT NULL, -- number of the line, in centrelines or withdrawn_centrelines
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
INSERT INTO recomputed_values SELECT * FROM recomputed_before;
DROP TABLE recomputed_before;
CREATE INDEX recomputed_values_line ON recomputed_values (centreline_id);
CREATE TRIGGER recomputed_values_stay BEFORE UPDATE ON recomputed_values BEGIN SELECT RAISE (ABORT, 'recomputed values are never changed'); END;
CREATE TRIGGER recomputed_values_done BEFORE INSERT ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = new.recomputation) IS NOT 'running'
BEGIN SELECT RAISE (ABORT, 'this recomputation does not run'); END;
CREATE TRIGGER recomputed_values_last BEFORE DELETE ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = old.recomputation) = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never deleted'); END;
