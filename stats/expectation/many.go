package expectation

import (
	"context"
	"runtime"
	"sync"
	"sync/atomic"
)

// Answer is the answer to one of many targets: a result, or why there is none.
type Answer struct {
	Result *Result
	Err    error
}

// ExpectMany answers many targets with the same fits, in the order given. No
// number depends on workers (0 = all cores). progress, if not nil, is called
// now and then with the number of targets done, from any goroutine. When ctx
// ends, the answers that are missing carry its error.
func (f *Fits) ExpectMany(ctx context.Context, targets []Target, workers int, progress func(done int)) []Answer {
	out := make([]Answer, len(targets))
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	var next, done atomic.Int64
	var wg sync.WaitGroup
	for range min(workers, len(targets)) {
		wg.Go(func() {
			for {
				i := int(next.Add(1)) - 1
				if i >= len(targets) {
					return
				}
				out[i].Result, out[i].Err = f.Expect(ctx, targets[i])
				if n := int(done.Add(1)); progress != nil && (n%64 == 0 || n == len(targets)) {
					progress(n)
				}
			}
		})
	}
	wg.Wait()
	return out
}
