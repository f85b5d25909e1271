package main

import (
	"cmp"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"net/http"
	"net/url"
	"path"
	"slices"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/catalogue/planform"
	"fathombend/stats"
	"fathombend/views"
)

// system is the page of one system, and its twins by suffix.
func (a *App) system(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"release", "private"}); err != nil {
		return err
	}
	f, err := filterOf(q)
	if err != nil {
		return err
	}
	slug, err := url.PathUnescape(c.Param("slug"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such system here.")
	}
	suffix := path.Ext(slug)
	if suffix != ".json" && suffix != ".geojson" {
		suffix = ""
	}
	slug = strings.TrimSuffix(slug, suffix)
	detail, err := a.store.SystemAt(c.Request().Context(), slug, f.Release)
	if err != nil && f.Release == "" && catalogue.CodeOf(err) == catalogue.NotFound {
		return a.goneOr(c, slug, suffix, err)
	}
	if err != nil {
		return err
	}
	switch suffix {
	case ".json":
		return a.systemJSON(c, detail)
	case ".geojson":
		return writeGeoJSON(c, systemFeatures(detail))
	}
	return a.systemPage(c, detail, f)
}

// systemPage shows a system as of the release of f.
func (a *App) systemPage(c echo.Context, d *catalogue.Detail, f catalogue.Filter) error {
	ctx := c.Request().Context()
	p := views.SystemPage{Detail: d, Item: meridianItem(d.Best()), Land: land.Rings(), LandCredit: land.Credit}
	var err error
	if p.Lines, err = a.systemLines(ctx, d); err != nil {
		return err
	}
	if p.Doubts, err = a.doubts(ctx, d, p.Lines, f.Release); err != nil {
		return err
	}
	if err := a.systemFit(ctx, f, &p); err != nil {
		return err
	}
	p.Page = a.page(c, d.Name, "systems")
	base := "/systems/" + d.Slug
	p.JSON, p.GeoJSON = withQuery(base+".json", f.Values()), withQuery(base+".geojson", f.Values())
	f.Text = `"` + d.Name + `"`
	p.CSV = withQuery("/systems.csv", f.Values())
	return render(c, http.StatusOK, views.System(p))
}

// systemLines measures the stored lines anew for their plan and profile, once
// a revision.
func (a *App) systemLines(ctx context.Context, d *catalogue.Detail) ([]views.SystemLine, error) {
	key := fmt.Sprintf("lines|%s|%d", d.Slug, d.Revision)
	for _, l := range d.Centrelines {
		key += fmt.Sprintf("|%d", l.ID)
	}
	v, err := a.fits.do(ctx, key, func(context.Context) (any, error) {
		var out []views.SystemLine
		for _, l := range d.Centrelines {
			out = append(out, drawnLine(l))
		}
		return out, nil
	})
	if err != nil {
		return nil, err
	}
	return v.([]views.SystemLine), nil
}

// drawnLine measures one stored line with the settings stored beside it. A
// line that cannot be measured says why in its place.
func drawnLine(l catalogue.Centreline) views.SystemLine {
	out := views.SystemLine{Measurement: l.Measurement}
	var s planform.Settings
	if l.Settings != "" {
		if err := json.Unmarshal([]byte(l.Settings), &s); err != nil {
			s = planform.Settings{}
		}
	}
	s.Z, s.EPSG = "elevation", "" // as stored: WGS84, third coordinate up
	lines, refused, err := planform.Read([]byte(l.Line), "application/geo+json", "", s)
	switch {
	case err == nil && len(lines) == 0 && len(refused) > 0:
		out.Why = refused[0].Reason
		return out
	case err == nil && len(lines) > 0:
		out.Measured, err = planform.Measure(lines[0], s)
	}
	var in interface{ Input() (string, string) }
	if errors.As(err, &in) {
		_, out.Why = in.Input()
	} else if err != nil {
		out.Why = "The line could not be measured."
	}
	return out
}

// systemFit places the system among all submarine systems: the default
// regression on the Coriolis parameter, and the nearest in it.
func (a *App) systemFit(ctx context.Context, f catalogue.Filter, p *views.SystemPage) error {
	req, err := a.offeredRequest(ctx, f.Release)
	if err != nil {
		return err
	}
	analysis, err := a.analyse(ctx, catalogue.Filter{Release: f.Release}, req)
	var refused interface{ Input() (string, string) }
	if errors.As(err, &refused) {
		_, p.FitWhy = refused.Input()
		return nil
	}
	if err != nil {
		return err
	}
	i := slices.IndexFunc(analysis.Models, func(m stats.Model) bool { return m.Model == "linear:coriolis" && m.Failure == "" })
	if i < 0 {
		p.FitWhy = "No regression on the Coriolis parameter could be fitted on this catalogue."
		return nil
	}
	p.Fit = &analysis.Models[i]
	p.FitRows, p.FitClusters = analysis.Rows, analysis.Clusters
	p.Used = analysis.Used
	if p.Item.Kind != "submarine" {
		p.FitWhy = "This is a control: a " + p.Item.Kind + ". The line is fitted on submarine systems only."
	}
	p.NearF = neighbours(analysis.Used, p.Detail.Slug, "coriolis")
	p.NearLatitude = neighbours(analysis.Used, p.Detail.Slug, "abs_latitude")
	return nil
}

// neighbours are the five systems whose predictor is nearest to that of slug.
func neighbours(rows []stats.UsedRow, slug, predictor string) []views.Neighbour {
	at := math.NaN()
	for _, r := range rows {
		if r.System == slug && isFinite(r.PredictorOf[predictor]) {
			at = r.PredictorOf[predictor]
			break
		}
	}
	if math.IsNaN(at) {
		return nil
	}
	seen := map[string]bool{slug: true}
	var out []views.Neighbour
	for _, r := range rows {
		v, ok := r.PredictorOf[predictor]
		if seen[r.System] || !ok || !isFinite(v) || !isFinite(r.Response) {
			continue
		}
		seen[r.System] = true
		out = append(out, views.Neighbour{Slug: r.System, Name: r.SystemName, At: v, P: r.Response, Distance: math.Abs(v - at)})
	}
	slices.SortStableFunc(out, func(a, b views.Neighbour) int {
		return cmp.Or(cmp.Compare(a.Distance, b.Distance), cmp.Compare(a.Slug, b.Slug))
	})
	return out[:min(5, len(out))]
}
