package main

import (
	"bytes"
	"encoding/json"
	"fmt"
	"mime/multipart"
	"net/http"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fathombend/stats/earth"
)

// someRows is a small invented table of n rows, one deposit for each.
func someRows(n int) string {
	var b strings.Builder
	b.WriteString("system_name,parent_deposit,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,valley_slope,age_ma,palaeolatitude_deg,palaeolatitude_method\n")
	for i := range n {
		age := []string{",,", ",,", "70,-30,given"}[i%3]
		fmt.Fprintf(&b, "Sound %d,Deposit %d,%g,%g,%g,peak,thalweg,Invented Soundings 4:%d (2031),%g,%s\n",
			i, i/2, -60+float64(i*7%120), -40-float64(i), 1.04+0.01*float64(i*13%97), i, 0.002+0.0003*float64(i*5%23), age)
	}
	return b.String()
}

// filled makes the catalogue of a new site hold someRows.
func filled(t testing.TB, n int) func(file string) {
	return func(file string) {
		csv := filepath.Join(t.TempDir(), "rows.csv")
		if err := os.WriteFile(csv, []byte(someRows(n)), 0o600); err != nil {
			t.Fatal(err)
		}
		mustRun(t, "", "import", "-catalogue", file, "-publish", csv)
	}
}

func TestSettingsPage(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	s.person("cy", "curator")
	s.as("cy").get("/settings").is(http.StatusForbidden)
	k := s.as("kit")
	form := k.get("/settings").is(http.StatusOK).says("every setting has its default").form("#settings-form")
	if form.Get("class_limits") != "1.05, 1.2, 1.5" || form.Get("cluster") != "parent_deposit" || form.Get("registration") != "closed" {
		t.Fatalf("not the defaults: %v", form)
	}
	k.post("/settings", form).is(http.StatusUnprocessableEntity).says("The reason is missing")
	form.Set("why", "a stray click")
	k.post("/settings", form).is(http.StatusOK).says("nothing was changed")

	form.Set("title", "Channels of the Northern Survey")
	form.Set("class_limits", "1.5 1.2")
	form.Set("climate_table", "name,base_ma,top_ma,state\nNow,50,0,lukewarm\n")
	form.Set("cluster", "guess")
	bad := k.post("/settings", form).is(http.StatusUnprocessableEntity).says("rising order", `"lukewarm" of "Now" is not a climate state`, `"guess" is not one of the choices`)
	if kept := bad.form("#settings-form"); kept.Get("title") != "Channels of the Northern Survey" || kept.Get("class_limits") != "1.5 1.2" || !strings.Contains(kept.Get("climate_table"), "lukewarm") {
		t.Errorf("typed values are lost: %v", kept)
	}
	form.Set("class_limits", "1.1; 1.3")
	form.Set("climate_table", "name,base_ma,top_ma,state\nNow,50,0,icehouse\nThen,4000,50,greenhouse\n")
	form.Set("cluster", "source")
	form.Set("why", "agreed at the meeting <b>in May</b>")
	k.post("/settings", form).is(http.StatusOK).says("4 settings are changed", "agreed at the meeting <b>in May</b>", "a table of 2 intervals", "Credit of kit", "Your own.")
	k.get("/review/activity").is(http.StatusOK).says("Settings", "agreed at the meeting")
	k.get("/methods").is(http.StatusOK).says("The limits 1.1, 1.3")

	// The file that comes out goes in elsewhere, and gives the same file again.
	file := k.get("/settings.json").is(http.StatusOK).body
	other := newSite(t)
	path := filepath.Join(t.TempDir(), "settings.json")
	if err := os.WriteFile(path, []byte(file), 0o600); err != nil {
		t.Fatal(err)
	}
	if out := mustRun(t, "", "settings", "-catalogue", other.file, "-why", "taken over", "import", path); !strings.Contains(out, "4 settings") {
		t.Error(out)
	}
	if got := mustRun(t, "", "settings", "-catalogue", other.file, "export"); got != file {
		t.Errorf("the file differs:\n%s\n%s", got, file)
	}
	if out := mustRun(t, "", "settings", "-catalogue", other.file, "log"); !strings.Contains(out, "taken over") {
		t.Error(out)
	}
	for _, wrong := range []string{`[]`, `{"titel": "x"}`, `{"title": 3}`, `{"class_limits": [1.2, 1.1]}`, `{"climate_table": [{"name": "a", "base_ma": 3, "top_ma": 1, "state": "icehouse"}]}`, "null", "\x00"} {
		if code, _, errOut := runCommand(wrong, "settings", "-catalogue", other.file, "import", "-"); code != exitProblem || !strings.Contains(errOut, "nothing was changed") {
			t.Errorf("%q: exit %d, %s", wrong, code, errOut)
		}
	}
	mustRun(t, `{"title": null, "cluster": null, "class_limits": null, "climate_table": null}`, "settings", "-catalogue", other.file, "import", "-")
	if got := mustRun(t, "", "settings", "-catalogue", other.file, "export"); !strings.Contains(got, `"cluster": "parent_deposit"`) || !strings.Contains(got, "Sturtian") {
		t.Errorf("null is not the default:\n%s", got)
	}
}

func (v *visitor) sendFile(path, name string, content []byte, fields map[string]string) *answer {
	v.t.Helper()
	var b bytes.Buffer
	w := multipart.NewWriter(&b)
	for k, val := range fields {
		if err := w.WriteField(k, val); err != nil {
			v.t.Fatal(err)
		}
	}
	f, err := w.CreateFormFile("file", name)
	if err != nil {
		v.t.Fatal(err)
	}
	if _, err := f.Write(content); err != nil {
		v.t.Fatal(err)
	}
	w.Close()
	return v.request("POST", path, w.FormDataContentType(), &b)
}

func TestSettingsFileOnThePage(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	k := s.as("kit")
	k.sendFile("/settings/import", "s.json", []byte(`{"title": "From a file"}`), nil).is(http.StatusUnprocessableEntity).says("The reason is missing")
	k.sendFile("/settings/import", "s.json", []byte(`{"licence": "MIT"}`), map[string]string{"import_why": "try"}).is(http.StatusUnprocessableEntity).says("licence", "CC-BY-4.0")
	k.post("/settings/import", url.Values{"import_why": {"no file"}}).is(http.StatusUnprocessableEntity).says("No file was sent")
	k.sendFile("/settings/import", "s.json", []byte("\ufeff"+`{"title": "From a file"}`), map[string]string{"import_why": "moved here"}).is(http.StatusOK).says("One setting is changed", "From a file", "moved here")
}

// A change of settings changes what pages say and their tags at once; what is
// frozen stays.
func TestSettingsReachThePages(t *testing.T) {
	s := newSite(t, filled(t, 40))
	s.person("kit", "keeper")
	k, v := s.as("kit"), s.visitor()
	const target = "/expectation.json?palaeolatitude=30&age=10&draws=400"
	names := func(address string) string {
		var out struct {
			Classes []struct{ Name string }
			Climate string `json:"climate_state"`
		}
		if err := json.Unmarshal([]byte(v.get(address).is(http.StatusOK).body), &out); err != nil {
			t.Fatal(err)
		}
		return fmt.Sprint(out.Classes, out.Climate)
	}
	k.post("/releases", url.Values{"name": {"2031.1"}}).is(http.StatusOK)
	const question = "/regression.json?model=linear:coriolis&joint=climate_state,valley_slope&resamples=99&permutations=99&seed=1"
	q, _ := url.ParseQuery(strings.TrimPrefix(question, "/regression.json?"))
	q.Set("title", "Before")
	k.post("/regression/freeze", q).is(http.StatusOK).says("Before", "gives the same digits", "Settings of the catalogue on that day")
	before, frozen, asked, tag := names(target), v.get("/analyses/before.json").body, v.get(question).is(http.StatusOK).body, v.get("/methods").header.Get("ETag")
	if !strings.Contains(before, "nearly straight") || !strings.Contains(before, "icehouse") {
		t.Fatal(before)
	}
	if a := v.get("/regression"); a.url.Query().Get("cluster") != "parent_deposit" {
		t.Errorf("asked with %s", a.url)
	}

	mustRun(t, `{"title": "Northern Survey", "class_limits": [1.1, 1.3], "cluster": "source", "climate_table": [{"name": "All", "base_ma": 4000, "top_ma": 0, "state": "greenhouse"}]}`,
		"settings", "-catalogue", s.file, "import", "-")
	if now := names(target); !strings.Contains(now, "1.1 to 1.3") || !strings.Contains(now, "greenhouse") {
		t.Errorf("the expectation goes on with the old settings: %s", now)
	}
	if then := names(target + "&release=2031.1"); then != before {
		t.Errorf("the release answers %s, was %s", then, before)
	}
	if again := v.get("/analyses/before.json").is(http.StatusOK).body; again != frozen {
		t.Error("the frozen analysis has other digits")
	}
	if v.get(question).body == asked {
		t.Error("a joint model with climate_state does not see the table of the settings")
	}
	if now := v.get("/methods").header.Get("ETag"); now == tag || now == "" {
		t.Errorf("tag %q, was %q", now, tag)
	}
	if a := v.get("/regression").is(http.StatusOK); a.url.Query().Get("cluster") != "source" {
		t.Errorf("asked with %s", a.url)
	}
	if a := v.get("/feed.atom"); !strings.Contains(a.body, "Northern Survey") {
		t.Error("the feed has another title")
	}
	if a := v.get("/openapi.json").is(http.StatusOK); !strings.Contains(a.body, `"title":"Northern Survey"`) {
		t.Error("the description for programs has another title")
	}
	k.get("/releases").is(http.StatusOK)
	if form := k.get("/releases").form("form[action^='/releases']"); form.Get("title") != "Northern Survey" {
		t.Errorf("offered for the next release: %v", form)
	}
	k.get("/releases/2031.1").is(http.StatusOK).says("Settings of the catalogue on that day")
}

// A value kept by another version that this one cannot use leaves the default
// and fails nothing.
func TestSettingsOfAnotherVersion(t *testing.T) {
	s, unusable := settingsFrom(map[string]string{"cluster": `"moon"`, "class_limits": `{"a": 1}`, "colour": `"red"`, "title": `"Kept"`})
	if s.Cluster != "parent_deposit" || len(s.ClassLimits) != 3 || s.Title != "Kept" || len(unusable) != 2 {
		t.Errorf("%+v %v", s, unusable)
	}
	if got := recordedSettings(`{"class_limits": []}`); len(got.ClassLimits) != 3 {
		t.Errorf("%+v", got)
	}
}

func FuzzSettingsFile(f *testing.F) {
	def, err := defaultSettings().document()
	if err != nil {
		f.Fatal(err)
	}
	f.Add(def)
	f.Add([]byte(`{"class_limits": [1.1], "climate_table": null, "title": "a"}`))
	f.Fuzz(func(t *testing.T, b []byte) {
		s, wrong := readSettingsFile(b, defaultSettings())
		if len(wrong) > 0 {
			return
		}
		out, err := s.document()
		if err != nil {
			t.Fatalf("what was read cannot be written: %v", err)
		}
		again, wrong := readSettingsFile(out, defaultSettings())
		if len(wrong) > 0 || limitsText(again.ClassLimits) != limitsText(s.ClassLimits) || again.Title != s.Title {
			t.Errorf("%q becomes %q: %v", b, out, wrong)
		}
		if table, err := earth.ParseClimateTable(strings.NewReader(climateText(s.Climate))); err != nil || len(table) != len(s.Climate) {
			t.Errorf("the table %q does not come back: %v", climateText(s.Climate), err)
		}
	})
}

// A licence that the rows do not allow yet is kept as a wish, and that is said.
func TestSettingsSayWhenRowsBindTheLicence(t *testing.T) {
	s, ann, cy := newContribution(t)
	s.person("kit", "keeper")
	accepted(t, s, ann, cy, goodRecord()) // under CC BY 4.0
	k := s.as("kit")
	form := fillIn(k.get("/settings").form("#settings-form"), map[string]string{"licence": "CC0-1.0", "why": "wide"})
	k.post("/settings", form).is(http.StatusOK).says("One setting is changed", "Not every row is CC0 yet")
	form = fillIn(k.get("/settings").form("#settings-form"), map[string]string{"licence": "CC-BY-4.0", "why": "as the rows"})
	if a := k.post("/settings", form).is(http.StatusOK).says("One setting is changed"); strings.Contains(a.body, "Not every row is CC0 yet") {
		t.Error("said of a licence that the rows allow")
	}
}
