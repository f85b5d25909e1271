package views

import (
	"strings"

	"fathombend/catalogue"
)

// Citation is how a release is cited.
type Citation struct {
	Text   string
	BibTeX string
}

// readingLine is one way to read a file, in two lines at most.
type readingLine struct{ name, code string }

// readings are the ways to read the CSV at an address. An address made by this
// program holds no quote, backslash, blank or dollar sign: its query is
// escaped, so it stands between double quotes in all of them.
func readings(address string) []readingLine {
	return []readingLine{
		{"R", `rows <- read.csv("` + address + `")` + "\n" + `summary(rows)`},
		{"Python", `import pandas` + "\n" + `rows = pandas.read_csv("` + address + `")`},
		{"Command line", `curl -fsS -o rows.csv "` + address + `"`},
	}
}

// licenceNames are the licences of releases as people know them, with the
// address of their text.
var licenceNames = map[string][2]string{
	"CC-BY-4.0": {"CC BY 4.0", "https://creativecommons.org/licenses/by/4.0/"},
	"CC0-1.0":   {"CC0 1.0", "https://creativecommons.org/publicdomain/zero/1.0/"},
}

// LicenceName is a licence as people know it.
func LicenceName(spdx string) string {
	if n, ok := licenceNames[spdx]; ok {
		return n[0]
	}
	return spdx
}

// LicenceAddress is where the text of a licence stands.
func LicenceAddress(spdx string) string { return licenceNames[spdx][1] }

// AuthorList joins the credit lines of a release; after most of them the rest
// is counted. 0 names all.
func AuthorList(authors []catalogue.Author, most int) string {
	var names []string
	for i, a := range authors {
		if most > 0 && i == most && len(authors) > most+1 {
			names = append(names, "and "+countText(len(authors)-most, "other", "others"))
			break
		}
		names = append(names, a.Name)
	}
	return strings.Join(names, ", ")
}
