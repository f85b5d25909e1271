package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"strconv"
	"strings"
	"time"
)

// Withdrawn is a measurement that is no longer part of the catalogue.
type Withdrawn struct {
	Row      Row // as last accepted; its system is the one it would go back to
	Instead  string
	Revision int64 // the revision that withdrew it
	At       time.Time
	Who, Why string
}

// mergedInto is the system that stands for one, by number: itself, or the one
// it was merged into, as often as that happened.
const mergedInto = `WITH RECURSIVE chain (id) AS (SELECT ?1 UNION SELECT g.into_id FROM chain c JOIN merged_systems g ON g.system_id = c.id)
	SELECT id FROM chain WHERE id NOT IN (SELECT system_id FROM merged_systems)`

// family begins a query with the numbers of a system and of all that were
// merged into it.
const family = `WITH RECURSIVE family (id) AS (SELECT id FROM systems WHERE slug = ?1 UNION SELECT g.system_id FROM family f JOIN merged_systems g ON g.into_id = f.id) `

// withdraw takes a measurement out of the catalogue. With another in its place
// its lines go there, else with it.
func (a *applier) withdraw(ctx context.Context, measurement, instead string) error {
	current, meta, err := a.rowOf(ctx, measurement)
	if err != nil {
		return err
	}
	if current == nil {
		return &Error{Code: Conflict, Field: "measurement", Message: "there is no measurement " + strconv.Quote(Clip(measurement)) + " in the catalogue: it was withdrawn, or never accepted"}
	}
	if err := a.linesGo(ctx, current, meta, instead); err != nil {
		return err
	}
	rev, err := a.revise(ctx, "measurement:"+current.Measurement, "withdraw", "", "", instead)
	if err != nil {
		return err
	}
	record, err := encodeRow(current)
	if err != nil {
		return err
	}
	if _, err := a.exec(ctx, `INSERT INTO withdrawn_measurements (id, measurement, system_id, record, instead, revision, created_at, withdrawn_at)
		SELECT id, measurement, system_id, ?, ?, ?, created_at, ? FROM measurements WHERE id = ?`, record, instead, rev, a.at, meta.id); err != nil {
		return err
	}
	_, err = a.exec(ctx, `DELETE FROM measurements WHERE id = ?`, meta.id)
	return err
}

// linesGo moves the lines of a measurement that is to be withdrawn.
func (a *applier) linesGo(ctx context.Context, current *Row, meta rowMeta, instead string) error {
	if instead == current.Measurement {
		return &Error{Code: Invalid, Field: "instead", Message: "a measurement cannot stand in place of itself", Expected: "the id of another measurement, or nothing"}
	}
	lines, err := a.numbers(ctx, `SELECT id FROM centrelines WHERE measurement_id = ? ORDER BY id`, meta.id)
	if err != nil {
		return err
	}
	if instead == "" {
		for _, id := range lines {
			if err := a.withdrawLine(ctx, id, current.Measurement); err != nil {
				return err
			}
		}
		return nil
	}
	other, otherMeta, err := a.rowOf(ctx, instead)
	if err != nil {
		return err
	}
	if other == nil {
		return &Error{Code: Invalid, Field: "instead", Message: "there is no measurement " + strconv.Quote(Clip(instead)), Expected: "the id of a measurement in the catalogue, or nothing"}
	}
	for _, id := range lines {
		if err := a.moveLine(ctx, id, "measurement", current.Measurement, instead, otherMeta.id, otherMeta.systemID); err != nil {
			return err
		}
	}
	return nil
}

// moveLine gives a line to another measurement or system; field says which, and
// was and is are their public names.
func (a *applier) moveLine(ctx context.Context, id int64, field, was, is string, measurement, system int64) error {
	if _, err := a.revise(ctx, lineRecord(id), "change", field, was, is); err != nil {
		return err
	}
	_, err := a.exec(ctx, `UPDATE centrelines SET measurement_id = ?, system_id = ? WHERE id = ?`, orNull(measurement), system, id)
	return err
}

func (a *applier) withdrawLine(ctx context.Context, id int64, measurement string) error {
	if _, err := a.revise(ctx, lineRecord(id), "withdraw", "", measurement, ""); err != nil {
		return err
	}
	if _, err := a.exec(ctx, `INSERT INTO withdrawn_centrelines (id, system_id, measurement_id, line, settings, sinuosities, created_at)
		SELECT id, system_id, measurement_id, line, settings, sinuosities, created_at FROM centrelines WHERE id = ?`, id); err != nil {
		return err
	}
	_, err := a.exec(ctx, `DELETE FROM centrelines WHERE id = ?`, id)
	return err
}

// reinstate puts a withdrawn measurement back, under the numbers it had and
// with the lines that went with it, into its system or what that became.
func (a *applier) reinstate(ctx context.Context, measurement string) error {
	var id, system int64
	var record, instead, created string
	err := a.tx.QueryRowContext(ctx, `SELECT id, system_id, record, instead, created_at FROM withdrawn_measurements WHERE measurement = ?`, measurement).Scan(&id, &system, &record, &instead, &created)
	if errors.Is(err, sql.ErrNoRows) {
		return &Error{Code: Conflict, Field: "measurement", Message: strconv.Quote(Clip(measurement)) + " is not withdrawn: it stands in the catalogue, or never did"}
	}
	if err != nil {
		return err
	}
	row, err := decodeRow(record)
	if err != nil {
		return err
	}
	row.Normalise()
	if system, err = a.number(ctx, mergedInto, system); err != nil {
		return err
	}
	source, err := a.source(ctx, &row)
	if err != nil {
		return err
	}
	rev, err := a.revise(ctx, "measurement:"+measurement, "accept", "", instead, "")
	if err != nil {
		return err
	}
	if _, err := a.exec(ctx, `DELETE FROM withdrawn_measurements WHERE id = ?`, id); err != nil {
		return err
	}
	args := []any{measurement, system, source}
	for _, c := range measurementColumns {
		args = append(args, c.value(&row))
	}
	if _, err := a.exec(ctx, insertWithNumber, append(args, created, a.at, rev, id)...); err != nil {
		return err
	}
	lines, err := a.numbers(ctx, `SELECT id FROM withdrawn_centrelines WHERE measurement_id = ? ORDER BY id`, id)
	if err != nil {
		return err
	}
	for _, line := range lines {
		if err := a.reinstateLine(ctx, line, measurement, system); err != nil {
			return err
		}
	}
	return nil
}

var insertWithNumber = strings.Replace(insertMeasurement, nextNumber, "?", 1)

func (a *applier) reinstateLine(ctx context.Context, id int64, measurement string, system int64) error {
	if _, err := a.revise(ctx, lineRecord(id), "accept", "", "", measurement); err != nil {
		return err
	}
	if _, err := a.exec(ctx, `INSERT INTO centrelines (id, system_id, measurement_id, line, settings, sinuosities, created_at)
		SELECT id, ?, measurement_id, line, settings, sinuosities, created_at FROM withdrawn_centrelines WHERE id = ?`, system, id); err != nil {
		return err
	}
	_, err := a.exec(ctx, `DELETE FROM withdrawn_centrelines WHERE id = ?`, id)
	return err
}

// numbers runs a query for a list of integers.
func (a *applier) numbers(ctx context.Context, q string, args ...any) ([]int64, error) {
	rows, err := a.tx.QueryContext(ctx, q, args...)
	if err != nil {
		return nil, err
	}
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

const selectWithdrawn = `SELECT w.record, w.instead, w.revision, w.withdrawn_at, ` + partiesExpr + `, t.why, w.system_id FROM withdrawn_measurements w
	JOIN revisions v ON v.id = w.revision JOIN change_sets t ON t.id = v.change_set_id
	LEFT JOIN accounts a ON a.id = t.account_id LEFT JOIN accounts b ON b.id = t.author_id`

func withdrawnWhere(ctx context.Context, q querier, head, tail string, arg any) ([]Withdrawn, error) {
	rows, err := q.QueryContext(ctx, head+selectWithdrawn+tail, arg)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []Withdrawn
	var systems []int64
	for rows.Next() {
		var w Withdrawn
		var record, at string
		var system int64
		if err := rows.Scan(&record, &w.Instead, &w.Revision, &at, &w.Who, &w.Why, &system); err != nil {
			return nil, err
		}
		if w.Row, err = decodeRow(record); err != nil {
			return nil, err
		}
		w.Row.Normalise()
		w.At = parseTime(at)
		out, systems = append(out, w), append(systems, system)
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	for i := range out {
		if err := q.QueryRowContext(ctx, `SELECT slug, system_name FROM systems WHERE id = (`+mergedInto+`)`, systems[i]).Scan(&out[i].Row.System, &out[i].Row.SystemName); err != nil {
			return nil, err
		}
	}
	return out, nil
}

// WithdrawnMeasurement returns one, NotFound when it stands in the catalogue or
// never did.
func (s *Store) WithdrawnMeasurement(ctx context.Context, measurement string) (*Withdrawn, error) {
	var found []Withdrawn
	err := s.read(ctx, func(tx *sql.Tx) (err error) {
		found, err = withdrawnWhere(ctx, tx, "", ` WHERE w.measurement = ?1`, measurement)
		return err
	})
	if err == nil && len(found) == 0 {
		err = &Error{Code: NotFound, Field: "measurement", Message: "there is no withdrawn measurement " + strconv.Quote(Clip(measurement))}
	}
	if err != nil {
		return nil, err
	}
	return &found[0], nil
}

// Gone is what is left of a system that has no measurement now.
type Gone struct {
	Slug, Name string
	MovedTo    string // slug of the system it was merged into, "" if withdrawn
	Withdrawn  []Withdrawn
	History    []Revision
}

// Gone says what became of a system that is not in the catalogue now; nil when
// there was never one of that name.
func (s *Store) Gone(ctx context.Context, slug string) (*Gone, error) {
	g := &Gone{}
	err := s.read(ctx, func(tx *sql.Tx) error {
		err := tx.QueryRowContext(ctx, `SELECT y.slug, y.system_name, CASE o.id WHEN y.id THEN '' ELSE o.slug END
			FROM systems y JOIN systems o ON o.id = (WITH RECURSIVE chain (id) AS (SELECT y.id UNION SELECT g.into_id FROM chain c JOIN merged_systems g ON g.system_id = c.id)
				SELECT id FROM chain WHERE id NOT IN (SELECT system_id FROM merged_systems)) WHERE y.slug = ?`, slug).Scan(&g.Slug, &g.Name, &g.MovedTo)
		if err != nil || g.MovedTo != "" {
			return err
		}
		d := Detail{System: System{Slug: g.Slug}}
		if err = d.takeGone(ctx, tx, slug); err != nil || len(d.Withdrawn) == 0 {
			return err
		}
		g.Withdrawn = d.Withdrawn
		g.History, err = historyOf(ctx, tx, &d)
		return err
	})
	if errors.Is(err, sql.ErrNoRows) || err == nil && g.MovedTo == "" && len(g.Withdrawn) == 0 {
		return nil, nil
	}
	return g, err
}
