package main

import (
	"context"
	_ "embed"
	"flag"
	"fmt"
	"net/url"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/network"
	"github.com/chromedp/chromedp"
)

// The checker of accessibility rules, see testdata/axe/README.
//
//go:embed testdata/axe/axe.min.js
var axe string

// The rules of WCAG 2.0, 2.1 and 2.2, levels A and AA; and those of them that
// look at colours, which are all that can differ between the two themes: they
// have the same markup in the same places.
const (
	axeAll     = `{type: "tag", values: ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22a", "wcag22aa"]}`
	axeColours = `{type: "rule", values: ["color-contrast", "link-in-text-block"]}`
)

const axeRun = `axe.run(document, {runOnly: %s, resultTypes: ["violations"]})
	.then(r => ({rules: r.passes.length + r.violations.length, faults: r.violations.map(v => v.id + " (" + v.help + "), " + v.nodes.length + " times: " +
		v.nodes.slice(0, 3).map(n => n.target.join(" ") + " " + [...n.any, ...n.all, ...n.none].map(c => c.message).join(", ")).join("; "))}))`

type axeAnswer struct {
	Rules  int      `json:"rules"`
	Faults []string `json:"faults"`
}

var (
	pictures  = flag.String("pictures", "", "folder for a picture of every page, in both themes at both widths")
	paint     = flag.Bool("paint", false, "also time the largest paint of every page on a slow line (on a quiet machine)")
	onlyPages = flag.String("pages", "", "look only at the pages whose name this regular expression finds")
)

// Limits of the first load of a page: requests, and bytes as they travel. The
// chart brings its map along.
const (
	mostRequests   = 8
	mostBytes      = 200_000
	mostBytesChart = 400_000
	mostOfChart    = 16
	mostShift      = 0.02
)

// loaded is what a first load of a page cost.
type loaded struct {
	Requests int     `json:"requests"`
	Bytes    int     `json:"bytes"`
	Shift    float64 `json:"shift"`
	Over     int     `json:"over"` // pixels that the page is too wide
}

const measureLoad = `document.fonts.ready.then(() => new Promise(done => setTimeout(() => {
	let shift = 0;
	new PerformanceObserver(l => { for (const e of l.getEntries()) shift += e.value }).observe({type: "layout-shift", buffered: true});
	setTimeout(() => {
		const all = [...performance.getEntriesByType("resource"), ...performance.getEntriesByType("navigation")];
		done({requests: all.length, bytes: all.reduce((s, e) => s + Math.max(e.encodedBodySize, e.transferSize), 0), shift,
			over: Math.max(0, document.documentElement.scrollWidth - innerWidth)})
	}, 60)
}, 120)))`

// Every page, for everyone who can see it, in both themes, on a desk and on a
// phone: no rule of WCAG 2.2 A and AA broken, nothing written to the console,
// not wider than its window (320 pixels is 1280 at a zoom of 400 %), no shift
// after the load, and light enough for a ship's connection.
func TestBrowserEveryPage(t *testing.T) {
	h := newHouse(t)
	var rows []string
	wanted := regexp.MustCompile(*onlyPages)
	for _, who := range []string{"reader", "contributor", "curator", "keeper", "empty"} {
		b := &houseTab{h: h, tab: tab{h.site, openBrowserFor(t, 12*time.Minute, "status of 4")}}
		if who == "empty" {
			b.site = h.empty
		}
		b.cookies(h.who[who])
		for _, p := range h.pages {
			if p.who == who && wanted.MatchString(p.name) {
				if p.act == "" {
					h.ready(p)
				}
				rows = append(rows, b.look(t, p))
			}
		}
	}
	t.Logf("faults by axe-core at two widths, light and dark; first load; largest paint in seconds at 1.6 Mbit/s and 150 ms\n%-24s %-12s %6s %6s %6s %6s %5s %9s %8s %6s %6s\n%s", "page", "as",
		"1280 l", "1280 d", "390 l", "390 d", "rules", "requests", "kB", "shift", "paint", strings.Join(rows, "\n"))
}

// houseTab is a window of one person of the house.
type houseTab struct {
	tab
	h *house
}

// cookies gives the browser what signed the visitor in.
func (b *houseTab) cookies(v *visitor) {
	b.t.Helper()
	base, err := url.Parse(b.base)
	if err != nil {
		b.t.Fatal(err)
	}
	for _, c := range v.client.Jar.Cookies(base) {
		if _, err := chromedp.Call(b.ctx, network.SetCookie, network.SetCookieParams{Name: c.Name, Value: c.Value, URL: b.base}); err != nil {
			b.t.Fatal(err)
		}
	}
}

// look opens a page at both widths and asks for faults in both themes; the
// answer is a row of the table.
func (b *houseTab) look(t *testing.T, p housePage) string {
	t.Helper()
	row := fmt.Sprintf("%-24s %-12s", p.name, p.who)
	rules, first := 0, loaded{}
	for _, width := range []int64{1280, 390} {
		b.do(chromedp.EmulateViewport(width, 900))
		b.theme("light")
		l := b.load(t, p, width)
		if width == 1280 {
			first = l
		}
		for _, theme := range []string{"light", "dark"} {
			b.theme(theme)
			a := b.faults(map[string]string{"light": axeAll, "dark": axeColours}[theme])
			for _, f := range a.Faults {
				t.Errorf("%s (%s) at %d, %s: %s", p.name, p.path, width, theme, f)
			}
			row += fmt.Sprintf(" %6d", len(a.Faults))
			rules = max(rules, a.Rules)
			b.picture(p, width, theme)
		}
	}
	b.do(chromedp.EmulateViewport(320, 900))
	if over := evaluate[int](t, b.ctx, `document.documentElement.scrollWidth - innerWidth`); over > 0 {
		t.Errorf("%s at 320: %d pixels too wide", p.name, over)
	}
	if rules < 8 {
		t.Errorf("%s: only %d rules applied; the page is not what it should be", p.name, rules)
	}
	return row + fmt.Sprintf(" %5d %9d %8.1f %6.3f %6s", rules, first.Requests, float64(first.Bytes)/1000, first.Shift, b.paint(p))
}

// paint times the largest paint of a first visit over a slow line (1.6 Mbit/s
// down, 0.75 up, 150 ms), on a phone. It is written down, not held to: no test
// depends on a clock.
func (b *houseTab) paint(p housePage) string {
	if !*paint || p.act != "" {
		return "-"
	}
	b.t.Helper()
	b.do(chromedp.EmulateViewport(390, 844))
	line := func(conditions ...*network.Conditions) {
		if _, err := chromedp.Call(b.ctx, network.EmulateNetworkConditionsByRule, network.EmulateNetworkConditionsByRuleParams{MatchedNetworkConditions: conditions}); err != nil {
			b.t.Fatal(err)
		}
	}
	line(&network.Conditions{Latency: 150, DownloadThroughput: 1.6e6 / 8, UploadThroughput: 0.75e6 / 8})
	defer line([]*network.Conditions{}...)
	b.goTo(p.path)
	ms := evaluate[float64](b.t.(*testing.T), b.ctx, `new Promise(done => { let at = 0; new PerformanceObserver(l => { for (const e of l.getEntries()) at = Math.max(at, e.startTime) }).observe({type: "largest-contentful-paint", buffered: true}); setTimeout(() => done(at), 400) })`)
	return fmt.Sprintf("%.2f", ms/1000)
}

// load opens a page as on a first visit and holds it to the limits.
func (b *houseTab) load(t *testing.T, p housePage, width int64) loaded {
	t.Helper()
	if _, err := chromedp.Call(b.ctx, network.SetCacheDisabled, network.SetCacheDisabledParams{CacheDisabled: true}); err != nil {
		t.Fatal(err)
	}
	resp, err := chromedp.RunResponse(b.ctx, chromedp.Navigate(b.base+p.path))
	if err == nil && p.act != "" {
		resp, err = chromedp.RunResponse(b.ctx, chromedp.Func(func(ctx context.Context, _ *chromedp.Target) error {
			_, err := chromedp.Run(ctx, chromedp.Evaluate[any](p.act))
			return err
		}))
	}
	if err != nil {
		t.Fatalf("%s (%s): %v", p.name, p.path, err)
	}
	if int(resp.Status) != p.want() {
		t.Errorf("%s (%s): status %d, want %d\n%.600s", p.name, p.path, resp.Status, p.want(), b.text())
	}
	l := evaluate[loaded](t, b.ctx, measureLoad)
	if l.Shift >= mostShift && p.act == "" {
		// On a machine that is busy a font may come after its time: what moves at
		// every visit is a fault of the page.
		b.goTo(p.path)
		l.Shift = min(l.Shift, evaluate[loaded](t, b.ctx, measureLoad).Shift)
	}
	requests, bytes := mostRequests, mostBytes
	if strings.HasPrefix(p.path, "/chart") {
		requests, bytes = mostOfChart, mostBytesChart
	}
	if l.Requests > requests || l.Bytes > bytes {
		t.Errorf("%s: %d requests and %d bytes; at most %d and %d", p.name, l.Requests, l.Bytes, requests, bytes)
	}
	if l.Shift >= mostShift {
		t.Errorf("%s at %d: layout shift %.3f", p.name, width, l.Shift)
	}
	if l.Over > 0 {
		t.Errorf("%s at %d: %d pixels too wide", p.name, width, l.Over)
	}
	return l
}

func (b *houseTab) theme(name string) {
	b.t.Helper()
	if _, err := chromedp.Call(b.ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{
		Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: name}}}); err != nil {
		b.t.Fatal(err)
	}
}

func (b *houseTab) faults(rules string) axeAnswer {
	b.t.Helper()
	if !eval[bool](&b.tab, `typeof axe === "object"`) {
		eval[any](&b.tab, axe+"; null")
	}
	a, err := chromedp.Run(b.ctx, chromedp.Evaluate[axeAnswer](fmt.Sprintf(axeRun, rules), chromedp.EvalAwaitPromise))
	if err != nil {
		b.t.Fatal(err)
	}
	return a
}

// picture keeps how the page looks, when -pictures asks for it.
func (b *houseTab) picture(p housePage, width int64, theme string) {
	b.t.Helper()
	if *pictures == "" {
		return
	}
	png, err := chromedp.Run(b.ctx, chromedp.FullScreenshot(100))
	if err == nil {
		err = os.WriteFile(filepath.Join(*pictures, fmt.Sprintf("%s-%d-%s.png", p.name, width, theme)), png, 0o644)
	}
	if err != nil {
		b.t.Fatal(err)
	}
}
