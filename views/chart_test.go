package views

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
)

var chartTestViews = []ChartView{
	{"world", 0, 0, 1}, {"world", 0, 150, 1}, {"world", 40, -70, 2.5}, {"world", 62, 5, 4}, {"world", -20, 179, 30}, {"world", 15, -165, 3},
	{"north", 90, 0, 1}, {"south", -90, 0, 1}, {"north", 70, 20, 6}, {"south", -65, -60, 3},
}

// The outline of Equal Earth: half axes of the projection at R = 1, from the
// formulas of Savric et al. 2019 at (0, 180) and (90, 0), worked by hand:
// 2 sqrt(3) pi / (3 A1) and the polynomial at asin(sqrt(3)/2) = pi/3.
func TestEqualEarth(t *testing.T) {
	x, _ := equalEarth(0, 180)
	_, y := equalEarth(90, 0)
	p := math.Pi / 3
	wantY := p*ee1 + ee2*math.Pow(p, 3) + ee3*math.Pow(p, 7) + ee4*math.Pow(p, 9)
	if wantX := 2 * math.Sqrt(3) * math.Pi / (3 * ee1); math.Abs(x-wantX) > 1e-12 || math.Abs(y-wantY) > 1e-12 {
		t.Errorf("half axes %.10f %.10f, want %.10f %.10f", x, y, wantX, wantY)
	}
	if math.Abs(x-equalEarthX) > 1e-9 || math.Abs(y-equalEarthY) > 1e-9 {
		t.Errorf("the constants are %.16f %.16f", x, y)
	}
}

// Snyder 1987, USGS Prof. Pap. 1395, numerical example of the azimuthal
// equal-area projection of the sphere (p. 332): R = 3, centre 40 N 100 W, place
// 20 S 100 E gives x -4.2339303, y 4.0257775 (from memory; the formula agrees).
func TestAzimuthal(t *testing.T) {
	x, y := azimuthal(-20, 100, 40, -100, 180)
	if math.Abs(3*x+4.2339303) > 5e-7 || math.Abs(3*y-4.0257775) > 5e-7 {
		t.Errorf("x %.7f y %.7f", 3*x, 3*y)
	}
}

// Equal areas stay equal, in the world and close: the determinant of the
// Jacobian over cos(latitude) is the same everywhere.
func TestChartIsEqualArea(t *testing.T) {
	for _, v := range chartTestViews {
		p := newChartProjection(v, chartW, chartH)
		want := p.r * p.r * radian * radian
		r := rand.New(rand.NewPCG(1, 2))
		seen := 0
		for range 4000 {
			lat, lon := math.Asin(2*r.Float64()-1)/radian, 360*r.Float64()-180
			if _, _, shown := p.at(lat, lon); !shown || math.Abs(lat) > 88 || math.Abs(lonDifference(lon, p.lon0)) > 179.9 {
				continue
			}
			seen++
			const d = 1e-4
			ax, ay, _ := p.at(lat, lon-d)
			bx, by, _ := p.at(lat, lon+d)
			cx, cy, _ := p.at(lat-d, lon)
			ex, ey, _ := p.at(lat+d, lon)
			det := math.Abs((bx-ax)*(ey-cy)-(by-ay)*(ex-cx)) / (4 * d * d) / math.Cos(lat*radian)
			if math.Abs(det/want-1) > 1e-4 {
				t.Fatalf("%+v at %.2f %.2f: area %.6f of what it should be", v, lat, lon, det/want)
			}
		}
		if seen == 0 && v.Zoom < 10 {
			t.Errorf("%+v: no place tried", v)
		}
	}
}

func TestChartInverse(t *testing.T) {
	for _, v := range chartTestViews {
		p := newChartProjection(v, chartW, chartH)
		for i := range 21 {
			for j := range 11 {
				px, py := chartW*float64(i)/20, chartH*float64(j)/10
				lat, lon, ok := p.place(px, py)
				if !ok {
					continue
				}
				if x, y, _ := p.at(lat, lon); math.Hypot(x-px, y-py) > 1e-6 {
					t.Fatalf("%+v: %g %g came back as %g %g (%g %g)", v, px, py, x, y, lat, lon)
				}
			}
		}
	}
}

// The land on the page is the land on the Earth, in every view; where the
// antipode of the centre is land too (15 N 165 W, antipode in Africa).
func TestChartLand(t *testing.T) {
	winding := func(rings []ring, x, y float64) int {
		n := 0
		for _, r := range rings {
			for i, a := range r {
				b := r[(i+1)%len(r)]
				side := (b[0]-a[0])*(y-a[1]) - (x-a[0])*(b[1]-a[1])
				switch {
				case a[1] <= y && b[1] > y && side > 0:
					n++
				case a[1] > y && b[1] <= y && side < 0:
					n--
				}
			}
		}
		return n
	}
	for _, v := range chartTestViews {
		p := newChartProjection(v, chartW, chartH)
		rings := p.landOnPage()
		r := rand.New(rand.NewPCG(3, 4))
		tried, wrong := 0, 0
		for tried < 1500 {
			lat, lon, ok := p.place(chartW*r.Float64(), chartH*r.Float64())
			if !ok || p.hidden(lat, lon) {
				continue
			}
			x, y, _ := p.at(lat, lon)
			tried++
			if (winding(rings, x, y) != 0) != land.Contains(lat, lon) {
				wrong++
			}
		}
		// Coasts of the coarse outline are a few km off, and islands are missing.
		if share := float64(wrong) / float64(tried); share > 0.03 {
			t.Errorf("%+v: %.1f %% of places on the wrong side of the coast", v, 100*share)
		}
	}
}

// Steps of the links: zooming in and out again, and moving, stay in range and
// give short addresses.
func TestChartSteps(t *testing.T) {
	page := ChartPage{View: NewChartView("world")}
	for _, s := range page.steps() {
		if s.Key == "out" && !s.To.IsWhole() || s.Key == "whole" && page.address(s.To) != "/chart" {
			t.Errorf("%s leads to %+v", s.Key, s.To)
		}
		if s.Key == "east" && !(s.To.Lon > 60 && s.To.Lon < 180) {
			t.Errorf("a step east leads to %+v", s.To)
		}
	}
	v := ChartView{"world", 61.5, 5.2, 40}
	for range 30 {
		p := newChartProjection(v, chartW, chartH)
		v = p.moved(0.3, 0.3, 1.7)
		if math.IsNaN(v.Lat+v.Lon+v.Zoom) || math.Abs(v.Lat) > 90 || math.Abs(v.Lon) > 180 || v.Zoom > ChartMaxZoom {
			t.Fatalf("%+v", v)
		}
	}
	if v.Zoom != ChartMaxZoom {
		t.Errorf("zoom ends at %g", v.Zoom)
	}
}

func TestChartColouring(t *testing.T) {
	rows := []catalogue.Row{
		{Feeder: "river", ValleySlope: catalogue.Num(0.0005), Burial: "seafloor"},
		{Feeder: "shelf", ValleySlope: catalogue.Num(0.001), Burial: "buried", AgeMa: catalogue.Num(66)},
		{Feeder: "unknown", Burial: "buried"},
	}
	c := NewChartColouring("slope", rows)
	if c.Of[0] != 0 || c.Of[1] != 1 || c.Of[2] != 6 || c.Steps[6].Class != "r0" {
		t.Errorf("slope: %+v", c)
	}
	c = NewChartColouring("feeder", rows)
	if len(c.Steps) != 3 || c.Steps[0].Letter != "R" || c.Steps[1].Letter != "S" || c.Of[2] != 2 || c.Steps[2].Letter != "" {
		t.Errorf("feeder: %+v", c)
	}
	c = NewChartColouring("age", rows)
	if c.Of[0] != 0 || c.Of[1] != 3 || c.Of[2] != 6 {
		t.Errorf("age: %+v", c.Of)
	}
	letters := map[string]bool{}
	for _, w := range []string{"seismic_3d", "seismic_2d", "sidescan", "sub_bottom", "satellite", "seafloor"} {
		if l := freeLetter(w, letters); l == "" {
			t.Errorf("no letter for %s", w)
		}
	}
}

// More systems than can be told apart are gathered, and every one is counted.
func TestChartGathers(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	p := ChartPage{View: NewChartView("world"), Colouring: ChartColouring{Steps: []ChartStep{{Class: "r1"}}}}
	for range 900 {
		p.Items = append(p.Items, ChartItem{MeridianItem: MeridianItem{Slug: "s", Name: "S", P: 1.2, Kind: "submarine"}, Lat: 120*r.Float64() - 60, Lon: 360*r.Float64() - 180})
	}
	c := p.canvas(false)
	p.draw(c)
	s := c.String()
	if n := strings.Count(s, `<a href="/systems/`); n != 0 {
		t.Errorf("%d drawn one by one", n)
	}
	if strings.Count(s, "look closer") < 100 || strings.Contains(s, "NaN") {
		t.Error("gathered marks are links")
	}
	p.Items = p.Items[:chartSVGLimit]
	c = p.canvas(false)
	p.draw(c)
	if n := strings.Count(c.String(), `<a href="/systems/`); n != chartSVGLimit {
		t.Errorf("%d of %d drawn", n, chartSVGLimit)
	}
}
