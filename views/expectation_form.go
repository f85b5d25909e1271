package views

import (
	"math"
	"slices"
	"strings"

	"fathombend/stats"
	"fathombend/stats/earth"
)

// The choices of a target's fields, in the order they are offered.
var (
	settingNames     = []string{"unknown", "fan", "slope", "rise", "trench", "foredeep", "minibasin", "deep_ocean", "non_margin"}
	feederNames      = []string{"unknown", "river", "shelf", "glacial", "volcanic", "failure"}
	grainNames       = []string{"unknown", "mud", "mud_sand", "sand", "gravel"}
	confinementNames = []string{"unknown", "confined", "levee_confined", "unconfined"}
	aggradationNames = []string{"unknown", "aggrading", "stable", "incising"}
)

// optionValue sends nothing for what is not known, so that addresses hold only
// what was said.
func optionValue(name, v string) string {
	if v == "unknown" && strings.HasPrefix(name, "target_") {
		return ""
	}
	return v
}

func orFirst(v, otherwise string) string {
	if v == "" {
		return otherwise
	}
	return v
}

// anySet says whether one of the fields was typed in or refused, so that it is
// never hidden.
func (p ExpectationPage) anySet(names ...string) bool {
	return slices.ContainsFunc(names, func(n string) bool { return strings.TrimSpace(p.value(n)) != "" || p.refused(n) != "" })
}

func dayChoices(chosen string) []choice {
	chosen = orFirst(chosen, earth.TidalHistory)
	var out []choice
	for _, h := range earth.Histories() {
		t := upperFirst(h.Title)
		if !math.IsInf(h.ToMa, 0) {
			t += ", to " + tidyText(h.ToMa, 4) + " Ma"
		}
		out = append(out, choice{h.Name, t, h.Name == chosen})
	}
	return out
}

func responseChoices(chosen string) []choice {
	out := []choice{{"", "peak, else any", chosen == ""}}
	return append(out, choices(stats.Responses, chosen, responseTexts)...)
}

func poleTables(chosen string) []choice {
	out := []choice{{"", "the first that has the plate", chosen == ""}}
	for _, t := range earth.PoleTables() {
		out = append(out, choice{t.Name, t.Title + " (" + t.Name + ")", t.Name == chosen})
	}
	return append(out, choice{"own", "your own, below", chosen == "own"})
}

// plateNames are the plates of the built-in tables, each once.
func plateNames() []string {
	var out []string
	for _, t := range earth.PoleTables() {
		for _, n := range t.Plates() {
			if !slices.Contains(out, n) {
				out = append(out, n)
			}
		}
	}
	slices.Sort(out)
	return out
}
