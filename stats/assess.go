package stats

import (
	"context"
	"math"
	"slices"
)

// assess turns fits and resamples into the reported models.
func (s *study) assess(ctx context.Context) error {
	rowJob := 0
	for k, f := range s.models {
		m := Model{Model: f.label, Form: f.form, Predictor: f.predictor, Group: s.kind, Scale: f.scale,
			Rows: s.t.n(), Clusters: s.t.cluster.count(), Failure: f.failure, Levels: f.levels,
			RSquared: nan, RSquaredInterval: noInterval, RSquaredFitted: nan, OutOfSampleR2: nan, Skill: nan, AICc: nan,
			AkaikeWeight: nan, PermutationP: nan, Kendall: nan, Spearman: nan, Sigma: nan}
		if f.failure == "" {
			m.RSquared, m.RSquaredFitted, m.Sigma = f.r2, f.r2Fitted, f.sigma
			if f.likelihood {
				m.AICc = aicc(f.rss, s.t.n(), len(f.coef))
			}
			if f.x != nil {
				m.Kendall, m.Spearman = KendallTauB(f.x, f.y), Spearman(f.x, f.y)
			}
			rows := -1
			if s.rows != nil && f.robust != nil {
				rows = rowJob
				rowJob++
			}
			s.coefficients(&m, k, rows)
			s.score(&m, k)
			if err := s.test(ctx, &m, f); err != nil {
				return err
			}
			s.curve(&m, k)
			m.Influence = s.influence(f, k)
		}
		s.out = append(s.out, m)
	}
	akaikeWeights(s.out)
	return nil
}

// coefficients fills estimates with every interval that is defined.
func (s *study) coefficients(m *Model, k, rowJob int) {
	f := s.models[k]
	var rob robust
	if f.robust != nil {
		rob = f.robust(f.cluster)
	}
	for j, name := range f.names {
		c := Coefficient{Name: name, Estimate: f.coef[j], StandardError: nan, Interval: noInterval, Intervals: map[string]Interval{}}
		if f.se != nil {
			c.StandardError = f.se[j]
		}
		if rob.terms != nil {
			con, unit := rob.contrast(j)
			se, df := rob.terms.cr2(con)
			c.CR2 = &CR2{SE: se * unit, DF: df, Interval: cr2Interval(f.coef[j], se*unit, df, s.req.Level)}
			c.Intervals["cr2"] = c.CR2.Interval
		}
		if s.boot != nil {
			s.bootIntervals(&c, k, j)
		}
		if rowJob >= 0 {
			v := s.rows.column(rowJob, j)
			sortFloats(v)
			c.Intervals["row_bootstrap"] = bcaInterval(v, f.coef[j], columnOf(s.rowJack[k], j), s.req.Level)
		}
		if f.rowIntervals != nil {
			c.Intervals["rows_hc1"] = f.rowIntervals[j]
		}
		kind := s.req.Interval
		if _, ok := c.Intervals[kind]; !ok {
			kind = "bca"
		}
		c.IntervalKind = kind
		if i, ok := c.Intervals[kind]; ok {
			c.Interval = i
		}
		m.Coefficients = append(m.Coefficients, c)
	}
	if s.boot == nil {
		return
	}
	e := s.jobOf[k]
	m.DegenerateResamples, m.ResamplesUsed = s.boot.degenerate(e), s.boot.done[e]
	m.RSquaredInterval = s.statInterval(e, len(f.coef), f.r2, columnOf(s.pull[k], len(f.coef)))
	m.RSquaredIntervalKind = s.statKind()
	m.Carrier = s.carrier(k)
}

// bootIntervals fills studentised (where the estimator gives errors), BCa and
// percentile.
func (s *study) bootIntervals(c *Coefficient, k, j int) {
	f, e := s.models[k], s.jobOf[k]
	if f.robust != nil {
		c.Intervals["studentised"] = s.studentised(k, j)
	}
	v := s.boot.column(e, j)
	if f.se == nil && len(v) > 1 {
		// No formula holds for clustered rows: the spread over the resamples.
		_, length := centreScale(v)
		c.StandardError = length / math.Sqrt(float64(len(v)-1))
	}
	sortFloats(v)
	c.Intervals["bca"] = bcaInterval(v, f.coef[j], columnOf(s.pull[k], j), s.req.Level)
	c.Intervals["percentile"] = percentileInterval(v, s.req.Level)
}

// studentised is the bootstrap-t interval of coefficient j of model k.
func (s *study) studentised(k, j int) Interval {
	f, e := s.models[k], s.jobOf[k]
	own, ok := f.full()
	if !ok {
		return noInterval
	}
	w, at := s.boot.width[e], len(f.coef)+1+j
	t := make([]float64, 0, s.boot.done[e])
	for i := range s.boot.done[e] {
		v := s.boot.val[e][i*w : (i+1)*w]
		if x := math.Abs(v[j]-own[j]) / v[at]; s.boot.ok[e][i] && finite(x) {
			t = append(t, x)
		}
	}
	return studentisedInterval(t, f.coef[j], own[at], s.req.Level)
}

// statKind: R2, differences and shares are BCa unless percentile is asked.
func (s *study) statKind() string {
	if s.req.Interval == "percentile" {
		return "percentile"
	}
	return "bca"
}

func (s *study) statInterval(e, k int, estimate float64, jack []float64) Interval {
	return s.intervalOf(s.boot.column(e, k), estimate, jack)
}

// intervalOf sorts v.
func (s *study) intervalOf(v []float64, estimate float64, jack []float64) Interval {
	sortFloats(v)
	if s.statKind() == "percentile" {
		return percentileInterval(v, s.req.Level)
	}
	return bcaInterval(v, estimate, jack, s.req.Level)
}

func columnOf(rows [][]float64, k int) []float64 {
	out := make([]float64, len(rows))
	for i, r := range rows {
		out[i] = r[k]
	}
	return out
}

// carrier names the cluster whose leaving out moves the slope farthest.
func (s *study) carrier(k int) string {
	j := slopeIndex(s.models[k].form)
	best, name := -1.0, ""
	for g, r := range s.jack[k] {
		if d := math.Abs(r[j] - s.models[k].coef[j]); d > best {
			best, name = d, s.t.cluster.names[g]
		}
	}
	return name
}

// score fills the leave-one-cluster-out R2, 1 - PRESS/SST, and the skill
// against the mean of the other clusters, 1 - PRESS/PRESS_mean. Rows whose
// model cannot be fitted without their cluster are predicted by that mean.
func (s *study) score(m *Model, k int) {
	if s.boot == nil {
		return
	}
	press, pressMean, total := s.outOfSample(k)
	m.OutOfSampleR2, m.Skill = 1-press/total, 1-press/pressMean
}

func (s *study) outOfSample(k int) (press, pressMean, total float64) {
	f, c := s.models[k], &s.t.cluster
	mean, length := centreScale(f.y)
	n := float64(len(f.y))
	for g := range c.count() {
		rows := c.members(g)
		sum := 0.0
		for _, i := range rows {
			sum += f.y[i] - mean
		}
		rest := mean - sum/(n-float64(len(rows)))
		fits := !slices.ContainsFunc(s.jack[k][g][:len(f.coef)], math.IsNaN)
		for _, i := range rows {
			d := f.y[i] - rest
			pressMean += d * d
			if fits {
				d = f.y[i] - f.at(s.jack[k][g], i)
			}
			press += d * d
		}
	}
	return press, pressMean, length * length
}
