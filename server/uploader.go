package main

import (
	"context"
	"log/slog"
	"sync"

	"fathombend/catalogue"
)

// uploader checks files beside the requests, one at a time. What it has to do
// and how far it has come stands in the catalogue, so that a stop of the
// program loses nothing.
type uploader struct {
	store *catalogue.Store
	log   *slog.Logger
	ctx   context.Context
	stop  context.CancelFunc
	turn  chan struct{}
	wg    sync.WaitGroup

	mu      sync.Mutex
	running map[int64]context.CancelFunc
}

func newUploader(store *catalogue.Store, log *slog.Logger) *uploader {
	ctx, stop := context.WithCancel(context.Background())
	return &uploader{store: store, log: log, ctx: ctx, stop: stop, turn: make(chan struct{}, 1), running: map[int64]context.CancelFunc{}}
}

// resume takes up every check that a stop of the program cut off.
func (u *uploader) resume() {
	list, err := u.store.UnfinishedUploads(u.ctx)
	if err != nil {
		u.log.Error("unfinished checks of files could not be looked up", "err", err)
		return
	}
	for _, one := range list {
		u.run(one.ID)
	}
}

// halt stops all of them where they are and waits for that.
func (u *uploader) halt() {
	u.stop()
	u.wg.Wait()
}

// run takes one up; a check of the same file that still runs is ended first,
// since the file is read another way now.
func (u *uploader) run(id int64) {
	u.mu.Lock()
	defer u.mu.Unlock()
	if u.ctx.Err() != nil {
		return
	}
	if cancel := u.running[id]; cancel != nil {
		cancel()
	}
	ctx, cancel := context.WithCancel(u.ctx)
	u.running[id] = cancel
	u.wg.Go(func() {
		defer cancel()
		select {
		case u.turn <- struct{}{}:
			defer func() { <-u.turn }()
		case <-ctx.Done():
			return
		}
		if err := u.store.CheckUpload(ctx, id); err != nil && ctx.Err() == nil {
			u.log.Error("a file could not be checked", "upload", id, "err", err)
			if err := u.store.FailCheck(u.ctx, id); err != nil {
				u.log.Error("and that could not be noted", "upload", id, "err", err)
			}
		}
		u.mu.Lock()
		defer u.mu.Unlock()
		if ctx.Err() == nil {
			delete(u.running, id)
		}
	})
}

// end stops a check at once, if it runs.
func (u *uploader) end(id int64) {
	u.mu.Lock()
	defer u.mu.Unlock()
	if cancel := u.running[id]; cancel != nil {
		cancel()
		delete(u.running, id)
	}
}
