package main

import (
	"net/http"
	"net/url"
	"strings"
	"testing"
)

func TestSourceFillsItselfFromAnEntry(t *testing.T) {
	s, ann, cy := newContribution(t)
	fill := func(entry string) *answer {
		t.Helper()
		form := ann.newRecord(with(goodRecord(), "source", "typed before", "reference", entry))
		return ann.post("/contribute", press(form, "reference")).is(http.StatusOK)
	}
	bib := "@article{m31,\n author = {Marlow, Ann and {\\O}stby, B.},\n title = {Invented soundings of a {C}hannel},\n journal = {J. Invented Sounding}, year = 2031, volume = 4, number = 12, pages = {1--9},\n doi = {https://doi.org/10.5555/Inv.31}\n}"
	a := fill(bib).says("Filled: Source and DOI of the source", "Before, the source read", "typed before")
	form := a.form("form.record")
	if src := form.Get("source"); !strings.Contains(src, "Marlow") || !strings.Contains(src, "Østby") || !strings.Contains(src, "(2031)") || !strings.Contains(src, "Invented soundings of a Channel") {
		t.Errorf("source: %q", src)
	}
	if form.Get("source_doi") != "10.5555/Inv.31" || form.Get("reference") == "" || form.Get("sinuosity") != "1.62" {
		t.Errorf("doi %q, entry %q, sinuosity %q", form.Get("source_doi"), form.Get("reference"), form.Get("sinuosity"))
	}
	sent := ann.post("/contribute", press(form, "submit")).is(http.StatusOK)
	cy.post(reviewOfPath(sent), url.Values{"action": {"accept"}}).is(http.StatusOK)
	cited := form.Get("source")

	// The same paper in RIS and in other words: the words of the catalogue.
	ris := "TY  - JOUR\nAU  - Marlow, A.\nTI  - Invented soundings\nJO  - Journal of Invented Sounding\nPY  - 2031\nDO  - 10.5555/INV.31\nER  - \n"
	again := fill(ris).says("The catalogue has this DOI already, with 1 measurement").form("form.record")
	if again.Get("source") != cited {
		t.Errorf("cited as %q, filled with %q", cited, again.Get("source"))
	}
	// Typed in other words it is asked about.
	other := ann.newRecord(with(goodRecord(), "source", "Marlow 2031", "source_doi", "10.5555/inv.31", "latitude_deg", "-29"))
	ann.post("/contribute", press(other, "submit")).is(http.StatusUnprocessableEntity).says("The catalogue has this DOI already, cited as", "counts as another source")

	for entry, want := range map[string]string{
		"just words": "no entry could be read", "": "no entry could be read", "@article{": "no entry could be read",
		strings.Repeat("@article{x, title={y}}", 9000): "too long",
	} {
		a := fill(entry)
		if !strings.Contains(strings.ToLower(a.text()), want) || a.form("form.record").Get("source") != "typed before" {
			t.Errorf("%.20q: %s", entry, a.text())
		}
	}
	fill("@misc{x, title={No number}, author={A. Nobody}, year=2030}").says("The entry has no DOI")
	fill("@misc{x, title={Odd number}, author={A. Nobody}, doi={not a doi}}").says("The DOI of the entry cannot be read")
	if len(s.csv()) != 2 {
		t.Error("filling stored something")
	}
}

// Everything that is wrong or odd is said at once, beside its field and in a
// summary that leads there.
func TestAllErrorsOfAFormAtOnce(t *testing.T) {
	_, ann, _ := newContribution(t)
	bad := with(goodRecord(), "latitude_deg", "95", "sinuosity", "abc", "channel_depth_m", "-3", "source", "", "valley_slope", "3", "unit", "Maastrichtan", "licence", "")
	a := ann.post("/contribute", press(ann.newRecord(bad), "submit")).is(http.StatusUnprocessableEntity)
	d := a.doc()
	for _, name := range []string{"latitude_deg", "sinuosity", "channel_depth_m", "source", "licence"} {
		if d.Find("#"+name+"-error").Length() != 1 || d.Find("#"+name+"[aria-invalid=true]").Length() != 1 {
			t.Errorf("%s has no error beside it", name)
		}
		if d.Find("#errors a[href='#"+name+"']").Length() != 1 {
			t.Errorf("the summary does not lead to %s", name)
		}
	}
	for _, key := range []string{"override.valley_slope_range", "override.unit_unknown"} {
		if d.Find("#errors a[href='#"+key+"']").Length() != 1 {
			t.Errorf("the summary does not lead to %s:\n%s", key, d.Find("#errors").Text())
		}
	}
	a.says("Nothing was stored: 7 things to mend", "is no unit of the chronostratigraphic chart", "Nearest: Maastrichtian")
	ann.post("/contribute", press(ann.newRecord(bad), "check")).is(http.StatusOK).says("7 things to mend")
	old := ann.newRecord(with(goodRecord(), "unit", "Maastrichtian", "age_ma", "40", "palaeolatitude_deg", "-30", "palaeolatitude_method", "given", "burial", "buried"))
	ann.post("/contribute", press(old, "submit")).is(http.StatusUnprocessableEntity).says("The age, 40 Ma, is not within Maastrichtian", "66 to 72.")

	// A draft that is not good enough to be sent is still the draft.
	draft := ann.post("/contribute", press(ann.newRecord(bad), "save")).is(http.StatusOK).says("draft is saved")
	again := ann.post(draft.url.Path, press(draft.form("form.record"), "submit")).is(http.StatusUnprocessableEntity).says("Not sent: 7 things to mend", "still holds what you saved last")
	if strings.Contains(again.text(), "Nothing was stored") {
		t.Error("a saved draft is said not to be stored")
	}
}

// A row of a file that came without a licence is accepted with edits: consent
// is not the curator's to give.
func TestAcceptWithEditsAsksForNoLicence(t *testing.T) {
	s, ann, cy := newContribution(t)
	ann.act(ann.upload([]byte(csvHead+"Loom Channel,-30,-20,1.4,peak,thalweg,Invented 2031,0.004\n"), nil).is(http.StatusOK), "send").is(http.StatusOK)
	edit := cy.get("/review/1/edit").is(http.StatusOK).form("form.record")
	edit.Set("notes", "page 4")
	cy.post("/review/1/edit", press(edit, "accept")).is(http.StatusOK).says("accepted with your edits")
	if row := s.csv()[1]; !strings.Contains(row, "page 4") {
		t.Error(row)
	}
}

func TestGradeIsChosenAndReviewedByItsCriteria(t *testing.T) {
	_, ann, cy := newContribution(t)
	ann.get("/contribute").is(http.StatusOK).says("finer than a quarter wavelength", "the method unknown")
	sent := ann.post("/contribute", press(ann.newRecord(with(goodRecord(), "grade", "surveyed", "survey", "multibeam")), "submit")).is(http.StatusOK)
	a := cy.get(reviewOfPath(sent)).is(http.StatusOK).says("Grade: surveyed", "with the method stated", "Survey: multibeam")
	if a.doc().Find(".criteria .tag").Length() != 1 {
		t.Error("the grade of the record is not marked")
	}
}
