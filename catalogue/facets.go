package catalogue

import (
	"context"
	"slices"
	"sort"
)

// FacetLimit is the most values of a free-text column that Facets lists.
const FacetLimit = 200

// Facets counts the systems by each choice of each column that can be
// filtered on, under all of the filter but that column's own choices: so the
// other choices of a column keep their counts when one of them is picked. A
// chosen value is listed even when it counts none. Choices come in the order
// of the column, free texts by falling count.
func (s *Store) Facets(ctx context.Context, f Filter) ([]Facet, error) {
	out := make([]Facet, len(ChoiceParameters))
	err := s.indexed(ctx, &f, func(q querier, ix *rowIndex) error {
		in, err := ix.under(ctx, q, &f)
		if err != nil {
			return err
		}
		for i, counts := range ix.counted(f.Choices, in) {
			out[i] = Facet{Column: ChoiceParameters[i], Values: ix.values(i, counts, f.Choices[ChoiceParameters[i]])}
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}

// counted is count, once for the page without a filter, which is asked for most.
func (ix *rowIndex) counted(choices map[string][]string, in []bool) [][]int {
	if in != nil || slices.ContainsFunc(ChoiceParameters, func(name string) bool { return len(choices[name]) > 0 }) {
		return ix.count(choices, in)
	}
	ix.mu.Lock()
	defer ix.mu.Unlock()
	if ix.all == nil {
		ix.all = ix.count(nil, nil)
	}
	return ix.all
}

// count returns, for each choice parameter, the systems by value. A row counts
// for a parameter when it fails no other one.
func (ix *rowIndex) count(choices map[string][]string, in []bool) [][]int {
	// Of each row, the only parameter it fails; none, or more than one.
	const none, several = -1, -2
	failed := make([]int8, len(ix.ids))
	for row := range failed {
		failed[row] = none
		if in != nil && !in[row] {
			failed[row] = several
		}
	}
	for i, picked := range ix.picked(choices) {
		if picked == nil {
			continue
		}
		for row, code := range ix.codes[i] {
			switch {
			case picked[code] || failed[row] == several:
			case failed[row] == none:
				failed[row] = int8(i)
			default:
				failed[row] = several
			}
		}
	}
	counts := make([][]int, len(ChoiceParameters))
	for i := range counts {
		counts[i] = make([]int, len(ix.texts[i]))
		// Rows of one system stand together: the last row that counted for a
		// value tells whether its system has.
		last := make([]int32, len(ix.texts[i]))
		for code := range last {
			last[code] = -1
		}
		for row, code := range ix.codes[i] {
			if f := failed[row]; f != none && f != int8(i) {
				continue
			}
			if l := last[code]; l < 0 || ix.systems[l] != ix.systems[row] {
				counts[i][code]++
			}
			last[code] = int32(row)
		}
	}
	return counts
}

// values lists the counted values of a parameter, and the chosen ones.
func (ix *rowIndex) values(param int, counts []int, chosen []string) []FacetValue {
	c, _ := ColumnByName(ChoiceParameters[param])
	var out []FacetValue
	least := 1
	if c.Kind != KindChoice {
		least = leastOf(counts, FacetLimit)
	}
	for code, n := range counts {
		if text := ix.texts[param][code]; text != "" && (n >= least || slices.Contains(chosen, text)) {
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

// leastOf is the smallest count worth sorting: as many values as are listed
// have it or a larger one. It is 1 where fewer values have any.
func leastOf(counts []int, most int) int {
	top := 0
	for _, n := range counts {
		top = max(top, n)
	}
	with := make([]int, top+1)
	for _, n := range counts {
		with[n]++
	}
	n := top
	for seen := 0; n > 1; n-- {
		if seen += with[n]; seen >= most {
			break
		}
	}
	return max(n, 1)
}
