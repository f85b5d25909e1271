package main

import (
	"encoding/json"
	"net/http"
	"strconv"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

type sourceJSON struct {
	Citation string `json:"citation"`
	DOI      string `json:"doi"`
}

type centrelineJSON struct {
	ID          int64           `json:"id"`
	Measurement string          `json:"measurement"`
	Geometry    json.RawMessage `json:"geometry"`
	Settings    json.RawMessage `json:"settings"`
	Sinuosities []float64       `json:"window_sinuosities"`
}

type revisionJSON struct {
	Revision int64  `json:"revision"`
	At       string `json:"at"`
	Who      string `json:"who"`
	Why      string `json:"why"`
	Action   string `json:"action"`
	Record   string `json:"record"`
	Field    string `json:"field"`
	Before   string `json:"before"`
	After    string `json:"after"`
}

type systemDetailJSON struct {
	systemJSON
	Revision     int              `json:"revision"`
	InventedRows int              `json:"invented_rows"`
	PrivateRows  int              `json:"private_rows,omitempty"`
	Sources      []sourceJSON     `json:"sources"`
	Centrelines  []centrelineJSON `json:"centrelines"`
	History      []revisionJSON   `json:"history"`
}

func (a *App) systemJSON(c echo.Context, d *catalogue.Detail) error {
	out := systemDetailJSON{systemJSON: systemJSON{Slug: d.Slug, Name: d.Name}, Revision: d.Revision}
	for _, r := range d.Measurements {
		if r.Invented {
			out.Invented = true
			out.InventedRows++
		}
		if r.Private {
			out.PrivateRows++
		}
		out.Measurements = append(out.Measurements, rowJSON(&r))
	}
	for _, s := range d.Sources {
		out.Sources = append(out.Sources, sourceJSON{s.Citation, s.DOI})
	}
	for _, l := range d.Centrelines {
		out.Centrelines = append(out.Centrelines, centrelineJSON{l.ID, l.Measurement, rawJSON(l.Line), rawJSON(l.Settings), l.Sinuosities})
	}
	out.History = revisionsJSON(d.History)
	return writeJSON(c, http.StatusOK, out)
}

// rawJSON passes stored JSON through; anything else is null.
func rawJSON(s string) json.RawMessage {
	if s == "" || !json.Valid([]byte(s)) {
		return json.RawMessage("null")
	}
	return json.RawMessage(s)
}

// systemFeatures are the measurements of a system as points and its lines.
func systemFeatures(d *catalogue.Detail) featureCollection {
	out := featureCollection{Type: "FeatureCollection"}
	byID := map[string]*catalogue.Row{}
	for i := range d.Measurements {
		r := &d.Measurements[i]
		byID[r.Measurement] = r
		out.count(r)
		out.Features = append(out.Features, pointFeature(r.Measurement, r))
	}
	for _, l := range d.Centrelines {
		f := feature{Type: "Feature", ID: "centreline-" + strconv.FormatInt(l.ID, 10), Geometry: rawJSON(l.Line), Properties: orderedObject{
			{"system", d.Slug}, {"system_name", d.Name}, {"measurement", l.Measurement},
			{"window_sinuosities", finiteValue(l.Sinuosities)},
		}}
		if r := byID[l.Measurement]; r != nil {
			f.Properties = append(append(f.Properties, orderedField{"invented", r.Invented}), seenMarks(r)...)
		}
		out.Features = append(out.Features, f)
	}
	out.Matched, out.Returned = len(out.Features), len(out.Features)
	return out
}
