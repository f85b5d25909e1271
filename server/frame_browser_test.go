package main

import (
	"context"
	"encoding/json"
	"fmt"
	"strconv"
	"testing"

	"github.com/chromedp/chromedp"
)

func evaluate[T any](t *testing.T, ctx context.Context, js string) T {
	t.Helper()
	v, err := chromedp.Run(ctx, chromedp.Evaluate[T](js, chromedp.EvalAwaitPromise))
	if err != nil {
		t.Fatalf("%s: %v", js, err)
	}
	return v
}

func open(t *testing.T, ctx context.Context, address string) {
	t.Helper()
	if err := chromedp.Do(ctx, chromedp.Navigate(address)); err != nil {
		t.Fatal(err)
	}
}

// Changing a control updates the page in place: the address follows, the focus
// stays, and going back shows what was there before.
func TestBrowserFilterInPlace(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/")
	all := evaluate[int](t, ctx, `document.querySelectorAll("#meridian a").length`)
	evaluate[bool](t, ctx, `(() => { window.stayed = true; const c = document.getElementById("m-colour"); c.focus(); c.value = "grade";
		c.dispatchEvent(new Event("change", {bubbles: true})); return true })()`)
	waitFor(t, ctx, `location.search.includes("colour=grade") && document.querySelector(".key").textContent.includes("Grade")`)
	if id := evaluate[string](t, ctx, `document.activeElement.id`); id != "m-colour" {
		t.Errorf("the focus went to %q", id)
	}
	evaluate[bool](t, ctx, `(() => { [...document.querySelectorAll("main details")].forEach(d => d.open = true);
		const c = document.querySelector('input[name=kind][value=river]'); c.focus(); c.click(); return true })()`)
	waitFor(t, ctx, `location.search.includes("kind=river")`)
	rivers := evaluate[int](t, ctx, `document.querySelectorAll("#meridian a").length`)
	if rivers == 0 || rivers >= all {
		t.Errorf("%d ribbons of %d after asking for rivers", rivers, all)
	}
	if !evaluate[bool](t, ctx, `window.stayed === true && document.activeElement.name === "kind"`) {
		t.Error("the page was loaded anew, or the focus was lost")
	}
	evaluate[bool](t, ctx, `(history.back(), true)`)
	waitFor(t, ctx, `!location.search.includes("kind=river")`)
	waitFor(t, ctx, `document.querySelectorAll("#meridian a").length > `+strconv.Itoa(rivers))
}

// Limits of the first load of a page: 200 kB compressed, 8 requests, a layout
// shift under 0.02; and no page is wider than a phone.
func TestBrowserWeightShiftAndWidth(t *testing.T) {
	s := newDemoSite(t)
	for _, width := range []int64{1280, 390, 320} {
		ctx := openBrowser(t)
		if err := chromedp.Do(ctx, chromedp.EmulateViewport(width, 900)); err != nil {
			t.Fatal(err)
		}
		for _, p := range append(openPages, firstSystem(t, s)) {
			open(t, ctx, s.base+p)
			evaluate[bool](t, ctx, `document.fonts.ready.then(() => new Promise(r => setTimeout(() => r(true), 150)))`)
			if over := evaluate[int](t, ctx, `document.documentElement.scrollWidth - innerWidth`); over > 0 {
				t.Errorf("%s at %d: %d pixels too wide", p, width, over)
			}
			shift := evaluate[float64](t, ctx, `new Promise(r => { let sum = 0; new PerformanceObserver(l => { for (const e of l.getEntries()) sum += e.value }).observe({type: "layout-shift", buffered: true}); setTimeout(() => r(sum), 100) })`)
			if shift >= 0.02 {
				t.Errorf("%s at %d: layout shift %.3f", p, width, shift)
			}
			if width != 1280 {
				continue
			}
			requests := evaluate[int](t, ctx, `performance.getEntriesByType("resource").length + 1`)
			weight := evaluate[int](t, ctx, `[...performance.getEntriesByType("resource"), ...performance.getEntriesByType("navigation")].reduce((s, e) => s + Math.max(e.encodedBodySize, e.transferSize), 0)`)
			if requests > 8 || weight > 200_000 {
				t.Errorf("%s: %d requests, %d bytes", p, requests, weight)
			}
			t.Logf("%-28s %d requests, %d kB", p, requests, weight/1000)
		}
	}
}

// The tables of measurements fit a window of 1280 pixels, all columns in sight;
// the levels of a measured line fit a phone.
func TestBrowserTablesFit(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	over := `Math.max(...[...document.querySelectorAll(".scroll:has(%s)")].map(e => e.scrollWidth - e.clientWidth))`
	for _, p := range []struct{ path, table string }{{"/systems", "#systems-table"}, {"/systems?page=2", "#systems-table"}, {"/systems/xanthuvel-channel", "#measurements"}, {"/systems/gwendrasse-deep-sea-channel", "#measurements"}} {
		open(t, ctx, s.base+p.path)
		evaluate[bool](t, ctx, `document.fonts.ready.then(() => true)`)
		if o := evaluate[int](t, ctx, fmt.Sprintf(over, p.table)); o > 0 {
			t.Errorf("%s: the table is %d pixels wider than its place", p.path, o)
		}
	}
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(390, 844)); err != nil {
		t.Fatal(err)
	}
	open(t, ctx, s.base+"/measure")
	line, err := json.Marshal(sineKML(80))
	if err != nil {
		t.Fatal(err)
	}
	evaluate[bool](t, ctx, `(() => { const f = document.getElementById("measure-form"); f.elements.line.value = `+string(line)+`; f.elements.line.dispatchEvent(new Event("input", {bubbles: true})); f.requestSubmit(); return true })()`)
	waitFor(t, ctx, `!!document.querySelector('[aria-label="Sinuosity"] table')`)
	if o := evaluate[int](t, ctx, fmt.Sprintf(over, `.interval`)); o > 0 {
		t.Errorf("the limits of the levels go %d pixels past the page", o)
	}
}

func firstSystem(t *testing.T, s *site) string {
	t.Helper()
	href, _ := s.visitor().get("/systems").doc().Find("#systems-table tbody th a").First().Attr("href")
	return href
}

// The keyboard alone: the first stop skips to the content, a ribbon's name is
// seen when it has the focus.
func TestBrowserKeyboard(t *testing.T) {
	s := newDemoSite(t)
	ctx := openBrowser(t)
	open(t, ctx, s.base+"/")
	if err := chromedp.Do(ctx, chromedp.KeyEvent("\t")); err != nil {
		t.Fatal(err)
	}
	if got := evaluate[string](t, ctx, `document.activeElement.className`); got != "skip" {
		t.Errorf("the first stop is %q", got)
	}
	tip := evaluate[string](t, ctx, `(() => { const a = document.querySelector("#meridian a"); a.focus(); return getComputedStyle(a.querySelector(".tip")).visibility })()`)
	if tip != "visible" {
		t.Errorf("the name of a focused ribbon is %s", tip)
	}
}
