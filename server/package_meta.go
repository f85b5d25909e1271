package main

import (
	"fmt"

	"fathombend/catalogue"
	"fathombend/views"
)

// tableColumn is one column of a table of the package.
type tableColumn struct {
	catalogue.Column
	key bool // no two rows have the same, and none is without
}

func tableOf(cols []catalogue.Column, key string) []tableColumn {
	out := make([]tableColumn, len(cols))
	for i, c := range cols {
		out[i] = tableColumn{c, c.Name == key}
	}
	return out
}

func textColumn(name, help string) catalogue.Column {
	return catalogue.Column{Name: name, Kind: catalogue.KindText, Help: help}
}

func countColumn(name, help string) catalogue.Column {
	return catalogue.Column{Name: name, Kind: catalogue.KindCount, Help: help, Max: 1e12}
}

// packedTables are the tables of a package. A sinuosity and a source stand in
// every row of measurements.csv; what else may be missing is not required.
func packedTables() []struct {
	name, title string
	columns     []tableColumn
} {
	return []struct {
		name, title string
		columns     []tableColumn
	}{
		{"measurements.csv", "Measurements, one row each", tableOf(catalogue.Columns, "measurement")},
		{"systems.csv", "Channel systems, one row each", tableOf(append(systemTableColumns(), countColumn("measurements", "Number of its measurements in measurements.csv."),
			textColumn("invented", "yes where its best measurement is invented for the demo.")), "system")},
		{"sources.csv", "Sources, one row each", tableOf(sourceTableColumns(), "key")},
		{"dictionary.csv", "The columns of measurements.csv", tableOf(dictionaryColumns(), "column")},
	}
}

// resourceName is a table's name in datapackage.json.
func resourceName(file string) string {
	stem, _ := splitSuffix(file, ".csv", ".geojson")
	return stem
}

// dataPackage is datapackage.json by the Frictionless Data Package
// specification, version 1.0.
func dataPackage(p *packer, meta *packageMeta) map[string]any {
	licence := map[string]any{"name": meta.Licence, "path": views.LicenceAddress(meta.Licence), "title": views.LicenceName(meta.Licence)}
	contributors := []map[string]any{}
	for _, a := range creditedAuthors(meta.Authors, meta.Title) {
		c := map[string]any{"title": a.Name, "role": "author"}
		if a.ORCID != "" {
			c["path"] = "https://orcid.org/" + a.ORCID
		}
		contributors = append(contributors, c)
	}
	resources := []map[string]any{}
	for _, t := range packedTables() {
		f := p.of(t.name)
		schema := map[string]any{"fields": frictionlessFields(t.columns), "missingValues": []string{""}}
		for _, c := range t.columns {
			if c.key {
				schema["primaryKey"] = c.Name
			}
		}
		if t.name == "measurements.csv" {
			schema["foreignKeys"] = []map[string]any{{"fields": "system", "reference": map[string]any{"resource": "systems", "fields": "system"}}}
		}
		resources = append(resources, map[string]any{"name": resourceName(t.name), "path": t.name, "title": t.title, "profile": "tabular-data-resource", "format": "csv",
			"mediatype": "text/csv", "encoding": "utf-8", "bytes": f.bytes, "hash": "sha256:" + f.sum, "dialect": map[string]any{"delimiter": ",", "lineTerminator": "\n", "quoteChar": `"`, "doubleQuote": true, "header": true},
			"schema": schema})
	}
	lines := p.of("centrelines.geojson")
	resources = append(resources, map[string]any{"name": "centrelines", "path": lines.name, "title": "Stored centrelines", "profile": "data-resource", "format": "geojson",
		"mediatype": "application/geo+json", "encoding": "utf-8", "bytes": lines.bytes, "hash": "sha256:" + lines.sum})
	out := map[string]any{"profile": "data-package", "name": "fathombend-catalogue", "title": meta.Title, "version": meta.Version, "description": meta.description(),
		"created": meta.At.UTC().Format("2006-01-02T15:04:05Z"), "licenses": []any{licence}, "contributors": contributors, "keywords": keywords, "resources": resources}
	if meta.DOI != "" {
		out["id"], out["homepage"] = "doi:"+meta.DOI, "https://doi.org/"+meta.DOI
	} else {
		out["id"] = meta.Identity
	}
	return out
}

// frictionlessFields are the fields of a Table Schema.
func frictionlessFields(cols []tableColumn) []map[string]any {
	out := []map[string]any{}
	for _, c := range cols {
		f := map[string]any{"name": c.Name, "description": describe(c.Column)}
		limits := map[string]any{}
		switch c.Kind {
		case catalogue.KindNumber:
			f["type"] = "number"
		case catalogue.KindCount:
			f["type"] = "integer"
		default:
			f["type"] = "string"
		}
		if c.Kind == catalogue.KindChoice {
			limits["enum"] = c.Choices
		}
		if lo, hi, ok := bounds(c.Column); ok {
			limits["minimum"], limits["maximum"] = lo, hi
		}
		if c.key || c.Required {
			limits["required"] = true
		}
		if c.key {
			limits["unique"] = true
		}
		if len(limits) > 0 {
			f["constraints"] = limits
		}
		out = append(out, f)
	}
	return out
}

// bounds are the inclusive limits of a number that mean something.
func bounds(c catalogue.Column) (lo, hi float64, ok bool) {
	if !c.Numeric() || c.Min < -1e11 && c.Max > 1e11 {
		return 0, 0, false
	}
	return c.Min, c.Max, true
}

// describe is a column's help with its unit.
func describe(c catalogue.Column) string {
	if c.Unit == "" {
		return c.Help
	}
	return fmt.Sprintf("%s Unit: %s.", c.Help, c.Unit)
}

// csvOnTheWeb is csv-metadata.json by the W3C recommendation "Metadata
// Vocabulary for Tabular Data" (2015).
func csvOnTheWeb(meta *packageMeta) map[string]any {
	tables := []map[string]any{}
	for _, t := range packedTables() {
		cols := []map[string]any{}
		schema := map[string]any{}
		for _, c := range t.columns {
			cols = append(cols, csvwColumn(c))
			if c.key {
				schema["primaryKey"] = c.Name
			}
		}
		schema["columns"] = cols
		if t.name == "measurements.csv" {
			schema["foreignKeys"] = []map[string]any{{"columnReference": "system", "reference": map[string]any{"resource": "systems.csv", "columnReference": "system"}}}
		}
		tables = append(tables, map[string]any{"url": t.name, "dc:title": t.title, "tableSchema": schema})
	}
	var creators []string
	for _, a := range creditedAuthors(meta.Authors, meta.Title) {
		creators = append(creators, a.Name)
	}
	return map[string]any{"@context": []any{"http://www.w3.org/ns/csvw", map[string]any{"@language": "en"}}, "dc:title": meta.Title, "dc:description": meta.description(),
		"dc:license": map[string]any{"@id": views.LicenceAddress(meta.Licence)}, "dc:creator": creators, "schema:version": meta.Version,
		"dc:issued": meta.At.UTC().Format("2006-01-02"), "dialect": map[string]any{"encoding": "utf-8", "lineTerminators": []string{"\n"}, "header": true},
		"tables": tables}
}

func csvwColumn(c tableColumn) map[string]any {
	col := map[string]any{"name": c.Name, "titles": c.Name, "dc:description": describe(c.Column)}
	switch c.Kind {
	case catalogue.KindNumber:
		kind := map[string]any{"base": "double"}
		if lo, hi, ok := bounds(c.Column); ok {
			kind["minimum"], kind["maximum"] = lo, hi
			if c.Open {
				delete(kind, "minimum")
				kind["minExclusive"] = lo
			}
		}
		col["datatype"] = kind
	case catalogue.KindCount:
		col["datatype"] = "integer"
	default:
		col["datatype"] = "string"
	}
	if c.key || c.Required {
		col["required"] = true
	}
	return col
}
