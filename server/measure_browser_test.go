package main

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"os/exec"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/chromedp"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// openBrowser starts a headless Chromium with an empty profile. Everything it
// says on its console fails the test.
func openBrowser(t *testing.T, expected ...string) context.Context {
	t.Helper()
	return openBrowserFor(t, 2*time.Minute, expected...)
}

// openBrowserFor is openBrowser for a test that needs another while.
func openBrowserFor(t *testing.T, while time.Duration, expected ...string) context.Context {
	t.Helper()
	path := os.Getenv("CHROMIUM")
	if path == "" {
		var err error
		if path, err = exec.LookPath("chromium"); err != nil {
			t.Fatal("the browser tests need Chromium: install it, or set CHROMIUM to its path")
		}
	}
	opts := []chromedp.ExecAllocatorOption{chromedp.ExecPath(path), chromedp.Headless, chromedp.NoSandbox, chromedp.DisableGPU, chromedp.UserDataDir(t.TempDir())}
	for _, flag := range []string{"disable-quic", "no-first-run", "disable-background-networking", "disable-component-update", "disable-sync"} {
		opts = append(opts, chromedp.Flag(flag, true))
	}
	ctx, stopAllocator := chromedp.NewExecAllocator(context.Background(), opts...)
	ctx, stop := chromedp.NewContext(ctx)
	ctx, cancel := context.WithTimeout(ctx, while)
	t.Cleanup(func() { cancel(); stop(); stopAllocator() })
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(1280, 900)); err != nil {
		t.Fatal(err)
	}
	done := make(chan struct{})
	go func() {
		defer close(done)
		for m, err := range chromedp.Console(ctx) {
			if err != nil {
				return
			}
			if !slices.ContainsFunc(expected, func(e string) bool { return strings.Contains(m.String(), e) }) {
				t.Errorf("the console says: %s", m)
			}
		}
	}()
	t.Cleanup(func() { cancel(); <-done })
	return ctx
}

// A contributor drops a KML on the page, changes the window, sees the number
// move, takes it into a contribution and saves it; the stored settings give the
// stored number again.
func TestBrowserMeasureDropChangeSave(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	ctx := openBrowser(t)
	do := func(steps ...chromedp.Action[chromedp.Void]) {
		t.Helper()
		if err := chromedp.Do(ctx, steps...); err != nil {
			t.Fatal(err)
		}
	}
	text := func(selector string) string {
		t.Helper()
		v, err := chromedp.Run(ctx, chromedp.TextContent(chromedp.CSS(selector)))
		if err != nil {
			t.Fatal(err)
		}
		return strings.Join(strings.Fields(v), " ")
	}
	do(chromedp.Navigate(s.base+"/sign-in"),
		chromedp.SendKeys(chromedp.CSS("main [name=name]"), "ann"), chromedp.SendKeys(chromedp.CSS("main [name=password]"), testPassword),
		chromedp.Click(chromedp.CSS("main button[type=submit]")), chromedp.WaitVisible(chromedp.CSS(".signout")))

	kml, err := json.Marshal(sineKML(80))
	if err != nil {
		t.Fatal(err)
	}
	do(chromedp.Navigate(s.base + "/measure"))
	if _, err := chromedp.Run(ctx, chromedp.Evaluate[bool](`(() => {
		const data = new DataTransfer();
		data.items.add(new File([`+string(kml)+`], "sine.kml", {type: "application/vnd.google-earth.kml+xml"}));
		for (const type of ["dragenter", "dragover", "drop"])
			document.body.dispatchEvent(new DragEvent(type, {dataTransfer: data, bubbles: true, cancelable: true}));
		return true;
	})()`)); err != nil {
		t.Fatal(err)
	}
	do(chromedp.WaitVisible(chromedp.CSS("#plan")))
	before := text("#measured .lead")
	if !strings.Contains(before, "10 bends") {
		t.Fatalf("dropped: %s", before)
	}

	do(chromedp.SendKeys(chromedp.CSS("#window_m"), "7000\t"))
	waitFor(t, ctx, `document.querySelector("#measured .lead").textContent.includes("7000 m")`)
	after := text("#measured .lead")
	if focus, err := chromedp.Run(ctx, chromedp.Evaluate[string](`document.activeElement.id`)); err != nil || focus == "" {
		t.Errorf("the focus is lost after measuring again (%q, %v)", focus, err)
	}
	shown, err := planform.MeasureFile([]byte(sineKML(80)), "", "", planform.Settings{WindowM: 7000})
	if err != nil {
		t.Fatal(err)
	}
	want := shown.Lines[0]
	if after == before || !strings.Contains(after, fmt.Sprintf("%.2f at the peak", want.PeakSinuosity)) {
		t.Errorf("after the change: %s", after)
	}

	do(chromedp.Click(chromedp.CSS("#save button")), chromedp.WaitVisible(chromedp.CSS("form.record")))
	for name, v := range goodRecord() {
		if name == "sinuosity" || name == "sinuosity_kind" || strings.Contains(name, "_deg") || name == "valley_slope" {
			continue // filled from the line
		}
		do(chromedp.SetValue(chromedp.CSS(`form.record [name="`+name+`"]`), v))
	}
	do(chromedp.Click(chromedp.CSS(`form.record button[value="save"]`)))
	waitFor(t, ctx, `/^\/contribute\/\d+$/.test(location.pathname) && document.readyState === "complete"`)
	where, err := chromedp.Run(ctx, chromedp.Location())
	if err != nil {
		t.Fatal(err)
	}
	var id int64
	if _, err := fmt.Sscanf(strings.TrimPrefix(where, s.base), "/contribute/%d", &id); err != nil {
		t.Fatal(where)
	}
	checkStored(t, s.file, id, want)
}

// waitFor waits until a condition holds on the page.
func waitFor(t *testing.T, ctx context.Context, condition string) {
	t.Helper()
	for range 1200 {
		if ok, err := chromedp.Run(ctx, chromedp.Evaluate[bool](condition)); err == nil && ok {
			return
		}
		select {
		case <-ctx.Done():
			t.Fatalf("never true: %s", condition)
		case <-time.After(50 * time.Millisecond):
		}
	}
	t.Fatalf("never true: %s", condition)
}

// checkStored measures the stored line of a submission with its stored settings
// and compares with what was shown, and with the stored sinuosity.
func checkStored(t *testing.T, file string, id int64, want planform.Measured) {
	t.Helper()
	ctx := context.Background()
	store, err := catalogue.Open(ctx, file, openOptions(true))
	if err != nil {
		t.Fatal(err)
	}
	defer store.Close()
	sub, err := store.Submission(ctx, id)
	if err != nil {
		t.Fatal(err)
	}
	var settings planform.Settings
	if err := json.Unmarshal([]byte(sub.CentrelineSettings), &settings); err != nil {
		t.Fatalf("%v: %s", err, sub.CentrelineSettings)
	}
	lines, _, err := planform.Read([]byte(sub.Centreline), "", "", settings)
	if err != nil {
		t.Fatal(err)
	}
	got, err := planform.Measure(lines[0], settings)
	if err != nil {
		t.Fatal(err)
	}
	if got.PeakSinuosity != want.PeakSinuosity || got.MeanSinuosity != want.MeanSinuosity || len(got.Bends) != len(want.Bends) {
		t.Errorf("measured again: peak %v, mean %v; shown were %v, %v", got.PeakSinuosity, got.MeanSinuosity, want.PeakSinuosity, want.MeanSinuosity)
	}
	if sub.Row.Sinuosity.V != got.PeakSinuosity || sub.Row.SinuosityKind != "peak" {
		t.Errorf("stored sinuosity %v (%s), measured again %v", sub.Row.Sinuosity.V, sub.Row.SinuosityKind, got.PeakSinuosity)
	}
}
