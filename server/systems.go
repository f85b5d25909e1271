package main

import (
	"bytes"
	"encoding/csv"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesSystems(e *echo.Echo) {
	get(e, "/systems", a.systems)
	get(e, "/systems.csv", a.systemsCSV)
	get(e, "/systems.json", a.systemsJSON)
	get(e, "/systems.geojson", a.systemsGeoJSON)
	get(e, "/systems/dimensions.csv", a.dimensionsCSV)
	get(e, "/systems/:slug", a.system)
}

// systemsQuestion reads the filter of a page or a twin of it; more are
// parameters beside it.
func systemsQuestion(c echo.Context, more ...string) (url.Values, catalogue.Filter, error) {
	q, err := params(c)
	if err != nil {
		return nil, catalogue.Filter{}, err
	}
	if err := allow(q, catalogue.FilterParameters, more); err != nil {
		return q, catalogue.Filter{}, err
	}
	f, err := filterOf(q)
	return q, f, err
}

// tableColumns reads which columns the table shows: names with commas between
// them, in their order, or the ticked boxes of the form. short is how the
// choice stands in an address, "" for the usual one.
func tableColumns(q url.Values) (columns []string, short string, err error) {
	for _, v := range q["columns"] {
		for _, name := range strings.Split(v, ",") {
			switch name = strings.TrimSpace(name); {
			case name == "" || slices.Contains(columns, name):
			case !slices.Contains(views.ChoosableColumns, name):
				return nil, "", &badInput{"columns", strconv.Quote(clip(name)) + " is not a column of this table. Expected names with commas between them, of: " + strings.Join(views.ChoosableColumns, ", ")}
			default:
				columns = append(columns, name)
			}
		}
	}
	if len(q["columns"]) > 1 {
		columns = views.InTableOrder(columns)
	}
	if len(columns) == 0 || slices.Equal(columns, views.TableColumns) {
		return views.TableColumns, "", nil
	}
	return columns, strings.Join(columns, ","), nil
}

// systems is the filtered table.
func (a *App) systems(c echo.Context) error {
	refuse := func(q url.Values, err error) error {
		return a.filterRefused(c, q, filterPage{title: "Systems", nav: "systems", question: "Channel systems", action: "Show", own: []string{"columns"}}, err)
	}
	q, f, err := systemsQuestion(c, "columns")
	if err != nil {
		return refuse(q, err)
	}
	columns, short, err := tableColumns(q)
	if err != nil {
		return refuse(q, err)
	}
	if given := q["columns"]; len(given) > 0 && (len(given) > 1 || given[0] != short) {
		q.Set("columns", short)
		return c.Redirect(http.StatusFound, withQuery("/systems", withoutEmpty(q)))
	}
	ctx := c.Request().Context()
	p := views.SystemsPage{Filter: f, Columns: columns}
	if p.Systems, p.Total, err = a.store.Systems(ctx, f); err != nil {
		return refuse(q, err)
	}
	if p.Facets, err = a.store.Facets(ctx, f); err != nil {
		return err
	}
	if p.Dimensions, err = a.store.DimensionQuantiles(ctx, f); err != nil {
		return err
	}
	p.Page = a.page(c, "Systems", "systems")
	p.Wide = true
	q = withoutEmpty(q)
	p.Query = q
	all := f.Values()
	p.JSON = withQuery("/systems.json", all)
	all.Del("page")
	all.Del("per_page")
	p.CSV, p.GeoJSON = withQuery("/systems.csv", all), withQuery("/systems.geojson", all)
	all.Del("sort")
	p.DimensionsCSV = withQuery("/systems/dimensions.csv", all)
	return render(c, http.StatusOK, views.Systems(p))
}

// systemsCSV streams every row of the filter. An error before the first byte
// is answered as one; later the connection is cut, so that half a table never
// looks like a whole one.
func (a *App) systemsCSV(c echo.Context) error {
	_, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	noteUnused(c, catalogue.Filter{Page: f.Page, PerPage: f.PerPage})
	f.Page, f.PerPage = 0, 0
	if done, err := a.download(c, "text/csv; charset=utf-8; header=present", fileName("systems", f.Release, ".csv"), f.Release); done || err != nil {
		return err
	}
	return a.stream(c, func(w *patientWriter) error {
		_, err := a.store.Export(c.Request().Context(), w, f)
		return err
	})
}

// dimensionsCSV is the table of quantiles under the table of systems.
func (a *App) dimensionsCSV(c echo.Context) error {
	_, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	noteUnused(c, f)
	dims, err := a.store.DimensionQuantiles(c.Request().Context(), f)
	if err != nil {
		return err
	}
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	w.Write([]string{"dimension", "unit", "measurements", "p10", "p25", "p50", "p75", "p90"})
	for _, d := range dims {
		record := []string{d.Name, d.Unit, strconv.Itoa(d.N)}
		for _, v := range []catalogue.Number{d.P10, d.P25, d.P50, d.P75, d.P90} {
			record = append(record, catalogue.FormatNumber(v))
		}
		w.Write(record)
	}
	w.Flush()
	c.Response().Header().Set(echo.HeaderContentDisposition, `attachment; filename="fathombend-dimensions.csv"`)
	return c.Blob(http.StatusOK, "text/csv; charset=utf-8", b.Bytes())
}

// systemJSON is one system of /systems.json.
type systemJSON struct {
	Slug         string          `json:"slug"`
	Name         string          `json:"name"`
	Invented     bool            `json:"invented"`
	Measurements []orderedObject `json:"measurements"`
}

type systemsAnswer struct {
	Total        int             `json:"total"`
	Page         int             `json:"page"`
	PerPage      int             `json:"per_page"`
	InventedRows int             `json:"invented_rows"`
	PrivateRows  int             `json:"private_rows,omitempty"`
	Dimensions   []dimensionJSON `json:"dimensions"`
	Systems      []systemJSON    `json:"systems"`
}

type dimensionJSON struct {
	Name         string   `json:"name"`
	Unit         string   `json:"unit"`
	Measurements int      `json:"measurements"`
	P10          *float64 `json:"p10"`
	P25          *float64 `json:"p25"`
	P50          *float64 `json:"p50"`
	P75          *float64 `json:"p75"`
	P90          *float64 `json:"p90"`
}

// systemsJSON is the page's table as data: one page of systems, each with
// every column of its measurements.
func (a *App) systemsJSON(c echo.Context) error {
	_, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	systems, total, err := a.store.Systems(ctx, f)
	if err != nil {
		return err
	}
	dims, err := a.store.DimensionQuantiles(ctx, f)
	if err != nil {
		return err
	}
	answer := systemsAnswer{Total: total, Page: max(f.Page, 1), PerPage: f.PerPage}
	if answer.PerPage == 0 {
		answer.PerPage = catalogue.DefaultPerPage
	}
	for _, d := range dims {
		answer.Dimensions = append(answer.Dimensions, dimensionJSON{d.Name, d.Unit, d.N, orNull(d.P10), orNull(d.P25), orNull(d.P50), orNull(d.P75), orNull(d.P90)})
	}
	for _, s := range systems {
		j := systemJSON{Slug: s.Slug, Name: s.Name}
		for _, r := range s.Measurements {
			if r.Invented {
				j.Invented = true
				answer.InventedRows++
			}
			if r.Private {
				answer.PrivateRows++
			}
			j.Measurements = append(j.Measurements, rowJSON(&r))
		}
		answer.Systems = append(answer.Systems, j)
	}
	return writeJSON(c, http.StatusOK, answer)
}

func orNull(n catalogue.Number) *float64 {
	if !n.Valid || !isFinite(n.V) {
		return nil
	}
	return &n.V
}

// rowJSON is one measurement with every column of the table: numbers or null,
// texts.
func rowJSON(r *catalogue.Row) orderedObject {
	out := make(orderedObject, 0, len(catalogue.Columns)+1)
	for _, col := range catalogue.Columns {
		var v any = col.Get(r)
		if col.Numeric() {
			v = orNull(col.Number(r))
		}
		out = append(out, orderedField{col.Name, v})
	}
	return append(append(out, orderedField{"invented", r.Invented}), seenMarks(r)...)
}

// seenMarks are the members of a row that not everybody sees as it is: absent
// from all others.
func seenMarks(r *catalogue.Row) (out orderedObject) {
	if r.Private {
		out = append(out, orderedField{"private", true})
	}
	if r.Coarse {
		out = append(out, orderedField{"place_rounded", true})
	}
	return out
}
