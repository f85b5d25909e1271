package views

import (
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
)

type filterRange struct{ name, label, min, max, from, to string }

func filterRanges(f catalogue.Filter) []filterRange {
	r := func(name, label string, lo, hi catalogue.Number) filterRange {
		return filterRange{name, label, name + "_min", name + "_max", typedNumber(lo), typedNumber(hi)}
	}
	return []filterRange{
		r("lat", "Latitude (degrees, north positive)", f.LatMin, f.LatMax),
		r("abs_lat", "|Latitude| (degrees)", f.AbsLatMin, f.AbsLatMax),
		r("sinuosity", "Sinuosity", f.SinuosityMin, f.SinuosityMax),
		r("slope", "Valley slope (m/m)", f.SlopeMin, f.SlopeMax),
		r("width", "Channel width (m)", f.WidthMin, f.WidthMax),
		r("age", "Age (Ma)", f.AgeMin, f.AgeMax),
	}
}

// typedNumber writes a number so that reading it gives the same double.
func typedNumber(n catalogue.Number) string {
	if !n.Valid {
		return ""
	}
	return strconv.FormatFloat(n.V, 'g', -1, 64)
}

func boxText(b *catalogue.BBox) string {
	if b == nil {
		return ""
	}
	var s []string
	for _, v := range []float64{b.West, b.South, b.East, b.North} {
		s = append(s, strconv.FormatFloat(v, 'g', -1, 64))
	}
	return strings.Join(s, ",")
}

func holds(list []string, v string) bool { return slices.Contains(list, v) }

var columnLabels = map[string]string{
	"kind": "Kind", "setting": "Setting", "margin": "Margin", "feeder": "Feeder", "grain": "Grain",
	"confinement": "Confinement", "activity": "Activity", "burial": "Burial", "survey": "Survey",
	"extraction": "Taken from", "grade": "Grade", "basin": "Basin", "parent_deposit": "Parent deposit", "source": "Source",
	"valley_slope": "Valley slope", "sinuosity": "Sinuosity", "sinuosity_kind": "Sinuosity of", "measured_line": "Measured line",
	"latitude_deg": "Latitude", "longitude_deg": "Longitude", "age_ma": "Age", "channel_width_m": "Width", "channel_depth_m": "Depth",
	"system_name": "System", "palaeolatitude_deg": "Palaeolatitude", "wavelength_m": "Wavelength", "amplitude_m": "Amplitude", "radius_m": "Radius",
	"water_depth_m": "Water depth", "reach_length_m": "Reach length", "levee_left_m": "Left levee", "levee_right_m": "Right levee",
}

// ColumnLabel is a column's name as people read it.
func ColumnLabel(column string) string {
	if s, ok := columnLabels[column]; ok {
		return s
	}
	return ChoiceLabel(column)
}

// ChoiceLabel is a choice as people read it: "levee crest", "3D seismic".
func ChoiceLabel(v string) string {
	switch v {
	case "":
		return "not given"
	case "seismic_3d":
		return "3D seismic"
	case "seismic_2d":
		return "2D seismic"
	case "p90":
		return "90th percentile"
	case "dem":
		return "elevation model"
	}
	return strings.ReplaceAll(v, "_", " ")
}

// activeFilters are the settings in force, each with the address without it.
func activeFilters(p Page, f catalogue.Filter) []navItem {
	values := f.Values()
	var out []navItem
	for _, name := range catalogue.FilterParameters {
		if name == "sort" || name == "page" || name == "per_page" {
			continue
		}
		for _, v := range values[name] {
			q := url.Values{}
			for k, list := range p.Query {
				q[k] = slices.DeleteFunc(slices.Clone(list), func(x string) bool { return k == name && sameValue(x, v) || k == "page" })
				if len(q[k]) == 0 {
					delete(q, k)
				}
			}
			href := p.Path
			if len(q) > 0 {
				href += "?" + q.Encode()
			}
			out = append(out, navItem{name, href, filterText(name, v)})
		}
	}
	return out
}

// FilterWords is a filter in words, as a sentence of a paper has it; "" when
// nothing is chosen.
func FilterWords(f catalogue.Filter) string {
	values := f.Values()
	var out []string
	for _, name := range catalogue.FilterParameters {
		if name == "sort" || name == "page" || name == "per_page" {
			continue
		}
		var parts []string
		for _, v := range values[name] {
			parts = append(parts, filterText(name, v))
		}
		if len(parts) > 1 { // the label once
			label, first, _ := strings.Cut(parts[0], ": ")
			rest := []string{first}
			for _, p := range parts[1:] {
				rest = append(rest, strings.TrimPrefix(p, label+": "))
			}
			parts = []string{label + ": " + strings.Join(rest, " or ")}
		}
		out = append(out, parts...)
	}
	return strings.Join(out, "; ")
}

// sameValue: the address may hold 10.0 where the filter writes 10.
func sameValue(a, b string) bool {
	if a == b {
		return true
	}
	x, errA := strconv.ParseFloat(a, 64)
	y, errB := strconv.ParseFloat(b, 64)
	return errA == nil && errB == nil && x == y || strings.ReplaceAll(a, " ", "") == strings.ReplaceAll(b, " ", "")
}

func filterText(name, v string) string {
	base, isMin := strings.CutSuffix(name, "_min")
	if isMin {
		return rangeLabel(base) + " from " + v
	}
	if base, isMax := strings.CutSuffix(name, "_max"); isMax {
		return rangeLabel(base) + " to " + v
	}
	switch name {
	case "private":
		return "without private rows"
	case "q":
		return "words: " + v
	case "bbox":
		return "box " + v
	}
	return ColumnLabel(name) + ": " + ChoiceLabel(v)
}

func rangeLabel(base string) string {
	for _, r := range filterRanges(catalogue.Filter{}) {
		if r.name == base {
			label, _, _ := strings.Cut(r.label, " (")
			return label
		}
	}
	return base
}

// WithQuery is the page's address with some parameters set ("" takes one off).
func (p Page) WithQuery(set ...string) string {
	q := url.Values{}
	for k, v := range p.Query {
		q[k] = v
	}
	for i := 0; i+1 < len(set); i += 2 {
		if set[i+1] == "" {
			q.Del(set[i])
			continue
		}
		q[set[i]] = []string{set[i+1]}
	}
	if len(q) == 0 {
		return p.Path
	}
	return p.Path + "?" + q.Encode()
}
