package catalogue

import (
	"context"
	"fmt"
	"strings"
)

// take examines one row of the file and stores it, or what it proposes. A row
// with cells already refused is examined too, so that all its faults are told
// at once.
func (im *importer) take(ctx context.Context, line int, row Row, record []string, refused map[string]bool) error {
	raw := row
	agree := im.a.agree
	agree.line = line
	if len(refused) > 0 {
		im.a.agree = nil // what a refused row says of its system binds no other
	}
	ex, err := im.a.examine(ctx, &row)
	im.a.agree = agree
	if err != nil {
		return err
	}
	same := ex.twin != "" || (ex.current != nil && len(Diff(ex.current, &row)) == 0)
	if same && len(refused) == 0 && hardError(ex.findings) == nil {
		im.report.Identical++ // skipped, so nothing is said of it
		return nil
	}
	if im.remarks(line, ex.findings, record, refused) || len(refused) > 0 {
		return nil
	}
	if first, twice := im.ids[row.Measurement]; twice && row.Measurement != "" {
		im.problem(RowProblem{Line: line, Column: "measurement", Value: row.Measurement, Message: fmt.Sprintf("line %d has the same id and other values", first), Expected: "each id once; an empty cell for a new measurement"})
		return nil
	}
	im.ids[row.Measurement] = line
	if ex.current == nil && row.Contributor == "" {
		row.Contributor, raw.Contributor = im.credit, im.credit
	}
	if ex.current == nil && row.Licence == "" {
		row.Licence, raw.Licence = im.o.Reading.Licence, im.o.Reading.Licence
	}
	if !im.o.Publish {
		return im.propose(ctx, line, raw, &row, ex)
	}
	switch done, err := im.a.put(ctx, &row, ex); {
	case err != nil:
		return err
	case done == rowNew:
		im.report.New++
	case done == rowChanged:
		im.report.Changed++
	default:
		im.report.Identical++
	}
	return nil
}

// remarks reports the findings on a row and says whether it is refused.
func (im *importer) remarks(line int, findings []Finding, record []string, refused map[string]bool) (hard bool) {
	for _, f := range findings {
		column, value := im.cell(f.Column, record)
		p := RowProblem{Line: line, Column: column, Value: value, Message: f.Message, Expected: f.Expected}
		switch {
		case f.Hard && !refused[f.Column]:
			im.problem(p)
			hard = true
		case !f.Hard:
			im.remark(&im.report.Warnings, "warning", p)
		}
	}
	return hard
}

// cell returns the name and the text of the cell a column was read from.
func (im *importer) cell(column string, record []string) (name, value string) {
	name = column
	for i, plan := range im.layout.cells {
		if plan.column != nil && plan.column.Name == column && CleanText(record[i]) != "" {
			return plan.name, Clip(record[i])
		}
	}
	return name, ""
}

// propose stores a row as a submission of this file's batch. The row is kept
// as the file says it; what it does not say of a known system is filled in
// when it is accepted.
func (im *importer) propose(ctx context.Context, line int, raw Row, row *Row, ex examined) error {
	if ex.current != nil {
		raw = *row
	}
	raw.Notes, raw.Contributor = row.Notes, row.Contributor
	proposed, err := encodeRow(&raw)
	if err != nil {
		return err
	}
	print := fingerprint(proposed, "")
	if _, twice := im.waiting[string(print)]; twice {
		im.report.Identical++
		return nil
	}
	im.waiting[string(print)] = line
	twin, err := im.a.number(ctx, `SELECT id FROM submissions WHERE fingerprint = ? AND state = 'submitted' AND coalesce(account_id, 0) = ? LIMIT 1`, print, im.o.By)
	if err != nil {
		return err
	}
	if twin != 0 {
		im.report.Identical++
		return nil
	}
	if ex.current == nil {
		im.nearInFile(line, row)
	}
	if im.check != nil {
		if err := im.check.keep(line, proposed, print, ex); err != nil {
			return err
		}
	} else if err := im.submit(ctx, proposed, print, ex); err != nil {
		return err
	}
	if ex.current == nil {
		im.report.New++
	} else {
		im.report.Changed++
	}
	return nil
}

func (im *importer) submit(ctx context.Context, proposed string, print []byte, ex examined) error {
	var err error
	if im.batch == 0 {
		if im.batch, err = im.a.exec(ctx, `INSERT INTO batches (account_id, why, created_at) VALUES (?, ?, ?)`, orNull(im.o.By), im.o.Why, im.a.at); err != nil {
			return err
		}
		im.report.Batch = im.batch
	}
	target, base := "", ""
	if ex.current != nil {
		target = ex.current.Measurement
		if base, err = encodeRow(ex.current); err != nil {
			return err
		}
	}
	_, err = im.a.exec(ctx, `INSERT INTO submissions (batch_id, account_id, state, measurement, proposed, base, base_revision, fingerprint, created_at, updated_at)
		VALUES (?, ?, 'submitted', ?, ?, ?, ?, ?, ?, ?)`, im.batch, orNull(im.o.By), target, proposed, base, ex.meta.revision, print, im.a.at, im.a.at)
	return err
}

// filedPlace is where a waiting row of the file lies.
type filedPlace struct {
	lat, lon float64
	line     int
}

// nearInFile warns of near-duplicates within a file that waits for review,
// whose rows are not yet where examine looks.
func (im *importer) nearInFile(line int, r *Row) {
	key := strings.Join([]string{r.Source, r.MeasuredLine, r.Reach, FormatNumber(r.Sinuosity)}, "\x00")
	for _, p := range im.near[key] {
		if distanceM(p.lat, p.lon, r.LatitudeDeg.V, r.LongitudeDeg.V) <= nearM {
			im.remark(&im.report.Warnings, "warning", RowProblem{Line: line, Column: "measurement",
				Message:  fmt.Sprintf("line %d has the same source, line, reach name and sinuosity within 5 km: is it the same measurement?", p.line),
				Expected: "one of the two rows, or another reach name"})
			break
		}
	}
	im.near[key] = append(im.near[key], filedPlace{r.LatitudeDeg.V, r.LongitudeDeg.V, line})
}
