package main

import (
	"context"
	"fmt"
	"net/http"
	"net/url"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/stats"
	"fathombend/views"
)

// nextParameters are what the question about the next measurement takes beside
// the filter: some of a regression's, and its own.
var nextParameters = []string{"term", "beside", "explanations", "poleward", "draws", "response", "measured_line", "k", "cluster", "level", "time", "pick", "seed"}

// nextTerms are the predictors with a place on the latitude-slope grid.
var nextTerms = []string{"abs_latitude", "sin_abs_latitude", "coriolis", "valley_slope", "log10_slope"}

// nextQuestion reads where one more system would help.
func nextQuestion(q url.Values) (catalogue.Filter, stats.Request, stats.NextOptions, error) {
	var o stats.NextOptions
	req := stats.DefaultRequest()
	if err := allow(q, nextParameters, catalogue.FilterParameters); err != nil {
		return catalogue.Filter{}, req, o, err
	}
	if err := once(onlyNames(q, nextParameters), "explanations"); err != nil {
		return catalogue.Filter{}, req, o, err
	}
	f, err := filterOf(q)
	if err != nil {
		return f, req, o, err
	}
	if req, err = regressionRequest(onlyNames(q, []string{"response", "measured_line", "k", "cluster", "level", "time", "pick", "seed"})); err != nil {
		return f, req, o, err
	}
	if o.Term, err = oneOf(q, "term", "abs_latitude", nextTerms); err != nil {
		return f, req, o, err
	}
	if o.Beside, err = oneOf(q, "beside", "", nextTerms); err != nil {
		return f, req, o, err
	}
	if o.Beside == "" {
		o.Beside = "log10_slope"
		if o.Term == "valley_slope" || o.Term == "log10_slope" {
			o.Beside = "abs_latitude"
		}
	}
	o.Explanations = [2]string{"coriolis", "feeder"}
	if pair := commaList(q["explanations"]); len(pair) == 2 {
		o.Explanations = [2]string(pair)
	} else if len(pair) != 0 {
		return f, req, o, &badInput{"explanations", "expected two predictors or categories, as in explanations=coriolis,feeder"}
	}
	if o.Poleward, err = number(q, "poleward", 50, 0, 84); err != nil {
		return f, req, o, err
	}
	o.Draws, err = whole(q, "draws", 200, 20, 2000)
	return f, req, o, err
}

func (a *App) next(ctx context.Context, f catalogue.Filter, req stats.Request, o stats.NextOptions) (*stats.NextAnswer, error) {
	f = fitFilter(f, "")
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("next|%d|%s|%+v|%+v", rev, f.Values().Encode(), req, o), func(ctx context.Context) (any, error) {
		rows, err := a.store.Rows(ctx, f)
		if err != nil {
			return nil, err
		}
		chosen, err := a.settingsFor(ctx, f.Release)
		if err != nil {
			return nil, err
		}
		return stats.Next(ctx, statsRows(rows, chosen.Climate), req, o)
	})
	if err != nil {
		return nil, err
	}
	return v.(*stats.NextAnswer), nil
}

func (a *App) nextPage(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if hasEmpty(q) {
		return c.Redirect(http.StatusFound, withQuery("/regression/next", withoutEmpty(q)))
	}
	refuse := func(err error) error {
		return a.filterRefused(c, q, filterPage{title: "Where to measure next", nav: "regression", question: "Where should the next system be measured?", action: "Ask", own: nextParameters}, err)
	}
	f, req, o, err := nextQuestion(q)
	if err != nil {
		return refuse(err)
	}
	ctx := c.Request().Context()
	p := a.page(c, "Where to measure next", "regression")
	p.Query = q
	p.JSON = withQuery("/regression/next.json", q)
	if p.Notice == "" {
		p.Notice = unusedOfTables(f)
	}
	page := views.NextPage{Page: p, Request: req, Options: o, Filter: f, Terms: nextTerms, Categories: stats.Categories, Land: land.Rings()}
	if page.Facets, err = a.facets(ctx, f); err != nil {
		return refuse(err)
	}
	if page.Answer, err = a.next(ctx, f, req, o); err != nil {
		return refuse(err)
	}
	return render(c, http.StatusOK, views.Next(page))
}

func (a *App) nextJSON(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	f, req, o, err := nextQuestion(q)
	if err != nil {
		return err
	}
	noteUnused(c, f)
	answer, err := a.next(c.Request().Context(), f, req, o)
	if err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, answer)
}
