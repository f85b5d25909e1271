package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"net/http"
	"net/url"
	"slices"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/expectation"
	"fathombend/views"
)

var meridianParameters = []string{"fold", "colour"}

func (a *App) routesMeridian(e *echo.Echo) {
	get(e, "/", a.meridian)
}

// meridian is the opening page.
func (a *App) meridian(c echo.Context) error {
	m, q, err := a.meridianQuestion(c, a.meridianWatched)
	if err != nil {
		return a.filterRefused(c, q, filterPage{title: "Meridian", nav: "meridian", question: "Do channels straighten towards the poles?", action: "Show", own: meridianParameters}, err)
	}
	m.Page = a.page(c, "Meridian", "meridian")
	if m.LinkedData, err = a.catalogueLinkedData(c.Request().Context(), a.baseAddress(c)); err != nil {
		return err
	}
	m.Wide = true
	if m.Notice == "" {
		f, _ := filterOf(q)
		m.Notice = unusedOfTables(f)
	}
	table := m.Filter.Values()
	m.CSV, m.JSON, m.GeoJSON = withQuery("/systems.csv", table), withQuery("/systems.json", table), withQuery("/systems.geojson", table)
	m.FigureHref = withQuery("/figures/meridian.svg", withoutEmpty(q))
	if m.Working {
		askAgain(c)
		return render(c, http.StatusAccepted, views.Meridian(m))
	}
	return render(c, http.StatusOK, views.Meridian(m))
}

// meridianFigure is the drawing alone, as a file.
func (a *App) meridianFigure(c echo.Context) error {
	kind, width, err := figureAsked(c)
	if err != nil {
		return err
	}
	m, q, err := a.meridianQuestion(c, a.meridianAnswer, "width")
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	m.InventedRows = a.invented(ctx)
	q = withoutEmpty(q)
	q.Del("width")
	from, err := a.figureSource(ctx, m.Filter.Release, q)
	if err != nil {
		return err
	}
	b, err := m.File(kind, width, from)
	if err != nil {
		return err
	}
	return writeFigureFile(c, kind, b)
}

// meridianQuestion reads the address and has it answered, without the frame.
func (a *App) meridianQuestion(c echo.Context, answer func(context.Context, catalogue.Filter) (*views.MeridianPage, error), more ...string) (m views.MeridianPage, q url.Values, err error) {
	q, err = params(c)
	if err != nil {
		return m, q, err
	}
	if err := allow(q, meridianParameters, catalogue.FilterParameters, more); err != nil {
		return m, q, err
	}
	f, err := filterOf(q)
	if err != nil {
		return m, q, err
	}
	fold, err := oneOf(q, "fold", "no", []string{"no", "yes"})
	if err != nil {
		return m, q, err
	}
	colour, err := oneOf(q, "colour", "slope", views.MeridianColours)
	if err != nil {
		return m, q, err
	}
	held, err := answer(c.Request().Context(), f)
	if err != nil {
		return m, q, err
	}
	m = *held
	m.Filter, m.Folded, m.Colour = f, fold == "yes", colour
	return m, q, nil
}

// meridianAnswer computes what the opening page shows of one filter, once a
// catalogue revision.
func (a *App) meridianAnswer(ctx context.Context, f catalogue.Filter) (*views.MeridianPage, error) {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("meridian|%d|%s", rev, f.Values().Encode()), func(ctx context.Context) (any, error) {
		return a.computeMeridian(ctx, f)
	})
	if err != nil {
		return nil, err
	}
	return v.(*views.MeridianPage), nil
}

// warm computes the opening page, so that the first visitor does not wait.
func (a *App) warm(ctx context.Context) {
	if _, err := a.meridianAnswer(ctx, catalogue.Filter{}); err != nil {
		a.log.Error("the opening page could not be prepared", "err", err)
	}
}

func (a *App) computeMeridian(ctx context.Context, f catalogue.Filter) (*views.MeridianPage, error) {
	drawn, err := a.meridianDrawn(ctx, f)
	if err != nil || drawn.Total == 0 {
		return drawn, err
	}
	m := *drawn
	if err := a.meridianHeadline(ctx, f, &m); err != nil {
		return nil, err
	}
	return &m, a.meridianExpected(ctx, f, &m)
}

// drawMeridian is the page without what is fitted.
func (a *App) drawMeridian(ctx context.Context, f catalogue.Filter) (*views.MeridianPage, error) {
	m := &views.MeridianPage{}
	err := a.store.EachSystem(ctx, f, func(r catalogue.Row) error {
		m.Items = append(m.Items, meridianItem(r))
		return nil
	})
	if err != nil {
		return nil, err
	}
	m.Passing = len(m.Items)
	m.Items = thinnedItems(m.Items, views.MeridianDrawn)
	m.Layouts = views.NewMeridianLayouts(m.Items)
	if m.Total, err = a.store.CountSystems(ctx, catalogue.Filter{Release: f.Release}); err != nil || m.Total == 0 {
		return m, err
	}
	m.Facets, err = a.store.Facets(ctx, f)
	return m, err
}

// meridianHeadline asks the default question of the regression page. A refusal
// (too few rows) is an answer too.
func (a *App) meridianHeadline(ctx context.Context, f catalogue.Filter, m *views.MeridianPage) error {
	req, err := a.offeredRequest(ctx, f.Release)
	if err != nil {
		return err
	}
	analysis, err := a.analyse(ctx, f, req)
	var refused interface{ Input() (string, string) }
	switch {
	case errors.As(err, &refused):
		_, why := refused.Input()
		m.Headline = "No answer from these systems: " + why
		return nil
	case err != nil:
		return err
	}
	m.Headline, m.Rows, m.Clusters = analysis.Headline, analysis.Rows, analysis.Clusters
	return nil
}

// meridianExpected asks for one new system at each fifteen degrees today.
func (a *App) meridianExpected(ctx context.Context, f catalogue.Filter, m *views.MeridianPage) error {
	fits, err := a.expectationFits(ctx, f, "", "")
	if err != nil {
		return err
	}
	for lat := 0.0; lat <= 75; lat += 15 {
		t := expectation.NewTarget()
		t.Palaeolatitude, t.PalaeolatitudeSE, t.Age, t.AgeSE = lat, 0, 0, 0
		e := views.MeridianExpected{AbsLatitude: lat}
		r, err := fits.ExpectCombined(ctx, t)
		if err != nil {
			return err
		}
		m.ExpectedRows, m.ExpectedFrom = r.Rows, r.Clusters
		m.Response = r.Response + " sinuosity"
		if r.Response == "any" {
			m.Response = "sinuosity (any kind)"
		}
		switch q := r.Combined.Sinuosity; {
		case q == nil || !isFinite(q.P10+q.P50+q.P90):
			e.Why = "Too few systems to expect from."
		case !nearSystems(m.Items, lat):
			e.Why = fmt.Sprintf("No submarine system within 7.5 degrees of %.0f degrees, north or south.", lat)
		default:
			e.P10, e.P50, e.P90 = q.P10, q.P50, q.P90
		}
		m.Expected = append(m.Expected, e)
	}
	if !slices.ContainsFunc(m.Expected, func(e views.MeridianExpected) bool { return e.Why == "" }) {
		m.Expected = nil
	}
	return a.meridianSpin(ctx, fits, m)
}

// spinLatitude is where the inset asks what the faster spin of the past does:
// half-way in sin(latitude), where f is half of the pole's.
const spinLatitude = 30

// meridianSpin asks for one palaeolatitude at today's spin and at three ages.
func (a *App) meridianSpin(ctx context.Context, fits *expectation.Fits, m *views.MeridianPage) error {
	if len(m.Expected) == 0 || !nearSystems(m.Items, spinLatitude) {
		return nil
	}
	m.SpinLatitude = spinLatitude
	for _, age := range []float64{0, 70, 300, 600} {
		t := expectation.NewTarget()
		t.Palaeolatitude, t.PalaeolatitudeSE, t.Age, t.AgeSE = spinLatitude, 0, age, 0
		r, err := fits.Expect(ctx, t)
		if err != nil {
			return err
		}
		var coriolis *expectation.Quantiles
		for _, e := range r.Explanations {
			if e.Name == "coriolis" {
				coriolis = e.Sinuosity
			}
		}
		if coriolis == nil || !isFinite(coriolis.P10+coriolis.P50+coriolis.P90) {
			m.Spin = nil
			return nil
		}
		m.Spin = append(m.Spin, views.MeridianSpin{AgeMa: age, DayH: r.DayLength.Value, Ratio: r.RotationRatio,
			MeridianExpected: views.MeridianExpected{AbsLatitude: spinLatitude, P10: coriolis.P10, P50: coriolis.P50, P90: coriolis.P90}})
	}
	return nil
}

// nearSystems says whether a submarine system stands in the fifteen degrees
// around lat.
func nearSystems(items []views.MeridianItem, lat float64) bool {
	return slices.ContainsFunc(items, func(i views.MeridianItem) bool {
		return i.Kind == "submarine" && math.Abs(math.Abs(i.Latitude)-lat) <= 7.5
	})
}

// presentMa: rows older than this sit at their palaeolatitude, as in the fits.
const presentMa = 5.0

func meridianItem(r catalogue.Row) views.MeridianItem {
	i := views.MeridianItem{
		Slug: r.System, Name: r.SystemName, P: num(r.Sinuosity), PKind: r.SinuosityKind, Line: r.MeasuredLine,
		Latitude: num(r.LatitudeDeg), AgeMa: num(r.AgeMa), Slope: num(r.ValleySlope), WidthM: num(r.ChannelWidthM),
		Kind: r.Kind, Feeder: r.Feeder, Grade: r.Grade,
	}
	i.Ancient = r.AgeMa.Valid && r.AgeMa.V > presentMa
	if i.Ancient && r.PalaeolatitudeDeg.Valid {
		i.Latitude, i.Restored = r.PalaeolatitudeDeg.V, true
	}
	return i
}
