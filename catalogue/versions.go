package catalogue

import "context"

// VersionConflict is the Cause of a Conflict error about one record: both
// versions, so that nothing is lost.
type VersionConflict struct {
	Base     Row // what the author saw
	Current  Row // accepted since by someone else
	Proposed Row
	Since    []FieldChange // base to current
	Proposal []FieldChange // base to proposed
	Revision int64         // of Current: give it to AcceptEdits
}

func (v *VersionConflict) Error() string { return "the record has two versions" }

// rowAt returns an accepted row as it was at a revision, by taking back the
// changes after it. The caller gives the current row.
func rowAt(ctx context.Context, q querier, current Row, revision int64) (Row, error) {
	was := current
	slug := current.System
	undo := func(record string) error {
		rows, err := q.QueryContext(ctx, `SELECT field, before FROM revisions WHERE record = ? AND id > ? AND action = 'change' ORDER BY id DESC`, record, revision)
		if err != nil {
			return err
		}
		defer rows.Close()
		for rows.Next() {
			var field, before string
			if err := rows.Scan(&field, &before); err != nil {
				return err
			}
			if c, ok := ColumnByName(field); ok {
				_ = c.Set(&was, before)
			}
		}
		return rows.Err()
	}
	if err := undo("measurement:" + current.Measurement); err != nil {
		return was, err
	}
	// Columns of the system are taken back only while the row stayed in it.
	if was.System == slug {
		if err := undo("system:" + slug); err != nil {
			return was, err
		}
	}
	was.WindowSinuosities = nil
	was.Normalise()
	return was, nil
}

// merge puts the author's changes on top of the current row. It is clean when
// nobody else changed the measurement since, and nobody changed a column of
// the system to something else than the author did.
func merge(base, current, proposed *Row) (merged Row, clean bool) {
	merged, clean = *current, true
	for i := range Columns {
		c := &Columns[i]
		ours, theirs := !c.same(base, proposed), !c.same(base, current)
		agree := c.same(current, proposed)
		switch {
		case theirs && !agree && c.Table != TableSystems, ours && theirs && !agree:
			clean = false
		}
		if ours {
			c.copy(&merged, proposed)
		}
	}
	return merged, clean
}

func (c *Column) copy(to, from *Row) {
	if c.num != nil {
		*c.num(to) = *c.num(from)
		return
	}
	*c.text(to) = *c.text(from)
}
