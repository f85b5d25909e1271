package views

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image/color"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"
	"sync"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

type attrs map[string]string

func attributes(e xml.StartElement) attrs {
	out := attrs{}
	for _, a := range e.Attr {
		out[a.Name.Local] = a.Value
	}
	return out
}

func (a attrs) num(name string, def float64) float64 {
	v, err := strconv.ParseFloat(strings.TrimRight(a[name], "%pxm"), 64)
	if err != nil {
		return def
	}
	return v
}

// colour of a fill or stroke, blended with the white ground by its opacity, so
// that a file needs no transparency.
func (a attrs) colour(name, def string) (color.Color, bool) {
	v, given := a[name]
	if !given {
		v = def
	}
	c, ok := hexColour(v)
	if !ok {
		return nil, false
	}
	o := a.num(name+"-opacity", 1)
	mix := func(v uint8) uint8 { return uint8(255 - (255-float64(v))*o + 0.5) }
	return color.RGBA{mix(c.R), mix(c.G), mix(c.B), 255}, true
}

// hexColour reads #rrggbb and #rgb; "none" and anything else is no colour.
func hexColour(s string) (color.RGBA, bool) {
	hex, ok := strings.CutPrefix(s, "#")
	if len(hex) == 3 {
		hex = string([]byte{hex[0], hex[0], hex[1], hex[1], hex[2], hex[2]})
	}
	v, err := strconv.ParseUint(hex, 16, 32)
	if !ok || err != nil || len(hex) != 6 {
		return color.RGBA{}, false
	}
	return color.RGBA{uint8(v >> 16), uint8(v >> 8), uint8(v), 255}, true
}

// brush draws the elements of a styled figure onto a canvas. Page units run
// down, the canvas up.
type brush struct {
	c      vg.Canvas
	h      float64 // of the page, units
	unit   float64 // canvas lengths a page unit
	x0, y0 float64 // page position of the upper left corner
	clips  map[string]vg.Rectangle
	paths  map[string]string // path data by id, for use
	groups []brushGroup
}

type brushGroup struct {
	to   affine
	clip vg.Rectangle // a zero one does not clip
}

func (b *brush) top() brushGroup {
	if n := len(b.groups); n > 0 {
		return b.groups[n-1]
	}
	return brushGroup{to: sameAffine}
}

// at is the canvas position of a position in the open group.
func (b *brush) at(to affine, x, y float64) vg.Point {
	x, y = to.at(x, y)
	return vg.Point{X: vg.Length((x - b.x0) * b.unit), Y: vg.Length((b.h - (y - b.y0)) * b.unit)}
}

// draw walks the elements in order.
func (b *brush) draw(svg []byte) error {
	d := xml.NewDecoder(bytes.NewReader(svg))
	clipID, inDefs := "", false
	for {
		t, err := d.Token()
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return err
		}
		switch e := t.(type) {
		case xml.StartElement:
			a := attributes(e)
			switch e.Name.Local {
			case "title", "desc", "style":
				if err := d.Skip(); err != nil {
					return err
				}
			case "clipPath":
				clipID = a["id"]
			case "defs":
				inDefs = true
			case "g":
				b.open(a)
			case "rect":
				b.rect(a, clipID)
			case "path":
				if inDefs {
					b.paths[a["id"]] = a["d"]
				} else {
					b.path(a, a["d"], transformOf(a).then(b.top().to))
				}
			case "use":
				b.path(a, b.paths[strings.TrimPrefix(a["href"], "#")], transformOf(a).then(b.top().to))
			case "circle":
				b.circle(a)
			case "text":
				if err := b.text(a, d); err != nil {
					return err
				}
			}
		case xml.EndElement:
			switch e.Name.Local {
			case "clipPath":
				clipID = ""
			case "defs":
				inDefs = false
			case "g":
				b.groups = b.groups[:len(b.groups)-1]
			}
		}
	}
}

func (b *brush) open(a attrs) {
	g := b.top()
	g.to = transformOf(a).then(g.to)
	if id := strings.TrimSuffix(strings.TrimPrefix(a["clip-path"], "url(#"), ")"); id != "" {
		g.clip = b.clips[id]
	}
	b.groups = append(b.groups, g)
}

var (
	transformTranslate = regexp.MustCompile(`translate\(([^)]*)\)`)
	transformScale     = regexp.MustCompile(`scale\(([^)]*)\)`)
	transformRotate    = regexp.MustCompile(`rotate\(([^)]*)\)`)
)

// transformOf reads translate, then rotate, then scale, each at most once and
// in that order, as the figures write them.
func transformOf(a attrs) affine {
	s := a["transform"]
	if s == "" {
		return sameAffine
	}
	numbers := func(r *regexp.Regexp) []float64 {
		m := r.FindStringSubmatch(s)
		if m == nil {
			return nil
		}
		p := pathPieces("M" + m[1] + " 0")
		if len(p) == 0 {
			return nil
		}
		return p[0].points[0][:]
	}
	m := sameAffine
	if v := numbers(transformScale); v != nil {
		m = m.then(affine{a: v[0], d: v[0]})
	}
	if v := numbers(transformRotate); v != nil {
		sin, cos := math.Sincos(v[0] * math.Pi / 180)
		m = m.then(affine{a: cos, b: sin, c: -sin, d: cos})
	}
	if v := numbers(transformTranslate); v != nil {
		m = m.then(affine{a: 1, d: 1, e: v[0], f: v[1]})
	}
	return m
}

func (b *brush) rect(a attrs, clipID string) {
	x, y, w, h := a.num("x", 0), a.num("y", 0), a.num("width", 0), a.num("height", 0)
	if clipID != "" {
		b.clips[clipID] = vg.Rectangle{Min: b.at(sameAffine, x, y+h), Max: b.at(sameAffine, x+w, y)}
		return
	}
	b.path(a, "M"+nums(x, y)+"h"+num2(w)+"v"+num2(h)+"h"+num2(-w)+"z", transformOf(a).then(b.top().to))
}

// path fills all pieces together, by winding number, then strokes each.
func (b *brush) path(a attrs, d string, to affine) {
	clip := b.top().clip
	area := &draw.Canvas{Canvas: b.c, Rectangle: clip}
	clipped := clip.Max.X > clip.Min.X
	var runs [][]vg.Point
	var whole vg.Path
	for _, piece := range pathPieces(d) {
		pts := make([]vg.Point, len(piece.points))
		for i, p := range piece.points {
			pts[i] = b.at(to, p[0], p[1])
		}
		filled := pts
		if clipped {
			filled = area.ClipPolygonXY(pts)
		}
		if len(filled) > 2 {
			whole.Move(filled[0])
			for _, q := range filled[1:] {
				whole.Line(q)
			}
			whole.Close()
		}
		if piece.closed && len(pts) > 0 {
			pts = append(pts, pts[0])
		}
		if clipped {
			runs = append(runs, area.ClipLinesXY(pts)...)
		} else {
			runs = append(runs, pts)
		}
	}
	if c, ok := a.colour("fill", "#000"); ok && len(whole) > 0 {
		b.c.SetColor(c)
		b.c.Fill(whole)
	}
	if c, ok := a.colour("stroke", "none"); ok {
		scale := to.scale()
		if a["vector-effect"] == "non-scaling-stroke" {
			scale = 1
		}
		b.pen(a, c, scale)
		for _, r := range runs {
			b.strokeRun(r)
		}
	}
}

func (b *brush) strokeRun(pts []vg.Point) {
	if len(pts) < 2 {
		return
	}
	var p vg.Path
	p.Move(pts[0])
	for _, q := range pts[1:] {
		p.Line(q)
	}
	b.c.Stroke(p)
}

func (b *brush) pen(a attrs, c color.Color, scale float64) {
	b.c.SetColor(c)
	b.c.SetLineWidth(vg.Length(a.num("stroke-width", 1) * scale * b.unit))
	var dashes []vg.Length
	for _, f := range strings.Fields(a["stroke-dasharray"]) {
		if v, err := strconv.ParseFloat(f, 64); err == nil {
			dashes = append(dashes, vg.Length(v*scale*b.unit))
		}
	}
	b.c.SetLineDash(dashes, 0)
}

func (b *brush) circle(a attrs) {
	to := transformOf(a).then(b.top().to)
	r := vg.Length(a.num("r", 0) * to.scale() * b.unit)
	centre := b.at(to, a.num("cx", 0), a.num("cy", 0))
	if k := b.top().clip; k.Max.X > k.Min.X && (centre.X < k.Min.X || centre.X > k.Max.X || centre.Y < k.Min.Y || centre.Y > k.Max.Y) {
		return
	}
	var p vg.Path
	p.Move(vg.Point{X: centre.X + r, Y: centre.Y})
	p.Arc(centre, r, 0, 2*math.Pi)
	p.Close()
	if c, ok := a.colour("fill", "#000"); ok {
		b.c.SetColor(c)
		b.c.Fill(p)
	}
	if c, ok := a.colour("stroke", "none"); ok {
		b.pen(a, c, to.scale())
		b.c.Stroke(p)
	}
}

// faces are the letters of files: free fonts that PDFs may embed.
var faces = sync.OnceValue(func() *font.Cache { return font.NewCache(liberation.Collection()) })

func faceOf(size vg.Length, bold, italic bool) font.Face {
	f := font.Font{Typeface: "Liberation", Variant: "Sans"}
	if bold {
		f.Weight = xfont.WeightBold
	}
	if italic {
		f.Style = xfont.StyleItalic
	}
	return faces().Lookup(f, size)
}

// superscripts are letters that the faces of files lack or draw unevenly; they
// are set as small raised ones.
var superscripts = map[rune]rune{'⁰': '0', '¹': '1', '²': '2', '³': '3', '⁴': '4', '⁵': '5', '⁶': '6', '⁷': '7', '⁸': '8', '⁹': '9', '⁻': '−', '⁺': '+'}

const (
	superSize = 0.64
	superRise = 0.36 // of the size of the line
)

// letterRun is a piece of a text of one size.
type letterRun struct {
	text   string
	raised bool
}

func letterRuns(s string) []letterRun {
	var out []letterRun
	for _, r := range s {
		plain, raised := superscripts[r]
		if !raised {
			plain = r
		}
		if n := len(out); n == 0 || out[n-1].raised != raised {
			out = append(out, letterRun{raised: raised})
		}
		out[len(out)-1].text += string(plain)
	}
	return out
}

// textWidth is the length of a text at a size, in the units of the size.
func textWidth(s string, size float64, bold bool) float64 {
	w := 0.0
	for _, r := range letterRuns(s) {
		face := faceOf(vg.Length(r.size(size)), bold, false)
		w += float64(face.Width(r.text))
	}
	return w
}

func (r letterRun) size(of float64) float64 {
	if r.raised {
		return superSize * of
	}
	return of
}

// fitText cuts a text that is longer than width.
func fitText(s string, size, width float64) string {
	if textWidth(s, size, false) <= width {
		return s
	}
	r := []rune(s)
	for len(r) > 1 && textWidth(string(r)+"…", size, false) > width {
		r = r[:len(r)-1]
	}
	return strings.TrimSpace(string(r)) + "…"
}

// text draws one line of letters.
func (b *brush) text(a attrs, d *xml.Decoder) error {
	text, err := innerText(d)
	if err != nil {
		return err
	}
	c, ok := a.colour("fill", "#000")
	if !ok || text == "" {
		return nil
	}
	size := a.num("font-size", 15)
	bold, italic := a["font-weight"] == "600" || a["font-weight"] == "700", a["font-style"] == "italic"
	to := transformOf(a).then(b.top().to)
	dy := 0.0
	if em, found := strings.CutSuffix(a["dy"], "em"); found {
		dy, _ = strconv.ParseFloat(em, 64)
	}
	at := b.at(to, a.num("x", 0), a.num("y", 0)+dy*size)
	shift := vg.Length(0)
	switch a["text-anchor"] {
	case "middle":
		shift = -vg.Length(textWidth(text, size, bold)*b.unit) / 2
	case "end":
		shift = -vg.Length(textWidth(text, size, bold) * b.unit)
	}
	b.c.Push()
	defer b.c.Pop()
	b.c.Translate(at)
	if to.b != 0 {
		b.c.Rotate(-math.Atan2(to.b, to.a))
	}
	halo, haloed := a.colour("stroke", "none")
	for _, r := range letterRuns(text) {
		face := faceOf(vg.Length(r.size(size)*b.unit), bold, italic)
		from := vg.Point{X: shift}
		if r.raised {
			from.Y = vg.Length(superRise * size * b.unit)
		}
		if haloed {
			b.c.SetColor(halo)
			haloOf(b.c, face, from, r.text, vg.Length(a.num("stroke-width", 4)*b.unit))
		}
		b.c.SetColor(c)
		b.c.FillString(face, from, r.text)
		shift += face.Width(r.text)
	}
	return nil
}

// haloOf paints the outline of letters, width across, under the letters.
func haloOf(c vg.Canvas, face font.Face, at vg.Point, text string, width vg.Length) {
	if p, ok := c.(*pdfCanvas); ok {
		p.outline(face, at, text, width)
		return
	}
	// An image has no outlines of letters: copies around the word stand for it.
	const copies = 16
	for k := range copies {
		sin, cos := math.Sincos(2 * math.Pi * float64(k) / copies)
		c.FillString(face, vg.Point{X: at.X + width/2*vg.Length(cos), Y: at.Y + width/2*vg.Length(sin)}, text)
	}
}

func innerText(d *xml.Decoder) (string, error) {
	var s strings.Builder
	for depth := 1; depth > 0; {
		t, err := d.Token()
		if err != nil {
			return "", err
		}
		switch e := t.(type) {
		case xml.StartElement:
			depth++
		case xml.EndElement:
			depth--
		case xml.CharData:
			s.Write(e)
		}
	}
	return s.String(), nil
}
