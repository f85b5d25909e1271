package main

import (
	"encoding/json"
	"net/url"
	"slices"
	"strings"
	"testing"
)

// TestTargetByPost: a form, a JSON object and a query beside a body ask the
// same question and get the same bytes; other bodies are told what is taken.
func TestTargetByPost(t *testing.T) {
	v := newDemoSite(t).visitor()
	want := v.get("/expectation.json?palaeolatitude=28&age=70&draws=400&feeder=river&feeder=glacial").is(200).body
	for _, c := range []struct{ path, kind, body string }{
		{"/expectation.json", "application/x-www-form-urlencoded", "palaeolatitude=28&age=70&draws=400&feeder=river&feeder=glacial"},
		{"/expectation.json", "application/json; charset=utf-8", `{"palaeolatitude": 28, "age": "70", "draws": 400, "feeder": ["river", "glacial"], "a95": null}`},
		{"/expectation.json?draws=400&feeder=river", "application/json", `{"palaeolatitude": 28.0, "age": 70, "feeder": "glacial"}`},
		{"/expectation.json?palaeolatitude=28&age=70&draws=400&feeder=river&feeder=glacial", "", ""},
	} {
		if a := v.request("POST", c.path, c.kind, strings.NewReader(c.body)); a.status != 200 || a.body != want {
			t.Errorf("POST %s %q: status %d, another answer than by GET\n%.300s", c.path, c.body, a.status, a.body)
		}
	}
	v.request("POST", "/expectation", "application/json", strings.NewReader(`{"palaeolatitude": 28}`)).is(200).says("28° N")
	for _, c := range []struct {
		path, kind, body string
		status           int
		names            string
	}{
		{"/expectation.json?age=70", "application/x-www-form-urlencoded", "palaeolatitude=28&age=60", 400, "given 2 times"},
		{"/expectation.json", "application/json", `[1, 2]`, 400, "no JSON object"},
		{"/expectation.json", "application/json", `{"palaeolatitude": 28} {}`, 400, "no JSON object"},
		{"/expectation.json", "application/json", `{"palaeolatitude": {"value": 28}}`, 400, "neither a text nor a number"},
		{"/expectation.json", "application/xml", `<palaeolatitude/>`, 415, "application/json"},
		{"/expectation.csv", "application/json", `{"palaeolatitude": 28}`, 415, "text/csv"},
	} {
		a := v.request("POST", c.path, c.kind, strings.NewReader(c.body))
		if a.status != c.status || !strings.Contains(a.body, c.names) {
			t.Errorf("POST %s %s %q: status %d, want %d naming %q\n%.300s", c.path, c.kind, c.body, a.status, c.status, c.names, a.body)
		}
	}
}

// TestNothingIsLeftOutInSilence: what was given and has no part in an answer
// is named in it, on the page and in its data.
func TestNothingIsLeftOutInSilence(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, c := range []struct{ query, note string }{
		{"palaeolatitude=28&site_lat=12&a95=4", "Not used: the A95 and the site, because the palaeolatitude is given itself."},
		{"inclination=40&a95=4&palaeolatitude_se=3", "Not used: the standard error of the palaeolatitude, because the palaeolatitude is taken from the inclination."},
		{"site_lat=10&site_lon=20&plate=India&age=60&a95=5", "Not used: the A95, because the palaeolatitude is taken from the plate."},
		{"palaeolatitude=28&day=polynomial&solar_tide=on", "Not used: the tide of the Sun"},
		{"palaeolatitude=28&rate_ms_per_century=2", "Not used: the rate in milliseconds per century"},
		{"palaeolatitude=28&day_length_h=22", "Not used: the day length that was typed"},
		{"palaeolatitude=28&rotation_period_h=10&day=locked", "Not used: the choice of day length"},
		{"palaeolatitude=28&unit=Maastrichtian&age_se=3", "Not used: the error of the age, because the unit"},
		{"palaeolatitude=28&age_se=3", "Not used: the error of the age, because no age"},
		{"palaeolatitude=28&sort=sinuosity&per_page=7", "Not used here: order (sort), page size (per_page)"},
	} {
		v.get("/expectation?draws=100&" + c.query).is(200).says(c.note)
		var doc struct{ Notes []string }
		if err := json.Unmarshal([]byte(v.get("/expectation.json?draws=100&"+c.query).is(200).body), &doc); err != nil {
			t.Fatal(err)
		}
		if !slices.ContainsFunc(doc.Notes, func(n string) bool { return strings.HasPrefix(n, c.note) }) {
			t.Errorf("%s: the notes of the data are %q", c.query, doc.Notes)
		}
	}
	const note = "Not used here: order (sort), page, page size (per_page)"
	fit := "model=linear:coriolis&resamples=99&permutations=99&seed=1&sort=sinuosity&page=2&per_page=7"
	v.get("/regression?" + fit).is(200).says(note)
	var doc struct{ Warnings []string }
	if err := json.Unmarshal([]byte(v.get("/regression.json?"+fit).is(200).body), &doc); err != nil || !strings.HasPrefix(doc.Warnings[len(doc.Warnings)-1], note) {
		t.Errorf("the warnings of the data are %q (%v)", doc.Warnings, err)
	}
	for path, part := range map[string]string{"/regression.csv?" + fit: note, "/systems.csv?per_page=7": "Not used here: page size", "/systems/dimensions.csv?page=2": "Not used here: page"} {
		if got := v.get(path).is(200).header.Get("Fathombend-Note"); !strings.HasPrefix(got, part) {
			t.Errorf("%s: the note is %q", path, got)
		}
	}
	for _, path := range []string{"/", "/chart", "/expectation", "/expectation/deep-time"} {
		v.get(path + "?" + url.Values{"sort": {"sinuosity"}}.Encode()).is(200).says("Not used here: order (sort)")
	}
	// The redirect to the full address does not lose the note either.
	if a := v.get("/regression?page=3"); a.status == 302 && !strings.Contains(a.header.Get("Location"), "page=3") {
		t.Errorf("the full address is %s", a.header.Get("Location"))
	}
}
