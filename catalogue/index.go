package catalogue

import (
	"context"
	"slices"
	"strconv"
	"strings"
	"sync"
)

// rowIndex holds, of every measurement that one asker sees at one revision,
// what filters, facets, sorting and quantiles look at: some 250 bytes a
// measurement, so that a page of a catalogue of any size is found without
// reading rows. Rows of one system stand together. A number that is not given
// is NaN.
type rowIndex struct {
	revision int64
	name     string // of a release or of what one viewer sees; "" = what everybody sees

	ids     []int64
	systems []int64
	grades  []int8      // grade_rank, best first
	codes   [][]int32   // per choice parameter and row, an index into texts
	texts   [][]string  // per choice parameter
	ranges  [][]float64 // per range parameter and row
	lon     []float64   // -180 to 180; the latitude is that of the first range
	sizes   []sizeIndex // per dimension
	byID    []int32     // rows in the order of their ids
	idPlace []int32     // of each row in byID

	mu       sync.Mutex
	rankings map[string]*ranking
	found    []textFound // newest use last
	all      [][]int     // counted without a filter
}

// sizeIndex is the rows that give a dimension, by rising value.
type sizeIndex struct {
	rows   []int32
	values []float64
}

// rowIndexes keeps the index of the latest revision, and those of the releases
// and viewers asked for last.
type rowIndexes struct {
	mu    sync.Mutex
	last  *rowIndex
	other []*rowIndex // newest use last
}

// maxOtherIndexes is how many indexes beside the current one are kept.
const maxOtherIndexes = 3

// of returns the index of a release, or, without a name, of the catalogue as
// it is for who asks.
func (x *rowIndexes) of(ctx context.Context, q querier, release string) (*rowIndex, error) {
	if release == "" && SeesPrivate(ctx) {
		var revision int64
		if err := q.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM revisions`).Scan(&revision); err != nil {
			return nil, err
		}
		release = ViewKey(ctx) + strconv.FormatInt(revision, 10) // no name of a release holds blanks
	}
	if release == "" {
		return x.current(ctx, q)
	}
	x.mu.Lock()
	defer x.mu.Unlock()
	var ix *rowIndex
	x.other = slices.DeleteFunc(x.other, func(have *rowIndex) bool {
		found := strings.EqualFold(have.name, release)
		if found {
			ix = have
		}
		return found
	})
	if ix == nil {
		var err error
		if ix, err = readRowIndex(ctx, q); err != nil {
			return nil, err
		}
		ix.name = release
	}
	x.other = append(x.other, ix)
	if len(x.other) > maxOtherIndexes {
		x.other = slices.Delete(x.other, 0, 1)
	}
	return ix, nil
}

// current returns the index as of the snapshot of tx, reading it anew when the
// catalogue has changed.
func (x *rowIndexes) current(ctx context.Context, tx querier) (*rowIndex, error) {
	var revision int64
	if err := tx.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM revisions`).Scan(&revision); err != nil {
		return nil, err
	}
	x.mu.Lock()
	defer x.mu.Unlock()
	if x.last != nil && x.last.revision == revision {
		return x.last, nil
	}
	ix, err := readRowIndex(ctx, tx)
	if err != nil {
		return nil, err
	}
	ix.revision = revision
	if x.last == nil || x.last.revision < revision {
		x.last = ix
	}
	return ix, nil
}

func readRowIndex(ctx context.Context, q querier) (*rowIndex, error) {
	ix := &rowIndex{codes: make([][]int32, len(ChoiceParameters)), texts: make([][]string, len(ChoiceParameters)),
		ranges: make([][]float64, len(rangeParameters)), sizes: make([]sizeIndex, len(dimensionExprs)), rankings: map[string]*ranking{}}
	known := make([]map[string]int32, len(ChoiceParameters))
	exprs := []string{"m.id", "m.system_id", "m.grade_rank", "m.longitude_deg"}
	first := len(exprs)
	for i, name := range ChoiceParameters {
		c, _ := ColumnByName(name)
		exprs, known[i] = append(exprs, c.expr), map[string]int32{}
	}
	for _, r := range rangeParameters {
		exprs = append(exprs, r.expr)
	}
	for _, d := range dimensionExprs {
		exprs = append(exprs, d.expr)
	}
	cells := make(packedCells, len(exprs))
	rows, err := q.QueryContext(ctx, "SELECT "+packedFunction+"("+strings.Join(exprs, ", ")+")"+fromRows+" ORDER BY m.system_id, m.id")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		if err := rows.Scan(cells); err != nil {
			return nil, err
		}
		ix.take(cells[:first], cells[first:], known)
	}
	ix.arrange()
	return ix, rows.Err()
}

// take adds one row of readRowIndex.
func (ix *rowIndex) take(head, cells packedCells, known []map[string]int32) {
	row := int32(len(ix.ids))
	ix.ids, ix.systems, ix.grades = append(ix.ids, head[0].integer), append(ix.systems, head[1].integer), append(ix.grades, int8(head[2].integer))
	ix.lon = append(ix.lon, NormalLongitude(head[3].num()))
	for i := range known {
		var held []byte
		if cells[i].kind == 't' {
			held = cells[i].text
		}
		code, ok := known[i][string(held)]
		if !ok {
			code = int32(len(ix.texts[i]))
			text := string(held)
			known[i][text] = code
			ix.texts[i] = append(ix.texts[i], text)
		}
		ix.codes[i] = append(ix.codes[i], code)
	}
	cells = cells[len(known):]
	for i := range ix.ranges {
		ix.ranges[i] = append(ix.ranges[i], cells[i].num())
	}
	for i, cell := range cells[len(ix.ranges):] {
		if cell.kind == 'f' {
			ix.sizes[i].rows, ix.sizes[i].values = append(ix.sizes[i].rows, row), append(ix.sizes[i].values, cell.number)
		}
	}
}

// arrange sorts what is looked up by order.
func (ix *rowIndex) arrange() {
	ix.byID, ix.idPlace = make([]int32, len(ix.ids)), make([]int32, len(ix.ids))
	for row := range ix.byID {
		ix.byID[row] = int32(row)
	}
	slices.SortFunc(ix.byID, func(a, b int32) int { return compareInt(ix.ids[a], ix.ids[b]) })
	for place, row := range ix.byID {
		ix.idPlace[row] = int32(place)
	}
	for i := range ix.sizes {
		s := &ix.sizes[i]
		order := make([]int32, len(s.values))
		for k := range order {
			order[k] = int32(k)
		}
		slices.SortFunc(order, func(a, b int32) int { return compareNumber(s.values[a], s.values[b]) })
		rows, values := make([]int32, len(order)), make([]float64, len(order))
		for k, o := range order {
			rows[k], values[k] = s.rows[o], s.values[o]
		}
		s.rows, s.values = rows, values
	}
}

// rowOf finds a row by its id, -1 if there is none.
func (ix *rowIndex) rowOf(id int64) int {
	place, ok := slices.BinarySearchFunc(ix.byID, id, func(row int32, id int64) int { return compareInt(ix.ids[row], id) })
	if !ok {
		return -1
	}
	return int(ix.byID[place])
}
