package main

import (
	"net/http"
	"os"
	"path/filepath"
	"testing"
	"time"

	"github.com/chromedp/cdproto/browser"
	"github.com/chromedp/chromedp"
)

// A file of targets in a browser, with scripts and without: cancelled once,
// then followed to its answers, which arrive as a file and are then forgotten.
func TestBrowserManyTargets(t *testing.T) {
	for name, scripts := range map[string]bool{"with scripts": true, "without scripts": false} {
		t.Run(name, func(t *testing.T) {
			s := newDemoSite(t)
			h := s.hands(t, scripts, "404 (Not Found)")
			folder := t.TempDir()
			long, short := filepath.Join(folder, "long.csv"), filepath.Join(folder, "targets.csv")
			for file, content := range map[string][]byte{long: manyTargets(batchTargets, 0), short: manyTargets(900, 7)} {
				if err := os.WriteFile(file, content, 0o600); err != nil {
					t.Fatal(err)
				}
			}
			send := func(file string) {
				t.Helper()
				h.goTo("/expectation?kind=submarine")
				h.do(chromedp.SetUploadFiles("input[name=targets]", []string{file}))
				if status := h.press("form[action='/expectation/batch'] button"); status != http.StatusAccepted {
					t.Fatalf("status %d: %s", status, h.text())
				}
			}
			send(long)
			h.says("Answering 10,000 targets", "of 10,000 done")
			h.press("form[action='/expectation/batch/cancel'] button")
			h.says("What planform goes with")

			send(short)
			h.comes(`document.querySelector("h1").textContent === "Many targets, answered"`)
			h.says("893 of 900 targets answered; 7 could not be", "palaeolatitude", "Line 1 is the header")
			at, err := chromedp.Run(h.ctx, chromedp.Location())
			if err != nil {
				t.Fatal(err)
			}
			arrived := t.TempDir()
			if _, err := chromedp.CallBrowser(h.ctx, browser.SetDownloadBehavior, browser.SetDownloadBehaviorParams{Behavior: browser.SetDownloadBehaviorBehaviorAllow, DownloadPath: arrived}); err != nil {
				t.Fatal(err)
			}
			h.do(chromedp.Click("form[action='/expectation/batch/answers'] button"))
			rows := 0
			for range 200 {
				if b, err := os.ReadFile(filepath.Join(arrived, "expectations.csv")); err == nil {
					rows = len(readTargets(t, string(b)))
					break
				}
				h.do(chromedp.Sleep(100 * time.Millisecond))
			}
			if rows != 900 {
				t.Errorf("%d rows arrived as a file", rows)
			}
			h.do(chromedp.Navigate(at))
			h.says("These answers are not held")
		})
	}
}
