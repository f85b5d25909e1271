package views

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"fathombend/catalogue"
)

// SystemsPage is the filtered table.
type SystemsPage struct {
	Page
	Filter        catalogue.Filter
	Facets        []catalogue.Facet
	Systems       []catalogue.System
	Total         int
	Dimensions    []catalogue.Dimension
	DimensionsCSV string
	Columns       []string // of the table, in order
}

// sortState is ascending, descending or none.
func sortState(f catalogue.Filter, column string) string {
	switch f.Sort {
	case column:
		return "ascending"
	case "-" + column:
		return "descending"
	}
	return "none"
}

func sortAddress(p Page, f catalogue.Filter, column string) string {
	next := column
	if f.Sort == column {
		next = "-" + column
	}
	return p.WithQuery("sort", next, "page", "")
}

func sortArrow(state string) string {
	return map[string]string{"ascending": " ▲", "descending": " ▼"}[state]
}

// cell writes a number as people read it; a dash where it is not known.
func cell(n catalogue.Number, digits int) string {
	if !n.Valid {
		return unknownMark
	}
	return trueMinus(strconv.FormatFloat(roundSignificant(n.V, digits), 'f', -1, 64))
}

// degrees with one decimal and the hemisphere's letter.
func degreesCell(n catalogue.Number) string {
	if !n.Valid {
		return unknownMark
	}
	return FormatLatitude(math.Round(n.V*10) / 10)
}

// kindCell is what the sinuosity is of, short enough for a table.
func kindCell(r catalogue.Row) string {
	kind := strings.Replace(ChoiceLabel(r.SinuosityKind), "90th percentile", "p90", 1)
	if r.MeasuredLine == "unknown" {
		return kind
	}
	return kind + ", " + ChoiceLabel(r.MeasuredLine)
}

func sinuosityOf(r catalogue.Row) float64 {
	if !r.Sinuosity.Valid {
		return math.NaN()
	}
	return r.Sinuosity.V
}

// slopeClass is the step of the colour ramp of a valley slope.
func slopeClass(r catalogue.Row) string {
	if r.Kind == "river" {
		return "river"
	}
	i := MeridianItem{Slope: math.NaN()}
	if r.ValleySlope.Valid {
		i.Slope = r.ValleySlope.V
	}
	return colourOf("slope", i).Class
}

// pages are the numbers of a paged table worth showing: ends and neighbours.
func (p SystemsPage) pages() (now, last int, shown []int) {
	per := p.Filter.PerPage
	if per == 0 {
		per = catalogue.DefaultPerPage
	}
	now, last = max(p.Filter.Page, 1), max((p.Total+per-1)/per, 1)
	for i := 1; i <= last; i++ {
		if i == 1 || i == last || i >= now-2 && i <= now+2 {
			shown = append(shown, i)
		}
	}
	return now, last, shown
}

// sentence is what the table answers.
func (p SystemsPage) sentence() string {
	rows := 0
	for _, s := range p.Systems {
		rows += len(s.Measurements)
	}
	if p.Total == 0 {
		if len(activeFilters(p.Page, p.Filter)) == 0 {
			return "No system is in the catalogue yet."
		}
		return "No system passes this filter."
	}
	_, last, _ := p.pages()
	s := plural(p.Total, "system passes", "systems pass") + " this filter"
	if len(activeFilters(p.Page, p.Filter)) == 0 {
		s = plural(p.Total, "system is", "systems are") + " in the catalogue"
	}
	if last > 1 {
		return s + fmt.Sprintf("; this is page %d of %d.", max(p.Filter.Page, 1), last)
	}
	return s + ", with " + plural(rows, "measurement", "measurements") + "."
}

func dimensionLabel(name string) string {
	if name == "width_depth" {
		return "Width / depth"
	}
	return ColumnLabel(name)
}

// doiAddress links a DOI to its resolver.
func doiAddress(doi string) string {
	doi = strings.TrimPrefix(strings.TrimPrefix(doi, "https://doi.org/"), "doi:")
	return "https://doi.org/" + strings.TrimSpace(doi)
}
