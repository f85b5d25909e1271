package main

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math"
	"mime/multipart"
	"net/http"
	"net/url"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

type expectationJSON struct {
	Palaeolatitude struct {
		Value, SE float64
		Interval  [2]float64
	}
	Age struct{ Value, SE float64 }
	Day struct {
		Value, Low, High float64
		History          string
	} `json:"day_length_h"`
	RotationRatio float64 `json:"rotation_ratio"`
	Coriolis      float64
	Equivalent    *float64 `json:"equivalent_modern_latitude"`
	Sentence      string   `json:"equivalent_sentence"`
	Effect        string   `json:"rotation_effect"`
	Response      string
	Explanations  []struct {
		Name      string
		Weight    float64
		Sinuosity map[string]float64
		Coverage  map[string]float64
	}
	Combined struct {
		Sinuosity map[string]float64
		Coverage  map[string]float64
	}
	Observed *struct{ Sinuosity, Percentile float64 }
	Classes  []struct {
		Name        string
		Probability float64
		BaseRate    float64 `json:"base_rate"`
	}
	Regime        map[string]any
	Tendencies    []map[string]any
	Extrapolation []string
	Cautions      []string
	Notes         []string
}

func expectationOf(t testing.TB, a *answer) expectationJSON {
	t.Helper()
	a.is(http.StatusOK)
	notANumber(t, a)
	var e expectationJSON
	if err := json.Unmarshal([]byte(a.body), &e); err != nil {
		t.Fatalf("%s: %v\n%.400s", a.what, err, a.body)
	}
	return e
}

// TestExpectationChecks: the check cases of the Earth's rotation. 22 h gives
// Omega/Omega0 = 1.09066 and 30 degrees then 33.047 degrees today (worked with
// 1/T_sid = 1/T_sol + 1/Y and asin((Omega/Omega0) sin lat)); no latitude has
// the f of 70 degrees poleward of 66.47.
func TestExpectationChecks(t *testing.T) {
	v := newDemoSite(t).visitor()
	e := expectationOf(t, v.get("/expectation.json?palaeolatitude=30&age=620&day=given&day_length_h=22"))
	if math.Abs(e.RotationRatio-1.09066) > 5e-6 {
		t.Errorf("rotation ratio %.7f, want 1.09066", e.RotationRatio)
	}
	if e.Equivalent == nil || math.Abs(*e.Equivalent-33.047) > 5e-4 {
		t.Errorf("equivalent modern latitude %v, want 33.047", e.Equivalent)
	}
	e = expectationOf(t, v.get("/expectation.json?palaeolatitude=70&age=620&day=given&day_length_h=22"))
	if e.Equivalent != nil || !strings.Contains(e.Sentence, "66.47") {
		t.Errorf("equivalent of 70 degrees: %v, %q; want none, and the limit of 66.47 degrees", e.Equivalent, e.Sentence)
	}
	// 12 S 10 W, pole 72 N 200 E, A95 4, 70 +- 3 Ma: palaeolatitude -27.36, se
	// 4/2.45 = 1.63, |f| 6.84e-5, equivalent about 28.0.
	e = expectationOf(t, v.get("/expectation.json?site_lat=-12&site_lon=-10&pole_lat=72&pole_lon=200&a95=4&age=70&age_se=3"))
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"palaeolatitude", e.Palaeolatitude.Value, -27.36, 0.005},
		{"its error", e.Palaeolatitude.SE, 1.63, 0.005},
		{"rotation ratio", e.RotationRatio, 1.021, 0.003},
		{"|f|", math.Abs(e.Coriolis), 6.84e-5, 0.02e-5},
	} {
		if math.Abs(c.got-c.want) > c.tol {
			t.Errorf("%s = %g, want %g", c.what, c.got, c.want)
		}
	}
	if e.Equivalent == nil || math.Abs(math.Abs(*e.Equivalent)-28.0) > 0.1 {
		t.Errorf("equivalent modern latitude %v, want about 28.0", e.Equivalent)
	}
	if !strings.Contains(e.Effect, "below the error") {
		t.Errorf("the effect of rotation is said as %q", e.Effect)
	}
	// The same with hemispheres as letters.
	other := expectationOf(t, v.get("/expectation.json?site_lat=12+S&site_lon=10%C2%B0W&pole_lat=72N&pole_lon=200E&a95=4&age=70&age_se=3"))
	if other.Palaeolatitude != e.Palaeolatitude {
		t.Errorf("with letters %v, with signs %v", other.Palaeolatitude, e.Palaeolatitude)
	}
}

func TestExpectationDocument(t *testing.T) {
	v := newDemoSite(t).visitor()
	const query = "palaeolatitude=28&palaeolatitude_se=2&unit=Late+Cretaceous&observed_sinuosity=1.7&target_grain=mud_sand&target_slope_permille=4&draws=1000&seed=5"
	a := v.get("/expectation.json?" + query)
	e := expectationOf(t, a)
	var doc map[string]any
	if err := json.Unmarshal([]byte(a.body), &doc); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"palaeolatitude", "age", "day_length_h", "rotation_ratio", "coriolis", "equivalent_modern_latitude", "response", "invented_rows",
		"explanations", "combined", "observed", "classes", "regime", "tendencies", "nearest_systems", "extrapolation", "cautions"} {
		if _, ok := doc[name]; !ok {
			t.Errorf("the document has no %q", name)
		}
	}
	sum := 0.0
	for _, x := range e.Explanations {
		sum += x.Weight
		for _, q := range []string{"p2_5", "p10", "p25", "p50", "p75", "p90", "p97_5"} {
			if x.Sinuosity != nil && !(x.Sinuosity[q] >= 1) {
				t.Errorf("%s of %s is %g", q, x.Name, x.Sinuosity[q])
			}
		}
	}
	if math.Abs(sum-1) > 1e-9 {
		t.Errorf("weights sum to %g, want 1", sum)
	}
	q := e.Combined.Sinuosity
	if !(q["p2_5"] <= q["p10"] && q["p10"] <= q["p25"] && q["p25"] <= q["p50"] && q["p50"] <= q["p75"] && q["p75"] <= q["p90"] && q["p90"] <= q["p97_5"]) {
		t.Errorf("limits out of order: %v", q)
	}
	for _, name := range []string{"80", "95"} {
		if c, ok := e.Combined.Coverage[name]; !ok || c < 0 || c > 1 {
			t.Errorf("coverage %s = %v", name, c)
		}
	}
	if e.Observed == nil || e.Observed.Sinuosity != 1.7 || e.Observed.Percentile < 0 || e.Observed.Percentile > 100 {
		t.Errorf("observed %+v", e.Observed)
	}
	total := 0.0
	for _, c := range e.Classes {
		total += c.Probability
	}
	if math.Abs(total-1) > 1e-9 {
		t.Errorf("class probabilities sum to %g, want 1", total)
	}
	if len(e.Cautions) == 0 || len(e.Tendencies) == 0 {
		t.Error("no cautions or no tendencies")
	}
	if again := v.get("/expectation.json?" + query); again.body != a.body {
		t.Error("the same question gave other bytes")
	}
	form, _ := url.ParseQuery(query)
	if posted := v.post("/expectation.json", form); posted.body != a.body {
		t.Error("POST gave other bytes than GET")
	}
	if h := a.header.Get("Cache-Control"); h != "no-store" {
		t.Errorf("Cache-Control %q, want no-store", h)
	}
	if h := a.header.Get("Referrer-Policy"); h != "no-referrer" {
		t.Errorf("Referrer-Policy %q, want no-referrer", h)
	}
}

func TestExpectationPage(t *testing.T) {
	v := newDemoSite(t).visitor()
	empty := v.get("/expectation")
	empty.is(http.StatusOK)
	example, ok := empty.doc().Find("main a.button[href^='/expectation?']").First().Attr("href")
	if !ok {
		t.Fatal("the empty form offers no worked example")
	}
	a := v.get(example)
	a.is(http.StatusOK)
	notANumber(t, a)
	doc := a.doc()
	if s := doc.Find("main .lead").First().Text(); !strings.Contains(s, "28°") || !strings.Contains(s, "expected") || !strings.Contains(s, "[") {
		t.Errorf("the sentence reads %q", s)
	}
	if n := doc.Find(".ribbons li svg path").Length(); n != 3 {
		t.Errorf("%d ribbons are the answer, want 3", n)
	}
	if doc.Find("#cautions li").Length() == 0 || doc.Find("#answer .caution").Length() == 0 {
		t.Error("the cautions are not in view")
	}
	if doc.Find("svg#day-length .mark.hollow").Length() == 0 || doc.Find("svg#day-length .band").Length() < 2 {
		t.Error("day length through time lacks hollow observations or spread")
	}
	if doc.Find("datalist#units option[value='Maastrichtian']").Length() != 1 {
		t.Error("the units are not offered")
	}
	// Without scripts: the form, filled in, asks the same as the address.
	form := a.form("form[action='/expectation']")
	if form.Get("palaeolatitude") != "28" || form.Get("unit") != "Late Cretaceous" {
		t.Errorf("the form lost what was asked: %v", form)
	}
	posted := v.post("/expectation", form)
	posted.is(http.StatusOK)
	if strings.TrimSpace(posted.doc().Find("main .lead").First().Text()) != strings.TrimSpace(doc.Find("main .lead").First().Text()) {
		t.Error("POST gave another sentence than GET")
	}
	if posted.doc().Find("a[href*='palaeolatitude=28']").Not("a.button").Length() != 0 {
		t.Error("a target asked by POST stands in an address of the page")
	}
	got := v.get("/expectation?" + form.Encode())
	if got.url.Query().Has("inclination") {
		t.Errorf("empty fields stay in the address: %s", got.url.RawQuery)
	}
}

func TestExpectationBadInput(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, c := range []struct{ query, names string }{
		{"palaeolatitude=91", "palaeolatitude"},
		{"palaeolatitude=28,5", "28.5, with a point"},
		{"palaeolatitude=3+%2B-+6", "3 here and 6 in palaeolatitude_se"},
		{"palaeolatitude=3&age=70+%C2%B1+3", "70 here and 3 in age_se"},
		{"palaeolatitude=3&age=70+Ma", "Give 70"},
		{"palaeolatitude=3&age=12+ka", "Give 0.012"},
		{"palaeolatitude=3&age=1e9", "1000000000 years is 1000 Ma"},
		{"palaeolatitude=3&target_width_m=2+km", "Give 2 alone, if it is in m"},
		{"palaeolatitude=3&radius_m=1e9", "1 to 1000000"},
		{"paleolatitude=3", "Is palaeolatitude meant?"},
		{"a95=5", "palaeolatitude"},
		{"seed=3", "palaeolatitude"},
		{"palaeolatitude=NaN", "palaeolatitude"},
		{"palaeolatitude=20&inclination=40", "inclination"},
		{"palaeolatitude=30&palaeolatitude=40", "palaeolatitude"},
		{"palaeolatitude=30&age=70000000", "70 Ma"},
		{"palaeolatitude=30&age=-5", "age"},
		{"palaeolatitude=30&unit=Mastrichtian", "Maastrichtian"},
		{"palaeolatitude=30&age=300&day=polynomial", "250"},
		{"palaeolatitude=30&day=given", "day_length_h"},
		{"palaeolatitude=30&day=monthly", "tidal_history"},
		{"site_lat=10&site_lon=10&plate=Atlantis&age=70", "Atlantis"},
		{"site_lat=10&site_lon=10&age=70", "plate"},
		{"age=70", "palaeolatitude"},
		{"palaeolatitude=30&target_slope=3", "target_slope_deg"},
		{"palaeolatitude=30&target_slope=-0.01", "target_slope"},
		{"palaeolatitude=30&target_slope=0.01&target_slope_deg=1", "given twice"},
		{"palaeolatitude=30&target_grain=clay", "mud_sand"},
		{"palaeolatitude=30&observed_sinuosity=0.9", "observed_sinuosity"},
		{"palaeolatitude=30&response=huge", "peak"},
		{"palaeolatitude=30&draws=10", "draws"},
		{"palaeolatitude=30&seed=x", "seed"},
		{"palaeolatitude=30&depth=3", "depth"},
		{"palaeolatitude=30&kind=canal", "canal"},
		{"palaeolatitude=30&pole_csv=a,b", "pole_csv"},
	} {
		for _, path := range []string{"/expectation.json", "/expectation"} {
			a := v.get(path + "?" + c.query)
			if a.status != http.StatusBadRequest || !strings.Contains(a.body, c.names) {
				t.Errorf("%s?%s: status %d, want 400 naming %q\n%.500s", path, c.query, a.status, c.names, a.text())
			}
			if path == "/expectation.json" {
				wholeProblem(t, a)
			}
		}
	}
	// Everything typed stays.
	a := v.get("/expectation?palaeolatitude=91&age=70&target_width_m=800")
	form := a.form("form[action='/expectation']")
	if form.Get("palaeolatitude") != "91" || form.Get("age") != "70" || form.Get("target_width_m") != "800" {
		t.Errorf("typed input was lost: %v", form)
	}
	if a.doc().Find("#set-palaeolatitude[aria-invalid=true]").Length() != 1 {
		t.Error("the refused field is not marked")
	}
}

// TestExpectationWithoutRows: no training rows left is a sentence, not a fault.
func TestExpectationWithoutRows(t *testing.T) {
	for _, v := range []*visitor{newSite(t).visitor(), newDemoSite(t).visitor()} {
		for _, path := range []string{"/expectation", "/expectation.json", "/figures/expectation.svg"} {
			a := v.get(path + "?palaeolatitude=30&slope_min=0.5")
			if a.status >= 500 {
				t.Errorf("%s: status %d\n%s", path, a.status, a.text())
			}
			notANumber(t, a)
		}
	}
}

const targetsFile = "name,palaeolatitude,age,target_slope_permille,remark\n" +
	"A,30,70,4,plain\n" +
	"B,91,70,4,no such latitude\n" +
	"C,-12,300,,=1+2\n" +
	"D,3\n" +
	"E,60,,,today\n"

// readTargets checks a file of answers and returns it by column.
func readTargets(t testing.TB, body string) []map[string]string {
	t.Helper()
	rows, err := csv.NewReader(strings.NewReader(body)).ReadAll()
	if err != nil {
		t.Fatalf("%v\n%s", err, body)
	}
	var out []map[string]string
	for _, r := range rows[1:] {
		m := map[string]string{}
		for i, name := range rows[0] {
			m[name] = r[i]
		}
		out = append(out, m)
	}
	return out
}

func TestExpectationBatch(t *testing.T) {
	v := newDemoSite(t).visitor()
	a := v.request("POST", "/expectation.csv?draws=500&seed=3", "text/csv", strings.NewReader(targetsFile))
	a.is(http.StatusOK)
	if ct := a.header.Get("Content-Type"); !strings.HasPrefix(ct, "text/csv") {
		t.Errorf("content type %q", ct)
	}
	rows := readTargets(t, a.body)
	if len(rows) != 5 {
		t.Fatalf("%d rows, want 5:\n%s", len(rows), a.body)
	}
	for i, want := range []struct{ name, err string }{{"A", ""}, {"B", "Expected"}, {"C", ""}, {"D", "cells"}, {"E", ""}} {
		r := rows[i]
		if r["name"] != want.name || (want.err == "") != (r["error"] == "") || !strings.Contains(r["error"], want.err) {
			t.Errorf("row %d: name %q, error %q; want %q, %q", i+1, r["name"], r["error"], want.name, want.err)
		}
		if (want.err == "") != (r["result_p50"] != "") {
			t.Errorf("row %d: median %q, error %q", i+1, r["result_p50"], r["error"])
		}
	}
	if rows[2]["remark"] != "'=1+2" {
		t.Errorf("a formula comes back as %q", rows[2]["remark"])
	}
	if rows[0]["palaeolatitude"] != "30" || rows[0]["target_slope_permille"] != "4" {
		t.Errorf("what was given did not pass through: %v", rows[0])
	}
	if rows[0]["result_cautions"] == "" {
		t.Error("the export carries no cautions")
	}
	// The first row is the same question as one target.
	e := expectationOf(t, v.get("/expectation.json?palaeolatitude=30&age=70&target_slope_permille=4&draws=500&seed=3"))
	if got, _ := strconv.ParseFloat(rows[0]["result_p50"], 64); got != e.Combined.Sinuosity["p50"] {
		t.Errorf("median in the file %v, alone %v", got, e.Combined.Sinuosity["p50"])
	}
	// Answered again, a file of answers gives itself.
	again := v.request("POST", "/expectation.csv?draws=500&seed=3", "text/csv", strings.NewReader(a.body))
	again.is(http.StatusOK)
	if r := readTargets(t, again.body); r[0]["result_p50"] != rows[0]["result_p50"] || r[2]["remark"] != "'=1+2" {
		t.Error("answering a file of answers changed it")
	}
}

func TestExpectationBatchUpload(t *testing.T) {
	v := newDemoSite(t).visitor()
	var body bytes.Buffer
	w := multipart.NewWriter(&body)
	part, err := w.CreateFormFile("targets", "targets.csv")
	if err != nil {
		t.Fatal(err)
	}
	_, _ = part.Write([]byte("\ufeffpalaeolatitude\n30\n"))
	_ = w.WriteField("abs_lat_max", "80")
	w.Close()
	a := v.request("POST", "/expectation.csv", w.FormDataContentType(), &body)
	a.is(http.StatusOK)
	if rows := readTargets(t, a.body); len(rows) != 1 || rows[0]["error"] != "" {
		t.Errorf("an uploaded file gave %s", a.body)
	}
	for _, c := range []struct{ body, says string }{
		{"", "empty"},
		{"height,depth\n1,2\n", "parameter"},
		{"palaeolatitude,palaeolatitude\n1,2\n", "twice"},
		{"palaeolatitude,\xe9ge\n1,2\n", "UTF-8"},
	} {
		a := v.request("POST", "/expectation.csv", "text/csv", strings.NewReader(c.body))
		if a.status != http.StatusUnprocessableEntity || !strings.Contains(a.body, c.says) {
			t.Errorf("%q: status %d, %s", c.body, a.status, a.body)
		}
	}
	comma := readTargets(t, v.request("POST", "/expectation.csv?draws=500", "text/csv", strings.NewReader("name,palaeolatitude,age\n\"a;b\",30,70\n")).is(http.StatusOK).body)
	for _, body := range []string{"name;palaeolatitude;age\n\"a;b\";30;70\n", "name\tpalaeolatitude\tage\r\na;b\t30\t70\r\n"} {
		rows := readTargets(t, v.request("POST", "/expectation.csv?draws=500", "text/csv", strings.NewReader(body)).is(http.StatusOK).body)
		if len(rows) != 1 || rows[0]["error"] != "" || rows[0]["name"] != "a;b" || rows[0]["result_p50"] == "" || rows[0]["result_p50"] != comma[0]["result_p50"] {
			t.Errorf("%q gave %v, with commas %v", body, rows, comma)
		}
	}
	if rows := readTargets(t, v.request("POST", "/expectation.csv", "text/csv", strings.NewReader("palaeolatitude;age\n28,5;70\n")).body); len(rows) != 1 || !strings.Contains(rows[0]["error"], "Expected 28.5, with a point") {
		t.Errorf("a decimal comma between semicolons gave %v", rows)
	}
	if a := v.request("POST", "/expectation.csv?colour=blue", "text/csv", strings.NewReader("palaeolatitude\n1\n")); a.status != http.StatusBadRequest {
		t.Errorf("an unknown parameter beside a file: status %d", a.status)
	}
	columns := v.get("/expectation/columns.csv")
	columns.is(http.StatusOK)
	if !strings.Contains(columns.body, "result_p50") || !strings.Contains(columns.body, "palaeolatitude_se") {
		t.Error("the dictionary lacks columns")
	}
}

// A reader whose file is refused stands before the form again, told why beside
// the field; a program gets the problem document for the same file.
func TestRefusedTargetsComeBackToTheForm(t *testing.T) {
	v := newDemoSite(t).visitor()
	send := func(file, accept, filter string) *answer {
		var body bytes.Buffer
		w := multipart.NewWriter(&body)
		part, err := w.CreateFormFile("targets", "targets.csv")
		if err != nil {
			t.Fatal(err)
		}
		_, _ = part.Write([]byte(file))
		_ = w.WriteField("abs_lat_max", filter)
		w.Close()
		r, err := http.NewRequest("POST", v.base+"/expectation.csv", &body)
		if err != nil {
			t.Fatal(err)
		}
		r.Header.Set("Content-Type", w.FormDataContentType())
		r.Header.Set("Accept", accept)
		return v.do(r)
	}
	const reader = "text/html,application/xhtml+xml,*/*;q=0.8"
	for _, c := range []struct {
		file, filter, says string
		status             int
	}{
		{"height,depth\n1,2\n", "80", "No column of the header is a parameter", 422},
		{"", "80", "The file of targets is empty", 422},
		{"palaeolatitude\n30\n", "many", "abs_lat_max", 400},
	} {
		a := send(c.file, reader, c.filter).is(c.status).says("This cannot be answered as it stands", c.says, "Many targets")
		if ct := a.header.Get("Content-Type"); !strings.HasPrefix(ct, "text/html") {
			t.Errorf("%q: a reader gets %s", c.file, ct)
		}
		if c.filter == "80" {
			if p := a.doc(); p.Find(`#set-targets[aria-invalid="true"]`).Length() != 1 || p.Find(`.errors a[href="#set-targets"]`).Length() != 1 ||
				p.Find(`form[action="/expectation/batch"] input[name="abs_lat_max"][value="80"]`).Length() != 1 {
				t.Errorf("%q: the page does not lead to the field, or lost the filter:\n%s", c.file, a.text())
			}
		}
		a = send(c.file, "*/*", c.filter).is(c.status)
		if ct := a.header.Get("Content-Type"); ct != "application/problem+json" {
			t.Errorf("%q: a program gets %s", c.file, ct)
		}
	}
	a := send("palaeolatitude\n30\n", reader, "80").is(http.StatusOK)
	if ct := a.header.Get("Content-Type"); !strings.HasPrefix(ct, "text/csv") {
		t.Errorf("a good file comes back as %s", ct)
	}
}

func TestExpectCommand(t *testing.T) {
	file := filepath.Join(t.TempDir(), "reference.db")
	mustRun(t, referenceTable(t), "import", "-catalogue", file, "-publish", "-")
	for _, name := range []string{"expect", "expectation"} {
		out := mustRun(t, "palaeolatitude,age\n30,70\n", name, "-catalogue", file, "-", "draws=200")
		rows := readTargets(t, out)
		if len(rows) != 1 || rows[0]["result_p50"] == "" || rows[0]["result_draws"] != "200" {
			t.Errorf("%s wrote %s", name, out)
		}
	}
	if code, out, _ := runCommand(targetsFile, "expect", "-catalogue", file, "-", "draws=200"); code != exitProblem || len(readTargets(t, out)) != 5 {
		t.Errorf("a file with bad rows: exit %d, %s", code, out)
	}
	for _, args := range [][]string{{"expect", "-catalogue", file}, {"expect", "-catalogue", file, "-", "draws=many"}, {"expect", "-catalogue", file, "-", "colour=blue"}} {
		if code, _, errOut := runCommand("", args...); code != exitBadCall || errOut == "" {
			t.Errorf("%v: exit %d, %q", args, code, errOut)
		}
	}
	if code, _, errOut := runCommand("height\n1\n", "expect", "-catalogue", file, "-"); code != exitProblem || !strings.Contains(errOut, "parameter") {
		t.Errorf("no parameter in the header: exit %d, %q", code, errOut)
	}
}

// TestTargetNamesAreParameters: every parameter of the contract is read.
func TestTargetNamesAreParameters(t *testing.T) {
	for _, name := range []string{"palaeolatitude", "palaeolatitude_se", "inclination", "a95", "flattening", "site_lat", "site_lon", "plate", "pole_lat", "pole_lon",
		"euler_lat", "euler_lon", "euler_angle", "euler_error", "age", "age_se", "unit", "day", "solar_tide", "rate_ms_per_century", "day_length_h", "days_per_year",
		"response", "measured_line", "target_slope", "target_slope_deg", "target_slope_permille", "target_width_m", "target_depth_m", "target_feeder", "target_grain",
		"target_setting", "target_confinement", "target_aggradation", "speed_m_s", "concentration", "radius_m", "observed_sinuosity", "seed", "draws"} {
		if !slices.Contains(targetParameters, name) {
			t.Errorf("the contract's parameter %s is not read", name)
		}
	}
}
