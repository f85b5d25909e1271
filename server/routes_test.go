package main

import (
	"net/http"
	"slices"
	"strings"
	"testing"
)

// openToAll lists every route that anyone may read. A new route must be put
// here or into the table access, so that nobody opens one by forgetting it.
var openToAll = []string{
	"/", "/systems", "/systems.csv", "/systems.json", "/systems.geojson", "/systems/dimensions.csv", "/systems/:slug", "/systems/:slug/history", "/systems/:slug/history.json", "/systems/:slug/history.csv", "/measurements/:id",
	"/regression", "/regression.json", "/regression.csv", "/regression/next", "/regression/next.json", "/figures/regression.svg", "/figures/regression.png", "/figures/regression.pdf",
	"/expectation", "/expectation.json", "/expectation/time", "/expectation/time.json", "/expectation/report", "/figures/expectation.svg",
	"/figures/expectation.png", "/figures/expectation.pdf",
	"/expectation/columns.csv", "/expectation/batch", "/expectation/deep-time", "/expectation/deep-time.json", "/analyses", "/analyses/:name", "/figures/meridian.svg",
	"/chart", "/chart.json", "/chart/land.json", "/chart/lines.json", "/recompute.json", "/recompute/:name",
	"/dictionary", "/dictionary.csv", "/dictionary.json", "/systems.zip", "/sources", "/sources.csv", "/sources.json", "/sources.bib", "/sources.ris",
	"/features", "/features/", "/features/api", "/features/conformance", "/features/collections", "/features/collections/:collection",
	"/features/collections/:collection/items", "/features/collections/:collection/items/:id", "/openapi.json", "/feed.atom",
	"/releases", "/releases.csv", "/releases.json", "/releases/:name", "/releases/:name/difference", "/releases/:name/difference/:other",
	"/figures/chart.svg", "/figures/chart.png", "/figures/chart.pdf", "/figures/meridian.png", "/figures/meridian.pdf",
	"/figures/system.svg", "/figures/system.png", "/figures/system.pdf",
	"/measure", "/methods", "/changes", "/example", "/static/*", "/favicon.ico", "/healthz", "/metrics",
}

// everyMethod is what a client may try on an address.
var everyMethod = []string{"GET", "HEAD", "POST", "PUT", "PATCH", "DELETE", "OPTIONS", "TRACE"}

func TestEveryRouteHasItsRow(t *testing.T) {
	for _, r := range routesOf(t) {
		method, path, _ := strings.Cut(r, " ")
		if method == "HEAD" {
			method = "GET"
		}
		if _, kept := access[method+" "+path]; !kept && (method != "GET" || !slices.Contains(openToAll, path)) {
			t.Errorf("%s stands neither in the table access nor in openToAll", r)
		}
	}
	for _, path := range openToAll {
		if _, both := access["GET "+path]; both {
			t.Errorf("%s stands in both", path)
		}
	}
}

// Role x route x method, every cell: each route that there is, each method that
// a client may try, each of the four roles.
func TestEveryCellOfRoleRouteMethod(t *testing.T) {
	s := newSite(t)
	who := map[role]*visitor{reader: s.visitor()}
	for _, r := range []role{contributor, curator, keeper} {
		s.person("the-"+r.String(), r.String())
		who[r] = s.as("the-" + r.String())
	}
	routes := routesOf(t)
	paths := map[string]bool{}
	for _, r := range routes {
		_, path, _ := strings.Cut(r, " ")
		paths[path] = true
	}
	cells := 0
	for path := range paths {
		address := strings.NewReplacer(":id", "999999", ":slug", "none", ":name", "none", "*", "none").Replace(path)
		for _, method := range everyMethod {
			for r := reader; r <= keeper; r++ {
				cells++
				got := cell(who[r], method, address)
				if want := wantCell(routes, method, path, r); got != want {
					t.Errorf("%s %s as a %s: %s, want %s", method, address, r, got, want)
				}
				if signsOut(path) && method == "POST" {
					if who[r] = s.visitor(); r != reader {
						who[r] = s.as("the-" + r.String())
					}
				}
			}
		}
	}
	t.Logf("%d cells: %d addresses, %d methods, 4 roles", cells, len(paths), len(everyMethod))
	if cells < 1000 {
		t.Errorf("%d cells; expected the whole house", cells)
	}
}

func wantCell(routes []string, method, path string, r role) string {
	if !slices.Contains(routes, method+" "+path) {
		// Another pattern may take the same address for this method, as
		// /review/:id takes /review/activity.
		i := slices.IndexFunc(routes, func(other string) bool {
			head, rest, wild := strings.Cut(other, "/:")
			return wild && !strings.Contains(rest, "/") && !strings.Contains(path, ":") && path[:strings.LastIndexByte(path, '/')] == strings.TrimPrefix(head, method+" ")
		})
		if i < 0 {
			return "no such"
		}
		_, path, _ = strings.Cut(routes[i], " ")
	}
	if method == "HEAD" {
		method = "GET"
	}
	least := access[method+" "+path]
	switch {
	case slices.Contains([]string{"/first-curator", "/welcome", "/join", "/register"}, path):
		return "forbidden" // without its token, and while registration is closed
	case r < least && r == reader:
		return "sign in"
	case r < least:
		return "forbidden"
	}
	return "in"
}

// cell is what a person got: in, sign in, forbidden, no such (404 of an
// address or 405 of a method), or a fault.
func cell(v *visitor, method, path string) string {
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
	case resp.StatusCode == http.StatusMethodNotAllowed, resp.StatusCode == http.StatusNoContent && method == http.MethodOptions:
		return "no such"
	case resp.StatusCode >= 500:
		return resp.Status
	}
	return "in" // also a 404 of the handler: there is no record of that number
}
