package main

import (
	"errors"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// accounts are the pages of signing in and of the people of a catalogue.
type accounts struct {
	*App
	byName *throttle // failed sign-ins by name and address
	byHost *throttle // failed sign-ins by address alone
}

func (a *App) routesAccounts(e *echo.Echo) {
	p := &accounts{App: a, byName: newThrottle(10, 15*time.Minute), byHost: newThrottle(100, 15*time.Minute)}
	a.onListen = append(a.onListen, p.announceFirst)
	e.Use(a.requireRole)
	get(e, "/sign-in", p.signInPage)
	e.POST("/sign-in", p.signIn)
	e.POST("/sign-out", p.signOut)
	get(e, "/first-curator", p.firstPage)
	e.POST("/first-curator", p.firstCurator)
	get(e, "/welcome", p.welcomePage)
	e.POST("/welcome", p.welcome)
	get(e, "/account", p.accountPage)
	e.POST("/account", p.changeAccount)
	e.POST("/account/password", p.changePassword)
	e.POST("/account/sign-out", p.signOutEverywhere)
	get(e, "/people", p.peoplePage)
	e.POST("/people", p.addPerson)
	e.POST("/people/:id/role", p.changeRole)
	e.POST("/people/:id/password", p.invite)
	e.POST("/people/:id/state", p.changeState)
	p.routesJoining(e)
}

// signInAddress is the way to sign in and back to where one was.
func signInAddress(back string) string {
	return "/sign-in?" + url.Values{"return": {back}}.Encode()
}

// localPath returns p when it is an address on this site, else "/": a return
// path must not lead elsewhere.
func localPath(p string) string {
	if !strings.HasPrefix(p, "/") || strings.HasPrefix(p, "//") || strings.ContainsAny(p, "\\\r\n\t") {
		return "/"
	}
	u, err := url.Parse(p)
	if err != nil || u.Host != "" || u.Scheme != "" {
		return "/"
	}
	return p
}

// carriedPrefix marks the fields of an interrupted form while it travels
// through the sign-in page.
const carriedPrefix = "carried."

func carried(form url.Values) url.Values {
	out := url.Values{}
	for name, vs := range form {
		if rest, ok := strings.CutPrefix(name, carriedPrefix); ok {
			out[rest] = vs
		}
	}
	return out
}

// signInCarrying answers a form sent after the session ended: the sign-in page
// with everything that was typed, to be sent on once signed in.
func (a *App) signInCarrying(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v := views.SignIn{
		Return: localPath(c.Request().URL.RequestURI()), Carried: form, CarriedTo: localPath(c.Request().URL.RequestURI()),
		Message: "Your session has ended. Sign in again: what you typed is kept and is sent on afterwards.",
	}
	if c.Request().MultipartForm != nil && len(c.Request().MultipartForm.File) > 0 {
		v.Message = "Your session has ended. Sign in again, then choose the file once more: nothing of it was stored."
		v.Carried, v.CarriedTo = nil, ""
	}
	return a.showSignIn(c, http.StatusUnauthorized, v)
}

// showSignIn shows the sign-in page, with the way to an account that is open.
func (a *App) showSignIn(c echo.Context, status int, v views.SignIn) (err error) {
	if v.Register, err = a.store.RegistrationsOpen(c.Request().Context()); err != nil {
		return err
	}
	return render(c, status, views.SignInPage(a.page(c, "Sign in", ""), v))
}

// formOf reads the fields of a posted form, urlencoded or multipart.
func formOf(c echo.Context) (url.Values, error) {
	r := c.Request()
	var err error
	if strings.HasPrefix(r.Header.Get("Content-Type"), "multipart/form-data") {
		err = r.ParseMultipartForm(8 << 20)
	} else {
		err = r.ParseForm()
	}
	if err != nil {
		if over := (*http.MaxBytesError)(nil); errors.As(err, &over) {
			return nil, err
		}
		return nil, &badInput{"body", "the form could not be read. Expected application/x-www-form-urlencoded or multipart/form-data"}
	}
	return r.PostForm, nil
}

func (p *accounts) signInPage(c echo.Context) error {
	back := localPath(c.QueryParam("return"))
	if p.user(c) != nil {
		return c.Redirect(http.StatusSeeOther, back)
	}
	if p.readOnly {
		return echo.NewHTTPError(http.StatusForbidden, "This catalogue is shown read-only: nobody signs in here.")
	}
	c.Response().Header().Set("Cache-Control", "no-store")
	v := views.SignIn{Return: back}
	if strings.HasPrefix(back, "/contribute") || strings.HasPrefix(back, "/review") {
		v.Message = "Sign in to go on to that page."
	}
	return p.showSignIn(c, http.StatusOK, v)
}

func (p *accounts) signIn(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	if p.readOnly {
		return echo.NewHTTPError(http.StatusForbidden, "This catalogue is shown read-only: nobody signs in here.")
	}
	v := views.SignIn{
		Name: strings.TrimSpace(form.Get("name")), Return: localPath(form.Get("return")),
		Carried: carried(form), CarriedTo: form.Get("carried_to"),
	}
	host := p.askerHost(c)
	key := host + "\x00" + strings.ToLower(v.Name)
	if wait := max(p.byName.wait(key), p.byHost.wait(host)); wait > 0 {
		minutes := int(wait.Minutes()) + 1
		c.Response().Header().Set("Retry-After", strconv.Itoa(int(wait.Seconds())+1))
		v.Errors = map[string]string{"password": "Too many attempts failed. Wait " + strconv.Itoa(minutes) + " minutes and try again, or ask a keeper for a new password link."}
		return p.showSignIn(c, http.StatusTooManyRequests, v)
	}
	u, err := p.store.Authenticate(c.Request().Context(), v.Name, form.Get("password"))
	if err != nil {
		if isFault(err) {
			return err
		}
		p.byName.fail(key)
		p.byHost.fail(host)
		// One sentence for a wrong name and for a wrong password: the page must
		// not tell which names exist.
		v.Errors = map[string]string{"password": "That name and password do not belong together. Check both; the password is case-sensitive."}
		return p.showSignIn(c, http.StatusUnprocessableEntity, v)
	}
	p.byName.clear(key)
	if err := p.enter(c, u); err != nil {
		return err
	}
	if to := localPath(v.CarriedTo); len(v.Carried) > 0 && to != "/" {
		return render(c, http.StatusOK, views.CarryOnPage(p.page(c, "Signed in", ""), to, v.Carried))
	}
	return c.Redirect(http.StatusSeeOther, v.Return)
}

// enter signs u in under a new session token, so that a token fixed before
// signing in is worth nothing.
func (p *accounts) enter(c echo.Context, u *catalogue.Account) error {
	ctx := c.Request().Context()
	if err := p.sessions.RenewToken(ctx); err != nil {
		return err
	}
	p.sessions.Put(ctx, sessionAccount, u.ID)
	c.Set("user", u)
	return nil
}

func (p *accounts) signOut(c echo.Context) error {
	if err := p.sessions.Destroy(c.Request().Context()); err != nil {
		return err
	}
	return c.Redirect(http.StatusSeeOther, "/")
}
