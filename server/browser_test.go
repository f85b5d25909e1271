package main

import (
	"context"
	"encoding/json"
	"net/http"
	"net/url"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

// tab is one browser window in front of a site.
type tab struct {
	*site
	ctx context.Context
}

// browse opens a window. expected are console messages the test provokes, as
// the browser's own line about a page with status 422.
func (s *site) browse(t *testing.T, expected ...string) *tab {
	t.Helper()
	return &tab{s, openBrowser(t, expected...)}
}

func (b *tab) do(steps ...chromedp.Action[chromedp.Void]) {
	b.t.Helper()
	if err := chromedp.Do(b.ctx, steps...); err != nil {
		b.t.Fatal(err)
	}
}

func (b *tab) goTo(path string) { b.t.Helper(); b.do(chromedp.Navigate(b.base + path)) }

// press clicks what leads to another page and waits for that page.
func (b *tab) press(selector string) int64 {
	b.t.Helper()
	resp, err := chromedp.RunResponse(b.ctx, chromedp.Click(selector))
	if err != nil {
		b.t.Fatalf("pressing %s: %v", selector, err)
	}
	return int64(resp.Status)
}

func (b *tab) fill(fields map[string]string) {
	b.t.Helper()
	for name, value := range fields {
		if err := chromedp.Do(b.ctx, chromedp.SetValue("#"+name, value)); err != nil {
			b.t.Fatalf("filling %s with %q: %v", name, value, err)
		}
	}
}

func (b *tab) text() string {
	b.t.Helper()
	s, err := chromedp.Run(b.ctx, chromedp.TextContent("main"))
	if err != nil {
		b.t.Fatal(err)
	}
	return strings.Join(strings.Fields(s), " ")
}

func (b *tab) says(parts ...string) {
	b.t.Helper()
	text := b.text()
	for _, p := range parts {
		if !strings.Contains(text, p) {
			b.t.Errorf("the page does not say %q:\n%s", p, text)
		}
	}
}

func (b *tab) value(selector string) string {
	b.t.Helper()
	s, err := chromedp.Run(b.ctx, chromedp.Value(selector))
	if err != nil {
		b.t.Fatal(err)
	}
	return s
}

func (b *tab) path() string {
	b.t.Helper()
	at, err := chromedp.Run(b.ctx, chromedp.Location())
	if err != nil {
		b.t.Fatal(err)
	}
	u, err := url.Parse(at)
	if err != nil {
		b.t.Fatal(err)
	}
	return u.Path
}

func (b *tab) signIn(name string) {
	b.t.Helper()
	b.goTo("/sign-in?return=/account")
	b.fill(map[string]string{"name": name, "password": testPassword})
	b.press("main form button")
	b.says("You are signed in as " + name)
}

// people makes accounts as on a fresh machine: the keeper through the one-time
// address, the others through the keeper's links.
func (s *site) people(names map[string]string) {
	s.t.Helper()
	k := s.visitor()
	form := k.get(s.firstAddress()).is(http.StatusOK).form("main form")
	fillIn(form, map[string]string{"name": "kit", "credit": "K. Kelp", "password": testPassword, "again": testPassword})
	k.post("/first-curator", form).is(http.StatusOK)
	for name, role := range names {
		a := k.post("/people", url.Values{"name": {name}, "credit": {"Credit of " + name}, "role": {role}}).is(http.StatusOK)
		link, err := url.Parse(a.doc().Find("#link").Text())
		if err != nil {
			s.t.Fatal(err)
		}
		v := s.visitor()
		form := v.get(link.RequestURI()).is(http.StatusOK).form("main form")
		form.Set("password", testPassword)
		form.Set("again", testPassword)
		v.post("/welcome", form).is(http.StatusOK)
	}
}

// regressionRows is how many rows the fits of the demo's first question use.
func (s *site) regressionRows() (n int) {
	s.t.Helper()
	var answer struct {
		Rows     *int `json:"rows"`
		Invented int  `json:"invented_rows"`
	}
	body := s.visitor().get("/regression.json?model=linear:valley_slope&model=linear:coriolis&resamples=99&permutations=99").is(http.StatusOK).body
	if err := json.Unmarshal([]byte(body), &answer); err != nil || answer.Rows == nil {
		s.t.Fatalf("%v: %.200s", err, body)
	}
	return *answer.Rows
}

// The main job: a contributor adds a measured system through the form, a
// curator accepts it, and it is on the meridian, in the CSV and in the fits.
func TestBrowserContributeAcceptFind(t *testing.T) {
	s := newDemoSite(t)
	s.people(map[string]string{"ann": "contributor", "cy": "curator"})
	rows := s.regressionRows()

	ann := s.browse(t, "status of 422")
	ann.signIn("ann")
	ann.goTo("/contribute")
	fields := goodRecord()
	delete(fields, "sinuosity")
	ann.fill(fields)

	// The checks run while typing, beside the field, before anything is sent.
	fields["sinuosity"] = "0.9"
	ann.do(chromedp.SendKeys("#sinuosity", "0.9\t"))
	waitFor(t, ann.ctx, `document.querySelector("#sinuosity-messages .error")?.textContent.includes("below 1")`)
	if bad := evaluate[string](t, ann.ctx, `document.getElementById("sinuosity").getAttribute("aria-invalid")`); bad != "true" {
		t.Errorf("aria-invalid is %q", bad)
	}

	// Sent all the same: nothing typed is lost.
	if status := ann.press("button[value=submit].primary"); status != http.StatusUnprocessableEntity {
		t.Fatalf("a sinuosity of 0.9: status %d", status)
	}
	ann.says("Nothing was stored: 1 thing to mend")
	for name, want := range fields {
		if got := ann.value("#" + name); got != want {
			t.Errorf("%s: typed %q, now %q", name, want, got)
		}
	}
	// The summary leads to the field.
	ann.do(chromedp.Click("#errors a"))
	if at := evaluate[string](t, ann.ctx, `document.activeElement.id || location.hash`); at != "sinuosity" && at != "#sinuosity" {
		t.Errorf("the summary leads to %q", at)
	}
	ann.fill(map[string]string{"sinuosity": "1.62"})
	if status := ann.press("button[value=submit].primary"); status != http.StatusOK {
		t.Fatalf("sent: status %d\n%s", status, ann.text())
	}
	ann.says("Sent.", "waits for a curator")

	cy := s.browse(t)
	cy.signIn("cy")
	cy.goTo("/review")
	cy.says("1 record waits")
	cy.press("table.data tbody th a")
	cy.says("Tarn Hollow Channel", "A new system", "1.62")
	cy.do(chromedp.SetValue("#comment", "Read against the source."))
	cy.press("button[value=accept]")
	cy.says("Tarn Hollow Channel is accepted", "Nothing waits for a curator")

	cy.goTo("/")
	if n := evaluate[int](t, cy.ctx, `[...document.querySelectorAll("#meridian a")].filter(a => a.getAttribute("href") === "/systems/tarn-hollow-channel").length`); n == 0 {
		t.Error("the new system is not on the meridian")
	}
	cy.goTo("/systems/tarn-hollow-channel")
	cy.says("Tarn Hollow Channel", "1.62")
	found := false
	for _, line := range strings.Split(s.visitor().get("/systems.csv").is(http.StatusOK).body, "\n") {
		found = found || strings.Contains(line, ",tarn-hollow-channel,Tarn Hollow Channel,") && strings.Contains(line, ",1.62,")
	}
	if !found {
		t.Error("the new system is not in /systems.csv")
	}
	if now := s.regressionRows(); now != rows+1 {
		t.Errorf("the regression uses %d rows, before %d", now, rows)
	}
}

// The same without scripts, to the end.
func TestBrowserContributeWithoutScripts(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	s.person("cy", "curator")
	ann := s.browse(t, "status of 422")
	if _, err := chromedp.Call(ann.ctx, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true}); err != nil {
		t.Fatal(err)
	}
	ann.signIn("ann")
	ann.goTo("/contribute")
	fields := goodRecord()
	fields["latitude_deg"] = "91"
	ann.fill(fields)
	if status := ann.press("button[value=submit].primary"); status != http.StatusUnprocessableEntity {
		t.Fatalf("latitude 91: status %d", status)
	}
	if got := ann.value("#latitude_deg"); got != "91" {
		t.Errorf("latitude is now %q", got)
	}
	ann.fill(map[string]string{"latitude_deg": "24 30 S"})
	if status := ann.press("button[value=submit].primary"); status != http.StatusOK {
		t.Fatalf("sent: status %d\n%s", status, ann.text())
	}
	ann.says("Sent.")
	ann.press("form.signout button")

	ann.signIn("cy")
	ann.goTo("/review")
	ann.press("table.data tbody th a")
	ann.press("button[value=accept]")
	ann.says("accepted")
	if rows := s.csv(); len(rows) != 2 || !strings.Contains(rows[1], ",-24.5,") {
		t.Errorf("after accepting:\n%s", strings.Join(rows, "\n"))
	}
}

// A session that ends while a form is being filled loses nothing of it.
func TestBrowserSessionEndsWhileTyping(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	ann := s.browse(t, "status of 401")
	ann.signIn("ann")
	ann.goTo("/contribute")
	fields := goodRecord()
	ann.fill(fields)
	mustRun(t, testPassword+"\n", "account", "-catalogue", s.file, "password", "ann") // ends every session
	ann.press("button[value=save]")
	ann.says("what you typed is kept")
	ann.fill(map[string]string{"name": "ann", "password": testPassword})
	ann.press("main form button")
	ann.says("What you typed is kept")
	ann.press("main form button.primary")
	ann.says("The draft is saved")
	for name, want := range fields {
		if got := ann.value("#" + name); got != want {
			t.Errorf("%s: typed %q, now %q", name, want, got)
		}
	}
}
