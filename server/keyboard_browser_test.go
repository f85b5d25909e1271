package main

import (
	"net/http"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/chromedp/cdproto/browser"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// hands are a person at the keyboard who has no mouse.
type hands struct{ *tab }

func (s *site) hands(t *testing.T, scripts bool, expected ...string) hands {
	t.Helper()
	h := hands{&tab{s, openBrowserFor(t, 5*time.Minute, expected...)}}
	if _, err := chromedp.Call(h.ctx, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: !scripts}); err != nil {
		t.Fatal(err)
	}
	return h
}

func (h hands) key(keys string) { h.t.Helper(); h.do(chromedp.KeyEvent(keys)) }

// to presses Tab until the focus is on what the selector finds, and asks that
// it can be seen there.
func (h hands) to(selector string) hands {
	h.t.Helper()
	here := `(() => { const e = document.activeElement; if (!e.matches(` + "`" + selector + "`" + `)) return ""; const s = getComputedStyle(e); return s.outlineStyle === "none" || s.outlineWidth === "0px" ? "unseen" : "seen" })()`
	for range 1500 {
		h.key(kb.Tab)
		switch eval[string](h.tab, here) {
		case "seen":
			return h
		case "unseen":
			h.t.Errorf("the focus on %s cannot be seen", selector)
			return h
		}
	}
	h.t.Fatalf("the keyboard does not reach %s on %s", selector, h.path())
	return h
}

// types writes into the control that has the focus.
func (h hands) types(text string) hands { h.t.Helper(); h.key(text); return h }

// enters presses Enter and waits until something holds on the page it leads to.
func (h hands) enters(expression string) {
	h.t.Helper()
	h.key(kb.Enter)
	h.comes(expression)
}

// comes is until for what a machine under load may take a minute for, across
// loads of pages.
func (h hands) comes(expression string) {
	h.t.Helper()
	for range 600 {
		if ok, err := chromedp.Run(h.ctx, chromedp.Evaluate[bool](`document.readyState === "complete" && !!(`+expression+`)`)); err == nil && ok {
			return
		}
		h.do(chromedp.Sleep(100 * time.Millisecond))
	}
	h.t.Fatalf("never came true: %s\n%s: %s", expression, h.path(), h.text())
}

// The main job of a reader by the keyboard alone, with scripts and without:
// filter the systems, question the regression, ask for an expectation, take the
// rows away.
func TestBrowserKeyboardMainJob(t *testing.T) {
	s := newDemoSite(t)
	for name, scripts := range map[string]bool{"with scripts": true, "without scripts": false} {
		t.Run(name, func(t *testing.T) {
			h := s.hands(t, scripts)
			h.goTo("/")
			h.to("a.skip").enters(`location.hash === "#main"`)
			h.to("a.skip.inline").enters(`location.hash === "#meridian-key"`)
			h.to("form[data-live] > details > summary").enters(`document.querySelector("form[data-live] > details").open`)
			h.to("input[name=abs_lat_max]").types("60").enters(`location.search.includes("abs_lat_max=60")`)

			h.to("a[href^='/regression?'][href*='abs_lat_max=60']").enters(`location.pathname === "/regression" && document.querySelector("#set-scale") && document.querySelector(".lead").textContent.includes("variance")`)
			h.to("#set-scale")
			h.key(kb.ArrowDown)
			if !scripts {
				h.to("form.controls button.primary")
				h.key(kb.Enter)
			}
			h.comes(`new URLSearchParams(location.search).get("scale") === "ln" && document.querySelector("#set-scale")?.value === "ln" && new URLSearchParams(location.search).get("abs_lat_max") === "60"`)

			h.to("nav a[href='/expectation']").enters(`location.pathname === "/expectation" && document.querySelector("#set-palaeolatitude")`)
			h.to("#set-palaeolatitude").types("28")
			h.to("#set-age").types("70").enters(`document.querySelector(".ribbons")`)
			h.says("28° N", "70 Ma", "expected")

			h.to("nav a[href='/systems']").enters(`document.querySelector("#systems-table")`)
			h.to("a.button[href^='/systems.csv']").takesCSV(t.TempDir())
		})
	}
}

// takesCSV presses Enter on the link that has the focus and reads the file that
// arrives.
func (h hands) takesCSV(folder string) {
	h.t.Helper()
	if _, err := chromedp.CallBrowser(h.ctx, browser.SetDownloadBehavior, browser.SetDownloadBehaviorParams{Behavior: browser.SetDownloadBehaviorBehaviorAllow, DownloadPath: folder}); err != nil {
		h.t.Fatal(err)
	}
	h.key(kb.Enter)
	want := h.visitor().get("/systems.csv").is(http.StatusOK).body
	for range 200 {
		if files, _ := filepath.Glob(filepath.Join(folder, "*.csv")); len(files) == 1 {
			if b, err := os.ReadFile(files[0]); err == nil && string(b) == want {
				return
			}
		}
		h.do(chromedp.Sleep(100 * time.Millisecond))
	}
	h.t.Error("the table did not arrive as a file")
}

// The other main job by the keyboard alone: contribute a record, read it as a
// curator, accept it.
func TestBrowserKeyboardContributeAndReview(t *testing.T) {
	for name, scripts := range map[string]bool{"with scripts": true, "without scripts": false} {
		t.Run(name, func(t *testing.T) {
			s := newSite(t)
			s.person("ann", "contributor")
			s.person("cy", "curator")
			h := s.hands(t, scripts)
			signIn := func(name, to string) {
				h.goTo("/sign-in?return=" + to)
				h.to("main #name").types(name)
				h.to("main #password").types(testPassword).enters(`location.pathname === "` + to + `"`)
			}
			signIn("ann", "/contribute")
			fields := goodRecord()
			for _, name := range []string{"system_name", "latitude_deg", "longitude_deg", "sinuosity", "sinuosity_kind", "measured_line", "source", "licence", "parent_deposit", "valley_slope"} {
				keys := fields[name]
				if name == "licence" {
					keys = kb.ArrowDown // one letter twice would go past the first
				}
				h.to("#" + name).types(keys)
			}
			for name, want := range fields {
				if got := h.value("#" + name); got != want {
					t.Errorf("%s: typed %q, the field holds %q", name, want, got)
				}
			}
			h.to("button[value=submit].primary").enters(`document.querySelector("main").textContent.includes("waits for a curator")`)
			h.to(".signout button").enters(`!document.querySelector(".signout")`)

			signIn("cy", "/review")
			h.to("table.data tbody th a").enters(`document.querySelector("#comment")`)
			h.says("Tarn Hollow Channel", "1.62")
			h.to("#comment").types("Read against the source.")
			h.to("button[value=accept]").enters(`document.querySelector("main").textContent.includes("is accepted")`)
			if rows := s.csv(); len(rows) != 2 || !strings.Contains(rows[1], ",-24.5,") {
				t.Errorf("after accepting:\n%s", strings.Join(rows, "\n"))
			}
		})
	}
}
