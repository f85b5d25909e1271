package main

import (
	"math"
	"strconv"
	"testing"

	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// pickAt clicks the map of the picker at fractions of its width and height.
func (b *tab) pickAt(fx, fy float64) {
	b.t.Helper()
	at := evaluate[[]float64](b.t.(*testing.T), b.ctx, `(() => { const c = document.querySelector(".place-picker canvas"); c.scrollIntoView({block: "center"}); const r = c.getBoundingClientRect();
		return [r.left + r.width * `+strconv.FormatFloat(fx, 'f', 4, 64)+`, r.top + r.height * `+strconv.FormatFloat(fy, 'f', 4, 64)+`] })()`)
	b.do(chromedp.MouseClickXY(at[0], at[1]))
}

func (b *tab) number(selector string) float64 {
	b.t.Helper()
	v, err := strconv.ParseFloat(b.value(selector), 64)
	if err != nil {
		b.t.Errorf("%s holds %q", selector, b.value(selector))
	}
	return v
}

func (b *tab) keys(text string, more ...chromedp.KeyOption) {
	b.t.Helper()
	b.do(chromedp.KeyEvent(text, more...))
}

// The place is clicked or moved with the keys, in the form of a contribution
// and in that of an expectation; a typed place moves the cross.
func TestBrowserPlaceIsPicked(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	for _, form := range []struct{ path, lat, lon string }{{"/contribute", "#latitude_deg", "#longitude_deg"}, {"/expectation", "#set-site-lat", "#set-site-lon"}} {
		b := s.browse(t)
		if form.path == "/contribute" {
			b.signIn("ann")
		}
		b.goTo(form.path)
		if n := evaluate[int](t, b.ctx, `performance.getEntriesByType("resource").filter(e => e.name.includes("chart-map") || e.name.includes("land.json")).length`); n != 0 {
			t.Errorf("%s loads the map before it is opened", form.path)
		}
		evaluate[bool](t, b.ctx, `(() => { for (let d = document.querySelector(".place-picker"); d; d = d.parentElement.closest("details")) d.open = true; return true })()`)
		drawn := `(() => { const c = document.querySelector(".place-picker canvas"); return c.width > 300 && c.getContext("2d").getImageData(c.width / 2, c.height / 2, 1, 1).data[3] > 0 })()`
		waitFor(t, b.ctx, drawn)
		b.pickAt(0.5, 0.5) // the middle of the world
		if lat, lon := b.number(form.lat), b.number(form.lon); math.Abs(lat) > 0.5 || math.Abs(lon) > 0.5 {
			t.Errorf("%s: the middle is %v, %v", form.path, lat, lon)
		}
		b.pickAt(0.3, 0.25)
		lat, lon := b.number(form.lat), b.number(form.lon)
		if lat < 20 || lat > 70 || lon > -60 || lon < -140 {
			t.Errorf("%s: upper left is %v, %v", form.path, lat, lon)
		}
		// The click gave the map the focus: keys move the cross from there.
		b.keys(kb.ArrowDown)
		b.keys(kb.ArrowRight)
		down, right := b.number(form.lat), b.number(form.lon)
		if !(down < lat && down > lat-15 && right > lon && right < lon+20) {
			t.Errorf("%s: from %v, %v the keys led to %v, %v", form.path, lat, lon, down, right)
		}
		// Closer, a key moves by less; with Shift by less still.
		for range 5 {
			b.keys("+")
		}
		b.keys(kb.ArrowUp)
		near := b.number(form.lat) - down
		b.keys(kb.ArrowUp, chromedp.KeyModifiers(chromedp.ModifierShift))
		nearer := b.number(form.lat) - down - near
		if !(near > 0 && near < 0.5 && nearer > 0 && nearer < near/5) {
			t.Errorf("%s: steps of %v and %v close by", form.path, near, nearer)
		}
		// What is typed moves the cross, and is left as it was typed.
		evaluate[bool](t, b.ctx, `(() => { for (const [id, v] of [["`+form.lat+`", "-12.5"], ["`+form.lon+`", "100.25"]]) { document.querySelector(id).focus(); document.querySelector(id).select(); document.execCommand("insertText", false, v); } return true })()`)
		waitFor(t, b.ctx, `document.querySelector(".place-picker [role=status]").textContent === "12.5° S, 100.25° E"`)
		if b.value(form.lat) != "-12.5" || b.value(form.lon) != "100.25" {
			t.Errorf("%s: typed, but %q, %q", form.path, b.value(form.lat), b.value(form.lon))
		}
	}
}
