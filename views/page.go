// Package views holds the templ components and the figures. It takes finished
// values and computes nothing but geometry on the page; it holds no SQL.
package views

import (
	"net/url"
	"strconv"
)

// Page is what every page's frame needs.
type Page struct {
	Title        string
	Path         string     // without query
	Query        url.Values // of this view
	Nav          string     // which way in is current: meridian, systems, chart, regression, expectation, measure, contribute, review, methods
	InventedRows int        // invented rows in the catalogue; > 0 shows the banner
	User         *User      // nil = signed out
	SeesPrivate  bool       // the page may hold private rows of this person
	// LeavesPrivate: this person sees private rows and asked for what everybody
	// sees.
	LeavesPrivate bool
	ReadOnly      bool
	RequestID     string
	Pending       int    // submissions waiting, for curators
	Refresh       int    // seconds after which a page without scripts loads itself again; 0 = never
	Joining       int    // people waiting to be let in, for curators
	JSON          string // addresses of the data twins, "" = none
	CSV           string
	GeoJSON       string
	Notice        string // one sentence shown once
	Version       string
	Assets        map[string]string // file name under static/ -> address with its content hash
	Wide          bool              // the main column takes the full width
	Base          string            // how the reader reached this program, without a path
	Release       string            // the page shows this release, "" = the catalogue as it is
	Live          string            // address of the same view of the catalogue as it is
	LinkedData    string            // JSON-LD about the page, "" = none
	Refusals      []Refusal         // what of the address or form cannot be used
	Fields        []string          // the page's own settings that have a field
	TypedFilter   url.Values        // the address as typed, when something of it was refused
}

// User is who is signed in.
type User struct {
	Name, Credit, Role string
	Waiting            bool // registered and not let in yet
}

// Curates says whether the user may review.
func (u *User) Curates() bool { return u != nil && (u.Role == "curator" || u.Role == "keeper") }

// Asset is the address of a file under static/.
func (p Page) Asset(name string) string {
	if a, ok := p.Assets[name]; ok {
		return a
	}
	return "/static/" + name
}

type navItem struct{ key, href, text string }

// navigation lists the ways in that this person has.
func navigation(p Page) []navItem {
	items := []navItem{
		{"meridian", "/", "Meridian"},
		{"systems", "/systems", "Systems"},
		{"chart", "/chart", "Chart"},
		{"regression", "/regression", "Regression"},
		{"expectation", "/expectation", "Expectation"},
		{"measure", "/measure", "Measure"},
	}
	if !p.ReadOnly {
		items = append(items, navItem{"contribute", "/contribute", "Contribute"})
	}
	if p.User.Curates() {
		text := "Review"
		if p.Pending > 0 {
			text += " (" + strconv.Itoa(p.Pending) + ")"
		}
		items = append(items, navItem{"review", "/review", text})
	}
	return append(items, navItem{"methods", "/methods", "Methods"})
}

// twins lists the data twins of the page.
func twins(p Page) []navItem {
	var out []navItem
	for _, t := range []navItem{{"csv", p.CSV, "CSV"}, {"json", p.JSON, "JSON"}, {"geojson", p.GeoJSON, "GeoJSON"}} {
		if t.href != "" {
			out = append(out, t)
		}
	}
	return out
}
