package planform

import (
	"encoding/json"
	"fmt"
	"math"
	"strconv"
	"strings"
)

// scanner walks a JSON text. The general decoder would hold a million
// positions as two million small slices; this one writes them where they stay.
type scanner struct {
	b []byte
	i int
}

func (sc *scanner) bad(expected string) error {
	line := 1 + strings.Count(string(sc.b[:min(sc.i, len(sc.b))]), "\n")
	where := "at its end"
	if sc.i < len(sc.b) {
		where = fmt.Sprintf("at line %d, byte %d", line, sc.i+1)
	}
	return &InputError{"body", fmt.Sprintf("the JSON is broken %s; expected %s", where, expected)}
}

func (sc *scanner) space() {
	for sc.i < len(sc.b) {
		switch sc.b[sc.i] {
		case ' ', '\t', '\n', '\r':
			sc.i++
		default:
			return
		}
	}
}

// peek is the next byte, 0 at the end.
func (sc *scanner) peek() byte {
	if sc.i < len(sc.b) {
		return sc.b[sc.i]
	}
	return 0
}

func (sc *scanner) eat(b byte, expected string) error {
	sc.space()
	if sc.peek() != b {
		return sc.bad(expected)
	}
	sc.i++
	return nil
}

// list visits the comma-separated members between two brackets.
func (sc *scanner) list(open, shut byte, visit func() error) error {
	if err := sc.eat(open, "'"+string(open)+"'"); err != nil {
		return err
	}
	sc.space()
	if sc.peek() == shut {
		sc.i++
		return nil
	}
	for {
		if err := visit(); err != nil {
			return err
		}
		sc.space()
		switch sc.peek() {
		case ',':
			sc.i++
		case shut:
			sc.i++
			return nil
		default:
			return sc.bad("',' or '" + string(shut) + "'")
		}
	}
}

// text reads a string.
func (sc *scanner) text() (string, error) {
	sc.space()
	start := sc.i
	if err := sc.skipString(); err != nil {
		return "", err
	}
	var s string
	if err := json.Unmarshal(sc.b[start:sc.i], &s); err != nil {
		return "", sc.bad("a string")
	}
	return s, nil
}

func (sc *scanner) skipString() error {
	if err := sc.eat('"', "a string in double quotes"); err != nil {
		return err
	}
	for sc.i < len(sc.b) {
		switch sc.b[sc.i] {
		case '\\':
			sc.i++
		case '"':
			sc.i++
			return nil
		}
		sc.i++
	}
	return sc.bad("the end of a string")
}

// raw skips any value and returns its text.
func (sc *scanner) raw(depth int) ([]byte, error) {
	if depth > jsonDepth {
		return nil, &InputError{"body", fmt.Sprintf("the JSON nests deeper than %d levels; expected GeoJSON", jsonDepth)}
	}
	sc.space()
	start := sc.i
	var err error
	switch sc.peek() {
	case '{':
		err = sc.list('{', '}', func() error {
			sc.space()
			if err := sc.skipString(); err != nil {
				return err
			}
			if err := sc.eat(':', "':'"); err != nil {
				return err
			}
			_, err := sc.raw(depth + 1)
			return err
		})
	case '[':
		err = sc.list('[', ']', func() error { _, err := sc.raw(depth + 1); return err })
	case '"':
		err = sc.skipString()
	default:
		for sc.i < len(sc.b) && !strings.ContainsRune(",]}: \t\r\n", rune(sc.b[sc.i])) {
			sc.i++
		}
		if sc.i == start {
			err = sc.bad("a value")
		}
	}
	return sc.b[start:sc.i], err
}

// number reads a number; null, which some programs write for a missing height,
// is NaN.
func (sc *scanner) number() (float64, error) {
	start := sc.i
	for sc.i < len(sc.b) {
		switch b := sc.b[sc.i]; {
		case b >= '0' && b <= '9', b == '-', b == '+', b == '.', b == 'e', b == 'E':
			sc.i++
			continue
		}
		break
	}
	if sc.i == start && strings.HasPrefix(string(sc.b[sc.i:min(len(sc.b), sc.i+4)]), "null") {
		sc.i += 4
		return math.NaN(), nil
	}
	v, err := strconv.ParseFloat(string(sc.b[start:sc.i]), 64)
	if err != nil {
		return 0, sc.bad("a number")
	}
	return v, nil
}
