package planform

import "math"

// minSmooth and maxSmooth bound the filter: a cubic needs five points, and a
// filter of hundreds of points says that the spacing is too fine instead.
const (
	minSmooth = 5
	maxSmooth = 401
)

// curve is a smoothed line with its curvature, per sample.
type curve struct {
	x, y  []float64 // m
	kappa []float64 // 1/m, positive where the line turns left
}

// cubicWeights are the weights of the samples -m..m of a least-squares cubic,
// for the value (0), first (1) or second (2) derivative, per sample step, at
// the place t of it.
//
// Savitzky & Golay 1964, Anal. Chem. 36:1627, doi 10.1021/ac60214a047; off the
// middle after Gorry 1990, Anal. Chem. 62:570, doi 10.1021/ac00205a007.
func cubicWeights(m int, t float64, derivative int) []float64 {
	M := float64(m)
	var s [7]float64 // sums of powers of z = i/m
	for i := -m; i <= m; i++ {
		z, p := float64(i)/M, 1.0
		for k := range s {
			s[k] += p
			p *= z
		}
	}
	// Even and odd powers part: two 2x2 systems.
	even := s[0]*s[4] - s[2]*s[2]
	odd := s[2]*s[6] - s[4]*s[4]
	z := t / M
	// b holds the derivative of 1, z, z2, z3 at the place.
	var b [4]float64
	switch derivative {
	case 0:
		b = [4]float64{1, z, z * z, z * z * z}
	case 1:
		b = [4]float64{0, 1 / M, 2 * z / M, 3 * z * z / M}
	default:
		b = [4]float64{0, 0, 2 / (M * M), 6 * z / (M * M)}
	}
	// weights = b' (A'A)^-1 A'
	c0 := (b[0]*s[4] - b[2]*s[2]) / even
	c2 := (b[2]*s[0] - b[0]*s[2]) / even
	c1 := (b[1]*s[6] - b[3]*s[4]) / odd
	c3 := (b[3]*s[2] - b[1]*s[4]) / odd
	w := make([]float64, 2*m+1)
	for i := -m; i <= m; i++ {
		z := float64(i) / M
		w[i+m] = c0 + z*(c1+z*(c2+z*c3))
	}
	return w
}

// smoothed runs the cubic filter of the given odd number of points over the
// samples; 1 means no smoothing (curvature from three neighbouring samples).
// Within half a filter of an end the cubic of the first or last full filter is
// read off its middle.
func (r *samples) smoothed(points int) *curve {
	n := r.n + 1
	c := &curve{x: make([]float64, n), y: make([]float64, n), kappa: make([]float64, n)}
	m := points / 2
	if m < 2 {
		copy(c.x, r.x)
		copy(c.y, r.y)
		for i := 1; i < n-1; i++ {
			c.kappa[i] = bending((r.x[i+1]-r.x[i-1])/2, (r.y[i+1]-r.y[i-1])/2, r.x[i+1]-2*r.x[i]+r.x[i-1], r.y[i+1]-2*r.y[i]+r.y[i-1])
		}
		return c
	}
	w0, w1, w2 := cubicWeights(m, 0, 0)[m:], cubicWeights(m, 0, 1)[m:], cubicWeights(m, 0, 2)[m:]
	for i := m; i < n-m; i++ {
		sx, sy := w0[0]*r.x[i], w0[0]*r.y[i]
		ax, ay := w2[0]*r.x[i], w2[0]*r.y[i]
		var dx, dy float64
		for j := 1; j <= m; j++ {
			px, py := r.x[i+j]+r.x[i-j], r.y[i+j]+r.y[i-j]
			sx += w0[j] * px
			sy += w0[j] * py
			ax += w2[j] * px
			ay += w2[j] * py
			dx += w1[j] * (r.x[i+j] - r.x[i-j])
			dy += w1[j] * (r.y[i+j] - r.y[i-j])
		}
		c.x[i], c.y[i], c.kappa[i] = sx, sy, bending(dx, dy, ax, ay)
	}
	for k := range m {
		c.end(r, k, 0, m, float64(k-m))
		c.end(r, n-1-k, n-1-2*m, m, float64(m-k))
	}
	return c
}

// end fills sample i from the cubic of the filter that starts at sample from,
// at its place t.
func (c *curve) end(r *samples, i, from, m int, t float64) {
	var v [3][2]float64
	for d := range v {
		for j, w := range cubicWeights(m, t, d) {
			v[d][0] += w * r.x[from+j]
			v[d][1] += w * r.y[from+j]
		}
	}
	c.x[i], c.y[i] = v[0][0], v[0][1]
	c.kappa[i] = bending(v[1][0], v[1][1], v[2][0], v[2][1])
}

// bending is the curvature (x'y” - y'x”) / (x'^2 + y'^2)^(3/2), left positive;
// it does not depend on the parameter of the derivatives.
func bending(dx, dy, ax, ay float64) float64 {
	v := dx*dx + dy*dy
	if v == 0 {
		return 0
	}
	return (dx*ay - dy*ax) / (v * math.Sqrt(v))
}
