package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"math"
	"slices"
	"strings"
	"time"
)

// LineFeature is a stored centreline with what names it.
type LineFeature struct {
	Centreline
	SystemName   string
	Kind         string
	Sinuosity    Number // of its measurement
	MeasuredLine string
	SinuosityOf  string // kind of sinuosity of its measurement
	Source       string
	SourceDOI    string
	Contributor  string
	Licence      string
	Invented     bool
	Updated      time.Time
}

// lineColumns name a line by its measurement, or, when it belongs to the system
// only, by the system's best.
const lineColumns = `l.id, s.slug, coalesce(o.measurement, ''), l.line, l.settings, l.sinuosities, l.created_at, s.system_name, s.kind,
	m.sinuosity, m.measured_line, m.sinuosity_kind, c.citation, c.doi, m.contributor, m.licence, m.notes`

const fromLines = ` FROM centrelines l JOIN systems s ON s.id = l.system_id LEFT JOIN measurements o ON o.id = l.measurement_id
	JOIN measurements m ON m.id = coalesce(l.measurement_id, (SELECT b.id FROM measurements b WHERE b.system_id = l.system_id ORDER BY b.grade_rank, b.id DESC LIMIT 1))
	JOIN sources c ON c.id = m.source_id`

// lineCondition turns the query into a condition on lines: of systems with a
// measurement under the filter. The box is asked of the line itself, roughly
// here and exactly by inBox.
func (f *FeatureQuery) lineCondition() (*where, error) {
	box := f.BBox
	g := f.Filter
	g.BBox = nil
	rows, err := g.condition()
	if err != nil {
		return nil, err
	}
	w := &where{}
	if len(rows.parts) > 0 {
		w.add("l.system_id IN (SELECT m.system_id"+fromRows+rows.String()+")", rows.args...)
	}
	w.between("l.created_at", f.From, f.To)
	if box != nil && f.Release == "" {
		const places = "SELECT id FROM line_places WHERE north >= ? AND south <= ? AND east >= ? AND west <= ?"
		east := box.East
		if box.West > box.East {
			east += 360
		}
		var args []any
		var parts []string
		for _, turn := range []float64{-360, 0, 360} {
			parts = append(parts, places)
			args = append(args, box.South, box.North, box.West+turn, east+turn)
		}
		w.add("l.id IN ("+strings.Join(parts, " UNION ")+")", args...)
	}
	return w, nil
}

// LineFeatures returns a piece of the lines under the query.
func (s *Store) LineFeatures(ctx context.Context, f FeatureQuery) (out []LineFeature, more bool, err error) {
	w, err := f.lineCondition()
	if err != nil {
		return nil, false, err
	}
	tail := f.paged(w, "l.id")
	tail = tail[:strings.LastIndex(tail, " LIMIT")] // the exact box comes after
	err = s.eachLine(ctx, f.Release, w.String()+tail, w.args, func(l *LineFeature) (bool, error) {
		if inBox(l.Line, f.BBox) {
			out = append(out, *l)
		}
		return len(out) <= f.Limit, nil
	})
	out, more = piece(&f, out)
	return out, more, err
}

// CountLines returns how many lines are under the query, whatever its piece.
func (s *Store) CountLines(ctx context.Context, f FeatureQuery) (n int, err error) {
	w, err := f.lineCondition()
	if err != nil {
		return 0, err
	}
	if f.BBox != nil {
		err = s.eachLine(ctx, f.Release, w.String(), w.args, func(l *LineFeature) (bool, error) {
			if inBox(l.Line, f.BBox) {
				n++
			}
			return true, nil
		})
		return n, err
	}
	q, err := at(ctx, s.r, f.Release)
	if err == nil {
		err = q.QueryRowContext(ctx, "SELECT count(*)"+fromLines+w.String(), w.args...).Scan(&n)
	}
	return n, fault("lines", err)
}

// LineFeature returns one line by its number.
func (s *Store) LineFeature(ctx context.Context, id int64, release string) (*LineFeature, error) {
	var out *LineFeature
	err := s.eachLine(ctx, release, " WHERE l.id = ?", []any{id}, func(l *LineFeature) (bool, error) {
		out = l
		return true, nil
	})
	if err == nil && out == nil {
		err = &Error{Code: NotFound, Field: "centreline", Message: "there is no centreline of that number"}
	}
	return out, err
}

// EachLine visits the lines of a release, or with "" of the catalogue as it is,
// in the order in which they were stored.
func (s *Store) EachLine(ctx context.Context, f Filter, visit func(*LineFeature) error) error {
	q := FeatureQuery{Filter: f}
	w, err := q.lineCondition()
	if err != nil {
		return err
	}
	return s.eachLine(ctx, f.Release, w.String()+" ORDER BY l.id", w.args, func(l *LineFeature) (bool, error) {
		if !inBox(l.Line, f.BBox) {
			return true, nil
		}
		return true, visit(l)
	})
}

// eachLine visits until visit says false.
func (s *Store) eachLine(ctx context.Context, release, tail string, args []any, visit func(*LineFeature) (bool, error)) error {
	q, err := at(ctx, s.out, release)
	if err != nil {
		return fault("lines", err)
	}
	rows, err := q.QueryContext(ctx, "SELECT "+lineColumns+fromLines+tail, args...)
	if err != nil {
		return fault("lines", err)
	}
	defer rows.Close()
	for rows.Next() {
		l, err := scanLine(rows)
		if err != nil {
			return fault("lines", err)
		}
		if on, err := visit(l); err != nil || !on {
			return fault("lines", err)
		}
	}
	return fault("lines", rows.Err())
}

func scanLine(rows *sql.Rows) (*LineFeature, error) {
	var l LineFeature
	var windows, at, notes string
	err := rows.Scan(&l.ID, &l.System, &l.Measurement, &l.Line, &l.Settings, &windows, &at, &l.SystemName, &l.Kind,
		&l.Sinuosity, &l.MeasuredLine, &l.SinuosityOf, &l.Source, &l.SourceDOI, &l.Contributor, &l.Licence, &notes)
	if err != nil {
		return nil, err
	}
	l.Updated, l.Invented = parseTime(at), strings.HasPrefix(notes, InventedMark)
	return &l, json.Unmarshal([]byte(windows), &l.Sinuosities)
}

// Positions are those of a GeoJSON LineString: longitude, latitude and, where
// given, elevation.
func Positions(line string) ([][]float64, error) {
	var g struct{ Coordinates [][]float64 }
	err := json.Unmarshal([]byte(line), &g)
	return g.Coordinates, err
}

// inBox says whether a line has a point in the box; nil holds everything. Each
// segment runs the shorter way round in longitude.
func inBox(line string, box *BBox) bool {
	if box == nil {
		return true
	}
	p, err := Positions(line)
	if err != nil || len(p) == 0 {
		return false
	}
	west, east := box.West, box.East
	if west > east {
		east += 360
	}
	x := p[0][0]
	for i := range p {
		j := max(i-1, 0)
		from := x
		x = from + math.Remainder(p[i][0]-p[j][0], 360)
		for _, turn := range []float64{-720, -360, 0, 360, 720} {
			if crosses(from, p[j][1], x, p[i][1], west+turn, box.South, east+turn, box.North) {
				return true
			}
		}
	}
	return false
}

// crosses says whether a segment has a point in a closed rectangle, by cutting
// it with the four sides (Liang and Barsky, ACM Transactions on Graphics 3:1
// (1984), doi 10.1145/357332.357333).
func crosses(x0, y0, x1, y1, west, south, east, north float64) bool {
	from, to := 0.0, 1.0
	for _, side := range [][2]float64{{x0 - x1, x0 - west}, {x1 - x0, east - x0}, {y0 - y1, y0 - south}, {y1 - y0, north - y0}} {
		p, q := side[0], side[1]
		switch {
		case p == 0 && q < 0:
			return false
		case p < 0:
			from = max(from, q/p)
		case p > 0:
			to = min(to, q/p)
		}
	}
	return from <= to
}

// CutAtAntimeridian brings the longitudes of a line into -180..180 and cuts it
// where it crosses 180 degrees, as RFC 7946 section 3.1.9 asks: the parts end
// and begin on the meridian, latitude and elevation taken linearly there. A
// line that does not cross comes back as one part.
func CutAtAntimeridian(positions [][]float64) [][][]float64 {
	var parts [][][]float64
	var part [][]float64
	for i, p := range positions {
		q := slices.Clone(p)
		for q[0] > 180 {
			q[0] -= 360
		}
		for q[0] < -180 {
			q[0] += 360
		}
		if i > 0 {
			before := part[len(part)-1]
			if step := q[0] - before[0]; math.Abs(step) > 180 {
				side := math.Copysign(180, before[0])
				t := (side - before[0]) / (math.Remainder(step, 360))
				at := make([]float64, min(len(q), len(before)))
				for k := range at {
					at[k] = before[k] + t*(q[k]-before[k])
				}
				at[0] = side
				if before[0] != side {
					part = append(part, at)
				}
				if len(part) > 1 {
					parts = append(parts, part)
				}
				part = nil
				if q[0] != -side {
					other := slices.Clone(at)
					other[0] = -side
					part = append(part, other)
				}
			}
		}
		part = append(part, q)
	}
	if len(part) > 1 || len(parts) == 0 {
		parts = append(parts, part)
	}
	return parts
}

// LineExtents is Extents of the stored lines.
func (s *Store) LineExtents(ctx context.Context, release string) (e Extent, err error) {
	e.BBox = BBox{West: 180, South: 90, East: -180, North: -90}
	err = s.EachLine(ctx, Filter{Release: release}, func(l *LineFeature) error {
		if e.Count == 0 || l.Updated.Before(e.From) {
			e.From = l.Updated
		}
		if l.Updated.After(e.To) {
			e.To = l.Updated
		}
		e.Count++
		positions, err := Positions(l.Line)
		for _, part := range CutAtAntimeridian(positions) {
			for _, p := range part {
				e.BBox.West, e.BBox.East = min(e.BBox.West, p[0]), max(e.BBox.East, p[0])
				e.BBox.South, e.BBox.North = min(e.BBox.South, p[1]), max(e.BBox.North, p[1])
			}
		}
		return err
	})
	return e, err
}
