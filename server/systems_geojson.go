package main

import (
	"encoding/json"
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// feature is a GeoJSON feature (RFC 7946).
type feature struct {
	Type       string        `json:"type"`
	ID         string        `json:"id"`
	Geometry   any           `json:"geometry"`
	Properties orderedObject `json:"properties"`
}

type featureCollection struct {
	Type         string    `json:"type"`
	Matched      int       `json:"numberMatched"`
	Returned     int       `json:"numberReturned"`
	Features     []feature `json:"features"`
	InventedRows int       `json:"invented_rows"`
	PrivateRows  int       `json:"private_rows,omitempty"`
}

// count adds a row to the counts of what is not everybody's survey.
func (f *featureCollection) count(r *catalogue.Row) {
	if r.Invented {
		f.InventedRows++
	}
	if r.Private {
		f.PrivateRows++
	}
}

type pointGeometry struct {
	Type        string     `json:"type"`
	Coordinates [2]float64 `json:"coordinates"`
}

// systemsGeoJSON is one point a system, where its best measurement was made,
// with that measurement's columns. Without page and per_page it has all, one
// after the other, in the order of acceptance or of sort.
func (a *App) systemsGeoJSON(c echo.Context) error {
	q, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	if q.Get("page") != "" || q.Get("per_page") != "" {
		return a.systemsGeoJSONPage(c, f)
	}
	matched, err := a.store.CountSystems(ctx, f)
	if err != nil {
		return err
	}
	if done, err := a.download(c, "application/geo+json", "", f.Release); done || err != nil {
		return err
	}
	return a.stream(c, func(w *patientWriter) error {
		b := append([]byte(`{"type":"FeatureCollection","numberMatched":`), itoa(matched)...)
		b = append(b, `,"features":[`...)
		returned, of := 0, featureCollection{}
		err := a.store.EachSystem(ctx, f, func(r catalogue.Row) error {
			if returned > 0 {
				b = append(b, ',')
			}
			returned++
			of.count(&r)
			b = appendFeature(b, r.System, &r)
			if len(b) < 32<<10 {
				return nil
			}
			_, err := w.Write(b)
			b = b[:0]
			return err
		})
		if err != nil {
			return err
		}
		b = append(b, `],"numberReturned":`+itoa(returned)+`,"invented_rows":`+itoa(of.InventedRows)...)
		if of.PrivateRows > 0 {
			b = append(b, `,"private_rows":`+itoa(of.PrivateRows)...)
		}
		b = append(b, "}\n"...)
		_, err = w.Write(b)
		return err
	})
}

// appendFeature writes pointFeature as json.Marshal would.
func appendFeature(b []byte, id string, r *catalogue.Row) []byte {
	b = appendText(append(b, `{"type":"Feature","id":`...), id)
	b = append(b, `,"geometry":`...)
	if r.LatitudeDeg.Valid && r.LongitudeDeg.Valid {
		b = appendFloat(append(b, `{"type":"Point","coordinates":[`...), catalogue.NormalLongitude(r.LongitudeDeg.V))
		b = append(appendFloat(append(b, ','), r.LatitudeDeg.V), "]}"...)
	} else {
		b = append(b, "null"...)
	}
	return append(appendRow(append(b, `,"properties":{`...), r), "}}"...)
}

// systemsGeoJSONPage is one page of the table.
func (a *App) systemsGeoJSONPage(c echo.Context, f catalogue.Filter) error {
	systems, total, err := a.store.Systems(c.Request().Context(), f)
	if err != nil {
		return err
	}
	out := featureCollection{Type: "FeatureCollection", Matched: total, Returned: len(systems), Features: []feature{}}
	for _, s := range systems {
		best := s.Best()
		out.count(&best)
		out.Features = append(out.Features, pointFeature(s.Slug, &best))
	}
	return writeGeoJSON(c, out)
}

// pointFeature is a measurement as a point; an empty geometry where it has no
// place.
func pointFeature(id string, r *catalogue.Row) feature {
	f := feature{Type: "Feature", ID: id, Properties: rowJSON(r)}
	if r.LatitudeDeg.Valid && r.LongitudeDeg.Valid {
		lon := catalogue.NormalLongitude(r.LongitudeDeg.V)
		f.Geometry = pointGeometry{"Point", [2]float64{lon, r.LatitudeDeg.V}}
	}
	return f
}

func writeGeoJSON(c echo.Context, v any) error {
	b, err := json.Marshal(finite(v))
	if err != nil {
		return err
	}
	return c.Blob(http.StatusOK, "application/geo+json", append(b, '\n'))
}
