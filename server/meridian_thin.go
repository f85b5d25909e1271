package main

import (
	"cmp"
	"hash/fnv"
	"math"
	"slices"

	"fathombend/views"
)

// thinBand is the width of the bands of latitude that are thinned alike,
// degrees.
const thinBand = 5

// thinnedItems keeps about most of the items, in their order: of every band of
// latitude the same share and at least one, the best-graded, and among equals
// those that come first by a hash of their names, so that the choice follows
// from the records alone.
func thinnedItems(items []views.MeridianItem, most int) []views.MeridianItem {
	if len(items) <= most {
		return items
	}
	bands := map[int][]int{}
	for i := range items {
		b := int(math.Floor(items[i].Latitude / thinBand))
		bands[b] = append(bands[b], i)
	}
	rank := map[string]int{"remeasured": 0, "surveyed": 1, "traced": 2, "quoted": 3}
	hashes := make([]uint64, len(items))
	for i := range items {
		h := fnv.New64a()
		_, _ = h.Write([]byte(items[i].Slug))
		hashes[i] = h.Sum64()
	}
	kept := make([]bool, len(items))
	for _, in := range bands {
		slices.SortFunc(in, func(a, b int) int {
			return cmp.Or(cmp.Compare(rank[items[a].Grade], rank[items[b].Grade]), cmp.Compare(hashes[a], hashes[b]), cmp.Compare(items[a].Slug, items[b].Slug))
		})
		share := max(1, int(math.Round(float64(len(in))*float64(most)/float64(len(items)))))
		for _, i := range in[:min(share, len(in))] {
			kept[i] = true
		}
	}
	out := make([]views.MeridianItem, 0, most+len(bands))
	for i, k := range kept {
		if k {
			out = append(out, items[i])
		}
	}
	return out
}
