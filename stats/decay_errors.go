package stats

import "math"

// errors writes the cluster errors of a and b from the linearised model: with
// E = exp(-b x), J = (E, -a x E) and scores s_g = sum J e over the rows of g,
// sum (E e) = B - a A and sum (-a x E e) = a B' - a^2 A'/2, where ' is d/db.
func (d *decay) errors(s *decayScratch, w *draw, a, b float64, p profile, inside bool, out []float64) bool {
	if w.size < 2 {
		return false
	}
	r := d.reach
	j00, j01, j11 := p.a, a*p.a1/(2*r), a*a*p.a2/(4*r*r)
	det := j00*j11 - j01*j01
	if !(det > 1e-12*j00*j11) {
		return false
	}
	scale := math.Exp(b * d.mid)
	var va, vb float64
	for k, g := range w.id {
		s0, s1 := d.score(s, int(g), a, b, inside)
		da := (j11*s0 - j01*s1) / det
		db := (j00*s1 - j01*s0) / det
		da = scale * (da + a*d.mid*db)
		va += w.wt[k] * da * da
		vb += w.wt[k] * db * db
	}
	c := w.size / (w.size - 1)
	out[3], out[4] = math.Sqrt(c*va), math.Sqrt(c*vb)
	return vb > 1e-26*b*b && finite(out[3])
}

// score sums J e over the rows of one group, at a and b about the middle of x.
func (d *decay) score(s *decayScratch, g int, a, b float64, inside bool) (s0, s1 float64) {
	if !inside {
		for i := d.start[g]; i < d.start[g+1]; i++ {
			e := math.Exp(-b * d.x[i])
			res := d.v[i] - a*e
			s0 += e * res
			s1 -= a * d.x[i] * e * res
		}
		return s0, s1
	}
	var ga, gb, ga1, gb1 float64
	c := d.series[g*decaySeries : (g+1)*decaySeries]
	for m := range s.t {
		ga += c[m] * s.t[m]
		ga1 += c[m] * s.t1[m]
		gb += c[decayDegree+1+m] * s.t[m]
		gb1 += c[decayDegree+1+m] * s.t1[m]
	}
	return gb - a*ga, a*gb1/d.reach - a*a*ga1/(2*d.reach)
}

// terms are the cluster terms of the model linearised at the full fit, in (a
// about the middle of x, b); contrast carries them to the reported a and b.
func (d *decay) terms() *clusterTerms {
	t := &clusterTerms{p: 2}
	b := d.coef[1]
	a := d.coef[0] * math.Exp(-b*d.mid)
	for g := range len(d.start) - 1 {
		xx, xe := make([]float64, 4), make([]float64, 2)
		for i := d.start[g]; i < d.start[g+1]; i++ {
			e := math.Exp(-b * d.x[i])
			j0, j1, res := e, -a*d.x[i]*e/d.half, d.v[i]-a*e
			xx[0] += j0 * j0
			xx[1] += j0 * j1
			xx[3] += j1 * j1
			xe[0] += j0 * res
			xe[1] += j1 * res
		}
		xx[2] = xx[1]
		t.xx, t.xe = append(t.xx, xx), append(t.xe, xe)
	}
	return t
}

func (d *decay) contrast(j int) (c []float64, unit float64) {
	b := d.coef[1]
	if j == 1 {
		return []float64{0, 1 / d.half}, 1
	}
	scale := math.Exp(b * d.mid)
	return []float64{scale, d.coef[0] * d.mid / d.half}, 1
}
