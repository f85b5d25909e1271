package views

import (
	"bytes"
	"image/png"
	"math"
	"os"
	"path/filepath"
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
	return p
}

// TestFigureFiles: a PNG of 180 mm at 300 dpi, a PDF with its letters inside,
// and equal bytes for equal figures.
func TestFigureFiles(t *testing.T) {
	p := examplePlot()
	raster, err := p.File("png")
	if err != nil {
		t.Fatal(err)
	}
	cfg, err := png.DecodeConfig(bytes.NewReader(raster))
	if err != nil {
		t.Fatal(err)
	}
	if want := 180 / 25.4 * 300; math.Abs(float64(cfg.Width)-want) > 1 { // mm to inch, 300 dpi
		t.Errorf("PNG is %d wide, want %.0f", cfg.Width, want)
	}
	img, _ := png.Decode(bytes.NewReader(raster))
	colours := map[string]int{}
	for y := 0; y < cfg.Height; y += 3 {
		for x := 0; x < cfg.Width; x += 3 {
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
			t.Errorf("no %s in the PNG: %v", c, colours)
		}
	}
	pdf, err := p.File("pdf")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.HasPrefix(pdf, []byte("%PDF-")) || !bytes.Contains(pdf, []byte("/FontFile2")) {
		t.Error("a PDF with embedded letters")
	}
	again, _ := p.File("pdf")
	if !bytes.Equal(pdf, again) {
		t.Error("equal figures give equal PDF bytes")
	}
	if _, err := p.File("gif"); err == nil {
		t.Error("an unknown kind is an error")
	}
	if dir := os.Getenv("FIGURES"); dir != "" {
		svg, _ := p.File("svg")
		for name, b := range map[string][]byte{"example.png": raster, "example.pdf": pdf, "example.svg": svg} {
			if err := os.WriteFile(filepath.Join(dir, name), b, 0o644); err != nil {
				t.Fatal(err)
			}
		}
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
}
