package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"time"

	"github.com/alexedwards/scs/v2"
	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// announceFirst prints the one-time address that makes the first account, while
// nobody can sign in yet.
func (p *accounts) announceFirst(base string, say io.Writer) {
	if p.readOnly {
		return
	}
	token, err := p.store.CreateFirstRunToken(context.Background())
	switch {
	case err != nil:
		p.log.Error("no address for the first account", "err", err)
	case token != "":
		fmt.Fprintf(say, "Nobody can sign in yet. To make the first account (keeper: contributes, curates, adds people), open once, within a day:\n  %s/first-curator?%s\n",
			base, url.Values{"token": {token}}.Encode())
	}
}

func (p *accounts) firstPage(c echo.Context) error {
	token := c.QueryParam("token")
	ok, err := p.store.FirstRunTokenValid(c.Request().Context(), token)
	if err != nil {
		return err
	}
	if !ok {
		return echo.NewHTTPError(http.StatusForbidden, "This address has been used or has ended. A program whose catalogue has no account yet prints a new one when it starts.")
	}
	return p.oneTime(c, http.StatusOK, views.OneTime{Token: token, First: true})
}

func (p *accounts) oneTime(c echo.Context, status int, v views.OneTime) error {
	title := "Choose a password"
	if v.First {
		title = "First account"
	}
	c.Response().Header().Set("Cache-Control", "no-store")
	return render(c, status, views.OneTimePage(p.page(c, title, ""), v))
}

func (p *accounts) firstCurator(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v := views.OneTime{Token: form.Get("token"), First: true, Name: strings.TrimSpace(form.Get("name")), Credit: strings.TrimSpace(form.Get("credit"))}
	if v.Errors = passwordsDiffer(form); v.Errors != nil {
		return p.oneTime(c, http.StatusUnprocessableEntity, v)
	}
	u, err := p.store.UseFirstRunToken(c.Request().Context(), v.Token, v.Name, v.Credit, "keeper", form.Get("password"))
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.oneTime(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	if err := p.enter(c, u); err != nil {
		return err
	}
	p.notice(c, "Your account is made and you are signed in. Add other people under People.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

// passwordsDiffer says by field that a new password and its repetition differ,
// and at once whether it could be one at all; nil when they are the same.
func passwordsDiffer(form url.Values) map[string]string {
	if form.Get("password") == form.Get("again") {
		return nil
	}
	errs := fieldErrors(catalogue.CheckPassword(form.Get("password")))
	if errs == nil {
		errs = map[string]string{}
	}
	errs["again"] = "The two passwords differ; type both again."
	return errs
}

// fieldErrors are the errors to show beside a field, nil when err is of
// another sort: those of a value that is not allowed or taken.
func fieldErrors(err error) map[string]string {
	var e *catalogue.Error
	if !errors.As(err, &e) || e.Field == "" || (e.Code != catalogue.Invalid && e.Code != catalogue.Conflict) {
		return nil
	}
	return map[string]string{e.Field: sentence(e.Message, e.Expected)}
}

// sentence makes a message and what was expected into plain sentences.
func sentence(message, expected string) string {
	if message == "" {
		return ""
	}
	s := strings.ToUpper(message[:1]) + message[1:]
	if !strings.HasSuffix(s, ".") && !strings.HasSuffix(s, "?") {
		s += "."
	}
	if expected != "" {
		s += " Expected: " + strings.TrimSuffix(expected, ".") + "."
	}
	return s
}

func (p *accounts) welcomePage(c echo.Context) error {
	token := c.QueryParam("token")
	u, err := p.store.PasswordTokenAccount(c.Request().Context(), token)
	if err != nil {
		return err
	}
	return p.oneTime(c, http.StatusOK, views.OneTime{Token: token, Name: u.Name})
}

func (p *accounts) welcome(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	token := form.Get("token")
	u, err := p.store.PasswordTokenAccount(ctx, token)
	if err != nil {
		return err
	}
	v := views.OneTime{Token: token, Name: u.Name}
	if v.Errors = passwordsDiffer(form); v.Errors != nil {
		return p.oneTime(c, http.StatusUnprocessableEntity, v)
	}
	u, err = p.store.UsePasswordToken(ctx, token, form.Get("password"))
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.oneTime(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	if err := endSessions(ctx, p.store, u.ID); err != nil {
		return err
	}
	if err := p.enter(c, u); err != nil {
		return err
	}
	p.notice(c, "Your password is set and you are signed in.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

// endSessions signs an account out everywhere.
func endSessions(ctx context.Context, s *catalogue.Store, account int64) error {
	return s.EndSessions(ctx, func(data []byte) bool {
		_, values, err := scs.GobCodec{}.Decode(data)
		id, _ := values[sessionAccount].(int64)
		return err == nil && id == account
	})
}

func (p *accounts) accountPage(c echo.Context) error {
	return p.showAccount(c, http.StatusOK, nil, nil)
}

// showAccount shows the person's own page; typed holds what was typed when
// there are errors.
func (p *accounts) showAccount(c echo.Context, status int, typed url.Values, errs map[string]string) error {
	u := p.user(c)
	v := views.AccountForm{Name: u.Name, Role: u.Role, Credit: u.Credit, ORCID: u.ORCID, Errors: errs}
	if typed.Has("credit") {
		v.Credit, v.ORCID = typed.Get("credit"), typed.Get("orcid")
	}
	return render(c, status, views.AccountPage(p.page(c, "Your account", ""), v))
}

func (p *accounts) changeAccount(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	err = p.store.SetProfile(c.Request().Context(), p.user(c).ID, form.Get("credit"), form.Get("orcid"))
	if errs := fieldErrors(err); errs != nil {
		return p.showAccount(c, http.StatusUnprocessableEntity, form, errs)
	}
	if err != nil {
		return err
	}
	p.notice(c, "Saved. New contributions carry this credit line; accepted ones keep theirs.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

func (p *accounts) changePassword(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	ctx, u := c.Request().Context(), p.user(c)
	refuse := func(status int, field, message string) error {
		return p.showAccount(c, status, nil, map[string]string{field: message})
	}
	key := "password\x00" + strconv.FormatInt(u.ID, 10)
	if wait := p.byName.wait(key); wait > 0 {
		c.Response().Header().Set("Retry-After", strconv.Itoa(int(wait.Seconds())+1))
		return refuse(http.StatusTooManyRequests, "current", "Too many attempts failed. Wait a quarter of an hour and try again.")
	}
	if errs := passwordsDiffer(form); errs != nil {
		return p.showAccount(c, http.StatusUnprocessableEntity, nil, errs)
	}
	if _, err := p.store.Authenticate(ctx, u.Name, form.Get("current")); err != nil {
		if isFault(err) {
			return err
		}
		p.byName.fail(key)
		return refuse(http.StatusUnprocessableEntity, "current", "That is not your current password. It was not changed.")
	}
	err = p.store.SetPassword(ctx, u.Name, form.Get("password"))
	if errs := fieldErrors(err); errs != nil {
		return p.showAccount(c, http.StatusUnprocessableEntity, nil, errs)
	}
	if err != nil {
		return err
	}
	if err := endSessions(ctx, p.store, u.ID); err != nil {
		return err
	}
	if err := p.enter(c, u); err != nil {
		return err
	}
	p.notice(c, "Your password is changed, and you are signed out everywhere else.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

func (p *accounts) signOutEverywhere(c echo.Context) error {
	if err := endSessions(c.Request().Context(), p.store, p.user(c).ID); err != nil {
		return err
	}
	return p.signOut(c)
}

func (p *accounts) peoplePage(c echo.Context) error {
	return p.showPeople(c, http.StatusOK, views.PeopleForm{Role: "contributor"})
}

func (p *accounts) showPeople(c echo.Context, status int, v views.PeopleForm) error {
	all, err := p.store.Accounts(c.Request().Context())
	if err != nil {
		return err
	}
	if v.Days == "" {
		v.Days = "14"
	}
	list, err := p.store.Invitations(c.Request().Context(), 100)
	if err != nil {
		return err
	}
	for _, i := range list {
		v.Invitations = append(v.Invitations, views.Invited{Invitation: i, Works: i.Open(time.Now())})
	}
	me := p.user(c)
	for _, a := range all {
		v.People = append(v.People, views.Person{ID: a.ID, Name: a.Name, Credit: a.Credit, Role: a.Role, ORCID: a.ORCID, Disabled: a.Disabled, Self: a.ID == me.ID})
	}
	return render(c, status, views.PeoplePage(p.page(c, "People", ""), v))
}

func (p *accounts) addPerson(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	v := views.PeopleForm{Name: strings.TrimSpace(form.Get("name")), Credit: form.Get("credit"), Role: form.Get("role")}
	// Nobody knows this password: the link sets the first one that counts.
	u, err := p.store.AddAccount(ctx, v.Name, v.Credit, v.Role, madePassword())
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.showPeople(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	return p.showLink(c, u)
}

// showLink shows a new one-time link for u. It is on this answer only.
func (p *accounts) showLink(c echo.Context, u *catalogue.Account) error {
	token, err := p.store.CreatePasswordToken(c.Request().Context(), u.ID)
	if err != nil {
		return err
	}
	link := c.Scheme() + "://" + c.Request().Host + "/welcome?" + url.Values{"token": {token}}.Encode()
	return p.showPeople(c, http.StatusOK, views.PeopleForm{Role: "contributor", LinkFor: u.Name, Link: link})
}

// other finds the account of the address, which must not be one's own: a
// keeper who locks themselves out cannot let themselves in again.
func (p *accounts) other(c echo.Context) (*catalogue.Account, error) {
	u, err := p.anyone(c)
	if err == nil && u.ID == p.user(c).ID {
		return nil, echo.NewHTTPError(http.StatusForbidden, "You cannot change your own role or state; another keeper can.")
	}
	return u, err
}

func (p *accounts) anyone(c echo.Context) (*catalogue.Account, error) {
	id, err := idOf(c)
	if err != nil {
		return nil, err
	}
	return p.store.Account(c.Request().Context(), id)
}

// idOf is the number in the address.
func idOf(c echo.Context) (int64, error) {
	id, err := strconv.ParseInt(c.Param("id"), 10, 64)
	if err != nil || id < 1 {
		return 0, echo.NewHTTPError(http.StatusNotFound, "There is no such page. The number in the address is not one of ours.")
	}
	return id, nil
}

func (p *accounts) invite(c echo.Context) error {
	u, err := p.anyone(c)
	if err != nil {
		return err
	}
	return p.showLink(c, u)
}

func (p *accounts) changeRole(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	u, err := p.other(c)
	if err != nil {
		return err
	}
	if err := p.store.SetRole(c.Request().Context(), u.Name, form.Get("role")); err != nil {
		return err
	}
	p.notice(c, u.Name+" is now a "+form.Get("role")+".")
	return c.Redirect(http.StatusSeeOther, "/people")
}

func (p *accounts) changeState(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	state, err := oneOf(form, "state", "active", []string{"active", "disabled"})
	if err != nil {
		return err
	}
	u, err := p.other(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	if err := p.store.SetDisabled(ctx, u.Name, state == "disabled"); err != nil {
		return err
	}
	if state == "disabled" {
		if err := endSessions(ctx, p.store, u.ID); err != nil {
			return err
		}
	}
	p.notice(c, u.Name+" is now "+state+".")
	return c.Redirect(http.StatusSeeOther, "/people")
}
