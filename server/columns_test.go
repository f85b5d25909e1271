package main

import (
	"net/http"
	"net/url"
	"slices"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"

	"fathombend/views"
)

func headsOf(d *goquery.Document) (out []string) {
	d.Find("#systems-table thead th a").Each(func(_ int, s *goquery.Selection) {
		s.Find("span").Remove()
		out = append(out, strings.TrimSpace(s.Text()))
	})
	return out
}

// Which columns the table shows stands in its address, without scripts.
func TestColumnsOfTheTable(t *testing.T) {
	v := newDemoSite(t).visitor()
	usual := headsOf(v.get("/systems").is(http.StatusOK).doc())
	if len(usual) != len(views.TableColumns)+1 || usual[0] != "System" || usual[1] != "Sinuosity" {
		t.Errorf("the usual columns: %v", usual)
	}
	// Their order is that of the address; what is not known is a dash.
	a := v.get("/systems?columns=age_ma,wavelength_m,sinuosity&sort=-age_ma").is(http.StatusOK)
	if got := headsOf(a.doc()); !slices.Equal(got, []string{"System", "Age", "Wavelength", "Sinuosity"}) {
		t.Errorf("chosen: %v", got)
	}
	first := a.doc().Find("#systems-table tbody tr").First()
	if cells := first.Find("td").Length(); cells != 4 {
		t.Errorf("%d cells beside the name, want the ribbon and three", cells)
	}
	if !strings.Contains(first.Text(), "279") {
		t.Errorf("the oldest system of the demo is 279 Ma; the first row says %q", first.Text())
	}
	// Sorting, paging and the twins keep or leave the choice as they should.
	a.doc().Find("#systems-table thead th a, nav.pages a").Each(func(_ int, s *goquery.Selection) {
		if u, _ := url.Parse(s.AttrOr("href", "")); u.Query().Get("columns") != "age_ma,wavelength_m,sinuosity" {
			t.Errorf("%s loses the columns", s.AttrOr("href", ""))
		}
	})
	for _, end := range []string{".csv", ".json", ".geojson"} {
		a.doc().Find("a[href^='/systems" + end + "']").Each(func(_ int, s *goquery.Selection) {
			v.get(s.AttrOr("href", "")).is(http.StatusOK)
		})
	}
	// The boxes of the form lead to the short address, and the usual choice to none.
	if a := v.get("/systems?columns=basin&columns=sinuosity&q="); a.url.RawQuery != "columns=sinuosity%2Cbasin" {
		t.Errorf("boxes led to %s", a.url)
	}
	form := v.get("/systems?feeder=river").form("form.controls")
	if a := v.get("/systems?" + form.Encode()); a.url.RawQuery != "feeder=river" {
		t.Errorf("the form as it stands led to %s", a.url)
	}
	v.get("/systems?columns=" + strings.Join(views.ChoosableColumns, ",")).is(http.StatusOK)
	v.get("/systems?columns=nonsense&q=fan").is(http.StatusBadRequest).says("columns", "nonsense", "wavelength_m")
	v.get("/systems.json?columns=age_ma").is(http.StatusBadRequest)
}
