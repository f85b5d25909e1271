package main

import (
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// openAPI describes the addresses that give data, for programs (OpenAPI 3.0).
func (a *App) openAPI(c echo.Context) error {
	if _, err := featureParameters(c); err != nil {
		return err
	}
	title, err := a.store.Title(c.Request().Context())
	if err != nil {
		return err
	}
	return writeTyped(c, openAPIType, openAPIDocument(title, a.baseAddress(c)))
}

type object = map[string]any

// apiParameter is one parameter in a query.
func apiParameter(name, description string, schema object) object {
	p := object{"name": name, "in": "query", "required": false, "description": description, "schema": schema}
	if schema["type"] == "array" {
		p["style"], p["explode"] = "form", true
	}
	return p
}

// filterSchema is what a filter parameter may hold.
func filterParameter(name string) object {
	if c, ok := catalogue.ColumnByName(name); ok && c.Kind == catalogue.KindChoice {
		return apiParameter(name, c.Help+" Repeat it for several.", object{"type": "array", "items": object{"type": "string", "enum": c.Choices}})
	} else if ok {
		return apiParameter(name, c.Help+" Repeat it for several.", object{"type": "array", "items": object{"type": "string"}})
	}
	number := object{"type": "number"}
	switch name {
	case "q":
		return apiParameter(name, "Words in names, deposits, basins, sources and notes.", object{"type": "string", "maxLength": 300})
	case "bbox":
		return boxParameter()
	case "release":
		return apiParameter(name, "Name of a release; without it, the catalogue as it is.", object{"type": "string", "maxLength": 64})
	case "private":
		return apiParameter(name, "no leaves out the private rows of who is signed in; others see none.", object{"type": "string", "enum": []string{"yes", "no"}})
	case "sort":
		return apiParameter(name, "A column, with - before it for descending.", object{"type": "string"})
	case "page":
		return apiParameter(name, "Page of the table.", object{"type": "integer", "minimum": 1, "default": 1})
	case "per_page":
		return apiParameter(name, "Systems on a page.", object{"type": "integer", "minimum": 1, "maximum": catalogue.MaxPerPage, "default": catalogue.DefaultPerPage})
	}
	base, limit := strings.CutSuffix(name, "_min")
	word := "Least "
	if !limit {
		base, word = strings.TrimSuffix(name, "_max"), "Largest "
	}
	what := map[string]string{"lat": "latitude, signed degrees", "abs_lat": "|latitude|, degrees", "slope": "valley slope, m/m", "sinuosity": "sinuosity", "width": "channel width, m", "age": "age, Ma"}[base]
	return apiParameter(name, word+what+".", number)
}

func boxParameter() object {
	p := apiParameter("bbox", "west,south,east,north in WGS84 degrees; west above east crosses the antimeridian.",
		object{"type": "array", "oneOf": []any{object{"minItems": 4, "maxItems": 4}, object{"minItems": 6, "maxItems": 6}}, "items": object{"type": "number"}})
	p["explode"] = false
	return p
}

func itemAPIParameters() []any {
	out := []any{
		apiParameter("limit", "How many features come in one answer; more is taken as the most.", object{"type": "integer", "minimum": 1, "maximum": maxFeatures, "default": defaultFeatures}),
		apiParameter("datetime", "When the record was accepted or last changed: RFC 3339, or an interval A/B, ../B, A/..", object{"type": "string"}),
		apiParameter("after", "Position of a piece, as the link next has it.", object{"type": "integer", "minimum": 1}),
		apiParameter("before", "Position of a piece, as the link prev has it.", object{"type": "integer", "minimum": 1}),
		formatParameter(),
	}
	for _, name := range itemFilterParameters() {
		out = append(out, filterParameter(name))
	}
	return out
}

func formatParameter() object {
	return apiParameter("f", "The form of the answer; only JSON is offered.", object{"type": "string", "enum": []string{"json", "geojson"}})
}

func filterAPIParameters() []any {
	var out []any
	for _, name := range catalogue.FilterParameters {
		out = append(out, filterParameter(name))
	}
	return out
}

// namedParameters are those of a page whose values its own refusals describe.
func namedParameters(names []string) []any {
	var out []any
	for _, n := range names {
		out = append(out, apiParameter(n, "See the page and /methods.", object{"type": "array", "items": object{"type": "string"}}))
	}
	return out
}

func pathParameter(name, description string) object {
	return object{"name": name, "in": "path", "required": true, "description": description, "schema": object{"type": "string"}}
}

// operation is a GET with its answers; errors are problem documents.
func operation(id, tag, summary, kind string, schema object, parameters ...any) object {
	answers := object{
		"200": object{"description": summary, "content": object{kind: object{"schema": schema}}},
		"304": object{"description": "The reader has it already."},
		"400": object{"$ref": "#/components/responses/Problem"},
		"500": object{"$ref": "#/components/responses/Problem"},
	}
	for _, p := range parameters {
		if o, ok := p.(object); ok && o["in"] == "path" {
			answers["404"] = object{"$ref": "#/components/responses/Problem"}
		}
	}
	op := object{"operationId": id, "tags": []string{tag}, "summary": summary, "responses": answers}
	if len(parameters) > 0 {
		op["parameters"] = parameters
	}
	return object{"get": op}
}

// withPost adds the same question sent by POST, which keeps it out of
// addresses; takes are the types of body it reads.
func withPost(path object, summary string, takes ...string) object {
	get := path["get"].(object)
	post := object{}
	for k, v := range get {
		post[k] = v
	}
	post["operationId"], post["summary"] = get["operationId"].(string)+"ByPost", summary
	answers := object{"415": object{"$ref": "#/components/responses/Problem"}}
	for status, v := range get["responses"].(object) {
		if status != "304" {
			answers[status] = v
		}
	}
	content := object{}
	for _, t := range takes {
		content[t] = object{"schema": object{"type": "object"}}
		if t == "text/csv" {
			content[t] = object{"schema": object{"type": "string"}}
		}
	}
	post["responses"], post["requestBody"] = answers, object{"content": content}
	path["post"] = post
	return path
}

func ref(name string) object { return object{"$ref": "#/components/schemas/" + name} }

func openAPIDocument(title, base string) object {
	text, anything := object{"type": "string"}, object{"type": "object"}
	binary := object{"type": "string", "format": "binary"}
	f, release := formatParameter(), filterParameter("release")
	withFilter := func(more ...any) []any { return append(more, filterAPIParameters()...) }
	const features, tables, fits, releases, about = "Features", "Tables", "Fits", "Releases", "About"
	paths := object{
		"/features":                          operation("getLandingPage", features, "Landing page", jsonType, ref("LandingPage"), f),
		"/features/conformance":              operation("getConformance", features, "Conformance", jsonType, ref("Conformance"), f),
		"/features/collections":              operation("getCollections", features, "The collections", jsonType, ref("Collections"), f, release),
		"/features/collections/{collection}": operation("getCollection", features, "One collection", jsonType, ref("Collection"), collectionParameter(), f, release),
		"/features/collections/{collection}/items": operation("getItems", features, "Features of a collection", geoJSONType, ref("FeatureCollection"),
			append([]any{collectionParameter()}, itemAPIParameters()...)...),
		"/features/collections/{collection}/items/{id}": operation("getItem", features, "One feature", geoJSONType, ref("Feature"),
			collectionParameter(), pathParameter("id", "Slug of the system, id of the measurement or number of the line."), f, release),
		"/systems.csv":            operation("systemsCSV", tables, "Measurement table", "text/csv", text, withFilter()...),
		"/systems.json":           operation("systemsJSON", tables, "A page of systems with their measurements", jsonType, anything, withFilter()...),
		"/systems.geojson":        operation("systemsGeoJSON", tables, "Systems as points", geoJSONType, ref("FeatureCollection"), withFilter()...),
		"/systems.zip":            operation("systemsPackage", tables, "Data package", "application/zip", binary, withFilter()...),
		"/systems/dimensions.csv": operation("dimensions", tables, "Quantiles of the dimensions", "text/csv", text, withFilter()...),
		"/systems/{slug}.json":    operation("systemJSON", tables, "One system with sources, lines and history", jsonType, anything, pathParameter("slug", "Short name of the system."), release),
		"/systems/{slug}.geojson": operation("systemGeoJSON", tables, "One system as features", geoJSONType, ref("FeatureCollection"), pathParameter("slug", "Short name of the system."), release),
		"/sources.csv":            operation("sourcesCSV", tables, "Sources", "text/csv", text, withFilter()...),
		"/sources.json":           operation("sourcesJSON", tables, "Sources, taken apart", jsonType, anything, withFilter()...),
		"/sources.bib":            operation("sourcesBibTeX", tables, "Sources as BibTeX", "application/x-bibtex", text, withFilter()...),
		"/sources.ris":            operation("sourcesRIS", tables, "Sources as RIS", "application/x-research-info-systems", text, withFilter()...),
		"/dictionary.csv":         operation("dictionaryCSV", tables, "Data dictionary", "text/csv", text),
		"/dictionary.json":        operation("dictionaryJSON", tables, "Data dictionary", jsonType, anything),
		"/regression.json":        operation("regressionJSON", fits, "Regression of sinuosity", jsonType, anything, withFilter(namedParameters(regressionParameters)...)...),
		"/regression.csv":         operation("regressionCSV", fits, "Every row considered in a regression", "text/csv", text, withFilter(namedParameters(regressionParameters)...)...),
		"/expectation.json": withPost(operation("expectationJSON", fits, "Expected sinuosity of a target", jsonType, anything, withFilter(namedParameters(targetParameters)...)...),
			"The same with the parameters in the body, as a form or as a JSON object of names and values", echo.MIMEApplicationForm, jsonType),
		"/releases.json":         operation("releasesJSON", releases, "The releases", jsonType, anything),
		"/releases.csv":          operation("releasesCSV", releases, "The releases", "text/csv", text),
		"/releases/{name}.json":  operation("releaseJSON", releases, "One release", jsonType, anything, pathParameter("name", "Name of the release.")),
		"/releases/{name}.csv":   operation("releaseCSV", releases, "Measurement table of a release", "text/csv", text, pathParameter("name", "Name of the release.")),
		"/releases/{name}.zip":   operation("releasePackage", releases, "Data package of a release", "application/zip", binary, pathParameter("name", "Name of the release.")),
		"/feed.atom":             operation("feed", releases, "Releases and newly accepted systems", "application/atom+xml", text),
		"/openapi.json":          operation("openAPI", about, "This document", jsonType, anything, f),
		"/healthz":               operation("health", about, "Whether the program can answer", "text/plain", text),
		differencePath + ".csv":  operation("differenceCSV", releases, "What changed from one release to another, or to present", "text/csv", text, pathParameter("name", "Name of the earlier release."), pathParameter("other", "Name of the later release, or present.")),
		differencePath + ".json": operation("differenceJSON", releases, "What changed from one release to another, or to present", jsonType, anything, pathParameter("name", "Name of the earlier release."), pathParameter("other", "Name of the later release, or present.")),
	}
	return object{
		"openapi": "3.0.3",
		"info": object{"title": title, "version": Version,
			"description": "Measurements of submarine channels, regressions and expectations. Every state of a page is in its query string, and pages of rows, fits and releases are data at the same address with a suffix. Records carry their own licence in the column licence.",
			"license":     object{"name": "Apache-2.0 (the program; records carry their own)", "url": "https://www.apache.org/licenses/LICENSE-2.0"}},
		"servers":    []any{object{"url": base}},
		"tags":       []any{object{"name": features}, object{"name": tables}, object{"name": fits}, object{"name": releases}, object{"name": about}},
		"paths":      paths,
		"components": object{"schemas": apiSchemas(), "responses": object{"Problem": object{"description": "What was wrong (RFC 9457)", "content": object{"application/problem+json": object{"schema": ref("Problem")}}}}},
	}
}

const differencePath = "/releases/{name}/difference/{other}"

func collectionParameter() object {
	p := pathParameter("collection", "Name of the collection.")
	p["schema"] = object{"type": "string", "enum": []string{"systems", "measurements", "centrelines"}}
	return p
}
