package main

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"math"
	"mime/multipart"
	"net/http"
	"net/url"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// sinePoints lays a sine-generated curve of 12 wavelengths of 5 km of arc, 200
// vertices each, on the globe: longitude, latitude and elevation, falling by 4 m
// in a km of valley.
func sinePoints(omegaDeg, lat, lon float64) [][3]float64 {
	pts := planform.SineGeneratedLine(omegaDeg*math.Pi/180, 60e3, 12, 200)
	half := pts[len(pts)-1].X / 2
	out := make([][3]float64, len(pts))
	for i, p := range pts {
		x := p.X - half
		la, lo, _ := planform.Direct(lat, lon, math.Atan2(x, p.Y)*180/math.Pi, math.Hypot(x, p.Y))
		out[i] = [3]float64{lo, la, -1500 - 0.004*p.X}
	}
	return out
}

func sineGeoJSON(omegaDeg float64) string {
	var b strings.Builder
	for i, p := range sinePoints(omegaDeg, -24.5, -12.25) {
		if i > 0 {
			b.WriteByte(',')
		}
		fmt.Fprintf(&b, "[%.9f,%.9f,%.3f]", p[0], p[1], p[2])
	}
	return `{"type":"Feature","properties":{"name":"sine"},"geometry":{"type":"LineString","coordinates":[` + b.String() + `]}}`
}

func sineKML(omegaDeg float64) string {
	var b strings.Builder
	for _, p := range sinePoints(omegaDeg, -24.5, -12.25) {
		fmt.Fprintf(&b, "%.9f,%.9f,%.3f ", p[0], p[1], p[2])
	}
	return `<?xml version="1.0"?><kml xmlns="http://www.opengis.net/kml/2.2"><Placemark><name>sine</name><LineString><coordinates>` + b.String() + `</coordinates></LineString></Placemark></kml>`
}

// multipartOf is a form with a file, as a browser sends it.
func multipartOf(t testing.TB, fields map[string]string, name, content string) (kind string, body *bytes.Buffer) {
	t.Helper()
	body = &bytes.Buffer{}
	w := multipart.NewWriter(body)
	for k, v := range fields {
		if err := w.WriteField(k, v); err != nil {
			t.Fatal(err)
		}
	}
	if name != "" {
		f, err := w.CreateFormFile("file", name)
		if err != nil {
			t.Fatal(err)
		}
		f.Write([]byte(content))
	}
	w.Close()
	return w.FormDataContentType(), body
}

// The document of the contract: its members, the number of a 90 degree curve
// (1/J0(pi/2) = 2.119, Langbein & Leopold 1966), equal bytes for equal
// questions, however a client calls the body.
func TestMeasureDocument(t *testing.T) {
	v := newSite(t).visitor()
	a := v.request("POST", "/measure.json?k=3", "application/geo+json", strings.NewReader(sineGeoJSON(90))).is(http.StatusOK)
	var doc struct {
		Lines   []map[string]any
		Refused []any
	}
	if err := json.Unmarshal([]byte(a.body), &doc); err != nil || len(doc.Lines) != 1 || doc.Refused == nil {
		t.Fatalf("%v: %.300s", err, a.body)
	}
	for _, name := range []string{"channel_length_m", "chord_m", "valley_length_m", "reach_sinuosity", "mean_sinuosity", "p90_sinuosity", "peak_sinuosity",
		"standardised_peak", "valley_slope", "bends", "windows", "ruler", "sensitivity", "settings", "warnings"} {
		if doc.Lines[0][name] == nil {
			t.Errorf("no %s", name)
		}
	}
	bend := doc.Lines[0]["bends"].([]any)[0].(map[string]any)
	for _, name := range []string{"arc_m", "chord_m", "sinuosity", "amplitude_m", "wavelength_m", "radius_m", "side", "asymmetry"} {
		if bend[name] == nil {
			t.Errorf("no bends %s", name)
		}
	}
	settings := doc.Lines[0]["settings"].(map[string]any)
	for _, name := range measureParameters {
		if _, ok := settings[name]; !ok {
			t.Errorf("no settings %s", name)
		}
	}
	near(t, "mean sinuosity", doc.Lines[0]["mean_sinuosity"].(float64), 2.119, 2e-3)
	near(t, "valley slope", doc.Lines[0]["valley_slope"].(float64), 0.004, 1e-3)
	near(t, "standardised peak", doc.Lines[0]["standardised_peak"].(map[string]any)["expected"].(float64), 2.119, 2e-3)
	for _, kind := range []string{"", "application/octet-stream", "application/x-www-form-urlencoded"} {
		if b := v.request("POST", "/measure.json?k=3", kind, strings.NewReader(sineGeoJSON(90))).is(http.StatusOK); b.body != a.body {
			t.Errorf("sent as %q the answer differs", kind)
		}
	}
	kind, body := multipartOf(t, map[string]string{"k": "3"}, "a.geojson", sineGeoJSON(90))
	if b := v.request("POST", "/measure.json", kind, body).is(http.StatusOK); b.body != a.body {
		t.Error("sent as a form the answer differs")
	}
	notANumber(t, a)
}

// The same line in UTM metres.
func TestMeasureUTM(t *testing.T) {
	v := newSite(t).visitor()
	var deg, utm strings.Builder
	for _, p := range sinePoints(60, 36, 15) {
		e, n := planform.UTM(p[1], p[0], 33, false)
		fmt.Fprintf(&deg, "%.12f,%.12f,%.3f\n", p[0], p[1], p[2])
		fmt.Fprintf(&utm, "%.6f,%.6f,%.3f\n", e, n, p[2])
	}
	read := func(path, body string) (doc struct{ Lines []planform.Measured }) {
		if err := json.Unmarshal([]byte(v.request("POST", path, "text/csv", strings.NewReader(body)).is(http.StatusOK).body), &doc); err != nil {
			t.Fatal(err)
		}
		return doc
	}
	a := read("/measure.json", "lon,lat,z\n"+deg.String()).Lines[0]
	b := read("/measure.json?epsg=32633", "easting,northing,z\n"+utm.String()).Lines[0]
	near(t, "length", b.ChannelLengthM, a.ChannelLengthM, 1e-8)
	near(t, "mean", b.MeanSinuosity, a.MeanSinuosity, 1e-8)
	near(t, "peak", b.PeakSinuosity, a.PeakSinuosity, 1e-8)
	near(t, "slope", *b.ValleySlope, *a.ValleySlope, 1e-8)
	if len(a.Bends) != len(b.Bends) {
		t.Errorf("%d and %d bends", len(a.Bends), len(b.Bends))
	}
}

func TestMeasureRefusals(t *testing.T) {
	v := newSite(t).visitor()
	for _, c := range []struct {
		path, body string
		status     int
		says       []string
	}{
		{"/measure.json", "", 422, []string{"empty"}},
		{"/measure.json", "LINESTRING (1 1, 1 1)", 422, []string{`"refused":[{"line":"line 1"`, "same point"}},
		{"/measure.json", "LINESTRING (0 0, 1 1, 0 0)", 422, []string{"chord 0"}},
		{"/measure.json", "LINESTRING (500000 4200000, 500100 4200400)", 422, []string{`"field":"epsg"`, "epsg=plane"}},
		{"/measure.json", "PK\x03\x04", 422, []string{"zip archive"}},
		{"/measure.json", `<!DOCTYPE a [<!ENTITY b "c">]><kml/>`, 422, []string{"DOCTYPE"}},
		{"/measure.json?smooth=4", "LINESTRING (0 0, 1 1)", 400, []string{`"field":"smooth"`, "odd"}},
		{"/measure.json?smooth=many", "LINESTRING (0 0, 1 1)", 400, []string{`"field":"smooth"`}},
		{"/measure.json?width_m=NaN", "LINESTRING (0 0, 1 1)", 400, []string{`"field":"width_m"`}},
		{"/measure.json?window_m=5&window_bends=3", "LINESTRING (0 0, 1 1)", 400, []string{"only one of"}},
		{"/measure.json?colour=red", "LINESTRING (0 0, 1 1)", 400, []string{"colour", "window_widths"}},
		{"/measure.json?z=%zz", "LINESTRING (0 0, 1 1)", 400, []string{"broken escape"}},
		{"/measure.csv", "LINESTRING (1 1, 1 1)", 422, []string{"same point"}},
	} {
		a := v.request("POST", c.path, "text/plain", strings.NewReader(c.body)).is(c.status)
		if got := a.header.Get("Content-Type"); got != "application/problem+json" {
			t.Errorf("%s: %s", c.path, got)
		}
		a.says(c.says...)
	}
	big, err := http.NewRequest("POST", v.base+"/measure.json", bytes.NewReader(make([]byte, maxMeasureBody+1)))
	if err != nil {
		t.Fatal(err)
	}
	v.do(big).is(http.StatusRequestEntityTooLarge)
}

// Without scripts: the form, a file, other settings, errors beside their fields
// with everything typed kept, several lines.
func TestMeasurePage(t *testing.T) {
	v := newSite(t).visitor()
	v.get("/measure").is(http.StatusOK).says("Measure a channel", "Nothing that is sent here is kept")
	v.get("/measure?smooth=4").is(http.StatusBadRequest).says("odd")
	v.get("/measure?x=1").is(http.StatusBadRequest)

	kind, body := multipartOf(t, map[string]string{"k": "3"}, "channel.kml", sineKML(90))
	a := v.request("POST", "/measure", kind, body).is(http.StatusOK).
		says("Sinuosity 2.12 over the reach of 60.0 km", "10 bends", "Standardised peak, 3 windows", "turns left", "Measuring the same line with these settings gives the same numbers")
	notANumber(t, a)
	d := a.doc()
	for selector, n := range map[string]int{"svg#plan": 1, "svg#sinuosity-profile": 1, "svg#slope-profile": 1, "svg#depth-profile": 1, "svg#ruler": 1,
		"table#bends tbody tr": 23, "#plan .line.l2.dash": 1, "[style]": 0} {
		if got := d.Find(selector).Length(); got != n {
			t.Errorf("%d of %s, expected %d", got, selector, n)
		}
	}
	if text := d.Find("svg#plan text").Text(); !strings.Contains(text, "km") || !strings.Contains(text, "N") {
		t.Errorf("no scale bar or north: %s", text)
	}

	// The text of the file is kept, so that the window can be changed.
	form := a.form("form#measure-form")
	if !strings.Contains(form.Get("line"), "<kml") || form.Get("k") != "3" {
		t.Fatalf("kept: line %.40q, k %q", form.Get("line"), form.Get("k"))
	}
	form.Set("window_m", "5000")
	v.post("/measure", form).is(http.StatusOK).says("windows of 5000 m")

	form.Set("window_bends", "3")
	form.Set("smooth", "x")
	a = v.post("/measure", form).is(http.StatusUnprocessableEntity).says("only one of", "whole number")
	if kept := a.form("form#measure-form"); kept.Get("smooth") != "x" || kept.Get("line") != form.Get("line") {
		t.Errorf("typed text is lost: %q", kept.Get("smooth"))
	}
	if a.doc().Find("#smooth[aria-invalid=true]").Length() != 1 {
		t.Error("the field is not marked")
	}
	v.post("/measure", url.Values{"line": {" "}}).is(http.StatusUnprocessableEntity).says("No line was sent")
	v.post("/measure", url.Values{"line": {"LINESTRING (0 0"}}).is(http.StatusUnprocessableEntity).says("The WKT is broken")

	two := "line,lon,lat\nfirst,0,0\nfirst,0.1,0.05\nfirst,0.2,0\nsecond,5,5\nsecond,5.1,5.2\nbad,1,1\n"
	a = v.post("/measure", url.Values{"line": {two}, "show": {"2"}}).is(http.StatusOK).says("Lines in this file", "second: 0 bends", "Not measured", "bad", "1 vertex")
	if n := a.doc().Find("#lines tbody tr").Length(); n != 2 {
		t.Errorf("%d lines listed", n)
	}
	v.post("/measure", url.Values{"line": {two}, "show": {"99"}}).is(http.StatusOK).says("second: 0 bends")
}

// Levels, levees and banks on the page.
func TestMeasurePageOfLevels(t *testing.T) {
	v := newSite(t).visitor()
	wkt := func(grow float64) string {
		var b strings.Builder
		for i, p := range planform.SineGeneratedLine(0.9, 40e3, 8, 60) {
			if i > 0 {
				b.WriteByte(',')
			}
			fmt.Fprintf(&b, "%.3f %.3f", p.X+100*(grow-1), p.Y*grow)
		}
		return "LINESTRING(" + b.String() + ");"
	}
	a := v.post("/measure", url.Values{"line": {wkt(1) + wkt(1.3)}, "lines": {"levels"}, "epsg": {"plane"}}).is(http.StatusOK).
		says("Two levels: line 1 and line 2", "outwards (swing)", "down-valley (sweep)")
	if a.doc().Find("svg#movement-1 .line").Length() < 3 {
		t.Error("the two levels are not drawn")
	}
	var doc struct{ Movements []planform.Movement }
	j := v.post("/measure.json", url.Values{"line": {wkt(1) + wkt(1.3)}, "lines": {"levels"}, "epsg": {"plane"}}).is(http.StatusOK)
	if err := json.Unmarshal([]byte(j.body), &doc); err != nil || len(doc.Movements) != 1 || len(doc.Movements[0].Bends) < 10 || !(doc.Movements[0].MeanSwing > 0) {
		t.Errorf("%v %+v", err, doc)
	}
}

// A measured line taken into a contribution: what is stored gives the number
// that was shown, to the last bit, although the file was in UTM with depths.
func TestMeasuredLineIntoAContribution(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	ann := s.as("ann")
	var utm strings.Builder
	utm.WriteString("easting,northing,depth,width\n")
	points := sinePoints(75, -24.5, -12.25)
	slices.Reverse(points) // up the slope: it is turned round, and so it must be again
	for _, p := range points {
		e, n := planform.UTM(p[1], p[0], 28, true)
		fmt.Fprintf(&utm, "%.3f,%.3f,%.2f,%d\n", e, n, -p[2], 240)
	}
	typed := url.Values{"line": {utm.String()}, "epsg": {"32728"}, "window_widths": {"30"}, "smooth": {"15"}}
	a := ann.post("/measure", typed).is(http.StatusOK)
	shown, err := planform.MeasureFile([]byte(utm.String()), "", "", planform.Settings{EPSG: "32728", WindowWidths: 30, Smooth: 15})
	if err != nil {
		t.Fatal(err)
	}
	want := shown.Lines[0]
	a.says(fmt.Sprintf("%.2f at the peak", want.PeakSinuosity))

	filled := ann.post("/contribute", press(a.form("form#save"), "fill")).is(http.StatusOK)
	form := fillIn(filled.form("form.record"), goodRecord())
	form.Set("sinuosity", fmt.Sprint(want.PeakSinuosity))
	saved := ann.post("/contribute", press(form, "save")).is(http.StatusOK)
	if kept := saved.form("form.record").Get("centreline_settings"); !strings.Contains(kept, `"window_widths":30`) {
		t.Errorf("the settings do not come back with the draft: %q", kept)
	}
	ctx := context.Background()
	store, err := catalogue.Open(ctx, s.file, openOptions(true))
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	var id int64
	if _, err := fmt.Sscanf(saved.url.Path, "/contribute/%d", &id); err != nil {
		t.Fatal(saved.url)
	}
	sub, err := store.Submission(ctx, id)
	if err != nil {
		t.Fatal(err)
	}
	var settings planform.Settings
	if err := json.Unmarshal([]byte(sub.CentrelineSettings), &settings); err != nil {
		t.Fatalf("%v: %s", err, sub.CentrelineSettings)
	}
	lines, _, err := planform.Read([]byte(sub.Centreline), "", "", settings)
	if err != nil {
		t.Fatal(err)
	}
	got, err := planform.Measure(lines[0], settings)
	if err != nil {
		t.Fatal(err)
	}
	if got.PeakSinuosity != want.PeakSinuosity || got.MeanSinuosity != want.MeanSinuosity || !reflect.DeepEqual(got.Bends, want.Bends) {
		t.Errorf("measured again: peak %v, mean %v; shown were %v, %v", got.PeakSinuosity, got.MeanSinuosity, want.PeakSinuosity, want.MeanSinuosity)
	}
	if *got.ValleySlope != *want.ValleySlope || !(*got.ValleySlope > 0) {
		t.Errorf("slope %v, shown was %v", *got.ValleySlope, *want.ValleySlope)
	}

	form.Set("centreline_settings", "{nonsense")
	ann.post("/contribute", press(form, "save")).is(http.StatusUnprocessableEntity).says("no settings of this program")
}

// The command: a readable table, JSON equal to the page's, rows that import once
// they are completed, refusals with their reason, exit codes.
func TestMeasureCommand(t *testing.T) {
	dir := t.TempDir()
	file := filepath.Join(dir, "sine.kml")
	if err := os.WriteFile(file, []byte(sineKML(90)), 0o600); err != nil {
		t.Fatal(err)
	}
	out := mustRun(t, "", "measure", file)
	for _, want := range []string{"standardised peak", "valley slope", "window_bends=10", "amplitude m"} {
		if !strings.Contains(out, want) {
			t.Errorf("the table does not say %q:\n%s", want, out)
		}
	}
	var mean float64
	_, rest, _ := strings.Cut(out, "mean sinuosity")
	if _, err := fmt.Sscan(rest, &mean); err != nil {
		t.Fatalf("no mean in the table: %v\n%s", err, out)
	}
	near(t, "printed mean", mean, 2.119, 2e-3)
	v := newSite(t).visitor()
	doc := v.request("POST", "/measure.json?k=4", "", strings.NewReader(sineKML(90))).is(http.StatusOK)
	if got := mustRun(t, sineKML(90), "measure", "-json", "-k", "4", "-"); got != doc.body {
		t.Error("the command and the page give different documents")
	}

	rows := mustRun(t, "", "measure", "-csv", file)
	table, err := csv.NewReader(strings.NewReader(rows)).ReadAll()
	if err != nil || len(table) != 2 || !slices.Equal(table[0], catalogue.ColumnNames()) {
		t.Fatalf("%v: %d rows, header %v", err, len(table), table[0])
	}
	table[1][slices.Index(table[0], "source")] = "Marlow, A. (2031) Invented soundings. J. Invented Sounding 4:12"
	var done strings.Builder
	w := csv.NewWriter(&done)
	w.WriteAll(table)
	rowFile, cat := filepath.Join(dir, "rows.csv"), filepath.Join(dir, "c.db")
	if err := os.WriteFile(rowFile, []byte(done.String()), 0o600); err != nil {
		t.Fatal(err)
	}
	mustRun(t, "", "import", "-catalogue", cat, "-publish", rowFile)
	if back := mustRun(t, "", "export", "-catalogue", cat); strings.Count(back, "\n") != 2 || !strings.Contains(back, "remeasured") {
		t.Errorf("imported and exported:\n%s", back)
	}

	rivers := mustRun(t, "", "measure", "-csv", "-kind", "river", "-sinuosity_kind", "reach", "../catalogue/planform/testdata/rivers_wdb2.csv.gz")
	table, err = csv.NewReader(strings.NewReader(rivers)).ReadAll()
	if err != nil || len(table) != 107 {
		t.Fatalf("%v: %d rows of rivers", err, len(table))
	}
	kind, what := slices.Index(table[0], "kind"), slices.Index(table[0], "sinuosity_kind")
	for _, r := range table[1:] {
		if r[kind] != "river" || r[what] != "reach" {
			t.Fatalf("asked for reaches of rivers, got %s of %s", r[what], r[kind])
		}
	}
	posted := v.request("POST", "/measure.csv?kind=river&sinuosity_kind=mean", "", strings.NewReader(sineKML(90))).is(http.StatusOK)
	if !strings.Contains(posted.body, ",river,") || !strings.Contains(posted.body, ",mean,") {
		t.Errorf("the rows of /measure.csv:\n%s", posted.body)
	}
	out = mustRun(t, "", "measure", "../catalogue/planform/testdata/rivers_wdb2.csv.gz")
	if !strings.Contains(out, "Measured: 106 lines") || !strings.Contains(out, "Not measured (8)") || !strings.Contains(out, "106 lines: The line is too coarse for its bends") {
		t.Errorf("rivers:\n%s", out)
	}
	for _, c := range []struct {
		stdin string
		args  []string
		code  int
		says  string
	}{
		{"LINESTRING (1 1, 1 1)", []string{"-"}, exitProblem, "same point"},
		{"nothing", []string{"-"}, exitProblem, "no columns"},
		{"", []string{"no-such-file"}, exitProblem, "there is no file"},
		{"", nil, exitBadCall, "one FILE"},
		{"", []string{"-smooth", "4", file}, exitBadCall, "odd"},
		{"", []string{"-json", "-csv", file}, exitBadCall, "cannot both"},
		{"", []string{"-nonsense", file}, exitBadCall, "nonsense"},
		{"", []string{"-csv", "-kind", "canal", file}, exitBadCall, "lacustrine"},
		{"", []string{"-csv", "-sinuosity_kind", "bend", file}, exitBadCall, "peak, p90, mean, reach"},
		{"", []string{"-kind", "river", file}, exitBadCall, "belong to -csv"},
		{"", []string{"-h"}, exitOK, "GeoPackage"},
		{"", []string{"-h"}, exitOK, "medians over the bends"},
	} {
		code, out, errOut := runCommand(c.stdin, append([]string{"measure"}, c.args...)...)
		if code != c.code || !strings.Contains(out+errOut, c.says) {
			t.Errorf("measure %v: exit %d, %s%s; expected %d and %q", c.args, code, out, errOut, c.code, c.says)
		}
	}
}
