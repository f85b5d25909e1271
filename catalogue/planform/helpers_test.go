package planform

import (
	"compress/gzip"
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// planeLine makes a plane line of points.
func planeLine(pts []PlanPoint) Line {
	l := Line{Name: "test", Plane: true, Vertices: make([]Vertex, len(pts))}
	for i, p := range pts {
		l.Vertices[i] = Vertex{p.X, p.Y, math.NaN(), math.NaN()}
	}
	return l
}

// onGlobe lays a plane line on the ellipsoid about a point by the azimuthal
// equidistant projection: distances from the point are kept.
func onGlobe(l Line, lat, lon float64) Line {
	out := l
	out.Plane = false
	out.Vertices = make([]Vertex, len(l.Vertices))
	for i, v := range l.Vertices {
		p := v
		p.Lat, p.Lon, _ = Direct(lat, lon, math.Atan2(v.Lon, v.Lat)/degree, math.Hypot(v.Lon, v.Lat))
		out.Vertices[i] = p
	}
	return out
}

// reversedLine runs the other way.
func reversedLine(l Line) Line {
	out := l
	out.Vertices = make([]Vertex, len(l.Vertices))
	for i, v := range l.Vertices {
		out.Vertices[len(l.Vertices)-1-i] = v
	}
	return out
}

// river lines of testdata/rivers_wdb2.csv.gz by their number.
func rivers(t testing.TB) []Line {
	t.Helper()
	f, err := os.Open("testdata/rivers_wdb2.csv.gz")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	z, err := gzip.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(z).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out []Line
	for _, r := range rows[1:] {
		if len(out) == 0 || out[len(out)-1].Name != r[0] {
			out = append(out, Line{Name: r[0]})
		}
		lon, err1 := strconv.ParseFloat(r[2], 64)
		lat, err2 := strconv.ParseFloat(r[3], 64)
		if err1 != nil || err2 != nil {
			t.Fatal(err1, err2)
		}
		l := &out[len(out)-1]
		l.Vertices = append(l.Vertices, Vertex{lon, lat, math.NaN(), math.NaN()})
	}
	return out
}

func mustMeasure(t testing.TB, l Line, s Settings) *Measured {
	t.Helper()
	m, err := Measure(l, s)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// near reports a difference beyond the relative tolerance.
func near(t testing.TB, what string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Max(math.Abs(want), 1e-12)) {
		t.Errorf("%s: %.10g, expected %.10g (relative %.1e)", what, got, want, rel)
	}
}
