package views

import (
	"bytes"
	"fmt"
	"image/png"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
)

// examplePlot has every mark of the vocabulary.
func examplePlot() Plot {
	p := Plot{ID: "example", Title: "Sinuosity against slope", X: Axis{Label: "Valley slope (m/m)", Log: true}, Y: Axis{Label: "Sinuosity"}}
	var x, y, lo, hi []float64
	for i := range 40 {
		v := 0.0004 * math.Pow(60, float64(i)/39)
		x, y = append(x, v), append(y, 1+0.9*math.Exp(-80*v))
		lo, hi = append(lo, y[i]-0.1-2*v), append(hi, y[i]+0.2+3*v)
	}
	p.Bands = []Band{{X: x, Low: lo, High: hi}}
	p.Lines = []Line{{X: x, Y: y, Label: "floor decay"}, {X: x, Y: hi, Class: "l2 dash", Label: "rivers"}}
	p.Rules = []Rule{{At: 1.5, Label: "1.5, rivers", Class: "dash"}}
	for i, shape := range []string{"circle", "square", "triangle", "diamond", "cross"} {
		for j, class := range []string{"", "hollow", "ochre", "soft", "f1"} {
			p.Points = append(p.Points, Point{X: x[3+7*i], Y: 1.1 + 0.2*float64(j), Shape: shape, Class: class, Low: 1.05 + 0.2*float64(j), High: 1.18 + 0.2*float64(j)})
		}
	}
	p.Print = Print{
		Caption: "Sinuosity of any kind against valley slope, 41 rows in 20 clusters; limits are for one new system.", Invented: 3,
		Settings: "settings: model=floor_decay:valley_slope seed=1",
		Key:      []KeyEntry{{Text: "Latitude", Head: true}, {Text: "under 10", Point: &Point{Class: "f1"}}, {Text: "river", Point: &Point{Class: "ochre hollow", Shape: "triangle"}}, {Text: "rivers", Line: "l2 dash"}},
	}
	return p
}

// TestFigureFiles: one and two columns wide, a PNG of 300 dpi that says so, a
// PDF with its letters inside, and equal bytes for equal figures.
func TestFigureFiles(t *testing.T) {
	p := examplePlot()
	for width, wantMM := range map[string]float64{"single": 85, "double": 175} { // common practice of journals, no source
		raster, err := p.File("png", width)
		if err != nil {
			t.Fatal(err)
		}
		img, err := png.Decode(bytes.NewReader(raster))
		if err != nil {
			t.Fatal(err)
		}
		if want := wantMM / 25.4 * 300; math.Abs(float64(img.Bounds().Dx())-want) > 1 { // mm to inch, 300 dpi
			t.Errorf("%s: PNG is %d wide, want %.0f", width, img.Bounds().Dx(), want)
		}
		// pHYs: 300 / 0.0254 = 11811 pixels a metre, in both directions, unit metre.
		if !bytes.Contains(raster, []byte("pHYs\x00\x00\x2e\x23\x00\x00\x2e\x23\x01")) {
			t.Errorf("%s: the PNG does not say its resolution", width)
		}
		colours := map[string]int{}
		for y := 0; y < img.Bounds().Dy(); y += 3 {
			for x := 0; x < img.Bounds().Dx(); x += 3 {
				r, g, b, _ := img.At(x, y).RGBA()
				switch {
				case r>>8 == 0x16 && g>>8 == 0x4E && b>>8 == 0x65:
					colours["line"]++
				case r>>8 == 0xB5 && g>>8 == 0x76 && b>>8 == 0x2A:
					colours["ochre"]++
				case r == g && g == b && r>>8 == 0xFF:
					colours["paper"]++
				}
			}
		}
		for _, c := range []string{"line", "ochre", "paper"} {
			if colours[c] == 0 {
				t.Errorf("%s: no %s in the PNG: %v", width, c, colours)
			}
		}
		pdf, err := p.File("pdf", width)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.HasPrefix(pdf, []byte("%PDF-")) || !bytes.Contains(pdf, []byte("/FontFile2")) {
			t.Error("a PDF with embedded letters")
		}
		var box [4]float64
		m := regexp.MustCompile(`/MediaBox \[([^\]]*)\]`).FindSubmatch(pdf)
		if m == nil {
			t.Fatal("a PDF without a page size")
		}
		if _, err := fmt.Sscan(string(m[1]), &box[0], &box[1], &box[2], &box[3]); err != nil || math.Abs(box[2]/72*25.4-wantMM) > 0.1 {
			t.Errorf("%s: PDF page %v pt, want %g mm", width, box, wantMM)
		}
		again, _ := p.File("pdf", width)
		if !bytes.Equal(pdf, again) {
			t.Error("equal figures give equal PDF bytes")
		}
		svg, _ := p.File("svg", width)
		if dir := os.Getenv("FIGURES"); dir != "" {
			for kind, b := range map[string][]byte{"png": raster, "pdf": pdf, "svg": svg} {
				if err := os.WriteFile(filepath.Join(dir, "example-"+width+"."+kind), b, 0o644); err != nil {
					t.Fatal(err)
				}
			}
		}
	}
	if _, err := p.File("gif", "single"); err == nil {
		t.Error("an unknown kind is an error")
	}
}

// A stand-alone SVG needs no style sheet, and says everything of its caption.
func TestStandaloneSVG(t *testing.T) {
	p := examplePlot()
	p.Points[0].Href, p.Points[0].Title = "/systems/x", "X <&> \"Y\", 1.2"
	svg := string(p.Standalone())
	wellFormed(t, svg)
	for _, bad := range []string{"<style", "class=", "style=", "href=", "NaN"} {
		if strings.Contains(svg, bad) {
			t.Errorf("%s in a stand-alone figure", bad)
		}
	}
	text := regexp.MustCompile(`<[^>]*>`).ReplaceAllString(strings.ReplaceAll(svg, "</text>", " "), "")
	for _, want := range append(strings.Fields(p.Print.Caption), "Invented", "settings") {
		if !strings.Contains(text, want) {
			t.Errorf("%q is not in the file", want)
		}
	}
	for _, want := range []string{`width="175mm"`, `fill="#20647A"`, `stroke-dasharray="7 5"`, `font-family="Liberation Sans,`} {
		if !strings.Contains(svg, want) {
			t.Errorf("no %s in the file", want)
		}
	}
}

// Lines of a caption are no wider than the column.
func TestWrapText(t *testing.T) {
	text := "Sinuosity against valley slope of submarine channels https://example.org/" + strings.Repeat("a", 200) + " and more"
	for _, width := range []float64{120, 450} {
		for _, l := range wrapText(text, 14, width, false) {
			if textWidth(l, 14, false) > width {
				t.Errorf("%q is wider than %g", l, width)
			}
		}
	}
	for _, l := range wrapTitled("A bold title that is longer than one line of the column", text, 14, 200) {
		if w := l.at + textWidth(l.rest, 14, false); l.rest != "" && w > 200.001 {
			t.Errorf("%+v is %.1f wide", l, w)
		}
	}
}

// Worked by hand: half a turn, doubled, moved.
func TestTransformOf(t *testing.T) {
	x, y := transformOf(attrs{"transform": "translate(10 20) rotate(180) scale(2)"}).at(3, 4)
	if math.Abs(x-4) > 1e-12 || math.Abs(y-12) > 1e-12 {
		t.Errorf("%g %g", x, y)
	}
}

func TestPathPieces(t *testing.T) {
	// Worked by hand: one closed triangle, one open line.
	got := pathPieces("M10 10l5 .5-5 2zM-1-2H3V4")
	if len(got) != 2 || !got[0].closed || got[1].closed {
		t.Fatalf("%+v", got)
	}
	if got[0].points[2] != [2]float64{10, 12.5} || got[1].points[2] != [2]float64{3, 4} {
		t.Errorf("%+v", got)
	}
	// The end of a cubic is its last point; its middle is (1+3*3+3*3+1)/8 of them.
	c := pathPieces("M0 0c0 10 10 10 10 0s10-10 10 0")
	if p := c[0].points; p[curvePieces] != [2]float64{10, 0} || p[2*curvePieces] != [2]float64{20, 0} || p[curvePieces/2] != [2]float64{5, 7.5} || p[curvePieces+curvePieces/2] != [2]float64{15, -7.5} {
		t.Errorf("%v", c[0].points)
	}
}
