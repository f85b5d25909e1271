package main

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/expectation"
	"fathombend/views"
)

func (a *App) routesExpectation(e *echo.Echo) {
	for _, r := range []struct {
		path string
		h    echo.HandlerFunc
	}{
		{"/expectation", a.expectationPage},
		{"/expectation.json", a.expectationJSON},
		{"/figures/expectation.svg", a.expectationFigure},
		{"/figures/expectation.png", a.expectationFigure},
		{"/figures/expectation.pdf", a.expectationFigure},
	} {
		get(e, r.path, noStore(r.h))
		e.POST(r.path, noStore(r.h))
	}
	e.POST("/expectation.csv", noStore(a.targetsPage))
	get(e, "/expectation/columns.csv", a.expectationColumns)
	a.routesExpectationMore(e)
}

// noStore keeps targets out of caches: they are confidential.
func noStore(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		c.Response().Header().Set(echo.HeaderCacheControl, "no-store")
		return next(c)
	}
}

// fitSeed seeds the bootstrap of the fits. A target's own seed moves its
// draws only, so that fits can be shared by all targets.
const fitSeed = 1

// expectationFits gives the rival explanations fitted on the rows of f for one
// response and measured line, from the cache of this catalogue revision.
// response "" is peak, else any; line "" is all.
func (a *App) expectationFits(ctx context.Context, f catalogue.Filter, response, line string) (*expectation.Fits, error) {
	f = fitFilter(f, "")
	rev, err := a.store.Revision(ctx)
	if err != nil {
		return nil, err
	}
	key := fmt.Sprintf("expectation|%d|%s|%s|%s", rev, f.Values().Encode(), response, line)
	v, err := a.fits.do(ctx, key, func(ctx context.Context) (any, error) {
		leave, err := a.enter(ctx)
		if err != nil {
			return nil, err
		}
		defer leave()
		chosen, err := a.settingsFor(ctx, f.Release)
		if err != nil {
			return nil, err
		}
		rows, err := a.statsRowsOf(ctx, f, chosen.Climate)
		if err != nil {
			return nil, err
		}
		defer a.metrics.fitted("expectation", time.Now())
		return expectation.Fit(ctx, rows, expectation.Options{
			Response: response, MeasuredLine: line, Cluster: "parent_deposit", Seed: fitSeed, ClassLimits: chosen.ClassLimits, Climate: chosen.Climate,
		})
	})
	if err != nil {
		return nil, err
	}
	return v.(*expectation.Fits), nil
}

// expect answers one target on the rows of f.
func (a *App) expect(ctx context.Context, f catalogue.Filter, t expectation.Target) (*expectation.Result, error) {
	fits, err := a.expectationFits(ctx, f, t.Response, t.MeasuredLine)
	if err != nil {
		return nil, err
	}
	result, err := fits.Expect(ctx, t)
	if note := unusedOfTables(f); err == nil && note != "" {
		result.Notes = append(result.Notes, note)
	}
	if err == nil && f.Release != "" {
		result.Settings["release"], err = a.store.ReleaseName(ctx, f.Release)
	}
	return result, err
}

// expectationPage shows the form, and under it the answer when something was
// asked. A wrong value comes back with everything typed.
func (a *App) expectationPage(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	posted := c.Request().Method == http.MethodPost
	if !posted && hasEmpty(q) && allow(q, targetParameters, catalogue.FilterParameters) == nil {
		return c.Redirect(http.StatusFound, withQuery("/expectation", withoutEmpty(q)))
	}
	page := a.expectationFrame(c, q, posted)
	if asksNothing(q) && allow(q, targetParameters, catalogue.FilterParameters) == nil {
		if page.Filter, err = filterOf(q); err != nil {
			return a.expectationRefused(c, page, err)
		}
		if page.Notice == "" {
			page.Notice = unusedOfTables(page.Filter)
		}
		if page.Facets, err = a.facets(c.Request().Context(), page.Filter); err != nil {
			return err
		}
		return render(c, http.StatusOK, views.Expectation(page))
	}
	f, t, err := expectationQuestion(q)
	page.Filter = f
	if err == nil {
		page.Facets, err = a.facets(c.Request().Context(), f)
	}
	if err == nil {
		page.Result, err = a.expect(c.Request().Context(), f, t)
	}
	if err != nil {
		return a.expectationRefused(c, page, err)
	}
	page.Target = t
	if page.Days, err = dayCurves(page.Result); err != nil {
		return err
	}
	return render(c, http.StatusOK, views.Expectation(page))
}

func (a *App) expectationFrame(c echo.Context, q url.Values, posted bool) views.ExpectationPage {
	p := views.ExpectationPage{Page: a.page(c, "Expectation", "expectation"), Typed: q, Posted: posted, Columns: columnHelp()}
	p.Query = withoutEmpty(q)
	if !posted && !asksNothing(q) {
		p.JSON = withQuery("/expectation.json", p.Query)
	}
	return p
}

// expectationRefused shows why, beside the form with everything typed still in
// it.
func (a *App) expectationRefused(c echo.Context, page views.ExpectationPage, err error) error {
	f, all, ok := refusals(page.Typed, err)
	if !ok {
		return err
	}
	page.JSON = ""
	page.Filter, page.Refusals, page.TypedFilter, page.Fields = f, all, page.Typed, targetParameters
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, http.StatusBadRequest, views.Expectation(page))
}

func (a *App) expectationJSON(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	f, t, err := expectationQuestion(q)
	if err != nil {
		return err
	}
	r, err := a.expect(c.Request().Context(), f, t)
	if err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, r)
}

// expectationFigure is one figure of the page as a file.
func (a *App) expectationFigure(c echo.Context) error {
	q, err := targetParams(c)
	if err != nil {
		return err
	}
	panel := q.Get("panel")
	q = withValues(q)
	q.Del("panel")
	q.Del("width")
	f, t, err := expectationQuestion(q)
	if err != nil {
		return err
	}
	page := views.ExpectationPage{Target: t, Filter: f}
	if page.Result, err = a.expect(c.Request().Context(), f, t); err != nil {
		return err
	}
	if page.Days, err = dayCurves(page.Result); err != nil {
		return err
	}
	names := page.FigureNames()
	if panel == "" {
		panel = names[0]
	}
	if !slices.Contains(names, panel) {
		return &badInput{"panel", strconv.Quote(clip(panel)) + " is no figure of this page. Expected one of: " + strings.Join(names, ", ")}
	}
	from, err := a.figureSource(c.Request().Context(), f.Release, withoutEmpty(q))
	if err != nil {
		return err
	}
	return a.writeFigure(c, page.File(panel, from))
}

// targetsPage answers a file of targets. A reader whose file is refused comes
// back to the form that took it; a program gets the problem document.
func (a *App) targetsPage(c echo.Context) error {
	err := a.expectationCSV(c)
	if err == nil || c.Response().Committed || !strings.Contains(c.Request().Header.Get(echo.HeaderAccept), "text/html") {
		return err
	}
	return a.targetsRefused(c, err)
}

// targetsRefused is the form of a file of targets, with why it was refused.
func (a *App) targetsRefused(c echo.Context, err error) error {
	p := problemOf(err)
	switch {
	case p.Status == http.StatusServiceUnavailable:
		c.Response().Header().Set(echo.HeaderRetryAfter, "60")
	case p.Status >= http.StatusInternalServerError:
		return err
	}
	q, _ := url.ParseQuery(c.Request().URL.RawQuery)
	if f := c.Request().MultipartForm; f != nil {
		q = withValues(q, withoutEmpty(f.Value))
	}
	page := a.expectationFrame(c, q, false)
	f, all, ok := refusals(q, err)
	if !ok {
		f, _ = readable(q)
		all = []views.Refusal{{Name: views.TargetsField, Message: p.Detail, Expected: p.Expected}}
	}
	page.JSON = ""
	page.Filter, page.Refusals, page.TypedFilter = f, all, q
	page.Fields = append([]string{views.TargetsField}, targetParameters...)
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, p.Status, views.Expectation(page))
}

// expectationCSV answers a file of targets: the body itself, or a form's file
// or text called targets. Settings of the query hold for every row that does
// not give its own.
func (a *App) expectationCSV(c echo.Context) error {
	q, err := url.ParseQuery(c.Request().URL.RawQuery)
	if err != nil {
		return &badInput{"query", "the address holds a broken escape (%). Expected %25 for a plain %"}
	}
	in, q, err := targetsBody(c, q)
	if err != nil {
		return err
	}
	defer in.Close()
	f, err := batchSettings(q)
	if err != nil {
		return err
	}
	h := c.Response().Header()
	out := &lateHeader{c: c, set: func() {
		h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
		h.Set(echo.HeaderContentDisposition, `attachment; filename="expectations.csv"`)
		c.Response().WriteHeader(http.StatusOK)
	}}
	fits := func(ctx context.Context, response, line string) (*expectation.Fits, error) {
		return a.expectationFits(ctx, f, response, line)
	}
	// The whole answer may take longer than an ordinary page is given: every
	// piece that leaves wins time for the next.
	deadline := http.NewResponseController(c.Response().Writer)
	_, err = answerTargets(c.Request().Context(), in, out, targetValues(q), fits, batchWatch{progress: func(int) {
		c.Response().Flush()
		_ = deadline.SetWriteDeadline(time.Now().Add(batchPatience))
	}})
	return err
}

// batchSettings checks what holds for every row of a file of targets, and gives
// the rows of the catalogue that its answers stand on.
func batchSettings(q url.Values) (catalogue.Filter, error) {
	if err := allow(q, targetParameters, catalogue.FilterParameters); err != nil {
		return catalogue.Filter{}, err
	}
	f, err := filterOf(q)
	if err != nil {
		return f, err
	}
	_, err = targetOf(q)
	return f, err
}

// batchPatience is how long one piece of a batch may take.
const batchPatience = 2 * time.Minute

// lateHeader sends the header with the first byte, so that a file that is no
// table at all can still be refused with its own status.
type lateHeader struct {
	c    echo.Context
	set  func()
	sent bool
}

func (l *lateHeader) Write(b []byte) (int, error) {
	if !l.sent {
		l.sent = true
		l.set()
	}
	return l.c.Response().Write(b)
}

// targetsBody finds the file of targets in a request and the settings sent
// with it.
func targetsBody(c echo.Context, q url.Values) (io.ReadCloser, url.Values, error) {
	r := c.Request()
	kind, _, _ := strings.Cut(r.Header.Get(echo.HeaderContentType), ";")
	switch strings.TrimSpace(kind) {
	case "multipart/form-data":
		if err := r.ParseMultipartForm(8 << 20); err != nil {
			return nil, nil, bodyError(err)
		}
		q = withValues(q, withoutEmpty(r.MultipartForm.Value))
		text := q.Get("targets")
		q.Del("targets")
		if file, _, err := r.FormFile("targets"); err == nil {
			return file, q, nil
		}
		return io.NopCloser(strings.NewReader(text)), q, nil
	case echo.MIMEApplicationForm:
		if err := r.ParseForm(); err != nil {
			return nil, nil, bodyError(err)
		}
		q = withValues(q, withoutEmpty(r.PostForm))
		text := q.Get("targets")
		q.Del("targets")
		return io.NopCloser(strings.NewReader(text)), q, nil
	}
	if strings.TrimSpace(kind) == echo.MIMEApplicationJSON {
		return nil, nil, echo.NewHTTPError(http.StatusUnsupportedMediaType, "Targets are read here as CSV (text/csv), or as the form field targets. One target as JSON goes to /expectation.json.")
	}
	// Read at once: answering as it arrives could outlast the time a request is
	// given to arrive in. The size is bounded for every body.
	b, err := io.ReadAll(r.Body)
	if err != nil {
		return nil, nil, err
	}
	return io.NopCloser(bytes.NewReader(b)), q, nil
}

func bodyError(err error) error {
	var over *http.MaxBytesError
	if errors.As(err, &over) {
		return err
	}
	return &badInput{"body", "the form could not be read; send the CSV as the body with Content-Type text/csv, or as the form field targets"}
}

func withoutEmpty(q url.Values) url.Values {
	out := url.Values{}
	for name, values := range q {
		for _, v := range values {
			if strings.TrimSpace(v) != "" {
				out.Add(name, v)
			}
		}
	}
	return out
}

func withQuery(path string, q url.Values) string {
	if len(q) == 0 {
		return path
	}
	return path + "?" + q.Encode()
}
