package main

import (
	"encoding/csv"
	"io"
	"net/http"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/views"
)

func (a *App) routesDictionary(e *echo.Echo) {
	get(e, "/dictionary", a.dictionary)
	get(e, "/dictionary.csv", a.dictionaryCSV)
	get(e, "/dictionary.json", a.dictionaryJSON)
}

// dictionary is the page of what each column means, with the formats.
func (a *App) dictionary(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	p := views.DictionaryPage{Page: a.page(c, "Data dictionary", "dictionary")}
	p.CSV, p.JSON = "/dictionary.csv", "/dictionary.json"
	for _, g := range catalogue.Groups {
		group := views.DictionaryGroup{Name: g}
		for _, col := range catalogue.Columns {
			if col.Group == g {
				group.Columns = append(group.Columns, col)
			}
		}
		p.Groups = append(p.Groups, group)
	}
	return render(c, http.StatusOK, views.Dictionary(p))
}

// dictionaryColumns are those of dictionary.csv.
func dictionaryColumns() []catalogue.Column {
	return []catalogue.Column{
		textColumn("column", "Name of the column."),
		textColumn("group", "Group it stands in."),
		textColumn("type", "text, choice, number or count (a whole number)."),
		textColumn("unit", "Unit of a number; empty for a pure one."),
		textColumn("required", "yes where every row has it."),
		textColumn("belongs_to", "The table it belongs to: systems, measurements or sources."),
		textColumn("choices", "What a choice may be, separated by semicolons."),
		textColumn("default", "What an empty choice means."),
		textColumn("minimum", "Least value allowed; exclusive where it says above."),
		textColumn("maximum", "Largest value allowed."),
		textColumn("description", "What it means."),
	}
}

// dictionaryRecord is a column as a row of dictionary.csv.
func dictionaryRecord(c catalogue.Column) []string {
	lo, hi := "", ""
	if a, b, ok := bounds(c); ok {
		lo, hi = short(a), short(b)
		if c.Open {
			lo = "above " + lo
		}
	}
	required := "no"
	if c.Required {
		required = "yes"
	}
	return []string{c.Name, c.Group, string(c.Kind), c.Unit, required, c.Table, strings.Join(c.Choices, ";"), c.Default, lo, hi, c.Help}
}

func writeDictionary(w io.Writer) error {
	out := csv.NewWriter(w)
	var head []string
	for _, c := range dictionaryColumns() {
		head = append(head, c.Name)
	}
	_ = out.Write(head) // Error says it
	for _, c := range catalogue.Columns {
		_ = out.Write(dictionaryRecord(c))
	}
	out.Flush()
	return out.Error()
}

func (a *App) dictionaryCSV(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	h := c.Response().Header()
	h.Set(echo.HeaderContentType, "text/csv; charset=utf-8; header=present")
	h.Set(echo.HeaderContentDisposition, `attachment; filename="fathombend-dictionary.csv"`)
	if c.Request().Method == http.MethodHead {
		return c.NoContent(http.StatusOK)
	}
	return writeDictionary(c.Response())
}

type dictionaryEntry struct {
	Column      string   `json:"column"`
	Group       string   `json:"group"`
	Type        string   `json:"type"`
	Unit        string   `json:"unit"`
	Required    bool     `json:"required"`
	BelongsTo   string   `json:"belongs_to"`
	Choices     []string `json:"choices"`
	Default     string   `json:"default"`
	Minimum     *float64 `json:"minimum"`
	Exclusive   bool     `json:"minimum_exclusive"`
	Maximum     *float64 `json:"maximum"`
	MaxLength   *int     `json:"max_length"`
	Description string   `json:"description"`
}

func (a *App) dictionaryJSON(c echo.Context) error {
	if err := a.plainQuery(c); err != nil {
		return err
	}
	out := struct {
		Columns []dictionaryEntry `json:"columns"`
	}{}
	for _, col := range catalogue.Columns {
		e := dictionaryEntry{Column: col.Name, Group: col.Group, Type: string(col.Kind), Unit: col.Unit, Required: col.Required, BelongsTo: col.Table,
			Choices: append([]string{}, col.Choices...), Default: col.Default, Exclusive: col.Open, Description: col.Help}
		if lo, hi, ok := bounds(col); ok {
			e.Minimum, e.Maximum = &lo, &hi
		}
		if col.Kind == catalogue.KindText {
			e.MaxLength = &col.MaxLen
		}
		out.Columns = append(out.Columns, e)
	}
	return writeJSON(c, http.StatusOK, out)
}
