package main

import (
	"crypto/sha256"
	"encoding/xml"
	"fmt"
	"net/http"
	"net/url"
	"slices"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

// The Atom feed (RFC 4287) of releases and newly accepted systems.

type atomFeed struct {
	XMLName  xml.Name     `xml:"http://www.w3.org/2005/Atom feed"`
	ID       string       `xml:"id"`
	Title    string       `xml:"title"`
	Subtitle string       `xml:"subtitle,omitempty"`
	Updated  string       `xml:"updated"`
	Author   atomPerson   `xml:"author"`
	Links    []atomLink   `xml:"link"`
	Program  *atomProgram `xml:"generator"`
	Entries  []atomEntry  `xml:"entry"`
}

type atomProgram struct {
	Version string `xml:"version,attr"`
	Name    string `xml:",chardata"`
}

type atomPerson struct {
	Name string `xml:"name"`
	URI  string `xml:"uri,omitempty"`
}

type atomLink struct {
	Rel   string `xml:"rel,attr"`
	Type  string `xml:"type,attr,omitempty"`
	Title string `xml:"title,attr,omitempty"`
	Href  string `xml:"href,attr"`
}

type atomText struct {
	Type string `xml:"type,attr"`
	Text string `xml:",chardata"`
}

type atomEntry struct {
	ID        string        `xml:"id"`
	Title     string        `xml:"title"`
	Published string        `xml:"published"`
	Updated   string        `xml:"updated"`
	Authors   []atomPerson  `xml:"author"`
	Links     []atomLink    `xml:"link"`
	Category  *atomCategory `xml:"category"`
	Summary   atomText      `xml:"summary"`
	at        time.Time
}

type atomCategory struct {
	Term string `xml:"term,attr"`
}

// feedEntries is the most entries the feed has.
const feedEntries = 50

// feedID names a thing of a catalogue for ever, whatever its address becomes:
// an RFC 9562 UUID of version 8 over the catalogue's own and the thing.
func feedID(identity, thing string) string {
	h := sha256.Sum256([]byte(identity + "\n" + thing))
	h[6] = h[6]&0x0f | 0x80
	h[8] = h[8]&0x3f | 0x80
	return fmt.Sprintf("urn:uuid:%x-%x-%x-%x-%x", h[0:4], h[4:6], h[6:8], h[8:10], h[10:16])
}

func (a *App) feed(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	ctx := c.Request().Context()
	identity, err := a.store.Identity(ctx)
	if err != nil {
		return err
	}
	releases, err := a.store.Releases(ctx)
	if err != nil {
		return err
	}
	systems, err := a.store.NewSystems(ctx, feedEntries)
	if err != nil {
		return err
	}
	base := a.baseAddress(c)
	title, err := a.store.Title(ctx)
	if err != nil {
		return err
	}
	f := atomFeed{ID: feedID(identity, "feed"), Title: title, Subtitle: "Releases and newly accepted systems", Author: atomPerson{Name: title, URI: base + "/"},
		Links:   []atomLink{{Rel: "self", Type: "application/atom+xml", Href: base + "/feed.atom"}, {Rel: "alternate", Type: "text/html", Href: base + "/"}},
		Program: &atomProgram{Version, "Fathombend"}}
	for _, r := range releases {
		f.Entries = append(f.Entries, releaseEntry(&r, identity, base))
	}
	for _, s := range systems {
		f.Entries = append(f.Entries, systemEntry(s, identity, base))
	}
	slices.SortStableFunc(f.Entries, func(x, y atomEntry) int { return y.at.Compare(x.at) })
	f.Entries = f.Entries[:min(len(f.Entries), feedEntries)]
	newest := time.Unix(0, 0)
	for _, e := range f.Entries {
		newest = later(newest, e.at)
	}
	f.Updated = newest.UTC().Format(time.RFC3339)
	b, err := xml.MarshalIndent(f, "", " ")
	if err != nil {
		return err
	}
	c.Response().Header().Set(echo.HeaderLastModified, newest.UTC().Format(http.TimeFormat))
	return c.Blob(http.StatusOK, "application/atom+xml; charset=utf-8", append([]byte(xml.Header), append(b, '\n')...))
}

func later(a, b time.Time) time.Time {
	if b.After(a) {
		return b
	}
	return a
}

func releaseEntry(r *catalogue.Release, identity, base string) atomEntry {
	address := base + "/releases/" + url.PathEscape(r.Name)
	at := r.At.UTC().Format(time.RFC3339)
	e := atomEntry{ID: feedID(identity, "release "+r.Name), Title: "Release " + r.Name, Published: at, Updated: at, at: r.At, Category: &atomCategory{"release"},
		Links:   []atomLink{{Rel: "alternate", Type: "text/html", Href: address}, {Rel: "enclosure", Type: "application/zip", Title: "Data package", Href: address + ".zip"}},
		Summary: atomText{"text", fmt.Sprintf("%d measurements of %d systems, licence %s, SHA-256 %s. %s", r.Measurements, r.Systems, views.LicenceName(r.Licence), r.Checksum, r.Notes)}}
	for _, x := range creditedAuthors(r.Authors, r.Title) {
		e.Authors = append(e.Authors, atomPerson{Name: x.Name})
	}
	if r.Invented > 0 {
		e.Summary.Text = inventedOf(r.Invented, r.Measurements) + " " + e.Summary.Text
	}
	return e
}

func systemEntry(s catalogue.NewSystem, identity, base string) atomEntry {
	at := s.At.UTC().Format(time.RFC3339)
	e := atomEntry{ID: feedID(identity, "system "+s.Slug), Title: s.Name, Published: at, Updated: at, at: s.At, Category: &atomCategory{"system"},
		Links: []atomLink{{Rel: "alternate", Type: "text/html", Href: base + "/systems/" + s.Slug}}}
	e.Summary = atomText{"text", "Newly accepted system"}
	if s.Best.Sinuosity.Valid {
		e.Summary.Text += fmt.Sprintf(": sinuosity %s, at %s", catalogue.FormatNumber(s.Best.Sinuosity), views.FormatLatitude(s.Best.LatitudeDeg.V))
	}
	e.Summary.Text += ". Source: " + s.Best.Source
	if s.Best.Invented {
		e.Summary.Text = catalogue.InventedMark + " " + e.Summary.Text
	}
	if s.Best.Contributor != "" {
		e.Authors = []atomPerson{{Name: s.Best.Contributor}}
	}
	return e
}
