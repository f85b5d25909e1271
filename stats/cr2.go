package stats

import "math"

// clusterTerms are the cross-products a cluster-robust error needs: for each
// cluster X_g'X_g (p x p, row-major) and X_g'e_g.
type clusterTerms struct {
	p      int
	xx, xe [][]float64
}

// cr2 returns, for the contrast c'b, the bias-reduced cluster error CR2 (Bell &
// McCaffrey, Surv. Methodol. 28:169 (2002)) with Satterthwaite degrees of
// freedom under an identity working covariance (Pustejovsky & Tipton, J. Bus.
// Econ. Stat. 36:672 (2018), doi 10.1080/07350015.2016.1247004).
//
// With M = (X'X)^-1 = L L', the adjustment (I - X_g M X_g')^-1/2 acts only on
// the span of X_g L, so the eigenvalues l_j and vectors u_j of the p x p matrix
// L'X_g'X_g L carry all of it: cost follows clusters, not rows. With v = L'c,
//
//	a_g'e_g     = sum_j (1-l_j)^-1/2 (u_j'v) u_j'L'X_g'e_g
//	a_g'a_g     = sum_j l_j/(1-l_j) (u_j'v)^2
//	L'X_g'a_g   = sum_j l_j (1-l_j)^-1/2 (u_j'v) u_j  =: d_g
//	se^2 = sum_g (a_g'e_g)^2,  df = tr(B)^2/tr(B^2),  B_gh = [g=h] a_g'a_g - d_g'd_h
//
// Directions that one cluster alone decides (l_j = 1) are left out, as by a
// Moore-Penrose inverse.
func (t *clusterTerms) cr2(c []float64) (se, df float64) {
	p := t.p
	l, ok := t.rootInverse()
	if !ok || len(t.xx) < 2 {
		return nan, nan
	}
	v := make([]float64, p)
	for j := range p {
		for i := range p {
			v[j] += l[i*p+j] * c[i]
		}
	}
	return t.satterthwaite(l, v)
}

// satterthwaite sums error and degrees of freedom over the clusters; see cr2.
func (t *clusterTerms) satterthwaite(l, v []float64) (se, df float64) {
	p := t.p
	var variance, trace, square float64
	dd := make([]float64, p*p) // sum d_g d_g'
	k, u, d, le := make([]float64, p*p), make([]float64, p*p), make([]float64, p), make([]float64, p)
	for g := range t.xx {
		sandwich(l, t.xx[g], k, p)
		jacobi(k, u, p)
		for j := range p {
			le[j] = 0
			for i := range p {
				le[j] += l[i*p+j] * t.xe[g][i]
			}
		}
		var ae, aa, dsq float64
		clear(d)
		for j := range p {
			lambda := k[j*p+j]
			if lambda <= 0 || 1-lambda < 1e-9 {
				continue
			}
			uv, ue := 0.0, 0.0
			for i := range p {
				uv += u[i*p+j] * v[i]
				ue += u[i*p+j] * le[i]
			}
			r := 1 / math.Sqrt(1-lambda)
			ae += r * uv * ue
			aa += lambda / (1 - lambda) * uv * uv
			for i := range p {
				d[i] += lambda * r * uv * u[i*p+j]
			}
		}
		for i := range p {
			dsq += d[i] * d[i]
			for j := range p {
				dd[i*p+j] += d[i] * d[j]
			}
		}
		variance += ae * ae
		trace += aa - dsq
		// (aa - dsq)^2 on the diagonal; the off-diagonal squares come from dd.
		square += (aa-dsq)*(aa-dsq) - dsq*dsq
	}
	for _, x := range dd {
		square += x * x
	}
	if !(square > 0) || !(variance > 0) {
		return nan, nan
	}
	return math.Sqrt(variance), trace * trace / square
}

// rootInverse returns L with L L' = (X'X)^-1: the inverse transposed Cholesky
// factor.
func (t *clusterTerms) rootInverse() ([]float64, bool) {
	p := t.p
	sum, l, inv := make([]float64, p*p), make([]float64, p*p), make([]float64, p*p)
	for _, x := range t.xx {
		for i, v := range x {
			sum[i] += v
		}
	}
	if !cholesky(sum, l, p) {
		return nil, false
	}
	for k := range p {
		inv[k*p+k] = 1 / l[k*p+k]
		for i := k + 1; i < p; i++ {
			s := 0.0
			for m := k; m < i; m++ {
				s += l[i*p+m] * inv[m*p+k]
			}
			inv[i*p+k] = -s / l[i*p+i]
		}
	}
	out := make([]float64, p*p)
	for i := range p {
		for j := range p {
			out[i*p+j] = inv[j*p+i]
		}
	}
	return out, true
}

// sandwich computes k = l' x l.
func sandwich(l, x, k []float64, p int) {
	clear(k)
	for a := range p {
		for b := range p {
			s := 0.0
			for i := range p {
				for j := range p {
					s += l[i*p+a] * x[i*p+j] * l[j*p+b]
				}
			}
			k[a*p+b] = s
		}
	}
}

// jacobi diagonalises the symmetric k in place by plane rotations; the columns
// of u become its eigenvectors, the diagonal of k its eigenvalues.
func jacobi(k, u []float64, p int) {
	clear(u)
	for i := range p {
		u[i*p+i] = 1
	}
	for range 30 {
		off := 0.0
		for i := range p {
			for j := i + 1; j < p; j++ {
				off += k[i*p+j] * k[i*p+j]
			}
		}
		if off < 1e-32 {
			return
		}
		for i := range p {
			for j := i + 1; j < p; j++ {
				rotate(k, u, p, i, j)
			}
		}
	}
}

func rotate(k, u []float64, p, i, j int) {
	if k[i*p+j] == 0 {
		return
	}
	theta := (k[j*p+j] - k[i*p+i]) / (2 * k[i*p+j])
	t := 1 / (math.Abs(theta) + math.Sqrt(theta*theta+1))
	if theta < 0 {
		t = -t
	}
	c := 1 / math.Sqrt(t*t+1)
	s := t * c
	for m := range p {
		a, b := k[m*p+i], k[m*p+j]
		k[m*p+i], k[m*p+j] = c*a-s*b, s*a+c*b
	}
	for m := range p {
		a, b := k[i*p+m], k[j*p+m]
		k[i*p+m], k[j*p+m] = c*a-s*b, s*a+c*b
		a, b = u[m*p+i], u[m*p+j]
		u[m*p+i], u[m*p+j] = c*a-s*b, s*a+c*b
	}
}

// terms are the cluster terms of a least-squares fit in the scaled columns
// (1, x1..xq), centred so that the sums lose no digits.
func (m *moments) terms(fit *LinearFit) *clusterTerms {
	p := m.q + 1
	t := &clusterTerms{p: p}
	b, a := make([]float64, m.q), (fit.Coef[0]-m.zMean)/m.zSD
	for j := range m.q {
		b[j] = fit.Coef[j+1] * m.sd[j] / m.zSD
		a += fit.Coef[j+1] * m.mean[j] / m.zSD
	}
	zero := make([]float64, m.q)
	for g := range m.groups {
		s := m.sums[g*m.width : (g+1)*m.width]
		xx, xe := make([]float64, p*p), make([]float64, p)
		for i := range p {
			for j := range p {
				xx[i*p+j] = s[m.at(min(i, j), max(i, j))]
			}
		}
		xe[0] = m.scores(s, zero, a, b, xe[1:])
		t.xx, t.xe = append(t.xx, xx), append(t.xe, xe)
	}
	return t
}

// contrast is coefficient j of the raw columns as a combination of the scaled
// ones, and the unit that carries it back.
func (m *moments) contrast(j int) (c []float64, unit float64) {
	c = make([]float64, m.q+1)
	if j > 0 {
		c[j] = 1
		return c, m.zSD / m.sd[j-1]
	}
	c[0] = 1
	copy(c[1:], m.zeroAt)
	return c, m.zSD
}
