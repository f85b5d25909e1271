package main

import (
	"errors"
	"net/http"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// changeSet shows what was changed at once, and how it came about.
func (p *reviews) changeSet(c echo.Context) error {
	return p.showChangeSet(c, http.StatusOK, "", "")
}

func (p *reviews) showChangeSet(c echo.Context, status int, why, refusal string) error {
	id, err := idOf(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	revisions, err := p.store.ChangeSetRevisions(ctx, id)
	if err != nil {
		return err
	}
	if len(revisions) == 0 {
		return &catalogue.Error{Code: catalogue.NotFound, Message: "There is no such change."}
	}
	set, err := p.store.ChangeSet(ctx, id)
	if err != nil {
		return err
	}
	v := views.ChangeSetPage{ID: id, Set: activityOf(*set), Submission: set.Submission, Undoes: set.Undoes, UndoneBy: set.UndoneBy, Revisions: revisions, Why: why, Refusal: refusal}
	if sample, err := p.store.SampleOf(ctx, id); err != nil {
		return err
	} else if sample != nil {
		v.Sample = sample
	}
	return render(c, status, views.ChangeSet(p.page(c, "Change "+strconv.FormatInt(id, 10), "review"), v))
}

// undo takes a change set back.
func (p *reviews) undo(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	id, err := idOf(c)
	if err != nil {
		return err
	}
	made, err := p.store.Undo(c.Request().Context(), p.user(c).ID, id, form.Get("why"))
	var e *catalogue.Error
	if errors.As(err, &e) && (e.Code == catalogue.Invalid || e.Code == catalogue.Conflict) {
		status := map[catalogue.Code]int{catalogue.Invalid: http.StatusUnprocessableEntity, catalogue.Conflict: http.StatusConflict}[e.Code]
		return p.showChangeSet(c, status, form.Get("why"), "Nothing was changed. "+sentence(e.Message, e.Expected))
	}
	if err != nil {
		return err
	}
	p.notice(c, "Taken back. That is a change of its own, below.")
	return c.Redirect(http.StatusSeeOther, "/review/changes/"+strconv.FormatInt(made, 10))
}
