package main

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"math"
	"net/http"
	"sync"
	"sync/atomic"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/views"
)

// job is one long fit on its way.
type job struct {
	bits   atomic.Uint64 // of the fraction done
	cancel context.CancelFunc
}

func (j *job) progress(fraction float64) { j.bits.Store(math.Float64bits(fraction)) }

func (j *job) fraction() float64 {
	f := math.Float64frombits(j.bits.Load())
	return min(max(f, 0), 1)
}

// jobs are the fits on their way by the key of their answer in the cache. The
// zero value is ready.
type jobs struct {
	mu   sync.Mutex
	held map[string]*job
}

// start registers a job; its context ends when the job is cancelled.
func (js *jobs) start(ctx context.Context, key string) (context.Context, *job) {
	ctx, cancel := context.WithCancel(ctx)
	j := &job{cancel: cancel}
	js.mu.Lock()
	defer js.mu.Unlock()
	if js.held == nil {
		js.held = map[string]*job{}
	}
	js.held[jobID(key)] = j
	return ctx, j
}

func (js *jobs) end(key string, j *job) {
	j.cancel()
	js.mu.Lock()
	defer js.mu.Unlock()
	if id := jobID(key); js.held[id] == j {
		delete(js.held, id)
	}
}

func (js *jobs) find(id string) *job {
	js.mu.Lock()
	defer js.mu.Unlock()
	return js.held[id]
}

// jobID names a job to the outside without its question.
func jobID(key string) string {
	sum := sha256.Sum256([]byte(key))
	return hex.EncodeToString(sum[:8])
}

// patience is how long a person looks at nothing before the page shows
// progress instead.
const patience = 500 * time.Millisecond

// analyseWatched waits for an answer as long as patience lasts for a browser,
// which then gets a page that shows the progress and asks again; other clients
// wait for the answer itself. working is that page's job, nil with an answer.
func (a *App) analyseWatched(c echo.Context, f catalogue.Filter, req stats.Request) (analysis *stats.Analysis, working *job, err error) {
	ctx := c.Request().Context()
	if !watches(c) {
		analysis, err = a.analyse(ctx, f, req)
		return analysis, nil, err
	}
	type answer struct {
		analysis *stats.Analysis
		err      error
	}
	done := make(chan answer, 1)
	go func() {
		analysis, err := a.analyse(context.WithoutCancel(ctx), f, req)
		done <- answer{analysis, err}
	}()
	wait := time.NewTimer(patience)
	defer wait.Stop()
	select {
	case r := <-done:
		return r.analysis, nil, r.err
	case <-wait.C:
	case <-ctx.Done():
		return nil, nil, ctx.Err()
	}
	key, err := a.analysisKey(ctx, f, req)
	if err != nil {
		return nil, nil, err
	}
	if j := a.jobs.find(jobID(key)); j != nil {
		return nil, j, nil
	}
	r := <-done // it finished between the two looks
	return r.analysis, nil, r.err
}

// watches says whether a person looks at a page being loaded: browsers say so.
func watches(c echo.Context) bool {
	h := c.Request().Header
	return c.Request().Method == http.MethodGet && (h.Get("Sec-Fetch-Mode") == "navigate" || h.Get("X-Requested-By") == "page")
}

// regressionWorking shows how far a fit has come and asks again.
func (a *App) regressionWorking(c echo.Context, page views.RegressionPage, j *job) error {
	h := c.Response().Header()
	h.Set("Refresh", "1")
	h.Set(echo.HeaderCacheControl, "no-store")
	page.JSON, page.CSV = "", ""
	page.Progress = j.fraction()
	return render(c, http.StatusAccepted, views.RegressionWorking(page))
}

// regressionCancel stops the fit of the question in the body.
func (a *App) regressionCancel(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	f, req, err := regressionQuestion(q)
	if err != nil {
		return err
	}
	key, err := a.analysisKey(c.Request().Context(), f, req)
	if err != nil {
		return err
	}
	if j := a.jobs.find(jobID(key)); j != nil {
		j.cancel()
	}
	page := views.RegressionPage{Page: a.regressionFrame(c, f, req), Request: req, Filter: f, Categories: stats.Categories}
	page.Refusals = []views.Refusal{{Message: "The fit was cancelled. Ask for fewer models or fewer resamples, or fit it again."}}
	page.JSON, page.CSV, page.Path = "", "", "/regression"
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.Regression(page))
}
