package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"strconv"
	"time"
)

// Recomputation is one measuring again of every stored centreline with one
// set of settings.
type Recomputation struct {
	Name     string // in its address, made from Title
	Title    string
	Why      string
	Settings string // planform settings, JSON
	State    string // running, cancelled, done
	Revision int64  // of the catalogue when it was asked for
	Program  string
	By       string // credit line, "" = the command line
	At       time.Time
	Ended    time.Time // zero while it runs
	Lines    int       // lines it is about
	Reached  int       // lines reached so far
}

// LineToMeasure is a stored line with what its record says.
type LineToMeasure struct {
	Centreline
	Measured     string // measurement the line stands for, "" if none
	Recorded     Number // its sinuosity as recorded
	RecordedKind string
	WidthM       Number // channel width of that measurement, m
}

// Levels are the sinuosities of one line; a level that cannot be had is not
// given.
type Levels struct{ Reach, Mean, P90, Peak, Standardised Number }

// RecomputedLine is what one line gave.
type RecomputedLine struct {
	Line         int64 // id of the centreline
	System       string
	SystemName   string // as it is now
	Measurement  string
	Recorded     Number
	RecordedKind string
	Old, New     Levels
	OldWindows   int
	Low, High    Number // of the new peak under half and double the window and the smoothing
	WindowM      Number
	Sinuosities  []float64
	Settings     string // JSON
	Remark       string
	Invented     bool // its measurement was drawn for the demo
}

// StartRecomputation makes a new recomputation about the lines stored now, and
// returns its name. A name that is taken is a Conflict.
func (s *Store) StartRecomputation(ctx context.Context, r Recomputation, by int64) (string, error) {
	r.Name, r.Title, r.Why = Slug(r.Title), CleanText(r.Title), CleanText(r.Why)
	switch {
	case r.Title == "" || r.Name == "":
		return "", &Error{Code: Invalid, Field: "name", Message: "the recomputation needs a name with letters or digits in it"}
	case len([]rune(r.Title)) > 200 || len(r.Name) > 80:
		return "", &Error{Code: Invalid, Field: "name", Message: "the name is longer than 80 letters"}
	case len([]rune(r.Why)) > 2000:
		return "", &Error{Code: Invalid, Field: "why", Message: "the note is longer than 2,000 characters"}
	}
	return r.Name, s.write(ctx, func(tx *sql.Tx) error {
		var taken, lines int
		if err := tx.QueryRowContext(ctx, `SELECT (SELECT count(*) FROM recomputations WHERE name = ?), (SELECT count(*) FROM centrelines)`, r.Name).Scan(&taken, &lines); err != nil {
			return err
		}
		switch {
		case taken > 0:
			return &Error{Code: Conflict, Field: "name", Message: "a recomputation named " + strconv.Quote(r.Name) + " is kept already and keeps its settings; choose another name"}
		case lines == 0:
			return &Error{Code: Invalid, Field: "name", Message: "no centreline is stored in this catalogue yet, so there is nothing to measure again"}
		}
		_, err := tx.ExecContext(ctx, `INSERT INTO recomputations (name, title, why, settings, state, last_line, revision, program, account_id, created_at)
			VALUES (?, ?, ?, ?, 'running', (SELECT max(id) FROM centrelines), (SELECT coalesce(max(id), 0) FROM revisions), ?, ?, ?)`,
			r.Name, r.Title, r.Why, r.Settings, r.Program, orNull(by), s.stamp())
		return err
	})
}

const recomputationColumns = `r.name, r.title, r.why, r.settings, r.state, r.revision, r.program, coalesce(p.credit, ''), r.created_at, r.ended_at,
	(SELECT count(*) FROM centrelines l WHERE l.id <= r.last_line), (SELECT count(*) FROM recomputed_values v WHERE v.recomputation = r.name)`

const fromRecomputations = ` FROM recomputations r LEFT JOIN accounts p ON p.id = r.account_id`

func scanRecomputation(scan func(...any) error) (Recomputation, error) {
	var r Recomputation
	var at, ended string
	err := scan(&r.Name, &r.Title, &r.Why, &r.Settings, &r.State, &r.Revision, &r.Program, &r.By, &at, &ended, &r.Lines, &r.Reached)
	r.At, r.Ended = parseTime(at), parseTime(ended)
	return r, err
}

// Recomputations lists them, newest first.
func (s *Store) Recomputations(ctx context.Context) ([]Recomputation, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT `+recomputationColumns+fromRecomputations+` ORDER BY r.created_at DESC, r.name`)
	if err != nil {
		return nil, fault("recomputations", err)
	}
	defer rows.Close()
	var out []Recomputation
	for rows.Next() {
		r, err := scanRecomputation(rows.Scan)
		if err != nil {
			return nil, fault("recomputations", err)
		}
		out = append(out, r)
	}
	return out, fault("recomputations", rows.Err())
}

// Recomputation returns one of them and how far it has come.
func (s *Store) Recomputation(ctx context.Context, name string) (*Recomputation, error) {
	r, err := scanRecomputation(s.r.QueryRowContext(ctx, `SELECT `+recomputationColumns+fromRecomputations+` WHERE r.name = ?`, name).Scan)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, &Error{Code: NotFound, Message: "there is no recomputation named " + strconv.Quote(Clip(name))}
	}
	if err != nil {
		return nil, fault("recomputation", err)
	}
	return &r, nil
}

// standsFor is the measurement a line l stands for: its own, or the only one
// of its system; the same rule as for the windows of a row.
const standsFor = `coalesce(l.measurement_id, (SELECT CASE count(*) WHEN 1 THEN min(o.id) END FROM measurements o WHERE o.system_id = l.system_id))`

// linesBytes is about how much of lines is held at once, bytes.
const linesBytes = 16 << 20

// LinesToMeasure returns the next lines a recomputation has not reached, past
// the line numbered after, in the order in which they were stored: at most
// limit of them, and fewer where they are long.
func (s *Store) LinesToMeasure(ctx context.Context, name string, after int64, limit int) ([]LineToMeasure, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT l.id, s.slug, coalesce(m.measurement, ''), l.line, l.settings, l.sinuosities, m.sinuosity, coalesce(m.sinuosity_kind, ''), m.channel_width_m
		FROM recomputations r JOIN centrelines l ON l.id <= r.last_line JOIN systems s ON s.id = l.system_id LEFT JOIN measurements m ON m.id = `+standsFor+`
		WHERE r.name = ? AND l.id > ? AND NOT EXISTS (SELECT 1 FROM recomputed_values v WHERE v.recomputation = r.name AND v.centreline_id = l.id)
		ORDER BY l.id LIMIT ?`, name, after, limit)
	if err != nil {
		return nil, fault("lines", err)
	}
	defer rows.Close()
	var out []LineToMeasure
	for bytes := 0; bytes < linesBytes && rows.Next(); {
		var l LineToMeasure
		var windows string
		if err := rows.Scan(&l.ID, &l.System, &l.Measured, &l.Line, &l.Settings, &windows, &l.Recorded, &l.RecordedKind, &l.WidthM); err != nil {
			return nil, fault("lines", err)
		}
		if err := json.Unmarshal([]byte(windows), &l.Sinuosities); err != nil {
			return nil, fault("lines", err)
		}
		out, bytes = append(out, l), bytes+len(l.Line)
	}
	return out, fault("lines", rows.Err())
}

// KeepRecomputed stores what lines gave, and marks the recomputation done when
// it has reached them all. It returns the state after that. A recomputation
// that was cancelled meanwhile takes nothing: its state says so. A line that
// is there already is left as it is, so that two programs may run one
// recomputation.
func (s *Store) KeepRecomputed(ctx context.Context, name string, lines []RecomputedLine) (state string, err error) {
	err = s.write(ctx, func(tx *sql.Tx) error {
		err := tx.QueryRowContext(ctx, `SELECT state FROM recomputations WHERE name = ?`, name).Scan(&state)
		if errors.Is(err, sql.ErrNoRows) {
			state = "cancelled" // and discarded
			return nil
		}
		if err != nil || state != "running" {
			return err
		}
		for _, l := range lines {
			if err := keepRecomputed(ctx, tx, name, l); err != nil {
				return err
			}
		}
		var left bool
		if err := tx.QueryRowContext(ctx, `SELECT EXISTS (SELECT 1 FROM recomputations r JOIN centrelines l ON l.id <= r.last_line
			WHERE r.name = ? AND NOT EXISTS (SELECT 1 FROM recomputed_values v WHERE v.recomputation = r.name AND v.centreline_id = l.id))`, name).Scan(&left); err != nil || left {
			return err
		}
		state = "done"
		_, err = tx.ExecContext(ctx, `UPDATE recomputations SET state = 'done', ended_at = ? WHERE name = ?`, s.stamp(), name)
		return err
	})
	return state, err
}

func keepRecomputed(ctx context.Context, tx *sql.Tx, name string, l RecomputedLine) error {
	windows := []byte("[]")
	if len(l.Sinuosities) > 0 {
		var err error
		if windows, err = json.Marshal(l.Sinuosities); err != nil {
			return err
		}
	}
	_, err := tx.ExecContext(ctx, `INSERT INTO recomputed_values (recomputation, centreline_id, system, measurement, recorded, recorded_kind,
		old_reach, old_mean, old_p90, old_peak, old_standardised, old_windows, new_reach, new_mean, new_p90, new_peak, new_standardised,
		new_low, new_high, window_m, sinuosities, settings, remark)
		VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?) ON CONFLICT DO NOTHING`,
		name, l.Line, l.System, l.Measurement, l.Recorded, l.RecordedKind,
		l.Old.Reach, l.Old.Mean, l.Old.P90, l.Old.Peak, l.Old.Standardised, l.OldWindows,
		l.New.Reach, l.New.Mean, l.New.P90, l.New.Peak, l.New.Standardised,
		l.Low, l.High, l.WindowM, string(windows), l.Settings, l.Remark)
	return err
}

// CancelRecomputation stops one that runs; what it has reached is kept, so
// that it can be resumed.
func (s *Store) CancelRecomputation(ctx context.Context, name string) error {
	return s.moveRecomputation(ctx, name, "running", "cancelled", s.stamp())
}

// ResumeRecomputation lets a cancelled one run on.
func (s *Store) ResumeRecomputation(ctx context.Context, name string) error {
	return s.moveRecomputation(ctx, name, "cancelled", "running", "")
}

func (s *Store) moveRecomputation(ctx context.Context, name, from, to, ended string) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		var state string
		err := tx.QueryRowContext(ctx, `SELECT state FROM recomputations WHERE name = ?`, name).Scan(&state)
		switch {
		case errors.Is(err, sql.ErrNoRows):
			return &Error{Code: NotFound, Message: "there is no recomputation named " + strconv.Quote(Clip(name))}
		case err != nil:
			return err
		case state == to:
			return nil // sent twice
		case state != from:
			return &Error{Code: Conflict, Message: "this recomputation is " + state + " by now"}
		}
		_, err = tx.ExecContext(ctx, `UPDATE recomputations SET state = ?, ended_at = ? WHERE name = ?`, to, ended, name)
		return err
	})
}

// DiscardRecomputation takes a cancelled one away, so that its name is free
// again. A finished one stays: analyses may rest on it.
func (s *Store) DiscardRecomputation(ctx context.Context, name string) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		res, err := tx.ExecContext(ctx, `DELETE FROM recomputations WHERE name = ? AND state = 'cancelled'`, name)
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n == 1 {
			return err
		}
		return &Error{Code: Conflict, Message: "only a cancelled recomputation can be discarded: a finished one may carry an analysis"}
	})
}

// RecomputedLines returns what a recomputation gave so far, by system and
// line.
func (s *Store) RecomputedLines(ctx context.Context, name string) ([]RecomputedLine, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT v.centreline_id, coalesce(s.slug, v.system), coalesce(s.system_name, v.system), v.measurement, v.recorded, v.recorded_kind,
			v.old_reach, v.old_mean, v.old_p90, v.old_peak, v.old_standardised, v.old_windows,
			v.new_reach, v.new_mean, v.new_p90, v.new_peak, v.new_standardised, v.new_low, v.new_high, v.window_m, v.sinuosities, v.settings, v.remark,
			EXISTS (SELECT 1 FROM measurements m WHERE m.system_id = l.system_id AND (m.id = l.measurement_id OR l.measurement_id IS NULL) AND substr(m.notes, 1, ?1) = ?2)
				OR EXISTS (SELECT 1 FROM withdrawn_measurements w WHERE w.measurement = v.measurement AND substr(w.record ->> 'notes', 1, ?1) = ?2)
		FROM recomputed_values v LEFT JOIN centrelines l ON l.id = v.centreline_id LEFT JOIN systems s ON s.id = l.system_id
		WHERE v.recomputation = ?3 ORDER BY coalesce(s.system_name, v.system), v.system, v.centreline_id`, len(InventedMark), InventedMark, name)
	if err != nil {
		return nil, fault("recomputed lines", err)
	}
	defer rows.Close()
	var out []RecomputedLine
	for rows.Next() {
		var l RecomputedLine
		var windows string
		err := rows.Scan(&l.Line, &l.System, &l.SystemName, &l.Measurement, &l.Recorded, &l.RecordedKind,
			&l.Old.Reach, &l.Old.Mean, &l.Old.P90, &l.Old.Peak, &l.Old.Standardised, &l.OldWindows,
			&l.New.Reach, &l.New.Mean, &l.New.P90, &l.New.Peak, &l.New.Standardised, &l.Low, &l.High, &l.WindowM, &windows, &l.Settings, &l.Remark, &l.Invented)
		if err == nil {
			err = json.Unmarshal([]byte(windows), &l.Sinuosities)
		}
		if err != nil {
			return nil, fault("recomputed lines", err)
		}
		out = append(out, l)
	}
	return out, fault("recomputed lines", rows.Err())
}

// RecomputedByMeasurement returns what a finished recomputation gave for each
// measurement that a line of it stands for: its own newest line, else that of
// its system. Lines that could not be measured are not in it.
func (s *Store) RecomputedByMeasurement(ctx context.Context, name string) (map[string]RecomputedLine, error) {
	r, err := s.Recomputation(ctx, name)
	if err != nil {
		return nil, err
	}
	if r.State != "done" {
		return nil, &Error{Code: Conflict, Field: "recomputed", Message: "the recomputation " + strconv.Quote(r.Name) + " is not finished (" + r.State + ", " +
			strconv.Itoa(r.Reached) + " of " + strconv.Itoa(r.Lines) + " lines); wait for it, or resume it"}
	}
	rows, err := s.r.QueryContext(ctx, `SELECT m.measurement, v.centreline_id, v.new_reach, v.new_mean, v.new_p90, v.new_peak, v.sinuosities
		FROM recomputed_values v JOIN centrelines l ON l.id = v.centreline_id JOIN measurements m ON m.id = `+standsFor+`
		WHERE v.recomputation = ? AND (v.new_reach IS NOT NULL OR v.sinuosities <> '[]') ORDER BY l.measurement_id IS NOT NULL, l.id`, name)
	if err != nil {
		return nil, fault("recomputed", err)
	}
	defer rows.Close()
	out := map[string]RecomputedLine{}
	for rows.Next() {
		var l RecomputedLine
		var windows string
		err := rows.Scan(&l.Measurement, &l.Line, &l.New.Reach, &l.New.Mean, &l.New.P90, &l.New.Peak, &windows)
		if err == nil {
			err = json.Unmarshal([]byte(windows), &l.Sinuosities)
		}
		if err != nil {
			return nil, fault("recomputed", err)
		}
		out[l.Measurement] = l
	}
	return out, fault("recomputed", rows.Err())
}
