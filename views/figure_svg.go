package views

import (
	"html"
	"math"
	"slices"
	"strings"
)

// canvas collects the markup of one plot.
type canvas struct {
	strings.Builder
	p          Plot
	w, h       float64
	l, r, t, b float64 // margins
	x, y       scale
	alone      bool // a file of its own: no links
	foot       foot // of a file: key, caption and settings below the drawing
}

func esc(s string) string { return html.EscapeString(s) }

func (c *canvas) put(parts ...string) {
	for _, s := range parts {
		c.WriteString(s)
	}
}

// draw writes the figure. Page geometry: margins hold lettering at the size
// the style sheet uses on a phone, where the whole figure shrinks.
func (p Plot) draw(alone bool) string {
	c := &canvas{p: p, w: p.Width, h: p.Height, alone: alone}
	if c.w <= 0 {
		c.w = 720
	}
	if c.h <= 0 {
		c.h = 440
	}
	small := c.w < 560 || alone // files are lettered alike at every width
	c.l, c.r, c.t, c.b = 76, 18, 16, 62
	if small {
		c.l, c.b = 58, 52
	}
	if p.Left > 0 {
		c.l = p.Left
	}
	if p.NoFrame {
		c.l, c.r, c.t, c.b = 6, 6, 6, 6
	}
	if p.ID == "" {
		p.ID, c.p.ID = "figure", "figure"
	}
	xs, ys := p.extent()
	empty := (!xs.ok || !ys.ok) && !(p.NoFrame && len(p.Lines)+len(p.Bands) > 0)
	if empty {
		c.h = 96
	}
	if alone {
		c.foot = newFoot(p.Print, p.Title, c.w, c.h)
	}
	c.open(small)
	if empty {
		c.sentence()
		c.put(c.foot.markup, "</svg>")
		return c.String()
	}
	c.y = newScale(p.Y, ys, c.h-c.b, c.t)
	if !p.NoFrame && p.Left <= 0 {
		c.l = c.roomForTicks(small)
	}
	c.x = newScale(p.X, xs, c.l, c.w-c.r)
	if p.Equal {
		c.equalise()
	}
	c.put(`<clipPath id="`, esc(p.ID), `-clip"><rect x="`, num2(c.l-6), `" y="`, num2(c.t-6), `" width="`, num2(c.w-c.l-c.r+12), `" height="`, num2(c.h-c.t-c.b+12), `"/></clipPath>`)
	c.put(`<g clip-path="url(#`, esc(p.ID), `-clip)">`)
	for _, b := range p.Bands {
		c.band(b)
	}
	c.put("</g>")
	if !p.NoFrame {
		c.axes(small)
	}
	c.put(`<g clip-path="url(#`, esc(p.ID), `-clip)">`)
	for _, r := range p.Rules {
		c.rule(r)
	}
	for _, l := range p.Lines {
		c.line(l)
	}
	c.put("</g>")
	for _, q := range p.Points {
		c.point(q)
	}
	c.labels()
	c.put(c.foot.markup, "</svg>")
	return c.String()
}

func (c *canvas) open(small bool) {
	class := "plot"
	if small {
		class = "plot small-panel"
	}
	id := esc(c.p.ID)
	c.put(`<svg `)
	if c.alone {
		height := c.h + c.foot.height
		c.put(`xmlns="http://www.w3.org/2000/svg" width="`, mm(c.w), `" height="`, mmHeight(c.w, height), `" `)
	} else {
		c.put(`id="`, id, `" `)
	}
	c.put(`class="`, class, `" viewBox="0 0 `, num2(c.w), " ", num2(c.h+c.foot.height), `" role="group" aria-labelledby="`, id, `-t" aria-describedby="`, id, `-d">`)
	c.put(`<title id="`, id, `-t">`, esc(c.p.Title), `</title><desc id="`, id, `-d">`, esc(c.p.Desc), `</desc>`)
	if c.alone {
		c.put(`<rect x="0" y="0" width="`, num2(c.w), `" height="`, num2(c.h+c.foot.height), `" fill="#fff"/>`)
	}
}

func (c *canvas) sentence() {
	text := c.p.Empty
	if text == "" {
		text = "Nothing to draw: no row has both values."
	}
	c.put(`<text class="label" x="`, num2(c.w/2), `" y="54" text-anchor="middle">`, esc(text), `</text>`)
}

// equalise widens the tighter axis so that one unit is as long on both.
func (c *canvas) equalise() {
	perX := (c.x.hi - c.x.lo) / math.Abs(c.x.to-c.x.from)
	perY := (c.y.hi - c.y.lo) / math.Abs(c.y.to-c.y.from)
	widen := func(s *scale, by float64) {
		mid, half := (s.lo+s.hi)/2, (s.hi-s.lo)/2*by
		s.lo, s.hi = mid-half, mid+half
	}
	if perX < perY {
		widen(&c.x, perY/perX)
	} else if perY > 0 {
		widen(&c.y, perX/perY)
	}
}

// tickCounts are about how many ticks each axis gets.
func tickCounts(small bool) (nx, ny int) {
	if small {
		return 5, 5
	}
	return 7, 6
}

// roomForTicks is the left margin: the axis label, and the longest tick at the
// size the style sheet gives it on a phone.
func (c *canvas) roomForTicks(small bool) float64 {
	_, ny := tickCounts(small)
	longest := 0
	for _, text := range tickTexts(c.p.Y, c.y.ticks(c.p.Y, ny)) {
		longest = max(longest, len([]rune(text)))
	}
	if small {
		return 36 + 8.6*float64(longest)
	}
	return 40 + 13*float64(longest)
}

func (c *canvas) axes(small bool) {
	nx, ny := tickCounts(small)
	left, right, top, bottom := c.l, c.w-c.r, c.t, c.h-c.b
	xt, yt := c.x.ticks(c.p.X, nx), c.y.ticks(c.p.Y, ny)
	for i, text := range tickTexts(c.p.Y, yt) {
		y := c.y.at(yt[i])
		if c.alone {
			text = fitText(text, 15, left-14)
		}
		c.put(`<path class="grid" d="M`, nums(left, y), "H", num2(right), `"/>`)
		c.put(`<text x="`, num2(left-9), `" y="`, num2(y), `" dy=".34em" text-anchor="end">`, esc(text), `</text>`)
	}
	for i, text := range tickTexts(c.p.X, xt) {
		x := c.x.at(xt[i])
		c.put(`<path class="tick" d="M`, nums(x, bottom), `v6"/>`)
		c.put(`<text x="`, num2(x), `" y="`, num2(bottom+10), `" dy=".9em" text-anchor="middle">`, esc(text), `</text>`)
	}
	c.put(`<path class="frame" d="M`, nums(left, bottom), "H", num2(right), `"/>`)
	c.put(`<text class="axis-label" x="`, num2((left+right)/2), `" y="`, num2(c.h-7), `" text-anchor="middle">`, esc(c.p.X.Label), `</text>`)
	mid := (top + bottom) / 2
	c.put(`<text class="axis-label" transform="translate(17 `, num2(mid), `) rotate(-90)" text-anchor="middle">`, esc(c.p.Y.Label), `</text>`)
}

// band is drawn piece by piece between gaps.
func (c *canvas) band(b Band) {
	n := min(len(b.X), len(b.Low), len(b.High))
	for i := 0; i < n; {
		j := i
		for j < n && drawable(b.X[j], c.x.log) && drawable(b.Low[j], c.y.log) && drawable(b.High[j], c.y.log) {
			j++
		}
		if j-i > 1 {
			c.put(`<path class="`, esc(strings.TrimSpace("band "+b.Class)), `" d="M`)
			for k := i; k < j; k++ {
				c.put(nums(c.x.at(b.X[k]), c.bound(b.Low[k])), " ")
			}
			for k := j - 1; k >= i; k-- {
				c.put(nums(c.x.at(b.X[k]), c.bound(b.High[k])), " ")
			}
			c.put(`z"/>`)
		}
		i = max(j, i) + 1
	}
}

// bound keeps a coordinate near the page: a limit of 1e12 would be drawn
// outside anyway, and some viewers fail on it.
func (c *canvas) bound(v float64) float64 { return min(max(c.y.at(v), -4*c.h), 5*c.h) }

func (c *canvas) line(l Line) {
	n := min(len(l.X), len(l.Y))
	var d strings.Builder
	pen := false
	for i := range n {
		if !drawable(l.X[i], c.x.log) || !drawable(l.Y[i], c.y.log) {
			pen = false
			continue
		}
		if pen {
			d.WriteByte(' ')
		} else {
			d.WriteByte('M')
		}
		d.WriteString(nums(min(max(c.x.at(l.X[i]), -4*c.w), 5*c.w), c.bound(l.Y[i])))
		pen = true
	}
	if d.Len() > 0 {
		c.put(`<path class="`, esc(strings.TrimSpace("line "+l.Class)), `" d="`, d.String(), `"/>`)
	}
}

func (c *canvas) rule(r Rule) {
	class := esc(strings.TrimSpace("rule " + r.Class))
	switch {
	case r.Vertical && c.x.holds(r.At):
		c.put(`<path class="`, class, `" d="M`, nums(c.x.at(r.At), c.t), "V", num2(c.h-c.b), `"/>`)
	case !r.Vertical && c.y.holds(r.At):
		c.put(`<path class="`, class, `" d="M`, nums(c.l, c.y.at(r.At)), "H", num2(c.w-c.r), `"/>`)
	}
}

// labels letters the rules and the right ends of the lines, pushed apart.
func (c *canvas) labels() {
	for _, r := range c.p.Rules {
		switch {
		case r.Label == "":
		case r.Vertical && c.x.holds(r.At):
			x, anchor := c.x.at(r.At)+6, "start"
			if x > c.w*0.75 {
				x, anchor = x-12, "end"
			}
			c.put(`<text class="label halo" x="`, num2(x), `" y="`, num2(c.t+14), `" text-anchor="`, anchor, `">`, esc(r.Label), `</text>`)
		case !r.Vertical && c.y.holds(r.At):
			c.put(`<text class="label halo" x="`, num2(c.l+6), `" y="`, num2(c.y.at(r.At)-6), `">`, esc(r.Label), `</text>`)
		}
	}
	type end struct {
		y    float64
		text string
	}
	var ends []end
	for _, l := range c.p.Lines {
		if l.Label == "" {
			continue
		}
		for i := min(len(l.X), len(l.Y)) - 1; i >= 0; i-- {
			if c.x.holds(l.X[i]) && c.y.holds(l.Y[i]) {
				ends = append(ends, end{c.y.at(l.Y[i]) - 8, l.Label})
				break
			}
		}
	}
	slices.SortStableFunc(ends, func(a, b end) int { return int(math.Copysign(1, b.y-a.y)) })
	floor := c.h - c.b - 4
	for _, e := range ends {
		y := min(e.y, floor)
		floor = y - 22
		c.put(`<text class="label halo" x="`, num2(c.w-c.r-4), `" y="`, num2(y), `" text-anchor="end">`, esc(e.text), `</text>`)
	}
	for _, t := range c.p.Texts {
		if !c.x.holds(t.X) || !c.y.holds(t.Y) || t.Text == "" {
			continue
		}
		anchor := t.Anchor
		if anchor == "" {
			anchor = "start"
		}
		c.put(`<text class="`, esc(strings.TrimSpace("label halo "+t.Class)), `" x="`, num2(c.x.at(t.X)), `" y="`, num2(c.y.at(t.Y)), `" text-anchor="`, esc(anchor), `">`, esc(t.Text), `</text>`)
	}
}
