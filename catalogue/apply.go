package catalogue

import (
	"context"
	"database/sql"
	"errors"
	"fmt"
	"strconv"
)

// applier writes accepted rows inside one transaction: one change set.
type applier struct {
	s     *Store
	tx    *sql.Tx
	at    string
	by    int64 // account that accepts, 0 = the command line
	why   string
	from  int64 // submission, 0 = none
	owner int64 // author of the submission, 0 = same or none

	sample, undoes int64 // sample check it was accepted with, change set it takes back; 0 = none

	all   bool       // what is odd is looked for although something is impossible
	agree *agreement // of the rows of one file about their systems, or nil
	set   int64      // change set, made at the first change
	stmts map[string]*sql.Stmt
}

// outcome of applying one row.
type outcome int

const (
	rowIdentical outcome = iota
	rowNew
	rowChanged
)

func (s *Store) applier(tx *sql.Tx, by int64, why string) *applier {
	return &applier{s: s, tx: tx, at: s.stamp(), by: by, why: why, stmts: map[string]*sql.Stmt{}}
}

func orNull(id int64) any {
	if id == 0 {
		return nil
	}
	return id
}

// prepared keeps statements for the life of the transaction.
func (a *applier) prepared(ctx context.Context, q string) (*sql.Stmt, error) {
	if st, ok := a.stmts[q]; ok {
		return st, nil
	}
	st, err := a.tx.PrepareContext(ctx, q)
	if err == nil {
		a.stmts[q] = st
	}
	return st, err
}

func (a *applier) exec(ctx context.Context, q string, args ...any) (int64, error) {
	st, err := a.prepared(ctx, q)
	if err != nil {
		return 0, err
	}
	res, err := st.ExecContext(ctx, args...)
	if err != nil {
		return 0, err
	}
	return res.LastInsertId()
}

// number runs a query for one integer, 0 when there is no row.
func (a *applier) number(ctx context.Context, q string, args ...any) (int64, error) {
	st, err := a.prepared(ctx, q)
	if err != nil {
		return 0, err
	}
	var id int64
	err = st.QueryRowContext(ctx, args...).Scan(&id)
	if err == sql.ErrNoRows {
		return 0, nil
	}
	return id, err
}

// revise records one change and returns the revision.
func (a *applier) revise(ctx context.Context, record, action, field, before, after string) (int64, error) {
	if a.set == 0 {
		id, err := a.exec(ctx, `INSERT INTO change_sets (at, account_id, why, submission_id, author_id, sample_id, undoes) VALUES (?, ?, ?, ?, ?, ?, ?)`,
			a.at, orNull(a.by), a.why, orNull(a.from), orNull(a.owner), orNull(a.sample), orNull(a.undoes))
		if err != nil {
			return 0, err
		}
		a.set = id
	}
	return a.exec(ctx, `INSERT INTO revisions (change_set_id, record, action, field, before, after) VALUES (?, ?, ?, ?, ?, ?)`,
		a.set, record, action, field, before, after)
}

// examined is a row beside what is stored: where it belongs and what is odd.
type examined struct {
	current  *Row // the accepted measurement of that id, nil when new
	meta     rowMeta
	systemID int64 // 0 = a new system
	named    bool  // the row named its system by slug
	system   *Row  // columns of the system as stored, nil when new
	findings []Finding
	twin     string // id of an accepted measurement equal in all that is said
}

// apply writes one row: a new measurement, or the changed columns of a known
// one. Columns of the system change the system. The row comes back as stored,
// with its ids. Blank choices mean "not said". Warnings do not stop it.
func (a *applier) apply(ctx context.Context, p *Row) (outcome, error) {
	ex, err := a.locate(ctx, p)
	if err != nil {
		return 0, err
	}
	if err := hardError(append(ex.findings, CheckRow(p, nil)...)); err != nil {
		return 0, err
	}
	return a.put(ctx, p, ex)
}

// examine locates a row and looks for all that is odd about it. It writes
// nothing.
func (a *applier) examine(ctx context.Context, p *Row) (examined, error) {
	ex, err := a.locate(ctx, p)
	if err != nil {
		return ex, err
	}
	ex.findings = append(ex.findings, CheckRow(p, a.s.onLand)...)
	if hardError(ex.findings) != nil {
		if a.all {
			ex.findings = append(append(ex.findings, besides(p, a.s.onLand, ex.findings)...), a.checkUnit(p)...)
		}
		return ex, nil
	}
	ex.findings = append(ex.findings, a.checkUnit(p)...)
	cited, err := a.checkCitation(ctx, &ex, p)
	if err != nil {
		return ex, err
	}
	ex.findings = append(ex.findings, cited...)
	if ex.current == nil {
		for _, c := range systemChanges(ex.system, p) {
			ex.findings = append(ex.findings, systemChangeFinding(c, ex.system, p))
		}
	}
	if c := ex.current; c != nil && c.Source != p.Source && c.SystemName != p.SystemName && c.LatitudeDeg != p.LatitudeDeg {
		ex.findings = append(ex.findings, warn("measurement", "id_from_elsewhere", fmt.Sprintf("%s is a measurement of %s from another source at another place: is the id from another catalogue?", c.Measurement, Clip(c.SystemName)),
			"an empty cell for a new measurement"))
	}
	near, err := a.neighbours(ctx, p)
	if err != nil || len(near) == 0 {
		return ex, err
	}
	if ex.current == nil {
		if ex.twin, err = a.twin(ctx, p, near); err != nil {
			return ex, err
		}
	}
	ex.findings = append(ex.findings, nearDuplicate(near[0]))
	return ex, nil
}

// locate finds what a row belongs to, fills in what it does not say and
// normalises it.
func (a *applier) locate(ctx context.Context, p *Row) (ex examined, err error) {
	if ex.current, ex.meta, err = a.rowOf(ctx, p.Measurement); err != nil {
		return ex, err
	}
	if ex.current == nil && PrivateContribution(p.Measurement) != 0 {
		ex.findings = append(ex.findings, Finding{Column: "measurement", Key: "measurement_private", Hard: true,
			Message: p.Measurement + " names a private row, which no file changes", Expected: "an empty cell for a new measurement; the private row is changed on its own page"})
	}
	if ex.current == nil && p.Measurement != "" {
		gone, err := a.number(ctx, `SELECT count(*) FROM withdrawn_measurements WHERE measurement = ?`, p.Measurement)
		if err != nil {
			return ex, err
		}
		if gone > 0 {
			ex.findings = append(ex.findings, Finding{Column: "measurement", Key: "measurement_withdrawn", Hard: true,
				Message: strconv.Quote(p.Measurement) + " was withdrawn, and its id is not given again", Expected: "an empty cell for a new measurement; to put the old one back, ask for that on its page"})
		}
	}
	ex.named = p.System != ""
	ex.systemID, ex.system, err = a.place(ctx, p, ex.current)
	var refused *Error
	if errors.As(err, &refused) && refused.Code == Invalid {
		ex.findings = append(ex.findings, Finding{Column: refused.Field, Key: refused.Field + "_allowed", Message: refused.Message, Expected: refused.Expected, Hard: true})
		err = nil
	}
	if err != nil {
		return ex, err
	}
	if ex.system != nil && ex.current != nil && ex.current.System != p.System {
		// A measurement that moves leaves what it carried of its old system.
		for _, c := range systemColumns {
			if c.same(p, ex.current) {
				c.copy(p, ex.system)
			}
		}
	}
	if a.agree != nil {
		ex.findings = append(ex.findings, a.agree.reconcile(p, &ex)...)
	}
	if ex.system != nil && (ex.current == nil || ex.current.System != p.System) {
		inherit(p, ex.system)
	}
	ex.findings = append(ex.findings, unsaid(p)...)
	p.Normalise()
	if ex.current != nil && ex.current.Invented && !p.Invented {
		// The mark lives in the notes, and no edit of them may make a survey of
		// what nobody measured.
		ex.findings = append(ex.findings, Finding{Column: "notes", Key: "invented_mark", Hard: true,
			Message: "this row is invented, and its notes must go on saying so", Expected: "notes that begin with " + strconv.Quote(InventedMark)})
	}
	return ex, nil
}

// put writes an examined row.
func (a *applier) put(ctx context.Context, p *Row, ex examined) (outcome, error) {
	var err error
	if ex.systemID == 0 {
		if ex.systemID, err = a.createSystem(ctx, p); err != nil {
			return 0, err
		}
	} else if err := a.changeSystem(ctx, ex.systemID, ex.system, p); err != nil {
		return 0, err
	}
	if ex.current == nil {
		return rowNew, a.createMeasurement(ctx, p, ex.systemID)
	}
	changed, err := a.changeMeasurement(ctx, ex.meta, ex.current, p, ex.systemID)
	if err != nil {
		return 0, err
	}
	if !changed && len(systemChanges(ex.system, p)) == 0 {
		return rowIdentical, nil
	}
	return rowChanged, nil
}

// rowOf is the function of that name with a kept statement.
func (a *applier) rowOf(ctx context.Context, measurement string) (*Row, rowMeta, error) {
	if measurement == "" {
		return nil, rowMeta{}, nil
	}
	return a.oneRow(ctx, "m.measurement", measurement)
}

func (a *applier) oneRow(ctx context.Context, column string, key any) (*Row, rowMeta, error) {
	st, err := a.prepared(ctx, "SELECT "+rowColumns+fromRows+" WHERE "+column+" = ?")
	if err != nil {
		return nil, rowMeta{}, err
	}
	var r Row
	meta, err := newRowScanner().scan(st.QueryRowContext(ctx, key), &r)
	if errors.Is(err, sql.ErrNoRows) {
		return nil, rowMeta{}, nil
	}
	return &r, meta, err
}
