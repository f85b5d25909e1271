package main

import (
	"fmt"
	"math"
	"net/http"
	"net/url"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"
)

// housePage is one page as one person meets it.
type housePage struct {
	who    string // reader, contributor, curator, keeper; "empty" is a reader of an empty catalogue
	name   string // of its picture
	path   string
	status int    // 0 = 200
	act    string // a script that sends a form of the page; what is looked at is the answer
}

func (p housePage) want() int {
	if p.status == 0 {
		return http.StatusOK
	}
	return p.status
}

// house is the demo with people, records that wait, a draft, a release, a
// frozen analysis and centrelines measured again, so that every page has
// something to show; and beside it an empty catalogue.
type house struct {
	*site
	empty *site
	who   map[string]*visitor
	pages []housePage
}

func newHouse(t *testing.T) *house {
	h := &house{site: newDemoSite(t), empty: newSite(t)}
	h.people(map[string]string{"ann": "contributor", "cy": "curator"})
	h.who = map[string]*visitor{"reader": h.visitor(), "contributor": h.as("ann"), "curator": h.as("cy"), "keeper": h.as("kit"), "empty": h.empty.visitor()}
	h.pages = slices.Concat(h.readersPages(), h.contributorsPages(), h.curatorsPages(), h.keepersPages(), emptyPages)
	return h
}

func (h *house) readersPages() []housePage {
	analysis := h.who["contributor"].post("/regression/freeze", url.Values{"model": {"linear:abs_latitude", "linear:valley_slope"},
		"resamples": {"199"}, "permutations": {"99"}, "title": {"Figure 3"}, "why": {"of the manuscript"}}).is(http.StatusOK).url.Path
	h.who["curator"].post("/releases", url.Values{"name": {"2031.1"}, "title": {"The demonstration survey"}, "notes": {"The first."}, "licence": {"CC-BY-4.0"}, "doi": {""}}).is(http.StatusOK)
	question := "palaeolatitude=28&palaeolatitude_se=4&age=70&age_se=3"
	targets := h.who["reader"].answered(h.who["reader"].sendTargets(manyTargets(1500, 120), nil)).url.RequestURI()
	return []housePage{
		{"reader", "meridian", "/", 0, ""},
		{"reader", "meridian-folded", "/?fold=yes&colour=grade", 0, ""},
		{"reader", "meridian-nothing", "/?q=zzzzzz", 0, ""},
		{"reader", "systems", "/systems", 0, ""},
		{"reader", "systems-filtered", "/systems?feeder=river&abs_lat_max=30&sort=-sinuosity", 0, ""},
		{"reader", "systems-nothing", "/systems?q=zzzzzz", 0, ""},
		{"reader", "system", "/systems/orquathe-main-channel", 0, ""},
		{"reader", "system-ancient", "/systems/sarquembe-channel", 0, ""},
		{"reader", "system-river", "/systems/yazoquelle-river", 0, ""},
		{"reader", "chart", "/chart", 0, ""},
		{"reader", "chart-polar", "/chart?view=north&colour=age", 0, ""},
		{"reader", "regression", "/regression", 0, ""},
		{"reader", "regression-more", "/regression?model=floor_decay:coriolis&model=linear:valley_slope&scale=raw", 0, ""},
		{"reader", "regression-nothing", "/regression?q=zzzzzz", 0, ""},
		{"reader", "regression-next", "/regression/next", 0, ""},
		{"reader", "expectation-form", "/expectation", 0, ""},
		{"reader", "expectation", "/expectation?" + question, 0, ""},
		{"reader", "expectation-time", "/expectation/time?" + question, 0, ""},
		{"reader", "expectation-report", "/expectation/report?" + question, 0, ""},
		{"reader", "expectation-deep-time", "/expectation/deep-time", 0, ""},
		{"reader", "targets-answered", targets, 0, ""},
		{"reader", "targets-forgotten", "/expectation/batch?key=none", http.StatusNotFound, ""},
		{"reader", "measure", "/measure", 0, ""},
		{"reader", "measured", "/measure", 0, sentPlainly("main [name=line]", wanderingLine())},
		{"reader", "methods", "/methods", 0, ""},
		{"reader", "dictionary", "/dictionary", 0, ""},
		{"reader", "sources", "/sources", 0, ""},
		{"reader", "changes", "/changes", 0, ""},
		{"reader", "example", "/example", 0, ""},
		{"reader", "system-history", "/systems/orquathe-main-channel/history", 0, ""},
		{"reader", "analyses", "/analyses", 0, ""},
		{"reader", "analysis", analysis, 0, ""},
		{"reader", "releases", "/releases", 0, ""},
		{"reader", "release", "/releases/2031.1", 0, ""},
		{"reader", "difference", "/releases/2031.1/difference/present", 0, ""},
		{"reader", "recomputed", "/recompute/thirty-widths", 0, ""},
		{"reader", "sign-in", "/sign-in?return=/contribute", 0, ""},
		{"reader", "sign-in-wrong", "/sign-in", http.StatusUnprocessableEntity, typed("main #name", "nobody")},
		{"reader", "error-missing", "/nothing-here", http.StatusNotFound, ""},
		{"reader", "error-question", "/systems?lat_min=91", http.StatusBadRequest, ""},
		{"reader", "error-forbidden", "/first-curator?token=spent", http.StatusForbidden, ""},
		{"reader", "welcome", h.firstPassword(), 0, ""},
		{"reader", "join", h.invitation(), 0, ""},
		{"reader", "register", "/register", 0, ""},
		{"reader", "measurement-withdrawn", "/measurements/" + withdrawnRecord, http.StatusGone, ""},
	}
}

// ready asks for a page until its fit is done, so that a browser that opens it
// next gets the page itself and not its progress.
func (h *house) ready(p housePage) {
	h.t.Helper()
	for range 600 {
		if a := h.who[p.who].get(p.path); a.status != http.StatusAccepted {
			a.is(p.want())
			return
		}
		time.Sleep(100 * time.Millisecond)
	}
	h.t.Fatalf("%s is never done", p.path)
}

// withdrawnRecord is a measurement of the demo that the house has withdrawn.
const withdrawnRecord = "m000016"

// firstPassword makes an account that has not chosen its password yet.
func (h *house) firstPassword() string {
	a := h.who["keeper"].post("/people", url.Values{"name": {"new"}, "credit": {"N. Ewcomer"}, "role": {"contributor"}}).is(http.StatusOK)
	link, err := url.Parse(a.doc().Find("#link").Text())
	if err != nil {
		h.t.Fatal(err)
	}
	return link.RequestURI()
}

// invitation opens the registration, has somebody wait for it, and invites
// somebody else.
func (h *house) invitation() string {
	kit, comes := h.who["keeper"], h.visitor()
	kit.post("/settings", url.Values{"registration": {"open"}, "why": {"the group grows"}}).is(http.StatusOK)
	form := fillIn(comes.get("/register").is(http.StatusOK).form("main form"), map[string]string{"name": "fen", "credit": "F. Fenn", "about": "forty channels", "password": testPassword, "again": testPassword})
	comes.post("/register", form).is(http.StatusOK)
	a := kit.post("/people/invitations", url.Values{"invite_role": {"curator"}, "days": {"3"}, "note": {"for Dee"}}).is(http.StatusOK)
	link, err := url.Parse(a.doc().Find("#invitation").Text())
	if err != nil {
		h.t.Fatal(err)
	}
	return link.RequestURI()
}

// withdraw takes a measurement out of the catalogue.
func (h *house) withdraw(id string) {
	ann := h.who["contributor"]
	form := ann.get("/measurements/" + id + "/withdraw").is(http.StatusOK).form("form.record")
	form.Set("why", "A survey artefact.")
	sent := ann.post("/measurements/"+id+"/withdraw", form).is(http.StatusOK)
	h.who["curator"].post(reviewOfPath(sent), url.Values{"action": {"accept"}, "comment": {"Agreed."}}).is(http.StatusOK)
}

func (h *house) contributorsPages() []housePage {
	ann := h.who["contributor"]
	h.withdraw(withdrawnRecord)
	// A record that waits, another one kept as a draft, a file with something odd.
	ann.post("/contribute", press(ann.newRecord(goodRecord()), "submit")).is(http.StatusOK)
	kept := goodRecord()
	kept["system_name"], kept["embargo"], kept["embargo_until"] = "Osier Reach Channel", "date", "2900-01-31"
	sent := ann.post("/contribute", press(ann.newRecord(kept), "submit")).is(http.StatusOK)
	h.who["curator"].post(reviewOfPath(sent), url.Values{"action": {"accept"}, "comment": {""}}).is(http.StatusOK)
	draft := goodRecord()
	draft["system_name"] = "Sedge Hollow Channel"
	saved := ann.post("/contribute", press(ann.newRecord(draft), "save")).is(http.StatusOK)
	good := csvHead + "Loom Channel,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\nWeft Channel,-31,-21,1.5,peak,thalweg,Invented 2031,3\n"
	ann.act(ann.upload([]byte(good), map[string]string{"why": "table 2"}).is(http.StatusOK), "send").is(http.StatusOK)
	// A file to be matched, whose signs a person has to say; one checked, one none of whose rows can be sent.
	matching := ann.sendFile("/contribute/upload", "other.csv", []byte("Channel;Lat;Lon;Sinuosity;Width\nL\xf6om;-30;-20;1,4;1,200\n"), nil).is(http.StatusOK).url.Path
	half := csvHead + "Reed Channel,-30,-20,1.4,peak,thalweg,Invented 2031,3\nRush Channel,91,-20,1.4,peak,thalweg,Invented 2031,0.004\n"
	checked := ann.upload([]byte(half), nil).is(http.StatusOK).url.Path
	return []housePage{
		{"contributor", "account", "/account", 0, ""},
		{"contributor", "contribute", "/contribute", 0, ""},
		{"contributor", "contribute-wrong", "/contribute", http.StatusUnprocessableEntity, typed("#latitude_deg", "91")},
		{"contributor", "contribute-draft", saved.url.Path, 0, ""},
		{"contributor", "upload", "/contribute/upload", 0, ""},
		{"contributor", "upload-matching", matching, 0, ""},
		{"contributor", "upload-incomplete", matching, http.StatusUnprocessableEntity, typed("#why", "table 2")},
		{"contributor", "upload-checked", checked, 0, ""},
		{"contributor", "withdraw", "/measurements/m000001/withdraw", 0, ""},
		{"contributor", "error-role", "/review", http.StatusForbidden, ""},
	}
}

func (h *house) curatorsPages() []housePage {
	cy := h.who["curator"]
	form := cy.get("/recompute").is(http.StatusOK).form("form[action='/recompute']")
	fillIn(form, map[string]string{"name": "Thirty widths", "why": "wider windows", "window_widths": "30"})
	cy.post("/recompute", form).is(http.StatusOK)
	cy.finished("thirty-widths")
	queue := cy.get("/review").is(http.StatusOK).doc()
	record, there := queue.Find("table.data tbody th a[href^='/review/']").First().Attr("href")
	batch, more := queue.Find("a[href^='/review/batch/']").First().Attr("href")
	change, done := cy.get("/review/activity").doc().Find("a[href^='/review/changes/']").First().Attr("href")
	if !there || !more || !done {
		h.t.Fatalf("for the curator of the house: a record waits %v, a file waits %v, something changed %v", there, more, done)
	}
	return []housePage{
		{"curator", "review", "/review", 0, ""},
		{"curator", "review-embargoes", "/review/embargoes", 0, ""},
		{"curator", "review-activity", "/review/activity", 0, ""},
		{"curator", "review-record", record, 0, ""},
		{"curator", "review-edit", record + "/edit", 0, ""},
		{"curator", "review-batch", batch, 0, ""},
		{"curator", "review-change", change, 0, ""},
		{"curator", "review-merge", "/review/merge?from=xanthuvel-channel&into=sarquembe-channel", 0, ""},
		{"curator", "review-merge-rows", "/review/merge/measurements?keep=m000146&drop=m000147", 0, ""},
		{"curator", "registrations", "/registrations", 0, ""},
		{"curator", "recompute", "/recompute", 0, ""},
		{"curator", "releases-freeze", "/releases", 0, ""},
	}
}

func (h *house) keepersPages() []housePage {
	return []housePage{
		{"keeper", "people", "/people", 0, ""},
		{"keeper", "status", "/status", 0, ""},
		{"keeper", "settings", "/settings", 0, ""},
	}
}

var emptyPages = []housePage{
	{"empty", "empty-meridian", "/", 0, ""},
	{"empty", "empty-systems", "/systems", 0, ""},
	{"empty", "empty-chart", "/chart", 0, ""},
	{"empty", "empty-regression", "/regression", 0, ""},
	{"empty", "empty-expectation", "/expectation", 0, ""},
	{"empty", "empty-sources", "/sources", 0, ""},
	{"empty", "empty-analyses", "/analyses", 0, ""},
	{"empty", "empty-releases", "/releases", 0, ""},
}

// wanderingLine is a channel of ten bends, 2 km apart.
func wanderingLine() string {
	var b strings.Builder
	for i := range 201 {
		s := float64(i) / 10
		fmt.Fprintf(&b, "%.5f %.5f, ", s*0.009, 0.006*math.Sin(s*math.Pi))
	}
	return "LINESTRING (" + strings.TrimSuffix(b.String(), ", ") + ")"
}

// typed fills one control of a form of main and sends the form.
func typed(selector, text string) string {
	return `(() => { const c = document.querySelector("` + selector + `"); c.value = ` + "`" + text + "`" + `; const f = c.form; f.noValidate = true;
		f.requestSubmit(f.querySelector("button.primary") || f.querySelector("button")) })()`
}

// sentPlainly is typed for a form that a script answers in place: it goes past it.
func sentPlainly(selector, text string) string {
	return `(() => { const c = document.querySelector("` + selector + `"); c.value = ` + "`" + text + "`" + `; HTMLFormElement.prototype.submit.call(c.form) })()`
}

// notPages answer programs: data, files, feeds.
var notPages = regexp.MustCompile(`\.(csv|json|geojson|zip|svg|png|pdf|bib|ris|atom|ico)$|^/(static/\*|healthz|metrics)$|^/features`)

// Every page of the program stands in the list that is looked at: a new route
// that shows a page must be put there.
func TestTheHouseIsWhole(t *testing.T) {
	h := newHouse(t)
	seen := map[string]bool{}
	for _, p := range h.pages {
		u, err := url.Parse(p.path)
		if err != nil {
			t.Fatal(err)
		}
		seen[patternOf(routesOf(t), u.Path)] = true
	}
	for _, r := range routesOf(t) {
		method, path, _ := strings.Cut(r, " ")
		// A page with nothing of its own: it leads to the difference asked for.
		if method != http.MethodGet || seen[path] || notPages.MatchString(path) || path == "/releases/:name/difference" {
			continue
		}
		t.Errorf("%s is not among the pages of the house", path)
	}
	names := map[string]bool{}
	for _, p := range h.pages {
		if names[p.name] {
			t.Errorf("two pages are named %s", p.name)
		}
		names[p.name] = true
		if p.act == "" {
			h.ready(p)
		}
	}
	t.Logf("%d pages", len(h.pages))
}

// patternOf is the pattern that takes a path: the one with the fewest wild parts.
func patternOf(routes []string, path string) string {
	best, wild := "", 99
	for _, r := range routes {
		method, pattern, _ := strings.Cut(r, " ")
		if n := strings.Count(pattern, ":"); method == "GET" && n < wild && fitsPattern(pattern, path) {
			best, wild = pattern, n
		}
	}
	return best
}

func fitsPattern(pattern, path string) bool {
	want, got := strings.Split(pattern, "/"), strings.Split(path, "/")
	if len(want) != len(got) {
		return false
	}
	for i := range want {
		if !strings.HasPrefix(want[i], ":") && want[i] != got[i] {
			return false
		}
	}
	return true
}
