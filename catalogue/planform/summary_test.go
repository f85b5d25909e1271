package planform

import (
	"math"
	"testing"
)

// By hand: of 1.0, 1.2, 1.4, 2.0 the mean is 1.4, the 90th percentile of type
// 7 stands at place 0.9*3 = 2.7, that is 1.4 + 0.7*0.6 = 1.82, and the largest
// of two is expected at (1.2*1 + 1.4*2 + 2.0*3)/6 = 10/6.
func TestSummarise(t *testing.T) {
	got := Summarise([]float64{2, 1.2, math.NaN(), 1, math.Inf(1), 1.4}, 2)
	for name, v := range map[string][2]float64{"mean": {got.Mean, 1.4}, "P90": {got.P90, 1.82}, "peak": {got.Peak, 2}, "standardised": {got.Standardised, 10.0 / 6}} {
		if math.Abs(v[0]-v[1]) > 1e-12 {
			t.Errorf("%s %v, want %v", name, v[0], v[1])
		}
	}
	if got.Windows != 4 {
		t.Errorf("%d windows", got.Windows)
	}
	few := Summarise([]float64{1.5}, 5)
	if !math.IsNaN(few.Standardised) || few.Peak != 1.5 {
		t.Errorf("one window: %+v", few)
	}
	if none := Summarise(nil, 5); none.Windows != 0 || !math.IsNaN(none.Mean+none.P90) {
		t.Errorf("no windows: %+v", none)
	}
}
