package views

import (
	"testing"

	"fathombend/catalogue"
	"fathombend/stats"
)

// TestPlainSentences: pages name models and settings in words; parameters stay
// in documents and terminals.
func TestPlainSentences(t *testing.T) {
	p := RegressionPage{Analysis: &stats.Analysis{Models: []stats.Model{
		{Model: "linear:valley_slope", Form: "linear", Predictor: "valley_slope"},
		{Model: "linear:coriolis", Form: "linear", Predictor: "coriolis", Group: "river"},
	}}}
	for in, want := range map[string]string{
		"linear:valley_slope: its interval is -3 to 2.":                                "Straight line, valley slope: its interval is −3 to 2.",
		"linear:coriolis (river): p = 0.2.":                                            "Straight line, Coriolis parameter (river): p = 0.2.",
		"Left out, the coefficient in linear:coriolis is 2.":                           "Left out, the coefficient in straight line, Coriolis parameter is 2.",
		"Keep to one kind (response=peak, say).":                                       "Keep to one kind.",
		"Prefer a decay to the floor (model=floor_decay:coriolis). Or not (r = 0.99).": "Prefer a decay to the floor. Or not (r = 0.99).",
		"joint:linear:coriolis_x stays, and so does (12 bend and 3 peak).":             "joint:linear:coriolis_x stays, and so does (12 bend and 3 peak).",
	} {
		if got := p.plain(in); got != want {
			t.Errorf("%q\n became %q\n want   %q", in, got, want)
		}
	}
}

// TestFilterWords: a filter as a sentence of a paper has it.
func TestFilterWords(t *testing.T) {
	f := catalogue.Filter{Choices: map[string][]string{"feeder": {"river", "glacial"}, "kind": {"river"}}, LatMin: catalogue.Num(-10), Sort: "sinuosity", PerPage: 7}
	if got, want := FilterWords(f), "Kind: river; Feeder: river or glacial; Latitude from -10"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got := FilterWords(catalogue.Filter{Page: 3}); got != "" {
		t.Errorf("an empty filter is %q", got)
	}
}
