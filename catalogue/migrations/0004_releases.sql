-- Releases: the accepted catalogue frozen under a name. Each state a record was
-- ever released in is kept once; a release is the list of the states it holds.
-- Nothing of it is ever changed or deleted.

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
CREATE TRIGGER releases_stay BEFORE UPDATE ON releases BEGIN SELECT RAISE (ABORT, 'releases are never changed'); END;
CREATE TRIGGER releases_last BEFORE DELETE ON releases BEGIN SELECT RAISE (ABORT, 'releases are never deleted'); END;

-- A DOI is often given to a release afterwards: once, and beside it, so that
-- the release itself stays as it was.
CREATE TABLE release_dois (
  release_id INTEGER PRIMARY KEY REFERENCES releases (id), -- the release
  doi TEXT NOT NULL CHECK (length(doi) BETWEEN 1 AND 300), -- its DOI
  account_id INTEGER REFERENCES accounts (id), -- who entered it, NULL for the command line
  at TEXT NOT NULL -- when
) STRICT;
CREATE TRIGGER release_dois_stay BEFORE UPDATE ON release_dois BEGIN SELECT RAISE (ABORT, 'the DOI of a release is never changed'); END;
CREATE TRIGGER release_dois_last BEFORE DELETE ON release_dois BEGIN SELECT RAISE (ABORT, 'the DOI of a release is never deleted'); END;

CREATE TABLE frozen_sources (
  version INTEGER PRIMARY KEY, -- internal number of this state of the source
  id INTEGER NOT NULL, -- its number in sources
  citation TEXT NOT NULL, -- the paper or survey, as cited
  doi TEXT NOT NULL -- its DOI without a resolver, '' if none
) STRICT;
CREATE INDEX frozen_sources_id ON frozen_sources (id);

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

CREATE TABLE frozen_centrelines (
  version INTEGER PRIMARY KEY, -- internal number of this state of the line
  id INTEGER NOT NULL, -- its number in centrelines
  line TEXT NOT NULL, -- GeoJSON LineString, upstream to downstream; third coordinate elevation in m, up positive
  settings TEXT NOT NULL, -- planform settings the numbers were made with, JSON
  sinuosities TEXT NOT NULL, -- sinuosity of each window, JSON array
  created_at TEXT NOT NULL -- when it was stored
) STRICT;
CREATE INDEX frozen_centrelines_id ON frozen_centrelines (id);

-- What a release holds. Its row in releases is written last, so that these
-- references are checked at the end of the transaction; from then on nothing is
-- added to it.
CREATE TABLE release_sources (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in sources
  version INTEGER NOT NULL REFERENCES frozen_sources (version), -- the state it was in
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;
CREATE INDEX release_sources_version ON release_sources (version);
CREATE TRIGGER release_sources_sealed BEFORE INSERT ON release_sources WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;
CREATE TABLE release_systems (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in systems
  version INTEGER NOT NULL REFERENCES frozen_systems (version), -- the state it was in
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;
CREATE INDEX release_systems_version ON release_systems (version);
CREATE TRIGGER release_systems_sealed BEFORE INSERT ON release_systems WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;
CREATE TABLE release_measurements (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in measurements
  version INTEGER NOT NULL REFERENCES frozen_measurements (version), -- the state it was in
  system_id INTEGER NOT NULL, -- number of its system in systems
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;
CREATE INDEX release_measurements_version ON release_measurements (version);
CREATE INDEX release_measurements_system ON release_measurements (release_id, system_id);
CREATE TRIGGER release_measurements_sealed BEFORE INSERT ON release_measurements WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;
CREATE TABLE release_centrelines (
  release_id INTEGER NOT NULL REFERENCES releases (id) DEFERRABLE INITIALLY DEFERRED, -- the release
  id INTEGER NOT NULL, -- number of the record in centrelines
  version INTEGER NOT NULL REFERENCES frozen_centrelines (version), -- the state it was in
  system_id INTEGER NOT NULL, -- number of its system in systems
  measurement_id INTEGER, -- number of its measurement, NULL if none
  PRIMARY KEY (release_id, id)
) STRICT, WITHOUT ROWID;
CREATE INDEX release_centrelines_version ON release_centrelines (version);
CREATE INDEX release_centrelines_system ON release_centrelines (release_id, system_id);
CREATE INDEX release_centrelines_measurement ON release_centrelines (release_id, measurement_id);
CREATE TRIGGER release_centrelines_sealed BEFORE INSERT ON release_centrelines WHEN EXISTS (SELECT 1 FROM releases WHERE id = new.release_id) BEGIN SELECT RAISE (ABORT, 'nothing is added to a release'); END;

CREATE TRIGGER frozen_sources_stay BEFORE UPDATE ON frozen_sources BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER frozen_sources_last BEFORE DELETE ON frozen_sources BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER frozen_systems_stay BEFORE UPDATE ON frozen_systems BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER frozen_systems_last BEFORE DELETE ON frozen_systems BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER frozen_measurements_stay BEFORE UPDATE ON frozen_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER frozen_measurements_last BEFORE DELETE ON frozen_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER frozen_centrelines_stay BEFORE UPDATE ON frozen_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER frozen_centrelines_last BEFORE DELETE ON frozen_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER release_sources_stay BEFORE UPDATE ON release_sources BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER release_sources_last BEFORE DELETE ON release_sources BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER release_systems_stay BEFORE UPDATE ON release_systems BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER release_systems_last BEFORE DELETE ON release_systems BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER release_measurements_stay BEFORE UPDATE ON release_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER release_measurements_last BEFORE DELETE ON release_measurements BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;
CREATE TRIGGER release_centrelines_stay BEFORE UPDATE ON release_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never changed'); END;
CREATE TRIGGER release_centrelines_last BEFORE DELETE ON release_centrelines BEGIN SELECT RAISE (ABORT, 'what was released is never deleted'); END;

-- The words of each released state of a measurement.
CREATE VIRTUAL TABLE frozen_search USING fts5 (names, places, reach, source, notes, content = '', tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3');
CREATE TRIGGER frozen_search_insert AFTER INSERT ON frozen_measurements BEGIN
  INSERT INTO frozen_search (rowid, names, places, reach, source, notes)
    SELECT new.version, s.slug || ' ' || s.system_name || ' ' || s.other_names, s.parent_deposit || ' ' || s.basin,
      new.measurement || ' ' || new.reach || ' ' || new.unit || ' ' || new.plate, c.citation || ' ' || c.doi,
      new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes
    FROM frozen_systems s, frozen_sources c WHERE s.version = new.system_version AND c.version = new.source_version;
END;

-- Where lines lie: their boxes, as given (a line may run past 180 degrees). One
-- that jumps from 180 to -180 has the box of all longitudes.
CREATE VIRTUAL TABLE line_places USING rtree (id, west, east, south, north);
CREATE TRIGGER line_places_insert AFTER INSERT ON centrelines BEGIN
  INSERT INTO line_places SELECT new.id, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN -180 ELSE min(p.value ->> 0) END, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN 180 ELSE max(p.value ->> 0) END,
    min(p.value ->> 1), max(p.value ->> 1) FROM json_each(new.line, '$.coordinates') p;
END;
CREATE TRIGGER line_places_update AFTER UPDATE OF line ON centrelines BEGIN
  DELETE FROM line_places WHERE id = old.id;
  INSERT INTO line_places SELECT new.id, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN -180 ELSE min(p.value ->> 0) END, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN 180 ELSE max(p.value ->> 0) END,
    min(p.value ->> 1), max(p.value ->> 1) FROM json_each(new.line, '$.coordinates') p;
END;
CREATE TRIGGER line_places_delete AFTER DELETE ON centrelines BEGIN
  DELETE FROM line_places WHERE id = old.id;
END;
INSERT INTO line_places SELECT l.id, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN -180 ELSE min(p.value ->> 0) END, CASE WHEN max(p.value ->> 0) - min(p.value ->> 0) > 180 THEN 180 ELSE max(p.value ->> 0) END,
    min(p.value ->> 1), max(p.value ->> 1) FROM centrelines l, json_each(l.line, '$.coordinates') p GROUP BY l.id;

-- Newly accepted systems, for the feed.
CREATE INDEX systems_created ON systems (created_at, id);

-- Which catalogue this is, wherever its file goes: one random number, for names
-- that must not change and for telling two catalogues of one revision apart.
CREATE TABLE catalogue_identity (
  only INTEGER PRIMARY KEY CHECK (only = 1), -- there is one
  uuid TEXT NOT NULL CHECK (length(uuid) = 36) -- RFC 9562, version 4
) STRICT;
INSERT INTO catalogue_identity
  SELECT 1, substr(h, 1, 8) || '-' || substr(h, 9, 4) || '-4' || substr(h, 14, 3) || '-' || substr('89ab', 1 + abs(random() % 4), 1) || substr(h, 18, 3) || '-' || substr(h, 21, 12)
  FROM (SELECT lower(hex(randomblob(16))) AS h);
CREATE TRIGGER catalogue_identity_stays BEFORE UPDATE ON catalogue_identity BEGIN SELECT RAISE (ABORT, 'a catalogue keeps its number'); END;
CREATE TRIGGER catalogue_identity_last BEFORE DELETE ON catalogue_identity BEGIN SELECT RAISE (ABORT, 'a catalogue keeps its number'); END;

-- Sizes the planner of queries counts with, for a catalogue of 100,000 systems:
-- without them it takes "all rows of a release" for a handful. They hold for
-- small releases as well, where every plan is quick.
ANALYZE sqlite_schema;
DELETE FROM sqlite_stat1 WHERE tbl GLOB 'release_*' OR tbl GLOB 'frozen_*';
INSERT INTO sqlite_stat1 VALUES
 ('release_sources','release_sources','1000 1000 1'),('release_sources','release_sources_version','1000 2'),
 ('release_systems','release_systems','100000 100000 1'),('release_systems','release_systems_version','100000 2'),
 ('release_measurements','release_measurements','300000 300000 1'),('release_measurements','release_measurements_version','300000 2'),('release_measurements','release_measurements_system','300000 300000 3'),
 ('release_centrelines','release_centrelines','1000 1000 1'),('release_centrelines','release_centrelines_version','1000 2'),('release_centrelines','release_centrelines_system','1000 1000 1'),('release_centrelines','release_centrelines_measurement','1000 1000 1'),
 ('frozen_sources','frozen_sources_id','1000 1'),
 ('frozen_systems','frozen_systems_id','100000 1'),('frozen_systems','frozen_systems_slug','100000 1'),
 ('frozen_measurements','frozen_measurements_id','300000 1'),('frozen_measurements','frozen_measurements_public','300000 1'),
 ('frozen_centrelines','frozen_centrelines_id','1000 1');
ANALYZE sqlite_schema;
