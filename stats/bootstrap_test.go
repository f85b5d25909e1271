package stats

import (
	"context"
	"math"
	"slices"
	"testing"
)

// rBoot is one statistic of R's bootstrap: 200,000 resamples.
type rBoot struct {
	Percentile, BCA  Interval
	SE               float64
	Z0, Acceleration float64
}

// ends runs the three straight lines of reference.R under one seed and returns
// the intervals of every statistic of the file.
func ends(t *testing.T, tab *table, g *grouping, resamples int, seed uint64) map[string]map[string]Interval {
	t.Helper()
	req := DefaultRequest()
	s := &study{req: &req, t: tab}
	var jobs []job
	for i, p := range []string{"valley_slope", "abs_latitude", "coriolis"} {
		f := fitPlan(tab, newPlan(tab, ModelSpec{"linear", p}, "raw"))
		if f.failure != "" {
			t.Fatal(f.failure)
		}
		f.cluster = f.compile(g)
		s.models, s.jobOf = append(s.models, f), append(s.jobOf, i)
		s.jack = append(s.jack, jackknife(f.cluster, g.count()))
		jobs = append(jobs, job{est: f.cluster, se: true})
	}
	boot, err := bootstrap(context.Background(), g.count(), resamples, seed, 2, jobs, nil)
	if err != nil {
		t.Fatal(err)
	}
	s.boot = boot
	for k, f := range s.models {
		if s.pull = append(s.pull, s.jack[k]); g.count() == tab.n() {
			s.pull[k] = boot.regressionInfluence(k, g.count(), len(f.coef)+1, seed)
		}
	}
	tc := *tab
	tc.cluster = *g
	s.t = &tc
	out := map[string]map[string]Interval{}
	for i, name := range []string{"slope", "absl", "f"} {
		c := Coefficient{Intervals: map[string]Interval{}}
		s.bootIntervals(&c, i, 1)
		out[name+"_coef"] = c.Intervals
		r2 := boot.column(i, 2)
		sortFloats(r2)
		out[name+"_r2"] = map[string]Interval{"percentile": percentileInterval(r2, 0.95),
			"bca": bcaInterval(r2, s.models[i].r2, columnOf(s.pull[i], 2), 0.95)}
	}
	diff := map[string]Interval{"bca": s.difference(1, 0)}
	req.Interval = "percentile"
	diff["percentile"] = s.difference(1, 0)
	out["absl_minus_slope_r2"] = diff
	return out
}

// Every end of R's row and whole-cluster bootstraps is met within 3 Monte Carlo
// standard errors. The ends are the means over 40 seeds of 9,999 resamples; with
// s the standard deviation of an end over the seeds, the mean has the error
// s/sqrt(40) and R's end, from 200,000 resamples (100,000 for the studentised),
// s sqrt(9999/N).
func TestBootstrapAgainstR(t *testing.T) {
	const n, seeds = 9999, 40
	clusters, rows := referenceTable(t, "parent_deposit"), referenceTable(t, "none")
	check := func(what string, tab *table, want map[string]map[string]Interval, total float64) {
		var others []map[string]map[string]Interval
		for seed := range seeds {
			others = append(others, ends(t, tab, &tab.cluster, n, uint64(seed)))
		}
		for stat, kinds := range want {
			for kind, w := range kinds {
				for e := range 2 {
					var v []float64
					for _, o := range others {
						v = append(v, o[stat][kind][e])
					}
					got, length := centreScale(v)
					mc := length / math.Sqrt(seeds-1) * math.Sqrt(1.0/seeds+n/total)
					if d := got - w[e]; !(math.Abs(d) <= 3*mc) {
						t.Errorf("%s %s %s end %d: %.6g, R has %.6g: %.1f Monte Carlo errors apart", what, stat, kind, e, got, w[e], d/mc)
					}
				}
			}
		}
	}
	for key, tab := range map[string]*table{"cluster_bootstrap": clusters, "row_bootstrap": rows} {
		want := map[string]map[string]Interval{}
		for stat, w := range referenceValue[map[string]rBoot](t, key) {
			want[stat] = map[string]Interval{"percentile": w.Percentile, "bca": w.BCA}
		}
		check(key, tab, want, 200_000)
	}
	want := map[string]map[string]Interval{}
	for stat, w := range referenceValue[map[string]struct{ Interval Interval }](t, "cluster_studentised") {
		want[stat] = map[string]Interval{"studentised": w.Interval}
	}
	check("cluster_studentised", clusters, want, 100_000)
}

// The cluster error, and the acceleration, are exact: no resample enters them.
func TestClusterErrorAndAcceleration(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	st := referenceValue[map[string]struct {
		Estimate float64
		SE       float64 `json:"cluster_se"`
	}](t, "cluster_studentised")
	bo := referenceValue[map[string]rBoot](t, "cluster_bootstrap")
	for key, p := range map[string]string{"slope": "valley_slope", "absl": "abs_latitude", "f": "coriolis"} {
		f := fitPlan(tab, newPlan(tab, ModelSpec{"linear", p}, "raw"))
		d, own := newDraw(18), make([]float64, 6)
		d.without(18, -1)
		if !f.cluster.worker()(d, own, true) {
			t.Fatal("the full draw is degenerate")
		}
		needDigits(t, key+" estimate", own[1], st[key+"_coef"].Estimate, 9)
		needDigits(t, key+" cluster error", own[4], st[key+"_coef"].SE, 9)
		jack := jackknife(f.cluster, 18)
		needDigits(t, key+" acceleration of the coefficient", acceleration(columnOf(jack, 1)), bo[key+"_coef"].Acceleration, 9)
		needDigits(t, key+" acceleration of R2", acceleration(columnOf(jack, 2)), bo[key+"_r2"].Acceleration, 8)
	}
}

// line and plane are two ways to one answer; so are the Chebyshev series of the
// decay and its rows.
func TestEstimatorsAgree(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	s := newSampler(18, 5)
	for _, scale := range Scales {
		p := newPlan(tab, ModelSpec{"linear", "abs_latitude"}, scale)
		m := newMoments(p, &tab.cluster)
		a, b := line{m}.worker(), plane{m}.worker()
		for i := range 200 {
			d := s.draw(i)
			x, y := make([]float64, 6), make([]float64, 5)
			if a(d, x, true) != b(d, y, true) {
				t.Fatal("one of two equal estimators is degenerate")
			}
			for k := range y {
				needDigits(t, "plane "+scale, y[k], x[k], 8)
			}
		}
	}
	f := fitPlan(tab, newPlan(tab, ModelSpec{"floor_decay", "coriolis"}, "raw"))
	for i := range 200 {
		d := s.draw(i)
		out := make([]float64, 5)
		if !f.cluster.worker()(d, out, true) {
			continue
		}
		var x, y []float64
		for k, g := range d.id {
			for _, r := range tab.cluster.members(int(g)) {
				for range int(d.wt[k]) {
					x, y = append(x, f.x[r]), append(y, f.y[r])
				}
			}
		}
		fit, err := fitDecay(x, y)
		if err != nil {
			t.Fatal(err)
		}
		needDigits(t, "decay a", out[0], fit.Coef[0], 7)
		needDigits(t, "decay b", out[1], fit.Coef[1], 7)
		_, length := centreScale(y)
		needDigits(t, "decay R2", out[2], 1-fit.RSS/(length*length), 8)
	}
}

// Where the coefficients of a resample equal the full fit, so do the errors of
// the decay computed by hand from its rows: s_g = sum J e, V = G/(G-1) sum
// (M s_g)^2.
func TestDecayClusterError(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	f := fitPlan(tab, newPlan(tab, ModelSpec{"floor_decay", "coriolis"}, "raw"))
	d, out := newDraw(18), make([]float64, 5)
	d.without(18, -1)
	f.cluster.worker()(d, out, true)
	var jj [3]float64
	for i, x := range f.x {
		e := math.Exp(-f.coef[1] * x)
		j0, j1 := e, -f.coef[0]*x*e
		_ = i
		jj[0], jj[1], jj[2] = jj[0]+j0*j0, jj[1]+j0*j1, jj[2]+j1*j1
	}
	det := jj[0]*jj[2] - jj[1]*jj[1]
	var v [2]float64
	for g := range 18 {
		var s0, s1 float64
		for _, i := range tab.cluster.members(g) {
			e := math.Exp(-f.coef[1] * f.x[i])
			s0 += e * f.resid[i]
			s1 += -f.coef[0] * f.x[i] * e * f.resid[i]
		}
		a, b := (jj[2]*s0-jj[1]*s1)/det, (jj[0]*s1-jj[1]*s0)/det
		v[0], v[1] = v[0]+a*a, v[1]+b*b
	}
	needDigits(t, "error of a", out[3], math.Sqrt(18.0/17*v[0]), 7)
	needDigits(t, "error of b", out[4], math.Sqrt(18.0/17*v[1]), 7)
}

func TestSortFloats(t *testing.T) {
	for _, n := range []int{0, 1, 7, 399, 400, 5000} {
		x := make([]float64, n)
		for i := range x {
			x[i] = math.Sin(float64(i*i)) * math.Pow(10, float64(i%30-15))
		}
		y := slices.Clone(x)
		for _, q := range []float64{0.001, 0.025, 0.5, 0.95, 0.9999} {
			z := slices.Sorted(slices.Values(y))
			if got, want := selectQuantile(slices.Clone(y), q), sortedQuantile(z, q); n > 0 && got != want {
				t.Errorf("quantile %v of %d values: %v selected, %v sorted", q, n, got, want)
			}
		}
		sortFloats(x)
		slices.Sort(y)
		if !slices.Equal(x, y) {
			t.Errorf("%d values are not sorted", n)
		}
	}
}

// Each resample is drawn from its own stream: no allocation in the loop.
func TestResamplingAllocatesNothing(t *testing.T) {
	tab := referenceTable(t, "parent_deposit")
	s := newSampler(18, 1)
	for _, m := range []ModelSpec{{"linear", "abs_latitude"}, {"power", "valley_slope"}, {"floor_decay", "coriolis"}} {
		f := fitPlan(tab, newPlan(tab, m, "raw"))
		fit := f.cluster.worker()
		_, w := f.cluster.shape()
		out := make([]float64, w)
		i := 0
		if a := testing.AllocsPerRun(200, func() { fit(s.draw(i), out, true); i++ }); a != 0 {
			t.Errorf("%s: %v allocations a resample", m, a)
		}
	}
}

// Under 12 groups the flips take Webb's six points, evenly; from 12 on they are
// signs.
func TestFlipWeights(t *testing.T) {
	few, many := &flipper{seed: 3, w: make([]float64, 11)}, &flipper{seed: 3, w: make([]float64, 130)}
	count := map[float64]int{}
	sum := 0.0
	for i := range 3000 {
		for _, w := range few.draw(i) {
			count[w]++
		}
		for _, w := range many.draw(i) {
			if w != 1 && w != -1 {
				t.Fatalf("weight %v", w)
			}
			sum += w
		}
	}
	// 33,000 draws of six: 5,500 each, standard deviation 68; 390,000 signs: 625.
	for _, w := range webb {
		if math.Abs(float64(count[w])-5500) > 4*68 {
			t.Errorf("weight %.3f drawn %d times of 33000", w, count[w])
		}
	}
	if len(count) != 6 || math.Abs(sum) > 4*625 {
		t.Errorf("weights %v; signs sum to %v", count, sum)
	}
}
