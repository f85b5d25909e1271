package main

import (
	"context"
	"net/http"
	"net/url"
	"slices"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// OGC API - Features, Part 1: Core (OGC 17-069r4), read only, in GeoJSON and
// WGS84 longitude and latitude.

const crs84 = "http://www.opengis.net/def/crs/OGC/1.3/CRS84"

var featureConformance = []string{
	"http://www.opengis.net/spec/ogcapi-features-1/1.0/conf/core",
	"http://www.opengis.net/spec/ogcapi-features-1/1.0/conf/oas30",
	"http://www.opengis.net/spec/ogcapi-features-1/1.0/conf/geojson",
}

// featureNoun is one collection.
type featureNoun struct {
	id, title, description string
	page                   func(context.Context, catalogue.FeatureQuery) (featurePage, error)
	count                  func(context.Context, catalogue.FeatureQuery) (int, error)
	one                    func(c echo.Context, id, release string) (feature, error)
}

// featurePage is a piece of a collection as features, with the positions of the
// first and the last and whether there is more in the direction of reading.
type featurePage struct {
	features    []byte // JSON, separated by commas
	returned    int
	first, last int64
	more        bool
}

// featureNouns are the collections in the order in which they are listed.
func (a *App) featureNouns() []featureNoun {
	return []featureNoun{
		{"systems", "Channel systems", "One point a system, where its best-graded, then newest measurement was made, with the columns of that measurement.",
			a.systemFeatures, a.countSystems, a.systemFeature},
		{"measurements", "Measurements", "One point a measurement, with all its columns.",
			a.measurementFeatures, a.countMeasurements, a.measurementFeature},
		{"centrelines", "Centrelines", "The stored lines, upstream to downstream; third coordinate elevation in m, up positive. A line that crosses the antimeridian comes in parts.",
			a.lineFeatures, a.store.CountLines, a.lineFeature},
	}
}

func (a *App) routesFeatures(e *echo.Echo) {
	get(e, "/features", a.featuresLanding)
	get(e, "/features/", a.featuresLanding)
	get(e, "/features/conformance", a.featuresConformance)
	get(e, "/features/api", a.openAPI)
	get(e, "/features/collections", a.featuresCollections)
	get(e, "/features/collections/:collection", a.featuresCollection)
	get(e, "/features/collections/:collection/items", a.featureItems)
	get(e, "/features/collections/:collection/items/:id", a.featureItem)
}

type featureLink struct {
	Href  string `json:"href"`
	Rel   string `json:"rel"`
	Type  string `json:"type,omitempty"`
	Title string `json:"title,omitempty"`
}

// The kinds of document that are linked to.
const (
	jsonType    = "application/json"
	geoJSONType = "application/geo+json"
	openAPIType = "application/vnd.oai.openapi+json;version=3.0"
)

// featureParameters refuses every parameter but those allowed and f, which may
// ask for JSON, the only form there is.
func featureParameters(c echo.Context, lists ...[]string) (url.Values, error) {
	q, err := params(c)
	if err != nil {
		return nil, err
	}
	if err := allow(q, append(lists, []string{"f"})...); err != nil {
		return nil, err
	}
	if v := q.Get("f"); v != "" && v != "json" && v != "geojson" {
		return nil, &badInput{"f", "only one format is offered here. Expected json"}
	}
	q.Del("f")
	return q, nil
}

func (a *App) featuresLanding(c echo.Context) error {
	if _, err := featureParameters(c); err != nil {
		return err
	}
	base := a.baseAddress(c)
	title, err := a.store.Title(c.Request().Context())
	if err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, struct {
		Title       string        `json:"title"`
		Description string        `json:"description"`
		Links       []featureLink `json:"links"`
	}{title, "Channel systems, their measurements and their centrelines. " + a.inventedSentence(c.Request().Context()), []featureLink{
		{base + "/features", "self", jsonType, "This document"},
		{base + "/openapi.json", "service-desc", openAPIType, "The addresses described for programs"},
		{base + "/dictionary", "service-doc", "text/html", "The columns and formats described for people"},
		{base + "/features/conformance", "conformance", jsonType, "What this service conforms to"},
		{base + "/features/collections", "data", jsonType, "The collections"},
	}})
}

// inventedSentence warns of invented rows, "" where there are none.
func (a *App) inventedSentence(ctx context.Context) string {
	if n := a.invented(ctx); n > 0 {
		return itoa(n) + " measurements are invented for a demonstration: their property invented is true."
	}
	return ""
}

func (a *App) featuresConformance(c echo.Context) error {
	if _, err := featureParameters(c); err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, map[string]any{"conformsTo": featureConformance})
}

type featureExtent struct {
	Spatial  featureSpatial  `json:"spatial"`
	Temporal featureTemporal `json:"temporal"`
}

type featureSpatial struct {
	BBox [][4]float64 `json:"bbox"`
	CRS  string       `json:"crs"`
}

// featureTemporal is when the records were accepted or last changed.
type featureTemporal struct {
	Interval [][2]*string `json:"interval"`
	TRS      string       `json:"trs"`
}

type collectionJSON struct {
	ID          string         `json:"id"`
	Title       string         `json:"title"`
	Description string         `json:"description"`
	Extent      *featureExtent `json:"extent,omitempty"`
	ItemType    string         `json:"itemType"`
	CRS         []string       `json:"crs"`
	Links       []featureLink  `json:"links"`
}

func (a *App) collectionAnswer(c echo.Context, n featureNoun, release string) (collectionJSON, error) {
	base := a.baseAddress(c)
	q := url.Values{}
	if release != "" {
		q.Set("release", release)
	}
	out := collectionJSON{ID: n.id, Title: n.title, Description: n.description, ItemType: "feature", CRS: []string{crs84}, Links: []featureLink{
		{base + withQuery("/features/collections/"+n.id, q), "self", jsonType, "This collection"},
		{base + withQuery("/features/collections/"+n.id+"/items", q), "items", geoJSONType, n.title},
		{base + "/dictionary", "describedby", "text/html", "What each property means"},
		{base + "/releases", "license", "text/html", "Licences: each row carries its own; those of the releases"},
	}}
	e, err := a.extents(c.Request().Context(), n, release)
	if err != nil || e.Count == 0 {
		return out, err
	}
	from, to := e.From.UTC().Format("2006-01-02T15:04:05Z"), e.To.UTC().Format("2006-01-02T15:04:05Z")
	out.Extent = &featureExtent{featureSpatial{[][4]float64{{e.BBox.West, e.BBox.South, e.BBox.East, e.BBox.North}}, crs84},
		featureTemporal{[][2]*string{{&from, &to}}, "http://www.opengis.net/def/uom/ISO-8601/0/Gregorian"}}
	return out, nil
}

// extents are those of a collection, of the catalogue or of a release, once a
// revision.
func (a *App) extents(ctx context.Context, n featureNoun, release string) (catalogue.Extent, error) {
	state, err := a.store.State(ctx)
	if err != nil {
		return catalogue.Extent{}, err
	}
	find, kind := a.store.Extents, "points"
	if n.id == "centrelines" {
		find, kind = a.store.LineExtents, "lines"
	}
	v, err := a.fits.do(ctx, "extents|"+kind+"|"+release+"|"+state, func(ctx context.Context) (any, error) { return find(ctx, release) })
	if err != nil {
		return catalogue.Extent{}, err
	}
	return v.(catalogue.Extent), nil
}

// featureRelease reads the release a metadata document is about.
func featureRelease(c echo.Context) (string, error) {
	q, err := featureParameters(c, []string{"release"})
	if err != nil {
		return "", err
	}
	f, err := filterOf(q)
	return f.Release, err
}

func (a *App) featuresCollections(c echo.Context) error {
	release, err := featureRelease(c)
	if err != nil {
		return err
	}
	base := a.baseAddress(c)
	out := struct {
		Links       []featureLink    `json:"links"`
		Collections []collectionJSON `json:"collections"`
	}{Links: []featureLink{{base + "/features/collections", "self", jsonType, "The collections"}}}
	for _, n := range a.featureNouns() {
		j, err := a.collectionAnswer(c, n, release)
		if err != nil {
			return err
		}
		out.Collections = append(out.Collections, j)
	}
	return writeJSON(c, http.StatusOK, out)
}

// collection finds the collection of the address.
func (a *App) collection(c echo.Context) (featureNoun, error) {
	id := c.Param("collection")
	nouns := a.featureNouns()
	i := slices.IndexFunc(nouns, func(n featureNoun) bool { return n.id == id })
	if i < 0 {
		var ids []string
		for _, n := range nouns {
			ids = append(ids, n.id)
		}
		return featureNoun{}, echo.NewHTTPError(http.StatusNotFound, "There is no such collection. There are: "+strings.Join(ids, ", ")+".")
	}
	return nouns[i], nil
}

func (a *App) featuresCollection(c echo.Context) error {
	n, err := a.collection(c)
	if err != nil {
		return err
	}
	release, err := featureRelease(c)
	if err != nil {
		return err
	}
	j, err := a.collectionAnswer(c, n, release)
	if err != nil {
		return err
	}
	return writeJSON(c, http.StatusOK, j)
}
