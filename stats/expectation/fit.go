package expectation

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
)

const (
	resamples = 1000 // bootstrap parameter sets of every explanation
	poolSize  = 4096 // entries of a residual pool
	// fewestClusters an explanation needs: below it neither the scatter
	// between deposits nor the left-out score means anything.
	fewestClusters = 5
	// nestedClusters is the number of clusters up to which the residuals used
	// to check coverage come from fits without either cluster; above it, the
	// effect of one further cluster is negligible.
	nestedClusters = 60
)

// fitted is one explanation fitted on a frame.
type fitted struct {
	*design
	frame    *frame
	failure  string
	rows     int
	clusters int
	beta     []float64
	s        float64 // residual standard deviation of ln(P - 1) between new systems
	df       float64
	v        []float64 // whole-cluster sandwich covariance of beta
	x        [][]float64
	usable   []bool
	total    cross
	per      []cross // by cluster

	boot       []float64 // resamples x p
	sets       int
	setOf      []int // resample number of each set, for "out of bag"
	degenerate int

	loo     [][]float64 // beta without cluster c; nil when not possible
	looS    []float64
	looDF   []float64
	looV    [][]float64
	resid   []float64 // standardised left-out residual by row; NaN = none
	logDens []float64 // log density of P of the row when its cluster is left out
	pool    []float64
	score   float64

	poolVariance float64
	coefficients []Coefficient
}

// resampling is shared by all explanations of a frame, so that parameter set b
// of each comes from the same resampled deposits and the same draws of the
// rows' palaeolatitudes.
type resampling struct {
	counts [][]uint16  // by resample, by cluster
	sins   [][]float64 // by resample, by uncertain row
	rows   []int       // rows with an uncertain palaeolatitude
}

func newResampling(f *frame, seed uint64) *resampling {
	r := &resampling{}
	for i := range f.obs {
		if f.obs[i].latSE > 0 {
			r.rows = append(r.rows, i)
		}
	}
	g := len(f.clusters)
	for b := range resamples {
		rng := rand.New(rand.NewPCG(seed, uint64(b)))
		n := make([]uint16, g)
		for range g {
			n[rng.IntN(g)]++
		}
		r.counts = append(r.counts, n)
		var s []float64
		for _, i := range r.rows {
			s = append(s, sinOf(foldLatitude(f.obs[i].latDeg+f.obs[i].latSE*rng.NormFloat64())))
		}
		r.sins = append(r.sins, s)
	}
	return r
}

// foldLatitude brings a latitude that was drawn past a pole back over it.
func foldLatitude(lat float64) float64 {
	if math.Abs(lat) <= 90 {
		return lat
	}
	lat = math.Mod(lat, 360)
	for lat > 90 || lat < -90 {
		lat = math.Copysign(180, lat) - lat
	}
	return lat
}

// fitModel fits one explanation with its resamples (none when r is nil) and
// left-out fits.
func fitModel(ctx context.Context, m model, f *frame, r *resampling) *fitted {
	t := &fitted{design: newDesign(m, f), frame: f, usable: make([]bool, len(f.obs)), x: make([][]float64, len(f.obs)), score: math.NaN()}
	t.gather()
	if need := t.fixed + 2; t.clusters < fewestClusters || t.rows < need {
		t.failure = fmt.Sprintf("It needs at least %d deposits and %d rows with P above 1 that hold what it looks at; there are %s and %s. %s", fewestClusters, need, plural(t.clusters, "deposit", "deposits"), plural(t.rows, "row", "rows"), f.more())
		return t
	}
	var xs [][]float64
	var ys, ws []float64
	for i, ok := range t.usable {
		if ok {
			xs, ys, ws = append(xs, t.x[i]), append(ys, f.obs[i].y), append(ws, f.obs[i].weight)
		}
	}
	var ok bool
	if t.beta, ok = leastSquares(xs, ys, ws, t.fixed); !ok {
		t.failure = "What it looks at does not vary enough on these rows to be fitted. " + f.more()
		return t
	}
	s := newSolver(t.p)
	if !s.factor(&t.total, t.fixed) {
		t.failure = "What it looks at does not vary enough on these rows to be fitted. " + f.more()
		return t
	}
	t.s, t.df = t.spread(&t.total, s, t.beta, t.clusters)
	if t.s == 0 {
		t.failure = "The rows lie on one line without any scatter: nothing can be said about a new system."
		return t
	}
	t.v = t.sandwich(s, t.beta, -1)
	if r != nil && ctx.Err() == nil {
		t.resample(ctx, r)
	}
	if ctx.Err() == nil {
		t.leaveOut()
	}
	t.pool = t.poolOf(t.resid, -1, make([]float64, 0, poolSize))
	var pool moments
	for _, r := range t.pool {
		pool.add(r)
	}
	t.poolVariance, t.coefficients = pool.variance(), t.estimates()
	if t.failure == "" && (len(t.pool) == 0 || (t.sets == 0 && r != nil)) {
		t.failure = "No deposit can be left out without losing the fit. " + f.more()
	}
	return t
}

func (t *fitted) gather() {
	f := t.frame
	t.total = newCross(t.p)
	t.per = make([]cross, len(f.clusters))
	for c := range f.clusters {
		t.per[c] = newCross(t.p)
		any := false
		for i := f.start[c]; i < f.start[c+1]; i++ {
			x := make([]float64, t.p)
			if !t.uses(&f.obs[i]) || math.IsInf(f.obs[i].y, 0) || !t.columns(&f.obs[i].inputs, x) {
				continue
			}
			t.usable[i], t.x[i], any = true, x, true
			t.per[c].add(x, f.obs[i].y, f.obs[i].weight)
			t.rows++
		}
		if any {
			t.clusters++
		}
		t.total.sum(&t.per[c], 1)
	}
}

// spread is the residual standard deviation and its degrees of freedom:
// weighted residual sum of squares times G/(G - p), p the effective number of
// parameters, trace of A (A + ridge)^-1.
func (t *fitted) spread(c *cross, s *solver, beta []float64, clusters int) (sd, df float64) {
	p := float64(t.fixed)
	if t.p > t.fixed {
		inv := s.inverse()
		p = float64(t.p)
		for k := t.fixed; k < t.p; k++ {
			p -= ridge * inv[k*t.p+k]
		}
	}
	df = math.Max(2, float64(clusters)-p)
	return math.Sqrt(c.rss(beta) / c.n * float64(clusters) / df), df
}

// sandwich is the whole-cluster covariance A^-1 (sum u u') A^-1 G/(G-1) with
// u = sum of w x e over a cluster, without cluster skip.
func (t *fitted) sandwich(s *solver, beta []float64, skip int) []float64 {
	p, f := t.p, t.frame
	meat, u, g := make([]float64, p*p), make([]float64, p), 0.0
	for c := range f.clusters {
		if c == skip || t.per[c].n == 0 {
			continue
		}
		g++
		clear(u)
		for i := f.start[c]; i < f.start[c+1]; i++ {
			if !t.usable[i] {
				continue
			}
			e := f.obs[i].y
			for k, x := range t.x[i] {
				e -= x * beta[k]
			}
			for k, x := range t.x[i] {
				u[k] += f.obs[i].weight * x * e
			}
		}
		for i, a := range u {
			if a == 0 {
				continue
			}
			for j, b := range u {
				meat[i*p+j] += a * b
			}
		}
	}
	inv := s.inverse()
	out := product(product(inv, meat, p), inv, p)
	for i := range out {
		out[i] *= g / (g - 1)
	}
	return out
}

func product(a, b []float64, p int) []float64 {
	out := make([]float64, p*p)
	for i := range p {
		for k := range p {
			v := a[i*p+k]
			if v == 0 {
				continue
			}
			for j := range p {
				out[i*p+j] += v * b[k*p+j]
			}
		}
	}
	return out
}

// resample fits every resample of whole clusters. A resample on which the
// plain columns cannot be separated is counted and left out.
func (t *fitted) resample(ctx context.Context, r *resampling) {
	s, sum, moved, x := newSolver(t.p), newCross(t.p), newCross(t.p), make([]float64, t.p)
	t.boot = make([]float64, 0, resamples*t.p)
	out := make([]float64, t.p)
	uncertain := make([]bool, len(t.frame.clusters))
	at := make([]int, len(t.frame.obs)) // index into r.rows, plus 1
	for k, i := range r.rows {
		at[i] = k + 1
		uncertain[t.frame.obs[i].cluster] = true
	}
	for b := range resamples {
		if b%100 == 0 && ctx.Err() != nil {
			return
		}
		sum.reset()
		for c, n := range r.counts[b] {
			switch {
			case n == 0:
			case uncertain[c]:
				moved.reset()
				t.redraw(c, r.sins[b], at, &moved, x)
				sum.sum(&moved, float64(n))
			default:
				sum.sum(&t.per[c], float64(n))
			}
		}
		if !s.factor(&sum, t.fixed) {
			t.degenerate++
			continue
		}
		s.solve(sum.b, out)
		t.boot = append(t.boot, out...)
		t.setOf = append(t.setOf, b)
	}
	t.sets = len(t.setOf)
}

// redraw gathers a cluster with its palaeolatitudes drawn.
func (t *fitted) redraw(c int, sins []float64, at []int, into *cross, x []float64) {
	f := t.frame
	for i := f.start[c]; i < f.start[c+1]; i++ {
		if !t.usable[i] {
			continue
		}
		ob := &f.obs[i]
		in := ob.inputs
		if at[i] > 0 {
			in.sin = sins[at[i]-1]
		}
		t.columns(&in, x)
		into.add(x, ob.y, ob.weight)
	}
}

// leaveOut fits without each cluster in turn and standardises the residuals
// of what was left out: (y - prediction) / (s sqrt(1 + h)), with s and the
// prediction variance h s^2 of the fit that has not seen the cluster.
func (t *fitted) leaveOut() {
	f, g := t.frame, len(t.frame.clusters)
	t.loo, t.looS, t.looDF, t.looV = make([][]float64, g), make([]float64, g), make([]float64, g), make([][]float64, g)
	t.resid, t.logDens = make([]float64, len(f.obs)), make([]float64, len(f.obs))
	for i := range t.resid {
		t.resid[i], t.logDens[i] = math.NaN(), math.NaN()
	}
	s, without := newSolver(t.p), newCross(t.p)
	var sum, n float64
	for c := range g {
		without.reset()
		without.sum(&t.total, 1)
		without.sum(&t.per[c], -1)
		seen := t.per[c].n > 0
		clusters := t.clusters
		if seen {
			clusters--
		}
		if !s.factor(&without, t.fixed) {
			continue
		}
		beta := make([]float64, t.p)
		s.solve(without.b, beta)
		t.loo[c] = beta
		t.looS[c], t.looDF[c] = t.spread(&without, s, beta, clusters)
		t.looV[c] = t.v
		if g <= 200 {
			t.looV[c] = t.sandwich(s, beta, c)
		}
		for i := f.start[c]; i < f.start[c+1]; i++ {
			if !t.usable[i] || t.looS[c] == 0 {
				continue
			}
			mean, scale := t.leftOut(i, c)
			t.resid[i] = (f.obs[i].y - mean) / scale
			t.logDens[i] = logStudent(t.resid[i], t.looDF[c]) - math.Log(scale) - f.obs[i].y
			sum, n = sum+f.obs[i].weight*t.logDens[i], n+f.obs[i].weight
		}
	}
	if n > 0 {
		t.score = sum / n
	}
}

// leftOut is the prediction for row i by the fit without cluster c, and the
// scale of its error.
func (t *fitted) leftOut(i, c int) (mean, scale float64) {
	for k, x := range t.x[i] {
		mean += x * t.loo[c][k]
	}
	s := t.looS[c]
	return mean, math.Sqrt(s*s + quadratic(t.looV[c], t.x[i]))
}

// logStudent is the log density of Student's t.
func logStudent(z, df float64) float64 {
	a, _ := math.Lgamma((df + 1) / 2)
	b, _ := math.Lgamma(df / 2)
	return a - b - 0.5*math.Log(df*math.Pi) - (df+1)/2*math.Log1p(z*z/df)
}

// poolOf lays out the residuals of all clusters but skip in poolSize entries,
// each cluster and in it each system with the same share.
func (t *fitted) poolOf(resid []float64, skip int, into []float64) []float64 {
	f := t.frame
	var total float64
	for i := range f.obs {
		if f.obs[i].cluster != skip && !math.IsNaN(resid[i]) {
			total += f.obs[i].weight
		}
	}
	if total == 0 {
		return into
	}
	var reached float64
	for i := range f.obs {
		if f.obs[i].cluster == skip || math.IsNaN(resid[i]) {
			continue
		}
		reached += f.obs[i].weight / total * poolSize
		for float64(len(into)) < math.Round(reached) && len(into) < poolSize {
			into = append(into, resid[i])
		}
	}
	return into
}
