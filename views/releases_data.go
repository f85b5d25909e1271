package views

import (
	"strconv"
	"strings"

	"github.com/a-h/templ"

	"fathombend/catalogue"
)

// DictionaryPage is what each column means, with the ways to take the table.
type DictionaryPage struct {
	Page
	Groups []DictionaryGroup
}

// DictionaryGroup is one group of columns.
type DictionaryGroup struct {
	Name    string
	Columns []catalogue.Column
}

// SourcesPage lists the sources under a filter.
type SourcesPage struct {
	Page
	Filter      catalogue.Filter
	Sources     []catalogue.SourceUse
	BibTeX, RIS string
}

// allowedText says what a cell may hold, for the dictionary.
func allowedText(c catalogue.Column) string {
	switch {
	case c.Kind == catalogue.KindChoice:
		return strings.Join(c.Choices, ", ")
	case !c.Numeric():
		return "text, at most " + strconv.Itoa(c.MaxLen) + " characters"
	}
	what := "number"
	if c.Kind == catalogue.KindCount {
		what = "whole number"
	}
	lo, hi := strconv.FormatFloat(c.Min, 'g', -1, 64), strconv.FormatFloat(c.Max, 'g', -1, 64)
	switch {
	case c.Open:
		return what + " above " + lo
	case c.Min > -1e11 && c.Max < 1e8:
		return what + ", " + trueMinus(lo) + " to " + trueMinus(hi)
	case c.Min > -1e11:
		return what + ", " + lo + " or more"
	}
	return what
}

// emptyMeans says what an empty cell means.
func emptyMeans(c catalogue.Column) string {
	switch {
	case c.Default != "":
		return c.Default
	case c.Required:
		return "not allowed"
	}
	return "not given"
}

// measurements counts those of all the sources listed.
func (p SourcesPage) measurements() (n int) {
	for _, s := range p.Sources {
		n += s.Measurements
	}
	return n
}

// systemsOf is the table of the systems measured in a source.
func (p SourcesPage) systemsOf(s catalogue.SourceUse) templ.SafeURL {
	q := p.Filter.Values()
	q["source"] = []string{s.Citation}
	return templ.SafeURL("/systems?" + q.Encode())
}

// FirstUpper begins a text with a capital.
func FirstUpper(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}
