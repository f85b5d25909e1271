package stats

import (
	"math"
	"slices"
)

// pair is one row of two lists.
type pair struct{ x, y float64 }

// KendallTauB is Kendall's rank correlation with the correction for ties
// (Biometrika 33:239 (1945), doi 10.1093/biomet/33.3.239), by sorting and
// counting exchanges (Knight, J. Am. Stat. Assoc. 61:436 (1966), doi
// 10.1080/01621459.1966.10480879). NaN when either list is constant.
func KendallTauB(x, y []float64) float64 {
	n := len(x)
	idx := make([]pair, n)
	for i := range idx {
		idx[i] = pair{x[i], y[i]}
	}
	slices.SortFunc(idx, func(a, b pair) int {
		switch {
		case a.x < b.x || a.x == b.x && a.y < b.y:
			return -1
		case a.x == b.x && a.y == b.y:
			return 0
		}
		return 1
	})
	pairs := func(k int) float64 { return float64(k) * float64(k-1) / 2 }
	var tiedX, tiedBoth, tiedY float64
	for i := 0; i < n; {
		j := i
		for j < n && idx[j].x == idx[i].x {
			j++
		}
		tiedX += pairs(j - i)
		for a := i; a < j; {
			b := a
			for b < j && idx[b].y == idx[a].y {
				b++
			}
			tiedBoth += pairs(b - a)
			a = b
		}
		i = j
	}
	v := make([]float64, n)
	for i, p := range idx {
		v[i] = p.y
	}
	swaps := exchanges(v, make([]float64, n))
	for i := 0; i < n; {
		j := i
		for j < n && v[j] == v[i] {
			j++
		}
		tiedY += pairs(j - i)
		i = j
	}
	total := pairs(n)
	s := total - tiedX - tiedY + tiedBoth - 2*swaps
	d := math.Sqrt((total - tiedX) * (total - tiedY))
	if d == 0 {
		return nan
	}
	return s / d
}

// exchanges sorts v and returns how many pairs stood in the wrong order.
func exchanges(v, tmp []float64) float64 {
	n := len(v)
	if n < 2 {
		return 0
	}
	h := n / 2
	c := exchanges(v[:h], tmp[:h]) + exchanges(v[h:], tmp[h:])
	copy(tmp, v)
	i, j := 0, h
	for k := range v {
		if j >= n || i < h && tmp[i] <= tmp[j] {
			v[k] = tmp[i]
			i++
		} else {
			v[k] = tmp[j]
			c += float64(h - i)
			j++
		}
	}
	return c
}

// Spearman is the correlation of mid-ranks. NaN when either list is constant.
func Spearman(x, y []float64) float64 { return correlation(midRanks(x), midRanks(y)) }

func midRanks(x []float64) []float64 {
	type place struct {
		v float64
		i int
	}
	idx := make([]place, len(x))
	for i, v := range x {
		idx[i] = place{v, i}
	}
	slices.SortFunc(idx, func(a, b place) int {
		switch {
		case a.v < b.v:
			return -1
		case a.v > b.v:
			return 1
		}
		return 0
	})
	r := make([]float64, len(x))
	for i := 0; i < len(idx); {
		j := i
		for j < len(idx) && idx[j].v == idx[i].v {
			j++
		}
		for k := i; k < j; k++ {
			r[idx[k].i] = float64(i+j+1) / 2
		}
		i = j
	}
	return r
}

// correlation is Pearson's. NaN when either list is constant.
func correlation(x, y []float64) float64 {
	mx, lx := centreScale(x)
	my, ly := centreScale(y)
	if lx == 0 || ly == 0 {
		return nan
	}
	s := 0.0
	for i := range x {
		s += (x[i] - mx) / lx * ((y[i] - my) / ly)
	}
	return math.Min(1, math.Max(-1, s))
}
