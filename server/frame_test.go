package main

import (
	"net/http"
	"net/url"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// pages are the addresses that answer anyone.
var openPages = []string{"/", "/?fold=yes&colour=grade", "/systems", "/regression", "/expectation", "/measure", "/methods"}

func TestEveryPageHasItsFrame(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, p := range openPages {
		a := v.get(p).is(http.StatusOK)
		d := a.doc()
		for _, want := range []string{"html[lang=en]", "title", "a.skip[href='#main']", "header.site nav", "main#main h1", ".banner", "footer.site"} {
			if d.Find(want).Length() == 0 {
				t.Errorf("%s: no %s", p, want)
			}
		}
		if n := d.Find("h1").Length(); n != 1 {
			t.Errorf("%s: %d first headings", p, n)
		}
		if strings.Contains(a.body, "NaN") || strings.Contains(a.body, "+Inf") {
			t.Errorf("%s shows a number that is none", p)
		}
		// The content security policy draws style attributes black.
		if n := d.Find("[style]").Length(); n > 0 {
			t.Errorf("%s: %d style attributes", p, n)
		}
		if n := d.Find("script:not([src]):not([type='application/ld+json']), [onclick], [onchange]").Length(); n > 0 {
			t.Errorf("%s: %d inline scripts", p, n)
		}
		uniqueIDs(t, p, d)
		labelled(t, p, d)
	}
}

// uniqueIDs: an id used twice breaks labels and links.
func uniqueIDs(t *testing.T, page string, d *goquery.Document) {
	seen := map[string]bool{}
	d.Find("[id]").Each(func(_ int, s *goquery.Selection) {
		id := s.AttrOr("id", "")
		if seen[id] {
			t.Errorf("%s: id %q twice", page, id)
		}
		seen[id] = true
	})
}

// labelled: every control has a name that a screen reader finds.
func labelled(t *testing.T, page string, d *goquery.Document) {
	d.Find("input, select, textarea").Each(func(_ int, s *goquery.Selection) {
		kind := s.AttrOr("type", "")
		if kind == "hidden" || kind == "submit" {
			return
		}
		_, aria := s.Attr("aria-label")
		_, by := s.Attr("aria-labelledby")
		id := s.AttrOr("id", "")
		if aria || by || s.Closest("label").Length() > 0 || id != "" && d.Find("label[for='"+id+"']").Length() > 0 {
			return
		}
		t.Errorf("%s: control %q has no label", page, s.AttrOr("name", ""))
	})
}

func TestHeaders(t *testing.T) {
	v := newDemoSite(t).visitor()
	h := v.get("/methods").header
	csp := h.Get("Content-Security-Policy")
	for _, want := range []string{"default-src 'none'", "script-src 'self'", "style-src 'self'", "font-src 'self'", "img-src 'self'", "connect-src 'self'", "form-action 'self'", "frame-ancestors 'none'"} {
		if !strings.Contains(csp, want) {
			t.Errorf("policy %q lacks %s", csp, want)
		}
	}
	if h.Get("Referrer-Policy") != "no-referrer" || h.Get("X-Content-Type-Options") != "nosniff" || h.Get("X-Request-Id") == "" {
		t.Errorf("headers: %v", h)
	}
	// HEAD answers as GET does, without a body.
	if a := v.request("HEAD", "/systems", "", nil).is(http.StatusOK); a.body != "" {
		t.Errorf("HEAD has a body of %d bytes", len(a.body))
	}
}

func TestOtherSitesCannotChangeAnything(t *testing.T) {
	v := newSite(t).visitor()
	r, _ := http.NewRequest("POST", v.base+"/sign-in", strings.NewReader("name=a&password=b"))
	r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	r.Header.Set("Origin", "https://elsewhere.example")
	r.Header.Set("Sec-Fetch-Site", "cross-site")
	v.do(r).is(http.StatusForbidden).says("another site")
}

func TestStaticFiles(t *testing.T) {
	v := newDemoSite(t).visitor()
	d := v.get("/methods").doc()
	sheet, _ := d.Find("link[rel=stylesheet]").Attr("href")
	a := v.get(sheet).is(http.StatusOK)
	if !strings.Contains(a.header.Get("Cache-Control"), "immutable") || !strings.HasPrefix(a.header.Get("Content-Type"), "text/css") {
		t.Errorf("style sheet: %v", a.header)
	}
	if !strings.Contains(a.body, "@font-face") {
		t.Error("the faces are in the style sheet")
	}
	r, _ := http.NewRequest("GET", v.base+sheet, nil)
	r.Header.Set("If-None-Match", a.header.Get("ETag"))
	v.do(r).is(http.StatusNotModified)
	for _, p := range []string{"/static/static.go", "/static/none.css", "/static/../go.mod"} {
		if got := v.get(p).status; got != http.StatusNotFound {
			t.Errorf("%s: %d", p, got)
		}
	}
	d.Find("link[rel=preload]").Each(func(_ int, s *goquery.Selection) { v.get(s.AttrOr("href", "")).is(http.StatusOK) })
	v.get("/favicon.ico").is(http.StatusOK)
	v.get("/healthz").is(http.StatusOK)
}

func TestErrorsForPeopleAndForPrograms(t *testing.T) {
	v := newDemoSite(t).visitor()
	v.get("/nothing-here").is(http.StatusNotFound)
	v.get("/?colour=mauve").is(http.StatusBadRequest).says("colour", "slope, feeder, grade, age")
	v.get("/?nope=1").is(http.StatusBadRequest).says("nope", "fold")
	v.get("/systems?lat_min=91").is(http.StatusBadRequest).says("lat_min")
	v.get("/systems?q=%zz").is(http.StatusBadRequest)
	a := v.get("/systems.json?kind=ocean").is(http.StatusBadRequest)
	if a.header.Get("Content-Type") != "application/problem+json" || !strings.Contains(a.body, `"field":"kind"`) {
		t.Errorf("problem document: %s %s", a.header.Get("Content-Type"), a.body)
	}
	v.post("/methods", url.Values{}).is(http.StatusMethodNotAllowed)
	// A form that says it is larger than a form may be is not read.
	v.post("/sign-in", url.Values{"name": {strings.Repeat("x", maxForm)}}).is(http.StatusRequestEntityTooLarge)
}

func TestReadOnlyOffersNoChange(t *testing.T) {
	s := newSite(t)
	ro := &site{t: t}
	ro.start(serveConfig{Catalogue: s.file, ReadOnly: true})
	d := ro.visitor().get("/").is(http.StatusOK).doc()
	if d.Find("a[href='/contribute'], a[href='/sign-in']").Length() > 0 {
		t.Error("a read-only catalogue offers to contribute or sign in")
	}
}

func TestServeRefusesBadCalls(t *testing.T) {
	for _, args := range [][]string{{"serve", "-demo-law", "gravity"}, {"serve", "extra"}, {"serve", "-nope"}, {"sevre"}} {
		if code, _, said := runCommand("", args...); code != exitBadCall || said == "" {
			t.Errorf("%v: exit %d, %q", args, code, said)
		}
	}
	if code, _, said := runCommand("", "serve", "-h"); code != exitOK || !strings.Contains(said, "-read-only") {
		t.Errorf("help: exit %d, %q", code, said)
	}
}
