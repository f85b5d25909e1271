package views

import (
	"net/url"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/a-h/templ"

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

// Seeing is the part of the form about who sees the row.
type Seeing struct {
	Offered        bool // not for a change to what everybody sees
	Embargo, Until string
	Coarse         bool
	People         string
	Errors         map[string]string
	Row            *catalogue.Hidden // as it is seen now, nil = not at all
}

// SeeingLabel is the label of a field about who sees the row.
func SeeingLabel(field string) string {
	return map[string]string{"embargo": "When others see it", "embargo_until": "Not before the day", "people": "Who sees it beside you meanwhile"}[field]
}

var embargoChoices = [][2]string{{"", "as soon as a curator accepts it"}, {"date", "not before a day"}, {"published", "once I say that it is published"}}

func (s Seeing) invalid(field string) templ.Attributes {
	return invalidField(s.Errors[field] != "", field)
}

func invalidField(bad bool, field string) templ.Attributes {
	if !bad {
		return nil
	}
	return templ.Attributes{"aria-invalid": "true", "aria-errormessage": field + "-error"}
}

// Embargo is the page of an accepted row that others do not see yet.
type Embargo struct {
	Row            catalogue.Hidden
	Typed          *EmbargoTyped // as in the fields
	Refused, Field string
}

// EmbargoTyped is what stands in the fields of the page.
type EmbargoTyped struct{ Until, People string }

func (e Embargo) action() string {
	return "/contribute/" + strconv.FormatInt(e.Row.ID, 10) + "/embargo"
}

func (e Embargo) invalid(field string) templ.Attributes {
	if e.Field != field {
		return nil
	}
	return templ.Attributes{"aria-invalid": "true", "aria-errormessage": "refusal"}
}

func (e Embargo) sentence() string {
	s := "Accepted, and under embargo " + untilText(e.Row) + "."
	if e.Row.StandsFor != "" {
		s += " Meanwhile others see it as " + e.Row.StandsFor + ", with its place rounded to 1 degree."
	} else {
		s += " Meanwhile others do not see it."
	}
	if len(e.Row.People) > 0 {
		s += " You and " + strings.Join(e.Row.People, ", ") + " see it as it is."
	}
	return s
}

func untilText(h catalogue.Hidden) string {
	day, err := time.Parse(time.DateOnly, h.Until)
	if err != nil {
		return "until it is published"
	}
	return "until " + dateText(day)
}

// whereItStands is stateText with who sees the row.
func whereItStands(s Submitted) string {
	switch {
	case s.Hidden == nil:
		return stateText(s.State)
	case s.Hidden.Embargo:
		return "accepted, under embargo " + untilText(*s.Hidden)
	case s.State == "draft":
		return "private row"
	}
	return stateText(s.State) + "; private meanwhile"
}

// AudienceText tells a curator who is to see a row that waits, "" = everyone
// once it is accepted.
func AudienceText(a catalogue.Audience) string {
	if a.Kind != catalogue.AudienceLater {
		return ""
	}
	s := "Accepted, it stays under embargo " + untilText(catalogue.Hidden{Until: a.Until}) + "; "
	if a.Coarse {
		return s + "meanwhile others see it with its place rounded to 1 degree, the name of the system, its source and the sinuosity as they are, and without the name and the ends of the reach, the water depth, the line and the notes."
	}
	return s + "meanwhile others do not see it."
}
