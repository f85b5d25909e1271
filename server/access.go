package main

import (
	"net/http"
	"slices"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// role is what a person may do; each includes the one before it.
type role int

// The roles. A reader has no account.
const (
	reader role = iota
	contributor
	curator
	keeper
)

func (r role) String() string {
	return [...]string{"reader", "contributor", "curator", "keeper"}[r]
}

// roleOf is the role of an account; nil is a reader.
func roleOf(u *catalogue.Account) role {
	if u == nil {
		return reader
	}
	return role(1 + slices.Index(catalogue.Roles, u.Role))
}

// access is the one table of who may do what: the least role for a method and
// a route. A page that only reads and is not here is open to everyone; a route
// that changes something must be here (a test asks).
var access = map[string]role{
	"GET /sign-in":        reader,
	"POST /sign-in":       reader,
	"POST /sign-out":      reader,
	"GET /first-curator":  reader,
	"POST /first-curator": reader,
	"GET /welcome":        reader,
	"POST /welcome":       reader,

	"GET /join":      reader,
	"POST /join":     reader,
	"GET /register":  reader,
	"POST /register": reader,

	"GET /account":           contributor,
	"POST /account":          contributor,
	"POST /account/password": contributor,
	"POST /account/sign-out": contributor,

	"GET /people":                      keeper,
	"POST /people":                     keeper,
	"POST /people/invitations":         keeper,
	"POST /people/invitations/:id/end": keeper,
	"GET /registrations":               curator,
	"POST /registrations/:id":          curator,
	"POST /people/:id/role":            keeper,
	"POST /people/:id/password":        keeper,
	"POST /people/:id/state":           keeper,
	"GET /status":                      keeper,
	"GET /settings":                    keeper,
	"GET /settings.json":               keeper,
	"POST /settings":                   keeper,
	"POST /settings/import":            keeper,

	"GET /contribute":                 contributor,
	"POST /contribute":                contributor,
	"GET /contribute/upload":          contributor,
	"POST /contribute/upload":         contributor,
	"GET /contribute/:id":             contributor,
	"POST /contribute/:id":            contributor,
	"POST /contribute/:id/withdraw":   contributor,
	"GET /review":                     curator,
	"GET /review/activity":            curator,
	"POST /review/batch/:id":          curator,
	"GET /review/:id":                 curator,
	"POST /review/:id":                curator,
	"GET /review/:id/edit":            curator,
	"POST /review/:id/edit":           curator,
	"POST /contribute/:id/comment":    contributor,
	"GET /measurements/:id/withdraw":  contributor,
	"POST /measurements/:id/withdraw": contributor,
	"POST /measurements/:id/restore":  contributor,
	"POST /systems/:slug/restore":     curator,
	"GET /review/batch/:id":           curator,
	"GET /review/changes/:id":         curator,
	"POST /review/changes/:id":        curator,
	"GET /review/merge":               curator,
	"POST /review/merge":              curator,
	"GET /review/merge/measurements":  curator,
	"POST /review/merge/measurements": curator,
	"GET /recompute":                  curator,
	"POST /recompute":                 curator,
	"POST /recompute/:name":           curator,
	"POST /contribute/:id/embargo":    contributor,
	"GET /review/embargoes":           curator,
	"POST /review/:id/publish":        curator,

	"GET /contribute/upload/:id":               contributor,
	"POST /contribute/upload/:id":              contributor,
	"GET /contribute/upload/:id/progress.json": contributor,
	"GET /contribute/upload/:id/remarks.csv":   contributor,

	"POST /releases":           curator,
	"POST /releases/:name/doi": curator,

	// These take their question in the body and change nothing.
	"POST /regression/freeze":         contributor,
	"POST /regression/cancel":         reader,
	"POST /expectation":               reader,
	"POST /expectation.json":          reader,
	"POST /expectation.csv":           reader,
	"POST /expectation/batch":         reader,
	"POST /expectation/batch/cancel":  reader,
	"POST /expectation/batch/answers": reader,
	"POST /figures/expectation.svg":   reader,
	"POST /figures/expectation.png":   reader,
	"POST /figures/expectation.pdf":   reader,
	"POST /expectation/time":          reader,
	"POST /expectation/time.json":     reader,
	"POST /expectation/report":        reader,
	"POST /measure":                   reader,
	"POST /measure.json":              reader,
	"POST /measure.csv":               reader,
}

// requireRole stands before every handler and asks the table. A signed-out
// person is sent to sign in and comes back afterwards; what a form held travels
// along.
func (a *App) requireRole(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		method := c.Request().Method
		if method == http.MethodHead {
			method = http.MethodGet
		}
		least := access[method+" "+c.Path()]
		if least == reader {
			return next(c)
		}
		if a.readOnly {
			return echo.NewHTTPError(http.StatusForbidden,
				"This catalogue is shown read-only: nobody signs in and nothing is changed here.")
		}
		c.Response().Header().Set("Cache-Control", "no-store")
		u := a.user(c)
		switch {
		case u == nil && wantsData(c):
			return echo.NewHTTPError(http.StatusUnauthorized, "Sign in first; your session has ended.")
		case u == nil && method == http.MethodGet:
			return c.Redirect(http.StatusSeeOther, signInAddress(c.Request().URL.RequestURI()))
		case u == nil:
			return a.signInCarrying(c)
		case roleOf(u) < least:
			return echo.NewHTTPError(http.StatusForbidden,
				"This page is for a "+least.String()+". You are signed in as a "+u.Role+"; ask a keeper of this catalogue if you need it.")
		}
		return next(c)
	}
}
