package planform

import (
	"math"
	"math/rand/v2"
	"testing"
)

// The projection is fixed by two properties: it is conformal, and the central
// meridian is drawn true to scale times 0.9996. Both are checked against
// geodesic distances, which have their own vectors.
func TestUTMDefinition(t *testing.T) {
	for _, lat := range []float64{-80, -41.5, -3, 0.5, 17, 52, 79} {
		_, n := UTM(lat, 9, 32, false)
		d, _, _, err := Inverse(0, 9, lat, 9)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(n-math.Copysign(d*0.9996, lat)) > 1e-4 {
			t.Errorf("latitude %v on the central meridian: northing %.6f, meridian arc %.6f", lat, n, d*0.9996)
		}
	}
	// Conformal: the images of a small step east and a small step north are
	// equally long for equal distances, and at right angles.
	r := rand.New(rand.NewPCG(2, 2))
	for range 200 {
		lat, lon := 160*r.Float64()-80, 9+7*(r.Float64()-0.5)
		const h = 1000.0
		var v [2][2]float64
		for i, az := range []float64{90, 0} {
			lat1, lon1, _ := Direct(lat, lon, az, h)
			lat0, lon0, _ := Direct(lat, lon, az+180, h)
			e1, n1 := UTM(lat1, lon1, 32, false)
			e0, n0 := UTM(lat0, lon0, 32, false)
			v[i] = [2]float64{e1 - e0, n1 - n0}
		}
		east, north := math.Hypot(v[0][0], v[0][1]), math.Hypot(v[1][0], v[1][1])
		dot := v[0][0]*v[1][0] + v[0][1]*v[1][1]
		if math.Abs(east/north-1) > 1e-7 || math.Abs(dot/(east*north)) > 1e-7 {
			t.Errorf("(%.3f, %.3f): ratio %.9f, cosine %.2e", lat, lon, east/north, dot/(east*north))
		}
	}
}

// Flinders Peak and Buninyong in MGA94 zone 55, which is UTM on GRS80: the
// worked example of the GDA technical manual (ICSM), quoted from memory. GRS80
// and WGS84 differ by less than 0.1 mm here.
func TestUTMWorkedExample(t *testing.T) {
	dms := func(d, m, s float64) float64 { return d + m/60 + s/3600 }
	for _, c := range []struct{ lat, lon, e, n float64 }{
		{-dms(37, 57, 3.7203), dms(144, 25, 29.5244), 273741.297, 5796489.777},
		{-dms(37, 39, 10.1561), dms(143, 55, 35.3839), 228854.052, 5828259.038},
	} {
		e, n := UTM(c.lat, c.lon, 55, true)
		if math.Abs(e-c.e) > 1e-3 || math.Abs(n-c.n) > 1e-3 {
			t.Errorf("(%v, %v): %.4f %.4f, expected %.3f %.3f", c.lat, c.lon, e, n, c.e, c.n)
		}
	}
}

func TestUTMRoundTrip(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 3))
	for range 2000 {
		zone := 1 + r.IntN(60)
		lat := 168*r.Float64() - 84
		lon := math.Remainder(centralMeridian(zone)+12*(r.Float64()-0.5), 360)
		south := lat < 0
		e, n := UTM(lat, lon, zone, south)
		lat2, lon2 := FromUTM(e, n, zone, south)
		if math.Abs(lat2-lat) > 1e-12*90 || math.Abs(math.Remainder(lon2-lon, 360)) > 1e-11 {
			t.Errorf("zone %d (%v, %v) comes back as (%v, %v)", zone, lat, lon, lat2, lon2)
		}
	}
}

// The same sine-generated line in UTM metres and in degrees gives the same
// numbers; in UTM south, across the false northing, too.
func TestUTMAndDegreesAlike(t *testing.T) {
	for _, lat := range []float64{44, -21} {
		deg := onGlobe(planeLine(SineGeneratedLine(math.Pi/2, 160e3, 20, 200)), lat, 15)
		m := mustMeasure(t, deg, Settings{})
		near(t, "90 degrees", m.MeanSinuosity, 2.119, 2e-3)
		utm := Line{Name: "utm"}
		for _, v := range deg.Vertices {
			e, n := UTM(v.Lat, v.Lon, 33, lat < 0)
			utm.Vertices = append(utm.Vertices, Vertex{e, n, v.Depth, v.Width})
		}
		c := crs{zone: 33, south: lat < 0}
		if err := c.toDegrees(&utm); err != nil {
			t.Fatal(err)
		}
		sameShape(t, "UTM", m, mustMeasure(t, utm, Settings{}), 1, 1e-9)
	}
}

func TestParseEPSG(t *testing.T) {
	for code, want := range map[string]crs{
		"": {}, "4326": {}, "EPSG:4326": {}, "urn:ogc:def:crs:OGC:1.3:CRS84": {}, "plane": {plane: true},
		"32631": {zone: 31}, "EPSG:32760": {zone: 60, south: true}, "urn:ogc:def:crs:EPSG::32601": {zone: 1},
		"31N": {zone: 31}, "utm 7s": {zone: 7, south: true},
	} {
		got, err := parseEPSG(code)
		if err != nil || got != want {
			t.Errorf("%q: %+v %v, expected %+v", code, got, err, want)
		}
	}
	for _, code := range []string{"3857", "32600", "32661", "61N", "0S", "x", "N"} {
		if _, err := parseEPSG(code); err == nil {
			t.Errorf("%q is accepted", code)
		}
	}
}
