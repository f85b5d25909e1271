package main

import (
	"fmt"
	"net/http"
	"net/url"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/chromedp/chromedp"
)

// A file of another hand, in a browser: chosen, matched, followed while it is
// checked, left and found again, and sent.
func TestUploadInTheBrowser(t *testing.T) {
	s := newSite(t)
	s.person("ann", "contributor")
	b := s.browse(t)
	b.signIn("ann")
	var file strings.Builder
	file.WriteString("Channel;Fan;Lat;Lon;Sinuosity;Statistic;Line;Reference;Slope (deg)\n")
	const rows = 6000
	for i := range rows {
		fmt.Fprintf(&file, "Sound %d;Deposit %d;%d,%d;%d,5;1,%02d;peak;thalweg;Invented Soundings %d;0,%02d\n", i, i/5, i%120-60, i%10, i%340-170, 1+i%98, 1+i%40, 1+i%50)
	}
	path := filepath.Join(t.TempDir(), "other.csv")
	if err := os.WriteFile(path, []byte(file.String()), 0o600); err != nil {
		t.Fatal(err)
	}
	b.goTo("/contribute/upload")
	b.do(chromedp.SetUploadFiles("#file", []string{path}))
	b.fill(map[string]string{"why": "table 2 of the paper"})
	if status := b.press("main form button.primary"); status != http.StatusOK {
		t.Fatalf("status %d: %s", status, b.text())
	}
	b.says("6000 rows and 9 columns", "guessed")
	if got := b.value("[name='column.8']"); got != "valley_slope_deg" {
		t.Errorf("the slope in degrees is taken for %q", got)
	}
	b.do(chromedp.Click("[name=licence][value='CC BY 4.0']"))
	b.press("button[value=check]")
	b.says("of 6000 rows checked")
	at := b.path()
	b.goTo("/contribute") // the page is left, the check goes on
	b.goTo(at)
	// The script loads the page anew when the result is there: asked in the page,
	// since a node that was found may be gone a moment later.
	waitFor(t, b.ctx, `document.readyState === "complete" && document.body.innerText.includes("Every row can be sent")`)
	b.says("6000 rows read: 6000 new", "Nothing is sent yet", "degrees read as valley_slope")
	b.press("button[value=send]")
	b.says("6000 rows wait for a curator")
}

// A check shows its progress without scripts, and can be cancelled.
func TestUploadProgressWithoutScripts(t *testing.T) {
	s, ann, _ := newContribution(t)
	var file strings.Builder
	file.WriteString(csvHead)
	for i := range 20_000 {
		fmt.Fprintf(&file, "Sound %d,%d,%d,1.4,peak,thalweg,Invented Soundings %d,0.004\n", i, i%120-60, i%340-170, i)
	}
	a := ann.sendFile("/contribute/upload", "big.csv", []byte(file.String()), nil).is(http.StatusOK)
	form := a.form("form.matching")
	form.Set("licence", "CC0 1.0")
	form.Set("action", "check")
	running := ann.post(a.url.Path, form).is(http.StatusOK).says("of 20000 rows checked")
	if running.doc().Find("noscript").Length() != 1 || !strings.Contains(running.body, `<meta http-equiv="refresh"`) {
		t.Error("the page does not load itself again without scripts")
	}
	if got := ann.get(a.url.Path + "/progress.json").is(http.StatusOK).body; !strings.Contains(got, `"state":"checking"`) || !strings.Contains(got, `"all":20000`) {
		t.Error(got)
	}
	// Another person writes meanwhile.
	s.person("bo", "contributor")
	s.as("bo")
	ann.post(a.url.Path, url.Values{"action": {"send"}}).is(http.StatusConflict)
	ann.act(a, "cancel").is(http.StatusOK).says("Say how to read them")
	ann.act(a, "cancel").is(http.StatusConflict)
	if kept := ann.get(a.url.Path).form("form.matching"); kept.Get("column.0") != "system_name" || kept.Get("licence") != "CC0 1.0" {
		t.Errorf("the matching is lost: %v", kept)
	}
}

// From an invitation of the keeper and a registration to a record that waits,
// in a browser.
func TestJoiningInTheBrowser(t *testing.T) {
	s := newSite(t)
	s.person("kit", "keeper")
	b := s.browse(t)
	b.signIn("kit")
	b.goTo("/people")
	b.do(chromedp.SetValue("#invite_role", "curator"))
	b.fill(map[string]string{"note": "for Dee"})
	b.press("form[action^='/people/invitations'] button.primary")
	link, err := chromedp.Run(b.ctx, chromedp.TextContent("#invitation"))
	if err != nil {
		t.Fatal(err)
	}
	b.goTo("/settings")
	b.do(chromedp.Click("[name=registration][value=open]"))
	b.fill(map[string]string{"why": "the group grows"})
	b.press("#settings-form button.primary")
	b.says("One setting is changed")

	u, err := url.Parse(strings.TrimSpace(link))
	if err != nil {
		t.Fatal(err)
	}
	dee := s.browse(t)
	dee.goTo(u.RequestURI())
	dee.fill(map[string]string{"name": "dee", "credit": "D. Lead", "password": testPassword, "again": testPassword})
	dee.press("main form button.primary")
	dee.says("signed in as dee", "curator")

	ann := s.browse(t)
	ann.goTo("/sign-in")
	ann.press("main a[href='/register']")
	ann.fill(map[string]string{"name": "ann", "credit": "A. Marlow", "about": "Northern Survey", "password": testPassword, "again": testPassword})
	ann.press("main form button.primary")
	ann.says("Your name to sign in with is ann-", "has not let you in yet")
	ann.goTo("/contribute")
	ann.fill(map[string]string{"system_name": "Loom", "latitude_deg": "-30", "longitude_deg": "-20", "sinuosity": "1.4", "sinuosity_kind": "peak",
		"measured_line": "thalweg", "source": "Invented Soundings 4:12 (2031)", "licence": "CC0 1.0"})
	ann.press("button[value=submit]")
	ann.says("Saved as a draft, not sent")

	dee.goTo("/")
	dee.press("header a[href='/registrations']")
	dee.says("A. Marlow", "Northern Survey")
	dee.press("button[value=approve]")
	dee.says("can send contributions now")

	ann.goTo(ann.path())
	ann.press("button[value=submit]")
	ann.says("Sent.")
	dee.goTo("/review")
	dee.says("Loom")
}
