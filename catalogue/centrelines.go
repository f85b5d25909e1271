package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"math"
	"strconv"
)

func centrelinesOf(ctx context.Context, q querier, slug string) ([]Centreline, error) {
	rows, err := q.QueryContext(ctx, `SELECT l.id, s.slug, coalesce(m.measurement, ''), l.line, l.settings, l.sinuosities
		FROM centrelines l JOIN systems s ON s.id = l.system_id LEFT JOIN measurements m ON m.id = l.measurement_id
		WHERE s.slug = ? ORDER BY l.id`, slug)
	if err != nil {
		return nil, err
	}
	return scanCentrelines(rows)
}

func scanCentrelines(rows *sql.Rows) ([]Centreline, error) {
	defer rows.Close()
	var out []Centreline
	for rows.Next() {
		var l Centreline
		var windows string
		if err := rows.Scan(&l.ID, &l.System, &l.Measurement, &l.Line, &l.Settings, &windows); err != nil {
			return nil, err
		}
		if err := json.Unmarshal([]byte(windows), &l.Sinuosities); err != nil {
			return nil, err
		}
		out = append(out, l)
	}
	return out, rows.Err()
}

// AddCentreline stores a line of a system, or of one of its measurements, and
// returns its id.
func (s *Store) AddCentreline(ctx context.Context, c Centreline, by int64, why string) (id int64, err error) {
	err = s.write(ctx, func(tx *sql.Tx) error {
		id, err = s.applier(tx, by, why).addLine(ctx, c)
		return err
	})
	return id, err
}

func (a *applier) addLine(ctx context.Context, c Centreline) (int64, error) {
	if err := checkLine(&c); err != nil {
		return 0, err
	}
	measurement, err := a.number(ctx, `SELECT id FROM measurements WHERE measurement = ?`, c.Measurement)
	if err != nil {
		return 0, err
	}
	if c.Measurement != "" && measurement == 0 {
		return 0, &Error{Code: NotFound, Field: "measurement", Message: "there is no measurement " + strconv.Quote(Clip(c.Measurement)) + " for this line"}
	}
	system, err := a.systemNamed(ctx, c.System)
	if err == nil && c.System == "" && measurement != 0 {
		system, err = a.number(ctx, `SELECT system_id FROM measurements WHERE id = ?`, measurement)
	}
	if err != nil {
		return 0, err
	}
	if system == 0 {
		return 0, &Error{Code: NotFound, Field: "system", Message: "there is no system " + strconv.Quote(Clip(c.System)) + " for this line"}
	}
	windows := "[]"
	if len(c.Sinuosities) > 0 {
		b, err := json.Marshal(c.Sinuosities)
		if err != nil {
			return 0, err
		}
		windows = string(b)
	}
	id, err := a.exec(ctx, `INSERT INTO centrelines (system_id, measurement_id, line, settings, sinuosities, created_at, id) VALUES (?, ?, ?, ?, ?, ?,
			1 + max(coalesce((SELECT max(id) FROM centrelines), 0), coalesce((SELECT max(id) FROM withdrawn_centrelines), 0)))`,
		system, orNull(measurement), c.Line, c.Settings, windows, a.at)
	if err != nil {
		return 0, err
	}
	_, err = a.revise(ctx, lineRecord(id), "create", "", "", c.Measurement)
	return id, err
}

// maxLine is the most bytes of a stored line.
const maxLine = 64 << 20

// checkLine refuses what is not a GeoJSON LineString of at least two places.
func checkLine(c *Centreline) error {
	bad := func(message string) error {
		return &Error{Code: Invalid, Field: "centreline", Message: message, Expected: "a GeoJSON LineString of at least two positions, longitude before latitude, in WGS84 degrees"}
	}
	if len(c.Line) > maxLine {
		return bad("the line is larger than 64 MB")
	}
	var g struct {
		Type        string
		Coordinates [][]float64
	}
	if err := json.Unmarshal([]byte(c.Line), &g); err != nil {
		return bad("the line cannot be read")
	}
	if g.Type != "LineString" || len(g.Coordinates) < 2 {
		return bad("it is not a line of at least two positions")
	}
	for i, p := range g.Coordinates {
		if len(p) < 2 || math.Abs(p[1]) > 90 || p[0] < -360 || p[0] > 360 {
			return bad("position " + strconv.Itoa(i+1) + " is not a longitude and a latitude")
		}
	}
	if c.Settings != "" && !json.Valid([]byte(c.Settings)) {
		return bad("its settings are not JSON")
	}
	for _, x := range c.Sinuosities {
		if math.IsNaN(x) || math.IsInf(x, 0) || x < 1 {
			return bad("a window sinuosity is below 1 or not a number")
		}
	}
	return nil
}
