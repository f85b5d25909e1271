package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"net/http"
	"path"
	"regexp"
	"strings"

	"github.com/a-h/templ"
	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// render writes a page: to a buffer first, so that a failure half-way never
// leaves half a page under status 200.
func render(c echo.Context, status int, t templ.Component) error {
	var buf bytes.Buffer
	if err := t.Render(c.Request().Context(), &buf); err != nil {
		return err
	}
	return c.HTMLBlob(status, views.Finish(buf.Bytes()))
}

// writeJSON writes v with numbers that are not finite as null; equal values
// give equal bytes. See finite.
func writeJSON(c echo.Context, status int, v any) error {
	b, err := json.Marshal(finite(v))
	if err != nil {
		return err
	}
	return c.JSONBlob(status, append(b, '\n'))
}

// problem is an RFC 9457 problem document.
type problem struct {
	Type     string `json:"type"`
	Title    string `json:"title"`
	Status   int    `json:"status"`
	Detail   string `json:"detail"`
	Field    string `json:"field,omitempty"`
	Expected string `json:"expected,omitempty"`
	whole    string // the refusal as one text, as pages show it
}

// badInput is a refusal the server itself makes, e.g. an unknown parameter.
type badInput struct{ parameter, message string }

func (b *badInput) Error() string                      { return b.parameter + ": " + b.message }
func (b *badInput) Input() (parameter, message string) { return b.parameter, b.message }

// isFault says whether err is a failure on this side rather than an answer: a
// full disk must not read like a wrong password.
func isFault(err error) bool {
	code := catalogue.CodeOf(err)
	return code == catalogue.Internal || code == catalogue.Unavailable
}

// problemOf maps any error to its status and what the user may read: the one
// place where that is decided. Anything it does not know is a 500 whose cause
// only the log sees.
func problemOf(err error) problem {
	var in interface{ Input() (string, string) }
	var ce *catalogue.Error
	var he *echo.HTTPError
	switch {
	case errors.As(err, &in):
		field, msg := in.Input()
		detail, expected := expectedIn(msg)
		return problem{Title: "That cannot be answered", Status: http.StatusBadRequest, Detail: detail, Field: field, Expected: expected, whole: msg}
	case errors.As(err, &ce) && ce.Code != catalogue.Internal:
		status := map[catalogue.Code]int{catalogue.Invalid: 400, catalogue.NotFound: 404, catalogue.Conflict: 409, catalogue.Forbidden: 403, catalogue.Unavailable: 503}[ce.Code]
		if status == http.StatusServiceUnavailable {
			return problem{Title: "Not possible at present", Status: status, Detail: sentence(ce.Message, ""), Expected: ce.Expected}
		}
		return problem{Title: http.StatusText(status), Status: status, Detail: ce.Message, Field: ce.Field, Expected: ce.Expected}
	case errors.As(err, &he) && he.Code < 500:
		return problem{Title: http.StatusText(he.Code), Status: he.Code, Detail: fmt.Sprint(he.Message)}
	}
	return problem{Title: "Something went wrong here", Status: http.StatusInternalServerError,
		Detail: "The fault is on this side and has been logged. Nothing you typed was stored or changed; going back keeps it."}
}

// expectationStarts are the words that open what a refusal expects instead.
var expectationStarts = regexp.MustCompile(`(?:^|[.;:,?] )(Expected|expected|Allowed|Nearest|It has|Did you mean|Give|give|Choose|Use|Type|Leave)\b:? `)

// expectedIn parts a refusal into what is wrong and what was expected. The two
// stand in one text where they are made, because people read them so; data
// twins give them apart.
func expectedIn(message string) (detail, expected string) {
	at := expectationStarts.FindStringSubmatchIndex(message)
	if at == nil {
		return message, ""
	}
	word := strings.ToLower(message[at[2]:at[3]])
	detail = strings.TrimRight(message[:at[0]], " .;:,")
	if strings.HasPrefix(message[at[0]:], "?") {
		detail += "?"
	}
	expected = message[at[1]:]
	switch word {
	case "expected":
	case "allowed":
		expected = "one of: " + expected
	case "nearest", "it has":
		expected = "one such as: " + expected
	default:
		expected = message[at[2]:]
	}
	if detail == "" {
		detail = "it is missing or cannot be read"
	}
	return detail, strings.TrimSuffix(expected, ".")
}

// wantsData says whether the address asks for data rather than a page.
func wantsData(c echo.Context) bool {
	switch path.Ext(c.Request().URL.Path) {
	case ".json", ".csv", ".geojson", ".zip", ".bib", ".ris", ".atom":
		return true
	}
	return strings.HasPrefix(c.Request().URL.Path, "/features")
}

// handleError is echo's error handler.
func (a *App) handleError(err error, c echo.Context) {
	if c.Response().Committed {
		return
	}
	p := problemOf(err)
	p.Type = "about:blank"
	if p.Status == http.StatusServiceUnavailable {
		c.Response().Header().Set(echo.HeaderRetryAfter, "60")
	}
	if p.Status >= 500 {
		a.log.Log(c.Request().Context(), failureLevel(c.Request()), "request failed", "path", loggedPath(c), "request_id", requestID(c), "err", err)
	}
	if wantsData(c) {
		c.Response().Header().Set(echo.HeaderContentType, "application/problem+json")
		b, _ := json.Marshal(p)
		_ = c.Blob(p.Status, "application/problem+json", b)
		return
	}
	page := a.page(c, p.Title, "")
	detail := p.Detail
	if p.whole != "" {
		detail, p.Expected = p.whole, ""
	}
	if p.Field != "" {
		detail = p.Field + ": " + detail
	}
	hint := ""
	if p.Expected != "" {
		hint = "Expected: " + p.Expected
		if p.Status == http.StatusServiceUnavailable {
			hint = "Needed: " + p.Expected + ". What you typed is kept when you go back."
		}
	}
	_ = render(c, p.Status, views.ErrorPage(page, p.Status, detail, hint))
}

// finite returns a copy of v fit for JSON: every float that is not finite
// becomes nil. It walks what json.Marshal would walk.
func finite(v any) any {
	return finiteValue(v)
}

func isFinite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
