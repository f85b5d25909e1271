package stats

import (
	"context"
	"fmt"
	"math"
)

// groupSeeds keeps the resamples of the kinds independent of each other.
const groupSeeds = 0xd1b54a32d192ed03

// groupDifferences tests, model by model, whether the slope differs between the
// main kind and each other one: the control group (Geology 40:11 (2012), doi
// 10.1130/G32295.1, holds rivers beside submarine channels). The difference is
// the interaction of the slope with the kind in a model fitted to both.
func groupDifferences(ctx context.Context, main *study, studies []*study) ([]GroupDifference, error) {
	var out []GroupDifference
	for _, other := range studies {
		if other == main {
			continue
		}
		for k, f := range main.models {
			g := other.models[k]
			if f.failure != "" || g.failure != "" || f.x == nil || main.boot == nil || other.boot == nil {
				continue
			}
			d, err := difference(ctx, main, other, k)
			if err != nil {
				return nil, err
			}
			out = append(out, d)
		}
	}
	return out, nil
}

func difference(ctx context.Context, a, b *study, k int) (GroupDifference, error) {
	f, g, j := a.models[k], b.models[k], slopeIndex(a.models[k].form)
	d := GroupDifference{Model: f.label, Term: f.names[j], A: a.kind, B: b.kind, Difference: f.coef[j] - g.coef[j], Interval: noInterval, P: nan}
	studentised := f.robust != nil && a.req.Interval != "bca" && a.req.Interval != "percentile"
	var values []float64
	if studentised {
		d.IntervalKind = "studentised"
		d.Interval, d.P = differenceT(a, b, k, j)
	} else {
		d.IntervalKind = a.statKind()
		values = differenceValues(a, b, k, j)
		d.Interval = a.intervalOf(values, d.Difference, append(deviations(columnOf(a.jack[k], j), d.Difference, 1), deviations(columnOf(b.jack[k], j), d.Difference, -1)...))
		d.P = twoSided(values)
	}
	if isLeastSquares(f.form) {
		p, err := interactionP(ctx, a, b, k)
		if err != nil {
			return d, err
		}
		d.P = p
	}
	verdict := "cannot be told apart on these rows"
	if d.P <= 1-a.req.Level && d.Interval.excludes(0) {
		verdict = "differ"
	}
	d.Text = fmt.Sprintf("%s: %s is %s in %s and %s in %s; the difference %s [%s], p = %s: they %s.",
		d.Model, coefficientText(d.Term), number(f.coef[j]), a.kind, number(g.coef[j]), b.kind, number(d.Difference), between(d.Interval), number(d.P), verdict)
	return d, nil
}

// deviations are leave-one-out values about their mean, placed about centre.
func deviations(jack []float64, centre, sign float64) []float64 {
	mean, n := 0.0, 0.0
	for _, v := range jack {
		if finite(v) {
			mean, n = mean+v, n+1
		}
	}
	out := make([]float64, len(jack))
	for i, v := range jack {
		out[i] = centre + sign*(v-mean/n)
	}
	return out
}

// pairs walks the resamples that both studies could fit.
func resamplePairs(a, b *study, k int, visit func(va, vb []float64)) {
	ea, eb := a.jobOf[k], b.jobOf[k]
	wa, wb := a.boot.width[ea], b.boot.width[eb]
	for i := range min(a.boot.done[ea], b.boot.done[eb]) {
		if a.boot.ok[ea][i] && b.boot.ok[eb][i] {
			visit(a.boot.val[ea][i*wa:(i+1)*wa], b.boot.val[eb][i*wb:(i+1)*wb])
		}
	}
}

func differenceValues(a, b *study, k, j int) []float64 {
	var v []float64
	resamplePairs(a, b, k, func(va, vb []float64) {
		if d := va[j] - vb[j]; finite(d) {
			v = append(v, d)
		}
	})
	return v
}

// differenceT is the symmetric bootstrap-t of a difference of two independent
// slopes, s^2 = s_a^2 + s_b^2, and its p value.
func differenceT(a, b *study, k, j int) (Interval, float64) {
	own, ok1 := a.models[k].full()
	other, ok2 := b.models[k].full()
	if !ok1 || !ok2 {
		return noInterval, nan
	}
	at := len(a.models[k].coef) + 1 + j
	diff, se := own[j]-other[j], math.Hypot(own[at], other[at])
	var t []float64
	beyond := 1.0
	resamplePairs(a, b, k, func(va, vb []float64) {
		if v := math.Abs(va[j]-vb[j]-diff) / math.Hypot(va[at], vb[at]); finite(v) {
			t = append(t, v)
			if v >= math.Abs(diff)/se {
				beyond++
			}
		}
	})
	return studentisedInterval(t, diff, se, a.req.Level), beyond / float64(len(t)+1)
}

// full is what the estimator gives on all clusters, with its errors.
func (f *fitted) full() ([]float64, bool) {
	_, w := f.cluster.shape()
	out, d := make([]float64, w), newDraw(f.t.cluster.count())
	d.without(f.t.cluster.count(), -1)
	return out, f.cluster.worker()(d, out, true)
}

// twoSided is twice the smaller share of replicates on one side of zero.
func twoSided(v []float64) float64 {
	below, n := 1.0, float64(len(v)+1)
	for _, x := range v {
		if x < 0 {
			below++
		}
	}
	return math.Min(1, 2*math.Min(below/n, 1-(below-1)/n))
}

// interactionP tests the interaction of slope and kind by sign flips of whole
// clusters of both kinds.
func interactionP(ctx context.Context, a, b *study, k int) (float64, error) {
	f, g := a.models[k], b.models[k]
	n, m := f.t.n(), g.t.n()
	p := &plan{scale: f.scale, form: "joint", names: []string{"intercept", "x", "kind", "x:kind"}}
	p.z, p.y = append(append([]float64(nil), f.z...), g.z...), append(append([]float64(nil), f.y...), g.y...)
	x := append(append([]float64(nil), f.cols[0]...), g.cols[0]...)
	kind, inter := make([]float64, n+m), make([]float64, n+m)
	labels := make([]string, n+m)
	for i := range labels {
		if i >= n {
			kind[i], inter[i] = 1, x[i]
			labels[i] = "b" + g.t.cluster.names[g.t.cluster.of[i-n]]
		} else {
			labels[i] = "a" + f.t.cluster.names[f.t.cluster.of[i]]
		}
	}
	p.cols = [][]float64{x, kind, inter}
	ls, err := FitLinear(p.cols, p.z)
	if err != nil {
		return nan, nil
	}
	both := newGrouping(labels)
	mo := newMoments(p, &both)
	t := newTermTest(mo.terms(ls), mo.responseTerms(), 3, 4)
	if t == nil {
		return nan, nil
	}
	return flipP(ctx, t, a.flips(f), a.req.Seed, a.req.Workers)
}
