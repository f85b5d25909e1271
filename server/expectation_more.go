package main

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
	"fathombend/views"
)

// routesExpectationMore are the pages beside one target's: its site through
// time, its report, and the test on ancient rows.
func (a *App) routesExpectationMore(e *echo.Echo) {
	for _, r := range []struct {
		path string
		h    echo.HandlerFunc
	}{
		{"/expectation/time", a.timePage},
		{"/expectation/time.json", a.timeJSON},
		{"/expectation/report", a.reportPage},
	} {
		get(e, r.path, noStore(r.h))
		e.POST(r.path, noStore(r.h))
	}
	get(e, "/expectation/deep-time", a.deepTimePage)
	get(e, "/expectation/deep-time.json", a.deepTimeJSON)
}

// throughTime answers a target's site at the ages its tables reach.
func (a *App) throughTime(ctx context.Context, q url.Values) (catalogue.Filter, expectation.Target, []expectation.SeriesPoint, error) {
	f, t, err := expectationQuestion(q)
	if err != nil {
		return f, t, nil, err
	}
	fits, err := a.expectationFits(ctx, f, t.Response, t.MeasuredLine)
	if err != nil {
		return f, t, nil, err
	}
	series, err := fits.ThroughTime(ctx, t, nil)
	return f, t, series, err
}

func (a *App) timePage(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	posted := c.Request().Method == http.MethodPost
	page := a.expectationFrame(c, q, posted)
	page.Title = "Through time"
	if !posted {
		page.JSON = withQuery("/expectation/time.json", page.Query)
	}
	ctx := c.Request().Context()
	page.Filter, page.Target, page.Series, err = a.throughTime(ctx, q)
	if err != nil {
		return a.expectationRefused(c, page, err)
	}
	if page.Result, err = a.expect(ctx, page.Filter, page.Target); err != nil {
		return a.expectationRefused(c, page, err)
	}
	return render(c, http.StatusOK, views.ExpectationTime(page))
}

func (a *App) timeJSON(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	f, t, series, err := a.throughTime(c.Request().Context(), q)
	if err != nil {
		return err
	}
	noteUnused(c, f)
	return writeJSON(c, http.StatusOK, struct {
		Series   []expectation.SeriesPoint `json:"series"`
		Seed     uint64                    `json:"seed"`
		Cautions []string                  `json:"cautions"`
	}{series, t.Seed, expectation.Cautions()})
}

// deepTimeParameters are what the test on ancient rows takes beside the
// filter.
var deepTimeParameters = []string{"response", "measured_line"}

func (a *App) deepTime(c echo.Context) (url.Values, catalogue.Filter, *expectation.DeepTimeResult, error) {
	q, err := targetParams(c)
	if err != nil {
		return q, catalogue.Filter{}, nil, err
	}
	if err := allow(q, deepTimeParameters, catalogue.FilterParameters); err != nil {
		return q, catalogue.Filter{}, nil, err
	}
	f, err := filterOf(q)
	if err != nil {
		return q, f, nil, err
	}
	t, err := targetOf(onlyNames(q, deepTimeParameters))
	if err != nil {
		return q, f, nil, err
	}
	ctx, fit := c.Request().Context(), fitFilter(f, "")
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return q, f, nil, err
	}
	key := fmt.Sprintf("deep time|%d|%s|%s|%s", rev, fit.Values().Encode(), t.Response, t.MeasuredLine)
	v, err := a.fits.do(ctx, key, func(ctx context.Context) (any, error) {
		chosen, err := a.settingsFor(ctx, fit.Release)
		if err != nil {
			return nil, err
		}
		rows, err := a.statsRowsOf(ctx, fit, chosen.Climate)
		if err != nil {
			return nil, err
		}
		return expectation.DeepTime(ctx, rows, expectation.Options{
			Response: t.Response, MeasuredLine: t.MeasuredLine, Cluster: "parent_deposit", Seed: fitSeed, ClassLimits: chosen.ClassLimits, Climate: chosen.Climate,
		})
	})
	if err != nil {
		return q, f, nil, err
	}
	return q, f, v.(*expectation.DeepTimeResult), nil
}

func (a *App) deepTimePage(c echo.Context) error {
	q, f, res, err := a.deepTime(c)
	if err != nil {
		return a.filterRefused(c, q, filterPage{title: "The deep-time test", nav: "expectation", question: "Do ancient systems tell the Coriolis parameter from its rivals?",
			action: "Test", own: deepTimeParameters}, err)
	}
	p := a.page(c, "The deep-time test", "expectation")
	p.Query = withoutEmpty(q)
	p.JSON = withQuery("/expectation/deep-time.json", p.Query)
	if p.Notice == "" {
		p.Notice = unusedOfTables(f)
	}
	page := views.DeepTimePage{Page: p, Result: res, Filter: f}
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.DeepTime(page))
}

func (a *App) deepTimeJSON(c echo.Context) error {
	_, f, res, err := a.deepTime(c)
	if err != nil {
		return err
	}
	noteUnused(c, f)
	return writeJSON(c, http.StatusOK, res)
}

// reportTargets is how many targets one report takes: it is read by a person.
const reportTargets = 12

// reportPage is a report on one target, from the address or the body, or on a
// few, from a CSV in the field targets.
func (a *App) reportPage(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	posted := c.Request().Method == http.MethodPost
	table := strings.TrimSpace(q.Get("targets"))
	q = withoutEmpty(q)
	q.Del("targets")
	refuse := func(err error) error { return a.expectationRefused(c, a.expectationFrame(c, q, posted), err) }
	if err := allow(q, targetParameters, catalogue.FilterParameters); err != nil {
		return refuse(err)
	}
	f, err := filterOf(q)
	if err != nil {
		return refuse(err)
	}
	queries := []namedTarget{{query: q}}
	if table != "" {
		if queries, err = fewTargets(table, q); err != nil {
			return err
		}
	}
	report := views.ExpectationReport{Page: a.page(c, "Report", "expectation"), Filter: f, Version: Version, Posted: posted, Credits: earth.Credits()}
	report.Query = q
	for _, n := range queries {
		one, err := a.reportOn(c, n, f, posted)
		if err != nil {
			return refuse(err)
		}
		report.Targets = append(report.Targets, one)
	}
	if report.Sources, err = a.sourcesOf(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.ExpectationReportPage(report))
}

func (a *App) reportOn(c echo.Context, n namedTarget, f catalogue.Filter, posted bool) (views.ExpectationPage, error) {
	page := a.expectationFrame(c, n.query, posted)
	page.Query, page.Filter, page.Name, page.Report = n.query, f, n.name, true
	t, err := targetOf(n.query)
	if err == nil {
		page.Target = t
		page.Result, err = a.expect(c.Request().Context(), f, t)
	}
	if err != nil {
		if n.name == "" {
			return page, err
		}
		page.Result, page.Refused = nil, rowError(err)
		return page, nil
	}
	page.Days, err = dayCurves(page.Result)
	return page, err
}

// namedTarget is one row of a table of targets.
type namedTarget struct {
	name  string
	query url.Values
}

// fewTargets reads a short table of targets; a column called name names them.
func fewTargets(table string, base url.Values) ([]namedTarget, error) {
	r := targetReader(strings.NewReader(table))
	b := &batch{}
	if err := b.readHeader(r); err != nil {
		return nil, err
	}
	var out []namedTarget
	for {
		row, err := r.Read()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil && !errors.Is(err, csv.ErrFieldCount) {
			return nil, badTable("The table of targets could not be read: " + err.Error())
		}
		if len(out) == reportTargets {
			return nil, badTable("A report takes at most " + strconv.Itoa(reportTargets) + " targets. Send the whole file to /expectation.csv")
		}
		n := namedTarget{name: "Target " + strconv.Itoa(len(out)+1), query: withValues(base)}
		for i, column := range b.columns {
			if i >= len(row) || strings.TrimSpace(row[i]) == "" {
				continue
			}
			switch v := strings.TrimSpace(catalogue.Plain(row[i])); {
			case column == "name":
				n.name = v
			case slices.Contains(targetParameters, column):
				n.query.Set(column, v)
			}
		}
		out = append(out, n)
	}
	if len(out) == 0 {
		return nil, badTable("The table of targets has no rows below its header")
	}
	return out, nil
}

// sourcesOf lists the papers and surveys that the rows under f come from.
func (a *App) sourcesOf(ctx context.Context, f catalogue.Filter) ([]views.ReportSource, error) {
	rows, err := a.store.Rows(ctx, fitFilter(f, ""))
	if err != nil {
		return nil, err
	}
	var out []views.ReportSource
	at := map[string]int{}
	for _, r := range rows {
		i, ok := at[r.Source]
		if !ok {
			i = len(out)
			at[r.Source] = i
			out = append(out, views.ReportSource{Citation: r.Source, DOI: r.SourceDOI})
		}
		out[i].Rows++
	}
	slices.SortFunc(out, func(a, b views.ReportSource) int { return strings.Compare(a.Citation, b.Citation) })
	return out, nil
}
