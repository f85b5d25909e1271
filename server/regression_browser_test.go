package main

import (
	"net/url"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"
)

// eval runs an expression on the page.
func eval[T any](b *tab, expression string) T {
	b.t.Helper()
	v, err := chromedp.Run(b.ctx, chromedp.Evaluate[T](expression))
	if err != nil {
		b.t.Fatalf("%s: %v", expression, err)
	}
	return v
}

// until waits for an expression to hold, ten seconds at most.
func (b *tab) until(expression string) {
	b.t.Helper()
	for range 100 {
		if eval[bool](b, expression) {
			return
		}
		b.do(chromedp.Sleep(100 * time.Millisecond))
	}
	b.t.Fatalf("never came true: %s", expression)
}

// TestRegressionLive: changing a control updates the answer in place, keeps
// focus, and the address follows.
func TestRegressionLive(t *testing.T) {
	b := newReferenceSite(t).browse(t)
	b.goTo("/regression?model=linear:abs_latitude&scale=raw&resamples=199&permutations=99&seed=1")
	b.do(chromedp.Focus("#set-scale"))
	eval[any](b, `(() => { const s = document.querySelector("#set-scale"); s.value = "ln"; s.dispatchEvent(new Event("change", {bubbles: true})); })()`)
	b.until(`new URL(location.href).searchParams.get("scale") === "ln" && document.querySelector("#set-scale").value === "ln"`)
	if got := eval[string](b, `document.activeElement.id`); got != "set-scale" {
		t.Errorf("focus went to %q", got)
	}
	b.says("ln P = a + b x")
	// The figure's points are reached and named by the keyboard.
	name := eval[string](b, `(() => { const a = document.querySelector("#fit-abs-latitude a"); a.focus(); return document.activeElement === a ? a.getAttribute("aria-label") : ""; })()`)
	if !strings.Contains(name, "sinuosity") {
		t.Errorf("a focused point is named %q", name)
	}
	if wide := eval[bool](b, `document.documentElement.scrollWidth > innerWidth`); wide {
		t.Error("the page is wider than its window")
	}
}

// TestExpectationStaysOutOfTheAddress: the button that posts is never turned
// into an address by the script.
func TestExpectationStaysOutOfTheAddress(t *testing.T) {
	b := newReferenceSite(t).browse(t)
	b.goTo("/expectation")
	b.fill(map[string]string{"set-palaeolatitude": "-31.7", "set-age": "66"})
	if status := b.press("button[formmethod=post]"); status != 200 {
		t.Fatalf("status %d", status)
	}
	b.says("31.7° S", "66 Ma", "expected")
	at, err := url.Parse(eval[string](b, `location.href`))
	if err != nil {
		t.Fatal(err)
	}
	if at.RawQuery != "" {
		t.Errorf("the address holds %q", at.RawQuery)
	}
	for _, href := range eval[[]string](b, `[...document.querySelectorAll("a[href]")].map(a => a.getAttribute("href"))`) {
		if strings.Contains(href, "31.7") {
			t.Errorf("a link holds the target: %s", href)
		}
	}
	// From an answer that is linked to, the posting button still posts.
	b.goTo("/expectation?palaeolatitude=10&seed=1")
	eval[any](b, `document.querySelector("details.change").open = true`)
	eval[any](b, `(() => { const i = document.querySelector("#set-palaeolatitude"); i.value = "-32.7"; i.dispatchEvent(new Event("change", {bubbles: true})); })()`)
	b.do(chromedp.Sleep(500 * time.Millisecond))
	if q := eval[string](b, `location.search`); strings.Contains(q, "32.7") {
		t.Errorf("typing alone brought the target into the address: %s", q)
	}
	b.press("button[formmethod=post]")
	b.says("32.7° S")
	if q := eval[string](b, `location.search`); q != "" {
		t.Errorf("the address holds %q", q)
	}
}
