package main

import (
	"net/url"
	"slices"
	"strings"
	"sync"

	"fathombend/catalogue"
	"fathombend/stats/earth"
	"fathombend/views"
)

// record is one measurement as a form holds it: what was typed, what could be
// read of it, and what is wrong or odd.
type record struct {
	typed      url.Values
	row        catalogue.Row
	unread     map[string]string // column -> text of cells that could not be read
	errors     map[string]string // column -> sentence
	shown      map[string]string // column -> conversion in words
	seeing     map[string]string // field about who sees it -> sentence
	findings   []catalogue.Finding
	overrides  map[string]string // check -> reason
	checkedAll bool              // missing fields and reasons count as errors
	lenient    bool              // warnings need no reason: a curator decides
}

// formColumns are the columns a person fills; the others say which record it
// is.
var formColumns = func() []catalogue.Column {
	var out []catalogue.Column
	for _, c := range catalogue.Columns {
		if c.Name != "measurement" && c.Name != "system" {
			out = append(out, formColumn(c))
		}
	}
	return out
}()

// licences a contributor can give a record under.
var licences = []string{"CC BY 4.0", "CC0 1.0"}

// formColumn is the column as a form asks for it: the licence is consent, so it
// is chosen and needed.
func formColumn(c catalogue.Column) catalogue.Column {
	switch c.Name {
	case "licence":
		c.Kind, c.Choices, c.Required = catalogue.KindChoice, licences, true
		c.Help = "You agree that the record is published under it."
	case "longitude_deg":
		c.Help += " Degrees and minutes are read too, as 12 34.5 W."
	case "latitude_deg":
		c.Help += " Degrees and minutes are read too, as 12 34.5 S."
	}
	return c
}

// readRecord reads a posted form.
func readRecord(form url.Values) *record {
	r := &record{
		typed: form, row: catalogue.NewRow(), unread: map[string]string{}, errors: map[string]string{},
		shown: map[string]string{}, overrides: map[string]string{},
	}
	cells := map[string]string{}
	column := map[string]string{} // name of a cell -> its column
	for _, c := range formColumns {
		name := c.Name
		if unit := form.Get(c.Name + ".unit"); slices.ContainsFunc(c.CellUnits(), func(u catalogue.CellUnit) bool { return u.Name == unit }) {
			name = unit
		}
		cells[name], column[name] = form.Get(c.Name), c.Name
	}
	problems, conversions := catalogue.ReadCells(&r.row, cells)
	for _, p := range problems {
		name := column[p.Column]
		r.errors[name] = sentence(p.Message, p.Expected)
		r.unread[name] = form.Get(name)
	}
	for _, p := range conversions {
		r.shown[column[p.Column]] = sentence(p.Message, "")
	}
	r.row.Measurement, r.row.System = strings.TrimSpace(form.Get("measurement")), strings.TrimSpace(form.Get("system"))
	for name, v := range form {
		if key, ok := strings.CutPrefix(name, "override."); ok && strings.TrimSpace(v[0]) != "" {
			r.overrides[key] = strings.TrimSpace(v[0])
		}
	}
	return r
}

// need marks what a record cannot be sent without.
func (r *record) need() {
	r.checkedAll = true
	for _, c := range formColumns {
		if r.lenient && c.Name == "licence" {
			continue // consent is the contributor's to give; a file may have come without
		}
		if c.Required && strings.TrimSpace(r.typed.Get(c.Name)) == "" && r.errors[c.Name] == "" {
			r.errors[c.Name] = missing(c)
		}
	}
}

// missing says that a needed field is empty.
func missing(c catalogue.Column) string {
	switch {
	case slices.Contains(c.Choices, "unknown"):
		return "Choose one; unknown is an answer too."
	case len(c.Choices) > 0:
		return "Choose one."
	}
	return sentence("this is needed", c.Expected())
}

// take sorts the findings of the checks: hard ones are errors beside their
// field, unless something was said about that field already.
func (r *record) take(findings []catalogue.Finding) {
	r.findings = nil
	for _, f := range findings {
		if !f.Hard {
			r.findings = append(r.findings, f)
			continue
		}
		blank := strings.TrimSpace(r.typed.Get(f.Column)) == ""
		if r.errors[f.Column] == "" && (r.checkedAll || !blank) {
			r.errors[f.Column] = sentence(f.Message, f.Expected)
		}
	}
}

// unanswered counts warnings without a reason.
func (r *record) unanswered() (n int) {
	for _, f := range r.findings {
		if r.overrides[f.Key] == "" {
			n++
		}
	}
	return n
}

// formOfRow is a row as a form would have it typed. Cells that could not be
// read stand as they were typed.
func formOfRow(row catalogue.Row, unread map[string]string) url.Values {
	v := url.Values{"measurement": {row.Measurement}, "system": {row.System}}
	for _, c := range formColumns {
		v.Set(c.Name, c.Get(&row))
		if text, ok := unread[c.Name]; ok {
			v.Set(c.Name, text)
		}
	}
	return v
}

// worthHaving are optional columns shown without unfolding, in this order: what
// fits and comparisons use most.
var worthHaving = []string{"parent_deposit", "kind", "valley_slope", "channel_width_m", "channel_depth_m", "burial", "age_ma", "source_doi", "source_locator", "survey", "grade"}

// needed are the required columns in the order a person would say them.
var needed = []string{"system_name", "latitude_deg", "longitude_deg", "sinuosity", "sinuosity_kind", "measured_line", "source", "licence"}

var groupTitles = map[string]string{
	"identity": "Other names", "what it is": "What it is", "supply": "What feeds it", "place": "Place, in more detail", "time": "Age and palaeolatitude",
	"planform": "Planform, in more detail", "slope and size": "Slope and size, in more detail", "deposits": "Deposits", "how known": "How it was seen", "from where": "Other sources, credit and notes",
}

// groups lays the fields out: the needed ones, those worth having, the
// centreline, then the rest folded by group.
func (r *record) groups() []views.FormGroup {
	out := []views.FormGroup{
		{Key: "needed", Title: "What is needed", Fields: r.fields(needed)},
		{Key: "worth", Title: "What makes it useful", Hint: "Without a valley slope the record stays out of slope fits; without a parent deposit it counts as independent of its neighbours.", Fields: r.fields(worthHaving)},
		{Key: "line", Title: "A centreline, if you have one", Folded: true, Open: r.typed.Get("centreline") != ""},
	}
	for _, title := range catalogue.Groups {
		var names []string
		for _, c := range formColumns {
			if c.Group == title && !slices.Contains(needed, c.Name) && !slices.Contains(worthHaving, c.Name) {
				names = append(names, c.Name)
			}
		}
		if len(names) == 0 {
			continue
		}
		g := views.FormGroup{Key: strings.ReplaceAll(title, " ", "-"), Title: groupTitles[title], Folded: true, Fields: r.fields(names)}
		for _, f := range g.Fields {
			if f.Value != "" && f.Value != f.Column.Default {
				g.Filled++
			}
			if f.Error != "" || len(f.Warnings) > 0 {
				g.Open = true
			}
		}
		out = append(out, g)
	}
	return out
}

func (r *record) fields(names []string) []views.FormField {
	var out []views.FormField
	for _, name := range names {
		i := slices.IndexFunc(formColumns, func(c catalogue.Column) bool { return c.Name == name })
		out = append(out, r.field(formColumns[i]))
	}
	return out
}

// unitNames are those of the chronostratigraphic chart.
var unitNames = sync.OnceValue(func() (out []string) {
	for _, u := range earth.Units() {
		out = append(out, u.Name)
	}
	return out
})

func (r *record) field(c catalogue.Column) views.FormField {
	f := views.FormField{Column: c, Value: r.typed.Get(c.Name), Unit: r.typed.Get(c.Name + ".unit"), Error: r.errors[c.Name], Shown: r.shown[c.Name]}
	if c.Name == "unit" {
		f.Suggestions = unitNames()
	}
	for _, u := range c.CellUnits() {
		f.Units = append(f.Units, views.UnitChoice{Column: u.Name, Text: u.Unit})
	}
	for _, w := range r.findings {
		if w.Column != c.Name {
			continue
		}
		x := views.FormWarning{Key: w.Key, Message: sentence(w.Message, ""), Expected: w.Expected, Reason: r.overrides[w.Key]}
		if x.Reason == "" && r.checkedAll && !r.lenient {
			x.ReasonError = "Say why it is right, or change the value."
		}
		f.Warnings = append(f.Warnings, x)
	}
	return f
}

// summary lists what is to be mended in the order of the form.
func (r *record) summary() (out []views.FormError, warned int) {
	for _, g := range r.groups() {
		for _, f := range g.Fields {
			label := views.FieldLabel(f.Column.Name)
			if f.Error != "" {
				out = append(out, views.FormError{Field: f.Column.Name, Label: label, Message: f.Error})
			}
			for _, w := range f.Warnings {
				if w.ReasonError != "" {
					message := w.Message
					if w.Expected != "" {
						message = sentence(w.Message, w.Expected)
					}
					out = append(out, views.FormError{Field: "override." + w.Key, Label: label, Message: message})
					warned++
				}
			}
		}
	}
	return out, warned
}
