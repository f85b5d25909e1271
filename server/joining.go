package main

import (
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// joinings are the pages by which people join: invitations and registration.
type joinings struct {
	*accounts
	byHost *throttle // accounts made and links guessed, by address
	all    *throttle // accounts made by anyone: what curators can look through
}

func (p *accounts) routesJoining(e *echo.Echo) {
	j := &joinings{accounts: p, byHost: newThrottle(5, time.Hour), all: newThrottle(200, 24*time.Hour)}
	e.POST("/people/invitations", j.invite)
	e.POST("/people/invitations/:id/end", j.endInvitation)
	get(e, "/join", j.joinPage)
	e.POST("/join", j.join)
	get(e, "/register", j.registerPage)
	e.POST("/register", j.register)
	get(e, "/registrations", j.registrationsPage)
	e.POST("/registrations/:id", j.decide)
}

// tooMany answers a person, or an address, that has to wait.
func tooMany(c echo.Context, wait time.Duration, what string) error {
	c.Response().Header().Set("Retry-After", strconv.Itoa(int(wait.Seconds())+1))
	return echo.NewHTTPError(http.StatusTooManyRequests, what+" Wait "+strconv.Itoa(int(wait.Minutes())+1)+" minutes and try again.")
}

// invite makes a link and shows it, on this answer only.
func (p *joinings) invite(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v := views.PeopleForm{Role: "contributor", InviteRole: form.Get("invite_role"), Note: form.Get("note"), Days: strings.TrimSpace(form.Get("days"))}
	days, err := strconv.Atoi(v.Days)
	if err != nil {
		v.Errors = map[string]string{"days": strconv.Quote(clip(v.Days)) + " is not a number of days. Expected: 1 to " + strconv.Itoa(catalogue.LongestInvitation) + "."}
		return p.showPeople(c, http.StatusUnprocessableEntity, v)
	}
	token, err := p.store.Invite(c.Request().Context(), p.user(c).ID, v.InviteRole, v.Note, days)
	if errs := fieldErrors(err); errs != nil {
		errs["invite_role"] = errs["role"]
		delete(errs, "role")
		v.Errors = errs
		return p.showPeople(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	v.Invitation = c.Scheme() + "://" + c.Request().Host + "/join?" + url.Values{"token": {token}}.Encode()
	return p.showPeople(c, http.StatusOK, v)
}

func (p *joinings) endInvitation(c echo.Context) error {
	id, err := idOf(c)
	if err != nil {
		return err
	}
	if err := p.store.EndInvitation(c.Request().Context(), id, p.user(c).ID); err != nil {
		return err
	}
	p.notice(c, "The link is taken back; it works no more.")
	return c.Redirect(http.StatusSeeOther, "/people")
}

// invitation finds the one a token opens. Guessing is counted by address.
func (p *joinings) invitation(c echo.Context, token string) (*catalogue.Invitation, error) {
	if p.readOnly {
		return nil, echo.NewHTTPError(http.StatusForbidden, "This catalogue is shown read-only: nobody joins here.")
	}
	host := "link\x00" + p.askerHost(c)
	if wait := p.accounts.byHost.wait(host); wait > 0 {
		return nil, tooMany(c, wait, "Too many links were tried from your address.")
	}
	i, err := p.store.Invitation(c.Request().Context(), token)
	if err != nil && !isFault(err) {
		p.accounts.byHost.fail(host)
	}
	return i, err
}

func (p *joinings) showJoin(c echo.Context, status int, v views.Joining) error {
	title := "Register"
	if v.Token != "" {
		title = "Join this catalogue"
	}
	c.Response().Header().Set("Cache-Control", "no-store")
	return render(c, status, views.JoinPage(p.page(c, title, ""), v))
}

func (p *joinings) joinPage(c echo.Context) error {
	token := c.QueryParam("token")
	i, err := p.invitation(c, token)
	if err != nil {
		return err
	}
	return p.showJoin(c, http.StatusOK, views.Joining{Token: token, Role: i.Role, By: i.By})
}

// joiningOf reads what both forms ask for.
func joiningOf(form url.Values) views.Joining {
	return views.Joining{Token: form.Get("token"), Name: strings.TrimSpace(form.Get("name")), Credit: strings.TrimSpace(form.Get("credit")), About: strings.TrimSpace(form.Get("about"))}
}

func (p *joinings) join(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	v := joiningOf(form)
	i, err := p.invitation(c, v.Token)
	if err != nil {
		return err
	}
	v.Role, v.By = i.Role, i.By
	if v.Errors = passwordsDiffer(form); v.Errors != nil {
		return p.showJoin(c, http.StatusUnprocessableEntity, v)
	}
	u, err := p.store.UseInvitation(c.Request().Context(), v.Token, v.Name, v.Credit, form.Get("password"))
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.showJoin(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	if err := p.enter(c, u); err != nil {
		return err
	}
	p.notice(c, "Your account is made and you are signed in as "+u.Name+". Send measurements one by one under Contribute, or many as a CSV file from there.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

// registering refuses where nobody may register.
func (p *joinings) registering(c echo.Context) error {
	if p.readOnly {
		return echo.NewHTTPError(http.StatusForbidden, "This catalogue is shown read-only: nobody joins here.")
	}
	open, err := p.store.RegistrationsOpen(c.Request().Context())
	if err == nil && !open {
		err = echo.NewHTTPError(http.StatusForbidden, "Registration is closed here. Ask a keeper of this catalogue for an invitation; reading needs no account.")
	}
	return err
}

func (p *joinings) registerPage(c echo.Context) error {
	if err := p.registering(c); err != nil {
		return err
	}
	return p.showJoin(c, http.StatusOK, views.Joining{})
}

// register makes an account that keeps drafts until a curator lets it in. Each
// one made counts against the address it came from.
func (p *joinings) register(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	if err := p.registering(c); err != nil {
		return err
	}
	v := joiningOf(form)
	v.Token = ""
	host := p.askerHost(c)
	if wait := max(p.byHost.wait(host), p.all.wait("")); wait > 0 {
		c.Response().Header().Set("Retry-After", strconv.Itoa(int(wait.Seconds())+1))
		v.Errors = map[string]string{"name": "Too many accounts were made from your address or in all. Wait " + strconv.Itoa(int(wait.Minutes())+1) + " minutes and send the form again."}
		return p.showJoin(c, http.StatusTooManyRequests, v)
	}
	if v.Errors = passwordsDiffer(form); v.Errors != nil {
		return p.showJoin(c, http.StatusUnprocessableEntity, v)
	}
	u, err := p.store.Register(c.Request().Context(), v.Name, v.Credit, v.About, form.Get("password"))
	if v.Errors = fieldErrors(err); v.Errors != nil {
		return p.showJoin(c, http.StatusUnprocessableEntity, v)
	}
	if err != nil {
		return err
	}
	p.byHost.fail(host)
	p.all.fail("")
	if err := p.enter(c, u); err != nil {
		return err
	}
	p.notice(c, "Your account is made. Your name to sign in with is "+u.Name+": write it down.")
	return c.Redirect(http.StatusSeeOther, "/account")
}

func (p *joinings) registrationsPage(c echo.Context) error {
	list, err := p.store.Registrations(c.Request().Context(), 500)
	if err != nil {
		return err
	}
	return render(c, http.StatusOK, views.RegistrationsPage(p.page(c, "Registrations", ""), list))
}

func (p *joinings) decide(c echo.Context) error {
	form, err := formOf(c)
	if err != nil {
		return err
	}
	decision, err := oneOf(form, "decision", "", []string{"approve", "refuse"})
	if err != nil {
		return err
	}
	u, err := p.anyone(c)
	if err != nil {
		return err
	}
	if decision == "" {
		return &badInput{"decision", "nothing was decided. Expected approve or refuse"}
	}
	ctx := c.Request().Context()
	if err := p.store.DecideRegistration(ctx, u.ID, p.user(c).ID, decision == "approve", form.Get("why")); err != nil {
		return err
	}
	if decision == "approve" {
		p.notice(c, u.Credit+" can send contributions now.")
	} else {
		if err := endSessions(ctx, p.store, u.ID); err != nil {
			return err
		}
		p.notice(c, u.Credit+" is refused and signed out; drafts are kept.")
	}
	return c.Redirect(http.StatusSeeOther, "/registrations")
}
