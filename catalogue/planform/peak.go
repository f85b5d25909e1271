package planform

import "math"

// ExpectedMax is the exact expectation and standard deviation of the largest of
// k values drawn without replacement from the given values, which must be
// sorted upwards. Both are NaN when k < 1 or there are fewer than k values.
//
// With x_1 <= ... <= x_n the i-th is the largest of the draw with probability
// C(i-1, k-1) / C(n, k) (rarefaction; Hurlbert 1971, Ecology 52:577,
// doi 10.2307/1934145, gives the combinatorics).
func ExpectedMax(sorted []float64, k int) (mean, sd float64) {
	n := len(sorted)
	if k < 1 || n < k {
		return math.NaN(), math.NaN()
	}
	// From the top down: w_n = k/n and w_(i-1) = w_i (i-k)/(i-1). Values are
	// taken relative to the largest so that the variance does not cancel.
	top := sorted[n-1]
	w := float64(k) / float64(n)
	var m1, m2 float64
	for i := n; i >= k && w > 0; i-- {
		d := sorted[i-1] - top
		m1 += w * d
		m2 += w * d * d
		if i > 1 {
			w *= float64(i-k) / float64(i-1)
		}
	}
	return top + m1, math.Sqrt(max(0, m2-m1*m1))
}
