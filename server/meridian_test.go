package main

import (
	"context"
	"encoding/json"
	"encoding/xml"
	"errors"
	"io"
	"net/http"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"

	"fathombend/catalogue"
	"fathombend/seed"
)

// systemsJSONTotal is the number of systems under a filter, from the data twin.
func systemsTotal(t *testing.T, v *visitor, query string) int {
	t.Helper()
	var got struct {
		Total int `json:"total"`
	}
	if err := json.Unmarshal([]byte(v.get("/systems.json"+query).is(http.StatusOK).body), &got); err != nil {
		t.Fatal(err)
	}
	return got.Total
}

// TestMeridianShowsEverySystem: each accepted system is one link, wide and
// narrow, and the filter takes effect in place.
func TestMeridianShowsEverySystem(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, q := range []string{"", "?kind=river", "?abs_lat_min=50", "?fold=yes&colour=feeder", "?colour=age"} {
		d := v.get("/" + q).is(http.StatusOK).doc()
		filter := q
		if strings.Contains(q, "colour") {
			filter = ""
		}
		want := systemsTotal(t, v, filter)
		wide := d.Find("svg#meridian a[href^='/systems/']").Length()
		narrow := d.Find(".band-row .hung a[href^='/systems/']").Length()
		if wide != want || narrow != want || want == 0 {
			t.Errorf("%q: %d ribbons wide, %d narrow, %d systems", q, wide, narrow, want)
		}
		d.Find("svg#meridian a").Each(func(_ int, s *goquery.Selection) {
			if s.AttrOr("aria-label", "") == "" || s.Find("title").Text() == "" {
				t.Errorf("%q: a ribbon has no name", q)
			}
			if ref, _ := s.Find("use").Attr("href"); d.Find("defs path"+ref).Length() != 1 {
				t.Errorf("%q: shape %s is not defined once", q, ref)
			}
		})
	}
}

// The inset says which sinuosity and which rows it is of, and why it differs
// from the expectation drawn at the same latitude.
func TestMeridianInsetNamesItsFit(t *testing.T) {
	d := newDemoSite(t).visitor().get("/").is(http.StatusOK).says("peak sinuosity of a channel at 30° would be expected at", "One explanation alone, fitted to the same ").doc()
	_, said, ok := strings.Cut(d.Find(".spin p.small").Text(), "so give ")
	said, _, _ = strings.Cut(said, " at 30°")
	drawn := d.Find("svg#meridian text").FilterFunction(func(_ int, s *goquery.Selection) bool { return s.Text() == said }).Length()
	if !ok || drawn == 0 {
		t.Errorf("the inset compares itself with %q, which is not drawn", said)
	}
}

func TestMeridianTellsAncientAndRivers(t *testing.T) {
	v := newDemoSite(t).visitor()
	d := v.get("/").doc()
	rivers, ancient := systemsTotal(t, v, "?kind=river"), systemsTotal(t, v, "?age_min=5.001")
	if got := d.Find("svg#meridian use.river").Length(); got != rivers || rivers == 0 {
		t.Errorf("%d rivers drawn dashed, %d in the catalogue", got, rivers)
	}
	if got := d.Find("svg#meridian use.twin").Length(); got != ancient || ancient == 0 {
		t.Errorf("%d double strokes, %d ancient systems", got, ancient)
	}
	if d.Find("svg#meridian .expected").Length() == 0 || d.Find(".lead").Text() == "" {
		t.Error("no expected ribbon, or no answer")
	}
	if !strings.Contains(d.Find("figcaption").Text(), "Invented data") {
		t.Error("the caption says that the data are invented")
	}
}

// TestMeridianFile: the drawing alone is well-formed, with its own colours and
// the word that its data are invented.
func TestMeridianFile(t *testing.T) {
	v := newDemoSite(t).visitor()
	a := v.get("/figures/meridian.svg?colour=grade&fold=yes").is(http.StatusOK)
	d := xml.NewDecoder(strings.NewReader(a.body))
	ribbons := 0
	for {
		tok, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		if e, ok := tok.(xml.StartElement); ok && e.Name.Local == "a" {
			t.Fatal("a file has no links")
		} else if ok && e.Name.Local == "use" {
			ribbons++
		}
	}
	if ribbons < systemsTotal(t, v, "") || !strings.Contains(a.body, "Invented data") || strings.Contains(a.body, "class=") {
		t.Errorf("%d ribbons", ribbons)
	}
}

// TestFigureFilesServed: every figure comes as drawing, picture and document.
func TestFigureFilesServed(t *testing.T) {
	v := newDemoSite(t).visitor()
	for suffix, magic := range map[string]string{"svg": "<?xml", "png": "\x89PNG", "pdf": "%PDF"} {
		for _, q := range []string{"regression." + suffix + "?model=linear:coriolis&resamples=199&permutations=99", "expectation." + suffix + "?palaeolatitude=30&age=70&draws=200"} {
			if a := v.get("/figures/" + q).is(http.StatusOK); !strings.HasPrefix(a.body, magic) {
				t.Errorf("%s: %.20q", q, a.body)
			}
		}
	}
}

func TestMeridianOfNothing(t *testing.T) {
	newSite(t).visitor().get("/").is(http.StatusOK).says("no system yet", "Add a measured system", "Import a table")
	v := newDemoSite(t).visitor()
	v.get("/?sinuosity_min=99").is(http.StatusOK).says("No system in the catalogue passes this filter")
	// Two systems: too few to fit, still drawn.
	a := v.get("/?sinuosity_min=3").is(http.StatusOK)
	if strings.Contains(a.body, "NaN") {
		t.Error("NaN on a page of few systems")
	}
}

// largeSite is the program over a large invented catalogue.
func largeSite(t testing.TB, systems int) *site {
	file := filepath.Join(t.TempDir(), "large.db")
	ctx := context.Background()
	store, err := catalogue.Open(ctx, file, catalogue.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := seed.FillLarge(ctx, store, systems, seed.Both); err != nil {
		t.Fatal(err)
	}
	if err := store.Close(); err != nil {
		t.Fatal(err)
	}
	s := &site{t: t, file: file}
	s.start(serveConfig{Catalogue: file})
	return s
}

// TestMeridianOfThousands: no ribbon leaves the page, none covers another, and
// what is left out is counted.
func TestMeridianOfThousands(t *testing.T) {
	v := largeSite(t, 2000).visitor()
	d := v.get("/").is(http.StatusOK).doc()
	total := systemsTotal(t, v, "")
	drawn := d.Find("svg#meridian a[href^='/systems/']").Length()
	note := d.Find(".only-wide > p.small").Text()
	if drawn < 500 || drawn > total {
		t.Errorf("%d of %d drawn", drawn, total)
	}
	caption := d.Find("figcaption").First().Text()
	if drawn < total && !strings.Contains(note, strconv.Itoa(total-drawn)+" systems") && !strings.Contains(caption, strconv.Itoa(drawn)+" of them are drawn") {
		t.Errorf("%d of %d drawn, the note says %q, the caption %q", drawn, total, note, caption)
	}
	t.Logf("%d of %d drawn; %s", drawn, total, strings.Join(strings.Fields(note), " "))
}

// BenchmarkMeridian is the opening page of a running server on the demo.
func BenchmarkMeridian(b *testing.B) {
	v := newDemoSite(b).visitor()
	v.get("/").is(http.StatusOK)
	b.ResetTimer()
	for range b.N {
		v.get("/").is(http.StatusOK)
	}
}

// BenchmarkMeridianLarge is the same with 2,000 systems.
func BenchmarkMeridianLarge(b *testing.B) {
	v := largeSite(b, 2000).visitor()
	v.get("/").is(http.StatusOK)
	b.ResetTimer()
	for range b.N {
		v.get("/").is(http.StatusOK)
	}
}
