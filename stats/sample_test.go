package stats

import (
	"math"
	"slices"
	"testing"
)

func TestDrawSampleIsSeededAndEven(t *testing.T) {
	a, b := DrawSample(500, 10, 7), DrawSample(500, 10, 7)
	if !slices.Equal(a, b) || len(a) != 10 || !slices.IsSorted(a) {
		t.Errorf("%v %v", a, b)
	}
	if slices.Equal(a, DrawSample(500, 10, 8)) {
		t.Error("another seed draws the same")
	}
	if got := DrawSample(3, 10, 1); !slices.Equal(got, []int{0, 1, 2}) {
		t.Error(got)
	}
	if got := DrawSample(0, 10, 1); len(got) != 0 {
		t.Error(got)
	}
	// Each of 20 is drawn in a quarter of 4,000 samples of 5: 1000, with a
	// standard deviation of sqrt(4000/4*3/4) = 27; 5 of them allowed.
	counts := make([]int, 20)
	for seed := range uint64(4000) {
		for _, i := range DrawSample(20, 5, seed) {
			counts[i]++
		}
	}
	for i, n := range counts {
		if math.Abs(float64(n)-1000) > 5*27.4 {
			t.Errorf("%d is drawn %d times", i, n)
		}
	}
}

// The definition itself, with binomials by logarithms of the gamma function.
func TestMostWrongAgainstBinomials(t *testing.T) {
	lnC := func(n, k int) float64 {
		a, _ := math.Lgamma(float64(n + 1))
		b, _ := math.Lgamma(float64(k + 1))
		c, _ := math.Lgamma(float64(n - k + 1))
		return a - b - c
	}
	for _, x := range [][2]int{{20, 5}, {100, 10}, {500, 10}, {500, 59}, {7, 7}, {50000, 60}} {
		total, size := x[0], x[1]
		d := MostWrong(total, size, 0.95)
		chance := func(d int) float64 { return math.Exp(lnC(total-d, size) - lnC(total, size)) }
		if d > 0 && chance(d) < 0.05-1e-9 {
			t.Errorf("%d of %d: %d wrong would be seen with more than 95 %%", size, total, d)
		}
		if d < total-size && chance(d+1) > 0.05+1e-9 {
			t.Errorf("%d of %d: %d wrong could be missed too", size, total, d+1)
		}
	}
	// The rule of three: none in 60 of many means fewer than about 5 %.
	if share := float64(MostWrong(50000, 60, 0.95)) / 50000; math.Abs(share-0.0487) > 0.002 {
		t.Errorf("%.4f", share)
	}
	if MostWrong(10, 0, 0.95) != 10 || MostWrong(10, 10, 0.95) != 0 {
		t.Error("none and all")
	}
}
