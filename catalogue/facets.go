package catalogue

import (
	"context"
	"database/sql"
	"slices"
	"sort"
	"strconv"
	"strings"
	"sync"
)

// FacetLimit is the most values of a free-text column that Facets lists.
const FacetLimit = 200

// Facets counts the systems by each choice of each column that can be
// filtered on, under all of the filter but that column's own choices: so the
// other choices of a column keep their counts when one of them is picked. A
// chosen value is listed even when it counts none. Choices come in the order
// of the column, free texts by falling count.
func (s *Store) Facets(ctx context.Context, f Filter) ([]Facet, error) {
	var ix *facetIndex
	var under map[int64]bool // rows under the other parameters, nil = all
	err := s.read(ctx, func(tx *sql.Tx) (err error) {
		q, err := at(ctx, tx, f.Release)
		if err != nil {
			return err
		}
		if ix, err = s.facets.of(ctx, q, f.Release); err != nil {
			return err
		}
		under, err = rowsWithoutChoices(ctx, q, f)
		return err
	})
	if err != nil {
		return nil, err
	}
	out := make([]Facet, len(ChoiceParameters))
	for i, counts := range ix.count(f.Choices, under) {
		out[i] = Facet{Column: ChoiceParameters[i], Values: ix.values(i, counts, f.Choices[ChoiceParameters[i]])}
	}
	return out, nil
}

// rowsWithoutChoices finds the measurements under all of the filter but its
// choices; nil when there is nothing else in it.
func rowsWithoutChoices(ctx context.Context, tx querier, f Filter) (map[int64]bool, error) {
	f.Choices = nil
	alone := Filter{Release: f.Release}
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	if all, err := alone.condition(); err != nil || len(w.parts) == len(all.parts) {
		return nil, err
	}
	rows, err := tx.QueryContext(ctx, "SELECT m.id"+fromRows+w.String(), w.args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	under := map[int64]bool{}
	for rows.Next() {
		var id int64
		if err := rows.Scan(&id); err != nil {
			return nil, err
		}
		under[id] = true
	}
	return under, rows.Err()
}

// facetIndex holds the choices of every accepted measurement as small numbers.
type facetIndex struct {
	revision int64
	release  string
	ids      []int64   // measurements, those of one system together
	systems  []int64   // their systems
	codes    [][]int32 // per choice parameter and measurement, an index into texts
	texts    [][]string
}

// facetIndexes keeps the index of the latest revision, and those of the
// releases asked for last.
type facetIndexes struct {
	mu     sync.Mutex
	last   *facetIndex
	frozen []*facetIndex // newest use last
}

// maxFrozenFacets is how many indexes of releases are kept: each holds some 60
// bytes a measurement.
const maxFrozenFacets = 3

// of returns the index of a release, or, without a name, of the catalogue as
// it is for who asks.
func (x *facetIndexes) of(ctx context.Context, q querier, release string) (*facetIndex, error) {
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
	var ix *facetIndex
	x.frozen = slices.DeleteFunc(x.frozen, func(have *facetIndex) bool {
		found := strings.EqualFold(have.release, release)
		if found {
			ix = have
		}
		return found
	})
	if ix == nil {
		var err error
		if ix, err = readFacetIndex(ctx, q); err != nil {
			return nil, err
		}
		ix.release = release
	}
	x.frozen = append(x.frozen, ix)
	if len(x.frozen) > maxFrozenFacets {
		x.frozen = slices.Delete(x.frozen, 0, 1)
	}
	return ix, nil
}

// current returns the index as of the snapshot of tx, reading it anew when the
// catalogue has changed.
func (x *facetIndexes) current(ctx context.Context, tx querier) (*facetIndex, error) {
	var revision int64
	if err := tx.QueryRowContext(ctx, `SELECT coalesce(max(id), 0) FROM revisions`).Scan(&revision); err != nil {
		return nil, err
	}
	x.mu.Lock()
	defer x.mu.Unlock()
	if x.last != nil && x.last.revision == revision {
		return x.last, nil
	}
	ix, err := readFacetIndex(ctx, tx)
	if err != nil {
		return nil, err
	}
	ix.revision = revision
	if x.last == nil || x.last.revision < revision {
		x.last = ix
	}
	return ix, nil
}

func readFacetIndex(ctx context.Context, tx querier) (*facetIndex, error) {
	n := len(ChoiceParameters)
	ix := &facetIndex{codes: make([][]int32, n), texts: make([][]string, n)}
	exprs := make([]string, n)
	known := make([]map[string]int32, n)
	cells := make([]any, n+2)
	dest := make([]any, n+2)
	for i, name := range ChoiceParameters {
		c, _ := ColumnByName(name)
		exprs[i] = c.expr
		known[i] = map[string]int32{}
	}
	for i := range dest {
		dest[i] = &cells[i]
	}
	rows, err := tx.QueryContext(ctx, "SELECT m.id, m.system_id, "+strings.Join(exprs, ", ")+fromRows+" ORDER BY m.system_id")
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	for rows.Next() {
		if err := rows.Scan(dest...); err != nil {
			return nil, err
		}
		id, _ := cells[0].(int64)
		system, _ := cells[1].(int64)
		ix.ids, ix.systems = append(ix.ids, id), append(ix.systems, system)
		for i := range n {
			text, _ := cells[i+2].(string)
			code, ok := known[i][text]
			if !ok {
				code = int32(len(ix.texts[i]))
				known[i][text] = code
				ix.texts[i] = append(ix.texts[i], text)
			}
			ix.codes[i] = append(ix.codes[i], code)
		}
	}
	return ix, rows.Err()
}

// count returns, for each choice parameter, the systems by value. A row counts
// for a parameter when it fails no other one.
func (ix *facetIndex) count(choices map[string][]string, under map[int64]bool) [][]int {
	n := len(ChoiceParameters)
	counts, last, picked := make([][]int, n), make([][]int64, n), make([][]bool, n)
	for i, name := range ChoiceParameters {
		counts[i], last[i] = make([]int, len(ix.texts[i])), make([]int64, len(ix.texts[i]))
		if values := choices[name]; len(values) > 0 {
			picked[i] = make([]bool, len(ix.texts[i]))
			for code, text := range ix.texts[i] {
				picked[i][code] = slices.Contains(values, text)
			}
		}
	}
	for row, id := range ix.ids {
		if under != nil && !under[id] {
			continue
		}
		failed, which := 0, 0
		for i := range n {
			if picked[i] != nil && !picked[i][ix.codes[i][row]] {
				failed, which = failed+1, i
			}
		}
		for i := range n {
			if failed > 1 || (failed == 1 && which != i) {
				continue
			}
			// Rows of one system stand together, and ids of systems start at 1.
			if code := ix.codes[i][row]; last[i][code] != ix.systems[row] {
				last[i][code] = ix.systems[row]
				counts[i][code]++
			}
		}
	}
	return counts
}

// values lists the counted values of a parameter, and the chosen ones.
func (ix *facetIndex) values(param int, counts []int, chosen []string) []FacetValue {
	c, _ := ColumnByName(ChoiceParameters[param])
	var out []FacetValue
	for code, n := range counts {
		if text := ix.texts[param][code]; text != "" && (n > 0 || slices.Contains(chosen, text)) {
			out = append(out, FacetValue{Value: text, Count: n})
		}
	}
	for _, v := range chosen {
		if !slices.ContainsFunc(out, func(x FacetValue) bool { return x.Value == v }) {
			out = append(out, FacetValue{Value: v})
		}
	}
	if c.Kind == KindChoice {
		sort.Slice(out, func(i, j int) bool {
			return slices.Index(c.Choices, out[i].Value) < slices.Index(c.Choices, out[j].Value)
		})
		return out
	}
	sort.Slice(out, func(i, j int) bool {
		if out[i].Count != out[j].Count {
			return out[i].Count > out[j].Count
		}
		return out[i].Value < out[j].Value
	})
	kept := out[:0]
	for i, v := range out {
		if i < FacetLimit || slices.Contains(chosen, v.Value) {
			kept = append(kept, v)
		}
	}
	return kept
}
