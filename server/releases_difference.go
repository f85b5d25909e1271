package main

import (
	"encoding/csv"
	"net/http"
	"net/url"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// maxShownChanges is how many changes the page lists; the files have them all.
const maxShownChanges = 500

// differenceChosen sends the form of two names to their address.
func (a *App) differenceChosen(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"to"}); err != nil {
		return err
	}
	to := q.Get("to")
	if to == "" {
		to = catalogue.Present
	}
	return c.Redirect(http.StatusSeeOther, "/releases/"+c.Param("name")+"/difference/"+url.PathEscape(to))
}

// difference is what changed from one state of the catalogue to another: two
// releases, or one and "present".
func (a *App) difference(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	before, err := url.PathUnescape(c.Param("name"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such release here.")
	}
	after, err := url.PathUnescape(c.Param("other"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such release here.")
	}
	after, suffix := splitSuffix(after, ".json", ".csv")
	ctx := c.Request().Context()
	for _, name := range []*string{&before, &after} {
		if *name == catalogue.Present {
			continue
		}
		r, err := a.store.Release(ctx, *name)
		if err != nil {
			return err
		}
		*name = r.Name
	}
	switch suffix {
	case ".csv":
		return a.differenceCSV(c, before, after)
	case ".json":
		return a.differenceJSON(c, before, after)
	}
	p := views.DifferencePage{Before: before, After: after}
	p.Difference, err = a.store.EachDifference(ctx, before, after, func(x catalogue.Change) error {
		if p.Total++; len(p.Changes) < maxShownChanges {
			p.Changes = append(p.Changes, x)
		}
		return nil
	})
	if err != nil {
		return err
	}
	list, err := a.store.Releases(ctx)
	if err != nil {
		return err
	}
	for _, r := range list {
		p.Names = append(p.Names, r.Name)
	}
	p.Page = a.page(c, "From "+before+" to "+after, "releases")
	p.CSV, p.JSON = p.Path+".csv", p.Path+".json"
	return render(c, http.StatusOK, views.Difference(p))
}

// differenceCSV has one row a changed field, one for each record that came or
// went.
func (a *App) differenceCSV(c echo.Context, before, after string) error {
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
	h.Set(echo.HeaderContentDisposition, `attachment; filename="`+fileName("difference", before+"-"+after, ".csv")+`"`)
	if c.Request().Method == http.MethodHead {
		return c.NoContent(http.StatusOK)
	}
	return a.stream(c, func(to *patientWriter) error {
		w := csv.NewWriter(to)
		if err := w.Write([]string{"change", "record", "measurement", "system", "system_name", "column", "before", "after"}); err != nil {
			return err
		}
		_, err := a.store.EachDifference(c.Request().Context(), before, after, func(x catalogue.Change) error {
			fields := x.Fields
			if len(fields) == 0 {
				fields = []catalogue.FieldChange{{}}
			}
			record := "measurement"
			if x.Line {
				record = "centreline"
			}
			for _, f := range fields {
				if err := w.Write([]string{x.What, record, x.Measurement, x.System, catalogue.Neutralise(x.SystemName), f.Column, safeCell(f.Column, f.Before), safeCell(f.Column, f.After)}); err != nil {
					return err
				}
			}
			return nil
		})
		w.Flush()
		if err == nil {
			err = w.Error()
		}
		return err
	})
}

// safeCell neutralises the cell of a text column; numbers are never touched.
func safeCell(column, text string) string {
	if c, ok := catalogue.ColumnByName(column); ok && c.Numeric() {
		return text
	}
	return catalogue.Neutralise(text)
}

type fieldChangeJSON struct {
	Column string `json:"column"`
	Before string `json:"before"`
	After  string `json:"after"`
}

type changeJSON struct {
	Change      string            `json:"change"`
	Record      string            `json:"record"`
	Measurement string            `json:"measurement"`
	System      string            `json:"system"`
	SystemName  string            `json:"system_name"`
	Fields      []fieldChangeJSON `json:"fields"`
}

type differenceJSON struct {
	Before         string        `json:"before"`
	After          string        `json:"after"`
	Added          int           `json:"measurements_added"`
	Removed        int           `json:"measurements_removed"`
	Changed        int           `json:"measurements_changed"`
	LinesAdded     int           `json:"centrelines_added"`
	LinesRemoved   int           `json:"centrelines_removed"`
	SystemsAdded   []string      `json:"systems_added"`
	SystemsRemoved []string      `json:"systems_removed"`
	InventedRows   int           `json:"invented_rows"`
	Changes        []changeJSON  `json:"changes"`
	Columns        []columnCount `json:"columns"`
}

type columnCount struct {
	Column string `json:"column"`
	Rows   int    `json:"rows"`
}

func (a *App) differenceJSON(c echo.Context, before, after string) error {
	out := differenceJSON{Before: before, After: after, Changes: []changeJSON{}, Columns: []columnCount{}}
	d, err := a.store.EachDifference(c.Request().Context(), before, after, func(x catalogue.Change) error {
		j := changeJSON{x.What, "measurement", x.Measurement, x.System, x.SystemName, []fieldChangeJSON{}}
		if x.Line {
			j.Record = "centreline"
		}
		for _, f := range x.Fields {
			j.Fields = append(j.Fields, fieldChangeJSON(f))
		}
		out.Changes = append(out.Changes, j)
		return nil
	})
	if err != nil {
		return err
	}
	out.Added, out.Removed, out.Changed, out.LinesAdded, out.LinesRemoved = d.Added, d.Removed, d.Changed, d.LinesAdded, d.LinesRemoved
	out.SystemsAdded, out.SystemsRemoved, out.InventedRows = append([]string{}, d.SystemsAdded...), append([]string{}, d.SystemsRemoved...), d.InventedAfter
	for _, x := range d.Columns {
		out.Columns = append(out.Columns, columnCount{x.Value, x.Count})
	}
	return writeJSON(c, http.StatusOK, out)
}
