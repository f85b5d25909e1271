package catalogue

import (
	"context"
	"strconv"
)

// who names the person of a change; changes from the command line have none.
const whoExpr = `coalesce(a.credit, 'command line')`

func lineRecord(id int64) string { return "centreline:" + strconv.FormatInt(id, 10) }

// partiesExpr names both people of a change: whose contribution it was, and who
// let it into the catalogue (and may have edited it on the way).
const partiesExpr = `CASE WHEN t.author_id <> t.account_id THEN b.credit || ', accepted by ' || a.credit ELSE coalesce(b.credit, a.credit, 'command line') END`

// revisionsOf returns the revisions of one record, newest first.
func revisionsOf(ctx context.Context, q querier, record string) ([]Revision, error) {
	return revisionsWhere(ctx, q, "v.record = ?", record)
}

func revisionsWhere(ctx context.Context, q querier, condition string, args ...any) ([]Revision, error) {
	rows, err := q.QueryContext(ctx, `SELECT v.id, t.id, t.at, `+partiesExpr+`, t.why, v.record, v.field, v.before, v.after, v.action
		FROM revisions v JOIN change_sets t ON t.id = v.change_set_id
		LEFT JOIN accounts a ON a.id = t.account_id LEFT JOIN accounts b ON b.id = t.author_id
		WHERE `+condition+` ORDER BY v.id DESC`, args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []Revision
	for rows.Next() {
		var v Revision
		var at string
		if err := rows.Scan(&v.ID, &v.Set, &at, &v.Who, &v.Why, &v.Record, &v.Field, &v.Before, &v.After, &v.Action); err != nil {
			return nil, err
		}
		v.At = parseTime(at)
		out = append(out, v)
	}
	return out, rows.Err()
}

// History returns the revisions of one record ("system:SLUG" or
// "measurement:ID"), newest first.
func (s *Store) History(ctx context.Context, record string) ([]Revision, error) {
	out, err := revisionsOf(ctx, s.r, record)
	return out, fault("history", err)
}
