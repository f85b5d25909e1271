package main

import (
	"io"
	"log/slog"
	"net/http"
	"net/netip"
	"time"

	"github.com/alexedwards/scs/v2"
	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// App is the running web application: the open catalogue, the sessions and
// the caches. Handlers are its methods.
type App struct {
	store      *catalogue.Store
	sessions   *scs.SessionManager
	log        *slog.Logger
	readOnly   bool
	fits       *cache
	jobs       jobs    // long fits on their way
	gate       gate    // of the fits of a large catalogue
	large      int     // measurements from which it is one
	batches    batches // files of targets on their way
	recomputes *recomputer
	uploads    *uploader
	metrics    *metrics
	answers    *answers // finished, for signed-out readers
	backups    *backups // nil = none scheduled
	began      time.Time
	routes     map[string]bool // patterns of every route
	secure     bool            // reached over TLS, see behind
	proxies    []netip.Prefix  // whose X-Forwarded-For is believed; nil = nobody's
	proxyChain bool            // there may be several of them, one behind the other

	// onListen run once, after the program listens: base is the address a
	// person can open, say the console. For words that need the address.
	onListen []func(base string, say io.Writer)
}

// newApp wires an App over an open store.
func newApp(store *catalogue.Store, log *slog.Logger, readOnly bool) *App {
	a := &App{store: store, log: log, readOnly: readOnly, fits: newCache(256), gate: newGate(), large: largeRows, began: time.Now(), answers: newAnswers()}
	a.metrics = newMetrics(a)
	a.recomputes = newRecomputer(store, log)
	a.uploads = newUploader(store, log)
	a.sessions = newSessions(store, log, readOnly)
	return a
}

// router holds every route. One line a room: each routes method stands in the
// file of its noun.
func (a *App) router() *echo.Echo {
	e := echo.New()
	e.HideBanner, e.HidePort = true, true
	e.HTTPErrorHandler = a.handleError
	a.middleware(e)
	a.routesStatic(e)
	a.routesMeridian(e)
	a.routesSystems(e)
	a.routesChart(e)
	a.routesFigures(e)
	a.routesRegression(e)
	a.routesExpectation(e)
	a.routesBatch(e)
	a.routesMeasure(e)
	a.routesAccounts(e)
	a.routesContribute(e)
	a.routesReview(e)
	a.routesHistory(e)
	a.routesRecompute(e)
	a.routesMethods(e)
	a.routesTakingAway(e)
	a.routesStatus(e)
	a.routesChanges(e)
	a.routesExample(e)
	a.routesSettings(e)
	a.routes = map[string]bool{}
	for _, r := range e.Routes() {
		a.routes[r.Path] = true
	}
	return e
}

// handler is the router with its sessions.
func (a *App) handler() http.Handler {
	e := a.router()
	// Sessions stand around the router, so that the error handler still has
	// them; static files need none, and stay cacheable.
	with := a.sessions.LoadAndSave(e)
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if a.readOnly || sessionless(r.URL.Path) {
			e.ServeHTTP(w, r)
			return
		}
		with.ServeHTTP(w, r)
	})
}

// get registers a handler for GET and HEAD: echo answers 405 to HEAD unless
// it is registered.
func get(e *echo.Echo, path string, h echo.HandlerFunc, m ...echo.MiddlewareFunc) {
	e.GET(path, h, m...)
	e.HEAD(path, h, m...)
}
