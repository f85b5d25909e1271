package stats

import (
	"context"
	"math"
	"slices"
)

// rowBudget and workBudget keep long work within bounds; what is cut is said.
const (
	rowBudget   = 2_000_000   // rows x resamples of the row bootstrap shown beside
	flipBudget  = 2_000_000   // clusters x sign flips of one test
	backBudget  = 20_000_000  // rows x resamples of a transformed response, or of a form without cross-products
	noiseBudget = 2_000_000   // rows x resamples with errors of measurement
	pairBudget  = 400_000_000 // pairs x resamples of Theil-Sen
)

// study is one table (all rows, or the rows of one kind) with its models, their
// resamples and leave-one-out fits.
type study struct {
	req    *Request
	t      *table
	kind   string
	models []*fitted
	shares *sharesEstimator

	boot      *replicates
	rows      *replicates
	jack      [][][]float64 // by model, leave-one-cluster-out
	pull      [][][]float64 // by model, what BCa takes its acceleration from: jack, or see regressionInfluence
	rowJack   [][][]float64
	shareJack [][]float64
	jobOf     []int // by model: its place among the jobs, or -1
	shareJob  int
	seed      uint64
	out       []Model
}

func newStudy(t *table, req *Request, kind string) *study {
	s := &study{req: req, t: t, kind: kind, shareJob: -1, seed: req.Seed}
	for _, m := range req.Models {
		s.models = append(s.models, fitPlan(t, newPlan(t, m, req.Scale)))
	}
	if len(req.Joint) > 0 {
		s.models = append(s.models, fitPlan(t, newJointPlan(t, req.Joint, req.Interaction, req.Scale)))
	}
	return s
}

// resample runs every model on the same resamples of whole clusters, so that
// differences between models are paired.
func (s *study) resample(ctx context.Context, progress func(float64)) error {
	if s.t.cluster.count() < 2 {
		return nil
	}
	var jobs []job
	for _, f := range s.models {
		if f.failure != "" {
			s.jobOf, s.jack, s.pull = append(s.jobOf, -1), append(s.jack, nil), append(s.pull, nil)
			continue
		}
		s.jobOf = append(s.jobOf, len(jobs))
		j := job{est: f.cluster, se: true, max: f.resamples(s.req.Resamples)}
		if s.req.MeasurementError {
			j.est, j.max = s.withNoise(f), min(j.max, max(199, noiseBudget/max(s.t.n(), 1)))
		}
		jobs = append(jobs, j)
		s.jack = append(s.jack, jackknife(f.cluster, s.t.cluster.count()))
		s.pull = append(s.pull, s.jack[len(s.jack)-1])
	}
	if s.shares = newShares(s); s.shares != nil {
		s.shareJob = len(jobs)
		jobs = append(jobs, job{est: s.shares, max: s.shares.resamples(s.req.Resamples)})
		s.shareJack = jackknife(s.shares, s.t.cluster.count())
	}
	if len(jobs) == 0 {
		return nil
	}
	var err error
	s.boot, err = bootstrap(ctx, s.t.cluster.count(), s.req.Resamples, s.seed, s.req.Workers, jobs, progress)
	if err != nil {
		return err
	}
	if n := s.t.n(); s.t.cluster.count() == n && influenceRows*n <= s.req.Resamples {
		for k, e := range s.jobOf {
			if e >= 0 {
				s.pull[k] = s.boot.regressionInfluence(e, n, len(s.models[k].coef)+1, s.seed)
			}
		}
	}
	return s.resampleRows(ctx)
}

// resamples is how many a model can be given: a response that was transformed
// needs its rows for R2 in sinuosity units, and they may be many.
func (f *fitted) resamples(asked int) int {
	if isLeastSquares(f.form) && f.scale != "raw" {
		return min(asked, max(999, backBudget/max(f.t.n(), 1)))
	}
	if t, ok := f.cluster.(*theilSen); ok {
		return min(asked, max(199, pairBudget/max(len(t.slope), 1)))
	}
	if f.robust == nil {
		return min(asked, max(199, backBudget/max(f.t.n(), 1)))
	}
	return asked
}

// resampleRows repeats the bootstrap with rows in place of clusters: what a
// reader would get who took rows for independent.
func (s *study) resampleRows(ctx context.Context) error {
	n := s.t.n()
	resamples := min(s.req.Resamples, rowBudget/max(n, 1))
	if s.t.cluster.count() == n || resamples < MinResamples {
		return nil
	}
	single := singles(n)
	var jobs []job
	for _, f := range s.models {
		s.rowJack = append(s.rowJack, nil)
		if f.failure != "" || f.robust == nil {
			continue
		}
		f.row = f.compile(&single)
		jobs = append(jobs, job{est: f.row})
		if influenceRows*n > resamples {
			s.rowJack[len(s.rowJack)-1] = jackknife(f.row, n)
		}
	}
	if len(jobs) == 0 {
		return nil
	}
	var err error
	if s.rows, err = bootstrap(ctx, n, resamples, s.req.Seed, s.req.Workers, jobs, nil); err != nil {
		return err
	}
	e := 0
	for k, f := range s.models {
		if f.row == nil {
			continue
		}
		if s.rowJack[k] == nil {
			s.rowJack[k] = s.rows.regressionInfluence(e, n, len(f.coef), s.req.Seed)
		}
		e++
	}
	return nil
}

// singles is the grouping in which every row stands alone.
func singles(n int) grouping {
	g := grouping{of: make([]int, n), rows: make([]int, n), start: make([]int, n+1), names: make([]string, n)}
	for i := range n {
		g.of[i], g.rows[i], g.start[i+1] = i, i, i+1
	}
	return g
}

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

// test fills the sign-flip p of the model, and of each term of a joint model.
func (s *study) test(ctx context.Context, m *Model, f *fitted) error {
	flips := s.flips()
	run := func(t flipTest) (float64, error) {
		return flipP(ctx, t, flips, s.req.Seed, s.req.Workers)
	}
	var err error
	switch {
	case s.t.cluster.count() < 2:
	case isLeastSquares(f.form):
		mo := momentsOf(f.cluster)
		terms, xz := f.robust(f.cluster).terms, mo.responseTerms()
		if t := newTermTest(terms, xz, 1, mo.q+1); t != nil {
			if m.PermutationP, err = run(t); err != nil {
				return err
			}
		}
		if f.form != "joint" {
			break
		}
		for _, tm := range f.terms {
			out := Term{Name: tm.name, Columns: tm.to - tm.from, VIF: f.vif(tm), PermutationP: nan}
			if t := newTermTest(terms, xz, tm.from+1, tm.to+1); t != nil {
				if out.PermutationP, err = run(t); err != nil {
					return err
				}
			}
			m.Terms = append(m.Terms, out)
		}
	case f.form == "floor_decay":
		d := f.cluster.(*decay)
		m.PermutationP, err = run(decayTest{d, d.vMean})
	case f.form == "broken_line":
		m.PermutationP, err = run(newBrokenTest(f.cluster.(*broken), false))
	case f.form == "theil_sen":
		m.PermutationP, err = run(newKendallTest(f, &s.t.cluster))
	default:
		m.PermutationP, err = run(newScoreTest(f, &s.t.cluster, quantileTau(f.form)))
	}
	return err
}

func (s *study) flips() int {
	return min(s.req.Permutations, max(MinPermutations, flipBudget/max(s.t.cluster.count(), 1)))
}

// vif is the largest variance inflation factor of a term's columns, 1/(1 - R2)
// of the column on all columns of the other terms.
func (f *fitted) vif(tm term) float64 {
	worst := 1.0
	for j := tm.from; j < tm.to; j++ {
		var others [][]float64
		for k, c := range f.cols {
			if k < tm.from || k >= tm.to {
				others = append(others, c)
			}
		}
		if len(others) == 0 {
			return 1
		}
		ls, err := FitLinear(others, f.cols[j])
		if err != nil {
			return nan
		}
		worst = math.Max(worst, 1/(1-ls.R2))
	}
	return worst
}

// akaikeWeights fills the weights where every fitted model has an AICc on one
// response scale; otherwise they stay unknown.
func akaikeWeights(models []Model) {
	if unlikeScales(models) {
		return
	}
	best := math.Inf(1)
	for _, m := range models {
		if finite(m.AICc) {
			best = math.Min(best, m.AICc)
		}
	}
	sum := 0.0
	for _, m := range models {
		if finite(m.AICc) {
			sum += math.Exp(-(m.AICc - best) / 2)
		}
	}
	for i := range models {
		if finite(models[i].AICc) {
			models[i].AkaikeWeight = math.Exp(-(models[i].AICc-best)/2) / sum
		}
	}
}

func unlikeScales(models []Model) bool {
	scale := ""
	for _, m := range models {
		if !finite(m.AICc) {
			continue
		}
		if scale != "" && m.Scale != scale {
			return true
		}
		scale = m.Scale
	}
	return false
}
