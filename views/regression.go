package views

import (
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats"
)

// RegressionPage is what /regression shows. Analysis is nil when the question
// was refused; Refusals then says why.
type RegressionPage struct {
	Page
	Analysis       *stats.Analysis
	Request        stats.Request
	Filter         catalogue.Filter
	Facets         []catalogue.Facet
	Categories     []string // that may stand in a joint model
	Recomputations []string // finished ones, by name
	Freezing       Freezing // as typed, when it was refused
	Progress       float64  // of a fit on its way, 0..1
	Frozen         *FrozenAnalysis
}

// FrozenAnalysis is an analysis kept under a name and run again.
type FrozenAnalysis struct {
	catalogue.Analysis
	Same    bool   // the digits are those of the day it was frozen
	Digest  string // of the answer now
	Program string // version running now
	Chosen  []Fact // settings of the catalogue it was answered with
}

// question is the question the page answers, in the words of its models.
func (p RegressionPage) question() string {
	var names []string
	add := func(predictor string) {
		if n := predictorText(predictor).name; !slices.Contains(names, n) {
			names = append(names, n)
		}
	}
	for _, m := range p.Request.Models {
		add(m.Predictor)
	}
	for _, j := range p.Request.Joint {
		add(j)
	}
	return "Does sinuosity go with " + orList(names) + "?"
}

func orList(names []string) string {
	switch len(names) {
	case 0:
		return "anything measured here"
	case 1:
		return names[0]
	}
	return strings.Join(names[:len(names)-1], ", ") + " or " + names[len(names)-1]
}

// modelChoice is one option of the select that picks a model.
type modelChoice struct {
	Value, Text string
	Selected    bool
}

// modelGroups are the options by predictor, with chosen selected.
type modelGroup struct {
	Name    string
	Choices []modelChoice
}

func modelGroups(chosen string) []modelGroup {
	var out []modelGroup
	for _, pr := range stats.Predictors {
		g := modelGroup{Name: predictorText(pr).axis}
		for _, f := range stats.Forms {
			v := f + ":" + pr
			g.Choices = append(g.Choices, modelChoice{v, formText(f) + ", " + bare(predictorText(pr).name), v == chosen})
		}
		out = append(out, g)
	}
	return out
}

// modelSlots are the values of the selects: the models asked for and one empty
// slot to add another.
func (p RegressionPage) modelSlots() []string {
	var out []string
	for _, m := range p.Request.Models {
		out = append(out, m.String())
	}
	return append(out, "")
}

// jointPairs are the pairs that an interaction may be chosen from.
func (p RegressionPage) jointPairs() []modelChoice {
	var out []modelChoice
	for i, a := range p.Request.Joint {
		for _, b := range p.Request.Joint[i+1:] {
			v := a + "," + b
			chosen := (p.Request.Interaction == [2]string{a, b}) || (p.Request.Interaction == [2]string{b, a})
			out = append(out, modelChoice{v, bare(predictorText(a).name) + " × " + bare(predictorText(b).name), chosen})
		}
	}
	return out
}

// rowLesson is one slope as single rows give it beside what whole clusters
// give: the difference between counting rows and counting systems.
type rowLesson struct {
	Model       string
	Term        string
	Estimate    float64
	Rows, Whole stats.Interval
	WholeKind   string
	Changed     bool // the width differs by more than half, or only one excludes zero
}

// rowLessons compares, for the slope of each model, the interval of rows
// resampled singly with that of whole clusters.
func (p RegressionPage) rowLessons() []rowLesson {
	var out []rowLesson
	for _, m := range p.Analysis.Models {
		if m.Failure != "" || len(m.Coefficients) < 2 {
			continue
		}
		c := m.Coefficients[1]
		// Like is set beside like: both BCa, so that only the resampling differs.
		rows, ok := c.Intervals["row_bootstrap"]
		whole, also := c.Intervals["bca"]
		if !ok || !also || !finiteInterval(rows) || !finiteInterval(whole) {
			continue
		}
		wr, ww := rows[1]-rows[0], whole[1]-whole[0]
		out = append(out, rowLesson{Model: modelText(m), Term: c.Name, Estimate: c.Estimate, Rows: rows, Whole: whole, WholeKind: "bca",
			Changed: ww > 1.5*wr || wr > 1.5*ww || holdsZero(rows) != holdsZero(whole)})
	}
	return out
}

// degenerateSentence counts the resamples that gave no fit; they are never
// hidden.
func (p RegressionPage) degenerateSentence() string {
	var parts []string
	for _, m := range p.Analysis.Models {
		if m.DegenerateResamples > 0 {
			parts = append(parts, strconv.Itoa(m.DegenerateResamples)+" for "+modelText(m))
		}
	}
	if len(parts) == 0 {
		return "No resample was degenerate."
	}
	return "Degenerate resamples, counted and left out: " + strings.Join(parts, ", ") + "."
}

func holdsZero(i stats.Interval) bool { return i[0] <= 0 && i[1] >= 0 }

// keptRows counts the rows kept and left out.
func (p RegressionPage) leftOut() int {
	n := 0
	for _, d := range p.Analysis.Dropped {
		n += d.Rows
	}
	return n
}

// panelModels are the fitted models by predictor, in the order asked for: one
// panel of the figure each.
type panelModels struct {
	Predictor string
	Models    []stats.Model
}

func panels(a *stats.Analysis) []panelModels {
	var out []panelModels
	for _, m := range a.Models {
		if m.Failure != "" || m.Form == "joint" || m.Predictor == "" {
			continue
		}
		i := slices.IndexFunc(out, func(p panelModels) bool { return p.Predictor == m.Predictor })
		if i < 0 {
			out = append(out, panelModels{Predictor: m.Predictor})
			i = len(out) - 1
		}
		out[i].Models = append(out[i].Models, m)
	}
	return out
}

// commandLine is the call that prints this analysis in a terminal.
func (p RegressionPage) commandLine() string {
	names := make([]string, 0, len(p.Query))
	for name := range p.Query {
		names = append(names, name)
	}
	slices.Sort(names)
	words := []string{"fathombend regress -catalogue FILE"}
	for _, name := range names {
		for _, v := range p.Query[name] {
			words = append(words, shellWord(name+"="+v))
		}
	}
	return strings.Join(words, " ")
}

// shellWord quotes a word where a shell would read it otherwise.
func shellWord(s string) string {
	plain := func(r rune) bool {
		return r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' || strings.ContainsRune("_-.,:=/+", r)
	}
	if strings.IndexFunc(s, func(r rune) bool { return !plain(r) }) < 0 {
		return s
	}
	return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'"
}
