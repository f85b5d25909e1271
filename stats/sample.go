package stats

import (
	"math"
	"math/rand/v2"
	"slices"
)

// DrawSample draws size of the numbers 0 to total-1 without replacement, every
// such set with equal chance, and returns them in ascending order. Equal seeds
// give equal samples. A size of total or more draws all.
func DrawSample(total, size int, seed uint64) []int {
	all := make([]int, max(total, 0))
	for i := range all {
		all[i] = i
	}
	size = min(max(size, 0), len(all))
	rng := rand.New(rand.NewPCG(seed, 0x5a3b1e))
	for i := range size { // Fisher and Yates, as far as needed
		j := i + rng.IntN(len(all)-i)
		all[i], all[j] = all[j], all[i]
	}
	out := all[:size]
	slices.Sort(out)
	return out
}

// MostWrong is the largest number of faulty items among total that a sample of
// size without a single fault still allows at the level: the largest d with
// C(total-d, size) / C(total, size) >= 1 - level (hypergeometric, none found).
func MostWrong(total, size int, level float64) int {
	if size <= 0 {
		return max(total, 0)
	}
	miss, d := 1.0, 0
	for d < total-size {
		// One faulty item more: the chance that all of size miss it too.
		next := miss * float64(total-d-size) / float64(total-d)
		if next < (1-level)*(1-1e-12) || math.IsNaN(next) {
			break
		}
		miss, d = next, d+1
	}
	return d
}
