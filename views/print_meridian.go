package views

import (
	"fmt"
	"strings"

	"fathombend/stats/expectation"
)

// File is the meridian as "svg", "png" or "pdf", a "single" or "double" column
// wide ("" = double): the same ribbons, laid out anew for the width, with key
// and caption.
func (m MeridianPage) File(kind, width string, from FigureSource) ([]byte, error) {
	l := meridianLayout{folded: m.Folded, width: doubleUnits, left: 62, expectAxis: 92, per: 4.6}
	if width == "single" {
		l.width, l.expectAxis = singleUnits, 52
	}
	if m.Folded {
		l.per = 7
	}
	l.ribbonsEdge = l.width - l.expectAxis - 124
	if len(m.Expected) == 0 {
		l.ribbonsEdge = l.width
	}
	l = l.filled(m.Items)
	m.plain = true
	title := "Do channels straighten towards the poles?"
	ft := newFoot(m.print(l, from), title, l.width, l.height)
	height := l.height + ft.height
	var b strings.Builder
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" width="%s" height="%s" viewBox="0 0 %s %s"><title>%s</title><desc>%s</desc><rect x="0" y="0" width="%s" height="%s" fill="#fff"/>`,
		mm(l.width), mmHeight(l.width, height), num2(l.width), num2(height), title, esc(meridianCaption(m)), num2(l.width), num2(height))
	b.WriteString(m.shapes())
	m.drawAxis(&b, l)
	m.drawExpected(&b, l)
	for _, r := range l.ribbons {
		m.drawRibbon(&b, l, r)
	}
	b.WriteString(ft.markup + "</svg>")
	svg, err := styled(b.String(), printSheet+meridianSheet)
	if err != nil {
		return nil, err
	}
	return fileOf(svg, kind)
}

// print is the key and the caption of the meridian as a file.
func (m MeridianPage) print(l meridianLayout, from FigureSource) Print {
	title, steps := colourClasses(m.Colour)
	p := Print{Settings: from.settings("Meridian"), Key: []KeyEntry{{Text: title, Head: true}}}
	for _, s := range steps {
		if usesStep(m, s) {
			p.Key = append(p.Key, KeyEntry{Text: strings.TrimSpace(s.Letter + " " + s.Text), Ribbon: "w3 " + s.Class})
		}
	}
	first := len(p.Key)
	if hasAncient(m) {
		p.Key = append(p.Key, KeyEntry{Text: "ancient, at its palaeolatitude", Ribbon: "twin w2 r3"})
	}
	if hasRiver(m) {
		p.Key = append(p.Key, KeyEntry{Text: "river, as control", Ribbon: "river w2"})
	}
	if first < len(p.Key) {
		p.Key[first].Break = true
	}
	p.Caption = meridianCaption(m)
	if t := expectation.NewTarget(); len(m.Expected) > 0 {
		p.Caption += fmt.Sprintf(" The expectation stands on %s and %s draws, seed %d.", plural(m.Clusters, "cluster", "clusters"), thousands(t.Draws), t.Seed)
	}
	if l.shifted > 0 {
		p.Caption += fmt.Sprintf(" %s for room, by at most %.1f degrees.", plural(l.shifted, "ribbon stands beside its latitude", "ribbons stand beside their latitude"), l.farthest)
	}
	if l.leftOut > 0 {
		p.Caption += " " + plural(l.leftOut, "system, among the lowest-graded, found no room and is not drawn.", "systems, the lowest-graded, found no room and are not drawn.")
	}
	p.Caption += " Full circle: remeasured; hollow: surveyed; bar: traced; no mark: quoted."
	if from.Data != "" {
		p.Caption += " " + from.Data + "."
	}
	return p
}

// meridianSheet colours what only the meridian has.
const meridianSheet = `.panel{fill:#F1ECE0}.panel-title{font-size:13.5;fill:#14212B}.median{fill:#14212B;font-weight:700;font-size:15}.limits,.none{font-size:13}` +
	`.limit,.middle{fill:none;stroke-linecap:round;stroke-linejoin:round;vector-effect:non-scaling-stroke}.ribbon,.gap{vector-effect:non-scaling-stroke}.limit{stroke:#2C7A8F;stroke-width:1.5}.between{fill:#3A8EA1;fill-opacity:.32}.middle{stroke:#14212B;stroke-width:2.6}` +
	`.grade{fill:#fff;stroke:#14212B;stroke-width:1.3}.grade.full{fill:#14212B}.letter{font-size:11;font-weight:700;fill:#14212B}`
