package stats

import (
	"context"
	"math/bits"
	"math/rand/v2"
	"sync"
	"sync/atomic"
)

// replicates holds what every estimator gave on every resample.
type replicates struct {
	n     int
	width []int
	val   [][]float64 // by estimator, n x width
	ok    [][]bool
	done  []int // by estimator, how many resamples it was given
}

// job is one estimator in a resampling run.
type job struct {
	est estimator
	se  bool
	max int // at most so many resamples (0 = all)
}

// sampler draws whole groups with replacement. Resample i has a stream of its
// own, PCG(seed, i): what it draws depends neither on the worker nor on the
// resamples before it.
type sampler struct {
	pcg    rand.PCG
	seed   uint64
	counts []float64
	d      *draw
}

func newSampler(groups int, seed uint64) *sampler {
	return &sampler{seed: seed, counts: make([]float64, groups), d: newDraw(groups)}
}

func (s *sampler) draw(i int) *draw {
	s.pcg.Seed(s.seed, uint64(i))
	clear(s.counts)
	g := uint64(len(s.counts))
	for range s.counts {
		// Multiply-high keeps the bias below groups/2^64.
		k, _ := bits.Mul64(s.pcg.Uint64(), g)
		s.counts[k]++
	}
	s.d.id, s.d.wt = s.d.id[:0], s.d.wt[:0]
	for k, c := range s.counts {
		if c > 0 {
			s.d.id, s.d.wt = append(s.d.id, int32(k)), append(s.d.wt, c)
		}
	}
	s.d.size, s.d.index = float64(g), i
	return s.d
}

// block is how many resamples a worker takes at a time, and how often it looks
// whether it was cancelled.
const block = 64

// bootstrap refits every job on n resamples of whole groups (Efron & Tibshirani,
// An Introduction to the Bootstrap (1993), ch. 8).
func bootstrap(ctx context.Context, groups, n int, seed uint64, workers int, jobs []job, progress func(float64)) (*replicates, error) {
	r := &replicates{n: n}
	for _, j := range jobs {
		_, w := j.est.shape()
		r.width, r.val, r.ok = append(r.width, w), append(r.val, make([]float64, n*w)), append(r.ok, make([]bool, n))
		done := n
		if j.max > 0 {
			done = min(n, j.max)
		}
		r.done = append(r.done, done)
	}
	err := inBlocks(ctx, n, workers, progress, func() func(i int) {
		s := newSampler(groups, seed)
		fits := make([]fitter, len(jobs))
		for e, j := range jobs {
			fits[e] = j.est.worker()
		}
		return func(i int) {
			d := s.draw(i)
			for e, j := range jobs {
				if i < r.done[e] {
					w := r.width[e]
					r.ok[e][i] = fits[e](d, r.val[e][i*w:(i+1)*w:(i+1)*w], j.se)
				}
			}
		}
	})
	return r, err
}

// inBlocks calls work(0..n-1) on several goroutines, each with its own closure,
// until done or cancelled.
func inBlocks(ctx context.Context, n, workers int, progress func(float64), newWork func() func(i int)) error {
	var next atomic.Int64
	var mu sync.Mutex
	run := func() {
		work := newWork()
		for ctx.Err() == nil {
			from := int(next.Add(block)) - block
			if from >= n {
				return
			}
			to := min(from+block, n)
			for i := from; i < to; i++ {
				work(i)
			}
			if progress != nil {
				mu.Lock()
				progress(float64(to) / float64(n))
				mu.Unlock()
			}
		}
	}
	var wg sync.WaitGroup
	for range min(max(workers, 1), (n+block-1)/block) - 1 {
		wg.Go(run)
	}
	run()
	wg.Wait()
	return ctx.Err()
}

// column copies statistic k of estimator e from the resamples that could be
// fitted; values that are not finite are left out.
func (r *replicates) column(e, k int) []float64 {
	w := r.width[e]
	out := make([]float64, 0, r.done[e])
	for i := range r.done[e] {
		if v := r.val[e][i*w+k]; r.ok[e][i] && finite(v) {
			out = append(out, v)
		}
	}
	return out
}

// degenerate counts the resamples on which the estimator could not be fitted.
func (r *replicates) degenerate(e int) int {
	n := 0
	for _, ok := range r.ok[e][:r.done[e]] {
		if !ok {
			n++
		}
	}
	return n
}

// jackknife refits an estimator without each group in turn: row g of the
// result is what fit wrote, or NaN where it could not be fitted.
func jackknife(est estimator, groups int) [][]float64 {
	_, w := est.shape()
	fit, d := est.worker(), newDraw(groups)
	d.without(groups, -1)
	last := groups - 1
	d.wt, d.size = d.wt[:last], float64(last)
	all := d.id
	out := make([][]float64, groups)
	flat := make([]float64, groups*w)
	for g := range out {
		out[g] = flat[g*w : (g+1)*w : (g+1)*w]
		// The group left out changes places with the last one for this fit.
		all[g], all[last] = all[last], all[g]
		d.id = all[:last]
		ok := fit(d, out[g], false)
		for k, v := range out[g] {
			if !ok || !finite(v) {
				out[g][k] = nan
			}
		}
		all[g], all[last] = all[last], all[g]
	}
	return out
}
