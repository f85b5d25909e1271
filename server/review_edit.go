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

// edit is the form in a curator's hands: the record as proposed.
func (p *reviews) edit(c echo.Context) error {
	s, err := p.submission(c)
	if err != nil {
		return err
	}
	if s.State != "submitted" {
		return &catalogue.Error{Code: catalogue.Conflict, Message: "This record is " + s.State + " by now; there is nothing to edit before accepting."}
	}
	if recordGone(s) {
		return &catalogue.Error{Code: catalogue.Conflict, Message: s.Row.Measurement + " was withdrawn since this change of it was sent. Return the change with a comment, or put the record back first, from its page."}
	}
	r := recordOf(s)
	r.typed.Set("base_revision", strconv.FormatInt(s.CurrentRevision, 10))
	if err := p.check(c.Request().Context(), r); err != nil {
		return err
	}
	return p.showEdit(c, http.StatusOK, s, r, "")
}

func (p *reviews) showEdit(c echo.Context, status int, s *catalogue.Submission, r *record, refusal string) error {
	f := views.ContributeForm{Action: "/review/" + strconv.FormatInt(s.ID, 10) + "/edit", ID: s.ID, State: s.State, Curator: true, Refusal: refusal}
	if s.Current != nil {
		row := r.row
		row.Normalise()
		f.Changes = catalogue.Diff(s.Current, &row)
	}
	p.fill(r, &f)
	return render(c, status, views.ReviewEditPage(p.page(c, "Accept with edits", "review"), f))
}

func (p *reviews) acceptEdits(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	action, err := oneOf(form, "action", "check", []string{"check", "accept"})
	if err != nil {
		return err
	}
	s, err := p.submission(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	r := readRecord(keptByCurator(form, s))
	r.lenient = true
	r.need()
	if err := p.check(ctx, r); err != nil {
		return err
	}
	switch {
	case action == "check":
		return p.showEdit(c, http.StatusOK, s, r, "")
	case len(r.errors) > 0:
		return p.showEdit(c, http.StatusUnprocessableEntity, s, r, "")
	}
	seen, _ := strconv.ParseInt(form.Get("base_revision"), 10, 64)
	err = p.store.AcceptEdits(ctx, s.ID, p.user(c).ID, r.row, seen, form.Get("message"))
	if err == nil {
		p.notice(c, r.row.SystemName+" is accepted with your edits.")
		return c.Redirect(http.StatusSeeOther, "/review")
	}
	var e *catalogue.Error
	if !errors.As(err, &e) || (e.Code != catalogue.Invalid && e.Code != catalogue.Conflict) {
		return err
	}
	status, note := http.StatusUnprocessableEntity, sentence(e.Message, e.Expected)
	if e.Code == catalogue.Conflict {
		status = http.StatusConflict
		// What the curator now sees beside the edits is the newest version, so
		// sending the form again decides between the two knowingly.
		if s, err = p.submission(c); err != nil {
			return err
		}
		r.typed.Set("base_revision", strconv.FormatInt(s.CurrentRevision, 10))
		note += " The fields below hold your edits; the table of changes compares them with what is accepted now."
	}
	return p.showEdit(c, status, s, r, note)
}

// keptByCurator lets a curator change the record but not which record it is.
func keptByCurator(form url.Values, s *catalogue.Submission) url.Values {
	form.Set("measurement", s.Row.Measurement)
	form.Set("system", s.Row.System)
	return form
}
