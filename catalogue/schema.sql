-- The whole schema as the migrations leave it. Generated: go test ./catalogue -run Schema -update

CREATE TABLE accounts (
  id INTEGER PRIMARY KEY, -- internal number
  name TEXT NOT NULL UNIQUE COLLATE NOCASE CHECK (length(name) BETWEEN 1 AND 64), -- sign-in name
  credit TEXT NOT NULL CHECK (length(credit) BETWEEN 1 AND 200), -- public credit line
  role TEXT NOT NULL CHECK (role IN ('contributor', 'curator', 'keeper')), -- what the person may do; each includes the one before
  orcid TEXT NOT NULL DEFAULT '' CHECK (length(orcid) IN (0, 19)), -- 0000-0000-0000-000X, '' if not given
  password_hash TEXT NOT NULL, -- argon2id in PHC form
  disabled INTEGER NOT NULL DEFAULT 0 CHECK (disabled IN (0, 1)), -- 1 = may not sign in
  created_at TEXT NOT NULL -- when the account was made
) STRICT;

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

CREATE TRIGGER analyses_last BEFORE DELETE ON analyses BEGIN SELECT RAISE (ABORT, 'frozen analyses are never deleted'); END;

CREATE TRIGGER analyses_stay BEFORE UPDATE ON analyses BEGIN SELECT RAISE (ABORT, 'frozen analyses are never changed'); END;

CREATE TABLE analysis_settings (
  analysis TEXT PRIMARY KEY REFERENCES analyses (name), -- the analysis
  settings TEXT NOT NULL CHECK (json_valid(settings)) -- the settings file of that day, JSON
) STRICT, WITHOUT ROWID;

CREATE TRIGGER analysis_settings_last BEFORE DELETE ON analysis_settings BEGIN SELECT RAISE (ABORT, 'the settings of an analysis are never deleted'); END;

CREATE TRIGGER analysis_settings_stay BEFORE UPDATE ON analysis_settings BEGIN SELECT RAISE (ABORT, 'the settings of an analysis are never changed'); END;

CREATE TABLE audiences (
  submission_id INTEGER PRIMARY KEY REFERENCES submissions (id), -- the contribution; without an entry everyone sees it once it is accepted
  kind TEXT NOT NULL CHECK (kind IN ('later', 'private')), -- everyone, but later; or nobody but the people named
  until TEXT NOT NULL DEFAULT '' CHECK (until = '' OR until = date(until)), -- day, UTC, from which everyone sees it; '' = until it is said to be published
  coarse INTEGER NOT NULL DEFAULT 0 CHECK (coarse IN (0, 1)), -- 1 = others see it meanwhile with its place rounded
  people TEXT NOT NULL DEFAULT '' CHECK (length(people) <= 2000) -- sign-in names of those who see it beside its owner, as typed
) STRICT;

CREATE TABLE batches (
  id INTEGER PRIMARY KEY, -- internal number
  account_id INTEGER REFERENCES accounts (id), -- who sent it, NULL for the command line
  why TEXT NOT NULL DEFAULT '', -- what the file is, in the sender's words
  created_at TEXT NOT NULL -- when it arrived
) STRICT;

CREATE TABLE catalogue_identity (
  only INTEGER PRIMARY KEY CHECK (only = 1), -- there is one
  uuid TEXT NOT NULL CHECK (length(uuid) = 36) -- RFC 9562, version 4
) STRICT;

CREATE TRIGGER catalogue_identity_last BEFORE DELETE ON catalogue_identity BEGIN SELECT RAISE (ABORT, 'a catalogue keeps its number'); END;

CREATE TRIGGER catalogue_identity_stays BEFORE UPDATE ON catalogue_identity BEGIN SELECT RAISE (ABORT, 'a catalogue keeps its number'); END;

CREATE TABLE centrelines (
  id INTEGER PRIMARY KEY, -- internal number
  system_id INTEGER NOT NULL REFERENCES systems (id), -- the system the line runs along
  measurement_id INTEGER REFERENCES measurements (id), -- the measurement made from it, NULL if none
  line TEXT NOT NULL CHECK (json_valid(line)), -- GeoJSON LineString, upstream to downstream; third coordinate elevation in m, up positive
  settings TEXT NOT NULL DEFAULT '' CHECK (settings = '' OR json_valid(settings)), -- planform settings the numbers were made with, JSON
  sinuosities TEXT NOT NULL DEFAULT '[]' CHECK (json_valid(sinuosities)), -- sinuosity of each window, JSON array
  created_at TEXT NOT NULL -- when it was stored
) STRICT;

CREATE INDEX centrelines_measurement ON centrelines (measurement_id);

CREATE INDEX centrelines_system ON centrelines (system_id);

CREATE TRIGGER line_places_delete AFTER DELETE ON centrelines BEGIN
  DELETE FROM line_places WHERE id = old.id;
END;

CREATE TRIGGER line_places_insert AFTER INSERT ON centrelines BEGIN
  INSERT INTO line_places SELECT new.id, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN -180 ELSE min(p.value ->> 0) END, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN 180 ELSE max(p.value ->> 0) END,
    min(p.value ->> 1), max(p.value ->> 1) FROM json_each(new.line, '$.coordinates') p;
END;

CREATE TRIGGER line_places_update AFTER UPDATE OF line ON centrelines BEGIN
  DELETE FROM line_places WHERE id = old.id;
  INSERT INTO line_places SELECT new.id, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN -180 ELSE min(p.value ->> 0) END, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN 180 ELSE max(p.value ->> 0) END,
    min(p.value ->> 1), max(p.value ->> 1) FROM json_each(new.line, '$.coordinates') p;
END;

CREATE TABLE change_sets (
  id INTEGER PRIMARY KEY, -- internal number
  at TEXT NOT NULL, -- when it was accepted
  account_id INTEGER REFERENCES accounts (id), -- who accepted it, NULL for the command line
  why TEXT NOT NULL DEFAULT '', -- the reason given
  submission_id INTEGER REFERENCES submissions (id), -- what it came from, NULL for a direct import
  author_id INTEGER REFERENCES accounts (id) -- whose contribution it was, NULL if the same or unknown
, sample_id INTEGER REFERENCES samples (id) /* the sample check it was accepted with, NULL if none */, undoes INTEGER REFERENCES change_sets (id) /* the change set it takes back, NULL if none */) STRICT;

CREATE INDEX change_sets_submission ON change_sets (submission_id) WHERE submission_id IS NOT NULL;

CREATE INDEX change_sets_undoes ON change_sets (undoes) WHERE undoes IS NOT NULL;

CREATE TABLE counters (
  name TEXT PRIMARY KEY, -- what is counted
  value INTEGER NOT NULL -- last number given out
) STRICT, WITHOUT ROWID;

CREATE TABLE frozen_centrelines (
  version INTEGER PRIMARY KEY, -- internal number of this state of the line
  id INTEGER NOT NULL, -- its number in centrelines
  line TEXT NOT NULL, -- GeoJSON LineString, upstream to downstream; third coordinate elevation in m, up positive
  settings TEXT NOT NULL, -- planform settings the numbers were made with, JSON
  sinuosities TEXT NOT NULL, -- sinuosity of each window, JSON array
  created_at TEXT NOT NULL -- when it was stored
) STRICT;

CREATE INDEX frozen_centrelines_id ON frozen_centrelines (id);

CREATE TRIGGER frozen_centrelines_last BEFORE DELETE ON frozen_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER frozen_centrelines_stay BEFORE UPDATE ON frozen_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE frozen_measurements (
  version INTEGER PRIMARY KEY, -- internal number of this state of the measurement
  id INTEGER NOT NULL, -- its number in measurements
  source_id INTEGER NOT NULL, -- number of its source in sources
  system_version INTEGER NOT NULL REFERENCES frozen_systems (version), -- the state of its system
  source_version INTEGER NOT NULL REFERENCES frozen_sources (version), -- the state of its source
  measurement TEXT NOT NULL, -- stable public id, as m000123
  setting TEXT NOT NULL, -- Physiographic setting of the measured reach.
  burial TEXT NOT NULL, -- On today's sea floor, buried, or in outcrop.
  activity TEXT NOT NULL, -- Whether flows use it today.
  confinement TEXT NOT NULL, -- What keeps the channel in place.
  aggradation TEXT NOT NULL, -- Whether the channel floor was rising or cutting down.
  structural_deflection TEXT NOT NULL, -- Whether structures steer the course.
  grain TEXT NOT NULL, -- Dominant grain size class.
  latitude_deg REAL NOT NULL, -- degrees; Latitude of the measured reach, WGS84, north positive.
  longitude_deg REAL NOT NULL, -- degrees; Longitude of the measured reach, WGS84, east positive.
  start_latitude_deg REAL, -- degrees; Latitude of the upstream end of the reach.
  start_longitude_deg REAL, -- degrees; Longitude of the upstream end of the reach.
  end_latitude_deg REAL, -- degrees; Latitude of the downstream end of the reach.
  end_longitude_deg REAL, -- degrees; Longitude of the downstream end of the reach.
  water_depth_m REAL, -- m; Water depth over the reach, positive down.
  age_ma REAL, -- Ma; Age of the channel; empty = today's sea floor.
  age_min_ma REAL, -- Ma; Youngest age allowed by the data.
  age_max_ma REAL, -- Ma; Oldest age allowed by the data.
  unit TEXT NOT NULL, -- Chronostratigraphic unit, as Maastrichtian.
  age_basis TEXT NOT NULL, -- What the age rests on: biostratigraphy, seismic tie, dating.
  palaeolatitude_deg REAL, -- degrees; Latitude at the time of deposition, north positive.
  palaeolatitude_se_deg REAL, -- degrees; One standard error of the palaeolatitude.
  palaeolatitude_method TEXT NOT NULL, -- How the palaeolatitude was found; empty when there is none.
  plate TEXT NOT NULL, -- Plate whose pole or rotation was used.
  pole_table TEXT NOT NULL, -- Table of poles or rotations that was used.
  reach TEXT NOT NULL, -- Name of the measured reach.
  measured_line TEXT NOT NULL, -- Which line was measured: levee crests read straighter than thalwegs.
  valley_line TEXT NOT NULL, -- How the valley length was taken.
  sinuosity REAL NOT NULL, -- Channel length over valley length, 1 or more.
  sinuosity_kind TEXT NOT NULL, -- Peak, 90th percentile or mean of windows, one bend, or the whole reach.
  sinuosity_se REAL, -- One standard error of the sinuosity.
  window_m REAL, -- m; Length of the window the sinuosity was taken in.
  windows REAL, -- Number of windows the value was picked from: a peak grows with it.
  vertex_spacing_m REAL, -- m; Spacing of the vertices of the measured line.
  wavelength_m REAL, -- m; Meander wavelength, two bends.
  amplitude_m REAL, -- m; Meander amplitude.
  radius_m REAL, -- m; Radius of curvature of the bends.
  reach_length_m REAL, -- m; Length of the measured reach along the channel.
  valley_slope REAL, -- m/m; Slope of the valley floor over the same reach, down positive.
  valley_slope_se REAL, -- m/m; One standard error of the valley slope.
  slope_kind TEXT NOT NULL, -- Slope of the valley beside the channel, or of the region.
  slope_state TEXT NOT NULL, -- Slope as it is today, or restored to the time of deposition.
  channel_slope REAL, -- m/m; Slope along the channel; not used as a predictor.
  channel_width_m REAL, -- m; Bankfull width, levee crest to levee crest.
  channel_depth_m REAL, -- m; Bankfull depth, levee crest to thalweg.
  levee_left_m REAL, -- m; Height of the left levee above the channel floor, looking downstream.
  levee_right_m REAL, -- m; Height of the right levee above the channel floor, looking downstream.
  net_to_gross REAL, -- Sand thickness over total thickness, 0 to 1.
  stacking TEXT NOT NULL, -- How channel fills stack.
  lateral_accretion TEXT NOT NULL, -- Whether lateral accretion packages are seen.
  survey TEXT NOT NULL, -- What the channel was imaged with.
  extraction TEXT NOT NULL, -- What the number was taken from.
  pixel_m REAL, -- m; Ground size of a pixel or bin of the image.
  grade TEXT NOT NULL, -- Remeasured here, surveyed by the source, traced from a figure, or quoted with the method unknown.
  source_locator TEXT NOT NULL, -- Page, figure or table in the source.
  slope_source TEXT NOT NULL, -- Source of the slope, when it is another paper.
  size_source TEXT NOT NULL, -- Source of width and depth, when it is another paper.
  contributor TEXT NOT NULL, -- Credit line of who contributed the row.
  licence TEXT NOT NULL, -- Licence of the contribution, as CC BY 4.0 or CC0.
  notes TEXT NOT NULL, -- Anything else.
  revision INTEGER NOT NULL, -- id of the latest revision of this row
  created_at TEXT NOT NULL, -- when it was accepted
  updated_at TEXT NOT NULL, -- when one of these columns last changed
  grade_rank INTEGER GENERATED ALWAYS AS (CASE grade WHEN 'remeasured' THEN 0 WHEN 'surveyed' THEN 1 WHEN 'traced' THEN 2 ELSE 3 END) VIRTUAL -- order of grades, best first
) STRICT;

CREATE INDEX frozen_measurements_id ON frozen_measurements (id);

CREATE INDEX frozen_measurements_public ON frozen_measurements (measurement);

CREATE TRIGGER frozen_measurements_last BEFORE DELETE ON frozen_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER frozen_measurements_stay BEFORE UPDATE ON frozen_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TRIGGER frozen_search_insert AFTER INSERT ON frozen_measurements BEGIN
  INSERT INTO frozen_search (rowid, names, places, reach, source, notes)
    SELECT new.version, s.slug || ' ' || s.system_name || ' ' || s.other_names, s.parent_deposit || ' ' || s.basin,
      new.measurement || ' ' || new.reach || ' ' || new.unit || ' ' || new.plate, c.citation || ' ' || c.doi,
      new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes
    FROM frozen_systems s, frozen_sources c WHERE s.version = new.system_version AND c.version = new.source_version;
END;

CREATE VIRTUAL TABLE frozen_search USING fts5 (names, places, reach, source, notes, content = '', tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3');

CREATE TABLE frozen_sources (
  version INTEGER PRIMARY KEY, -- internal number of this state of the source
  id INTEGER NOT NULL, -- its number in sources
  citation TEXT NOT NULL, -- the paper or survey, as cited
  doi TEXT NOT NULL -- its DOI without a resolver, '' if none
) STRICT;

CREATE INDEX frozen_sources_id ON frozen_sources (id);

CREATE TRIGGER frozen_sources_last BEFORE DELETE ON frozen_sources BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER frozen_sources_stay BEFORE UPDATE ON frozen_sources BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE frozen_systems (
  version INTEGER PRIMARY KEY, -- internal number of this state of the system
  id INTEGER NOT NULL, -- its number in systems
  slug TEXT NOT NULL, -- stable short name, used in addresses
  system_name TEXT NOT NULL, -- Name of the channel system.
  other_names TEXT NOT NULL, -- Other names in use, separated by semicolons.
  parent_deposit TEXT NOT NULL, -- Fan, drift or other deposit the system is part of: systems of one deposit are not independent.
  basin TEXT NOT NULL, -- Ocean or sedimentary basin.
  kind TEXT NOT NULL, -- Where the channel was made.
  margin TEXT NOT NULL, -- Tectonic kind of the margin.
  feeder TEXT NOT NULL, -- What fed the system when it was active.
  feeder_geometry TEXT NOT NULL, -- One point, several, or a line source.
  large_river TEXT NOT NULL, -- Whether a large river feeds it, as the source says.
  catchment_area_km2 REAL, -- km2; Area of the river catchment behind it.
  catchment_latitude_deg REAL, -- degrees; Latitude of the middle of the catchment, north positive.
  revision INTEGER NOT NULL, -- id of the latest revision of these columns
  created_at TEXT NOT NULL, -- when it was accepted
  updated_at TEXT NOT NULL -- when one of these columns last changed
) STRICT;

CREATE INDEX frozen_systems_id ON frozen_systems (id);

CREATE INDEX frozen_systems_slug ON frozen_systems (slug);

CREATE TRIGGER frozen_systems_last BEFORE DELETE ON frozen_systems BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER frozen_systems_stay BEFORE UPDATE ON frozen_systems BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE hidden_row_people (
  row_id INTEGER NOT NULL REFERENCES hidden_rows (id) ON DELETE CASCADE, -- the row
  account_id INTEGER NOT NULL REFERENCES accounts (id), -- who sees it beside its owner
  PRIMARY KEY (account_id, row_id)
) STRICT, WITHOUT ROWID;

CREATE INDEX hidden_row_people_row ON hidden_row_people (row_id);

CREATE TRIGGER hidden_row_people_delete AFTER DELETE ON hidden_row_people BEGIN UPDATE counters SET value = value + 1 WHERE name = 'hidden'; END;

CREATE TRIGGER hidden_row_people_insert AFTER INSERT ON hidden_row_people BEGIN UPDATE counters SET value = value + 1 WHERE name = 'hidden'; END;

CREATE TABLE hidden_rows (
  id INTEGER PRIMARY KEY REFERENCES submissions (id), -- the contribution it comes from
  account_id INTEGER NOT NULL REFERENCES accounts (id), -- whose it is
  hidden TEXT NOT NULL CHECK (hidden IN ('private', 'embargo')), -- not reviewed and of its owner alone; or accepted and waiting
  until TEXT NOT NULL DEFAULT '' CHECK (until = '' OR until = date(until)), -- day, UTC, on which an embargo ends; '' = when it is said to be published
  stands_for TEXT NOT NULL DEFAULT '', -- the measurement that shows it to others with its place rounded, '' if none
  system_key INTEGER NOT NULL, -- number of the first hidden row of the same system and owner
  slug TEXT NOT NULL, -- its system for those who see it: that of the catalogue, or one of its own
  system_name TEXT NOT NULL COLLATE NOCASE, -- Name of the channel system.
  other_names TEXT NOT NULL DEFAULT '', -- Other names in use, separated by semicolons.
  parent_deposit TEXT NOT NULL DEFAULT '', -- Fan, drift or other deposit the system is part of: systems of one deposit are not independent.
  basin TEXT NOT NULL DEFAULT '', -- Ocean or sedimentary basin.
  kind TEXT NOT NULL DEFAULT '', -- Where the channel was made.
  margin TEXT NOT NULL DEFAULT '', -- Tectonic kind of the margin.
  feeder TEXT NOT NULL DEFAULT '', -- What fed the system when it was active.
  feeder_geometry TEXT NOT NULL DEFAULT '', -- One point, several, or a line source.
  large_river TEXT NOT NULL DEFAULT '', -- Whether a large river feeds it, as the source says.
  catchment_area_km2 REAL, -- km2; Area of the river catchment behind it.
  catchment_latitude_deg REAL, -- degrees; Latitude of the middle of the catchment, north positive.
  source TEXT NOT NULL, -- the paper or survey, as cited
  source_doi TEXT NOT NULL DEFAULT '', -- its DOI without a resolver, '' if none
  setting TEXT NOT NULL DEFAULT '', -- Physiographic setting of the measured reach.
  burial TEXT NOT NULL DEFAULT '', -- On today's sea floor, buried, or in outcrop.
  activity TEXT NOT NULL DEFAULT '', -- Whether flows use it today.
  confinement TEXT NOT NULL DEFAULT '', -- What keeps the channel in place.
  aggradation TEXT NOT NULL DEFAULT '', -- Whether the channel floor was rising or cutting down.
  structural_deflection TEXT NOT NULL DEFAULT '', -- Whether structures steer the course.
  grain TEXT NOT NULL DEFAULT '', -- Dominant grain size class.
  latitude_deg REAL, -- degrees; Latitude of the measured reach, WGS84, north positive.
  longitude_deg REAL, -- degrees; Longitude of the measured reach, WGS84, east positive.
  start_latitude_deg REAL, -- degrees; Latitude of the upstream end of the reach.
  start_longitude_deg REAL, -- degrees; Longitude of the upstream end of the reach.
  end_latitude_deg REAL, -- degrees; Latitude of the downstream end of the reach.
  end_longitude_deg REAL, -- degrees; Longitude of the downstream end of the reach.
  water_depth_m REAL, -- m; Water depth over the reach, positive down.
  age_ma REAL, -- Ma; Age of the channel; empty = today's sea floor.
  age_min_ma REAL, -- Ma; Youngest age allowed by the data.
  age_max_ma REAL, -- Ma; Oldest age allowed by the data.
  unit TEXT NOT NULL DEFAULT '', -- Chronostratigraphic unit, as Maastrichtian.
  age_basis TEXT NOT NULL DEFAULT '', -- What the age rests on: biostratigraphy, seismic tie, dating.
  palaeolatitude_deg REAL, -- degrees; Latitude at the time of deposition, north positive.
  palaeolatitude_se_deg REAL, -- degrees; One standard error of the palaeolatitude.
  palaeolatitude_method TEXT NOT NULL DEFAULT '', -- How the palaeolatitude was found; empty when there is none.
  plate TEXT NOT NULL DEFAULT '', -- Plate whose pole or rotation was used.
  pole_table TEXT NOT NULL DEFAULT '', -- Table of poles or rotations that was used.
  reach TEXT NOT NULL DEFAULT '', -- Name of the measured reach.
  measured_line TEXT NOT NULL DEFAULT '', -- Which line was measured: levee crests read straighter than thalwegs.
  valley_line TEXT NOT NULL DEFAULT '', -- How the valley length was taken.
  sinuosity REAL, -- Channel length over valley length, 1 or more.
  sinuosity_kind TEXT NOT NULL DEFAULT '', -- Peak, 90th percentile or mean of windows, one bend, or the whole reach.
  sinuosity_se REAL, -- One standard error of the sinuosity.
  window_m REAL, -- m; Length of the window the sinuosity was taken in.
  windows REAL, -- Number of windows the value was picked from: a peak grows with it.
  vertex_spacing_m REAL, -- m; Spacing of the vertices of the measured line.
  wavelength_m REAL, -- m; Meander wavelength, two bends.
  amplitude_m REAL, -- m; Meander amplitude.
  radius_m REAL, -- m; Radius of curvature of the bends.
  reach_length_m REAL, -- m; Length of the measured reach along the channel.
  valley_slope REAL, -- m/m; Slope of the valley floor over the same reach, down positive.
  valley_slope_se REAL, -- m/m; One standard error of the valley slope.
  slope_kind TEXT NOT NULL DEFAULT '', -- Slope of the valley beside the channel, or of the region.
  slope_state TEXT NOT NULL DEFAULT '', -- Slope as it is today, or restored to the time of deposition.
  channel_slope REAL, -- m/m; Slope along the channel; not used as a predictor.
  channel_width_m REAL, -- m; Bankfull width, levee crest to levee crest.
  channel_depth_m REAL, -- m; Bankfull depth, levee crest to thalweg.
  levee_left_m REAL, -- m; Height of the left levee above the channel floor, looking downstream.
  levee_right_m REAL, -- m; Height of the right levee above the channel floor, looking downstream.
  net_to_gross REAL, -- Sand thickness over total thickness, 0 to 1.
  stacking TEXT NOT NULL DEFAULT '', -- How channel fills stack.
  lateral_accretion TEXT NOT NULL DEFAULT '', -- Whether lateral accretion packages are seen.
  survey TEXT NOT NULL DEFAULT '', -- What the channel was imaged with.
  extraction TEXT NOT NULL DEFAULT '', -- What the number was taken from.
  pixel_m REAL, -- m; Ground size of a pixel or bin of the image.
  grade TEXT NOT NULL DEFAULT '', -- Remeasured here, surveyed by the source, traced from a figure, or quoted with the method unknown.
  source_locator TEXT NOT NULL DEFAULT '', -- Page, figure or table in the source.
  slope_source TEXT NOT NULL DEFAULT '', -- Source of the slope, when it is another paper.
  size_source TEXT NOT NULL DEFAULT '', -- Source of width and depth, when it is another paper.
  contributor TEXT NOT NULL DEFAULT '', -- Credit line of who contributed the row.
  licence TEXT NOT NULL DEFAULT '', -- Licence of the contribution, as CC BY 4.0 or CC0.
  notes TEXT NOT NULL DEFAULT '', -- Anything else.
  grade_rank INTEGER GENERATED ALWAYS AS (CASE grade WHEN 'remeasured' THEN 0 WHEN 'surveyed' THEN 1 WHEN 'traced' THEN 2 ELSE 3 END) VIRTUAL, -- order of grades, best first
  line TEXT NOT NULL DEFAULT '' CHECK (line = '' OR json_valid(line)), -- centreline as GeoJSON LineString, '' if none
  settings TEXT NOT NULL DEFAULT '' CHECK (settings = '' OR json_valid(settings)), -- planform settings of that line, JSON
  sinuosities TEXT NOT NULL DEFAULT '[]' CHECK (json_valid(sinuosities)), -- its window sinuosities, JSON array
  created_at TEXT NOT NULL, -- when it was first kept
  updated_at TEXT NOT NULL -- when it was last kept
) STRICT;

CREATE INDEX hidden_rows_account ON hidden_rows (account_id);

CREATE INDEX hidden_rows_until ON hidden_rows (until) WHERE hidden = 'embargo';

CREATE TRIGGER hidden_rows_delete AFTER DELETE ON hidden_rows BEGIN
  DELETE FROM hidden_search WHERE rowid = old.id;
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;

CREATE TRIGGER hidden_rows_insert AFTER INSERT ON hidden_rows BEGIN
  INSERT INTO hidden_search (rowid, names, places, reach, source, notes) VALUES (new.id, new.slug || ' ' || new.system_name || ' ' || new.other_names, new.parent_deposit || ' ' || new.basin,
    new.reach || ' ' || new.unit || ' ' || new.plate, new.source || ' ' || new.source_doi,
    new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes);
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;

CREATE TRIGGER hidden_rows_update AFTER UPDATE ON hidden_rows BEGIN
  DELETE FROM hidden_search WHERE rowid = old.id;
  INSERT INTO hidden_search (rowid, names, places, reach, source, notes) VALUES (new.id, new.slug || ' ' || new.system_name || ' ' || new.other_names, new.parent_deposit || ' ' || new.basin,
    new.reach || ' ' || new.unit || ' ' || new.plate, new.source || ' ' || new.source_doi,
    new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes);
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;

CREATE VIRTUAL TABLE hidden_search USING fts5(names, places, reach, source, notes, tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3');

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

CREATE VIRTUAL TABLE line_places USING rtree (id, west, east, south, north);

CREATE TABLE measurements (
  id INTEGER PRIMARY KEY, -- internal number
  measurement TEXT NOT NULL UNIQUE CHECK (length(measurement) BETWEEN 1 AND 64 AND measurement NOT GLOB '*[^A-Za-z0-9_.-]*'), -- stable public id, as m000123
  system_id INTEGER NOT NULL REFERENCES systems (id), -- the system it belongs to
  source_id INTEGER NOT NULL REFERENCES sources (id), -- where sinuosity comes from
  setting TEXT NOT NULL CHECK (setting IN ('fan', 'slope', 'rise', 'trench', 'foredeep', 'minibasin', 'deep_ocean', 'non_margin', 'river_valley', 'unknown')), -- Physiographic setting of the measured reach.
  burial TEXT NOT NULL CHECK (burial IN ('seafloor', 'buried', 'outcrop')), -- On today's sea floor, buried, or in outcrop.
  activity TEXT NOT NULL CHECK (activity IN ('active', 'relict', 'unknown')), -- Whether flows use it today.
  confinement TEXT NOT NULL CHECK (confinement IN ('confined', 'levee_confined', 'unconfined', 'unknown')), -- What keeps the channel in place.
  aggradation TEXT NOT NULL CHECK (aggradation IN ('aggrading', 'stable', 'incising', 'unknown')), -- Whether the channel floor was rising or cutting down.
  structural_deflection TEXT NOT NULL CHECK (structural_deflection IN ('yes', 'no', 'unknown')), -- Whether structures steer the course.
  grain TEXT NOT NULL CHECK (grain IN ('mud', 'mud_sand', 'sand', 'gravel', 'unknown')), -- Dominant grain size class.
  latitude_deg REAL NOT NULL CHECK (latitude_deg BETWEEN -90 AND 90), -- degrees; Latitude of the measured reach, WGS84, north positive.
  longitude_deg REAL NOT NULL CHECK (longitude_deg BETWEEN -180 AND 360), -- degrees; Longitude of the measured reach, WGS84, east positive.
  start_latitude_deg REAL CHECK (start_latitude_deg BETWEEN -90 AND 90), -- degrees; Latitude of the upstream end of the reach.
  start_longitude_deg REAL CHECK (start_longitude_deg BETWEEN -180 AND 360), -- degrees; Longitude of the upstream end of the reach.
  end_latitude_deg REAL CHECK (end_latitude_deg BETWEEN -90 AND 90), -- degrees; Latitude of the downstream end of the reach.
  end_longitude_deg REAL CHECK (end_longitude_deg BETWEEN -180 AND 360), -- degrees; Longitude of the downstream end of the reach.
  water_depth_m REAL CHECK (water_depth_m BETWEEN -1e12 AND 1e12), -- m; Water depth over the reach, positive down.
  age_ma REAL CHECK (age_ma BETWEEN 0 AND 4600), -- Ma; Age of the channel; empty = today's sea floor.
  age_min_ma REAL CHECK (age_min_ma BETWEEN 0 AND 4600), -- Ma; Youngest age allowed by the data.
  age_max_ma REAL CHECK (age_max_ma BETWEEN 0 AND 4600), -- Ma; Oldest age allowed by the data.
  unit TEXT NOT NULL DEFAULT '' CHECK (length(unit) <= 100), -- Chronostratigraphic unit, as Maastrichtian.
  age_basis TEXT NOT NULL DEFAULT '' CHECK (length(age_basis) <= 500), -- What the age rests on: biostratigraphy, seismic tie, dating.
  palaeolatitude_deg REAL CHECK (palaeolatitude_deg BETWEEN -90 AND 90), -- degrees; Latitude at the time of deposition, north positive.
  palaeolatitude_se_deg REAL CHECK (palaeolatitude_se_deg BETWEEN 0 AND 180), -- degrees; One standard error of the palaeolatitude.
  palaeolatitude_method TEXT NOT NULL CHECK (palaeolatitude_method IN ('', 'given', 'inclination', 'pole', 'rotation')), -- How the palaeolatitude was found; empty when there is none.
  plate TEXT NOT NULL DEFAULT '' CHECK (length(plate) <= 100), -- Plate whose pole or rotation was used.
  pole_table TEXT NOT NULL DEFAULT '' CHECK (length(pole_table) <= 200), -- Table of poles or rotations that was used.
  reach TEXT NOT NULL DEFAULT '' CHECK (length(reach) <= 200), -- Name of the measured reach.
  measured_line TEXT NOT NULL CHECK (measured_line IN ('thalweg', 'centreline', 'levee_crest', 'unknown')), -- Which line was measured: levee crests read straighter than thalwegs.
  valley_line TEXT NOT NULL CHECK (valley_line IN ('end_to_end', 'inflections', 'axis', 'unknown')), -- How the valley length was taken.
  sinuosity REAL NOT NULL CHECK (sinuosity BETWEEN 1 AND 1e12), -- Channel length over valley length, 1 or more.
  sinuosity_kind TEXT NOT NULL CHECK (sinuosity_kind IN ('peak', 'p90', 'mean', 'bend', 'reach', 'unknown')), -- Peak, 90th percentile or mean of windows, one bend, or the whole reach.
  sinuosity_se REAL CHECK (sinuosity_se BETWEEN 0 AND 1e12), -- One standard error of the sinuosity.
  window_m REAL CHECK (window_m > 0 AND window_m <= 1e12), -- m; Length of the window the sinuosity was taken in.
  windows REAL CHECK (windows BETWEEN 1 AND 1e9 AND windows = round(windows)), -- Number of windows the value was picked from: a peak grows with it.
  vertex_spacing_m REAL CHECK (vertex_spacing_m > 0 AND vertex_spacing_m <= 1e12), -- m; Spacing of the vertices of the measured line.
  wavelength_m REAL CHECK (wavelength_m > 0 AND wavelength_m <= 1e12), -- m; Meander wavelength, two bends.
  amplitude_m REAL CHECK (amplitude_m > 0 AND amplitude_m <= 1e12), -- m; Meander amplitude.
  radius_m REAL CHECK (radius_m > 0 AND radius_m <= 1e12), -- m; Radius of curvature of the bends.
  reach_length_m REAL CHECK (reach_length_m > 0 AND reach_length_m <= 1e12), -- m; Length of the measured reach along the channel.
  valley_slope REAL CHECK (valley_slope BETWEEN -1e12 AND 1e12), -- m/m; Slope of the valley floor over the same reach, down positive.
  valley_slope_se REAL CHECK (valley_slope_se BETWEEN 0 AND 1e12), -- m/m; One standard error of the valley slope.
  slope_kind TEXT NOT NULL CHECK (slope_kind IN ('valley', 'regional', 'unknown')), -- Slope of the valley beside the channel, or of the region.
  slope_state TEXT NOT NULL CHECK (slope_state IN ('present', 'restored')), -- Slope as it is today, or restored to the time of deposition.
  channel_slope REAL CHECK (channel_slope BETWEEN -1e12 AND 1e12), -- m/m; Slope along the channel; not used as a predictor.
  channel_width_m REAL CHECK (channel_width_m > 0 AND channel_width_m <= 1e12), -- m; Bankfull width, levee crest to levee crest.
  channel_depth_m REAL CHECK (channel_depth_m > 0 AND channel_depth_m <= 1e12), -- m; Bankfull depth, levee crest to thalweg.
  levee_left_m REAL CHECK (levee_left_m BETWEEN -1e12 AND 1e12), -- m; Height of the left levee above the channel floor, looking downstream.
  levee_right_m REAL CHECK (levee_right_m BETWEEN -1e12 AND 1e12), -- m; Height of the right levee above the channel floor, looking downstream.
  net_to_gross REAL CHECK (net_to_gross BETWEEN 0 AND 1), -- Sand thickness over total thickness, 0 to 1.
  stacking TEXT NOT NULL CHECK (stacking IN ('vertical', 'lateral', 'mixed', 'unknown')), -- How channel fills stack.
  lateral_accretion TEXT NOT NULL CHECK (lateral_accretion IN ('yes', 'no', 'unknown')), -- Whether lateral accretion packages are seen.
  survey TEXT NOT NULL CHECK (survey IN ('multibeam', 'sidescan', 'seismic_3d', 'seismic_2d', 'sub_bottom', 'satellite', 'dem', 'outcrop', 'unknown')), -- What the channel was imaged with.
  extraction TEXT NOT NULL CHECK (extraction IN ('centreline', 'grid', 'figure', 'table', 'unknown')), -- What the number was taken from.
  pixel_m REAL CHECK (pixel_m > 0 AND pixel_m <= 1e12), -- m; Ground size of a pixel or bin of the image.
  grade TEXT NOT NULL CHECK (grade IN ('remeasured', 'surveyed', 'traced', 'quoted')), -- Remeasured here, surveyed by the source, traced from a figure, or quoted with the method unknown.
  source_locator TEXT NOT NULL DEFAULT '' CHECK (length(source_locator) <= 500), -- Page, figure or table in the source.
  slope_source TEXT NOT NULL DEFAULT '' CHECK (length(slope_source) <= 4000), -- Source of the slope, when it is another paper.
  size_source TEXT NOT NULL DEFAULT '' CHECK (length(size_source) <= 4000), -- Source of width and depth, when it is another paper.
  contributor TEXT NOT NULL DEFAULT '' CHECK (length(contributor) <= 200), -- Credit line of who contributed the row.
  licence TEXT NOT NULL DEFAULT '' CHECK (length(licence) <= 100), -- Licence of the contribution, as CC BY 4.0 or CC0.
  notes TEXT NOT NULL DEFAULT '' CHECK (length(notes) <= 20000), -- Anything else.
  grade_rank INTEGER GENERATED ALWAYS AS (CASE grade WHEN 'remeasured' THEN 0 WHEN 'surveyed' THEN 1 WHEN 'traced' THEN 2 ELSE 3 END) VIRTUAL, -- order of grades, best first
  revision INTEGER NOT NULL DEFAULT 0, -- id of the latest revision of this row
  created_at TEXT NOT NULL, -- when it was accepted
  updated_at TEXT NOT NULL -- when one of these columns last changed
) STRICT;

CREATE INDEX measurements_near ON measurements (source_id, sinuosity, latitude_deg);

CREATE INDEX measurements_system ON measurements (system_id, grade_rank, id DESC);

CREATE TRIGGER places_delete AFTER DELETE ON measurements BEGIN
  DELETE FROM places WHERE id = old.id;
END;

CREATE TRIGGER places_insert AFTER INSERT ON measurements BEGIN
  INSERT INTO places VALUES (new.id, new.longitude_deg - 360 * (new.longitude_deg > 180), new.longitude_deg - 360 * (new.longitude_deg > 180), new.latitude_deg, new.latitude_deg);
END;

CREATE TRIGGER places_update AFTER UPDATE OF longitude_deg, latitude_deg ON measurements BEGIN
  UPDATE places SET west = new.longitude_deg - 360 * (new.longitude_deg > 180), east = new.longitude_deg - 360 * (new.longitude_deg > 180), south = new.latitude_deg, north = new.latitude_deg WHERE id = new.id;
END;

CREATE TRIGGER search_after AFTER UPDATE OF measurement, system_id, source_id, reach, unit, plate, slope_source, size_source, contributor, notes ON measurements BEGIN
  INSERT INTO search (rowid, names, places, reach, source, notes) SELECT id, names, places, reach, source, notes FROM words WHERE id = new.id;
END;

CREATE TRIGGER search_before BEFORE UPDATE OF measurement, system_id, source_id, reach, unit, plate, slope_source, size_source, contributor, notes ON measurements BEGIN
  INSERT INTO search (search, rowid, names, places, reach, source, notes) SELECT 'delete', id, names, places, reach, source, notes FROM words WHERE id = old.id;
END;

CREATE TRIGGER search_delete BEFORE DELETE ON measurements BEGIN
  INSERT INTO search (search, rowid, names, places, reach, source, notes) SELECT 'delete', id, names, places, reach, source, notes FROM words WHERE id = old.id;
END;

CREATE TRIGGER search_insert AFTER INSERT ON measurements BEGIN
  INSERT INTO search (rowid, names, places, reach, source, notes) SELECT id, names, places, reach, source, notes FROM words WHERE id = new.id;
END;

CREATE TABLE merged_systems (
  system_id INTEGER PRIMARY KEY REFERENCES systems (id), -- the system that is no longer its own
  into_id INTEGER NOT NULL REFERENCES systems (id) CHECK (into_id <> system_id), -- the system it is part of now
  revision INTEGER NOT NULL, -- the revision that merged it
  merged_at TEXT NOT NULL -- when
) STRICT;

CREATE INDEX merged_systems_into ON merged_systems (into_id);

CREATE TABLE messages (
  id INTEGER PRIMARY KEY, -- internal number
  submission_id INTEGER NOT NULL REFERENCES submissions (id) ON DELETE CASCADE, -- what it is about
  account_id INTEGER REFERENCES accounts (id), -- who wrote it, NULL for the command line
  at TEXT NOT NULL, -- when
  text TEXT NOT NULL CHECK (length(text) BETWEEN 1 AND 20000) -- the comment
) STRICT;

CREATE INDEX messages_submission ON messages (submission_id, id);

CREATE TABLE one_time_tokens (
  token_hash BLOB PRIMARY KEY, -- SHA-256 of the token in the address
  purpose TEXT NOT NULL CHECK (purpose IN ('first_account', 'invitation', 'reset')), -- what it allows, once
  account_id INTEGER REFERENCES accounts (id), -- whose password it resets; NULL for the others
  created_at TEXT NOT NULL, -- when it was made
  expires_at TEXT NOT NULL -- when it ends unused
) STRICT, WITHOUT ROWID;

CREATE VIRTUAL TABLE places USING rtree (id, west, east, south, north);

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

CREATE TRIGGER recomputations_done BEFORE UPDATE ON recomputations WHEN old.state = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never changed'); END;

CREATE TRIGGER recomputations_last BEFORE DELETE ON recomputations WHEN old.state = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never deleted'); END;

CREATE TRIGGER recomputations_stay BEFORE UPDATE OF name, title, why, settings, last_line, revision, program, account_id, created_at ON recomputations
BEGIN SELECT RAISE (ABORT, 'a recomputation keeps its settings'); END;

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

CREATE INDEX recomputed_values_line ON recomputed_values (centreline_id);

CREATE TRIGGER recomputed_values_done BEFORE INSERT ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = new.recomputation) IS NOT 'running'
BEGIN SELECT RAISE (ABORT, 'this recomputation does not run'); END;

CREATE TRIGGER recomputed_values_last BEFORE DELETE ON recomputed_values WHEN (SELECT state FROM recomputations WHERE name = old.recomputation) = 'done'
BEGIN SELECT RAISE (ABORT, 'a finished recomputation is never deleted'); END;

CREATE TRIGGER recomputed_values_stay BEFORE UPDATE ON recomputed_values BEGIN SELECT RAISE (ABORT, 'recomputed values are never changed'); END;

CREATE TABLE registrations (
  account_id INTEGER PRIMARY KEY REFERENCES accounts (id), -- the account
  about TEXT NOT NULL DEFAULT '' CHECK (length(about) <= 2000), -- who the person is, in their own words
  state TEXT NOT NULL DEFAULT 'waiting' CHECK (state IN ('waiting', 'approved', 'refused')), -- what was decided
  decided_by INTEGER REFERENCES accounts (id), -- who decided, NULL while it waits
  decided_at TEXT NOT NULL DEFAULT '', -- when, '' while it waits
  why TEXT NOT NULL DEFAULT '' CHECK (length(why) <= 2000) -- the reason given
) STRICT;

CREATE INDEX registrations_state ON registrations (state);

CREATE TABLE release_centrelines (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in centrelines
  version INTEGER NOT NULL REFERENCES frozen_centrelines (version), -- the state it was in
  system_id INTEGER NOT NULL, -- number of its system in systems
  measurement_id INTEGER, -- number of its measurement, NULL if none
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;

CREATE INDEX release_centrelines_measurement ON release_centrelines (release_id, measurement_id);

CREATE INDEX release_centrelines_system ON release_centrelines (release_id, system_id);

CREATE INDEX release_centrelines_version ON release_centrelines (version);

CREATE TRIGGER release_centrelines_last BEFORE DELETE ON release_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER release_centrelines_sealed BEFORE INSERT ON release_centrelines WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;

CREATE TRIGGER release_centrelines_stay BEFORE UPDATE ON release_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE release_dois (
  release_id INTEGER PRIMARY KEY REFERENCES releases (id), -- the release
  doi TEXT NOT NULL CHECK (length(doi) BETWEEN 1 AND 300), -- its DOI
  account_id INTEGER REFERENCES accounts (id), -- who entered it, NULL for the command line
  at TEXT NOT NULL -- when
) STRICT;

CREATE TRIGGER release_dois_last BEFORE DELETE ON release_dois BEGIN SELECT RAISE (ABORT, 'the DOI of a release is never deleted'); END;

CREATE TRIGGER release_dois_stay BEFORE UPDATE ON release_dois BEGIN SELECT RAISE (ABORT, 'the DOI of a release is never changed'); END;

CREATE TABLE release_measurements (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in measurements
  version INTEGER NOT NULL REFERENCES frozen_measurements (version), -- the state it was in
  system_id INTEGER NOT NULL, -- number of its system in systems
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;

CREATE INDEX release_measurements_system ON release_measurements (release_id, system_id);

CREATE INDEX release_measurements_version ON release_measurements (version);

CREATE TRIGGER release_measurements_last BEFORE DELETE ON release_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER release_measurements_sealed BEFORE INSERT ON release_measurements WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;

CREATE TRIGGER release_measurements_stay BEFORE UPDATE ON release_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE release_settings (
  release_id INTEGER PRIMARY KEY REFERENCES releases (id), -- the release
  settings TEXT NOT NULL CHECK (json_valid(settings)) -- the settings file of that day, JSON
) STRICT;

CREATE TRIGGER release_settings_last BEFORE DELETE ON release_settings BEGIN SELECT RAISE (ABORT, 'the settings of a release are never deleted'); END;

CREATE TRIGGER release_settings_stay BEFORE UPDATE ON release_settings BEGIN SELECT RAISE (ABORT, 'the settings of a release are never changed'); END;

CREATE TABLE release_sources (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in sources
  version INTEGER NOT NULL REFERENCES frozen_sources (version), -- the state it was in
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;

CREATE INDEX release_sources_version ON release_sources (version);

CREATE TRIGGER release_sources_last BEFORE DELETE ON release_sources BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER release_sources_sealed BEFORE INSERT ON release_sources WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;

CREATE TRIGGER release_sources_stay BEFORE UPDATE ON release_sources BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE release_systems (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in systems
  version INTEGER NOT NULL REFERENCES frozen_systems (version), -- the state it was in
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;

CREATE INDEX release_systems_version ON release_systems (version);

CREATE TRIGGER release_systems_last BEFORE DELETE ON release_systems BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

CREATE TRIGGER release_systems_sealed BEFORE INSERT ON release_systems WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;

CREATE TRIGGER release_systems_stay BEFORE UPDATE ON release_systems BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;

CREATE TABLE releases (
  id INTEGER PRIMARY KEY, -- internal number, in the order of freezing
  name TEXT NOT NULL UNIQUE COLLATE NOCASE CHECK (length(name) BETWEEN 1 AND 64 AND name NOT GLOB '*[^A-Za-z0-9_.-]*'), -- in its address, as 2025.1
  title TEXT NOT NULL CHECK (length(title) BETWEEN 1 AND 200), -- of the catalogue, as cited
  notes TEXT NOT NULL DEFAULT '' CHECK (length(notes) <= 20000), -- what is new in it
  licence TEXT NOT NULL CHECK (licence IN ('CC-BY-4.0', 'CC0-1.0')), -- of the collection, SPDX name
  doi TEXT NOT NULL DEFAULT '' CHECK (length(doi) <= 300), -- DOI it was given when frozen, '' if none
  authors TEXT NOT NULL CHECK (json_valid(authors)), -- credit lines of the contributors, JSON array of name, orcid, measurements
  licences TEXT NOT NULL CHECK (json_valid(licences)), -- licences of its rows, JSON array of value and count
  systems INTEGER NOT NULL CHECK (systems > 0), -- how many it holds
  measurements INTEGER NOT NULL CHECK (measurements > 0), -- how many it holds
  sources INTEGER NOT NULL CHECK (sources > 0), -- how many it holds
  centrelines INTEGER NOT NULL CHECK (centrelines >= 0), -- how many it holds
  invented INTEGER NOT NULL CHECK (invented BETWEEN 0 AND measurements), -- measurements in it that no survey made
  checksum TEXT NOT NULL CHECK (length(checksum) = 64), -- SHA-256 of its measurement table as CSV, hexadecimal
  bytes INTEGER NOT NULL CHECK (bytes > 0), -- length of that CSV
  revision INTEGER NOT NULL, -- of the catalogue when it was frozen
  program TEXT NOT NULL, -- version of the program that froze it
  account_id INTEGER REFERENCES accounts (id), -- who froze it, NULL for the command line
  created_at TEXT NOT NULL -- when it was frozen
) STRICT;

CREATE TRIGGER releases_last BEFORE DELETE ON releases BEGIN SELECT RAISE (ABORT, 'releases are never deleted'); END;

CREATE TRIGGER releases_stay BEFORE UPDATE ON releases BEGIN SELECT RAISE (ABORT, 'releases are never changed'); END;

CREATE TABLE revisions (
  id INTEGER PRIMARY KEY AUTOINCREMENT, -- grows with every accepted change: the catalogue's revision
  change_set_id INTEGER NOT NULL REFERENCES change_sets (id), -- when, who and why
  record TEXT NOT NULL, -- system:SLUG, measurement:ID or centreline:ID
  action TEXT NOT NULL CHECK (action IN ('create', 'change', 'accept', 'return', 'withdraw')), -- what happened
  field TEXT NOT NULL DEFAULT '', -- the column, '' for the whole record
  before TEXT NOT NULL DEFAULT '', -- its text before
  after TEXT NOT NULL DEFAULT '' -- its text after
) STRICT;

CREATE INDEX revisions_change_set ON revisions (change_set_id);

CREATE INDEX revisions_record ON revisions (record, id);

CREATE TRIGGER revisions_last BEFORE DELETE ON revisions BEGIN SELECT RAISE (ABORT, 'revisions are never deleted'); END;

CREATE TRIGGER revisions_stay BEFORE UPDATE ON revisions BEGIN SELECT RAISE (ABORT, 'revisions are never changed'); END;

CREATE TABLE samples (
  id INTEGER PRIMARY KEY, -- internal number
  batch_id INTEGER NOT NULL REFERENCES batches (id), -- the file
  account_id INTEGER REFERENCES accounts (id), -- who read them, NULL for the command line
  at TEXT NOT NULL, -- when the file was accepted
  seed INTEGER NOT NULL, -- of the drawing
  total INTEGER NOT NULL CHECK (total > 0), -- rows that waited, from which they were drawn
  drawn TEXT NOT NULL CHECK (json_valid(drawn)) -- numbers of the submissions drawn and read, JSON array
) STRICT;

CREATE TRIGGER samples_last BEFORE DELETE ON samples BEGIN SELECT RAISE (ABORT, 'what was read is never deleted'); END;

CREATE TRIGGER samples_stay BEFORE UPDATE ON samples BEGIN SELECT RAISE (ABORT, 'what was read is never changed'); END;

CREATE VIRTUAL TABLE search USING fts5 (names, places, reach, source, notes, content = 'words', content_rowid = 'id', tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3');

CREATE TABLE sessions (
  token_hash BLOB PRIMARY KEY, -- SHA-256 of the cookie's token: a copy of the file signs nobody in
  data BLOB NOT NULL, -- what the session holds, encoded by the session manager
  expires_at TEXT NOT NULL -- when it ends
) STRICT, WITHOUT ROWID;

CREATE INDEX sessions_expiry ON sessions (expires_at);

CREATE TABLE settings (
  name TEXT PRIMARY KEY CHECK (length(name) BETWEEN 1 AND 64), -- as in the settings file
  value TEXT NOT NULL CHECK (json_valid(value) AND length(value) <= 200000) -- its value, JSON
) STRICT, WITHOUT ROWID;

CREATE TABLE sources (
  id INTEGER PRIMARY KEY, -- internal number
  citation TEXT NOT NULL CHECK (length(citation) BETWEEN 1 AND 4000), -- the paper or survey, as cited
  doi TEXT NOT NULL DEFAULT '' CHECK (length(doi) <= 300), -- its DOI without a resolver, '' if none
  UNIQUE (citation, doi)
) STRICT;

CREATE TRIGGER search_source_after AFTER UPDATE OF citation, doi ON sources BEGIN
  INSERT INTO search (rowid, names, places, reach, source, notes) SELECT w.id, names, places, w.reach, source, w.notes FROM words w JOIN measurements m ON m.id = w.id WHERE m.source_id = new.id;
END;

CREATE TRIGGER search_source_before BEFORE UPDATE OF citation, doi ON sources BEGIN
  INSERT INTO search (search, rowid, names, places, reach, source, notes) SELECT 'delete', w.id, names, places, w.reach, source, w.notes FROM words w JOIN measurements m ON m.id = w.id WHERE m.source_id = old.id;
END;

CREATE TABLE submissions (
  id INTEGER PRIMARY KEY, -- internal number
  batch_id INTEGER REFERENCES batches (id), -- the imported file it came with, NULL for a form
  account_id INTEGER REFERENCES accounts (id), -- whose it is, NULL for the command line
  state TEXT NOT NULL CHECK (state IN ('draft', 'submitted', 'returned', 'accepted', 'withdrawn')), -- where it stands
  measurement TEXT NOT NULL DEFAULT '', -- public id of the record it changes; '' when new
  proposed TEXT NOT NULL CHECK (json_valid(proposed)), -- the row as proposed: column -> text, JSON
  typed TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(typed)), -- cells of a draft that cannot be read yet, as typed, JSON
  base TEXT NOT NULL DEFAULT '' CHECK (base = '' OR json_valid(base)), -- the accepted row the author saw, JSON; '' when new
  base_revision INTEGER NOT NULL DEFAULT 0, -- revision of that row
  overrides TEXT NOT NULL DEFAULT '{}' CHECK (json_valid(overrides)), -- warning key -> reason, JSON
  comment TEXT NOT NULL DEFAULT '', -- the curator's latest word
  line TEXT NOT NULL DEFAULT '' CHECK (line = '' OR json_valid(line)), -- centreline as GeoJSON LineString, '' if none
  line_settings TEXT NOT NULL DEFAULT '' CHECK (line_settings = '' OR json_valid(line_settings)), -- planform settings of that line, JSON
  line_sinuosities TEXT NOT NULL DEFAULT '[]' CHECK (json_valid(line_sinuosities)), -- its window sinuosities, JSON array
  fingerprint BLOB NOT NULL, -- SHA-256 of the proposed row: the same row sent twice waits once
  created_at TEXT NOT NULL, -- first saved
  updated_at TEXT NOT NULL -- last saved or decided
, act TEXT NOT NULL DEFAULT 'edit' CHECK (act IN ('edit', 'withdraw', 'restore')) /* put a record, take one out, or put one back */, instead TEXT NOT NULL DEFAULT '' /* of a withdrawal: the measurement that stands for it, '' if none */) STRICT;

CREATE INDEX submissions_account ON submissions (account_id, state);

CREATE INDEX submissions_batch ON submissions (batch_id);

CREATE INDEX submissions_fingerprint ON submissions (fingerprint) WHERE state = 'submitted';

CREATE INDEX submissions_state ON submissions (state, id);

CREATE TABLE systems (
  id INTEGER PRIMARY KEY, -- internal number
  slug TEXT NOT NULL UNIQUE CHECK (length(slug) BETWEEN 1 AND 80 AND slug NOT GLOB '*[^a-z0-9-]*'), -- stable short name, used in addresses
  system_name TEXT NOT NULL COLLATE NOCASE CHECK (length(system_name) BETWEEN 1 AND 200), -- Name of the channel system.
  other_names TEXT NOT NULL DEFAULT '' CHECK (length(other_names) <= 500), -- Other names in use, separated by semicolons.
  parent_deposit TEXT NOT NULL DEFAULT '' CHECK (length(parent_deposit) <= 200), -- Fan, drift or other deposit the system is part of: systems of one deposit are not independent.
  basin TEXT NOT NULL DEFAULT '' CHECK (length(basin) <= 200), -- Ocean or sedimentary basin.
  kind TEXT NOT NULL CHECK (kind IN ('submarine', 'river', 'lacustrine')), -- Where the channel was made.
  margin TEXT NOT NULL CHECK (margin IN ('passive', 'active', 'transform', 'intraplate', 'unknown')), -- Tectonic kind of the margin.
  feeder TEXT NOT NULL CHECK (feeder IN ('river', 'shelf', 'glacial', 'volcanic', 'failure', 'unknown')), -- What fed the system when it was active.
  feeder_geometry TEXT NOT NULL CHECK (feeder_geometry IN ('point', 'multiple', 'linear', 'unknown')), -- One point, several, or a line source.
  large_river TEXT NOT NULL CHECK (large_river IN ('yes', 'no', 'unknown')), -- Whether a large river feeds it, as the source says.
  catchment_area_km2 REAL CHECK (catchment_area_km2 > 0 AND catchment_area_km2 <= 1e12), -- km2; Area of the river catchment behind it.
  catchment_latitude_deg REAL CHECK (catchment_latitude_deg BETWEEN -90 AND 90), -- degrees; Latitude of the middle of the catchment, north positive.
  revision INTEGER NOT NULL DEFAULT 0, -- id of the latest revision of these columns
  created_at TEXT NOT NULL, -- when it was accepted
  updated_at TEXT NOT NULL -- when one of these columns last changed
) STRICT;

CREATE INDEX systems_created ON systems (created_at, id);

CREATE INDEX systems_name ON systems (system_name);

CREATE INDEX systems_parent ON systems (parent_deposit);

CREATE TRIGGER search_system_after AFTER UPDATE OF slug, system_name, other_names, parent_deposit, basin ON systems BEGIN
  INSERT INTO search (rowid, names, places, reach, source, notes) SELECT w.id, names, places, w.reach, source, w.notes FROM words w JOIN measurements m ON m.id = w.id WHERE m.system_id = new.id;
END;

CREATE TRIGGER search_system_before BEFORE UPDATE OF slug, system_name, other_names, parent_deposit, basin ON systems BEGIN
  INSERT INTO search (search, rowid, names, places, reach, source, notes) SELECT 'delete', w.id, names, places, w.reach, source, w.notes FROM words w JOIN measurements m ON m.id = w.id WHERE m.system_id = old.id;
END;

CREATE TABLE upload_pieces (
  upload_id INTEGER NOT NULL REFERENCES uploads (id) ON DELETE CASCADE, -- the file
  n INTEGER NOT NULL, -- order of the piece, from 0
  bytes BLOB NOT NULL, -- as sent
  PRIMARY KEY (upload_id, n)
) STRICT;

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

CREATE VIEW words AS
  SELECT m.id AS id, s.slug || ' ' || s.system_name || ' ' || s.other_names AS names, s.parent_deposit || ' ' || s.basin AS places,
    m.measurement || ' ' || m.reach || ' ' || m.unit || ' ' || m.plate AS reach, c.citation || ' ' || c.doi AS source,
    m.slope_source || ' ' || m.size_source || ' ' || m.contributor || ' ' || m.notes AS notes
  FROM measurements m JOIN systems s ON s.id = m.system_id JOIN sources c ON c.id = m.source_id;
