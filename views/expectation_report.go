package views

import (
	"slices"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats/earth"
)

// ExpectationReport is a report on one target or a few, made to be printed.
type ExpectationReport struct {
	Page
	Targets []ExpectationPage
	Filter  catalogue.Filter
	Sources []ReportSource // of the training rows
	Credits []earth.Credit // of the built-in tables
	Version string
	Posted  bool
}

// ReportSource is one paper or survey with the rows it gave.
type ReportSource struct {
	Citation, DOI string
	Rows          int
}

func (s ReportSource) text() string {
	t := strings.TrimSuffix(strings.TrimSpace(s.Citation), ".")
	if s.DOI != "" {
		t += ", doi " + s.DOI
	}
	return t + " (" + countText(s.Rows, "row", "rows") + ")"
}

// reportInput is one input of a target as it was given.
type reportInput struct{ Name, Value string }

// inputs lists what was given of a target, in the order of the form.
func (p ExpectationPage) inputs() []reportInput {
	var out []reportInput
	for _, c := range p.Columns {
		if v := strings.TrimSpace(p.Query.Get(c.Name)); v != "" && !c.Out {
			if c.Unit != "" && c.Unit != "1" {
				v += " (" + c.Unit + ")"
			}
			out = append(out, reportInput{c.Name, v})
		}
	}
	return out
}

// settings lists the settings of an answer by name.
func (p ExpectationPage) settings() []reportInput {
	if p.Result == nil {
		return nil
	}
	names := make([]string, 0, len(p.Result.Settings))
	for n := range p.Result.Settings {
		names = append(names, n)
	}
	slices.Sort(names)
	var out []reportInput
	for _, n := range names {
		if v := settingText(p.Result.Settings[n]); v != "" {
			out = append(out, reportInput{strings.ReplaceAll(n, "_", " "), v})
		}
	}
	return out
}

// filterInputs lists the filter of the training rows.
func (r ExpectationReport) filterInputs() []reportInput {
	q := r.Filter.Values()
	out := []reportInput{}
	for _, n := range sortedNames(q) {
		out = append(out, reportInput{n, strings.Join(q[n], ", ")})
	}
	if len(r.Filter.Choices["kind"]) == 0 {
		out = append(out, reportInput{"kind", "submarine (unless told otherwise)"})
	}
	return out
}

func (r ExpectationReport) title() string {
	if len(r.Targets) == 1 {
		return r.Targets[0].question()
	}
	return "Expected planform of " + countText(len(r.Targets), "target", "targets")
}
