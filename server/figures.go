package main

import (
	"context"
	"fmt"
	"net/http"
	"net/url"
	"path"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/views"
)

// routesFigures are the figures that are no twin of one page alone; those of
// the regression and the expectation stand beside their pages.
func (a *App) routesFigures(e *echo.Echo) {
	for _, kind := range views.FigureKinds {
		get(e, "/figures/meridian."+kind, a.meridianFigure)
		get(e, "/figures/chart."+kind, a.chartFigure)
		get(e, "/figures/system."+kind, a.systemFigure)
	}
}

// figureKinds are the files a figure comes as.
var figureKinds = views.FigureKinds

// writeFigure answers with a figure as a file of its own, of the kind the
// address ends in and the width it asks for.
func (a *App) writeFigure(c echo.Context, p views.Plot) error {
	kind, width, err := figureAsked(c)
	if err != nil {
		return err
	}
	b, err := p.File(kind, width)
	if err != nil {
		return err
	}
	return writeFigureFile(c, kind, b)
}

// figureAsked is the kind and the width of the figure asked for; no width is
// the one it is drawn for.
func figureAsked(c echo.Context) (kind, width string, err error) {
	q, err := params(c)
	if err != nil {
		return "", "", err
	}
	width, err = oneOf(q, "width", "", views.FigureWidths)
	return strings.TrimPrefix(path.Ext(c.Request().URL.Path), "."), width, err
}

// writeFigureFile answers with the bytes of a figure. An SVG holds no script,
// no link and no style sheet.
func writeFigureFile(c echo.Context, kind string, b []byte) error {
	if kind == "svg" {
		c.Response().Header().Set("Content-Security-Policy", "default-src 'none'; frame-ancestors 'none'")
	}
	return c.Blob(http.StatusOK, map[string]string{"svg": "image/svg+xml", "png": "image/png", "pdf": "application/pdf"}[kind], b)
}

// figureSource says where a figure comes from: the release of the filter, or
// the catalogue at its revision, and the question.
func (a *App) figureSource(ctx context.Context, release string, question url.Values) (views.FigureSource, error) {
	from := views.FigureSource{Query: question, Program: "Fathombend " + Version}
	if release != "" {
		name, err := a.store.ReleaseName(ctx, release)
		from.Data = "Release " + name
		return from, err
	}
	rev, err := a.store.Revision(ctx)
	from.Data = fmt.Sprintf("Catalogue at revision %d", rev)
	return from, err
}

// chartFigure is the map as a file.
func (a *App) chartFigure(c echo.Context) error {
	kind, width, err := figureAsked(c)
	if err != nil {
		return err
	}
	p, err := a.chartPage(c, "width")
	if err != nil {
		return err
	}
	from, err := a.figureSource(c.Request().Context(), p.Filter.Release, withValues(p.FullQuery, p.View.Values()))
	if err != nil {
		return err
	}
	b, err := p.File(kind, width, land.Credit, from)
	if err != nil {
		return err
	}
	return writeFigureFile(c, kind, b)
}

// systemFigure is one figure of a system: its plan, its windows, its depth, or
// where it falls against the regression.
func (a *App) systemFigure(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"system", "panel", "width", "release"}); err != nil {
		return err
	}
	f, err := filterOf(url.Values{"release": q["release"]})
	if err != nil {
		return err
	}
	if q.Get("system") == "" {
		return &badInput{"system", "no system is named. Expected the name in the address of its page, as small-channel"}
	}
	ctx := c.Request().Context()
	d, err := a.store.SystemAt(ctx, q.Get("system"), f.Release)
	if err != nil {
		return err
	}
	p := views.SystemPage{Detail: d, Item: meridianItem(d.Best())}
	if p.Lines, err = a.systemLines(ctx, d); err != nil {
		return err
	}
	if err := a.systemFit(ctx, f, &p); err != nil {
		return err
	}
	p.InventedRows = a.invented(ctx)
	names, panel := p.FigureNames(), q.Get("panel")
	if len(names) == 0 {
		return &catalogue.Error{Code: catalogue.NotFound, Field: "system", Message: "no line is stored with this system and no regression could be fitted, so there is no figure of it"}
	}
	if panel == "" {
		panel = names[0]
	}
	if !slices.Contains(names, panel) {
		return &badInput{"panel", strconv.Quote(clip(panel)) + " is no figure of this system. Expected one of: " + strings.Join(names, ", ")}
	}
	from, err := a.figureSource(ctx, f.Release, withValues(f.Values(), url.Values{"system": {d.Slug}, "panel": {panel}}))
	if err != nil {
		return err
	}
	return a.writeFigure(c, p.File(panel, from))
}
