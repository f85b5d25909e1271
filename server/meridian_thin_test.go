package main

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"fathombend/views"
)

func TestThinnedItems(t *testing.T) {
	var items []views.MeridianItem
	for i := range 3000 {
		lat := float64(i%100)/2 + 0.25 // 0 to 50, ten bands of equal number
		items = append(items, views.MeridianItem{Slug: fmt.Sprintf("s%04d", i), Latitude: lat, Grade: []string{"quoted", "traced", "surveyed"}[i%3]})
	}
	items = append(items, views.MeridianItem{Slug: "alone", Latitude: -71, Grade: "quoted"})
	got := thinnedItems(slices.Clone(items), 600)
	bands := map[int]int{}
	for _, i := range got {
		bands[int(math.Floor(i.Latitude/5))]++
		if i.Grade == "quoted" && i.Slug != "alone" {
			t.Errorf("%s is quoted and drawn, though better ones were to be had", i.Slug)
		}
	}
	for b := range 10 {
		if bands[b] != 60 {
			t.Errorf("%d of 300 systems between %d and %d degrees, want 60", bands[b], 5*b, 5*b+5)
		}
	}
	if bands[-15] != 1 {
		t.Errorf("the only system of its latitude is left out")
	}
	// The same choice whatever the order.
	back := slices.Clone(items)
	slices.Reverse(back)
	other := thinnedItems(back, 600)
	slices.Reverse(other)
	for i := range got {
		if got[i].Slug != other[i].Slug {
			t.Fatalf("in another order %s, not %s", other[i].Slug, got[i].Slug)
		}
	}
	if few := thinnedItems(items[:600], 600); len(few) != 600 {
		t.Errorf("%d of 600 kept, which is no more than may be drawn", len(few))
	}
}

// TestMeridianOfManySystems: a catalogue with more systems than are drawn says
// how many are, and answers from all.
func TestMeridianOfManySystems(t *testing.T) {
	n := views.MeridianDrawn + 100
	s := newSite(t, func(file string) { mustRun(t, "", "invent", "-catalogue", file, "-systems", fmt.Sprint(n)) })
	doc := s.visitor().get("/").is(200).doc()
	caption := doc.Find("figcaption").First().Text()
	for _, want := range []string{fmt.Sprintf("%d systems of %d in the catalogue", n, n), "of them are drawn: the same share of every five degrees of latitude", "The answer rests on all of them."} {
		if !strings.Contains(caption, want) {
			t.Errorf("the caption lacks %q: %s", want, caption)
		}
	}
}
