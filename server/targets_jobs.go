package main

import (
	"bytes"
	"compress/gzip"
	"context"
	"crypto/rand"
	"net/url"
	"strconv"
	"sync"
	"sync/atomic"
	"time"

	"fathombend/catalogue"
	"fathombend/views"
)

// Bounds of the files of targets answered for somebody who looks at a page
// meanwhile. Programs and the command line have none of them.
const (
	batchTargets = 10_000
	batchBytes   = 8 << 20          // of one file
	batchRunning = 4                // at once
	batchHeld    = 16               // running and waiting to be downloaded
	batchKept    = 10 * time.Minute // after an answer is there, or after the last look at one on its way
	batchShown   = 100              // rows without an answer that the page lists
)

// batches are the files of targets being answered. Targets are confidential:
// they stand in memory only, each under a key that cannot be guessed. The zero
// value is ready.
type batches struct {
	mu      sync.Mutex
	held    map[string]*batchJob
	sweeper *time.Timer
	halted  bool
	wg      sync.WaitGroup
	now     func() time.Time // nil = time.Now
}

// batchJob is one file of targets.
type batchJob struct {
	key      string
	settings url.Values // sent with the file
	all      int        // rows
	rows     atomic.Int64
	cancel   context.CancelFunc
	until    time.Time     // held no longer; guarded by batches.mu
	done     chan struct{} // closed when the fields below stand
	answers  []byte        // the answered file, gzip
	bad      int
	refused  []views.TargetRefusal // the first batchShown of them
	err      error
}

func (j *batchJob) finished() bool {
	select {
	case <-j.done:
		return true
	default:
		return false
	}
}

func (b *batches) time() time.Time {
	if b.now != nil {
		return b.now()
	}
	return time.Now()
}

// start answers a file of targets with all rows beside the request, on the rows
// of the catalogue that the asker sees, whom ctx knows.
func (b *batches) start(ctx context.Context, settings url.Values, all int, answer func(ctx context.Context, j *batchJob) error) (*batchJob, error) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.drop()
	running := 0
	for _, j := range b.held {
		if !j.finished() {
			running++
		}
	}
	if running >= batchRunning || len(b.held) >= batchHeld || b.halted {
		return nil, &catalogue.Error{Code: catalogue.Unavailable, Message: "Other files of targets are being answered or wait to be downloaded: " +
			strconv.Itoa(batchRunning) + " are answered at once, " + strconv.Itoa(batchHeld) + " held", Expected: "a minute of patience, or the command line"}
	}
	ctx, cancel := context.WithCancel(context.WithoutCancel(ctx))
	j := &batchJob{key: rand.Text(), settings: settings, all: all, cancel: cancel, done: make(chan struct{}), until: b.time().Add(batchKept)}
	if b.held == nil {
		b.held = map[string]*batchJob{}
	}
	b.held[j.key] = j
	if b.sweeper == nil {
		b.sweeper = time.AfterFunc(batchKept/10, b.sweep)
	}
	b.wg.Go(func() {
		defer cancel()
		j.err = answer(ctx, j)
		b.mu.Lock()
		defer b.mu.Unlock()
		j.until = b.time().Add(batchKept)
		close(j.done)
	})
	return j, nil
}

// find gives the file under a key; nil when it is forgotten or never was. One
// on its way is kept as long as somebody asks for it.
func (b *batches) find(key string) *batchJob {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.drop()
	j := b.held[key]
	if j != nil && !j.finished() {
		j.until = b.time().Add(batchKept)
	}
	return j
}

// forget ends a file that is on its way, and drops it.
func (b *batches) forget(j *batchJob) {
	j.cancel()
	b.mu.Lock()
	defer b.mu.Unlock()
	delete(b.held, j.key)
}

// drop forgets what has had its time. b.mu is held.
func (b *batches) drop() {
	now := b.time()
	for key, j := range b.held {
		if !now.Before(j.until) {
			j.cancel()
			delete(b.held, key)
		}
	}
}

// sweep drops what nobody comes back for.
func (b *batches) sweep() {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.drop()
	b.sweeper = nil
	if len(b.held) > 0 && !b.halted {
		b.sweeper = time.AfterFunc(batchKept/10, b.sweep)
	}
}

// halt ends all of them and waits for that.
func (b *batches) halt() {
	b.mu.Lock()
	b.halted = true
	for key, j := range b.held {
		j.cancel()
		delete(b.held, key)
	}
	b.mu.Unlock()
	b.wg.Wait()
}

// countTargets reads a file of targets to its end, so that one that is no table
// is refused before anything is answered.
func countTargets(file []byte) (int, error) {
	r := targetReader(bytes.NewReader(file))
	if err := (&batch{}).readHeader(r); err != nil {
		return 0, err
	}
	n := 0
	for {
		more, err := readTarget(r)
		if err != nil {
			return n, err
		}
		if more == nil {
			break
		}
		n++
	}
	switch {
	case n == 0:
		return n, badTable("The file of targets has no rows below its header. Expected one row a target")
	case n > batchTargets:
		return n, badTable("The file holds " + strconv.Itoa(n) + " targets. Expected at most " + strconv.Itoa(batchTargets) +
			"; split it, or answer it with the command line, which has no limit")
	}
	return n, nil
}

// answerInto answers the file for j.
func (j *batchJob) answerInto(ctx context.Context, file []byte, base url.Values, fits fitter) error {
	var out bytes.Buffer
	z, err := gzip.NewWriterLevel(&out, gzip.BestSpeed) // the cautions stand in every row
	if err != nil {
		return err
	}
	n, err := answerTargets(ctx, bytes.NewReader(file), z, base, fits, batchWatch{
		progress: func(rows int) { j.rows.Store(int64(rows)) },
		refused: func(r views.TargetRefusal) {
			if len(j.refused) < batchShown {
				j.refused = append(j.refused, r)
			}
		},
	})
	if err != nil {
		return err
	}
	if err := z.Close(); err != nil {
		return err
	}
	j.answers, j.bad = out.Bytes(), n.Bad
	return nil
}
