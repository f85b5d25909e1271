package main

import (
	"encoding/csv"
	"errors"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesHistory(e *echo.Echo) {
	get(e, "/systems/:slug/history", a.historyPage)
	get(e, "/systems/:slug/history.json", a.historyJSON)
	get(e, "/systems/:slug/history.csv", a.historyCSV)
	e.POST("/systems/:slug/restore", a.restore)
	get(e, "/measurements/:id", a.measurement)
	get(e, "/measurements/:id/withdraw", a.withdrawalPage)
	e.POST("/measurements/:id/withdraw", a.proposeWithdrawal)
	e.POST("/measurements/:id/restore", a.proposeRestoration)
}

// chronicle is a system, also one that is gone, with all that was recorded
// about it.
type chronicle struct {
	slug, name string
	movedTo    string
	gone       *catalogue.Gone
	history    []catalogue.Revision
}

func (a *App) chronicleOf(c echo.Context) (*chronicle, error) {
	slug, err := url.PathUnescape(c.Param("slug"))
	if err != nil {
		return nil, echo.NewHTTPError(http.StatusNotFound, "There is no such system here.")
	}
	ctx := catalogue.AsEverybody(c.Request().Context()) // what only some see has no history
	d, err := a.store.System(ctx, slug)
	if err == nil {
		return &chronicle{slug: d.Slug, name: d.Name, history: d.History}, nil
	}
	if catalogue.CodeOf(err) != catalogue.NotFound {
		return nil, err
	}
	g, gone := a.store.Gone(ctx, slug)
	if gone != nil || g == nil {
		return nil, errors.Join(gone, err)
	}
	return &chronicle{slug: g.Slug, name: g.Name, movedTo: g.MovedTo, gone: g, history: g.History}, nil
}

// historyQuestion reads the parameters and the revisions they ask for.
func (a *App) historyQuestion(c echo.Context) (*chronicle, views.HistoryPage, error) {
	var p views.HistoryPage
	q, err := params(c)
	if err != nil {
		return nil, p, err
	}
	if err := allow(q, []string{"record", "field", "at"}); err != nil {
		return nil, p, err
	}
	x, err := a.chronicleOf(c)
	if err != nil || x.movedTo != "" {
		return x, p, err
	}
	p.Slug, p.Name, p.Gone = x.slug, x.name, x.gone
	p.Record, p.Field = q.Get("record"), q.Get("field")
	for _, r := range x.history {
		if !slices.Contains(p.Records, r.Record) {
			p.Records = append(p.Records, r.Record)
		}
		if r.Field != "" && !slices.Contains(p.Fields, r.Field) {
			p.Fields = append(p.Fields, r.Field)
		}
		if (p.Record == "" || r.Record == p.Record) && (p.Field == "" || r.Field == p.Field) {
			p.Revisions = append(p.Revisions, r)
		}
	}
	slices.Sort(p.Records)
	slices.Sort(p.Fields)
	if p.Record != "" && !slices.Contains(p.Records, p.Record) {
		return x, p, &badInput{"record", "this system has no such record. Expected one of: " + strings.Join(p.Records, ", ")}
	}
	if p.Field != "" && !slices.Contains(p.Fields, p.Field) {
		return x, p, &badInput{"field", "no change of such a field is recorded. Expected one of: " + strings.Join(p.Fields, ", ")}
	}
	at, err := whole(q, "at", 0, 0, 1<<53)
	p.At = int64(at)
	if err == nil && p.At != 0 && !slices.ContainsFunc(p.Revisions, func(r catalogue.Revision) bool { return r.ID == p.At }) {
		err = &badInput{"at", "there is no such revision of this record. Expected the number of one in the table"}
	}
	return x, p, err
}

func (a *App) historyPage(c echo.Context) error {
	x, p, err := a.historyQuestion(c)
	if err != nil {
		return err
	}
	if x.movedTo != "" {
		return c.Redirect(http.StatusPermanentRedirect, withQuery("/systems/"+url.PathEscape(x.movedTo)+"/history", c.QueryParams()))
	}
	return a.showHistory(c, http.StatusOK, p)
}

func (a *App) showHistory(c echo.Context, status int, p views.HistoryPage) error {
	if err := a.fillThen(c, &p); err != nil {
		return err
	}
	q := url.Values{}
	for name, v := range map[string]string{"record": p.Record, "field": p.Field} {
		if v != "" {
			q.Set(name, v)
		}
	}
	p.Page = a.page(c, "History of "+p.Name, "systems")
	p.Page.JSON, p.Page.CSV = withQuery("/systems/"+p.Slug+"/history.json", q), withQuery("/systems/"+p.Slug+"/history.csv", q)
	p.Curates = roleOf(a.user(c)) >= curator
	return render(c, status, views.History(p))
}

// fillThen shows the record of the revision asked for as it was after it.
func (a *App) fillThen(c echo.Context, p *views.HistoryPage) error {
	if p.At == 0 {
		return nil
	}
	i := slices.IndexFunc(p.Revisions, func(r catalogue.Revision) bool { return r.ID == p.At })
	record := p.Revisions[i].Record
	kind, name, _ := strings.Cut(record, ":")
	var was, now *catalogue.Row
	var err error
	switch kind {
	case "measurement":
		was, now, err = a.store.RowAt(c.Request().Context(), name, p.At)
	case "system":
		was, now, err = a.store.SystemRowAt(c.Request().Context(), name, p.At)
	default:
		return nil
	}
	if catalogue.CodeOf(err) == catalogue.NotFound && err != nil {
		p.ThenGone = true // withdrawn: its page says so
		p.ThenRecord = record
		return nil
	}
	if err != nil {
		return err
	}
	p.ThenRecord = record
	for _, ch := range catalogue.Diff(was, now) {
		if col, ok := catalogue.ColumnByName(ch.Column); ok && (col.Table == catalogue.TableSystems) == (kind == "system") {
			p.Then = append(p.Then, ch)
		}
	}
	return nil
}

func (a *App) historyJSON(c echo.Context) error {
	x, p, err := a.historyQuestion(c)
	if err != nil {
		return err
	}
	if x.movedTo != "" {
		return c.Redirect(http.StatusPermanentRedirect, withQuery("/systems/"+url.PathEscape(x.movedTo)+"/history.json", c.QueryParams()))
	}
	out := struct {
		System  string         `json:"system"`
		Name    string         `json:"system_name"`
		Present bool           `json:"in_catalogue"`
		History []revisionJSON `json:"history"`
	}{p.Slug, p.Name, p.Gone == nil, revisionsJSON(p.Revisions)}
	return writeJSON(c, http.StatusOK, out)
}

func revisionsJSON(list []catalogue.Revision) []revisionJSON {
	out := []revisionJSON{}
	for _, h := range list {
		out = append(out, revisionJSON{h.ID, h.At.UTC().Format("2006-01-02T15:04:05Z"), h.Who, h.Why, h.Action, h.Record, h.Field, h.Before, h.After})
	}
	return out
}

func (a *App) historyCSV(c echo.Context) error {
	x, p, err := a.historyQuestion(c)
	if err != nil {
		return err
	}
	if x.movedTo != "" {
		return c.Redirect(http.StatusPermanentRedirect, withQuery("/systems/"+url.PathEscape(x.movedTo)+"/history.csv", c.QueryParams()))
	}
	var b strings.Builder
	w := csv.NewWriter(&b)
	_ = w.Write([]string{"revision", "at", "who", "why", "action", "record", "field", "before", "after"}) // Error says it
	for _, h := range p.Revisions {
		cells := []string{strconv.FormatInt(h.ID, 10), h.At.UTC().Format("2006-01-02T15:04:05Z"), h.Who, h.Why, h.Action, h.Record, h.Field, h.Before, h.After}
		for i := range cells {
			cells[i] = catalogue.Neutralise(cells[i])
		}
		_ = w.Write(cells)
	}
	if w.Flush(); w.Error() != nil {
		return w.Error()
	}
	return c.Blob(http.StatusOK, "text/csv; charset=utf-8; header=present", []byte(b.String()))
}

// restore makes a record what it was: a curator's work, a contributor proposes
// the same through the form.
func (a *App) restore(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	record, slug := form.Get("record"), c.Param("slug")
	revision, err := strconv.ParseInt(form.Get("revision"), 10, 64)
	if err != nil || revision < 0 {
		return &badInput{"revision", "expected the number of a revision"}
	}
	_, err = a.store.Restore(c.Request().Context(), a.user(c).ID, record, form.Get("field"), revision, form.Get("why"))
	if err == nil {
		a.notice(c, "Restored. It stands in the history as a change of its own.")
		return c.Redirect(http.StatusSeeOther, "/systems/"+url.PathEscape(slug)+"/history?record="+url.QueryEscape(record))
	}
	var e *catalogue.Error
	if !errors.As(err, &e) || e.Code != catalogue.Invalid {
		return err
	}
	x, asked := a.chronicleOf(c)
	if asked != nil || x.movedTo != "" {
		return err
	}
	p := views.HistoryPage{Slug: x.slug, Name: x.name, Gone: x.gone, Record: record, At: revision, Why: form.Get("why"), Refused: e.Field, Refusal: sentence(e.Message, e.Expected)}
	for _, r := range x.history {
		if !slices.Contains(p.Records, r.Record) {
			p.Records = append(p.Records, r.Record)
		}
		if r.Record == record {
			p.Revisions = append(p.Revisions, r)
		}
	}
	if !slices.ContainsFunc(p.Revisions, func(r catalogue.Revision) bool { return r.ID == revision }) {
		p.At = 0
	}
	return a.showHistory(c, http.StatusUnprocessableEntity, p)
}
