package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"slices"
	"time"
)

// Sample is what a curator read of an imported file before accepting all of
// it.
type Sample struct {
	ID    int64
	Batch int64
	Seed  int64   // of the drawing
	Total int     // submissions that waited when it was drawn
	Drawn []int64 // the submissions drawn, each of them read
	Who   string
	At    time.Time
}

// Batch is what waits of one imported file.
type Batch struct {
	ID      int64
	Who     string // credit line of the sender
	Why     string // what the file is, in the sender's words
	At      time.Time
	Waiting []int64 // its submissions that wait, in the order of the file
}

// Batch returns what waits of one imported file. A file of which nothing waits
// is NotFound.
func (s *Store) Batch(ctx context.Context, id int64) (*Batch, error) {
	b := &Batch{ID: id}
	err := s.read(ctx, func(tx *sql.Tx) error {
		var at string
		err := tx.QueryRowContext(ctx, `SELECT `+whoExpr+`, f.why, f.created_at FROM batches f LEFT JOIN accounts a ON a.id = f.account_id WHERE f.id = ?`, id).Scan(&b.Who, &b.Why, &at)
		if err != nil && !errors.Is(err, sql.ErrNoRows) {
			return err
		}
		b.At = parseTime(at)
		b.Waiting, err = submittedOf(ctx, tx, id)
		return err
	})
	if err == nil && len(b.Waiting) == 0 {
		err = nothingWaits()
	}
	return b, err
}

func nothingWaits() error { return &Error{Code: NotFound, Message: "nothing of that file is waiting"} }

// SubmissionsByID returns submissions in the order of ids; those that are not
// there are left out.
func (s *Store) SubmissionsByID(ctx context.Context, ids []int64) (out []Submission, err error) {
	err = s.read(ctx, func(tx *sql.Tx) error {
		for _, id := range ids {
			sub, err := submissionByID(ctx, tx, id)
			if CodeOf(err) == NotFound && err != nil {
				continue
			}
			if err != nil {
				return err
			}
			out = append(out, *sub)
		}
		return nil
	})
	return out, err
}

// AcceptBatch accepts all submitted rows of one imported file, all or none,
// and returns how many. The sample is kept with every change set of it; nil is
// none. When other rows wait than the sample was drawn from, it is a Conflict.
func (s *Store) AcceptBatch(ctx context.Context, batch, by int64, comment string, sample *Sample) (n int, err error) {
	comment = CleanText(comment)
	if err := checkComment(comment, false); err != nil {
		return 0, err
	}
	err = s.write(ctx, func(tx *sql.Tx) error {
		if err := mayCurate(ctx, tx, by); err != nil {
			return err
		}
		ids, err := submittedOf(ctx, tx, batch)
		if err != nil {
			return err
		}
		if len(ids) == 0 {
			return nothingWaits()
		}
		a := s.applier(tx, by, "") // one for all: it keeps its statements
		if sample != nil {
			if a.sample, err = a.keepSample(ctx, batch, sample, ids); err != nil {
				return err
			}
		}
		for _, id := range ids {
			if err := s.acceptOne(ctx, a, id, comment, nil, 0); err != nil {
				return err
			}
		}
		n = len(ids)
		return nil
	})
	return n, err
}

func (a *applier) keepSample(ctx context.Context, batch int64, sample *Sample, waiting []int64) (int64, error) {
	changed := len(waiting) != sample.Total
	for _, id := range sample.Drawn {
		changed = changed || !slices.Contains(waiting, id)
	}
	if changed || len(sample.Drawn) == 0 {
		return 0, &Error{Code: Conflict, Message: "other rows of this file wait now than the sample was drawn from: someone decided on some of them meanwhile", Expected: "a sample of what waits now"}
	}
	drawn, err := json.Marshal(sample.Drawn)
	if err != nil {
		return 0, err
	}
	return a.exec(ctx, `INSERT INTO samples (batch_id, account_id, at, seed, total, drawn) VALUES (?, ?, ?, ?, ?, ?)`, batch, orNull(a.by), a.at, sample.Seed, sample.Total, string(drawn))
}

// SampleOf returns the sample check a change set was accepted with, nil if
// there was none.
func (s *Store) SampleOf(ctx context.Context, changeSet int64) (*Sample, error) {
	x := &Sample{}
	var at, drawn string
	err := s.r.QueryRowContext(ctx, `SELECT p.id, p.batch_id, p.seed, p.total, p.drawn, p.at, `+whoExpr+` FROM change_sets t JOIN samples p ON p.id = t.sample_id LEFT JOIN accounts a ON a.id = p.account_id WHERE t.id = ?`, changeSet).
		Scan(&x.ID, &x.Batch, &x.Seed, &x.Total, &drawn, &at, &x.Who)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, nil
	}
	if err == nil {
		x.At = parseTime(at)
		err = json.Unmarshal([]byte(drawn), &x.Drawn)
	}
	return x, fault("sample", err)
}
