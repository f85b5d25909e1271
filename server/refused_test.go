package main

import (
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// TestRefusedPageKeepsItsForm: an address that cannot be answered is status
// 400 on the page it was sent to, with everything typed in the form, each
// fault beside its field and in a list on top that links to it.
func TestRefusedPageKeepsItsForm(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, path := range []string{"/", "/systems", "/chart", "/regression", "/regression/next", "/expectation", "/expectation/deep-time", "/expectation/time", "/expectation/report"} {
		doc := v.get(path + "?lat_min=95&lat_max=x&kind=boat&kind=river&q=fan&bbox=1,2&release=no/where").is(400).doc()
		for field, typed := range map[string]string{"lat_min": "95", "lat_max": "x", "q": "fan", "bbox": "1,2", "release": "no/where"} {
			in := doc.Find(`main form input[name="` + field + `"]`)
			if got := in.AttrOr("value", ""); got != typed {
				t.Errorf("%s: the field %s holds %q, typed was %q", path, field, got, typed)
			}
			if bad := in.AttrOr("aria-invalid", "") == "true"; bad != (field != "q") {
				t.Errorf("%s: the field %s is marked as refused: %v", path, field, bad)
			}
			if field == "q" {
				continue
			}
			id, _ := in.Attr("id")
			if doc.Find(".errors a[href='#"+id+"']").Length() != 1 {
				t.Errorf("%s: nothing on top leads to %s", path, field)
			}
			if by := doc.Find("#" + in.AttrOr("aria-describedby", "none")); !strings.Contains(by.Text(), "Expected") {
				t.Errorf("%s: beside %s stands %q", path, field, by.Text())
			}
		}
		var ticked []string
		doc.Find(`input[name="kind"][checked]`).Each(func(_ int, s *goquery.Selection) { ticked = append(ticked, s.AttrOr("value", "")) })
		if got := strings.Join(ticked, ","); got != "boat,river" {
			t.Errorf("%s: kinds ticked are %s", path, got)
		}
	}
	// A page's own setting keeps a field too, and a release that is not there
	// leaves the counts of the catalogue as it is.
	doc := v.get("/chart?zoom=0&feeder=river").is(400).doc()
	if got := doc.Find(`input[name="zoom"][aria-invalid]`).AttrOr("value", ""); got != "0" {
		t.Errorf("zoom holds %q", got)
	}
	v.get("/systems?release=2031-7").is(400).says("There is no release named", "submarine")
	v.get("/systems?foo=1").is(400).says("foo", "No such parameter here")
}

// TestRefusedRegressionKeepsTheRest: one setting that cannot be read does not
// take the others back to their defaults.
func TestRefusedRegressionKeepsTheRest(t *testing.T) {
	doc := newDemoSite(t).visitor().get("/regression?model=power:coriolis&model=foo:bar&resamples=5&seed=7&thin_straight=0.2&level=0,9").is(400).doc()
	if got := doc.Find(`select[name="model"] option[selected][value="power:coriolis"]`).Length(); got != 1 {
		t.Errorf("the model that can be read is chosen %d times", got)
	}
	for field, typed := range map[string]string{"resamples": "5", "seed": "7", "thin_straight": "0.2", "level": "0,9"} {
		if got := doc.Find(`input[name="`+field+`"]`).AttrOr("value", ""); got != typed {
			t.Errorf("%s holds %q, typed was %q", field, got, typed)
		}
	}
}
