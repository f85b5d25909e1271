package views

import (
	"bytes"
	"image"
	"image/color"
	"math"
	"time"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"codeberg.org/go-pdf/fpdf"
	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
)

// pdfCanvas is a page of a PDF as a vg.Canvas. It embeds the letters it uses,
// in Unicode, so that minus signs, superscripts and names come out and can be
// searched. Points, from the lower left corner.
type pdfCanvas struct {
	doc    *fpdf.Fpdf
	height float64
	to     affine // canvas to page, y still up
	saved  []affine
	colour color.Color
	width  vg.Length
	dash   []float64
}

// pdfTime is the date in every figure: equal figures give equal bytes.
var pdfTime = time.Date(2000, 1, 1, 0, 0, 0, 0, time.UTC)

func newPDFCanvas(w, h vg.Length, title, subject string) *pdfCanvas {
	size := fpdf.SizeType{Wd: float64(w), Ht: float64(h)}
	doc := fpdf.NewCustom(&fpdf.InitType{OrientationStr: "P", UnitStr: "pt", Size: size})
	doc.SetCatalogSort(true)
	doc.SetCreationDate(pdfTime)
	doc.SetModificationDate(pdfTime)
	doc.SetTitle(title, true)
	doc.SetSubject(subject, true)
	doc.SetMargins(0, 0, 0)
	doc.SetAutoPageBreak(false, 0)
	doc.AddUTF8FontFromBytes("liberation", "", liberationsansregular.TTF)
	doc.AddUTF8FontFromBytes("liberation", "B", liberationsansbold.TTF)
	// The size again, since a page wider than tall would be turned.
	doc.AddPageFormat("P", size)
	doc.SetLineJoinStyle("round")
	return &pdfCanvas{doc: doc, height: float64(h), to: sameAffine, colour: color.Black, width: 1}
}

func (c *pdfCanvas) bytes() ([]byte, error) {
	var b bytes.Buffer
	if err := c.doc.Output(&b); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

func (c *pdfCanvas) SetLineWidth(w vg.Length) { c.width = w }

func (c *pdfCanvas) SetLineDash(pattern []vg.Length, _ vg.Length) {
	c.dash = nil
	for _, p := range pattern {
		c.dash = append(c.dash, float64(p))
	}
}

func (c *pdfCanvas) SetColor(k color.Color) { c.colour = k }

func (c *pdfCanvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	c.to = affine{a: cos, b: sin, c: -sin, d: cos}.then(c.to)
}

func (c *pdfCanvas) Translate(p vg.Point) {
	c.to = affine{a: 1, d: 1, e: float64(p.X), f: float64(p.Y)}.then(c.to)
}

func (c *pdfCanvas) Scale(x, y float64) { c.to = affine{a: x, d: y}.then(c.to) }

func (c *pdfCanvas) Push() { c.saved = append(c.saved, c.to) }

func (c *pdfCanvas) Pop() {
	c.to = c.saved[len(c.saved)-1]
	c.saved = c.saved[:len(c.saved)-1]
}

// DrawImage is part of vg.Canvas; figures hold no images.
func (c *pdfCanvas) DrawImage(vg.Rectangle, image.Image) {}

func (c *pdfCanvas) page(p vg.Point) (x, y float64) {
	x, y = c.to.at(float64(p.X), float64(p.Y))
	return x, c.height - y
}

func (c *pdfCanvas) rgb() (r, g, b int) {
	k := color.RGBAModel.Convert(c.colour).(color.RGBA)
	return int(k.R), int(k.G), int(k.B)
}

func (c *pdfCanvas) trace(p vg.Path) {
	for _, e := range p {
		x, y := c.page(e.Pos)
		switch e.Type {
		case vg.MoveComp:
			c.doc.MoveTo(x, y)
		case vg.LineComp:
			c.doc.LineTo(x, y)
		case vg.ArcComp:
			c.arc(e)
		case vg.CloseComp:
			c.doc.ClosePath()
		}
	}
}

// arc is drawn in cubic quarters, which are true to 0.03 % of the radius.
func (c *pdfCanvas) arc(e vg.PathComp) {
	n := max(1, int(math.Ceil(math.Abs(e.Angle)/(math.Pi/2)-1e-9)))
	step := e.Angle / float64(n)
	k := 4.0 / 3 * math.Tan(step/4) * float64(e.Radius)
	r := float64(e.Radius)
	for i := range n {
		s0, c0 := math.Sincos(e.Start + float64(i)*step)
		s1, c1 := math.Sincos(e.Start + float64(i+1)*step)
		at := func(x, y float64) (float64, float64) {
			return c.page(vg.Point{X: e.Pos.X + vg.Length(x), Y: e.Pos.Y + vg.Length(y)})
		}
		x1, y1 := at(r*c0-k*s0, r*s0+k*c0)
		x2, y2 := at(r*c1+k*s1, r*s1-k*c1)
		x3, y3 := at(r*c1, r*s1)
		c.doc.CurveBezierCubicTo(x1, y1, x2, y2, x3, y3)
	}
}

func (c *pdfCanvas) Stroke(p vg.Path) {
	if c.width <= 0 {
		return
	}
	c.doc.SetLineWidth(float64(c.width))
	c.doc.SetDrawColor(c.rgb())
	c.doc.SetDashPattern(c.dash, 0)
	c.trace(p)
	c.doc.DrawPath("D")
}

func (c *pdfCanvas) Fill(p vg.Path) {
	c.doc.SetFillColor(c.rgb())
	c.trace(p)
	c.doc.DrawPath("F")
}

func (c *pdfCanvas) FillString(f font.Face, at vg.Point, text string) {
	style := ""
	if f.Font.Weight >= xfont.WeightBold {
		style = "B"
	}
	c.doc.SetFont("liberation", style, float64(f.Font.Size))
	c.doc.SetTextColor(c.rgb())
	x, y := c.page(at)
	angle := math.Atan2(c.to.b, c.to.a) * 180 / math.Pi
	if angle == 0 {
		c.doc.Text(x, y, text)
		return
	}
	c.doc.TransformBegin()
	c.doc.TransformRotate(angle, x, y)
	c.doc.Text(x, y, text)
	c.doc.TransformEnd()
}

// outline strokes the letters instead of filling them.
func (c *pdfCanvas) outline(f font.Face, at vg.Point, text string, width vg.Length) {
	c.doc.SetTextRenderingMode(1)
	c.doc.SetDrawColor(c.rgb())
	c.doc.SetLineWidth(float64(width))
	c.doc.SetDashPattern(nil, 0)
	c.FillString(f, at, text)
	c.doc.SetTextRenderingMode(0)
}
