package catalogue

import (
	"context"
	"crypto/sha256"
	"database/sql"
	"encoding/hex"
	"fmt"
	"maps"
	"slices"
	"strings"
)

// Change is one measurement, or one line, that two states of the catalogue do
// not share.
type Change struct {
	What        string // added, removed, changed
	Measurement string // "" for a line of the system only
	System      string // slug, in the later state if it is there
	SystemName  string
	Line        bool          // it is a centreline; Fields has the one column "centreline"
	Fields      []FieldChange // of a changed one, or of a line
}

// Difference is what two states of the catalogue do not share, counted.
type Difference struct {
	Added, Removed, Changed               int // measurements
	LinesAdded, LinesRemoved              int
	SystemsAdded, SystemsRemoved          []string // slugs
	Columns                               []FacetValue
	MeasurementsBefore, MeasurementsAfter int
	SystemsBefore, SystemsAfter           int
	InventedBefore, InventedAfter         int
	columns                               map[string]int
	systemsOf                             [2]map[string]bool
}

// EachDifference visits what changed from one state of the catalogue to
// another, by the public ids of the measurements, then the lines. A state is
// the name of a release or Present. Two releases are compared by the states of
// records they list, so only what differs is read.
func (s *Store) EachDifference(ctx context.Context, before, after string, visit func(Change) error) (*Difference, error) {
	d := &Difference{columns: map[string]int{}}
	err := snapshot(ctx, s.out, func(tx *sql.Tx) error {
		var sides [2]querier
		var ids [2]int64
		for i, name := range []string{before, after} {
			if strings.EqualFold(name, Present) {
				sides[i] = tx
				continue
			}
			id, known, err := releaseID(ctx, tx, name)
			if err != nil {
				return err
			}
			ids[i], sides[i] = id, frozenReader{tx, frozenWith(id, known)}
		}
		if err := d.count(ctx, sides); err != nil {
			return err
		}
		if err := d.measurements(ctx, sides, ids, visit); err != nil {
			return err
		}
		return d.lines(ctx, sides, visit)
	})
	if err != nil {
		return nil, err
	}
	for _, c := range Columns {
		if n := d.columns[c.Name]; n > 0 {
			d.Columns = append(d.Columns, FacetValue{c.Name, n})
		}
	}
	slices.SortStableFunc(d.Columns, func(a, b FacetValue) int { return b.Count - a.Count })
	return d, nil
}

// count reads the systems and the sizes of both sides.
func (d *Difference) count(ctx context.Context, sides [2]querier) error {
	for i, q := range sides {
		var measurements, invented int
		if err := q.QueryRowContext(ctx, "SELECT count(*), count(CASE WHEN substr(m.notes, 1, ?) = ? THEN 1 END)"+fromRows, len(InventedMark), InventedMark).Scan(&measurements, &invented); err != nil {
			return err
		}
		rows, err := q.QueryContext(ctx, "SELECT DISTINCT s.slug"+fromRows)
		if err != nil {
			return err
		}
		slugs, err := scanTexts(rows)
		if err != nil {
			return err
		}
		d.systemsOf[i] = map[string]bool{}
		for _, x := range slugs {
			d.systemsOf[i][x] = true
		}
		if i == 0 {
			d.MeasurementsBefore, d.InventedBefore, d.SystemsBefore = measurements, invented, len(slugs)
		} else {
			d.MeasurementsAfter, d.InventedAfter, d.SystemsAfter = measurements, invented, len(slugs)
		}
	}
	d.SystemsAdded = onlyIn(d.systemsOf[1], d.systemsOf[0])
	d.SystemsRemoved = onlyIn(d.systemsOf[0], d.systemsOf[1])
	return nil
}

func onlyIn(a, b map[string]bool) []string {
	var out []string
	for _, x := range slices.Sorted(maps.Keys(a)) {
		if !b[x] {
			out = append(out, x)
		}
	}
	return out
}

func scanTexts(rows *sql.Rows) ([]string, error) {
	defer rows.Close()
	var out []string
	for rows.Next() {
		var x string
		if err := rows.Scan(&x); err != nil {
			return nil, err
		}
		out = append(out, x)
	}
	return out, rows.Err()
}

// measurements walks both sides by public id, one cursor each.
func (d *Difference) measurements(ctx context.Context, sides [2]querier, ids [2]int64, visit func(Change) error) error {
	var next [2]func() (*Row, error)
	for i, q := range sides {
		where := ""
		if ids[0] > 0 && ids[1] > 0 {
			where = fmt.Sprintf(` WHERE m.version NOT IN (SELECT version FROM release_measurements WHERE release_id = %d)`, ids[1-i])
		}
		rows, err := q.QueryContext(ctx, "SELECT "+rowColumns+fromRows+where+" ORDER BY m.measurement")
		if err != nil {
			return err
		}
		defer rows.Close()
		sc := newRowScanner()
		next[i] = func() (*Row, error) {
			if !rows.Next() {
				return nil, rows.Err()
			}
			var r Row
			_, err := sc.scan(rows, &r)
			return &r, err
		}
	}
	a, err := next[0]()
	if err != nil {
		return err
	}
	b, err := next[1]()
	for err == nil && (a != nil || b != nil) {
		takeA, takeB := b == nil || a != nil && a.Measurement <= b.Measurement, a == nil || b != nil && b.Measurement <= a.Measurement
		switch {
		case takeA && takeB:
			err = d.changed(a, b, visit)
		case takeA:
			d.Removed++
			err = visit(Change{What: "removed", Measurement: a.Measurement, System: a.System, SystemName: a.SystemName})
		default:
			d.Added++
			err = visit(Change{What: "added", Measurement: b.Measurement, System: b.System, SystemName: b.SystemName})
		}
		if takeA && err == nil {
			a, err = next[0]()
		}
		if takeB && err == nil {
			b, err = next[1]()
		}
	}
	return err
}

func (d *Difference) changed(a, b *Row, visit func(Change) error) error {
	fields := Diff(a, b)
	if len(fields) == 0 {
		return nil
	}
	d.Changed++
	for _, f := range fields {
		d.columns[f.Column]++
	}
	return visit(Change{What: "changed", Measurement: b.Measurement, System: b.System, SystemName: b.SystemName, Fields: fields})
}

// lines compares the stored lines, which are only added and taken away, never
// changed in place.
func (d *Difference) lines(ctx context.Context, sides [2]querier, visit func(Change) error) error {
	type stored struct {
		Change
		sum string
	}
	var have [2]map[string]stored
	for i, q := range sides {
		have[i] = map[string]stored{}
		rows, err := q.QueryContext(ctx, `SELECT l.id, coalesce(m.measurement, ''), s.slug, s.system_name, l.line
			FROM centrelines l JOIN systems s ON s.id = l.system_id LEFT JOIN measurements m ON m.id = l.measurement_id`)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			var x stored
			var id int64
			var line string
			if err := rows.Scan(&id, &x.Measurement, &x.System, &x.SystemName, &line); err != nil {
				return err
			}
			sum := sha256.Sum256([]byte(line))
			x.Line, x.sum = true, "line "+fmt.Sprint(id)+", SHA-256 "+hex.EncodeToString(sum[:])
			have[i][x.System+"|"+x.Measurement+"|"+x.sum] = x
		}
		if err := rows.Err(); err != nil {
			return err
		}
	}
	for i, what := range []string{"removed", "added"} {
		for _, key := range slices.Sorted(maps.Keys(have[i])) {
			if _, both := have[1-i][key]; both {
				continue
			}
			x := have[i][key]
			x.What = what
			f := FieldChange{Column: "centreline"}
			if i == 0 {
				d.LinesRemoved++
				f.Before = x.sum
			} else {
				d.LinesAdded++
				f.After = x.sum
			}
			x.Fields = []FieldChange{f}
			if err := visit(x.Change); err != nil {
				return err
			}
		}
	}
	return nil
}
