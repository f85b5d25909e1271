package stats

import (
	"context"

	"gonum.org/v1/gonum/stat/distuv"
)

// rowBudget and workBudget keep long work within bounds; what is cut is said.
const (
	rowBudget   = 2_000_000   // rows x resamples of the row bootstrap shown beside
	rowMost     = 3999        // resamples of it
	flipBudget  = 2_000_000   // clusters x sign flips of one test
	backBudget  = 20_000_000  // rows x resamples of a transformed response, or of a form without cross-products
	noiseBudget = 2_000_000   // rows x resamples with errors of measurement
	pairBudget  = 400_000_000 // pairs x resamples (or flips) of Theil-Sen
	drawBudget  = 100_000_000 // clusters x resamples
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
	asked = min(asked, max(999, drawBudget/max(f.t.cluster.count(), 1)))
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
	resamples := min(s.req.Resamples, rowMost, rowBudget/max(n, 1))
	if s.t.cluster.count() == n {
		return nil
	}
	if resamples < MinResamples {
		s.rowErrors()
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

// rowErrors stands in for the row bootstrap where rows are very many: the
// normal interval with the error HC1, to which it tends.
func (s *study) rowErrors() {
	single := singles(s.t.n())
	z := distuv.UnitNormal.Quantile((1 + s.req.Level) / 2)
	d := newDraw(s.t.n())
	d.without(s.t.n(), -1)
	for _, f := range s.models {
		if f.failure != "" || f.robust == nil {
			continue
		}
		e := f.compile(&single)
		_, w := e.shape()
		out := make([]float64, w)
		if !e.worker()(d, out, true) {
			continue
		}
		for j, b := range f.coef {
			se := out[len(f.coef)+1+j]
			f.rowIntervals = append(f.rowIntervals, Interval{b - z*se, b + z*se})
		}
	}
}
