// Package views holds the templ components and the figures. It takes finished
// values and computes nothing but geometry on the page; it holds no SQL.
package views

import "net/url"

// Page is what every page's frame needs.
type Page struct {
	Title        string
	Path         string     // without query
	Query        url.Values // of this view
	Nav          string     // which way in is current: meridian, systems, chart, regression, expectation, measure, contribute, review, methods
	InventedRows int        // invented rows in the catalogue; > 0 shows the banner
	User         *User      // nil = signed out
	ReadOnly     bool
	RequestID    string
	Pending      int    // submissions waiting, for curators
	JSON         string // addresses of the data twins, "" = none
	CSV          string
	GeoJSON      string
	Notice       string // one sentence shown once
}

// User is who is signed in.
type User struct {
	Name, Credit, Role string
}

// Curates says whether the user may review.
func (u *User) Curates() bool { return u != nil && (u.Role == "curator" || u.Role == "keeper") }
