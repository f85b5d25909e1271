package planform

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// longChannel is a sine-generated channel of n vertices on the globe, with
// depths: 5 km of arc a meander, 100 vertices each, and finer vertices once it
// would be longer than 1200 km.
func longChannel(n int) Line {
	waves := math.Min(240, math.Max(1, math.Round(float64(n)/100)))
	pts := SineGeneratedLine(70*degree, 5000*waves, waves, int(math.Round(float64(n)/waves)))
	l := planeLine(pts[:min(len(pts), n)])
	for i := range l.Vertices {
		l.Vertices[i].Lon -= pts[len(pts)/2].X
		l.Vertices[i].Depth = 1500 + 0.004*pts[i].X
	}
	return onGlobe(l, 4, -20)
}

// Measuring alone, parsing apart: the cost is linear in the vertices. Run with
// GOMAXPROCS=1 for one core.
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
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(n), "ns/vertex")
		})
	}
}

// With a width: windows of 20 widths and a filter of two.
func BenchmarkMeasureWithWidth(b *testing.B) {
	l := longChannel(1e5)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Measure(l, Settings{WidthM: 300}); err != nil {
			b.Fatal(err)
		}
	}
}

// A line of 100,000 vertices in each text format.
func BenchmarkRead(b *testing.B) {
	l := longChannel(1e5)
	join := func(format, sep string, swap bool) string {
		var s strings.Builder
		for i, v := range l.Vertices {
			if i > 0 {
				s.WriteString(sep)
			}
			if swap {
				fmt.Fprintf(&s, format, v.Lat, v.Lon, -v.Depth)
			} else {
				fmt.Fprintf(&s, format, v.Lon, v.Lat, -v.Depth)
			}
		}
		return s.String()
	}
	for _, c := range []struct{ name, text string }{
		{"GeoJSON", `{"type":"LineString","coordinates":[` + join("[%.7f,%.7f,%.2f]", ",", false) + `]}`},
		{"KML", kmlOf(`<Placemark><LineString><coordinates>` + join("%.7f,%.7f,%.2f", " ", false) + `</coordinates></LineString></Placemark>`)},
		{"GPX", `<gpx><trk><trkseg>` + join(`<trkpt lat="%.7f" lon="%.7f"><ele>%.2f</ele></trkpt>`, "", true) + `</trkseg></trk></gpx>`},
		{"CSV", "lon,lat,elevation\n" + join("%.7f,%.7f,%.2f", "\n", false)},
		{"WKT", "LINESTRING Z (" + join("%.7f %.7f %.2f", ",", false) + ")"},
	} {
		data := []byte(c.text)
		b.Run(c.name, func(b *testing.B) {
			b.SetBytes(int64(len(data)))
			b.ReportAllocs()
			for b.Loop() {
				if lines, _, err := Read(data, "", "", Settings{}); err != nil || len(lines[0].Vertices) != 1e5 {
					b.Fatal(err)
				}
			}
		})
	}
}
