package views

import (
	"fmt"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/stats"
)

// FigureSource is where a figure as a file comes from.
type FigureSource struct {
	Data    string     // the release, or the catalogue at a revision, in words
	Query   url.Values // the question in full, without target where it is confidential
	Program string     // name and version
}

// settings is the question in small type.
func (s FigureSource) settings(page string) string {
	var words []string
	for _, name := range sortedNames(s.Query) {
		for _, v := range s.Query[name] {
			words = append(words, name+"="+v)
		}
	}
	text := page
	if len(words) > 0 {
		text += ": " + strings.Join(words, ", ")
	}
	return text + ". " + s.Program + "."
}

// RegressionFigures are the names of all figures of an analysis: its panels,
// and one "model:" for each model alone.
func RegressionFigures(a *stats.Analysis) []string {
	out := RegressionPanels(a)
	for _, m := range a.Models {
		name := "model:" + m.Model
		if m.Failure == "" && m.Form != "joint" && m.Predictor != "" && !slices.Contains(out, name) {
			out = append(out, name)
		}
	}
	return out
}

// RegressionFile is one figure of an analysis with what it carries in print.
func RegressionFile(a *stats.Analysis, r stats.Request, panel string, from FigureSource) Plot {
	if all := RegressionPanels(a); panel == "" && len(all) > 0 {
		panel = all[0]
	}
	p, models := regressionDrawing(a, r, panel)
	p.Print = Print{Caption: regressionCaption(a, r, panel, models), Settings: from.settings("Regression"), Invented: a.InventedRows}
	if from.Data != "" {
		p.Print.Caption += " " + from.Data + "."
	}
	if pointsAreRows(panel) {
		p.Print.Key = regressionKey(a, p, otherOf(a, panel))
	}
	return p
}

// regressionDrawing is the plot, and the models drawn on it.
func regressionDrawing(a *stats.Analysis, r stats.Request, panel string) (Plot, []stats.Model) {
	name, alone := strings.CutPrefix(panel, "model:")
	predictor, fit := strings.CutPrefix(panel, "fit:")
	if !alone && !fit {
		return RegressionFigure(a, r, panel), nil
	}
	for _, p := range panels(a) {
		if alone {
			p.Models = slices.DeleteFunc(slices.Clone(p.Models), func(m stats.Model) bool { return m.Model != name })
		}
		if len(p.Models) > 0 && (alone || p.Predictor == predictor) {
			return fitPlot(a, r, p), p.Models
		}
	}
	return RegressionFigure(a, r, panel), nil
}

func pointsAreRows(panel string) bool {
	return strings.HasPrefix(panel, "fit:") || strings.HasPrefix(panel, "model:") || panel == "predicted" || panel == "residuals"
}

func otherOf(a *stats.Analysis, panel string) string {
	_, predictor, _ := strings.Cut(panel, ":")
	if rest, ok := strings.CutPrefix(panel, "model:"); ok {
		_, predictor, _ = strings.Cut(rest, ":")
		predictor, _, _ = strings.Cut(predictor, " ")
	}
	if m := leadingModel(a); predictor == "" && m != nil {
		predictor = m.Predictor
	}
	return otherVariable(a, predictor)
}

// regressionKey explains the colours and shapes that are on the plot.
func regressionKey(a *stats.Analysis, p Plot, other string) []KeyEntry {
	has := func(shape, class string) bool {
		return slices.ContainsFunc(p.Points, func(q Point) bool { return q.Shape == shape && (class == "" || q.Class == class) })
	}
	out := []KeyEntry{{Text: upperFirst(predictorText(other).axis), Head: true}}
	for _, e := range rampKey(other) {
		if slices.ContainsFunc(p.Points, func(q Point) bool { return q.Class == e.Class }) {
			out = append(out, KeyEntry{Text: e.Text, Point: &Point{Class: e.Class}})
		}
	}
	if len(out) == 1 {
		out = nil
	}
	if has("diamond", "") {
		out = append(out, KeyEntry{Text: "to 5 Ma", Point: &Point{Class: "f3"}, Break: true}, KeyEntry{Text: "older", Point: &Point{Class: "f3", Shape: "diamond"}})
	}
	if hasRivers(a) && has("triangle", "") {
		out = append(out, KeyEntry{Text: "river", Point: &Point{Class: "ochre hollow", Shape: "triangle"}})
	}
	return out
}

// rowsText says what a fit stands on.
func rowsText(a *stats.Analysis, r stats.Request) string {
	whole := "whole clusters"
	if r.Cluster == "none" {
		whole = "single rows"
	}
	return countText(a.Rows, "row", "rows") + " of " + countText(a.Systems, "system", "systems") + " in " + countText(a.Clusters, "cluster", "clusters") +
		" (by " + clusterText(r.Cluster) + "); " + thousands(r.Resamples) + " resamples of " + whole + ", seed " + strconv.FormatUint(r.Seed, 10) + "."
}

// thousands writes a count with commas: 9,999.
func thousands(n int) string {
	s := strconv.Itoa(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}

func regressionCaption(a *stats.Analysis, r stats.Request, panel string, models []stats.Model) string {
	response, level := upperFirst(responseText(r.Response, r.K)), percent(r.Level)
	rows := rowsText(a, r)
	lead := ""
	if m := leadingModel(a); m != nil {
		lead = modelText(*m)
	}
	switch {
	case len(models) > 0:
		var fits []string
		for _, m := range models {
			t := estimateTexts(m.RSquared, m.RSquaredInterval)
			name := formText(m.Form)
			if m.Group != "" {
				name += " of " + m.Group
			}
			fits = append(fits, fmt.Sprintf("%s, R² %s [%s, %s]", name, t.value, t.low, t.high))
		}
		s := response + " with the fitted " + strings.Join(fits, "; ") + ", and the pointwise " + level +
			" interval of each line, which is not that of one new system."
		if scale := scaleText(r.Scale); scale != "P" {
			s += " Fitted on " + scale + "; R² in sinuosity units."
		}
		return s + " " + rows + " A band that leaves the frame goes on."
	case panel == "r_squared":
		return "Filled: R² in sinuosity units with its " + level + " " + intervalText(rSquaredKind(r)) + " interval. Hollow: R² when each cluster is predicted from the others. " + rows
	case panel == "predicted":
		return response + " of each row against the fitted value of the leading model (" + lead + "); on the dashed line they are equal. " + rows
	case panel == "residuals":
		return response + " less the fitted value of the leading model (" + lead + "). A fan or a bend says that form or scale does not suit. " + rows
	case panel == "influence":
		return fmt.Sprintf("R² of the leading model (%s) without one system, for the %d systems that move it most; square and dashed line: all systems, with the %s interval. %s",
			lead, min(influenceShown, len(a.Influence)), level, rows)
	case panel == "shares":
		return "Share of each predictor in R² of the joint model, averaged over the orders of entry, with its " + level + " interval. " + rows
	case panel == "breakpoint":
		return "R² of the broken line for each place of its break; the highest is the estimate. The limit of practice at 50 degrees has no published source. " + rows
	}
	return rows
}

// rSquaredKind is the interval of R2: BCa unless percentile is asked.
func rSquaredKind(r stats.Request) string {
	if r.Interval == "percentile" {
		return "percentile"
	}
	return "bca"
}
