package views

import (
	"regexp"
	"slices"
	"strconv"
	"strings"

	"github.com/a-h/templ"

	"fathombend/stats"
)

// predictorWords are how a predictor is spoken of and drawn.
type predictorWords struct {
	name string // in a sentence
	axis string // on an axis and in a table head, with its unit
	unit string
	log  bool // axis
}

var predictorWordsOf = map[string]predictorWords{
	"valley_slope":     {"valley slope", "valley slope (m/m)", "m/m", true},
	"log10_slope":      {"log10 of valley slope", "log10 of valley slope (m/m)", "", false},
	"abs_latitude":     {"|latitude|", "|latitude| (degrees)", "degrees", false},
	"sin_abs_latitude": {"sin |latitude|", "sin |latitude|", "", false},
	"coriolis":         {"the Coriolis parameter", "|f| (1e-4 s⁻¹)", "1e-4 s⁻¹", false},
	"channel_width":    {"channel width", "channel width (m)", "m", true},
	"channel_depth":    {"channel depth", "channel depth (m)", "m", true},
}

// predictorText gives the words for a predictor or category; one it does not
// know is shown under its own name.
func predictorText(p string) predictorWords {
	if w, ok := predictorWordsOf[p]; ok {
		return w
	}
	plain := strings.ReplaceAll(p, "_", " ")
	return predictorWords{name: plain, axis: plain}
}

var formWordsOf = map[string]string{
	"linear": "straight line", "logarithmic": "logarithmic", "exponential": "exponential", "power": "power", "inverse": "inverse",
	"floor_decay": "decay to the floor", "broken_line": "broken line", "quantile_10": "10 % quantile line", "quantile_50": "median line",
	"quantile_90": "90 % quantile line", "theil_sen": "Theil-Sen line", "joint": "joint model",
}

func formText(f string) string {
	if w, ok := formWordsOf[f]; ok {
		return w
	}
	return strings.ReplaceAll(f, "_", " ")
}

var formulaOf = map[string]string{
	"linear": "y = a + b x", "logarithmic": "y = a + b ln x", "exponential": "P = a e^(b x)", "power": "P = a x^b", "inverse": "y = a + b / x",
	"floor_decay": "P = 1 + a e^(−b x)", "broken_line": "y = a + b x, slope changing at one x", "quantile_10": "y = a + b x at the 10 % quantile",
	"quantile_50": "y = a + b x at the median", "quantile_90": "y = a + b x at the 90 % quantile", "theil_sen": "y = a + b x, median of pairwise slopes",
}

// modelText names a model for a reader: form, predictor and, with group=kind,
// the kind.
func modelText(m stats.Model) string {
	s := m.Model
	if m.Form != "" && m.Form != "joint" {
		s = formText(m.Form) + ", " + bare(predictorText(m.Predictor).name)
	} else if m.Form == "joint" {
		s = "joint: " + strings.ReplaceAll(strings.ReplaceAll(m.Predictor, ",", ", "), "_", " ")
	}
	if m.Group != "" {
		s += " (" + m.Group + ")"
	}
	return s
}

// bare is a predictor's name as a label.
func bare(name string) string { return strings.TrimPrefix(name, "the ") }

// modelName turns a FORM:PREDICTOR text into words, for tables that hold only
// the text.
func (p RegressionPage) modelName(text string) string {
	for _, m := range p.Analysis.Models {
		if m.Model == text {
			m.Group = "" // one name for the fits of all kinds
			return modelText(m)
		}
	}
	return text
}

func scaleText(s string) string {
	switch s {
	case "ln":
		return "ln P"
	case "ln_excess":
		return "ln(P − 1)"
	}
	return "P"
}

func responseText(r string, k int) string {
	switch r {
	case "any", "":
		return "sinuosity of any kind"
	case "p90":
		return "P90 sinuosity"
	case "bend":
		return "bend sinuosity"
	case "standardised_peak":
		return "standardised peak sinuosity (largest of " + countText(k, "window", "windows") + ")"
	}
	return r + " sinuosity"
}

func clusterText(c string) string {
	switch c {
	case "parent_deposit":
		return "parent deposit"
	case "none":
		return "single row"
	}
	return c
}

func intervalText(kind string) string {
	switch kind {
	case "bca":
		return "BCa"
	case "cr2":
		return "CR2"
	case "row_bootstrap":
		return "rows resampled singly"
	}
	return strings.ReplaceAll(kind, "_", " ")
}

// intervalKindText names the kind of interval of the coefficients.
func intervalKindText(kind string) string {
	if kind == "percentile" {
		return "percentile bootstrap"
	}
	return intervalTexts[kind]
}

// otherKinds lists the interval kinds defined for c beside the one shown, in a
// fixed order.
func otherKinds(c stats.Coefficient) []string {
	var out []string
	for _, k := range []string{"studentised", "bca", "percentile", "row_bootstrap"} {
		if _, ok := c.Intervals[k]; ok && k != c.IntervalKind {
			out = append(out, k)
		}
	}
	return out
}

// termText names a coefficient for a reader.
func termText(name string) string {
	if w, ok := predictorWordsOf[name]; ok {
		return w.name
	}
	return strings.ReplaceAll(name, "_", " ")
}

// jointLevels are the category levels of the joint models, each category once.
func jointLevels(a *stats.Analysis) []stats.Level {
	var out []stats.Level
	for _, m := range a.Models {
		for _, l := range m.Levels {
			if !slices.ContainsFunc(out, func(o stats.Level) bool { return o.Category == l.Category }) {
				out = append(out, l)
			}
		}
	}
	return out
}

func levelSentence(l stats.Level) string {
	var parts []string
	for i, name := range l.Levels {
		if i < len(l.Rows) {
			name += " " + strconv.Itoa(l.Rows[i])
		}
		parts = append(parts, name)
	}
	base := ""
	if len(l.Levels) > 0 {
		base = " against " + l.Levels[0]
	}
	return "Levels of " + termText(l.Category) + " are coded" + base + "; rows: " + strings.Join(parts, ", ") + "."
}

// sentence says what counting whole clusters changes.
func (l rowLesson) sentence() string {
	rowsZero, wholeZero := holdsZero(l.Rows), holdsZero(l.Whole)
	ratio := (l.Whole[1] - l.Whole[0]) / (l.Rows[1] - l.Rows[0])
	width := numberText(ratio, 2) + " times as wide"
	if ratio < 1 {
		width = numberText(1/ratio, 2) + " times narrower"
	}
	switch {
	case !rowsZero && wholeZero:
		return width + "; single rows exclude zero, whole clusters do not: it cannot be told"
	case rowsZero && !wholeZero:
		return width + "; whole clusters exclude zero, single rows do not: look at the influence table"
	case l.Changed:
		return width
	}
	return "little"
}

// sameExplanation says whether a model is of latitude in one of its guises:
// |latitude|, its sine and the Coriolis parameter are nearly one number on
// modern rows, and a difference between them tells of their forms.
func sameExplanation(model string) bool {
	_, predictor, _ := strings.Cut(model, ":")
	switch predictor {
	case "abs_latitude", "sin_abs_latitude", "coriolis":
		return true
	}
	return false
}

// comparisonSentence reads a paired difference.
func comparisonSentence(c stats.Comparison) string {
	switch {
	case !finiteInterval(c.Interval):
		return "no interval could be formed"
	case sameExplanation(c.A) && sameExplanation(c.B):
		return "one explanation on these rows: their difference is not a finding"
	case c.Interval[0] > 0:
		return "the first goes with more of the variance"
	case c.Interval[1] < 0:
		return "the second goes with more of the variance"
	}
	return "these rows do not tell which goes with more"
}

func partText(s stats.Part) string {
	var names []string
	for _, m := range s.Members {
		names = append(names, predictorText(m).name)
	}
	if len(names) == 1 {
		return names[0] + " alone"
	}
	return "common to " + strings.Join(names[:len(names)-1], ", ") + " and " + names[len(names)-1]
}

// ownWarnings are the warnings that do not stand among what the rows cannot
// separate already.
func (p RegressionPage) ownWarnings() []string {
	return slices.DeleteFunc(slices.Clone(p.Analysis.Warnings), func(w string) bool { return slices.Contains(p.Analysis.Separability, w) })
}

// plain writes a sentence with true minus signs, the models by their names and
// without the parameters that stand in brackets: the sentences themselves stay
// plain text for documents and terminals.
func (p RegressionPage) plain(s string) string {
	for _, m := range p.Analysis.Models {
		name, start := m.Model, false
		if m.Group != "" && strings.HasPrefix(s, name+" ("+m.Group+")") {
			name += " (" + m.Group + ")"
		} else {
			m.Group = ""
		}
		start = strings.HasPrefix(s, name)
		if s = replaceName(s, name, modelText(m)); start {
			s = upperFirst(s)
		}
	}
	return trueSigns(asides.ReplaceAllString(s, ""))
}

// asides are the brackets in which a sentence names a parameter.
var asides = regexp.MustCompile(` \([a-z0-9_]+=[^()]*\)`)

// replaceName puts words for a model's name, not inside a longer one or in the
// value of a parameter.
func replaceName(s, name, words string) string {
	var b strings.Builder
	for {
		i := strings.Index(s, name)
		if i < 0 {
			b.WriteString(s)
			return b.String()
		}
		end := i + len(name)
		whole := (i == 0 || !strings.ContainsAny(s[i-1:i], "=_abcdefghijklmnopqrstuvwxyz")) && (end == len(s) || !strings.ContainsAny(s[end:end+1], "_,+abcdefghijklmnopqrstuvwxyz"))
		b.WriteString(s[:i])
		if whole {
			b.WriteString(words)
		} else {
			b.WriteString(name)
		}
		s = s[end:]
	}
}

// signs are hyphens that stand for a minus: before a digit, after a space or a
// bracket, or between spaces.
var signs = regexp.MustCompile(`(^|[\s\[(])-( ?\d)`)

// trueSigns sets the minus signs of a plain sentence for print.
func trueSigns(s string) string { return signs.ReplaceAllString(s, "${1}−${2}") }

// mainPanels and diagnosticPanels divide the figures of an analysis.
func mainPanels(p RegressionPage) []string {
	var out []string
	for _, n := range RegressionPanels(p.Analysis) {
		if strings.HasPrefix(n, "fit:") {
			out = append(out, n)
		}
	}
	return out
}

func diagnosticPanels(p RegressionPage) []string {
	main := append(mainPanels(p), "r_squared")
	return slices.DeleteFunc(RegressionPanels(p.Analysis), func(n string) bool { return slices.Contains(main, n) })
}

func (p RegressionPage) plots(names []string) []Plot {
	var out []Plot
	for _, n := range names {
		out = append(out, RegressionFigure(p.Analysis, p.Request, n))
	}
	if len(out) == 1 {
		out[0].Width, out[0].Height = 760, 430 // alone it takes the width of three
	}
	return out
}

func panelText(name string) string {
	if predictor, ok := strings.CutPrefix(name, "fit:"); ok {
		return predictorText(predictor).name
	}
	if name == "r_squared" {
		return "R²"
	}
	return strings.ReplaceAll(name, "_", " ")
}

// rampVariables are the variables that colour carries on the named panels.
func rampVariables(a *stats.Analysis, names []string) []string {
	var out []string
	for _, n := range names {
		if predictor, ok := strings.CutPrefix(n, "fit:"); ok {
			if v := otherVariable(a, predictor); !slices.Contains(out, v) {
				out = append(out, v)
			}
		}
	}
	return out
}

// predictorsOn lists the panels on which colour carries variable.
func predictorsOn(a *stats.Analysis, names []string, variable string) string {
	var out []string
	for _, n := range names {
		if predictor, ok := strings.CutPrefix(n, "fit:"); ok && otherVariable(a, predictor) == variable {
			out = append(out, predictorText(predictor).name)
		}
	}
	return strings.Join(out, ", ")
}

func hasRivers(a *stats.Analysis) bool {
	return slices.ContainsFunc(a.Used, func(r stats.UsedRow) bool { return r.Kept && r.Kind == "river" })
}

// mainCaption is a caption that can go to print: what, how many, how.
func (p RegressionPage) mainCaption() string {
	a, r := p.Analysis, p.Request
	s := upperFirst(responseText(r.Response, r.K)) + " against each predictor, with the fitted lines and the pointwise " + percent(r.Level) +
		" interval of each line. " +
		countText(a.Rows, "row", "rows") + " of " + countText(a.Systems, "system", "systems") + " in " + countText(a.Clusters, "cluster", "clusters") +
		" (by " + clusterText(r.Cluster) + "), " + strconv.Itoa(r.Resamples) + " resamples of whole clusters, seed " + strconv.FormatUint(r.Seed, 10) + "."
	if r.Cluster == "none" {
		s = strings.Replace(s, "whole clusters", "single rows", 1)
	}
	if a.InventedRows > 0 {
		s += " " + countText(a.InventedRows, "row is", "rows are") + " invented."
	}
	if a.PrivateRows > 0 {
		s += " " + countText(a.PrivateRows, "row is", "rows are") + " private."
	}
	return s + " The axis follows the rows; a band that leaves the frame goes on."
}

func (p RegressionPage) diagnosticCaption() string {
	s := "What " + p.modelName(p.Analysis.LeadingModel) + " leaves over, and how far its R² hangs on single systems. Points are rows; each leads to its system."
	if p.Analysis.InventedRows > 0 {
		s += " " + countText(p.Analysis.InventedRows, "row is", "rows are") + " invented."
	}
	return s
}

// inventedCaption is the note a figure carries when rows behind it are
// invented.
func inventedCaption(n int) string {
	if n == 0 {
		return ""
	}
	return upperFirst(countText(n, "row is", "rows are")) + " invented."
}

// nextHref asks where the next system should be measured, on the same rows.
func (p RegressionPage) nextHref() templ.SafeURL {
	q := p.Filter.Values()
	for _, name := range []string{"response", "measured_line", "cluster", "seed"} {
		if v, ok := p.Query[name]; ok {
			q[name] = v
		}
	}
	return templ.SafeURL("/regression/next?" + q.Encode())
}

func countText(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}
