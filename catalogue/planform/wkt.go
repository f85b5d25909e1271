package planform

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

var wktKinds = []string{"MULTILINESTRING", "LINESTRING", "GEOMETRYCOLLECTION", "MULTIPOINT", "MULTIPOLYGON", "POINT", "POLYGON"}

// isWKT says whether a text starts as well-known text does.
func isWKT(text []byte) bool {
	head := bytes.ToUpper(text[:min(len(text), 40)])
	if bytes.HasPrefix(head, []byte("SRID=")) {
		return true
	}
	for _, k := range wktKinds {
		if bytes.HasPrefix(head, []byte(k)) && bytes.IndexByte(text[:min(len(text), 64)], '(') >= 0 {
			return true
		}
		if bytes.HasPrefix(head, []byte(k+" EMPTY")) {
			return true
		}
	}
	return false
}

// wktReader walks well-known text (OGC 06-103r4, section 7).
type wktReader struct {
	c *collector
	b []byte
	i int
}

// wkt reads LINESTRING and MULTILINESTRING, with Z, M or ZM, any number of them,
// each perhaps after SRID=n; as some databases write it.
func (c *collector) wkt(text []byte) error {
	w := &wktReader{c: c, b: text}
	for {
		w.space()
		if w.i < len(w.b) && w.b[w.i] == ';' {
			w.i++
			continue
		}
		if w.i >= len(w.b) {
			return nil
		}
		if err := w.geometry(0); err != nil {
			return err
		}
	}
}

func (w *wktReader) space() {
	for w.i < len(w.b) && isSpace(w.b[w.i]) {
		w.i++
	}
}

func (w *wktReader) bad(expected string) error {
	return &InputError{"body", fmt.Sprintf("the WKT is broken at byte %d; expected %s", w.i+1, expected)}
}

// word reads letters, in capitals.
func (w *wktReader) word() string {
	w.space()
	start := w.i
	for w.i < len(w.b) && (w.b[w.i]|0x20 >= 'a' && w.b[w.i]|0x20 <= 'z') {
		w.i++
	}
	return strings.ToUpper(string(w.b[start:w.i]))
}

func (w *wktReader) eat(b byte) bool {
	w.space()
	if w.i < len(w.b) && w.b[w.i] == b {
		w.i++
		return true
	}
	return false
}

func (w *wktReader) geometry(depth int) error {
	if depth > 20 {
		return &InputError{"body", "the WKT nests deeper than 20 levels; expected LINESTRING or MULTILINESTRING"}
	}
	kind := w.word()
	if kind == "SRID" && w.eat('=') {
		w.space()
		start := w.i
		for w.i < len(w.b) && w.b[w.i] >= '0' && w.b[w.i] <= '9' {
			w.i++
		}
		if code := string(w.b[start:w.i]); code != "0" {
			w.c.fromFile = code
		}
		if !w.eat(';') {
			return w.bad("';' after SRID=n")
		}
		kind = w.word()
	}
	if !slices.Contains(wktKinds, strings.TrimRight(kind, "ZM")) && !slices.Contains(wktKinds, kind) {
		return w.bad("LINESTRING (x y, x y, ...) or MULTILINESTRING ((...), (...))")
	}
	dims := w.word()
	if strings.HasSuffix(kind, "Z") || strings.HasSuffix(kind, "M") {
		base := strings.TrimRight(kind, "ZM")
		kind, dims = base, kind[len(base):]+dims
	}
	if strings.HasSuffix(dims, "EMPTY") {
		w.c.refuse("a "+kind, "it is empty")
		return nil
	}
	switch kind {
	case "LINESTRING":
		return w.line(dims)
	case "MULTILINESTRING":
		return w.members(func() error { return w.line(dims) })
	case "GEOMETRYCOLLECTION":
		return w.members(func() error { return w.geometry(depth + 1) })
	}
	w.c.skipped[kind]++
	return w.skip()
}

// members visits a list in brackets.
func (w *wktReader) members(visit func() error) error {
	if !w.eat('(') {
		return w.bad("'('")
	}
	for {
		if err := visit(); err != nil {
			return err
		}
		switch {
		case w.eat(','):
		case w.eat(')'):
			return nil
		default:
			return w.bad("',' or ')'")
		}
	}
}

// skip passes over a bracketed text.
func (w *wktReader) skip() error {
	open := 0
	for ; w.i < len(w.b); w.i++ {
		switch w.b[w.i] {
		case '(':
			open++
		case ')':
			if open--; open <= 0 {
				w.i++
				return nil
			}
		}
	}
	return w.bad("')'")
}

func (w *wktReader) line(dims string) error {
	var v []Vertex
	err := w.members(func() error {
		p := [4]float64{math.NaN(), math.NaN(), math.NaN(), math.NaN()}
		n := 0
		for {
			w.space()
			start := w.i
			for w.i < len(w.b) && !isSpace(w.b[w.i]) && w.b[w.i] != ',' && w.b[w.i] != ')' && w.b[w.i] != '(' {
				w.i++
			}
			if w.i == start {
				break
			}
			x, err := strconv.ParseFloat(string(w.b[start:w.i]), 64)
			if err != nil {
				w.i = start
				return w.bad("a number")
			}
			if n < 4 {
				p[n] = x
			}
			n++
		}
		if n < 2 {
			return w.bad("two or three numbers for a vertex")
		}
		if dims == "M" { // a measure, no height
			p[2] = math.NaN()
		}
		v = append(v, Vertex{p[0], p[1], p[2], math.NaN()})
		return w.c.grow(1)
	})
	if err != nil {
		return err
	}
	w.c.add(Line{Vertices: slices.Clip(v)})
	return nil
}
