package main

import (
	"crypto/sha256"
	"encoding/hex"
	"net/http"
	"net/url"
	"strings"
	"testing"
)

// TestFrozenAnalysis: an analysis kept under a name gives the same bytes after
// the catalogue has changed, on the page's twin and on the command line.
func TestFrozenAnalysis(t *testing.T) {
	s := newReferenceSite(t)
	s.person("ada", "contributor")
	form := url.Values{"model": {"linear:abs_latitude"}, "scale": {"raw"}, "resamples": {"199"}, "permutations": {"99"}, "seed": {"4"}, "title": {"Figure 3"}, "why": {"of the manuscript"}}
	if a := s.visitor().post("/regression/freeze", form); a.doc().Find("input[name=password]").Length() != 1 {
		t.Errorf("a reader froze an analysis: %s", a.text())
	}
	v := s.as("ada")
	a := v.post("/regression/freeze", form)
	a.is(http.StatusOK).says("Figure 3", "same digits", "of the manuscript")
	if a.url.Path != "/analyses/figure-3" {
		t.Errorf("led to %s", a.url.Path)
	}
	before := v.get("/analyses/figure-3.json")
	before.is(http.StatusOK)
	if live := v.get("/regression.json?model=linear:abs_latitude&scale=raw&resamples=199&permutations=99&seed=4"); live.body != before.body {
		t.Error("the frozen document is not that of the question")
	}
	mustRun(t, "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source\nNew,70,10,2.5,peak,thalweg,Later\n", "import", "-catalogue", s.file, "-publish", "-")
	if live := v.get("/regression.json?model=linear:abs_latitude&scale=raw&resamples=199&permutations=99&seed=4"); live.body == before.body {
		t.Fatal("the new row changed nothing; the test shows nothing")
	}
	again := v.get("/analyses/figure-3.json")
	if again.body != before.body {
		t.Error("the frozen analysis changed with the catalogue")
	}
	out := mustRun(t, "", "regress", "-catalogue", s.file, "-analysis", "figure-3", "-json")
	if out != before.body {
		t.Error("the command gives other bytes than the page")
	}
	sum := sha256.Sum256(digitsOf([]byte(out)))
	v.get("/analyses/figure-3").says(hex.EncodeToString(sum[:])[:16], "same digits")
	if rows := strings.Count(v.get("/analyses/figure-3.csv").body, "\n"); rows != 49 {
		t.Errorf("%d lines of rows, want 48 and the header", rows)
	}
	v.get("/figures/regression.svg?analysis=figure-3&panel=residuals").is(http.StatusOK)
	v.get("/analyses").is(http.StatusOK).says("Figure 3", "Credit of ada")
	// Refused: the analysis stands on the page still, with what was typed.
	for title, status := range map[string]int{"Figure 3": http.StatusConflict, "  ": http.StatusUnprocessableEntity} {
		form.Set("title", title)
		kept := v.post("/regression/freeze", form).is(status).form("form[action^='/regression/freeze']")
		if kept.Get("title") != title || kept.Get("why") != "of the manuscript" || kept.Get("seed") != "4" || kept.Get("model") != "linear:abs_latitude" {
			t.Errorf("refused with %d, the form holds %v", status, kept)
		}
	}
	v.get("/analyses/none").is(http.StatusNotFound)
	v.get("/analyses/none.json").is(http.StatusNotFound)
}
