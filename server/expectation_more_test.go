package main

import (
	"encoding/json"
	"net/http"
	"net/url"
	"strings"
	"testing"
)

func TestThroughTime(t *testing.T) {
	v := newDemoSite(t).visitor()
	const query = "site_lat=-12&site_lon=-10&plate=South+America&age=70&age_se=3&seed=1"
	a := v.get("/expectation/time.json?" + query)
	a.is(http.StatusOK)
	notANumber(t, a)
	var doc struct {
		Series []struct {
			Age       float64 `json:"age_ma"`
			Failure   string
			Sinuosity map[string]float64
		}
		Cautions []string
	}
	if err := json.Unmarshal([]byte(a.body), &doc); err != nil {
		t.Fatal(err)
	}
	if len(doc.Series) < 20 || doc.Series[0].Age != 0 || len(doc.Cautions) == 0 || !(doc.Series[0].Sinuosity["p50"] > 1) {
		t.Errorf("%d ages, first %+v", len(doc.Series), doc.Series[0])
	}
	page := v.get("/expectation/time?" + query)
	page.is(http.StatusOK).says("South America", "80 % limits")
	notANumber(t, page)
	if n := page.doc().Find("figure.stacked svg .band").Length(); n != 4 {
		t.Errorf("%d bands on the aligned figure, want 4", n)
	}
	form, _ := url.ParseQuery(query)
	if posted := v.post("/expectation/time.json", form); posted.body != a.body {
		t.Error("POST gave other bytes than GET")
	}
	v.get("/expectation/time?age=70").is(http.StatusBadRequest)
}

func TestDeepTime(t *testing.T) {
	v := newDemoSite(t).visitor()
	a := v.get("/expectation/deep-time")
	// Some ten invented ancient systems cannot tell the rules apart: hundreds to
	// thousands would be needed.
	a.is(http.StatusOK).says("not yet", "would be needed")
	notANumber(t, a)
	notANumber(t, v.get("/expectation/deep-time.json").is(http.StatusOK))
	if bad := v.get("/expectation/deep-time.json?colour=blue"); bad.status != http.StatusBadRequest || !strings.Contains(bad.body, "colour") {
		t.Errorf("an unknown parameter: %d", bad.status)
	}
	empty := newSite(t).visitor().get("/expectation/deep-time")
	empty.is(http.StatusOK)
	notANumber(t, empty)
}

func TestReport(t *testing.T) {
	v := newDemoSite(t).visitor()
	const query = "palaeolatitude=28&palaeolatitude_se=2&unit=Late+Cretaceous&target_grain=mud_sand&seed=6&draws=500"
	a := v.get("/expectation/report?" + query)
	a.is(http.StatusOK).says("28° N", "palaeolatitude_se", "mud_sand", "Cautions", "Sources of the rows", "Vaes et al. 2023", "seed")
	notANumber(t, a)
	if a.doc().Find(".report details:not([open])").Length() != 0 {
		t.Error("something stays folded on paper")
	}
	form, _ := url.ParseQuery("seed=1&draws=500")
	form.Set("targets", "name,palaeolatitude,age\nNorth block,30,70\nSouth block,95,70\n")
	few := v.post("/expectation/report", form)
	few.is(http.StatusOK).says("North block", "South block", "no answer", "palaeolatitude")
	form.Set("targets", "name,palaeolatitude\n"+strings.Repeat("x,1\n", reportTargets+1))
	v.post("/expectation/report", form).is(http.StatusUnprocessableEntity)
}

func TestWhereToMeasureNext(t *testing.T) {
	v := newDemoSite(t).visitor()
	a := v.get("/regression/next?draws=20")
	a.is(http.StatusOK).says("would narrow", "power")
	notANumber(t, a)
	if a.doc().Find("svg#thin .land").Length() == 0 || a.doc().Find("table.grid td").Length() < 20 {
		t.Error("no map or no grid")
	}
	doc := v.get("/regression/next.json?draws=20").is(http.StatusOK)
	notANumber(t, doc)
	if again := v.get("/regression/next.json?draws=20"); again.body != doc.body {
		t.Error("the same question gave other bytes")
	}
	for _, c := range []struct{ query, names string }{
		{"term=feeder", "abs_latitude"}, {"beside=coriolis", "one explanation"}, {"explanations=coriolis", "two"}, {"explanations=coriolis,colour", "colour"},
		{"poleward=89", "poleward"}, {"draws=1", "draws"}, {"model=linear:coriolis", "model"},
	} {
		if a := v.get("/regression/next.json?" + c.query); a.status != http.StatusBadRequest || !strings.Contains(a.body, c.names) {
			t.Errorf("%s: status %d, %s", c.query, a.status, a.body)
		}
	}
	notANumber(t, newSite(t).visitor().get("/regression/next").is(http.StatusOK))
}

// TestControlGroup: rivers are fitted beside submarine channels and the
// difference is tested.
func TestControlGroup(t *testing.T) {
	v := newDemoSite(t).visitor()
	a := v.get("/regression?model=linear:abs_latitude&group=kind&scale=ln_excess&resamples=499&permutations=99&seed=1")
	a.is(http.StatusOK).says("Control group", "submarine less river")
	if a.doc().Find("svg#fit-abs-latitude .mark.ochre").Length() == 0 || a.doc().Find("svg#fit-abs-latitude .line.l2.dash").Length() != 1 {
		t.Error("rivers are not ochre and dashed")
	}
	head, _, _ := strings.Cut(v.get("/regression.csv?model=linear:abs_latitude&group=kind&resamples=99&permutations=99").body, "\n")
	if strings.Count(head, "predicted linear:abs_latitude") != 1 {
		t.Errorf("columns: %s", head)
	}
}
