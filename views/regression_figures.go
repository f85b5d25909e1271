package views

import (
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/a-h/templ"

	"fathombend/stats"
)

// RegressionPanels are the names of the figures of an analysis: one "fit:" for
// each predictor, then those of the leading model.
func RegressionPanels(a *stats.Analysis) []string {
	var out []string
	for _, p := range panels(a) {
		out = append(out, "fit:"+p.Predictor)
	}
	if len(a.Models) > 0 {
		out = append(out, "r_squared")
	}
	if leadingModel(a) != nil {
		out = append(out, "predicted", "residuals")
	}
	if len(a.Influence) > 0 {
		out = append(out, "influence")
	}
	if len(a.Shares) > 0 {
		out = append(out, "shares")
	}
	if a.Breakpoint != nil && len(a.Breakpoint.Profile) > 1 {
		out = append(out, "breakpoint")
	}
	return out
}

// RegressionFigure draws one panel of an analysis; "" is the first.
func RegressionFigure(a *stats.Analysis, req stats.Request, panel string) Plot {
	if all := RegressionPanels(a); panel == "" && len(all) > 0 {
		panel = all[0]
	}
	if predictor, ok := strings.CutPrefix(panel, "fit:"); ok {
		for _, p := range panels(a) {
			if p.Predictor == predictor {
				return fitPlot(a, req, p)
			}
		}
	}
	switch panel {
	case "r_squared":
		return rSquaredPlot(a)
	case "predicted":
		return predictedPlot(a)
	case "residuals":
		return residualPlot(a)
	case "influence":
		return influencePlot(a)
	case "shares":
		return sharesPlot(a)
	case "breakpoint":
		return breakpointPlot(a)
	}
	return Plot{ID: "regression", Title: "Regression", Empty: "No model could be fitted to these rows."}
}

const (
	panelWidth  = 460
	panelHeight = 360
)

func leadingModel(a *stats.Analysis) *stats.Model {
	for i, m := range a.Models {
		if m.Failure == "" && m.Model == a.LeadingModel {
			return &a.Models[i]
		}
	}
	for i, m := range a.Models {
		if m.Failure == "" {
			return &a.Models[i]
		}
	}
	return nil
}

// fitPlot is sinuosity against one predictor, with every model fitted on it:
// the interval of the line under the line, the rows as points.
func fitPlot(a *stats.Analysis, req stats.Request, panel panelModels) Plot {
	w := predictorText(panel.Predictor)
	p := Plot{
		ID: "fit-" + strings.ReplaceAll(panel.Predictor, "_", "-"), Title: "Sinuosity against " + w.name,
		Desc: fitDescription(a, panel), Width: panelWidth, Height: panelHeight,
		X: Axis{Label: upperFirst(w.axis), Log: w.log}, Y: Axis{Label: "Sinuosity"},
	}
	for i, m := range panel.Models {
		band, line := lineClasses(i, m.Group)
		var x, y, lo, hi []float64
		for _, c := range m.Curve {
			x, y, lo, hi = append(x, c.X), append(y, c.Y), append(lo, c.Low), append(hi, c.High)
		}
		p.Bands = append(p.Bands, Band{X: x, Low: lo, High: hi, Class: band})
		l := Line{X: x, Y: y, Class: line}
		if len(panel.Models) > 1 {
			l.Label = formText(m.Form)
			if m.Group != "" {
				l.Label = m.Group
			}
		}
		p.Lines = append(p.Lines, l)
	}
	other := otherVariable(a, panel.Predictor)
	top := 0.0
	for _, r := range a.Used {
		if !r.Kept {
			continue
		}
		q := rowPoint(r, other)
		q.X, q.Y = r.PredictorOf[panel.Predictor], r.Response
		p.Points = append(p.Points, q)
		top = max(top, q.Y)
	}
	// A band that runs far above every row would flatten the rows: the axis
	// follows the rows, and the band is clipped.
	if lowest := minResponse(a); top > lowest {
		p.Y.Min, p.Y.Max = max(min(lowest, 1), lowest-0.06*(top-lowest)), top+0.12*(top-lowest)
	}
	return p
}

func minResponse(a *stats.Analysis) float64 {
	lo := math.Inf(1)
	for _, r := range a.Used {
		if r.Kept {
			lo = min(lo, r.Response)
		}
	}
	return lo
}

// lineClasses gives each model of one panel its own colour and dash; the river
// control is ochre and dashed everywhere.
func lineClasses(i int, group string) (band, line string) {
	if group == "river" {
		return "b2", "l2 dash"
	}
	if group != "" && group != "submarine" {
		return "", "l3 dot-dash"
	}
	switch i {
	case 0:
		return "", ""
	case 1:
		return "b2", "l2 dash"
	case 2:
		return "", "l3 dot-dash"
	}
	return "", "l4 dash"
}

func fitDescription(a *stats.Analysis, panel panelModels) string {
	var parts []string
	for _, m := range panel.Models {
		s := modelText(m) + ": R² " + fixedText(m.RSquared, 2)
		if len(m.Coefficients) > 1 {
			t := estimateTexts(m.Coefficients[1].Estimate, m.Coefficients[1].Interval)
			s += ", slope " + t.value + " from " + t.low + " to " + t.high
		}
		parts = append(parts, s)
	}
	return countText(a.Rows, "row", "rows") + ". " + strings.Join(parts, "; ") + "."
}

// otherVariable is what colour carries: never the variable on the axis. Where
// no model looks at f, latitude stands for it.
func otherVariable(a *stats.Analysis, predictor string) string {
	switch predictor {
	case "valley_slope", "log10_slope", "channel_width", "channel_depth":
		if slices.ContainsFunc(a.Used, func(r stats.UsedRow) bool { _, ok := r.PredictorOf["coriolis"]; return ok }) {
			return "coriolis"
		}
		return "abs_latitude"
	}
	return "valley_slope"
}

// otherValue is the row's value of the variable that colour carries.
func otherValue(r stats.UsedRow, variable string) float64 {
	if x, ok := r.PredictorOf[variable]; ok {
		return x
	}
	switch variable {
	case "valley_slope":
		return r.ValleySlope
	case "abs_latitude":
		return math.Abs(r.LatitudeDeg)
	}
	return math.NaN()
}

// rampLimits are the upper ends of the first five of six classes; the ramp is
// fixed so that figures of different filters can be compared.
var rampLimits = map[string][]float64{
	"valley_slope": {0.001, 0.002, 0.005, 0.01, 0.02},
	"coriolis":     {0.25, 0.5, 0.75, 1, 1.25},
	"abs_latitude": {10, 20, 30, 45, 60},
}

func rampClass(variable string, x float64) string {
	if math.IsNaN(x) {
		return "f0"
	}
	i, _ := slices.BinarySearch(rampLimits[variable], x)
	return "f" + strconv.Itoa(i+1)
}

// rampKey lists the classes of a ramp for the key beside the figure.
type rampEntry struct{ Class, Text string }

func rampKey(variable string) []rampEntry {
	limits := rampLimits[variable]
	out := []rampEntry{{"f1", "under " + floatText(limits[0])}}
	for i := 1; i < len(limits); i++ {
		out = append(out, rampEntry{"f" + strconv.Itoa(i+1), floatText(limits[i-1]) + " to " + floatText(limits[i])})
	}
	return append(out, rampEntry{"f6", "over " + floatText(limits[len(limits)-1])}, rampEntry{"f0", "not known"})
}

// rowPoint is the mark of one row without its place in the plot: shape tells
// rivers and ancient systems apart, colour the other variable.
func rowPoint(r stats.UsedRow, other string) Point {
	q := Point{Class: rampClass(other, otherValue(r, other)), Href: string(systemHref(r.System)), Tip: r.SystemName + ", " + fixedText(r.Response, 2)}
	words := []string{r.SystemName, "sinuosity " + fixedText(r.Response, 2)}
	for _, name := range []string{"abs_latitude", "valley_slope"} {
		if v, ok := r.PredictorOf[name]; ok && !math.IsNaN(v) {
			words = append(words, predictorText(name).name+" "+numberText(v, 3))
		}
	}
	if r.ClusterID != "" && r.ClusterID != r.System {
		words = append(words, "cluster "+r.ClusterID)
	}
	switch {
	case r.Kind == "river":
		q.Shape, q.Class = "triangle", "ochre hollow"
		words = append(words, "river")
	case r.AgeMa > 5:
		q.Shape = "diamond"
		words = append(words, numberText(r.AgeMa, 3)+" Ma")
	}
	if r.Invented {
		words = append(words, "invented")
	}
	if r.Private {
		words = append(words, "private")
	}
	q.Title = strings.Join(words, ", ")
	return q
}

// predictedPlot is observed against predicted sinuosity of the leading model.
func predictedPlot(a *stats.Analysis) Plot {
	m := leadingModel(a)
	p := Plot{ID: "predicted", Title: "Observed against fitted sinuosity, " + modelText(*m), Width: panelWidth, Height: panelHeight,
		Desc: "Each point a row; on the dashed line the fit is exact.",
		X:    Axis{Label: "Fitted sinuosity"}, Y: Axis{Label: "Observed sinuosity"}}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, r := range a.Used {
		if x, ok := r.PredictedOf[m.Model]; ok && r.Kept {
			q := rowPoint(r, otherVariable(a, m.Predictor))
			q.X, q.Y = x, r.Response
			p.Points = append(p.Points, q)
			if !math.IsNaN(x) {
				lo, hi = min(lo, x), max(hi, x)
			}
		}
	}
	if lo < hi {
		p.Lines = []Line{{X: []float64{lo, hi}, Y: []float64{lo, hi}, Class: "l3 dash"}}
	}
	return p
}

// residualPlot is what the leading model leaves over.
func residualPlot(a *stats.Analysis) Plot {
	m := leadingModel(a)
	p := Plot{ID: "residuals", Title: "Residuals of " + modelText(*m), Width: panelWidth, Height: panelHeight,
		Desc: "Observed less fitted sinuosity. A fan or a bend in the cloud says the form or the scale does not suit.",
		X:    Axis{Label: "Fitted sinuosity"}, Y: Axis{Label: "Observed less fitted", Zero: true}, Rules: []Rule{{At: 0, Class: "dash"}}}
	for _, r := range a.Used {
		x, ok := r.PredictedOf[m.Model]
		if !ok || !r.Kept {
			continue
		}
		q := rowPoint(r, otherVariable(a, m.Predictor))
		q.X, q.Y = x, r.ResidualOf[m.Model]
		p.Points = append(p.Points, q)
	}
	return p
}

// breakpointPlot is R2 of the broken line over the place of its break.
func breakpointPlot(a *stats.Analysis) Plot {
	b := a.Breakpoint
	_, predictor, _ := strings.Cut(b.Model, ":")
	predictor, _, _ = strings.Cut(predictor, " ")
	w := predictorText(predictor)
	p := Plot{ID: "breakpoint", Title: "Where the line would break", Width: panelWidth, Height: panelHeight,
		Desc: "R² of the broken line for each place of the break; the highest point is the estimate.",
		X:    Axis{Label: upperFirst(w.axis), Log: w.log}, Y: Axis{Label: "R² with the break there"},
		Rules: []Rule{{At: b.At, Vertical: true, Label: "estimate " + numberText(b.At, 3), Class: "dash"}}}
	var x, y []float64
	for _, c := range b.Profile {
		x, y = append(x, c.X), append(y, c.Y)
	}
	if predictor == "abs_latitude" {
		p.Rules = append(p.Rules, Rule{At: 50, Vertical: true, Label: "50 (practice)", Class: "dot-dash"})
	}
	p.Lines = []Line{{X: x, Y: y}}
	return p
}

func upperFirst(s string) string {
	if s == "" || s[0] < 'a' || s[0] > 'z' {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

// systemHref is the address of a system's page.
func systemHref(slug string) templ.SafeURL {
	return templ.SafeURL("/systems/" + url.PathEscape(slug))
}

// figureHref is the address of one panel as a file.
func (p RegressionPage) figureHref(panel string) templ.SafeURL {
	q := url.Values{"panel": {panel}}
	if p.Frozen != nil {
		q.Set("analysis", p.Frozen.Name)
		return templ.SafeURL("/figures/regression.svg?" + q.Encode())
	}
	for k, v := range p.Query {
		q[k] = v
	}
	return templ.SafeURL("/figures/regression.svg?" + q.Encode())
}
