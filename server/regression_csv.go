package main

import (
	"encoding/csv"
	"io"
	"slices"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
)

// regressionCSV writes every row considered.
func (a *App) regressionCSV(c echo.Context) error {
	_, _, analysis, err := a.regressionAnswer(c)
	if err != nil {
		return err
	}
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
	h.Set(echo.HeaderContentDisposition, `attachment; filename="regression-rows.csv"`)
	return writeUsedRows(c.Response(), analysis)
}

// writeUsedRows writes the rows considered with what a reader needs to fit
// them again elsewhere: derived predictors, cluster, source, kept or why
// dropped, and what each model says of them. Unknown numbers are empty;
// coriolis is in 1e-4 s-1, as fitted.
func writeUsedRows(out io.Writer, a *stats.Analysis) error {
	w := csv.NewWriter(out)
	predictors := usedPredictors(a)
	head := []string{"measurement", "system", "system_name", "parent_deposit", "cluster", "source", "kind", "invented", "kept", "why_dropped",
		"sinuosity", "sinuosity_kind", "measured_line", "grade", "response", "latitude_deg", "longitude_deg", "age_ma", "palaeolatitude_deg"}
	head = append(head, predictors...)
	for _, m := range modelNames(a) {
		head = append(head, "predicted "+m, "residual "+m)
	}
	if err := w.Write(head); err != nil {
		return err
	}
	for _, r := range a.Used {
		if err := w.Write(usedRow(a, r, predictors)); err != nil {
			return err
		}
	}
	w.Flush()
	return w.Error()
}

func usedRow(a *stats.Analysis, r stats.UsedRow, predictors []string) []string {
	yes := func(b bool) string {
		if b {
			return "yes"
		}
		return "no"
	}
	row := []string{catalogue.Neutralise(r.ID), catalogue.Neutralise(r.System), catalogue.Neutralise(r.SystemName), catalogue.Neutralise(r.ParentDeposit), catalogue.Neutralise(r.ClusterID), catalogue.Neutralise(r.Source), r.Kind,
		yes(r.Invented), yes(r.Kept), catalogue.Neutralise(r.WhyDropped), cellNumber(r.Sinuosity), r.SinuosityKind, r.MeasuredLine, r.Grade,
		cellNumber(r.Response), cellNumber(r.LatitudeDeg), cellNumber(r.LongitudeDeg), cellNumber(r.AgeMa), cellNumber(r.PalaeolatitudeDeg)}
	value := func(m map[string]float64, key string) string {
		if x, ok := m[key]; ok {
			return cellNumber(x)
		}
		return ""
	}
	for _, p := range predictors {
		row = append(row, value(r.PredictorOf, p))
	}
	for _, m := range modelNames(a) {
		row = append(row, value(r.PredictedOf, m), value(r.ResidualOf, m))
	}
	return row
}

// modelNames lists the models, each once: with group=kind a model is fitted
// for every kind, and a row has the fit of its own.
func modelNames(a *stats.Analysis) []string {
	var out []string
	for _, m := range a.Models {
		if !slices.Contains(out, m.Model) {
			out = append(out, m.Model)
		}
	}
	return out
}

// usedPredictors lists the predictors the rows carry: the known ones in their
// order, then any other by name.
func usedPredictors(a *stats.Analysis) []string {
	have := map[string]bool{}
	for _, r := range a.Used {
		for p := range r.PredictorOf {
			have[p] = true
		}
	}
	var out, rest []string
	for _, p := range stats.Predictors {
		if have[p] {
			out = append(out, p)
			delete(have, p)
		}
	}
	for p := range have {
		rest = append(rest, p)
	}
	slices.Sort(rest)
	return append(out, rest...)
}
