package main

import (
	"context"
	"errors"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// contributions are the pages of a contributor.
type contributions struct {
	*App
	forms *formBook
	sent  *throttle // files sent, by account
}

func (a *App) routesContribute(e *echo.Echo) {
	p := &contributions{App: a, forms: newFormBook()}
	get(e, "/contribute", p.blank)
	e.POST("/contribute", p.post)
	p.routesUpload(e)
	get(e, "/contribute/:id", p.saved)
	e.POST("/contribute/:id", p.post)
	e.POST("/contribute/:id/withdraw", p.withdraw)
	e.POST("/contribute/:id/comment", p.comment)
	p.routesPrivate(e)
}

// blank is an empty form; with ?system= for another measurement of a system,
// with ?measurement= for a change to an accepted one.
func (p *contributions) blank(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"system", "measurement", "revision"}); err != nil {
		return err
	}
	u := p.user(c)
	if id := catalogue.PrivateContribution(q.Get("measurement")); id != 0 {
		return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(id, 10))
	}
	var v url.Values
	switch {
	case q.Get("measurement") != "":
		row, revision, err := p.store.Measurement(c.Request().Context(), q.Get("measurement"))
		if err != nil {
			return err
		}
		if row, err = p.asOf(c.Request().Context(), q, row); err != nil {
			return err
		}
		v = formOfRow(*row, nil)
		v.Set("base_revision", strconv.FormatInt(revision, 10))
	default:
		row := catalogue.NewRow()
		row.Contributor = u.Credit
		if slug := q.Get("system"); slug != "" {
			ctx, err := p.store.AsSeenBy(c.Request().Context(), u.ID)
			if err != nil {
				return err
			}
			if err := p.ofSystem(ctx, slug, &row); err != nil {
				return err
			}
		}
		v = formOfRow(row, nil)
		for _, name := range []string{"sinuosity_kind", "measured_line", "licence"} {
			v.Set(name, "")
		}
	}
	r := readRecord(v)
	r.shown = map[string]string{}
	return p.show(c, http.StatusOK, r, views.ContributeForm{})
}

// saved is a submission of one's own: a form while it can still change.
func (p *contributions) saved(c echo.Context) error {
	s, err := p.own(c)
	if err != nil {
		return err
	}
	audience, hidden, err := p.audience(c.Request().Context(), s.ID)
	if err != nil {
		return err
	}
	if hidden != nil && hidden.Embargo {
		return p.embargoPage(c, http.StatusOK, s, hidden, views.Embargo{})
	}
	if s.State == "accepted" || s.State == "withdrawn" || s.Act != catalogue.ActEdit {
		return render(c, http.StatusOK, views.SettledPage(p.page(c, s.Row.SystemName, "contribute"), reviewOf(s)))
	}
	r := recordOf(s)
	typeAudience(r.typed, audience, hidden)
	if s.State == "returned" {
		if err := p.check(c.Request().Context(), r); err != nil {
			return err
		}
	}
	return p.show(c, http.StatusOK, r, p.formState(s))
}

// recordOf is a stored submission as its form holds it.
func recordOf(s *catalogue.Submission) *record {
	v := formOfRow(s.Row, s.Typed)
	v.Set("base_revision", strconv.FormatInt(s.BaseRevision, 10))
	v.Set("centreline", s.Centreline)
	v.Set("centreline_settings", s.CentrelineSettings)
	if s.State == "draft" {
		for _, name := range []string{"sinuosity_kind", "measured_line"} {
			// A draft keeps what was not chosen yet as the default; asking again
			// is safer than taking it for an answer.
			if c, ok := catalogue.ColumnByName(name); ok && c.Get(&s.Row) == c.Default && s.Row.Measurement == "" {
				v.Set(name, "")
			}
		}
	}
	for key, reason := range s.Overrides {
		v.Set("override."+key, reason)
	}
	r := readRecord(v)
	r.shown = map[string]string{}
	return r
}

func (p *contributions) formState(s *catalogue.Submission) views.ContributeForm {
	return views.ContributeForm{ID: s.ID, State: s.State, Comment: s.Comment, Messages: s.Messages}
}

// own finds the submission of the address; another person's is not there.
func (p *contributions) own(c echo.Context) (*catalogue.Submission, error) {
	id, err := idOf(c)
	if err != nil {
		return nil, err
	}
	s, err := p.store.Submission(c.Request().Context(), id)
	if err != nil {
		return nil, err
	}
	if s.By.ID != p.user(c).ID {
		return nil, &catalogue.Error{Code: catalogue.NotFound, Message: "There is no such record of yours. A curator finds what others sent under Review."}
	}
	return s, nil
}

// check runs the checks of the import on what could be read.
func (a *App) check(ctx context.Context, r *record) error {
	findings, err := a.store.Check(ctx, r.row)
	if err != nil {
		return err
	}
	r.take(findings)
	return nil
}

// show renders the form. f holds what the record itself does not.
func (p *contributions) show(c echo.Context, status int, r *record, f views.ContributeForm) error {
	f.Action = "/contribute"
	if f.ID != 0 {
		f.Action += "/" + strconv.FormatInt(f.ID, 10)
	}
	p.fill(r, &f)
	if err := p.seeing(c.Request().Context(), r, &f); err != nil {
		return err
	}
	if err := p.changes(c.Request().Context(), r, &f); err != nil {
		return err
	}
	var mine []views.Submitted
	if f.ID == 0 && f.Measurement == "" {
		var err error
		if mine, err = p.mine(c); err != nil {
			return err
		}
	}
	title := "Contribute"
	if f.Measurement != "" {
		title = "Change " + f.Measurement
	} else if f.ID != 0 {
		title = r.row.SystemName
	}
	return render(c, status, views.ContributePage(p.page(c, title, "contribute"), f, mine))
}

// fill puts the record into its form.
func (a *App) fill(r *record, f *views.ContributeForm) {
	f.Groups, f.Name = r.groups(), r.row.SystemName
	f.Errors, f.Warned = r.summary()
	f.Measurement, f.System = r.row.Measurement, r.row.System
	f.BaseRevision = r.typed.Get("base_revision")
	if f.Measurement != "" || f.System != "" {
		f.SystemName = r.row.SystemName
	}
	f.Centreline, f.Message = r.typed.Get("centreline"), r.typed.Get("message")
	f.CentrelineSettings, f.Reference = r.typed.Get("centreline_settings"), r.typed.Get("reference")
	if f.Source != nil && f.Source.Error != "" {
		f.Errors = append(f.Errors, views.FormError{Field: "reference", Label: "BibTeX or RIS", Message: f.Source.Error})
	}
	if f.Line != nil && f.Line.Error != "" {
		f.Errors = append(f.Errors, views.FormError{Field: "centreline", Label: "Centreline", Message: f.Line.Error})
	}
	if f.Token = r.typed.Get("form_token"); f.Token == "" {
		f.Token = newFormToken()
	}
}

// changes lists what the form would change of an accepted record.
func (p *contributions) changes(ctx context.Context, r *record, f *views.ContributeForm) error {
	if r.row.Measurement == "" {
		return nil
	}
	current, _, err := p.store.Measurement(ctx, r.row.Measurement)
	if catalogue.CodeOf(err) == catalogue.NotFound {
		return nil
	}
	if err != nil {
		return err
	}
	row := r.row
	row.Normalise()
	f.Changes = catalogue.Diff(current, &row)
	return nil
}

func (p *contributions) mine(c echo.Context) ([]views.Submitted, error) {
	all, err := p.store.Submissions(c.Request().Context(), "", p.user(c).ID)
	if err != nil {
		return nil, err
	}
	hidden, err := p.store.HiddenRowsBy(c.Request().Context(), p.user(c).ID)
	if err != nil {
		return nil, err
	}
	out := make([]views.Submitted, 0, len(all))
	for i := range all {
		one := submitted(&all[len(all)-1-i])
		for j := range hidden {
			if hidden[j].ID == one.ID {
				one.Hidden = &hidden[j]
			}
		}
		out = append(out, one)
	}
	return out, nil
}

func submitted(s *catalogue.Submission) views.Submitted {
	name := s.Row.SystemName
	if name == "" {
		name = s.Typed["system_name"]
	}
	return views.Submitted{ID: s.ID, SystemName: name, Sinuosity: num(s.Row.Sinuosity), State: s.State, Act: s.Act, At: s.UpdatedAt, Changes: s.Current != nil, Comment: s.Comment}
}

// post takes the form: check, measure, fill, save or submit, as the button
// pressed says.
func (p *contributions) post(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	var before *catalogue.Submission
	if c.Param("id") != "" {
		if before, err = p.own(c); err != nil {
			return err
		}
	}
	action, err := oneOf(form, "action", "check", []string{"check", "measure", "fill", "reference", "save", "keep", "submit"})
	if err != nil {
		return err
	}
	r := readRecord(form)
	line, report := measureLine(c, r)
	f := views.ContributeForm{Line: report}
	if before != nil {
		f = p.formState(before)
		f.Line = report
	}
	f.Tried = action
	if action == "reference" {
		if f.Source, err = p.fillSource(c.Request().Context(), r); err != nil {
			return err
		}
		r = readRecord(r.typed)
	}
	if action == "fill" && line != nil {
		report.Filled = r.fillFrom(line)
		r = readRecord(r.typed)
	}
	if action == "save" || action == "keep" || action == "submit" {
		return p.keep(c, r, line, f, action)
	}
	if action == "check" {
		r.need()
		if _, err := p.whoSees(c.Request().Context(), p.user(c).ID, r, action); err != nil {
			return err
		}
	}
	if err := p.check(c.Request().Context(), r); err != nil {
		return err
	}
	f.Checked = action == "check" && len(r.errors)+len(r.seeing) == 0 && r.unanswered() == 0 && (report == nil || report.Error == "")
	return p.show(c, http.StatusOK, r, f)
}

// keep saves a draft or sends the record to the curators.
func (p *contributions) keep(c echo.Context, r *record, line *formLine, f views.ContributeForm, action string) error {
	ctx, u := c.Request().Context(), p.user(c)
	if f.State == "accepted" || f.State == "withdrawn" {
		return p.refused(c, r, f, &catalogue.Error{Code: catalogue.Conflict,
			Message: "This record is " + f.State + " by now and no longer changes here. What you typed is below: copy what you need into a new form, or propose a change from the page of its system"})
	}
	asked := action
	if u.Waiting {
		action = "save" // nothing typed is lost while a curator has not let the person in
	}
	audience, err := p.whoSees(ctx, u.ID, r, action)
	if err != nil {
		return err
	}
	refused := f.Line != nil && f.Line.Error != "" || len(r.seeing) > 0
	if action != "save" {
		r.need()
		if err := p.check(ctx, r); err != nil {
			return err
		}
		refused = refused || len(r.errors) > 0 || r.unanswered() > 0
	} else {
		refused = refused || r.tooLong()
	}
	if refused {
		return p.show(c, http.StatusUnprocessableEntity, r, f)
	}
	s := r.submission(line)
	s.Audience = audience
	key := r.typed.Get("form_token")
	if key != "" {
		key = strconv.FormatInt(u.ID, 10) + " " + key
	}
	id, err := p.forms.once(key, contentOf(r.typed), func(made int64) (int64, error) {
		if s.ID = f.ID; s.ID == 0 {
			s.ID = made
		}
		id, err := p.kept(ctx, u.ID, s, action)
		if message := r.typed.Get("message"); err == nil && action == "submit" && strings.TrimSpace(message) != "" {
			err = p.store.Comment(ctx, id, u.ID, message)
		}
		return id, err
	})
	if err != nil {
		return p.refused(c, r, f, err)
	}
	said := keptNotices[action]
	if asked != action {
		said = "Saved as a draft, not sent: a curator has to let you in first. Send it from here then."
	}
	p.notice(c, said)
	return c.Redirect(http.StatusSeeOther, "/contribute/"+strconv.FormatInt(id, 10))
}

// refused shows what the catalogue did not take, beside its field where it has
// one, with everything typed.
func (p *contributions) refused(c echo.Context, r *record, f views.ContributeForm, err error) error {
	var e *catalogue.Error
	if !errors.As(err, &e) || (e.Code != catalogue.Invalid && e.Code != catalogue.Conflict) {
		return err
	}
	var found catalogue.Findings
	if errors.As(err, &found) {
		r.take(found)
	}
	status := http.StatusUnprocessableEntity
	if e.Code == catalogue.Conflict {
		status = http.StatusConflict
	}
	if _, ok := catalogue.ColumnByName(e.Field); ok && e.Field != "measurement" && e.Field != "system" {
		if r.errors[e.Field] == "" && len(found) == 0 {
			r.errors[e.Field] = sentence(e.Message, e.Expected)
		}
	} else if name, ok := audienceFields[e.Field]; ok {
		r.seeing = map[string]string{name: sentence(e.Message, e.Expected)}
	} else {
		f.Refusal = sentence(e.Message, e.Expected)
	}
	return p.show(c, status, r, f)
}

// tooLong marks texts that are longer than their column: a draft keeps what is
// unreadable, not what has no end.
func (r *record) tooLong() (found bool) {
	for _, c := range formColumns {
		most := c.MaxLen
		if c.Numeric() {
			most = 200
		}
		if n := utf8.RuneCountInString(r.typed.Get(c.Name)); n > most {
			r.errors[c.Name] = sentence("the text is "+strconv.Itoa(n)+" characters long", "at most "+strconv.Itoa(most)+" characters")
			found = true
		}
	}
	return found
}

// submission is the record as the catalogue keeps it.
func (r *record) submission(line *formLine) catalogue.Submission {
	s := catalogue.Submission{Row: r.row, Overrides: r.overrides, Typed: r.unread}
	if r.checkedAll {
		// A reason for what is no longer odd would only puzzle the curator.
		s.Overrides = map[string]string{}
		for _, f := range r.findings {
			s.Overrides[f.Key] = r.overrides[f.Key]
		}
	}
	s.BaseRevision, _ = strconv.ParseInt(r.typed.Get("base_revision"), 10, 64)
	if line != nil {
		s.Centreline, s.CentrelineSettings, s.CentrelineSinuosities = line.geoJSON, line.settings, line.sinuosities()
	}
	return s
}
