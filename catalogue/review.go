package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"sort"
	"strings"
	"unicode/utf8"
)

const maxComment = 20000

func checkComment(text string, needed bool) error {
	if needed && text == "" {
		return &Error{Code: Invalid, Field: "comment", Message: "the comment is empty", Expected: "what the contributor should change, or why"}
	}
	if utf8.RuneCountInString(text) > maxComment || !utf8.ValidString(text) {
		return &Error{Code: Invalid, Field: "comment", Message: "the comment is too long or not UTF-8", Expected: "at most 20000 characters"}
	}
	return nil
}

// decide moves a submission from one of the states to another, or says who was
// first.
func (s *Store) decide(ctx context.Context, tx *sql.Tx, id int64, to, comment string, by int64, from ...string) error {
	args := []any{to, comment, comment, s.stamp(), id}
	for _, f := range from {
		args = append(args, f)
	}
	res, err := tx.ExecContext(ctx, `UPDATE submissions SET state = ?, comment = CASE ? WHEN '' THEN comment ELSE ? END, updated_at = ?
		WHERE id = ? AND state IN (?`+strings.Repeat(", ?", len(from)-1)+`)`, args...)
	if err != nil {
		return err
	}
	if n, err := res.RowsAffected(); err != nil || n == 1 {
		if err == nil && comment != "" {
			err = s.say(ctx, tx, id, by, comment)
		}
		return err
	}
	var state string
	err = tx.QueryRowContext(ctx, `SELECT state FROM submissions WHERE id = ?`, id).Scan(&state)
	if errors.Is(err, sql.ErrNoRows) {
		return &Error{Code: NotFound, Message: "there is no such contribution"}
	}
	if err != nil {
		return err
	}
	return &Error{Code: Conflict, Message: "this contribution is " + state + " by now: someone else was first, or it was sent twice", Expected: "one that is " + strings.Join(from, " or ")}
}

func (s *Store) say(ctx context.Context, tx *sql.Tx, id, by int64, text string) error {
	_, err := tx.ExecContext(ctx, `INSERT INTO messages (submission_id, account_id, at, text) VALUES (?, ?, ?, ?)`, id, orNull(by), s.stamp(), text)
	return err
}

// ownerOf returns whose a submission is, 0 = the command line.
func ownerOf(ctx context.Context, q querier, id int64) (owner int64, err error) {
	err = q.QueryRowContext(ctx, `SELECT coalesce(account_id, 0) FROM submissions WHERE id = ?`, id).Scan(&owner)
	if errors.Is(err, sql.ErrNoRows) {
		return 0, &Error{Code: NotFound, Message: "there is no such contribution"}
	}
	return owner, err
}

// Comment adds a message of the owner or of a curator.
func (s *Store) Comment(ctx context.Context, id, by int64, text string) error {
	text = CleanText(text)
	if err := checkComment(text, true); err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		owner, err := ownerOf(ctx, tx, id)
		if err != nil {
			return err
		}
		if owner != by {
			if err := mayCurate(ctx, tx, by); err != nil {
				return err
			}
		}
		return s.say(ctx, tx, id, by, text)
	})
}

// Return sends a submission back to its author with a comment.
func (s *Store) Return(ctx context.Context, id, by int64, comment string) error {
	comment = CleanText(comment)
	if err := checkComment(comment, true); err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		return s.decide(ctx, tx, id, "returned", comment, by, "submitted")
	})
}

// Withdraw takes a contribution back; only its author may.
func (s *Store) Withdraw(ctx context.Context, id, by int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		owner, err := ownerOf(ctx, tx, id)
		if err != nil {
			return err
		}
		if owner != by {
			return &Error{Code: Forbidden, Message: "only its author can withdraw a contribution"}
		}
		if err := s.decide(ctx, tx, id, "withdrawn", "", by, "draft", "submitted", "returned"); err != nil {
			return err
		}
		return unhide(ctx, tx, id, "")
	})
}

// Accept makes a submission part of the catalogue. When the record changed
// since the author saw it, it is a Conflict Error whose Cause is a
// *VersionConflict; AcceptEdits settles it.
func (s *Store) Accept(ctx context.Context, id, by int64, comment string) error {
	return s.accept(ctx, id, by, comment, nil, 0)
}

// AcceptSeen is Accept of a withdrawal by a curator who saw the record at a
// revision, although it changed after it was proposed.
func (s *Store) AcceptSeen(ctx context.Context, id, by, seen int64, comment string) error {
	return s.accept(ctx, id, by, comment, nil, seen)
}

// AcceptEdits accepts a submission as the curator edited it. seen is the
// CurrentRevision of the record the curator saw (0 for a new one): if it has
// changed since, it is a Conflict.
func (s *Store) AcceptEdits(ctx context.Context, id, by int64, edited Row, seen int64, comment string) error {
	return s.accept(ctx, id, by, comment, &edited, seen)
}

func (s *Store) accept(ctx context.Context, id, by int64, comment string, edited *Row, seen int64) error {
	comment = CleanText(comment)
	if err := checkComment(comment, false); err != nil {
		return err
	}
	return s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		return s.acceptOne(ctx, s.applier(tx, by, ""), id, comment, edited, seen)
	})
}

func submittedOf(ctx context.Context, tx *sql.Tx, batch int64) ([]int64, error) {
	rows, err := tx.QueryContext(ctx, `SELECT id FROM submissions WHERE batch_id = ? AND state = 'submitted' ORDER BY id`, batch)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var ids []int64
	for rows.Next() {
		var id int64
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		ids = append(ids, id)
	}
	return ids, rows.Err()
}

// acceptOne accepts one submission as a change set of its own.
func (s *Store) acceptOne(ctx context.Context, a *applier, id int64, comment string, edited *Row, seen int64) error {
	if err := s.decide(ctx, a.tx, id, "accepted", comment, a.by, "submitted"); err != nil {
		return err
	}
	sub, err := submissionByID(ctx, a.tx, id)
	if err != nil {
		return err
	}
	a.set, a.why, a.from, a.owner = 0, whyAccepted(comment, sub.Overrides), id, sub.By.ID
	if sub.Act != ActEdit {
		return a.acceptAct(ctx, sub, seen)
	}
	row, err := sub.settle(ctx, a, edited, seen)
	if err != nil {
		return err
	}
	aud, err := audienceOf(ctx, a.tx, id)
	if err != nil {
		return err
	}
	if aud.Kind == AudienceLater && (aud.Until == "" || aud.Until > s.today()) {
		return s.embargo(ctx, a, sub, row, aud)
	}
	if _, err := a.apply(ctx, &row); err != nil {
		return err
	}
	if sub.Centreline != "" {
		if _, err = a.addLine(ctx, Centreline{System: row.System, Measurement: row.Measurement, Line: sub.Centreline, Settings: sub.CentrelineSettings, Sinuosities: sub.CentrelineSinuosities}); err != nil {
			return err
		}
	}
	if err := unhide(ctx, a.tx, id, row.System); err != nil {
		return err
	}
	return keepAudience(ctx, a.tx, id, Audience{})
}

// settle returns the row to be written, or the conflict.
func (u *Submission) settle(ctx context.Context, a *applier, edited *Row, seen int64) (Row, error) {
	current, meta, err := a.rowOf(ctx, u.Row.Measurement)
	if err != nil {
		return Row{}, err
	}
	proposed := *normal(u.Row)
	conflict := func(base Row) error {
		v := &VersionConflict{Base: base, Current: *current, Proposed: proposed, Revision: meta.revision}
		v.Since, v.Proposal = Diff(&base, current), Diff(&base, &proposed)
		return &Error{Code: Conflict, Field: "measurement", Message: "this record was changed after the contribution was written; both versions are shown", Expected: "a decision on the two versions", Cause: v}
	}
	switch {
	case edited != nil && current == nil && seen == 0:
		return *edited, nil
	case edited != nil && current != nil && seen == meta.revision:
		edited.Measurement = current.Measurement
		return *edited, nil
	case edited != nil && current != nil:
		return Row{}, conflict(*current)
	case current == nil && u.Base == nil:
		return u.raw, nil
	case current == nil:
		return Row{}, &Error{Code: Conflict, Field: "measurement", Message: "the record this would change was withdrawn", Expected: "that it is put back first, or that this is returned"}
	case u.Base == nil: // someone else gave a new record the same id
		return Row{}, conflict(*current)
	}
	merged, clean := merge(u.Base, current, &proposed)
	if !clean {
		return Row{}, conflict(*u.Base)
	}
	return merged, nil
}

// whyAccepted joins the curator's word and the author's reasons.
func whyAccepted(comment string, overrides map[string]string) string {
	parts := []string{}
	if comment != "" {
		parts = append(parts, comment)
	}
	keys := make([]string, 0, len(overrides))
	for k := range overrides {
		keys = append(keys, k)
	}
	sort.Strings(keys)
	for _, k := range keys {
		parts = append(parts, k+": "+overrides[k])
	}
	return strings.Join(parts, "; ")
}
