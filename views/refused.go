package views

import (
	"net/url"
	"slices"
	"strings"

	"github.com/a-h/templ"

	"fathombend/catalogue"
)

// Refusal is one value of an address or a form that cannot be used.
type Refusal struct {
	Name     string // of the parameter, "" = the question as a whole
	Message  string
	Expected string
}

// sentence is the refusal as it stands beside its field.
func (r Refusal) sentence() string {
	s := strings.TrimSuffix(r.Message, ".") + "."
	if r.Expected != "" {
		s += " Expected: " + strings.TrimSuffix(r.Expected, ".") + "."
	}
	return upperFirst(s)
}

// label is what the refused field is called on the page, with its name in the
// address.
func (r Refusal) label() string {
	text := ""
	if base, ok := strings.CutSuffix(r.Name, "_min"); ok && isRange(base) {
		text = rangeLabel(base) + ", from"
	} else if base, ok := strings.CutSuffix(r.Name, "_max"); ok && isRange(base) {
		text = rangeLabel(base) + ", to"
	} else if slices.Contains(catalogue.ChoiceParameters, r.Name) {
		text = ColumnLabel(r.Name)
	} else if t, ok := map[string]string{"q": "Words", "bbox": "Box", "release": "Release", "sort": "Order", "page": "Page", "per_page": "Systems on a page", TargetsField: "CSV of targets"}[r.Name]; ok {
		text = t
	}
	if text == "" {
		return r.Name
	}
	return text + " (" + r.Name + ")"
}

func isRange(base string) bool {
	return slices.ContainsFunc(filterRanges(catalogue.Filter{}), func(r filterRange) bool { return r.name == base })
}

// filterFieldID is the id of the control of a filter parameter, "" where the
// filter has none.
func filterFieldID(name string) string {
	base := strings.TrimSuffix(strings.TrimSuffix(name, "_min"), "_max")
	switch {
	case name == "q", name == "bbox", name == "release", isRange(base) && base != name, slices.Contains(catalogue.ChoiceParameters, name):
		return "f-" + strings.ReplaceAll(name, "_", "-")
	}
	return ""
}

// refused is the sentence beside the field of a parameter, "" when nothing is
// wrong with it.
func (p Page) refused(name string) string {
	for _, r := range p.Refusals {
		if r.Name == name {
			return r.sentence()
		}
	}
	return ""
}

// typed is what stands in a filter field: on a page that was refused, what was
// typed, else the value in force.
func (p Page) typed(name, inForce string) string {
	if p.Refusals == nil || !p.TypedFilter.Has(name) {
		return inForce
	}
	return p.TypedFilter.Get(name)
}

// ticked says whether a box of the filter is chosen.
func (p Page) ticked(column, value string, inForce []string) bool {
	if p.Refusals == nil {
		return holds(inForce, value)
	}
	return holds(p.TypedFilter[column], value)
}

// numberKind is the type of the input of a number: once refused it takes any
// text, or a browser would show nothing of what was typed.
func (p Page) numberKind(name string) string {
	if p.refused(name) != "" {
		return "text"
	}
	return "number"
}

// described are the ids of what is said beside a field of a page's settings.
func (p Page) described(name, hint string) templ.Attributes {
	e := p.refused(name)
	if e == "" && hint == "" {
		return nil
	}
	out := templ.Attributes{"aria-describedby": describedBy(fieldID(name), hint, e)}
	if e != "" {
		out["aria-invalid"] = "true"
	}
	return out
}

// invalid are the attributes of a control whose value was refused.
func (p Page) invalid(name string) templ.Attributes {
	if p.refused(name) == "" {
		return nil
	}
	return templ.Attributes{"aria-invalid": "true", "aria-describedby": filterFieldID(name) + "-error"}
}

// filterRefused says whether a part of the filter was refused, so that it is
// not left folded away.
func (p Page) filterRefused() bool {
	return slices.ContainsFunc(p.Refusals, func(r Refusal) bool { return filterFieldID(r.Name) != "" })
}

// typedChoices are the boxes of a facet: those counted in the catalogue and, on
// a page that was refused, any other that was asked for.
func (p Page) typedChoices(x catalogue.Facet) []catalogue.FacetValue {
	out := slices.Clone(x.Values)
	if p.Refusals == nil {
		return out
	}
	for _, v := range p.TypedFilter[x.Column] {
		if v != "" && !slices.ContainsFunc(out, func(f catalogue.FacetValue) bool { return f.Value == v }) {
			out = append(out, catalogue.FacetValue{Value: v})
		}
	}
	return out
}

// FilterRefused is a page whose address cannot be answered: the question, what
// is wrong, and the filter with everything typed still in it.
type FilterRefused struct {
	Page
	Question string
	Action   string // of the button
	Facets   []catalogue.Facet
	Filter   catalogue.Filter // what of it can be read
	Hidden   url.Values       // the page's own settings, carried along
}

// ownRefusals are the refused settings of the page itself: each gets a field
// of its own on the refused page.
func (p FilterRefused) ownRefusals() []Refusal {
	var out []Refusal
	for _, r := range p.Refusals {
		if holds(p.Fields, r.Name) {
			out = append(out, r)
		}
	}
	return out
}
