package main

import (
	"cmp"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"net/http"
	"os"
	"strings"
	"time"

	"github.com/labstack/echo/v4"
)

// How long a proxy may hand out an answer of a read-only server without asking
// again, and how long it may go on while it asks: a copy is replaced by hand or
// by the clock, so a few minutes of age are within what it promises.
const sharedCache = "public, max-age=60, s-maxage=300, stale-while-revalidate=600, stale-if-error=86400"

// ownCache is for a server that takes changes: kept, but asked for each time.
const ownCache = "private, no-cache"

// buildTag changes with the program, so that a new version's pages are new.
var buildTag = func() string {
	tag := Version
	if path, err := os.Executable(); err == nil {
		if st, err := os.Stat(path); err == nil {
			tag += fmt.Sprint(st.Size(), st.ModTime().UnixNano())
		}
	}
	return tag
}()

// conditional tags what a signed-out reader gets with the revision of the
// catalogue and the address, and answers 304 when the reader has it already,
// before anything is computed. Every page follows from its address, its
// catalogue and the program alone, so the three together name its content.
func (a *App) conditional(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		r := c.Request()
		if (r.Method != http.MethodGet && r.Method != http.MethodHead) || !taggable(routeOf(c)) || access["GET "+c.Path()] != reader || a.carriesSession(r) {
			return next(c)
		}
		state, err := a.store.State(r.Context())
		if err != nil {
			return next(c) // the handler meets the same error and says it
		}
		sum := sha256.Sum256([]byte(buildTag + "\n" + state + "\n" + r.Host + "\n" + r.Header.Get("Accept") + "\n" + r.URL.RequestURI()))
		tag := `W/"` + hex.EncodeToString(sum[:12]) + `"`
		rule := ownCache
		if a.readOnly {
			rule = sharedCache
		}
		h := c.Response().Header()
		if holds(r.Header.Get("If-None-Match"), tag) {
			h.Set("ETag", tag)
			h.Set("Cache-Control", rule)
			return c.NoContent(http.StatusNotModified)
		}
		key := answerKey(tag, r)
		if keepable(c) {
			if f := a.answers.get(key); f != nil {
				return f.replay(c)
			}
		}
		c.Response().Before(func() {
			if c.Response().Status == http.StatusOK && h.Get("Cache-Control") == "" && h.Get("Set-Cookie") == "" {
				h.Set("ETag", tag)
				h.Set("Cache-Control", rule)
			}
		})
		if keepable(c) {
			return a.recorded(c, key, next)
		}
		return next(c)
	}
}

// taggable leaves out what is no page of the catalogue.
func taggable(route string) bool {
	switch route {
	case noRoute, "/healthz", "/metrics", "/status", "/favicon.ico":
		return false
	}
	return !strings.HasPrefix(route, "/static/")
}

// carriesSession says whether a request brings a session; a read-only server
// has none.
func (a *App) carriesSession(r *http.Request) bool {
	if a.readOnly {
		return false
	}
	_, err := r.Cookie(a.sessions.Cookie.Name)
	return err == nil
}

// holds says whether an If-None-Match names tag.
func holds(header, tag string) bool {
	for part := range strings.SplitSeq(header, ",") {
		if part = strings.TrimSpace(part); part == tag || part == "*" || "W/"+part == tag {
			return true
		}
	}
	return false
}

// noRoute stands for an address that no route takes.
const noRoute = "(none)"

// routeOf is the pattern of the route a request took, never its address.
func routeOf(c echo.Context) string {
	if p := c.Path(); c.Get(routeKnown) == true && p != "" {
		return p
	}
	return noRoute
}

// routeKnown marks a request whose path a route takes.
const routeKnown = "route known"

// secured says which connection headers a server behind TLS sends.
func (a *App) secured(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		if a.secure {
			c.Response().Header().Set("Strict-Transport-Security", "max-age=31536000")
		}
		return next(c)
	}
}

// behind sets what depends on how the program is reached: with TLS, its own or
// a proxy's, the cookie is bound to the host and to TLS; behind a proxy the
// asker's address is the one the proxy adds.
func (a *App) behind(cfg serveConfig) {
	a.secure = cfg.TLSCert != "" || cfg.BehindProxy
	a.proxies, a.proxyChain = nil, cfg.TrustedProxy != ""
	if cfg.BehindProxy {
		// Checked when the flags were read.
		a.proxies, _ = parseProxies(cmp.Or(cfg.TrustedProxy, usualProxies))
	}
	if a.secure {
		a.sessions.Cookie.Name = "__Host-fathombend"
		a.sessions.Cookie.Secure = true
	}
}

// timeouts bound how long one client may hold a connection.
type timeouts struct{ header, read, write, idle time.Duration }

var usualTimeouts = timeouts{10 * time.Second, 60 * time.Second, 120 * time.Second, 120 * time.Second}
