package main

import (
	"net/http"
	"net/url"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// settle accepts a contribution whose record changed meanwhile, with the value
// the curator chose for each field.
func (p *reviews) settle(c echo.Context, s *catalogue.Submission, form url.Values) error {
	comment := form.Get("comment")
	seen, _ := strconv.ParseInt(form.Get("seen"), 10, 64)
	if s.State != "submitted" || s.Current == nil || s.Base == nil {
		return p.refused(c, s, comment, &catalogue.Error{Code: catalogue.Conflict, Message: "this contribution is " + s.State + " by now, or its record was withdrawn"})
	}
	proposed := s.Row
	proposed.Normalise()
	row := *s.Current
	ways := threeWays(&catalogue.VersionConflict{Base: *s.Base, Current: *s.Current, Proposed: proposed, Since: s.Since, Proposal: catalogue.Diff(s.Base, &proposed)})
	errs := map[string]string{}
	for i, w := range ways {
		ways[i].Choice = form.Get("choice." + w.Column)
		text := w.Now
		switch ways[i].Choice {
		case "now":
		case "proposed":
			text = w.Proposed
		default:
			errs["choice."+w.Column] = "Choose which of the two stands."
			continue
		}
		col, _ := catalogue.ColumnByName(w.Column)
		if w.Column == "system" || w.Column == "measurement" {
			continue
		}
		if e := col.Set(&row, text); e != nil {
			errs["choice."+w.Column] = sentence(e.Message, e.Expected)
		}
	}
	v := views.Review{Comment: comment, Errors: errs, Conflict: ways, ConflictNote: "Both sides changed this record. Choose for each field which value stands."}
	if len(errs) > 0 {
		return p.show(c, http.StatusUnprocessableEntity, s, v)
	}
	if seen != s.CurrentRevision {
		v.ConflictNote = "The record was changed once more while you chose; the table shows it as it is now. Your choices are kept."
		return p.show(c, http.StatusConflict, s, v)
	}
	if err := p.store.AcceptEdits(c.Request().Context(), s.ID, p.user(c).ID, row, seen, comment); err != nil {
		return p.refused(c, s, comment, err)
	}
	p.notice(c, s.Row.SystemName+" is accepted as you chose, field by field.")
	return c.Redirect(http.StatusSeeOther, "/review")
}
