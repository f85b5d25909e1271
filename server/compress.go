package main

import (
	"compress/gzip"
	"io"
	"net/http"
	"strings"
	"sync"

	"github.com/labstack/echo/v4"
)

// compressed answers in gzip where the asker takes it and the content is text
// to be shown. Downloads stay as they are: a compressed answer breaks ranges.
func compressed(next echo.HandlerFunc) echo.HandlerFunc {
	return func(c echo.Context) error {
		c.Response().Header().Add("Vary", "Accept-Encoding")
		if c.Request().Method == http.MethodHead || !strings.Contains(c.Request().Header.Get("Accept-Encoding"), "gzip") {
			return next(c)
		}
		plain := c.Response().Writer
		w := &gzipWriter{ResponseWriter: plain}
		c.Response().Writer = w
		defer func() {
			w.close()
			c.Response().Writer = plain
		}()
		return next(c)
	}
}

var gzipWriters = sync.Pool{New: func() any {
	z, _ := gzip.NewWriterLevel(io.Discard, 5)
	return z
}}

// gzipWriter decides at the header whether to compress.
type gzipWriter struct {
	http.ResponseWriter
	z       *gzip.Writer // nil = plain
	decided bool
}

func (w *gzipWriter) WriteHeader(status int) {
	if !w.decided {
		w.decided = true
		h := w.Header()
		if status >= 200 && status != http.StatusNoContent && status != http.StatusNotModified && compressible(h) {
			h.Set("Content-Encoding", "gzip")
			h.Del("Content-Length")
			w.z = gzipWriters.Get().(*gzip.Writer)
			w.z.Reset(w.ResponseWriter)
		}
	}
	w.ResponseWriter.WriteHeader(status)
}

func compressible(h http.Header) bool {
	if h.Get("Content-Encoding") != "" || h.Get("Content-Disposition") != "" {
		return false
	}
	t, _, _ := strings.Cut(h.Get("Content-Type"), ";")
	switch t {
	case "text/html", "text/css", "text/javascript", "application/javascript", "image/svg+xml",
		"application/json", "application/problem+json", "application/geo+json":
		return true
	}
	return false
}

func (w *gzipWriter) Write(b []byte) (int, error) {
	if !w.decided {
		w.WriteHeader(http.StatusOK)
	}
	if w.z != nil {
		return w.z.Write(b)
	}
	return w.ResponseWriter.Write(b)
}

// Flush serves streamed answers.
func (w *gzipWriter) Flush() {
	if w.z != nil {
		w.z.Flush()
	}
	if f, ok := w.ResponseWriter.(http.Flusher); ok {
		f.Flush()
	}
}

// Unwrap lets http.ResponseController find the writer below.
func (w *gzipWriter) Unwrap() http.ResponseWriter { return w.ResponseWriter }

func (w *gzipWriter) close() {
	if w.z != nil {
		w.z.Close()
		gzipWriters.Put(w.z)
		w.z = nil
	}
}
