package catalogue

import (
	"net/url"
	"reflect"
	"slices"
	"strings"
	"testing"
)

// filterRows are rows that differ in everything that can be filtered on.
func filterRows() []Row {
	a := row("Amber", -40, -170, 1.2)
	a.ParentDeposit, a.Basin, a.Kind, a.Margin, a.Feeder = "Amber Fan", "Invented Basin", "submarine", "passive", "river"
	a.Setting, a.Grain, a.Confinement, a.Activity, a.Burial, a.Survey, a.Extraction, a.Grade = "fan", "mud", "confined", "active", "seafloor", "multibeam", "grid", "surveyed"
	a.ValleySlope, a.ChannelWidthM = Num(0.002), Num(300)
	b := row("Böhm", 12.5, 175, 2.4)
	b.ParentDeposit, b.Basin, b.Kind, b.Margin, b.Feeder = "Böhm Fan", "Other Basin", "submarine", "active", "shelf"
	b.Setting, b.Grain, b.Confinement, b.Activity, b.Burial, b.Survey, b.Extraction, b.Grade = "slope", "sand", "unconfined", "relict", "buried", "seismic_3d", "figure", "traced"
	b.ValleySlope, b.ChannelWidthM, b.AgeMa, b.Source = Num(0.01), Num(900), Num(70), "Second Survey 2:2 (2021)"
	c := row("Cedar", 60, 10, 1.6)
	c.Kind, c.Setting, c.Burial, c.Survey, c.Notes = "river", "river_valley", "buried", "satellite", `says "quoted" words`
	return []Row{a, b, c}
}

func TestFilterEachParameter(t *testing.T) {
	s := open(t)
	insert(t, s, filterRows()...)
	for query, want := range map[string]string{
		"":               "Amber Böhm Cedar",
		"kind=submarine": "Amber Böhm", "kind=submarine&kind=river": "Amber Böhm Cedar", "kind=lacustrine": "",
		"setting=fan&setting=slope": "Amber Böhm", "margin=active": "Böhm", "feeder=river": "Amber", "grain=sand": "Böhm",
		"confinement=confined": "Amber", "activity=relict": "Böhm", "burial=buried": "Böhm Cedar", "survey=satellite": "Cedar",
		"extraction=grid": "Amber", "grade=traced": "Böhm", "basin=Other+Basin": "Böhm", "parent_deposit=Amber+Fan&parent_deposit=B%C3%B6hm+Fan": "Amber Böhm",
		"source=Second+Survey+2:2+(2021)": "Böhm", "source=none": "",
		"lat_min=-40": "Amber Böhm Cedar", "lat_min=-39.9": "Böhm Cedar", "lat_max=12.5": "Amber Böhm",
		"abs_lat_min=40": "Amber Cedar", "abs_lat_max=40": "Amber Böhm",
		"slope_min=0.005": "Böhm", "slope_max=0.005": "Amber", "sinuosity_min=1.6": "Böhm Cedar", "sinuosity_max=1.6": "Amber Cedar",
		"width_min=500": "Böhm", "width_max=500": "Amber",
		"age_min=1": "Böhm", "age_max=1": "Amber", // Cedar is buried and of no known age
		"bbox=170,-50,-165,20": "Amber Böhm", "bbox=-180,-90,180,90": "Amber Böhm Cedar", "bbox=0,50,20,70": "Cedar", "bbox=-175,-50,-165,-30": "Amber",
		"q=amber": "Amber", "q=bohm": "Böhm", "q=survey+20": "Amber Böhm Cedar", "q=second": "Böhm", "q=quoted": "Cedar", "q=%22quoted": "Cedar",
		"q=amber+second": "", "q=amb": "Amber", "q=NEAR(a+b)": "", "q=***": "", "q=a+OR+b": "",
		"sort=sinuosity": "Amber Cedar Böhm", "sort=-latitude_deg": "Cedar Böhm Amber", "sort=channel_width_m": "Amber Böhm Cedar",
		"sort=-channel_width_m": "Böhm Amber Cedar", "sort=parent_deposit": "Amber Böhm Cedar", "sort=grade": "Amber Böhm Cedar", "sort=system_name": "Amber Böhm Cedar",
		"kind=submarine&sinuosity_min=2&q=slope+bohm": "", "kind=submarine&sinuosity_min=2&q=bohm": "Böhm",
	} {
		q, err := url.ParseQuery(query)
		if err != nil {
			t.Fatal(query, err)
		}
		f, err := ParseFilter(q)
		if err != nil {
			t.Errorf("%s: %v", query, err)
			continue
		}
		rows, err := s.Rows(ctx, f)
		if err != nil {
			t.Errorf("%s: %v", query, err)
			continue
		}
		var got []string
		for _, r := range rows {
			got = append(got, r.SystemName)
		}
		if g := strings.Join(got, " "); g != want {
			t.Errorf("%s: got %q, want %q", query, g, want)
		}
		systems, total, err := s.Systems(ctx, f)
		if err != nil || total != len(rows) || len(systems) != len(rows) {
			t.Errorf("%s: systems %d of %d, %v", query, len(systems), total, err)
		}
		if f.Sort != "" {
			for i := range systems {
				if systems[i].Name != got[i] {
					t.Errorf("%s: system %d is %s, want %s", query, i, systems[i].Name, got[i])
				}
			}
		}
		back, err := ParseFilter(f.Values())
		if err != nil || !reflect.DeepEqual(back, f) {
			t.Errorf("%s: the way back gives %+v %v", query, back, err)
		}
	}
}

func TestParseFilterRefuses(t *testing.T) {
	for query, field := range map[string]string{
		"kind=canal": "kind", "grade=best": "grade", "lat_min=91": "lat_min", "lat_max=x": "lat_max", "abs_lat_min=-1": "abs_lat_min",
		"slope_min=0,1": "slope_min", "sinuosity_max=NaN": "sinuosity_max", "age_min=-1": "age_min", "width_min=1&width_min=2": "width_min",
		"bbox=1,2,3": "bbox", "bbox=1,2,3,x": "bbox", "bbox=0,10,5,-10": "bbox", "bbox=190,0,200,1": "bbox", "bbox=0,0,0,91": "bbox",
		"sort=colour": "sort", "sort=--sinuosity": "sort", "page=0": "page", "page=x": "page", "per_page=501": "per_page",
		"lat_min=5&lat_max=4": "lat_min", "release=a/b": "release", "q=" + strings.Repeat("a", 301): "q", "q=%ff": "q",
		"source=%ff": "source", strings.Repeat("basin=x&", 101): "basin",
	} {
		q, _ := url.ParseQuery(query)
		_, err := ParseFilter(q)
		var e *Error
		if err == nil {
			t.Errorf("%.60s was accepted", query)
			continue
		}
		if e = err.(*Error); e.Code != Invalid || e.Field != field || e.Expected == "" {
			t.Errorf("%.60s: %v", query, err)
		}
		if field == "kind" && !strings.Contains(e.Expected, "submarine, river, lacustrine") {
			t.Errorf("%s does not list what is allowed: %s", query, e.Expected)
		}
	}
	if _, err := ParseFilter(url.Values{"lat_min": {""}, "kind": {"", " "}, "other": {"x"}}); err != nil {
		t.Errorf("empty values as forms send them: %v", err)
	}
}

func TestUnknownReleaseIsNamed(t *testing.T) {
	s := open(t)
	if _, err := s.Rows(ctx, Filter{Release: "2031-1"}); CodeOf(err) != Invalid || err.(*Error).Field != "release" {
		t.Error(err)
	}
}

// A place on the antimeridian belongs to the boxes on both sides of it, and the
// tree's 32-bit boxes never decide.
func TestBoxEdges(t *testing.T) {
	s := open(t)
	places := []struct{ lat, lon float64 }{{0, 180}, {1, -180}, {2, 190}, {3, 179.999999999}, {4, 0.1}, {5, 360}}
	for i, p := range places {
		insert(t, s, row("Edge "+string(rune('A'+i)), p.lat, p.lon, 1.5))
	}
	for box, want := range map[string]string{
		"170,-90,180,90": "A B D", "-180,-90,-169,90": "A B C", "179,-90,-179,90": "A B D", "0,-90,0.1,90": "E F", "0,-90,0.09999999999,90": "F",
		"180,-90,-180,90": "A B", "-180,-90,180,90": "A B C D E F",
	} {
		b, err := ParseBBox(box)
		if err != nil {
			t.Fatal(err)
		}
		rows, err := s.Rows(ctx, Filter{BBox: b})
		if err != nil {
			t.Fatal(err)
		}
		var got []string
		for _, r := range rows {
			got = append(got, strings.TrimPrefix(r.SystemName, "Edge "))
		}
		if g := strings.Join(got, " "); g != want {
			t.Errorf("%s: %q, want %q", box, g, want)
		}
	}
}

func TestPaging(t *testing.T) {
	s := open(t)
	insert(t, s, many(30)...)
	var seen []string
	for page := 1; page <= 4; page++ {
		systems, total, err := s.Systems(ctx, Filter{Page: page, PerPage: 9, Sort: "-sinuosity"})
		if err != nil || total != 30 {
			t.Fatal(total, err)
		}
		for _, y := range systems {
			seen = append(seen, y.Slug)
			if len(y.Measurements) != 2 || y.Best().Grade != "surveyed" {
				t.Errorf("%s: best is %q of %d", y.Slug, y.Best().Grade, len(y.Measurements))
			}
		}
	}
	slices.Sort(seen)
	if len(slices.Compact(seen)) != 30 {
		t.Errorf("pages show %d systems", len(seen))
	}
	rows, total, err := s.RowsPage(ctx, Filter{Page: 2, PerPage: 50})
	if err != nil || total != 60 || len(rows) != 10 {
		t.Error(len(rows), total, err)
	}
	if systems, total, err := s.Systems(ctx, Filter{Page: 99}); err != nil || total != 30 || len(systems) != 0 {
		t.Error("beyond the end:", len(systems), total, err)
	}
}

func TestFacets(t *testing.T) {
	s := open(t)
	insert(t, s, filterRows()...)
	facets, err := s.Facets(ctx, Filter{Choices: map[string][]string{"kind": {"submarine"}, "basin": {"Nowhere"}}})
	if err != nil || len(facets) != len(ChoiceParameters) {
		t.Fatal(len(facets), err)
	}
	got := map[string][]FacetValue{}
	for _, f := range facets {
		got[f.Column] = f.Values
	}
	// The choices of basin leave no system to the others, and are listed.
	if !reflect.DeepEqual(got["basin"], []FacetValue{{"Invented Basin", 1}, {"Other Basin", 1}, {"Nowhere", 0}}) {
		t.Error(got["basin"])
	}
	if len(got["setting"]) != 0 {
		t.Error(got["setting"])
	}
	facets, _ = s.Facets(ctx, Filter{Choices: map[string][]string{"kind": {"submarine"}}})
	if v := facets[0].Values; !reflect.DeepEqual(v, []FacetValue{{"submarine", 2}, {"river", 1}}) {
		t.Errorf("a column keeps the counts of its other choices: %v", v)
	}
}

// Each count is the number of systems found when that choice alone is picked
// in its column, the rest of the filter unchanged.
func TestFacetsCountWhatTheyPromise(t *testing.T) {
	s := open(t)
	insert(t, s, many(60)...)
	for name, f := range map[string]Filter{
		"all":     {},
		"choices": {Choices: map[string][]string{"feeder": {"river", "shelf"}, "setting": {"fan"}, "grade": {"surveyed"}}},
		"numbers": {SinuosityMin: Num(1.6), LatMax: Num(0), Choices: map[string][]string{"grain": {"mud"}}},
		"text":    {Text: "invented 0001"},
	} {
		facets, err := s.Facets(ctx, f)
		if err != nil {
			t.Fatal(err)
		}
		for _, facet := range facets {
			for _, v := range facet.Values {
				g := f
				g.Choices = map[string][]string{}
				for k, x := range f.Choices {
					g.Choices[k] = x
				}
				g.Choices[facet.Column] = []string{v.Value}
				if _, total, err := s.Systems(ctx, g); err != nil || total != v.Count {
					t.Errorf("%s: %s=%s counts %d, finds %d, %v", name, facet.Column, v.Value, v.Count, total, err)
				}
			}
		}
	}
	// A change is counted at once.
	insert(t, s, row("One more", 1, 2, 1.5))
	facets, _ := s.Facets(ctx, Filter{})
	if facets[0].Values[0].Count != 61 {
		t.Errorf("%v", facets[0])
	}
}

func TestDimensionQuantiles(t *testing.T) {
	s := open(t)
	var rows []Row
	for i := range 5 {
		r := row("Dim", float64(i), 0, 1.5)
		r.ChannelWidthM = Num(float64(i+1) * 100)
		if i > 0 {
			r.ChannelDepthM = Num(10)
		}
		rows = append(rows, r)
	}
	insert(t, s, rows...)
	got, err := s.DimensionQuantiles(ctx, Filter{})
	if err != nil {
		t.Fatal(err)
	}
	// Type 7 by hand: 100..500 in five: p10 at 1 + 4*0.1 = 1.4 -> 140.
	if w := got[0]; w.Name != "channel_width_m" || w.N != 5 || w.P10.V != 140 || w.P25.V != 200 || w.P50.V != 300 || w.P75.V != 400 || w.P90.V != 460 {
		t.Errorf("%+v", w)
	}
	if w := got[2]; w.Name != "width_depth" || w.N != 4 || w.P50.V != 35 {
		t.Errorf("%+v", w)
	}
	if w := got[5]; w.N != 0 || w.P50.Valid {
		t.Errorf("no rows give no quantile: %+v", w)
	}
}

func FuzzParseFilter(f *testing.F) {
	for _, q := range []string{"kind=river&bbox=170,-10,-170,10", "q=%22a*%20OR%20b", "sort=-sinuosity&page=2", "lat_min=1e400", "slope_min=-0&age_max=5", "q=%00%cc%81"} {
		f.Add(q)
	}
	s := open(f)
	insert(f, s, filterRows()...)
	f.Fuzz(func(t *testing.T, query string) {
		q, err := url.ParseQuery(query)
		if err != nil {
			return
		}
		filter, err := ParseFilter(q)
		if err != nil {
			if CodeOf(err) != Invalid {
				t.Fatal(err)
			}
			return
		}
		back, err := ParseFilter(filter.Values())
		if err != nil || !reflect.DeepEqual(back.Values(), filter.Values()) {
			t.Fatalf("the way back: %v %v", filter.Values(), err)
		}
		if _, _, err := s.Systems(ctx, filter); err != nil && CodeOf(err) != Invalid {
			t.Fatalf("%q: %v", query, err)
		}
	})
}
