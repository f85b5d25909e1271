package catalogue

import (
	"context"
	"strconv"
	"strings"
)

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
		id, err := a.systemNamed(ctx, p.System)
		if err != nil {
			return 0, nil, err
		}
		if id == 0 && strings.HasPrefix(p.System, PrivatePrefix) {
			p.System = "" // of a private system: here it goes by its name
			return a.place(ctx, p, current)
		}
		if id == 0 && reservedSlugs[p.System] {
			p.System, err = freeSlug(ctx, a.tx, p.System)
		}
		if err != nil || id == 0 {
			return 0, nil, err
		}
		y, err := a.systemRow(ctx, id)
		if err == nil {
			p.System = y.System // a merged one answers with what it is part of
		}
		return id, y, err
	}
	name := CleanText(p.SystemName)
	const named = ` FROM systems WHERE system_name = ? AND id NOT IN (SELECT system_id FROM merged_systems)`
	count, err := a.number(ctx, `SELECT count(*)`+named, name)
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
	id, err := a.number(ctx, `SELECT id`+named, name)
	if err != nil {
		return 0, nil, err
	}
	y, err := a.systemRow(ctx, id)
	if err == nil {
		p.System, p.SystemName = y.System, y.SystemName
	}
	return id, y, err
}

// systemNamed is the number of the system with a slug, or of the one it was
// merged into; 0 = none.
func (a *applier) systemNamed(ctx context.Context, slug string) (int64, error) {
	id, err := a.number(ctx, `SELECT id FROM systems WHERE slug = ?`, slug)
	if err != nil || id == 0 {
		return 0, err
	}
	return a.number(ctx, mergedInto, id)
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
