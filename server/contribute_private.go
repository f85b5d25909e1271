package main

import (
	"context"
	"errors"
	"net/http"
	"net/url"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (p *contributions) routesPrivate(e *echo.Echo) {
	e.POST("/contribute/:id/embargo", p.embargo)
}

// Fields of a form that say who sees the row; formEmbargo has these values.
const (
	formEmbargo = "embargo" // "" everyone at once, or one of the two below
	formUntil   = "embargo_until"
	formCoarse  = "coarse"
	formPeople  = "people"

	embargoDay       = "date"
	embargoPublished = "published"
)

// audienceOf reads who is to see the row. refused holds what cannot be, by
// field.
func audienceOf(form url.Values) (a catalogue.Audience, refused map[string]string) {
	refused = map[string]string{}
	a.Until, a.People, a.Coarse = strings.TrimSpace(form.Get(formUntil)), strings.TrimSpace(form.Get(formPeople)), form.Get(formCoarse) == "yes"
	switch form.Get(formEmbargo) {
	case "":
		if a.Until != "" || a.Coarse {
			refused[formEmbargo] = "A day or a rounded place belongs to an embargo, and none is chosen. Expected: an embargo, or neither."
		}
	case embargoDay:
		a.Kind = catalogue.AudienceLater
		if a.Until == "" {
			refused[formUntil] = "The day is missing. Expected: year, month and day, as 2027-01-31."
		}
	case embargoPublished:
		a.Kind = catalogue.AudienceLater
		if a.Until != "" {
			refused[formUntil] = "The embargo ends when you say so, and a day is given too. Expected: one of the two."
		}
	default:
		refused[formEmbargo] = "That is none of the choices. Expected one of: at once, a day, when it is published."
	}
	return a, refused
}

// whoSees reads who is to see the row. All for which it could not be sent so is
// found together with what else is wrong; a draft may wait with it, and a
// private row needs only its people.
func (p *contributions) whoSees(ctx context.Context, owner int64, r *record, action string) (a catalogue.Audience, err error) {
	a, r.seeing = audienceOf(r.typed)
	sent := a
	switch action {
	case "save":
		return a, nil
	case "keep":
		sent = catalogue.Audience{Kind: catalogue.AudiencePrivate, People: a.People}
	}
	faults, err := p.store.AudienceFaults(ctx, owner, sent, r.row.Measurement != "")
	for _, e := range faults {
		if name, ok := audienceFields[e.Field]; ok && r.seeing[name] == "" {
			r.seeing[name] = sentence(e.Message, e.Expected)
		}
	}
	return a, err
}

// audienceFields are the names of the fields of an Error about an audience.
var audienceFields = map[string]string{"audience": formEmbargo, "until": formUntil, "people": formPeople}

// typeAudience puts a stored audience into a form.
func typeAudience(form url.Values, a catalogue.Audience, h *catalogue.Hidden) {
	if a.Kind == catalogue.AudienceLater {
		form.Set(formEmbargo, embargoPublished)
		if a.Until != "" {
			form.Set(formEmbargo, embargoDay)
		}
		form.Set(formUntil, a.Until)
		if a.Coarse {
			form.Set(formCoarse, "yes")
		}
	}
	form.Set(formPeople, a.People)
	if h != nil && a.People == "" {
		form.Set(formPeople, strings.Join(h.People, ", "))
	}
}

// audience is who is to see a stored submission, and its hidden row, if any.
func (p *contributions) audience(ctx context.Context, id int64) (a catalogue.Audience, h *catalogue.Hidden, err error) {
	if a, err = p.store.AudienceOf(ctx, id); err == nil {
		h, err = p.store.HiddenRow(ctx, id)
	}
	return a, h, err
}

// seeing is the part of the form about who sees the row. A change to what
// everybody sees has none.
func (p *contributions) seeing(ctx context.Context, r *record, f *views.ContributeForm) error {
	s := views.Seeing{Offered: r.row.Measurement == "", Embargo: r.typed.Get(formEmbargo), Until: r.typed.Get(formUntil),
		Coarse: r.typed.Get(formCoarse) == "yes", People: r.typed.Get(formPeople), Errors: r.seeing}
	if f.ID != 0 {
		h, err := p.store.HiddenRow(ctx, f.ID)
		if err != nil {
			return err
		}
		s.Row = h
	}
	for _, name := range []string{formEmbargo, formUntil, formPeople} {
		if text := r.seeing[name]; text != "" {
			f.Errors = append(f.Errors, views.FormError{Field: name, Label: views.SeeingLabel(name), Message: text})
		}
	}
	f.Seeing = s
	return nil
}

// kept saves, keeps or sends a submission as the button pressed says.
func (p *contributions) kept(ctx context.Context, by int64, s catalogue.Submission, action string) (int64, error) {
	switch action {
	case "keep":
		return p.store.KeepPrivate(ctx, by, s)
	case "save":
		if s.Audience.Kind == "" && s.Row.Measurement == "" {
			// What names people, or is private already, stays meant so.
			h, err := p.store.HiddenRow(ctx, s.ID)
			if err != nil {
				return 0, err
			}
			if h != nil || s.Audience.People != "" {
				s.Audience.Kind = catalogue.AudiencePrivate
			}
		}
		return p.store.SaveDraft(ctx, by, s)
	}
	return p.store.Submit(ctx, by, s)
}

var keptNotices = map[string]string{
	"keep":   "Kept as a private row. You and the people you name see it in the tables, on the chart and in the fits, marked private; nobody else does.",
	"save":   "The draft is saved.",
	"submit": "Sent. A curator reads it before it joins the catalogue; you can still change it until then.",
}

// embargoPage is an accepted row that others do not see yet.
func (p *contributions) embargoPage(c echo.Context, status int, s *catalogue.Submission, h *catalogue.Hidden, e views.Embargo) error {
	e.Row = *h
	if e.Typed == nil {
		e.Typed = &views.EmbargoTyped{Until: h.Until, People: strings.Join(h.People, ", ")}
	}
	record, err := p.store.HiddenRecord(c.Request().Context(), h.ID)
	if err != nil {
		return err
	}
	s.Accepted = record // not what stands for it
	return render(c, status, views.EmbargoPage(p.page(c, s.Row.SystemName, "contribute"), reviewOf(s), e))
}

// embargo changes or ends the embargo of a row of one's own.
func (p *contributions) embargo(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	s, err := p.own(c)
	if err != nil {
		return err
	}
	action, err := oneOf(form, "action", "", []string{"change", "publish", "take-back"})
	if err != nil || action == "" {
		return &badInput{"action", "it is missing or none of: change, publish, take-back"}
	}
	ctx, u, said := c.Request().Context(), p.user(c), ""
	switch action {
	case "change":
		err, said = p.store.SetEmbargo(ctx, s.ID, u.ID, form.Get(formUntil), form.Get(formPeople)), "The embargo is changed."
	case "publish":
		err, said = p.store.Publish(ctx, s.ID, u.ID), "Published: everyone sees the row from now on."
	case "take-back":
		err, said = p.store.TakeBack(ctx, s.ID, u.ID), "Taken back: it is a private row of yours again, and no curator has it."
	}
	var e *catalogue.Error
	if errors.As(err, &e) && (e.Code == catalogue.Invalid || e.Code == catalogue.Conflict) {
		h, herr := p.store.HiddenRow(ctx, s.ID)
		if herr != nil || h == nil || !h.Embargo {
			return err
		}
		status := http.StatusUnprocessableEntity
		if e.Code == catalogue.Conflict {
			status = http.StatusConflict
		}
		return p.embargoPage(c, status, s, h, views.Embargo{Refused: sentence(e.Message, e.Expected), Field: audienceFields[e.Field],
			Typed: &views.EmbargoTyped{Until: form.Get(formUntil), People: form.Get(formPeople)}})
	}
	if err != nil {
		return err
	}
	p.notice(c, said)
	return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(s.ID, 10))
}

// embargoes lists for a curator what is accepted and waits.
func (p *reviews) embargoes(c echo.Context) error {
	list, err := p.store.Embargoes(c.Request().Context())
	if err != nil {
		return err
	}
	return render(c, http.StatusOK, views.EmbargoesPage(p.page(c, "Under embargo", "review"), list))
}

// publish ends an embargo before its day.
func (p *reviews) publish(c echo.Context) error {
	id, err := idOf(c)
	if err != nil {
		return err
	}
	if err := p.store.Publish(c.Request().Context(), id, p.user(c).ID); err != nil {
		return err
	}
	p.notice(c, "Published: everyone sees the row from now on.")
	return c.Redirect(http.StatusSeeOther, "/review/embargoes")
}
