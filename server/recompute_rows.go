package main

import (
	"context"
	"errors"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats"
)

// fitRows are the rows of a fit. Where req names a recomputation, what that
// gave stands in the place of what is stored, and req says with which settings.
func (a *App) fitRows(ctx context.Context, f catalogue.Filter, req *stats.Request) ([]catalogue.Row, error) {
	if req.Recomputed == "" {
		return a.store.Rows(ctx, f)
	}
	// Asked first: a question that cannot be answered should not read all rows.
	if err := req.Validate(); err != nil {
		return nil, err
	}
	if err := a.recomputedAs(ctx, req); err != nil {
		return nil, err
	}
	by, err := a.store.RecomputedByMeasurement(ctx, req.Recomputed)
	if err != nil {
		return nil, err
	}
	rows, err := a.store.Rows(ctx, f)
	recomputedRows(rows, by, req.Response)
	return rows, err
}

// recomputedAs puts the settings of the recomputation that req names into it.
func (a *App) recomputedAs(ctx context.Context, req *stats.Request) error {
	if req.Recomputed == "" {
		return nil
	}
	r, err := a.store.Recomputation(ctx, req.Recomputed)
	var refused *catalogue.Error
	switch {
	case errors.As(err, &refused) && refused.Code == catalogue.NotFound:
		names, err := a.finishedRecomputations(ctx)
		if err != nil {
			return err
		}
		expected := ". None is finished in this catalogue"
		if len(names) > 0 {
			expected = ". Expected one of: " + strings.Join(names, ", ")
		}
		return &badInput{"recomputed", strconv.Quote(clip(req.Recomputed)) + " is no recomputation here" + expected}
	case err != nil:
		return err
	case r.State != "done":
		return &badInput{"recomputed", strconv.Quote(r.Name) + " is not finished (" + r.State + ", " + strconv.Itoa(r.Reached) + " of " + strconv.Itoa(r.Lines) +
			" lines). Wait for it, or resume it at /recompute/" + r.Name}
	}
	req.RecomputedAs = recomputeSettingsText(settingsOf(r.Settings))
	return nil
}

// finishedRecomputations are those a regression can use, newest first.
func (a *App) finishedRecomputations(ctx context.Context) ([]string, error) {
	list, err := a.store.Recomputations(ctx)
	if err != nil {
		return nil, err
	}
	var out []string
	for _, r := range list {
		if r.State == "done" {
			out = append(out, r.Name)
		}
	}
	return out, nil
}

// recomputedRows puts what a recomputation gave in the place of what is
// stored: the windows, and the sinuosity of the kind the response asks for. A
// row that no line of it stands for has neither.
func recomputedRows(rows []catalogue.Row, by map[string]catalogue.RecomputedLine, response string) {
	kind := response
	if response == "standardised_peak" {
		kind = "peak"
	}
	for i := range rows {
		r := &rows[i]
		l := by[r.Measurement]
		r.WindowSinuosities, r.SinuosityKind, r.SinuositySE = l.Sinuosities, kind, catalogue.Number{}
		r.Sinuosity = map[string]catalogue.Number{"reach": l.New.Reach, "mean": l.New.Mean, "p90": l.New.P90, "peak": l.New.Peak}[kind]
		if r.Sinuosity.Valid && r.Sinuosity.V < 1 {
			r.Sinuosity = catalogue.Num(1) // a line and its chord can differ in the last digit
		}
	}
}
