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

	"fathombend/catalogue"
	"fathombend/stats"
)

// NextPage says where one more system would help most.
type NextPage struct {
	Page
	Answer     *stats.NextAnswer
	Request    stats.Request
	Options    stats.NextOptions
	Filter     catalogue.Filter
	Facets     []catalogue.Facet
	Terms      []string
	Categories []string
	Land       [][][2]float64 // closed rings of longitude and latitude, degrees
}

// lead is the first sentence of the answer, or what stands in its way.
func (p NextPage) lead() string {
	if len(p.Answer.Text) > 0 {
		return p.Answer.Text[0]
	}
	return "Nothing can be said about the next system from these rows. Widen the filter."
}

func (p NextPage) rest() []string {
	if len(p.Answer.Text) < 2 {
		return nil
	}
	return slices.DeleteFunc(slices.Clone(p.Answer.Text[1:]), func(s string) bool { return s == p.Answer.Separation.Text })
}

// gridRow is one band of latitude of the grid.
type gridRow struct {
	From, To float64
	Cells    []stats.NextCell
}

// grid puts the cells into rows by latitude, the pole on top.
func (p NextPage) grid() []gridRow {
	var out []gridRow
	for _, c := range p.Answer.Cells {
		if len(out) == 0 || out[len(out)-1].From != c.LatitudeFrom {
			out = append(out, gridRow{From: c.LatitudeFrom, To: c.LatitudeTo})
		}
		out[len(out)-1].Cells = append(out[len(out)-1].Cells, c)
	}
	slices.Reverse(out)
	return out
}

// shade is the class of a cell: deeper where one more system narrows more,
// relative to the best cell.
func (p NextPage) shade(c stats.NextCell) string {
	best := 0.0
	for _, o := range p.Answer.Cells {
		best = math.Max(best, o.Narrowing)
	}
	if !(c.Narrowing > 0) || best == 0 {
		return "shade0"
	}
	return "shade" + strconv.Itoa(1+min(3, int(4*c.Narrowing/best)))
}

func narrowingText(x float64) string {
	if math.IsNaN(x) {
		return unknownMark
	}
	return minus(strconv.FormatFloat(100*x, 'f', 1, 64))
}

func (p NextPage) explanationChoices(chosen string) []choice {
	var out []choice
	for _, v := range slices.Concat(stats.Predictors, p.Categories) {
		out = append(out, choice{v, bare(predictorText(v).name), v == chosen})
	}
	return out
}

func (p NextPage) termChoices(chosen string) []choice {
	var out []choice
	for _, v := range p.Terms {
		out = append(out, choice{v, bare(predictorText(v).name), v == chosen})
	}
	return out
}

// most is the largest number of systems in one box of the map.
func (p NextPage) most() int {
	n := 0
	for _, b := range p.Answer.Boxes {
		n = max(n, b.Systems)
	}
	return n
}

// thinMap draws the boxes of the map with the number of systems in each, over
// land, on a plane of equal degrees.
func (p NextPage) thinMap() templ.Component {
	return templ.ComponentFunc(func(_ context.Context, w io.Writer) error {
		const perDegree = 2.4
		x := func(lon float64) string { return num2((lon + 180) * perDegree) }
		y := func(lat float64) string { return num2((90 - lat) * perDegree) }
		var b strings.Builder
		fmt.Fprintf(&b, `<svg id="thin" class="plot thin" viewBox="-4 -4 %s %s" role="img" aria-labelledby="thin-t"><title id="thin-t">Systems in each box of 15 by 30 degrees</title>`, num2(360*perDegree+8), num2(180*perDegree+8))
		for _, ring := range p.Land {
			for i, v := range ring {
				b.WriteString(map[bool]string{true: `<path class="land" d="M`, false: " "}[i == 0])
				b.WriteString(x(v[0]) + " " + y(v[1]))
			}
			b.WriteString(`z"/>`)
		}
		for _, box := range p.Answer.Boxes {
			class := "box"
			if box.Systems == 0 {
				class = "box none"
			}
			fmt.Fprintf(&b, `<rect class="%s" x="%s" y="%s" width="%s" height="%s"/>`, class, x(box.West), y(box.South+15), num2(30*perDegree), num2(15*perDegree))
			if box.Systems > 0 {
				r := 5 + 11*math.Sqrt(float64(box.Systems)/float64(max(p.most(), 1)))
				cx, cy := num2((box.West+195)*perDegree), num2((90-box.South-7.5)*perDegree)
				fmt.Fprintf(&b, `<circle class="mark" cx="%s" cy="%s" r="%s"/><text class="label halo" x="%s" y="%s" text-anchor="middle">%d</text>`, cx, cy, num2(r), cx, num2((90-box.South-7.5)*perDegree+5), box.Systems)
			}
		}
		b.WriteString("</svg>")
		_, err := io.WriteString(w, b.String())
		return err
	})
}
