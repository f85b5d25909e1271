package views

import (
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
)

// TableColumns are the columns of the table of systems when nobody chose.
var TableColumns = []string{"sinuosity", "sinuosity_kind", "latitude_deg", "palaeolatitude_deg", "age_ma", "valley_slope",
	"channel_width_m", "channel_depth_m", "feeder", "parent_deposit", "grade"}

// ChoosableColumns are those that can be chosen: all but the name, which always
// stands first, and the two ids, which its link carries.
var ChoosableColumns = slices.DeleteFunc(catalogue.ColumnNames(), func(name string) bool {
	return name == "system_name" || name == "system" || name == "measurement"
})

// InTableOrder sorts a choice: the usual columns first in their usual order,
// then the others as they stand in the data dictionary.
func InTableOrder(chosen []string) []string {
	var out []string
	for _, name := range slices.Concat(TableColumns, ChoosableColumns) {
		if slices.Contains(chosen, name) && !slices.Contains(out, name) {
			out = append(out, name)
		}
	}
	return out
}

// systemsColumn is a column of the table, by the name that sorts by it; the
// ribbon has none.
type systemsColumn struct {
	sort, text, unit string
	number           bool
}

func tableColumn(name string) systemsColumn {
	c, ok := catalogue.ColumnByName(name)
	if !ok {
		return systemsColumn{}
	}
	return systemsColumn{name, columnName(name), c.Unit, c.Numeric()}
}

func (p SystemsPage) columns() []systemsColumn {
	out := []systemsColumn{{"system_name", "System", "", false}, {}}
	for _, name := range p.Columns {
		c := tableColumn(name)
		if name == "sinuosity_kind" && slices.Index(p.Columns, name) == slices.Index(p.Columns, "sinuosity")+1 {
			c.text = "of" // it stands beside the number
		}
		out = append(out, c)
	}
	return out
}

// columnCell is a value as the table writes it.
func columnCell(r catalogue.Row, name string) string {
	c, ok := catalogue.ColumnByName(name)
	if !ok {
		return unknownMark
	}
	switch {
	case name == "sinuosity":
		return num2Fixed(sinuosityOf(r))
	case name == "sinuosity_kind":
		return kindCell(r)
	case name == "age_ma":
		return cell(r.AgeMa, 4)
	case strings.HasSuffix(name, "latitude_deg"):
		return degreesCell(c.Number(&r))
	case strings.HasSuffix(name, "longitude_deg"):
		return longitudeCell(c.Number(&r))
	case c.Kind == catalogue.KindCount:
		return cell(c.Number(&r), 12)
	case strings.Contains(name, "slope") && c.Numeric():
		return cell(c.Number(&r), 2)
	case c.Numeric():
		return cell(c.Number(&r), 3)
	case c.Kind == catalogue.KindChoice && c.Get(&r) != "":
		return ChoiceLabel(c.Get(&r))
	}
	return orDash(c.Get(&r))
}

func columnClass(name string) string {
	c, _ := catalogue.ColumnByName(name)
	switch {
	case c.Numeric():
		return "n"
	case c.Kind == catalogue.KindChoice:
		return "nowrap"
	case c.MaxLen > 200 || name == "source":
		return "prose"
	}
	return ""
}

// choosableGroup is the choosable columns of one part of the data dictionary.
type choosableGroup struct {
	name    string
	columns []catalogue.Column
}

func choosableGroups() []choosableGroup {
	var out []choosableGroup
	for _, g := range catalogue.Groups {
		group := choosableGroup{name: upperFirst(g)}
		for _, c := range catalogue.Columns {
			if c.Group == g && slices.Contains(ChoosableColumns, c.Name) {
				group.columns = append(group.columns, c)
			}
		}
		out = append(out, group)
	}
	return out
}

// columnName is a column's name on its own, where there is room for it.
func columnName(name string) string {
	if _, short := columnLabels[name]; short {
		return ColumnLabel(name)
	}
	return FieldLabel(name)
}

// sortChoice is one order of the table.
type sortChoice struct{ value, text string }

// sortChoices are the orders by the columns that are shown, and the one in
// force.
func (p SystemsPage) sortChoices() []sortChoice {
	var out []sortChoice
	names := append([]string{"system_name"}, p.Columns...)
	if now := strings.TrimPrefix(p.Filter.Sort, "-"); now != "" && !slices.Contains(names, now) {
		names = append(names, now)
	}
	for _, name := range names {
		c := tableColumn(name)
		text := columnName(name)
		if c.number {
			out = append(out, sortChoice{name, text + ", smallest first"}, sortChoice{"-" + name, text + ", largest first"})
		} else {
			out = append(out, sortChoice{name, text + ", a to z"}, sortChoice{"-" + name, text + ", z to a"})
		}
	}
	return out
}

func (p SystemsPage) columnsText() string {
	return strconv.Itoa(len(p.Columns)) + " of " + strconv.Itoa(len(ChoosableColumns))
}
