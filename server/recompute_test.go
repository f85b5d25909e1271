package main

import (
	"context"
	"encoding/csv"
	"encoding/json"
	"math"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"testing"
	"time"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/seed"
)

// demoFile fills a catalogue file with the demo; lines are stored beside its
// rows.
func demoFile(t testing.TB, file string) {
	t.Helper()
	s, err := catalogue.Open(t.Context(), file, openOptions(false))
	if err != nil {
		t.Fatal(err)
	}
	if err := seed.Fill(t.Context(), s, seed.Both); err != nil {
		t.Fatal(err)
	}
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
}

// newCurated is the program over the demo in a file, and a curator.
func newCurated(t *testing.T) (*site, *visitor) {
	t.Helper()
	s := newSite(t, func(file string) { demoFile(t, file) })
	s.person("cy", "curator")
	return s, s.as("cy")
}

// finished waits for a recomputation, as a browser without scripts does.
func (v *visitor) finished(name string) *answer {
	v.t.Helper()
	for range 400 {
		a := v.get("/recompute/" + name).is(http.StatusOK)
		if a.doc().Find("progress").Length() == 0 {
			return a
		}
		if a.header.Get("Refresh") == "" && strings.Contains(a.text(), "Measuring") {
			v.t.Fatal("the page of one that runs does not look again")
		}
		time.Sleep(25 * time.Millisecond)
	}
	v.t.Fatal("the recomputation does not end")
	return nil
}

type recomputedDocument struct {
	State    string
	Lines    int
	Reached  int
	Invented int `json:"invented_rows"`
	Settings planform.Settings
	Values   []struct {
		Centreline                     int64
		System                         string
		Measurement                    string
		Stored, Recomputed, Difference map[string]*float64
		Windows                        []float64 `json:"window_sinuosities"`
		Settings                       planform.Settings
		Remark                         string
	}
}

func (v *visitor) recomputed(name string) (d recomputedDocument) {
	v.t.Helper()
	if err := json.Unmarshal([]byte(v.get("/recompute/"+name+".json").is(http.StatusOK).body), &d); err != nil {
		v.t.Fatal(err)
	}
	return d
}

func TestRecompute(t *testing.T) {
	s, cy := newCurated(t)
	form := cy.get("/recompute").is(http.StatusOK).form("form[action='/recompute']")
	form.Set("name", "Fifteen widths")
	form.Set("why", "the windows of a paper")
	form.Set("window_widths", "15")
	if a := cy.post("/recompute", form).is(http.StatusOK); a.url.Path != "/recompute/fifteen-widths" {
		t.Fatalf("led to %s", a.url)
	}
	page := cy.finished("fifteen-widths").says("window_widths=15, k=5", "centrelines were measured again", "the peak moves by", "the windows of a paper", "Credit of cy")
	if page.doc().Find(".recomputed svg.glyph").Length() < 20 || page.doc().Find("figure svg a").Length() < 20 {
		t.Error("no ribbons or no points that are links")
	}
	d := cy.recomputed("fifteen-widths")
	if d.State != "done" || d.Reached != d.Lines || len(d.Values) != d.Lines || d.Lines < 50 || d.Invented == 0 || d.Settings.WindowWidths != 15 {
		t.Fatalf("%+v", d)
	}

	// Each value is that of the line measured by itself with the settings shown.
	v := d.Values[3]
	var system struct {
		Centrelines []struct {
			ID          int64
			Geometry    json.RawMessage
			Sinuosities []float64 `json:"window_sinuosities"`
		}
	}
	if err := json.Unmarshal([]byte(cy.get("/systems/"+v.System+".json").body), &system); err != nil {
		t.Fatal(err)
	}
	checked := false
	for _, l := range system.Centrelines {
		if l.ID != v.Centreline {
			continue
		}
		checked = true
		m, err := planform.MeasureFile(l.Geometry, "application/geo+json", "", v.Settings)
		if err != nil {
			t.Fatal(err)
		}
		if got := m.Lines[0].PeakSinuosity; got != *v.Recomputed["peak"] {
			t.Errorf("peak %v, measured by itself %v", *v.Recomputed["peak"], got)
		}
		if want := planform.Summarise(l.Sinuosities, 5); *v.Stored["standardised_peak"] != want.Standardised || *v.Stored["peak"] != want.Peak {
			t.Errorf("stored %v and %v, the stored windows give %+v", *v.Stored["standardised_peak"], *v.Stored["peak"], want)
		}
		if diff := *v.Recomputed["peak"] - *v.Stored["peak"]; diff != *v.Difference["peak"] {
			t.Errorf("difference %v, want %v", *v.Difference["peak"], diff)
		}
	}
	if !checked {
		t.Error("the line of the value is not on its system")
	}

	rows, err := csv.NewReader(strings.NewReader(cy.get("/recompute/fifteen-widths.csv").is(http.StatusOK).body)).ReadAll()
	if err != nil || len(rows) != d.Lines+1 {
		t.Fatalf("%d rows of CSV, %v", len(rows), err)
	}
	// A reader sees what a regression rests on, and cannot start or stop one.
	reader := s.visitor()
	reader.get("/recompute/fifteen-widths").is(http.StatusOK)
	reader.get("/recompute.json").is(http.StatusOK).says("fifteen-widths")
	if a := reader.get("/recompute"); a.url.Path != "/sign-in" {
		t.Errorf("a reader sees the form at %s", a.url.Path)
	}
	out := mustRun(t, "", "recompute", "-catalogue", s.file, "-json", "fifteen widths")
	if out != cy.get("/recompute/fifteen-widths.json").body {
		t.Error("the command prints another document than the page's twin")
	}
}

func TestRecomputeRefuses(t *testing.T) {
	s, cy := newCurated(t)
	typed := url.Values{"name": {"Bad"}, "why": {"kept <b>"}, "window_m": {"wide"}, "window_widths": {"20"}, "smooth": {"4"}, "k": {"5"}}
	a := cy.post("/recompute", typed).is(http.StatusUnprocessableEntity).says("Not started", "wide")
	kept := a.form("form[action='/recompute']")
	for name := range typed {
		if kept.Get(name) != typed.Get(name) {
			t.Errorf("%s: typed %q, the page holds %q", name, typed.Get(name), kept.Get(name))
		}
	}
	cy.post("/recompute", url.Values{"name": {" "}}).is(http.StatusUnprocessableEntity).says("needs a name")
	cy.post("/recompute", url.Values{"name": {"x"}, "colour": {"blue"}}).is(http.StatusBadRequest)
	cy.post("/recompute/none", url.Values{"action": {"cancel"}}).is(http.StatusNotFound)
	cy.post("/recompute/none", url.Values{"action": {"explode"}}).is(http.StatusBadRequest)
	cy.get("/recompute/none").is(http.StatusNotFound)
	cy.get("/recompute/none.json").is(http.StatusNotFound)
	mustRun(t, "", "recompute", "-catalogue", s.file, "Taken", "window_bends=8")
	a = cy.post("/recompute", url.Values{"name": {"taken"}, "window_bends": {"9"}}).is(http.StatusConflict).says("is kept already")
	if a.form("form[action='/recompute']").Get("window_bends") != "9" {
		t.Error("the settings were lost with the name")
	}
	cy.post("/recompute/taken", url.Values{"action": {"cancel"}}).is(http.StatusConflict).says("done")
	for _, c := range []struct {
		code int
		args []string
	}{
		{exitBadCall, []string{"Name"}},
		{exitBadCall, []string{"-catalogue", s.file}},
		{exitBadCall, []string{"-catalogue", s.file, "Name", "window_m=wide"}},
		{exitBadCall, []string{"-catalogue", s.file, "Name", "epsg=4326"}},
		{exitBadCall, []string{"-catalogue", s.file, "two", "words"}},
		{exitProblem, []string{"-catalogue", s.file, "taken", "window_bends=9"}},
	} {
		if code, _, errOut := runCommand("", append([]string{"recompute"}, c.args...)...); code != c.code || errOut == "" {
			t.Errorf("recompute %v: exit %d, want %d; said %q", c.args, code, c.code, errOut)
		}
	}
}

// What a stop left unfinished goes on when the program starts again; what was
// cancelled stays so until it is resumed.
func TestRecomputeGoesOnAfterARestart(t *testing.T) {
	s := newSite(t, func(file string) {
		demoFile(t, file)
		store, err := catalogue.Open(t.Context(), file, openOptions(false))
		if err != nil {
			t.Fatal(err)
		}
		defer store.Close()
		for _, title := range []string{"Left", "Cancelled"} {
			name, err := store.StartRecomputation(t.Context(), catalogue.Recomputation{Title: title, Settings: `{"window_bends":6,"k":3}`, Program: Version}, 0)
			if err != nil {
				t.Fatal(err)
			}
			lines, err := store.LinesToMeasure(t.Context(), name, 0, 7)
			if err != nil {
				t.Fatal(err)
			}
			var gave []catalogue.RecomputedLine
			for _, l := range lines {
				gave = append(gave, measureAgain(l, settingsOf(`{"window_bends":6,"k":3}`)))
			}
			if _, err := store.KeepRecomputed(t.Context(), name, gave); err != nil {
				t.Fatal(err)
			}
			if title == "Cancelled" {
				if err := store.CancelRecomputation(t.Context(), name); err != nil {
					t.Fatal(err)
				}
			}
		}
	})
	s.person("cy", "curator")
	cy := s.as("cy")
	cy.finished("left").says("window_bends=6, k=3")
	if d := cy.recomputed("left"); d.State != "done" || d.Reached != d.Lines {
		t.Errorf("%s, %d of %d", d.State, d.Reached, d.Lines)
	}
	cy.get("/recompute/cancelled").is(http.StatusOK).says("Cancelled at 7 of")
	a := s.visitor().get("/regression?model=linear:abs_latitude&response=standardised_peak&recomputed=cancelled&seed=1")
	a.is(http.StatusBadRequest).says("not finished", "7 of")
	cy.post("/recompute/cancelled", url.Values{"action": {"resume"}}).is(http.StatusOK)
	cy.finished("cancelled")
	left, then := cy.recomputed("left"), cy.recomputed("cancelled")
	for i := range left.Values {
		if *left.Values[i].Recomputed["mean"] != *then.Values[i].Recomputed["mean"] {
			t.Fatalf("line %d differs after being resumed", i)
		}
	}
}

// A recomputation that is told to stop keeps what it measured, and a cancelled
// one takes no more.
func TestRecomputeStops(t *testing.T) {
	file := t.TempDir() + "/c.db"
	demoFile(t, file)
	store, err := catalogue.Open(t.Context(), file, openOptions(false))
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	name, err := store.StartRecomputation(t.Context(), catalogue.Recomputation{Title: "One", Settings: `{"k":5}`, Program: Version}, 0)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := recompute(ctx, store, name, nil); err == nil {
		t.Error("a stopped program went on")
	}
	if err := store.CancelRecomputation(t.Context(), name); err != nil {
		t.Fatal(err)
	}
	if state, err := recompute(t.Context(), store, name, nil); state != "cancelled" || err != nil {
		t.Errorf("%s, %v", state, err)
	}
	if err := store.ResumeRecomputation(t.Context(), name); err != nil {
		t.Fatal(err)
	}
	if state, err := recompute(t.Context(), store, name, nil); state != "done" || err != nil {
		t.Errorf("%s, %v", state, err)
	}
}

// The response of a regression is what the recomputation gave, row by row, and
// the answer says so.
func TestRegressionOfARecomputation(t *testing.T) {
	s, cy := newCurated(t)
	mustRun(t, "", "recompute", "-catalogue", s.file, "Narrow", "window_widths=12", "k=4")
	const base = "model=linear:abs_latitude&scale=raw&resamples=199&permutations=99&seed=2"
	wanted := map[string]map[string]float64{}
	for _, v := range cy.recomputed("narrow").Values {
		wanted[v.Measurement] = map[string]float64{"standardised_peak": planform.Summarise(v.Windows, 3).Standardised, "peak": *v.Recomputed["peak"], "reach": *v.Recomputed["reach"]}
	}
	for _, response := range []string{"standardised_peak", "peak", "reach"} {
		q := base + "&recomputed=narrow&k=3&response=" + response
		rows, err := csv.NewReader(strings.NewReader(cy.get("/regression.csv?" + q).is(http.StatusOK).body)).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		at := map[string]int{}
		for i, name := range rows[0] {
			at[name] = i
		}
		kept := 0
		for _, r := range rows[1:] {
			if r[at["kept"]] != "yes" {
				continue
			}
			kept++
			got, _ := strconv.ParseFloat(r[at["response"]], 64)
			if want, ok := wanted[r[at["measurement"]]]; !ok || math.Abs(got-want[response]) > 1e-12 {
				t.Errorf("%s of %s: response %v, recomputed %v", response, r[at["measurement"]], got, want[response])
			}
		}
		if kept < 30 {
			t.Errorf("%s: only %d rows kept", response, kept)
		}
		var a struct {
			Rows     int
			Settings map[string]any
			Methods  string `json:"methods_text"`
			Dropped  []struct{ Reason string }
		}
		if err := json.Unmarshal([]byte(cy.get("/regression.json?"+q).is(http.StatusOK).body), &a); err != nil {
			t.Fatal(err)
		}
		if a.Rows != kept || a.Settings["recomputed"] != "narrow" || !strings.Contains(a.Methods, "recomputation narrow: window_widths=12, k=4") {
			t.Errorf("rows %d, settings %v, methods %s", a.Rows, a.Settings["recomputed"], a.Methods)
		}
	}
	// Without it, the windows stored beside the lines are the response.
	if a := cy.get("/regression.json?" + base + "&response=standardised_peak&k=5").is(http.StatusOK); strings.Contains(a.body, "recomputed") {
		t.Error("a regression of stored windows speaks of a recomputation")
	}
	// The page keeps the choice, and refuses what cannot be.
	page := cy.get("/regression?" + base + "&response=peak&recomputed=narrow").is(http.StatusOK).says("measured anew")
	if page.doc().Find("select[name=recomputed] option[selected]").AttrOr("value", "") != "narrow" {
		t.Error("the form forgets the recomputation")
	}
	cy.get("/regression?" + base + "&response=any&recomputed=narrow").is(http.StatusBadRequest).says("cannot be taken from a recomputation")
	cy.get("/regression?" + base + "&response=peak&recomputed=none").is(http.StatusBadRequest).says("Expected one of: narrow")
	// Frozen, it gives the same digits again.
	form, _ := url.ParseQuery(base + "&response=standardised_peak&k=3&recomputed=narrow&title=Frozen+narrow")
	cy.post("/regression/freeze", form).is(http.StatusOK).says("same digits")
	if live, frozen := cy.get("/regression.json?"+base+"&response=standardised_peak&k=3&recomputed=narrow"), cy.get("/analyses/frozen-narrow.json"); live.body != frozen.body {
		t.Error("the frozen document is not that of the question")
	}
	mustRun(t, "", "regress", "-catalogue", s.file, "-analysis", "frozen-narrow")
}
