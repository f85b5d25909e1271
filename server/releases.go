package main

import (
	"context"
	"encoding/base64"
	"encoding/csv"
	"encoding/hex"
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

// routesTakingAway are the releases and the open formats.
func (a *App) routesTakingAway(e *echo.Echo) {
	get(e, "/releases", a.releasesPage)
	get(e, "/releases.json", a.releasesJSON)
	get(e, "/releases.csv", a.releasesCSV)
	e.POST("/releases", a.makeRelease)
	get(e, "/releases/:name", a.release)
	e.POST("/releases/:name/doi", a.releaseDOI)
	get(e, "/releases/:name/difference", a.differenceChosen)
	get(e, "/releases/:name/difference/:other", a.difference)
	get(e, "/systems.zip", a.systemsPackage)
	a.routesDictionary(e)
	a.routesSources(e)
	a.routesFeatures(e)
	get(e, "/feed.atom", a.feed)
	get(e, "/openapi.json", a.openAPI)
}

// nameReleaseOf tells the frame of a page that it shows a release.
func (a *App) nameReleaseOf(ctx context.Context, p *views.Page) {
	asked := p.Query.Get("release")
	if asked == "" {
		return
	}
	name, err := a.store.ReleaseName(ctx, asked)
	if err != nil {
		return // the handler refuses it
	}
	live := url.Values{}
	for k, v := range p.Query {
		if k != "release" {
			live[k] = v
		}
	}
	p.Release, p.Live = name, withQuery(p.Path, live)
}

// nameRelease puts the release an analysis used among its settings and into
// the text for a paper.
func (a *App) nameRelease(ctx context.Context, release string, to *stats.Analysis) error {
	if release == "" {
		return nil
	}
	r, err := a.store.Release(ctx, release)
	if err != nil {
		return err
	}
	to.Settings["release"] = r.Name
	to.MethodsText += " " + releaseSentence(r)
	return nil
}

// releaseSentence names a release in the method of a paper.
func releaseSentence(r *catalogue.Release) string {
	s := fmt.Sprintf("The rows are those of release %s of %s, frozen on %s (SHA-256 of its table %s)", r.Name, r.Title, r.At.UTC().Format("2006-01-02"), r.Checksum)
	if r.DOI != "" {
		s += ", doi " + r.DOI
	}
	return s + "."
}

func (a *App) releasesPage(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	return a.showReleases(c, http.StatusOK, views.ReleaseForm{})
}

// plainQuery refuses every parameter.
func (a *App) plainQuery(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	return allow(withoutEmpty(q))
}

func (a *App) showReleases(c echo.Context, status int, form views.ReleaseForm) error {
	ctx := c.Request().Context()
	list, err := a.store.Releases(ctx)
	if err != nil {
		return err
	}
	p := views.ReleasesPage{Page: a.page(c, "Releases", "releases"), Releases: list, Form: form}
	p.JSON, p.CSV = "/releases.json", "/releases.csv"
	if p.Form.Title == "" {
		if p.Form.Title, err = a.store.Title(ctx); err != nil {
			return err
		}
		chosen, err := a.settings(ctx)
		if err != nil {
			return err
		}
		p.Form.Licence = chosen.Licence
	}
	if p.User.Curates() {
		if p.ReadyWhy, err = a.beforeFreezing(ctx); err != nil {
			return err
		}
	}
	return render(c, status, views.Releases(p))
}

// beforeFreezing is what a curator should look at before a release.
func (a *App) beforeFreezing(ctx context.Context) ([]string, error) {
	var out []string
	r, err := a.store.ReleaseCounts(ctx)
	if err != nil {
		return nil, err
	}
	if r.Waiting > 0 {
		out = append(out, "Submissions that wait for review: "+itoa(r.Waiting)+". They are not in the release; decide on them first if they should be.")
	}
	if r.WithoutLicence > 0 {
		out = append(out, "Measurements whose licence is not said: "+itoa(r.WithoutLicence)+". Ask their contributors and enter it in the column licence, else a reader cannot tell what they may do with them.")
	}
	if r.WithoutContributor > 0 {
		out = append(out, "Measurements without a contributor: "+itoa(r.WithoutContributor)+". Nobody is credited for them; enter it in the column contributor.")
	}
	if r.Invented > 0 {
		out = append(out, "Invented measurements: "+itoa(r.Invented)+". They stay marked in the release; take them out first if it is to be cited as data.")
	}
	return out, nil
}

// makeRelease freezes the catalogue. A refusal comes back with all that was
// typed.
func (a *App) makeRelease(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	form := views.ReleaseForm{Name: q.Get("name"), Title: q.Get("title"), Notes: q.Get("notes"), Licence: q.Get("licence"), DOI: q.Get("doi")}
	chosen, err := a.settings(c.Request().Context())
	if err != nil {
		return err
	}
	text, err := chosen.text()
	if err != nil {
		return err
	}
	n := catalogue.NewRelease{Settings: text, Name: form.Name, Title: form.Title, Notes: form.Notes, Licence: form.Licence, DOI: form.DOI, Program: Version}
	if u := a.user(c); u != nil {
		n.By = u.ID
	}
	r, err := a.store.Freeze(c.Request().Context(), n)
	if err != nil {
		return a.refusedRelease(err, func(status int, field, why string) error {
			form.Field, form.Refused = field, why
			return a.showReleases(c, status, form)
		})
	}
	a.notice(c, "Release "+r.Name+" is frozen. It will never change.")
	return c.Redirect(http.StatusSeeOther, "/releases/"+url.PathEscape(r.Name))
}

// refusedRelease gives what the catalogue refused to the form, anything else to
// the error page.
func (a *App) refusedRelease(err error, show func(status int, field, why string) error) error {
	var e *catalogue.Error
	if !errors.As(err, &e) || e.Field == "" {
		return err
	}
	switch e.Code {
	case catalogue.Invalid:
		return show(http.StatusUnprocessableEntity, e.Field, sentence(e.Message, e.Expected))
	case catalogue.Conflict:
		return show(http.StatusConflict, e.Field, sentence(e.Message, e.Expected))
	}
	return err
}

func (a *App) releaseDOI(c echo.Context) error {
	name, err := url.PathUnescape(c.Param("name"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such release here.")
	}
	q, err := params(c)
	if err != nil {
		return err
	}
	by := int64(0)
	if u := a.user(c); u != nil {
		by = u.ID
	}
	if err := a.store.SetReleaseDOI(c.Request().Context(), name, q.Get("doi"), by); err != nil {
		return a.refusedRelease(err, func(status int, field, why string) error {
			if field != "doi" {
				return err
			}
			r, err := a.store.Release(c.Request().Context(), name)
			if err != nil {
				return err
			}
			return a.releasePage(c, status, r, views.ReleaseForm{DOI: q.Get("doi"), Field: field, Refused: why})
		})
	}
	a.notice(c, "The DOI is entered.")
	return c.Redirect(http.StatusSeeOther, "/releases/"+url.PathEscape(name))
}

// release is one release, and by suffix its description, its table and its
// package.
func (a *App) release(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	name, err := url.PathUnescape(c.Param("name"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such release here.")
	}
	name, suffix := splitSuffix(name, ".json", ".csv", ".zip")
	r, err := a.store.Release(c.Request().Context(), name)
	if err != nil {
		return err
	}
	switch suffix {
	case ".json":
		return writeJSON(c, http.StatusOK, a.releaseAnswer(c, r))
	case ".csv":
		return a.releaseCSV(c, r)
	case ".zip":
		return a.packageOf(c, catalogue.Filter{Release: r.Name}, r)
	}
	return a.releasePage(c, http.StatusOK, r, views.ReleaseForm{})
}

func (a *App) releasePage(c echo.Context, status int, r *catalogue.Release, form views.ReleaseForm) error {
	list, err := a.store.Releases(c.Request().Context())
	if err != nil {
		return err
	}
	base := a.baseAddress(c)
	p := views.ReleasePage{Page: a.page(c, "Release "+r.Name, "releases"), Item: *r, DOIForm: form}
	at := slices.IndexFunc(list, func(x catalogue.Release) bool { return x.Name == r.Name })
	p.Latest = at == 0
	if at >= 0 && at+1 < len(list) {
		p.Previous = list[at+1].Name
	}
	p.JSON, p.CSV = "/releases/"+url.PathEscape(r.Name)+".json", "/releases/"+url.PathEscape(r.Name)+".csv"
	p.Cite = views.Citation{Text: citationText(r, base), BibTeX: citationBibTeX(r, base)}
	p.LinkedData = releaseLinkedData(r, base)
	text, err := a.store.SettingsOf(c.Request().Context(), r.Name)
	if err != nil {
		return err
	}
	if p.Chosen, err = settingFacts(text); err != nil {
		return err
	}
	return render(c, status, views.Release(p))
}

// releaseCSV is the table whose SHA-256 is the checksum of the release.
func (a *App) releaseCSV(c echo.Context, r *catalogue.Release) error {
	sum, err := hex.DecodeString(r.Checksum)
	if err != nil {
		return err
	}
	h := c.Response().Header()
	h.Set("Repr-Digest", "sha-256=:"+base64.StdEncoding.EncodeToString(sum)+":") // RFC 9530
	h.Set(echo.HeaderContentLength, strconv.FormatInt(r.Bytes, 10))
	if done, err := a.download(c, "text/csv; charset=utf-8; header=present", fileName("measurements", r.Name, ".csv"), r.Name); done || err != nil {
		return err
	}
	return a.stream(c, func(w *patientWriter) error {
		_, err := a.store.Export(c.Request().Context(), w, catalogue.Filter{Release: r.Name})
		return err
	})
}

type authorJSON struct {
	Name         string `json:"name"`
	ORCID        string `json:"orcid,omitempty"`
	Measurements int    `json:"measurements"`
}

type licenceJSON struct {
	Licence      string `json:"licence"`
	Measurements int    `json:"measurements"`
}

type releaseJSON struct {
	Name         string        `json:"name"`
	Title        string        `json:"title"`
	Notes        string        `json:"notes"`
	Frozen       string        `json:"frozen"`
	Licence      string        `json:"licence"`
	DOI          string        `json:"doi"`
	Citation     string        `json:"citation"`
	Authors      []authorJSON  `json:"authors"`
	Licences     []licenceJSON `json:"licences"`
	Systems      int           `json:"systems"`
	Measurements int           `json:"measurements"`
	Sources      int           `json:"sources"`
	Centrelines  int           `json:"centrelines"`
	InventedRows int           `json:"invented_rows"`
	Checksum     string        `json:"sha256"`
	Bytes        int64         `json:"bytes"`
	Revision     int64         `json:"revision"`
	Program      string        `json:"program"`
	Page         string        `json:"page"`
	CSV          string        `json:"csv"`
	Package      string        `json:"package"`
}

func (a *App) releaseAnswer(c echo.Context, r *catalogue.Release) releaseJSON {
	base := a.baseAddress(c)
	address := base + "/releases/" + url.PathEscape(r.Name)
	out := releaseJSON{Name: r.Name, Title: r.Title, Notes: r.Notes, Frozen: r.At.UTC().Format("2006-01-02T15:04:05Z"), Licence: r.Licence, DOI: r.DOI,
		Citation: citationText(r, base), Authors: []authorJSON{}, Licences: []licenceJSON{}, Systems: r.Systems, Measurements: r.Measurements, Sources: r.Sources, Centrelines: r.Centrelines,
		InventedRows: r.Invented, Checksum: r.Checksum, Bytes: r.Bytes, Revision: r.Revision, Program: r.Program,
		Page: address, CSV: address + ".csv", Package: address + ".zip"}
	for _, x := range r.Authors {
		out.Authors = append(out.Authors, authorJSON(x))
	}
	for _, l := range r.Licences {
		out.Licences = append(out.Licences, licenceJSON{l.Value, l.Count})
	}
	return out
}

func (a *App) releasesJSON(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	list, err := a.store.Releases(c.Request().Context())
	if err != nil {
		return err
	}
	out := struct {
		Releases []releaseJSON `json:"releases"`
	}{[]releaseJSON{}}
	for i := range list {
		out.Releases = append(out.Releases, a.releaseAnswer(c, &list[i]))
	}
	return writeJSON(c, http.StatusOK, out)
}

func (a *App) releasesCSV(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	list, err := a.store.Releases(c.Request().Context())
	if err != nil {
		return err
	}
	var b strings.Builder
	w := csv.NewWriter(&b)
	w.Write([]string{"release", "title", "frozen", "licence", "doi", "systems", "measurements", "sources", "centrelines", "invented_rows", "sha256", "bytes", "revision", "program", "notes"})
	for _, r := range list {
		w.Write([]string{r.Name, catalogue.Neutralise(r.Title), r.At.UTC().Format("2006-01-02T15:04:05Z"), r.Licence, r.DOI, itoa(r.Systems), itoa(r.Measurements), itoa(r.Sources), itoa(r.Centrelines),
			itoa(r.Invented), r.Checksum, strconv.FormatInt(r.Bytes, 10), strconv.FormatInt(r.Revision, 10), r.Program, catalogue.Neutralise(r.Notes)})
	}
	w.Flush()
	c.Response().Header().Set(echo.HeaderContentDisposition, `attachment; filename="fathombend-releases.csv"`)
	return c.Blob(http.StatusOK, "text/csv; charset=utf-8; header=present", []byte(b.String()))
}
