package main

import (
	"bytes"
	"context"
	"errors"
	"log/slog"
	"net/http"
	"reflect"
	"time"

	"github.com/alexedwards/scs/v2"
	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// idleStep is how much of the idle time may pass before a session that did not
// change is written again: reading pages signed in must not write the file at
// every request.
const idleStep = time.Hour

// commit writes a session. One that holds what is stored already is left alone
// within idleStep; when the disk refuses, only a change of who is signed in
// fails the request: a signed-in person can go on reading on a full disk.
func (s sessionStore) commit(ctx context.Context, token string, data []byte, expiry time.Time) error {
	stored, found, err := s.store.SessionFind(ctx, token)
	if err != nil {
		return err
	}
	var values, before map[string]any
	if found {
		values, before = sessionValues(data), sessionValues(stored)
		written, _ := before[sessionWritten].(int64)
		delete(before, sessionWritten)
		if reflect.DeepEqual(values, before) && time.Since(time.Unix(written, 0)) < idleStep {
			return nil
		}
	}
	if data, err = withWritten(data); err != nil {
		return err
	}
	err = s.store.SessionCommit(ctx, token, data, expiry)
	if found && catalogue.CodeOf(err) == catalogue.Unavailable && values[sessionAccount] == before[sessionAccount] {
		s.log.Warn("a session could not be refreshed", "err", err)
		return nil
	}
	return err
}

// sessionWritten is the time of the last writing, Unix seconds. It stands only
// in the stored form.
const sessionWritten = "written"

func sessionValues(data []byte) map[string]any {
	_, values, err := scs.GobCodec{}.Decode(data)
	if err != nil {
		return nil
	}
	return values
}

func withWritten(data []byte) ([]byte, error) {
	deadline, values, err := scs.GobCodec{}.Decode(data)
	if err != nil {
		return nil, err
	}
	values[sessionWritten] = time.Now().Unix()
	return scs.GobCodec{}.Encode(deadline, values)
}

// withoutWritten is the stored form as the session manager wrote it.
func withoutWritten(data []byte) ([]byte, error) {
	deadline, values, err := scs.GobCodec{}.Decode(data)
	if err != nil {
		return nil, err
	}
	delete(values, sessionWritten)
	return scs.GobCodec{}.Encode(deadline, values)
}

// failureLevel is how loud a failed request is logged: one whose asker has left
// was cut short, and nothing is wrong here.
func failureLevel(r *http.Request) slog.Level {
	if errors.Is(r.Context().Err(), context.Canceled) {
		return slog.LevelDebug
	}
	return slog.LevelError
}

// sessionFailed answers when a session could not be read or written. It stands
// outside the router, so the page has no more than its frame.
func sessionFailed(log *slog.Logger) func(http.ResponseWriter, *http.Request, error) {
	return func(w http.ResponseWriter, r *http.Request, err error) {
		id := w.Header().Get(echo.HeaderXRequestID)
		if id == "" {
			id = newRequestID()
			w.Header().Set(echo.HeaderXRequestID, id)
		}
		log.Log(r.Context(), failureLevel(r), "session store failed", "request_id", id, "err", err)
		p := problemOf(err)
		hint := ""
		if p.Expected != "" {
			hint = "Needed: " + p.Expected + "."
		}
		var page bytes.Buffer
		frame := views.Page{Title: p.Title, Path: r.URL.Path, RequestID: id, Version: Version, Assets: assetAddresses}
		if err := views.ErrorPage(frame, p.Status, p.Detail, hint).Render(r.Context(), &page); err != nil {
			http.Error(w, p.Detail, p.Status)
			return
		}
		w.Header().Set("Content-Type", "text/html; charset=utf-8")
		w.Header().Set("Cache-Control", "no-store")
		w.WriteHeader(p.Status)
		_, _ = w.Write(page.Bytes())
	}
}
