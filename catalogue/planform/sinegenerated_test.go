package planform

import (
	"math"
	"testing"
)

// 1/J0(omega), science text after Langbein & Leopold 1966, USGS Prof. Pap.
// 422-H; three decimals as printed there.
var sineTable = []struct{ deg, p float64 }{
	{20, 1.031}, {30, 1.072}, {40, 1.134}, {50, 1.222}, {60, 1.344}, {70, 1.515},
	{80, 1.758}, {90, 2.119}, {100, 2.690}, {110, 3.700}, {120, 5.889},
}

func TestSinuosityOfTable(t *testing.T) {
	for _, c := range sineTable {
		if p := SinuosityOf(c.deg * degree); math.Abs(p-c.p) > 6e-4 {
			t.Errorf("%v degrees: %.4f, expected %.3f", c.deg, p, c.p)
		}
	}
	if !math.IsInf(SinuosityOf(2.5), 1) {
		t.Error("past the zero of J0 the sinuosity is infinite")
	}
}

func TestOmegaOfInverts(t *testing.T) {
	for _, p := range []float64{1 + 1e-9, 1.001, 1.05, 1.5, 2.119, 3, 5, 20, 1000} {
		if q := SinuosityOf(OmegaOf(p)); math.Abs(q-p) > 1e-9*p {
			t.Errorf("%v comes back as %v", p, q)
		}
	}
	for _, p := range []float64{1, 0.5, -3, 0, math.NaN(), math.Inf(-1)} {
		if OmegaOf(p) != 0 {
			t.Errorf("OmegaOf(%v) = %v, expected 0", p, OmegaOf(p))
		}
	}
	if w := OmegaOf(math.Inf(1)); w != MaxOmega || w >= 137.8*degree {
		t.Errorf("OmegaOf(+Inf) = %v", w)
	}
}

// The drawn curve: its arc over its valley length is 1/J0(omega), its points
// are equally spaced along it, and it is centred on its axis.
func TestSineGeneratedLine(t *testing.T) {
	for _, c := range sineTable {
		w := c.deg * degree
		pts := SineGeneratedLine(w, 9000, 3, 200)
		end := pts[len(pts)-1]
		if p := end.S / end.X; math.Abs(p-SinuosityOf(w)) > 1e-9 {
			t.Errorf("%v degrees: %.9f, expected %.9f", c.deg, p, SinuosityOf(w))
		}
		if math.Abs(end.Y-pts[0].Y) > 1e-6 || math.Abs(pts[0].Y+pts[100].Y) > 1e-6 {
			t.Errorf("%v degrees: not centred: %v %v %v", c.deg, pts[0].Y, pts[100].Y, end.Y)
		}
		// The chord of a step of arc h on a curve of radius 1/k is h - k^2 h^3/24.
		h, k := 15.0, 2*math.Pi*w/3000
		for i := 1; i < len(pts); i++ {
			d := math.Hypot(pts[i].X-pts[i-1].X, pts[i].Y-pts[i-1].Y)
			if d > h+1e-9 || d < h-k*k*h*h*h/24-1e-6 {
				t.Fatalf("%v degrees: step %d is %v m", c.deg, i, d)
			}
		}
	}
}
