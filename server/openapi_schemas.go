package main

import (
	"encoding/json"
	"net/http"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// writeTyped is writeJSON with a media type of its own.
func writeTyped(c echo.Context, kind string, v any) error {
	b, err := json.Marshal(finite(v))
	if err != nil {
		return err
	}
	return c.Blob(http.StatusOK, kind, append(b, '\n'))
}

// apiSchemas are the forms of the answers of /features and of a refusal.
func apiSchemas() object {
	text, whole, number := object{"type": "string"}, object{"type": "integer"}, object{"type": "number"}
	list := func(items object) object { return object{"type": "array", "items": items} }
	form := func(properties object, required ...string) object {
		o := object{"type": "object", "properties": properties}
		if len(required) > 0 {
			o["required"] = required
		}
		return o
	}
	row := object{}
	for _, c := range catalogue.Columns {
		p := object{"description": describe(c)}
		switch {
		case c.Numeric():
			p["type"], p["nullable"] = "number", true
		case c.Kind == catalogue.KindChoice && c.Default != "":
			p["type"], p["enum"] = "string", c.Choices
		default:
			p["type"] = "string"
		}
		row[c.Name] = p
	}
	row["invented"] = object{"type": "boolean", "description": "No survey made it: drawn for a demonstration."}
	row["place_rounded"] = object{"type": "boolean", "description": "True where the place is rounded to 1 degree: the exact one is under embargo. Absent elsewhere."}
	row["updated"] = object{"type": "string", "format": "date-time", "description": "When the record was accepted or last changed."}
	link := form(object{"href": text, "rel": text, "type": text, "title": text}, "href", "rel")
	links := list(ref("Link"))
	return object{
		"Link":        link,
		"LandingPage": form(object{"title": text, "description": text, "links": links}, "links"),
		"Conformance": form(object{"conformsTo": list(text)}, "conformsTo"),
		"Collections": form(object{"links": links, "collections": list(ref("Collection"))}, "links", "collections"),
		"Collection": form(object{"id": text, "title": text, "description": text, "itemType": text, "crs": list(text), "links": links,
			"extent": form(object{
				"spatial":  form(object{"bbox": list(list(number)), "crs": text}),
				"temporal": form(object{"interval": list(list(object{"type": "string", "format": "date-time", "nullable": true})), "trs": text}),
			})}, "id", "links"),
		"Geometry": object{"nullable": true, "type": "object", "required": []string{"type", "coordinates"}, "properties": object{
			"type": object{"type": "string", "enum": []string{"Point", "LineString", "MultiLineString"}}, "coordinates": object{"type": "array", "items": object{}}}},
		"Feature": form(object{"type": object{"type": "string", "enum": []string{"Feature"}}, "id": text, "geometry": ref("Geometry"),
			"properties": object{"type": "object", "properties": row, "additionalProperties": true}, "links": links}, "type", "geometry", "properties"),
		"FeatureCollection": form(object{"type": object{"type": "string", "enum": []string{"FeatureCollection"}}, "features": list(ref("Feature")), "links": links,
			"numberMatched": whole, "numberReturned": whole, "timeStamp": object{"type": "string", "format": "date-time", "description": "When the data last changed."}, "invented_rows": whole}, "type", "features"),
		"Problem": form(object{"type": text, "title": text, "status": whole, "detail": text, "field": text, "expected": text}, "type", "title", "status", "detail"),
	}
}
