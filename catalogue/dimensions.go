package catalogue

import "context"

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
	out := make([]Dimension, len(dimensionExprs))
	err := s.indexed(ctx, &f, func(q querier, ix *rowIndex) error {
		in, err := ix.match(ctx, q, &f)
		if err != nil {
			return err
		}
		for i, d := range dimensionExprs {
			values := ix.sizes[i].under(in)
			out[i] = Dimension{Name: d.name, Unit: d.unit, N: len(values),
				P10: quantile(values, 0.10), P25: quantile(values, 0.25), P50: quantile(values, 0.50), P75: quantile(values, 0.75), P90: quantile(values, 0.90)}
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}

// under are the values of the rows in in, rising.
func (s *sizeIndex) under(in []bool) []float64 {
	if in == nil {
		return s.values
	}
	values := make([]float64, 0, len(s.values))
	for k, row := range s.rows {
		if in[row] {
			values = append(values, s.values[k])
		}
	}
	return values
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
