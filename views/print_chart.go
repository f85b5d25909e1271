package views

import "strconv"

// File is the chart as "svg", "png" or "pdf", a "single" or "double" column
// wide ("" = double), with key, caption and the credit of the outline.
func (p ChartPage) File(kind, width, credit string, from FigureSource) ([]byte, error) {
	c := p.canvas(true)
	c.w = doubleUnits
	if width == "single" {
		c.w = singleUnits
	}
	switch {
	case p.View.polar():
		c.h = min(c.w, 620)
	case p.View.azimuthal():
		c.h = 0.62 * c.w
	default:
		c.h = 0.5 * c.w
	}
	shown := p.onPage(newChartProjection(p.View, c.w, c.h))
	start := p.captionStart()
	if len(shown) < len(p.Items) {
		start = strconv.Itoa(len(shown)) + " of " + start
	}
	print := Print{Key: p.printKey(shown), Caption: start + " " + p.projectionText() + ". " + p.captionEnd() + " " + credit, Settings: from.settings("Chart")}
	if from.Data != "" {
		print.Caption += " " + from.Data + "."
	}
	title := "Where the channels are"
	c.foot = newFoot(print, title, c.w, c.h)
	height := c.h + c.foot.height
	c.put(`<svg xmlns="http://www.w3.org/2000/svg" width="`, mm(c.w), `" height="`, mmHeight(c.w, height), `" viewBox="0 0 `, num2(c.w), " ", num2(height), `"><title>`, title, `</title><desc>`, esc(p.caption()), `</desc>`)
	c.put(`<rect x="0" y="0" width="`, num2(c.w), `" height="`, num2(height), `" fill="#fff"/>`)
	c.put(`<clipPath id="chart-clip"><rect x="0" y="0" width="`, num2(c.w), `" height="`, num2(c.h), `"/></clipPath><g clip-path="url(#chart-clip)">`)
	p.draw(c)
	c.put(`</g>`, c.foot.markup, `</svg>`)
	svg, err := styled(c.String(), printSheet)
	if err != nil {
		return nil, err
	}
	return fileOf(svg, kind)
}

// printKey explains the colours and shapes of what is shown.
func (p ChartPage) printKey(shown []onPage) []KeyEntry {
	out := []KeyEntry{{Text: p.Colouring.Title, Head: true}}
	counts := make([]int, len(p.Colouring.Steps))
	for _, i := range shown {
		counts[i.Step]++
	}
	p.Items = nil
	for _, i := range shown {
		p.Items = append(p.Items, i.ChartItem)
	}
	for k, s := range p.Colouring.Steps {
		if counts[k] == 0 {
			continue
		}
		text := s.Text + " (" + strconv.Itoa(counts[k]) + ")"
		if s.Letter != "" {
			text = s.Letter + " " + text
		}
		out = append(out, KeyEntry{Text: text, Point: &Point{Class: "f" + s.Class[1:]}})
	}
	first := len(out)
	if p.hasAncient() {
		out = append(out, KeyEntry{Text: "to 5 Ma", Point: &Point{Class: "f3"}}, KeyEntry{Text: "older", Point: &Point{Class: "f3", Shape: "diamond"}})
	}
	if p.hasKind("river") {
		out = append(out, KeyEntry{Text: "river", Point: &Point{Class: "ochre hollow", Shape: "triangle"}})
	}
	if p.hasKind("lacustrine") {
		out = append(out, KeyEntry{Text: "lake floor", Point: &Point{Class: "f3", Shape: "square"}})
	}
	if first < len(out) {
		out[first].Break = true
	}
	return out
}
