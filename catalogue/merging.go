package catalogue

import (
	"context"
	"database/sql"
	"strconv"
	"strings"
)

// SystemMerge makes one system of two that turned out to be the same channel.
type SystemMerge struct {
	From, Into string // slugs: From becomes part of Into
	// Revision is the newest of both systems that the curator saw (MergeView).
	Revision int64
	Values   map[string]string // columns of the system that Into takes, as text
	// Twins are pairs of measurements that are one: the first stays, the second is
	// withdrawn with a pointer to it.
	Twins [][2]string
	Why   string
}

// MergeView is what a curator decides on before merging.
type MergeView struct {
	From, Into *Detail
	Revision   int64
	Changes    []FieldChange // columns of the system that differ: Before is Into's, After is From's
	OtherNames string        // the proposed other names: those of both, and the name of From
	Twins      [][2]Row      // likely the same measurement: of Into, of From
}

// MergeView compares two systems.
func (s *Store) MergeView(ctx context.Context, from, into string) (*MergeView, error) {
	v := &MergeView{}
	var err error
	if v.From, err = s.systemCalled(ctx, "from", from); err != nil {
		return nil, err
	}
	if v.Into, err = s.systemCalled(ctx, "into", into); err != nil {
		return nil, err
	}
	if v.From.Slug == v.Into.Slug {
		return nil, &Error{Code: Invalid, Field: "into", Message: "both are the same system", Expected: "two different systems"}
	}
	v.Revision = int64(max(v.From.Revision, v.Into.Revision))
	a, b := v.Into.Best(), v.From.Best()
	for _, c := range systemColumns {
		if c.Name != "other_names" && !c.same(&a, &b) {
			v.Changes = append(v.Changes, FieldChange{c.Name, c.Get(&a), c.Get(&b)})
		}
	}
	v.OtherNames = joinedNames(&a, &b)
	for _, x := range v.Into.Measurements {
		for _, y := range v.From.Measurements {
			if x.Sinuosity == y.Sinuosity && x.SinuosityKind == y.SinuosityKind && (x.Source == y.Source || x.SourceDOI != "" && x.SourceDOI == y.SourceDOI) {
				v.Twins = append(v.Twins, [2]Row{x, y})
			}
		}
	}
	return v, nil
}

// systemCalled finds a system by its short name or, where one alone has it, by
// its name.
func (s *Store) systemCalled(ctx context.Context, field, text string) (*Detail, error) {
	d, err := s.System(ctx, text)
	if CodeOf(err) != NotFound {
		return d, err
	}
	found, err := s.slugsCalled(ctx, text)
	switch {
	case err != nil:
		return nil, fault("system", err)
	case len(found) == 1:
		return s.System(ctx, found[0])
	case len(found) > 1:
		return nil, &Error{Code: Invalid, Field: field, Message: "several systems are called " + strconv.Quote(Clip(text)), Expected: "the address of one of them, ending in " + strings.Join(found, " or ")}
	}
	return nil, &Error{Code: Invalid, Field: field, Message: "there is no system " + strconv.Quote(Clip(text)), Expected: "the name of a system, or the address of its page"}
}

// slugsCalled are the short names of the first few systems with a name.
func (s *Store) slugsCalled(ctx context.Context, name string) (out []string, err error) {
	rows, err := s.r.QueryContext(ctx, `SELECT slug FROM systems WHERE system_name = ? AND id IN (SELECT system_id FROM measurements) ORDER BY slug LIMIT 5`, CleanText(name))
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		var slug string
		if err := rows.Scan(&slug); err != nil {
			return nil, err
		}
		out = append(out, slug)
	}
	return out, rows.Err()
}

// joinedNames are the other names of a system after another became part of it.
func joinedNames(into, from *Row) string {
	var out []string
	seen := map[string]bool{strings.ToLower(into.SystemName): true}
	for _, list := range []string{into.OtherNames, from.SystemName, from.OtherNames} {
		for _, name := range strings.Split(list, ";") {
			name = CleanText(name)
			if key := strings.ToLower(name); name != "" && !seen[key] {
				seen[key] = true
				out = append(out, name)
			}
		}
	}
	return strings.Join(out, "; ")
}

// MergeSystems moves the measurements and lines of one system to another. The
// old slug answers with the new system, the old name becomes one of its other
// names, both histories stay. It returns the change set, which Undo takes back.
func (s *Store) MergeSystems(ctx context.Context, by int64, m SystemMerge) (set int64, err error) {
	m.Why = CleanText(m.Why)
	if err := checkWhy(m.Why); err != nil {
		return 0, err
	}
	view, err := s.MergeView(ctx, m.From, m.Into)
	if err != nil {
		return 0, err
	}
	if _, ok := m.Values["other_names"]; !ok {
		m.Values = withValue(m.Values, "other_names", view.OtherNames)
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		a := s.applier(tx, by, m.Why)
		err := a.mergeSystems(ctx, m)
		set = a.set
		return err
	})
	return set, err
}

func withValue(m map[string]string, key, value string) map[string]string {
	out := map[string]string{key: value}
	for k, v := range m {
		out[k] = v
	}
	return out
}

// checkWhy asks for the reason of what changes records without their author.
func checkWhy(why string) error {
	if why == "" {
		return &Error{Code: Invalid, Field: "why", Message: "the reason is missing", Expected: "why this is right, for the history of the record"}
	}
	if err := checkComment(why, true); err != nil {
		return &Error{Code: Invalid, Field: "why", Message: "the reason is too long or not UTF-8", Expected: "at most 20000 characters"}
	}
	return nil
}

func (a *applier) mergeSystems(ctx context.Context, m SystemMerge) error {
	from, err := a.systemNamed(ctx, m.From)
	if err != nil {
		return err
	}
	into, err := a.systemNamed(ctx, m.Into)
	if err != nil {
		return err
	}
	if from == 0 || into == 0 || from == into {
		return &Error{Code: Conflict, Message: "these two systems are one by now, or one of them is gone"}
	}
	seen, err := a.number(ctx, `SELECT max(revision) FROM (SELECT revision FROM systems WHERE id IN (?1, ?2) UNION ALL SELECT revision FROM measurements WHERE system_id IN (?1, ?2))`, from, into)
	if err != nil {
		return err
	}
	if seen != m.Revision {
		return &Error{Code: Conflict, Message: "one of the two systems was changed meanwhile; look at both again"}
	}
	fromRow, err := a.systemRow(ctx, from)
	if err != nil {
		return err
	}
	intoRow, err := a.systemRow(ctx, into)
	if err != nil {
		return err
	}
	if err := a.takeValues(ctx, into, intoRow, m.Values); err != nil {
		return err
	}
	if err := a.moveAll(ctx, from, into, fromRow.System, intoRow.System); err != nil {
		return err
	}
	rev, err := a.revise(ctx, "system:"+fromRow.System, "withdraw", "merged_into", "", intoRow.System)
	if err != nil {
		return err
	}
	if _, err := a.exec(ctx, `INSERT INTO merged_systems (system_id, into_id, revision, merged_at) VALUES (?, ?, ?, ?)`, from, into, rev, a.at); err != nil {
		return err
	}
	for _, pair := range m.Twins {
		if err := a.withdraw(ctx, pair[1], pair[0]); err != nil {
			return err
		}
	}
	return nil
}

// takeValues changes columns of a system to the texts given.
func (a *applier) takeValues(ctx context.Context, id int64, row *Row, values map[string]string) error {
	after := *row
	for _, c := range systemColumns {
		if v, ok := values[c.Name]; ok {
			if err := c.Set(&after, v); err != nil {
				return err
			}
		}
	}
	for _, c := range systemColumns {
		if f, bad := hardFinding(c, &after); bad {
			return &Error{Code: Invalid, Field: f.Column, Message: f.Message, Expected: f.Expected}
		}
	}
	return a.changeSystem(ctx, id, row, &after)
}

func (a *applier) moveAll(ctx context.Context, from, into int64, was, is string) error {
	ids, err := a.numbers(ctx, `SELECT id FROM measurements WHERE system_id = ? ORDER BY id`, from)
	if err != nil {
		return err
	}
	for _, id := range ids {
		if err := a.moveMeasurement(ctx, id, into, was, is); err != nil {
			return err
		}
	}
	type line struct{ id, measurement int64 }
	var lines []line
	rows, err := a.tx.QueryContext(ctx, `SELECT id, coalesce(measurement_id, 0) FROM centrelines WHERE system_id = ? ORDER BY id`, from)
	if err != nil {
		return err
	}
	defer rows.Close()
	for rows.Next() {
		var l line
		if err := rows.Scan(&l.id, &l.measurement); err != nil {
			return err
		}
		lines = append(lines, l)
	}
	if err := rows.Err(); err != nil {
		return err
	}
	for _, l := range lines {
		if err := a.moveLine(ctx, l.id, "system", was, is, l.measurement, into); err != nil {
			return err
		}
	}
	return nil
}

// moveMeasurement changes nothing of a measurement but its system.
func (a *applier) moveMeasurement(ctx context.Context, id, into int64, was, is string) error {
	var public string
	if err := a.tx.QueryRowContext(ctx, `SELECT measurement FROM measurements WHERE id = ?`, id).Scan(&public); err != nil {
		return err
	}
	rev, err := a.revise(ctx, "measurement:"+public, "change", "system", was, is)
	if err != nil {
		return err
	}
	_, err = a.exec(ctx, `UPDATE measurements SET system_id = ?, updated_at = ?, revision = ? WHERE id = ?`, into, a.at, rev, id)
	return err
}

// MergeMeasurements makes one measurement of two that are the same: keep takes
// the columns named in take from drop, and drop is withdrawn with a pointer to
// it. seen is the newest revision of both that the curator saw.
func (s *Store) MergeMeasurements(ctx context.Context, by int64, keep, drop string, take []string, seen int64, why string) (set int64, err error) {
	why = CleanText(why)
	if err := checkWhy(why); err != nil {
		return 0, err
	}
	if keep == drop {
		return 0, &Error{Code: Invalid, Field: "drop", Message: "both are the same measurement", Expected: "two different measurements"}
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		a := s.applier(tx, by, why)
		kept, keptMeta, err := a.rowOf(ctx, keep)
		if err != nil {
			return err
		}
		dropped, droppedMeta, err := a.rowOf(ctx, drop)
		if err != nil {
			return err
		}
		switch {
		case kept == nil:
			return &Error{Code: Invalid, Field: "keep", Message: "there is no measurement " + strconv.Quote(Clip(keep)), Expected: "the id of a measurement, as m000123"}
		case dropped == nil:
			return &Error{Code: Invalid, Field: "drop", Message: "there is no measurement " + strconv.Quote(Clip(drop)), Expected: "the id of a measurement, as m000123"}
		case max(keptMeta.revision, droppedMeta.revision) != seen:
			return &Error{Code: Conflict, Message: "one of the two measurements was changed meanwhile; look at both again"}
		}
		after := *kept
		for _, name := range take {
			if c, ok := ColumnByName(name); ok && name != "measurement" && name != "system" && c.Table != TableSystems {
				c.copy(&after, dropped)
			}
		}
		if _, err := a.apply(ctx, &after); err != nil {
			return err
		}
		err = a.withdraw(ctx, drop, keep)
		set = a.set
		return err
	})
	return set, err
}
