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
)

// resultColumn is one column added to a file of targets.
type resultColumn struct {
	Name, Unit, Meaning string
	of                  func(*expectation.Result) string
}

func quantile(of func(*expectation.Quantiles) float64) func(*expectation.Result) string {
	return func(r *expectation.Result) string {
		if r.Combined.Sinuosity == nil {
			return ""
		}
		return cellNumber(of(r.Combined.Sinuosity))
	}
}

// resultColumns in the order they are written; the dictionary on the page and
// in /expectation/columns.csv is made from them. Every name starts with result_
// so that none can be taken for a parameter.
var resultColumns = []resultColumn{
	{"result_palaeolatitude", "degrees", "palaeolatitude used: the point conversion of what was given", func(r *expectation.Result) string { return cellNumber(r.Palaeolatitude.Value) }},
	{"result_palaeolatitude_se", "degrees", "its standard error", func(r *expectation.Result) string { return cellNumber(r.Palaeolatitude.SE) }},
	{"result_age", "Ma", "age used", func(r *expectation.Result) string { return cellNumber(r.Age.Value) }},
	{"result_age_se", "Ma", "its standard error", func(r *expectation.Result) string { return cellNumber(r.Age.SE) }},
	{"result_day_length", "solar hours", "length of the day at that age", func(r *expectation.Result) string { return cellNumber(r.DayLength.Value) }},
	{"result_rotation_ratio", "1", "rotation rate over today's", func(r *expectation.Result) string { return cellNumber(r.RotationRatio) }},
	{"result_coriolis", "s-1", "size of the Coriolis parameter", func(r *expectation.Result) string { return cellNumber(r.Coriolis) }},
	{"result_equivalent_modern_latitude", "degrees", "latitude with the same Coriolis parameter today; empty where there is none", func(r *expectation.Result) string {
		if r.EquivalentModernLatitude == nil {
			return ""
		}
		return cellNumber(*r.EquivalentModernLatitude)
	}},
	{"result_response", "", "which sinuosity is expected", func(r *expectation.Result) string { return r.Response }},
	{"result_measured_line", "", "along which line", func(r *expectation.Result) string { return r.MeasuredLine }},
	{"result_p2_5", "1", "sinuosity below which 2.5 % of new systems lie, all explanations combined", quantile(func(q *expectation.Quantiles) float64 { return q.P2_5 })},
	{"result_p10", "1", "the same, 10 %", quantile(func(q *expectation.Quantiles) float64 { return q.P10 })},
	{"result_p25", "1", "the same, 25 %", quantile(func(q *expectation.Quantiles) float64 { return q.P25 })},
	{"result_p50", "1", "the same, 50 %: the expected value", quantile(func(q *expectation.Quantiles) float64 { return q.P50 })},
	{"result_p75", "1", "the same, 75 %", quantile(func(q *expectation.Quantiles) float64 { return q.P75 })},
	{"result_p90", "1", "the same, 90 %", quantile(func(q *expectation.Quantiles) float64 { return q.P90 })},
	{"result_p97_5", "1", "the same, 97.5 %", quantile(func(q *expectation.Quantiles) float64 { return q.P97_5 })},
	{"result_coverage_80", "fraction", "what the 80 % limits held when each cluster was left out", coverage(func(c *expectation.Coverage) float64 { return c.C80 })},
	{"result_coverage_95", "fraction", "what the 95 % limits held when each cluster was left out", coverage(func(c *expectation.Coverage) float64 { return c.C95 })},
	{"result_observed_percentile", "%", "share of outcomes below the observed sinuosity, if one was given", func(r *expectation.Result) string {
		if r.Observed == nil {
			return ""
		}
		return cellNumber(r.Observed.Percentile)
	}},
	{"result_classes", "", "planform classes with their probability and base rate in the rows", classesCell},
	{"result_rows", "", "rows of the catalogue used", func(r *expectation.Result) string { return strconv.Itoa(r.Rows) }},
	{"result_clusters", "", "clusters they form", func(r *expectation.Result) string { return strconv.Itoa(r.Clusters) }},
	{"result_invented_rows", "", "how many of the rows are invented", func(r *expectation.Result) string { return strconv.Itoa(r.InventedRows) }},
	{"result_seed", "", "seed of the draws", func(r *expectation.Result) string { return settingCell(r, "seed") }},
	{"result_draws", "", "number of draws", func(r *expectation.Result) string { return settingCell(r, "draws") }},
	{"result_extrapolation", "", "in what respect the target lies outside the rows", func(r *expectation.Result) string { return strings.Join(r.Extrapolation, " ") }},
	{"result_notes", "", "what was assumed", func(r *expectation.Result) string { return strings.Join(r.Notes, " ") }},
	{"result_cautions", "", "what this expectation is not for", func(r *expectation.Result) string { return strings.Join(r.Cautions, " ") }},
}

// errorColumn is why a row has no result; empty for the others.
const errorColumn = "error"

func coverage(of func(*expectation.Coverage) float64) func(*expectation.Result) string {
	return func(r *expectation.Result) string {
		if r.Combined.Coverage == nil {
			return ""
		}
		return cellNumber(of(r.Combined.Coverage))
	}
}

func classesCell(r *expectation.Result) string {
	var parts []string
	for _, c := range r.Classes {
		parts = append(parts, c.Name+" "+percentText(c.Probability)+" (base rate "+percentText(c.BaseRate)+")")
	}
	return strings.Join(parts, "; ")
}

func settingCell(r *expectation.Result, name string) string {
	switch v := r.Settings[name].(type) {
	case uint64:
		return strconv.FormatUint(v, 10)
	case int:
		return strconv.Itoa(v)
	case float64:
		return cellNumber(v)
	}
	return ""
}

// cellNumber writes a number with every digit it has; not finite is empty.
func cellNumber(x float64) string {
	if !isFinite(x) {
		return ""
	}
	return strconv.FormatFloat(x, 'g', -1, 64)
}

func percentText(x float64) string {
	if !isFinite(x) {
		return "unknown"
	}
	return strconv.FormatFloat(100*x, 'f', 0, 64) + " %"
}

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

// badTable is a file of targets that cannot be read as a table at all.
func badTable(sentence string) error {
	return echo.NewHTTPError(http.StatusUnprocessableEntity, sentence)
}

// answerTargets reads targets as CSV and writes the same rows with their
// results. A row that cannot be answered keeps its place, with the reason in
// its error column. progress, if not nil, is called with the rows done.
func answerTargets(ctx context.Context, in io.Reader, out io.Writer, base url.Values, fits fitter, progress func(int)) (batchCounts, error) {
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
		var rows [][]string
		for len(rows) < batchChunk {
			row, err := r.Read()
			if errors.Is(err, io.EOF) {
				done = true
				break
			}
			if err != nil && !errors.Is(err, csv.ErrFieldCount) {
				return n, err
			}
			rows = append(rows, row)
		}
		answers := b.answerAll(ctx, rows)
		if err := ctx.Err(); err != nil {
			return n, err
		}
		for _, a := range answers {
			n.Rows++
			if a[len(a)-1] != "" {
				n.Bad++
			}
			if err := w.Write(a); err != nil {
				return n, err
			}
		}
		w.Flush()
		if progress != nil {
			progress(n.Rows)
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
func (b *batch) answerAll(ctx context.Context, rows [][]string) [][]string {
	out := make([][]string, len(rows))
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
func (b *batch) answer(ctx context.Context, row []string) []string {
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
		return append(out, catalogue.Neutralise(rowError(err)))
	}
	return append(out, "")
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
	p := problemOf(err)
	if p.Status >= http.StatusInternalServerError {
		return "could not be answered; the fault is in the program, not in the row"
	}
	text := p.whole
	if text == "" {
		text = p.Detail
		if p.Expected != "" {
			text = strings.TrimSuffix(text, ".") + ". Expected: " + p.Expected
		}
	}
	if p.Field != "" {
		return p.Field + ": " + text
	}
	return text
}
