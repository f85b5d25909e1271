package stats

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// quantreg 5.94 (R) on the reference rows, tau 0.1, 0.5, 0.9.
func TestQuantileLinesReference(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	want := referenceValue[[][]float64](t, "quantile_absl")
	for k, form := range []string{"quantile_10", "quantile_50", "quantile_90"} {
		f := fitPlan(tab, newPlan(tab, ModelSpec{form, "abs_latitude"}, "raw"))
		for j := range 2 {
			needDigits(t, form, f.coef[j], want[k][j], 9)
		}
	}
}

// engelTable reads testdata/engel.csv as a table with income as predictor.
func engelTable(t testing.TB) *table {
	t.Helper()
	f, err := os.Open("testdata/engel.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rec, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	tab := &table{predictor: map[string][]float64{}}
	for _, r := range rec[1:] {
		x, err1 := strconv.ParseFloat(r[0], 64)
		y, err2 := strconv.ParseFloat(r[1], 64)
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		tab.predictor["channel_width"] = append(tab.predictor["channel_width"], x)
		tab.y = append(tab.y, y)
	}
	if tab.n() != 235 {
		t.Fatalf("%d rows of 235", tab.n())
	}
	tab.cluster = singles(tab.n())
	return tab
}

// Engel's food data: coefficients by R's quantreg (science notes, section 5).
func TestEngel(t *testing.T) {
	tab := engelTable(t)
	for form, want := range map[string][2]float64{
		"quantile_10": {110.141574204948, 0.401765759303},
		"quantile_50": {81.482247416936, 0.560180551209},
		"quantile_90": {67.350872080130, 0.686299480372},
	} {
		f := fitPlan(tab, newPlan(tab, ModelSpec{form, "channel_width"}, "raw"))
		for j := range 2 {
			needDigits(t, form, f.coef[j], want[j], 9)
		}
	}
}

// The line minimises the check function: no line through any two rows has a
// smaller sum (a minimum is always attained at such a line: Koenker & Bassett
// 1978, theorem 3.1). Brute force over all pairs, with ties and weights.
func TestQuantileIsMinimal(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	for i := range tab.y { // coarse values make ties
		tab.y[i] = math.Round(tab.y[i]*10) / 10
		tab.predictor["abs_latitude"][i] = math.Round(tab.predictor["abs_latitude"][i] / 5)
	}
	s := newSampler(18, 3)
	for _, form := range []string{"quantile_10", "quantile_50", "quantile_90"} {
		tau := quantileTau(form)
		p := newPlan(tab, ModelSpec{form, "abs_latitude"}, "raw")
		fit := newQuantileLine(p, &tab.cluster, tau).worker()
		for i := range 60 {
			d := s.draw(i)
			out := make([]float64, 3)
			if !fit(d, out, false) {
				continue
			}
			var x, y, w []float64
			for k, g := range d.id {
				for _, r := range tab.cluster.members(int(g)) {
					x, y, w = append(x, p.x[r]), append(y, p.y[r]), append(w, d.wt[k])
				}
			}
			check := func(a, b float64) float64 {
				v := 0.0
				for i := range x {
					r := y[i] - a - b*x[i]
					v += w[i] * r * tau
					if r < 0 {
						v -= w[i] * r
					}
				}
				return v
			}
			got, best := check(out[0], out[1]), math.Inf(1)
			for i := range x {
				for j := range i {
					if x[i] != x[j] {
						b := (y[i] - y[j]) / (x[i] - x[j])
						best = math.Min(best, check(y[i]-b*x[i], b))
					}
				}
			}
			if got > best*(1+1e-10) {
				t.Fatalf("%s, resample %d: %.12g, a better line has %.12g", form, i, got, best)
			}
		}
	}
}

// R's segmented on the reference rows; it stops at a relative tolerance of
// 1e-10 of the sum of squares, so the breakpoint has about half the digits.
func TestBrokenLineReference(t *testing.T) {
	want := referenceValue[struct {
		Breakpoint, RSS float64
		Slopes          []float64
	}](t, "broken_line_absl")
	tab := referenceTable(t, "parent_deposit")
	f := fitPlan(tab, newPlan(tab, ModelSpec{"broken_line", "abs_latitude"}, "raw"))
	needDigits(t, "breakpoint", f.coef[3], want.Breakpoint, 6)
	needDigits(t, "sum of squares", f.rss, want.RSS, 9)
	if math.Abs(f.coef[1]-want.Slopes[0]) > 5e-7 || math.Abs(f.coef[2]-want.Slopes[1]) > 5e-7 {
		t.Errorf("slopes %v, segmented gives %v (printed to 6 places)", f.coef[1:3], want.Slopes)
	}
}

// A grid of breakpoints with free least squares at each can only come near from
// above.
func TestBrokenLineIsMinimal(t *testing.T) {
	for seed := range uint64(12) {
		rows := inventedRows(20+seed, 25, 12)
		req := DefaultRequest()
		tab := newTable(consider(rows, &req), &req, "")
		f := fitPlan(tab, newPlan(tab, ModelSpec{"broken_line", "abs_latitude"}, "raw"))
		if f.failure != "" {
			t.Fatal(f.failure)
		}
		best := math.Inf(1)
		for c := 0.5; c < 80; c += 0.05 {
			below, over := make([]float64, len(f.x)), make([]float64, len(f.x))
			nb, no := 0, 0
			for i, x := range f.x {
				below[i], over[i] = math.Min(x, c), math.Max(0, x-c)
				if x <= c {
					nb++
				}
				if x >= c {
					no++
				}
			}
			if ls, err := FitLinear([][]float64{below, over}, f.z); err == nil && nb >= leastSide && no >= leastSide {
				best = math.Min(best, ls.RSS)
			}
		}
		if f.rss > best*(1+1e-9) {
			t.Errorf("seed %d: sum of squares %.10g, a grid finds %.10g", seed, f.rss, best)
		}
		ls := f.coef
		rss := 0.0
		for i := range f.x {
			e := f.z[i] - f.level(ls, f.x[i])
			rss += e * e
		}
		needDigits(t, "sum of squares of the reported line", rss, f.rss, 9)
	}
}

func TestTheilSenReference(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	f := fitPlan(tab, newPlan(tab, ModelSpec{"theil_sen", "abs_latitude"}, "raw"))
	needDigits(t, "Theil-Sen slope", f.coef[1], referenceValue[float64](t, "theil_sen_absl"), 10)
}
