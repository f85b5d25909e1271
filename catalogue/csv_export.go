package catalogue

import (
	"context"
	"encoding/csv"
	"io"
)

// Export writes the rows under the filter as CSV (RFC 4180, UTF-8 without BOM,
// LF) with exactly Columns, and returns their number. Rows are streamed.
func (s *Store) Export(ctx context.Context, w io.Writer, f Filter) (rows int, err error) {
	out := csv.NewWriter(w)
	if err := out.Write(ColumnNames()); err != nil {
		return 0, fault("export", err)
	}
	record := make([]string, len(Columns))
	err = s.EachRow(ctx, f, func(r Row) error {
		rows++
		Record(&r, record)
		return out.Write(record)
	})
	if err != nil {
		return rows, fault("export", err) // not even the header, if nothing came before it
	}
	out.Flush()
	return rows, fault("export", out.Error())
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
