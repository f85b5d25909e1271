-- Rows that only some people see: private ones, and accepted ones under an
-- embargo. They stand in tables of their own, so that whatever reads the
-- tables of the catalogue reads what everybody may see; the one reader that
-- adds them for a person is catalogue/private_read.go.

CREATE TABLE audiences (
  submission_id INTEGER PRIMARY KEY REFERENCES submissions (id), -- the contribution; without an entry everyone sees it once it is accepted
  kind TEXT NOT NULL CHECK (kind IN ('later', 'private')), -- everyone, but later; or nobody but the people named
  until TEXT NOT NULL DEFAULT '' CHECK (until = '' OR until = date(until)), -- day, UTC, from which everyone sees it; '' = until it is said to be published
  coarse INTEGER NOT NULL DEFAULT 0 CHECK (coarse IN (0, 1)), -- 1 = others see it meanwhile with its place rounded
  people TEXT NOT NULL DEFAULT '' CHECK (length(people) <= 2000) -- sign-in names of those who see it beside its owner, as typed
) STRICT;

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

CREATE TABLE hidden_row_people (
  row_id INTEGER NOT NULL REFERENCES hidden_rows (id) ON DELETE CASCADE, -- the row
  account_id INTEGER NOT NULL REFERENCES accounts (id), -- who sees it beside its owner
  PRIMARY KEY (account_id, row_id)
) STRICT, WITHOUT ROWID;
CREATE INDEX hidden_row_people_row ON hidden_row_people (row_id);

-- The words of hidden rows are indexed apart from those of the catalogue.
CREATE VIRTUAL TABLE hidden_search USING fts5(names, places, reach, source, notes, tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3');

-- Grows with every change to what somebody sees: a part of the key of every
-- cache that holds answers for one person, and of nothing that others see.
INSERT INTO counters (name, value) VALUES ('hidden', 0);

CREATE TRIGGER hidden_rows_insert AFTER INSERT ON hidden_rows BEGIN
  INSERT INTO hidden_search (rowid, names, places, reach, source, notes) VALUES (new.id, new.slug || ' ' || new.system_name || ' ' || new.other_names, new.parent_deposit || ' ' || new.basin,
    new.reach || ' ' || new.unit || ' ' || new.plate, new.source || ' ' || new.source_doi,
    new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes);
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;
CREATE TRIGGER hidden_rows_delete AFTER DELETE ON hidden_rows BEGIN
  DELETE FROM hidden_search WHERE rowid = old.id;
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;
CREATE TRIGGER hidden_rows_update AFTER UPDATE ON hidden_rows BEGIN
  DELETE FROM hidden_search WHERE rowid = old.id;
  INSERT INTO hidden_search (rowid, names, places, reach, source, notes) VALUES (new.id, new.slug || ' ' || new.system_name || ' ' || new.other_names, new.parent_deposit || ' ' || new.basin,
    new.reach || ' ' || new.unit || ' ' || new.plate, new.source || ' ' || new.source_doi,
    new.slope_source || ' ' || new.size_source || ' ' || new.contributor || ' ' || new.notes);
  UPDATE counters SET value = value + 1 WHERE name = 'hidden';
END;
CREATE TRIGGER hidden_row_people_insert AFTER INSERT ON hidden_row_people BEGIN UPDATE counters SET value = value + 1 WHERE name = 'hidden'; END;
CREATE TRIGGER hidden_row_people_delete AFTER DELETE ON hidden_row_people BEGIN UPDATE counters SET value = value + 1 WHERE name = 'hidden'; END;
