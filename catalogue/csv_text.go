package catalogue

import "strings"

// A spreadsheet runs a cell that starts with one of these as a formula.
const formulaStart = "=+-@\t\r"

// Neutralise puts a mark before a text cell that a spreadsheet would run. A
// text that already looks so marked gets one more, so that Plain is always the
// way back. Numbers are never passed through it.
func Neutralise(s string) string {
	if runs(s) {
		return "'" + s
	}
	return s
}

// Plain takes the mark of Neutralise off again.
func Plain(s string) string {
	if strings.HasPrefix(s, "'") && runs(s) {
		return s[1:]
	}
	return s
}

// runs says whether s, but for marks before it, starts like a formula.
func runs(s string) bool {
	rest := strings.TrimLeft(s, "'")
	return rest != "" && strings.IndexByte(formulaStart, rest[0]) >= 0
}
