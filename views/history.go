package views

import (
	"net/url"
	"strconv"
	"strings"

	"fathombend/catalogue"
)

// HistoryPage is all that was recorded about one system, or about one record
// or field of it.
type HistoryPage struct {
	Page
	Slug, Name      string
	Gone            *catalogue.Gone // the system is not in the catalogue now
	Records, Fields []string        // what can be chosen
	Record, Field   string          // what is chosen, "" = all
	Revisions       []catalogue.Revision
	At              int64 // show the record as it was after this revision, 0 = none
	ThenRecord      string
	ThenGone        bool                    // that record is withdrawn now
	Then            []catalogue.FieldChange // Before = then, After = now
	Curates         bool
	Why, Refusal    string // typed, and what was wrong
	Refused         string // the field that was wrong
}

// recordText is a record as a page names it.
func recordText(record string) string {
	kind, name, _ := strings.Cut(record, ":")
	switch kind {
	case "system":
		return "the system " + name
	case "centreline":
		return "line " + name
	}
	return name
}

// counted says how many changes the page lists, and of what.
func (p HistoryPage) counted() string {
	s := countOf(len(p.Revisions), "recorded change", "recorded changes")
	if p.Record != "" {
		s += " of " + recordText(p.Record)
	}
	if p.Field != "" {
		s += ", field " + FieldLabel(p.Field)
	}
	return s
}

func (p HistoryPage) address(at int64) string {
	q := url.Values{}
	if p.Record != "" {
		q.Set("record", p.Record)
	}
	if p.Field != "" {
		q.Set("field", p.Field)
	}
	if at != 0 {
		q.Set("at", strconv.FormatInt(at, 10))
	}
	return systemAddress(p.Slug) + "/history?" + q.Encode()
}

// canShow says whether a record can be shown as it was.
func canShow(v catalogue.Revision) bool { return !strings.HasPrefix(v.Record, "centreline:") }

// happened is what a revision did, in words.
func happened(v catalogue.Revision) string {
	switch {
	case v.Field == "merged_into" && v.Action == "withdraw":
		return "merged"
	case v.Field == "merged_into":
		return "parted again"
	case v.Action == "create":
		return "added"
	case v.Action == "withdraw":
		return "withdrawn"
	case v.Action == "accept":
		return "put back"
	}
	return FieldLabel(v.Field)
}

// afterText is the value after a revision; that of a withdrawal names what
// stands for it.
func afterText(v catalogue.Revision) string {
	if v.Action == "withdraw" && v.Field == "" && v.After != "" {
		return v.After + " stands for it"
	}
	return v.After
}

// WithdrawalForm proposes that a measurement leaves the catalogue.
type WithdrawalForm struct {
	Row          catalogue.Row
	Groups       []RecordGroup
	Unsaid       []string
	Only         bool // the system has no other
	Why, Instead string
	Errors       map[string]string
}

func measurementAddress(id string) string { return "/measurements/" + url.PathEscape(id) }
