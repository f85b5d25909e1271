package main

import (
	"context"
	"fmt"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/views"
)

// doubts are what the checks find odd about the accepted measurements of a
// system and about what they say of their own lines, with the reasons they were
// accepted with all the same.
func (a *App) doubts(ctx context.Context, d *catalogue.Detail, lines []views.SystemLine, release string) ([]views.Doubt, error) {
	if release != "" {
		return nil, nil // the checks compare with the catalogue as it is now
	}
	var out []views.Doubt
	for i := range d.Measurements {
		r := &d.Measurements[i]
		if catalogue.PrivateContribution(r.Measurement) != 0 {
			continue
		}
		findings, err := a.store.Check(ctx, *r)
		if err != nil {
			return nil, err
		}
		findings = append(findings, lineFindings(r, d, lines)...)
		if len(findings) == 0 {
			continue
		}
		reasons, err := a.store.Overrides(ctx, r.Measurement)
		if err != nil {
			return nil, err
		}
		for _, f := range findings {
			x := views.Doubt{Measurement: r.Measurement, Column: f.Column, Message: sentence(f.Message, "")}
			if o, ok := reasons[f.Key]; ok {
				x.Reason, x.Who, x.At = o.Reason, o.Who, o.At
			}
			out = append(out, x)
		}
	}
	return out, nil
}

// lineFindings compare a measurement with the line stored with it, or with the
// only line of its system when it is the only measurement.
func lineFindings(r *catalogue.Row, d *catalogue.Detail, lines []views.SystemLine) (out []catalogue.Finding) {
	for _, l := range lines {
		if l.Measured == nil || l.Measurement != r.Measurement && (l.Measurement != "" || len(d.Measurements) > 1) {
			continue
		}
		for _, x := range l.Measured.Disagreements(planform.Recorded{Kind: r.SinuosityKind, Sinuosity: num(r.Sinuosity), SpacingM: num(r.VertexSpacingM)}) {
			f := catalogue.Finding{Column: x.Column, Key: x.Column + "_of_line"}
			if x.Column == "sinuosity" {
				f.Message = fmt.Sprintf("the record says %s, the %s of its stored line is %.3g (%.3g to %.3g with half and double the window and the smoothing)",
					catalogue.FormatNumber(r.Sinuosity), views.ChoiceText(r.SinuosityKind), x.Measured, x.Low, x.High)
			} else {
				f.Message = fmt.Sprintf("the record says %s m, the vertices of its stored line are %.3g m apart (median)", catalogue.FormatNumber(r.VertexSpacingM), x.Measured)
			}
			out = append(out, f)
		}
	}
	return out
}
