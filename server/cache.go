package main

import (
	"context"
	"sync"

	"fathombend/catalogue"
)

// cache keeps the newest answers by key; equal questions asked at the same
// time are computed once. Keys hold the catalogue revision, so nothing in it
// is ever stale.
type cache struct {
	mu    sync.Mutex
	limit int
	order []string
	held  map[string]*cached
	heavy []string // keys of answers that weigh, newest last
}

// mostHeavy is how many answers that weigh are kept.
const mostHeavy = 2

type cached struct {
	done  chan struct{}
	value any
	err   error
}

func newCache(limit int) *cache { return &cache{limit: limit, held: map[string]*cached{}} }

// do returns the value under key, computing it if needed. What one person sees
// beside everybody is kept under a key of that person's own. The computation is
// not cancelled when the first asker leaves, since others may wait for it.
func (c *cache) do(ctx context.Context, key string, compute func(context.Context) (any, error)) (any, error) {
	key = catalogue.ViewKey(ctx) + key
	c.mu.Lock()
	e, ok := c.held[key]
	if !ok {
		e = &cached{done: make(chan struct{})}
		c.held[key] = e
		c.order = append(c.order, key)
		if len(c.order) > c.limit {
			delete(c.held, c.order[0])
			c.order = c.order[1:]
		}
		c.mu.Unlock()
		e.value, e.err = compute(context.WithoutCancel(ctx))
		close(e.done)
		switch {
		case e.err != nil:
			c.forget(key, e)
		case weighs(e.value):
			c.keepHeavy(key)
		}
		return e.value, e.err
	}
	c.mu.Unlock()
	select {
	case <-e.done:
		return e.value, e.err
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

func (c *cache) forget(key string, e *cached) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.held[key] == e {
		delete(c.held, key)
	}
}

// keepHeavy notes an answer that weighs and lets the oldest of too many go.
func (c *cache) keepHeavy(key string) {
	c.mu.Lock()
	defer c.mu.Unlock()
	if c.heavy = append(c.heavy, key); len(c.heavy) > mostHeavy {
		delete(c.held, c.heavy[0])
		c.heavy = c.heavy[1:]
	}
}
