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

// reviews are the pages of a curator.
type reviews struct{ *App }

// queuePage is how many waiting records one page of the queue shows.
const queuePage = 50

func (a *App) routesReview(e *echo.Echo) {
	p := &reviews{a}
	get(e, "/review", p.queue)
	get(e, "/review/activity", p.activity)
	get(e, "/review/batch/:id", p.batch)
	get(e, "/review/embargoes", p.embargoes)
	e.POST("/review/:id/publish", p.publish)
	e.POST("/review/batch/:id", p.acceptBatch)
	get(e, "/review/changes/:id", p.changeSet)
	e.POST("/review/changes/:id", p.undo)
	get(e, "/review/merge", p.mergePage)
	e.POST("/review/merge", p.merge)
	get(e, "/review/merge/measurements", p.twinsPage)
	e.POST("/review/merge/measurements", p.mergeTwins)
	get(e, "/review/:id", p.one)
	e.POST("/review/:id", p.decide)
	get(e, "/review/:id/edit", p.edit)
	e.POST("/review/:id/edit", p.acceptEdits)
}

func (p *reviews) queue(c echo.Context) error {
	ctx := c.Request().Context()
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"page"}); err != nil {
		return err
	}
	n, err := whole(q, "page", 1, 1, 1_000_000)
	if err != nil {
		return err
	}
	total, err := p.store.CountSubmissions(ctx, "submitted", 0)
	if err != nil {
		return err
	}
	waiting, err := p.store.SubmissionsPage(ctx, "submitted", 0, queuePage, (n-1)*queuePage)
	if err != nil {
		return err
	}
	v := views.Queue{Total: total, Page: n, Pages: (total + queuePage - 1) / queuePage}
	for i := range waiting {
		one, err := p.queued(ctx, &waiting[i])
		if err != nil {
			return err
		}
		v.Add(one, waiting[i].Batch)
	}
	return render(c, http.StatusOK, views.QueuePage(p.page(c, "Review", "review"), v))
}

func (p *reviews) queued(ctx context.Context, s *catalogue.Submission) (views.Queued, error) {
	findings, err := p.store.Check(ctx, s.Row)
	if err != nil {
		return views.Queued{}, err
	}
	q := views.Queued{ID: s.ID, Act: s.Act, Said: s.Said, LastSaid: s.LastSaid, Conflict: len(s.Since) > 0, SystemName: s.Row.SystemName, Sinuosity: num(s.Row.Sinuosity), By: s.By.Credit, At: s.At, Odd: len(findings), Source: s.Row.Source}
	if s.Current != nil {
		q.Measured, q.Changes = s.Current.Measurement, len(s.Changes)
	} else if q.Gone = recordGone(s); q.Gone {
		q.Measured = s.Row.Measurement
	}
	return q, nil
}

// recordGone says that what a waiting submission changes, or withdraws, was
// withdrawn meanwhile: no accepting can succeed.
func recordGone(s *catalogue.Submission) bool {
	return s.State == "submitted" && s.Act != catalogue.ActRestore && s.Row.Measurement != "" && s.Current == nil
}

func (p *reviews) submission(c echo.Context) (*catalogue.Submission, error) {
	id, err := idOf(c)
	if err != nil {
		return nil, err
	}
	s, err := p.store.Submission(c.Request().Context(), id)
	if err != nil {
		return nil, err
	}
	audience, err := p.store.AudienceOf(c.Request().Context(), id)
	if err != nil {
		return nil, err
	}
	if s.State == "draft" || audience.Kind == catalogue.AudiencePrivate {
		return nil, &catalogue.Error{Code: catalogue.NotFound, Message: "There is no such record to review: it is a draft, which only its author sees."}
	}
	return s, nil
}

func (p *reviews) one(c echo.Context) error {
	s, err := p.submission(c)
	if err != nil {
		return err
	}
	return p.show(c, http.StatusOK, s, views.Review{})
}

// show renders one submission; v holds what was typed and what went wrong.
func (p *reviews) show(c echo.Context, status int, s *catalogue.Submission, v views.Review) error {
	ctx := c.Request().Context()
	full := reviewOf(s)
	audience, err := p.store.AudienceOf(ctx, s.ID)
	if err != nil {
		return err
	}
	if s.State == "submitted" {
		full.Audience = views.AudienceText(audience)
	}
	full.Comment, full.Errors, full.Conflict, full.ConflictNote, full.Refused = v.Comment, v.Errors, v.Conflict, v.ConflictNote, v.ConflictNote != ""
	if s.State == "submitted" && len(s.Since) > 0 && s.Base != nil && !full.Refused {
		full.ConflictNote = "The record was changed after this was written."
		full.Conflict = threeWays(&catalogue.VersionConflict{Base: *s.Base, Current: *s.Current, Proposed: full.Row, Since: s.Since, Proposal: catalogue.Diff(s.Base, &full.Row)})
	}
	if full.Findings, err = p.findings(ctx, s); err != nil {
		return err
	}
	if full.Slug, err = p.slugOf(ctx, s); err != nil {
		return err
	}
	if s.Act == catalogue.ActWithdraw && s.Current != nil {
		d, err := p.store.System(ctx, s.Current.System)
		if err != nil {
			return err
		}
		full.Only = len(d.Measurements) == 1
	}
	full.NewSystem = full.Slug == ""
	if full.Next, err = p.next(ctx, s.ID); err != nil {
		return err
	}
	return render(c, status, views.ReviewPage(p.page(c, s.Row.SystemName, "review"), full))
}

// findings are the checks of a submission that waits, with what its contributor
// says to them. One that is accepted is checked as the record it became: it is
// no duplicate of itself.
func (p *reviews) findings(ctx context.Context, s *catalogue.Submission) (out []views.ReviewFinding, err error) {
	if s.Act != catalogue.ActEdit {
		return nil, nil
	}
	row := s.Row
	if s.Accepted != nil {
		row = *s.Accepted
	} else if s.State == "accepted" {
		return nil, nil
	}
	findings, err := p.store.Check(ctx, row)
	if err != nil {
		return nil, err
	}
	for _, f := range findings {
		if f.Column == "measurement" && recordGone(s) {
			continue // the page says it, with what can be done
		}
		out = append(out, views.ReviewFinding{Column: f.Column, Message: sentence(f.Message, f.Expected), Reason: s.Overrides[f.Key], Hard: f.Hard})
	}
	return out, nil
}

// reviewOf is a submission as its page shows it.
func reviewOf(s *catalogue.Submission) views.Review {
	row := s.Row
	if s.Accepted != nil {
		row = *s.Accepted
	}
	row.Normalise()
	v := views.Review{
		Act: s.Act, Instead: s.Instead, Edits: s.Edits, Became: s.Became, Seen: s.CurrentRevision,

		ID: s.ID, State: s.State, Row: row, Sinuosity: num(row.Sinuosity), By: s.By.Name, Credit: s.By.Credit, ORCID: s.By.ORCID,
		At: s.At, Messages: s.Messages, Changes: s.Changes,
	}
	v.Groups, v.Unsaid = recordGroups(&row)
	if v.By == "" {
		v.By = s.By.Credit
	}
	if s.Current != nil {
		v.Measurement = s.Current.Measurement
	} else if v.Gone = recordGone(s); v.Gone {
		v.Measurement = s.Row.Measurement
	}
	if s.Centreline != "" {
		v.Line = storedLine(s)
	}
	return v
}

// recordGroups lists what a row says, by group, and the labels of the choices
// it leaves unknown.
func recordGroups(row *catalogue.Row) (out []views.RecordGroup, unsaid []string) {
	for _, title := range catalogue.Groups {
		g := views.RecordGroup{Title: strings.ToUpper(title[:1]) + title[1:]}
		for _, c := range catalogue.Columns {
			text := c.Get(row)
			if c.Group != title || text == "" {
				continue
			}
			if text == "unknown" && c.Kind == catalogue.KindChoice && !c.Required {
				unsaid = append(unsaid, views.FieldLabel(c.Name))
			} else {
				g.Fields = append(g.Fields, views.RecordField{Column: c.Name, Value: text, Unit: c.Unit, Choice: len(c.Choices) > 0})
			}
		}
		if len(g.Fields) > 0 {
			out = append(out, g)
		}
	}
	return out, unsaid
}

// slugOf is the accepted system a submission belongs to, "" when it is new.
func (p *reviews) slugOf(ctx context.Context, s *catalogue.Submission) (string, error) {
	if s.Current != nil {
		return s.Current.System, nil
	}
	slug := s.Row.System
	if slug == "" {
		slug = catalogue.Slug(s.Row.SystemName)
	}
	d, err := p.store.System(ctx, slug)
	switch {
	case catalogue.CodeOf(err) == catalogue.NotFound:
		return "", nil
	case err != nil:
		return "", err
	case s.Row.System == "" && !strings.EqualFold(d.Name, s.Row.SystemName):
		return "", nil
	}
	return slug, nil
}

// next is the record that waits longest beside this one.
func (p *reviews) next(ctx context.Context, id int64) (int64, error) {
	waiting, err := p.store.SubmissionsPage(ctx, "submitted", 0, 2, 0)
	if err != nil {
		return 0, err
	}
	for _, s := range waiting {
		if s.ID != id {
			return s.ID, nil
		}
	}
	return 0, nil
}

// decide takes the curator's word on one submission.
func (p *reviews) decide(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	action, err := oneOf(form, "action", "comment", []string{"accept", "return", "comment", "settle"})
	if err != nil {
		return err
	}
	s, err := p.submission(c)
	if err != nil {
		return err
	}
	ctx, by, comment := c.Request().Context(), p.user(c).ID, form.Get("comment")
	done, to := "", "/review"
	switch action {
	case "settle":
		return p.settle(c, s, form)
	case "accept":
		seen := int64(0) // of an edit what the author saw counts, of the other acts what the curator saw
		done = s.Row.SystemName + " is accepted and part of the catalogue."
		if s.Act != catalogue.ActEdit {
			seen, _ = strconv.ParseInt(form.Get("seen"), 10, 64)
			done = s.Row.Measurement + map[string]string{catalogue.ActWithdraw: " is withdrawn.", catalogue.ActRestore: " is back in the catalogue."}[s.Act]
		}
		err = p.store.AcceptSeen(ctx, s.ID, by, seen, comment)
	case "return":
		done, err = s.Row.SystemName+" is returned to its contributor.", p.store.Return(ctx, s.ID, by, comment)
	case "comment":
		done, to, err = "Your comment is kept.", "/review/"+strconv.FormatInt(s.ID, 10), p.store.Comment(ctx, s.ID, by, comment)
	}
	if err != nil {
		return p.refused(c, s, comment, err)
	}
	p.notice(c, done)
	return c.Redirect(http.StatusSeeOther, to)
}

// refused shows the submission again with what went wrong: a missing comment
// beside its field, a conflict with both versions. The comment typed is kept.
func (p *reviews) refused(c echo.Context, s *catalogue.Submission, comment string, err error) error {
	var e *catalogue.Error
	if !errors.As(err, &e) || (e.Code != catalogue.Invalid && e.Code != catalogue.Conflict) {
		return err
	}
	v := views.Review{Comment: comment}
	if e.Code == catalogue.Invalid {
		v.Errors = map[string]string{"comment": sentence(e.Message, e.Expected)}
		return p.show(c, http.StatusUnprocessableEntity, s, v)
	}
	v.ConflictNote = sentence(e.Message, "")
	var two *catalogue.VersionConflict
	if errors.As(err, &two) {
		v.Conflict = threeWays(two)
	}
	// Someone else may have decided on it: show it as it stands now.
	now, err := p.submission(c)
	if err != nil {
		return err
	}
	return p.show(c, http.StatusConflict, now, v)
}

// threeWays lines both versions up with what their author saw.
func threeWays(v *catalogue.VersionConflict) []views.ThreeWay {
	var out []views.ThreeWay
	touched := map[string]bool{}
	for _, ch := range append(append([]catalogue.FieldChange{}, v.Since...), v.Proposal...) {
		touched[ch.Column] = true
	}
	for _, c := range catalogue.Columns {
		if touched[c.Name] {
			out = append(out, views.ThreeWay{Column: c.Name, Base: c.Get(&v.Base), Now: c.Get(&v.Current), Proposed: c.Get(&v.Proposed)})
		}
	}
	return out
}

func (p *reviews) activity(c echo.Context) error {
	sets, err := p.store.Activity(c.Request().Context(), 100)
	if err != nil {
		return err
	}
	var items []views.Activity
	for _, s := range sets {
		items = append(items, activityOf(s))
	}
	return render(c, http.StatusOK, views.ActivityPage(p.page(c, "Activity", "review"), items))
}

func activityOf(s catalogue.ChangeSet) views.Activity {
	a := views.Activity{ID: s.ID, At: s.At, Who: s.Who, Why: s.Why, Created: s.Created, Changed: s.Changed, Withdrawn: s.Withdrawn, Back: s.Back, Merged: s.Merged, Undoes: s.Undoes, UndoneBy: s.UndoneBy, Sampled: s.Sampled, SampledOf: s.SampledOf}
	if s.Author != "" && s.Author != s.Who {
		a.Author = s.Author
	}
	switch {
	case s.Settings > 0:
		a.What = "Settings"
	case s.Systems == 1:
		a.What, a.Address = s.SystemName, "/systems/"+url.PathEscape(s.System)
	case s.Systems > 1:
		a.What = strconv.Itoa(s.Systems) + " systems"
	}
	return a
}
