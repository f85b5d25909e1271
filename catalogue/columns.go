package catalogue

// Kind says what a cell of a column holds.
type Kind string

// The kinds of column.
const (
	KindText   Kind = "text"
	KindChoice Kind = "choice" // one of Choices
	KindNumber Kind = "number"
	KindCount  Kind = "count" // a whole number
)

// The tables a column may live in. A column of Systems belongs to the whole
// system: changing it through one measurement changes it for all of them.
const (
	TableSystems      = "systems"
	TableMeasurements = "measurements"
	TableSources      = "sources"
)

// Column describes one column of the measurement table. The list Columns
// drives import, export, checks, forms, the data dictionary and the SQL.
type Column struct {
	Name     string
	Group    string
	Kind     Kind
	Unit     string // "" for text and pure numbers
	Choices  []string
	Default  string // what an empty choice cell means; "" = stays empty
	Required bool
	Help     string // one line
	Table    string

	// Hard limits of a number, inclusive; Open makes Min exclusive.
	Min, Max float64
	Open     bool
	// MaxLen of a text in characters.
	MaxLen int

	expr string // SQL, with m, s and c for measurement, system and source
	text func(*Row) *string
	num  func(*Row) *Number
}

// The groups of Columns, in order.
var Groups = []string{"identity", "what it is", "supply", "place", "time", "planform", "slope and size", "deposits", "how known", "from where"}

// largest is the magnitude above which a number is refused: nothing on Earth
// measured in these units is larger, and sums of squares stay finite.
const largest = 1e12

type (
	textField = func(*Row) *string
	numField  = func(*Row) *Number
)

func textCol(name, help string, f textField) Column {
	return Column{Name: name, Kind: KindText, Help: help, MaxLen: 500, text: f}
}

func choiceCol(name, def, help string, f textField, choices ...string) Column {
	return Column{Name: name, Kind: KindChoice, Default: def, Help: help, Choices: choices, MaxLen: 40, text: f}
}

func numCol(name, unit, help string, f numField) Column {
	return Column{Name: name, Kind: KindNumber, Unit: unit, Help: help, Min: -largest, Max: largest, num: f}
}

// lengthCol is a number of metres (or other unit) that is above zero.
func lengthCol(name, unit, help string, f numField) Column {
	c := numCol(name, unit, help, f)
	c.Min, c.Open = 0, true
	return c
}

func (c Column) within(lo, hi float64) Column { c.Min, c.Max = lo, hi; return c }
func (c Column) required() Column             { c.Required = true; return c }
func (c Column) long(n int) Column            { c.MaxLen = n; return c }
func (c Column) count() Column                { c.Kind = KindCount; return c }

// of puts columns into a group and a table.
func of(group, table string, cols ...Column) []Column {
	for i := range cols {
		cols[i].Group = group
		if cols[i].Table == "" {
			cols[i].Table = table
		}
		if cols[i].expr == "" {
			cols[i].expr = map[string]string{TableSystems: "s.", TableMeasurements: "m.", TableSources: "c."}[cols[i].Table] + cols[i].Name
		}
	}
	return cols
}

func (c Column) as(table, expr string) Column { c.Table, c.expr = table, expr; return c }

// Columns are all columns of the measurement table in the order in which they
// are written.
var Columns = buildColumns()

var columnByName = func() map[string]int {
	m := make(map[string]int, len(Columns))
	for i, c := range Columns {
		m[c.Name] = i
	}
	return m
}()

// ColumnByName finds a column.
func ColumnByName(name string) (Column, bool) {
	i, ok := columnByName[name]
	if !ok {
		return Column{}, false
	}
	return Columns[i], true
}

// ColumnNames are the names of Columns in order.
func ColumnNames() []string {
	names := make([]string, len(Columns))
	for i, c := range Columns {
		names[i] = c.Name
	}
	return names
}

func buildColumns() []Column {
	var all []Column
	for _, g := range [][]Column{
		identityColumns(), kindColumns(), supplyColumns(), placeColumns(), timeColumns(),
		planformColumns(), slopeColumns(), depositColumns(), surveyColumns(), sourceColumns(),
	} {
		all = append(all, g...)
	}
	return all
}
