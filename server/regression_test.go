package main

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"net/http"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// referenceTable turns stats/testdata/reference_rows.csv (made for this
// project, see SOURCES.md there) into the contract's columns. Every row is a
// system of its own in its parent deposit; longitudes are made up, since the
// rows have none.
func referenceTable(t testing.TB) string {
	t.Helper()
	b, err := os.ReadFile(filepath.Join("..", "stats", "testdata", "reference_rows.csv"))
	if err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(strings.NewReader(string(b))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out strings.Builder
	w := csv.NewWriter(&out)
	_ = w.Write([]string{"system_name", "parent_deposit", "latitude_deg", "longitude_deg", "valley_slope", "feeder", "sinuosity", "sinuosity_kind", "measured_line", "source"})
	for i, r := range rows[1:] {
		_ = w.Write([]string{"Reference row " + r[0], r[1], r[2], strconv.Itoa(-170 + 7*i), r[3], r[4], r[5], "peak", "thalweg", "Reference rows"})
	}
	w.Flush()
	return out.String()
}

func newReferenceSite(t testing.TB) *site {
	t.Helper()
	return newSite(t, func(file string) {
		mustRun(t, referenceTable(t), "import", "-catalogue", file, "-publish", "-")
	})
}

// near fails when got is farther from want than rel (relative).
func near(t testing.TB, what string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Abs(want)) {
		t.Errorf("%s = %.12g, want %.12g (within %g relative)", what, got, want, rel)
	}
}

type regressionJSON struct {
	Rows, Clusters int
	Dropped        []struct {
		Reason string
		Rows   int
	}
	InventedRows int `json:"invented_rows"`
	Models       []struct {
		Model, Form, Predictor string
		Coefficients           []struct {
			Name          string
			Estimate      float64
			StandardError float64 `json:"standard_error"`
			Interval      [2]float64
			IntervalKind  string `json:"interval_kind"`
			CR2           *struct {
				SE, DF   float64
				Interval [2]float64
			} `json:"cr2"`
			Intervals map[string][2]float64
		}
		RSquared  float64    `json:"r_squared"`
		RSquaredI [2]float64 `json:"r_squared_interval"`
		AICc      float64    `json:"aicc"`
		Kendall   float64
	}
	Comparisons []struct {
		A, B       string
		Difference float64 `json:"r_squared_difference"`
		Interval   [2]float64
	}
	Warnings []string
}

// TestRegressionAgainstR asks the running program the reference question and
// compares with R 4.2.2 (stats/testdata/reference_r.json, made by reference.R
// there).
func TestRegressionAgainstR(t *testing.T) {
	v := newReferenceSite(t).visitor()
	a := v.get("/regression.json?model=linear:valley_slope&model=linear:abs_latitude&model=floor_decay:coriolis&cluster=parent_deposit")
	a.is(http.StatusOK)
	var got regressionJSON
	if err := json.Unmarshal([]byte(a.body), &got); err != nil {
		t.Fatal(err)
	}
	b, err := os.ReadFile(filepath.Join("..", "stats", "testdata", "reference_r.json"))
	if err != nil {
		t.Fatal(err)
	}
	type lm struct {
		Coef, SE []float64
		R2, AICc float64
	}
	var ref struct {
		Slope    lm `json:"linear_slope"`
		Latitude lm `json:"linear_absl"`
		Decay    lm `json:"floor_decay_f_1e4"`
		Kendall  float64
		Clusters int
		Stud     map[string]struct {
			Interval [2]float64
		} `json:"cluster_studentised"`
		Boot map[string]struct {
			BCa [2]float64
			SE  float64
		} `json:"cluster_bootstrap"`
		KendallLatitude float64 `json:"kendall_absl"`
	}
	if err := json.Unmarshal(b, &ref); err != nil {
		t.Fatal(err)
	}
	if got.Rows != 48 || got.Clusters != ref.Clusters || len(got.Models) != 3 || len(got.Dropped) != 0 {
		t.Fatalf("rows %d, clusters %d, models %d, dropped %v; want 48, %d, 3, none", got.Rows, got.Clusters, len(got.Models), got.Dropped, ref.Clusters)
	}
	for i, want := range []struct {
		lm
		model string
		tol   float64 // 1e-8 for straight lines, 1e-6 for the nonlinear fit
	}{{ref.Slope, "linear:valley_slope", 1e-8}, {ref.Latitude, "linear:abs_latitude", 1e-8}, {ref.Decay, "floor_decay:coriolis", 1e-6}} {
		m := got.Models[i]
		if m.Model != want.model || len(m.Coefficients) != 2 {
			t.Fatalf("model %d is %s with %d coefficients, want %s with 2", i, m.Model, len(m.Coefficients), want.model)
		}
		for j := range want.Coef {
			near(t, m.Model+" coefficient "+strconv.Itoa(j), m.Coefficients[j].Estimate, want.Coef[j], want.tol)
			near(t, m.Model+" standard error "+strconv.Itoa(j), m.Coefficients[j].StandardError, want.SE[j], want.tol)
		}
		near(t, m.Model+" R2", m.RSquared, want.R2, want.tol)
	}
	near(t, "AICc of the slope model", got.Models[0].AICc, ref.Slope.AICc, 1e-8)
	near(t, "AICc of the latitude model", got.Models[1].AICc, ref.Latitude.AICc, 1e-8)
	near(t, "Kendall of latitude", got.Models[1].Kendall, ref.KendallLatitude, 1e-10)
	// Monte Carlo: 9,999 resamples against R's 100,000 to 200,000. An end of a
	// 95 % interval has a Monte Carlo error of about 3 % of its half width
	// (from the density at the quantile); three of them are allowed.
	for i, name := range []string{"slope_coef", "absl_coef"} {
		c := got.Models[i].Coefficients[1]
		w := ref.Stud[name].Interval
		half := (w[1] - w[0]) / 2
		for k := range 2 {
			if math.Abs(c.Interval[k]-w[k]) > 0.09*half {
				t.Errorf("%s studentised end %d = %g, want %g", name, k, c.Interval[k], w[k])
			}
		}
		if c.IntervalKind != "studentised" {
			t.Errorf("%s interval kind %q, want studentised", name, c.IntervalKind)
		}
	}
	for _, c := range got.Comparisons {
		if c.A != "linear:abs_latitude" && c.B != "linear:abs_latitude" || c.A == "floor_decay:coriolis" || c.B == "floor_decay:coriolis" {
			continue
		}
		want := ref.Boot["absl_minus_slope_r2"].BCa
		if c.A == "linear:valley_slope" {
			want = [2]float64{-want[1], -want[0]}
		}
		for k := range 2 {
			if math.Abs(c.Interval[k]-want[k]) > 0.02 {
				t.Errorf("difference of R2, BCa end %d = %g, want %g", k, c.Interval[k], want[k])
			}
		}
	}
	// Geology 41:e287 (2013) and the small-sample error: CR2 worked by hand on
	// these rows, |latitude| -0.028..-0.0041 with 4.6 degrees of freedom, slope
	// -76..+36 with 2.2.
	for i, want := range []struct{ lo, hi, df float64 }{{-76, 36, 2.2}, {-0.028, -0.0041, 4.6}} {
		c := got.Models[i].Coefficients[1].CR2
		if c == nil {
			t.Fatalf("%s has no CR2", got.Models[i].Model)
		}
		near(t, "CR2 df", c.DF, want.df, 0.03)
		near(t, "CR2 low", c.Interval[0], want.lo, 0.02)
		near(t, "CR2 high", c.Interval[1], want.hi, 0.02)
	}
}

// contractFields are the members of the regression document that the contract
// names.
var contractFields = []string{"rows", "clusters", "dropped", "invented_rows", "settings", "models", "comparisons", "shares", "influence", "overturning", "breakpoint", "warnings", "methods_text"}

func TestRegressionDocument(t *testing.T) {
	v := newReferenceSite(t).visitor()
	const address = "/regression.json?model=linear:valley_slope&model=power:abs_latitude&joint=valley_slope,abs_latitude&resamples=199&permutations=99"
	a := v.get(address)
	a.is(http.StatusOK)
	var doc map[string]any
	if err := json.Unmarshal([]byte(a.body), &doc); err != nil {
		t.Fatal(err)
	}
	for _, name := range contractFields {
		if _, ok := doc[name]; !ok {
			t.Errorf("the document has no %q", name)
		}
	}
	model := doc["models"].([]any)[0].(map[string]any)
	for _, name := range []string{"model", "form", "predictor", "coefficients", "r_squared", "r_squared_interval", "r_squared_fitted_scale", "out_of_sample_r_squared", "aicc", "akaike_weight", "permutation_p", "kendall", "degenerate_resamples"} {
		if _, ok := model[name]; !ok {
			t.Errorf("a model has no %q", name)
		}
	}
	coefficient := model["coefficients"].([]any)[0].(map[string]any)
	for _, name := range []string{"name", "estimate", "standard_error", "interval", "interval_kind", "cr2"} {
		if _, ok := coefficient[name]; !ok {
			t.Errorf("a coefficient has no %q", name)
		}
	}
	if again := v.get(address); again.body != a.body {
		t.Error("the same question gave other bytes")
	}
	if other := v.get(strings.Replace(address, "resamples=199", "resamples=199&seed=2", 1)); other.body == a.body {
		t.Error("another seed gave the same bytes")
	}
	if ct := a.header.Get("Content-Type"); !strings.HasPrefix(ct, "application/json") {
		t.Errorf("content type %q", ct)
	}
}

// TestRegressionAddress: an address that leaves the question open leads to one
// that says it all, and that one stays.
func TestRegressionAddress(t *testing.T) {
	v := newReferenceSite(t).visitor()
	a := v.get("/regression")
	a.is(http.StatusOK)
	q := a.url.Query()
	for _, name := range []string{"model", "response", "scale", "cluster", "resamples", "seed"} {
		if q.Get(name) == "" {
			t.Errorf("the full address %s has no %s", a.url.RawQuery, name)
		}
	}
	if got := q.Get("scale"); got != "ln_excess" {
		t.Errorf("offered scale %q; every sinuosity of the reference rows is above 1, so ln_excess", got)
	}
	again := v.get(a.url.Path + "?" + a.url.RawQuery)
	if again.url.RawQuery != a.url.RawQuery || again.body == "" {
		t.Errorf("the full address led on to %s", again.url.RawQuery)
	}
	typed := v.get("/regression?model=linear%3Aabs_latitude&model=&scale=raw&lat_min=&resamples=199&seed=3")
	if got := typed.url.Query(); got.Has("lat_min") || len(got["model"]) != 1 || got.Get("seed") != "3" || got.Get("scale") != "raw" {
		t.Errorf("a form with empty fields led to %s", typed.url.RawQuery)
	}
}

func TestRegressionPage(t *testing.T) {
	v := newReferenceSite(t).visitor()
	a := v.get("/regression?model=linear:valley_slope&model=linear:abs_latitude&scale=raw&resamples=999&permutations=199&seed=1")
	a.is(http.StatusOK)
	doc := a.doc()
	if h := doc.Find("main h1").First().Text(); !strings.Contains(h, "valley slope or |latitude|") {
		t.Errorf("the question reads %q", h)
	}
	if s := strings.TrimSpace(doc.Find("main .lead").First().Text()); s == "" {
		t.Error("no sentence answers the question")
	}
	if n := doc.Find("svg#fit-abs-latitude a[href^='/systems/']").Length(); n != 48 {
		t.Errorf("%d points are links, want 48", n)
	}
	if n := doc.Find("svg#fit-abs-latitude .band").Length(); n != 1 {
		t.Errorf("%d bands on the latitude panel, want 1", n)
	}
	if doc.Find("form[method=get] select[name=model] option[selected]").Length() < 2 {
		t.Error("the form does not hold the models asked for")
	}
	if doc.Find("table td .value .interval").Length() < 4 {
		t.Error("coefficients are not set with their intervals")
	}
	if !strings.Contains(a.body, "rows resampled singly") && !strings.Contains(a.body, "Rows resampled singly") {
		t.Error("rows are not set beside systems")
	}
	notANumber(t, a)
}

// notANumber fails when a page or document shows a number that is none, or a
// broken format.
func notANumber(t testing.TB, a *answer) {
	t.Helper()
	for _, bad := range []string{"NaN", "+Inf", "-Inf", "%!"} {
		if strings.Contains(a.body, bad) {
			t.Errorf("%s says %s", a.what, bad)
		}
	}
}

// TestRegressionWithoutRows: an empty or emptied table is a sentence, not an
// error.
func TestRegressionWithoutRows(t *testing.T) {
	for _, v := range []*visitor{newSite(t).visitor(), newReferenceSite(t).visitor()} {
		for _, path := range []string{"/regression", "/regression.json", "/regression.csv", "/figures/regression.svg"} {
			a := v.get(path + "?abs_lat_min=89")
			a.is(http.StatusOK)
			notANumber(t, a)
			if a.body == "" {
				t.Errorf("%s is empty", path)
			}
		}
		if s := strings.TrimSpace(v.get("/regression?abs_lat_min=89").doc().Find("main .lead").Text()); s == "" {
			t.Error("no sentence says that there are no rows")
		}
	}
}

func TestRegressionRows(t *testing.T) {
	v := newReferenceSite(t).visitor()
	a := v.get("/regression.csv?model=linear:valley_slope&model=linear:coriolis&resamples=199&permutations=99&slope_max=0.1")
	a.is(http.StatusOK)
	rows, err := csv.NewReader(strings.NewReader(a.body)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	head := rows[0]
	col := func(name string) int {
		i := slices.Index(head, name)
		if i < 0 {
			t.Fatalf("no column %q in %v", name, head)
		}
		return i
	}
	if len(rows) != 49 {
		t.Fatalf("%d rows with the header, want 49", len(rows))
	}
	for _, r := range rows[1:] {
		if r[col("kept")] != "yes" || r[col("why_dropped")] != "" || r[col("cluster")] == "" || r[col("source")] != "Reference rows" {
			t.Fatalf("row %v", r)
		}
		lat, _ := strconv.ParseFloat(r[col("latitude_deg")], 64)
		f, _ := strconv.ParseFloat(r[col("coriolis")], 64)
		// f = 2 Omega sin(lat), Omega = 7.292115e-5 rad/s, in 1e-4 s-1.
		near(t, "coriolis", f, 2*0.7292115*math.Abs(math.Sin(lat*math.Pi/180)), 1e-9)
	}
}

func TestRegressionBadInput(t *testing.T) {
	v := newReferenceSite(t).visitor()
	for _, c := range []struct{ query, names string }{
		{"model=cubic:coriolis", "cubic:coriolis"},
		{"model=linear", "FORM:PREDICTOR"},
		{"model=linear:depth_of_thought", "abs_latitude"},
		{"modle=linear:coriolis", "modle"},
		{"response=huge", "standardised_peak"},
		{"scale=log", "ln_excess"},
		{"cluster=fan", "parent_deposit"},
		{"interval=wide", "studentised"},
		{"level=1", "0.999"},
		{"level=NaN", "level"},
		{"resamples=1000000", "100000"},
		{"resamples=98", "99"},
		{"permutations=0", "permutations"},
		{"seed=-1", "seed"},
		{"seed=1&seed=2", "seed"},
		{"k=0", "k"},
		{"time=then", "of_deposition"},
		{"pick=worst", "best"},
		{"measurement_error=maybe", "yes"},
		{"thin_straight=2", "thin_straight"},
		{"group=age", "group"},
		{"joint=valley_slope,colour", "colour"},
		{"joint=valley_slope,feeder&interaction=feeder,grain", "interaction"},
		{"model=power:valley_slope&scale=ln", "scale"},
		{"lat_min=91", "lat_min"},
		{"kind=canal", "canal"},
	} {
		for _, path := range []string{"/regression.json?", "/regression?", "/regression.csv?"} {
			a := v.get(path + c.query)
			if a.status != http.StatusBadRequest {
				t.Errorf("%s%s: status %d, want 400\n%.300s", path, c.query, a.status, a.body)
				continue
			}
			if !strings.Contains(a.body, c.names) {
				t.Errorf("%s%s: the answer does not name %q:\n%.600s", path, c.query, c.names, a.text())
			}
			if path != "/regression?" {
				wholeProblem(t, a)
			}
		}
	}
	a := v.get("/regression.json?scale=log")
	if ct := a.header.Get("Content-Type"); ct != "application/problem+json" {
		t.Errorf("content type of a refusal %q", ct)
	}
}

// wholeProblem: a refusal names its parameter and says apart what is wrong and
// what was expected.
func wholeProblem(t testing.TB, a *answer) {
	t.Helper()
	var p problem
	if err := json.Unmarshal([]byte(a.body), &p); err != nil {
		t.Fatal(err)
	}
	if p.Field == "" || p.Detail == "" || p.Expected == "" || strings.Contains(p.Detail, "Expected") {
		t.Errorf("a part of the refusal is missing: %+v", p)
	}
}

func TestRegressionFigure(t *testing.T) {
	v := newReferenceSite(t).visitor()
	a := v.get("/figures/regression.svg?model=linear:abs_latitude&resamples=199&permutations=99&panel=residuals")
	a.is(http.StatusOK)
	if !strings.HasPrefix(a.body, "<?xml") || !strings.Contains(a.body, "<svg xmlns=") || strings.Contains(a.body, "NaN") {
		t.Errorf("not a file of its own: %.200s", a.body)
	}
	a = v.get("/figures/regression.svg?model=linear:abs_latitude&panel=portrait")
	if a.status != http.StatusBadRequest || !strings.Contains(a.body, "residuals") {
		t.Errorf("an unknown panel gave %d: %.300s", a.status, a.body)
	}
}

func TestRegressCommand(t *testing.T) {
	file := filepath.Join(t.TempDir(), "reference.db")
	mustRun(t, referenceTable(t), "import", "-catalogue", file, "-publish", "-")
	out := mustRun(t, "", "regress", "-catalogue", file, "-model", "linear:abs_latitude", "resamples=199", "permutations=99")
	for _, want := range []string{"linear:abs_latitude", "-0.01609", "Coefficients", "CR2", "studentised"} {
		if !strings.Contains(out, want) {
			t.Errorf("the tables do not hold %q:\n%s", want, out)
		}
	}
	var doc map[string]any
	if err := json.Unmarshal([]byte(mustRun(t, "", "regress", "-json", "-catalogue", file, "model=linear:abs_latitude", "resamples=199", "permutations=99")), &doc); err != nil {
		t.Fatal(err)
	}
	for _, args := range [][]string{
		{"regress", "-catalogue", file, "model=cubic:abs_latitude"},
		{"regress", "-catalogue", file, "abs_latitude"},
		{"regress", "-nonsense"},
	} {
		if code, _, errOut := runCommand("", args...); code != exitBadCall || errOut == "" {
			t.Errorf("%v: exit %d, said %q; want %d", args, code, errOut, exitBadCall)
		}
	}
	if code, _, _ := runCommand("", "regress", "-catalogue", filepath.Join(t.TempDir(), "none.db")); code != exitProblem {
		t.Errorf("a catalogue that is not there: exit %d, want %d", code, exitProblem)
	}
}
