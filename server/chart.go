package main

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"net/http"
	"net/url"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

var chartParameters = []string{"view", "at", "zoom", "colour"}

func (a *App) routesChart(e *echo.Echo) {
	get(e, "/chart", a.chart)
	get(e, "/chart.json", a.chartJSON)
	get(e, "/chart/lines.json", a.chartLinesJSON)
	get(e, "/chart/land.json", chartLand)
}

// chartQuestion reads the address of the chart or of one of its twins, which
// may take more parameters.
func chartQuestion(c echo.Context, more ...string) (q url.Values, f catalogue.Filter, v views.ChartView, colour string, err error) {
	if q, err = params(c); err != nil {
		return
	}
	if err = allow(q, chartParameters, catalogue.FilterParameters, more); err != nil {
		return
	}
	if f, err = filterOf(q); err != nil {
		return
	}
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	if v, err = chartView(q); err != nil {
		return
	}
	colour, err = oneOf(q, "colour", views.ChartColours[0], views.ChartColours)
	return
}

// chartView reads view, at and zoom. A changed view without a place starts
// whole: the place of another view may lie outside of it.
func chartView(q url.Values) (v views.ChartView, err error) {
	name, err := oneOf(q, "view", "world", []string{"world", "north", "south"})
	if err != nil {
		return v, err
	}
	v = views.NewChartView(name)
	if v.Zoom, err = number(q, "zoom", 1, 1, views.ChartMaxZoom); err != nil {
		return v, err
	}
	at := strings.TrimSpace(q.Get("at"))
	if at == "" {
		return v, nil
	}
	lat, lon, ok := strings.Cut(at, ",")
	y, erry := strconv.ParseFloat(strings.TrimSpace(lat), 64)
	x, errx := strconv.ParseFloat(strings.TrimSpace(lon), 64)
	if !ok || erry != nil || errx != nil || !(math.Abs(y) <= 90) || !(math.Abs(x) <= 360) {
		return v, &badInput{"at", strconv.Quote(clip(at)) + " is no place. Expected latitude,longitude in degrees, as 61.5,-20"}
	}
	// A polar view that is whole, or asked for a place outside of it, is shown
	// as it is.
	if name == "north" && y < 30 || name == "south" && y > -30 || name != "world" && v.Zoom == 1 {
		v.Zoom = 1
		return v, nil
	}
	v.Lat, v.Lon = y, math.Remainder(x, 360)
	return v, nil
}

// chartAnswer is what is drawn of one filter, once a revision.
type chartAnswer struct {
	rows  []catalogue.Row // the row that stands for each system
	items []views.ChartItem
	none  int // systems without a place
}

func (a *App) chartAnswer(ctx context.Context, f catalogue.Filter) (*chartAnswer, error) {
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("chart|%d|%s", rev, f.Values().Encode()), func(ctx context.Context) (any, error) {
		f.Sort = ""
		n, err := a.store.CountSystems(ctx, f)
		if err != nil {
			return nil, err
		}
		// Rows are large: room that grows would copy each of them several times.
		out := &chartAnswer{rows: make([]catalogue.Row, 0, n), items: make([]views.ChartItem, 0, n)}
		err = a.store.EachSystem(ctx, f, func(r catalogue.Row) error {
			if !r.LatitudeDeg.Valid || !r.LongitudeDeg.Valid {
				out.none++
				return nil
			}
			out.rows = append(out.rows, r)
			out.items = append(out.items, views.ChartItem{
				MeridianItem: meridianItem(r), Lat: r.LatitudeDeg.V, Lon: catalogue.NormalLongitude(r.LongitudeDeg.V),
				Line: len(r.WindowSinuosities) > 0, Invented: r.Invented, Private: r.Private, Coarse: r.Coarse,
			})
			return nil
		})
		return out, err
	})
	if err != nil {
		return nil, err
	}
	return v.(*chartAnswer), nil
}

// chartPage fills everything but the frame.
func (a *App) chartPage(c echo.Context, more ...string) (p views.ChartPage, err error) {
	_, f, v, colour, err := chartQuestion(c, more...)
	if err != nil {
		return p, err
	}
	ctx := c.Request().Context()
	p = views.ChartPage{Filter: f, View: v, Release: f.Release}
	held, err := a.chartAnswer(ctx, f)
	if err != nil {
		return p, err
	}
	p.Items, p.Colouring = coloured(held, colour)
	if b, near := p.LinesWanted(); near {
		if p.Lines, p.LinesMore, err = a.chartLines(ctx, f, b); err != nil {
			return p, err
		}
	}
	filter := f.Values()
	p.FullQuery = withValues(filter, url.Values{})
	if colour != views.ChartColours[0] {
		p.FullQuery.Set("colour", colour)
	}
	p.Answers = withQuery("/chart.json", p.FullQuery)
	p.LinesAt = withQuery("/chart/lines.json", filter)
	p.FineAt = "/chart/land.json?v=" + landVersion
	return p, nil
}

// coloured are the systems with the class each falls into.
func coloured(held *chartAnswer, colour string) ([]views.ChartItem, views.ChartColouring) {
	key := views.NewChartColouring(colour, held.rows)
	items := make([]views.ChartItem, len(held.items))
	for i, it := range held.items {
		it.Step = key.Of[i]
		items[i] = it
	}
	return items, key
}

// chart is the map with its list.
func (a *App) chart(c echo.Context) error {
	p, err := a.chartPage(c)
	if err != nil {
		q, _ := params(c)
		return a.filterRefused(c, q, filterPage{title: "Chart", nav: "chart", question: "Where are the channels?", action: "Show", own: chartParameters}, err)
	}
	if p.Facets, err = a.facets(c.Request().Context(), p.Filter); err != nil {
		return err
	}
	p.Page = a.page(c, "Chart", "chart")
	if p.Notice == "" {
		q, _ := params(c)
		f, _ := filterOf(q)
		p.Notice = unusedOfTables(f)
	}
	p.Wide = true
	p.JSON = p.Answers
	table := p.Filter.Values()
	p.CSV, p.GeoJSON = withQuery("/systems.csv", table), withQuery("/systems.geojson", table)
	return render(c, http.StatusOK, views.Chart(p))
}

// chartSystemJSON is one system of /chart.json.
type chartSystemJSON struct {
	Slug           string   `json:"slug"`
	Name           string   `json:"name"`
	Latitude       float64  `json:"latitude_deg"`
	Longitude      float64  `json:"longitude_deg"`
	Palaeolatitude *float64 `json:"palaeolatitude_deg"`
	AgeMa          *float64 `json:"age_ma"`
	Ancient        bool     `json:"ancient"`
	Kind           string   `json:"kind"`
	Sinuosity      *float64 `json:"sinuosity"`
	SinuosityKind  string   `json:"sinuosity_kind"`
	ValleySlope    *float64 `json:"valley_slope"`
	WidthM         *float64 `json:"channel_width_m"`
	Grade          string   `json:"grade"`
	Step           int      `json:"step"`
	Invented       bool     `json:"invented"`
	Private        bool     `json:"private,omitempty"`
	PlaceRounded   bool     `json:"place_rounded,omitempty"`
}

type chartJSON struct {
	Colour       string            `json:"colour"`
	Title        string            `json:"title"`
	Steps        []views.ChartStep `json:"steps"`
	WithoutPlace int               `json:"without_place"`
	InventedRows int               `json:"invented_rows"`
	PrivateRows  int               `json:"private_rows,omitempty"`
	Systems      []chartSystemJSON `json:"systems"`
}

// chartJSON is what the map draws: one point a system, and the key.
func (a *App) chartJSON(c echo.Context) error {
	_, f, _, colour, err := chartQuestion(c)
	if err != nil {
		return err
	}
	held, err := a.chartAnswer(c.Request().Context(), f)
	if err != nil {
		return err
	}
	items, key := coloured(held, colour)
	out := chartJSON{Colour: colour, Title: key.Title, Steps: key.Steps, WithoutPlace: held.none, Systems: []chartSystemJSON{}}
	for i, it := range items {
		r := held.rows[i]
		if it.Invented {
			out.InventedRows++
		}
		if it.Private {
			out.PrivateRows++
		}
		out.Systems = append(out.Systems, chartSystemJSON{
			Slug: it.Slug, Name: it.Name, Latitude: it.Lat, Longitude: it.Lon, Palaeolatitude: orNull(r.PalaeolatitudeDeg), AgeMa: orNull(r.AgeMa),
			Ancient: it.Ancient, Kind: it.Kind, Sinuosity: orNull(r.Sinuosity), SinuosityKind: it.PKind, ValleySlope: orNull(r.ValleySlope),
			WidthM: orNull(r.ChannelWidthM), Grade: it.Grade, Step: it.Step, Invented: it.Invented, Private: it.Private, PlaceRounded: it.Coarse,
		})
	}
	return writeJSON(c, http.StatusOK, out)
}

// Limits of the lines of one view: more vertices are not seen, more lines hide
// each other.
const (
	chartLineLimit  = 250
	chartLinePoints = 400
)

// chartLines are the stored lines of the systems under a filter in a box.
func (a *App) chartLines(ctx context.Context, f catalogue.Filter, b catalogue.BBox) (out []views.ChartLine, more int, err error) {
	lines, total, err := a.store.LinesIn(ctx, f, b, chartLineLimit)
	if err != nil {
		return nil, 0, err
	}
	for _, l := range lines {
		var g struct{ Coordinates [][]float64 }
		if err := json.Unmarshal([]byte(l.Line), &g); err != nil {
			return nil, 0, fmt.Errorf("line %d: %w", l.ID, err)
		}
		line := views.ChartLine{Slug: l.System, Measurement: l.Measurement}
		step := max(1, (len(g.Coordinates)+chartLinePoints-1)/chartLinePoints)
		for k, v := range g.Coordinates {
			if len(v) >= 2 && (k%step == 0 || k == len(g.Coordinates)-1) {
				line.Points = append(line.Points, [2]float64{v[0], v[1]})
			}
		}
		out = append(out, line)
	}
	return out, total - len(lines), nil
}

type chartLinesAnswer struct {
	Lines []chartLineJSON `json:"lines"`
	More  int             `json:"more"` // lines in the box that are not among them
}

type chartLineJSON struct {
	Slug        string       `json:"slug"`
	Measurement string       `json:"measurement"`
	Coordinates [][2]float64 `json:"coordinates"`
}

// chartLinesJSON is the lines inside bbox, thinned for drawing.
func (a *App) chartLinesJSON(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"in"}, catalogue.FilterParameters); err != nil {
		return err
	}
	f, err := filterOf(q)
	if err != nil {
		return err
	}
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	// "in" is the box of the view; bbox remains the filter's own.
	box, err := filterOf(url.Values{"bbox": q["in"]})
	if err != nil || box.BBox == nil {
		return &badInput{"in", "expected west,south,east,north in degrees"}
	}
	lines, more, err := a.chartLines(c.Request().Context(), f, *box.BBox)
	if err != nil {
		return err
	}
	out := chartLinesAnswer{Lines: []chartLineJSON{}, More: more}
	for _, l := range lines {
		out.Lines = append(out.Lines, chartLineJSON{l.Slug, l.Measurement, l.Points})
	}
	return writeJSON(c, http.StatusOK, out)
}

// landVersion changes when the outlines do.
const landVersion = "1"

// chartLand is the finer outline for close views: rings of differences in
// hundredths of a degree, longitude first, outer rings anticlockwise.
func chartLand(c echo.Context) error {
	var rings [][]int
	for _, r := range views.ChartLand(true) {
		ring := make([]int, 0, 2*len(r))
		x, y := 0, 0
		for _, v := range r {
			nx, ny := int(math.Round(v[0]*100)), int(math.Round(v[1]*100))
			ring = append(ring, nx-x, ny-y)
			x, y = nx, ny
		}
		rings = append(rings, ring)
	}
	if c.QueryParam("v") == landVersion {
		c.Response().Header().Set("Cache-Control", "public, max-age=31536000, immutable")
	}
	return c.JSON(http.StatusOK, rings)
}
