package main

import (
	"context"
	"encoding/json"
	"fmt"
	"io"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"time"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// How many features an answer holds when nothing is said, and at most: more is
// asked for in pieces, by the links.
const (
	defaultFeatures = 100
	maxFeatures     = 10000
)

// itemParameters are those of the collections beside the filter's. A filter's
// page, per_page and sort do not fit pieces.
var itemParameters = []string{"limit", "datetime", "after", "before"}

func itemFilterParameters() []string {
	var out []string
	for _, p := range catalogue.FilterParameters {
		if p != "private" && p != "sort" && p != "page" && p != "per_page" {
			out = append(out, p)
		}
	}
	return out
}

// itemQuestion reads what is asked of a collection.
func itemQuestion(c echo.Context) (url.Values, catalogue.FeatureQuery, error) {
	f := catalogue.FeatureQuery{Limit: defaultFeatures}
	q, err := featureParameters(c, itemParameters, itemFilterParameters())
	if err != nil {
		return nil, f, err
	}
	if f.BBox, err = featureBox(q.Get("bbox")); err != nil {
		return nil, f, err
	}
	box := f.BBox
	rest := url.Values{}
	for k, v := range q {
		if k != "bbox" {
			rest[k] = v
		}
	}
	if f.Filter, err = filterOf(rest); err != nil {
		return nil, f, err
	}
	f.BBox = box
	if f.From, f.To, err = featureTime(q.Get("datetime")); err != nil {
		return nil, f, err
	}
	if v := q.Get("limit"); v != "" {
		n, err := strconv.Atoi(v)
		if err != nil || n < 1 {
			return nil, f, &badInput{"limit", strconv.Quote(clip(v)) + " is not allowed. Expected a whole number from 1; at most " + itoa(maxFeatures) + " come in one answer"}
		}
		f.Limit = min(n, maxFeatures) // more than the most is no error: requirement fc-limit-response-1
	}
	for name, into := range map[string]*int64{"after": &f.After, "before": &f.Before} {
		if v := q.Get(name); v != "" {
			if *into, err = strconv.ParseInt(v, 10, 64); err != nil || *into < 1 {
				return nil, f, &badInput{name, strconv.Quote(clip(v)) + " is not a position. Expected none: follow the links next and prev instead of making up this parameter"}
			}
		}
	}
	for _, name := range []string{"bbox", "datetime", "limit", "after", "before"} {
		if len(q[name]) > 1 {
			return nil, f, &badInput{name, "it is given more than once. Expected once"}
		}
	}
	return q, f, nil
}

// featureBox reads bbox with four numbers, or six: then the second and fifth
// pair, heights, are read and play no part, as everything here lies on a
// surface.
func featureBox(v string) (*catalogue.BBox, error) {
	if v == "" {
		return nil, nil
	}
	if parts := strings.Split(v, ","); len(parts) == 6 {
		for _, i := range []int{2, 5} {
			if x, err := strconv.ParseFloat(strings.TrimSpace(parts[i]), 64); err != nil || !isFinite(x) {
				return nil, &badInput{"bbox", strconv.Quote(clip(parts[i])) + " is not a height. Expected west,south,low,east,north,high"}
			}
		}
		v = strings.Join([]string{parts[0], parts[1], parts[3], parts[4]}, ",")
	}
	return catalogue.ParseBBox(v)
}

// featureTime reads a date-time of RFC 3339, or an interval of two with a slash
// between, either of which may be open (".." or empty).
func featureTime(v string) (from, to time.Time, err error) {
	if v == "" {
		return from, to, nil
	}
	bad := func(part string) error {
		return &badInput{"datetime", strconv.Quote(clip(part)) + " is not a time. Expected RFC 3339, as 2025-03-01T00:00:00Z, or an interval A/B, ../B or A/..; it selects by when a record was accepted or last changed"}
	}
	read := func(part string, end bool) (time.Time, error) {
		if part == "" || part == ".." {
			return time.Time{}, nil
		}
		if t, err := time.Parse(time.RFC3339, part); err == nil {
			return t, nil
		}
		// A whole day: not asked for by the standard, and what people type.
		t, err := time.Parse("2006-01-02", part)
		if err != nil || t.Year() < 1 {
			return t, bad(part)
		}
		if end {
			t = t.Add(24*time.Hour - time.Second)
		}
		return t, nil
	}
	first, last, interval := strings.Cut(v, "/")
	if !interval {
		last = first
		if first == ".." {
			return from, to, bad(v)
		}
	}
	if from, err = read(first, false); err != nil {
		return from, to, err
	}
	if to, err = read(last, true); err != nil {
		return from, to, err
	}
	if from.IsZero() && to.IsZero() {
		return from, to, bad(v)
	}
	if !from.IsZero() && !to.IsZero() && from.After(to) {
		return from, to, &badInput{"datetime", "the interval ends before it begins. Expected begin/end"}
	}
	return from, to, nil
}

// featureItems is a piece of a collection.
func (a *App) featureItems(c echo.Context) error {
	n, err := a.collection(c)
	if err != nil {
		return err
	}
	q, f, err := itemQuestion(c)
	if err != nil {
		return err
	}
	ctx := c.Request().Context()
	matched, err := a.matched(ctx, n, f)
	if err != nil {
		return err
	}
	if done, err := a.download(c, geoJSONType, "", f.Release); done || err != nil {
		return err
	}
	page, err := n.page(ctx, f)
	if err != nil {
		return err
	}
	links, err := json.Marshal(a.itemLinks(c, n, q, f, page))
	if err != nil {
		return err
	}
	c.Response().Header().Set("Content-Crs", "<"+crs84+">")
	b := make([]byte, 0, len(page.features)+len(links)+256)
	b = append(b, `{"type":"FeatureCollection","numberMatched":`+itoa(matched)+`,"numberReturned":`+itoa(page.returned)+`,"timeStamp":"`...)
	at, err := a.modified(ctx, f.Release)
	if err != nil {
		return err
	}
	// The time of the data, not of the answer: equal questions, equal bytes.
	b = append(b, at.UTC().Format("2006-01-02T15:04:05Z")+`","links":`...)
	b = append(append(b, links...), `,"features":[`...)
	b = append(append(b, page.features...), "]}\n"...)
	return c.Blob(http.StatusOK, geoJSONType, b)
}

// matched counts what is under the query, once a revision.
func (a *App) matched(ctx context.Context, n featureNoun, f catalogue.FeatureQuery) (int, error) {
	state, err := a.store.State(ctx)
	if err != nil {
		return 0, err
	}
	key := fmt.Sprintf("matched|%s|%s|%s|%d|%d", n.id, state, f.Values().Encode(), f.From.Unix(), f.To.Unix())
	v, err := a.fits.do(ctx, key, func(ctx context.Context) (any, error) { return n.count(ctx, f) })
	if err != nil {
		return 0, err
	}
	return v.(int), nil
}

// itemLinks are self, next and prev, with everything else that was asked.
func (a *App) itemLinks(c echo.Context, n featureNoun, q url.Values, f catalogue.FeatureQuery, p featurePage) []featureLink {
	address := a.baseAddress(c) + "/features/collections/" + n.id
	with := func(name string, position int64) string {
		out := url.Values{}
		for k, v := range q {
			if k != "after" && k != "before" {
				out[k] = v
			}
		}
		if position > 0 {
			out.Set(name, strconv.FormatInt(position, 10))
		}
		return withQuery(address+"/items", out)
	}
	links := []featureLink{{withQuery(address+"/items", q), "self", geoJSONType, "This answer"}}
	back := f.Before > 0
	if p.returned > 0 && (p.more && !back || back) {
		links = append(links, featureLink{with("after", p.last), "next", geoJSONType, "The next ones"})
	}
	if p.returned > 0 && (p.more && back || !back && f.After > 0) {
		links = append(links, featureLink{with("before", p.first), "prev", geoJSONType, "The ones before"})
	}
	return append(links, featureLink{address, "collection", jsonType, n.title})
}

func (a *App) countSystems(ctx context.Context, f catalogue.FeatureQuery) (int, error) {
	_, systems, err := a.store.CountFeatures(ctx, f)
	return systems, err
}

func (a *App) countMeasurements(ctx context.Context, f catalogue.FeatureQuery) (int, error) {
	measurements, _, err := a.store.CountFeatures(ctx, f)
	return measurements, err
}

func (a *App) systemFeatures(ctx context.Context, f catalogue.FeatureQuery) (featurePage, error) {
	rows, more, err := a.store.SystemFeatures(ctx, f)
	return pointPage(rows, more, func(x *catalogue.Feature) string { return x.System }), err
}

func (a *App) measurementFeatures(ctx context.Context, f catalogue.FeatureQuery) (featurePage, error) {
	rows, more, err := a.store.MeasurementFeatures(ctx, f)
	return pointPage(rows, more, func(x *catalogue.Feature) string { return x.Measurement }), err
}

func pointPage(rows []catalogue.Feature, more bool, id func(*catalogue.Feature) string) featurePage {
	p := featurePage{returned: len(rows), more: more}
	for i := range rows {
		if i > 0 {
			p.features = append(p.features, ',')
		}
		p.features = appendDated(p.features, id(&rows[i]), &rows[i])
	}
	if n := len(rows); n > 0 {
		p.first, p.last = rows[0].Position, rows[n-1].Position
	}
	return p
}

// appendDated is appendFeature with the property updated.
func appendDated(b []byte, id string, x *catalogue.Feature) []byte {
	b = appendFeature(b, id, &x.Row)
	b = b[:len(b)-len("}}")]
	return append(b, `,"updated":"`+x.Updated.UTC().Format("2006-01-02T15:04:05Z")+`"}}`...)
}

// featureItem is one feature of a collection.
func (a *App) featureItem(c echo.Context) error {
	n, err := a.collection(c)
	if err != nil {
		return err
	}
	release, err := featureRelease(c)
	if err != nil {
		return err
	}
	id, err := url.PathUnescape(c.Param("id"))
	if err != nil {
		return echo.NewHTTPError(http.StatusNotFound, "There is no such feature here.")
	}
	x, err := n.one(c, id, release)
	if err != nil {
		return err
	}
	address := a.baseAddress(c) + "/features/collections/" + n.id
	q := url.Values{}
	if release != "" {
		q.Set("release", release)
	}
	c.Response().Header().Set("Content-Crs", "<"+crs84+">")
	return writeGeoJSON(c, struct {
		feature
		Links []featureLink `json:"links"`
	}{x, []featureLink{
		{withQuery(address+"/items/"+url.PathEscape(id), q), "self", geoJSONType, "This feature"},
		{withQuery(address, q), "collection", jsonType, n.title},
		{withQuery(a.baseAddress(c)+"/systems/"+url.PathEscape(systemOf(x)), q), "alternate", "text/html", "The page of its system"},
	}})
}

func systemOf(x feature) string {
	for _, p := range x.Properties {
		if p.name == "system" {
			slug, _ := p.value.(string)
			return slug
		}
	}
	return ""
}

func (a *App) systemFeature(c echo.Context, id, release string) (feature, error) {
	x, err := a.store.SystemFeature(c.Request().Context(), id, release)
	if err != nil {
		return feature{}, err
	}
	return dated(pointFeature(x.System, &x.Row), x.Updated), nil
}

func (a *App) measurementFeature(c echo.Context, id, release string) (feature, error) {
	x, err := a.store.MeasurementFeature(c.Request().Context(), id, release)
	if err != nil {
		return feature{}, err
	}
	return dated(pointFeature(x.Measurement, &x.Row), x.Updated), nil
}

func dated(x feature, at time.Time) feature {
	x.Properties = append(x.Properties, orderedField{"updated", at.UTC().Format("2006-01-02T15:04:05Z")})
	return x
}

func (a *App) lineFeatures(ctx context.Context, f catalogue.FeatureQuery) (featurePage, error) {
	lines, more, err := a.store.LineFeatures(ctx, f)
	if err != nil {
		return featurePage{}, err
	}
	p := featurePage{returned: len(lines), more: more}
	for i := range lines {
		b, err := lineJSON(&lines[i])
		if err != nil {
			return p, err
		}
		if i > 0 {
			p.features = append(p.features, ',')
		}
		p.features = append(p.features, b...)
	}
	if n := len(lines); n > 0 {
		p.first, p.last = lines[0].ID, lines[n-1].ID
	}
	return p, nil
}

func (a *App) lineFeature(c echo.Context, id, release string) (feature, error) {
	n, err := strconv.ParseInt(id, 10, 64)
	if err != nil {
		return feature{}, echo.NewHTTPError(http.StatusNotFound, "There is no centreline of that number.")
	}
	l, err := a.store.LineFeature(c.Request().Context(), n, release)
	if err != nil {
		return feature{}, err
	}
	return lineAsFeature(l)
}

type lineGeometry struct {
	Type        string `json:"type"`
	Coordinates any    `json:"coordinates"`
}

// lineAsFeature is a stored line as a LineString, or in parts where it crosses
// the antimeridian.
func lineAsFeature(l *catalogue.LineFeature) (feature, error) {
	positions, err := catalogue.Positions(l.Line)
	if err != nil {
		return feature{}, err
	}
	g := lineGeometry{"LineString", positions}
	if parts := catalogue.CutAtAntimeridian(positions); len(parts) > 1 {
		g = lineGeometry{"MultiLineString", parts}
	} else if len(parts) == 1 {
		g.Coordinates = parts[0]
	}
	return dated(feature{Type: "Feature", ID: strconv.FormatInt(l.ID, 10), Geometry: g, Properties: orderedObject{
		{"system", l.System}, {"system_name", l.SystemName}, {"kind", l.Kind}, {"measurement", l.Measurement},
		{"sinuosity", orNull(l.Sinuosity)}, {"sinuosity_kind", l.SinuosityOf}, {"measured_line", l.MeasuredLine}, {"windows", len(l.Sinuosities)},
		{"source", l.Source}, {"source_doi", l.SourceDOI}, {"contributor", l.Contributor}, {"licence", l.Licence}, {"invented", l.Invented},
	}}, l.Updated), nil
}

func lineJSON(l *catalogue.LineFeature) ([]byte, error) {
	x, err := lineAsFeature(l)
	if err != nil {
		return nil, err
	}
	return json.Marshal(finite(x))
}

// writeLines streams the lines under a filter as a GeoJSON collection.
func (a *App) writeLines(ctx context.Context, w io.Writer, f catalogue.Filter) error {
	if _, err := io.WriteString(w, `{"type":"FeatureCollection","features":[`); err != nil {
		return err
	}
	before := "\n"
	err := a.store.EachLine(ctx, f, func(l *catalogue.LineFeature) error {
		b, err := lineJSON(l)
		if err != nil {
			return err
		}
		_, err = w.Write(append([]byte(before), b...))
		before = ",\n"
		return err
	})
	if err == nil {
		_, err = io.WriteString(w, "\n]}\n")
	}
	return err
}
