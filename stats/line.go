package stats

import "math"

// line is the straight line on the scale fitted, from six cross-products a
// group: n, Sx, Sz, Sxx, Sxz, Szz of the centred, scaled values.
type line struct{ *moments }

func (l line) worker() fitter {
	return func(d *draw, out []float64, se bool) bool { return l.fit(d, out, se) }
}

// shape: two coefficients, R2, their errors, and their covariance for the band.
func (l line) shape() (coefficients, width int) { return 2, 6 }

func (l line) fit(d *draw, out []float64, se bool) bool {
	var n, sx, sz, sxx, sxz, szz float64
	for k, g := range d.id {
		w, s := d.wt[k], l.sums[int(g)*6:int(g)*6+6:int(g)*6+6]
		n += w * s[0]
		sx += w * s[1]
		sz += w * s[2]
		sxx += w * s[3]
		sxz += w * s[4]
		szz += w * s[5]
	}
	if n < 2 {
		return false
	}
	mx, mz := sx/n, sz/n
	q, tot := sxx-sx*mx, szz-sz*mz
	if q <= 1e-12*n || tot <= 1e-12*n {
		return false
	}
	b := (sxz - sx*mz) / q
	a := mz - b*mx
	slope := b * l.zSD / l.sd[0]
	out[0], out[1] = l.zMean+l.zSD*a-slope*l.mean[0], slope
	if l.scale == "raw" {
		out[2] = clampR2(b * b * q / tot)
	} else {
		out[2] = l.rowR2(d, n, a, b)
	}
	return !se || l.errors(d, n, mx, q, a, b, out)
}

// errors writes the cluster error of intercept and slope: for a coefficient
// with influence u_i e_i, V = G/(G-1) sum_g w_g (sum_i u_i e_i)^2, where for the
// slope u = (x - mean)/Q and for the intercept 1/n + (x0 - mean) u
// (Cameron, Gelbach & Miller, Rev. Econ. Stat. 90:414 (2008), doi
// 10.1162/rest.90.3.414).
func (l line) errors(d *draw, n, mx, q, a, b float64, out []float64) bool {
	at, nInv, qInv := l.zeroAt[0]-mx, 1/n, 1/q
	var v0, v1, v01 float64
	for k, g := range d.id {
		w, s := d.wt[k], l.sums[int(g)*6:int(g)*6+6:int(g)*6+6]
		e := s[2] - a*s[0] - b*s[1]
		u := (s[4] - a*s[1] - b*s[3] - mx*e) * qInv
		i := e*nInv + at*u
		v1 += w * u * u
		v0 += w * i * i
		v01 += w * i * u
	}
	if d.size < 2 || v1 < 1e-26 {
		return false
	}
	c := d.size / (d.size - 1)
	out[3] = math.Sqrt(c*v0) * l.zSD
	out[4] = math.Sqrt(c*v1) * l.zSD / l.sd[0]
	out[5] = c * v01 * l.zSD * l.zSD / l.sd[0]
	return true
}

// rowR2 is R2 in sinuosity units of the line carried back from its scale.
func (l line) rowR2(d *draw, n, a, b float64) float64 {
	var sy, syy, rss float64
	for k, g := range d.id {
		sy += d.wt[k] * l.ySums[2*g]
		syy += d.wt[k] * l.ySums[2*g+1]
		sum := 0.0
		for i := l.start[g]; i < l.start[g+1]; i++ {
			e := l.ys[i] + l.yMean - fromScale(l.scale, l.zMean+l.zSD*(a+b*l.xs[i]))
			sum += e * e
		}
		rss += d.wt[k] * sum
	}
	return 1 - rss/(syy-sy*sy/n)
}

func clampR2(r float64) float64 { return math.Min(1, math.Max(0, r)) }

func sqrtInt(n int) float64 { return math.Sqrt(float64(n)) }
