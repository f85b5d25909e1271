package main

import (
	"context"
	"log/slog"
	"net/http"
	"strings"
	"time"

	"github.com/alexedwards/scs/v2"
	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// Keys of a session.
const (
	sessionAccount = "account" // int64, the id of the signed-in account
	sessionNotice  = "notice"  // string, a sentence shown once
)

// newSessions keeps sessions in the catalogue file. A read-only catalogue
// cannot hold them: there they live in memory, and nobody signs in.
func newSessions(store *catalogue.Store, log *slog.Logger, readOnly bool) *scs.SessionManager {
	m := scs.New()
	m.Lifetime = 30 * 24 * time.Hour
	m.IdleTimeout = 7 * 24 * time.Hour
	m.Cookie.Name = "fathombend"
	m.Cookie.HttpOnly = true
	m.Cookie.SameSite = http.SameSiteLaxMode
	m.ErrorFunc = sessionFailed(log)
	if !readOnly {
		m.Store = sessionStore{store, log}
	}
	return m
}

// sessionStore lets the session manager write through the catalogue's own
// writer, so that there is one writer to the file.
type sessionStore struct {
	store *catalogue.Store
	log   *slog.Logger
}

func (s sessionStore) FindCtx(ctx context.Context, token string) ([]byte, bool, error) {
	b, found, err := s.store.SessionFind(ctx, token)
	if err != nil || !found {
		return nil, false, err
	}
	b, err = withoutWritten(b)
	return b, err == nil, err
}

func (s sessionStore) CommitCtx(ctx context.Context, token string, b []byte, expiry time.Time) error {
	return s.commit(ctx, token, b, expiry)
}

func (s sessionStore) DeleteCtx(ctx context.Context, token string) error {
	return s.store.SessionDelete(ctx, token)
}

func (s sessionStore) Find(token string) ([]byte, bool, error) {
	return s.FindCtx(context.Background(), token)
}

func (s sessionStore) Commit(token string, b []byte, expiry time.Time) error {
	return s.CommitCtx(context.Background(), token, b, expiry)
}

func (s sessionStore) Delete(token string) error { return s.DeleteCtx(context.Background(), token) }

// user is who is signed in, nil when nobody is or the account was disabled
// since. It is looked up once a request.
func (a *App) user(c echo.Context) *catalogue.Account {
	const key = "user"
	if u, done := c.Get(key).(*catalogue.Account); done {
		return u
	}
	var u *catalogue.Account
	if id := a.sessionInt64(c, sessionAccount); id != 0 {
		found, err := a.store.Account(c.Request().Context(), id)
		switch {
		case err != nil && catalogue.CodeOf(err) != catalogue.NotFound:
			a.log.Error("account lookup failed", "err", err)
		case err == nil && !found.Disabled:
			u = found
		}
	}
	c.Set(key, u)
	return u
}

// sessionInt64 reads a session value; 0 where there is no session.
func (a *App) sessionInt64(c echo.Context, key string) int64 {
	if a.readOnly || sessionless(c.Request().URL.Path) {
		return 0
	}
	return a.sessions.GetInt64(c.Request().Context(), key)
}

// notice keeps one sentence for the next page this person sees.
func (a *App) notice(c echo.Context, sentence string) {
	a.sessions.Put(c.Request().Context(), sessionNotice, sentence)
}

// takeNotice returns the kept sentence and forgets it.
func (a *App) takeNotice(c echo.Context) string {
	if a.readOnly || sessionless(c.Request().URL.Path) {
		return ""
	}
	return a.sessions.PopString(c.Request().Context(), sessionNotice)
}

// sessionless says which addresses are answered without a session, so that
// they stay cacheable and never touch the session table.
func sessionless(path string) bool {
	return strings.HasPrefix(path, "/static/") || path == "/healthz" || path == "/metrics" || path == "/favicon.ico"
}
