package catalogue

import (
	"bufio"
	"bytes"
	"context"
	"database/sql"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"strconv"
)

// Limits of an imported file and of its report.
const (
	maxRecord  = 32 << 20 // bytes of one record
	maxRemarks = 10000    // warnings or conversions listed; the rest is counted
)

// errNotStored rolls an import back that has problems.
var errNotStored = errors.New("not stored")

// importer reads one file inside one transaction.
type importer struct {
	a       *applier
	o       ImportOptions
	layout  layout
	report  *ImportReport
	credit  string // of the account, for rows that name no contributor
	batch   int64
	more    map[string]int // remarks beyond maxRemarks by kind and column
	waiting map[string]int // fingerprint of a row of this file -> line, without publishing
	near    map[string][]filedPlace
	ids     map[string]int // measurement id -> line
	check   *uploadCheck   // the file is checked for a person; nil = it is imported
}

// Import reads the measurement table. All or nothing, unless Partial; the
// report lists every refused row, and warnings and conversions, which stop
// nothing. Without Publish the rows become one batch waiting for review. An
// error is returned only when the file cannot be read or the catalogue fails;
// a file with problems gives a report that is not Stored.
func (s *Store) Import(ctx context.Context, r io.Reader, o ImportOptions) (*ImportReport, error) {
	im := &importer{o: o, report: &ImportReport{}, more: map[string]int{}, waiting: map[string]int{}, near: map[string][]filedPlace{}, ids: map[string]int{}}
	err := s.write(ctx, func(tx *sql.Tx) error {
		im.a = s.applier(tx, o.By, o.Why)
		im.a.agree = newAgreement()
		if err := im.allowed(ctx, tx); err != nil {
			return err
		}
		if err := im.read(ctx, r); err != nil {
			return err
		}
		if len(im.report.Problems) > 0 && (!o.Partial || im.report.New+im.report.Changed+im.report.Identical == 0) {
			return errNotStored
		}
		return nil
	})
	im.summarise()
	switch {
	case errors.Is(err, errNotStored):
		return im.report, nil
	case err != nil:
		return nil, err
	}
	im.report.Stored = true
	return im.report, nil
}

func (im *importer) allowed(ctx context.Context, tx *sql.Tx) error {
	if im.o.By == 0 {
		return nil
	}
	who, err := accountByID(ctx, tx, im.o.By)
	if err != nil {
		return err
	}
	if err := maySend(ctx, tx, im.o.By); err != nil && im.check == nil {
		return err
	}
	if im.o.Publish && !who.Curates() {
		return &Error{Code: Forbidden, Message: "only curators publish without review"}
	}
	im.credit = who.Credit
	return nil
}

// guard ends a file whose record never ends: a quote left open in a large file
// would otherwise be read into memory whole.
type guard struct {
	r    io.Reader
	read int64
	csv  *csv.Reader
}

var errRecordTooLong = errors.New("record too long")

func (g *guard) Read(p []byte) (int, error) {
	if g.csv != nil && g.read-g.csv.InputOffset() > maxRecord {
		return 0, errRecordTooLong
	}
	n, err := g.r.Read(p)
	g.read += int64(n)
	return n, err
}

func (im *importer) read(ctx context.Context, r io.Reader) error {
	br := bufio.NewReader(im.o.Reading.decoded(r))
	start, _ := br.Peek(4)
	switch {
	case bytes.HasPrefix(start, []byte("\xff\xfe")), bytes.HasPrefix(start, []byte("\xfe\xff")):
		im.problem(RowProblem{Line: 1, Message: "the file is UTF-16", Expected: "a file saved as UTF-8"})
		return nil
	case bytes.HasPrefix(start, []byte("PK\x03\x04")):
		im.problem(RowProblem{Line: 1, Message: "the file is a zip archive or a spreadsheet workbook", Expected: "the sheet saved as CSV UTF-8"})
		return nil
	case bytes.HasPrefix(start, []byte("\ufeff")):
		_, _ = br.Discard(3)
	}
	g := &guard{r: br}
	cr := csv.NewReader(g)
	cr.Comma = im.o.Reading.comma()
	g.csv = cr
	cr.FieldsPerRecord = -1
	cr.ReuseRecord = true
	header, err := cr.Read()
	if done, err := im.unreadable(err); done || err != nil {
		if len(im.report.Problems) == 0 && err == nil {
			im.problem(RowProblem{Line: 1, Message: "the file is empty", Expected: "a header line and one line for each measurement"})
		}
		return err
	}
	var problems []RowProblem
	if im.o.Reading.Columns != nil {
		im.layout, problems = matchedHeader(header, im.o.Reading)
	} else {
		im.layout, problems = readHeader(header)
		im.layout.reading = im.o.Reading
	}
	im.report.UnknownColumns = im.layout.unknown
	for _, p := range problems {
		im.problem(p)
	}
	if len(problems) > 0 {
		return nil
	}
	return im.rows(ctx, cr)
}

// unreadable reports what the CSV reader could not read. done means the file
// cannot be read on.
func (im *importer) unreadable(err error) (done bool, fatal error) {
	var pe *csv.ParseError
	switch {
	case err == nil:
		return false, nil
	case errors.Is(err, io.EOF):
		return true, nil
	case errors.Is(err, errRecordTooLong):
		im.problem(RowProblem{Message: "a row is longer than 32 MB, or a quote is opened and never closed", Expected: "quotes in pairs and one row a line"})
		return true, nil
	case errors.As(err, &pe):
		p := RowProblem{Line: pe.StartLine, Message: "the row cannot be read: " + pe.Err.Error()}
		if errors.Is(err, csv.ErrQuote) || errors.Is(err, csv.ErrBareQuote) {
			p.Message = fmt.Sprintf("a quote stands where none may (line %d, byte %d), or is opened and not closed", pe.Line, pe.Column)
			p.Expected = `cells with quotes, commas or line ends wholly in quotes, quotes inside doubled: "say ""so"""`
		}
		im.problem(p)
		return false, nil
	}
	return true, &Error{Code: Invalid, Message: "the file could not be read to its end; nothing was stored", Cause: err}
}

func (im *importer) rows(ctx context.Context, cr *csv.Reader) error {
	for n := 1; ; n++ {
		record, err := cr.Read()
		if done, fatal := im.unreadable(err); done || fatal != nil {
			if fatal == nil && n == 1 {
				im.remark(&im.report.Warnings, "warning", RowProblem{Line: 1, Message: "the file has a header and no rows"})
			}
			return fatal
		}
		if err != nil {
			continue
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		if err := im.record(ctx, cr, record); err != nil {
			return err
		}
		if im.o.Progress != nil && n%500 == 0 {
			im.o.Progress(n)
		}
		if im.check != nil {
			if err := im.check.reached(ctx, n); err != nil {
				return err
			}
		}
	}
}

// problem is what refuses a row, or the file.
func (im *importer) problem(p RowProblem) {
	if im.check != nil {
		im.check.problem(p)
		return
	}
	im.report.Problems = append(im.report.Problems, p)
}

// remark lists a warning or conversion, or counts it when there are too many.
func (im *importer) remark(list *[]RowProblem, kind string, p RowProblem) {
	if im.check != nil {
		im.check.remark(kind, p)
		return
	}
	if len(*list) < maxRemarks {
		*list = append(*list, p)
		return
	}
	im.more[kind+"|"+p.Column]++
}

func (im *importer) summarise() {
	for _, c := range append(ColumnNames(), "") {
		for kind, list := range map[string]*[]RowProblem{"warning": &im.report.Warnings, "conversion": &im.report.Conversions} {
			if n := im.more[kind+"|"+c]; n > 0 {
				*list = append(*list, RowProblem{Column: c, Message: "and " + strconv.Itoa(n) + " more in this column"})
			}
		}
	}
}

// record takes one line of the file.
func (im *importer) record(ctx context.Context, cr *csv.Reader, record []string) error {
	line, _ := cr.FieldPos(0)
	if blank(record) {
		return nil
	}
	if len(record) != len(im.layout.cells) {
		im.problem(RowProblem{Line: line, Message: fmt.Sprintf("the row has %d cells and the header %d", len(record), len(im.layout.cells)), Expected: "as many cells as the header; a text with commas stands in quotes"})
		return nil
	}
	row, err := im.start(ctx, record)
	if err != nil {
		return err
	}
	refused := map[string]bool{} // columns already reported
	im.layout.fill(&row, record, func(kind noteKind, cell int, p RowProblem) {
		p.Line, _ = cr.FieldPos(cell)
		if kind == noteConversion {
			im.remark(&im.report.Conversions, "conversion", p)
			return
		}
		im.problem(p)
		refused[p.Column] = true
		if c := im.layout.cells[cell].column; c != nil {
			refused[c.Name] = true
		}
	})
	return im.take(ctx, line, row, record, refused)
}

// start returns the row the cells are read over: the stored one when the id is
// known, so that columns the file does not have stay as they are.
func (im *importer) start(ctx context.Context, record []string) (Row, error) {
	for i, plan := range im.layout.cells {
		if plan.column == nil || plan.column.Name != "measurement" || plan.conv != nil {
			continue
		}
		current, _, err := im.a.rowOf(ctx, CleanText(Plain(record[i])))
		if err != nil || current == nil {
			return Row{}, err
		}
		row := *current
		row.WindowSinuosities = nil
		return row, nil
	}
	return Row{}, nil
}

func blank(record []string) bool {
	for _, c := range record {
		if CleanText(c) != "" {
			return false
		}
	}
	return true
}
