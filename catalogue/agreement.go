package catalogue

import (
	"fmt"
	"strings"
)

// agreement holds what the rows of one file have said about their systems, so
// that two rows do not change one system two ways. A value that the system had
// before the file says nothing: correcting one row of a download is enough.
type agreement struct {
	systems map[string]*said
	line    int // of the row at hand
}

type said struct {
	slug     string // "" while known by name only
	original *Row   // before the file, nil when the file makes the system
	values   map[string]string
	lines    map[string]int
}

func newAgreement() *agreement { return &agreement{systems: map[string]*said{}} }

// reconcile takes up what a row says of its system. Columns on which the row
// says nothing new take the system's present value.
func (g *agreement) reconcile(p *Row, ex *examined) []Finding {
	y := g.find(p, ex)
	var out []Finding
	for _, c := range systemColumns {
		v := CleanText(c.Get(p))
		if v == "" && ex.current != nil {
			v = c.Default
		}
		if y.silent(c, v, ex) {
			if ex.system != nil {
				c.copy(p, ex.system)
			}
			continue
		}
		if before, ok := y.values[c.Name]; ok && !sameValue(c, before, v) {
			out = append(out, Finding{Column: c.Name, Key: c.Name + "_agrees", Hard: true,
				Message:  fmt.Sprintf("%s belongs to the whole system, and line %d says %q for it", c.Name, y.lines[c.Name], Clip(before)),
				Expected: "one value for all rows of a system, or different systems"})
			continue
		}
		if _, ok := y.values[c.Name]; !ok {
			y.values[c.Name], y.lines[c.Name] = v, g.line
		}
	}
	return out
}

// find returns what was said of the system of a row. New systems are known by
// their name until they have a slug: two names may be given the same one.
func (g *agreement) find(p *Row, ex *examined) *said {
	name := "name:" + strings.ToLower(CleanText(p.SystemName))
	slug := ""
	if ex.named || ex.system != nil {
		slug = p.System
	}
	if y := g.systems[slug]; slug != "" && y != nil {
		return y
	}
	if y := g.systems[name]; y != nil && (slug == "" || y.slug == "" || y.slug == slug) {
		return y
	}
	y := &said{slug: slug, original: ex.system, values: map[string]string{}, lines: map[string]int{}}
	g.systems[name] = y
	if slug != "" {
		g.systems[slug] = y
	}
	return y
}

// silent says whether a cell says nothing about its system.
func (y *said) silent(c *Column, v string, ex *examined) bool {
	if y.original != nil && v == c.Get(y.original) {
		return true
	}
	moved := ex.current != nil && ex.system != nil && ex.current.System != ex.system.System
	if ex.current == nil || moved {
		return v == "" || (c.Kind == KindChoice && v == "unknown")
	}
	return false
}

func sameValue(c *Column, a, b string) bool {
	return a == b || (c.Name == "system_name" && strings.EqualFold(a, b))
}
