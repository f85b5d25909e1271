package main

import (
	"encoding/csv"
	"encoding/json"
	"net/http"
	"slices"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"

	"fathombend/catalogue"
)

// TestSystemsTwinsAgree: the table, the CSV, the JSON and the GeoJSON of one
// filter hold the same systems.
func TestSystemsTwinsAgree(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, q := range []string{"", "?kind=submarine&feeder=river", "?lat_max=0", "?q=river", "?bbox=170,-60,-170,60"} {
		total := systemsTotal(t, v, q)
		records, err := csv.NewReader(strings.NewReader(v.get("/systems.csv" + q).is(http.StatusOK).body)).ReadAll()
		if err != nil {
			t.Fatal(err)
		}
		if !slices.Equal(records[0], catalogue.ColumnNames()) {
			t.Errorf("header %v", records[0])
		}
		slugs := map[string]bool{}
		for _, r := range records[1:] {
			slugs[r[1]] = true
		}
		var geo struct {
			Matched  int               `json:"numberMatched"`
			Features []json.RawMessage `json:"features"`
		}
		if err := json.Unmarshal([]byte(v.get("/systems.geojson"+q).is(http.StatusOK).body), &geo); err != nil {
			t.Fatal(err)
		}
		if len(slugs) != total || geo.Matched != total || len(geo.Features) != total {
			t.Errorf("%q: JSON %d systems, CSV %d, GeoJSON %d of %d", q, total, len(slugs), len(geo.Features), geo.Matched)
		}
		rows := v.get("/systems" + withPer(q)).doc().Find("#systems-table tbody tr").Length()
		if rows != total {
			t.Errorf("%q: %d rows on the page, %d systems", q, rows, total)
		}
	}
}

func withPer(q string) string {
	if q == "" {
		return "?per_page=500"
	}
	return q + "&per_page=500"
}

func TestSystemsSortAndPages(t *testing.T) {
	v := newDemoSite(t).visitor()
	d := v.get("/systems?sort=-sinuosity&per_page=10").is(http.StatusOK).doc()
	if d.Find("#systems-table tbody tr").Length() != 10 {
		t.Fatal("ten systems on a page of ten")
	}
	if got := d.Find("th[aria-sort=descending]").Text(); !strings.Contains(got, "Sinuosity") {
		t.Errorf("sorted column %q", got)
	}
	var before string
	d.Find("#systems-table tbody tr td:nth-child(3)").Each(func(_ int, s *goquery.Selection) {
		if now := strings.TrimSpace(s.Text()); before != "" && now > before { // all below 10: text order is number order
			t.Errorf("%s after %s", now, before)
		} else {
			before = now
		}
	})
	next, _ := d.Find("a[rel=next]").Attr("href")
	second := v.get(next).is(http.StatusOK).doc()
	if second.Find("#systems-table tbody tr th a").First().Text() == d.Find("#systems-table tbody tr th a").First().Text() {
		t.Error("the second page repeats the first")
	}
	// Taking a filter off is a link that leads back.
	f := v.get("/systems?feeder=river&kind=submarine").doc()
	off, _ := f.Find(".active-filters a").First().Attr("href")
	if strings.Contains(off, "kind=submarine") == strings.Contains(off, "feeder=river") {
		t.Errorf("taking one off leaves %q", off)
	}
}

// TestSystemPageOfEverySystem opens each page of the demo: all its odd
// records too.
func TestSystemPageOfEverySystem(t *testing.T) {
	v := newDemoSite(t).visitor()
	var list struct {
		Systems []struct {
			Slug, Name   string
			Measurements []map[string]any
		}
	}
	if err := json.Unmarshal([]byte(v.get("/systems.json?per_page=500").body), &list); err != nil {
		t.Fatal(err)
	}
	lines := 0
	for _, s := range list.Systems {
		a := v.get("/systems/"+s.Slug).is(http.StatusOK).says(s.Name, "invented", "Sources", "History")
		d := a.doc()
		if strings.Contains(a.body, "NaN") {
			t.Errorf("%s: NaN", s.Slug)
		}
		if d.Find("svg.globe .spot").Length() != 1 || d.Find("svg.big-ribbon").Length() != 1 {
			t.Errorf("%s: no place or no ribbon", s.Slug)
		}
		if got := d.Find("#measurements tbody tr").Length(); got != len(s.Measurements) {
			t.Errorf("%s: %d measurements, %d in the JSON", s.Slug, got, len(s.Measurements))
		}
		if d.Find("#history tbody tr").Length() == 0 {
			t.Errorf("%s: no history", s.Slug)
		}
		lines += d.Find("svg[id^='plan-']").Length()
		uniqueIDs(t, s.Slug, d)
	}
	if lines == 0 {
		t.Error("no page shows a course")
	}
}

func TestSystemTwins(t *testing.T) {
	v := newDemoSite(t).visitor()
	d := v.get("/systems").doc()
	href, _ := d.Find("#systems-table tbody th a").First().Attr("href")
	for _, suffix := range []string{".json", ".geojson"} {
		a, b := v.get(href+suffix).is(http.StatusOK), v.get(href+suffix)
		if a.body != b.body || !json.Valid([]byte(a.body)) {
			t.Errorf("%s: equal questions give equal JSON", suffix)
		}
	}
	v.get("/systems/no-such-channel").is(http.StatusNotFound)
	v.get("/systems/no-such-channel.json").is(http.StatusNotFound)
	v.get("/systems/dimensions.csv").is(http.StatusOK).says("channel_width_m", "p50")
	v.get(href + "?x=1").is(http.StatusBadRequest)
}

func TestMethodsStatesWhatIsInUse(t *testing.T) {
	v := newDemoSite(t).visitor()
	v.get("/methods").is(http.StatusOK).says("7.292115", "9999", "floor_decay", "Vaes", "memory", "practice", "valley_slope_ratio", "0.1206")
}
