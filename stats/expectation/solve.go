package expectation

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// cross holds the weighted cross-products of a set of rows on centred
// columns: a = X'WX (row-major p x p), b = X'Wy, yy = y'Wy, n = sum of W.
type cross struct {
	p  int
	a  []float64
	b  []float64
	yy float64
	n  float64
}

func newCross(p int) cross { return cross{p: p, a: make([]float64, p*p), b: make([]float64, p)} }

func (c *cross) reset() {
	clear(c.a)
	clear(c.b)
	c.yy, c.n = 0, 0
}

// add puts one row with weight w in.
func (c *cross) add(x []float64, y, w float64) {
	for i, xi := range x {
		if xi == 0 {
			continue
		}
		s := w * xi
		row := c.a[i*c.p : (i+1)*c.p]
		for j, xj := range x {
			row[j] += s * xj
		}
		c.b[i] += s * y
	}
	c.yy += w * y * y
	c.n += w
}

// sum adds k times o.
func (c *cross) sum(o *cross, k float64) {
	for i, v := range o.a {
		c.a[i] += k * v
	}
	for i, v := range o.b {
		c.b[i] += k * v
	}
	c.yy += k * o.yy
	c.n += k * o.n
}

// rss is the weighted residual sum of squares of beta.
func (c *cross) rss(beta []float64) float64 {
	s := c.yy
	for i, bi := range beta {
		var ab float64
		for j, bj := range beta {
			ab += c.a[i*c.p+j] * bj
		}
		s += bi * (ab - 2*c.b[i])
	}
	return math.Max(s, 0)
}

// solver factors and solves p x p systems without allocation.
type solver struct {
	p    int
	l    []float64
	work []float64
}

func newSolver(p int) *solver {
	return &solver{p: p, l: make([]float64, p*p), work: make([]float64, p)}
}

// factor makes the Cholesky factor of c.a plus the ridge on the category
// columns; false when the plain columns are not separable on these rows.
func (s *solver) factor(c *cross, fixed int) bool {
	p := s.p
	for j := range p {
		d := c.a[j*p+j]
		if j >= fixed {
			d += ridge
		}
		full := d
		for k := range j {
			d -= s.l[j*p+k] * s.l[j*p+k]
		}
		if !(d > 1e-10*full) || full <= 0 {
			return false
		}
		d = math.Sqrt(d)
		s.l[j*p+j] = d
		for i := j + 1; i < p; i++ {
			v := c.a[i*p+j]
			for k := range j {
				v -= s.l[i*p+k] * s.l[j*p+k]
			}
			s.l[i*p+j] = v / d
		}
	}
	return true
}

// solve puts the solution for right-hand side b into out.
func (s *solver) solve(b, out []float64) {
	p := s.p
	for i := range p {
		v := b[i]
		for k := range i {
			v -= s.l[i*p+k] * s.work[k]
		}
		s.work[i] = v / s.l[i*p+i]
	}
	for i := p - 1; i >= 0; i-- {
		v := s.work[i]
		for k := i + 1; k < p; k++ {
			v -= s.l[k*p+i] * out[k]
		}
		out[i] = v / s.l[i*p+i]
	}
}

// inverse returns the inverse of what was factored, row-major.
func (s *solver) inverse() []float64 {
	p := s.p
	inv, e, col := make([]float64, p*p), make([]float64, p), make([]float64, p)
	for j := range p {
		clear(e)
		e[j] = 1
		s.solve(e, col)
		for i := range p {
			inv[i*p+j] = col[i]
		}
	}
	return inv
}

// quadratic is x' m x for a row-major m.
func quadratic(m, x []float64) float64 {
	p := len(x)
	var q float64
	for i, xi := range x {
		if xi == 0 {
			continue
		}
		var r float64
		for j, xj := range x {
			r += m[i*p+j] * xj
		}
		q += xi * r
	}
	return q
}

// leastSquares solves the reported fit by QR on the rows themselves, the
// ridge as further rows; false when the columns are not separable.
func leastSquares(x [][]float64, y, w []float64, fixed int) ([]float64, bool) {
	p := len(x[0])
	rows := len(x) + p - fixed
	if rows < p {
		return nil, false
	}
	a, b := mat.NewDense(rows, p, nil), mat.NewVecDense(rows, nil)
	for i := range x {
		s := math.Sqrt(w[i])
		for j, v := range x[i] {
			a.Set(i, j, s*v)
		}
		b.SetVec(i, s*y[i])
	}
	for k := fixed; k < p; k++ {
		a.Set(len(x)+k-fixed, k, math.Sqrt(ridge))
	}
	var qr mat.QR
	qr.Factorize(a)
	if c := qr.Cond(); math.IsNaN(c) || c > 1e8 {
		return nil, false
	}
	var beta mat.VecDense
	if err := qr.SolveVecTo(&beta, false, b); err != nil {
		return nil, false
	}
	return beta.RawVector().Data, true
}
