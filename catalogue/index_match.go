package catalogue

import (
	"cmp"
	"context"
	"math"
	"slices"
)

func compareInt(a, b int64) int      { return cmp.Compare(a, b) }
func compareNumber(a, b float64) int { return cmp.Compare(a, b) }

// textFound are the rows that hold one text.
type textFound struct {
	text string
	rows []bool
}

// maxTexts is how many texts are remembered: a byte a measurement each.
const maxTexts = 8

// withText finds the rows with the words of a text.
func (ix *rowIndex) withText(ctx context.Context, q querier, text, release string) ([]bool, error) {
	ix.mu.Lock()
	for i, f := range ix.found {
		if f.text == text {
			ix.found = append(slices.Delete(ix.found, i, i+1), f)
			ix.mu.Unlock()
			return f.rows, nil
		}
	}
	ix.mu.Unlock()
	w := &where{}
	w.addText(text, release)
	rows, err := q.QueryContext(ctx, "SELECT m.id FROM measurements m"+w.String(), w.args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	found := make([]bool, len(ix.ids))
	for rows.Next() {
		var id int64
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		if row := ix.rowOf(id); row >= 0 {
			found[row] = true
		}
	}
	if err := rows.Err(); err != nil {
		return nil, err
	}
	ix.mu.Lock()
	defer ix.mu.Unlock()
	if ix.found = append(ix.found, textFound{text, found}); len(ix.found) > maxTexts {
		ix.found = slices.Delete(ix.found, 0, 1)
	}
	return found, nil
}

// under marks the rows under all of a filter but its choices, which picked
// holds; nil where every row is. It says what condition says in SQL.
func (ix *rowIndex) under(ctx context.Context, q querier, f *Filter) ([]bool, error) {
	var in []bool
	keep := func(holds func(row int) bool) {
		if in == nil {
			in = make([]bool, len(ix.ids))
			for row := range in {
				in[row] = holds(row)
			}
			return
		}
		for row, ok := range in {
			in[row] = ok && holds(row)
		}
	}
	for i, r := range rangeParameters {
		lo, hi, values := math.Inf(-1), math.Inf(1), ix.ranges[i]
		lowest, highest := r.min(f), r.max(f)
		if lowest.Valid {
			lo = lowest.V
		}
		if highest.Valid {
			hi = highest.V
		}
		if lowest.Valid || highest.Valid {
			keep(func(row int) bool { return values[row] >= lo && values[row] <= hi })
		}
	}
	if b := f.BBox; b != nil {
		keep(func(row int) bool { return b.holds(ix.ranges[0][row], ix.lon[row]) })
	}
	if f.Text != "" {
		found, err := ix.withText(ctx, q, f.Text, f.Release)
		if err != nil {
			return nil, err
		}
		keep(func(row int) bool { return found[row] })
	}
	return in, nil
}

// holds says whether a point lies in the box: -180 and 180 are one meridian, so
// that a box that touches one holds the other.
func (b *BBox) holds(lat, lon float64) bool {
	switch {
	case !(lat >= b.South && lat <= b.North):
		return false
	case b.West > b.East:
		return lon >= b.West || lon <= b.East
	case lon >= b.West && lon <= b.East:
		return true
	}
	return (b.West == -180 || b.East == 180) && math.Abs(lon) == 180
}

// picked says, for each choice parameter with values chosen, which codes are
// among them; nil for the others.
func (ix *rowIndex) picked(choices map[string][]string) [][]bool {
	out := make([][]bool, len(ChoiceParameters))
	for i, name := range ChoiceParameters {
		values := choices[name]
		if len(values) == 0 {
			continue
		}
		chosen := make(map[string]bool, len(values))
		for _, v := range values {
			chosen[v] = true
		}
		out[i] = make([]bool, len(ix.texts[i]))
		for code, text := range ix.texts[i] {
			out[i][code] = chosen[text]
		}
	}
	return out
}

// match marks the rows under a filter; nil where every row is.
func (ix *rowIndex) match(ctx context.Context, q querier, f *Filter) ([]bool, error) {
	in, err := ix.under(ctx, q, f)
	if err != nil {
		return nil, err
	}
	for i, picked := range ix.picked(f.Choices) {
		if picked == nil {
			continue
		}
		if in == nil {
			in = make([]bool, len(ix.ids))
			for row := range in {
				in[row] = true
			}
		}
		for row, code := range ix.codes[i] {
			in[row] = in[row] && picked[code]
		}
	}
	return in, nil
}

// bests are the rows that stand for the systems with a row in in: the
// best-graded, then newest under the filter.
func (ix *rowIndex) bests(in []bool) []int32 {
	var out []int32
	for row := range ix.ids {
		if in != nil && !in[row] {
			continue
		}
		last := len(out) - 1
		switch {
		case last < 0 || ix.systems[out[last]] != ix.systems[row]:
			out = append(out, int32(row))
		case ix.grades[row] <= ix.grades[out[last]]: // ids rise within a system
			out[last] = int32(row)
		}
	}
	return out
}
