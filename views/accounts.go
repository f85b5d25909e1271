package views

import (
	"fathombend/catalogue"
	"net/url"
	"slices"
)

// SignIn is the state of the sign-in page.
type SignIn struct {
	Name      string
	Return    string // where to go afterwards
	Message   string
	Errors    map[string]string // by field
	Carried   url.Values        // fields of an interrupted form, to be sent on
	CarriedTo string            // where that form was going
	Register  bool              // anyone may make an account
}

// OneTime is the state of a page that is opened once by an address: the first
// curator's, an invitation or a new password.
type OneTime struct {
	Token  string
	Name   string
	Credit string
	First  bool // makes the first account; otherwise sets the password of Name
	Errors map[string]string
}

// AccountForm is the state of a person's own page.
type AccountForm struct {
	Name, Role, Credit, ORCID string
	Errors                    map[string]string
}

// Person is one line of the keeper's list.
type Person struct {
	ID                        int64
	Name, Credit, Role, ORCID string
	Disabled, Self            bool
}

// PeopleForm is the state of the keeper's page.
type PeopleForm struct {
	People             []Person
	Name, Credit, Role string // of the person being added
	Errors             map[string]string
	LinkFor, Link      string // a one-time link just made

	InviteRole, Note, Days string // of the invitation being made
	Invitation             string // its link, just made
	Invitations            []Invited
}

// Invited is one line of the keeper's list of invitations.
type Invited struct {
	catalogue.Invitation
	Works bool
}

// Joining is the state of the pages that make an account: by an invitation, or
// by registering.
type Joining struct {
	Token, Role, By     string // of the invitation; Token "" = registering
	Name, Credit, About string
	Errors              map[string]string
}

// carriedField is one hidden field of a form that travels on.
type carriedField struct{ name, value string }

// carriedFields lists the values in a fixed order.
func carriedFields(v url.Values) []carriedField {
	names := make([]string, 0, len(v))
	for name := range v {
		names = append(names, name)
	}
	slices.Sort(names)
	var out []carriedField
	for _, name := range names {
		for _, value := range v[name] {
			out = append(out, carriedField{name, value})
		}
	}
	return out
}

var roleChoices = []struct{ value, text string }{
	{"contributor", "contributor: sends measurements in"},
	{"curator", "curator: also reviews and accepts them"},
	{"keeper", "keeper: also adds people"},
}
