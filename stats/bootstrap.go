package stats

import (
	"context"
	"math/rand/v2"
	"slices"
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
	counts []int32
	d      *draw
}

func newSampler(groups int, seed uint64) *sampler {
	return &sampler{seed: seed, counts: make([]int32, groups), d: newDraw(groups)}
}

func (s *sampler) draw(i int) *draw {
	s.pcg.Seed(s.seed, uint64(i))
	clear(s.counts)
	g := uint64(len(s.counts))
	// Two draws from one number: the high halves of 32 bits times g. The bias is
	// below groups/2^32.
	for range len(s.counts) / 2 {
		u := s.pcg.Uint64()
		s.counts[u>>32*g>>32]++
		s.counts[u&0xffffffff*g>>32]++
	}
	if g%2 == 1 {
		s.counts[s.pcg.Uint64()>>32*g>>32]++
	}
	// Without a branch, as no processor can foresee which groups are in.
	id, wt, n := s.d.id[:g], s.d.wt[:g], 0
	for k, c := range s.counts {
		id[n], wt[n] = int32(k), float64(c)
		n += int(uint32(-c) >> 31)
	}
	s.d.id, s.d.wt = id[:n], wt[:n]
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

// mostLeftOut is how many groups are left out one by one. More are left out in
// blocks of neighbours, the fewer the more groups there are, as every fit costs
// all groups.
const (
	mostLeftOut = 2500
	leastBlocks = 100
)

// jackknife refits an estimator without each group in turn: row g of the
// result is what fit wrote, or NaN where it could not be fitted. With more than
// mostLeftOut groups the groups of a block share the fit without the block.
func jackknife(est estimator, groups int) [][]float64 {
	_, w := est.shape()
	blocks := groups
	if groups > mostLeftOut {
		blocks = max(leastBlocks, mostLeftOut*mostLeftOut/groups)
	}
	fit, d := est.worker(), newDraw(groups)
	out, flat := make([][]float64, groups), make([]float64, blocks*w)
	d.without(groups, -1)
	all, wt := slices.Clone(d.id), d.wt
	for b := range blocks {
		from, to := b*groups/blocks, (b+1)*groups/blocks
		kept := groups - (to - from)
		d.id = d.id[:groups]
		copy(d.id[:from], all)
		copy(d.id[from:kept], all[to:])
		d.id, d.wt, d.size = d.id[:kept], wt[:kept], float64(kept)
		v := flat[b*w : (b+1)*w : (b+1)*w]
		ok := fit(d, v, false)
		for k, x := range v {
			if !ok || !finite(x) {
				v[k] = nan
			}
		}
		for g := from; g < to; g++ {
			out[g] = v
		}
	}
	return out
}

// influenceRows is how many resamples a row must have behind it before its
// influence is read off the resamples.
const influenceRows = 20

// regressionInfluence is the influence of every group on the first cols
// statistics of estimator e, by regression of the replicates on how often each
// group was drawn (Davison & Hinkley, Bootstrap Methods and their Application
// (1997), section 2.7.4). It is what BCa takes for single rows, as R's boot.ci
// does; the sign is that of leave-one-out values, so that acceleration reads
// both. The frequencies are drawn anew from their streams. Their covariance is
// that of the multinomial, so the regression is the covariance with each of them.
func (r *replicates) regressionInfluence(e, groups, cols int, seed uint64) [][]float64 {
	s, w := newSampler(groups, seed), r.width[e]
	mean, n := make([]float64, cols), 0.0
	usable := func(v []float64) bool {
		for _, x := range v {
			if !finite(x) {
				return false
			}
		}
		return true
	}
	for i := range r.done[e] {
		if v := r.val[e][i*w : i*w+cols]; r.ok[e][i] && usable(v) {
			axpy(1, v, mean)
			n++
		}
	}
	flat, out := make([]float64, groups*cols), make([][]float64, groups)
	for g := range out {
		out[g] = flat[g*cols : (g+1)*cols]
	}
	d := make([]float64, cols)
	for i := range r.done[e] {
		v := r.val[e][i*w : i*w+cols]
		if !r.ok[e][i] || !usable(v) {
			continue
		}
		for k := range d {
			d[k] = mean[k]/n - v[k]
		}
		dr := s.draw(i)
		for k, g := range dr.id {
			axpy(dr.wt[k], d, out[g])
		}
	}
	return out
}
