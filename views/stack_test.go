package views

import (
	"strings"
	"testing"

	"github.com/PuerkitoBio/goquery"
)

func TestStackTables(t *testing.T) {
	page := `<p>before</p><table class="data compact" id="a"><caption>C &lt; D</caption><thead><tr>
		<th scope="col">Model</th><th scope="col"><a href="?sort=x">Term<span aria-hidden="true"> ▲</span></a></th>
		<th scope="col" class="n">Slope <span class="unit">m/m</span></th><td><span class="visually-hidden">Ribbon</span></td></tr></thead>
		<tbody><tr><th scope="row" rowspan="2">line</th><td>a &amp; b</td><td class="n">1</td><td><svg><path d="M0 0"></path></svg></td></tr>
		<tr><td>f</td><td class="n">` + unknownMark + `</td><td></td></tr><tr><td colspan="2">x</td><td class="n">3</td></tr></tbody></table><p>after</p>
		<table class="data"><thead><tr><th>A</th><th>B</th></tr></thead><tbody><tr><td>1</td><td>2</td></tr></tbody></table>
		<table class="data"><thead><tr><th colspan="2">A</th><th>B</th></tr></thead><tbody><tr><td>1</td></tr></tbody></table>
		<table class="data compact grid"><thead><tr><th>A</th><th>B</th><th>C</th></tr></thead><tbody><tr><td>1</td></tr></tbody></table>
		<table class="data"><tbody><tr><td>1</td></tr></tbody></table>`
	got := string(StackTables([]byte(page)))
	d, err := goquery.NewDocumentFromReader(strings.NewReader(got))
	if err != nil {
		t.Fatal(err)
	}
	var labels []string
	d.Find("#a tbody td").Each(func(_ int, s *goquery.Selection) { labels = append(labels, s.AttrOr("data-label", "-")) })
	if want, got := "Term|Slope (m/m)|-|Term|Slope (m/m)|-|-|Slope (m/m)", strings.Join(labels, "|"); got != want {
		t.Errorf("labels %s, want %s", got, want)
	}
	if n := d.Find("table.stacks").Length(); n != 1 {
		t.Errorf("%d tables stack, want the one with four columns and a plain head", n)
	}
	if n := d.Find("[data-unknown]").Length(); n != 1 {
		t.Errorf("%d cells are marked as not known, want 1", n)
	}
	// Nothing else changes.
	bare := strings.NewReplacer(` data-label="Term"`, "", ` data-label="Slope (m/m)"`, "", "data stacks", "data", " data-unknown", "").Replace(got)
	if bare != page {
		t.Errorf("more than labels changed:\n%s", bare)
	}
	if plain := []byte("<p>no table</p>"); string(StackTables(plain)) != string(plain) {
		t.Error("a page without tables changed")
	}
}

func TestFillContents(t *testing.T) {
	page := `<h2 id="before">Not this</h2><details class="contents"><summary>On this page</summary><ul data-contents></ul></details>
		<h2 id="a">One &amp; <em>two</em></h2><h2>without an id</h2><h2 id="b" class="c">
		Three</h2>`
	got := string(Finish([]byte(page)))
	if want := `<ul><li><a href="#a">One &amp; two</a></li><li><a href="#b">Three</a></li></ul>`; !strings.Contains(got, want) {
		t.Errorf("%s\nlacks %s", got, want)
	}
}
