package catalogue

import (
	"context"
	"database/sql"
	"strconv"
	"strings"
)

// applier writes accepted rows inside one transaction: one change set.
type applier struct {
	s     *Store
	tx    *sql.Tx
	at    string
	by    int64 // account that accepts, 0 = the command line
	why   string
	from  int64 // submission, 0 = none
	owner int64 // author of the submission, 0 = same or none

	set   int64 // change set, made at the first change
	stmts map[string]*sql.Stmt
}

// outcome of applying one row.
type outcome int

const (
	rowIdentical outcome = iota
	rowNew
	rowChanged
)

func (s *Store) applier(tx *sql.Tx, by int64, why string) *applier {
	return &applier{s: s, tx: tx, at: s.stamp(), by: by, why: why, stmts: map[string]*sql.Stmt{}}
}

func orNull(id int64) any {
	if id == 0 {
		return nil
	}
	return id
}

// prepared keeps statements for the life of the transaction.
func (a *applier) prepared(ctx context.Context, q string) (*sql.Stmt, error) {
	if st, ok := a.stmts[q]; ok {
		return st, nil
	}
	st, err := a.tx.PrepareContext(ctx, q)
	if err == nil {
		a.stmts[q] = st
	}
	return st, err
}

func (a *applier) exec(ctx context.Context, q string, args ...any) (int64, error) {
	st, err := a.prepared(ctx, q)
	if err != nil {
		return 0, err
	}
	res, err := st.ExecContext(ctx, args...)
	if err != nil {
		return 0, err
	}
	return res.LastInsertId()
}

// number runs a query for one integer, 0 when there is no row.
func (a *applier) number(ctx context.Context, q string, args ...any) (int64, error) {
	st, err := a.prepared(ctx, q)
	if err != nil {
		return 0, err
	}
	var id int64
	err = st.QueryRowContext(ctx, args...).Scan(&id)
	if err == sql.ErrNoRows {
		return 0, nil
	}
	return id, err
}

// revise records one change and returns the revision.
func (a *applier) revise(ctx context.Context, record, action, field, before, after string) (int64, error) {
	if a.set == 0 {
		id, err := a.exec(ctx, `INSERT INTO change_sets (at, account_id, why, submission_id, author_id) VALUES (?, ?, ?, ?, ?)`,
			a.at, orNull(a.by), a.why, orNull(a.from), orNull(a.owner))
		if err != nil {
			return 0, err
		}
		a.set = id
	}
	return a.exec(ctx, `INSERT INTO revisions (change_set_id, record, action, field, before, after) VALUES (?, ?, ?, ?, ?, ?)`,
		a.set, record, action, field, before, after)
}

// apply writes one row: a new measurement, or the changed columns of a known
// one. Columns of the system change the system. The row comes back as stored,
// with its ids. Blank choices mean "not said".
func (a *applier) apply(ctx context.Context, p *Row) (outcome, error) {
	current, meta, err := rowOf(ctx, a.tx, p.Measurement)
	if err != nil {
		return 0, err
	}
	systemID, system, err := a.place(ctx, p, current)
	if err != nil {
		return 0, err
	}
	if system != nil && (current == nil || current.System != p.System) {
		inherit(p, system)
	}
	p.Normalise()
	if err := hardError(CheckRow(p, nil)); err != nil {
		return 0, err
	}
	if systemID == 0 {
		if systemID, err = a.createSystem(ctx, p); err != nil {
			return 0, err
		}
	} else if err := a.changeSystem(ctx, systemID, system, p); err != nil {
		return 0, err
	}
	if current == nil {
		return rowNew, a.createMeasurement(ctx, p, systemID)
	}
	changed, err := a.changeMeasurement(ctx, meta, current, p, systemID)
	if err != nil {
		return 0, err
	}
	if !changed && len(systemChanges(system, p)) == 0 {
		return rowIdentical, nil
	}
	return rowChanged, nil
}

// place finds the system a row belongs to: named by its slug, else that of the
// known measurement, else by equal name. It sets p.System; id 0 = new system.
// The returned row holds the system's columns.
func (a *applier) place(ctx context.Context, p, current *Row) (int64, *Row, error) {
	if p.System == "" && current != nil {
		p.System = current.System
	}
	if p.System != "" {
		if slug := Slug(p.System); slug != p.System {
			p.System = slug
		}
		id, err := a.number(ctx, `SELECT id FROM systems WHERE slug = ?`, p.System)
		if err != nil {
			return 0, nil, err
		}
		if id == 0 && reservedSlugs[p.System] {
			p.System, err = freeSlug(ctx, a.tx, p.System)
		}
		if err != nil || id == 0 {
			return 0, nil, err
		}
		y, err := a.systemRow(ctx, id)
		return id, y, err
	}
	name := CleanText(p.SystemName)
	count, err := a.number(ctx, `SELECT count(*) FROM systems WHERE system_name = ?`, name)
	if err != nil {
		return 0, nil, err
	}
	switch {
	case count > 1:
		return 0, nil, &Error{Code: Invalid, Field: "system", Message: "there are several systems named " + strconv.Quote(Clip(name)), Expected: "the slug of one of them in the column system"}
	case count == 0:
		p.System, err = freeSlug(ctx, a.tx, name)
		return 0, nil, err
	}
	id, err := a.number(ctx, `SELECT id FROM systems WHERE system_name = ?`, name)
	if err != nil {
		return 0, nil, err
	}
	y, err := a.systemRow(ctx, id)
	if err == nil {
		p.System, p.SystemName = y.System, y.SystemName
	}
	return id, y, err
}

// systemColumns are the columns of the whole system but its slug.
var systemColumns = columnsOf(TableSystems)

// measurementColumns are those of one measurement but its id.
var measurementColumns = columnsOf(TableMeasurements)

func columnsOf(table string) []*Column {
	var out []*Column
	for i := range Columns {
		if c := &Columns[i]; c.Table == table && c.Name != "system" && c.Name != "measurement" {
			out = append(out, c)
		}
	}
	return out
}

func names(cols []*Column) []string {
	out := make([]string, len(cols))
	for i, c := range cols {
		out[i] = c.Name
	}
	return out
}

// value is what the column of a row is in SQL.
func (c *Column) value(r *Row) any {
	if c.num != nil {
		if n := *c.num(r); n.Valid {
			return n.V
		}
		return nil
	}
	return *c.text(r)
}

var selectSystem = `SELECT slug, ` + strings.Join(names(systemColumns), ", ") + ` FROM systems WHERE id = ?`

func (a *applier) systemRow(ctx context.Context, id int64) (*Row, error) {
	st, err := a.prepared(ctx, selectSystem)
	if err != nil {
		return nil, err
	}
	var r Row
	dest := []any{&r.System}
	for _, c := range systemColumns {
		if c.num != nil {
			dest = append(dest, c.num(&r))
		} else {
			dest = append(dest, c.text(&r))
		}
	}
	return &r, st.QueryRowContext(ctx, id).Scan(dest...)
}

// inherit fills what a new row of a known system does not say.
func inherit(p, system *Row) {
	for _, c := range systemColumns {
		if c.num != nil {
			if !c.num(p).Valid {
				*c.num(p) = *c.num(system)
			}
			continue
		}
		if v := *c.text(p); v == "" || (v == "unknown" && c.Kind == KindChoice) {
			*c.text(p) = *c.text(system)
		}
	}
}

func systemChanges(before, after *Row) []*Column {
	var out []*Column
	if before == nil {
		return nil
	}
	for _, c := range systemColumns {
		if !c.same(before, after) {
			out = append(out, c)
		}
	}
	return out
}

var insertSystem = `INSERT INTO systems (slug, ` + strings.Join(names(systemColumns), ", ") + `, created_at, updated_at, revision) VALUES (?` + strings.Repeat(", ?", len(systemColumns)+3) + `)`

func (a *applier) createSystem(ctx context.Context, p *Row) (int64, error) {
	rev, err := a.revise(ctx, "system:"+p.System, "create", "", "", p.SystemName)
	if err != nil {
		return 0, err
	}
	args := []any{p.System}
	for _, c := range systemColumns {
		args = append(args, c.value(p))
	}
	return a.exec(ctx, insertSystem, append(args, a.at, a.at, rev)...)
}

func (a *applier) changeSystem(ctx context.Context, id int64, before, after *Row) error {
	changes := systemChanges(before, after)
	if len(changes) == 0 {
		return nil
	}
	var rev int64
	sets, args := []string{}, []any{}
	for _, c := range changes {
		var err error
		if rev, err = a.revise(ctx, "system:"+before.System, "change", c.Name, c.Get(before), c.Get(after)); err != nil {
			return err
		}
		sets = append(sets, c.Name+" = ?")
		args = append(args, c.value(after))
	}
	_, err := a.tx.ExecContext(ctx, `UPDATE systems SET `+strings.Join(sets, ", ")+`, updated_at = ?, revision = ? WHERE id = ?`, append(args, a.at, rev, id)...)
	return err
}
