package main

import (
	"net/http"
	"regexp"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// The opening page of the demo leads to a guided example, whose steps are pages
// that answer and show what they are said to show.
func TestGuidedExample(t *testing.T) {
	h := &house{site: newDemoSite(t)}
	h.who = map[string]*visitor{"reader": h.visitor()}
	v := h.who["reader"]
	if v.get("/").is(http.StatusOK).doc().Find("main a[href='/example']").Length() != 1 {
		t.Error("the opening page does not lead to the example")
	}
	var steps []string
	v.get("/example").is(http.StatusOK).says("28 degrees", "Late Cretaceous").doc().Find("ol.steps a").Each(func(_ int, s *goquery.Selection) {
		steps = append(steps, s.AttrOr("href", ""))
	})
	if len(steps) != 6 {
		t.Fatalf("steps: %v", steps)
	}
	for i, says := range []string{"Each line is one channel", "Maastrichtian", "Coriolis", "Late Cretaceous", "Ma", "28° N"} {
		h.ready(housePage{who: "reader", path: steps[i]})
		v.get(steps[i]).is(http.StatusOK).says(says)
	}
	// The answer of the opening page and that of the step which asks the same of
	// two models in another order are one answer.
	coefficient := regexp.MustCompile(`coefficient may lie anywhere from \S+ to \S+`)
	opening, asked := coefficient.FindString(v.get("/").text()), coefficient.FindString(v.get(steps[2]).text())
	if opening == "" || opening != asked {
		t.Errorf("the opening page says %q, the step %q", opening, asked)
	}
	// The first step narrows the rows, and says so.
	v.get("/example").says("fitted to the channels of this belt alone", "Now all latitudes answer, and for peak sinuosity")
	// Another catalogue has the pages but not that system.
	other := newSite(t).visitor()
	if n := other.get("/example").is(http.StatusOK).doc().Find("ol.steps li").Length(); n != 5 {
		t.Errorf("%d steps without the invented survey", n)
	}
	if other.get("/").doc().Find("main a[href='/example']").Length() != 0 {
		t.Error("an empty catalogue offers the example")
	}
	v.get("/example?x=1").is(http.StatusBadRequest)
}
