package views

import "strings"

// point draws one mark with its whiskers; with Href it is a link whose title
// and short tip name it.
func (c *canvas) point(q Point) {
	if !c.x.holds(q.X) || !c.y.holds(q.Y) {
		return
	}
	x, y := c.x.at(q.X), c.y.at(q.Y)
	link := q.Href != "" && !c.alone
	if link {
		c.put(`<a href="`, esc(q.Href), `" aria-label="`, esc(q.Title), `">`)
	} else if q.Title != "" {
		c.put(`<g>`)
	}
	if q.Title != "" {
		c.put(`<title>`, esc(q.Title), `</title>`)
	}
	if q.Low != q.High && drawable(q.Low, c.y.log) && drawable(q.High, c.y.log) {
		c.put(`<path class="whisker" d="M`, nums(x, min(max(c.y.at(q.Low), c.t), c.h-c.b)), "V", num2(min(max(c.y.at(q.High), c.t), c.h-c.b)), `"/>`)
	}
	if q.XLow != q.XHigh && drawable(q.XLow, c.x.log) && drawable(q.XHigh, c.x.log) {
		c.put(`<path class="whisker" d="M`, nums(min(max(c.x.at(q.XLow), c.l), c.w-c.r), y), "H", num2(min(max(c.x.at(q.XHigh), c.l), c.w-c.r)), `"/>`)
	}
	c.mark(q, x, y)
	if link {
		c.tip(q, x, y)
		c.put(`</a>`)
	} else if q.Title != "" {
		c.put(`</g>`)
	}
}

func (c *canvas) mark(q Point, x, y float64) {
	r := q.Size
	if r <= 0 {
		r = 5
	}
	class := esc(strings.TrimSpace("mark " + q.Class))
	if q.Shape == "" || q.Shape == "circle" {
		c.put(`<circle class="`, class, `" cx="`, num2(x), `" cy="`, num2(y), `" r="`, num2(r), `"/>`)
		return
	}
	d := ""
	switch q.Shape {
	case "square":
		s := 0.89 * r // of the circle's area
		d = "M" + nums(x-s, y-s) + "h" + num2(2*s) + "v" + num2(2*s) + "h" + num2(-2*s) + "z"
	case "triangle":
		s := 1.35 * r
		d = "M" + nums(x, y-s) + "l" + nums(0.87*s, 1.5*s) + "h" + num2(-1.74*s) + "z"
	case "diamond":
		s := 1.3 * r
		d = "M" + nums(x, y-s) + "l" + nums(s, s) + "l" + nums(-s, s) + "l" + nums(-s, -s) + "z"
	default: // cross
		d = "M" + nums(x-r, y-r) + "l" + nums(2*r, 2*r) + "m0 " + num2(-2*r) + "l" + nums(-2*r, 2*r)
	}
	c.put(`<path class="`, class, `" d="`, d, `"/>`)
}

// tip is the short name beside the mark that the style sheet shows on hover
// and keyboard focus.
func (c *canvas) tip(q Point, x, y float64) {
	text := q.Tip
	if text == "" {
		text, _, _ = strings.Cut(q.Title, ",")
	}
	anchor, dx := "start", 10.0
	if x > c.w*0.6 {
		anchor, dx = "end", -10
	}
	c.put(`<text class="tip" x="`, num2(x+dx), `" y="`, num2(y-8), `" text-anchor="`, anchor, `">`, esc(text), `</text>`)
}
