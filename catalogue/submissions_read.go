package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"strings"
)

// SubmissionsLimit is the most submissions one list holds; CountSubmissions
// gives the total.
const SubmissionsLimit = 1000

const selectSubmission = `SELECT u.id, coalesce(u.batch_id, 0), u.state, u.measurement, u.proposed, u.typed, u.base, u.base_revision, u.overrides, u.comment,
	u.line, u.line_settings, u.line_sinuosities, u.created_at, u.updated_at, u.act, u.instead,
	(SELECT count(*) FROM messages g WHERE g.submission_id = u.id),
	coalesce((SELECT coalesce(w.credit, 'command line') FROM messages g LEFT JOIN accounts w ON w.id = g.account_id WHERE g.submission_id = u.id ORDER BY g.id DESC LIMIT 1), ''),
	coalesce(a.id, 0), coalesce(a.name, ''), coalesce(a.credit, 'command line'), coalesce(a.role, ''), coalesce(a.orcid, ''), coalesce(a.disabled, 0)
	FROM submissions u LEFT JOIN accounts a ON a.id = u.account_id`

// Submissions lists those in a state ("" = any) by an account (0 = anyone),
// the longest waiting first.
func (s *Store) Submissions(ctx context.Context, state string, by int64) ([]Submission, error) {
	return s.SubmissionsPage(ctx, state, by, SubmissionsLimit, 0)
}

// SubmissionsPage is Submissions from offset on, at most limit of them.
func (s *Store) SubmissionsPage(ctx context.Context, state string, by int64, limit, offset int) ([]Submission, error) {
	w := submissionsWhere(state, by)
	return s.listSubmissions(ctx, w.String()+" ORDER BY u.id LIMIT ? OFFSET ?", append(w.args, min(max(limit, 0), SubmissionsLimit), max(offset, 0)))
}

// BatchSubmissions lists the first of the submissions of one imported file.
func (s *Store) BatchSubmissions(ctx context.Context, batch int64, limit int) ([]Submission, error) {
	return s.listSubmissions(ctx, " WHERE u.batch_id = ? ORDER BY u.id LIMIT ?", []any{batch, limit})
}

// CountSubmissions counts those in a state by an account, as Submissions.
func (s *Store) CountSubmissions(ctx context.Context, state string, by int64) (n int, err error) {
	w := submissionsWhere(state, by)
	err = s.r.QueryRowContext(ctx, `SELECT count(*) FROM submissions u`+w.String(), w.args...).Scan(&n)
	return n, fault("submissions", err)
}

func submissionsWhere(state string, by int64) *where {
	w := &where{}
	if state != "" {
		w.add("u.state = ?", state)
	}
	if by != 0 {
		w.add("u.account_id = ?", by)
	}
	return w
}

func (s *Store) listSubmissions(ctx context.Context, tail string, args []any) (out []Submission, err error) {
	err = s.read(ctx, func(tx *sql.Tx) error {
		out, err = submissionsOf(ctx, tx, tail, args)
		return err
	})
	return out, err
}

// Submission returns one with its messages.
func (s *Store) Submission(ctx context.Context, id int64) (*Submission, error) {
	var sub *Submission
	err := s.read(ctx, func(tx *sql.Tx) (err error) {
		if sub, err = submissionByID(ctx, tx, id); err == nil {
			if sub.Messages, err = messagesOf(ctx, tx, id); err == nil && sub.State == "accepted" && sub.Act == ActEdit {
				err = sub.became(ctx, tx)
			}
		}
		return err
	})
	return sub, err
}

func submissionByID(ctx context.Context, q querier, id int64) (*Submission, error) {
	subs, err := submissionsOf(ctx, q, " WHERE u.id = ?", []any{id})
	if err != nil {
		return nil, err
	}
	if len(subs) == 0 {
		return nil, &Error{Code: NotFound, Message: "there is no such contribution"}
	}
	return &subs[0], nil
}

// submissionsOf reads submissions and completes each with the record it would
// change. The list is read first: a transaction has one cursor at a time.
func submissionsOf(ctx context.Context, q querier, tail string, args []any) ([]Submission, error) {
	rows, err := q.QueryContext(ctx, selectSubmission+tail, args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []Submission
	for rows.Next() {
		sub, err := scanSubmission(rows)
		if err != nil {
			return nil, err
		}
		out = append(out, sub)
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	for i := range out {
		if err := out[i].compare(ctx, q); err != nil {
			return nil, err
		}
	}
	return out, nil
}

func scanSubmission(rows *sql.Rows) (Submission, error) {
	var u Submission
	var target, proposed, typed, base, overrides, windows, at, updated string
	err := rows.Scan(&u.ID, &u.Batch, &u.State, &target, &proposed, &typed, &base, &u.BaseRevision, &overrides, &u.Comment,
		&u.Centreline, &u.CentrelineSettings, &windows, &at, &updated, &u.Act, &u.Instead, &u.Said, &u.LastSaid,
		&u.By.ID, &u.By.Name, &u.By.Credit, &u.By.Role, &u.By.ORCID, &u.By.Disabled)
	if err != nil {
		return u, err
	}
	u.At, u.UpdatedAt = parseTime(at), parseTime(updated)
	if u.Row, err = decodeRow(proposed); err != nil {
		return u, err
	}
	if base != "" {
		b, err := decodeRow(base)
		if err != nil {
			return u, err
		}
		b.Normalise()
		u.Base = &b
		u.Row.Measurement = target
	}
	u.raw = u.Row
	if u.State != "draft" && u.State != "returned" {
		u.Row.Normalise()
	}
	u.Row.Invented = strings.HasPrefix(u.Row.Notes, InventedMark)
	for text, into := range map[string]any{typed: &u.Typed, overrides: &u.Overrides} {
		if text == "{}" {
			continue
		}
		if err := json.Unmarshal([]byte(text), into); err != nil {
			return u, err
		}
	}
	return u, json.Unmarshal([]byte(windows), &u.CentrelineSinuosities)
}

// compare fills Current, Changes and Since.
func (u *Submission) compare(ctx context.Context, q querier) error {
	proposed := normal(u.Row)
	if u.Base == nil {
		blank := NewRow()
		u.Changes = Diff(&blank, proposed)
		return nil
	}
	current, meta, err := rowOf(ctx, q, u.Row.Measurement)
	if err != nil || current == nil {
		return err
	}
	u.Current, u.CurrentRevision = current, meta.revision
	for _, ch := range Diff(u.Base, proposed) {
		if c, ok := ColumnByName(ch.Column); ok && u.State != "accepted" {
			ch.Before = c.Get(current)
		}
		u.Changes = append(u.Changes, ch)
	}
	if u.State != "accepted" && u.State != "withdrawn" {
		u.Since = Diff(u.Base, current)
	}
	return nil
}

// became finds what an accepted submission made of the catalogue: the record it
// was accepted as, and what the curator changed on the way.
func (u *Submission) became(ctx context.Context, q querier) error {
	revisions, err := revisionsWhere(ctx, q, "t.submission_id = ?", u.ID)
	if err != nil || len(revisions) == 0 {
		return err
	}
	u.Became = u.Row.Measurement
	for _, v := range revisions {
		if id, ok := strings.CutPrefix(v.Record, "measurement:"); ok {
			u.Became = id
		}
	}
	current, _, err := rowOf(ctx, q, u.Became)
	if err != nil || current == nil {
		return err
	}
	as, err := rowAt(ctx, q, *current, revisions[0].ID)
	if err != nil {
		return err
	}
	u.Accepted = &as
	// What the proposal left to the system, or to the moment of accepting, is no
	// edit.
	proposed := *normal(u.Row)
	proposed.Measurement, proposed.System = as.Measurement, as.System
	if u.Base == nil {
		inherit(&proposed, &as)
	}
	before := NewRow()
	if u.Base != nil {
		if before, err = rowAt(ctx, q, *current, revisions[len(revisions)-1].ID-1); err != nil {
			return err
		}
	}
	asked := map[string]bool{} // columns the author changed
	for _, ch := range u.Changes {
		asked[ch.Column] = true
	}
	u.Changes = nil
	for _, ch := range Diff(&before, &as) {
		if u.Base != nil || ch.Column != "measurement" && ch.Column != "system" {
			u.Changes = append(u.Changes, ch)
			asked[ch.Column] = true
		}
	}
	for _, ch := range Diff(&proposed, &as) {
		if asked[ch.Column] { // others' changes since are not the curator's
			u.Edits = append(u.Edits, ch)
		}
	}
	return nil
}

func messagesOf(ctx context.Context, q querier, id int64) ([]Message, error) {
	rows, err := q.QueryContext(ctx, `SELECT g.at, `+whoExpr+`, g.text FROM messages g LEFT JOIN accounts a ON a.id = g.account_id WHERE g.submission_id = ? ORDER BY g.id`, id)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []Message
	for rows.Next() {
		var m Message
		var at string
		if err := rows.Scan(&at, &m.Who, &m.Text); err != nil {
			return nil, err
		}
		m.At = parseTime(at)
		out = append(out, m)
	}
	return out, rows.Err()
}
