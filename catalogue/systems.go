package catalogue

import (
	"context"
	"database/sql"
	"slices"
	"sort"
	"strings"
)

// Systems returns one page of the systems that have a measurement under the
// filter, with the total number of such systems. Each holds its measurements
// under the filter, best-graded first; sorting uses the first of them.
func (s *Store) Systems(ctx context.Context, f Filter) ([]System, int, error) {
	if _, _, err := f.sortColumn("system"); err != nil {
		return nil, 0, err
	}
	var systems []System
	var total int
	err := s.indexed(ctx, &f, func(q querier, ix *rowIndex) error {
		in, err := ix.match(ctx, q, &f)
		if err != nil {
			return err
		}
		var page []int32
		if page, total, err = ix.page(ctx, q, &f, in); err != nil || len(page) == 0 {
			return err
		}
		systems, err = ix.read(ctx, q, in, page)
		return err
	})
	return systems, total, err
}

// systemsByID reads the systems in the order of ids, with their rows under w.
func systemsByID(ctx context.Context, q querier, w *where, ids []int64) ([]System, error) {
	place := make(map[int64]int, len(ids))
	in := where{parts: slices.Clone(w.parts), args: slices.Clone(w.args)}
	args := make([]any, len(ids))
	for i, id := range ids {
		place[id] = i
		args[i] = id
	}
	in.add("m.system_id IN (?"+strings.Repeat(", ?", len(ids)-1)+")", args...)
	systems := make([]System, len(ids))
	err := eachRow(ctx, q, in.String()+" ORDER BY m.system_id, m.grade_rank, m.id DESC", in.args, func(r *Row, meta rowMeta) error {
		systems[place[meta.systemID]].take(r, meta)
		return nil
	})
	return systems, err
}

func (y *System) take(r *Row, meta rowMeta) {
	y.Slug, y.Name = r.System, r.SystemName
	y.Measurements = append(y.Measurements, *r)
	y.Revision = max(y.Revision, int(meta.revision))
	if t := meta.time(); t.After(y.UpdatedAt) {
		y.UpdatedAt = t
	}
}

// System returns everything the page of one system shows.
func (s *Store) System(ctx context.Context, slug string) (*Detail, error) {
	return s.SystemAt(ctx, slug, "")
}

// SystemAt is System as of a release, "" for the catalogue as it is now.
func (s *Store) SystemAt(ctx context.Context, slug, release string) (*Detail, error) {
	var d Detail
	err := s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, release)
		if err != nil {
			return err
		}
		err = eachRow(ctx, q, " WHERE s.slug = ? ORDER BY m.grade_rank, m.id DESC", []any{slug}, func(r *Row, meta rowMeta) error {
			d.take(r, meta)
			return nil
		})
		if err != nil {
			return err
		}
		if len(d.Measurements) == 0 {
			return noSuchSystem(release)
		}
		if d.Sources, err = sourcesOf(ctx, q, slug); err != nil {
			return err
		}
		if d.Centrelines, err = centrelinesOf(ctx, q, slug); err != nil {
			return err
		}
		if release == "" {
			if err = d.takeGone(ctx, tx, slug); err != nil {
				return err
			}
		}
		if d.History, err = historyOf(ctx, tx, &d); err != nil || release == "" {
			return err
		}
		return d.historyUntil(ctx, tx, release)
	})
	if err != nil {
		return nil, err
	}
	return &d, nil
}

func noSuchSystem(release string) error {
	e := &Error{Code: NotFound, Message: "there is no accepted system of that name", Field: "system"}
	if release != "" {
		e.Message = "there is no system of that name in release " + release
	}
	return e
}

// historyUntil leaves out what happened after the release.
func (d *Detail) historyUntil(ctx context.Context, q querier, release string) error {
	var last int64
	if err := q.QueryRowContext(ctx, `SELECT revision FROM releases WHERE name = ?`, release).Scan(&last); err != nil {
		return err
	}
	d.History = slices.DeleteFunc(d.History, func(v Revision) bool { return v.ID > last })
	return nil
}

func sourcesOf(ctx context.Context, q querier, slug string) ([]Source, error) {
	rows, err := q.QueryContext(ctx, `SELECT DISTINCT c.id, c.citation, c.doi`+fromRows+` WHERE s.slug = ? ORDER BY c.citation, c.doi`, slug)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []Source
	for rows.Next() {
		var x Source
		if err := rows.Scan(&x.ID, &x.Citation, &x.DOI); err != nil {
			return nil, err
		}
		out = append(out, x)
	}
	return out, rows.Err()
}

// historyOf returns the revisions of the system and of those merged into it, of
// its measurements, also the withdrawn ones, and of its lines, newest first.
func historyOf(ctx context.Context, q querier, d *Detail) ([]Revision, error) {
	records := []string{"system:" + d.Slug}
	for _, slug := range d.Merged {
		records = append(records, "system:"+slug)
	}
	for _, r := range d.Measurements {
		records = append(records, "measurement:"+r.Measurement)
	}
	for _, w := range d.Withdrawn {
		records = append(records, "measurement:"+w.Row.Measurement)
		gone, err := goneLines(ctx, q, w.Row.Measurement)
		if err != nil {
			return nil, err
		}
		records = append(records, gone...)
	}
	for _, l := range d.Centrelines {
		records = append(records, lineRecord(l.ID))
	}
	var out []Revision
	for _, rec := range records {
		h, err := revisionsOf(ctx, q, rec)
		if err != nil {
			return nil, err
		}
		out = append(out, h...)
	}
	sort.Slice(out, func(i, j int) bool { return out[i].ID > out[j].ID })
	return out, nil
}

// takeGone fills in what is no longer part of the catalogue, or of its own.
func (d *Detail) takeGone(ctx context.Context, q querier, slug string) (err error) {
	if d.Merged, err = mergedOf(ctx, q, slug); err != nil {
		return err
	}
	d.Withdrawn, err = withdrawnWhere(ctx, q, family, ` WHERE w.system_id IN (SELECT id FROM family) ORDER BY w.revision DESC`, slug)
	return err
}

// goneLines are the lines that went with a measurement, as records.
func goneLines(ctx context.Context, q querier, measurement string) (out []string, err error) {
	rows, err := q.QueryContext(ctx, `SELECT l.id FROM withdrawn_centrelines l JOIN withdrawn_measurements w ON w.id = l.measurement_id WHERE w.measurement = ?`, measurement)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		var id int64
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		out = append(out, lineRecord(id))
	}
	return out, rows.Err()
}

// mergedOf lists the slugs of the systems that are part of one by now.
func mergedOf(ctx context.Context, q querier, slug string) (out []string, err error) {
	rows, err := q.QueryContext(ctx, family+`SELECT slug FROM systems WHERE id IN (SELECT id FROM family) AND slug <> ?1 ORDER BY slug`, slug)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		var one string
		if err := rows.Scan(&one); err != nil {
			return nil, err
		}
		out = append(out, one)
	}
	return out, rows.Err()
}
