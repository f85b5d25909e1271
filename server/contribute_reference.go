package main

import (
	"context"
	"errors"
	"strings"

	"fathombend/catalogue"
	"fathombend/views"
)

// fillSource reads a pasted BibTeX or RIS entry into the fields of the source.
// A DOI that the catalogue cites already takes the words it is cited with, so
// that the two count as one source.
func (a *App) fillSource(ctx context.Context, r *record) (*views.ReferenceReport, error) {
	out := &views.ReferenceReport{}
	ref, err := catalogue.ReadReference(r.typed.Get("reference"))
	var refused *catalogue.Error
	if errors.As(err, &refused) && refused.Code == catalogue.Invalid {
		out.Error = sentence(refused.Message, refused.Expected)
		return out, nil
	}
	if err != nil {
		return nil, err
	}
	citation, n, err := a.store.CitationOf(ctx, ref.DOI)
	if err != nil {
		return nil, err
	}
	out.Before = r.typed.Get("source")
	text := ref.Text
	if citation != "" {
		out.Known, out.Measurements, text = citation != ref.Text, n, citation
	}
	if out.Before == text {
		out.Before = ""
	}
	r.typed.Set("source", text)
	r.typed.Set("source_doi", ref.DOI)
	out.Filled = []string{"source", "source_doi"}
	if ref.DOI == "" {
		out.Filled = out.Filled[:1]
		out.NoDOI = true
		if strings.Contains(strings.ToLower(r.typed.Get("reference")), "doi") {
			out.BadDOI = true
		}
	}
	return out, nil
}
