package main

import (
	"bytes"
	"encoding/json"
	"image/png"
	"math"
	"net/http"
	"net/url"
	"regexp"
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

// figureQuestions are every figure there is, of the demo.
func figureQuestions(t *testing.T, v *visitor) map[string]string {
	t.Helper()
	fits := "model=linear:valley_slope&model=exponential:valley_slope&model=linear:coriolis&model=broken_line:abs_latitude&joint=valley_slope,abs_latitude&resamples=199&permutations=99&seed=7"
	target := "palaeolatitude=28&palaeolatitude_se=2&unit=Late+Cretaceous&draws=300&seed=3&observed_sinuosity=1.7"
	out := map[string]string{"meridian": "", "meridian folded": "fold=yes&colour=grade", "chart": "", "chart near": "at=74.5,5.8&zoom=40", "chart south": "view=south&colour=feeder"}
	for _, panel := range []string{"fit:valley_slope", "model:exponential:valley_slope", "model:linear:coriolis", "r_squared", "predicted", "residuals", "influence", "shares", "breakpoint"} {
		out["regression "+panel] = fits + "&panel=" + panel
	}
	for _, panel := range []string{"ribbons", "explanations", "day_length"} {
		out["expectation "+panel] = target + "&panel=" + panel
	}
	var lines struct {
		Lines []chartLineJSON `json:"lines"`
	}
	if err := json.Unmarshal([]byte(v.get("/chart/lines.json?in=-180,-90,180,90").is(http.StatusOK).body), &lines); err != nil || len(lines.Lines) == 0 {
		t.Fatal("the demo has lines", err)
	}
	for _, panel := range []string{"plan", "windows", "depth", "fit"} {
		out["system "+panel] = "system=" + lines.Lines[0].Slug + "&panel=" + panel
	}
	return out
}

func figureText(svg string) string {
	plain := regexp.MustCompile(`<(title|desc)>[^<]*</(title|desc)>`).ReplaceAllString(svg, "")
	return strings.Join(strings.Fields(regexp.MustCompile(`<[^>]*>`).ReplaceAllString(strings.ReplaceAll(plain, "</text>", " "), "")), " ")
}

// Every figure comes as drawing, picture and document, at both widths of a
// page; equal questions give equal bytes; nothing in it is no number.
func TestEveryFigureAsFile(t *testing.T) {
	v := newDemoSite(t).visitor()
	for name, q := range figureQuestions(t, v) {
		page, _, _ := strings.Cut(name, " ")
		for width, mm := range map[string]float64{"single": 85, "double": 175} {
			at := func(kind string) string { return "/figures/" + page + "." + kind + "?" + q + "&width=" + width }
			svg := v.get(at("svg")).is(http.StatusOK)
			if csp := svg.header.Get("Content-Security-Policy"); strings.Contains(csp, "unsafe") {
				t.Errorf("%s: policy %q", name, csp)
			}
			for _, bad := range []string{"NaN", "Inf", "class=", "<style", "<a ", "style="} {
				if strings.Contains(svg.body, bad) {
					t.Errorf("%s %s: %s in the file", name, width, bad)
				}
			}
			if !strings.Contains(svg.body, `width="`+map[string]string{"single": "85mm", "double": "175mm"}[width]+`"`) {
				t.Errorf("%s %s: %.200s", name, width, svg.body)
			}
			raster, err := png.DecodeConfig(strings.NewReader(v.get(at("png")).is(http.StatusOK).body))
			if want := mm / 25.4 * 300; err != nil || math.Abs(float64(raster.Width)-want) > 1 {
				t.Errorf("%s %s: %d pixels wide, want %.0f (%v)", name, width, raster.Width, want, err)
			}
			one, two := v.get(at("pdf")).is(http.StatusOK), v.get(at("pdf")).is(http.StatusOK)
			if !strings.HasPrefix(one.body, "%PDF-") || one.body != two.body {
				t.Errorf("%s %s: the document is not the same twice", name, width)
			}
			// A journal page is 230 mm tall or so (common practice, no source).
			m := regexp.MustCompile(`height="([\d.]+)mm"`).FindStringSubmatch(svg.body)
			if m == nil || len(m[1]) > 6 || m[1] > "250" && len(m[1]) > 5 {
				t.Errorf("%s %s: height %v", name, width, m)
			}
		}
	}
}

// The captions say what a reader of a paper needs: rows, clusters, resamples,
// seed, where the rows are from, whose limits, and that they are invented.
func TestFigureCaptions(t *testing.T) {
	v := newDemoSite(t).visitor()
	for name, q := range figureQuestions(t, v) {
		page, panel, _ := strings.Cut(name, " ")
		text := figureText(v.get("/figures/" + page + ".svg?" + q + "&width=double").is(http.StatusOK).body)
		want := []string{"Fathombend " + Version}
		if panel != "day_length" {
			want = append(want, "Catalogue at revision", "nvented")
		}
		switch page {
		case "regression":
			want = append(want, " rows of ", " clusters (by parent deposit)", "199 resamples of whole clusters, seed 7", "model=linear:coriolis")
			if strings.Contains(panel, ":") {
				want = append(want, "which is not that of one new system", "R²")
			}
		case "expectation":
			want = append(want, "palaeolatitude=28")
			if panel != "day_length" {
				want = append(want, " rows in ", "for one new system", "300 draws, seed 3")
			}
		case "meridian":
			want = append(want, "of one new submarine system", "seed 1", " clusters")
		case "chart":
			want = append(want, "equal-area", "Natural Earth")
			if panel == "" {
				want[len(want)-2] = "Equal Earth"
			}
		}
		for _, w := range want {
			if !strings.Contains(text, w) {
				t.Errorf("%s does not say %q:\n%s", name, w, text)
			}
		}
	}
}

// Bad questions are refused with the name of the field.
func TestFigureBadInput(t *testing.T) {
	v := newDemoSite(t).visitor()
	for q, field := range map[string]string{
		"meridian.png?width=triple": "width", "chart.pdf?width=0": "width", "chart.svg?zoom=x": "zoom", "system.svg": "system",
		"regression.svg?model=linear:coriolis&panel=model:linear:abs_latitude&resamples=199": "panel", "expectation.png?palaeolatitude=10&width=x": "width",
		"system.svg?system=a&nope=1": "nope",
	} {
		if a := v.get("/figures/" + q); a.status != http.StatusBadRequest {
			t.Errorf("%s: status %d", q, a.status)
		} else {
			a.says(field)
		}
	}
	v.get("/figures/system.png?system=no-such-channel").is(http.StatusNotFound)
	v.get("/figures/meridian.gif").is(http.StatusNotFound)
	// Nothing to draw is a sentence, not an error.
	for _, q := range []string{"meridian.pdf?sinuosity_min=99", "chart.png?sinuosity_min=99"} {
		v.get("/figures/" + q).is(http.StatusOK)
	}
}

// Every link to a figure on the pages leads to a file of its kind, and the file
// is called by its name.
func TestFigureLinksOnPages(t *testing.T) {
	v := newDemoSite(t).visitor()
	var system string
	for name, q := range figureQuestions(t, v) {
		if name == "system plan" {
			u, _ := url.ParseQuery(q)
			system = u.Get("system")
		}
	}
	for page, least := range map[string]int{
		"/": 6, "/chart": 6, "/systems/" + system: 24,
		"/regression?model=linear:coriolis&model=exponential:coriolis&resamples=199&permutations=99&seed=1": 36,
		"/expectation?palaeolatitude=28&age=70&draws=200":                                                   18,
	} {
		d := v.get(page).is(http.StatusOK).doc()
		links := d.Find("a[href^='/figures/']")
		if links.Length() < least {
			t.Errorf("%s: %d links to figures, want at least %d", page, links.Length(), least)
		}
		links.Each(func(i int, a *goquery.Selection) {
			href, file := a.AttrOr("href", ""), a.AttrOr("download", "")
			if a.AttrOr("aria-label", "") == "" || file == "" {
				t.Errorf("%s: %s has no name", page, href)
			}
			if i%5 > 0 { // each kind and width, without asking for all
				return
			}
			magic := map[string]string{"svg": "<?xml", "png": "\x89PNG", "pdf": "%PDF"}[file[len(file)-3:]]
			if b := v.get(href).is(http.StatusOK).body; !strings.HasPrefix(b, magic) || magic == "" {
				t.Errorf("%s: %s is no %s", page, href, file)
			}
		})
	}
	// A target sent in a body stays out of addresses.
	d := v.post("/expectation", url.Values{"palaeolatitude": {"28"}, "age": {"70"}, "draws": {"200"}}).is(http.StatusOK).doc()
	if n := d.Find("a[href^='/figures/expectation']").Length(); n > 0 {
		t.Errorf("%d links hold a confidential target", n)
	}
	form := d.Find("form[action='/figures/expectation.svg']").First()
	q := url.Values{"width": {"single"}}
	form.Find("input[type=hidden]").Each(func(_ int, s *goquery.Selection) { q.Add(s.AttrOr("name", ""), s.AttrOr("value", "")) })
	if b := v.post("/figures/expectation.pdf", q).is(http.StatusOK).body; !bytes.HasPrefix([]byte(b), []byte("%PDF")) {
		t.Error("the form gives no document")
	}
}
