package planform

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// vectors reads testdata/geodesic_vectors_wgs84.csv (see testdata/README.md).
func vectors(t *testing.T) [][8]float64 {
	t.Helper()
	f, err := os.Open("testdata/geodesic_vectors_wgs84.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out [][8]float64
	for _, r := range rows[1:] {
		var v [8]float64
		for i := 1; i < 8; i++ {
			if v[i], err = strconv.ParseFloat(r[i], 64); err != nil {
				t.Fatal(err)
			}
		}
		out = append(out, v)
	}
	return out
}

func angleDiff(a, b float64) float64 { return math.Abs(math.Remainder(a-b, 360)) }

// The 527 exact vectors, 1 mm wherever Vincenty converges; azimuths to the
// angle that moves the far end by 1 mm.
func TestInverseAgreesWithExactVectors(t *testing.T) {
	rows := vectors(t)
	if len(rows) != 527 {
		t.Fatalf("%d vectors, expected 527", len(rows))
	}
	failed, worst := 0, 0.0
	for i, v := range rows {
		s, a1, a2, err := Inverse(v[1], v[2], v[3], v[4])
		if err != nil {
			failed++
			// Only nearly antipodal points may fail: half the meridian is
			// 20003.93 km and the shortest way over the equator 0.3 % less.
			if v[7] < 19.8e6 {
				t.Errorf("row %d: no convergence at %.0f m", i, v[7])
			}
			continue
		}
		worst = math.Max(worst, math.Abs(s-v[7]))
		if math.Abs(s-v[7]) > 1e-3 {
			t.Errorf("row %d: %.6f m, expected %.6f", i, s, v[7])
		}
		// The reduced length is that of the arc: azimuths of very short and of
		// nearly antipodal lines are as loose as their positions.
		tol := 1e-8 + 1e-3/math.Max(wgsA*math.Abs(math.Sin(v[7]/wgsA)), 1e-3)/degree
		if v[7] > 1e-3 && (angleDiff(a1, v[5]) > tol || angleDiff(a2, v[6]) > tol) {
			t.Errorf("row %d: azimuths %.9f %.9f, expected %.9f %.9f", i, a1, a2, v[5], v[6])
		}
	}
	t.Logf("%d of %d did not converge; worst error %.2e m", failed, len(rows), worst)
	if failed == 0 || failed > 60 {
		t.Errorf("%d did not converge: the vectors hold some nearly antipodal ones, but not that many", failed)
	}
}

func TestDirectUndoesInverse(t *testing.T) {
	for i, v := range vectors(t) {
		if v[7] > 19e6 {
			continue
		}
		lat, lon, az := Direct(v[1], v[2], v[5], v[7])
		d, _, _, err := Inverse(lat, lon, v[3], v[4])
		if err != nil || d > 1e-3 {
			t.Errorf("row %d: arrives %.6f m away (%v)", i, d, err)
		}
		if v[7] > 1 && math.Abs(v[3]) < 89 && angleDiff(az, v[6]) > 1e-7 {
			t.Errorf("row %d: arrives with %.9f, expected %.9f", i, az, v[6])
		}
	}
}

// Flinders Peak to Buninyong on GRS80, which differs from WGS84 by 0.1 mm in
// the semi-minor axis: the worked example of the GDA technical manual (ICSM),
// quoted from memory.
func TestInverseWorkedExample(t *testing.T) {
	dms := func(d, m, s float64) float64 { return d + m/60 + s/3600 }
	s, a1, _, err := Inverse(-dms(37, 57, 3.72030), dms(144, 25, 29.52440), -dms(37, 39, 10.15610), dms(143, 55, 35.38390))
	if err != nil || math.Abs(s-54972.271) > 1e-3 {
		t.Errorf("%.4f m, %v; expected 54972.271", s, err)
	}
	if math.Abs(a1+360-dms(306, 52, 5.37)) > 1e-5 {
		t.Errorf("azimuth %.6f, expected %.6f", a1+360, dms(306, 52, 5.37))
	}
}

func TestInverseEdges(t *testing.T) {
	if d, _, _, err := Inverse(12, 34, 12, 34); d != 0 || err != nil {
		t.Errorf("a point to itself: %v %v", d, err)
	}
	if d, _, _, err := Inverse(12, -170, 12, 190); d != 0 || err != nil {
		t.Errorf("the same point written twice: %v %v", d, err)
	}
	// A quarter of the meridian is 10,001,965.729 m on WGS84 (NIMA TR8350.2).
	if d, _, _, err := Inverse(0, 10, 90, 10); err != nil || math.Abs(d-10001965.729) > 1e-3 {
		t.Errorf("quarter meridian %.4f, %v", d, err)
	}
	// One degree of the equator is a pi/180.
	if d, _, _, err := Inverse(0, 179.5, 0, -179.5); err != nil || math.Abs(d-wgsA*degree) > 1e-6 {
		t.Errorf("equator %.6f, %v", d, err)
	}
	if _, _, _, err := Inverse(0, 0, 0.1, 179.9); err != ErrNotConverged {
		t.Errorf("nearly antipodal: %v, expected ErrNotConverged", err)
	}
}

func BenchmarkInverse(b *testing.B) {
	for b.Loop() {
		Inverse(-31.95, 115.86, -31.96, 115.87)
	}
}
