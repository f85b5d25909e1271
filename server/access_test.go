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

// Role x route x method: who is let through. Through means any answer of the
// handler itself; kept out is the sign-in page (401 or a redirect there) or 403.
func TestRolesTable(t *testing.T) {
	s := newSite(t)
	who := map[role]*visitor{reader: s.visitor()}
	for _, r := range []role{contributor, curator, keeper} {
		s.person("the-"+r.String(), r.String())
	}
	for route, least := range access {
		method, path, _ := strings.Cut(route, " ")
		path = strings.NewReplacer(":id", "999999", "*", "x").Replace(path)
		methods := []string{method}
		if method == http.MethodGet {
			methods = append(methods, http.MethodHead)
		}
		for _, m := range methods {
			for r := reader; r <= keeper; r++ {
				v := who[r]
				if r != reader && (v == nil || signsOut(path)) {
					v = s.as("the-" + r.String())
					who[r] = v
				}
				got := outcome(v, m, path)
				want := "in"
				switch {
				case r < least && r == reader:
					want = "sign in"
				case r < least:
					want = "forbidden"
				}
				if path == "/first-curator" || path == "/welcome" {
					want = "forbidden" // without its token
				}
				if got != want {
					t.Errorf("%s %s as a %s: %s, want %s", m, path, r, got, want)
				}
				if signsOut(path) {
					delete(who, r)
					if r == reader {
						who[r] = s.visitor()
					}
				}
			}
		}
	}
}

func signsOut(path string) bool { return path == "/sign-out" || path == "/account/sign-out" }

// outcome asks without following redirects.
func outcome(v *visitor, method, path string) string {
	client := *v.client
	client.CheckRedirect = func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }
	r, err := http.NewRequest(method, v.base+path, strings.NewReader(""))
	if err != nil {
		v.t.Fatal(err)
	}
	if method == http.MethodPost {
		r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	}
	resp, err := client.Do(r)
	if err != nil {
		v.t.Fatal(err)
	}
	resp.Body.Close()
	switch to := resp.Header.Get("Location"); {
	case resp.StatusCode == http.StatusForbidden:
		return "forbidden"
	case resp.StatusCode == http.StatusUnauthorized, strings.HasPrefix(to, "/sign-in"):
		return "sign in"
	case resp.StatusCode >= 500, resp.StatusCode == http.StatusMethodNotAllowed:
		return resp.Status
	}
	return "in"
}

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
