package stats

import (
	"math"
	"testing"
)

// The 95 % intervals on the reference rows, |latitude| -0.028..-0.0041 with 4.6
// degrees of freedom and slope -76..+36 with 2.2, were worked by hand from the
// formulas of Bell & McCaffrey (2002) and Pustejovsky & Tipton (2018) (science
// notes, section 2). bruteCR2 does the same with whole n x n matrices, so the short cut
// through p x p matrices is checked to rounding.
func TestCR2Reference(t *testing.T) {
	for _, c := range []struct {
		predictor  string
		lo, hi, df float64
		tolerance  float64
	}{
		{"abs_latitude", -0.028, -0.0041, 4.6, 0.0005},
		{"valley_slope", -76, 36, 2.2, 0.5},
	} {
		tab := referenceTable(t, "parent_deposit")
		p := newPlan(tab, ModelSpec{"linear", c.predictor}, "raw")
		fit, err := FitLinear(p.cols, p.z)
		if err != nil {
			t.Fatal(err)
		}
		m := newMoments(p, &tab.cluster)
		con, unit := m.contrast(1)
		se, df := m.terms(fit).cr2(con)
		i := cr2Interval(fit.Coef[1], se*unit, df, 0.95)
		if math.Abs(i[0]-c.lo) > c.tolerance || math.Abs(i[1]-c.hi) > c.tolerance || math.Abs(df-c.df) > 0.05 {
			t.Errorf("%s: %v with %.3f degrees of freedom, want %v..%v with %v", c.predictor, i, df, c.lo, c.hi, c.df)
		}
		for j := range 2 {
			con, unit := m.contrast(j)
			se, df := m.terms(fit).cr2(con)
			wantSE, wantDF := bruteCR2(p, tab.cluster.of, fit, j)
			needDigits(t, c.predictor+" CR2 error", se*unit, wantSE, 8)
			needDigits(t, c.predictor+" degrees of freedom", df, wantDF, 7)
		}
	}
}
