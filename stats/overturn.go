package stats

import (
	"context"
	"fmt"
	"strconv"
)

const (
	mostContrary      = 100 // contrary systems tried
	overturnResamples = 299
)

// overturning is how many contrary systems, each a cluster of its own, would
// have to be added before the interval of the leading slope holds zero. Where
// sinuosity falls with the predictor they are sinuous (the 90th percentile of
// the rows) and stand in the upper quarter of the predictor; where it rises they
// are straight (the 10th). The number is found by doubling and halving with the
// kind of interval asked, at 299 resamples.
func (s *study) overturning(ctx context.Context) (*Overturning, error) {
	k := s.leadingSingle()
	if k < 0 || s.boot == nil || s.t.cluster.count() > mostLeftOut || s.t.n() > maxRowFormRows {
		return nil, nil // so many rows that no few systems overturn them
	}
	f, m := s.models[k], &s.out[k]
	c := m.slope()
	out := &Overturning{Term: f.label + " " + c.Name}
	if !c.Interval.known() {
		return nil, nil
	}
	if !c.Interval.excludes(0) {
		out.Text = fmt.Sprintf("The %s interval of %s (%s) already holds zero: no contrary system is needed.", kindName(c.IntervalKind), coefficientText(c.Name), between(c.Interval))
		return out, nil
	}
	x := append([]float64(nil), f.x...)
	y := append([]float64(nil), f.y...)
	sortFloats(x)
	sortFloats(y)
	falls := f.curve(f.coef, x[len(x)-1]) < f.curve(f.coef, x[0])
	level, what := sortedQuantile(y, 0.9), "sinuous"
	if !falls {
		level, what = sortedQuantile(y, 0.1), "nearly straight"
	}
	holds := func(n int) (bool, error) {
		t := s.t.with(f.predictor, n, func(i int) (float64, float64) {
			return sortedQuantile(x, 0.75+0.25*(float64(i)+0.5)/float64(n)), level
		})
		i, err := s.quickInterval(ctx, t, f, c.IntervalKind)
		return !i.excludes(0), err
	}
	n, found, err := firstTrue(holds, mostContrary)
	if err != nil {
		return nil, err
	}
	out.Systems, out.MoreThan = n, !found
	count := plural(n, "contrary system", "contrary systems")
	if !found {
		count = "More than " + strconv.Itoa(mostContrary) + " contrary systems"
	}
	would := "would be enough for"
	if !found {
		would = "would be needed for"
	}
	out.Text = fmt.Sprintf("%s (%s: sinuosity %s, with %s of %s to %s) %s the interval of %s to hold zero.",
		upperFirst(count), what, number(level), nameOf(f.predictor), number(sortedQuantile(x, 0.75)), number(x[len(x)-1]), would, coefficientText(c.Name))
	return out, nil
}

// firstTrue finds the smallest n in 1..most for which holds is true, by doubling
// and halving.
func firstTrue(holds func(int) (bool, error), most int) (int, bool, error) {
	lo, hi := 0, 1
	for {
		ok, err := holds(hi)
		if err != nil {
			return 0, false, err
		}
		if ok {
			break
		}
		if hi == most {
			return most, false, nil
		}
		lo, hi = hi, min(2*hi, most)
	}
	for hi-lo > 1 {
		mid := (lo + hi) / 2
		ok, err := holds(mid)
		if err != nil {
			return 0, false, err
		}
		if ok {
			hi = mid
		} else {
			lo = mid
		}
	}
	return hi, true, nil
}

// leadingSingle is the leading model among those with one predictor.
func (s *study) leadingSingle() int {
	single := append([]Model(nil), s.out...)
	for i := range single {
		if single[i].Form == "joint" {
			single[i].Failure = "not a single predictor"
		}
	}
	return leading(single)
}

// with is the table with n rows added, each a cluster of its own, at (x, y).
// Only what a model of one predictor needs is filled.
func (t *table) with(predictor string, n int, at func(i int) (x, y float64)) *table {
	out := &table{predictor: map[string][]float64{}}
	out.y = append(out.y, t.y...)
	xs := append([]float64(nil), t.predictor[predictor]...)
	labels := make([]string, t.n(), t.n()+n)
	for i, g := range t.cluster.of {
		labels[i] = strconv.Itoa(g)
	}
	for i := range n {
		x, y := at(i)
		xs, out.y = append(xs, x), append(out.y, y)
		labels = append(labels, "new "+strconv.Itoa(i))
	}
	out.predictor[predictor] = xs
	out.cluster = newGrouping(labels)
	return out
}

// quickInterval refits a model of one predictor on another table and returns
// the interval of its slope, with few resamples.
func (s *study) quickInterval(ctx context.Context, t *table, f *fitted, kind string) (Interval, error) {
	g := fitPlan(t, newPlan(t, ModelSpec{f.form, f.predictor}, s.req.Scale))
	if g.failure != "" {
		return noInterval, nil
	}
	j := slopeIndex(f.form)
	if kind == "cr2" {
		r := g.robust(g.cluster)
		con, unit := r.contrast(j)
		se, df := r.terms.cr2(con)
		return cr2Interval(g.coef[j], se*unit, df, s.req.Level), nil
	}
	req := *s.req
	req.Resamples = min(req.Resamples, overturnResamples)
	q := &study{req: &req, t: t, models: []*fitted{g}, jobOf: []int{0}, jack: [][][]float64{nil}}
	if kind == "bca" {
		q.jack[0] = jackknife(g.cluster, t.cluster.count())
	}
	var err error
	if q.boot, err = bootstrap(ctx, t.cluster.count(), req.Resamples, req.Seed, req.Workers, []job{{est: g.cluster, se: kind == "studentised"}}, nil); err != nil {
		return noInterval, err
	}
	c := Coefficient{Intervals: map[string]Interval{}}
	switch kind {
	case "studentised":
		c.Intervals[kind] = q.studentised(0, j)
	default:
		v := q.boot.column(0, j)
		sortFloats(v)
		if kind == "percentile" {
			return percentileInterval(v, req.Level), nil
		}
		return bcaInterval(v, g.coef[j], columnOf(q.jack[0], j), req.Level), nil
	}
	return c.Intervals[kind], nil
}
