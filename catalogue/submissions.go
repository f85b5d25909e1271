package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"strconv"
)

// SaveDraft stores what a contributor has typed so far; nothing is checked but
// that it can be kept. It returns the id of the draft.
func (s *Store) SaveDraft(ctx context.Context, by int64, sub Submission) (id int64, err error) {
	err = s.write(ctx, func(tx *sql.Tx) error {
		id, err = s.keep(ctx, tx, by, &sub, "draft")
		return err
	})
	return id, err
}

// Submit sends a contribution to the curators. Hard findings, and warnings
// without a reason in Overrides, are refused with an Invalid Error whose Cause
// is Findings. The same contribution sent twice waits once.
func (s *Store) Submit(ctx context.Context, by int64, sub Submission) (id int64, err error) {
	if err := sub.readable(); err != nil {
		return 0, err
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := maySend(ctx, tx, by); err != nil {
			return err
		}
		if err := s.ready(ctx, tx, &sub); err != nil {
			return err
		}
		if id, err = s.keep(ctx, tx, by, &sub, "submitted"); err != nil {
			return err
		}
		return s.rehide(ctx, tx, id, &sub)
	})
	return id, err
}

// readable refuses a contribution with cells that cannot be read.
func (sub *Submission) readable() error {
	if len(sub.Typed) == 0 {
		return nil
	}
	for _, c := range Columns {
		if v, ok := sub.Typed[c.Name]; ok {
			var r Row
			if e := c.Set(&r, v); e != nil {
				return e
			}
		}
	}
	return &Error{Code: Invalid, Message: "some cells cannot be read"}
}

// Findings are the Cause of a refused submission.
type Findings []Finding

func (f Findings) Error() string { return strconv.Itoa(len(f)) + " findings" }

// ready checks a contribution before it goes to review.
func (s *Store) ready(ctx context.Context, tx *sql.Tx, sub *Submission) error {
	findings, err := s.check(ctx, tx, sub.Row)
	if err != nil {
		return err
	}
	var open Findings
	for _, f := range findings {
		if f.Hard || CleanText(sub.Overrides[f.Key]) == "" {
			open = append(open, f)
		}
	}
	if len(open) > 0 {
		first := open[0]
		for _, f := range open {
			if f.Hard {
				first = f
				break
			}
		}
		e := &Error{Code: Invalid, Field: first.Column, Message: first.Message, Expected: first.Expected, Cause: open}
		if !first.Hard && e.Expected == "" {
			e.Expected = "another value, or a reason why it is right"
		}
		return e
	}
	if sub.Centreline != "" {
		return checkLine(&Centreline{Line: sub.Centreline, Settings: sub.CentrelineSettings, Sinuosities: sub.CentrelineSinuosities})
	}
	return nil
}

// keep inserts or updates a submission of its owner.
func (s *Store) keep(ctx context.Context, tx *sql.Tx, by int64, sub *Submission, state string) (int64, error) {
	by, err := keptFor(ctx, tx, by, sub)
	if err != nil {
		return 0, err
	}
	if sub.Row.Contributor == "" && sub.Row.Measurement == "" && by != 0 && state == "submitted" {
		a, err := accountByID(ctx, tx, by)
		if err != nil {
			return 0, err
		}
		sub.Row.Contributor = a.Credit
	}
	p, err := s.pack(ctx, tx, sub)
	if err != nil {
		return 0, err
	}
	if err := s.checkAudience(ctx, tx, by, sub, state, p.base != ""); err != nil {
		return 0, err
	}
	if state == "submitted" {
		if p.base != "" && len(Diff(sub.Base, normal(sub.Row))) == 0 && sub.Centreline == "" {
			return 0, &Error{Code: Invalid, Message: "nothing is changed: the record already reads so", Expected: "a change in at least one field"}
		}
		if twin, err := pendingTwin(ctx, tx, p.print, by, sub.ID); err != nil || twin != 0 {
			return twin, err
		}
	}
	args := []any{state, p.target, p.proposed, p.typed, p.base, sub.BaseRevision, p.overrides, sub.Centreline, sub.CentrelineSettings, p.windows, p.print, s.stamp()}
	if sub.ID != 0 {
		_, err = tx.ExecContext(ctx, `UPDATE submissions SET state = ?, measurement = ?, proposed = ?, typed = ?, base = ?, base_revision = ?, overrides = ?,
			line = ?, line_settings = ?, line_sinuosities = ?, fingerprint = ?, updated_at = ? WHERE id = ?`, append(args, sub.ID)...)
		if err == nil {
			err = keepAudience(ctx, tx, sub.ID, sub.Audience)
		}
		return sub.ID, err
	}
	res, err := tx.ExecContext(ctx, `INSERT INTO submissions (state, measurement, proposed, typed, base, base_revision, overrides,
		line, line_settings, line_sinuosities, fingerprint, updated_at, created_at, account_id, batch_id) VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
		append(args, s.stamp(), orNull(by), orNull(sub.Batch))...)
	if err != nil {
		return 0, err
	}
	id, err := res.LastInsertId()
	if err == nil {
		err = keepAudience(ctx, tx, id, sub.Audience)
	}
	return id, err
}

// keptFor refuses to write over what is another person's or decided, and
// returns whose the submission is.
func keptFor(ctx context.Context, tx *sql.Tx, by int64, sub *Submission) (int64, error) {
	if sub.ID == 0 {
		return by, nil
	}
	var owner int64
	var state, act string
	err := tx.QueryRowContext(ctx, `SELECT coalesce(account_id, 0), state, coalesce(batch_id, 0), act FROM submissions WHERE id = ?`, sub.ID).Scan(&owner, &state, &sub.Batch, &act)
	switch {
	case errors.Is(err, sql.ErrNoRows):
		return 0, &Error{Code: NotFound, Message: "there is no such contribution"}
	case err != nil:
		return 0, err
	case owner != by:
		return 0, &Error{Code: Forbidden, Message: "this contribution belongs to someone else"}
	case state == "accepted" || state == "withdrawn":
		return 0, &Error{Code: Conflict, Message: "this contribution is already " + state + "; start a new one"}
	case act != ActEdit:
		return 0, &Error{Code: Conflict, Message: "this is a proposal to " + map[string]string{ActWithdraw: "withdraw a record", ActRestore: "put a record back"}[act] + ", which has no values to change; take it back, or start a new one"}
	}
	return owner, nil
}

func normal(r Row) *Row {
	r.Normalise()
	return &r
}

// packed is a submission as its table holds it.
type packed struct {
	target, proposed, typed, base, overrides, windows string
	print                                             []byte
}

func (s *Store) pack(ctx context.Context, tx *sql.Tx, sub *Submission) (p packed, err error) {
	current, meta, err := rowOf(ctx, tx, sub.Row.Measurement)
	if err != nil {
		return p, err
	}
	if current != nil {
		p.target = current.Measurement
		base := *current
		if sub.BaseRevision == 0 {
			sub.BaseRevision = meta.revision
		} else if sub.BaseRevision < meta.revision {
			if base, err = rowAt(ctx, tx, *current, sub.BaseRevision); err != nil {
				return p, err
			}
		}
		sub.Base = &base
		if p.base, err = encodeRow(&base); err != nil {
			return p, err
		}
		if sub.Row.System == "" {
			sub.Row.System = base.System
		}
	}
	if p.proposed, err = encodeRow(&sub.Row); err != nil {
		return p, err
	}
	if p.typed, err = encodeMap(sub.Typed); err != nil {
		return p, err
	}
	if p.overrides, err = encodeMap(sub.Overrides); err != nil {
		return p, err
	}
	if p.windows, err = encodeWindows(sub.CentrelineSinuosities); err != nil {
		return p, err
	}
	if sub.Centreline != "" && !json.Valid([]byte(sub.Centreline)) || sub.CentrelineSettings != "" && !json.Valid([]byte(sub.CentrelineSettings)) {
		return p, &Error{Code: Invalid, Field: "centreline", Message: "the line cannot be read", Expected: "a GeoJSON LineString"}
	}
	p.print = fingerprint(p.proposed, sub.Centreline)
	return p, nil
}

// pendingTwin finds the same proposal of the same person already waiting.
func pendingTwin(ctx context.Context, tx querier, print []byte, by, not int64) (int64, error) {
	var id int64
	err := tx.QueryRowContext(ctx, `SELECT id FROM submissions WHERE fingerprint = ? AND state = 'submitted' AND coalesce(account_id, 0) = ? AND id <> ? LIMIT 1`, print, by, not).Scan(&id)
	if errors.Is(err, sql.ErrNoRows) {
		return 0, nil
	}
	return id, err
}
