package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"slices"
	"strconv"
	"strings"
)

// RowAt returns an accepted measurement as it was at a revision, with its
// system as that was then, beside what it is now.
func (s *Store) RowAt(ctx context.Context, measurement string, revision int64) (was, now *Row, err error) {
	err = s.read(ctx, func(tx *sql.Tx) error {
		current, _, err := rowOf(ctx, tx, measurement)
		if err != nil {
			return err
		}
		if current == nil {
			return &Error{Code: NotFound, Field: "measurement", Message: "there is no accepted measurement " + strconv.Quote(Clip(measurement))}
		}
		then, err := rowAt(ctx, tx, *current, revision)
		was, now = &then, current
		return err
	})
	return was, now, err
}

// Restore makes a record ("system:SLUG" or "measurement:ID") what it was after
// a revision, or only one field of it ("" = all its own columns). A withdrawn
// measurement is put back. It is a change like any other, with a revision of
// its own; Invalid when nothing would change.
func (s *Store) Restore(ctx context.Context, by int64, record, field string, revision int64, why string) (set int64, err error) {
	why = CleanText(why)
	if err := checkWhy(why); err != nil {
		return 0, err
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		a := s.applier(tx, by, "Restored to revision "+strconv.FormatInt(revision, 10)+": "+why)
		kind, name, _ := strings.Cut(record, ":")
		var err error
		switch kind {
		case "system":
			err = a.restoreSystem(ctx, name, field, revision)
		case "measurement":
			err = a.restoreMeasurement(ctx, name, field, revision)
		default:
			err = &Error{Code: Invalid, Field: "record", Message: "only systems and measurements are restored", Expected: "system:SLUG or measurement:ID"}
		}
		if err == nil && a.set == 0 {
			err = &Error{Code: Invalid, Message: "nothing would change: the record reads so already", Expected: "an earlier revision that differs"}
		}
		set = a.set
		return err
	})
	return set, err
}

func (a *applier) restoreMeasurement(ctx context.Context, measurement, field string, revision int64) error {
	withdrawn, err := a.number(ctx, `SELECT count(*) FROM withdrawn_measurements WHERE measurement = ?`, measurement)
	if err != nil {
		return err
	}
	if withdrawn > 0 {
		if err := a.reinstate(ctx, measurement); err != nil {
			return err
		}
	}
	current, meta, err := rowOf(ctx, a.tx, measurement) // not the kept statement: the row may be new to it
	if err != nil {
		return err
	}
	if current == nil {
		return &Error{Code: NotFound, Field: "record", Message: "there is no measurement " + strconv.Quote(Clip(measurement))}
	}
	then, err := rowAt(ctx, a.tx, *current, revision)
	if err != nil {
		return err
	}
	after := *current
	found := field == ""
	for i := range Columns {
		c := &Columns[i]
		if c.Table == TableSystems || c.Name == "measurement" || field != "" && c.Name != field {
			continue
		}
		found = true
		c.copy(&after, &then)
	}
	if !found {
		return &Error{Code: Invalid, Field: "field", Message: strconv.Quote(Clip(field)) + " is no column of a measurement", Expected: "a column of the measurement, or nothing for all of them"}
	}
	if err := hardError(CheckRow(&after, nil)); err != nil {
		return err
	}
	_, err = a.changeMeasurement(ctx, meta, current, &after, meta.systemID)
	return err
}

func (a *applier) restoreSystem(ctx context.Context, slug, field string, revision int64) error {
	id, err := a.number(ctx, `SELECT id FROM systems WHERE slug = ?`, slug)
	if err != nil {
		return err
	}
	if id == 0 {
		return &Error{Code: NotFound, Field: "record", Message: "there is no system " + strconv.Quote(Clip(slug))}
	}
	current, err := a.systemRow(ctx, id)
	if err != nil {
		return err
	}
	then, err := systemAt(ctx, a.tx, *current, revision)
	if err != nil {
		return err
	}
	values := map[string]string{}
	for _, c := range systemColumns {
		if field == "" || field == c.Name {
			values[c.Name] = c.Get(&then)
		}
	}
	if len(values) == 0 {
		return &Error{Code: Invalid, Field: "field", Message: strconv.Quote(Clip(field)) + " is no column of a system", Expected: "a column of the system, or nothing for all of them"}
	}
	return a.takeValues(ctx, id, current, values)
}

// systemAt takes the changes of a system after a revision back.
func systemAt(ctx context.Context, q querier, current Row, revision int64) (Row, error) {
	history, err := revisionsOf(ctx, q, "system:"+current.System)
	if err != nil {
		return current, err
	}
	for _, v := range history { // newest first
		if v.ID > revision && v.Action == "change" {
			if c, ok := ColumnByName(v.Field); ok {
				_ = c.Set(&current, v.Before)
			}
		}
	}
	return current, nil
}

// SystemRowAt returns the columns of a system as they were after a revision,
// beside what they are now.
func (s *Store) SystemRowAt(ctx context.Context, slug string, revision int64) (was, now *Row, err error) {
	err = s.read(ctx, func(tx *sql.Tx) error {
		a := s.applier(tx, 0, "")
		id, err := a.number(ctx, `SELECT id FROM systems WHERE slug = ?`, slug)
		if err != nil {
			return err
		}
		if id == 0 {
			return &Error{Code: NotFound, Field: "system", Message: "there is no system " + strconv.Quote(Clip(slug))}
		}
		if now, err = a.systemRow(ctx, id); err != nil {
			return err
		}
		then, err := systemAt(ctx, tx, *now, revision)
		was = &then
		return err
	})
	return was, now, err
}

// Undo takes a whole change set back, as a change set of its own: fields get
// the values they had, what was made is withdrawn, what was withdrawn or merged
// is put back. When something of it was changed again since, it is a Conflict
// that says what, and nothing is done.
func (s *Store) Undo(ctx context.Context, by, set int64, why string) (made int64, err error) {
	why = CleanText(why)
	if err := checkWhy(why); err != nil {
		return 0, err
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		revisions, err := revisionsOfSet(ctx, tx, set)
		if err != nil {
			return err
		}
		if len(revisions) == 0 {
			return &Error{Code: NotFound, Message: "there is no such change"}
		}
		a := s.applier(tx, by, "Taken back: "+why)
		a.undoes = set
		err = a.undo(ctx, revisions)
		made = a.set
		return err
	})
	return made, err
}

// ChangeSetRevisions returns what was changed in one change set, newest first.
func (s *Store) ChangeSetRevisions(ctx context.Context, set int64) ([]Revision, error) {
	out, err := revisionsOfSet(ctx, s.r, set)
	return out, fault("change set", err)
}

func revisionsOfSet(ctx context.Context, q querier, set int64) ([]Revision, error) {
	return revisionsWhere(ctx, q, "v.change_set_id = ?", set)
}

// undo goes through a change set from its end to its beginning.
func (a *applier) undo(ctx context.Context, revisions []Revision) error {
	later, err := a.changedSince(ctx, revisions)
	if err != nil {
		return err
	}
	if len(later) > 0 {
		return &Error{Code: Conflict, Message: "it cannot be taken back as a whole, because these were changed again since: " + strings.Join(later, ", "), Expected: "those changes taken back first, or single fields restored"}
	}
	for _, v := range revisions {
		kind, name, _ := strings.Cut(v.Record, ":")
		var err error
		switch kind {
		case "measurement":
			err = a.undoMeasurement(ctx, name, v)
		case "system":
			err = a.undoSystem(ctx, name, v)
		case "centreline":
			err = a.undoLine(ctx, name, v)
		default:
			err = &Error{Code: Conflict, Message: "this change is of " + strings.ReplaceAll(v.Record, ":", " ") + ", which is changed on its own page"}
		}
		if err != nil {
			return err
		}
	}
	return nil
}

// changedSince lists the records of a change set that something else touched
// after it: the same field, or the record as a whole.
func (a *applier) changedSince(ctx context.Context, revisions []Revision) (out []string, err error) {
	last := revisions[0].ID
	for _, v := range revisions {
		q := `SELECT count(*) FROM revisions WHERE record = ? AND id > ?`
		args := []any{v.Record, last}
		if v.Action == "change" || v.Field != "" {
			q += ` AND (field = ? OR field = '')`
			args = append(args, v.Field)
		}
		n, err := a.number(ctx, q, args...)
		if err != nil {
			return nil, err
		}
		name := strings.Replace(v.Record, ":", " ", 1)
		if v.Field != "" {
			name += " (" + v.Field + ")"
		}
		if n > 0 && !slices.Contains(out, name) {
			out = append(out, name)
		}
	}
	return out[:min(len(out), 20)], nil
}

func (a *applier) undoMeasurement(ctx context.Context, name string, v Revision) error {
	switch v.Action {
	case "create":
		return a.withdraw(ctx, name, "")
	case "withdraw":
		return a.reinstate(ctx, name)
	case "accept":
		return a.withdraw(ctx, name, v.Before)
	}
	current, meta, err := rowOf(ctx, a.tx, name)
	if err != nil || current == nil {
		return err
	}
	after, system := *current, meta.systemID
	if v.Field == "system" {
		if system, err = a.systemNamed(ctx, v.Before); err != nil {
			return err
		}
		if system == 0 {
			return &Error{Code: Conflict, Message: "the system " + strconv.Quote(v.Before) + " is no longer there"}
		}
		after.System = v.Before
	} else if c, ok := ColumnByName(v.Field); ok {
		if err := c.Set(&after, v.Before); err != nil {
			return err
		}
	}
	_, err = a.changeMeasurement(ctx, meta, current, &after, system)
	return err
}

func (a *applier) undoSystem(ctx context.Context, slug string, v Revision) error {
	id, err := a.number(ctx, `SELECT id FROM systems WHERE slug = ?`, slug)
	if err != nil {
		return err
	}
	switch {
	case v.Field == "merged_into" && v.Action == "withdraw":
		if _, err := a.revise(ctx, v.Record, "accept", v.Field, v.After, ""); err != nil {
			return err
		}
		_, err = a.exec(ctx, `DELETE FROM merged_systems WHERE system_id = ?`, id)
		return err
	case v.Field == "merged_into":
		into, err := a.systemNamed(ctx, v.Before)
		if err != nil {
			return err
		}
		rev, err := a.revise(ctx, v.Record, "withdraw", v.Field, "", v.Before)
		if err != nil {
			return err
		}
		_, err = a.exec(ctx, `INSERT INTO merged_systems (system_id, into_id, revision, merged_at) VALUES (?, ?, ?, ?)`, id, into, rev, a.at)
		return err
	case v.Action != "change":
		return nil // a system that was made stands empty once its measurements are withdrawn
	}
	row, err := a.systemRow(ctx, id)
	if err != nil {
		return err
	}
	return a.takeValues(ctx, id, row, map[string]string{v.Field: v.Before})
}

func (a *applier) undoLine(ctx context.Context, name string, v Revision) error {
	id, err := strconv.ParseInt(name, 10, 64)
	if err != nil {
		return errors.New("line " + name + " has no number")
	}
	there, err := a.number(ctx, `SELECT count(*) FROM centrelines WHERE id = ?`, id)
	if err != nil || there == 0 {
		return err // it went, or comes back, with its measurement
	}
	switch {
	case v.Action == "create":
		return a.withdrawLine(ctx, id, v.After)
	case v.Action == "change" && v.Field == "measurement":
		measurement, err := a.number(ctx, `SELECT id FROM measurements WHERE measurement = ?`, v.Before)
		if err != nil || measurement == 0 {
			return err
		}
		system, err := a.number(ctx, `SELECT system_id FROM measurements WHERE id = ?`, measurement)
		if err != nil {
			return err
		}
		return a.moveLine(ctx, id, v.Field, v.After, v.Before, measurement, system)
	case v.Action == "change" && v.Field == "system":
		measurement, err := a.number(ctx, `SELECT measurement_id FROM centrelines WHERE id = ? AND measurement_id IS NOT NULL`, id)
		if err != nil {
			return err
		}
		system, err := a.systemNamed(ctx, v.Before)
		if err != nil {
			return err
		}
		return a.moveLine(ctx, id, v.Field, v.After, v.Before, measurement, system)
	}
	return nil
}
