package main

import (
	"context"
	"encoding/csv"
	"io"
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesSources(e *echo.Echo) {
	get(e, "/sources", a.sourcesPage)
	get(e, "/sources.csv", a.sourcesCSV)
	get(e, "/sources.json", a.sourcesJSON)
	get(e, "/sources.bib", a.sourcesBibTeX)
	get(e, "/sources.ris", a.sourcesRIS)
}

// sourcesQuestion reads the filter; sources are never paged or sorted.
func sourcesQuestion(c echo.Context) (catalogue.Filter, error) {
	_, f, err := systemsQuestion(c)
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	return f, err
}

func (a *App) sourcesPage(c echo.Context) error {
	f, err := sourcesQuestion(c)
	if err != nil {
		return err
	}
	uses, err := a.store.SourceUses(c.Request().Context(), f)
	if err != nil {
		return err
	}
	p := views.SourcesPage{Page: a.page(c, "Sources", "systems"), Filter: f, Sources: uses}
	q := f.Values()
	p.Query = q
	p.CSV, p.JSON = withQuery("/sources.csv", q), withQuery("/sources.json", q)
	p.BibTeX, p.RIS = withQuery("/sources.bib", q), withQuery("/sources.ris", q)
	return render(c, http.StatusOK, views.Sources(p))
}

// sourceTableColumns are those of sources.csv.
func sourceTableColumns() []catalogue.Column {
	return []catalogue.Column{
		textColumn("key", "Key of the entry in the BibTeX and RIS files."),
		textColumn("source", "The paper or survey, as cited: the column source of measurements.csv."),
		textColumn("source_doi", "Its DOI without a resolver."),
		countColumn("measurements", "Measurements whose sinuosity comes from it."),
		countColumn("systems", "Systems these belong to."),
		textColumn("invented", "yes where every measurement from it is invented for the demo."),
		countColumn("slopes", "Measurements of which only the slope comes from it: their slope_source."),
		countColumn("sizes", "Measurements of which only width and depth come from it: their size_source."),
	}
}

func writeSourceTable(w io.Writer, uses []catalogue.SourceUse) error {
	out := csv.NewWriter(w)
	var head []string
	for _, c := range sourceTableColumns() {
		head = append(head, c.Name)
	}
	_ = out.Write(head) // Error says it
	for _, u := range uses {
		invented := "no"
		if u.Invented {
			invented = "yes"
		}
		_ = out.Write([]string{catalogue.CiteKey(u.Source), catalogue.Neutralise(u.Citation), catalogue.Neutralise(u.DOI), itoa(u.Measurements), itoa(u.Systems), invented, itoa(u.Slopes), itoa(u.Sizes)})
	}
	out.Flush()
	return out.Error()
}

func (a *App) sourcesCSV(c echo.Context) error {
	return a.sourcesFile(c, "text/csv; charset=utf-8; header=present", ".csv", func(ctx context.Context, w io.Writer, f catalogue.Filter) error {
		return a.packSources(ctx, w, f)
	})
}

func (a *App) sourcesBibTeX(c echo.Context) error {
	return a.sourcesFile(c, "application/x-bibtex; charset=utf-8", ".bib", func(ctx context.Context, w io.Writer, f catalogue.Filter) error {
		return a.writeSources(ctx, w, f, catalogue.BibTeX)
	})
}

func (a *App) sourcesRIS(c echo.Context) error {
	return a.sourcesFile(c, "application/x-research-info-systems; charset=utf-8", ".ris", func(ctx context.Context, w io.Writer, f catalogue.Filter) error {
		return a.writeSources(ctx, w, f, catalogue.RIS)
	})
}

func (a *App) sourcesFile(c echo.Context, kind, suffix string, write func(context.Context, io.Writer, catalogue.Filter) error) error {
	f, err := sourcesQuestion(c)
	if err != nil {
		return err
	}
	if _, err := a.store.ReleaseName(c.Request().Context(), f.Release); err != nil {
		return err
	}
	if done, err := a.download(c, kind, fileName("sources", f.Release, suffix), f.Release); done || err != nil {
		return err
	}
	return a.stream(c, func(w *patientWriter) error { return write(c.Request().Context(), w, f) })
}

// writeSources writes the sources under a filter, each in one form.
func (a *App) writeSources(ctx context.Context, w io.Writer, f catalogue.Filter, form func(catalogue.SourceUse) string) error {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	uses, err := a.store.SourceUses(ctx, f)
	if err != nil {
		return err
	}
	for _, u := range uses {
		if _, err := io.WriteString(w, form(u)); err != nil {
			return err
		}
	}
	return nil
}

type sourceUseJSON struct {
	Key          string   `json:"key"`
	Source       string   `json:"source"`
	DOI          string   `json:"doi"`
	Authors      []string `json:"authors"`
	Year         string   `json:"year"`
	Title        string   `json:"title"`
	Journal      string   `json:"journal"`
	Measurements int      `json:"measurements"`
	Systems      int      `json:"systems"`
	Invented     bool     `json:"invented"`
	Slopes       int      `json:"slopes"`
	Sizes        int      `json:"sizes"`
}

func (a *App) sourcesJSON(c echo.Context) error {
	f, err := sourcesQuestion(c)
	if err != nil {
		return err
	}
	uses, err := a.store.SourceUses(c.Request().Context(), f)
	if err != nil {
		return err
	}
	out := struct {
		Sources []sourceUseJSON `json:"sources"`
	}{[]sourceUseJSON{}}
	for _, u := range uses {
		r := catalogue.ReadCitation(u.Citation, u.DOI)
		out.Sources = append(out.Sources, sourceUseJSON{catalogue.CiteKey(u.Source), u.Citation, u.DOI, append([]string{}, r.Authors...), r.Year, r.Title, r.Journal, u.Measurements, u.Systems, u.Invented, u.Slopes, u.Sizes})
	}
	return writeJSON(c, http.StatusOK, out)
}
