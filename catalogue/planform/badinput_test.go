package planform

import (
	"errors"
	"math"
	"strings"
	"testing"
)

func line(v ...[2]float64) Line {
	l := Line{Name: "x"}
	for _, p := range v {
		l.Vertices = append(l.Vertices, Vertex{p[0], p[1], math.NaN(), math.NaN()})
	}
	return l
}

func TestRefusals(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name string
		l    Line
		s    Settings
		want []string
	}{
		{"empty", line(), Settings{}, []string{"0 vertices"}},
		{"one vertex", line([2]float64{1, 2}), Settings{}, []string{"1 vertex", "at least two"}},
		{"two equal", line([2]float64{1, 2}, [2]float64{1, 2}), Settings{}, []string{"same point"}},
		{"equal across 360", line([2]float64{-170, 2}, [2]float64{190, 2}), Settings{}, []string{"same point"}},
		{"closed", line([2]float64{0, 0}, [2]float64{1, 0}, [2]float64{1, 1}, [2]float64{0, 0}), Settings{}, []string{"closed", "chord 0", "no sinuosity"}},
		{"not a number", line([2]float64{0, 0}, [2]float64{nan, 1}), Settings{}, []string{"vertex 2", "not a number"}},
		{"infinite", line([2]float64{0, 0}, [2]float64{0, math.Inf(1)}), Settings{}, []string{"vertex 2", "not a number"}},
		{"swapped", line([2]float64{10, 120}, [2]float64{11, 121}), Settings{}, []string{"latitude 120", "swapped"}},
		{"latitude", line([2]float64{170, 91}, [2]float64{171, 91}), Settings{}, []string{"latitude 91", "beyond 90"}},
		{"longitude", line([2]float64{-181, 0}, [2]float64{-182, 1}), Settings{}, []string{"longitude -181", "-180 to 360"}},
		{"metres", line([2]float64{500000, 4e6}, [2]float64{500100, 4e6}), Settings{}, []string{"epsg=32631", "epsg=plane"}},
		{"antipodal", line([2]float64{0, 0}, [2]float64{179.9, 0.2}), Settings{}, []string{"nearly opposite"}},
		{"spacing too fine", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{SpacingM: 0.01}, []string{"spacing_m", "at least"}},
		{"spacing too coarse", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{SpacingM: 50e3}, []string{"spacing_m", "at most"}},
		{"two windows", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{WindowM: 5, WindowBends: 3}, []string{"only one of"}},
		{"window too short", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{WindowM: 1}, []string{"window_m", "at least"}},
		{"widths unknown", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{WindowWidths: 20}, []string{"window_widths", "width_m"}},
		{"even filter", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{Smooth: 4}, []string{"smooth", "odd"}},
		{"NaN setting", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{WidthM: nan}, []string{"width_m"}},
		{"z", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{Z: "height"}, []string{"depth, elevation, time"}},
		{"epsg", line([2]float64{0, 0}, [2]float64{1, 1}), Settings{EPSG: "3857"}, []string{"epsg", "plane", "31N"}},
	} {
		m, err := Measure(c.l, c.s)
		var in *InputError
		if !errors.As(err, &in) {
			t.Errorf("%s: %v, %v; expected an InputError", c.name, m, err)
			continue
		}
		for _, w := range c.want {
			if !strings.Contains(err.Error(), w) {
				t.Errorf("%s: %q does not say %q", c.name, err, w)
			}
		}
	}
}

func warned(m *Measured, what string) bool {
	for _, w := range m.Warnings {
		if strings.Contains(w, what) {
			return true
		}
	}
	return false
}

func TestWarnings(t *testing.T) {
	sine := planeLine(SineGeneratedLine(60*degree, 120e3, 12, 100))
	if m := mustMeasure(t, onGlobe(sine, 10, 20), Settings{}); len(m.Warnings) != 0 {
		t.Errorf("a clean line is warned about: %v", m.Warnings)
	}
	if m := mustMeasure(t, onGlobe(sine, 10, 179.7), Settings{}); !warned(m, "antimeridian") {
		t.Errorf("antimeridian: %v", m.Warnings)
	}
	if m := mustMeasure(t, onGlobe(sine, 89.9, 20), Settings{}); !warned(m, "pole") || math.Abs(m.MeanSinuosity-SinuosityOf(60*degree)) > 2e-3*m.MeanSinuosity {
		t.Errorf("pole: %v %v", m.MeanSinuosity, m.Warnings)
	}
	if m := mustMeasure(t, planeLine(SineGeneratedLine(131*degree, 120e3, 12, 100)), Settings{}); !warned(m, "crosses or touches itself") {
		t.Errorf("loops past the touching angle: %v", m.Warnings)
	}
	if m := mustMeasure(t, planeLine(SineGeneratedLine(118*degree, 120e3, 12, 100)), Settings{}); warned(m, "crosses") {
		t.Errorf("loops that do not touch: %v", m.Warnings)
	}
	var stairs []PlanPoint
	for _, p := range SineGeneratedLine(60*degree, 120e3, 12, 400) {
		q := PlanPoint{X: math.Round(p.X/100) * 100, Y: math.Round(p.Y/100) * 100}
		if n := len(stairs); n > 0 && q.X != stairs[n-1].X && q.Y != stairs[n-1].Y {
			stairs = append(stairs, PlanPoint{X: q.X, Y: stairs[n-1].Y})
		}
		if n := len(stairs); n == 0 || stairs[n-1] != q {
			stairs = append(stairs, q)
		}
	}
	m := mustMeasure(t, planeLine(stairs), Settings{})
	if !warned(m, "edges of pixels") {
		t.Errorf("pixel edges: %v", m.Warnings)
	}
	fixed := mustMeasure(t, planeLine(stairs), Settings{SpacingM: 500})
	near(t, "pixel edges at five pixels", fixed.MeanSinuosity, SinuosityOf(60*degree), 0.03)
	if m := mustMeasure(t, line([2]float64{0, 0}, [2]float64{1, 1}), Settings{}); !warned(m, "shorter than the window") || !warned(m, "complete bends") || m.StandardisedPeak != nil || m.MeanSinuosity != 1 {
		t.Errorf("a straight line: %+v", m)
	}
	down := onGlobe(sine, 10, 20)
	for i := range down.Vertices {
		down.Vertices[i].Depth = 1000 + 5*float64(i)
	}
	if m := mustMeasure(t, down, Settings{}); !warned(m, "Check the unit") && *m.ValleySlope > greatestSlope {
		t.Errorf("slope %v: %v", *m.ValleySlope, m.Warnings)
	}
	if m := mustMeasure(t, down, Settings{Direction: "reversed"}); !(*m.ValleySlope < 0) || !warned(m, "does not run down the slope") {
		t.Errorf("against the slope: %v", m.Warnings)
	}
}

// Direction follows the depths when it is not asked for.
func TestDirectionFromDepth(t *testing.T) {
	l := wild(1000)
	a := mustMeasure(t, l, Settings{})
	b := mustMeasure(t, reversedLine(l), Settings{})
	near(t, "valley slope", *b.ValleySlope, *a.ValleySlope, 1e-12)
	near(t, "first bend", b.Bends[0].Sinuosity, a.Bends[0].Sinuosity, 1e-9)
	if b.Settings.Direction != "reversed" || a.Settings.Direction != "as_given" {
		t.Errorf("directions %s and %s", a.Settings.Direction, b.Settings.Direction)
	}
	l.HasTime = true
	if m := mustMeasure(t, reversedLine(l), Settings{}); m.ValleySlope != nil || !warned(m, "two-way time") || m.Settings.Direction != "as_given" {
		t.Errorf("time: slope %v, %v", m.ValleySlope, m.Warnings)
	}
}

// A line that fills its ground must not make the search for crossings slow: a
// scribble of long parallel strokes, none of which meet.
func TestScribbleTerminates(t *testing.T) {
	var l Line
	l.Plane = true
	for i := range 20000 {
		x := float64(i % 2 * 1000)
		l.Vertices = append(l.Vertices, Vertex{x, float64(i) * 1e-3, math.NaN(), math.NaN()})
	}
	l.Vertices = append(l.Vertices, Vertex{5000, 5000, math.NaN(), math.NaN()})
	mustMeasure(t, l, Settings{})
}
