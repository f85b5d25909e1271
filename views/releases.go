package views

import (
	"net/url"
	"strconv"
	"strings"

	"github.com/a-h/templ"

	"fathombend/catalogue"
)

// ReleasesPage lists the releases and, for a curator, makes one.
type ReleasesPage struct {
	Page
	Releases []catalogue.Release
	Form     ReleaseForm
	ReadyWhy []string // what to look at before freezing, each saying what to do
}

// ReleaseForm is what was typed to make a release, and why it was not made.
type ReleaseForm struct {
	Name, Title, Notes, Licence, DOI string
	Field, Refused                   string
}

// ReleasePage is one release.
type ReleasePage struct {
	Page
	Item     catalogue.Release
	Previous string // name of the release before it, "" if none
	Latest   bool
	Cite     Citation
	DOIForm  ReleaseForm
	Chosen   []Fact // settings of the catalogue when it was frozen
}

// DifferencePage is what changed from one state of the catalogue to another.
type DifferencePage struct {
	Page
	Before, After string // names; Present is the catalogue as it is
	Names         []string
	Difference    *catalogue.Difference
	Changes       []catalogue.Change // the first ones
	Total         int                // all of them
}

func releaseHref(name string) templ.SafeURL {
	return templ.SafeURL("/releases/" + url.PathEscape(name))
}

func releaseFile(name, suffix string) templ.SafeURL {
	return templ.SafeURL("/releases/" + url.PathEscape(name) + suffix)
}

func differenceHref(before, after, suffix string) templ.SafeURL {
	return templ.SafeURL("/releases/" + url.PathEscape(before) + "/difference/" + url.PathEscape(after) + suffix)
}

func under(path, release string) templ.SafeURL {
	return templ.SafeURL(path + "?" + url.Values{"release": {release}}.Encode())
}

// stateName is a state of the catalogue in a sentence.
func stateName(name string) string {
	if name == catalogue.Present {
		return "the catalogue as it is now"
	}
	return "release " + name
}

func signedCount(n int) string {
	if n > 0 {
		return "+" + strconv.Itoa(n)
	}
	return trueMinus(strconv.Itoa(n))
}

// heldLine counts what a release holds.
func heldLine(r catalogue.Release) string {
	s := countText(r.Measurements, "measurement", "measurements") + " of " + countText(r.Systems, "system", "systems") + " from " + countText(r.Sources, "source", "sources")
	if r.Centrelines > 0 {
		s += ", " + countText(r.Centrelines, "centreline", "centrelines")
	}
	return s
}

// licenceOfRows is a licence of rows as the column gives it.
func licenceOfRows(v string) string {
	if v == "" {
		return "not said"
	}
	return v
}

func orcidHref(id string) templ.SafeURL { return templ.SafeURL("https://orcid.org/" + id) }

func doiHref(doi string) templ.SafeURL {
	return templ.SafeURL("https://doi.org/" + strings.ReplaceAll(url.PathEscape(doi), "%2F", "/"))
}

// changeWhat says what became of a record.
func changeWhat(c catalogue.Change) string {
	if c.Line {
		return "centreline " + c.What
	}
	return "measurement " + c.What
}

func recordScope(rows int) string {
	if rows > 1 {
		return "rowgroup"
	}
	return "row"
}

// inventedIn says how much of a release is invented.
func inventedIn(r catalogue.Release) string {
	if r.Invented == r.Measurements {
		return "All measurements in it are invented for a demonstration, and marked in every table and file."
	}
	return strconv.Itoa(r.Invented) + " of the " + strconv.Itoa(r.Measurements) + " measurements in it are invented for a demonstration, and marked in every table and file."
}

// SystemHref is the page of a system, of the release the page shows.
func (p Page) SystemHref(slug string) templ.SafeURL {
	address := "/systems/" + url.PathEscape(slug)
	if p.Release != "" {
		address += "?" + url.Values{"release": {p.Release}}.Encode()
	}
	return templ.SafeURL(address)
}
