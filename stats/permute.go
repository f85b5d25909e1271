package stats

import (
	"context"
	"math"
	"math/rand/v2"
)

// flipper draws one weight a group: +-1 (Rademacher) or, under 12 groups, where
// signs alone give too few different draws, the six points +-sqrt(1/2), +-1,
// +-sqrt(3/2) (Webb, Queen's Economics Department Working Paper 1315 (2014)).
type flipper struct {
	pcg  rand.PCG
	seed uint64
	w    []float64
}

// flipStream keeps sign flips and resamples of one seed apart.
const flipStream = 0x9e3779b97f4a7c15

var webb = [6]float64{-math.Sqrt(1.5), -1, -math.Sqrt(0.5), math.Sqrt(0.5), 1, math.Sqrt(1.5)}

const fewGroupsForSigns = 12

func (f *flipper) draw(i int) []float64 {
	f.pcg.Seed(f.seed^flipStream, uint64(i))
	if len(f.w) < fewGroupsForSigns {
		for k := range f.w {
			f.w[k] = webb[f.pcg.Uint64()>>32*6>>32]
		}
		return f.w
	}
	var bits uint64
	for k := range f.w {
		if k%64 == 0 {
			bits = f.pcg.Uint64()
		}
		f.w[k] = float64(int(bits&1)*2 - 1)
		bits >>= 1
	}
	return f.w
}

// flipTest is a test whose statistic can be computed from one weight a group:
// the residuals of the null model, flipped by whole groups (wild cluster
// bootstrap with the null imposed: Cameron, Gelbach & Miller, Rev. Econ. Stat.
// 90:414 (2008), doi 10.1162/rest.90.3.414; for a partial term after Freedman
// & Lane, J. Bus. Econ. Stat. 1:292 (1983), doi 10.1080/07350015.1983.10509354).
// Permutation of rows is not used: under unequal clusters it is not defined.
type flipTest interface {
	groups() int
	statistic() func(w []float64) float64 // with scratch for one goroutine
}

// flipP returns (1 + number of flips with a statistic at least the observed
// one) / (1 + flips). NaN when the observed statistic is not finite.
func flipP(ctx context.Context, t flipTest, flips int, seed uint64, workers int) (float64, error) {
	ones := make([]float64, t.groups())
	for i := range ones {
		ones[i] = 1
	}
	observed := t.statistic()(ones)
	if !finite(observed) || t.groups() < 2 {
		return nan, nil
	}
	limit := observed * (1 - 1e-12)
	hits := make([]bool, flips)
	err := inBlocks(ctx, flips, workers, nil, func() func(int) {
		f := &flipper{seed: seed, w: make([]float64, t.groups())}
		stat := t.statistic()
		return func(i int) { hits[i] = !(stat(f.draw(i)) < limit) }
	})
	n := 1.0
	for _, h := range hits {
		if h {
			n++
		}
	}
	return n / float64(flips+1), err
}

// termTest tests columns [from, to) of a least-squares model given the others:
// the Wald statistic with the cluster error, or the explained sum of squares
// where the columns are many for the clusters.
type termTest struct {
	p        int // with the intercept
	from, to int // places in the p columns
	m        []float64
	xx, xr   [][]float64 // by group: X'X, and X'r of the null model's residuals
	byErrors bool
}

func (t *termTest) groups() int { return len(t.xx) }

// newTermTest is nil when the model or its null cannot be fitted. The whole
// model at once (from = 1, to = p, with several columns), and columns whose
// cluster error vanishes because one cluster alone decides them, are tested by
// the sum of squares.
func newTermTest(ct *clusterTerms, xz [][]float64, from, to int) *termTest {
	p := ct.p
	t := &termTest{p: p, from: from, to: to, xx: ct.xx, byErrors: to-from == 1 || to-from < p-1 && 3*(to-from) <= len(ct.xx)}
	root, ok := ct.rootInverse()
	if !ok {
		return nil
	}
	t.m = make([]float64, p*p)
	for i := range p {
		for j := range p {
			t.m[i*p+j] = dot(root[i*p:(i+1)*p], root[j*p:(j+1)*p])
		}
	}
	beta := nullFit(ct, xz, from, to)
	if beta == nil {
		return nil
	}
	for g := range ct.xx {
		r := make([]float64, p)
		for i := range p {
			r[i] = xz[g][i] - dot(ct.xx[g][i*p:(i+1)*p], beta)
		}
		t.xr = append(t.xr, r)
	}
	t.byErrors = t.byErrors && t.errorsHold()
	return t
}

// errorsHold tells whether the observed cluster errors of the tested columns
// are more than rounding beside the classical ones.
func (t *termTest) errorsHold() bool {
	ones := make([]float64, len(t.xx))
	for i := range ones {
		ones[i] = 1
	}
	k := t.to - t.from
	v, l := make([]float64, k*k), make([]float64, k*k)
	t.covariance(ones, t.delta(ones, make([]float64, t.p), make([]float64, t.p)), make([]float64, t.p), make([]float64, k), v)
	for a := range k {
		if !(v[a*k+a] > 1e-12*t.m[(t.from+a)*t.p+t.from+a]) {
			return false
		}
	}
	return cholesky(v, l, k)
}

// nullFit solves the model without columns [from, to); their places hold 0.
func nullFit(ct *clusterTerms, xz [][]float64, from, to int) []float64 {
	p := ct.p
	var keep []int
	for i := range p {
		if i < from || i >= to {
			keep = append(keep, i)
		}
	}
	q := len(keep)
	c, b, l, x := make([]float64, q*q), make([]float64, q), make([]float64, q*q), make([]float64, q)
	for g := range ct.xx {
		for a, i := range keep {
			b[a] += xz[g][i]
			for k, j := range keep {
				c[a*q+k] += ct.xx[g][i*p+j]
			}
		}
	}
	if !cholesky(c, l, q) {
		return nil
	}
	cholSolve(l, b, x, q)
	beta := make([]float64, p)
	for a, i := range keep {
		beta[i] = x[a]
	}
	return beta
}

func (t *termTest) statistic() func(w []float64) float64 {
	p, k := t.p, t.to-t.from
	s, delta, score, inf := make([]float64, p), make([]float64, p), make([]float64, p), make([]float64, k)
	v, l, x := make([]float64, k*k), make([]float64, k*k), make([]float64, k)
	return func(w []float64) float64 {
		t.delta(w, s, delta)
		if !t.byErrors {
			return t.explained(delta)
		}
		t.covariance(w, delta, score, inf, v)
		d := delta[t.from:t.to]
		if k == 1 {
			return d[0] * d[0] / v[0]
		}
		if !cholesky(v, l, k) {
			return 0
		}
		cholSolve(l, d, x, k)
		return dot(d, x)
	}
}

// delta is how far the flipped residuals move the coefficients from the null's.
func (t *termTest) delta(w, s, delta []float64) []float64 {
	clear(s)
	for g, xr := range t.xr {
		axpy(w[g], xr, s)
	}
	for i := range t.p {
		delta[i] = dot(t.m[i*t.p:(i+1)*t.p], s)
	}
	return delta
}

// covariance is the cluster covariance of the tested coefficients.
func (t *termTest) covariance(w, delta, score, inf, v []float64) {
	p, k := t.p, t.to-t.from
	clear(v)
	for g, xx := range t.xx {
		for i := range p {
			score[i] = w[g]*t.xr[g][i] - dot(xx[i*p:(i+1)*p], delta)
		}
		for a := range k {
			i := t.from + a
			inf[a] = dot(t.m[i*p:(i+1)*p], score)
		}
		for a := range k {
			for b := range k {
				v[a*k+b] += inf[a] * inf[b]
			}
		}
	}
}

// explained is what the tested columns take of the sum of squares of the
// flipped residuals: delta_T' (M_TT)^-1 delta_T.
func (t *termTest) explained(delta []float64) float64 {
	k := t.to - t.from
	c, l, x := make([]float64, k*k), make([]float64, k*k), make([]float64, k)
	for a := range k {
		for b := range k {
			c[a*k+b] = t.m[(t.from+a)*t.p+t.from+b]
		}
	}
	if !cholesky(c, l, k) {
		return 0
	}
	cholSolve(l, delta[t.from:t.to], x, k)
	return dot(delta[t.from:t.to], x)
}

// responseTerms are X_g'z_g on the scaled columns, intercept first.
func (m *moments) responseTerms() [][]float64 {
	out := make([][]float64, m.groups)
	for g := range out {
		s := m.sums[g*m.width : (g+1)*m.width]
		for i := range m.q + 1 {
			out[g] = append(out[g], s[m.at(i, m.q+1)])
		}
	}
	return out
}

// decayTest tests the fall to the floor against no relation: the share of the
// sum of squares about the mean that the best decay rate takes.
type decayTest struct {
	d    *decay
	mean float64 // of P - 1
}

func (t decayTest) groups() int { return len(t.d.start) - 1 }

func (t decayTest) statistic() func(w []float64) float64 {
	s := &decayScratch{}
	const n = decayDegree + 1
	return func(w []float64) float64 {
		clear(s.sum[:])
		var rows, r, rr float64
		for g, wt := range w {
			c, flat := t.d.series[g*decaySeries:(g+1)*decaySeries], t.d.flat[g*n:(g+1)*n]
			for m := range n {
				s.sum[m] += c[m]
				s.sum[n+m] += t.mean*flat[m] + wt*(c[n+m]-t.mean*flat[m])
			}
			rows += t.d.vSums[3*g]
			r += wt * t.d.vSums[3*g+1]
			rr += wt * wt * t.d.vSums[3*g+2]
		}
		tot := rr - r*r/rows
		v2 := rows*t.mean*t.mean + 2*t.mean*r + rr
		return 1 - (v2-t.d.best(s))/tot
	}
}

// best is the largest B^2/A within the reach of the series.
func (d *decay) best(s *decayScratch) float64 {
	at, u := d.startingPoint(s)
	if at > 0 && at < len(d.grid)-1 {
		if _, p, ok := newton(s.at, d.gridAt[at-1], u, d.gridAt[at+1]); ok {
			return p.b * p.b / p.a
		}
	}
	p := s.at(d.gridAt[at])
	return p.b * p.b / p.a
}
