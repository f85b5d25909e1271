package views

import (
	"context"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/a-h/templ"
)

// Sizes on the chart in page units.
const (
	chartMark     = 5.5  // radius of a mark
	chartLetter   = 7.0  // radius of a mark that holds a letter
	chartRibbon   = 46.0 // axis of a ribbon
	ribbonsFrom   = 8.0  // zoom from which ribbons stand in place of marks, where there is room
	leastLine     = 26.0 // a centreline shorter than this is not drawn as one
	gatherCell    = 22.0 // side of the squares that systems are gathered in
	mostGraticule = 400

	chartManyMarks = 400
)

// drawing is the chart as the server draws it: complete without scripts.
func (p ChartPage) drawing() templ.Component {
	return templ.ComponentFunc(func(_ context.Context, w io.Writer) error {
		c := p.canvas(false)
		c.put(`<svg id="chart-svg" class="plot chart" viewBox="0 0 `, num2(c.w), " ", num2(c.h), `" role="group" aria-labelledby="chart-t" aria-describedby="chart-d">`)
		c.put(`<title id="chart-t">Map of `, strconv.Itoa(len(p.Items)), ` channel systems</title><desc id="chart-d">`, esc(p.caption()), ` The list beside it holds the same systems.</desc>`)
		p.draw(c)
		c.put(`</svg>`)
		_, err := io.WriteString(w, c.String())
		return err
	})
}

func (p ChartPage) canvas(alone bool) *canvas {
	return &canvas{p: Plot{ID: "chart"}, w: chartW, h: chartH, alone: alone}
}

func (p ChartPage) draw(c *canvas) {
	pr := newChartProjection(p.View, c.w, c.h)
	p.drawGround(c, pr)
	if b := p.Filter.BBox; b != nil {
		c.put(`<path class="line l2 dash select" d="`, pr.boxPath(b.West, b.South, b.East, b.North), `"/>`)
	}
	p.drawSystems(c, pr)
	if km, length, ok := pr.scaleBar(); ok {
		x, y := c.w-14-length, c.h-16
		c.put(`<path class="frame scale" d="M`, nums(x, y-4), `v4h`, num2(length), `v-4"/>`)
		c.put(`<text class="label halo" x="`, num2(x+length/2), `" y="`, num2(y-8), `" text-anchor="middle">`, kmText(km), `</text>`)
	}
}

// drawGround is the sea, the graticule and the land.
func (p ChartPage) drawGround(c *canvas, pr chartProjection) {
	outline := pr.outline()
	if outline != "" {
		c.put(`<path class="sea" d="`, outline, `"/>`)
	} else {
		c.put(`<rect class="sea" x="0" y="0" width="`, num2(c.w), `" height="`, num2(c.h), `"/>`)
	}
	var land strings.Builder
	for _, r := range pr.landOnPage() {
		for i, v := range r {
			if i == 0 {
				land.WriteByte('M')
			} else if i == 1 {
				land.WriteByte('L')
			} else {
				land.WriteByte(' ')
			}
			land.WriteString(nums(math.Round(v[0]*10)/10, math.Round(v[1]*10)/10))
		}
		land.WriteByte('z')
	}
	if land.Len() > 0 {
		c.put(`<path class="land" d="`, land.String(), `"/>`)
	}
	lines := pr.graticule()
	for _, l := range lines[:min(len(lines), mostGraticule)] {
		c.put(`<path class="grid`, l.class, `" d="`, polyline(l.points), `"/>`)
	}
	if outline != "" {
		c.put(`<path class="frame" d="`, outline, `"/>`)
	} else {
		c.put(`<rect class="frame" x=".5" y=".5" width="`, num2(c.w-1), `" height="`, num2(c.h-1), `"/>`)
	}
	for _, l := range pr.labels() {
		c.put(`<text class="halo" x="`, num2(l.x), `" y="`, num2(l.y), `" text-anchor="`, l.anchor, `">`, esc(l.text), `</text>`)
	}
}

func polyline(points [][2]float64) string {
	var b strings.Builder
	for i, v := range points {
		if i == 0 {
			b.WriteByte('M')
		} else if i == 1 {
			b.WriteByte('L')
		} else {
			b.WriteByte(' ')
		}
		b.WriteString(nums(math.Round(v[0]*10)/10, math.Round(v[1]*10)/10))
	}
	return b.String()
}

// outline is the edge of the map, "" where the frame is inside it.
func (p chartProjection) outline() string {
	var pts [][2]float64
	switch {
	case p.v.polar():
		for k := range 121 {
			x, y := p.toPage(azimuthal(p.lat0-math.Copysign(90-polarEdge, p.lat0), 3*float64(k), p.lat0, p.lon0, 180))
			pts = append(pts, [2]float64{x, y})
		}
	case !p.v.azimuthal():
		for k := range 73 {
			x, y := p.toPage(equalEarth(-90+2.5*float64(k), 180))
			pts = append(pts, [2]float64{x, y})
		}
		for k := range 73 {
			x, y := p.toPage(equalEarth(90-2.5*float64(k), -180))
			pts = append(pts, [2]float64{x, y})
		}
	default:
		return ""
	}
	if pts = clipFrame(pts, p.w, p.h); pts == nil {
		return ""
	}
	return polyline(pts) + "z"
}

// boxPath outlines a box of meridians and parallels.
func (p chartProjection) boxPath(west, south, east, north float64) string {
	if east < west {
		east += 360
	}
	var runs []string
	var run [][2]float64
	const n = 60
	put := func(lat, lon float64) {
		x, y, _ := p.at(lat, lon)
		far := len(run) > 0 && math.Abs(x-run[len(run)-1][0]) > p.w/2 && !p.v.azimuthal()
		if p.hidden(lat, lon) || far {
			if len(run) > 1 {
				runs = append(runs, polyline(run))
			}
			run = nil
			if p.hidden(lat, lon) {
				return
			}
		}
		run = append(run, [2]float64{min(max(x, -9*p.w), 10*p.w), min(max(y, -9*p.h), 10*p.h)})
	}
	side := func(lat0, lon0, lat1, lon1 float64) {
		for i := range n + 1 {
			t := float64(i) / n
			put(lat0+t*(lat1-lat0), lon0+t*(lon1-lon0))
		}
	}
	side(south, west, south, east)
	if east-west < 360 {
		side(south, east, north, east)
	} else if len(run) > 1 {
		runs, run = append(runs, polyline(run)), nil
	}
	side(north, east, north, west)
	if east-west < 360 {
		side(north, west, south, west)
	}
	if len(run) > 1 {
		runs = append(runs, polyline(run))
	}
	return strings.Join(runs, "")
}

// onPage is a system with its place in the frame.
type onPage struct {
	ChartItem
	x, y float64
}

func (p ChartPage) onPage(pr chartProjection) []onPage {
	var out []onPage
	for _, i := range p.Items {
		if x, y, shown := pr.at(i.Lat, i.Lon); shown {
			out = append(out, onPage{i, x, y})
		}
	}
	return out
}

// drawSystems draws marks; ribbons in their place where the view is close
// enough and they touch no other; and centrelines once they can be seen.
func (p ChartPage) drawSystems(c *canvas, pr chartProjection) {
	shown := p.onPage(pr)
	if len(shown) > chartSVGLimit && !c.alone { // a file has no links to follow
		p.drawGathered(c, pr, shown)
		return
	}
	drawn := p.drawLines(c, pr)
	taken := newCrowd(c.h)
	for _, i := range shown {
		step := p.Colouring.Steps[i.Step]
		title := i.title(step)
		ribbon := !drawn[i.Slug] && pr.v.azimuthal() && p.View.Zoom >= ribbonsFrom && hasRoom(taken, i)
		if !c.alone {
			c.put(`<a href="`, esc(string(p.SystemHref(i.Slug))), `" aria-label="`, esc(title), `"><title>`, esc(title), `</title>`)
		}
		if ribbon {
			p.drawRibbon(c, i, step)
		} else {
			p.drawMark(c, i, step, len(shown) > chartManyMarks)
		}
		if !c.alone {
			c.tip(Point{Tip: i.Name + " " + num2Fixed(i.P)}, i.x, i.y)
			c.put(`</a>`)
		}
	}
}

func (p ChartPage) drawMark(c *canvas, i onPage, step ChartStep, many bool) {
	shape, class := i.shape()
	if class == "" {
		class = "f" + step.Class[1:]
	}
	r := chartMark
	if many { // without a letter marks shrink
		r = 4
	}
	if step.Letter != "" && shape != "triangle" {
		r = chartLetter
	}
	c.mark(Point{Shape: shape, Class: class, Size: r}, i.x, i.y)
	if step.Letter != "" {
		letter := "in-mark"
		if shape == "triangle" {
			letter = "in-mark on-paper"
		}
		c.put(`<text class="`, letter, `" x="`, num2(i.x), `" y="`, num2(i.y), `" dy=".35em" text-anchor="middle">`, step.Letter, `</text>`)
	}
}

// hasRoom takes the place of a ribbon centred on a system if it is free.
func hasRoom(taken *crowd, i onPage) bool {
	s := RibbonShape(i.P, chartRibbon)
	half := max(s.Half, 6) + 3
	x0, x1 := i.x-chartRibbon/2+s.Left-4, i.x-chartRibbon/2+s.Right+4
	a, b := taken.span(i.y-half, i.y+half)
	for k := a; k <= b; k++ {
		for _, t := range taken.rows[k] {
			if t[2] < i.y+half && t[3] > i.y-half && t[0] < x1 && t[1] > x0 {
				return false
			}
		}
	}
	taken.take(x0, x1, i.y-half, i.y+half)
	return true
}

func (p ChartPage) drawRibbon(c *canvas, i onPage, step ChartStep) {
	s := RibbonShape(i.P, chartRibbon)
	class := step.Class + " " + WidthClass(i.WidthM)
	if i.Kind == "river" {
		class = "river " + WidthClass(i.WidthM)
	}
	use := `<path d="` + s.D + `" class="`
	c.put(`<g transform="translate(`, nums(i.x-chartRibbon/2, i.y), `)">`)
	c.put(`<rect class="hit" x="`, num2(s.Left-4), `" y="`, num2(-s.Half-4), `" width="`, num2(s.Right-s.Left+8), `" height="`, num2(2*s.Half+8), `"/>`)
	if i.Ancient {
		c.put(use, "ribbon twin ", class, `"/>`, use, `gap"/>`)
	} else {
		c.put(use, "ribbon ", class, `"/>`)
	}
	if s.Capped {
		c.put(`<path class="capped" d="M`, nums(chartRibbon+4, -5), `v10m3-10v10"/>`)
	}
	if step.Letter != "" {
		c.put(`<text class="label halo" x="`, num2(s.Right+3), `" y="0" dy=".35em">`, step.Letter, `</text>`)
	}
	c.put(`</g>`)
}

// drawLines draws the centrelines that are long enough on the page and names
// the systems that have one drawn.
func (p ChartPage) drawLines(c *canvas, pr chartProjection) map[string]bool {
	drawn := map[string]bool{}
	classes := map[string]string{}
	for _, i := range p.Items {
		classes[i.Slug] = "course " + p.Colouring.Steps[i.Step].Class
		if i.Kind == "river" {
			classes[i.Slug] = "course river"
		}
	}
	for _, l := range p.Lines {
		var pts [][2]float64
		x, y := span{}, span{}
		for _, v := range l.Points {
			px, py, _ := pr.at(v[1], v[0])
			if pr.hidden(v[1], v[0]) {
				continue
			}
			x.add(px, false)
			y.add(py, false)
			if n := len(pts); n > 0 && math.Hypot(px-pts[n-1][0], py-pts[n-1][1]) < 0.7 {
				continue
			}
			pts = append(pts, [2]float64{px, py})
		}
		class, known := classes[l.Slug]
		if !known || len(pts) < 2 || math.Hypot(x.hi-x.lo, y.hi-y.lo) < leastLine {
			continue
		}
		drawn[l.Slug] = true
		c.put(`<path class="`, class, `" d="`, polyline(pts), `"/><circle class="mark hollow" cx="`, num2(pts[0][0]), `" cy="`, num2(pts[0][1]), `" r="3.5"/>`)
	}
	return drawn
}

// drawGathered draws squares of the page with their number of systems; each is
// a link to a closer view.
func (p ChartPage) drawGathered(c *canvas, pr chartProjection, shown []onPage) {
	type cell struct {
		x, y float64
		n    int
	}
	cells := map[[2]int]*cell{}
	var keys [][2]int
	for _, i := range shown {
		k := [2]int{int(i.x / gatherCell), int(i.y / gatherCell)}
		g := cells[k]
		if g == nil {
			g = &cell{}
			cells[k] = g
			keys = append(keys, k)
		}
		g.x, g.y, g.n = g.x+i.x, g.y+i.y, g.n+1
	}
	slices.SortFunc(keys, func(a, b [2]int) int { return (a[1]-b[1])*10000 + a[0] - b[0] })
	for _, k := range keys {
		g := cells[k]
		x, y := g.x/float64(g.n), g.y/float64(g.n)
		lat, lon, _ := pr.place(x, y)
		v := p.View
		v.Lat, v.Lon, v.Zoom = lat, lon, min(v.Zoom*4, ChartMaxZoom)
		title := plural(g.n, "system", "systems") + " near " + placeText(lat, lon) + ": look closer"
		if !c.alone {
			c.put(`<a href="`, esc(p.address(v.rounded())), `" aria-label="`, esc(title), `"><title>`, esc(title), `</title>`)
		}
		r := min(4+1.6*math.Sqrt(float64(g.n)), gatherCell/2)
		c.put(`<circle class="mark f4" cx="`, num2(x), `" cy="`, num2(y), `" r="`, num2(r), `"/>`)
		if g.n > 9 {
			c.put(`<text class="in-mark" x="`, num2(x), `" y="`, num2(y), `" dy=".35em" text-anchor="middle">`, strconv.Itoa(g.n), `</text>`)
		}
		if !c.alone {
			c.put(`</a>`)
		}
	}
}
