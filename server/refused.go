package main

import (
	"errors"
	"net/http"
	"net/url"
	"slices"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/views"
)

// readable returns the filter of what can be read of q, with every part that
// cannot as a refusal.
func readable(q url.Values) (catalogue.Filter, []views.Refusal) {
	rest := withValues(q)
	var out []views.Refusal
	for {
		f, err := catalogue.ParseFilter(rest)
		var ce *catalogue.Error
		if err == nil || !errors.As(err, &ce) || !rest.Has(ce.Field) {
			return f, out
		}
		out = append(out, views.Refusal{Name: ce.Field, Message: ce.Message, Expected: ce.Expected})
		rest.Del(ce.Field)
	}
}

// refusals is everything wrong with an address that met err: err itself and
// every other part of the filter that cannot be read. ok is false when err is
// nothing that a reader can mend in the address.
func refusals(q url.Values, err error) (f catalogue.Filter, all []views.Refusal, ok bool) {
	p := problemOf(err)
	if p.Status != http.StatusBadRequest {
		return f, nil, false
	}
	f, all = readable(q)
	if p.Field != "" && slices.Contains(catalogue.FilterParameters, p.Field) {
		// A release that is not there can be read, but nothing can be counted in it.
		rest := withValues(q)
		rest.Del(p.Field)
		f, _ = readable(rest)
	}
	if !slices.ContainsFunc(all, func(r views.Refusal) bool { return r.Name == p.Field }) {
		r := views.Refusal{Name: p.Field, Message: p.Detail, Expected: p.Expected}
		if p.whole != "" {
			r.Message, r.Expected = p.whole, ""
		}
		all = slices.Insert(all, 0, r)
	}
	return f, all, true
}

// filterPage says what a refused page is: its heading, its place in the
// navigation, the word on its button and the settings it takes beside the
// filter.
type filterPage struct {
	title, nav, question, action string
	own                          []string
}

// filterRefused answers an address that cannot be used with the page's own
// question and filter, everything typed still in it and each fault beside its
// field. Other errors are returned as they are.
func (a *App) filterRefused(c echo.Context, q url.Values, at filterPage, err error) error {
	f, all, ok := refusals(q, err)
	if !ok {
		return err
	}
	page := views.FilterRefused{Page: a.page(c, at.title, at.nav), Question: at.question, Action: at.action, Filter: f, Hidden: url.Values{}}
	page.Refusals, page.TypedFilter = all, q
	page.Fields = slices.Concat(at.own, []string{"sort", "page", "per_page"})
	for _, name := range page.Fields {
		if v := q[name]; len(v) > 0 && !slices.ContainsFunc(all, func(r views.Refusal) bool { return r.Name == name }) {
			page.Hidden[name] = v
		}
	}
	var ferr error
	if page.Facets, ferr = a.facets(c.Request().Context(), f); ferr != nil && problemOf(ferr).Status >= http.StatusInternalServerError {
		return ferr
	}
	return render(c, http.StatusBadRequest, views.RefusalPage(page))
}

// readableRequest is the regression of what can be read of q, so that the form
// of a refused question keeps the rest.
func readableRequest(q url.Values) stats.Request {
	rest := withValues(q)
	for range len(q) + 1 {
		r, err := regressionRequest(rest)
		if err == nil {
			return r
		}
		field := problemOf(err).Field
		good := slices.DeleteFunc(slices.Clone(rest[field]), func(v string) bool {
			_, err := regressionRequest(url.Values{field: {v}})
			return err != nil
		})
		if field == "model" && 0 < len(good) && len(good) < len(rest[field]) {
			rest[field] = good
		} else {
			rest.Del(field)
		}
	}
	return stats.DefaultRequest()
}
