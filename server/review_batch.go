package main

import (
	"context"
	"errors"
	"net/http"
	"net/url"
	"slices"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/views"
)

// The size of a sample of an imported file: unless another is asked for, and at
// most.
const sampleSize, sampleMost = 10, 200

// batchQuestion is which sample of a file is asked for.
type batchQuestion struct{ size, seed int }

func batchQuestionOf(q url.Values) (b batchQuestion, err error) {
	if b.size, err = whole(q, "sample", sampleSize, 1, sampleMost); err != nil {
		return b, err
	}
	b.seed, err = whole(q, "seed", 1, 0, 1<<31-1)
	return b, err
}

// draw picks the submissions of a file that are to be read.
func (b batchQuestion) draw(waiting []int64) []int64 {
	var out []int64
	for _, i := range stats.DrawSample(len(waiting), b.size, uint64(b.seed)) {
		out = append(out, waiting[i])
	}
	return out
}

// batch shows the sample of one imported file.
func (p *reviews) batch(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	if err := allow(q, []string{"sample", "seed"}); err != nil {
		return err
	}
	b, err := batchQuestionOf(q)
	if err != nil {
		return err
	}
	return p.showBatch(c, http.StatusOK, b, views.BatchPage{})
}

func (p *reviews) showBatch(c echo.Context, status int, b batchQuestion, v views.BatchPage) error {
	id, err := idOf(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	file, err := p.store.Batch(ctx, id)
	if err != nil {
		return err
	}
	v.ID, v.Who, v.Why, v.At, v.Total = file.ID, file.Who, file.Why, file.At, len(file.Waiting)
	v.Size, v.Seed = b.size, b.seed
	drawn := b.draw(file.Waiting)
	v.Bound = stats.MostWrong(len(file.Waiting), len(drawn), 0.95)
	subs, err := p.store.SubmissionsByID(ctx, drawn)
	if err != nil {
		return err
	}
	for i := range subs {
		one, err := p.sampled(ctx, &subs[i])
		if err != nil {
			return err
		}
		one.Place = slices.Index(file.Waiting, subs[i].ID) + 1
		one.Read = slices.Contains(v.Read, subs[i].ID)
		v.Rows = append(v.Rows, one)
	}
	return render(c, status, views.Batch(p.page(c, "A file to review", "review"), v))
}

func (p *reviews) sampled(ctx context.Context, s *catalogue.Submission) (views.SampledRow, error) {
	out := views.SampledRow{ID: s.ID, Name: s.Row.SystemName, Sinuosity: num(s.Row.Sinuosity)}
	findings, err := p.store.Check(ctx, s.Row)
	if err != nil {
		return out, err
	}
	for _, f := range findings {
		out.Findings = append(out.Findings, views.ReviewFinding{Column: f.Column, Message: sentence(f.Message, f.Expected), Reason: s.Overrides[f.Key], Hard: f.Hard})
	}
	if s.Current != nil {
		out.Changes = s.Changes
	}
	row := s.Row
	row.Normalise()
	out.Groups, out.Unsaid = recordGroups(&row)
	return out, nil
}

// acceptBatch accepts all that waits of one imported file, once its sample is
// read.
func (p *reviews) acceptBatch(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	id, err := idOf(c)
	if err != nil {
		return err
	}
	b, err := batchQuestionOf(form)
	if err != nil {
		return err
	}
	file, err := p.store.Batch(c.Request().Context(), id)
	if err != nil {
		return err
	}
	v := views.BatchPage{Comment: form.Get("comment"), Errors: map[string]string{}}
	drawn := b.draw(file.Waiting)
	unread := len(drawn)
	for _, text := range form["read"] {
		if n, err := strconv.ParseInt(text, 10, 64); err == nil && slices.Contains(drawn, n) && !slices.Contains(v.Read, n) {
			v.Read = append(v.Read, n)
			unread--
		}
	}
	if seen := form.Get("total"); seen != strconv.Itoa(len(file.Waiting)) {
		v.Errors["sample"] = "Other rows of this file wait now than when the sample was drawn: someone decided on some of them meanwhile. Below is the sample of what waits now."
		return p.showBatch(c, http.StatusConflict, b, v)
	}
	if unread > 0 {
		v.Errors["sample"] = "Nothing was accepted: " + countWords(unread, "row of the sample is", "rows of the sample are") + " not marked as read. Read each, or return it on its own page."
		return p.showBatch(c, http.StatusUnprocessableEntity, b, v)
	}
	n, err := p.store.AcceptBatch(c.Request().Context(), id, p.user(c).ID, v.Comment, &catalogue.Sample{Seed: int64(b.seed), Total: len(file.Waiting), Drawn: drawn})
	var e *catalogue.Error
	if errors.As(err, &e) && (e.Code == catalogue.Invalid || e.Code == catalogue.Conflict) {
		status := map[catalogue.Code]int{catalogue.Invalid: http.StatusUnprocessableEntity, catalogue.Conflict: http.StatusConflict}[e.Code]
		v.Errors["sample"] = "Nothing was accepted. " + sentence(e.Message, e.Expected)
		return p.showBatch(c, status, b, v)
	}
	if err != nil {
		return err
	}
	p.notice(c, countWords(n, "record", "records")+" accepted, with a sample of "+strconv.Itoa(len(drawn))+" read.")
	return c.Redirect(http.StatusSeeOther, "/review")
}

func countWords(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}
