package catalogue

import (
	"context"
	"database/sql"
)

// LinesIn returns the stored lines of the systems under the filter whose box
// touches b, at most limit of them by id, and how many there are. The filter's
// own page and order are not used.
func (s *Store) LinesIn(ctx context.Context, f Filter, b BBox, limit int) (lines []Centreline, total int, err error) {
	w, err := f.condition()
	if err != nil {
		return nil, 0, err
	}
	in, args := "l.system_id IN (SELECT m.system_id"+fromRows+w.String()+")", append([]any{}, w.args...)
	east := b.East
	if b.West > b.East {
		east += 360
	}
	if f.Release == "" {
		// The R*Tree is of the lines as they are now. A line over the
		// antimeridian may be stored past 180 degrees: ask there too.
		in += ` AND l.id IN (SELECT id FROM line_places WHERE south <= ? AND north >= ? AND (west <= ? AND east >= ? OR west <= ? AND east >= ? OR west <= ? AND east >= ?))`
		args = append(args, b.North, b.South, east, b.West, east-360, b.West-360, east+360, b.West+360)
	}
	err = s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		if err := q.QueryRowContext(ctx, `SELECT count(*) FROM centrelines l WHERE `+in, args...).Scan(&total); err != nil {
			return err
		}
		rows, err := q.QueryContext(ctx, `SELECT l.id, s.slug, coalesce(m.measurement, ''), l.line, l.settings, l.sinuosities
			FROM centrelines l JOIN systems s ON s.id = l.system_id LEFT JOIN measurements m ON m.id = l.measurement_id
			WHERE `+in+` ORDER BY l.id LIMIT ?`, append(args, limit)...)
		if err != nil {
			return err
		}
		lines, err = scanCentrelines(rows)
		return err
	})
	return lines, total, err
}
