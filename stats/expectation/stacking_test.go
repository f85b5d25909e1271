package expectation

import (
	"math"
	"testing"
)

// E|X - Y| of {0, 2} and {1, 5}: (1 + 5 + 1 + 3)/4 = 2.5; of {0, 2} and
// itself: 4/4 = 1; worked by hand.
func TestMeanDistance(t *testing.T) {
	near(t, "two samples", meanDistance([]float64{0, 2}, []float64{1, 5}), 2.5, 1e-12)
	near(t, "itself", meanDistance([]float64{0, 2}, []float64{0, 2}), 1, 1e-12)
	near(t, "a point", meanDistance([]float64{1, 3, 8}, []float64{3}), (2+0+5)/3.0, 1e-12)
}

// Where P = 1 occurs it is expected with its share, nothing is lost or NaN,
// and the ranked probability score finds the law as the density does.
func TestStraightSystems(t *testing.T) {
	rows := plainLaw.draw(6)
	for i := range rows {
		if i%10 == 0 {
			rows[i].Sinuosity = 1
		}
	}
	f := mustFit(t, rows, Options{})
	if f.frame.ones < 0.03 || f.frame.ones > 0.25 {
		t.Fatal(f.frame.ones)
	}
	r := mustExpect(t, f, latitude(20, 2))
	var sum float64
	for k, e := range r.Explanations {
		sum += e.Weight
		if e.Failure != "" || math.IsNaN(e.Score) || e.Coverage == nil {
			t.Errorf("%s: %+v", e.Name, e)
		}
		if f.fits[k].weighted && !(e.Weight > 0) {
			t.Errorf("%s has no weight", e.Name)
		}
	}
	near(t, "weights", sum, 1, 1e-9)
	if none := r.Explanations[6]; none.Weight > r.Explanations[0].Weight+r.Explanations[5].Weight {
		t.Errorf("rows drawn from f: weights %v", f.weights)
	}
	if s := r.Combined.Sinuosity; s.P2_5 != 1 || s.P50 <= 1 {
		t.Errorf("%+v", s)
	}
	if r.Classes[0].Probability < f.frame.ones/2 {
		t.Errorf("%+v, share of 1: %v", r.Classes[0], f.frame.ones)
	}
	if c := r.Combined.Coverage; c.C80 < 0.6 {
		t.Errorf("%+v", c)
	}
}

// On modern rows f and climate state (all icehouse) say the same: explanations
// that cannot be told apart keep equal weights.
func TestSameExplanationSameWeight(t *testing.T) {
	l := plainLaw
	l.ancient = 0
	f := mustFit(t, l.draw(2), Options{})
	near(t, "weights", f.weights[0], f.weights[2], 1e-6)
	near(t, "latitude", f.weights[1], 0, 0)
}

// The hull of a square is its corners; a point inside, on the edge, outside.
func TestHull(t *testing.T) {
	h := convexHull([][2]float64{{0, 0}, {1, 0}, {1, 1}, {0, 1}, {0.5, 0.5}, {1, 1}})
	if len(h) != 4 || !insideHull(h, [2]float64{0.2, 0.9}) || !insideHull(h, [2]float64{1, 0.5}) || insideHull(h, [2]float64{1.01, 0.5}) {
		t.Error(h)
	}
	if convexHull([][2]float64{{0, 0}, {1, 1}, {2, 2}}) != nil {
		t.Error("a line has no hull")
	}
}

// The mixture's quantile is the inverse of its distribution, transformed or
// not; alpha above 1 narrows.
func TestMixture(t *testing.T) {
	a, b := make([]float64, 1000), make([]float64, 1000)
	for i := range a {
		a[i], b[i] = 1+float64(i+1)/1000, 2+float64(i+1)/500
	}
	for _, alpha := range []float64{0, 1, 1.5} {
		m := mixture{alpha: alpha}
		m.add(a, 0.75)
		m.add(b, 0.25)
		for _, q := range []float64{0.025, 0.1, 0.5, 0.74, 0.8, 0.975} {
			near(t, "inverse", m.below(m.quantile(q)), q, 3e-3)
		}
	}
	plain, narrow := mixture{}, mixture{alpha: 1.5}
	plain.add(a, 1)
	narrow.add(a, 1)
	if narrow.quantile(0.9)-narrow.quantile(0.1) >= plain.quantile(0.9)-plain.quantile(0.1) {
		t.Error("alpha 1.5 does not narrow")
	}
}

// Cholesky and QR agree on the same rows.
func TestSolvers(t *testing.T) {
	f := newFrame(plainLaw.draw(8), Options{}, 0)
	for _, m := range models() {
		ft := fitModel(t.Context(), m, f, nil)
		s := newSolver(ft.p)
		if !s.factor(&ft.total, ft.fixed) {
			t.Fatal(m.name)
		}
		beta := make([]float64, ft.p)
		s.solve(ft.total.b, beta)
		for k := range beta {
			near(t, m.name+" "+ft.names[k], beta[k], ft.beta[k], 1e-9)
		}
		// residual sum of squares from the cross-products and from the rows
		var rss float64
		for i := range f.obs {
			if ft.usable[i] {
				e := f.obs[i].y - ft.mean(i, beta)
				rss += f.obs[i].weight * e * e
			}
		}
		near(t, m.name+" rss", ft.total.rss(beta), rss, 1e-9*rss)
	}
}
