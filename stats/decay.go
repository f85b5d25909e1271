package stats

import "math"

// decayDegree is the degree of the Chebyshev series by which every group's sums
// follow the decay rate. exp(-2 b x) runs over exp(+-2 decayReach) within the
// series, whose first term left out is then below 2^-20 (2 decayReach)^21/21!,
// 1e-13 of the sum.
const (
	decayDegree = 20
	decayReach  = 2.0
)

// decay is the fall to the floor, P = 1 + a exp(-b x), by least squares in
// sinuosity units. Given b the best a is B/A with
//
//	A(b) = sum exp(-2 b x),  B(b) = sum (P - 1) exp(-b x),
//
// so a fit is the maximum of B^2/A over b alone (variable projection: Golub &
// Pereyra, SIAM J. Numer. Anal. 10:413 (1973), doi 10.1137/0710036). A and B of
// each group are kept as Chebyshev series of b about the full fit, so that a
// resample costs groups, not rows.
type decay struct {
	mid, half  float64   // x = mid + half * s, |s| <= 1
	centre     float64   // b of the full fit
	reach      float64   // the series hold for |b - centre| <= reach
	series     []float64 // groups x 2(decayDegree+1): A, then B
	flat       []float64 // groups x (decayDegree+1): sum exp(-b x), for the test
	vSums      []float64 // groups x 3: n, sum v, sum v^2, v = P - 1
	vMean      float64
	grid       [][]float64 // Chebyshev polynomials at the grid of starting points
	gridAt     []float64
	x, v       []float64 // rows in group order, for draws the series do not reach
	start      []int
	coef       [2]float64
	se         [2]float64
	rss, sigma float64
}

const decaySeries = 2 * (decayDegree + 1)

// decayGrid is half the number of steps in which the best decay rate is looked
// for before it is refined.
const decayGrid = 3

// fitDecay fits P = 1 + a exp(-b x) to all rows by damped Gauss-Newton from the
// best of a grid of decay rates.
func fitDecay(x, y []float64) (*NonlinearFit, error) {
	lo, hi := x[0], x[0]
	for _, v := range x {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	best, start := -1.0, []float64{0, 0}
	for k := -40; k <= 40; k++ {
		b := float64(k) / 4 / (hi - lo)
		var a2, va float64
		for i, xi := range x {
			e := math.Exp(-b * (xi - lo))
			a2 += e * e
			va += (y[i] - 1) * e
		}
		if f := va * va / a2; finite(f) && f > best {
			best, start = f, []float64{va / a2 * math.Exp(b*lo), b}
		}
	}
	if start[0] == 0 || !finite(start[0]) {
		return nil, ErrNotConverged
	}
	return FitNonlinear(func(i int, c, g []float64) float64 {
		e := math.Exp(-c[1] * x[i])
		g[0], g[1] = e, -c[0]*x[i]*e
		return 1 + c[0]*e
	}, y, start)
}

func newDecay(p *plan, g *grouping, fit *NonlinearFit) *decay {
	lo, hi := p.x[0], p.x[0]
	for _, v := range p.x {
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	d := &decay{mid: (lo + hi) / 2, half: (hi - lo) / 2, centre: fit.Coef[1], start: g.start,
		coef: [2]float64(fit.Coef), se: [2]float64(fit.SE), rss: fit.RSS, sigma: fit.Sigma}
	d.reach = decayReach / d.half
	for _, y := range p.y {
		d.vMean += (y - 1) / float64(len(p.y))
	}
	d.vSums = make([]float64, 3*g.count())
	for _, i := range g.rows {
		v := p.y[i] - 1
		d.x, d.v = append(d.x, p.x[i]-d.mid), append(d.v, v)
		k := g.of[i]
		d.vSums[3*k]++
		d.vSums[3*k+1] += v - d.vMean
		d.vSums[3*k+2] += (v - d.vMean) * (v - d.vMean)
	}
	d.fillSeries()
	for k := -decayGrid; k <= decayGrid; k++ {
		u := float64(k) / decayGrid
		t := make([]float64, decayDegree+1)
		chebyshev(u, t, nil, nil)
		d.gridAt, d.grid = append(d.gridAt, u), append(d.grid, t)
	}
	return d
}

// fillSeries computes every group's A, B and sum of exp(-b x) at the Chebyshev
// nodes and turns them into series.
func (d *decay) fillSeries() {
	groups := len(d.start) - 1
	d.series, d.flat = make([]float64, groups*decaySeries), make([]float64, groups*(decayDegree+1))
	nodes := chebyshevNodes()
	for g := range groups {
		at, flat := d.series[g*decaySeries:(g+1)*decaySeries], d.flat[g*(decayDegree+1):(g+1)*(decayDegree+1)]
		for node, u := range nodes.u {
			var a, b, e1 float64
			for i := d.start[g]; i < d.start[g+1]; i++ {
				e := math.Exp(-(d.centre + d.reach*u) * d.x[i])
				a += e * e
				b += e * d.v[i]
				e1 += e
			}
			for m, w := range nodes.weight[node] {
				at[m] += w * a
				at[decayDegree+1+m] += w * b
				flat[m] += w * e1
			}
		}
	}
}

// nodes of the discrete Chebyshev transform: value at node times weight summed
// over nodes gives the coefficients.
type nodes struct {
	u      []float64
	weight [][]float64
}

func chebyshevNodes() nodes {
	const n = decayDegree + 1
	var out nodes
	for k := range n {
		theta := math.Pi * (float64(k) + 0.5) / n
		w := make([]float64, n)
		for m := range w {
			w[m] = 2.0 / n * math.Cos(float64(m)*theta)
		}
		w[0] /= 2
		out.u, out.weight = append(out.u, math.Cos(theta)), append(out.weight, w)
	}
	return out
}

// chebyshev fills t with T_0..T_degree at u, and t1, t2 (if not nil) with their
// first and second derivatives.
func chebyshev(u float64, t, t1, t2 []float64) {
	t[0], t[1] = 1, u
	for k := 2; k < len(t); k++ {
		t[k] = 2*u*t[k-1] - t[k-2]
	}
	if t1 == nil {
		return
	}
	t1[0], t1[1], t2[0], t2[1] = 0, 1, 0, 0
	for k := 2; k < len(t); k++ {
		t1[k] = 2*t[k-1] + 2*u*t1[k-1] - t1[k-2]
		t2[k] = 4*t1[k-1] + 2*u*t2[k-1] - t2[k-2]
	}
}

// shape: a, b, R2 and their errors.
func (d *decay) shape() (coefficients, width int) { return 2, 5 }

type decayScratch struct {
	sum       [decaySeries]float64
	t, t1, t2 [decayDegree + 1]float64
}

func (d *decay) worker() fitter {
	s := &decayScratch{}
	return func(w *draw, out []float64, se bool) bool { return d.fit(s, w, out, se) }
}

// profile is A, B and their first two derivatives by u, b = centre + reach u.
type profile struct{ a, b, a1, b1, a2, b2 float64 }

func (s *decayScratch) at(u float64) profile {
	chebyshev(u, s.t[:], s.t1[:], s.t2[:])
	var p profile
	for k := range s.t {
		ca, cb := s.sum[k], s.sum[decayDegree+1+k]
		p.a += ca * s.t[k]
		p.b += cb * s.t[k]
		p.a1 += ca * s.t1[k]
		p.b1 += cb * s.t1[k]
		p.a2 += ca * s.t2[k]
		p.b2 += cb * s.t2[k]
	}
	return p
}

// byRows is the profile computed from the rows, for any u.
func (d *decay) byRows(w *draw, u float64) profile {
	var p profile
	b, r := d.centre+d.reach*u, d.reach
	for k, g := range w.id {
		for i := d.start[g]; i < d.start[g+1]; i++ {
			x := d.x[i]
			e := math.Exp(-b * x)
			ee, ve := w.wt[k]*e*e, w.wt[k]*e*d.v[i]
			p.a += ee
			p.b += ve
			p.a1 -= 2 * r * x * ee
			p.b1 -= r * x * ve
			p.a2 += 4 * r * r * x * x * ee
			p.b2 += r * r * x * x * ve
		}
	}
	return p
}

func (d *decay) fit(s *decayScratch, w *draw, out []float64, se bool) bool {
	clear(s.sum[:])
	var n, v, vv float64
	for k, g := range w.id {
		wt := w.wt[k]
		for i, c := range d.series[int(g)*decaySeries : (int(g)+1)*decaySeries] {
			s.sum[i] += wt * c
		}
		n += wt * d.vSums[3*g]
		v += wt * d.vSums[3*g+1]
		vv += wt * d.vSums[3*g+2]
	}
	tot := vv - v*v/n
	if tot <= 1e-13*n {
		return false
	}
	u, p, inside, ok := d.maximise(s, w)
	if !ok {
		return false
	}
	a := p.b / p.a
	b := d.centre + d.reach*u
	out[0], out[1] = a*math.Exp(b*d.mid), b
	// sum v^2 about zero, less what the curve takes.
	sumV2 := vv + 2*d.vMean*v + n*d.vMean*d.vMean
	out[2] = 1 - (sumV2-p.b*p.b/p.a)/tot
	if !finite(out[0]) || !finite(out[2]) {
		return false
	}
	return !se || d.errors(s, w, a, b, p, inside, out)
}

// maximise finds the decay rate with the largest B^2/A: the best point of a
// grid, then Newton steps on the logarithm kept between its neighbours.
func (d *decay) maximise(s *decayScratch, w *draw) (u float64, p profile, inside, ok bool) {
	at, start := d.startingPoint(s)
	if at > 0 && at < len(d.grid)-1 {
		u, p, ok = newton(s.at, d.gridAt[at-1], start, d.gridAt[at+1])
		return u, p, true, ok
	}
	// The optimum lies at the edge of the series or beyond: look by rows, in
	// steps outwards, up to rates at which a single row carries the curve.
	step := math.Copysign(0.2, d.gridAt[at])
	u = d.gridAt[at]
	f := func(x float64) profile { return d.byRows(w, x) }
	here := f(u)
	for range 60 {
		next := f(u + step)
		if next.b*next.b/next.a <= here.b*here.b/here.a {
			u, p, ok = newton(f, math.Min(u-step, u+step), u, math.Max(u-step, u+step))
			return u, p, false, ok
		}
		here = next
		u += step
	}
	return 0, p, false, false
}

// startingPoint is the best point of the grid, refined by the parabola through
// the logarithms of it and its neighbours.
func (d *decay) startingPoint(s *decayScratch) (at int, u float64) {
	best := -1.0
	var f [2*decayGrid + 1]float64
	for k, t := range d.grid {
		var a, b float64
		for m, tm := range t {
			a += s.sum[m] * tm
			b += s.sum[decayDegree+1+m] * tm
		}
		if f[k] = b * b / a; f[k] > best {
			best, at = f[k], k
		}
	}
	u = d.gridAt[at]
	if at > 0 && at < len(f)-1 {
		l, m, r := math.Log(f[at-1]), math.Log(f[at]), math.Log(f[at+1])
		if c := l - 2*m + r; c < 0 {
			u += 0.5 * (l - r) / c / decayGrid
		}
	}
	return at, u
}

// newton maximises 2 ln|B| - ln A between lo and hi, starting at u.
func newton(at func(float64) profile, lo, u, hi float64) (float64, profile, bool) {
	var p profile
	for range 60 {
		p = at(u)
		if !(p.a > 0) || p.b == 0 {
			return u, p, false
		}
		rb, ra := p.b1/p.b, p.a1/p.a
		g := 2*rb - ra
		h := 2*(p.b2/p.b-rb*rb) - (p.a2/p.a - ra*ra)
		if g > 0 {
			lo = u
		} else {
			hi = u
		}
		next := u - g/h
		if !(h < 0) || !(next > lo && next < hi) {
			next = (lo + hi) / 2
		}
		// Newton doubles the digits: after a step of 1e-7 the next would be of
		// 1e-14. The profile is carried along by its derivatives.
		if d := next - u; math.Abs(d) <= 1e-7 {
			p.a += d * (p.a1 + d*p.a2/2)
			p.b += d * (p.b1 + d*p.b2/2)
			p.a1 += d * p.a2
			p.b1 += d * p.b2
			return next, p, true
		}
		u = next
	}
	return u, p, hi-lo < 1e-9
}
