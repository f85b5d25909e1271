package main

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"errors"
	"fmt"
	"net/http"
	"net/url"
	"runtime/debug"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/views"
)

// Largest bodies taken: a form, and a file to import or to measure.
const (
	maxForm   = 1 << 20
	maxUpload = planform.MaxBytes + 2<<20 // the largest file, and the form around it
)

// middleware hangs what every request passes through, outermost first. The
// log stands outside the error handler's call so that it sees the status sent.
func (a *App) middleware(e *echo.Echo) {
	e.Use(a.identify, a.logged, securityHeaders, a.secured, a.recovered, sameOrigin(), limitBody, a.lifted, a.conditional, compressed, a.seen)
}

// identify gives the request the id that the log and an error page share.
func (a *App) identify(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		c.Response().Header().Set(echo.HeaderXRequestID, newRequestID())
		c.Set(routeKnown, a.routes[c.Path()])
		return next(c)
	}
}

func newRequestID() string {
	var b [8]byte
	rand.Read(b[:]) // never fails
	return hex.EncodeToString(b[:])
}

func requestID(c echo.Context) string { return c.Response().Header().Get(echo.HeaderXRequestID) }

// logged writes one line a request and counts it. The query is left out: the
// target of an expectation is confidential. So is an address that no route
// takes, since a query may have been typed into it, and who asked.
func (a *App) logged(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		began := time.Now()
		if err := next(c); err != nil {
			c.Error(err)
		}
		took := time.Since(began)
		a.metrics.observe(c, took)
		a.log.Info("request", "method", c.Request().Method, "path", loggedPath(c), "route", routeOf(c),
			"status", c.Response().Status, "bytes", c.Response().Size,
			"ms", float64(took.Microseconds())/1000, "request_id", requestID(c))
		return nil
	}
}

// loggedPath is the path of a request that a route takes, "" for any other.
func loggedPath(c echo.Context) string {
	if routeOf(c) == noRoute {
		return ""
	}
	return clip(c.Request().URL.Path)
}

func securityHeaders(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		h := c.Response().Header()
		h.Set("Content-Security-Policy", "default-src 'none'; script-src 'self'; style-src 'self'; font-src 'self'; "+
			"img-src 'self'; connect-src 'self'; form-action 'self'; base-uri 'none'; frame-ancestors 'none'")
		h.Set("Referrer-Policy", "no-referrer")
		h.Set("X-Content-Type-Options", "nosniff")
		h.Set("Cross-Origin-Opener-Policy", "same-origin")
		h.Set("Cross-Origin-Resource-Policy", "same-origin")
		return next(c)
	}
}

// recovered turns a panic into the page for a fault on this side; its stack
// goes to the log.
func (a *App) recovered(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) (err error) {
		defer func() {
			if r := recover(); r != nil {
				if r == http.ErrAbortHandler {
					panic(r)
				}
				err = fmt.Errorf("panic: %v\n%s", r, debug.Stack())
			}
		}()
		return next(c)
	}
}

// sameOrigin refuses a change asked for by another site's page.
func sameOrigin() echo.MiddlewareFunc {
	guard := http.NewCrossOriginProtection()
	return func(next echo.HandlerFunc) echo.HandlerFunc {
		return func(c echo.Context) error {
			if guard.Check(c.Request()) != nil {
				return echo.NewHTTPError(http.StatusForbidden,
					"This change was asked for by a page of another site and was not made. Open the form here and send it again.")
			}
			return next(c)
		}
	}
}

// limitBody bounds what is read. A form announced as too large is refused
// before it is read; one that lies about its size is cut off.
func limitBody(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		r := c.Request()
		limit := int64(maxForm)
		if takesFile(r) {
			limit = maxUpload
		}
		if r.URL.Path == "/measure" || strings.HasPrefix(r.URL.Path, "/measure.") {
			limit = maxMeasureBody // whatever a client calls the file it sends
		}
		if r.ContentLength > limit {
			return echo.NewHTTPError(http.StatusRequestEntityTooLarge, tooLarge(limit))
		}
		if r.Body != nil {
			r.Body = http.MaxBytesReader(c.Response().Writer, r.Body, limit)
		}
		err := next(c)
		var over *http.MaxBytesError
		if errors.As(err, &over) {
			return echo.NewHTTPError(http.StatusRequestEntityTooLarge, tooLarge(over.Limit))
		}
		return err
	}
}

func tooLarge(limit int64) string {
	return fmt.Sprintf("That is more than is taken at once (%d MB). Split the file, or use the import command on the machine itself.", limit>>20)
}

// takesFile: multipart forms and bodies that are no form carry files.
func takesFile(r *http.Request) bool {
	t, _, _ := strings.Cut(r.Header.Get("Content-Type"), ";")
	return strings.TrimSpace(t) != "application/x-www-form-urlencoded"
}

// page fills the frame of a page. It never fails: a frame without its counts
// is better than no error page.
func (a *App) page(c echo.Context, title, nav string) views.Page {
	ctx := c.Request().Context()
	q, _ := url.ParseQuery(c.Request().URL.RawQuery)
	p := views.Page{
		Title: title, Nav: nav, Path: c.Request().URL.Path, Query: q,
		RequestID: requestID(c), ReadOnly: a.readOnly, Version: Version,
		Assets: assetAddresses, Notice: a.takeNotice(c),
	}
	p.InventedRows = a.invented(ctx)
	p.Base = a.baseAddress(c)
	p.SeesPrivate, p.LeavesPrivate = catalogue.SeesPrivate(ctx), c.Get(privateLeftOut) == true
	a.nameReleaseOf(ctx, &p)
	if u := a.user(c); u != nil {
		p.User = &views.User{Name: u.Name, Credit: u.Credit, Role: u.Role, Waiting: u.Waiting}
	}
	if p.User.Curates() {
		waiting, err := a.store.CountSubmissions(ctx, "submitted", 0)
		if err != nil {
			a.log.Error("counting submissions failed", "err", err)
		}
		p.Pending = waiting
		if p.Joining, err = a.store.CountRegistrations(ctx); err != nil {
			a.log.Error("counting registrations failed", "err", err)
		}
	}
	return p
}

// invented counts the invented rows, once a revision.
func (a *App) invented(ctx context.Context) int {
	rev, err := a.store.Revision(ctx)
	if err != nil {
		a.log.Error("reading the revision failed", "err", err)
		return 0
	}
	v, err := a.fits.do(ctx, fmt.Sprintf("invented|%d", rev), func(ctx context.Context) (any, error) {
		return a.store.Invented(ctx)
	})
	if err != nil {
		a.log.Error("counting invented rows failed", "err", err)
		return 0
	}
	return v.(int)
}
