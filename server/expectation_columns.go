package main

import (
	"encoding/csv"
	"net/http"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/stats/expectation"
	"fathombend/views"
)

// resultColumn is one column added to a file of targets.
type resultColumn struct {
	Name, Unit, Meaning string
	of                  func(*expectation.Result) string
}

func quantile(of func(*expectation.Quantiles) float64) func(*expectation.Result) string {
	return func(r *expectation.Result) string {
		if r.Combined.Sinuosity == nil {
			return ""
		}
		return cellNumber(of(r.Combined.Sinuosity))
	}
}

// resultColumns in the order they are written; the dictionary on the page and
// in /expectation/columns.csv is made from them. Every name starts with result_
// so that none can be taken for a parameter.
var resultColumns = []resultColumn{
	{"result_palaeolatitude", "degrees", "palaeolatitude used: the point conversion of what was given", func(r *expectation.Result) string { return cellNumber(r.Palaeolatitude.Value) }},
	{"result_palaeolatitude_se", "degrees", "its standard error", func(r *expectation.Result) string { return cellNumber(r.Palaeolatitude.SE) }},
	{"result_age", "Ma", "age used", func(r *expectation.Result) string { return cellNumber(r.Age.Value) }},
	{"result_age_se", "Ma", "its standard error", func(r *expectation.Result) string { return cellNumber(r.Age.SE) }},
	{"result_day_length", "solar hours", "length of the day at that age", func(r *expectation.Result) string { return cellNumber(r.DayLength.Value) }},
	{"result_rotation_ratio", "1", "rotation rate over today's", func(r *expectation.Result) string { return cellNumber(r.RotationRatio) }},
	{"result_coriolis", "s-1", "size of the Coriolis parameter", func(r *expectation.Result) string { return cellNumber(r.Coriolis) }},
	{"result_equivalent_modern_latitude", "degrees", "latitude with the same Coriolis parameter today; empty where there is none", func(r *expectation.Result) string {
		if r.EquivalentModernLatitude == nil {
			return ""
		}
		return cellNumber(*r.EquivalentModernLatitude)
	}},
	{"result_response", "", "which sinuosity is expected", func(r *expectation.Result) string { return r.Response }},
	{"result_measured_line", "", "along which line", func(r *expectation.Result) string { return r.MeasuredLine }},
	{"result_p2_5", "1", "sinuosity below which 2.5 % of new systems lie, all explanations combined", quantile(func(q *expectation.Quantiles) float64 { return q.P2_5 })},
	{"result_p10", "1", "the same, 10 %", quantile(func(q *expectation.Quantiles) float64 { return q.P10 })},
	{"result_p25", "1", "the same, 25 %", quantile(func(q *expectation.Quantiles) float64 { return q.P25 })},
	{"result_p50", "1", "the same, 50 %: the expected value", quantile(func(q *expectation.Quantiles) float64 { return q.P50 })},
	{"result_p75", "1", "the same, 75 %", quantile(func(q *expectation.Quantiles) float64 { return q.P75 })},
	{"result_p90", "1", "the same, 90 %", quantile(func(q *expectation.Quantiles) float64 { return q.P90 })},
	{"result_p97_5", "1", "the same, 97.5 %", quantile(func(q *expectation.Quantiles) float64 { return q.P97_5 })},
	{"result_coverage_80", "fraction", "what the 80 % limits held when each cluster was left out", coverage(func(c *expectation.Coverage) float64 { return c.C80 })},
	{"result_coverage_95", "fraction", "what the 95 % limits held when each cluster was left out", coverage(func(c *expectation.Coverage) float64 { return c.C95 })},
	{"result_observed_percentile", "%", "share of outcomes below the observed sinuosity, if one was given", func(r *expectation.Result) string {
		if r.Observed == nil {
			return ""
		}
		return cellNumber(r.Observed.Percentile)
	}},
	{"result_classes", "", "planform classes with their probability and base rate in the rows", classesCell},
	{"result_rows", "", "rows of the catalogue used", func(r *expectation.Result) string { return strconv.Itoa(r.Rows) }},
	{"result_clusters", "", "clusters they form", func(r *expectation.Result) string { return strconv.Itoa(r.Clusters) }},
	{"result_invented_rows", "", "how many of the rows are invented", func(r *expectation.Result) string { return strconv.Itoa(r.InventedRows) }},
	{"result_seed", "", "seed of the draws", func(r *expectation.Result) string { return settingCell(r, "seed") }},
	{"result_draws", "", "number of draws", func(r *expectation.Result) string { return settingCell(r, "draws") }},
	{"result_extrapolation", "", "in what respect the target lies outside the rows", func(r *expectation.Result) string { return strings.Join(r.Extrapolation, " ") }},
	{"result_notes", "", "what was assumed", func(r *expectation.Result) string { return strings.Join(r.Notes, " ") }},
	{"result_cautions", "", "what this expectation is not for", func(r *expectation.Result) string { return strings.Join(r.Cautions, " ") }},
}

// errorColumn is why a row has no result; empty for the others.
const errorColumn = "error"

func coverage(of func(*expectation.Coverage) float64) func(*expectation.Result) string {
	return func(r *expectation.Result) string {
		if r.Combined.Coverage == nil {
			return ""
		}
		return cellNumber(of(r.Combined.Coverage))
	}
}

func classesCell(r *expectation.Result) string {
	var parts []string
	for _, c := range r.Classes {
		parts = append(parts, c.Name+" "+percentText(c.Probability)+" (base rate "+percentText(c.BaseRate)+")")
	}
	return strings.Join(parts, "; ")
}

func settingCell(r *expectation.Result, name string) string {
	switch v := r.Settings[name].(type) {
	case uint64:
		return strconv.FormatUint(v, 10)
	case int:
		return strconv.Itoa(v)
	case float64:
		return cellNumber(v)
	}
	return ""
}

// cellNumber writes a number with every digit it has; not finite is empty.
func cellNumber(x float64) string {
	if !isFinite(x) {
		return ""
	}
	return strconv.FormatFloat(x, 'g', -1, 64)
}

func percentText(x float64) string {
	if !isFinite(x) {
		return "unknown"
	}
	return strconv.FormatFloat(100*x, 'f', 0, 64) + " %"
}

// columnHelp is the dictionary of the columns a file of targets may have and
// of those it comes back with.
func columnHelp() []views.ColumnHelp {
	var out []views.ColumnHelp
	for _, f := range targetFields {
		out = append(out, views.ColumnHelp{Name: f.name, Unit: f.unit, Meaning: "from " + short(f.low) + " to " + short(f.top)})
	}
	for _, s := range slopeFields {
		unit := map[string]string{"target_slope": "m/m", "target_slope_deg": "degrees", "target_slope_permille": "per mille"}[s.name]
		out = append(out, views.ColumnHelp{Name: s.name, Unit: unit, Meaning: "valley slope; one of the three"})
	}
	for _, t := range targetTexts {
		meaning := "a name"
		if t.choices != nil {
			meaning = "one of: " + strings.Join(t.choices, ", ")
		}
		out = append(out, views.ColumnHelp{Name: t.name, Meaning: meaning})
	}
	out = append(out, views.ColumnHelp{Name: "seed", Meaning: "seed of the draws"}, views.ColumnHelp{Name: "draws", Meaning: "number of draws"})
	for _, c := range resultColumns {
		out = append(out, views.ColumnHelp{Name: c.Name, Unit: c.Unit, Meaning: c.Meaning, Out: true})
	}
	return append(out, views.ColumnHelp{Name: errorColumn, Meaning: "why a row has no result; empty for the others", Out: true})
}

func (a *App) expectationColumns(c echo.Context) error {
	var b strings.Builder
	w := csv.NewWriter(&b)
	_ = w.Write([]string{"column", "direction", "unit", "meaning"})
	for _, h := range columnHelp() {
		direction := "in"
		if h.Out {
			direction = "out"
		}
		_ = w.Write([]string{h.Name, direction, h.Unit, h.Meaning})
	}
	w.Flush()
	c.Response().Header().Set(echo.HeaderContentDisposition, `attachment; filename="expectation-columns.csv"`)
	return c.Blob(http.StatusOK, "text/csv; charset=utf-8; header=present", []byte(b.String()))
}
