package main

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"net/http"
	"net/url"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"

	"fathombend/catalogue"
	"fathombend/seed"
	"fathombend/views"
)

type chartData struct {
	Systems []struct {
		Slug      string  `json:"slug"`
		Latitude  float64 `json:"latitude_deg"`
		Longitude float64 `json:"longitude_deg"`
		Step      int     `json:"step"`
	} `json:"systems"`
	Steps []views.ChartStep `json:"steps"`
}

func (v *visitor) chartData(path string) (d chartData) {
	v.t.Helper()
	if err := json.Unmarshal([]byte(v.get(path).is(http.StatusOK).body), &d); err != nil {
		v.t.Fatal(err)
	}
	return d
}

// The page without scripts: the map with every system as a link, the list with
// the same systems, and links that move it.
func TestChartWithoutScripts(t *testing.T) {
	v := newDemoSite(t).visitor()
	data := v.chartData("/chart.json")
	if len(data.Systems) == 0 {
		t.Fatal("no system")
	}
	d := v.get("/chart").is(http.StatusOK).doc()
	if n := d.Find("#chart-svg a[href^='/systems/']").Length(); n != len(data.Systems) {
		t.Errorf("%d systems on the map, %d in the data", n, len(data.Systems))
	}
	if n := d.Find("#chart-list a").Length(); n != len(data.Systems) {
		t.Errorf("%d systems in the list, %d in the data", n, len(data.Systems))
	}
	in, _ := d.Find("#chart-in").Attr("href")
	closer := v.get(in).is(http.StatusOK).doc()
	if zoom := closer.Find("#chart-map").AttrOr("data-zoom", ""); zoom != "2" {
		t.Errorf("the link to zoom in leads to zoom %s", zoom)
	}
	out, _ := closer.Find("#chart-out").Attr("href")
	if out != "/chart" {
		t.Errorf("and out again to %s", out)
	}
	// Close to a system its centreline is drawn.
	if n := v.get("/chart?at=74.5,5.8&zoom=60").is(http.StatusOK).doc().Find("#chart-svg .course").Length(); n == 0 {
		t.Error("no centreline in a close view")
	}
	polar := v.get("/chart?view=north").is(http.StatusOK).doc()
	north := 0
	for _, s := range data.Systems {
		if s.Latitude >= 30 {
			north++
		}
	}
	if n := polar.Find("#chart-svg a[href^='/systems/']").Length(); n != north {
		t.Errorf("%d systems on the north polar view, want the %d north of 30 degrees", n, north)
	}
}

// Every colouring has a key that counts all systems once.
func TestChartColours(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, c := range views.ChartColours {
		d := v.chartData("/chart.json?colour=" + c)
		n := 0
		letters := map[string]bool{}
		for _, s := range d.Steps {
			n += s.Count
			if s.Letter != "" && letters[s.Letter] {
				t.Errorf("%s: letter %s twice", c, s.Letter)
			}
			letters[s.Letter] = true
		}
		if n != len(d.Systems) {
			t.Errorf("%s: the key counts %d of %d systems", c, n, len(d.Systems))
		}
	}
}

func TestChartBadInput(t *testing.T) {
	v := newDemoSite(t).visitor()
	for q, field := range map[string]string{"view=moon": "view", "zoom=0": "zoom", "zoom=NaN": "zoom", "at=91,0": "at", "at=here": "at", "at=1": "at", "at=NaN,0": "at", "colour=red": "colour", "nope=1": "nope", "bbox=1,2": "bbox"} {
		v.get("/chart?" + q).is(http.StatusBadRequest).says(field)
		v.get("/chart.json?" + q).is(http.StatusBadRequest)
	}
	for _, q := range []string{"in=", "in=1,2,3", "in=a,b,c,d", ""} {
		v.get("/chart/lines.json?" + q).is(http.StatusBadRequest)
	}
	for _, q := range []string{"at=90,0&zoom=5000", "at=-90,180&zoom=3", "at=0,540&zoom=2", "view=north&at=-40,0&zoom=5", "view=south&at=-90,0&zoom=5000", "zoom=1.0001", "bbox=170,-20,-170,10", "bbox=-180,-90,180,90", "q=zzzz"} {
		if q == "at=0,540&zoom=2" {
			v.get("/chart?" + q).is(http.StatusBadRequest)
			continue
		}
		if a := v.get("/chart?" + q).is(http.StatusOK); strings.Contains(a.body, "NaN") || strings.Contains(a.body, "Inf") {
			t.Errorf("%s: a number that is none", q)
		}
	}
}

// The lines of a box: those of the systems there, thinned, and the filter
// holds for them too.
func TestChartLines(t *testing.T) {
	v := newDemoSite(t).visitor()
	var all struct {
		Lines []chartLineJSON `json:"lines"`
		More  int             `json:"more"`
	}
	read := func(path string) int {
		t.Helper()
		all.Lines = nil
		if err := json.Unmarshal([]byte(v.get(path).is(http.StatusOK).body), &all); err != nil {
			t.Fatal(err)
		}
		for _, l := range all.Lines {
			if len(l.Coordinates) < 2 || len(l.Coordinates) > chartLinePoints+1 {
				t.Errorf("%s has %d vertices", l.Slug, len(l.Coordinates))
			}
		}
		return len(all.Lines)
	}
	world := read("/chart/lines.json?in=-180,-90,180,90")
	if world == 0 || all.More != 0 {
		t.Fatalf("%d lines, %d more", world, all.More)
	}
	north := read("/chart/lines.json?in=-180,50,180,90")
	south := read("/chart/lines.json?in=-180,-90,180,50")
	if north == 0 || north == world || north+south < world {
		t.Errorf("%d lines north of 50 degrees and %d south of it, %d in all", north, south, world)
	}
	if n := read("/chart/lines.json?in=-180,-90,180,90&kind=river"); n >= world {
		t.Errorf("%d lines of rivers of %d", n, world)
	}
	// Over the antimeridian the box is the two boxes beside it.
	if over, sides := read("/chart/lines.json?in=170,-90,-150,90"), read("/chart/lines.json?in=170,-90,180,90")+read("/chart/lines.json?in=-180,-90,-150,90"); over == 0 || over > sides {
		t.Errorf("%d lines over the antimeridian, %d beside it", over, sides)
	}
}

// The frame of the page, as of every other: names of controls, ids, no inline
// style or script; no page is wider than its window, nothing moves after load,
// and the first load stays under its limit of 400 kB.
func TestChartFrame(t *testing.T) {
	v := newDemoSite(t).visitor()
	for _, p := range []string{"/chart", "/chart?view=south&colour=setting", "/chart?at=74.5,5.8&zoom=40"} {
		a := v.get(p).is(http.StatusOK)
		d := a.doc()
		if n := d.Find("h1").Length(); n != 1 || d.Find("[style], script:not([src])").Length() > 0 || strings.Contains(a.body, "NaN") {
			t.Errorf("%s: %d first headings, or style or script inline, or a number that is none", p, n)
		}
		uniqueIDs(t, p, d)
		labelled(t, p, d)
	}
}

func TestBrowserChartWeightAndWidth(t *testing.T) {
	s := newDemoSite(t)
	for _, width := range []int64{1280, 390, 320} {
		ctx := openBrowser(t)
		if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, 900)); err != nil {
			t.Fatal(err)
		}
		for _, p := range []string{"/chart", "/chart?view=north"} {
			open(t, ctx, s.base+p)
			waitFor(t, ctx, chartReady)
			if over := evaluate[int](t, ctx, `document.documentElement.scrollWidth - innerWidth`); over > 0 {
				t.Errorf("%s at %d: %d pixels too wide", p, width, over)
			}
			shift := evaluate[float64](t, ctx, `new Promise(r => { let sum = 0; new PerformanceObserver(l => { for (const e of l.getEntries()) sum += e.value }).observe({type: "layout-shift", buffered: true}); setTimeout(() => r(sum), 100) })`)
			if shift >= 0.02 {
				t.Errorf("%s at %d: layout shift %.3f", p, width, shift)
			}
			weight := evaluate[int](t, ctx, `[...performance.getEntriesByType("resource"), ...performance.getEntriesByType("navigation")].reduce((s, e) => s + Math.max(e.encodedBodySize, e.transferSize), 0)`)
			if weight > 400_000 {
				t.Errorf("%s at %d: %d bytes", p, width, weight)
			}
			t.Logf("%s at %d: %d kB, shift %.3f", p, width, weight/1000, shift)
		}
	}
}

// drag is a pointer drag on the map by shares of its size.
func drag(t *testing.T, ctx context.Context, x0, y0, x1, y1 float64) {
	t.Helper()
	r := evaluate[[]float64](t, ctx, `(() => { const c = document.getElementById("chart-canvas"); c.scrollIntoView({block: "center"}); const r = c.getBoundingClientRect(); return [r.left, r.top, r.width, r.height] })()`)
	at := func(fx, fy float64) (float64, float64) { return r[0] + fx*r[2], r[1] + fy*r[3] }
	ax, ay := at(x0, y0)
	steps := []chromedp.Action[chromedp.Void]{
		chromedp.MouseEvent("mouseMoved", ax, ay),
		chromedp.MouseEvent("mousePressed", ax, ay, chromedp.ButtonLeft),
	}
	for k := 1.0; k <= 6; k++ {
		x, y := at(x0+(x1-x0)*k/6, y0+(y1-y0)*k/6)
		steps = append(steps, chromedp.MouseEvent("mouseMoved", x, y, chromedp.ButtonLeft))
	}
	x, y := at(x1, y1)
	steps = append(steps, chromedp.MouseEvent("mouseReleased", x, y, chromedp.ButtonLeft))
	if err := chromedp.Do(ctx, steps...); err != nil {
		t.Fatal(err)
	}
}

const chartReady = `document.querySelector(".chart-map.drawn") !== null && /in the view/.test(document.getElementById("chart-list-count").textContent)`

// Dragging, the wheel, keys and links move the map; each state is an address
// that the server draws alike. A box over the map becomes the filter.
func TestBrowserChartMoves(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/chart")
	waitFor(t, ctx, chartReady)
	drag(t, ctx, 0.6, 0.5, 0.4, 0.5)
	waitFor(t, ctx, `new URLSearchParams(location.search).get("at")?.startsWith("0,")`)
	at := evaluate[string](t, ctx, `new URLSearchParams(location.search).get("at")`)
	var lon float64
	if _, err := fmt.Sscanf(at, "0,%g", &lon); err != nil || lon < 40 || lon > 110 {
		t.Errorf("a drag to the left by a fifth of the map leads to %q", at)
	}
	if err := chromedp.Do(ctx, chromedp.Click("#chart-in"), chromedp.Click("#chart-in")); err != nil {
		t.Fatal(err)
	}
	waitFor(t, ctx, `new URLSearchParams(location.search).get("zoom") === "4" && document.getElementById("chart-projection").textContent.includes("Lambert")`)
	evaluate[bool](t, ctx, `(document.getElementById("chart-canvas").focus(), true)`)
	if err := chromedp.Do(ctx, chromedp.KeyEvent("+")); err != nil {
		t.Fatal(err)
	}
	waitFor(t, ctx, `new URLSearchParams(location.search).get("zoom") === "6.4"`)
	// The address alone gives the same view.
	held := evaluate[string](t, ctx, `location.pathname + location.search`)
	d := s.visitor().get(held).is(http.StatusOK).doc().Find("#chart-map")
	if want := evaluate[string](t, ctx, `new URLSearchParams(location.search).get("at")`); d.AttrOr("data-at", "") != want || d.AttrOr("data-zoom", "") != "6.4" {
		t.Errorf("the server draws %s zoom %s, the browser %s", d.AttrOr("data-at", ""), d.AttrOr("data-zoom", ""), want)
	}
	evaluate[bool](t, ctx, `(document.getElementById("chart-canvas").focus(), true)`)
	if err := chromedp.Do(ctx, chromedp.KeyEvent("0")); err != nil {
		t.Fatal(err)
	}
	waitFor(t, ctx, `!location.search.includes("zoom=6")`)
}

func TestBrowserChartBox(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/chart")
	waitFor(t, ctx, chartReady)
	all := evaluate[int](t, ctx, `document.querySelectorAll("#chart-list li").length`)
	if err := chromedp.Do(ctx, chromedp.Click("#chart-box")); err != nil {
		t.Fatal(err)
	}
	drag(t, ctx, 0.05, 0.02, 0.95, 0.4)
	waitFor(t, ctx, `location.search.includes("bbox=") && `+chartReady)
	var box [4]float64
	q, err := url.ParseQuery(strings.TrimPrefix(evaluate[string](t, ctx, `location.search`), "?"))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := fmt.Sscanf(q.Get("bbox"), "%g,%g,%g,%g", &box[0], &box[1], &box[2], &box[3]); err != nil || !(box[1] < box[3]) || box[3] < 70 {
		t.Errorf("bbox %q", q.Get("bbox"))
	}
	some := evaluate[int](t, ctx, `document.querySelectorAll("#chart-list li").length`)
	if some == 0 || some >= all {
		t.Errorf("%d systems in the box, %d in all", some, all)
	}
	if n := len(s.visitor().chartData("/chart.json?bbox=" + url.QueryEscape(q.Get("bbox"))).Systems); n != some {
		t.Errorf("the list has %d systems, the data of the address %d", some, n)
	}
	if v := evaluate[string](t, ctx, `document.getElementById("f-bbox").value`); v != q.Get("bbox") {
		t.Errorf("the field says %q, the address %q", v, q.Get("bbox"))
	}
	// Without dragging: what is in the view becomes the filter, in the polar
	// view a cap.
	open(t, ctx, s.base+"/chart?view=north")
	waitFor(t, ctx, chartReady)
	if err := chromedp.Do(ctx, chromedp.Click("#chart-take")); err != nil {
		t.Fatal(err)
	}
	waitFor(t, ctx, `new URLSearchParams(location.search).get("bbox") === "-180,30,180,90"`)
}

// The map that moves and the one the server draws agree to a hundredth of a
// pixel, in every view.
func TestBrowserChartProjection(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/chart")
	waitFor(t, ctx, `window.chartMap !== undefined`)
	for _, v := range []views.ChartView{{Name: "world", Zoom: 1}, {Name: "world", Lat: 30, Lon: 170, Zoom: 2}, {Name: "world", Lat: 62, Lon: -20, Zoom: 9}, {Name: "north", Lat: 90, Zoom: 1}, {Name: "south", Lat: -70, Lon: 40, Zoom: 4}} {
		for lat := -80.0; lat <= 80; lat += 20 {
			for lon := -170.0; lon <= 170; lon += 34 {
				x, y := views.ChartPosition(v, 900, 500, lat, lon)
				got := evaluate[[]float64](t, ctx, fmt.Sprintf(`chartMap.project({name: %q, lat: %g, lon: %g, zoom: %g}, 900, 500).at(%g, %g)`, v.Name, v.Lat, v.Lon, v.Zoom, lat, lon))
				if math.Hypot(got[0]-x, got[1]-y) > 0.01 {
					t.Fatalf("%+v at %g %g: browser %.3f, server %.3f %.3f", v, lat, lon, got, x, y)
				}
			}
		}
	}
}

// Two thousand systems: the page and its data stay light, the map draws them
// all, and a press on one opens its card.
func TestBrowserChartOfTwoThousand(t *testing.T) {
	s := newSite(t, func(file string) {
		store, err := catalogue.Open(context.Background(), file, catalogue.Options{})
		if err != nil {
			t.Fatal(err)
		}
		defer store.Close()
		if err := seed.FillLarge(context.Background(), store, 2000, seed.Both); err != nil {
			t.Fatal(err)
		}
	})
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/chart")
	waitFor(t, ctx, chartReady)
	if got := evaluate[string](t, ctx, `document.getElementById("chart-list-count").textContent`); !strings.HasPrefix(got, "2000 of 2000 in the view") {
		t.Errorf("the list says %q", got)
	}
	weight := evaluate[int](t, ctx, `[...performance.getEntriesByType("resource"), ...performance.getEntriesByType("navigation")].reduce((s, e) => s + Math.max(e.encodedBodySize, e.transferSize), 0)`)
	if weight > 400_000 {
		t.Errorf("%d bytes for the first load", weight)
	}
	t.Logf("%d kB", weight/1000)
	shift := evaluate[float64](t, ctx, `new Promise(r => { let sum = 0; new PerformanceObserver(l => { for (const e of l.getEntries()) sum += e.value }).observe({type: "layout-shift", buffered: true}); setTimeout(() => r(sum), 100) })`)
	if shift >= 0.02 {
		t.Errorf("layout shift %.3f", shift)
	}
	evaluate[bool](t, ctx, `(document.getElementById("chart-canvas").focus(), true)`)
	if err := chromedp.Do(ctx, chromedp.KeyEvent("\r")); err != nil {
		t.Fatal(err)
	}
	waitFor(t, ctx, `document.activeElement.closest(".chart-card") !== null && document.activeElement.getAttribute("href").startsWith("/systems/")`)
}

// Without scripts the map, its links and its list are there, and nothing that
// needs scripts is offered.
func TestBrowserChartWithoutScripts(t *testing.T) {
	s := newDemoSite(t)
	b := s.browse(t)
	if _, err := chromedp.Call(b.ctx, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true}); err != nil {
		t.Fatal(err)
	}
	b.goTo("/chart")
	b.press("#chart-in")
	if got := b.path(); got != "/chart" {
		t.Errorf("at %s", got)
	}
	b.says("Where are the channels?", "in the view")
	b.press("#chart-list a")
	if got := b.path(); !strings.HasPrefix(got, "/systems/") {
		t.Errorf("the list leads to %s", got)
	}
}
