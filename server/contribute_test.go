package main

import (
	"fmt"
	"net/http"
	"net/url"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/PuerkitoBio/goquery"
)

// goodRecord is what a person types for a measurement that the checks find
// nothing odd in. The place is open water of the South Atlantic.
func goodRecord() map[string]string {
	return map[string]string{
		"system_name": "Tarn Hollow Channel", "latitude_deg": "-24.5", "longitude_deg": "-12.25",
		"sinuosity": "1.62", "sinuosity_kind": "peak", "measured_line": "thalweg", "parent_deposit": "Tarn Hollow Fan",
		"source": "Marlow, A. (2031) Invented soundings. J. Invented Sounding 4:12", "licence": "CC BY 4.0", "valley_slope": "0.004",
	}
}

// fillIn sets fields of a form read from a page.
func fillIn(form url.Values, fields map[string]string) url.Values {
	for k, v := range fields {
		form.Set(k, v)
	}
	return form
}

// newRecord opens the form and fills it in.
func (v *visitor) newRecord(fields map[string]string) url.Values {
	v.t.Helper()
	return fillIn(v.get("/contribute").is(http.StatusOK).form("form.record"), fields)
}

func press(form url.Values, action string) url.Values {
	out := url.Values{}
	for k, v := range form {
		out[k] = v
	}
	out.Set("action", action)
	return out
}

func newContribution(t *testing.T) (s *site, ann, cy *visitor) {
	t.Helper()
	s = newSite(t)
	s.person("ann", "contributor")
	s.person("cy", "curator")
	return s, s.as("ann"), s.as("cy")
}

// csv is the header and the rows of the catalogue.
func (s *site) csv() []string {
	s.t.Helper()
	return strings.Split(strings.TrimSpace(mustRun(s.t, "", "export", "-catalogue", s.file)), "\n")
}

func TestRecordLife(t *testing.T) {
	s, ann, cy := newContribution(t)
	form := ann.newRecord(goodRecord())

	// A draft, seen by its author only.
	draft := ann.post("/contribute", press(form, "save")).is(http.StatusOK).says("draft is saved", "only you see it")
	id := strings.TrimPrefix(draft.url.Path, "/contribute/")
	cy.get("/contribute/" + id).is(http.StatusNotFound)
	cy.get("/review/" + id).is(http.StatusNotFound)
	cy.get("/review").is(http.StatusOK).says("Nothing waits")

	// Sent, returned with a comment, mended, accepted.
	ann.post("/contribute/"+id, press(draft.form("form.record"), "submit")).is(http.StatusOK).says("Sent")
	cy.get("/review").is(http.StatusOK).says("1 record waits", "Tarn Hollow Channel")
	page := cy.get("/review/"+id).is(http.StatusOK).says("new system", "1.62", "Marlow")
	if page.doc().Find(".answer svg.glyph path").Length() == 0 {
		t.Error("no ribbon beside the value")
	}
	cy.post("/review/"+id, url.Values{"action": {"return"}, "comment": {"  "}}).is(http.StatusUnprocessableEntity).says("comment is empty")
	cy.post("/review/"+id, url.Values{"action": {"return"}, "comment": {"Which page of the paper?"}}).is(http.StatusOK).says("returned")
	returned := ann.get("/contribute/"+id).is(http.StatusOK).says("Returned to you", "Which page of the paper?")
	again := fillIn(returned.form("form.record"), map[string]string{"source_locator": "p. 14", "message": "Page 14, added."})
	ann.post("/contribute/"+id, press(again, "submit")).is(http.StatusOK).says("Sent", "Page 14, added.")
	cy.get("/review/"+id).is(http.StatusOK).says("p. 14", "Which page of the paper?", "Page 14, added.")
	cy.post("/review/"+id, url.Values{"action": {"accept"}, "comment": {"Good."}}).is(http.StatusOK).says("accepted and part of the catalogue")
	cy.post("/review/"+id, url.Values{"action": {"accept"}}).is(http.StatusConflict).says("accepted by now")

	rows := s.csv()
	if len(rows) != 2 || !strings.Contains(rows[1], "Tarn Hollow Channel") || !strings.Contains(rows[1], "Credit of ann") {
		t.Fatalf("after accepting:\n%s", strings.Join(rows, "\n"))
	}
	ann.get("/contribute/"+id).is(http.StatusOK).says("Accepted", "part of the catalogue")
	ann.post("/contribute/"+id, press(again, "submit")).is(http.StatusConflict).says("accepted by now", "What you typed is below")
	cy.get("/review/activity").is(http.StatusOK).says("Credit of cy", "Credit of ann", "Tarn Hollow Channel", "Good.")
}

func TestErrorsKeepEverythingTyped(t *testing.T) {
	_, ann, _ := newContribution(t)
	typed := goodRecord()
	typed["sinuosity"] = "0.9"
	typed["latitude_deg"] = "91"
	typed["channel_width_m"] = "wide"
	typed["valley_slope"] = "1:200"
	typed["valley_slope.unit"] = "valley_slope_ratio"
	typed["notes"] = "Zwei Zeilen,\n\"mit\" <b>Zeichen</b> & \u05e9\u05dc\u05d5\u05dd \U0001F30A"
	typed["message"] = "a word"
	delete(typed, "sinuosity_kind")
	form := ann.newRecord(typed)
	a := ann.post("/contribute", press(form, "submit")).is(http.StatusUnprocessableEntity).
		says("4 things to mend", "below 1", "end-to-end valley length")
	kept := a.form("form.record")
	for name, want := range typed {
		if got := kept.Get(name); strings.ReplaceAll(got, "\r\n", "\n") != want {
			t.Errorf("%s: typed %q, the page now holds %q", name, want, got)
		}
	}
	doc := a.doc()
	for _, name := range []string{"sinuosity", "latitude_deg", "channel_width_m", "sinuosity_kind"} {
		if doc.Find("#errors a[href='#"+name+"']").Length() != 1 {
			t.Errorf("the summary has no link to %s", name)
		}
		field := doc.Find("#" + name)
		if field.AttrOr("aria-invalid", "") != "true" {
			t.Errorf("%s is not marked invalid", name)
		}
		if doc.Find("#"+name+"-error").Text() == "" {
			t.Errorf("no sentence beside %s", name)
		}
	}
	if got := doc.Find("#valley_slope-messages").Text(); !strings.Contains(got, "0.005") {
		t.Errorf("the converted slope is not shown: %q", got)
	}
	// A draft keeps what cannot be read.
	draft := ann.post("/contribute", press(form, "save")).is(http.StatusOK)
	kept = ann.get(draft.url.Path).is(http.StatusOK).form("form.record")
	for name, want := range map[string]string{"sinuosity": "0.9", "channel_width_m": "wide", "latitude_deg": "91", "valley_slope": "0.005"} {
		if got := kept.Get(name); got != want {
			t.Errorf("draft: %s is %q, want %q", name, got, want)
		}
	}
}

func TestWarningsNeedAReason(t *testing.T) {
	_, ann, cy := newContribution(t)
	typed := goodRecord()
	typed["valley_slope"] = "3" // degrees in the m/m column
	form := ann.newRecord(typed)
	a := ann.post("/contribute", press(form, "submit")).is(http.StatusUnprocessableEntity).says("is it degrees?", "say why")
	input := a.doc().Find("#valley_slope-messages .warning input")
	key := input.AttrOr("name", "")
	if !strings.HasPrefix(key, "override.") {
		t.Fatalf("no field for a reason: %q", key)
	}
	if a.doc().Find("#errors a[href='#"+key+"']").Length() != 1 {
		t.Error("the summary has no link to the reason")
	}
	form = a.form("form.record")
	form.Set(key, "A cliff, as the source says.")
	sent := ann.post("/contribute", press(form, "submit")).is(http.StatusOK).says("Sent")
	cy.get("/review/"+strings.TrimPrefix(sent.url.Path, "/contribute/")).is(http.StatusOK).
		says("1 odd value", "is it degrees?", "A cliff, as the source says.")
}

func TestCheckAndFillWithALine(t *testing.T) {
	_, ann, cy := newContribution(t)
	// Ten equal bends of a sine-generated line of sinuosity 1.5 or so, along
	// 25 S: enough that the reach reads more than 1.
	var line strings.Builder
	line.WriteString("LINESTRING (")
	for i := 0; i <= 200; i++ {
		if i > 0 {
			line.WriteString(", ")
		}
		fmt.Fprintf(&line, "%.6f %.6f", -12+0.002*float64(i), -25+0.01*sinTable(i))
	}
	line.WriteString(")")
	typed := goodRecord()
	for _, name := range []string{"sinuosity", "latitude_deg", "longitude_deg", "valley_slope"} {
		typed[name] = ""
	}
	typed["sinuosity_kind"] = "reach"
	typed["centreline"] = line.String()
	a := ann.post("/contribute", press(ann.newRecord(typed), "fill")).is(http.StatusOK).says("Measured from this line", "Sinuosity of the reach")
	if n := a.doc().Find("#measured figure svg").Length(); n < 2 {
		t.Errorf("%d figures of the line, want its plan and its profile", n)
	}
	form := a.form("form.record")
	if form.Get("sinuosity") == "" || form.Get("latitude_deg") == "" || form.Get("reach_length_m") == "" || form.Get("extraction") != "centreline" {
		t.Fatalf("not filled: sinuosity %q, latitude %q, length %q, extraction %q", form.Get("sinuosity"), form.Get("latitude_deg"), form.Get("reach_length_m"), form.Get("extraction"))
	}
	if form.Get("system_name") != typed["system_name"] || form.Get("centreline") != typed["centreline"] {
		t.Error("filling changed what was typed")
	}
	sent := ann.post("/contribute", press(form, "submit"))
	if sent.status == http.StatusUnprocessableEntity {
		// Warnings about the line want a reason each.
		form = sent.form("form.record")
		for name := range form {
			if strings.HasPrefix(name, "override.") {
				form.Set(name, "as drawn")
			}
		}
		sent = ann.post("/contribute", press(form, "submit"))
	}
	sent.is(http.StatusOK).says("Sent")
	cy.get("/review/"+strings.TrimPrefix(sent.url.Path, "/contribute/")).is(http.StatusOK).says("Its centreline", "Channel length", "Plan view of")

	bad := ann.newRecord(goodRecord())
	bad.Set("centreline", "LINESTRING (1 1")
	a = ann.post("/contribute", press(bad, "submit")).is(http.StatusUnprocessableEntity)
	if a.form("form.record").Get("centreline") != "LINESTRING (1 1" || a.doc().Find("#errors a[href='#centreline']").Length() != 1 {
		t.Errorf("a broken line is not kept or not explained:\n%s", a.text())
	}
}

// sinTable is a zigzag with a period of 40 vertices.
func sinTable(i int) float64 {
	t := float64(i%40) / 40
	switch {
	case t < 0.25:
		return 4 * t
	case t < 0.75:
		return 2 - 4*t
	}
	return 4*t - 4
}

func TestDoubleSubmissionMakesOneRecord(t *testing.T) {
	_, ann, cy := newContribution(t)
	form := ann.newRecord(goodRecord())
	for _, action := range []string{"save", "submit"} {
		paths := make([]string, 6)
		var wg sync.WaitGroup
		for i := range paths {
			wg.Go(func() { paths[i] = ann.post("/contribute", press(form, action)).url.Path })
		}
		wg.Wait()
		for _, p := range paths {
			if p != paths[0] || !strings.HasPrefix(p, "/contribute/") {
				t.Fatalf("%s sent six times leads to %v", action, paths)
			}
		}
	}
	if n := ann.get("/contribute").doc().Find("#mine tbody tr").Length(); n != 1 {
		t.Errorf("%d records, want 1", n)
	}
	cy.get("/review").is(http.StatusOK).says("1 record waits")
	// The same form sent again with other content changes that record.
	form.Set("sinuosity", "1.7")
	ann.post("/contribute", press(form, "submit")).is(http.StatusOK)
	cy.get("/review").is(http.StatusOK).says("1 record waits", "1.70")
	// Without a token, as a script may send it, each is a form of its own.
	form.Del("form_token")
	for _, p := range []string{"1.31", "1.32"} {
		form.Set("sinuosity", p)
		ann.post("/contribute", press(form, "submit")).is(http.StatusOK)
	}
	cy.get("/review").is(http.StatusOK).says("3 records wait")
}

func TestSessionEndsInTheMiddleOfAForm(t *testing.T) {
	s, ann, _ := newContribution(t)
	typed := goodRecord()
	typed["notes"] = "long and \"quoted\"\nover two lines"
	form := ann.newRecord(typed)
	// Signed out in another window.
	cookies := ann.client.Jar
	ann.post("/sign-out", nil).is(http.StatusOK)
	late := s.visitor()
	late.client.Jar = cookies
	a := late.post("/contribute", press(form, "submit")).is(http.StatusUnauthorized).says("what you typed is kept")
	in := a.form("main form")
	in.Set("name", "ann")
	in.Set("password", "not the password")
	in = late.post("/sign-in", in).is(http.StatusUnprocessableEntity).form("main form")
	in.Set("password", testPassword)
	on := late.post("/sign-in", in).is(http.StatusOK).says("What you typed is kept")
	carry := on.form("main form")
	if got := strings.ReplaceAll(carry.Get("notes"), "\r\n", "\n"); got != typed["notes"] {
		t.Errorf("notes are now %q", got)
	}
	to := on.doc().Find("main form").AttrOr("action", "")
	late.post(to, carry).is(http.StatusOK).says("Sent")
	if late.get("/contribute").doc().Find("#mine tbody tr").Length() != 1 {
		t.Error("the record is not in the list")
	}
}

func TestChangeOfAnAcceptedRecord(t *testing.T) {
	s, ann, cy := newContribution(t)
	accept := func(path string) {
		t.Helper()
		cy.post("/review/"+strings.TrimPrefix(path, "/contribute/"), url.Values{"action": {"accept"}}).is(http.StatusOK)
	}
	accept(ann.post("/contribute", press(ann.newRecord(goodRecord()), "submit")).is(http.StatusOK).url.Path)
	id := strings.Split(s.csv()[1], ",")[0]

	ann.get("/contribute?measurement=nonesuch").is(http.StatusNotFound)
	open := func() url.Values {
		return ann.get("/contribute?measurement=" + id).is(http.StatusOK).form("form.record")
	}
	same := ann.post("/contribute", press(open(), "submit")).is(http.StatusUnprocessableEntity).says("Nothing is changed")
	if same.form("form.record").Get("system_name") == "" {
		t.Error("the form is lost")
	}
	first, second := open(), open()
	first.Set("sinuosity", "1.8")
	a := ann.post("/contribute", press(first, "check")).is(http.StatusOK).says("What this would change")
	if a.doc().Find("table.changes tbody tr").Length() != 1 {
		t.Errorf("changes shown:\n%s", a.doc().Find("table.changes").Text())
	}
	one := ann.post("/contribute", press(first, "submit")).is(http.StatusOK).url.Path
	second.Set("sinuosity", "1.9")
	second.Set("grade", "surveyed")
	two := ann.post("/contribute", press(second, "submit")).is(http.StatusOK).url.Path
	accept(one)

	// The second was written before the first was accepted: both versions.
	review := strings.Replace(two, "contribute", "review", 1)
	if seen := cy.get(review).is(http.StatusOK).says("changed after this was written"); seen.doc().Find(".conflict tbody tr").Length() != 2 {
		t.Errorf("both versions before deciding:\n%s", seen.doc().Find(".conflict").Text())
	}
	conflict := cy.post(review, url.Values{"action": {"accept"}, "comment": {"typed comment"}}).is(http.StatusConflict).says("1.62", "1.8", "1.9")
	if conflict.doc().Find("#comment").Text() != "typed comment" {
		t.Error("the comment is lost")
	}
	edit := cy.get(review + "/edit").is(http.StatusOK).form("form.record")
	edit.Set("sinuosity", "1.85")
	cy.post(review+"/edit", press(edit, "accept")).is(http.StatusOK).says("accepted with your edits")
	row := s.csv()[1]
	if !strings.Contains(row, ",1.85,") || !strings.Contains(row, ",surveyed,") || !strings.HasPrefix(row, id+",") {
		t.Errorf("after settling: %s", row)
	}
}

func TestAnotherMeasurementOfASystem(t *testing.T) {
	s, ann, cy := newContribution(t)
	first := ann.post("/contribute", press(ann.newRecord(goodRecord()), "submit")).is(http.StatusOK)
	cy.post("/review/"+strings.TrimPrefix(first.url.Path, "/contribute/"), url.Values{"action": {"accept"}}).is(http.StatusOK)
	slug, id := strings.Split(s.csv()[1], ",")[1], strings.Split(s.csv()[1], ",")[0]
	system := ann.get("/systems/" + slug).is(http.StatusOK).doc()
	for _, way := range []string{"/contribute?system=" + slug, "/contribute?measurement=" + id} {
		if system.Find("main a[href='"+way+"']").Length() == 0 {
			t.Errorf("the page of the system has no way to %s", way)
		}
	}
	form := ann.get("/contribute?system=" + slug).is(http.StatusOK).says("Another measurement of Tarn Hollow Channel").form("form.record")
	if form.Get("parent_deposit") != "Tarn Hollow Fan" || form.Get("sinuosity") != "" {
		t.Errorf("prefilled: deposit %q, sinuosity %q", form.Get("parent_deposit"), form.Get("sinuosity"))
	}
	fillIn(form, map[string]string{"latitude_deg": "-24.9", "longitude_deg": "-12.3", "sinuosity": "1.3", "sinuosity_kind": "reach", "measured_line": "thalweg",
		"source": goodRecord()["source"], "licence": "CC0 1.0", "valley_slope": "0.003", "reach": "lower"})
	sent := ann.post("/contribute", press(form, "submit")).is(http.StatusOK)
	review := strings.Replace(sent.url.Path, "contribute", "review", 1)
	cy.get(review).is(http.StatusOK).says("Another measurement of a system")
	cy.post(review, url.Values{"action": {"accept"}}).is(http.StatusOK)
	if rows := s.csv(); len(rows) != 3 || strings.Split(rows[2], ",")[1] != slug {
		t.Errorf("rows: %s", strings.Join(rows, "\n"))
	}
}

// upload posts a file to the upload page and checks it as it is guessed; what
// set says of its reading goes before. The answer is the result of the check,
// or the page that asks for more.
func (v *visitor) upload(content []byte, set map[string]string) *answer {
	v.t.Helper()
	a := v.sendFile("/contribute/upload", "table.csv", content, map[string]string{"why": set["why"]})
	if a.status != http.StatusOK || a.url.Path == "/contribute/upload" {
		return a
	}
	form := a.form("form.matching")
	if form.Get("licence") == "" {
		form.Set("licence", "CC0 1.0")
	}
	for name, value := range set {
		form.Set(name, value)
	}
	form.Set("action", "check")
	return v.checked(v.post(a.url.Path, form))
}

// checked waits for the end of a check.
func (v *visitor) checked(a *answer) *answer {
	v.t.Helper()
	for range 1000 {
		if a.doc().Find("[data-upload]").Length() == 0 {
			return a
		}
		time.Sleep(20 * time.Millisecond)
		a = v.get(a.url.Path)
	}
	v.t.Fatal("the check does not end")
	return nil
}

// press presses a button of the page of a file.
func (v *visitor) act(a *answer, action string) *answer {
	v.t.Helper()
	return v.post(a.url.Path, url.Values{"action": {action}})
}

const csvHead = "system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source,valley_slope\n"

func TestUpload(t *testing.T) {
	s, ann, cy := newContribution(t)
	good := csvHead + "Loom Channel,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\nWeft Channel,-31,-21,1.5,peak,thalweg,Invented 2031,0.003\n"
	first := ann.upload([]byte(good), map[string]string{"why": "table 2"}).is(http.StatusOK).says("2 new", "Every row can be sent", "Nothing is sent yet")
	cy.get("/review").is(http.StatusOK).says("Nothing waits")
	ann.act(first, "send").is(http.StatusOK).says("2 rows wait for a curator")
	ann.act(first, "send").is(http.StatusConflict)
	ann.upload([]byte(good), nil).is(http.StatusOK).says("2 identical and skipped", "waits already")
	q := cy.get("/review").is(http.StatusOK).says("2 records wait", "A file from Credit of ann")
	batch := q.doc().Find("a[href^='/review/batch/']").AttrOr("href", "")
	sample := cy.get(batch).is(http.StatusOK).says("table 2", "The sample is the whole", "Loom Channel", "Weft Channel")
	form := sample.form("form.record")
	form.Set("comment", "looked up in the paper")
	cy.post(batch, form).is(http.StatusUnprocessableEntity).says("2 rows of the sample are not marked as read")
	sample.doc().Find("input[name=read]").Each(func(_ int, x *goquery.Selection) { form.Add("read", x.AttrOr("value", "")) })
	cy.post(batch, form).is(http.StatusOK).says("2 records accepted, with a sample of 2 read")
	cy.get("/review/activity").is(http.StatusOK).says("2 of 2 rows read", "looked up in the paper")
	if rows := s.csv(); len(rows) != 3 {
		t.Errorf("%d rows after accepting the file, want 2 and the header", len(rows)-1)
	}
	cy.post(batch, nil).is(http.StatusNotFound)

	download := mustRun(t, "", "export", "-catalogue", s.file)
	ann.upload([]byte(download), nil).is(http.StatusOK).says("0 new, 0 changed, 2 identical")
	changed := strings.Replace(download, ",1.4,", ",1.45,", 1)
	ann.act(ann.upload([]byte(changed), nil).is(http.StatusOK).says("0 new, 1 changed, 1 identical"), "send").is(http.StatusOK)
	cy.get("/review").is(http.StatusOK).says("1 field of")
}

func TestBadUploads(t *testing.T) {
	s, ann, _ := newContribution(t)
	row := "Loom Channel,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\n"
	for name, c := range map[string]struct {
		file string
		says []string
	}{
		"nothing":       {"", []string{"No file was sent, or it is empty"}},
		"wrong header":  {"a,b,c\n1,2,3\n", []string{"lacks required columns", "system_name"}},
		"sinuosity 0.9": {csvHead + strings.Replace(row, "1.4", "0.9", 1), []string{"below 1", "0.9"}},
		"latitude 91":   {csvHead + strings.Replace(row, "-30", "91", 1), []string{"latitude_deg", "91", "-90 to 90"}},
		"a 5 MB field":  {csvHead + strings.Replace(row, "Loom Channel", strings.Repeat("x", 5<<20), 1), []string{"characters long"}},
		"cells missing": {csvHead + "Loom Channel,-30\n", []string{"2 cells"}},
		"an open quote": {csvHead + `"Loom Channel,-30,-20` + "\n", []string{"quote"}},
		"a workbook":    {"PK\x03\x04 and so on", []string{"spreadsheet workbook"}},
		"latin-1":       {csvHead + "L\xf6om,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\n", []string{"not UTF-8", "Löom"}},
		"two readings":  {csvHead + `Loom,-30,-20,"1,400",peak,thalweg,Invented 2031,0.004` + "\n", []string{"two ways", "1,400"}},
	} {
		a := ann.upload([]byte(c.file), map[string]string{"why": "typed reason"})
		if a.status != http.StatusUnprocessableEntity {
			t.Errorf("%s: status %d, want 422", name, a.status)
		}
		a.says(c.says...)
		if why := a.doc().Find("[name=why]"); why.Length() == 1 && why.AttrOr("value", "") != "typed reason" {
			t.Errorf("%s: what was typed is lost", name)
		}
		if strings.HasPrefix(a.url.Path, "/contribute/upload/") {
			ann.act(a, "drop").is(http.StatusOK).says("nothing of it is kept")
			ann.get(a.url.Path).is(http.StatusNotFound)
		}
	}
	ann.upload([]byte(csvHead), nil).is(http.StatusOK).says("no rows")
	// Other signs are read as they are.
	semicolons := strings.ReplaceAll(strings.ReplaceAll(csvHead+row, ",", ";"), ".", ",")
	for _, file := range []string{semicolons, strings.ReplaceAll(csvHead+row, ",", "\t"), "\ufeff" + csvHead + row} {
		ann.upload([]byte(file), nil).is(http.StatusOK).says("1 new", "Every row can be sent")
	}
	repeated := ann.upload([]byte(strings.TrimSpace(csvHead)+",sinuosity\n"+strings.TrimSpace(row)+",2\n"), nil).is(http.StatusOK).says("1 new")
	form := ann.act(repeated, "rematch").is(http.StatusOK).says("more than once: sinuosity").form("form.matching")
	form.Set("column.8", "sinuosity")
	form.Set("action", "check")
	ann.post(repeated.url.Path, form).is(http.StatusUnprocessableEntity).says("Column 4 of the file is read as sinuosity already")
	if rows := s.csv(); len(rows) != 1 {
		t.Errorf("something was stored: %v", rows)
	}
	if n := ann.get("/contribute").doc().Find("#mine tr").Length(); n != 0 {
		t.Errorf("%d records wait", n)
	}
	// Odd values are stored, with their warnings.
	odd := csvHead + strings.Replace(row, "0.004", "3", 1) + strings.Replace(strings.Replace(row, "0.004", "-0.01", 1), "Loom", "Weft", 1)
	ann.upload([]byte(odd), nil).is(http.StatusOK).says("2 new", "is it degrees?", "does not fall downstream")
	// Only the good rows, or none.
	half := csvHead + strings.Replace(row, "Loom", "Reed", 1) + strings.Replace(row, "1.4", "0.9", 1)
	a := ann.upload([]byte(half), nil).is(http.StatusOK).says("1 new", "1 refused", "below 1", "Send nothing and drop the file")
	refusals := ann.get(a.url.Path + "/remarks.csv?kind=problem").is(http.StatusOK)
	if got := strings.Split(strings.TrimSpace(refusals.body), "\n"); len(got) != 2 || !strings.HasPrefix(got[1], "refused,3,sinuosity,0.9,") {
		t.Errorf("the refusals as CSV:\n%s", refusals.body)
	}
	ann.get(a.url.Path + "/remarks.csv?kind=all").is(http.StatusBadRequest)
	ann.act(a, "send").is(http.StatusConflict).says("are refused (1)")
	ann.act(a, "send_good").is(http.StatusOK).says("1 row waits for a curator", "below 1")
	s.person("bo", "contributor")
	bo := s.as("bo")
	for _, path := range []string{a.url.Path, a.url.Path + "/remarks.csv", a.url.Path + "/progress.json", "/contribute/upload/99", "/contribute/upload/x"} {
		bo.get(path).is(http.StatusNotFound)
	}
	bo.act(a, "drop").is(http.StatusNotFound)
}

func TestBigNotesAndForgedForms(t *testing.T) {
	_, ann, cy := newContribution(t)
	form := ann.newRecord(goodRecord())
	form.Set("notes", strings.Repeat("n", 30_000))
	for _, action := range []string{"save", "submit"} {
		a := ann.post("/contribute", press(form, action)).is(http.StatusUnprocessableEntity).says("characters")
		if len(a.form("form.record").Get("notes")) != 30_000 {
			t.Error("the notes are cut")
		}
	}
	form.Set("notes", strings.Repeat("n", 2<<20))
	ann.post("/contribute", press(form, "save")).is(http.StatusRequestEntityTooLarge)

	ann.post("/contribute", url.Values{"action": {"accept"}}).is(http.StatusBadRequest).says("action")
	ann.post("/contribute", url.Values{}).is(http.StatusOK)
	sent := ann.post("/contribute", press(ann.newRecord(goodRecord()), "submit")).is(http.StatusOK)
	id := strings.TrimPrefix(sent.url.Path, "/contribute/")
	// Another person's record, by a forged address.
	for _, path := range []string{"/contribute/" + id, "/contribute/" + id + "/withdraw"} {
		cy.post(path, url.Values{"action": {"save"}}).is(http.StatusNotFound)
	}
	for _, path := range []string{"/contribute/0", "/contribute/-1", "/contribute/999999", "/contribute/x", "/contribute/99999999999999999999"} {
		ann.get(path).is(http.StatusNotFound)
	}
	ann.get("/contribute?colour=red").is(http.StatusBadRequest).says("colour", "Allowed")
	ann.post("/contribute/"+id+"/withdraw", nil).is(http.StatusOK).says("Taken back")
	cy.get("/review").is(http.StatusOK).says("Nothing waits")
	ann.request("POST", "/contribute", "multipart/form-data; boundary=x", strings.NewReader("--x\r\nbroken")).is(http.StatusBadRequest)
	// A page of another site.
	r, _ := http.NewRequest("POST", ann.base+"/contribute", strings.NewReader("action=save"))
	r.Header.Set("Content-Type", "application/x-www-form-urlencoded")
	r.Header.Set("Sec-Fetch-Site", "cross-site")
	ann.do(r).is(http.StatusForbidden)
}
