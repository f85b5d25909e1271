package catalogue

import (
	"bufio"
	"bytes"
	"io"
	"regexp"
	"slices"
	"strings"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

// Reading says how a table is read that is not in the columns of the contract.
// The zero value reads one that is.
type Reading struct {
	Encoding  string   `json:"encoding,omitempty"`  // one of Encodings, "" = UTF-8
	Separator string   `json:"separator,omitempty"` // one of Separators, "" = a comma
	Numbers   string   `json:"numbers,omitempty"`   // one of NumberStyles, "" = a decimal point and no groups
	Columns   []string `json:"columns,omitempty"`   // for each cell of the header the name it is read as, "" = not read; nil = as it says
	Licence   string   `json:"licence,omitempty"`   // of rows that give none
}

// How numbers are written in a table: 1200.5, 1200,5, 1,200.5 and 1.200,5.
const (
	DecimalPoint       = "point"
	DecimalComma       = "comma"
	DecimalPointGroups = "point_groups"
	DecimalCommaGroups = "comma_groups"
)

// What a Reading may choose from.
var (
	Encodings    = []string{"utf-8", "windows-1252", "utf-16"}
	Separators   = []string{",", ";", "\t", "|"}
	NumberStyles = []string{DecimalPoint, DecimalComma, DecimalPointGroups, DecimalCommaGroups}
)

func (r *Reading) check() error {
	for _, c := range []struct {
		field, value string
		choices      []string
	}{{"encoding", r.Encoding, Encodings}, {"separator", r.Separator, Separators}, {"numbers", r.Numbers, NumberStyles}} {
		if c.value != "" && !slices.Contains(c.choices, c.value) {
			return &Error{Code: Invalid, Field: c.field, Message: "that is not one of the choices", Expected: strings.Join(c.choices, ", ")}
		}
	}
	return nil
}

func (r *Reading) comma() rune {
	if r.Separator == "" {
		return ','
	}
	return []rune(r.Separator)[0]
}

// decoded is the text of a file in UTF-8 without a byte order mark.
func (r *Reading) decoded(in io.Reader) io.Reader {
	switch r.Encoding {
	case "windows-1252":
		return charmap.Windows1252.NewDecoder().Reader(in)
	case "utf-16":
		return unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewDecoder().Reader(in)
	}
	br := bufio.NewReader(in)
	if start, _ := br.Peek(3); bytes.Equal(start, []byte("\ufeff")) {
		_, _ = br.Discard(3)
	}
	return br
}

// Shapes of numbers with commas and points. No group of thousands begins with a
// nought: 0,004 has a decimal comma.
var (
	oneComma   = regexp.MustCompile(`^[+-]?\d+,\d+$`)
	threeAfter = regexp.MustCompile(`^[+-]?[1-9]\d{0,2},\d{3}$`)
	pointThree = regexp.MustCompile(`^[+-]?[1-9]\d{0,2}(\.\d{3})+$`)
	commas     = regexp.MustCompile(`^[+-]?[1-9]\d{0,2}(,\d{3})+(\.\d+)?$`)
	points     = regexp.MustCompile(`^[+-]?[1-9]\d{0,2}(\.\d{3})+(,\d+)?$`)
	decimals   = regexp.MustCompile(`(\d),(\d)`)
)

// number rewrites a cell of a number column into one with a decimal point. A
// text it makes nothing of stays, for the column to refuse.
func (r *Reading) number(text string) (string, *Error) {
	switch r.Numbers {
	case DecimalComma:
		if pointThree.MatchString(text) {
			return text, twoReadings(text, strings.Replace(text, ".", ",", 1), strings.ReplaceAll(text, ".", ""), "comma")
		}
		if strings.Count(text, ",") == 1 {
			return decimals.ReplaceAllString(text, "$1.$2"), nil
		}
	case DecimalPointGroups:
		if commas.MatchString(text) {
			return strings.ReplaceAll(text, ",", ""), nil
		}
	case DecimalCommaGroups:
		if points.MatchString(text) {
			return strings.Replace(strings.ReplaceAll(text, ".", ""), ",", ".", 1), nil
		}
		if strings.Count(text, ",") == 1 && !strings.Contains(text, ".") {
			return decimals.ReplaceAllString(text, "$1.$2"), nil
		}
		if strings.Contains(text, ".") && plainNumber.MatchString(text) {
			return text, &Error{Code: Invalid, Message: "its point parts no groups of three digits", Expected: "a decimal comma, as the other numbers of the file"}
		}
	}
	return text, nil
}

func twoReadings(text, decimal, whole, sign string) *Error {
	return &Error{Code: Invalid, Message: "\"" + Clip(text) + "\" can be read in two ways", Expected: decimal + " or " + whole + ", with a " + sign + " as decimal sign and no groups of digits"}
}

var (
	withError = regexp.MustCompile(`^([+-]?[0-9.]+(?:[eE][+-]?\d+)?)\s*(?:\+/?-|±|\+/−|\+−)\s*([0-9.,]+)`)
	withUnit  = regexp.MustCompile(`^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*([A-Za-zµ°%‰][A-Za-zµ°%‰/ .-]*\d?)$`)
	withWord  = regexp.MustCompile(`^(?:<|>|~|≈|≤|≥|c\.|ca\.?|about|approx\.?)\s*[+-]?[0-9.]+$`)
	ranged    = regexp.MustCompile(`^([0-9.]+)\s*(?:-|–|—|\.\.|to)\s*([0-9.]+)$`)
)

// NumberHint says what is the matter with a text that is no number, and what to
// write instead, "" when it is nothing that is met often. errorColumn is the
// column of the standard error that belongs to it, "" if there is none.
func NumberHint(text, errorColumn string) string {
	text = strings.TrimSpace(text)
	quoted := "\"" + Clip(text) + "\" "
	if m := withError.FindStringSubmatch(text); m != nil {
		if errorColumn != "" {
			return quoted + "holds a value and its error; write " + m[1] + " here and one standard error, " + m[2] + " if it is one, as " + errorColumn
		}
		return quoted + "holds a value and its error; write " + m[1] + " alone"
	}
	if threeAfter.MatchString(text) {
		return quoted + "can be read in two ways; write " + strings.Replace(text, ",", ".", 1) + " or " + strings.Replace(text, ",", "", 1)
	}
	if oneComma.MatchString(text) {
		return quoted + "has a decimal comma; write " + strings.Replace(text, ",", ".", 1)
	}
	if commas.MatchString(text) {
		return quoted + "has commas between groups of digits; write " + strings.ReplaceAll(text, ",", "")
	}
	if m := withUnit.FindStringSubmatch(text); m != nil {
		return quoted + "holds its unit; write " + m[1] + " alone"
	}
	if m := ranged.FindStringSubmatch(text); m != nil {
		return quoted + "is a range; write one number, the one you would use"
	}
	if withWord.MatchString(text) {
		return quoted + "holds a sign or word before the number; write the number alone and say in the notes how sure it is"
	}
	return ""
}

// ErrorColumn is the column of the standard error of another, "" if it has
// none.
func ErrorColumn(name string) string {
	for _, try := range []string{name + "_se", strings.TrimSuffix(name, "_deg") + "_se_deg", strings.TrimSuffix(name, "_ma") + "_se_ma"} {
		if _, ok := columnByName[try]; ok && try != name {
			return try
		}
	}
	return ""
}
