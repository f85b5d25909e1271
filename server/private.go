package main

import (
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// privateRoutes are the pages, with their twins, that hold private rows for
// those who see them. Every other address answers everybody alike.
var privateRoutes = []string{
	"/", "/systems", "/systems.csv", "/systems.json", "/systems.geojson", "/systems/dimensions.csv", "/systems/:slug",
	"/chart", "/chart.json", "/chart/lines.json",
	"/regression", "/regression.json", "/regression.csv", "/regression/cancel", "/regression/freeze", "/regression/next", "/regression/next.json",
	"/expectation", "/expectation.json", "/expectation.csv", "/expectation/time", "/expectation/time.json", "/expectation/report",
	"/expectation/deep-time", "/expectation/deep-time.json", "/expectation/batch", "/expectation/batch/cancel",
}

// holdsPrivate says whether a route is one of privateRoutes or the file of a
// figure on one.
func holdsPrivate(route string) bool {
	if strings.HasPrefix(route, "/figures/") {
		return true
	}
	for _, r := range privateRoutes {
		if r == route {
			return true
		}
	}
	return false
}

// lifted ends the embargoes whose day has come before a request is answered,
// so that the answer and its tag are those of the catalogue afterwards.
func (a *App) lifted(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		if !a.readOnly && taggable(routeOf(c)) {
			n, err := a.store.Lift(c.Request().Context())
			if err != nil {
				a.log.Error("ending embargoes failed", "err", err, "request_id", requestID(c))
			}
			if n > 0 {
				a.log.Info("embargoes ended", "rows", n)
			}
		}
		return next(c)
	}
}

// seen gives the request of a signed-in person the private rows that person
// sees, on the pages that hold them. Such an answer is of nobody else: it is
// kept nowhere.
func (a *App) seen(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		r := c.Request()
		if !holdsPrivate(routeOf(c)) || !a.carriesSession(r) {
			return next(c)
		}
		u := a.user(c)
		if u == nil {
			return next(c)
		}
		ctx, err := a.store.AsSeenBy(r.Context(), u.ID)
		if err != nil {
			return err
		}
		if catalogue.SeesPrivate(ctx) {
			c.SetRequest(r.WithContext(ctx))
			c.Response().Header().Set(echo.HeaderCacheControl, "private, no-store")
		}
		return next(c)
	}
}

// withoutPrivate answers a question that asks for what everybody sees.
func withoutPrivate(c echo.Context) {
	r := c.Request()
	if ctx := r.Context(); catalogue.SeesPrivate(ctx) {
		c.SetRequest(r.WithContext(catalogue.AsEverybody(ctx)))
		c.Set(privateLeftOut, true)
	}
}

// privateLeftOut marks a request of a person who sees private rows and asks
// for what everybody sees.
const privateLeftOut = "private rows left out"
