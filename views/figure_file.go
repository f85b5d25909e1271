package views

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"image/color"
	"io"
	"math"
	"regexp"
	"strconv"
	"strings"
	"sync"

	"github.com/a-h/templ"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgpdf"
)

// Widths of a figure in print: a whole page, and a column for the small panels.
const (
	pageWidth   = 180 * vg.Millimeter
	columnWidth = 88 * vg.Millimeter
	pngDPI      = 300
)

// File is the figure as "svg", "png" (300 dpi) or "pdf", as wide as a printed
// page, or as a column for small panels. All three are one drawing: the stand-
// alone SVG is what the other two are made of.
func (p Plot) File(kind string) ([]byte, error) {
	svg := p.Standalone()
	switch kind {
	case "svg":
		return svg, nil
	case "png", "pdf":
		return rasterise(svg, kind)
	}
	return nil, fmt.Errorf("no figure of kind %q", kind)
}

// rasterise draws the SVG subset that Plot writes onto a vector canvas.
func rasterise(svg []byte, kind string) ([]byte, error) {
	w, h, err := svgSize(svg)
	if err != nil {
		return nil, err
	}
	width := pageWidth
	if w < 560 {
		width = columnWidth
	}
	unit := float64(width) / w
	height := vg.Length(h * unit)
	var out bytes.Buffer
	switch kind {
	case "png":
		c := vgimg.NewWith(vgimg.UseWH(width, height), vgimg.UseDPI(pngDPI), vgimg.UseBackgroundColor(color.White))
		if err := newBrush(c, w, h, unit).draw(svg); err != nil {
			return nil, err
		}
		_, err = vgimg.PngCanvas{Canvas: c}.WriteTo(&out)
	default:
		c := vgpdf.New(width, height)
		if err := newBrush(c, w, h, unit).draw(svg); err != nil {
			return nil, err
		}
		if _, err = c.WriteTo(&out); err == nil {
			return undated(out.Bytes()), nil
		}
	}
	return out.Bytes(), err
}

// pdfDate is where a PDF says when it was made: equal figures give equal bytes,
// so the time is blanked at its own length, which keeps every offset true.
var pdfDate = regexp.MustCompile(`/(CreationDate|ModDate) \(D:\d+\)`)

func undated(b []byte) []byte {
	return pdfDate.ReplaceAllFunc(b, func(m []byte) []byte {
		return bytes.Map(func(r rune) rune {
			if r >= '0' && r <= '9' {
				return '0'
			}
			return r
		}, m)
	})
}

func svgSize(svg []byte) (w, h float64, err error) {
	d := xml.NewDecoder(bytes.NewReader(svg))
	for {
		t, err := d.Token()
		if err != nil {
			return 0, 0, err
		}
		if e, ok := t.(xml.StartElement); ok {
			a := attributes(e)
			if w, h = a.num("width"), a.num("height"); w > 0 && h > 0 {
				return w, h, nil
			}
			return 0, 0, errors.New("a figure without a size")
		}
	}
}

type attrs map[string]string

func attributes(e xml.StartElement) attrs {
	out := attrs{}
	for _, a := range e.Attr {
		out[a.Name.Local] = a.Value
	}
	return out
}

func (a attrs) num(name string) float64 {
	v, _ := strconv.ParseFloat(strings.TrimSuffix(a[name], "%"), 64)
	return v
}

// brush draws elements onto a canvas; page units run down, the canvas up.
type brush struct {
	c     vg.Canvas
	w, h  float64
	unit  float64 // canvas lengths a page unit
	rules []cssRule
	clips map[string]vg.Rectangle
	clip  []vg.Rectangle // of the open groups; a zero one does not clip
}

func newBrush(c vg.Canvas, w, h, unit float64) *brush {
	return &brush{c: c, w: w, h: h, unit: unit, rules: parseCSS(standaloneStyle), clips: map[string]vg.Rectangle{}}
}

func (b *brush) at(x, y float64) vg.Point {
	return vg.Point{X: vg.Length(x * b.unit), Y: vg.Length((b.h - y) * b.unit)}
}

// draw walks the elements in order.
func (b *brush) draw(svg []byte) error {
	d := xml.NewDecoder(bytes.NewReader(svg))
	clipID := ""
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
			case "clipPath":
				clipID = a["id"]
			case "g":
				b.clip = append(b.clip, b.clips[strings.TrimSuffix(strings.TrimPrefix(a["clip-path"], "url(#"), ")")])
			case "rect":
				if clipID != "" {
					b.clips[clipID] = vg.Rectangle{Min: b.at(a.num("x"), a.num("y")+a.num("height")), Max: b.at(a.num("x")+a.num("width"), a.num("y"))}
				}
			case "path":
				b.path(a)
			case "circle":
				b.circle(a)
			case "text":
				text, err := innerText(d)
				if err != nil {
					return err
				}
				b.text(a, text)
			case "title", "desc", "style":
				if err := d.Skip(); err != nil {
					return err
				}
			}
		case xml.EndElement:
			switch e.Name.Local {
			case "clipPath":
				clipID = ""
			case "g":
				b.clip = b.clip[:len(b.clip)-1]
			}
		}
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

// clipCanvas is the innermost clip as a drawing area, nil when there is none.
func (b *brush) clipCanvas() *draw.Canvas {
	for i := len(b.clip) - 1; i >= 0; i-- {
		if r := b.clip[i]; r.Max.X > r.Min.X {
			return &draw.Canvas{Canvas: b.c, Rectangle: r}
		}
	}
	return nil
}

// path fills, then strokes, the pieces of a path.
func (b *brush) path(a attrs) {
	s := b.style("path", a)
	pieces := pathPieces(a["d"])
	for _, piece := range pieces {
		var pts []vg.Point
		for _, p := range piece.points {
			pts = append(pts, b.at(p[0], p[1]))
		}
		if c, ok := s.colour("fill"); ok && len(pts) > 2 {
			area := pts
			if k := b.clipCanvas(); k != nil {
				area = k.ClipPolygonXY(pts)
			}
			b.fill(area, c)
		}
		if c, ok := s.colour("stroke"); ok {
			line := pts
			if piece.closed && len(pts) > 0 {
				line = append(append([]vg.Point{}, pts...), pts[0])
			}
			lines := [][]vg.Point{line}
			if k := b.clipCanvas(); k != nil {
				lines = k.ClipLinesXY(line)
			}
			for _, l := range lines {
				b.stroke(l, c, s)
			}
		}
	}
}

func (b *brush) fill(pts []vg.Point, c color.Color) {
	if len(pts) < 3 {
		return
	}
	b.c.SetColor(c)
	b.c.Fill(closedPath(pts))
}

func closedPath(pts []vg.Point) vg.Path {
	var p vg.Path
	p.Move(pts[0])
	for _, q := range pts[1:] {
		p.Line(q)
	}
	p.Close()
	return p
}

func (b *brush) stroke(pts []vg.Point, c color.Color, s style) {
	if len(pts) < 2 {
		return
	}
	var p vg.Path
	p.Move(pts[0])
	for _, q := range pts[1:] {
		p.Line(q)
	}
	b.pen(c, s)
	b.c.Stroke(p)
}

func (b *brush) pen(c color.Color, s style) {
	b.c.SetColor(c)
	b.c.SetLineWidth(vg.Length(s.num("stroke-width", 1) * b.unit))
	var dashes []vg.Length
	for _, f := range strings.Fields(s["stroke-dasharray"]) {
		if v, err := strconv.ParseFloat(f, 64); err == nil {
			dashes = append(dashes, vg.Length(v*b.unit))
		}
	}
	b.c.SetLineDash(dashes, 0)
}

func (b *brush) circle(a attrs) {
	s := b.style("circle", a)
	r := vg.Length(a.num("r") * b.unit)
	var p vg.Path
	centre := b.at(a.num("cx"), a.num("cy"))
	p.Move(vg.Point{X: centre.X + r, Y: centre.Y})
	p.Arc(centre, r, 0, 2*math.Pi)
	p.Close()
	if c, ok := s.colour("fill"); ok {
		b.c.SetColor(c)
		b.c.Fill(p)
	}
	if c, ok := s.colour("stroke"); ok {
		b.pen(c, s)
		b.c.Stroke(p)
	}
}

// faces are the letters of files: free fonts that PDFs may embed.
var faces = sync.OnceValue(func() *font.Cache { return font.NewCache(liberation.Collection()) })

func (b *brush) text(a attrs, text string) {
	s := b.style("text", a)
	c, ok := s.colour("fill")
	if !ok || text == "" {
		return
	}
	size := vg.Length(s.num("font-size", 15) * b.unit)
	face := faces().Lookup(font.Font{Typeface: "Liberation", Variant: "Sans"}, size)
	x, y, turned := a.num("x"), a.num("y"), false
	if m := textTurn.FindStringSubmatch(a["transform"]); m != nil {
		x, _ = strconv.ParseFloat(m[1], 64)
		y, _ = strconv.ParseFloat(m[2], 64)
		turned = true
	}
	if em, found := strings.CutSuffix(a["dy"], "em"); found {
		v, _ := strconv.ParseFloat(em, 64)
		y += v * s.num("font-size", 15)
	}
	at := b.at(x, y)
	shift := vg.Length(0)
	switch a["text-anchor"] {
	case "middle":
		shift = -face.Width(text) / 2
	case "end":
		shift = -face.Width(text)
	}
	b.c.Push()
	defer b.c.Pop()
	b.c.Translate(at)
	if turned {
		b.c.Rotate(math.Pi / 2)
	}
	if strings.Contains(" "+a["class"]+" ", " halo ") {
		// A canvas has no outlines of letters: white copies around the word
		// stand for the halo that a browser paints.
		b.c.SetColor(color.White)
		r := vg.Length(1.6 * b.unit)
		for k := range 8 {
			sin, cos := math.Sincos(float64(k) * math.Pi / 4)
			b.c.FillString(face, vg.Point{X: shift + r*vg.Length(cos), Y: r * vg.Length(sin)}, text)
		}
	}
	b.c.SetColor(c)
	b.c.FillString(face, vg.Point{X: shift}, text)
}

var textTurn = regexp.MustCompile(`^translate\((-?[\d.]+) (-?[\d.]+)\) rotate\(-90\)$`)

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

// figureAs is the address of a figure as another kind of file.
func figureAs(svg templ.SafeURL, kind string) templ.SafeURL {
	return templ.SafeURL(strings.Replace(string(svg), ".svg", "."+kind, 1))
}
