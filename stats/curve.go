package stats

import "math"

const curvePoints = 33

// curve fills the fitted line with its pointwise interval: the symmetric
// bootstrap-t of the line where the model is a straight line and a studentised
// interval is asked, else BCa (or percentile) of the line over the resamples.
func (s *study) curve(m *Model, k int) {
	f := s.models[k]
	if f.x == nil {
		return
	}
	xs := curveAxis(f)
	_, straight := f.cluster.(line)
	studentised := straight && (s.req.Interval == "studentised" || s.req.Interval == "cr2")
	m.CurveKind = s.statKind()
	if studentised {
		m.CurveKind = "studentised"
	}
	for _, x := range xs {
		p := CurvePoint{X: x, Y: f.curve(f.coef, x), Low: nan, High: nan}
		switch {
		case s.boot == nil:
		case studentised:
			p.Low, p.High = s.lineBand(k, transform(f.form, f.predictor, x).value)
		default:
			p.Low, p.High = s.curveBand(k, x, p.Y)
		}
		m.Curve = append(m.Curve, p)
	}
}

// curveAxis spans the rows, at equal steps of the logarithm where the predictor
// spans decades.
func curveAxis(f *fitted) []float64 {
	lo, hi := f.x[0], f.x[0]
	for _, x := range f.x {
		lo, hi = math.Min(lo, x), math.Max(hi, x)
	}
	xs := make([]float64, curvePoints)
	for i := range xs {
		u := float64(i) / (curvePoints - 1)
		if logAxis(f.predictor) && lo > 0 {
			xs[i] = lo * math.Pow(hi/lo, u)
		} else {
			xs[i] = lo + u*(hi-lo)
		}
	}
	xs[0], xs[curvePoints-1] = lo, hi
	return xs
}

// lineBand is the bootstrap-t interval of a + b x, x as fitted.
func (s *study) lineBand(k int, x float64) (low, high float64) {
	f, e := s.models[k], s.jobOf[k]
	own, d := make([]float64, 6), newDraw(s.t.cluster.count())
	d.without(s.t.cluster.count(), -1)
	if !f.cluster.worker()(d, own, true) {
		return nan, nan
	}
	value := func(v []float64) (fit, se float64) {
		return v[0] + v[1]*x, math.Sqrt(v[3]*v[3] + 2*x*v[5] + x*x*v[4]*v[4])
	}
	fit, se := value(own)
	t := make([]float64, 0, s.boot.done[e])
	for i := range s.boot.done[e] {
		if !s.boot.ok[e][i] {
			continue
		}
		y, sy := value(s.boot.val[e][i*6 : i*6+6])
		if v := math.Abs(y-fit) / sy; finite(v) {
			t = append(t, v)
		}
	}
	i := studentisedInterval(t, fit, se, s.req.Level)
	return fromScale(f.scale, i[0]), fromScale(f.scale, i[1])
}

func (s *study) curveBand(k int, x, y float64) (low, high float64) {
	f, e := s.models[k], s.jobOf[k]
	w := s.boot.width[e]
	v := make([]float64, 0, s.boot.done[e])
	for i := range s.boot.done[e] {
		if !s.boot.ok[e][i] {
			continue
		}
		if c := f.curve(s.boot.val[e][i*w:], x); finite(c) {
			v = append(v, c)
		}
	}
	jack := make([]float64, len(s.jack[k]))
	for g, r := range s.jack[k] {
		jack[g] = f.curve(r, x)
	}
	i := s.intervalOf(v, y, jack)
	return i[0], i[1]
}
