package main

import (
	"net/http"
	"net/http/httptest"
	"net/url"
	"strconv"
	"strings"
	"testing"

	"github.com/labstack/echo/v4"
)

func TestInvitationByLink(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	k := s.as("kit")
	bad := k.post("/people/invitations", url.Values{"invite_role": {"curator"}, "days": {"soon"}, "note": {"for Dee"}}).is(http.StatusUnprocessableEntity).says("not a number of days")
	if form := bad.form("form[action^='/people/invitations#']"); form.Get("note") != "for Dee" || form.Get("invite_role") != "curator" || form.Get("days") != "soon" {
		t.Errorf("typed values lost: %v", form)
	}
	k.post("/people/invitations", url.Values{"invite_role": {"admiral"}, "days": {"3"}}).is(http.StatusUnprocessableEntity).says("is not a role")
	a := k.post("/people/invitations", url.Values{"invite_role": {"curator"}, "days": {"3"}, "note": {"for Dee"}}).is(http.StatusOK).says("for Dee", "works until")
	link, err := url.Parse(a.doc().Find("#invitation").Text())
	if err != nil || link.Path != "/join" {
		t.Fatalf("no link: %s", a.text())
	}
	dee := s.visitor()
	form := dee.get(link.RequestURI()).is(http.StatusOK).says("Credit of kit invites you as a curator").form("main form")
	form.Set("name", "kit")
	form.Set("credit", "D. Lead")
	form.Set("password", testPassword)
	form.Set("again", "another")
	dee.post("/join", form).is(http.StatusUnprocessableEntity).says("differ")
	form.Set("again", testPassword)
	kept := dee.post("/join", form).is(http.StatusUnprocessableEntity).says("already an account").form("main form")
	if kept.Get("credit") != "D. Lead" {
		t.Errorf("typed values lost: %v", kept)
	}
	form.Set("name", "dee")
	dee.post("/join", form).is(http.StatusOK).says("signed in as dee", "curator")
	dee.get("/review").is(http.StatusOK)
	s.visitor().get(link.RequestURI()).is(http.StatusForbidden).says("used or has ended")
	k.get("/people").is(http.StatusOK).says("used by dee")

	a = k.post("/people/invitations", url.Values{"invite_role": {"keeper"}, "days": {"1"}})
	link, _ = url.Parse(a.doc().Find("#invitation").Text())
	k.post(a.doc().Find("form[action$='/end']").First().AttrOr("action", ""), nil).is(http.StatusOK).says("taken back")
	s.visitor().get(link.RequestURI()).is(http.StatusForbidden)
	guess := s.visitor()
	for range 100 {
		guess.get("/join?token=guess")
	}
	guess.get("/join?token=guess").is(http.StatusTooManyRequests)
}

// The whole way of a person who comes by themselves.
func TestRegistration(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	s.person("cy", "curator")
	v := s.visitor()
	v.get("/register").is(http.StatusForbidden).says("Registration is closed")
	v.post("/register", url.Values{"name": {"ann"}}).is(http.StatusForbidden)
	s.as("kit").post("/settings", url.Values{"registration": {"open"}, "why": {"the group grows"}}).is(http.StatusOK)
	if v.get("/sign-in").doc().Find("main a[href='/register']").Length() != 1 {
		t.Error("the sign-in page does not lead to registration")
	}
	wrong := v.post("/sign-in", url.Values{"name": {"nobody"}, "password": {"wrong"}}).is(http.StatusUnprocessableEntity)
	if wrong.doc().Find("main a[href='/register']").Length() != 1 {
		t.Error("a wrong password takes the way to registration away")
	}
	form := v.get("/register").is(http.StatusOK).form("main form")
	form.Set("name", "cy") // taken: nothing may tell
	form.Set("credit", "A. Marlow")
	form.Set("about", "Northern Survey; forty channels from our cruise")
	form.Set("password", testPassword)
	form.Set("again", "x")
	if kept := v.post("/register", form).is(http.StatusUnprocessableEntity).says("differ").form("main form"); kept.Get("about") != form.Get("about") {
		t.Errorf("typed values lost: %v", kept)
	}
	form.Set("password", "abc")
	v.post("/register", form).is(http.StatusUnprocessableEntity).says("differ", "8 characters or more")
	form.Set("password", testPassword)
	form.Set("again", testPassword)
	v.post("/register", withValues(form, url.Values{"name": {"two words"}})).is(http.StatusUnprocessableEntity).says("1 to 50 characters without spaces")
	a := v.post("/register", form).is(http.StatusOK).says("Your name to sign in with is cy-", "has not let you in yet")
	v.get("/review").is(http.StatusForbidden)

	record := v.get("/contribute").is(http.StatusOK).says("has not let you in yet").form("form#record, form[action='/contribute']")
	for name, value := range map[string]string{"system_name": "Loom", "latitude_deg": "-30", "longitude_deg": "-20", "sinuosity": "1.4", "sinuosity_kind": "peak",
		"measured_line": "thalweg", "source": "Invented Soundings 4:12 (2031)", "licence": "CC0 1.0", "action": "submit"} {
		record.Set(name, value)
	}
	draft := v.post("/contribute", record).is(http.StatusOK).says("Saved as a draft, not sent")

	cy := s.as("cy")
	if !strings.Contains(cy.get("/").doc().Find("header").Text(), "1 person waits to join") {
		t.Error("nothing tells the curator")
	}
	page := cy.get("/registrations").is(http.StatusOK).says("A. Marlow", "forty channels", "1 contribution or draft")
	action := page.doc().Find("form[action^='/registrations/']").AttrOr("action", "")
	cy.post(action, url.Values{"decision": {"perhaps"}}).is(http.StatusBadRequest)
	cy.post(action, url.Values{"decision": {"approve"}, "why": {"met at the meeting"}}).is(http.StatusOK).says("can send contributions now", "met at the meeting")
	cy.post(action, url.Values{"decision": {"refuse"}}).is(http.StatusConflict)

	again := v.get(draft.url.Path).is(http.StatusOK).form("form[action^='/contribute/'][method]:not([action$='withdraw'])")
	again.Set("action", "submit")
	v.post(draft.url.Path, again).is(http.StatusOK).says("Sent.")
	cy.get("/review").is(http.StatusOK).says("Loom")
	_ = a
}

func TestRegistrationIsThrottled(t *testing.T) {
	s := newSite(t)
	mustRun(t, `{"registration": "open"}`, "settings", "-catalogue", s.file, "import", "-")
	form := url.Values{"credit": {"A"}, "about": {"somebody"}, "password": {testPassword}, "again": {testPassword}}
	for i := range 5 {
		form.Set("name", "a"+strconv.Itoa(i))
		s.visitor().post("/register", form).is(http.StatusOK)
	}
	a := s.visitor().post("/register", form).is(http.StatusTooManyRequests).says("Too many accounts")
	if a.header.Get("Retry-After") == "" || a.form("main form").Get("about") != "somebody" {
		t.Error("no Retry-After, or typed values lost")
	}
}

// Whom a request counts for: expected by hand from who wrote which part of the
// header.
func TestAskerHost(t *testing.T) {
	for _, c := range []struct {
		name, peer, trusted string
		behind              bool
		forwarded           []string
		want                string
	}{
		{"no proxy: a header is made up", "198.51.100.7:5", "", false, []string{"203.0.113.9"}, "198.51.100.7"},
		{"the proxy on this machine", "127.0.0.1:5", "", true, []string{"203.0.113.9"}, "203.0.113.9"},
		{"what stands before it was made up", "127.0.0.1:5", "", true, []string{"192.0.2.1, 203.0.113.9"}, "203.0.113.9"},
		{"in two lines", "127.0.0.1:5", "", true, []string{"192.0.2.1", "203.0.113.9"}, "203.0.113.9"},
		{"an asker on the private network itself", "127.0.0.1:5", "", true, []string{"192.0.2.1, 10.1.2.3"}, "10.1.2.3"},
		{"past the proxy", "198.51.100.7:5", "", true, []string{"203.0.113.9"}, "198.51.100.7"},
		{"a proxy that names nobody", "127.0.0.1:5", "", true, nil, "127.0.0.1"},
		{"rubbish", "127.0.0.1:5", "", true, []string{"unknown"}, "127.0.0.1"},
		{"two proxies, both named", "192.0.2.7:5", "192.0.2.7,198.51.100.0/24", true, []string{"10.0.0.1, 203.0.113.9, 198.51.100.4"}, "203.0.113.9"},
		{"this machine is not named", "127.0.0.1:5", "192.0.2.7", true, []string{"203.0.113.9"}, "127.0.0.1"},
		{"one customer of IPv6", "[2001:db8:1:2:3:4:5:6]:5", "", false, nil, "2001:db8:1:2::/64"},
		{"IPv4 in IPv6", "[::ffff:127.0.0.1]:5", "", true, []string{"203.0.113.9"}, "203.0.113.9"},
	} {
		t.Run(c.name, func(t *testing.T) {
			a := newApp(nil, nil, true)
			a.behind(serveConfig{BehindProxy: c.behind, TrustedProxy: c.trusted})
			r := httptest.NewRequest("GET", "/", nil)
			r.RemoteAddr = c.peer
			for _, f := range c.forwarded {
				r.Header.Add("X-Forwarded-For", f)
			}
			if got := a.askerHost(echo.New().NewContext(r, httptest.NewRecorder())); got != c.want {
				t.Errorf("%s, want %s", got, c.want)
			}
		})
	}
	if code, _, errOut := runCommand("", "serve", "-behind-proxy", "-trusted-proxy", "somewhere"); code != exitBadCall || !strings.Contains(errOut, "neither an address") {
		t.Errorf("exit %d: %s", code, errOut)
	}
	if code, _, _ := runCommand("", "serve", "-trusted-proxy", "10.0.0.1"); code != exitBadCall {
		t.Error("-trusted-proxy without -behind-proxy is taken")
	}
}
