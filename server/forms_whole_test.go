package main

import (
	"context"
	"errors"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"net/url"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// Looking at the sample in another way loses nothing of the matching.
func TestSampleReadAnotherWayKeepsTheMatching(t *testing.T) {
	_, ann, _ := newContribution(t)
	file := "Where it is called;Y;X;S;Kind of it;Along;Paper;Fall\nLoom;-30;-20;1,400;peak;thalweg;Invented 2031;0,004\n"
	a := ann.sendFile("/contribute/upload", "own.csv", []byte(file), map[string]string{"why": "table 2"}).is(http.StatusOK)
	form := a.form("form.matching")
	typed := map[string]string{"column.0": "system_name", "column.1": "latitude_deg", "column.2": "longitude_deg", "column.3": "sinuosity",
		"column.4": "sinuosity_kind", "column.5": "measured_line", "column.6": "source", "column.7": "", "numbers": "comma", "licence": "CC0 1.0", "why": "table 2, retyped"}
	fillIn(form, typed)
	again := ann.post(a.url.Path, press(form, "look")).is(http.StatusOK).form("form.matching")
	for name, want := range typed {
		if got := again.Get(name); got != want {
			t.Errorf("%s: %q was chosen, the page now holds %q", name, want, got)
		}
	}
	ann.checked(ann.post(a.url.Path, press(again, "check"))).is(http.StatusOK).says("1 new", "Every row can be sent")
	// Other cells: what was chosen of the old ones says nothing of the new ones.
	b := ann.sendFile("/contribute/upload", "own.csv", []byte(file), nil).is(http.StatusOK)
	one := ann.post(b.url.Path, press(fillIn(b.form("form.matching"), with(typed, "separator", ",")), "look")).is(http.StatusOK).form("form.matching")
	if got := one.Get("column.0"); got == "system_name" {
		t.Error("a column of another cut keeps the choice of the first")
	}
	// What is left to say is named, with a way to its field.
	left := fillIn(ann.get(b.url.Path).form("form.matching"), map[string]string{"column.0": "", "licence": ""})
	left.Del("licence")
	d := ann.post(b.url.Path, press(left, "check")).is(http.StatusUnprocessableEntity).says("Something is left to say", "Licence: Choose one").doc()
	d.Find(".errors a[href^='#']").Each(func(_ int, x *goquery.Selection) {
		if id := strings.TrimPrefix(x.AttrOr("href", ""), "#"); d.Find("[id='"+id+"']").Length() != 1 {
			t.Errorf("the summary leads to #%s, which is no field", id)
		}
	})
	if d.Find(".errors a[href='#licence']").Length() != 1 {
		t.Error("the summary has no way to the licence")
	}
}

// All that is wrong with a contribution is said at once, who sees it included.
func TestWhoSeesItIsSaidWithTheRest(t *testing.T) {
	_, ann, _ := newContribution(t)
	onLand := with(goodRecord(), "latitude_deg", "33.4", "longitude_deg", "44.6", "embargo", "date", "embargo_until", "31.12.2026", "people", "ghost")
	for _, action := range []string{"submit", "check"} {
		a := ann.post("/contribute", press(ann.newRecord(onLand), action))
		a.says("3 things to mend", "latitude and longitude swapped? Expected: a place in water", "is not a day", "obody signs in here as")
		if strings.Contains(a.body, "?.") {
			t.Errorf("%s: a question ends in a full stop as well", action)
		}
	}
	odd := ann.post("/contribute", press(ann.newRecord(with(goodRecord(), "longitude_deg", "Q", "source_doi", "doi of the paper")), "submit")).is(http.StatusUnprocessableEntity)
	odd.says("12 34.5 W")
	if text := odd.doc().Find("#errors").Text(); !strings.Contains(text, "12 34.5 W") || strings.Contains(text, "12 34.5 S") {
		t.Errorf("the longitude is answered with %q", text)
	}
	fine := ann.post("/contribute", press(ann.newRecord(with(goodRecord(), "source_doi", "doi of the paper")), "submit")).is(http.StatusUnprocessableEntity)
	if text := fine.doc().Find("#errors").Text(); !strings.Contains(text, "10.1130/G32295.1") {
		t.Errorf("the summary says of a DOI only %q", text)
	}
}

// A change of a record that was withdrawn meanwhile can only be returned, and
// the queue and its page say so.
func TestChangeOfAWithdrawnRecord(t *testing.T) {
	s, ann, cy := newContribution(t)
	_, id := accepted(t, s, ann, cy, goodRecord())
	form := ann.get("/contribute?measurement=" + id).is(http.StatusOK).form("form.record")
	form.Set("sinuosity", "1.8")
	change := reviewOfPath(ann.post("/contribute", press(form, "submit")).is(http.StatusOK))
	gone := reviewOfPath(ann.post("/measurements/"+id+"/withdraw", url.Values{"why": {"doubtful"}}).is(http.StatusOK))
	cy.post(gone, url.Values{"action": {"accept"}, "seen": {cy.get(gone).form("form.decision").Get("seen")}}).is(http.StatusOK).says("is withdrawn")

	cy.get("/review").is(http.StatusOK).says("change of "+id, "withdrawn since")
	page := cy.get(change).is(http.StatusOK).says("A change to "+id+", which was withdrawn since", "cannot be accepted")
	d := page.doc()
	if n := d.Find(".decision button[value=accept], .decision a[href$='/edit']").Length(); n != 0 {
		t.Error("accepting is offered though it can only fail")
	}
	if strings.Contains(d.Find("main").Text(), "odd value") {
		t.Error("the withdrawal is counted among the odd values of the record")
	}
	if d.Find(".decision button[value=return]").Length() != 1 {
		t.Error("returning is not offered")
	}
	cy.get(change + "/edit").is(http.StatusConflict).says("Return the change")
	cy.post(change, url.Values{"action": {"accept"}}).is(http.StatusConflict)
	cy.post(change, url.Values{"action": {"return"}, "comment": {"The record is gone."}}).is(http.StatusOK).says("returned")
}

// Where two versions are lined up, the choice between them is the one way to
// accept.
func TestConflictIsAcceptedOneWay(t *testing.T) {
	s, ann, cy := newContribution(t)
	_, id := accepted(t, s, ann, cy, goodRecord())
	var sent []string
	for _, sinuosity := range []string{"1.8", "1.9"} {
		form := ann.get("/contribute?measurement=" + id).form("form.record")
		form.Set("sinuosity", sinuosity)
		sent = append(sent, reviewOfPath(ann.post("/contribute", press(form, "submit")).is(http.StatusOK)))
	}
	if d := cy.get(sent[1]).doc(); d.Find(".decision button[value=accept]").Length() != 1 {
		t.Error("a change without conflict cannot be accepted")
	}
	cy.post(sent[0], url.Values{"action": {"accept"}}).is(http.StatusOK)
	d := cy.get(sent[1]).is(http.StatusOK).doc()
	if d.Find(".settle button[value=settle]").Length() != 1 || d.Find(".decision button[value=accept]").Length() != 0 {
		t.Error("a conflict offers an accept that only refuses")
	}
}

// A system is merged by its name as well as by its address.
func TestMergeTakesNames(t *testing.T) {
	s, ann, cy := newContribution(t)
	accepted(t, s, ann, cy, goodRecord())
	accepted(t, s, ann, cy, with(goodRecord(), "system_name", "Tarn Holow", "latitude_deg", "-25.1"))
	ask := func(from, into string) *answer {
		return cy.get("/review/merge?" + url.Values{"from": {from}, "into": {into}}.Encode())
	}
	page := ask("tarn holow", "Tarn Hollow Channel").is(http.StatusOK).says("Tarn Holow becomes part of Tarn Hollow Channel")
	if got := page.doc().Find("form[method=post] input[name=from]").AttrOr("value", ""); got != "tarn-holow" {
		t.Errorf("the merge names the system %q", got)
	}
	ask("tarn holow", "Nowhere").is(http.StatusUnprocessableEntity).says("There is no system", "the name of a system")
}

// An empty catalogue does not speak of a filter nobody set.
func TestEmptyPagesSpeakOfNoFilter(t *testing.T) {
	v := newSite(t).visitor()
	for _, page := range []string{"/systems", "/chart"} {
		if a := v.get(page).is(http.StatusOK); strings.Contains(a.body, "passes this filter") {
			t.Errorf("%s speaks of a filter", page)
		}
		v.get(page + "?sinuosity_min=99").is(http.StatusOK).says("No system passes this filter")
	}
}

// A request whose asker has left is no failure of the program.
func TestAskerWhoLeavesIsNoError(t *testing.T) {
	for what, x := range map[string]struct {
		left bool
		want string
	}{"left": {true, "level=DEBUG"}, "there": {false, "level=ERROR"}} {
		var log logBuffer
		ctx, leave := context.WithCancel(t.Context())
		defer leave()
		if x.left {
			leave()
		}
		h := sessionFailed(slog.New(slog.NewTextHandler(&log, &slog.HandlerOptions{Level: slog.LevelDebug})))
		h(httptest.NewRecorder(), httptest.NewRequest(http.MethodGet, "/chart/land.json", nil).WithContext(ctx), errors.New("could not be read"))
		if !strings.Contains(log.String(), x.want) {
			t.Errorf("%s: logged %q, want %s", what, log.String(), x.want)
		}
	}
}
