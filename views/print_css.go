package views

import (
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"
)

// cssRule is one rule of a flat style sheet: an element name or a list of
// classes that must all be there.
type cssRule struct {
	element string
	classes []string
	set     [][2]string
}

// parseCSS reads the sheets of printed figures: rules of element or class
// selectors, no nesting, no combinators.
func parseCSS(sheet string) []cssRule {
	var out []cssRule
	for _, block := range strings.Split(sheet, "}") {
		selectors, body, ok := strings.Cut(block, "{")
		if !ok {
			continue
		}
		var set [][2]string
		for _, d := range strings.Split(body, ";") {
			if name, value, ok := strings.Cut(d, ":"); ok {
				set = append(set, [2]string{strings.TrimSpace(name), strings.TrimSpace(value)})
			}
		}
		for _, s := range strings.Split(selectors, ",") {
			parts := strings.Split(strings.TrimSpace(s), ".")
			out = append(out, cssRule{parts[0], parts[1:], set})
		}
	}
	// The more classes the stronger, then the later.
	slices.SortStableFunc(out, func(a, b cssRule) int { return len(a.classes) - len(b.classes) })
	return out
}

// styled writes the style of each class of a drawing into the element itself,
// as presentation attributes, and takes the classes off: programs that read no
// style sheet show the figure as it is meant.
func styled(markup, sheet string) ([]byte, error) {
	rules := parseCSS(sheet)
	d := xml.NewDecoder(strings.NewReader(markup))
	var out bytes.Buffer
	out.WriteString(`<?xml version="1.0" encoding="UTF-8"?>` + "\n")
	var open []bool // start tags written; an element without content is closed at once
	pending := false
	flush := func() {
		if pending {
			out.WriteByte('>')
			pending = false
		}
	}
	for {
		t, err := d.RawToken()
		if errors.Is(err, io.EOF) {
			out.WriteByte('\n')
			return out.Bytes(), nil
		}
		if err != nil {
			return nil, fmt.Errorf("figure: %w", err)
		}
		switch e := t.(type) {
		case xml.StartElement:
			flush()
			writeStart(&out, e, rules)
			pending = true
			open = append(open, true)
		case xml.EndElement:
			if pending {
				out.WriteString("/>")
				pending = false
			} else {
				out.WriteString("</" + e.Name.Local + ">")
			}
			open = open[:len(open)-1]
		case xml.CharData:
			flush()
			if err := xml.EscapeText(&out, e); err != nil {
				return nil, err
			}
		}
	}
}

func writeStart(out *bytes.Buffer, e xml.StartElement, rules []cssRule) {
	out.WriteString("<" + e.Name.Local)
	var classes []string
	own := map[string]bool{}
	for _, a := range e.Attr {
		own[a.Name.Local] = true
		if a.Name.Local == "class" {
			classes = strings.Fields(a.Value)
			continue
		}
		writeAttribute(out, a.Name, a.Value)
	}
	switch e.Name.Local {
	case "svg", "g", "title", "desc", "defs", "clipPath":
		return
	}
	var names []string
	values := map[string]string{}
	for _, r := range rules {
		if r.element != "" && r.element != e.Name.Local || !containsAll(classes, r.classes) || len(r.classes) == 0 && r.element == "" {
			continue
		}
		for _, nv := range r.set {
			if _, seen := values[nv[0]]; !seen {
				names = append(names, nv[0])
			}
			values[nv[0]] = nv[1]
		}
	}
	for _, n := range names {
		if !own[n] {
			writeAttribute(out, xml.Name{Local: n}, values[n])
		}
	}
}

func writeAttribute(out *bytes.Buffer, name xml.Name, value string) {
	out.WriteByte(' ')
	if name.Space != "" {
		out.WriteString(name.Space + ":")
	}
	out.WriteString(name.Local + `="`)
	_ = xml.EscapeText(out, []byte(value)) // a buffer takes everything
	out.WriteByte('"')
}

func containsAll(have, want []string) bool {
	for _, w := range want {
		if !holds(have, w) {
			return false
		}
	}
	return true
}
