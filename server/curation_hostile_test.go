package main

import (
	"net/http"
	"net/url"
	"strings"
	"sync"
	"sync/atomic"
	"testing"
)

// Markup, formulas, right-to-left and 4-byte text stand on the pages of a
// curator as what they are: text.
func TestHostileTextThroughCuration(t *testing.T) {
	s, ann, cy := newContribution(t)
	const name = "<script>alert(1)</script> \u05e2\u05de\u05e7 \U0001f30a\U00020bb7"
	const reason = "=HYPERLINK(\"http://x\") \u202etxt <img src=x onerror=alert(1)> \U0001f41f"
	slug, id := accepted(t, s, ann, cy, with(goodRecord(), "system_name", name))
	other, _ := accepted(t, s, ann, cy, with(goodRecord(), "system_name", name+" two", "latitude_deg", "-28"))
	harmless := func(a *answer) {
		t.Helper()
		for _, bad := range []string{"<script>alert", "<img src=x"} {
			if strings.Contains(a.body, bad) {
				t.Errorf("%s holds %s", a.what, bad)
			}
		}
	}
	sent := ann.post("/measurements/"+id+"/withdraw", url.Values{"why": {reason}}).is(http.StatusOK)
	for _, a := range []*answer{sent, cy.get("/review"), cy.get(reviewOfPath(sent)), cy.get("/review/merge?from=" + other + "&into=" + slug), ann.get("/contribute?measurement=" + id)} {
		harmless(a)
	}
	cy.post(reviewOfPath(sent), url.Values{"action": {"accept"}, "comment": {reason}}).is(http.StatusOK)
	reader := s.visitor()
	gone := reader.get("/systems/" + slug).is(http.StatusGone)
	if !strings.Contains(gone.text(), reason) || !strings.Contains(gone.text(), name) {
		t.Errorf("the words are not kept as typed:\n%s", gone.text())
	}
	harmless(gone)
	harmless(reader.get("/systems/" + slug + "/history").is(http.StatusOK))
	harmless(cy.get("/review/activity").is(http.StatusOK))
	for _, line := range strings.Split(reader.get("/systems/"+slug+"/history.csv").is(http.StatusOK).body, "\n") {
		if strings.Contains(line, ",=HYPER") || strings.Contains(line, ",\"=HYPER") {
			t.Errorf("a formula runs: %s", line)
		}
	}
	// 10 MB where a reason is asked for: refused by name, nothing stored.
	long := ann.post("/measurements/m000002/withdraw", url.Values{"why": {strings.Repeat("x", 10<<20)}})
	if long.status != http.StatusUnprocessableEntity && long.status != http.StatusRequestEntityTooLarge {
		t.Errorf("10 MB of reason: status %d", long.status)
	}
	if n := len(s.csv()); n != 2 {
		t.Errorf("%d lines of CSV", n)
	}
}

// Forged forms: what is not one's own, not waiting, or not there.
func TestForgedFormsOfCuration(t *testing.T) {
	s, ann, cy := newContribution(t)
	s.person("bob", "contributor")
	bob := s.as("bob")
	slug, id := accepted(t, s, ann, cy, goodRecord())
	sent := ann.post("/measurements/"+id+"/withdraw", url.Values{"why": {"doubtful"}}).is(http.StatusOK)
	bob.get(sent.url.Path).is(http.StatusNotFound)
	bob.post(sent.url.Path+"/comment", url.Values{"comment": {"me too"}}).is(http.StatusNotFound)
	bob.post(sent.url.Path+"/withdraw", nil).is(http.StatusNotFound)
	// A withdrawal turned into an edit, settled as a conflict, accepted with edits.
	ann.post(sent.url.Path, press(fillIn(ann.get("/contribute?measurement="+id).form("form.record"), map[string]string{"sinuosity": "9"}), "submit")).is(http.StatusConflict)
	cy.post(reviewOfPath(sent), url.Values{"action": {"settle"}, "choice.sinuosity": {"proposed"}})
	for path, form := range map[string]url.Values{
		"/systems/" + slug + "/restore": {"record": {"measurement:" + id}, "revision": {"x"}, "why": {"y"}},
		"/review/changes/0":             {"why": {"y"}},
		"/review/batch/99":              {"read": {"1"}, "total": {"1"}},
		"/measurements/none/restore":    {"why": {"y"}},
		"/measurements/none/withdraw":   {"why": {"y"}},
		"/review/merge":                 {"from": {slug}, "into": {slug}, "why": {"y"}},
		"/review/merge/measurements":    {"keep": {id}, "drop": {"m9"}, "why": {"y"}},
	} {
		if a := cy.post(path, form); a.status < 400 || a.status >= 500 {
			t.Errorf("%s: status %d\n%s", path, a.status, a.text())
		}
	}
	if row := s.csv()[1]; !strings.Contains(row, ",1.62,") {
		t.Errorf("a forged form changed something: %s", row)
	}
}

// Two curators press at once: one decides, the other is told.
func TestTwoCuratorsTakeBackAtOnce(t *testing.T) {
	s, ann, cy := newContribution(t)
	s.person("dee", "curator")
	dee := s.as("dee")
	_, id := accepted(t, s, ann, cy, goodRecord())
	sent := ann.post("/measurements/"+id+"/withdraw", url.Values{"why": {"doubtful"}}).is(http.StatusOK)
	var done, told atomic.Int32
	var wg sync.WaitGroup
	for _, who := range []*visitor{cy, dee} {
		wg.Go(func() {
			switch a := who.post(reviewOfPath(sent), url.Values{"action": {"accept"}}); a.status {
			case http.StatusOK:
				done.Add(1)
			case http.StatusConflict:
				told.Add(1)
			default:
				t.Errorf("status %d\n%s", a.status, a.text())
			}
		})
	}
	wg.Wait()
	if done.Load() != 1 || told.Load() != 1 {
		t.Errorf("%d decided, %d were told", done.Load(), told.Load())
	}
}
