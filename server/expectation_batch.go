package main

import (
	"bufio"
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"io"
	"net/http"
	"net/url"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"sync"
	"unicode/utf8"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/expectation"
	"fathombend/views"
)

// fitter gives the fits for one response and measured line.
type fitter func(ctx context.Context, response, line string) (*expectation.Fits, error)

// batch is a file of targets being answered: one line in, one line out, in
// order, a few at a time so that memory does not grow with the file.
type batch struct {
	base    url.Values // parameters for rows that do not give them
	fits    fitter
	columns []string // header of the file
	extra   []int    // columns that are passed through
}

const (
	batchChunk = 256
	maxCell    = 64 << 10
)

// batchCounts says how a file of targets went.
type batchCounts struct{ Rows, Bad int }

// batchWatch is told how a file of targets goes; both may be nil.
type batchWatch struct {
	progress func(rows int) // done so far
	refused  func(views.TargetRefusal)
}

// targetRow is one row of a file of targets; line counts from 1, the header.
type targetRow struct {
	line  int
	cells []string
}

// targetAnswer is a row with its results, and why it has none.
type targetAnswer struct {
	cells   []string
	refused *views.TargetRefusal
}

// readTarget gives the next row, nil after the last.
func readTarget(r *csv.Reader) (*targetRow, error) {
	cells, err := r.Read()
	if errors.Is(err, io.EOF) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	line, _ := r.FieldPos(0)
	return &targetRow{line, cells}, nil
}

// badTable is a file of targets that cannot be read as a table at all.
func badTable(sentence string) error {
	return echo.NewHTTPError(http.StatusUnprocessableEntity, sentence)
}

// answerTargets reads targets as CSV and writes the same rows with their
// results. A row that cannot be answered keeps its place, with the reason in
// its error column.
func answerTargets(ctx context.Context, in io.Reader, out io.Writer, base url.Values, fits fitter, watch batchWatch) (batchCounts, error) {
	var n batchCounts
	r := targetReader(in)
	b := &batch{base: base, fits: fits}
	if err := b.readHeader(r); err != nil {
		return n, err
	}
	w := csv.NewWriter(out)
	if err := w.Write(b.header()); err != nil {
		return n, err
	}
	for done := false; !done; {
		var rows []targetRow
		for len(rows) < batchChunk && !done {
			row, err := readTarget(r)
			if err != nil {
				return n, err
			}
			if done = row == nil; !done {
				rows = append(rows, *row)
			}
		}
		answers := b.answerAll(ctx, rows)
		if err := ctx.Err(); err != nil {
			return n, err
		}
		for _, a := range answers {
			n.Rows++
			if a.refused != nil {
				n.Bad++
				if watch.refused != nil {
					watch.refused(*a.refused)
				}
			}
			if err := w.Write(a.cells); err != nil {
				return n, err
			}
		}
		w.Flush()
		if watch.progress != nil {
			watch.progress(n.Rows)
		}
	}
	return n, w.Error()
}

// targetReader reads a table of targets with the separator of its header: the
// first of comma, semicolon and tab under which a parameter has a column.
func targetReader(in io.Reader) *csv.Reader {
	b := skipBOM(in)
	head, _ := b.Peek(headerPeek)
	if i := bytes.IndexAny(head, "\r\n"); i >= 0 {
		head = head[:i]
	}
	r := csv.NewReader(b)
	r.FieldsPerRecord, r.LazyQuotes = -1, true
	for _, comma := range ",;\t" {
		if slices.ContainsFunc(strings.Split(string(head), string(comma)), func(name string) bool {
			return slices.Contains(targetParameters, strings.Trim(name, "\" "))
		}) {
			r.Comma = comma
			break
		}
	}
	return r
}

// headerPeek is how much of a header is looked at for its separator, in bytes.
const headerPeek = 64 << 10

func skipBOM(in io.Reader) *bufio.Reader {
	b := bufio.NewReaderSize(in, headerPeek)
	if head, err := b.Peek(3); err == nil && bytes.Equal(head, []byte("\xef\xbb\xbf")) {
		_, _ = b.Discard(3)
	}
	return b
}

func (b *batch) readHeader(r *csv.Reader) error {
	head, err := r.Read()
	if err != nil {
		return badTable("The file of targets is empty. Expected a CSV with a header row naming parameters, as in: palaeolatitude,age")
	}
	for i, name := range head {
		name = strings.TrimSpace(name)
		if !utf8.ValidString(name) {
			return badTable("The header is not UTF-8 text. Save the file as CSV UTF-8")
		}
		if name != "" && slices.Contains(b.columns, name) {
			return badTable("The column " + strconv.Quote(clip(name)) + " stands twice in the header. Expected every column once")
		}
		b.columns = append(b.columns, name)
		if !b.isResult(name) {
			b.extra = append(b.extra, i)
		}
	}
	known := slices.ContainsFunc(b.columns, func(c string) bool { return slices.Contains(targetParameters, c) })
	if !known {
		return badTable("No column of the header is a parameter. Expected some, such as palaeolatitude, age, unit, site_lat, site_lon, plate or target_slope; /expectation/columns.csv has them all")
	}
	return nil
}

func (b *batch) isResult(name string) bool {
	return name == errorColumn || slices.ContainsFunc(resultColumns, func(c resultColumn) bool { return c.Name == name })
}

func (b *batch) header() []string {
	var out []string
	for _, i := range b.extra {
		out = append(out, catalogue.Neutralise(b.columns[i]))
	}
	for _, c := range resultColumns {
		out = append(out, c.Name)
	}
	return append(out, errorColumn)
}

// answerAll answers rows on all cores; the order is that of the rows and no
// number depends on how many cores there are.
func (b *batch) answerAll(ctx context.Context, rows []targetRow) []targetAnswer {
	out := make([]targetAnswer, len(rows))
	next := make(chan int)
	var wg sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), len(rows)) {
		wg.Go(func() {
			for i := range next {
				out[i] = b.answer(ctx, rows[i])
			}
		})
	}
	for i := range rows {
		next <- i
	}
	close(next)
	wg.Wait()
	return out
}

// answer is one row with its results.
func (b *batch) answer(ctx context.Context, in targetRow) targetAnswer {
	row := in.cells
	out := make([]string, 0, len(b.extra)+len(resultColumns)+1)
	for _, i := range b.extra {
		if i < len(row) {
			out = append(out, passThrough(row[i]))
		} else {
			out = append(out, "")
		}
	}
	res, err := b.expect(ctx, row)
	for _, c := range resultColumns {
		if err != nil {
			out = append(out, "")
		} else {
			out = append(out, catalogue.Neutralise(c.of(res)))
		}
	}
	if err != nil {
		field, reason := rowRefusal(err)
		return targetAnswer{append(out, catalogue.Neutralise(rowError(err))), &views.TargetRefusal{Line: in.line, Field: field, Reason: reason}}
	}
	return targetAnswer{append(out, ""), nil}
}

// passThrough keeps numbers to the letter and neutralises text that a
// spreadsheet would run.
func passThrough(cell string) string {
	if !utf8.ValidString(cell) {
		cell = strings.ToValidUTF8(cell, "\uFFFD")
	}
	if _, err := strconv.ParseFloat(strings.TrimSpace(cell), 64); err == nil {
		return cell
	}
	return catalogue.Neutralise(catalogue.Plain(cell))
}

func (b *batch) expect(ctx context.Context, row []string) (*expectation.Result, error) {
	if len(row) != len(b.columns) {
		return nil, &badInput{"row", "has " + strconv.Itoa(len(row)) + " cells, the header " + strconv.Itoa(len(b.columns)) + ". Expected as many as the header"}
	}
	q := withValues(b.base)
	for i, name := range b.columns {
		if !utf8.ValidString(row[i]) {
			return nil, &badInput{name, "is not UTF-8 text, so its signs cannot be passed through. Save the file as CSV UTF-8"}
		}
		if !slices.Contains(targetParameters, name) {
			continue
		}
		v := strings.TrimSpace(catalogue.Plain(row[i]))
		if len(v) > maxCell {
			return nil, &badInput{name, "is longer than any value of it can be"}
		}
		if v != "" {
			q.Set(name, v)
		}
	}
	t, err := targetOf(q)
	if err != nil {
		return nil, err
	}
	fits, err := b.fits(ctx, t.Response, t.MeasuredLine)
	if err != nil {
		return nil, err
	}
	return fits.ExpectCombined(ctx, t)
}

// rowError is what the owner of the file may read about err: the same sentence
// a page would show.
func rowError(err error) string {
	field, reason := rowRefusal(err)
	if field != "" {
		return field + ": " + reason
	}
	return reason
}

// rowRefusal is the field that err is about, "" for none, and what is wrong.
func rowRefusal(err error) (field, reason string) {
	p := problemOf(err)
	if p.Status >= http.StatusInternalServerError {
		return "", "could not be answered; the fault is in the program, not in the row"
	}
	reason = p.whole
	if reason == "" {
		reason = p.Detail
		if p.Expected != "" {
			reason = strings.TrimSuffix(reason, ".") + ". Expected: " + p.Expected
		}
	}
	return p.Field, reason
}
