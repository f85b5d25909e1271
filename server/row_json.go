package main

import (
	"encoding/json"
	"math"
	"strconv"

	"fathombend/catalogue"
)

// jsonKeys are the columns as members of a JSON object: `"name":`.
var jsonKeys = func() []string {
	keys := make([]string, len(catalogue.Columns))
	for i, c := range catalogue.Columns {
		keys[i] = `"` + c.Name + `":`
	}
	return keys
}()

// appendRow writes the members of rowJSON, without the braces, as json.Marshal
// would: for files of many rows, where that is too slow.
func appendRow(b []byte, r *catalogue.Row) []byte {
	for i := range catalogue.Columns {
		col := &catalogue.Columns[i]
		b = append(b, jsonKeys[i]...)
		if col.Numeric() {
			b = appendNumber(b, col.Number(r))
		} else {
			b = appendText(b, col.Get(r))
		}
		b = append(b, ',')
	}
	b = append(b, `"invented":`...)
	b = strconv.AppendBool(b, r.Invented)
	for _, m := range seenMarks(r) {
		b = append(b, `,"`+m.name+`":true`...)
	}
	return b
}

func appendNumber(b []byte, n catalogue.Number) []byte {
	if !n.Valid || !isFinite(n.V) {
		return append(b, "null"...)
	}
	return appendFloat(b, n.V)
}

// appendFloat writes a finite number as encoding/json does: the shortest text
// that reads as the same double, with an exponent only where it is very small
// or large.
func appendFloat(b []byte, v float64) []byte {
	abs := math.Abs(v)
	if abs == 0 || abs >= 1e-6 && abs < 1e21 {
		return strconv.AppendFloat(b, v, 'f', -1, 64)
	}
	b = strconv.AppendFloat(b, v, 'e', -1, 64)
	if n := len(b); n >= 4 && b[n-4] == 'e' && b[n-3] == '-' && b[n-2] == '0' {
		b[n-2] = b[n-1] // e-09 is written e-9
		b = b[:n-1]
	}
	return b
}

func appendText(b []byte, s string) []byte {
	for i := range len(s) {
		if c := s[i]; c < ' ' || c > '~' || c == '"' || c == '\\' || c == '<' || c == '>' || c == '&' {
			text, err := json.Marshal(s)
			if err != nil { // no string fails
				text = []byte(`""`)
			}
			return append(b, text...)
		}
	}
	b = append(b, '"')
	b = append(b, s...)
	return append(b, '"')
}
