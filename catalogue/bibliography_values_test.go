package catalogue

import "testing"

func TestValueSource(t *testing.T) {
	for cell, want := range map[string]Source{
		"Invented Journal 4:101 (2031)":                                        {Citation: "Invented Journal 4:101 (2031)"},
		"Invented Journal 4:101 (2031), doi 10.5555/a.b-1":                     {Citation: "Invented Journal 4:101 (2031)", DOI: "10.5555/a.b-1"},
		"Reef, A. (2031) On slopes. Journal 4:1. https://doi.org/10.5555/X(1)": {Citation: "Reef, A. (2031) On slopes. Journal 4:1. https://doi.org/10.5555/X(1)"},
		"Reef, A. (2031) On slopes. https://doi.org/10.5555/x.":                {Citation: "Reef, A. (2031) On slopes", DOI: "10.5555/x"},
		"10.5555/alone": {Citation: "doi 10.5555/alone", DOI: "10.5555/alone"},
		"":              {},
	} {
		if got := ValueSource(cell); got != want {
			t.Errorf("%q: %+v, want %+v", cell, got, want)
		}
	}
}

// A source of slopes alone stands in the list; one that is a source already is
// counted with it.
func TestSourcesOfSingleValues(t *testing.T) {
	s := open(t)
	a, b := row("One Channel", 1, 2, 1.2), row("Two Channel", 3, 4, 1.3)
	a.Source, a.SourceDOI = "Invented Soundings 1:1 (2030)", "10.5555/first"
	a.SlopeSource, a.SizeSource = "Invented Slopes 2:2 (2031), doi 10.5555/second", "Invented Slopes 2:2 (2031), doi 10.5555/second"
	b.Source, b.SlopeSource = "Invented Soundings 3:3 (2032)", "the first, doi 10.5555/FIRST"
	insert(t, s, a, b)
	uses, err := s.SourceUses(ctx, Filter{})
	if err != nil || len(uses) != 3 {
		t.Fatalf("%+v %v", uses, err)
	}
	for i, want := range []SourceUse{
		{Source: Source{Citation: "Invented Slopes 2:2 (2031)", DOI: "10.5555/second"}, Slopes: 1, Sizes: 1},
		{Source: Source{ID: uses[1].ID, Citation: "Invented Soundings 1:1 (2030)", DOI: "10.5555/first"}, Measurements: 1, Systems: 1, Slopes: 1},
		{Source: Source{ID: uses[2].ID, Citation: "Invented Soundings 3:3 (2032)"}, Measurements: 1, Systems: 1},
	} {
		if uses[i] != want {
			t.Errorf("%d: %+v, want %+v", i, uses[i], want)
		}
	}
	if one := CiteKey(uses[0].Source); one != CiteKey(uses[0].Source) || one == CiteKey(Source{Citation: "Another Slopes 2:2 (2031)"}) {
		t.Error("key:", one)
	}
}
