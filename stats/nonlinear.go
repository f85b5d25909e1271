package stats

import (
	"errors"
	"math"
)

// ErrNotConverged says that a nonlinear fit did not settle.
var ErrNotConverged = errors.New("the nonlinear fit did not settle on a minimum")

// NonlinearFit is a nonlinear least-squares fit.
type NonlinearFit struct {
	Coef       []float64
	SE         []float64 // sigma sqrt(diag (J'J)^-1), J at the minimum
	RSS        float64
	Sigma      float64
	Iterations int
}

// Curve evaluates a model at row i: its value, and the derivatives by the
// coefficients into gradient.
type Curve func(i int, coef, gradient []float64) float64

// FitNonlinear minimises sum_i (y_i - f_i(coef))^2 from start by damped
// Gauss-Newton steps (Levenberg, Q. Appl. Math. 2:164 (1944); Marquardt, J.
// SIAM 11:431 (1963), doi 10.1137/0111030, with More's scaling by the largest
// column lengths met so far and the gain-ratio damping of Nielsen 1999); each
// step is solved by QR of the damped Jacobian, so normal equations are never
// formed. It stops when a full Gauss-Newton step changes every coefficient by
// less than 1e-10 of itself, or ErrNotConverged after 2,000 steps from each of
// four dampings.
func FitNonlinear(f Curve, y, start []float64) (*NonlinearFit, error) {
	n, p := len(y), len(start)
	if n < p+1 {
		return nil, errors.New("too few rows for the coefficients")
	}
	// A start far from the minimum can throw the first steps onto a plateau where
	// a coefficient says nothing any more: begin again with smaller steps.
	for _, damping := range []float64{1e-3, 1, 100, 1e4} {
		s := newSteps(f, y, start)
		s.mu = damping
		if !finite(s.rss) {
			break
		}
		if fit, err := s.run(); err == nil {
			return fit, nil
		}
	}
	return nil, ErrNotConverged
}

func (s *steps) run() (*NonlinearFit, error) {
	for it := range 2000 {
		if s.settled() {
			return s.result(it)
		}
		if !s.step() {
			// No downhill step left at any damping: a minimum to the last digit,
			// or a wall.
			if s.flat() {
				return s.result(it)
			}
			return nil, ErrNotConverged
		}
	}
	return nil, ErrNotConverged
}

// steps is the state of a damped Gauss-Newton search.
type steps struct {
	f          Curve
	y          []float64
	b, trial   []float64
	g          []float64
	jac        [][]float64 // p columns of n
	res        []float64
	scale      []float64
	rss        float64
	mu, nu     float64
	work       [][]float64
	gaussDelta []float64
}

func newSteps(f Curve, y, start []float64) *steps {
	p := len(start)
	s := &steps{f: f, y: y, b: append([]float64(nil), start...), trial: make([]float64, p), g: make([]float64, p),
		res: make([]float64, len(y)), scale: make([]float64, p), nu: 2}
	for range p {
		s.jac = append(s.jac, make([]float64, len(y)))
		s.work = append(s.work, make([]float64, len(y)+p))
	}
	s.linearise()
	return s
}

// linearise fills residuals and Jacobian at b.
func (s *steps) linearise() {
	s.rss = 0
	for i := range s.y {
		s.res[i] = s.y[i] - s.f(i, s.b, s.g)
		s.rss += s.res[i] * s.res[i]
		for j, d := range s.g {
			s.jac[j][i] = d
		}
	}
	for j, c := range s.jac {
		s.scale[j] = math.Max(s.scale[j], math.Sqrt(dot(c, c)))
	}
}

// solve returns the step that minimises |res - J d|^2 + mu |D d|^2, or nil.
func (s *steps) solve(mu float64) []float64 {
	n, p := len(s.y), len(s.b)
	rhs := make([]float64, n+p)
	copy(rhs, s.res)
	norm := make([]float64, p)
	for j := range p {
		w := s.work[j]
		clear(w)
		copy(w, s.jac[j])
		w[n+j] = math.Sqrt(mu) * s.scale[j]
		if norm[j] = math.Sqrt(dot(w, w)); norm[j] == 0 || !finite(norm[j]) {
			return nil
		}
		for i := range w {
			w[i] /= norm[j]
		}
	}
	r := make([][]float64, p)
	for j := range p {
		r[j] = make([]float64, p)
	}
	for j, c := range s.work {
		for range 2 {
			for k := range j {
				d := dot(s.work[k], c)
				r[k][j] += d
				axpy(-d, s.work[k], c)
			}
		}
		l := math.Sqrt(dot(c, c))
		if !(l > 1e-14) {
			return nil
		}
		r[j][j] = l
		for i := range c {
			c[i] /= l
		}
	}
	inv := invertUpper(r)
	c := make([]float64, p)
	for j := range p {
		c[j] = dot(s.work[j], rhs)
		axpy(-c[j], s.work[j], rhs)
	}
	d := make([]float64, p)
	for j := range p {
		d[j] = dot(inv[j], c) / norm[j]
	}
	return d
}

// settled: the undamped step no longer moves the coefficients.
func (s *steps) settled() bool {
	s.gaussDelta = s.solve(0)
	if s.gaussDelta == nil {
		return false
	}
	for j, d := range s.gaussDelta {
		if !(math.Abs(d) <= 1e-10*math.Abs(s.b[j])) {
			return false
		}
	}
	// Take the last step: it is below 1e-10 and doubles the digits.
	for j, d := range s.gaussDelta {
		s.trial[j] = s.b[j] + d
	}
	if s.rssAt(s.trial) <= s.rss*(1+1e-12) {
		copy(s.b, s.trial)
		s.linearise()
	}
	return true
}

// flat: the gradient is zero to rounding, though steps no longer lower the sum
// of squares.
func (s *steps) flat() bool {
	if s.gaussDelta == nil {
		return false
	}
	for j, d := range s.gaussDelta {
		if !(math.Abs(d) <= 1e-6*math.Abs(s.b[j])) {
			return false
		}
	}
	return true
}

func (s *steps) rssAt(b []float64) float64 {
	sum := 0.0
	for i := range s.y {
		e := s.y[i] - s.f(i, b, s.g)
		sum += e * e
	}
	return sum
}

// step moves downhill once, raising the damping until it can.
func (s *steps) step() bool {
	for range 60 {
		d := s.solve(s.mu)
		if d != nil {
			predicted := 0.0 // fall of the sum of squares the linear model expects
			for j := range d {
				s.trial[j] = s.b[j] + d[j]
				predicted += d[j] * (s.mu*s.scale[j]*s.scale[j]*d[j] + dot(s.jac[j], s.res))
			}
			rss := s.rssAt(s.trial)
			if gain := (s.rss - rss) / predicted; finite(rss) && rss < s.rss && gain > 1e-4 {
				copy(s.b, s.trial)
				s.linearise()
				s.mu *= math.Max(1.0/3, 1-math.Pow(2*gain-1, 3))
				s.nu = 2
				return true
			}
		}
		s.mu *= s.nu
		s.nu *= 2
	}
	return false
}

func (s *steps) result(iterations int) (*NonlinearFit, error) {
	n, p := len(s.y), len(s.b)
	x := make([][]float64, p)
	length := make([]float64, p)
	for j := range p {
		length[j] = math.Sqrt(dot(s.jac[j], s.jac[j]))
		x[j] = make([]float64, n)
		for i, v := range s.jac[j] {
			x[j][i] = v / length[j]
		}
	}
	r, err := orthogonalise(x)
	if err != nil {
		return nil, ErrNotConverged
	}
	inv := invertUpper(r)
	fit := &NonlinearFit{Coef: s.b, SE: make([]float64, p), RSS: s.rss, Iterations: iterations}
	if n > p {
		fit.Sigma = math.Sqrt(s.rss / float64(n-p))
	}
	for j := range p {
		fit.SE[j] = fit.Sigma * math.Sqrt(dot(inv[j], inv[j])) / length[j]
	}
	return fit, nil
}
