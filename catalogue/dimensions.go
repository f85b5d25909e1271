package catalogue

import (
	"context"
	"slices"
)

// Dimension holds quantiles of one dimension over rows that give it. All are
// in metres but width_depth, a pure number. Without rows they are not given.
type Dimension struct {
	Name, Unit              string
	P10, P25, P50, P75, P90 Number
	N                       int
}

// dimensionExprs are what DimensionQuantiles reports, in order.
var dimensionExprs = []struct{ name, unit, expr string }{
	{"channel_width_m", "m", "m.channel_width_m"},
	{"channel_depth_m", "m", "m.channel_depth_m"},
	{"width_depth", "", "m.channel_width_m / m.channel_depth_m"},
	{"wavelength_m", "m", "m.wavelength_m"},
	{"amplitude_m", "m", "m.amplitude_m"},
	{"radius_m", "m", "m.radius_m"},
}

// DimensionQuantiles returns the quantiles of the dimensions of the rows under
// the filter, each over the rows that give it.
func (s *Store) DimensionQuantiles(ctx context.Context, f Filter) ([]Dimension, error) {
	w, err := f.condition()
	if err != nil {
		return nil, err
	}
	query := "SELECT "
	for i, d := range dimensionExprs {
		if i > 0 {
			query += ", "
		}
		query += d.expr
	}
	q, err := at(ctx, s.r, f.Release)
	if err != nil {
		return nil, fault("dimensions", err)
	}
	rows, err := q.QueryContext(ctx, query+fromRows+w.String(), w.args...)
	if err != nil {
		return nil, fault("dimensions", err)
	}
	defer rows.Close()
	values := make([][]float64, len(dimensionExprs))
	cells := make([]Number, len(dimensionExprs))
	dest := make([]any, len(dimensionExprs))
	for i := range cells {
		dest[i] = &cells[i]
	}
	for rows.Next() {
		if err := rows.Scan(dest...); err != nil {
			return nil, fault("dimensions", err)
		}
		for i, c := range cells {
			if c.Valid {
				values[i] = append(values[i], c.V)
			}
		}
	}
	out := make([]Dimension, len(dimensionExprs))
	for i, d := range dimensionExprs {
		slices.Sort(values[i])
		out[i] = Dimension{Name: d.name, Unit: d.unit, N: len(values[i]),
			P10: quantile(values[i], 0.10), P25: quantile(values[i], 0.25), P50: quantile(values[i], 0.50), P75: quantile(values[i], 0.75), P90: quantile(values[i], 0.90)}
	}
	return out, fault("dimensions", rows.Err())
}

// quantile is Hyndman and Fan's type 7 (The American Statistician 50:361
// (1996)): linear between order statistics at 1 + (n-1)p. x is sorted.
func quantile(x []float64, p float64) Number {
	if len(x) == 0 {
		return Number{}
	}
	h := float64(len(x)-1) * p
	i := int(h)
	if i+1 >= len(x) {
		return Num(x[len(x)-1])
	}
	return Num(x[i] + (h-float64(i))*(x[i+1]-x[i]))
}
