package main

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"net/http"
	"net/url"
	"runtime"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/views"
)

func (a *App) routesAnalyses(e *echo.Echo) {
	get(e, "/analyses", a.analysesPage)
	get(e, "/analyses/:name", a.analysisPage)
	e.POST("/regression/freeze", a.freeze)
}

// documentOf is the JSON document of an analysis, byte for byte as it is
// served, and the digest of its digits.
func documentOf(analysis *stats.Analysis) (document []byte, digest string, err error) {
	b, err := json.Marshal(finite(analysis))
	if err != nil {
		return nil, "", err
	}
	sum := sha256.Sum256(digitsOf(b))
	return append(b, '\n'), hex.EncodeToString(sum[:]), nil
}

// answerParts are the parts of an analysis that are numbers; what is said of
// them in sentences may be worded better by a later version.
var answerParts = []string{"rows", "clusters", "models", "comparisons", "shares", "influence", "overturning", "breakpoint"}

// digitsOf are the numbers of a document, in its order, as they are written.
func digitsOf(document []byte) []byte {
	var parts map[string]json.RawMessage
	if json.Unmarshal(document, &parts) != nil {
		return document
	}
	var out []byte
	for _, name := range answerParts {
		out = append(append(out, name...), ' ')
		d := json.NewDecoder(bytes.NewReader(parts[name]))
		d.UseNumber()
		for token, err := d.Token(); err == nil; token, err = d.Token() {
			if n, ok := token.(json.Number); ok {
				out = append(append(out, n...), ' ')
			}
		}
	}
	return out
}

// freeze keeps the analysis of the question in the body under a name.
func (a *App) freeze(c echo.Context) error {
	q, err := params(c)
	if err != nil {
		return err
	}
	title, why := q.Get("title"), q.Get("why")
	q = withoutEmpty(q)
	q.Del("title")
	q.Del("why")
	f, req, err := regressionQuestion(q)
	if err != nil {
		return err
	}
	// What is frozen is for everybody to check: private rows are left out of it.
	withoutPrivate(c)
	ctx := c.Request().Context()
	revision, err := a.store.Revision(ctx)
	if err != nil {
		return err
	}
	rows, err := a.fitRows(ctx, fitFilter(f, req.Group), &req)
	if err != nil {
		return err
	}
	chosen, err := a.settingsFor(ctx, f.Release)
	if err != nil {
		return err
	}
	analysis, err := analyseRows(ctx, rows, chosen, req)
	if err != nil {
		return err
	}
	_, digest, err := documentOf(analysis)
	if err != nil {
		return err
	}
	text, err := chosen.text()
	if err != nil {
		return err
	}
	by := int64(0)
	if u := a.user(c); u != nil {
		by = u.ID
	}
	name, err := a.store.FreezeAnalysis(ctx, catalogue.Analysis{Settings: text, Title: title, Why: why, Rows: rows, Digest: digest, Program: Version, Revision: revision,
		Question: withValues(regressionFilter(f).Values(), regressionValues(req)).Encode()}, by)
	var refused *catalogue.Error
	if errors.As(err, &refused) && refused.Field != "" {
		return a.freezeRefused(c, f, req, analysis, views.Freezing{Title: title, Why: why, Field: refused.Field, Refused: sentence(refused.Message, "")}, refused.Code)
	}
	if err != nil {
		return err
	}
	said := "The analysis is kept. Its address will give these digits again whatever becomes of the catalogue."
	if c.Get(privateLeftOut) == true {
		said += " It is fitted without private rows, which others could not check."
	}
	a.notice(c, said)
	return c.Redirect(http.StatusSeeOther, "/analyses/"+url.PathEscape(name))
}

// freezeRefused shows the analysis again with why it was not frozen, and what
// was typed.
func (a *App) freezeRefused(c echo.Context, f catalogue.Filter, req stats.Request, analysis *stats.Analysis, typed views.Freezing, code catalogue.Code) error {
	status := http.StatusUnprocessableEntity
	if code == catalogue.Conflict {
		status = http.StatusConflict
	}
	page := views.RegressionPage{Page: a.regressionFrame(c, f, req), Request: req, Filter: f, Analysis: analysis, Categories: stats.Categories, Freezing: typed}
	page.Path = "/regression"
	var err error
	if page.Facets, err = a.facets(c.Request().Context(), f); err != nil {
		return err
	}
	return render(c, status, views.Regression(page))
}

func analyseRows(ctx context.Context, rows []catalogue.Row, chosen settings, req stats.Request) (*stats.Analysis, error) {
	req.Workers = runtime.GOMAXPROCS(0)
	return stats.Analyse(ctx, statsRows(rows, chosen.Climate), req, nil)
}

// frozenAnswer is a frozen analysis run again on its own rows.
type frozenAnswer struct {
	kept     *catalogue.Analysis
	filter   catalogue.Filter
	request  stats.Request
	analysis *stats.Analysis
	document []byte
	digest   string
}

// same says whether the digits are those of the day it was frozen.
func (f *frozenAnswer) same() bool { return f.digest == f.kept.Digest }

// frozen runs a frozen analysis again. It never changes, so its answer is kept
// under its name and the version of the program.
func (a *App) frozen(ctx context.Context, name string) (*frozenAnswer, error) {
	v, err := a.fits.do(ctx, "frozen|"+name, func(ctx context.Context) (any, error) {
		kept, err := a.store.Analysis(ctx, name)
		if err != nil {
			return nil, err
		}
		q, err := url.ParseQuery(kept.Question)
		if err != nil {
			return nil, err
		}
		out := &frozenAnswer{kept: kept}
		if out.filter, out.request, err = regressionQuestion(q); err != nil {
			return nil, err
		}
		if err := a.recomputedAs(ctx, &out.request); err != nil {
			return nil, err
		}
		out.request.Chosen = views.FilterWords(regressionFilter(out.filter))
		if out.analysis, err = analyseRows(ctx, kept.Rows, recordedSettings(kept.Settings), out.request); err != nil {
			return nil, err
		}
		kept.Rows = nil // the answer holds them
		out.document, out.digest, err = documentOf(out.analysis)
		return out, err
	})
	if err != nil {
		return nil, err
	}
	return v.(*frozenAnswer), nil
}

func (a *App) analysesPage(c echo.Context) error {
	list, err := a.store.Analyses(c.Request().Context())
	if err != nil {
		return err
	}
	return render(c, http.StatusOK, views.Analyses(a.page(c, "Frozen analyses", "regression"), list))
}

// analysisPage shows a frozen analysis; with a suffix, its document or its
// rows.
func (a *App) analysisPage(c echo.Context) error {
	name, suffix := c.Param("name"), ""
	for _, s := range []string{".json", ".csv"} {
		if n, ok := strings.CutSuffix(name, s); ok {
			name, suffix = n, s
		}
	}
	f, err := a.frozen(c.Request().Context(), name)
	if err != nil {
		return err
	}
	switch suffix {
	case ".json":
		return c.JSONBlob(http.StatusOK, f.document)
	case ".csv":
		h := c.Response().Header()
		h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
		h.Set(echo.HeaderContentDisposition, `attachment; filename="`+f.kept.Name+`.csv"`)
		return writeUsedRows(c.Response(), f.analysis)
	}
	p := a.regressionFrame(c, f.filter, f.request)
	p.Title = f.kept.Title
	p.JSON, p.CSV = "/analyses/"+url.PathEscape(name)+".json", "/analyses/"+url.PathEscape(name)+".csv"
	chosen, err := settingFacts(f.kept.Settings)
	if err != nil {
		return err
	}
	page := views.RegressionPage{Page: p, Request: f.request, Filter: f.filter, Analysis: f.analysis, Categories: stats.Categories,
		Frozen: &views.FrozenAnalysis{Analysis: *f.kept, Same: f.same(), Digest: f.digest, Program: Version, Chosen: chosen}}
	return render(c, http.StatusOK, views.Regression(page))
}
