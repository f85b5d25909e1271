package catalogue

import (
	"context"
	"database/sql"
	"slices"
	"time"
)

// FeatureQuery asks for a piece of one kind of record in the order of
// acceptance, which never changes: what is added comes at the end.
type FeatureQuery struct {
	Filter
	// From and To bound when the record was accepted or last changed, both
	// inclusive, to the second; the zero time is open.
	From, To time.Time
	After    int64 // only records after this position; 0 = from the start
	Before   int64 // only the last ones before this position; 0 = not asked
	Limit    int   // at least 1
}

// Feature is one measurement with its position and when it was accepted or
// last changed.
type Feature struct {
	Row
	Position int64
	Updated  time.Time
}

// when is the SQL of when a row was accepted or last changed.
const when = "max(m.updated_at, s.updated_at)"

// between adds the bounds of time on an expression of RFC 3339 text in UTC.
func (w *where) between(expr string, from, to time.Time) {
	if !from.IsZero() {
		w.add(expr+" >= ?", from.Add(time.Second-1).UTC().Format(time.RFC3339))
	}
	if !to.IsZero() {
		w.add(expr+" <= ?", to.UTC().Format(time.RFC3339))
	}
}

// paged adds the bounds of the piece and returns its order and limit; one more
// than asked for shows whether there is more.
func (f *FeatureQuery) paged(w *where, key string) (tail string) {
	w.add(key+" > ?", f.After)
	if f.Before > 0 {
		w.add(key+" < ?", f.Before)
		return " ORDER BY " + key + " DESC LIMIT ?"
	}
	return " ORDER BY " + key + " LIMIT ?"
}

// piece cuts what was read to the limit and puts it in order; more says
// whether records follow in the direction of reading.
func piece[T any](f *FeatureQuery, read []T) (kept []T, more bool) {
	if more = len(read) > f.Limit; more {
		read = read[:f.Limit]
	}
	if f.Before > 0 {
		slices.Reverse(read)
	}
	return read, more
}

// MeasurementFeatures returns a piece of the measurements under the query, and
// how many there are in all.
func (s *Store) MeasurementFeatures(ctx context.Context, f FeatureQuery) (out []Feature, more bool, err error) {
	err = s.features(ctx, f, func(q querier, w *where) error {
		tail := f.paged(w, "m.id")
		return eachRow(ctx, q, w.String()+tail, append(w.args, f.Limit+1), func(r *Row, meta rowMeta) error {
			out = append(out, Feature{*r, meta.id, meta.time()})
			return nil
		})
	})
	out, more = piece(&f, out)
	return out, more, err
}

// SystemFeatures returns a piece of the systems that have a measurement under
// the query, each by the best-graded, then newest of those.
func (s *Store) SystemFeatures(ctx context.Context, f FeatureQuery) (out []Feature, more bool, err error) {
	err = s.features(ctx, f, func(q querier, w *where) error {
		in := where{parts: slices.Clone(w.parts), args: slices.Clone(w.args)}
		tail := f.paged(&in, "m.system_id")
		rows, err := q.QueryContext(ctx, "SELECT DISTINCT m.system_id"+fromRows+in.String()+tail, append(in.args, f.Limit+1)...)
		if err != nil {
			return err
		}
		ids, err := scanNumbers(rows)
		if err != nil || len(ids) == 0 {
			return err
		}
		first, last := slices.Min(ids), slices.Max(ids)
		w.add("m.system_id BETWEEN ? AND ?", first, last)
		order := " ORDER BY m.system_id, m.grade_rank, m.id DESC"
		if f.Before > 0 {
			order = " ORDER BY m.system_id DESC, m.grade_rank, m.id DESC"
		}
		return eachRow(ctx, q, w.String()+order, w.args, func(r *Row, meta rowMeta) error {
			if n := len(out); n == 0 || out[n-1].Position != meta.systemID {
				out = append(out, Feature{*r, meta.systemID, meta.time()})
			}
			return nil
		})
	})
	out, more = piece(&f, out)
	return out, more, err
}

// features runs fn over one snapshot with the condition of the query.
func (s *Store) features(ctx context.Context, f FeatureQuery, fn func(querier, *where) error) error {
	w, err := f.condition()
	if err != nil {
		return err
	}
	w.between(when, f.From, f.To)
	return s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		return fn(q, w)
	})
}

// CountFeatures returns how many measurements, and how many systems, are under
// the query, whatever its piece.
func (s *Store) CountFeatures(ctx context.Context, f FeatureQuery) (measurements, systems int, err error) {
	err = s.features(ctx, f, func(q querier, w *where) error {
		return q.QueryRowContext(ctx, "SELECT count(*), count(DISTINCT m.system_id)"+fromRows+w.String(), w.args...).Scan(&measurements, &systems)
	})
	return measurements, systems, err
}

func scanNumbers(rows *sql.Rows) ([]int64, error) {
	defer rows.Close()
	var out []int64
	for rows.Next() {
		var n int64
		if err := rows.Scan(&n); err != nil {
			return nil, err
		}
		out = append(out, n)
	}
	return out, rows.Err()
}

// MeasurementFeature returns one measurement by its public id.
func (s *Store) MeasurementFeature(ctx context.Context, id, release string) (*Feature, error) {
	return s.oneFeature(ctx, release, "m.measurement = ?", id, "measurement")
}

// SystemFeature returns one system, by its best-graded, then newest measurement.
func (s *Store) SystemFeature(ctx context.Context, slug, release string) (*Feature, error) {
	return s.oneFeature(ctx, release, "s.slug = ?", slug, "system")
}

func (s *Store) oneFeature(ctx context.Context, release, cond, key, noun string) (*Feature, error) {
	var out *Feature
	err := s.features(ctx, FeatureQuery{Filter: Filter{Release: release}}, func(q querier, w *where) error {
		w.add(cond, key)
		return eachRow(ctx, q, w.String()+" ORDER BY m.grade_rank, m.id DESC LIMIT 1", w.args, func(r *Row, meta rowMeta) error {
			out = &Feature{*r, meta.id, meta.time()}
			if noun == "system" {
				out.Position = meta.systemID
			}
			return nil
		})
	})
	if err == nil && out == nil {
		err = &Error{Code: NotFound, Field: noun, Message: "there is no accepted " + noun + " of that name"}
	}
	return out, err
}

// EachSystem visits each system under the filter by its best-graded, then
// newest measurement, without holding them in memory. Unsorted they come in
// the order of acceptance.
func (s *Store) EachSystem(ctx context.Context, f Filter, visit func(Row) error) error {
	w, err := f.condition()
	if err != nil {
		return err
	}
	order, err := f.orderBy("")
	if err != nil {
		return err
	}
	q, err := at(ctx, s.out, f.Release)
	if err != nil {
		return fault("systems", err)
	}
	// The row of a group with the least number stands for it; ids stay far below
	// 1e12. CROSS JOIN keeps the order of the groups, by system, without sorting
	// whole rows.
	query := "SELECT " + rowColumns + ` FROM (SELECT m.id AS best, min(m.grade_rank * 1000000000000 - m.id)` + fromRows + w.String() + ` GROUP BY m.system_id) b
		CROSS JOIN measurements m ON m.id = b.best JOIN systems s ON s.id = m.system_id JOIN sources c ON c.id = m.source_id`
	if f.Sort != "" {
		query += order
	}
	return fault("systems", scanRows(ctx, q, query, w.args, func(r *Row, _ rowMeta) error { return visit(*r) }))
}

// Extent is where the records under a filter lie and when they were accepted
// or last changed.
type Extent struct {
	BBox     BBox
	From, To time.Time
	Count    int // measurements, or lines
}

// Extents returns those of the systems, and of their measurements, in a release
// or, with "", in the catalogue as it is; without rows their Count is 0.
func (s *Store) Extents(ctx context.Context, release string) (e Extent, err error) {
	var west, south, east, north sql.Null[float64]
	var from, to sql.NullString
	err = s.features(ctx, FeatureQuery{Filter: Filter{Release: release}}, func(q querier, w *where) error {
		const lon = "(m.longitude_deg - 360 * (m.longitude_deg > 180))"
		return q.QueryRowContext(ctx, "SELECT count(*), min("+lon+"), min(m.latitude_deg), max("+lon+"), max(m.latitude_deg), min("+when+"), max("+when+")"+fromRows+w.String(), w.args...).
			Scan(&e.Count, &west, &south, &east, &north, &from, &to)
	})
	e.BBox = BBox{west.V, south.V, east.V, north.V}
	e.From, e.To = parseTime(from.String), parseTime(to.String)
	return e, err
}

// NewSystem is a newly accepted system.
type NewSystem struct {
	Slug, Name string
	At         time.Time // when it was accepted
	Best       Row
}

// NewSystems lists the systems accepted last, newest first.
func (s *Store) NewSystems(ctx context.Context, most int) ([]NewSystem, error) {
	f := Filter{}
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	var out []NewSystem
	err = s.read(ctx, func(tx *sql.Tx) error {
		rows, err := tx.QueryContext(ctx, "SELECT s.id, s.created_at FROM systems s WHERE EXISTS (SELECT 1 FROM (SELECT m.system_id AS y"+fromRows+w.String()+
			") WHERE y = s.id) ORDER BY s.created_at DESC, s.id DESC LIMIT ?", append(w.args, most)...)
		if err != nil {
			return err
		}
		defer rows.Close()
		var ids []int64
		at := map[int64]string{}
		for rows.Next() {
			var id int64
			var text string
			if err := rows.Scan(&id, &text); err != nil {
				return err
			}
			ids, at[id] = append(ids, id), text
		}
		if err := rows.Err(); err != nil || len(ids) == 0 {
			return err
		}
		systems, err := systemsByID(ctx, tx, w, ids)
		for i, y := range systems {
			out = append(out, NewSystem{y.Slug, y.Name, parseTime(at[ids[i]]), y.Best()})
		}
		return err
	})
	return out, err
}
