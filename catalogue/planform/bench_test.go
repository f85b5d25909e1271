package planform

import (
	"fmt"
	"math"
	"testing"
)

// longChannel is a sine-generated channel of about n vertices, 100 to a
// wavelength of 5 km of arc, on the globe, with depths: as long as it must be,
// wound up and down a basin so that it stays under 1500 km.
func longChannel(n int) Line {
	waves := math.Max(1, math.Round(float64(n)/100))
	arc := waves * 5000
	if arc > 1.2e6 { // a longer line is the same reach with more vertices
		arc = 1.2e6
	}
	pts := SineGeneratedLine(70*degree, arc, math.Min(waves, 240), int(math.Round(float64(n)/math.Min(waves, 240))))
	l := planeLine(pts[:min(len(pts), n)])
	for i := range l.Vertices {
		l.Vertices[i].Lon -= pts[len(pts)/2].X
		l.Vertices[i].Depth = 1500 + 0.004*pts[i].X
	}
	return onGlobe(l, 4, -20)
}

func BenchmarkMeasure(b *testing.B) {
	for _, n := range []int{1e3, 1e4, 1e5, 1e6} {
		l := longChannel(n)
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Measure(l, Settings{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkMeasureWithWidth(b *testing.B) {
	l := longChannel(1e5)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Measure(l, Settings{WidthM: 300}); err != nil {
			b.Fatal(err)
		}
	}
}
