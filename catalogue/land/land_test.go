package land

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// Points at least 30 km from a coast, from common geography (positions of
// cities and seas from memory, to a tenth of a degree).
func TestContains(t *testing.T) {
	tests := []struct {
		name     string
		lat, lon float64
		want     bool
	}{
		{"Madrid", 40.4, -3.7, true},
		{"Moscow", 55.8, 37.6, true},
		{"Nairobi", -1.3, 36.8, true},
		{"Alice Springs", -23.7, 133.9, true},
		{"Denver", 39.7, -105.0, true},
		{"Brasilia", -15.8, -47.9, true},
		{"South Pole", -90, 0, true},
		{"Antarctica at the antimeridian", -85, 180, true},
		{"Antarctica at the antimeridian from the west", -85, -179.99, true},
		{"inner Chukotka, east of the antimeridian", 66.9, -177.5, true},
		{"Greenland ice", 72, -40, true},
		{"Madagascar", -19, 46.5, true},
		{"Iceland", 64.8, -18.5, true},
		{"North Pole", 90, 0, false},
		{"mid-Atlantic on the equator", 0, -25, false},
		{"central Pacific", 0, -160, false},
		{"central Pacific, longitude past 180", 0, 200, false},
		{"Bay of Bengal", 15, 88, false},
		{"Gulf of Mexico", 25, -90, false},
		{"western Mediterranean", 40, 5.5, false},
		{"Caspian Sea", 42, 50.5, false},
		{"Weddell Sea", -70, -45, false},
		{"Bering Sea at the antimeridian", 58, 180, false},
		{"Hudson Bay", 59, -85, false},
		{"Tasman Sea", -38, 162, false},
	}
	for _, tt := range tests {
		if got := Contains(tt.lat, tt.lon); got != tt.want {
			t.Errorf("%s (%g, %g): on land %v, want %v", tt.name, tt.lat, tt.lon, got, tt.want)
		}
		if got := Contains(tt.lat, tt.lon+360); got != tt.want {
			t.Errorf("%s: a turn further on land %v, want %v", tt.name, got, tt.want)
		}
	}
	for _, lat := range []float64{91, -91, math.NaN(), math.Inf(1)} {
		if Contains(lat, 20) {
			t.Errorf("latitude %g is on land", lat)
		}
	}
	for _, lon := range []float64{math.NaN(), math.Inf(-1)} {
		if Contains(50, lon) {
			t.Errorf("longitude %g is on land", lon)
		}
	}
}

// The share of the Earth's surface that is land is 29.06 % (361.84 million km2
// of ocean, Oceanography 23:112 (2010), doi 10.5670/oceanog.2010.51, figure from
// memory, of 510.07): a lost continent or a ring filled inside out would show.
// Counted on a grid of one degree, weighted by the cosine of latitude.
func TestShareOfLand(t *testing.T) {
	var on, all float64
	for lat := -89.5; lat < 90; lat++ {
		w := math.Cos(lat * math.Pi / 180)
		for lon := -179.5; lon < 180; lon++ {
			all += w
			if Contains(lat, lon) {
				on += w
			}
		}
	}
	if share := on / all; math.Abs(share-0.2906) > 0.006 {
		t.Errorf("share of land %.4f, want about 0.29", share)
	}
}

func TestRingsStayOnThePlane(t *testing.T) {
	rings := Rings()
	if len(rings) < 100 {
		t.Fatalf("%d rings, want over 100", len(rings))
	}
	for i, r := range append(rings, mustDecode(fineText)...) {
		for k, v := range r {
			if math.Abs(v[0]) > 180 || math.Abs(v[1]) > 90 {
				t.Fatalf("ring %d: vertex %v off the map", i, v)
			}
			n := r[(k+1)%len(r)]
			// Only the closing line under Antarctica may span the map.
			if math.Abs(n[0]-v[0]) > 90 && v[1] > -89.9 {
				t.Fatalf("ring %d: edge %v to %v jumps across the map: not cut at the antimeridian", i, v, n)
			}
		}
	}
}

// The outline that pages draw with scripts is the one that Rings gives.
func TestScriptsHaveTheSameOutline(t *testing.T) {
	data, err := os.ReadFile("../../static/land.json")
	if err != nil {
		t.Fatal(err)
	}
	var f struct {
		Geometry struct{ Coordinates [][][][2]float64 }
	}
	if err := json.Unmarshal(data, &f); err != nil {
		t.Fatal(err)
	}
	if len(data) > 60_000 {
		t.Errorf("land.json has %d bytes, want at most 60,000", len(data))
	}
	var got [][][2]float64
	for _, p := range f.Geometry.Coordinates {
		for _, r := range p {
			if r[0] != r[len(r)-1] {
				t.Fatalf("ring %d is not closed", len(got))
			}
			got = append(got, r[:len(r)-1])
		}
	}
	want := Rings()
	if len(got) != len(want) {
		t.Fatalf("%d rings, want %d", len(got), len(want))
	}
	for i := range want {
		if len(got[i]) != len(want[i]) {
			t.Fatalf("ring %d: %d vertices, want %d", i, len(got[i]), len(want[i]))
		}
		for k := range want[i] {
			if got[i][k] != want[i][k] {
				t.Fatalf("ring %d vertex %d: %v, want %v", i, k, got[i][k], want[i][k])
			}
		}
	}
}

func TestDecodeRefuses(t *testing.T) {
	for _, s := range []string{
		"0 0 1 0 0 1", "unit x\n", "unit 0.1\n0 0 1 0\n", "unit 0.1\n0 0 1 0 0 1 4\n", "unit 0.1\n0 0 1 0 a 1\n", "unit 0.1\n0 0 1 0 1 b\n",
	} {
		if _, err := decode(s); err == nil {
			t.Errorf("%q was read without an error", s)
		}
	}
}

func BenchmarkContains(b *testing.B) {
	Contains(0, 0)
	for b.Loop() {
		Contains(48.3, 11.7)
	}
}

func BenchmarkFirstCall(b *testing.B) {
	for b.Loop() {
		mustDecode(fineText)
	}
}
