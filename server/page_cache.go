package main

import (
	"net/http"
	"strings"
	"sync"

	"github.com/labstack/echo/v4"
)

// Bounds of the finished answers that are held, bytes.
const (
	heldAnswers   = 32 << 20
	largestAnswer = 1 << 20
)

// answers holds finished answers for signed-out readers by their tag, which
// names the program, the state of the catalogue and the address: nothing in it
// is ever stale. The oldest give way.
type answers struct {
	mu    sync.Mutex
	bytes int
	held  map[string]*finished
	order []string
}

// finished is one answer as it was sent.
type finished struct {
	header http.Header
	body   []byte
}

func newAnswers() *answers { return &answers{held: map[string]*finished{}} }

func (s *answers) get(key string) *finished {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.held[key]
}

func (s *answers) put(key string, f *finished) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.held[key] != nil {
		return
	}
	s.held[key] = f
	s.order = append(s.order, key)
	for s.bytes += len(f.body); s.bytes > heldAnswers; s.order = s.order[1:] {
		s.bytes -= len(s.held[s.order[0]].body)
		delete(s.held, s.order[0])
	}
}

// keepable leaves out the answers about targets: that one was asked for before
// must not show in how fast it comes.
func keepable(c echo.Context) bool {
	return c.Request().Method == http.MethodGet && !strings.Contains(routeOf(c), "expectation")
}

// answerKey tells the compressed answer from the plain one.
func answerKey(tag string, r *http.Request) string {
	if strings.Contains(r.Header.Get("Accept-Encoding"), "gzip") {
		return tag + "gzip"
	}
	return tag
}

// replay sends a finished answer again.
func (f *finished) replay(c echo.Context) error {
	h := c.Response().Header()
	for name, values := range f.header {
		h[name] = append([]string(nil), values...)
	}
	c.Response().WriteHeader(http.StatusOK)
	_, err := c.Response().Write(f.body)
	return err
}

// recorder notes an answer while it is sent.
type recorder struct {
	http.ResponseWriter
	header http.Header // nil: not an answer to keep
	body   []byte
}

func (r *recorder) WriteHeader(status int) {
	if h := r.Header(); status == http.StatusOK && h.Get("Etag") != "" && h.Get("Set-Cookie") == "" {
		r.header = h.Clone()
		r.header.Del(echo.HeaderXRequestID) // belongs to the request, not to the answer
	}
	r.ResponseWriter.WriteHeader(status)
}

func (r *recorder) Write(b []byte) (int, error) {
	if r.header != nil {
		if len(r.body)+len(b) > largestAnswer {
			r.header, r.body = nil, nil
		} else {
			r.body = append(r.body, b...)
		}
	}
	return r.ResponseWriter.Write(b)
}

// Flush serves streamed answers.
func (r *recorder) Flush() {
	if f, ok := r.ResponseWriter.(http.Flusher); ok {
		f.Flush()
	}
}

// Unwrap lets http.ResponseController find the writer below.
func (r *recorder) Unwrap() http.ResponseWriter { return r.ResponseWriter }

// recorded runs next and keeps its answer under key when all of it was sent.
func (a *App) recorded(c echo.Context, key string, next echo.HandlerFunc) error {
	under := c.Response().Writer
	rec := &recorder{ResponseWriter: under}
	c.Response().Writer = rec
	err := next(c)
	c.Response().Writer = under
	if err == nil && rec.header != nil {
		a.answers.put(key, &finished{rec.header, rec.body})
	}
	return err
}
