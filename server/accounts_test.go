package main

import (
	"net/http"
	"net/url"
	"regexp"
	"strings"
	"testing"
	"time"

	"github.com/PuerkitoBio/goquery"
)

// firstAddress is the one-time address on the console.
func (s *site) firstAddress() string {
	s.t.Helper()
	m := regexp.MustCompile(`http://\S+(/first-curator\?token=\S+)`).FindStringSubmatch(s.said.String())
	if m == nil {
		s.t.Fatalf("the console shows no one-time address:\n%s", s.said.String())
	}
	return m[1]
}

func TestFirstCuratorByOneTimeAddress(t *testing.T) {
	s := newSite(t)
	address := s.firstAddress()
	v := s.visitor()
	page := v.get(address).is(http.StatusOK)
	form := page.form("main form")
	form.Set("name", "marlow")
	form.Set("credit", "A. Marlow")

	form.Set("password", testPassword)
	form.Set("again", "something else")
	v.post("/first-curator", form).is(http.StatusUnprocessableEntity).says("differ")
	form.Set("password", "short")
	form.Set("again", "short")
	kept := v.post("/first-curator", form).is(http.StatusUnprocessableEntity).says("8 characters").form("main form")
	if kept.Get("name") != "marlow" || kept.Get("credit") != "A. Marlow" {
		t.Errorf("typed name and credit are lost: %v", kept)
	}
	form.Set("password", testPassword)
	form.Set("again", testPassword)
	v.post("/first-curator", form).is(http.StatusOK).says("marlow", "keeper")

	other := s.visitor()
	other.get(address).is(http.StatusForbidden).says("used")
	form.Set("name", "second")
	other.post("/first-curator", form).is(http.StatusForbidden)
	s.as("marlow").get("/people").is(http.StatusOK)
}

func TestSignIn(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	v := s.visitor()
	a := v.get("/contribute").is(http.StatusOK)
	if a.url.Path != "/sign-in" || a.url.Query().Get("return") != "/contribute" {
		t.Fatalf("signed out, /contribute leads to %s", a.url)
	}
	form := a.form("main form")
	form.Set("name", "ann")
	form.Set("password", "wrong")
	wrong := v.post("/sign-in", form).is(http.StatusUnprocessableEntity)
	if got := wrong.form("main form").Get("name"); got != "ann" {
		t.Errorf("the name typed is lost: %q", got)
	}
	form.Set("name", "nobody")
	unknown := v.post("/sign-in", form).is(http.StatusUnprocessableEntity)
	if text := wrong.doc().Find("#password-error").Text(); text == "" || text != unknown.doc().Find("#password-error").Text() {
		t.Error("the page tells which names exist")
	}
	form.Set("name", "ann")
	form.Set("password", testPassword)
	if in := v.post("/sign-in", form).is(http.StatusOK); in.url.Path != "/contribute" {
		t.Errorf("signed in, one is at %s", in.url)
	}
	first := cookieOf(v)
	v.post("/sign-in", form).is(http.StatusOK)
	if second := cookieOf(v); first == "" || second == first {
		t.Error("the session token does not change at sign-in")
	}
	v.post("/sign-out", nil).is(http.StatusOK)
	if v.get("/contribute").url.Path != "/sign-in" {
		t.Error("still signed in after signing out")
	}
}

func cookieOf(v *visitor) string {
	u, _ := url.Parse(v.base)
	for _, c := range v.client.Jar.Cookies(u) {
		if c.Name == "fathombend" {
			return c.Value
		}
	}
	return ""
}

func TestReturnPathStaysHere(t *testing.T) {
	for in, want := range map[string]string{
		"/contribute":           "/contribute",
		"/systems?q=a&kind=b":   "/systems?q=a&kind=b",
		"":                      "/",
		"//elsewhere.example":   "/",
		"/\\elsewhere.example":  "/",
		"http://elsewhere/":     "/",
		"javascript:alert(1)":   "/",
		"/a\r\nSet-Cookie: x=y": "/",
		"/\t/elsewhere":         "/",
	} {
		if got := localPath(in); got != want {
			t.Errorf("%q: %q, want %q", in, got, want)
		}
	}
}

func TestSignInIsThrottled(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	s.person("bo", "contributor")
	v := s.visitor()
	form := url.Values{"name": {"ann"}, "password": {"guess number one"}, "return": {"/"}}
	for range 10 {
		v.post("/sign-in", form).is(http.StatusUnprocessableEntity)
	}
	a := v.post("/sign-in", form).is(http.StatusTooManyRequests).says("Wait 15 minutes")
	if a.header.Get("Retry-After") == "" {
		t.Error("no Retry-After")
	}
	form.Set("password", testPassword)
	v.post("/sign-in", form).is(http.StatusTooManyRequests)
	s.as("bo") // others still get in
}

func TestThrottleForgets(t *testing.T) {
	now := time.Date(2030, 1, 1, 0, 0, 0, 0, time.UTC)
	th := newThrottle(2, time.Minute)
	th.now = func() time.Time { return now }
	th.limit = 3
	th.fail("a")
	if th.wait("a") != 0 {
		t.Fatal("one failure of two allowed makes wait")
	}
	th.fail("a")
	if th.wait("a") != time.Minute {
		t.Fatalf("wait %v, want a minute", th.wait("a"))
	}
	now = now.Add(time.Minute)
	if th.wait("a") != 0 {
		t.Fatal("still waiting after the window")
	}
	for _, k := range []string{"b", "c", "d", "e", "f"} {
		th.fail(k)
	}
	if len(th.seen) > th.limit {
		t.Fatalf("holds %d keys, limit %d", len(th.seen), th.limit)
	}
	th.fail("f")
	th.clear("f")
	if th.wait("f") != 0 {
		t.Fatal("a success does not clear")
	}
}

func TestAccountPage(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	v, elsewhere := s.as("ann"), s.as("ann")
	a := v.post("/account", url.Values{"credit": {"Ann of the Soundings"}, "orcid": {"0000-0002-1825-0098"}})
	a.is(http.StatusUnprocessableEntity).says("mistyped")
	if got := a.form("form[action='/account']"); got.Get("credit") != "Ann of the Soundings" || got.Get("orcid") != "0000-0002-1825-0098" {
		t.Errorf("typed values lost: %v", got)
	}
	v.post("/account", url.Values{"credit": {"Ann of the Soundings"}, "orcid": {"https://orcid.org/0000-0002-1825-0097"}}).is(http.StatusOK).says("Saved")
	if got := v.get("/account").form("form[action='/account']").Get("orcid"); got != "0000-0002-1825-0097" {
		t.Errorf("ORCID kept as %q", got)
	}

	change := url.Values{"current": {"not it at all"}, "password": {"a longer tide table"}, "again": {"a longer tide table"}}
	v.post("/account/password", change).is(http.StatusUnprocessableEntity).says("not your current password")
	change.Set("current", testPassword)
	v.post("/account/password", change).is(http.StatusOK).says("changed")
	v.get("/account").is(http.StatusOK).says("ann")
	if elsewhere.get("/account").url.Path != "/sign-in" {
		t.Error("another session outlives the change of password")
	}
	again := s.visitor()
	in := url.Values{"name": {"ann"}, "password": {"a longer tide table"}, "return": {"/account"}}
	if again.post("/sign-in", in).is(http.StatusOK).url.Path != "/account" {
		t.Fatal("the new password does not work")
	}
	v.post("/account/sign-out", nil).is(http.StatusOK)
	if again.get("/account").url.Path != "/sign-in" || v.get("/account").url.Path != "/sign-in" {
		t.Error("sign out everywhere leaves a session")
	}
}

func TestKeeperAddsPeople(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	s.person("ann", "contributor")
	k := s.as("kit")
	bad := k.post("/people", url.Values{"name": {"two words"}, "credit": {"Two W."}, "role": {"curator"}}).is(http.StatusUnprocessableEntity)
	if got := bad.form("form[action='/people']"); got.Get("name") != "two words" || got.Get("role") != "curator" {
		t.Errorf("typed values lost: %v", got)
	}
	k.post("/people", url.Values{"name": {"ann"}, "credit": {"x"}, "role": {"curator"}}).is(http.StatusUnprocessableEntity).says("already an account")
	a := k.post("/people", url.Values{"name": {"cy"}, "credit": {"C. Yarrow"}, "role": {"curator"}}).is(http.StatusOK)
	link, err := url.Parse(a.doc().Find("#link").Text())
	if err != nil || link.Path != "/welcome" {
		t.Fatalf("no link: %v", a.text())
	}

	cy := s.visitor()
	form := cy.get(link.RequestURI()).is(http.StatusOK).says("Welcome, cy").form("main form")
	form.Set("password", testPassword)
	form.Set("again", testPassword)
	cy.post("/welcome", form).is(http.StatusOK).says("curator")
	cy.post("/welcome", form).is(http.StatusForbidden)
	cy.get(link.RequestURI()).is(http.StatusForbidden).says("used or has ended")
	cy.get("/review").is(http.StatusOK)
	cy.get("/people").is(http.StatusForbidden)

	role := k.get("/people").doc().Find("form[action$='/role']").FilterFunction(func(_ int, f *goquery.Selection) bool {
		return f.Find("select").AttrOr("aria-label", "") == "Role of cy"
	}).AttrOr("action", "")
	k.post(role, url.Values{"role": {"admiral"}}).is(http.StatusBadRequest)
	k.post(role, url.Values{"role": {"contributor"}}).is(http.StatusOK)
	cy.get("/review").is(http.StatusForbidden)
	k.post(strings.TrimSuffix(role, "role")+"state", url.Values{"state": {"disabled"}}).is(http.StatusOK)
	if cy.get("/contribute").url.Path != "/sign-in" {
		t.Error("a disabled account is still signed in")
	}
	k.post("/people/99999/role", url.Values{"role": {"curator"}}).is(http.StatusNotFound)
	k.post("/people/x/role", url.Values{"role": {"curator"}}).is(http.StatusNotFound)
}
