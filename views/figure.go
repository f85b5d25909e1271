package views

import (
	"context"
	"io"
	"math"

	"github.com/a-h/templ"
)

// Plot is one figure: the single vocabulary of scales, marks and intervals
// from which the inline SVG, the stand-alone file and the print are drawn.
//
// Draw order is bands, grid, rules, lines, points, labels: an interval is
// always under the line it belongs to. Coordinates are data; anything not
// finite (or not positive on a log axis) is left out, never drawn. Colours
// come from classes, since the content security policy forbids style
// attributes.
type Plot struct {
	ID     string // unique on the page: ids inside the figure start with it
	Title  string // what is shown, a short sentence; read by screen readers
	Desc   string // what is to be seen in it; read by screen readers
	X, Y   Axis
	Bands  []Band
	Lines  []Line
	Rules  []Rule
	Points []Point
	Texts  []Text

	Width, Height float64 // of the view box; 0 = 720 by 440. Under 560 it counts as a small panel
	Left          float64 // left margin, for long names on Y; 0 = chosen
	Equal         bool    // one unit is as long on both axes: plan views
	NoFrame       bool    // no axes and no grid: sketches and locator maps
	Empty         string  // sentence drawn instead of a figure with nothing in it; "" = a plain one
	Print         Print   // what a file of the figure carries below the drawing
}

// Axis of a plot. Min = Max takes the range from the data with a margin of
// 4 %; otherwise the range is as given and what lies outside is clipped.
type Axis struct {
	Label    string // with its unit: "Valley slope (m/m)"
	Log      bool
	Reverse  bool // larger values down or left: depth, time before present
	Min, Max float64
	Zero     bool                 // the range includes 0
	Ticks    []float64            // nil = chosen
	Format   func(float64) string // nil = plain, with as many decimals as the ticks need
}

// Band is an interval along X, drawn filled between Low and High. Class "b2"
// is ochre.
type Band struct {
	X, Low, High []float64
	Class        string
}

// Line joins points in the order given. Class: "" the main line, "l2" ochre,
// "l3" grey, "l4" light water, with "dash" or "dot-dash" beside it, so that no
// two lines differ by colour alone. Label is set at the line's right end.
type Line struct {
	X, Y  []float64
	Class string
	Label string
}

// Rule is a straight reference line across the plot, at X when Vertical, else
// at Y.
type Rule struct {
	At       float64
	Vertical bool
	Label    string
	Class    string // "dash", "dot-dash"
}

// Point is one mark. With Href it is a link. Title names it and gives its
// values: it is shown on hover and read out; Tip is the short form shown on
// hover and focus, by default Title up to its first comma.
type Point struct {
	X, Y      float64
	Low, High float64 // interval of Y drawn as a whisker; equal = none
	XLow      float64 // interval of X; equal = none
	XHigh     float64
	Href      string
	Title     string
	Tip       string
	Shape     string  // circle (default), square, triangle, diamond, cross
	Class     string  // "", "hollow", "ochre", "alarm", "soft", "f1".."f6", joined by a space
	Size      float64 // radius in page units; 0 = 5
}

// Text is free lettering at a data position.
type Text struct {
	X, Y   float64
	Text   string
	Anchor string // start (default), middle, end
	Class  string
}

// SVG is the figure inline: role, title and description for screen readers,
// points as links.
func (p Plot) SVG() templ.Component {
	return templ.ComponentFunc(func(_ context.Context, w io.Writer) error {
		_, err := io.WriteString(w, p.draw(false))
		return err
	})
}

// IsEmpty says whether there is anything to draw.
func (p Plot) IsEmpty() bool {
	x, y := p.extent()
	return !x.ok || !y.ok
}

// span is a range being collected.
type span struct {
	lo, hi float64
	ok     bool
}

func (s *span) add(v float64, log bool) {
	if math.IsNaN(v) || math.IsInf(v, 0) || log && v <= 0 {
		return
	}
	if !s.ok {
		s.lo, s.hi, s.ok = v, v, true
		return
	}
	s.lo, s.hi = min(s.lo, v), max(s.hi, v)
}

// extent is the range of everything drawn.
func (p Plot) extent() (x, y span) {
	for _, b := range p.Bands {
		for i := range b.X {
			if i < len(b.Low) && i < len(b.High) && drawable(b.Low[i], p.Y.Log) && drawable(b.High[i], p.Y.Log) {
				x.add(b.X[i], p.X.Log)
				y.add(b.Low[i], p.Y.Log)
				y.add(b.High[i], p.Y.Log)
			}
		}
	}
	for _, l := range p.Lines {
		for i := range l.X {
			if i < len(l.Y) && drawable(l.X[i], p.X.Log) && drawable(l.Y[i], p.Y.Log) {
				x.add(l.X[i], p.X.Log)
				y.add(l.Y[i], p.Y.Log)
			}
		}
	}
	for _, q := range p.Points {
		if drawable(q.X, p.X.Log) && drawable(q.Y, p.Y.Log) {
			x.add(q.X, p.X.Log)
			y.add(q.Y, p.Y.Log)
			if q.Low != q.High {
				y.add(q.Low, p.Y.Log)
				y.add(q.High, p.Y.Log)
			}
		}
	}
	return x, y
}

func drawable(v float64, log bool) bool {
	return !math.IsNaN(v) && !math.IsInf(v, 0) && (!log || v > 0)
}
