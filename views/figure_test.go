package views

import (
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"
)

// wellFormed fails on markup that is not XML: a browser would draw half of it.
func wellFormed(t *testing.T, s string) {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(s))
	for {
		_, err := d.Token()
		if errors.Is(err, io.EOF) {
			return
		}
		if err != nil {
			t.Fatalf("not well-formed: %v\n%s", err, s)
		}
	}
}

func drawn(t *testing.T, p Plot) string {
	t.Helper()
	var b bytes.Buffer
	if err := p.SVG().Render(context.Background(), &b); err != nil {
		t.Fatal(err)
	}
	wellFormed(t, b.String())
	wellFormed(t, string(p.Standalone()))
	return b.String()
}

// TestPlotNeverDrawsNaN feeds every place that takes a number the values that
// a fit on odd rows can give.
func TestPlotNeverDrawsNaN(t *testing.T) {
	odd := []float64{math.NaN(), math.Inf(1), math.Inf(-1), 0, -1, 1, 2, 1e300, -1e300, 5e-324}
	for _, log := range []bool{false, true} {
		p := Plot{ID: "x", X: Axis{Log: log}, Y: Axis{Log: log},
			Bands: []Band{{X: odd, Low: odd, High: odd}}, Lines: []Line{{X: odd, Y: odd, Label: "l"}}}
		for _, v := range odd {
			p.Points = append(p.Points, Point{X: v, Y: v, Low: v, High: 2, XLow: 1, XHigh: v, Title: "a", Href: "/"})
			p.Rules = append(p.Rules, Rule{At: v, Label: "r"}, Rule{At: v, Vertical: true, Label: "r"})
			p.Texts = append(p.Texts, Text{X: v, Y: v, Text: "t"})
		}
		s := drawn(t, p)
		for _, bad := range []string{"NaN", "Inf", "e+"} {
			if strings.Contains(s, bad) {
				t.Errorf("log %v: %s in the figure", log, bad)
			}
		}
	}
}

func TestPlotEmptyDrawsASentence(t *testing.T) {
	s := drawn(t, Plot{Empty: "No system has both a slope and a sinuosity."})
	if !strings.Contains(s, "No system has both") || strings.Contains(s, "frame") {
		t.Errorf("want the sentence and no frame: %s", s)
	}
	one := drawn(t, Plot{Points: []Point{{X: 3, Y: 1.2, Title: "only"}}})
	if !strings.Contains(one, "<circle") {
		t.Errorf("one point is drawn: %s", one)
	}
}

// TestPlotOrder: a band is under its line, a point is a link with its title.
func TestPlotOrder(t *testing.T) {
	x := []float64{0, 1, 2}
	s := drawn(t, Plot{ID: "o", Bands: []Band{{X: x, Low: []float64{0, 1, 2}, High: []float64{1, 2, 3}}},
		Lines:  []Line{{X: x, Y: []float64{.5, 1.5, 2.5}}},
		Points: []Point{{X: 1, Y: 1, Href: "/systems/a&b", Title: `A "quoted" <name>, P 1.2`}}})
	band, line, link := strings.Index(s, `class="band"`), strings.Index(s, `class="line"`), strings.Index(s, `<a href="/systems/a&amp;b"`)
	if band < 0 || line < band || link < line {
		t.Errorf("order band %d, line %d, link %d", band, line, link)
	}
	if !strings.Contains(s, "&lt;name&gt;") {
		t.Error("the title is escaped")
	}
}

func TestTicks(t *testing.T) {
	// Worked by hand: round values inside the range, at most about n of them.
	for _, tc := range []struct {
		axis   Axis
		lo, hi float64
		want   string
	}{
		{Axis{}, 0, 10, "0 2 4 6 8 10"},
		{Axis{}, 1, 2.4, "1.00 1.25 1.50 1.75 2.00 2.25"},
		{Axis{}, -75, 75, "−75 −50 −25 0 25 50 75"},
		{Axis{Log: true}, 0.0004, 0.021, "0.0005 0.001 0.002 0.005 0.01 0.02"},
		{Axis{Log: true}, 1e-6, 1e3, "0.000001 0.0001 0.01 1 100"},
	} {
		s := scale{lo: tc.lo, hi: tc.hi, from: 0, to: 1, log: tc.axis.Log}
		if got := strings.Join(tickTexts(tc.axis, s.ticks(tc.axis, 6)), " "); got != tc.want {
			t.Errorf("%v..%v: %s, want %s", tc.lo, tc.hi, got, tc.want)
		}
	}
}
