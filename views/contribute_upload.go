package views

import (
	"fathombend/catalogue"
	"net/url"
	"strconv"
)

// Upload is the state of the page that takes a file.
type Upload struct {
	Why    string
	Errors map[string]string
	Mine   []catalogue.Upload
}

// UploadMatch is the state of the page that asks how a file is read.
type UploadMatch struct {
	catalogue.Upload
	Typed    url.Values
	Errors   map[string]string // by field
	Columns  []MatchColumn
	Missing  []string // needed columns that nothing is read as
	Choices  []catalogue.CellUnit
	Licences []string
}

// MatchColumn is one column of the file.
type MatchColumn struct {
	Field   string // name of its form field
	Header  string
	Sample  []string
	Chosen  string // name of the cell it is read as, "" = not read
	Guessed string
	Sure    bool // the header is the name itself
}

// UploadResult is what became of a file.
type UploadResult struct {
	catalogue.Upload
	Problems, Warnings, Conversions []catalogue.RowProblem
	Refusal                         string
}

// ColumnField is the form field of a column of the file, from 0.
func ColumnField(i int) string { return "column." + strconv.Itoa(i) }

func uploadHref(id int64, rest string) string {
	return "/contribute/upload/" + strconv.FormatInt(id, 10) + rest
}

var encodingChoices = []struct{ value, text string }{
	{"utf-8", "UTF-8"}, {"windows-1252", "Latin-1 (Windows-1252, ISO 8859-1)"}, {"utf-16", "UTF-16"},
}

var separatorChoices = []struct{ value, text string }{{",", "commas"}, {";", "semicolons"}, {"\t", "tabs"}, {"|", "bars"}}

var numberChoices = []struct{ value, text string }{
	{catalogue.DecimalPoint, "decimal point: 1200.5"}, {catalogue.DecimalComma, "decimal comma: 1200,5"},
	{catalogue.DecimalPointGroups, "decimal point, commas between groups: 1,200.5"}, {catalogue.DecimalCommaGroups, "decimal comma, points between groups: 1.200,5"},
}

var uploadStates = map[string]string{"matching": "to be matched", "checking": "being checked", "checked": "checked, not sent", "sent": "sent", "failed": "could not be checked"}

// choiceText is a name a column can be read as, with its unit.
func choiceText(u catalogue.CellUnit) string {
	if u.Unit == "" {
		return u.Name
	}
	return u.Name + ", " + u.Unit
}

func uploadCounts(r catalogue.UploadReport) string {
	s := strconv.Itoa(r.New) + " new, " + strconv.Itoa(r.Changed) + " changed, " + strconv.Itoa(r.Identical) + " identical and skipped"
	if r.Problems > 0 {
		s += ", " + strconv.Itoa(r.Refused) + " refused"
	}
	return s
}

// left is what is wrong with a matching, in the order of its form.
func (p UploadMatch) left() (out []FormError) {
	fields := []struct{ name, label string }{{"", ""}, {"encoding", "Characters"}, {"separator", "Between cells"}, {"numbers", "Numbers"}, {"licence", "Licence"}}
	for i, c := range p.Columns {
		label := "Column " + strconv.Itoa(i+1)
		if c.Header != "" {
			label += ", " + c.Header
		}
		fields = append(fields, struct{ name, label string }{c.Field, label})
	}
	fields = append(fields, struct{ name, label string }{"why", "What the file is"})
	for _, f := range fields {
		if e := p.Errors[f.name]; e != "" {
			out = append(out, FormError{Field: f.name, Label: f.label, Message: e})
		}
	}
	return out
}
