package main

import (
	"sync"
	"time"
)

// throttle counts failures by key and refuses once there were too many within
// the window. It forgets by itself and never holds more than limit keys, so
// that guessing names cannot fill the memory.
type throttle struct {
	mu     sync.Mutex
	most   int           // failures allowed within the window
	window time.Duration // counted from the first failure
	limit  int
	seen   map[string]*failures
	now    func() time.Time
}

type failures struct {
	n     int
	since time.Time
}

func newThrottle(most int, window time.Duration) *throttle {
	return &throttle{most: most, window: window, limit: 10_000, seen: map[string]*failures{}, now: time.Now}
}

// wait is how long the key must wait; 0 = go ahead.
func (t *throttle) wait(key string) time.Duration {
	t.mu.Lock()
	defer t.mu.Unlock()
	f := t.seen[key]
	if f == nil || f.n < t.most {
		return 0
	}
	left := f.since.Add(t.window).Sub(t.now())
	if left <= 0 {
		delete(t.seen, key)
		return 0
	}
	return left
}

func (t *throttle) fail(key string) {
	t.mu.Lock()
	defer t.mu.Unlock()
	now := t.now()
	f := t.seen[key]
	if f == nil || now.Sub(f.since) >= t.window {
		if len(t.seen) >= t.limit {
			t.sweep(now)
		}
		f = &failures{since: now}
		t.seen[key] = f
	}
	f.n++
}

func (t *throttle) clear(key string) {
	t.mu.Lock()
	defer t.mu.Unlock()
	delete(t.seen, key)
}

// sweep drops what has run out, and when that is nothing, any one key: being
// guessed at by ten thousand addresses must not lock everybody out.
func (t *throttle) sweep(now time.Time) {
	for k, f := range t.seen {
		if now.Sub(f.since) >= t.window {
			delete(t.seen, k)
		}
	}
	for k := range t.seen {
		if len(t.seen) < t.limit {
			return
		}
		delete(t.seen, k)
	}
}
