package catalogue

import (
	"context"
	"fmt"
	"strconv"
	"strings"
)

// nextNumber is the internal number of a new measurement: above all that are
// and all that were, so that none is given twice.
const nextNumber = `1 + max(coalesce((SELECT max(id) FROM measurements), 0), coalesce((SELECT max(id) FROM withdrawn_measurements), 0))`

var insertMeasurement = `INSERT INTO measurements (measurement, system_id, source_id, ` + strings.Join(names(measurementColumns), ", ") +
	`, created_at, updated_at, revision, id) VALUES (?, ?, ?` + strings.Repeat(", ?", len(measurementColumns)+3) + `, ` + nextNumber + `)`

func (a *applier) createMeasurement(ctx context.Context, p *Row, systemID int64) error {
	if err := a.giveID(ctx, p); err != nil {
		return err
	}
	source, err := a.source(ctx, p)
	if err != nil {
		return err
	}
	rev, err := a.revise(ctx, "measurement:"+p.Measurement, "create", "", "", FormatNumber(p.Sinuosity))
	if err != nil {
		return err
	}
	args := []any{p.Measurement, systemID, source}
	for _, c := range measurementColumns {
		args = append(args, c.value(p))
	}
	_, err = a.exec(ctx, insertMeasurement, append(args, a.at, a.at, rev)...)
	return err
}

// giveID numbers a new measurement. An id that came with the row is kept, and
// the counter moves past it: ids are never given twice.
func (a *applier) giveID(ctx context.Context, p *Row) error {
	const bump = `UPDATE counters SET value = max(value, ?) WHERE name = 'measurement'`
	if p.Measurement != "" {
		n, err := strconv.ParseInt(strings.TrimPrefix(p.Measurement, "m"), 10, 64)
		if err != nil || n < 0 || n > 1e15 || p.Measurement[0] != 'm' {
			return nil
		}
		_, err = a.exec(ctx, bump, n)
		return err
	}
	last, err := a.number(ctx, `SELECT value FROM counters WHERE name = 'measurement'`)
	if err != nil {
		return err
	}
	for {
		last++
		p.Measurement = fmt.Sprintf("m%06d", last)
		taken, err := a.number(ctx, `SELECT count(*) FROM (SELECT measurement FROM measurements UNION ALL SELECT measurement FROM withdrawn_measurements) WHERE measurement = ?`, p.Measurement)
		if err != nil {
			return err
		}
		if taken == 0 {
			_, err = a.exec(ctx, bump, last)
			return err
		}
	}
}

// source finds or adds the source of a row.
func (a *applier) source(ctx context.Context, p *Row) (int64, error) {
	id, err := a.number(ctx, `SELECT id FROM sources WHERE citation = ? AND doi = ?`, p.Source, p.SourceDOI)
	if err != nil || id != 0 {
		return id, err
	}
	return a.exec(ctx, `INSERT INTO sources (citation, doi) VALUES (?, ?)`, p.Source, p.SourceDOI)
}

// changeMeasurement writes the columns of the measurement that differ, among
// them its source and the system it belongs to.
func (a *applier) changeMeasurement(ctx context.Context, meta rowMeta, before, after *Row, systemID int64) (bool, error) {
	var sets []string
	var args []any
	var rev int64
	note := func(column, was, is, set string, value any) error {
		var err error
		rev, err = a.revise(ctx, "measurement:"+before.Measurement, "change", column, was, is)
		sets = append(sets, set+" = ?")
		args = append(args, value)
		return err
	}
	for _, c := range measurementColumns {
		if c.same(before, after) {
			continue
		}
		if err := note(c.Name, c.Get(before), c.Get(after), c.Name, c.value(after)); err != nil {
			return false, err
		}
	}
	if before.System != after.System {
		if err := note("system", before.System, after.System, "system_id", systemID); err != nil {
			return false, err
		}
	}
	if err := a.changeSource(ctx, before, after, note); err != nil {
		return false, err
	}
	if len(sets) == 0 {
		return false, nil
	}
	_, err := a.tx.ExecContext(ctx, `UPDATE measurements SET `+strings.Join(sets, ", ")+`, updated_at = ?, revision = ? WHERE id = ?`, append(args, a.at, rev, meta.id)...)
	return true, err
}

func (a *applier) changeSource(ctx context.Context, before, after *Row, note func(column, was, is, set string, value any) error) error {
	if before.Source == after.Source && before.SourceDOI == after.SourceDOI {
		return nil
	}
	id, err := a.source(ctx, after)
	if err != nil {
		return err
	}
	if before.Source != after.Source {
		if err := note("source", before.Source, after.Source, "source_id", id); err != nil {
			return err
		}
	}
	if before.SourceDOI != after.SourceDOI {
		// The column is set once more to the same value: one revision a field.
		return note("source_doi", before.SourceDOI, after.SourceDOI, "source_id", id)
	}
	return nil
}
