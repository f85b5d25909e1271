package planform

import (
	"math"
	"testing"
)

// The numbers are chosen here; the rule is that of the doc comment.
func TestDisagreements(t *testing.T) {
	m := &Measured{PeakSinuosity: 1.8, Sensitivity: Range{1.7, 1.9}, MeanSinuosity: 1.4, ReachSinuosity: 1.5, MedianSpacingM: 100}
	for _, x := range []struct {
		r    Recorded
		want []string
	}{
		{Recorded{"peak", 1.8, 100}, nil},
		{Recorded{"peak", 1.68, 120}, nil}, // within 2 % of the range, within a quarter
		{Recorded{"peak", 1.6, 130}, []string{"sinuosity", "vertex_spacing_m"}},
		{Recorded{"peak", 2.0, 70}, []string{"sinuosity", "vertex_spacing_m"}},
		{Recorded{"mean", 1.41, math.NaN()}, nil}, // no range known: 2 % of the value itself
		{Recorded{"mean", 1.5, math.NaN()}, []string{"sinuosity"}},
		{Recorded{"reach", 1.57, math.NaN()}, nil},
		{Recorded{"reach", 1.6, math.NaN()}, []string{"sinuosity"}},
		{Recorded{"bend", 3, math.NaN()}, nil},
		{Recorded{"p90", 1.5, math.NaN()}, nil}, // the line has none
		{Recorded{"peak", math.NaN(), 0}, nil},
	} {
		got := m.Disagreements(x.r)
		if len(got) != len(x.want) {
			t.Errorf("%+v: %+v", x.r, got)
			continue
		}
		for i := range got {
			if got[i].Column != x.want[i] {
				t.Errorf("%+v: %+v", x.r, got)
			}
		}
	}
}
