package main

import (
	"context"
	"slices"
	"strings"
	"testing"

	"fathombend/seed"
	"fathombend/stats"
	"fathombend/stats/earth"
)

// surveyAnswer asks the opening question of the regression page of a survey
// drawn anew: sinuosity on slope, latitude and f, submarine rows, ln(P - 1).
func surveyAnswer(t *testing.T, law seed.Law, number uint64) *stats.Analysis {
	t.Helper()
	survey, err := seed.Draw(seed.Options{Law: law, Seed: number})
	if err != nil {
		t.Fatal(err)
	}
	rows := slices.DeleteFunc(statsRows(survey.Rows, earth.ClimateStates()), func(r stats.Row) bool { return r.Kind != "submarine" })
	req := stats.DefaultRequest()
	req.Scale, req.Resamples, req.Permutations = "ln_excess", 1999, 999
	a, err := stats.Analyse(context.Background(), rows, req, nil)
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// TestNothingIsFoundWhereThereIsNothing: of 20 surveys without any law, at most
// one headline finds something.
func TestNothingIsFoundWhereThereIsNothing(t *testing.T) {
	var found []string
	for number := uint64(1); number <= 20; number++ {
		if h := surveyAnswer(t, seed.None, number).Headline; !strings.HasPrefix(h, "Nothing is found") {
			found = append(found, h)
		}
	}
	if len(found) > 1 {
		t.Errorf("%d of 20 headlines find something where the law is none:\n%s", len(found), strings.Join(found, "\n"))
	}
}

// TestSupplyIsNotTakenForLatitude: where feeders follow latitude, the answer
// says that the two cannot be separated.
func TestSupplyIsNotTakenForLatitude(t *testing.T) {
	for _, law := range []seed.Law{seed.Supply, seed.Both} {
		for number := uint64(1); number <= 5; number++ {
			a := surveyAnswer(t, law, number)
			if !slices.ContainsFunc(a.Separability, func(s string) bool {
				return strings.HasPrefix(s, "Latitude and supply cannot be separated by these rows")
			}) {
				t.Errorf("law %s, seed %d: latitude and supply are taken apart: %q", law, number, a.Separability)
			}
		}
	}
}
