package main

import (
	"crypto/rand"
	"crypto/sha256"
	"net/url"
	"slices"
	"sync"
)

// formBook remembers which record each filling-in of a form made, so that a
// form sent twice makes one record, and one sent again with other content
// changes the record it made.
type formBook struct {
	mu    sync.Mutex
	limit int
	held  map[string]*formEntry
	order []string
}

type formEntry struct {
	mu      sync.Mutex
	id      int64
	content [sha256.Size]byte
}

func newFormBook() *formBook { return &formBook{limit: 10_000, held: map[string]*formEntry{}} }

// newFormToken names one filling-in of a form.
func newFormToken() string { return rand.Text() }

func (b *formBook) entry(key string) *formEntry {
	b.mu.Lock()
	defer b.mu.Unlock()
	if e, ok := b.held[key]; ok {
		return e
	}
	if len(b.order) >= b.limit {
		delete(b.held, b.order[0])
		b.order = b.order[1:]
	}
	e := &formEntry{}
	b.held[key] = e
	b.order = append(b.order, key)
	return e
}

// once runs make for the form named key with this content, unless it ran
// already: then it returns what that made. made is the record an earlier
// sending made, 0 if none. Sendings of one form wait for each other. A form
// without a name, as a script may send it, is always a new one.
func (b *formBook) once(key string, content [sha256.Size]byte, make func(made int64) (int64, error)) (int64, error) {
	if key == "" {
		return make(0)
	}
	e := b.entry(key)
	e.mu.Lock()
	defer e.mu.Unlock()
	if e.id != 0 && e.content == content {
		return e.id, nil
	}
	id, err := make(e.id)
	if err == nil {
		e.id, e.content = id, content
	}
	return id, err
}

// contentOf is a digest of what a form holds.
func contentOf(form url.Values) (sum [sha256.Size]byte) {
	h := sha256.New()
	names := make([]string, 0, len(form))
	for name := range form {
		names = append(names, name)
	}
	slices.Sort(names)
	for _, name := range names {
		for _, v := range form[name] {
			h.Write([]byte(name + "\x00" + v + "\x00"))
		}
	}
	copy(sum[:], h.Sum(nil))
	return sum
}
