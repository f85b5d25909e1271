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
	var out []Facet
	for _, name := range ChoiceParameters {
		values, err := s.facet(ctx, f, name)
		if err != nil {
			return nil, fault("facets", err)
		}
		out = append(out, Facet{Column: name, Values: values})
	}
	return out, nil
}

func (s *Store) facet(ctx context.Context, f Filter, name string) ([]FacetValue, error) {
	w, err := f.condition(name)
	if err != nil {
		return nil, err
	}
	c, _ := ColumnByName(name)
	rows, err := s.r.QueryContext(ctx, "SELECT "+c.expr+", count(DISTINCT m.system_id)"+fromRows+w.String()+" GROUP BY 1 ORDER BY 2 DESC, 1", w.args...)
	if err != nil {
		return nil, err
	}
	defer rows.Close()
	var out []FacetValue
	for rows.Next() {
		var v FacetValue
		if err := rows.Scan(&v.Value, &v.Count); err != nil {
			return nil, err
		}
		chosen := slices.Contains(f.Choices[name], v.Value)
		if v.Value != "" && (chosen || c.Kind == KindChoice || len(out) < FacetLimit) {
			out = append(out, v)
		}
	}
	for _, v := range f.Choices[name] {
		if !slices.ContainsFunc(out, func(x FacetValue) bool { return x.Value == v }) {
			out = append(out, FacetValue{Value: v})
		}
	}
	if c.Kind == KindChoice {
		sort.Slice(out, func(i, j int) bool {
			return slices.Index(c.Choices, out[i].Value) < slices.Index(c.Choices, out[j].Value)
		})
	}
	return out, rows.Err()
}
