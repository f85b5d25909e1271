package main

import (
	"errors"
	"net/http"
	"net/url"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// goneOr answers for a system that is not in the catalogue now: with the one it
// was merged into, with what is left of a withdrawn one, or with the error.
func (a *App) goneOr(c echo.Context, slug, suffix string, missing error) error {
	g, err := a.store.Gone(c.Request().Context(), slug)
	switch {
	case err != nil:
		return err
	case g == nil:
		return missing
	case g.MovedTo != "":
		return c.Redirect(http.StatusPermanentRedirect, withQuery("/systems/"+url.PathEscape(g.MovedTo)+suffix, c.QueryParams()))
	case suffix != "":
		return echo.NewHTTPError(http.StatusGone, g.Name+" was withdrawn from the catalogue; its history is at /systems/"+g.Slug+"/history.json.")
	}
	return render(c, http.StatusGone, views.GonePage(a.page(c, g.Name, "systems"), *g))
}

// measurement is the lasting address of a measurement: its place on the page
// of its system, or what is left of it.
func (a *App) measurement(c echo.Context) error {
	id := c.Param("id")
	if q, err := params(c); err != nil {
		return err
	} else if err := allow(q); err != nil {
		return err
	}
	row, _, err := a.store.Measurement(c.Request().Context(), id)
	if err == nil {
		return c.Redirect(http.StatusSeeOther, "/systems/"+url.PathEscape(row.System)+"#"+url.PathEscape(row.Measurement))
	}
	if catalogue.CodeOf(err) != catalogue.NotFound {
		return err
	}
	w, gone := a.store.WithdrawnMeasurement(c.Request().Context(), id)
	if catalogue.CodeOf(gone) == catalogue.NotFound && gone != nil {
		return err
	}
	if gone != nil {
		return gone
	}
	history, err := a.store.History(c.Request().Context(), "measurement:"+w.Row.Measurement)
	if err != nil {
		return err
	}
	return render(c, http.StatusGone, views.GonePage(a.page(c, w.Row.Measurement, "systems"), catalogue.Gone{Slug: w.Row.System, Name: w.Row.Measurement + " of " + w.Row.SystemName, Withdrawn: []catalogue.Withdrawn{*w}, History: history}))
}

func (a *App) withdrawalPage(c echo.Context) error {
	return a.showWithdrawal(c, http.StatusOK, views.WithdrawalForm{})
}

func (a *App) showWithdrawal(c echo.Context, status int, f views.WithdrawalForm) error {
	row, _, err := a.store.Measurement(c.Request().Context(), c.Param("id"))
	if err != nil {
		return err
	}
	d, err := a.store.System(c.Request().Context(), row.System)
	if err != nil {
		return err
	}
	f.Row, f.Only = *row, len(d.Measurements) == 1
	f.Groups, f.Unsaid = recordGroups(row)
	return render(c, status, views.WithdrawalPage(a.page(c, "Withdraw "+row.Measurement, "contribute"), f))
}

func (a *App) proposeWithdrawal(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	id, err := a.store.ProposeWithdrawal(c.Request().Context(), a.user(c).ID, c.Param("id"), form.Get("instead"), form.Get("why"))
	var e *catalogue.Error
	if errors.As(err, &e) && e.Code == catalogue.Invalid {
		return a.showWithdrawal(c, http.StatusUnprocessableEntity, views.WithdrawalForm{Why: form.Get("why"), Instead: form.Get("instead"), Errors: map[string]string{e.Field: sentence(e.Message, e.Expected)}})
	}
	if err != nil {
		return err
	}
	a.notice(c, "Sent. A curator decides whether the record leaves the catalogue.")
	return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(id, 10))
}

func (a *App) proposeRestoration(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	id, err := a.store.ProposeRestoration(c.Request().Context(), a.user(c).ID, c.Param("id"), form.Get("why"))
	if err != nil {
		return err
	}
	a.notice(c, "Sent. A curator decides whether the record comes back.")
	return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(id, 10))
}
