package views

import (
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/stats"
)

// choice is one option of a select or one box to tick.
type choice struct {
	Value, Text string
	Chosen      bool
}

// choices makes options from the values and, where the value is no word for a
// reader, their texts.
func choices(values []string, chosen string, texts map[string]string) []choice {
	var out []choice
	for _, v := range values {
		t, ok := texts[v]
		if !ok {
			t = strings.ReplaceAll(v, "_", " ")
		}
		out = append(out, choice{v, t, v == chosen})
	}
	return out
}

var responseTexts = map[string]string{"any": "any kind", "p90": "P90", "bend": "single bend", "reach": "whole reach", "mean": "mean of the reach",
	"standardised_peak": "standardised peak"}

var lineTexts = map[string]string{"all": "any line", "levee_crest": "levee crest", "unknown": "line not stated"}

var scaleTexts = map[string]string{"raw": "P", "ln": "ln P", "ln_excess": "ln(P − 1)"}

var clusterTexts = map[string]string{"none": "none: rows as independent"}

var intervalTexts = map[string]string{"studentised": "studentised bootstrap", "cr2": "CR2 cluster error", "bca": "BCa bootstrap", "percentile": "percentile bootstrap"}

var timeTexts = map[string]string{"of_deposition": "when it was laid down", "present": "today"}

var pickTexts = map[string]string{"all": "all of them", "best": "the best one of each"}

func fieldID(name string) string { return "set-" + strings.ReplaceAll(name, "_", "-") }

// jointChoices are the boxes of the joint model: predictors first, then
// categories.
func (p RegressionPage) jointChoices() []choice {
	var out []choice
	for _, name := range slices.Concat(stats.Predictors, p.Categories) {
		out = append(out, choice{name, bare(predictorText(name).name), slices.Contains(p.Request.Joint, name)})
	}
	return out
}

// hasMore says whether a setting behind "more settings" differs from its
// default, so that it is never hidden.
func (p RegressionPage) hasMore() bool {
	r, d := p.Request, stats.DefaultRequest()
	return r.Interval != d.Interval || r.Level != d.Level || r.Permutations != d.Permutations || r.Time != d.Time || r.Pick != d.Pick ||
		r.MeasurementError || r.ThinStraight != 0 || r.ThinSinuous != 0 || r.K != d.K || slices.ContainsFunc(p.Refusals, func(x Refusal) bool {
		return slices.Contains([]string{"interval", "level", "permutations", "time", "pick", "measurement_error", "thin_straight", "thin_sinuous", "k", "resamples", "seed"}, x.Name)
	})
}

func floatText(x float64) string { return strconv.FormatFloat(x, 'f', -1, 64) }

func yesNoText(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

// filtered says whether the rows are chosen by anything.
func (p RegressionPage) filtered() bool { return len(p.Filter.Values()) > 0 || p.filterRefused() }

func sortedNames(q url.Values) []string {
	out := make([]string, 0, len(q))
	for name := range q {
		out = append(out, name)
	}
	slices.Sort(out)
	return out
}
