package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"errors"
	"time"
)

// Remarks of a check that are kept; more are counted.
const (
	mostProblems = 100_000
	mostOthers   = 10_000
)

// keepEvery is how often a check writes what it found: the most rows held in
// memory, and the most a stop of the program loses.
const (
	keepEvery  = 500
	shownAfter = 300 * time.Millisecond
)

// errStopped ends a check that was cancelled, or whose file was dropped.
var errStopped = errors.New("stopped")

type preparedRow struct {
	line                        int
	measurement, proposed, base string
	revision                    int64
	print                       []byte
}

type keptRemark struct {
	kind string
	p    RowProblem
}

// uploadCheck collects what the importer finds in a file and writes it away in
// small transactions of its own, so that others can write meanwhile.
type uploadCheck struct {
	s       *Store
	id      int64
	file    *pieces
	report  *UploadReport
	remarks []keptRemark
	rows    []preparedRow
	kept    map[string]int // remarks written by kind
	n       int            // remarks written
	refused int            // line refused last
	told    time.Time
}

// CheckUpload checks a file that was marked for it, row by row, against the
// catalogue as it is. It reads in one view of the catalogue and writes in many
// small steps. A cancelled check is no error.
func (s *Store) CheckUpload(ctx context.Context, id int64) error {
	u, err := scanUpload(s.r.QueryRowContext(ctx, selectUpload+` WHERE id = ? AND state = 'checking'`, id))
	if errors.Is(err, sql.ErrNoRows) {
		return nil
	}
	if err != nil {
		return fault("check a file", err)
	}
	if err := s.write(ctx, func(tx *sql.Tx) error { return clearCheck(ctx, tx, id) }); err != nil {
		return err
	}
	tx, err := s.r.BeginTx(ctx, &sql.TxOptions{ReadOnly: true})
	if err != nil {
		return fault("check a file", err)
	}
	defer tx.Rollback()
	c := &uploadCheck{s: s, id: id, file: &pieces{ctx: ctx, q: s.r, id: id}, report: &UploadReport{}, kept: map[string]int{}, told: s.now()}
	im := &importer{o: ImportOptions{By: u.By, Why: u.Why, Reading: u.Reading}, report: &ImportReport{}, more: map[string]int{}, waiting: map[string]int{},
		near: map[string][]filedPlace{}, ids: map[string]int{}, check: c}
	im.a = s.applier(tx, u.By, u.Why)
	im.a.agree = newAgreement()
	err = im.allowed(ctx, tx)
	if err == nil {
		err = im.read(ctx, c.file)
	}
	if err == nil {
		c.report.New, c.report.Changed, c.report.Identical = im.report.New, im.report.Changed, im.report.Identical
		err = c.finish(ctx)
	}
	if errors.Is(err, errStopped) {
		return nil
	}
	return err
}

func (c *uploadCheck) problem(p RowProblem) {
	if p.Line != c.refused || c.report.Refused == 0 {
		c.report.Refused++
		c.refused = p.Line
	}
	c.report.Problems++
	c.say("problem", p)
}

func (c *uploadCheck) remark(kind string, p RowProblem) {
	if kind == "warning" {
		c.report.Warnings++
	} else {
		c.report.Converted++
	}
	c.say(kind, p)
}

func (c *uploadCheck) say(kind string, p RowProblem) {
	most := mostOthers
	if kind == "problem" {
		most = mostProblems
	}
	if c.kept[kind] >= most {
		c.report.Unlisted++
		return
	}
	c.kept[kind]++
	p.Message, p.Expected = clipTo(p.Message, 400), clipTo(p.Expected, 400)
	c.remarks = append(c.remarks, keptRemark{kind, p})
}

func (c *uploadCheck) keep(line int, proposed string, print []byte, ex examined) error {
	r := preparedRow{line: line, proposed: proposed, print: print, revision: ex.meta.revision}
	if ex.current != nil {
		base, err := encodeRow(ex.current)
		if err != nil {
			return err
		}
		r.measurement, r.base = ex.current.Measurement, base
	}
	c.rows = append(c.rows, r)
	return nil
}

// reached is told after each row how many there were.
func (c *uploadCheck) reached(ctx context.Context, rows int) error {
	c.report.Rows = rows
	if len(c.rows)+len(c.remarks) < keepEvery && (rows%50 != 0 || c.s.now().Sub(c.told) < shownAfter) {
		return nil
	}
	return c.flush(ctx, "checking", "{}")
}

func (c *uploadCheck) finish(ctx context.Context) error {
	report, err := json.Marshal(c.report)
	if err != nil {
		return err
	}
	return c.flush(ctx, "checked", string(report))
}

// flush writes what is held, unless the check was stopped meanwhile.
func (c *uploadCheck) flush(ctx context.Context, state, report string) error {
	err := c.s.write(ctx, func(tx *sql.Tx) error {
		res, err := tx.ExecContext(ctx, `UPDATE uploads SET state = ?, report = ?, rows_read = ?, bytes_read = ?, updated_at = ? WHERE id = ? AND state = 'checking'`,
			state, report, c.report.Rows, c.file.read, c.s.stamp(), c.id)
		if err != nil {
			return err
		}
		if n, err := res.RowsAffected(); err != nil || n == 0 {
			return errors.Join(err, errStopped)
		}
		if err := c.writeRows(ctx, tx); err != nil {
			return err
		}
		return c.writeRemarks(ctx, tx)
	})
	c.rows, c.remarks, c.told = c.rows[:0], c.remarks[:0], c.s.now()
	return err
}

func (c *uploadCheck) writeRows(ctx context.Context, tx *sql.Tx) error {
	st, err := tx.PrepareContext(ctx, `INSERT INTO upload_rows (upload_id, line, measurement, proposed, base, base_revision, fingerprint) VALUES (?, ?, ?, ?, ?, ?, ?)`)
	if err != nil {
		return err
	}
	defer st.Close()
	for _, r := range c.rows {
		if _, err := st.ExecContext(ctx, c.id, r.line, r.measurement, r.proposed, r.base, r.revision, r.print); err != nil {
			return err
		}
	}
	return nil
}

func (c *uploadCheck) writeRemarks(ctx context.Context, tx *sql.Tx) error {
	st, err := tx.PrepareContext(ctx, `INSERT INTO upload_remarks (upload_id, n, kind, line, column_name, value, message, expected) VALUES (?, ?, ?, ?, ?, ?, ?, ?)`)
	if err != nil {
		return err
	}
	defer st.Close()
	for _, r := range c.remarks {
		c.n++
		if _, err := st.ExecContext(ctx, c.id, c.n, r.kind, r.p.Line, r.p.Column, r.p.Value, r.p.Message, r.p.Expected); err != nil {
			return err
		}
	}
	return nil
}

// FailCheck says that a check could not be done to its end.
func (s *Store) FailCheck(ctx context.Context, id int64) error {
	return s.write(ctx, func(tx *sql.Tx) error {
		_, err := tx.ExecContext(ctx, `UPDATE uploads SET state = 'failed', updated_at = ? WHERE id = ? AND state = 'checking'`, s.stamp(), id)
		return errors.Join(err, clearCheck(ctx, tx, id))
	})
}
