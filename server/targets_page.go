package main

import (
	"bytes"
	"compress/gzip"
	"context"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/stats/expectation"
	"fathombend/views"
)

// routesBatch take a file of targets from a form. The key of its answers stands
// in the query, which is never logged.
func (a *App) routesBatch(e *echo.Echo) {
	e.POST("/expectation/batch", noStore(a.batchSend))
	get(e, "/expectation/batch", noStore(a.batchPage))
	e.POST("/expectation/batch/cancel", noStore(a.batchCancel))
	e.POST("/expectation/batch/answers", noStore(a.batchAnswers))
}

// batchSend answers a file of targets: at once when it is short or when a
// program sent it, else on a page that shows how far it has come.
func (a *App) batchSend(c echo.Context) error {
	if !strings.Contains(c.Request().Header.Get(echo.HeaderAccept), "text/html") {
		return a.expectationCSV(c)
	}
	job, err := a.batchStart(c)
	if err != nil {
		return a.targetsRefused(c, err)
	}
	wait := time.NewTimer(patience)
	defer wait.Stop()
	select {
	case <-job.done:
		if job.err == nil {
			return a.giveAnswers(c, job)
		}
	case <-wait.C:
	case <-c.Request().Context().Done():
		a.batches.forget(job)
		return c.Request().Context().Err()
	}
	return c.Redirect(http.StatusSeeOther, "/expectation/batch?key="+job.key)
}

// batchStart reads the file of a form and starts to answer it.
func (a *App) batchStart(c echo.Context) (*batchJob, error) {
	q, err := url.ParseQuery(c.Request().URL.RawQuery)
	if err != nil {
		return nil, &badInput{"query", "the address holds a broken escape (%). Expected %25 for a plain %"}
	}
	in, q, err := targetsBody(c, q)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	f, err := batchSettings(q)
	if err != nil {
		return nil, err
	}
	file, err := io.ReadAll(io.LimitReader(in, batchBytes+1))
	if err != nil {
		return nil, err
	}
	if len(file) > batchBytes {
		return nil, echo.NewHTTPError(http.StatusRequestEntityTooLarge, "The file of targets is larger than "+strconv.Itoa(batchBytes>>20)+
			" MB. Leave out columns that are no parameters, split it, or answer it with the command line")
	}
	all, err := countTargets(file)
	if err != nil {
		return nil, err
	}
	fits := func(ctx context.Context, response, line string) (*expectation.Fits, error) {
		return a.expectationFits(ctx, f, response, line)
	}
	return a.batches.start(c.Request().Context(), q, all, func(ctx context.Context, j *batchJob) error {
		err := j.answerInto(ctx, file, targetValues(q), fits)
		if err != nil && ctx.Err() == nil {
			// Its words may hold a target: the kind alone is logged.
			a.log.Error("a file of targets could not be answered", "kind", fmt.Sprintf("%T", err))
		}
		return err
	})
}

// batchPage shows how far a file has come, or what came of it.
func (a *App) batchPage(c echo.Context) error {
	key := c.QueryParam("key")
	if key == "" {
		return c.Redirect(http.StatusFound, "/expectation#batch-head")
	}
	page := views.TargetsPage{Page: a.page(c, "Many targets", "expectation")}
	page.Query = nil // the key is for this page alone
	job := a.batches.find(key)
	if job == nil {
		return render(c, http.StatusNotFound, views.TargetsForgotten(page))
	}
	page.Key, page.All, page.Done = key, job.all, int(job.rows.Load())
	if !job.finished() {
		c.Response().Header().Set("Refresh", "1")
		return render(c, http.StatusAccepted, views.TargetsWorking(page))
	}
	if job.err != nil {
		return job.err
	}
	page.Bad, page.Refused = job.bad, job.refused
	return render(c, http.StatusOK, views.TargetsAnswered(page))
}

// batchCancel ends a file that is on its way and leads back to the form, with
// the rows of the catalogue chosen for it.
func (a *App) batchCancel(c echo.Context) error {
	job := a.batches.find(c.FormValue("key"))
	if job == nil {
		return a.batchGone(c)
	}
	a.batches.forget(job)
	f, err := batchSettings(job.settings)
	if err != nil {
		return err
	}
	page := a.expectationFrame(c, f.Values(), false)
	page.Path, page.JSON, page.Filter = "/expectation", "", f
	page.Notice = "The file of targets was cancelled. Nothing of it is kept."
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.Expectation(page))
}

// batchAnswers gives the answered file, once.
func (a *App) batchAnswers(c echo.Context) error {
	job := a.batches.find(c.FormValue("key"))
	if job == nil {
		return a.batchGone(c)
	}
	if !job.finished() || job.err != nil {
		return c.Redirect(http.StatusSeeOther, "/expectation/batch?key="+job.key)
	}
	return a.giveAnswers(c, job)
}

func (a *App) batchGone(c echo.Context) error {
	page := views.TargetsPage{Page: a.page(c, "Many targets", "expectation")}
	return render(c, http.StatusNotFound, views.TargetsForgotten(page))
}

// giveAnswers sends the answered file and forgets it once it has left.
func (a *App) giveAnswers(c echo.Context, job *batchJob) error {
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
	h.Set(echo.HeaderContentDisposition, `attachment; filename="expectations.csv"`)
	return a.stream(c, func(w *patientWriter) error {
		z, err := gzip.NewReader(bytes.NewReader(job.answers))
		if err != nil {
			return err
		}
		if _, err := io.Copy(w, z); err != nil {
			return err
		}
		a.batches.forget(job)
		return nil
	})
}
