package earth

import (
	"errors"
	"math"
	"os"
	"strings"
	"testing"
)

// tan I = 2 tan lat; pairs of the project's list of check values.
func TestInclination(t *testing.T) {
	for lat, inc := range map[float64]float64{45: 63.4, 40: 59.2, 60: 73.9, 80: 85.0, -30: -49.1, 55: 70.7} {
		near(t, "I", InclinationOfLatitude(lat), inc, 0.05)
		near(t, "lat", LatitudeOfInclination(InclinationOfLatitude(lat)), lat, 1e-10)
	}
	near(t, "I of -24", InclinationOfLatitude(-24), -41.68370203503222, 1e-12)
	near(t, "lat of 42", LatitudeOfInclination(42), 24.237370383549177, 1e-12)
	p, err := FromInclination(50, 5, 1)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "value", p.Value, 30.7897, 5e-5)
	near(t, "low", p.Low, 26.565, 5e-4)
	near(t, "high", p.High, 35.530, 5e-4)
	near(t, "dp", DP(50, 5), 4.4652, 5e-5)
	near(t, "se", p.SE, DP(50, 5)/2.45, 1e-9)
	// flattening, tan I_obs = f tan I_field
	near(t, "30, 0.6", mustInclination(t, 30, 0.6), 25.6934, 5e-5)
	near(t, "40, 0.5", mustInclination(t, 40, 0.5), 40, 1e-10)
	for _, i := range []float64{-90, -89.9999, 0, 89.9999, 90} {
		q, err := FromInclination(i, 5, 0.6)
		if err != nil || math.IsNaN(q.Value+q.SE+q.Low+q.High) || q.Low > q.Value || q.High < q.Value {
			t.Errorf("I = %v: %+v, %v", i, q, err)
		}
	}
}

func mustInclination(t *testing.T, i, f float64) float64 {
	t.Helper()
	p, err := FromInclination(i, math.NaN(), f)
	if err != nil {
		t.Fatal(err)
	}
	return p.Value
}

// Site, north pole, palaeolatitude: the project's list of check values.
func TestPoles(t *testing.T) {
	for _, c := range []struct{ sLat, sLon, pLat, pLon, want, tol float64 }{
		{39.5, 94.7, 81.4, 149.7, 44.036, 5e-4},
		{33, -117, 81.5, 198.3, 38.8122, 5e-5},
		{33, 243, 68, 191, 44.2991, 5e-5},
		{42.4, 0.1, 78.8, 187.2, 31.27, 5e-3},
		{-32.5, 19.8, 42.1, 242.4, -55.17, 5e-3},
		{31.8, -104.8, 52.1, 129.6, 6.42, 5e-3},
		{-12, -10, 72, 200, -27.36, 5e-3},
	} {
		p, err := FromPole(c.sLat, c.sLon, Pole{c.pLat, c.pLon, 4})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "palaeolatitude", p.Value, c.want, c.tol)
		near(t, "se = A95/2.45", p.SE, 1.63, 5e-3)
	}
	// by rotation about (0, lon_p - 90) by 90 - lat_p
	for _, c := range []struct{ sLat, sLon, want float64 }{{20, 30, 27.186931}, {-35, 150, -13.500943}} {
		near(t, "by pole", LatitudeFromPole(c.sLat, c.sLon, Pole{Lat: 60, Lon: 100}), c.want, 5e-7)
		lat, _ := Rotate(c.sLat, c.sLon, 0, 10, 30)
		near(t, "by rotation", lat, c.want, 5e-7)
	}
	for lat := -85.0; lat <= 85; lat += 17 {
		for lon := -180.0; lon < 180; lon += 41 {
			r, _ := Rotate(lat, lon, 0, 33.5-90, 90-47.25)
			near(t, "pole = rotation", LatitudeFromPole(lat, lon, Pole{Lat: 47.25, Lon: 33.5}), r, 1e-9)
		}
	}
}

// testdata/rotation_checks.csv names the source of each row.
func TestRotations(t *testing.T) {
	f, err := os.Open("testdata/rotation_checks.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := readRecords(f)
	if err != nil || len(rows) != 8 {
		t.Fatal(len(rows), err)
	}
	for _, r := range rows {
		lat, lon := Rotate(r.number("lat"), r.number("lon"), r.number("euler_lat"), r.number("euler_lon"), r.number("angle_deg"))
		near(t, r.text("source"), lat, r.number("lat_out"), 1.1e-5)
		if want := r.number("lon_out"); !math.IsNaN(want) {
			near(t, r.text("source"), lon, want, 1.1e-5)
		}
	}
	p, err := FromRotation(20, 30, 0, 10, 30, 4.9, "")
	if err != nil {
		t.Fatal(err)
	}
	near(t, "se", p.SE, 2, 1e-12)
}

func TestPoleTables(t *testing.T) {
	// North America at 100 Ma in the table of 2002: 81.53 N 198.27 E
	b := besse()
	p, err := b.Pole("NA", 100)
	if err != nil || p.Lat != 81.53 || p.Lon != 198.27 {
		t.Fatal(p, err)
	}
	near(t, "33 N 117 W", LatitudeFromPole(33, -117, p), 38.8122, 0.05)
	// a window is used at its mean age: Iberia's "50" window is 56.11 Ma
	v := vaes()
	p, err = v.Pole("iberia", 56.11)
	if err != nil || p.Lat != 78.8 || p.Lon != 187.2 || p.A95 != 1.0 {
		t.Fatal(p, err)
	}
	if q, _ := v.Pole("Iberia", 50); q == p {
		t.Error("the nominal age of a window must not give its pole")
	}
	// halfway along the great circle lies on the plane of the two poles
	a, _ := v.Pole("India", 64.71)
	c, _ := v.Pole("India", 81.99)
	m, err := v.Pole("India", (64.71+81.99)/2)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "arc", 90-LatitudeFromPole(m.Lat, m.Lon, a), 90-LatitudeFromPole(m.Lat, m.Lon, c), 1e-9)
	near(t, "P95", m.A95, 1.2, 1e-9)
	if p, err := v.Pole("Africa", 0); err != nil || p.Lat != 90 {
		t.Error("today's pole is the geographic one:", p, err)
	}
	for _, c := range []struct {
		plate, says string
		age         float64
	}{{"Iberia", "0 to 81.99 Ma", 200}, {"Atlantis", "North America", 20}, {"India", "320.25", 400}} {
		_, err := v.Pole(c.plate, c.age)
		var in *InputError
		if !errors.As(err, &in) || in.Parameter != "plate" || !strings.Contains(in.Message, c.says) {
			t.Errorf("%+v: %v", c, err)
		}
	}
	if tb, err := PoleTableNamed("", "Greenland", 80); err != nil || tb.Name != BesseCourtillot02 {
		t.Error(tb, err)
	}
	for _, tb := range PoleTables() {
		for _, plate := range tb.Plates() {
			if p, err := tb.Pole(plate, 10); err != nil || p.Lat < 80 {
				t.Errorf("%s %s: %v %v: a north pole 10 Ma ago lies near the axis", tb.Name, plate, p, err)
			}
		}
	}
}

func TestParsePoleTable(t *testing.T) {
	tb, err := ParsePoleTable("mine", strings.NewReader("plate,age_ma,pole_lat,pole_lon,a95\nA,20,80,100,2\nA,10,85,100,4\nB,0,90,0,\n"))
	if err != nil {
		t.Fatal(err)
	}
	p, err := tb.Pole("a", 15)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "lat", p.Lat, 82.5, 1e-9)
	near(t, "a95", p.A95, 3, 1e-9)
	for in, says := range map[string]string{
		"": "header", "plate,age_ma\nA,1\n": "pole_lat is missing",
		"plate,age_ma,pole_lat,pole_lon\n":                               "no rows",
		"plate,age_ma,pole_lat,pole_lon\nA,x,91,0\n":                     "row 1: age_ma",
		"plate,age_ma,pole_lat,pole_lon\nA,100,91,0\n":                   "row 1: pole_lat",
		"plate,age_ma,pole_lat,pole_lon\nA,10,-85,0\n":                   "south pole",
		"plate,age_ma,pole_lat,pole_lon\nA,100,70,0\nA,100,71,0\n":       "row 2: a second pole",
		"plate,age_ma,pole_lat,pole_lon,a95\nA,100,70,400,\n,1,2,3,4\n":  "row 2: plate",
		"plate,age_ma,pole_lat,pole_lon,a95\nA,100,70,40,wide\n":         "a95",
		"plate;age_ma;pole_lat;pole_lon\nA;100;70;40\n":                  "plate is missing",
		"plate,age_ma,pole_lat,pole_lon,a95\n\"A,100,70,40,1\nB,1,2,3\n": "could not be read",
	} {
		_, err := ParsePoleTable("mine", strings.NewReader(in))
		var ie *InputError
		if !errors.As(err, &ie) || !strings.Contains(ie.Message, says) {
			t.Errorf("%q: %v, want %q", in, err, says)
		}
	}
}

func TestPalaeolatitudeRefusals(t *testing.T) {
	nan := math.NaN()
	for param, err := range map[string]error{
		"palaeolatitude":    second(FromGiven(91, 0)),
		"palaeolatitude_se": second(FromGiven(1, -1)),
		"inclination":       second(FromInclination(nan, 0, 1)),
		"flattening":        second(FromInclination(10, 0, 0)),
		"a95":               second(FromPole(1, 1, Pole{1, 1, 100})),
		"site_lat":          second(FromPole(-100, 1, Pole{1, 1, 1})),
		"site_lon":          second(FromPole(10, 1000, Pole{1, 1, 1})),
		"pole_lat":          second(FromPole(10, 10, Pole{nan, 1, 1})),
		"euler_angle":       second(FromRotation(1, 1, 1, 1, nan, 0, "")),
		"euler_frame":       second(FromRotation(1, 1, 1, 1, 10, 0, "mantle")),
	} {
		var in *InputError
		if !errors.As(err, &in) || in.Parameter != param {
			t.Errorf("%s: %v", param, err)
		}
	}
	// an error that reaches past the pole is held at the pole
	p, err := FromGiven(85, 10)
	if err != nil || p.High != 90 {
		t.Error(p, err)
	}
}

func second[T any](_ T, err error) error { return err }
