package main

import (
	"context"
	"errors"
	"fmt"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/views"
)

func (a *App) routesRegression(e *echo.Echo) {
	get(e, "/regression", a.regressionPage)
	get(e, "/regression.json", a.regressionJSON)
	get(e, "/regression.csv", a.regressionCSV)
	for _, kind := range figureKinds {
		get(e, "/figures/regression."+kind, a.regressionFigure)
	}
	e.POST("/regression/cancel", a.regressionCancel)
	a.routesAnalyses(e)
	get(e, "/regression/next", a.nextPage)
	get(e, "/regression/next.json", a.nextJSON)
}

// regressionPage answers the question in the address. An address that leaves
// the question open is sent to one that says all of it, seed included, so that
// what is on the screen can always be linked to.
func (a *App) regressionPage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	f, req, err := regressionQuestion(q)
	if err != nil {
		return a.regressionRefused(c, q, err)
	}
	if full, err := a.fullAddress(ctx, q, f, req); err != nil {
		return err
	} else if full != "" {
		return c.Redirect(http.StatusFound, full)
	}
	page := views.RegressionPage{Page: a.regressionFrame(c, f, req), Request: req, Filter: f, Categories: stats.Categories}
	if page.Facets, err = a.facets(ctx, f); err != nil {
		return err
	}
	if page.Recomputations, err = a.finishedRecomputations(ctx); err != nil {
		return err
	}
	var working *job
	page.Analysis, working, err = a.analyseWatched(c, f, req)
	switch {
	case errors.Is(err, context.Canceled):
		return a.regressionRefused(c, q, &badInput{"", "The fit was cancelled. Ask for fewer models or fewer resamples, or fit it again."})
	case err != nil:
		return a.regressionRefused(c, q, err)
	case page.Analysis != nil:
		page.Analysis = withUnused(page.Analysis, f)
	case working != nil:
		return a.regressionWorking(c, page, working)
	}
	return render(c, http.StatusOK, views.Regression(page))
}

// regressionFrame is the frame of the page with the addresses of its twins.
func (a *App) regressionFrame(c echo.Context, f catalogue.Filter, req stats.Request) views.Page {
	p := a.page(c, "Regression", "regression")
	p.Query = withValues(regressionFilter(f).Values(), regressionValues(req))
	p.JSON, p.CSV = "/regression.json?"+p.Query.Encode(), "/regression.csv?"+p.Query.Encode()
	p.Wide = true
	return p
}

// regressionRefused shows why a question has no answer, with the form still
// there, so that one setting can be changed and nothing is lost.
func (a *App) regressionRefused(c echo.Context, q url.Values, err error) error {
	f, all, ok := refusals(q, err)
	if !ok {
		return err
	}
	req := readableRequest(q)
	page := views.RegressionPage{Page: a.regressionFrame(c, f, req), Request: req, Filter: f, Categories: stats.Categories}
	page.JSON, page.CSV = "", ""
	page.Refusals, page.TypedFilter, page.Fields = all, q, regressionParameters
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	if page.Recomputations, err = a.finishedRecomputations(c.Request().Context()); err != nil {
		return err
	}
	return render(c, http.StatusBadRequest, views.Regression(page))
}

// facets counts the choices under a filter, once a revision.
func (a *App) facets(ctx context.Context, f catalogue.Filter) ([]catalogue.Facet, error) {
	f = regressionFilter(f)
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("facets|%d|%s", rev, f.Values().Encode()), func(ctx context.Context) (any, error) {
		return a.store.Facets(ctx, f)
	})
	if err != nil {
		return nil, err
	}
	return v.([]catalogue.Facet), nil
}

// regressionFilter is f without what only lists use.
func regressionFilter(f catalogue.Filter) catalogue.Filter {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	return f
}

// fullAddress is where to send an address that does not say its question in
// full: no model, no seed, or the empty fields a form leaves. It is "" when
// the address is full.
func (a *App) fullAddress(ctx context.Context, q url.Values, f catalogue.Filter, req stats.Request) (string, error) {
	asks := q.Has("model") || q.Has("joint")
	if asks && q.Has("seed") && !hasEmpty(q) {
		return "", nil
	}
	if q.Get("cluster") == "" {
		chosen, err := a.settingsFor(ctx, f.Release)
		if err != nil {
			return "", err
		}
		req.Cluster = chosen.Cluster
	}
	if !asks && q.Get("scale") == "" {
		scale, err := a.offeredScale(ctx, f, req)
		if err != nil {
			return "", err
		}
		req.Scale = scale
	}
	return "/regression?" + withValues(f.Values(), regressionValues(req)).Encode(), nil
}

// offeredRequest is the question that pages ask by themselves: the contract's,
// with the cluster of the settings.
func (a *App) offeredRequest(ctx context.Context, release string) (stats.Request, error) {
	req := stats.DefaultRequest()
	chosen, err := a.settingsFor(ctx, release)
	req.Cluster = chosen.Cluster
	return req, err
}

// offeredScale is the scale the page offers first: ln(P - 1), where intervals
// hold best, when every sinuosity allows it.
func (a *App) offeredScale(ctx context.Context, f catalogue.Filter, req stats.Request) (string, error) {
	f = fitFilter(f, req.Group)
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return "", err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("offered scale|%d|%s", rev, f.Values().Encode()), func(ctx context.Context) (any, error) {
		rows, err := a.store.Rows(ctx, f)
		if err != nil {
			return nil, err
		}
		straight := func(r catalogue.Row) bool { return r.Sinuosity.Valid && r.Sinuosity.V <= 1 }
		if len(rows) == 0 || slices.ContainsFunc(rows, straight) {
			return "raw", nil
		}
		return "ln_excess", nil
	})
	if err != nil {
		return "", err
	}
	return v.(string), nil
}

func (a *App) regressionJSON(c echo.Context) error {
	_, _, analysis, err := a.regressionAnswer(c)
	if err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, analysis)
}

// regressionAnswer reads the question of a data twin and answers it.
func (a *App) regressionAnswer(c echo.Context) (catalogue.Filter, stats.Request, *stats.Analysis, error) {
	q, err := params(c)
	if err != nil {
		return catalogue.Filter{}, stats.Request{}, nil, err
	}
	f, req, err := regressionQuestion(q)
	if err != nil {
		return f, req, nil, err
	}
	noteUnused(c, f)
	analysis, err := a.analyse(c.Request().Context(), f, req)
	if err == nil {
		analysis = withUnused(analysis, f)
	}
	return f, req, analysis, err
}

// withUnused adds to the warnings what of the address has no part in a fit.
// The analysis itself is shared between questions and stays as it is.
func withUnused(analysis *stats.Analysis, f catalogue.Filter) *stats.Analysis {
	note := unusedOfTables(f)
	if note == "" {
		return analysis
	}
	noted := *analysis
	noted.Warnings = append(slices.Clone(analysis.Warnings), note)
	return &noted
}

// regressionFigure is one panel of the page alone, as a file; without panel=
// it is the first; with analysis= it is that of a frozen analysis.
func (a *App) regressionFigure(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	panel, name := q.Get("panel"), q.Get("analysis")
	q.Del("panel")
	q.Del("analysis")
	q.Del("width")
	f, req, err := regressionQuestion(q)
	if err != nil {
		return err
	}
	var analysis *stats.Analysis
	if name != "" {
		kept, ferr := a.frozen(c.Request().Context(), name)
		if ferr != nil {
			return ferr
		}
		analysis, req = kept.analysis, kept.request
	} else if analysis, err = a.analyse(c.Request().Context(), f, req); err != nil {
		return err
	}
	if names := views.RegressionFigures(analysis); panel != "" && !slices.Contains(names, panel) {
		return &badInput{"panel", strconv.Quote(clip(panel)) + " is no figure of this analysis. Expected one of: " + strings.Join(names, ", ")}
	}
	question := withValues(regressionFilter(f).Values(), regressionValues(req))
	if name != "" {
		question = url.Values{"analysis": {name}}
	}
	from, err := a.figureSource(c.Request().Context(), f.Release, question)
	if err != nil {
		return err
	}
	if name != "" {
		from.Data = "Rows as frozen under the name " + name
	}
	return a.writeFigure(c, views.RegressionFile(analysis, req, panel, from))
}
