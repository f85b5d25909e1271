package stats

import "math"

// plane is least squares with any number of columns, from the cross-products
// of each group.
type plane struct{ *moments }

// shape: the coefficients, R2, and their errors.
func (m plane) shape() (coefficients, width int) { return m.q + 1, 2*m.q + 3 }

// planeScratch is what one worker needs between resamples.
type planeScratch struct {
	sum        []float64 // weighted sum of the group triangles
	c, l, inv  []float64 // q x q: centred cross-products, Cholesky factor, inverse
	b, mean, u []float64
	dvec       []float64
}

func (m plane) worker() fitter {
	s := &planeScratch{sum: make([]float64, m.width), c: make([]float64, m.q*m.q), l: make([]float64, m.q*m.q), inv: make([]float64, m.q*m.q),
		b: make([]float64, m.q), mean: make([]float64, m.q), u: make([]float64, m.q), dvec: make([]float64, m.q)}
	return func(d *draw, out []float64, se bool) bool { return m.fit(s, d, out, se) }
}

// at is the place of product (a, b), a <= b, in a group's triangle over
// (1, x1..xq, z).
func (m *moments) at(a, b int) int { return a*(m.q+2) - a*(a-1)/2 + b - a }

func (m plane) fit(s *planeScratch, d *draw, out []float64, se bool) bool {
	q := m.q
	m.accumulate(d, s.sum)
	n := s.sum[0]
	mz, tot, ok := m.centred(s.sum, s.mean, s.c)
	if !ok || !cholesky(s.c, s.l, q) {
		return false
	}
	r2 := 0.0
	for j := range q {
		s.u[j] = s.sum[m.at(j+1, q+1)] - n*s.mean[j]*mz
	}
	cholSolve(s.l, s.u, s.b, q)
	for j := range q {
		r2 += s.b[j] * s.u[j]
	}
	a := mz
	intercept := m.zMean
	for j := range q {
		a -= s.b[j] * s.mean[j]
		out[j+1] = s.b[j] * m.zSD / m.sd[j]
		intercept -= out[j+1] * m.mean[j]
	}
	out[0] = intercept + m.zSD*a
	if m.scale == "raw" {
		out[q+1] = clampR2(r2 / tot)
	} else {
		out[q+1] = m.rowR2(d, n, a, s.b)
	}
	return !se || m.errors(s, d, n, a, out)
}

// accumulate sums the weighted triangles of the draw.
func (m *moments) accumulate(d *draw, sum []float64) {
	clear(sum)
	for k, g := range d.id {
		w, t := d.wt[k], m.sums[int(g)*m.width:(int(g)+1)*m.width]
		for i, v := range t {
			sum[i] += w * v
		}
	}
}

// centred fills the means and the centred cross-products of the columns, and
// returns mean and total sum of squares of the response.
func (m *moments) centred(sum, mean, c []float64) (mz, tot float64, ok bool) {
	q, n := m.q, sum[0]
	if n < float64(q+1) {
		return 0, 0, false
	}
	mz = sum[q+1] / n
	if tot = sum[m.at(q+1, q+1)] - n*mz*mz; tot <= 1e-12*n {
		return 0, 0, false
	}
	for j := range q {
		mean[j] = sum[j+1] / n
	}
	for i := range q {
		for j := i; j < q; j++ {
			v := sum[m.at(i+1, j+1)] - n*mean[i]*mean[j]
			c[i*q+j], c[j*q+i] = v, v
		}
		if c[i*q+i] <= 1e-12*n {
			return 0, 0, false
		}
	}
	return mz, tot, true
}

// cholesky factors c = l l' and is false where a column is a combination of
// those before it.
func cholesky(c, l []float64, q int) bool {
	for j := range q {
		for i := j; i < q; i++ {
			v := c[i*q+j]
			for k := range j {
				v -= l[i*q+k] * l[j*q+k]
			}
			if i == j {
				if v <= 1e-11*c[j*q+j] {
					return false
				}
				l[j*q+j] = math.Sqrt(v)
			} else {
				l[i*q+j] = v / l[j*q+j]
			}
		}
	}
	return true
}

// cholSolve solves l l' x = b.
func cholSolve(l, b, x []float64, q int) {
	for i := range q {
		v := b[i]
		for k := range i {
			v -= l[i*q+k] * x[k]
		}
		x[i] = v / l[i*q+i]
	}
	for i := q - 1; i >= 0; i-- {
		v := x[i]
		for k := i + 1; k < q; k++ {
			v -= l[k*q+i] * x[k]
		}
		x[i] = v / l[i*q+i]
	}
}

// errors writes the cluster errors; see line.errors. With C the centred
// cross-products, group g moves the slopes by C^-1 s_g, s_g the sum of
// (x_i - mean) e_i over its rows.
func (m plane) errors(s *planeScratch, d *draw, n, a float64, out []float64) bool {
	q := m.q
	if d.size < 2 {
		return false
	}
	ses := out[q+2 : 2*q+3]
	clear(ses)
	for k, g := range d.id {
		t := m.sums[int(g)*m.width : (int(g)+1)*m.width]
		e := m.scores(t, s.mean, a, s.b, s.u)
		cholSolve(s.l, s.u, s.dvec, q)
		i := e / n
		for j, v := range s.dvec {
			i += (m.zeroAt[j] - s.mean[j]) * v
			ses[j+1] += d.wt[k] * v * v
		}
		ses[0] += d.wt[k] * i * i
	}
	c := d.size / (d.size - 1)
	for j := range q {
		if ses[j+1] < 1e-26 {
			return false
		}
		ses[j+1] = math.Sqrt(c*ses[j+1]) * m.zSD / m.sd[j]
	}
	ses[0] = math.Sqrt(c*ses[0]) * m.zSD
	return true
}

// scores returns the sum of the residuals of one group and fills u with the
// sums of (x_j - mean_j) times residual, all on the scaled columns.
func (m *moments) scores(t, mean []float64, a float64, b, u []float64) (e float64) {
	q := m.q
	e = t[q+1] - a*t[0]
	for j := range q {
		e -= b[j] * t[j+1]
	}
	for j := range q {
		v := t[m.at(j+1, q+1)] - a*t[j+1] - mean[j]*e
		for k := range q {
			v -= b[k] * t[m.at(min(j, k)+1, max(j, k)+1)]
		}
		u[j] = v
	}
	return e
}

func (m plane) rowR2(d *draw, n, a float64, b []float64) float64 {
	var sy, syy, rss float64
	for k, g := range d.id {
		sy += d.wt[k] * m.ySums[2*g]
		syy += d.wt[k] * m.ySums[2*g+1]
		sum := 0.0
		for i := m.start[g]; i < m.start[g+1]; i++ {
			e := m.ys[i] + m.yMean - fromScale(m.scale, m.zMean+m.zSD*(a+dot(b, m.xs[i*m.q:(i+1)*m.q])))
			sum += e * e
		}
		rss += d.wt[k] * sum
	}
	return 1 - rss/(syy-sy*sy/n)
}
