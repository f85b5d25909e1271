package main

import (
	"context"
	"fmt"
	"runtime/debug"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/expectation"
	"fathombend/views"
)

// largeRows is the number of measurements from which a catalogue is large:
// reading and fitting all of them takes longer than a person waits for a page,
// and some hundred megabytes while it lasts.
const largeRows = 20_000

// isLarge says whether the catalogue may hold more measurements than a.large.
func (a *App) isLarge(ctx context.Context) (bool, error) {
	n, err := a.store.AtMost(ctx)
	return n > a.large, err
}

// gate lets one fit of a large catalogue work at a time, which bounds the
// memory of all of them together. nil lets all in.
type gate chan struct{}

func newGate() gate { return make(gate, 1) }

// enter waits until the work may begin or ctx ends. leave must be called after
// it.
func (a *App) enter(ctx context.Context) (leave func(), err error) {
	if a.gate == nil {
		return func() {}, nil
	}
	if large, err := a.isLarge(ctx); err != nil || !large {
		return func() {}, err
	}
	select {
	case a.gate <- struct{}{}:
		return func() {
			debug.FreeOSMemory() // the rows read for it: some hundred megabytes, not needed by the pages that follow
			<-a.gate
		}, nil
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

// weighs says whether an answer holds so many rows that only few like it are
// kept.
func weighs(value any) bool {
	switch v := value.(type) {
	case *stats.Analysis:
		return len(v.Used) > largeRows
	case *expectation.Fits:
		return v.Held() > largeRows
	case *chartAnswer:
		return len(v.rows) > largeRows
	}
	return false
}

// drawnPatience is how long the opening page of a large catalogue waits for its
// answer before it is sent without.
const drawnPatience = 200 * time.Millisecond

// meridianWatched is meridianAnswer for a page. Of a large catalogue whose
// answer is not there yet it gives the drawing alone, with Working set, while
// the answer is computed for the next who asks.
func (a *App) meridianWatched(ctx context.Context, f catalogue.Filter) (*views.MeridianPage, error) {
	large, err := a.isLarge(ctx)
	if err != nil {
		return nil, err
	}
	if !large {
		return a.meridianAnswer(ctx, f)
	}
	drawn, err := a.meridianDrawn(ctx, f)
	if err != nil || drawn.Total == 0 {
		return drawn, err
	}
	type answer struct {
		m   *views.MeridianPage
		err error
	}
	done := make(chan answer, 1)
	go func() {
		m, err := a.meridianAnswer(context.WithoutCancel(ctx), f)
		done <- answer{m, err}
	}()
	wait := time.NewTimer(drawnPatience)
	defer wait.Stop()
	select {
	case r := <-done:
		return r.m, r.err
	case <-wait.C:
		m := *drawn
		m.Working = true
		return &m, nil
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

// meridianDrawn is what the opening page shows of one filter before any fit,
// once a catalogue revision.
func (a *App) meridianDrawn(ctx context.Context, f catalogue.Filter) (*views.MeridianPage, error) {
	f.Page, f.PerPage, f.Sort = 0, 0, ""
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("meridian drawn|%d|%s", rev, f.Values().Encode()), func(ctx context.Context) (any, error) {
		return a.drawMeridian(ctx, f)
	})
	if err != nil {
		return nil, err
	}
	return v.(*views.MeridianPage), nil
}

// askAgain marks an answer that is not whole yet: browsers ask again, and
// nobody keeps it.
func askAgain(c echo.Context) {
	h := c.Response().Header()
	h.Set("Refresh", "3")
	h.Set(echo.HeaderCacheControl, "no-store")
}
