package views

import (
	"context"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/a-h/templ"
)

// defsAxis is the axis length at which ribbon shapes are defined once and used
// at every size.
const defsAxis = 100.0

// ribbonDefs writes each distinct shape once, for the drawing and for the rows
// of the narrow page.
func ribbonDefs(ps []float64) string {
	seen := map[string]Shape{}
	for _, p := range ps {
		seen[ribbonID(p)] = RibbonShape(p, defsAxis)
	}
	ids := make([]string, 0, len(seen))
	for id := range seen {
		ids = append(ids, id)
	}
	slices.Sort(ids)
	var b strings.Builder
	b.WriteString(`<svg class="defs" width="0" height="0" aria-hidden="true" focusable="false"><defs>`)
	for _, id := range ids {
		b.WriteString(`<path id="` + id + `" d="` + seen[id].D + `"/>`)
	}
	b.WriteString(`</defs></svg>`)
	return b.String()
}

// ribbonID names the shape of a sinuosity: hundredths.
func ribbonID(p float64) string {
	if !(p >= 1) {
		p = 1
	}
	return "s" + strconv.Itoa(int(math.Round(min(p, RibbonCap)*100)))
}

// defs are the shapes of the page.
func (m MeridianPage) defs() templ.Component { return templ.Raw(m.shapes()) }

func (m MeridianPage) shapes() string {
	ps := []float64{}
	for _, i := range m.Items {
		ps = append(ps, i.P)
	}
	for _, e := range m.Expected {
		if e.Why == "" {
			ps = append(ps, e.P10, e.P50, e.P90)
		}
	}
	for _, e := range m.Spin {
		ps = append(ps, e.P10, e.P50, e.P90)
	}
	return ribbonDefs(ps)
}

// drawing is the wide form of the meridian.
func (m MeridianPage) drawing(l meridianLayout) templ.Component {
	return templ.ComponentFunc(func(_ context.Context, w io.Writer) error {
		var b strings.Builder
		fmt.Fprintf(&b, `<svg id="meridian" class="meridian" viewBox="0 0 %s %s" role="group" aria-labelledby="meridian-t" aria-describedby="meridian-d">`, num2(meridianW), num2(l.height))
		fmt.Fprintf(&b, `<title id="meridian-t">%d channel systems, each drawn with its own sinuosity at its own latitude</title>`, len(l.ribbons))
		b.WriteString(`<desc id="meridian-d">Ribbons hang on a vertical axis of latitude, north on top. A straight line is a straight channel. At the right stands what is expected at each fifteen degrees.</desc>`)
		m.drawAxis(&b, l)
		m.drawExpected(&b, l)
		for _, r := range l.ribbons {
			m.drawRibbon(&b, l, r)
		}
		b.WriteString(`</svg>`)
		_, err := io.WriteString(w, b.String())
		return err
	})
}

func (m MeridianPage) drawAxis(b *strings.Builder, l meridianLayout) {
	for lat := -90.0; lat <= 90; lat += 15 {
		if lat < l.lo || lat > l.hi {
			continue
		}
		text, class := FormatLatitude(lat), "grid"
		if l.folded {
			text = FormatDegrees(lat)
		}
		if lat == 0 {
			text, class = "equator", "grid equator"
		}
		fmt.Fprintf(b, `<path class="%s" d="M%sH%s"/><text x="%s" y="%s" dy=".34em" text-anchor="end">%s</text>`,
			class, nums(l.left, l.y(lat)), num2(l.ribbonsEdge), num2(l.left-10), num2(l.y(lat)), text)
	}
}

// drawExpected draws the band at the right edge: the median for one new system
// and its 80 % limits, where there are systems to expect from.
func (m MeridianPage) drawExpected(b *strings.Builder, l meridianLayout) {
	if len(m.Expected) == 0 {
		return
	}
	x := l.ribbonsEdge + 14
	fmt.Fprintf(b, `<rect class="panel" x="%s" y="0" width="%s" height="%s"/>`, num2(x), num2(l.width-x), num2(l.height))
	head := "expected, one new system"
	if l.expectAxis < 80 {
		head = "one new system"
	}
	fmt.Fprintf(b, `<text class="panel-title" x="%s" y="17">%s</text>`, num2(x+12), head)
	axis := l.expectAxis
	for _, e := range m.Expected {
		for _, sign := range []float64{1, -1} {
			lat := sign * e.AbsLatitude
			if sign < 0 && (l.folded || e.AbsLatitude == 0) || lat < l.lo || lat > l.hi {
				continue
			}
			y := l.y(lat)
			if e.Why != "" {
				fmt.Fprintf(b, `<text class="none" x="%s" y="%s" dy=".34em"><title>%s</title>no systems near</text>`, num2(x+14), num2(y), esc(e.Why))
				continue
			}
			at := fmt.Sprintf(`transform="translate(%s %s) scale(%s)"`, num2(x+16), num2(y), num2(axis/defsAxis))
			fmt.Fprintf(b, `<g class="expected" %s><title>%s</title><path class="between" d="%s"/><use class="limit" href="#%s"/><use class="limit" href="#%s"/><use class="middle" href="#%s"/></g>`,
				at, esc(e.title()), ribbonBetween(e.P10, e.P90), ribbonID(e.P90), ribbonID(e.P10), ribbonID(e.P50))
			fmt.Fprintf(b, `<text class="median" x="%s" y="%s">%s</text><text class="limits" x="%s" y="%s">%s–%s</text>`,
				num2(x+axis+30), num2(y-1), num2Fixed(e.P50), num2(x+axis+30), num2(y+14), num2Fixed(e.P10), num2Fixed(e.P90))
		}
	}
}

func (e MeridianExpected) title() string {
	return fmt.Sprintf("Expected at %s: median %s; 80 %% of new systems lie between %s and %s", FormatDegrees(e.AbsLatitude), num2Fixed(e.P50), num2Fixed(e.P10), num2Fixed(e.P90))
}

func num2Fixed(v float64) string {
	if !drawable(v, false) {
		return unknownMark
	}
	return strconv.FormatFloat(v, 'f', 2, 64)
}

// drawRibbon: shape is sinuosity, colour what was chosen, stroke width the
// channel's; a double stroke is ancient, ochre dashes are rivers, and the mark
// at the start tells the grade.
func (m MeridianPage) drawRibbon(b *strings.Builder, l meridianLayout, r placed) {
	step := colourOf(m.Colour, r.MeridianItem)
	class := step.Class + " " + WidthClass(r.WidthM)
	if r.Kind == "river" {
		class = "river " + WidthClass(r.WidthM)
	}
	k := l.axis / defsAxis
	title := r.title()
	if r.shift != 0 {
		title += ", drawn beside its latitude for room"
	}
	half := max(r.ribbon.Half, 7)
	if m.plain {
		fmt.Fprintf(b, `<g><title>%s</title>`, esc(title))
		m.ribbonItself(b, l, r, class, step, k)
		b.WriteString(`</g>`)
		return
	}
	fmt.Fprintf(b, `<a href="%s" aria-label="%s"><title>%s</title>`, esc(string(m.SystemHref(r.Slug))), esc(title), esc(title))
	fmt.Fprintf(b, `<rect class="hit" x="%s" y="%s" width="%s" height="%s"/>`, num2(r.x+r.ribbon.Left-3), num2(r.y-half-2), num2(r.ribbon.Right-r.ribbon.Left+6), num2(2*half+4))
	m.ribbonItself(b, l, r, class, step, k)
	anchor, tx := "start", r.x
	if r.x > l.ribbonsEdge*0.7 {
		anchor, tx = "end", r.x+l.axis
	}
	fmt.Fprintf(b, `<text class="tip" x="%s" y="%s" text-anchor="%s">%s %s</text></a>`, num2(tx), num2(r.y-half-5), anchor, esc(r.Name), num2Fixed(r.P))
}

// ribbonItself draws the line and its marks.
func (m MeridianPage) ribbonItself(b *strings.Builder, l meridianLayout, r placed, class string, step colourClass, k float64) {
	fmt.Fprintf(b, `<g transform="translate(%s)%s">`, nums(r.x, r.y), scaleOf(k))
	use := `<use href="#` + ribbonID(r.P) + `" class="`
	if r.Ancient {
		b.WriteString(use + "ribbon twin " + class + `"/>` + use + `gap"/>`)
	} else {
		b.WriteString(use + "ribbon " + class + `"/>`)
	}
	b.WriteString("</g>")
	b.WriteString(gradeMark(r.Grade, r.x, r.y, max(l.axis/24, 1.6)))
	if r.ribbon.Capped {
		fmt.Fprintf(b, `<path class="capped" d="M%sv10m3-10v10"/>`, nums(r.x+l.axis+4, r.y-5))
	}
	if step.Letter != "" && r.Kind != "river" {
		fmt.Fprintf(b, `<text class="letter halo" x="%s" y="%s" dy=".34em">%s</text>`, num2(r.x+l.axis+2), num2(r.y), step.Letter)
	}
}

func scaleOf(k float64) string {
	return " scale(" + strconv.FormatFloat(k, 'f', -1, 64) + ")"
}

// gradeMark stands at the ribbon's start: filled for remeasured here, open for
// surveyed, a tick for traced, nothing for quoted.
func gradeMark(grade string, x, y, r float64) string {
	switch grade {
	case "remeasured":
		return fmt.Sprintf(`<circle class="grade full" cx="%s" cy="%s" r="%s"/>`, num2(x), num2(y), num2(r))
	case "surveyed":
		return fmt.Sprintf(`<circle class="grade" cx="%s" cy="%s" r="%s"/>`, num2(x), num2(y), num2(r))
	case "traced":
		return fmt.Sprintf(`<path class="grade" d="M%sv%s"/>`, nums(x, y-r-.6), num2(2*r+1.2))
	}
	return ""
}

// meridianBand is one row of the narrow page: ten degrees of |latitude|.
type meridianBand struct {
	From     float64
	Items    []MeridianItem
	Expected *MeridianExpected // nearest to the band's middle
}

func (b meridianBand) label() string {
	return fmt.Sprintf("%.0f–%.0f°", b.From, b.From+10)
}

// bands are the rows from the pole to the equator.
func (m MeridianPage) bands() []meridianBand {
	out := make([]meridianBand, 9)
	for i := range out {
		out[i].From = float64(10 * (8 - i))
		mid := out[i].From + 5
		for j, e := range m.Expected {
			if e.Why == "" && math.Abs(e.AbsLatitude-mid) <= 7.5 && (out[i].Expected == nil || math.Abs(e.AbsLatitude-mid) < math.Abs(out[i].Expected.AbsLatitude-mid)) {
				out[i].Expected = &m.Expected[j]
			}
		}
	}
	for _, it := range m.Items {
		k := 8 - min(int(math.Abs(it.Latitude)/10), 8)
		out[k].Items = append(out[k].Items, it)
	}
	for k := range out {
		slices.SortStableFunc(out[k].Items, func(a, b MeridianItem) int { return compareFloat(b.P, a.P) })
	}
	return slices.DeleteFunc(out, func(b meridianBand) bool { return len(b.Items) == 0 })
}

// bandLimit is the most ribbons in one row of the narrow page; the rest is
// counted and linked to the table.
const bandLimit = 60
