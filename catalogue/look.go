package catalogue

import (
	"bufio"
	"bytes"
	"context"
	"encoding/csv"
	"errors"
	"io"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Look is what a first look at a file found.
type Look struct {
	Encoding  string     `json:"encoding"`           // as far as the bytes say; "" = not UTF-8, so a person has to say
	Separator string     `json:"separator"`          // the likeliest
	Numbers   string     `json:"numbers"`            // the likeliest style; "" = a person has to say
	Doubtful  []string   `json:"doubtful,omitempty"` // numbers that can be read in two ways, a few
	Header    []string   `json:"header"`             // its cells
	Sample    [][]string `json:"sample"`             // first rows, cells shortened
	Rows      int        `json:"rows"`               // records below the header
	Repeated  []string   `json:"repeated,omitempty"` // headers that stand more than once
	Fault     string     `json:"fault,omitempty"`    // why it is no table at all
	Fit       string     `json:"fit,omitempty"`      // what was expected instead
}

// Limits of a file that is matched.
const (
	MostColumns = 200 // that a page can match
	sampleRows  = 6
	sampleCell  = 60 // characters of a cell shown
	mostDoubts  = 4
)

func (l *Look) fail(message, expected string) *Look {
	l.Fault, l.Fit = message, expected
	return l
}

// lookAt reads a file once for its bytes and once as a table, without keeping
// more than a sample. open gives it from its start; given overrides what the
// file seems to be.
func lookAt(ctx context.Context, open func() io.Reader, given Reading) (*Look, error) {
	l := &Look{}
	start, valid, err := scanBytes(ctx, open())
	if err != nil {
		return nil, err
	}
	switch {
	case len(start) == 0:
		return l.fail("the file is empty", "a header line and one line for each measurement"), nil
	case bytes.HasPrefix(start, []byte("PK\x03\x04")):
		return l.fail("the file is a zip archive or a spreadsheet workbook", "the sheet saved as CSV"), nil
	case bytes.HasPrefix(start, []byte("\xff\xfe")), bytes.HasPrefix(start, []byte("\xfe\xff")):
		l.Encoding = "utf-16"
	case valid:
		l.Encoding = "utf-8"
	}
	r := given
	if r.Encoding == "" {
		if r.Encoding = l.Encoding; r.Encoding == "" {
			r.Encoding = "windows-1252" // for the sample; the person has to say so
		}
	}
	if l.Separator = r.Separator; l.Separator == "" {
		l.Separator = guessSeparator(r.decoded(open()))
	}
	r.Separator = l.Separator
	return l, l.table(ctx, r.decoded(open()), r)
}

// LookAt takes a first look at a file: as it seems to be where given leaves it
// open. The file stands anywhere afterwards.
func LookAt(ctx context.Context, f io.ReadSeeker, given Reading) (*Look, error) {
	if err := given.check(); err != nil {
		return nil, err
	}
	var back error
	look, err := lookAt(ctx, func() io.Reader {
		if _, err := f.Seek(0, io.SeekStart); err != nil {
			back = err
		}
		return f
	}, given)
	if err = errors.Join(err, back); err != nil {
		return nil, &Error{Code: Invalid, Message: "the file could not be read", Cause: err}
	}
	return look, nil
}

// scanBytes returns the first bytes and whether all of them are UTF-8.
func scanBytes(ctx context.Context, in io.Reader) (start []byte, valid bool, err error) {
	buf := make([]byte, 64<<10)
	kept := 0 // bytes of a character cut by the end of the last piece
	valid = true
	for {
		if err := ctx.Err(); err != nil {
			return nil, false, err
		}
		n, err := io.ReadFull(in, buf[kept:])
		n += kept
		if start == nil && n > 0 {
			start = slices.Clone(buf[:min(n, 8)])
		}
		last := err != nil
		if last && !errors.Is(err, io.EOF) && !errors.Is(err, io.ErrUnexpectedEOF) {
			return nil, false, err
		}
		whole := n
		if !last {
			for back := 1; back < utf8.UTFMax && back <= n; back++ {
				if utf8.RuneStart(buf[n-back]) {
					if !utf8.FullRune(buf[n-back : n]) {
						whole = n - back
					}
					break
				}
			}
		}
		valid = valid && utf8.Valid(buf[:whole])
		if last {
			return start, valid, nil
		}
		kept = copy(buf, buf[whole:n])
	}
}

// guessSeparator takes the sign that stands most often in the first line,
// outside quotes.
func guessSeparator(in io.Reader) string {
	line, _ := bufio.NewReaderSize(in, 64<<10).Peek(64 << 10)
	counts := map[string]int{}
	quoted := false
	for _, b := range string(line) {
		if b == '"' {
			quoted = !quoted
		}
		if b == '\n' && !quoted {
			break
		}
		if s := string(b); !quoted && slices.Contains(Separators, s) {
			counts[s]++
		}
	}
	best := ","
	for _, s := range Separators {
		if counts[s] > counts[best] {
			best = s
		}
	}
	return best
}

// table reads the records: header, sample, number of rows, and how numbers are
// written.
func (l *Look) table(ctx context.Context, in io.Reader, r Reading) error {
	g := &guard{r: in}
	cr := csv.NewReader(g)
	g.csv, cr.FieldsPerRecord, cr.ReuseRecord, cr.Comma, cr.LazyQuotes = cr, -1, true, r.comma(), true
	var numbers numberEvidence
	for {
		record, err := cr.Read()
		switch {
		case errors.Is(err, io.EOF):
			l.Numbers, l.Doubtful = numbers.style(), numbers.doubtful
			if l.Header == nil {
				l.fail("the file is empty", "a header line and one line for each measurement")
			}
			return nil
		case errors.Is(err, errRecordTooLong):
			l.fail("a row is longer than 32 MB, or a quote is opened and never closed", "quotes in pairs and one row a line")
			return nil
		case err != nil && !isParseError(err):
			return err
		case err != nil:
			continue // the check names it by its line
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		if l.Header == nil {
			if len(record) > MostColumns {
				l.fail("the header has "+strconv.Itoa(len(record))+" columns", "at most "+strconv.Itoa(MostColumns))
				return nil
			}
			l.header(record)
			continue
		}
		if blank(record) {
			continue
		}
		l.Rows++
		if len(l.Sample) < sampleRows {
			l.Sample = append(l.Sample, sampleOf(record, len(l.Header)))
		}
		for _, cell := range record {
			numbers.see(cell)
		}
	}
}

func isParseError(err error) bool {
	var pe *csv.ParseError
	return errors.As(err, &pe)
}

func (l *Look) header(record []string) {
	seen := map[string]bool{}
	l.Header = make([]string, len(record))
	for i, cell := range record {
		name := CleanText(strings.ToValidUTF8(cell, "\ufffd"))
		if key := strings.ToLower(name); key != "" {
			if seen[key] && !slices.Contains(l.Repeated, clipTo(name, sampleCell)) {
				l.Repeated = append(l.Repeated, clipTo(name, sampleCell))
			}
			seen[key] = true
		}
		l.Header[i] = clipTo(name, 2*sampleCell)
	}
}

func sampleOf(record []string, cells int) []string {
	out := make([]string, 0, cells)
	for _, cell := range record[:min(cells, len(record))] {
		out = append(out, clipTo(CleanText(strings.ToValidUTF8(cell, "\ufffd")), sampleCell))
	}
	return out
}

func clipTo(s string, n int) string {
	if r := []rune(s); len(r) > n {
		return string(r[:n]) + "..."
	}
	return s
}

// numberEvidence counts how the numbers of a file are written.
type numberEvidence struct {
	commaDecimals, pointDecimals, commaGroups, pointGroups int
	doubtful                                               []string
}

func (e *numberEvidence) see(cell string) {
	if len(cell) > 40 || !strings.ContainsAny(cell, ",.") {
		return
	}
	text := strings.TrimSpace(cell)
	switch {
	case threeAfter.MatchString(text):
		if len(e.doubtful) < mostDoubts && !slices.Contains(e.doubtful, text) {
			e.doubtful = append(e.doubtful, text)
		}
	case oneComma.MatchString(text):
		e.commaDecimals++
	case commas.MatchString(text):
		e.commaGroups++
	case strings.Contains(text, ",") && points.MatchString(text), strings.Count(text, ".") > 1 && points.MatchString(text):
		e.pointGroups++
	case strings.Count(text, ".") == 1 && plainNumber.MatchString(text) && !pointThree.MatchString(text):
		e.pointDecimals++
	}
}

// style is the one that every number agrees with; "" when a person has to say:
// the numbers contradict each other, or all of them can be read in two ways.
func (e *numberEvidence) style() string {
	comma, point := e.commaDecimals+e.pointGroups > 0, e.pointDecimals+e.commaGroups > 0
	switch {
	case comma && point, len(e.doubtful) > 0:
		// Others beside 1,200 decide nothing about it: they may be of another
		// hand.
		return ""
	case e.pointGroups > 0:
		return DecimalCommaGroups
	case e.commaDecimals > 0:
		return DecimalComma
	case e.commaGroups > 0:
		return DecimalPointGroups
	}
	return DecimalPoint
}
