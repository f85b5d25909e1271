package planform

import (
	"encoding/binary"
	"encoding/json"
	"errors"
	"math"
	"os"
	"path/filepath"
	"testing"
)

// Every reader: whatever the bytes, it ends, and gives lines within the limits,
// refusals with a reason, or an InputError; and what was read is measured or
// refused, with numbers that are finite wherever JSON needs them to be. Seeds
// are the small files of testdata/seeds; go test runs them all each time.
func seeds(f *testing.F, pattern string) {
	names, err := filepath.Glob("testdata/seeds/" + pattern)
	if err != nil || len(names) == 0 {
		f.Fatal("no seeds", pattern, err)
	}
	for _, n := range names {
		b, err := os.ReadFile(n)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(b)
	}
}

func fuzzRead(t *testing.T, data []byte) {
	if len(data) > 1<<16 {
		return
	}
	for _, s := range []Settings{{}, {EPSG: "plane", Lines: "levels"}, {EPSG: "32631", Lines: "banks"}} {
		lines, refused, err := Read(data, "", "", s)
		if err != nil {
			var in *InputError
			if !errors.As(err, &in) || in.Message == "" {
				t.Fatalf("%v is no InputError", err)
			}
			continue
		}
		for _, r := range refused {
			if r.Reason == "" {
				t.Fatalf("refused without a reason: %+v", r)
			}
		}
		for _, l := range lines {
			fuzzMeasure(t, l, s)
		}
	}
}

func fuzzMeasure(t *testing.T, l Line, s Settings) {
	m, err := Measure(l, s)
	if err != nil {
		var in *InputError
		if !errors.As(err, &in) {
			t.Fatalf("%v is no InputError", err)
		}
		return
	}
	if !(m.ChannelLengthM > 0) || !(m.ChordM > 0) || !(m.ReachSinuosity >= 1) || !finite(m.ReachSinuosity) {
		t.Fatalf("length %v, chord %v, sinuosity %v", m.ChannelLengthM, m.ChordM, m.ReachSinuosity)
	}
	if m.MeanSinuosity < 1 || m.PeakSinuosity < m.MeanSinuosity-1e-9 {
		t.Fatalf("mean %v, peak %v", m.MeanSinuosity, m.PeakSinuosity)
	}
	if _, err := json.Marshal(m.Settings); err != nil {
		t.Fatal(err)
	}
	if len(m.Plan) > maxPoints+1 || len(m.Windows) > maxWindows+1 {
		t.Fatalf("%d points, %d windows", len(m.Plan), len(m.Windows))
	}
}

func FuzzGeoJSON(f *testing.F) {
	seeds(f, "*.geojson")
	f.Fuzz(fuzzRead)
}

func FuzzXML(f *testing.F) {
	seeds(f, "*.kml")
	seeds(f, "*.gpx")
	f.Fuzz(fuzzRead)
}

func FuzzCSV(f *testing.F) {
	seeds(f, "*.csv")
	f.Fuzz(fuzzRead)
}

func FuzzWKT(f *testing.F) {
	seeds(f, "*.wkt")
	f.Fuzz(fuzzRead)
}

// The geometry blobs of a GeoPackage; SQLite itself reads the rest of the file.
func FuzzGeoPackageGeometry(f *testing.F) {
	f.Add(gpBlob(short, binary.LittleEndian, true))
	f.Add(gpBlob(short, binary.BigEndian, false))
	f.Fuzz(func(t *testing.T, data []byte) {
		c := &collector{skipped: map[string]int{}}
		if err := c.geometryBlob("x", data); err != nil {
			var in *InputError
			if !errors.As(err, &in) {
				t.Fatalf("%v is no InputError", err)
			}
		}
		for _, l := range c.lines {
			fuzzMeasure(t, l, Settings{})
		}
	})
}

// Any polyline: coordinates from the bytes.
func FuzzMeasure(f *testing.F) {
	f.Add([]byte{0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 200, 201}, true)
	f.Add([]byte{10, 10, 10, 10, 20, 20, 10, 10}, false)
	f.Fuzz(func(t *testing.T, data []byte, plane bool) {
		l := Line{Plane: plane}
		for i := 0; i+1 < min(len(data), 4000); i += 2 {
			l.Vertices = append(l.Vertices, Vertex{(float64(data[i]) - 128) * 1.4, (float64(data[i+1]) - 128) * 0.7, float64(data[i]), math.NaN()})
		}
		fuzzMeasure(t, l, Settings{})
		fuzzMeasure(t, l, Settings{WidthM: 1000, Smooth: 1})
	})
}
