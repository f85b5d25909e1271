package catalogue

import (
	"context"
	"database/sql"
	"encoding/json"
	"slices"
	"strings"
	"time"
)

// rowColumns is the SELECT list of a row, packed: every column, then what
// rowMeta holds.
var rowColumns = func() string {
	exprs := make([]string, len(Columns))
	for i, c := range Columns {
		exprs[i] = c.expr
	}
	// The windows are those of the measurement's own line; a line of the whole
	// system stands for its measurement only when there is just one.
	return packedFunction + "(" + strings.Join(exprs, ", ") + `, m.id, m.system_id, max(m.revision, s.revision), max(m.updated_at, s.updated_at),
		(SELECT l.sinuosities FROM centrelines l WHERE l.measurement_id = m.id OR (l.measurement_id IS NULL AND l.system_id = m.system_id
			AND (SELECT count(*) FROM measurements o WHERE o.system_id = m.system_id) = 1) ORDER BY l.measurement_id IS NULL, l.id DESC LIMIT 1))`
}()

// rowMeta is what a stored row has beside its columns.
type rowMeta struct {
	id, systemID, revision int64
	updatedAt              string
}

// rowScanner reads rows of rowColumns; it is reused from row to row.
type rowScanner struct {
	cells   packedCells
	choices words
}

func newRowScanner() *rowScanner {
	return &rowScanner{cells: make(packedCells, len(Columns)+5), choices: words{}}
}

func (sc *rowScanner) scan(rows interface{ Scan(...any) error }, r *Row) (rowMeta, error) {
	var meta rowMeta
	if err := rows.Scan(sc.cells); err != nil {
		return meta, err
	}
	*r = Row{}
	for i := range Columns {
		switch c := &sc.cells[i]; {
		case c.kind == 'f':
			*Columns[i].num(r) = Number{V: c.number, Valid: true}
		case c.kind != 't' || len(c.text) == 0:
		case Columns[i].Kind == KindChoice:
			*Columns[i].text(r) = sc.choices.of(c.text)
		default:
			*Columns[i].text(r) = string(c.text)
		}
	}
	rest := sc.cells[len(Columns):]
	meta.id, meta.systemID, meta.revision = rest[0].integer, rest[1].integer, rest[2].integer
	if rest[3].kind == 't' {
		meta.updatedAt = string(rest[3].text)
	}
	if windows := rest[4]; windows.kind == 't' && string(windows.text) != "[]" {
		if err := json.Unmarshal(windows.text, &r.WindowSinuosities); err != nil {
			return meta, err
		}
	}
	r.Invented = strings.HasPrefix(r.Notes, InventedMark)
	r.Coarse = isCoarse(r.Notes)
	r.Private = meta.id < 0
	return meta, nil
}

// eachRow visits the rows of a query over rowColumns.
func eachRow(ctx context.Context, q querier, tail string, args []any, visit func(*Row, rowMeta) error) error {
	return scanRows(ctx, q, "SELECT "+rowColumns+fromRows+tail, args, visit)
}

func scanRows(ctx context.Context, q querier, query string, args []any, visit func(*Row, rowMeta) error) error {
	rows, err := q.QueryContext(ctx, query, args...)
	if err != nil {
		return err
	}
	defer rows.Close()
	sc := newRowScanner()
	var r Row
	for rows.Next() {
		meta, err := sc.scan(rows, &r)
		if err != nil {
			return err
		}
		if err := visit(&r, meta); err != nil {
			return err
		}
	}
	return rows.Err()
}

// EachRow visits all accepted measurements under the filter, sorted, without
// holding them in memory.
func (s *Store) EachRow(ctx context.Context, f Filter, visit func(Row) error) error {
	w, err := f.condition()
	if err != nil {
		return err
	}
	order, err := f.orderBy("")
	if err != nil {
		return err
	}
	q, err := at(ctx, s.out, f.Release)
	if err != nil {
		return fault("rows", err)
	}
	return fault("rows", eachRow(ctx, q, w.String()+order, w.args, func(r *Row, _ rowMeta) error { return visit(*r) }))
}

// Rows returns all accepted measurements under the filter (no paging), sorted;
// unsorted they come in the order in which they were accepted.
func (s *Store) Rows(ctx context.Context, f Filter) ([]Row, error) {
	// Rows are large: pieces that are joined once are cheaper than one slice
	// that doubles.
	const piece = 512
	var pieces [][]Row
	err := s.EachRow(ctx, f, func(r Row) error {
		if last := len(pieces) - 1; last >= 0 && len(pieces[last]) < cap(pieces[last]) {
			pieces[last] = append(pieces[last], r)
			return nil
		}
		pieces = append(pieces, append(make([]Row, 0, min(piece, 32<<min(len(pieces), 8))), r))
		return nil
	})
	return slices.Concat(pieces...), err
}

// RowsPage returns one page of Rows with the total.
func (s *Store) RowsPage(ctx context.Context, f Filter) (rows []Row, total int, err error) {
	w, err := f.condition()
	if err != nil {
		return nil, 0, err
	}
	order, err := f.orderBy("")
	if err != nil {
		return nil, 0, err
	}
	limit, offset := f.paging()
	err = s.read(ctx, func(tx *sql.Tx) error {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		if err := q.QueryRowContext(ctx, "SELECT count(*)"+fromRows+w.String(), w.args...).Scan(&total); err != nil {
			return err
		}
		args := append(append([]any{}, w.args...), limit, offset)
		return eachRow(ctx, q, w.String()+order+" LIMIT ? OFFSET ?", args, func(r *Row, _ rowMeta) error {
			rows = append(rows, *r)
			return nil
		})
	})
	return rows, total, err
}

// read runs fn on one snapshot of the catalogue.
func (s *Store) read(ctx context.Context, fn func(tx *sql.Tx) error) error {
	return snapshot(ctx, s.r, fn)
}

func snapshot(ctx context.Context, db *sql.DB, fn func(tx *sql.Tx) error) error {
	tx, err := db.BeginTx(ctx, nil)
	if err != nil {
		return fault("begin", err)
	}
	defer tx.Rollback()
	return fault("read", fn(tx))
}

// rowOf returns the accepted row with a measurement id, nil if there is none.
func rowOf(ctx context.Context, q querier, measurement string) (*Row, rowMeta, error) {
	var found *Row
	var meta rowMeta
	if measurement == "" {
		return nil, meta, nil
	}
	err := eachRow(ctx, q, " WHERE m.measurement = ?", []any{measurement}, func(r *Row, m rowMeta) error {
		row := *r
		found, meta = &row, m
		return nil
	})
	return found, meta, err
}

func (m rowMeta) time() time.Time { return parseTime(m.updatedAt) }
