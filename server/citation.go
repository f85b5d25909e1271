package main

import (
	"context"
	"encoding/json"
	"fmt"
	"net/url"
	"strings"

	"fathombend/catalogue"
	"fathombend/views"
)

// creditedAuthors are the names a release is cited by, at least one.
func creditedAuthors(authors []catalogue.Author, title string) []catalogue.Author {
	if len(authors) == 0 {
		return []catalogue.Author{{Name: "Contributors to the " + title}}
	}
	return authors
}

// releaseAddress is where a release is found: its DOI, else its page under
// base.
func releaseAddress(r *catalogue.Release, base string) string {
	if r.DOI != "" {
		return "https://doi.org/" + r.DOI
	}
	return base + "/releases/" + url.PathEscape(r.Name)
}

// citationText is one sentence for a list of references.
func citationText(r *catalogue.Release, base string) string {
	s := fmt.Sprintf("%s (%s) %s, release %s. Data set. %s. Licence %s.", views.AuthorList(creditedAuthors(r.Authors, r.Title), 10),
		r.At.UTC().Format("2006"), strings.TrimSuffix(r.Title, "."), r.Name, releaseAddress(r, base), views.LicenceName(r.Licence))
	if r.Invented > 0 {
		s += " " + inventedOf(r.Invented, r.Measurements)
	}
	return s
}

// inventedOf says how much of a table is invented.
func inventedOf(invented, all int) string {
	switch {
	case invented == 0:
		return ""
	case invented == all:
		return "All its measurements are invented for a demonstration."
	}
	return fmt.Sprintf("%d of its %d measurements are invented for a demonstration.", invented, all)
}

var texCitation = strings.NewReplacer(`\`, `{\textbackslash}`, `{`, `\{`, `}`, `\}`, `#`, `\#`, `$`, `\$`, `%`, `\%`, `&`, `\&`, `_`, `\_`, `~`, `{\textasciitilde}`, `^`, `{\textasciicircum}`)

func citationBibTeX(r *catalogue.Release, base string) string {
	var names []string
	for _, a := range creditedAuthors(r.Authors, r.Title) {
		names = append(names, "{"+texCitation.Replace(a.Name)+"}") // credit lines stay as they are
	}
	key := strings.Map(func(c rune) rune {
		if c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' {
			return c
		}
		return '-'
	}, r.Name)
	lines := []string{"author = {" + strings.Join(names, " and ") + "}", "title = {{" + texCitation.Replace(r.Title) + "}}", "version = {" + texCitation.Replace(r.Name) + "}",
		"year = {" + r.At.UTC().Format("2006") + "}"}
	if r.DOI != "" {
		lines = append(lines, "doi = {"+r.DOI+"}")
	}
	lines = append(lines, "url = {"+releaseAddress(r, base)+"}", "note = {"+strings.TrimSpace("Data set. SHA-256 of its table: "+r.Checksum+". "+inventedOf(r.Invented, r.Measurements))+"}")
	return "@misc{fathombend-" + key + ",\n  " + strings.Join(lines, ",\n  ") + "\n}\n"
}

// yamlText writes a text as a YAML double-quoted scalar: JSON is one, but for
// the signs YAML wants escaped.
func yamlText(s string) string {
	b, err := json.Marshal(s)
	if err != nil { // no string fails
		return `""`
	}
	var out strings.Builder
	for _, c := range string(b) {
		if c >= 0x7f && c <= 0x9f || c == 0xfeff || c >= 0xfffe && c <= 0xffff {
			fmt.Fprintf(&out, `\u%04x`, c)
			continue
		}
		out.WriteRune(c)
	}
	return out.String()
}

// citationCFF is CITATION.cff (format 1.2.0) of a table.
func citationCFF(p *packageMeta) string {
	var b strings.Builder
	line := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	line("cff-version: 1.2.0")
	line("message: %s", yamlText("If you use these data, please cite them as below, and the sources of the measurements you use (sources.csv)."))
	line("type: dataset")
	line("title: %s", yamlText(p.Title))
	line("version: %s", yamlText(p.Version))
	line("date-released: %s", p.At.UTC().Format("2006-01-02"))
	line("license: %s", p.Licence)
	if p.DOI != "" {
		line("doi: %s", yamlText(p.DOI))
	}
	line("authors:")
	for _, a := range creditedAuthors(p.Authors, p.Title) {
		line("  - name: %s", yamlText(a.Name))
		if a.ORCID != "" {
			line("    orcid: %s", yamlText("https://orcid.org/"+a.ORCID))
		}
	}
	line("abstract: %s", yamlText(p.description()))
	line("keywords:")
	for _, k := range keywords {
		line("  - %s", yamlText(k))
	}
	return b.String()
}

var keywords = []string{"submarine channel", "sinuosity", "turbidity current", "submarine fan", "planform", "Coriolis force", "palaeolatitude", "marine geology"}

// linkedDataset is a schema.org Dataset.
type linkedDataset struct {
	Context       string           `json:"@context"`
	Type          string           `json:"@type"`
	ID            string           `json:"@id"`
	Name          string           `json:"name"`
	Description   string           `json:"description"`
	URL           string           `json:"url"`
	Identifier    []string         `json:"identifier,omitempty"`
	Version       string           `json:"version"`
	Published     string           `json:"datePublished,omitempty"`
	Modified      string           `json:"dateModified,omitempty"`
	License       string           `json:"license,omitempty"`
	Free          bool             `json:"isAccessibleForFree"`
	Keywords      []string         `json:"keywords"`
	Credit        string           `json:"creditText,omitempty"`
	Creator       []linkedPerson   `json:"creator,omitempty"`
	Variables     []linkedVariable `json:"variableMeasured"`
	Spatial       *linkedPlace     `json:"spatialCoverage,omitempty"`
	Distribution  []linkedDownload `json:"distribution"`
	InDataCatalog *linkedCatalog   `json:"includedInDataCatalog,omitempty"`
}

type linkedPerson struct {
	Type   string `json:"@type"`
	Name   string `json:"name"`
	SameAs string `json:"sameAs,omitempty"`
}

type linkedVariable struct {
	Type        string `json:"@type"`
	Name        string `json:"name"`
	Description string `json:"description"`
	Unit        string `json:"unitText,omitempty"`
}

type linkedPlace struct {
	Type string     `json:"@type"`
	Geo  linkedArea `json:"geo"`
}

// linkedArea is a GeoShape; box is "south west north east".
type linkedArea struct {
	Type string `json:"@type"`
	Box  string `json:"box"`
}

type linkedDownload struct {
	Type   string `json:"@type"`
	Format string `json:"encodingFormat"`
	URL    string `json:"contentUrl"`
	Name   string `json:"name"`
	SHA256 string `json:"sha256,omitempty"`
	Size   string `json:"contentSize,omitempty"`
}

type linkedCatalog struct {
	Type string `json:"@type"`
	Name string `json:"name"`
	URL  string `json:"url"`
}

func linkedVariables() []linkedVariable {
	var out []linkedVariable
	for _, c := range catalogue.Columns {
		if c.Numeric() && c.Group != "place" {
			out = append(out, linkedVariable{"PropertyValue", c.Name, c.Help, c.Unit})
		}
	}
	return out
}

// linkedText is a document as the text of a script element: json.Marshal writes
// < as \u003c, so nothing ends the element early.
func linkedText(d linkedDataset) string {
	b, err := json.Marshal(finite(d))
	if err != nil {
		return ""
	}
	return string(b)
}

func releaseLinkedData(r *catalogue.Release, base string) string {
	address := base + "/releases/" + url.PathEscape(r.Name)
	meta := metaOfRelease(r)
	d := linkedDataset{Context: "https://schema.org/", Type: "Dataset", ID: address, Name: r.Title + ", release " + r.Name, Description: meta.description(), URL: address,
		Version: r.Name, Published: r.At.UTC().Format("2006-01-02"), License: views.LicenceAddress(r.Licence), Free: true, Keywords: keywords, Credit: citationText(r, base),
		Variables: linkedVariables(), InDataCatalog: &linkedCatalog{"DataCatalog", r.Title, base + "/"},
		Distribution: []linkedDownload{
			{"DataDownload", "text/csv", address + ".csv", "Measurement table", r.Checksum, fmt.Sprint(r.Bytes, " B")},
			{"DataDownload", "application/zip", address + ".zip", "Data package", "", ""},
			{"DataDownload", "application/geo+json", base + "/systems.geojson?" + url.Values{"release": {r.Name}}.Encode(), "Systems as points", "", ""},
		}}
	if r.DOI != "" {
		d.Identifier = []string{"https://doi.org/" + r.DOI}
	}
	for _, a := range creditedAuthors(r.Authors, r.Title) {
		p := linkedPerson{Type: "Person", Name: a.Name}
		if a.ORCID != "" {
			p.SameAs = "https://orcid.org/" + a.ORCID
		}
		d.Creator = append(d.Creator, p)
	}
	return linkedText(d)
}

// catalogueLinkedData describes the catalogue as it is, for the opening page;
// "" while it is empty. It is made once a revision.
func (a *App) catalogueLinkedData(ctx context.Context, base string) (string, error) {
	state, err := a.store.State(ctx)
	if err != nil {
		return "", err
	}
	v, err := a.fits.do(ctx, "linked data|"+base+"|"+state, func(ctx context.Context) (any, error) {
		meta, err := a.metaOfCatalogue(ctx, catalogue.Filter{})
		if err != nil || meta.Measurements == 0 {
			return "", err
		}
		e, err := a.store.Extents(ctx, "")
		if err != nil {
			return "", err
		}
		d := linkedDataset{Context: "https://schema.org/", Type: "Dataset", ID: base + "/", Name: meta.Title, Description: meta.description(), URL: base + "/",
			Version: meta.Version, Modified: meta.At.UTC().Format("2006-01-02"), License: views.LicenceAddress(meta.Licence), Free: true, Keywords: keywords, Variables: linkedVariables(),
			Spatial: &linkedPlace{"Place", linkedArea{"GeoShape", fmt.Sprintf("%g %g %g %g", e.BBox.South, e.BBox.West, e.BBox.North, e.BBox.East)}},
			Distribution: []linkedDownload{
				{"DataDownload", "text/csv", base + "/systems.csv", "Measurement table", "", ""},
				{"DataDownload", "application/geo+json", base + "/systems.geojson", "Systems as points", "", ""},
				{"DataDownload", "application/zip", base + "/systems.zip", "Data package", "", ""},
			}}
		for _, x := range creditedAuthors(meta.Authors, meta.Title) {
			d.Creator = append(d.Creator, linkedPerson{Type: "Person", Name: x.Name})
		}
		return linkedText(d), nil
	})
	if err != nil {
		return "", err
	}
	return v.(string), nil
}
