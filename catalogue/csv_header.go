package catalogue

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"
)

// cellPlan says what to do with one cell of every line.
type cellPlan struct {
	name   string
	column *Column // nil = not read
	conv   *conversion
}

// layout is a header understood.
type layout struct {
	cells   []cellPlan
	reading Reading
	unknown []string
	ids     bool // there is a column measurement
}

// maxCells is the most columns of a file: twice what there is, with room for
// columns that are passed by.
const maxCells = 1000

func readHeader(header []string) (layout, []RowProblem) {
	var l layout
	if p := notComma(header); p != nil {
		return l, []RowProblem{*p}
	}
	if len(header) > maxCells {
		return l, []RowProblem{{Line: 1, Message: fmt.Sprintf("the header has %d columns", len(header)), Expected: fmt.Sprintf("at most %d", maxCells)}}
	}
	var problems []RowProblem
	seen := map[string]bool{}
	filled := map[string]bool{}
	for _, cell := range header {
		plan := planCell(cell)
		switch {
		case plan.name != "" && seen[plan.name]:
			problems = append(problems, RowProblem{Line: 1, Column: plan.name, Value: Clip(cell), Message: "the column stands twice in the header", Expected: "each column once"})
		case plan.column == nil && plan.name != "":
			l.unknown = append(l.unknown, plan.name)
		case plan.column != nil:
			filled[plan.column.Name] = true
		}
		seen[plan.name] = true
		l.cells = append(l.cells, plan)
	}
	l.ids = filled["measurement"]
	return l, append(problems, missingColumns(filled, l.ids)...)
}

// matchedHeader is a header whose columns were matched by a person.
func matchedHeader(header []string, r Reading) (layout, []RowProblem) {
	l := layout{reading: r}
	if len(header) != len(r.Columns) {
		return l, []RowProblem{{Line: 1, Message: fmt.Sprintf("the header has %d columns and %d were matched", len(header), len(r.Columns)), Expected: "the file that was matched"}}
	}
	var problems []RowProblem
	filled, seen := map[string]bool{}, map[string]bool{}
	for i, name := range r.Columns {
		plan := cellPlan{name: CleanText(strings.ToValidUTF8(header[i], "\ufffd"))}
		if plan.name == "" || utf8.RuneCountInString(plan.name) > 60 {
			plan.name = "column " + strconv.Itoa(i+1)
		}
		if name == "" {
			l.unknown = append(l.unknown, plan.name)
			l.cells = append(l.cells, plan)
			continue
		}
		as := planCell(name)
		switch {
		case as.column == nil:
			problems = append(problems, RowProblem{Line: 1, Column: plan.name, Value: Clip(name), Message: "there is no such column", Expected: "a column of the measurement table"})
		case seen[as.name]:
			problems = append(problems, RowProblem{Line: 1, Column: plan.name, Value: Clip(name), Message: "two columns of the file are read as it", Expected: "each once, or in another unit, of which a row fills one"})
		default:
			plan.column, plan.conv = as.column, as.conv
			filled[as.column.Name] = true
		}
		seen[as.name] = true
		l.cells = append(l.cells, plan)
	}
	l.ids = filled["measurement"]
	return l, append(problems, missingColumns(filled, l.ids)...)
}

func planCell(cell string) cellPlan {
	name := strings.ToLower(CleanText(strings.ToValidUTF8(cell, "\ufffd")))
	plan := cellPlan{name: name}
	if i, ok := columnByName[name]; ok {
		plan.column = &Columns[i]
	} else if conv, ok := conversions[name]; ok {
		plan.conv = &conv
		plan.column = &Columns[columnByName[conv.column]]
	} else if utf8.RuneCountInString(name) > 60 {
		plan.name = Clip(name)
	}
	return plan
}

// missingColumns names required columns that are not there. A file with
// measurement ids may leave them out: it corrects what is stored.
func missingColumns(filled map[string]bool, ids bool) []RowProblem {
	if ids {
		return nil
	}
	var missing []string
	for _, c := range Columns {
		if c.Required && !filled[c.Name] {
			missing = append(missing, c.Name)
		}
	}
	if len(missing) == 0 {
		return nil
	}
	return []RowProblem{{Line: 1, Column: missing[0], Message: "the header lacks required columns: " + strings.Join(missing, ", "),
		Expected: "a first line with at least system_name,latitude_deg,longitude_deg,sinuosity,sinuosity_kind,measured_line,source"}}
}

// notComma tells a file with other separators from one with other columns.
func notComma(header []string) *RowProblem {
	if len(header) > 3 {
		return nil
	}
	line := strings.Join(header, ",")
	for sep, name := range map[string]string{";": "semicolons", "\t": "tabs", "|": "bars"} {
		if strings.Count(line, sep) >= 3 {
			return &RowProblem{Line: 1, Value: Clip(line), Message: "the cells are separated by " + name, Expected: "commas between cells and a point as decimal sign (CSV UTF-8)"}
		}
	}
	return nil
}

// reader takes cells of a record into a row; problems and conversions are
// reported through note.
type cellNote func(kind noteKind, cell int, p RowProblem)

type noteKind int

const (
	noteProblem noteKind = iota
	noteConversion
)

// fill reads the cells of one record over the row.
func (l *layout) fill(r *Row, record []string, note cellNote) {
	filledBy := map[*Column]string{}
	for i, cell := range record {
		plan := l.cells[i]
		problem := func(message, expected string) {
			note(noteProblem, i, RowProblem{Column: plan.name, Value: Clip(cell), Message: message, Expected: expected})
		}
		if !utf8.ValidString(cell) {
			problem("the cell is not UTF-8 (it may be Latin-1)", "a file saved as UTF-8")
			continue
		}
		if plan.column == nil {
			continue
		}
		text := CleanText(cell)
		if before, ok := filledBy[plan.column]; ok && text != "" {
			problem("the value is also given in the column "+before, "one of the two columns filled")
			continue
		}
		if text == "" && plan.conv != nil {
			continue
		}
		if text != "" {
			filledBy[plan.column] = plan.name
		}
		if err := l.set(r, plan, text, func(message string) {
			note(noteConversion, i, RowProblem{Column: plan.name, Value: Clip(cell), Message: message})
		}); err != nil {
			problem(err.Message, err.Expected)
		}
	}
}

// set reads one cell, converting units visibly.
func (l *layout) set(r *Row, plan cellPlan, text string, converted func(string)) *Error {
	c := plan.column
	if c.num != nil && text != "" {
		plain, err := l.reading.number(text)
		if err != nil {
			err.Field = c.Name
			return err
		}
		text = plain
	}
	if plan.conv != nil {
		return setConverted(r, plan, text, converted)
	}
	if c.num == nil {
		text = Plain(text)
		if c.Name == "source_doi" {
			if bare := bareDOI(text); bare != text {
				converted("read as the DOI " + bare)
				text = bare
			}
		}
		return c.Set(r, text)
	}
	latitude, angle := angleColumn(c)
	if angle && !plainNumber.MatchString(text) && text != "" && !looksDecimalComma(text) {
		v, err := parseAngle(text, latitude)
		if err != nil {
			like := "12 34.5 W"
			if latitude {
				like = "12 34.5 S"
			}
			return unreadable(c, text, err, c.Expected()+", or degrees and minutes as "+like)
		}
		if e := c.Set(r, shortNumber(v)); e != nil {
			return e
		}
		converted("read as " + shortNumber(v) + " degrees")
		return nil
	}
	return c.Set(r, text)
}

func setConverted(r *Row, plan cellPlan, text string, converted func(string)) *Error {
	c := plan.column
	v, err := plan.conv.parse(text)
	if err != nil {
		if hint := NumberHint(text, ErrorColumn(c.Name)); hint != "" {
			return &Error{Code: Invalid, Field: c.Name, Message: hint, Expected: "a number in " + plan.conv.unit + ", with a point as decimal sign"}
		}
		return unreadable(c, text, err, "a number in "+plan.conv.unit+", with a point as decimal sign")
	}
	if e := c.Set(r, shortNumber(v)); e != nil {
		return e
	}
	converted(strings.TrimSpace(fmt.Sprintf("%s read as %s %s %s", plan.conv.unit, c.Name, shortNumber(v), c.Unit)))
	return nil
}

func unreadable(c *Column, text string, err error, expected string) *Error {
	message := fmt.Sprintf("%q cannot be read", Clip(text))
	if s := err.Error(); !slices.Contains([]string{"invalid syntax", "value out of range"}, s) && !strings.HasPrefix(s, "strconv.") {
		message += ": " + s
	}
	return &Error{Code: Invalid, Field: c.Name, Message: message, Expected: expected}
}
