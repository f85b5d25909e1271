package expectation

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestSortPositive(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for n := range 300 {
		x := make([]float64, n*7)
		for i := range x {
			switch rng.IntN(5) {
			case 0:
				x[i] = 1
			case 1:
				x[i] = math.Nextafter(1.25, float64(rng.IntN(3)))
			case 2:
				x[i] = math.Exp(20 * rng.NormFloat64())
			case 3:
				x[i] = 1 + rng.Float64()
			default:
				x[i] = []float64{0, math.Inf(1)}[rng.IntN(2)]
			}
		}
		want := slices.Sorted(slices.Values(x))
		sortPositive(x, nil)
		if !slices.Equal(x, want) {
			t.Fatalf("%d numbers out of order", len(x))
		}
	}
}
