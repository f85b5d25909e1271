package catalogue

import (
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// FormatNumber writes a number so that reading it gives the same double: the
// shortest decimal text; "" when it is not given.
func FormatNumber(n Number) string {
	if !n.Valid {
		return ""
	}
	return strconv.FormatFloat(n.V, 'g', -1, 64)
}

// Get returns the cell of the column as text.
func (c Column) Get(r *Row) string {
	if c.num != nil {
		n := *c.num(r)
		if c.Kind == KindCount && n.Valid {
			return strconv.FormatFloat(n.V, 'f', -1, 64) // 1000000, never 1e+06
		}
		return FormatNumber(n)
	}
	return *c.text(r)
}

// Number returns the cell of a number column; not given for the others.
func (c Column) Number(r *Row) Number {
	if c.num == nil {
		return Number{}
	}
	return *c.num(r)
}

// Numeric says whether cells of the column are numbers.
func (c Column) Numeric() bool { return c.num != nil }

// Expected says in words what a cell of the column may hold.
func (c Column) Expected() string {
	switch {
	case c.Kind == KindChoice:
		return "one of: " + strings.Join(c.Choices, ", ")
	case c.num == nil:
		return "text of at most " + strconv.Itoa(c.MaxLen) + " characters"
	}
	what := "a number"
	if c.Kind == KindCount {
		what = "a whole number"
	}
	if c.Unit != "" {
		what += " in " + c.Unit
	}
	lo := strconv.FormatFloat(c.Min, 'g', -1, 64)
	switch {
	case c.Min <= -largest:
	case c.Open:
		what += " above " + lo
	case c.Max >= largest:
		what += ", " + lo + " or more"
	default:
		what += " from " + lo + " to " + strconv.FormatFloat(c.Max, 'g', -1, 64)
	}
	return what + ", with a point as decimal sign"
}

// Set reads text into the cell. An empty text clears it; an empty choice means
// "not said" until Normalise gives it its default. A refused text leaves the
// row as it was.
func (c Column) Set(r *Row, text string) *Error {
	text = CleanText(text)
	if c.num != nil {
		n, err := c.parseNumber(text)
		if err != nil {
			return err
		}
		*c.num(r) = n
		return nil
	}
	if err := c.checkText(text); err != nil {
		return err
	}
	*c.text(r) = text
	return nil
}

func (c Column) refuse(message string) *Error {
	return &Error{Code: Invalid, Field: c.Name, Message: message, Expected: c.Expected()}
}

func (c Column) checkText(text string) *Error {
	switch {
	case !utf8.ValidString(text):
		return c.refuse("the text is not UTF-8 (it may be Latin-1); save the file as UTF-8")
	case utf8.RuneCountInString(text) > c.MaxLen:
		return c.refuse("the text is " + strconv.Itoa(utf8.RuneCountInString(text)) + " characters long")
	case c.Name == "measurement" && !validMeasurement(text):
		return &Error{Code: Invalid, Field: c.Name, Message: strconv.Quote(Clip(text)) + " is not a measurement id", Expected: "letters, digits, points, dashes and underscores; leave it empty for a new measurement"}
	case c.Kind == KindChoice && text != "" && !c.allows(text):
		return c.refuse(strconv.Quote(Clip(text)) + " is not one of the choices")
	}
	for _, x := range text {
		if unicode.IsControl(x) && x != '\n' && x != '\t' {
			return c.refuse("the text holds a control character (code " + strconv.Itoa(int(x)) + ")")
		}
	}
	return nil
}

func (c Column) allows(v string) bool {
	for _, x := range c.Choices {
		if x == v {
			return true
		}
	}
	return false
}

func validMeasurement(id string) bool {
	return strings.Trim(id, "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789._-") == ""
}

func (c Column) parseNumber(text string) (Number, *Error) {
	if text == "" {
		return Number{}, nil
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil || strings.ContainsAny(text, "_xXpP") {
		msg := NumberHint(text, ErrorColumn(c.Name))
		if msg == "" {
			msg = strconv.Quote(Clip(text)) + " is not a number"
		}
		return Number{}, c.refuse(msg)
	}
	if e := c.checkNumber(v); e != nil {
		return Number{}, e
	}
	return Num(v + 0), nil // + 0 turns -0 into 0, which SQLite would do too
}

// checkNumber applies the hard limits of the column.
func (c Column) checkNumber(v float64) *Error {
	shown := strconv.FormatFloat(v, 'g', -1, 64)
	switch {
	case math.IsNaN(v) || math.IsInf(v, 0):
		return c.refuse(shown + " is not a finite number")
	case c.Name == "sinuosity" && v < 1:
		return c.refuse("sinuosity " + shown + " is below 1, which no channel can have; if the valley length was taken along a curved axis, use the end-to-end valley length")
	case math.Abs(v) > largest:
		return c.refuse(shown + " is larger than anything measured in this unit")
	case v < c.Min, v > c.Max, c.Open && v <= c.Min:
		return c.refuse(shown + " is outside what the column can hold")
	case c.Kind == KindCount && v != math.Trunc(v):
		return c.refuse(shown + " is not a whole number")
	}
	return nil
}

func looksDecimalComma(s string) bool {
	before, after, ok := strings.Cut(s, ",")
	return ok && strings.Trim(before, "+-0123456789.") == "" && strings.Trim(after, "0123456789eE+-") == "" && after != ""
}

// CleanText takes white space off both ends and writes line ends as LF: every
// text is stored so, whichever way it came in.
func CleanText(s string) string {
	if strings.ContainsRune(s, '\r') {
		s = strings.ReplaceAll(strings.ReplaceAll(s, "\r\n", "\n"), "\r", "\n")
	}
	return strings.TrimSpace(strings.TrimPrefix(s, "\ufeff"))
}

// Clip shortens a text for use in a message.
func Clip(s string) string {
	s = strings.ToValidUTF8(s, "\ufffd")
	if r := []rune(s); len(r) > 40 {
		return string(r[:40]) + "..."
	}
	return s
}

// NormalLongitude brings a longitude into -180..180 degrees.
func NormalLongitude(lon float64) float64 {
	if lon > 180 {
		return lon - 360
	}
	return lon
}

// Normalise cleans the texts of the row, fills empty choices with their
// defaults and sets Invented from the notes.
func (r *Row) Normalise() {
	for i := range Columns {
		c := &Columns[i]
		if c.num != nil {
			n := c.num(r)
			if !n.Valid {
				n.V = 0
			}
			n.V += 0
			continue
		}
		p := c.text(r)
		*p = CleanText(*p)
		if *p == "" {
			*p = c.Default
		}
	}
	if r.PalaeolatitudeDeg.Valid && r.PalaeolatitudeMethod == "" {
		r.PalaeolatitudeMethod = "given"
	}
	r.Invented, r.Coarse = strings.HasPrefix(r.Notes, InventedMark), isCoarse(r.Notes)
}

// NewRow returns a row with every choice at its default.
func NewRow() Row {
	var r Row
	r.Normalise()
	return r
}

// Diff returns the columns in which the two rows differ, in the order of
// Columns.
func Diff(before, after *Row) []FieldChange {
	var out []FieldChange
	for i := range Columns {
		c := &Columns[i]
		if c.same(before, after) {
			continue
		}
		out = append(out, FieldChange{Column: c.Name, Before: c.Get(before), After: c.Get(after)})
	}
	return out
}

func (c *Column) same(a, b *Row) bool {
	if c.num != nil {
		return *c.num(a) == *c.num(b)
	}
	return *c.text(a) == *c.text(b)
}
