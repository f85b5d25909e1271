package main

import (
	"context"
	"errors"
	"io"
	"log/slog"
	"net/http"
	"net/http/httptest"
	"path/filepath"
	"strings"
	"testing"

	"fathombend/catalogue"
)

// largeApp serves an invented catalogue that counts as a large one.
func largeApp(t *testing.T) *App {
	t.Helper()
	file := filepath.Join(t.TempDir(), "c.db")
	mustRun(t, "", "invent", "-catalogue", file, "-systems", "150")
	store, err := catalogue.Open(t.Context(), file, catalogue.Options{ReadOnly: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { store.Close() })
	a := newApp(store, slog.New(slog.NewTextHandler(io.Discard, nil)), true)
	a.large = 100
	return a
}

// The opening page of a large catalogue comes without its answer until that is
// computed, says so, and is kept by nobody meanwhile.
func TestOpeningPageOfALargeCatalogue(t *testing.T) {
	a := largeApp(t)
	router := a.router()
	get := func() *httptest.ResponseRecorder {
		w := httptest.NewRecorder()
		router.ServeHTTP(w, httptest.NewRequest(http.MethodGet, "/", nil))
		return w
	}
	a.gate <- struct{}{} // another fit is at work
	w := get()
	if w.Code != http.StatusAccepted || w.Header().Get("Refresh") == "" || w.Header().Get("Cache-Control") != "no-store" || w.Header().Get("ETag") != "" {
		t.Errorf("without its answer the page comes with %d and %v", w.Code, w.Header())
	}
	if body := w.Body.String(); !strings.Contains(body, "The answer from 150 systems is being computed") || !strings.Contains(body, `class="ribbon`) {
		t.Error("the page does not say that its answer is being computed, or is not drawn")
	}
	<-a.gate
	m, err := a.meridianAnswer(t.Context(), catalogue.Filter{})
	if err != nil || m.Headline == "" || len(m.Expected) == 0 || m.Working {
		t.Fatalf("%+v, %v", m, err)
	}
	w = get()
	if body := w.Body.String(); w.Code != http.StatusOK || w.Header().Get("ETag") == "" || strings.Contains(body, "is being computed") {
		t.Errorf("with its answer the page comes with %d and %v", w.Code, w.Header())
	}
}

// What waits for its turn can be cancelled, and the gate is free afterwards.
func TestFitsOfALargeCatalogueWaitForEachOther(t *testing.T) {
	a := largeApp(t)
	leave, err := a.enter(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := a.enter(ctx); !errors.Is(err, context.Canceled) {
		t.Errorf("a second one got in, or %v", err)
	}
	leave()
	again, err := a.enter(t.Context())
	if err != nil {
		t.Fatal(err)
	}
	again()
	a.large = 1_000_000
	for range 3 {
		if _, err := a.enter(t.Context()); err != nil {
			t.Error(err)
		}
	}
}

// Of answers that hold very many rows only the newest are kept.
func TestHeavyAnswersGiveWay(t *testing.T) {
	c := newCache(100)
	computed := 0
	ask := func(key string) {
		_, _ = c.do(t.Context(), key, func(context.Context) (any, error) {
			computed++
			return &chartAnswer{rows: make([]catalogue.Row, largeRows+1)}, nil
		})
	}
	for _, key := range []string{"a", "b", "c", "d"} {
		ask(key)
	}
	ask("d")
	ask("c")
	if computed != 4 {
		t.Errorf("%d computed, want 4: the newest are kept", computed)
	}
	if ask("a"); computed != 5 {
		t.Errorf("the oldest was kept: %d computed", computed)
	}
}
