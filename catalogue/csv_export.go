package catalogue

import (
	"bytes"
	"context"
	"io"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Export writes the rows under the filter as CSV (RFC 4180, UTF-8 without BOM,
// LF) with exactly Columns, and returns their number. Rows are streamed.
func (s *Store) Export(ctx context.Context, w io.Writer, f Filter) (rows int, err error) {
	where, err := f.condition()
	if err != nil {
		return 0, err
	}
	order, err := f.orderBy("")
	if err != nil {
		return 0, err
	}
	q, err := at(ctx, s.r, f.Release)
	if err != nil {
		return 0, fault("export", err)
	}
	found, err := q.QueryContext(ctx, "SELECT "+exportColumns+fromRows+where.String()+order, where.args...)
	if err != nil {
		return 0, fault("export", err) // not even the header, if nothing came before it
	}
	defer found.Close()
	b := append([]byte(strings.Join(ColumnNames(), ",")), '\n')
	cells := make(packedCells, len(Columns))
	for found.Next() {
		if err := found.Scan(cells); err != nil {
			return rows, fault("export", err)
		}
		rows++
		if b = appendRecord(b, cells); len(b) < exportPiece {
			continue
		}
		if _, err := w.Write(b); err != nil {
			return rows, fault("export", err)
		}
		b = b[:0]
	}
	if err := found.Err(); err != nil {
		return rows, fault("export", err)
	}
	_, err = w.Write(b)
	return rows, fault("export", err)
}

// exportPiece is how many bytes are written at a time.
const exportPiece = 32 << 10

// exportColumns is the SELECT list of Export: the cells alone, packed.
var exportColumns = func() string {
	exprs := make([]string, len(Columns))
	for i, c := range Columns {
		exprs[i] = c.expr
	}
	return packedFunction + "(" + strings.Join(exprs, ", ") + ")"
}()

// appendRecord appends the line that csv.Writer makes of a Record of the row,
// without a string for each cell.
func appendRecord(b []byte, cells packedCells) []byte {
	for i := range Columns {
		if i > 0 {
			b = append(b, ',')
		}
		switch c := &cells[i]; {
		case c.kind == 'f' && Columns[i].Kind == KindCount:
			b = strconv.AppendFloat(b, c.number, 'f', -1, 64)
		case c.kind == 'f':
			b = strconv.AppendFloat(b, c.number, 'g', -1, 64)
		case c.kind == 't':
			b = appendField(b, c.text, Columns[i].Kind == KindText)
		}
	}
	return append(b, '\n')
}

// appendField appends a text cell as csv.Writer quotes it, neutralised first
// where asked.
func appendField(b, text []byte, neutral bool) []byte {
	if neutral && len(text) > 0 && (text[0] == '\'' || strings.IndexByte(formulaStart, text[0]) >= 0) {
		text = []byte(Neutralise(string(text)))
	}
	if !quoted(text) {
		return append(b, text...)
	}
	b = append(b, '"')
	for _, x := range text {
		if x == '"' {
			b = append(b, '"')
		}
		b = append(b, x)
	}
	return append(b, '"')
}

// quoted says whether csv.Writer puts a field into quotes.
func quoted(text []byte) bool {
	if len(text) == 0 {
		return false
	}
	if string(text) == `\.` || bytes.ContainsAny(text, ",\"\r\n") {
		return true
	}
	first, _ := utf8.DecodeRune(text)
	return unicode.IsSpace(first)
}

// Record fills a CSV record with the cells of a row as Export writes them;
// record has the length of Columns.
func Record(r *Row, record []string) {
	for i := range Columns {
		c := &Columns[i]
		record[i] = c.Get(r)
		if c.Kind == KindText {
			record[i] = Neutralise(record[i])
		}
	}
}
