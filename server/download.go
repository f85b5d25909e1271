package main

import (
	"context"
	"net/http"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// baseAddress is how the reader reached this program, without a path: for
// addresses that must work outside of a page.
func (a *App) baseAddress(c echo.Context) string {
	scheme := "http"
	if a.secure {
		scheme = "https"
	}
	return scheme + "://" + c.Request().Host
}

// modified is when the rows of a release, or of the catalogue as it is, last
// changed.
func (a *App) modified(ctx context.Context, release string) (time.Time, error) {
	if release == "" {
		return a.store.LastChange(ctx)
	}
	r, err := a.store.Release(ctx, release)
	if err != nil {
		return time.Time{}, err
	}
	return r.At, nil
}

// download prepares the answer to a file that is streamed: its headers, and
// Last-Modified beside the ETag that every answer has. done says that the
// answer is complete: HEAD, or the reader has the file already.
func (a *App) download(c echo.Context, kind, name, release string) (done bool, err error) {
	at, err := a.modified(c.Request().Context(), release)
	if err != nil {
		return false, err
	}
	h := c.Response().Header()
	// A second in which more may still change dates nothing, and private rows
	// change by a clock of their own.
	if !at.IsZero() && time.Since(at) > 2*time.Second && !catalogue.SeesPrivate(c.Request().Context()) {
		h.Set(echo.HeaderLastModified, at.UTC().Format(http.TimeFormat))
		since, err := http.ParseTime(c.Request().Header.Get(echo.HeaderIfModifiedSince))
		if err == nil && c.Request().Header.Get("If-None-Match") == "" && !at.Truncate(time.Second).After(since) {
			return true, c.NoContent(http.StatusNotModified)
		}
	}
	h.Set(echo.HeaderContentType, kind)
	if name != "" {
		h.Set(echo.HeaderContentDisposition, `attachment; filename="`+name+`"`)
	}
	if c.Request().Method == http.MethodHead {
		return true, c.NoContent(http.StatusOK)
	}
	return false, nil
}

// stream runs write with a writer whose time limit starts anew with every
// megabyte, so that a large file to a slow reader is not cut. A failure before
// the first byte is answered as one; later the connection is cut, so that half
// a file never looks like a whole one.
func (a *App) stream(c echo.Context, write func(w *patientWriter) error) error {
	w := &patientWriter{to: c.Response(), control: http.NewResponseController(c.Response())}
	err := write(w)
	if err == nil {
		return nil
	}
	if c.Response().Committed {
		if c.Request().Context().Err() == nil {
			a.log.Error("a download broke off", "route", c.Path(), "request_id", requestID(c), "err", err)
		}
		panic(http.ErrAbortHandler)
	}
	h := c.Response().Header()
	for _, name := range []string{echo.HeaderContentDisposition, echo.HeaderLastModified, echo.HeaderContentLength, "Repr-Digest"} {
		h.Del(name)
	}
	return err
}

// megabyteTime is how long a reader may take for a megabyte.
const megabyteTime = 2 * time.Minute

type patientWriter struct {
	to      http.ResponseWriter
	control *http.ResponseController
	since   int
}

func (w *patientWriter) Write(b []byte) (int, error) {
	if w.since == 0 || w.since > 1<<20 {
		_ = w.control.SetWriteDeadline(time.Now().Add(megabyteTime)) // not every writer has one
		w.since = 1
	}
	n, err := w.to.Write(b)
	w.since += n
	return n, err
}

// fileName is a name for a downloaded file: what, and the release.
func fileName(what, release, suffix string) string {
	name := "fathombend-" + what
	if release != "" {
		name += "-" + release
	}
	return name + suffix
}

// splitSuffix takes one of the suffixes off a path parameter.
func splitSuffix(name string, suffixes ...string) (stem, suffix string) {
	for _, s := range suffixes {
		if stem, ok := strings.CutSuffix(name, s); ok {
			return stem, s
		}
	}
	return name, ""
}

func itoa(n int) string { return strconv.Itoa(n) }
