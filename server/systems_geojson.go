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
	InventedRows int       `json:"invented_rows"`
	Features     []feature `json:"features"`
}

type pointGeometry struct {
	Type        string     `json:"type"`
	Coordinates [2]float64 `json:"coordinates"`
}

// systemsGeoJSON is one point a system, where its best measurement was made,
// with that measurement's columns. Without page and per_page it has all.
func (a *App) systemsGeoJSON(c echo.Context) error {
	q, f, err := systemsQuestion(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	all := q.Get("page") == "" && q.Get("per_page") == ""
	if all {
		f.PerPage = catalogue.MaxPerPage
	}
	out := featureCollection{Type: "FeatureCollection"}
	for f.Page = max(f.Page, 1); ; f.Page++ {
		systems, total, err := a.store.Systems(ctx, f)
		if err != nil {
			return err
		}
		out.Matched = total
		for _, s := range systems {
			best := s.Best()
			if best.Invented {
				out.InventedRows++
			}
			out.Features = append(out.Features, pointFeature(s.Slug, &best))
		}
		if !all || len(systems) == 0 || len(out.Features) >= total {
			break
		}
	}
	out.Returned = len(out.Features)
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
