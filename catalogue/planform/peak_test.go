package planform

import (
	"math"
	"math/bits"
	"math/rand/v2"
	"slices"
	"testing"
)

// Every subset of size k of small samples: the definition itself.
func TestExpectedMaxBruteForce(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	for n := 1; n <= 12; n++ {
		x := make([]float64, n)
		for i := range x {
			x[i] = 1 + 3*r.Float64()
			if i%3 == 2 {
				x[i] = x[i-1] // ties
			}
		}
		slices.Sort(x)
		for k := 1; k <= n; k++ {
			var count, s1, s2 float64
			for m := uint(1); m < 1<<n; m++ {
				if bits.OnesCount(m) != k {
					continue
				}
				top := x[bits.Len(m)-1]
				count, s1, s2 = count+1, s1+top, s2+top*top
			}
			mean, sd := ExpectedMax(x, k)
			want := math.Sqrt(max(0, s2/count-s1/count*s1/count))
			if math.Abs(mean-s1/count) > 1e-12 || math.Abs(sd-want) > 1e-6 {
				t.Errorf("n=%d k=%d: %v %v, expected %v %v", n, k, mean, sd, s1/count, want)
			}
		}
	}
}

func TestExpectedMaxEdges(t *testing.T) {
	x := []float64{1, 1.5, 2}
	if m, sd := ExpectedMax(x, 3); m != 2 || sd != 0 {
		t.Errorf("all of them: %v %v, expected 2 0", m, sd)
	}
	if m, _ := ExpectedMax(x, 1); math.Abs(m-1.5) > 1e-15 {
		t.Errorf("one of them: %v, expected the mean", m)
	}
	for _, k := range []int{0, -1, 4} {
		if m, sd := ExpectedMax(x, k); !math.IsNaN(m) || !math.IsNaN(sd) {
			t.Errorf("k=%d: %v %v, expected NaN", k, m, sd)
		}
	}
	// Grows with k, never past the largest; no overflow in the binomials.
	big := make([]float64, 100_000)
	for i := range big {
		big[i] = float64(i) / 1e5
	}
	last := 0.0
	for _, k := range []int{1, 2, 5, 100, 50_000, 100_000} {
		m, sd := ExpectedMax(big, k)
		if !(m > last) || m > big[len(big)-1] || math.IsNaN(sd) {
			t.Errorf("k=%d: %v after %v", k, m, last)
		}
		last = m
	}
}
