package stats

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

var nan = math.NaN()

var noInterval = Interval{nan, nan}

// leastReplicates is how many resamples must be fit to read an end off them.
const leastReplicates = 40

// sortedQuantile reads the quantile q of sorted values at place (n + 1) q,
// between neighbours by proportion (type 6 of Hyndman & Fan, Am. Stat. 50:361
// (1996), doi 10.2307/2684934): with 9,999 resamples the 2.5 % point is the
// 250th value.
func sortedQuantile(x []float64, q float64) float64 {
	n := len(x)
	if n == 0 {
		return nan
	}
	h := q * float64(n+1)
	k := int(math.Floor(h))
	if k < 1 {
		return x[0]
	}
	if k >= n {
		return x[n-1]
	}
	return x[k-1] + (h-float64(k))*(x[k]-x[k-1])
}

// percentileInterval takes sorted values.
func percentileInterval(sorted []float64, level float64) Interval {
	if len(sorted) < leastReplicates {
		return noInterval
	}
	return Interval{sortedQuantile(sorted, (1-level)/2), sortedQuantile(sorted, (1+level)/2)}
}

// bcaInterval is Efron's bias-corrected, accelerated interval (J. Am. Stat.
// Assoc. 82:171 (1987), doi 10.1080/01621459.1987.10478410): the percentile
// interval at Phi(z0 + (z0 + z)/(1 - a (z0 + z))), with z0 from the share of
// replicates below the estimate (half of the ties counted) and a from the
// leave-one-group-out values. sorted are the replicates.
func bcaInterval(sorted []float64, estimate float64, jack []float64, level float64) Interval {
	n := len(sorted)
	if n < leastReplicates || !finite(estimate) {
		return noInterval
	}
	below, _ := slices.BinarySearch(sorted, estimate)
	ties := 0
	for i := below; i < n && sorted[i] == estimate; i++ {
		ties++
	}
	share := (float64(below) + float64(ties)/2) / float64(n)
	half := 0.5 / float64(n)
	z0 := distuv.UnitNormal.Quantile(math.Min(math.Max(share, half), 1-half))
	a := acceleration(jack)
	end := func(p float64) float64 {
		z := z0 + distuv.UnitNormal.Quantile(p)
		if 1-a*z <= 0 { // beyond the reach of the correction
			if z > 0 {
				return sorted[n-1]
			}
			return sorted[0]
		}
		return sortedQuantile(sorted, distuv.UnitNormal.CDF(z0+z/(1-a*z)))
	}
	return Interval{end((1 - level) / 2), end((1 + level) / 2)}
}

// acceleration is sum L^3 / (6 (sum L^2)^1.5) with L = mean - jackknife value.
func acceleration(jack []float64) float64 {
	mean, n := 0.0, 0.0
	for _, v := range jack {
		if finite(v) {
			mean += v
			n++
		}
	}
	if n < 2 {
		return 0
	}
	mean /= n
	s2, s3 := 0.0, 0.0
	for _, v := range jack {
		if finite(v) {
			l := mean - v
			s2 += l * l
			s3 += l * l * l
		}
	}
	if s2 == 0 {
		return 0
	}
	return s3 / (6 * math.Pow(s2, 1.5))
}

// studentisedInterval is the symmetric bootstrap-t: estimate +- q(|t*|) s with
// t* = (b* - b)/s* (Cameron, Gelbach & Miller, Rev. Econ. Stat. 90:414 (2008),
// doi 10.1162/rest.90.3.414). t are the |t*|, unsorted; it reorders them.
func studentisedInterval(t []float64, estimate, se, level float64) Interval {
	if len(t) < leastReplicates || !finite(se) {
		return noInterval
	}
	q := selectQuantile(t, level)
	return Interval{estimate - q*se, estimate + q*se}
}

// selectQuantile is sortedQuantile of values in any order, which it reorders:
// one quantile needs no sorting.
func selectQuantile(x []float64, q float64) float64 {
	n := len(x)
	h := q * float64(n+1)
	k := int(math.Floor(h))
	if k < 1 || k >= n {
		sortFloats(x)
		return sortedQuantile(x, q)
	}
	selectNth(x, k-1)
	next := x[k]
	for _, v := range x[k+1:] {
		next = math.Min(next, v)
	}
	return x[k-1] + (h-float64(k))*(next-x[k-1])
}

// selectNth moves the k-th smallest value (from 0) to its place, no larger ones
// before it (Hoare, Commun. ACM 4:321 (1961), doi 10.1145/366622.366647).
func selectNth(x []float64, k int) {
	lo, hi := 0, len(x)-1
	for lo < hi {
		pivot := median3(x[lo], x[(lo+hi)/2], x[hi])
		i, j := lo, hi
		for i <= j {
			for x[i] < pivot {
				i++
			}
			for x[j] > pivot {
				j--
			}
			if i <= j {
				x[i], x[j] = x[j], x[i]
				i++
				j--
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return
		}
	}
}

// cr2Interval is estimate +- t(df) se.
func cr2Interval(estimate, se, df, level float64) Interval {
	if !finite(se) || !finite(df) || df <= 0 {
		return noInterval
	}
	q := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Quantile((1 + level) / 2)
	return Interval{estimate - q*se, estimate + q*se}
}

// sortFloats sorts finite values ascending: by radix above a few hundred, as
// tens of thousands of values are sorted for every statistic of a page.
func sortFloats(x []float64) {
	if len(x) < 400 {
		slices.Sort(x)
		return
	}
	a, b := make([]uint64, len(x)), make([]uint64, len(x))
	for i, v := range x {
		u := math.Float64bits(v)
		// Flip all bits of negative numbers and the sign of the others: the
		// order of the bits is then the order of the numbers.
		a[i] = u ^ (uint64(int64(u)>>63) | 1<<63)
	}
	for shift := 0; shift < 64; shift += 11 {
		var count [2048]int
		for _, u := range a {
			count[u>>shift&2047]++
		}
		if count[a[0]>>shift&2047] == len(a) {
			continue
		}
		at := 0
		for k, c := range count {
			count[k] = at
			at += c
		}
		for _, u := range a {
			k := u >> shift & 2047
			b[count[k]] = u
			count[k]++
		}
		a, b = b, a
	}
	for i, u := range a {
		x[i] = math.Float64frombits(u ^ (uint64(int64(^u)>>63) | 1<<63))
	}
}

func (i Interval) excludes(x float64) bool {
	return finite(i[0]) && finite(i[1]) && (i[0] > x || i[1] < x)
}

func (i Interval) known() bool { return finite(i[0]) && finite(i[1]) }

func (i Interval) width() float64 { return i[1] - i[0] }
