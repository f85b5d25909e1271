package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"strconv"
)

// ProposeWithdrawal asks the curators to take an accepted measurement out of
// the catalogue. The reason is the first message about it. instead names the
// measurement that stands for it, "" for none. The same asked for twice waits
// once.
func (s *Store) ProposeWithdrawal(ctx context.Context, by int64, measurement, instead, why string) (id int64, err error) {
	return s.proposeAct(ctx, by, ActWithdraw, measurement, instead, why)
}

// ProposeRestoration asks the curators to put a withdrawn measurement back.
func (s *Store) ProposeRestoration(ctx context.Context, by int64, measurement, why string) (id int64, err error) {
	return s.proposeAct(ctx, by, ActRestore, measurement, "", why)
}

func (s *Store) proposeAct(ctx context.Context, by int64, act, measurement, instead, why string) (id int64, err error) {
	why, instead = CleanText(why), CleanText(instead)
	if err := checkWhy(why); err != nil {
		return 0, err
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := maySend(ctx, tx, by); err != nil {
			return err
		}
		if err := maySend(ctx, tx, by); err != nil {
			return err
		}
		row, revision, err := actsOn(ctx, tx, act, measurement, instead)
		if err != nil {
			return err
		}
		err = tx.QueryRowContext(ctx, `SELECT id FROM submissions WHERE state = 'submitted' AND act = ? AND measurement = ? AND coalesce(account_id, 0) = ?`, act, row.Measurement, by).Scan(&id)
		if !errors.Is(err, sql.ErrNoRows) {
			return err // asked for already, or a fault
		}
		record, err := encodeRow(row)
		if err != nil {
			return err
		}
		res, err := tx.ExecContext(ctx, `INSERT INTO submissions (state, account_id, measurement, proposed, base, base_revision, act, instead, fingerprint, created_at, updated_at)
			VALUES ('submitted', ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`, orNull(by), row.Measurement, record, record, revision, act, instead, fingerprint(act+record, instead), s.stamp(), s.stamp())
		if err != nil {
			return err
		}
		if id, err = res.LastInsertId(); err != nil {
			return err
		}
		return s.say(ctx, tx, id, by, why)
	})
	return id, err
}

// actsOn finds the record of a proposal: one in the catalogue to be withdrawn,
// or a withdrawn one to be put back.
func actsOn(ctx context.Context, tx *sql.Tx, act, measurement, instead string) (*Row, int64, error) {
	current, meta, err := rowOf(ctx, tx, measurement)
	if err != nil {
		return nil, 0, err
	}
	if act == ActRestore {
		gone, err := withdrawnWhere(ctx, tx, "", ` WHERE w.measurement = ?1`, measurement)
		if err != nil {
			return nil, 0, err
		}
		if len(gone) == 0 {
			return nil, 0, &Error{Code: NotFound, Field: "measurement", Message: "there is no withdrawn measurement " + strconv.Quote(Clip(measurement))}
		}
		return &gone[0].Row, gone[0].Revision, nil
	}
	if current == nil {
		return nil, 0, &Error{Code: NotFound, Field: "measurement", Message: "there is no accepted measurement " + strconv.Quote(Clip(measurement))}
	}
	if instead != "" {
		other, _, err := rowOf(ctx, tx, instead)
		if err != nil {
			return nil, 0, err
		}
		if other == nil || instead == measurement {
			return nil, 0, &Error{Code: Invalid, Field: "instead", Message: strconv.Quote(Clip(instead)) + " is not another measurement of the catalogue", Expected: "the id of the measurement that stands in its place, as m000123, or nothing"}
		}
	}
	return current, meta.revision, nil
}

// acceptAct does what a proposal other than an edit asks for.
func (a *applier) acceptAct(ctx context.Context, u *Submission, seen int64) error {
	var first string
	err := a.tx.QueryRowContext(ctx, `SELECT text FROM messages WHERE submission_id = ? ORDER BY id LIMIT 1`, u.ID).Scan(&first)
	if err != nil && !errors.Is(err, sql.ErrNoRows) {
		return err
	}
	if a.why == "" || first == "" {
		a.why += first
	} else if a.why != first {
		a.why = first + "; " + a.why
	}
	if u.Act == ActRestore {
		return a.reinstate(ctx, u.Row.Measurement)
	}
	current, meta, err := a.rowOf(ctx, u.Row.Measurement)
	if err != nil {
		return err
	}
	if current != nil && u.Base != nil && meta.revision != u.BaseRevision && meta.revision != seen {
		v := &VersionConflict{Base: *u.Base, Current: *current, Proposed: *u.Base, Revision: meta.revision, Since: Diff(u.Base, current)}
		return &Error{Code: Conflict, Field: "measurement", Message: "this record was changed after its withdrawal was proposed; look at it as it is now", Expected: "a decision on the record as it is now", Cause: v}
	}
	return a.withdraw(ctx, u.Row.Measurement, u.Instead)
}
