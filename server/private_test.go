package main

import (
	"archive/zip"
	"bytes"
	"database/sql"
	"encoding/json"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"sync"
	"testing"

	"fathombend/catalogue"
)

// Words and digits that stand in hidden rows and nowhere else. A row under
// embargo with its place rounded shows its name and its sinuosity.
var (
	privateMarkers = []string{"wobbegong", "12.34567", "40.67891", "1.73131", "quoll", "2.71317", "bilby", "1.92929"}
	coarseMarkers  = []string{"numbatreach", "numbatnotes", "33.45678", "55.56789", "33.41234", "55.51234", "4321.5"}
)

// hidingSite is a catalogue of 24 public rows and its people: olive owns what
// is hidden, finn is named by her, stray is another contributor, cora a curator.
func hidingSite(t *testing.T) *site {
	t.Helper()
	s := newSite(t)
	for _, p := range [][2]string{{"olive", "contributor"}, {"finn", "contributor"}, {"stray", "contributor"}, {"cora", "curator"}} {
		s.person(p[0], p[1])
	}
	var b strings.Builder
	b.WriteString("system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,valley_slope,parent_deposit,licence\n")
	for i := range 24 {
		fmt.Fprintf(&b, "Known %c Channel,%d,%d,%.2f,peak,thalweg,Invented Soundings 1:%d (2030),%.4f,Deposit %d,CC BY 4.0\n", 'A'+i, 3*i-30, 10*i-150, 1.15+float64(i*7%10)/10, i+1, 0.002+float64(i)/4000, i/2)
	}
	file := filepath.Join(t.TempDir(), "rows.csv")
	if err := os.WriteFile(file, []byte(b.String()), 0o600); err != nil {
		t.Fatal(err)
	}
	mustRun(t, "", "import", "-catalogue", s.file, "-publish", file)
	mustRun(t, "", "release", "-catalogue", s.file, "r1")
	return s
}

// again is the same catalogue under a program that holds no answers yet.
func (s *site) again() *site {
	x := &site{t: s.t, file: s.file}
	x.start(serveConfig{Catalogue: s.file})
	return x
}

// hiddenRecord is a record of the form with a reach, notes and a place.
func hiddenRecord(name, word string, lat, lon, sinuosity string) map[string]string {
	return map[string]string{"system_name": name, "reach": word + "reach", "notes": word + "notes", "latitude_deg": lat, "longitude_deg": lon, "sinuosity": sinuosity,
		"sinuosity_kind": "peak", "measured_line": "thalweg", "licence": "CC BY 4.0", "source": word + " thesis (2031)", "valley_slope": "0.004", "people": "finn"}
}

// hideRows makes two private rows of olive, one of them in a system that
// everybody knows, and one under embargo that others do not see. It returns
// the slugs of systems that are not there for others.
func hideRows(t *testing.T, s *site) (slugs []string) {
	t.Helper()
	olive, cora := s.as("olive"), s.as("cora")
	first := hiddenRecord("Wobbegong Channel", "wobbegong", "12.34567", "-40.67891", "1.73131")
	first["centreline"] = `{"type":"LineString","coordinates":[[-40.67891,12.34567],[-40.60,12.36],[-40.55,12.34],[-40.50,12.37]]}`
	for _, fields := range []map[string]string{first, hiddenRecord("Known C Channel", "quoll", "-24", "-130", "2.71317")} {
		a := olive.post("/contribute", press(olive.newRecord(fields), "keep")).is(http.StatusOK)
		if a.doc().Find(".notice").Length() == 0 || !strings.Contains(a.text(), "Kept as a private row") {
			t.Fatalf("not kept:\n%s", a.text())
		}
		if fields["reach"] == "wobbegongreach" {
			slugs = append(slugs, "private-"+filepath.Base(a.url.Path)+"-wobbegong-channel")
		}
	}
	bilby := hiddenRecord("Bilby Channel", "bilby", "-44.4444", "99.9999", "1.92929")
	bilby["embargo"], bilby["embargo_until"] = "date", "2900-01-31"
	id := olive.submitted(bilby)
	cora.post("/review/"+id, url.Values{"action": {"accept"}}).is(http.StatusOK)
	return append(slugs, "private-"+id+"-bilby-channel")
}

// submitted sends a record for review and returns its number.
func (v *visitor) submitted(fields map[string]string) string {
	v.t.Helper()
	a := v.post("/contribute", press(v.newRecord(fields), "submit")).is(http.StatusOK)
	if !strings.Contains(a.text(), "Sent. A curator reads it") {
		v.t.Fatalf("not sent:\n%s", a.text())
	}
	return filepath.Base(a.url.Path)
}

// openAddresses are addresses of every route that anyone may read, with the
// questions that would find a hidden row.
func openAddresses(t *testing.T, slugs ...string) []string {
	t.Helper()
	fill := map[string][]string{
		":slug": append([]string{"known-c-channel", "known-c-channel.json", "known-c-channel.geojson", "nobody-channel"}, slugs...), ":name": {"r1", "r1.zip", "r1.json"}, ":other": {"now"},
		":collection": {"systems", "measurements", "centrelines"}, ":id": {"m000003", "known-c-channel", "private-1", "private-3"}, "*": {"fathombend.css"},
	}
	questions := []string{"", "?bbox=-41,12,-40,13", "?sinuosity_min=1.7&sinuosity_max=1.74", "?sort=-latitude_deg", "?lat_min=12&lat_max=13", "?kind=submarine&q=thesis"}
	var out []string
	for _, path := range openToAll {
		if slices.Contains([]string{"/metrics", "/healthz"}, path) {
			continue
		}
		paths := []string{path}
		for word, values := range fill {
			var more []string
			for _, p := range paths {
				if !strings.Contains(p, word) {
					more = append(more, p)
					continue
				}
				for _, v := range values {
					more = append(more, strings.Replace(p, word, v, 1))
				}
			}
			paths = more
		}
		slices.Sort(paths)
		for _, p := range paths {
			switch {
			case strings.HasPrefix(p, "/regression") || strings.HasPrefix(p, "/figures/regression"):
				out = append(out, p+"?model=linear:abs_latitude&resamples=99&permutations=99&seed=1")
			case strings.HasPrefix(p, "/expectation") || strings.HasPrefix(p, "/figures/expectation"):
				out = append(out, p+"?palaeolatitude=20&age=1&draws=500")
			case strings.HasPrefix(p, "/figures/system"):
				out = append(out, p+"?system=known-c-channel")
			case p == "/chart" || p == "/systems" || strings.HasPrefix(p, "/systems.") || p == "/systems/dimensions.csv" || p == "/chart.json" || p == "/" || strings.HasSuffix(p, "/items"):
				for _, q := range questions {
					out = append(out, p+q)
				}
			case p == "/chart/lines.json":
				out = append(out, p+"?in=-180,-90,180,90")
			default:
				out = append(out, p)
			}
		}
	}
	return out
}

var requestNumber = regexp.MustCompile(`request [0-9a-f]{16}`)

// readable is an answer as text: archives are opened, the address of the
// program and the number of the request are left out.
func (a *answer) readable(base string) string {
	text := a.body
	if z, err := zip.NewReader(bytes.NewReader([]byte(a.body)), int64(len(a.body))); err == nil {
		text = ""
		for _, f := range z.File {
			r, err := f.Open()
			if err != nil {
				a.t.Fatal(err)
			}
			b, err := io.ReadAll(r)
			if err != nil {
				a.t.Fatal(err)
			}
			text += f.Name + "\n" + string(b)
		}
	}
	text = requestNumber.ReplaceAllString(text, "request")
	for _, name := range []string{base, strings.TrimPrefix(base, "http://"), url.QueryEscape(base)} {
		text = strings.ReplaceAll(text, name, "HERE")
	}
	return text
}

// holdsNone fails when a marker stands in the body or a header of an answer.
func (a *answer) holdsNone(who, base string, markers []string) {
	a.t.Helper()
	text := strings.ToLower(a.readable(base))
	for name, values := range a.header {
		text += "\n" + strings.ToLower(name+": "+strings.Join(values, " "))
	}
	for _, m := range markers {
		if at := strings.Index(text, m); at >= 0 {
			a.t.Errorf("%s as %s holds %q: ...%s...", a.what, who, m, text[max(0, at-80):min(len(text), at+80)])
		}
	}
}

// What is hidden changes nothing for others: every open address gives the same
// bytes under the same tag as before there was anything to hide, also right
// after its owner has read the same address.
func TestHiddenRowsChangeNothingForOthers(t *testing.T) {
	s := hidingSite(t)
	type seen struct{ body, tag string }
	read := func(s *site, v *visitor, address string) seen {
		a := v.get(address)
		if a.status >= 500 {
			t.Errorf("%s: %d", address, a.status)
		}
		return seen{fmt.Sprint(a.status, " ", a.readable(s.base)), a.header.Get("ETag")}
	}
	addresses := openAddresses(t, "private-1-wobbegong-channel", "private-3-bilby-channel")
	before, beforeStray := map[string]seen{}, map[string]seen{}
	reader, stray := s.visitor(), s.as("stray")
	for _, p := range addresses {
		before[p], beforeStray[p] = read(s, reader, p), read(s, stray, p)
	}
	slugs := hideRows(t, s)
	if !slices.Equal(slugs, []string{"private-1-wobbegong-channel", "private-3-bilby-channel"}) {
		t.Fatal("slugs:", slugs)
	}
	// The tags are those of the running program; the bytes are read from a new
	// one, that has computed nothing yet.
	fresh := s.again()
	olive, newReader, newStray, cora := fresh.as("olive"), fresh.visitor(), fresh.as("stray"), fresh.as("cora")
	differ := 0
	for _, p := range addresses {
		if tag := read(s, reader, p).tag; tag != before[p].tag {
			t.Errorf("%s: the tag changed", p)
		}
		mine := olive.get(p)
		if mine.readable(fresh.base) != newReader.get(p).readable(fresh.base) {
			differ++
		}
		for who, x := range map[string][2]string{"a reader": {read(fresh, newReader, p).body, before[p].body}, "another contributor": {read(fresh, newStray, p).body, beforeStray[p].body}} {
			if x[0] != x[1] {
				t.Errorf("%s as %s is not what it was:\n%s", p, who, firstDifference(x[1], x[0]))
			}
		}
		cora.get(p).holdsNone("a curator", fresh.base, without(privateMarkers, p))
	}
	t.Logf("%d addresses; %d differ for the owner", len(addresses), differ)
	if len(addresses) < 100 || differ < 30 {
		t.Errorf("%d addresses, %d differ for the owner: the test looks at too little", len(addresses), differ)
	}
	for who, v := range map[string]*visitor{"reader": newReader, "stray": newStray, "cora": cora} {
		for _, slug := range slugs {
			v.get("/systems/" + slug).is(http.StatusNotFound)
			v.get("/systems/" + slug + ".json").is(http.StatusNotFound)
		}
		if got := v.get("/systems.json?q=wobbegong").body; !strings.Contains(got, `"total":0`) {
			t.Errorf("%s finds it by its name: %s", who, got)
		}
	}
	for _, p := range []string{"/contribute/1", "/contribute/3", "/contribute?measurement=private-1", "/contribute?system=" + slugs[0]} {
		newStray.get(p).is(http.StatusNotFound).holdsNone("another contributor", fresh.base, without(privateMarkers, p))
	}
	cora.get("/review/1").is(http.StatusNotFound)
	cora.get("/review").holdsNone("a curator", fresh.base, privateMarkers[:6])
	cora.get("/review/embargoes").says("Bilby Channel", "31 January 2900").holdsNone("a curator", fresh.base, privateMarkers[:6])
	newStray.post("/contribute/3/embargo", url.Values{"action": {"publish"}}).is(http.StatusNotFound)
}

// without leaves out the markers that stand in an address, which a page may
// repeat.
func without(markers []string, address string) []string {
	return slices.DeleteFunc(slices.Clone(markers), func(m string) bool { return strings.Contains(address, m) })
}

func firstDifference(a, b string) string {
	i := 0
	for i < len(a) && i < len(b) && a[i] == b[i] {
		i++
	}
	return "was  ..." + a[max(0, i-60):min(len(a), i+120)] + "\nis   ..." + b[max(0, i-60):min(len(b), i+120)]
}

// The owner and the person she named see them where they are of use.
func TestHiddenRowsAreSeenByTheirPeople(t *testing.T) {
	s := hidingSite(t)
	slugs := hideRows(t, s)
	fit := "?model=linear:abs_latitude&resamples=99&permutations=99&seed=1"
	for _, name := range []string{"olive", "finn"} {
		v := s.as(name)
		for path, want := range map[string][]string{
			"/systems": {"Wobbegong Channel", "Bilby Channel", "private"}, "/systems?q=wobbegongreach": {"Wobbegong Channel"}, "/systems?bbox=-41,12,-40,13": {"Wobbegong Channel"},
			"/systems.csv": {"private-1,", "private-2,known-c-channel", "1.73131", "2.71317", "1.92929"}, "/systems.geojson": {"12.34567", `"private":true`, `"private_rows":`},
			"/systems.json?q=wobbegong": {`"total":1`, `"private":true`, `"private_rows":1`}, "/systems/" + slugs[0]: {"This system is private", "wobbegongnotes", "private-1"},
			"/systems/" + slugs[0] + ".json": {`"private_rows":1`, "wobbegongreach"}, "/systems/known-c-channel": {"quollreach", "1 measurement is private"},
			"/chart": {"Wobbegong Channel"}, "/chart.json": {"wobbegong", `"private_rows":2`}, "/chart/lines.json?in=-180,-90,180,90": {"40.67"},
			"/regression" + fit: {"3 rows are private: others do not see them, nor these numbers."}, "/regression.json" + fit: {`"rows":27`, `"private_rows":3`, "3 rows are private"},
			"/regression.csv" + fit: {"private-1", "private-2", "private-3"}, "/expectation?palaeolatitude=20&age=1": {"3 rows are private"},
			"/expectation.json?palaeolatitude=20&age=1": {`"private_rows":3`, `"rows":27`}, "/figures/chart.svg": {"private"},
		} {
			a := v.get(path).is(http.StatusOK)
			for _, w := range want {
				if !strings.Contains(a.body, w) {
					t.Errorf("%s as %s does not hold %q", path, name, w)
				}
			}
			if got := a.header.Get("Cache-Control"); got != "private, no-store" && got != "no-store" {
				t.Errorf("%s as %s may be kept: %q", path, name, got)
			}
			if a.header.Get("ETag") != "" || a.header.Get("Last-Modified") != "" {
				t.Errorf("%s as %s is tagged", path, name)
			}
		}
		if rows := v.answersTo([]byte("palaeolatitude,age\n20,1\n")); rows[0]["result_rows"] != "27" {
			t.Errorf("a file of targets of %s is answered on %s rows", name, rows[0]["result_rows"])
		}
		// As everybody sees it, when asked so.
		v.get("/systems.json?private=no").is(http.StatusOK).holdsNone(name+" with private=no", s.base, privateMarkers)
		if a := v.get("/regression.json" + fit + "&private=no"); !strings.Contains(a.body, `"rows":24`) || strings.Contains(a.body, "private_rows") {
			t.Errorf("private=no: %.300s", a.body)
		}
		if a := v.get("/systems?private=no"); !strings.Contains(a.body, "Your private rows are left out here") {
			t.Error("private=no does not say what is left out")
		}
		if a := v.get("/systems?private=perhaps"); a.status != http.StatusBadRequest {
			t.Error("private=perhaps:", a.status)
		}
	}
	olive := s.as("olive")
	form := url.Values{"title": {"Without"}, "model": {"linear:abs_latitude"}, "resamples": {"99"}, "permutations": {"99"}, "seed": {"1"}}
	olive.post("/regression/freeze", form).is(http.StatusOK).says("fitted without private rows").holdsNone("owner", s.base, privateMarkers)
	if a := s.visitor().get("/analyses/without.json"); !strings.Contains(a.body, `"rows":24`) {
		t.Errorf("frozen: %.300s", a.body)
	}
	mustRun(t, "", "release", "-catalogue", s.file, "r2")
	for _, p := range []string{"/systems.csv?release=r2", "/releases/r2", "/releases/r2.zip"} {
		olive.get(p).is(http.StatusOK).holdsNone("owner, a release", s.base, privateMarkers)
	}
	out := mustRun(t, "", "export", "-catalogue", s.file)
	(&answer{t: t, what: "export", body: out}).holdsNone("the command line", s.base, privateMarkers)
}

// A row under embargo with its place rounded: others find what is rounded, by
// every way in, and nothing exact, until it is published.
func TestEmbargoedPlaceDoesNotLeak(t *testing.T) {
	s := hidingSite(t)
	olive, cora, stray, reader := s.as("olive"), s.as("cora"), s.as("stray"), s.visitor()
	fields := hiddenRecord("Numbat Channel", "numbat", "33.45678", "-55.56789", "1.81818")
	fields["source"] = "Invented Numbat Paper (2031)"
	for name, v := range map[string]string{"start_latitude_deg": "33.41234", "start_longitude_deg": "-55.51234", "end_latitude_deg": "33.49", "end_longitude_deg": "-55.61", "water_depth_m": "4321.5",
		"embargo": "published", "coarse": "yes", "centreline": `{"type":"LineString","coordinates":[[-55.51234,33.41234],[-55.55,33.45],[-55.61,33.49]]}`} {
		fields[name] = v
	}
	id := olive.submitted(fields)
	cora.get("/review/"+id).says("stays under embargo until it is published", "rounded to 1 degree")
	cora.post("/review/"+id, url.Values{"action": {"accept"}, "comment": {"numbatnotes seen"}}).is(http.StatusOK)
	olive.get("/contribute/"+id).says("Meanwhile others see it as m000025", "33.45678", "numbatreach")
	for who, v := range map[string]*visitor{"a reader": reader, "another contributor": stray, "a curator": cora} {
		for _, p := range append(openAddresses(t, "numbat-channel", "numbat-channel.json", "numbat-channel.geojson"), "/features/collections/measurements/items/m000025", "/contribute?measurement=m000025",
			"/systems.csv?lat_min=33.4&lat_max=33.5", "/systems.csv?sort=water_depth_m", "/chart?zoom=20&at=33.4,-55.5") {
			if who == "a reader" || !strings.HasPrefix(p, "/figures") {
				v.get(p).holdsNone(who, s.base, coarseMarkers)
			}
		}
		for query, want := range map[string]string{"q=numbat": `"total":1`, "q=numbatreach": `"total":0`, "bbox=-55.6,33.4,-55.5,33.5": `"total":0`, "bbox=-56.1,32.9,-55.9,33.1": `"total":1`,
			"lat_min=33.4&lat_max=33.5": `"total":0`} {
			if got := v.get("/systems.json?" + query).body; !strings.Contains(got, want) {
				t.Errorf("%s as %s: %.200s", query, who, got)
			}
		}
		a := v.get("/systems/numbat-channel").is(http.StatusOK)
		a.says("The place is rounded to 1 degree", catalogue.CoarseMark)
	}
	var got struct{ Measurements []map[string]any }
	if err := json.Unmarshal([]byte(reader.get("/systems/numbat-channel.json").body), &got); err != nil || got.Measurements[0]["latitude_deg"] != 33.0 || got.Measurements[0]["longitude_deg"] != -56.0 || got.Measurements[0]["place_rounded"] != true {
		t.Errorf("%+v %v", got, err)
	}
	if mine := olive.get("/systems.csv").body; !strings.Contains(mine, "33.45678") || strings.Contains(mine, "m000025") {
		t.Error("the owner does not see her own row in the place of the rounded one")
	}
	tag := reader.get("/systems").header.Get("ETag")
	olive.post("/contribute/"+id+"/embargo", url.Values{"action": {"publish"}}).is(http.StatusOK).says("Published")
	after := reader.get("/systems.csv")
	if !strings.Contains(after.body, "33.45678") || !strings.Contains(after.body, "m000025") {
		t.Error("published, but not seen")
	}
	if reader.get("/systems").header.Get("ETag") == tag {
		t.Error("published under the same tag")
	}
	olive.post("/contribute/"+id+"/embargo", url.Values{"action": {"publish"}}).is(http.StatusConflict)
}

// An embargo whose day has come ends with the next request, whoever asks.
func TestEmbargoEndsWithTheNextRequest(t *testing.T) {
	s := hidingSite(t)
	hideRows(t, s)
	reader := s.visitor()
	first := reader.get("/systems.json?q=bilby")
	if !strings.Contains(first.body, `"total":0`) {
		t.Fatal(first.body)
	}
	// The day comes: here by moving it, as the clock of the program is the real one.
	db, err := sql.Open("sqlite", s.file)
	if err != nil {
		t.Fatal(err)
	}
	defer db.Close()
	if _, err := db.Exec(`UPDATE hidden_rows SET until = '2020-01-01' WHERE id = 3`); err != nil {
		t.Fatal(err)
	}
	later := s.again().visitor()
	if got := later.get("/systems.json?q=bilby"); !strings.Contains(got.body, `"total":1`) || got.header.Get("ETag") == "" {
		t.Error("the embargo did not end:", got.body)
	}
}

// Readers and the owner ask the same addresses at once, through the caches of
// fits and of finished answers: nobody gets the other's answer.
func TestHiddenRowsAndTheCaches(t *testing.T) {
	s := hidingSite(t)
	hideRows(t, s)
	olive := s.as("olive")
	paths := []string{"/systems", "/systems.csv", "/chart.json", "/regression.json?model=linear:abs_latitude&resamples=99&permutations=99&seed=1", "/"}
	var wait sync.WaitGroup
	for i := range 12 {
		mine := i%3 == 0
		v := s.visitor()
		if mine {
			v = &visitor{s, olive.client}
		}
		wait.Go(func() {
			for j := range 15 {
				p := paths[(i+j)%len(paths)]
				a := v.get(p)
				if !mine {
					a.holdsNone("a reader", s.base, privateMarkers)
				}
				if has := strings.Contains(strings.ToLower(a.body), "wobbegong"); mine && !has && !strings.HasPrefix(p, "/regression") {
					t.Errorf("%s of the owner lacks her row", p)
				}
				if strings.HasPrefix(p, "/regression") && strings.Contains(a.body, `"private_rows":3`) != mine {
					t.Errorf("%s: owner %v, %.120s", p, mine, a.body)
				}
			}
		})
	}
	wait.Wait()
}

// Refusals come back beside their field with everything typed.
func TestWhoSeesItIsChecked(t *testing.T) {
	s := hidingSite(t)
	olive := s.as("olive")
	for what, x := range map[string]struct {
		action string
		fields map[string]string
		field  string
		says   string
	}{
		"no day":       {"submit", map[string]string{"embargo": "date"}, "embargo_until", "The day is missing"},
		"not a day":    {"submit", map[string]string{"embargo": "date", "embargo_until": "next spring"}, "embargo_until", "is not a day"},
		"a day ago":    {"submit", map[string]string{"embargo": "date", "embargo_until": "2001-01-01"}, "embargo_until", "would end at once"},
		"a day alone":  {"save", map[string]string{"embargo_until": "2900-01-01"}, "embargo", "belongs to an embargo"},
		"two ends":     {"save", map[string]string{"embargo": "published", "embargo_until": "2900-01-01"}, "embargo_until", "a day is given too"},
		"forged":       {"save", map[string]string{"embargo": "friday"}, "embargo", "none of the choices"},
		"unknown name": {"keep", map[string]string{"people": "finn, <b>nemo</b>"}, "people", "obody signs in here as"},
	} {
		fields := hiddenRecord("X Channel", "x", "1", "-30", "1.5")
		for k, v := range x.fields {
			fields[k] = v
		}
		a := olive.post("/contribute", press(olive.newRecord(fields), x.action)).is(http.StatusUnprocessableEntity)
		d := a.doc()
		if text := d.Find("#" + x.field + "-error").Text(); !strings.Contains(text, x.says) {
			t.Errorf("%s: beside %s stands %q", what, x.field, text)
		}
		kept := a.form("form.record")
		for k, v := range x.fields {
			if k != "embargo" && kept.Get(k) != v {
				t.Errorf("%s: %s = %q, typed %q", what, k, kept.Get(k), v)
			}
		}
		if kept.Get("system_name") != "X Channel" {
			t.Errorf("%s: the rest is lost", what)
		}
	}
	// A draft that names people keeps them, and asks for nothing else.
	draft := map[string]string{"system_name": "Draft Channel", "people": "finn"}
	a := olive.post("/contribute", press(olive.newRecord(draft), "save")).is(http.StatusOK)
	if got := a.form("form.record").Get("people"); got != "finn" {
		t.Errorf("people of a draft: %q", got)
	}
	s.visitor().get("/systems?q=draft").says("No system passes this filter")
}

// The source of a slope alone is shown with its DOI on the page of its system,
// in the list of sources and in its files.
func TestSourceOfASingleValueIsShown(t *testing.T) {
	s := newSite(t)
	rows := "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,valley_slope,slope_source\n" +
		"Heron Channel,10,20,1.5,peak,thalweg,Invented Soundings 1:1 (2030),0.003,\"Invented Slopes 2:2 (2031), doi 10.5555/second\"\n"
	mustRun(t, rows, "import", "-catalogue", s.file, "-publish", "-")
	v := s.visitor()
	page := v.get("/systems/heron-channel").is(http.StatusOK)
	page.says("Slope of m000001: Invented Slopes 2:2 (2031)")
	if page.doc().Find(`a[href="https://doi.org/10.5555/second"]`).Length() != 1 {
		t.Error("the DOI of the slope's source is no link")
	}
	v.get("/sources").says("Invented Slopes 2:2 (2031)", "10.5555/second")
	for path, want := range map[string]string{"/sources.csv": "Invented Slopes 2:2 (2031),10.5555/second,0,0,no,1,0", "/sources.json": `"slopes":1`, "/sources.bib": "10.5555/second", "/sources.ris": "10.5555/second"} {
		if a := v.get(path).is(http.StatusOK); !strings.Contains(a.body, want) {
			t.Errorf("%s does not hold %q:\n%s", path, want, a.body)
		}
	}
}
