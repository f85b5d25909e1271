package main

import (
	"io"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// routesOf lists what the router knows, as "METHOD /path".
func routesOf(t *testing.T) []string {
	t.Helper()
	store, err := catalogue.Open(t.Context(), filepath.Join(t.TempDir(), "c.db"), catalogue.Options{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { store.Close() })
	a := newApp(store, slog.New(slog.NewTextHandler(io.Discard, nil)), false)
	var out []string
	for _, r := range a.router().Routes() {
		if strings.HasPrefix(r.Path, "/") && r.Method != echo.RouteNotFound {
			out = append(out, r.Method+" "+r.Path)
		}
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// Every route that is not just reading stands in the table of who may do what,
// and nothing stands there that is no route.
func TestAccessTableIsWhole(t *testing.T) {
	routes := routesOf(t)
	if len(routes) < 20 {
		t.Fatalf("%d routes; expected the whole house", len(routes))
	}
	for _, r := range routes {
		method, _, _ := strings.Cut(r, " ")
		if _, listed := access[r]; !listed && method != http.MethodGet && method != http.MethodHead {
			t.Errorf("%s changes something and is not in the table access", r)
		}
	}
	for r := range access {
		if !slices.Contains(routes, r) {
			t.Errorf("access lists %s, which is no route", r)
		}
	}
}

func signsOut(path string) bool { return path == "/sign-out" || path == "/account/sign-out" }

// What the table forbids stays forbidden however the address is written.
func TestAccessIsNotFooledByTheAddress(t *testing.T) {
	s := newSite(t)
	v := s.visitor()
	for _, path := range []string{"/review/", "//review", "/review/.", "/REVIEW", "/review%2F1", "/./review", "/contribute/../review", "/people/", "/review;x"} {
		if a := v.get(path); a.status == http.StatusOK && a.url.Path != "/sign-in" && strings.Contains(a.text(), "waits") {
			t.Errorf("%s shows the queue to a reader", path)
		}
	}
	r := httptest.NewRequest(http.MethodPost, v.base+"/sign-out", nil)
	r.RequestURI = ""
	r.Header.Set("X-HTTP-Method-Override", "GET")
	if a := v.do(r); a.status >= 500 {
		t.Errorf("a method override gives %d", a.status)
	}
}

func TestReadOnlyCatalogueChangesNothing(t *testing.T) {
	file := filepath.Join(t.TempDir(), "c.db")
	mustRun(t, testPassword+"\n", "account", "-catalogue", file, "add", "kit", "-role", "keeper")
	s := &site{t: t, file: file}
	s.start(serveConfig{Catalogue: file, ReadOnly: true})
	v := s.visitor()
	for route, least := range access {
		method, path, _ := strings.Cut(route, " ")
		path = strings.ReplaceAll(path, ":id", "1")
		if least == reader && !strings.Contains(path, "sign-in") {
			continue
		}
		a := v.request(method, path, map[string]string{"POST": "application/x-www-form-urlencoded"}[method], strings.NewReader("name=kit&password="+testPassword))
		if a.status != http.StatusForbidden {
			t.Errorf("%s: status %d on a read-only catalogue, want 403", route, a.status)
		}
	}
	v.get("/healthz").is(http.StatusOK)
}
