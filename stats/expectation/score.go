package expectation

import (
	"context"
	"math"
	"math/rand/v2"
	"slices"
	"sync"
)

// checkDraws is the number of draws for each left-out row when coverage is
// checked.
const checkDraws = 400

// leftOutSamples are draws of P for one left-out row under one explanation,
// made as a target's are, from fits that have not seen the row's cluster:
// resamples that happen not to hold it, and residuals of the other clusters.
func (t *fitted) leftOutSamples(i int, pool []float64, sets []int, rng *rand.Rand, out []float64) {
	c := t.frame.obs[i].cluster
	ones := t.frame.onesWithout(c)
	for k := range out {
		if ones > 0 && rng.Float64() < ones {
			out[k] = 1
			continue
		}
		beta := t.loo[c]
		if len(sets) > 0 {
			b := sets[rng.IntN(len(sets))]
			beta = t.boot[b*t.p : (b+1)*t.p]
		}
		out[k] = 1 + math.Exp(t.mean(i, beta)+t.looS[c]*pool[rng.IntN(len(pool))])
	}
}

// mean of row i: from its columns where it is used in the fit, else from its
// inputs (a row with P = 1).
func (t *fitted) mean(i int, beta []float64) float64 {
	if t.x[i] == nil {
		return t.value(&t.frame.obs[i].inputs, beta)
	}
	var m float64
	for k, x := range t.x[i] {
		m += x * beta[k]
	}
	return m
}

// onesWithout is the share of P = 1 in the clusters other than c.
func (f *frame) onesWithout(c int) float64 {
	if f.ones == 0 || len(f.clusters) < 2 {
		return 0
	}
	g := float64(len(f.clusters))
	var own float64
	for i := f.start[c]; i < f.start[c+1]; i++ {
		if f.obs[i].p == 1 {
			own += f.obs[i].weight
		}
	}
	return math.Max(0, (f.ones*g-own)/(g-1))
}

// setsWithout lists the parameter sets whose resample does not hold cluster c.
func (t *fitted) setsWithout(c int, r *resampling) []int {
	var out []int
	for k, b := range t.setOf {
		if r.counts[b][c] == 0 {
			out = append(out, k)
		}
	}
	return out
}

// nestedPool is the residual pool for cluster c from fits without c and,
// where there are few clusters, without the residual's own cluster at once.
func (t *fitted) nestedPool(c int, s *solver, without *cross) []float64 {
	f := t.frame
	resid := t.resid
	if len(f.clusters) <= nestedClusters && t.loo[c] != nil {
		resid = slices.Clone(t.resid)
		beta := make([]float64, t.p)
		for d := range f.clusters {
			if d == c || t.per[d].n == 0 {
				continue
			}
			without.reset()
			without.sum(&t.total, 1)
			without.sum(&t.per[c], -1)
			without.sum(&t.per[d], -1)
			if !s.factor(without, t.fixed) {
				continue
			}
			s.solve(without.b, beta)
			sd, _ := t.spread(without, s, beta, t.clusters-2)
			for i := f.start[d]; i < f.start[d+1]; i++ {
				if t.usable[i] && sd > 0 {
					resid[i] = (f.obs[i].y - t.mean(i, beta)) / math.Sqrt(sd*sd+quadratic(t.looV[c], t.x[i]))
				}
			}
		}
	}
	return t.poolOf(resid, c, make([]float64, 0, poolSize))
}

// checks are the left-out draws of all explanations, by explanation and row;
// nil where the row cannot be predicted.
type checks struct {
	p  [][][]float64 // [explanation][row] sorted draws
	in []*fitted
}

// leaveOutAll draws for every row and every fitted explanation.
func leaveOutAll(ctx context.Context, f *frame, fits []*fitted, r *resampling, seed uint64) *checks {
	ch := &checks{in: fits, p: make([][][]float64, len(fits))}
	var wg sync.WaitGroup
	for k, t := range fits {
		ch.p[k] = make([][]float64, len(f.obs))
		if t.failure == "" {
			wg.Go(func() { t.leaveOutEach(ctx, r, seed, ch.p[k]) })
		}
	}
	wg.Wait()
	return ch
}

func (t *fitted) leaveOutEach(ctx context.Context, r *resampling, seed uint64, out [][]float64) {
	f, s, without := t.frame, newSolver(t.p), newCross(t.p)
	for c := range f.clusters {
		if t.loo[c] == nil || t.looS[c] == 0 || ctx.Err() != nil {
			continue
		}
		pool, sets := t.nestedPool(c, s, &without), t.setsWithout(c, r)
		if len(pool) == 0 {
			continue
		}
		for i := f.start[c]; i < f.start[c+1]; i++ {
			if !t.predictable(i) {
				continue
			}
			out[i] = make([]float64, checkDraws)
			t.leftOutSamples(i, pool, sets, rand.New(rand.NewPCG(seed+1, uint64(i))), out[i])
			slices.Sort(out[i])
		}
	}
}

// predictable is true for the rows an explanation can be checked on: those it
// uses, and rows with P = 1 that hold what it looks at.
func (t *fitted) predictable(i int) bool {
	if t.usable[i] {
		return true
	}
	ob := &t.frame.obs[i]
	return ob.p == 1 && t.uses(ob) && t.columns(&ob.inputs, make([]float64, t.p))
}

// coverageOf is the share of left-out rows inside the 80 and 95 % limits,
// each cluster and in it each system counted alike.
func (ch *checks) coverageOf(f *frame, limits func(i int) (in80, in95, ok bool)) *Coverage {
	var c80, c95, n float64
	for i := range f.obs {
		in80, in95, ok := limits(i)
		if !ok {
			continue
		}
		w := f.obs[i].weight
		n += w
		if in80 {
			c80 += w
		}
		if in95 {
			c95 += w
		}
	}
	if n == 0 {
		return nil
	}
	return &Coverage{C80: c80 / n, C95: c95 / n}
}

// alone is the coverage of one explanation by itself.
func (ch *checks) alone(f *frame, k int) *Coverage {
	return ch.coverageOf(f, func(i int) (bool, bool, bool) {
		d := ch.p[k][i]
		if d == nil {
			return false, false, false
		}
		p := f.obs[i].p
		return inside(p, quantileOf(d, 0.1), quantileOf(d, 0.9)), inside(p, quantileOf(d, 0.025), quantileOf(d, 0.975)), true
	})
}

// together is the coverage of the combined expectation, each cluster's rows
// checked with the weights and the narrowing found without it.
func (ch *checks) together(f *frame, p *pits) *Coverage {
	return ch.coverageOf(f, func(i int) (bool, bool, bool) {
		if math.IsNaN(p.of[i]) {
			return false, false, false
		}
		m := mixture{alpha: p.alpha(f, f.obs[i].cluster)}
		v := m.outer(p.of[i])
		return inside(v, 0.1, 0.9), inside(v, 0.025, 0.975), true
	})
}

// pits are the shares of the combined left-out draws below each row's P, with
// the weights found without the row's cluster; NaN where a row cannot be
// predicted under every explanation.
type pits struct {
	of       []float64
	spread   []float64 // by cluster: weighted sum of (share - 1/2)^2
	clusters []float64 // by cluster: its weight
}

func (ch *checks) pits(f *frame, weights [][]float64) *pits {
	p := &pits{of: make([]float64, len(f.obs)), spread: make([]float64, len(f.clusters)), clusters: make([]float64, len(f.clusters))}
	for i := range f.obs {
		p.of[i] = math.NaN()
		var m mixture
		ok := true
		for k := range ch.in {
			if w := weights[f.obs[i].cluster][k]; w > 0 {
				if ch.p[k][i] == nil {
					ok = false
					break
				}
				m.add(ch.p[k][i], w)
			}
		}
		if !ok || len(m.draws) == 0 {
			continue
		}
		c := f.obs[i].cluster
		p.of[i] = m.below(f.obs[i].p)
		p.spread[c] += f.obs[i].weight * (p.of[i] - 0.5) * (p.of[i] - 0.5)
		p.clusters[c] += f.obs[i].weight
	}
	return p
}

// narrowingPrior is the weight, in deposits, of "the mixture is as wide as it
// should be" in alpha.
const narrowingPrior = 5

// alpha is the exponent that sets the spread of the combined expectation right,
// found without cluster skip (-1: with all). A mixture of rival forecasts that
// are each calibrated is wider than it should be (Gneiting & Ranjan, Electron.
// J. Stat. 7:1747 (2013), doi 10.1214/13-EJS823): their beta-transformed pool,
// symmetric, with the variance 1/(4(2 alpha + 1)) of the left-out shares.
func (p *pits) alpha(f *frame, skip int) float64 {
	spread, n := narrowingPrior/12.0, float64(narrowingPrior)
	for c := range f.clusters {
		if c != skip {
			spread, n = spread+p.spread[c], n+p.clusters[c]
		}
	}
	a := (n/(4*spread) - 1) / 2
	return math.Max(0.6, math.Min(2, a))
}

func inside(p, lo, hi float64) bool { return p >= lo && p <= hi }
