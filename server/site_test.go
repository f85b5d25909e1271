package main

import (
	"bytes"
	"context"
	"io"
	"net/http"
	"net/http/cookiejar"
	"net/url"
	"path/filepath"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// site is the real program on a free port over a catalogue file of its own.
type site struct {
	t    testing.TB
	file string
	base string
	said bytes.Buffer // what the console showed
}

// testPassword is the password of every account the tests make.
const testPassword = "ebb and flood 42"

// newSite starts the program over a new, empty catalogue. prepare may change
// the file first.
func newSite(t testing.TB, prepare ...func(file string)) *site {
	t.Helper()
	s := &site{t: t, file: filepath.Join(t.TempDir(), "catalogue.db")}
	for _, f := range prepare {
		f(s.file)
	}
	s.start(serveConfig{Catalogue: s.file})
	return s
}

// newDemoSite starts the program with its demo catalogue.
func newDemoSite(t testing.TB) *site {
	t.Helper()
	s := &site{t: t}
	s.start(serveConfig{})
	return s
}

func (s *site) start(cfg serveConfig) {
	s.t.Helper()
	cfg.Listen, cfg.Say = "127.0.0.1:0", &s.said
	addr, stop, err := startServer(context.Background(), cfg)
	if err != nil {
		s.t.Fatalf("start: %v", err)
	}
	s.t.Cleanup(stop)
	s.base = "http://" + addr
}

// runCommand runs a command of the program and returns its exit code and what it
// printed.
func runCommand(stdin string, args ...string) (code int, out, errOut string) {
	var o, e bytes.Buffer
	code = run(args, strings.NewReader(stdin), &o, &e)
	return code, o.String(), e.String()
}

// mustRun is a command that must succeed.
func mustRun(t testing.TB, stdin string, args ...string) string {
	t.Helper()
	code, out, errOut := runCommand(stdin, args...)
	if code != exitOK {
		t.Fatalf("%s: exit %d\n%s%s", strings.Join(args, " "), code, out, errOut)
	}
	return out
}

// person makes an account through the command line.
func (s *site) person(name, role string) {
	s.t.Helper()
	mustRun(s.t, testPassword+"\n", "account", "-catalogue", s.file, "add", name, "-role", role, "-credit", "Credit of "+name)
}

// visitor is one browser without scripts: it keeps cookies and follows
// redirects.
type visitor struct {
	*site
	client *http.Client
}

func (s *site) visitor() *visitor {
	jar, err := cookiejar.New(nil)
	if err != nil {
		s.t.Fatal(err)
	}
	return &visitor{site: s, client: &http.Client{Jar: jar}}
}

// as is a visitor who signed in.
func (s *site) as(name string) *visitor {
	s.t.Helper()
	v := s.visitor()
	a := v.post("/sign-in", url.Values{"name": {name}, "password": {testPassword}, "return": {"/account"}})
	a.is(http.StatusOK)
	if !strings.Contains(a.body, name) {
		s.t.Fatalf("%s did not get in:\n%s", name, a.text())
	}
	return v
}

// answer is one response, read.
type answer struct {
	t      testing.TB
	what   string
	status int
	url    *url.URL // after redirects
	header http.Header
	body   string
}

func (v *visitor) do(r *http.Request) *answer {
	v.t.Helper()
	resp, err := v.client.Do(r)
	if err != nil {
		v.t.Fatalf("%s %s: %v", r.Method, r.URL.Path, err)
	}
	defer resp.Body.Close()
	b, err := io.ReadAll(resp.Body)
	if err != nil {
		v.t.Fatalf("%s %s: %v", r.Method, r.URL.Path, err)
	}
	return &answer{v.t, r.Method + " " + r.URL.Path, resp.StatusCode, resp.Request.URL, resp.Header, string(b)}
}

func (v *visitor) request(method, path, contentType string, body io.Reader) *answer {
	v.t.Helper()
	r, err := http.NewRequest(method, v.base+path, body)
	if err != nil {
		v.t.Fatal(err)
	}
	if contentType != "" {
		r.Header.Set("Content-Type", contentType)
	}
	return v.do(r)
}

func (v *visitor) get(path string) *answer { v.t.Helper(); return v.request("GET", path, "", nil) }

func (v *visitor) post(path string, form url.Values) *answer {
	v.t.Helper()
	return v.request("POST", path, "application/x-www-form-urlencoded", strings.NewReader(form.Encode()))
}

// is fails the test when the status is another.
func (a *answer) is(status int) *answer {
	a.t.Helper()
	if a.status != status {
		a.t.Fatalf("%s: status %d, want %d\n%s", a.what, a.status, status, a.text())
	}
	return a
}

// says fails the test when the text of the page lacks one of the parts.
func (a *answer) says(parts ...string) *answer {
	a.t.Helper()
	text := a.text()
	for _, p := range parts {
		if !strings.Contains(text, p) {
			a.t.Errorf("%s (%d) does not say %q:\n%s", a.what, a.status, p, text)
		}
	}
	return a
}

func (a *answer) doc() *goquery.Document {
	a.t.Helper()
	d, err := goquery.NewDocumentFromReader(strings.NewReader(a.body))
	if err != nil {
		a.t.Fatal(err)
	}
	return d
}

// text is what a person reads, white space folded.
func (a *answer) text() string {
	if !strings.Contains(a.header.Get("Content-Type"), "html") {
		return a.body
	}
	d, err := goquery.NewDocumentFromReader(strings.NewReader(a.body))
	if err != nil {
		return a.body
	}
	return strings.Join(strings.Fields(d.Find("main").Text()), " ")
}

// form reads the fields of the form at the selector as a browser would send
// them, without the buttons.
func (a *answer) form(selector string) url.Values {
	a.t.Helper()
	f := a.doc().Find(selector)
	if f.Length() != 1 {
		a.t.Fatalf("%s has %d forms at %q, want 1", a.what, f.Length(), selector)
	}
	out := url.Values{}
	f.Find("input[name], textarea[name]").Each(func(_ int, s *goquery.Selection) {
		name, _ := s.Attr("name")
		switch kind, _ := s.Attr("type"); kind {
		case "submit", "file", "button":
		case "checkbox", "radio":
			if _, on := s.Attr("checked"); on {
				out.Add(name, s.AttrOr("value", "on"))
			}
		default:
			if goquery.NodeName(s) == "textarea" {
				out.Add(name, strings.TrimPrefix(s.Text(), "\n"))
			} else {
				out.Add(name, s.AttrOr("value", ""))
			}
		}
	})
	f.Find("select[name]").Each(func(_ int, s *goquery.Selection) {
		o := s.Find("option[selected]")
		if o.Length() == 0 {
			o = s.Find("option").First()
		}
		out.Add(s.AttrOr("name", ""), o.Last().AttrOr("value", o.Last().Text()))
	})
	return out
}
