package stats

import (
	"fmt"
	"math"
	"slices"
)

// quantileLine minimises sum w rho_tau(z - a - b x), rho_tau(r) = r (tau -
// [r < 0]) (Koenker & Bassett, Econometrica 46:33 (1978), doi 10.2307/1913643).
//
// For a slope b the best a is a weighted quantile of z - b x, so the sum is a
// convex, piecewise linear function of b alone. The minimum is bracketed by
// subgradients of opposite sign and found by intersecting the two tangents
// (Kelley, J. SIAM 8:703 (1960)): a finite number of steps, exact for lines
// through data points, and indifferent to ties.
type quantileLine struct {
	tau    float64
	x, z   []float64 // centred and scaled, in group order
	y      []float64
	start  []int
	scale  string
	mx, mz float64
	sx, sz float64
	warm   float64 // slope of the full fit, scaled
}

// quantileTau of a form name.
func quantileTau(form string) float64 {
	return map[string]float64{"quantile_10": 0.1, "quantile_50": 0.5, "quantile_90": 0.9}[form]
}

func newQuantileLine(p *plan, g *grouping, tau float64) *quantileLine {
	q := &quantileLine{tau: tau, scale: p.scale, start: g.start}
	mx, lx := centreScale(p.x)
	mz, lz := centreScale(p.z)
	q.mx, q.sx, q.mz, q.sz = mx, lx/sqrtInt(len(p.x)), mz, lz/sqrtInt(len(p.x))
	for _, i := range g.rows {
		q.x, q.z, q.y = append(q.x, (p.x[i]-q.mx)/q.sx), append(q.z, (p.z[i]-q.mz)/q.sz), append(q.y, p.y[i])
	}
	return q
}

// shape: intercept, slope, R2.
func (q *quantileLine) shape() (coefficients, width int) { return 2, 3 }

// cut is the objective at one slope with its tangent.
type cut struct{ b, a, value, gradient float64 }

type quantileScratch struct {
	x, z, w, r, tmp, tmpW []float64
}

func (q *quantileLine) worker() fitter {
	n := len(q.x)
	s := &quantileScratch{}
	for _, v := range []*[]float64{&s.x, &s.z, &s.w, &s.r, &s.tmp, &s.tmpW} {
		*v = make([]float64, 0, n)
	}
	return func(d *draw, out []float64, _ bool) bool {
		s.x, s.z, s.w = s.x[:0], s.z[:0], s.w[:0]
		for k, g := range d.id {
			for i := q.start[g]; i < q.start[g+1]; i++ {
				s.x, s.z, s.w = append(s.x, q.x[i]), append(s.z, q.z[i]), append(s.w, d.wt[k])
			}
		}
		c, ok := q.solve(s)
		if !ok {
			return false
		}
		out[1] = c.b * q.sz / q.sx
		out[0] = q.mz + q.sz*c.a - out[1]*q.mx
		out[2] = q.r2(d, out)
		return finite(out[2])
	}
}

// solve finds the best line for the rows in s.
func (q *quantileLine) solve(s *quantileScratch) (cut, bool) {
	if spread(s.x) < 1e-9 {
		return cut{}, false
	}
	lo := q.evaluate(s, q.warm)
	hi := lo
	for step := 0.25; lo.gradient > 0; step *= 2 {
		if step > 1e12 {
			return cut{}, false
		}
		hi, lo = lo, q.evaluate(s, lo.b-step)
	}
	for step := 0.25; hi.gradient < 0; step *= 2 {
		if step > 1e12 {
			return cut{}, false
		}
		lo, hi = hi, q.evaluate(s, hi.b+step)
	}
	best := lo
	if hi.value < lo.value {
		best = hi
	}
	for range 200 {
		if lo.gradient == 0 || hi.gradient == 0 {
			break
		}
		b := lo.b + ((hi.value-lo.value)-hi.gradient*(hi.b-lo.b))/(lo.gradient-hi.gradient)
		if !(b > lo.b && b < hi.b) {
			break
		}
		bound := lo.value + lo.gradient*(b-lo.b)
		c := q.evaluate(s, b)
		if c.value <= best.value {
			best = c
		}
		if c.value <= bound+1e-13*math.Abs(c.value) {
			break
		}
		if c.gradient < 0 {
			lo = c
		} else {
			hi = c
		}
	}
	return q.vertex(s, best), true
}

// evaluate finds the best level at slope b, the objective and a subgradient:
// rows on the line take what the rows off it leave over.
func (q *quantileLine) evaluate(s *quantileScratch, b float64) cut {
	s.r = s.r[:0]
	for i, x := range s.x {
		s.r = append(s.r, s.z[i]-b*x)
	}
	a := weightedQuantile(s, q.tau)
	var above, below, on, sumOn, value, sum float64
	for i, r := range s.r {
		w := s.w[i]
		switch d := r - a; {
		case d > 0:
			above += w
			value += q.tau * w * d
			sum += q.tau * w * s.x[i]
		case d < 0:
			below += w
			value += (q.tau - 1) * w * d
			sum += (q.tau - 1) * w * s.x[i]
		default:
			on += w
			sumOn += w * s.x[i]
		}
	}
	sum += -(q.tau*above + (q.tau-1)*below) / on * sumOn
	return cut{b: b, a: a, value: value, gradient: -sum}
}

// weightedQuantile is the smallest residual with at least tau of the weight at
// or below it, by partition.
func weightedQuantile(s *quantileScratch, tau float64) float64 {
	r, w := append(s.tmp[:0], s.r...), append(s.tmpW[:0], s.w...)
	target := 0.0
	for _, v := range w {
		target += v
	}
	target *= tau
	target -= 1e-9
	for {
		n := len(r)
		if n == 1 {
			return r[0]
		}
		pivot := median3(r[0], r[n/2], r[n-1])
		less, equal := 0.0, 0.0
		i := 0
		for k := range r {
			switch {
			case r[k] < pivot:
				less += w[k]
				r[i], r[k], w[i], w[k] = r[k], r[i], w[k], w[i]
				i++
			case r[k] == pivot:
				equal += w[k]
			}
		}
		switch {
		case target <= less && i > 0:
			r, w = r[:i], w[:i]
		case target <= less+equal:
			return pivot
		default:
			target -= less + equal
			r, w = r[i:], w[i:]
			j := 0
			for k := range r {
				if r[k] != pivot {
					r[j], w[j] = r[k], w[k]
					j++
				}
			}
			if j == 0 {
				return pivot
			}
			r, w = r[:j], w[:j]
		}
	}
}

func median3(a, b, c float64) float64 {
	return math.Max(math.Min(a, b), math.Min(math.Max(a, b), c))
}

// vertex moves the line exactly onto the two rows nearest to it, when that does
// not raise the objective: it takes the last rounding out.
func (q *quantileLine) vertex(s *quantileScratch, c cut) cut {
	first, second := -1, -1
	dist := func(i int) float64 { return math.Abs(s.z[i] - c.a - c.b*s.x[i]) }
	for i := range s.x {
		if first < 0 || dist(i) < dist(first) {
			first = i
		}
	}
	for i := range s.x {
		if math.Abs(s.x[i]-s.x[first]) > 1e-12 && (second < 0 || dist(i) < dist(second)) {
			second = i
		}
	}
	if second < 0 {
		return c
	}
	b := (s.z[first] - s.z[second]) / (s.x[first] - s.x[second])
	a := s.z[first] - b*s.x[first]
	value := 0.0
	for i, w := range s.w {
		r := s.z[i] - a - b*s.x[i]
		if r < 0 {
			value += (q.tau - 1) * w * r
		} else {
			value += q.tau * w * r
		}
	}
	if value <= c.value*(1+1e-12)+1e-300 {
		return cut{b: b, a: a, value: value}
	}
	return c
}

func spread(x []float64) float64 {
	if len(x) == 0 {
		return 0
	}
	return slices.Max(x) - slices.Min(x)
}

// r2 is 1 - RSS/TSS in sinuosity units. A line at the 10th or 90th percentile
// is not near the mean, so it may be far below zero.
func (q *quantileLine) r2(d *draw, coef []float64) float64 {
	return weightedR2(d, q.start, q.y, func(i int) float64 {
		return fromScale(q.scale, coef[0]+coef[1]*(q.mx+q.sx*q.x[i]))
	})
}

// weightedR2 is 1 - RSS/TSS of values predicted for rows in group order.
func weightedR2(d *draw, start []int, y []float64, predicted func(i int) float64) float64 {
	var n, sum, square, rss float64
	for k, g := range d.id {
		w := d.wt[k]
		for i := start[g]; i < start[g+1]; i++ {
			e, v := y[i]-predicted(i), y[i]-y[0]
			n, sum, square, rss = n+w, sum+w*v, square+w*v*v, rss+w*e*e
		}
	}
	tot := square - sum*sum/n
	if tot <= 1e-12*square {
		return nan
	}
	return 1 - rss/tot
}

func (f *fitted) quantile() {
	tau := quantileTau(f.form)
	q := newQuantileLine(f.plan, &f.t.cluster, tau)
	d, out := newDraw(f.t.cluster.count()), make([]float64, 3)
	d.without(f.t.cluster.count(), -1)
	if !q.worker()(d, out, false) {
		f.failure = fmt.Sprintf("The line of the %.0f %% quantile is not defined on these rows. Widen the filter.", 100*tau)
		return
	}
	f.simple(out)
}

// simple takes over intercept, slope and R2 of a line fitted otherwise than by
// least squares.
func (f *fitted) simple(out []float64) {
	f.coef, f.r2 = slices.Clone(out[:2]), out[2]
	f.resid = f.residuals()
	f.rss = dot(f.resid, f.resid)
	_, length := centreScale(f.z)
	f.r2Fitted = 1 - f.rss/(length*length)
	f.sigma = math.Sqrt(f.rss / float64(len(f.z)-2))
}

// scoreTest tests a quantile line against a level one by the rank score
// sum_i psi_tau(e_i)(x_i - mean), psi = tau - [e < 0], of the null's residuals,
// flipped by whole clusters (Gutenbrunner, Jureckova, Koenker & Portnoy, J.
// Nonparametr. Stat. 2:307 (1993), doi 10.1080/10485259308832560; whole clusters
// after Hagemann, J. Am. Stat. Assoc. 112:446 (2017), doi
// 10.1080/01621459.2016.1148610).
type scoreTest struct{ score []float64 }

func newScoreTest(f *fitted, g *grouping, tau float64) scoreTest {
	z := slices.Sorted(slices.Values(f.z))
	level := z[min(len(z)-1, max(0, int(math.Ceil(tau*float64(len(z))-1e-9))-1))]
	mx, _ := centreScale(f.x)
	// psi is centred, as rows on the level itself leave it unbalanced.
	psi := make([]float64, len(f.z))
	for i, v := range f.z {
		switch {
		case v < level:
			psi[i] = tau - 1
		case v > level:
			psi[i] = tau
		}
	}
	mp, _ := centreScale(psi)
	t := scoreTest{make([]float64, g.count())}
	for i := range psi {
		t.score[g.of[i]] += (psi[i] - mp) * (f.x[i] - mx)
	}
	return t
}

func (t scoreTest) groups() int { return len(t.score) }

func (t scoreTest) statistic() func(w []float64) float64 {
	return func(w []float64) float64 { return math.Abs(dot(w, t.score)) }
}
