package main

import (
	"net/http"
	"net/url"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// accepted sends a record as ann, accepts it as cy, and returns its slug and
// id.
func accepted(t *testing.T, s *site, ann, cy *visitor, fields map[string]string) (slug, id string) {
	t.Helper()
	sent := ann.post("/contribute", press(ann.newRecord(fields), "submit")).is(http.StatusOK)
	cy.post(reviewOfPath(sent), url.Values{"action": {"accept"}}).is(http.StatusOK)
	rows := s.csv()
	cells := strings.Split(rows[len(rows)-1], ",")
	return cells[1], cells[0]
}

func reviewOfPath(a *answer) string {
	return "/review/" + strings.TrimPrefix(a.url.Path, "/contribute/")
}

func with(fields map[string]string, pairs ...string) map[string]string {
	out := map[string]string{}
	for k, v := range fields {
		out[k] = v
	}
	for i := 0; i < len(pairs); i += 2 {
		out[pairs[i]] = pairs[i+1]
	}
	return out
}

// stay is a visitor that does not follow redirects.
func (v *visitor) stay() *visitor {
	client := *v.client
	client.CheckRedirect = func(*http.Request, []*http.Request) error { return http.ErrUseLastResponse }
	return &visitor{v.site, &client}
}

func TestWithdrawnRecordSaysSo(t *testing.T) {
	s, ann, cy := newContribution(t)
	slug, id := accepted(t, s, ann, cy, goodRecord())
	page := ann.get("/systems/" + slug).is(http.StatusOK)
	if page.doc().Find("a[href='/measurements/"+id+"/withdraw']").Length() != 1 {
		t.Error("the page of the system has no way to a withdrawal")
	}
	form := ann.get("/measurements/"+id+"/withdraw").is(http.StatusOK).says("Propose to withdraw "+id, "has no other measurement").form("form.record")
	form.Set("instead", "m999999")
	form.Set("why", "A survey artefact, <b>not</b> a channel.")
	kept := ann.post("/measurements/"+id+"/withdraw", form).is(http.StatusUnprocessableEntity).says("Nothing was sent", "m999999").form("form.record")
	if kept.Get("why") != form.Get("why") {
		t.Errorf("the reason is now %q", kept.Get("why"))
	}
	form.Set("instead", "")
	sent := ann.post("/measurements/"+id+"/withdraw", form).is(http.StatusOK).says("Your proposal to withdraw " + id + " waits")
	cy.get("/review").is(http.StatusOK).says("withdraw " + id)
	cy.get(reviewOfPath(sent)).is(http.StatusOK).says("A proposal to withdraw "+id, "only measurement of its system", "A survey artefact, <b>not</b> a channel.")
	cy.post(reviewOfPath(sent), url.Values{"action": {"comment"}, "comment": {"Which survey?"}}).is(http.StatusOK)
	ann.post(sent.url.Path+"/comment", url.Values{"comment": {"The one of 2031."}}).is(http.StatusOK).says("Which survey?", "The one of 2031.")
	cy.get("/review").is(http.StatusOK).says("3 messages, last from Credit of ann")
	cy.post(reviewOfPath(sent), url.Values{"action": {"accept"}, "comment": {"Agreed."}}).is(http.StatusOK).says(id + " is withdrawn")

	reader := s.visitor()
	reader.get("/systems/"+slug).is(http.StatusGone).says("Withdrawn on", "no longer part of the catalogue", "A survey artefact", "Agreed.", "withdrawn", "added")
	reader.get("/measurements/"+id).is(http.StatusGone).says(id, "Withdrawn")
	reader.get("/systems/" + slug + ".json").is(http.StatusGone)
	reader.get("/systems/"+slug+"/history").is(http.StatusOK).says("withdrawn", "added")
	reader.get("/systems/none").is(http.StatusNotFound)
	reader.get("/measurements/m000099").is(http.StatusNotFound)
	if n := len(s.csv()); n != 1 {
		t.Errorf("%d lines of CSV", n)
	}
	// Its id stays its own.
	_, next := accepted(t, s, ann, cy, with(goodRecord(), "system_name", "Next Channel", "latitude_deg", "-28"))
	if next == id {
		t.Error("the id was given again")
	}
	back := ann.post("/measurements/"+id+"/restore", url.Values{"why": {"It was a channel."}}).is(http.StatusOK)
	cy.post(reviewOfPath(back), url.Values{"action": {"accept"}}).is(http.StatusOK).says("is back in the catalogue")
	reader.get("/systems/" + slug).is(http.StatusOK).says(id)
	to := reader.stay().get("/measurements/" + id).is(http.StatusSeeOther).header.Get("Location")
	if to != "/systems/"+slug+"#"+id {
		t.Errorf("the address of the measurement leads to %s", to)
	}
}

func TestHistoryRestoreAndTakingBack(t *testing.T) {
	s, ann, cy := newContribution(t)
	slug, id := accepted(t, s, ann, cy, goodRecord())
	change := fillIn(ann.get("/contribute?measurement="+id).is(http.StatusOK).form("form.record"), map[string]string{"sinuosity": "1.9", "notes": "remeasured", "basin": "Invented Basin"})
	sent := ann.post("/contribute", press(change, "submit")).is(http.StatusOK)
	cy.post(reviewOfPath(sent), url.Values{"action": {"accept"}, "comment": {"Better."}}).is(http.StatusOK)

	reader := s.visitor()
	all := reader.get("/systems/"+slug+"/history").is(http.StatusOK).says("5 recorded changes", "Better.")
	reader.get("/systems/"+slug+"/history?record=measurement:"+id+"&field=sinuosity").is(http.StatusOK).says("1 recorded change of "+id, "1.62", "1.9")
	reader.get("/systems/" + slug + "/history?record=measurement:none").is(http.StatusBadRequest)
	reader.get("/systems/" + slug + "/history?at=99999").is(http.StatusBadRequest)
	for suffix, want := range map[string]string{".json": `"field":"sinuosity"`, ".csv": ",sinuosity,1.62,1.9"} {
		if b := reader.get("/systems/" + slug + "/history" + suffix).is(http.StatusOK).body; !strings.Contains(b, want) {
			t.Errorf("%s: %s", suffix, b)
		}
	}
	var first string
	all.doc().Find("#history tbody tr").Each(func(_ int, r *goquery.Selection) {
		if strings.Contains(r.Text(), "added") && strings.Contains(r.Text(), id) {
			first = strings.TrimSpace(r.Find("td").First().Text())
		}
	})
	at := "/systems/" + slug + "/history?at=" + first
	reader.get(at).is(http.StatusOK).says("after revision "+first, "1.62", "1.9")
	if ann.get(at).is(http.StatusOK).doc().Find("a[href='/contribute?measurement="+id+"&revision="+first+"']").Length() != 1 {
		t.Error("a contributor has no way to propose going back")
	}
	proposal := ann.get("/contribute?measurement=" + id + "&revision=" + first).is(http.StatusOK).form("form.record")
	if proposal.Get("sinuosity") != "1.62" || proposal.Get("notes") != "" || proposal.Get("basin") != "Invented Basin" {
		t.Errorf("the form holds %s, %q and %q", proposal.Get("sinuosity"), proposal.Get("notes"), proposal.Get("basin"))
	}
	form := cy.get(at).is(http.StatusOK).form("form.record")
	ann.post("/systems/"+slug+"/restore", form).is(http.StatusForbidden)
	cy.post("/systems/"+slug+"/restore", form).is(http.StatusUnprocessableEntity).says("The reason is missing")
	form.Set("why", "The new value was of another reach.")
	cy.post("/systems/"+slug+"/restore", form).is(http.StatusOK).says("Restored", "another reach")
	if row := s.csv()[1]; !strings.Contains(row, ",1.62,") || !strings.Contains(row, "Invented Basin") {
		t.Errorf("restored: %s", row)
	}
	// The whole restore is a change; it is taken back like any other.
	list := cy.get("/review/activity").is(http.StatusOK).says("The new value was of another reach.")
	change1 := list.doc().Find("table.data tbody tr").First().Find("a").First().AttrOr("href", "")
	cy.get(change1).is(http.StatusOK).says("Take it back")
	ann.get(change1).is(http.StatusForbidden)
	cy.post(change1, url.Values{"why": {""}}).is(http.StatusUnprocessableEntity).says("The reason is missing")
	cy.post(change1, url.Values{"why": {"It was the same reach."}}).is(http.StatusOK).says("Taken back")
	if row := s.csv()[1]; !strings.Contains(row, ",1.9,") {
		t.Errorf("taken back: %s", row)
	}
	cy.post(change1, url.Values{"why": {"again"}}).is(http.StatusConflict).says("changed again since", "sinuosity")
	cy.get("/review/changes/9999").is(http.StatusNotFound)
}

func TestMergedSystemAnswersWithTheOther(t *testing.T) {
	s, ann, cy := newContribution(t)
	into, keep := accepted(t, s, ann, cy, with(goodRecord(), "feeder", "river"))
	from, drop := accepted(t, s, ann, cy, with(goodRecord(), "system_name", "Tarn Holow", "latitude_deg", "-25.1", "feeder", "shelf", "notes", "seen twice"))
	cy.get("/review/merge?from=" + from + "&into=nothing").is(http.StatusUnprocessableEntity).says("There is no system")
	cy.get("/review/merge?from=" + from + "&into=" + from).is(http.StatusUnprocessableEntity).says("Both are the same system")
	page := cy.get("/review/merge?from=/systems/"+from+"&into="+into).is(http.StatusOK).says("Tarn Holow becomes part of Tarn Hollow Channel", "1 measurement moves", keep+" stays, "+drop+" is withdrawn")
	form := page.doc().Find("form[method=post][action='/review/merge']")
	v := url.Values{"value.feeder": {"from"}, "value.system_name": {"into"}}
	form.Find("input[type=hidden]").Each(func(_ int, x *goquery.Selection) { v.Set(x.AttrOr("name", ""), x.AttrOr("value", "")) })
	v.Set("other_names", form.Find("#other_names").AttrOr("value", ""))
	v.Set("twin", keep+"+"+drop)
	ann.post("/review/merge", v).is(http.StatusForbidden)
	again := cy.post("/review/merge", v).is(http.StatusUnprocessableEntity).says("The reason is missing")
	if again.doc().Find("input[name='value.feeder'][value=from][checked]").Length() != 1 || again.doc().Find("input[name=twin][checked]").Length() != 1 {
		t.Error("the choices are lost")
	}
	v.Set("why", "One channel, misspelt.")
	cy.post("/review/merge", v).is(http.StatusOK).says("is part of", "Tarn Holow")
	cy.post("/review/merge", v).is(http.StatusUnprocessableEntity)

	reader := s.visitor()
	for _, suffix := range []string{"", ".json", ".geojson", "/history"} {
		a := reader.stay().get("/systems/" + from + suffix).is(http.StatusPermanentRedirect)
		if to := a.header.Get("Location"); to != "/systems/"+into+suffix {
			t.Errorf("%s leads to %s", suffix, to)
		}
	}
	reader.get("/systems/"+into).is(http.StatusOK).says("Merged into this system", from, "Withdrawn:", drop)
	reader.get("/systems/"+into+"/history").is(http.StatusOK).says("merged", "One channel, misspelt.")
	if row := s.csv()[1]; !strings.Contains(row, "Tarn Holow") || !strings.Contains(row, ",shelf,") || len(s.csv()) != 2 {
		t.Errorf("after merging: %s", row)
	}
	change := cy.get("/review/activity").is(http.StatusOK).says("1 system merged", "1 measurement withdrawn").doc().Find("table.data tbody tr").First().Find("a").First().AttrOr("href", "")
	cy.post(change, url.Values{"why": {"Two after all."}}).is(http.StatusOK)
	reader.get("/systems/" + from).is(http.StatusOK).says(drop)
}

func TestMergeTwoMeasurements(t *testing.T) {
	s, ann, cy := newContribution(t)
	_, keep := accepted(t, s, ann, cy, goodRecord())
	slug, drop := accepted(t, s, ann, cy, with(goodRecord(), "sinuosity", "1.63", "channel_width_m", "300", "channel_depth_m", "30"))
	cy.post("/review/merge/measurements", url.Values{}).is(http.StatusUnprocessableEntity).says("2 things to mend")
	cy.get("/review/merge/measurements?keep=" + keep + "&drop=" + keep).is(http.StatusUnprocessableEntity).says("Both are the same")
	page := cy.get("/review/merge/measurements?keep="+keep+"&drop="+drop).is(http.StatusOK).says("Channel width", "300")
	v := url.Values{"keep": {keep}, "drop": {drop}, "revision": {page.doc().Find("input[name=revision]").AttrOr("value", "")}, "value.channel_width_m": {"drop"}, "why": {"Rounded once more."}}
	cy.post("/review/merge/measurements", v).is(http.StatusOK).says(drop + " is withdrawn")
	s.visitor().get("/measurements/"+drop).is(http.StatusGone).says(keep+" stands for it", "Rounded once more.")
	if row := s.csv()[1]; len(s.csv()) != 2 || !strings.Contains(row, ",300,") || !strings.Contains(row, ",1.62,") || !strings.Contains(row, slug) {
		t.Errorf("%s", row)
	}
}

// Two edits of one record from the same base: both versions, one choice a
// field, nothing lost.
func TestConflictIsSettledFieldByField(t *testing.T) {
	s, ann, cy := newContribution(t)
	_, id := accepted(t, s, ann, cy, goodRecord())
	open := func(fields map[string]string) *answer {
		return ann.post("/contribute", press(fillIn(ann.get("/contribute?measurement="+id).is(http.StatusOK).form("form.record"), fields), "submit")).is(http.StatusOK)
	}
	one := open(map[string]string{"sinuosity": "1.8", "source_locator": "p. 3"})
	two := open(map[string]string{"sinuosity": "1.9", "grade": "surveyed"})
	cy.post(reviewOfPath(one), url.Values{"action": {"accept"}}).is(http.StatusOK)
	cy.get("/review").is(http.StatusOK).says("changed since")
	page := cy.get(reviewOfPath(two)).is(http.StatusOK).says("changed after this was written", "Accept as chosen")
	checked := map[string]string{}
	page.doc().Find(".conflict input[checked]").Each(func(_ int, x *goquery.Selection) { checked[x.AttrOr("name", "")] = x.AttrOr("value", "") })
	if len(checked) != 2 || checked["choice.grade"] != "proposed" || checked["choice.source_locator"] != "now" {
		t.Errorf("offered: %v", checked)
	}
	v := url.Values{"action": {"settle"}, "seen": {page.doc().Find(".conflict input[name=seen]").AttrOr("value", "")}, "comment": {"typed"}, "choice.grade": {"proposed"}, "choice.source_locator": {"now"}}
	again := cy.post(reviewOfPath(two), v).is(http.StatusUnprocessableEntity).says("Choose which of the two stands")
	if again.doc().Find("#settle-comment").AttrOr("value", "") != "typed" || again.doc().Find("input[name='choice.grade'][value=proposed][checked]").Length() != 1 {
		t.Error("what was chosen and typed is lost")
	}
	v.Set("choice.sinuosity", "proposed")
	stale := url.Values{}
	for k, x := range v {
		stale[k] = x
	}
	stale.Set("seen", "1")
	cy.post(reviewOfPath(two), stale).is(http.StatusConflict).says("changed once more")
	cy.post(reviewOfPath(two), v).is(http.StatusOK).says("accepted as you chose")
	row := s.csv()[1]
	for _, want := range []string{",1.9,", "p. 3", ",surveyed,"} {
		if !strings.Contains(row, want) {
			t.Errorf("%s is not in %s", want, row)
		}
	}
	cy.post(reviewOfPath(two), v).is(http.StatusConflict).says("accepted by now")
}

// What was accepted with edits is shown as accepted, and is no duplicate of
// itself.
func TestReviewPageAfterAcceptingWithEdits(t *testing.T) {
	_, ann, cy := newContribution(t)
	sent := ann.post("/contribute", press(ann.newRecord(goodRecord()), "submit")).is(http.StatusOK)
	edit := cy.get(reviewOfPath(sent) + "/edit").is(http.StatusOK).form("form.record")
	edit.Set("source_locator", "p. 9")
	cy.post(reviewOfPath(sent)+"/edit", press(edit, "accept")).is(http.StatusOK)
	a := cy.get(reviewOfPath(sent)).is(http.StatusOK).says("1 field was edited by the curator", "As proposed", "As accepted", "p. 9", "m000001")
	for _, not := range []string{"Accepted now", "may be the same", "near-duplicate", "odd value"} {
		if strings.Contains(a.text(), not) {
			t.Errorf("the page says %q", not)
		}
	}
	ann.get(sent.url.Path).is(http.StatusOK).says("1 field was edited by the curator", "As you sent it", "The record as accepted", "p. 9")
}

// The page of a system says what is odd about its record, with the reason it
// was accepted with.
func TestSystemPageShowsKnownDoubts(t *testing.T) {
	s, ann, cy := newContribution(t)
	slug, _ := accepted(t, s, ann, cy, goodRecord())
	s.visitor().get("/systems/"+slug).is(http.StatusOK).says("Known doubts", "nothing odd")
	slug, id := accepted(t, s, ann, cy, with(goodRecord(), "system_name", "Odd Channel", "latitude_deg", "-28", "valley_slope", "0.2", "override.valley_slope_range", "A canyon wall, surveyed twice.",
		"vertex_spacing_m", "10", "centreline", "LINESTRING(-12 -28,-12.01 -28.02,-12.03 -28.02,-12.04 -28.04,-12.06 -28.04,-12.07 -28.06)"))
	a := s.visitor().get("/systems/"+slug).is(http.StatusOK).says("A canyon wall, surveyed twice.", "Credit of ann", "vertices of its stored line are", "No reason is recorded")
	if n := a.doc().Find("#doubts li").Length(); n != 3 || a.doc().Find("#doubts a[href='#"+id+"']").Length() != n {
		t.Errorf("%d doubts:\n%s", n, a.doc().Find("#doubts").Text())
	}
}
