package views

import (
	"net/url"
	"slices"
	"strconv"

	"fathombend/catalogue"
)

// privateHref is this page with private= set, or without it.
func (p Page) privateHref(value string) string {
	q := url.Values{}
	for k, v := range p.Query {
		if k != "private" && k != "page" {
			q[k] = slices.Clone(v)
		}
	}
	if value != "" {
		q.Set("private", value)
	}
	if len(q) == 0 {
		return p.Path
	}
	return p.Path + "?" + q.Encode()
}

// privateText says beside a count of rows how many of them are private.
func privateText(n int) string {
	return countText(n, "row is", "rows are") + " private: others do not see " + map[bool]string{true: "it", false: "them"}[n == 1] + ", nor these numbers."
}

// privateRows counts the private measurements of the system and all of them.
func (p SystemPage) privateRows() (private, all int) {
	for _, r := range p.Detail.Measurements {
		if r.Private {
			private++
		}
	}
	return private, len(p.Detail.Measurements)
}

// changeHref is where a measurement is changed: by a proposal, or, private, on
// the page of its own contribution.
func changeHref(r catalogue.Row) string {
	if n := catalogue.PrivateContribution(r.Measurement); n != 0 {
		return "/contribute/" + strconv.FormatInt(n, 10)
	}
	return "/contribute?measurement=" + r.Measurement
}
