package catalogue

import (
	"fmt"
	"strings"
	"unicode"
)

// fromRows joins what a row is made of; the aliases are those of Column.expr.
const fromRows = ` FROM measurements m JOIN systems s ON s.id = m.system_id JOIN sources c ON c.id = m.source_id`

// where is a condition under construction.
type where struct {
	parts []string
	args  []any
}

func (w *where) add(cond string, args ...any) {
	w.parts = append(w.parts, cond)
	w.args = append(w.args, args...)
}

func (w *where) String() string {
	if len(w.parts) == 0 {
		return ""
	}
	return " WHERE " + strings.Join(w.parts, " AND ")
}

// condition turns the filter into SQL.
func (f *Filter) condition() (*where, error) {
	w := &where{}
	if f.Release != "" {
		// True of every row of a release; see frozenWith.
		w.add("m.release = ? COLLATE NOCASE", f.Release)
	}
	for _, name := range ChoiceParameters {
		values := f.Choices[name]
		if len(values) == 0 {
			continue
		}
		c, _ := ColumnByName(name)
		args := make([]any, len(values))
		for i, v := range values {
			args[i] = v
		}
		w.add(c.expr+" IN (?"+strings.Repeat(", ?", len(values)-1)+")", args...)
	}
	for _, r := range rangeParameters {
		if n := r.min(f); n.Valid {
			w.add(r.expr+" >= ?", n.V)
		}
		if n := r.max(f); n.Valid {
			w.add(r.expr+" <= ?", n.V)
		}
	}
	if f.Text != "" {
		w.addText(f.Text, f.Release)
	}
	if f.BBox != nil {
		w.addBox(*f.BBox, f.Release)
	}
	return w, nil
}

// addText asks for all words of the text, the last letters of each open. Every
// word is quoted: nothing of it is MATCH syntax.
func (w *where) addText(text, release string) {
	words := strings.FieldsFunc(text, func(r rune) bool { return !unicode.IsLetter(r) && !unicode.IsNumber(r) && !unicode.IsMark(r) })
	if len(words) == 0 {
		w.add("0")
		return
	}
	for i, x := range words {
		words[i] = `"` + x + `"*`
	}
	match := strings.Join(words, " ")
	if release != "" {
		w.add("m.version IN (SELECT rowid FROM frozen_search WHERE frozen_search MATCH ?)", match)
		return
	}
	w.add(textMatch, match)
}

// addBox preselects with the R*Tree, whose 32-bit boxes are rounded outwards,
// and decides with the doubles.
func (w *where) addBox(b BBox, release string) {
	const lon = "(m.longitude_deg - 360 * (m.longitude_deg > 180))"
	w.add("m.latitude_deg BETWEEN ? AND ?", b.South, b.North)
	indexed := release == "" // the R*Tree is of the rows as they are now
	if b.West > b.East {
		if indexed {
			w.add("m.id IN (SELECT id FROM places WHERE north >= ? AND south <= ? AND east >= ? UNION ALL SELECT id FROM places WHERE north >= ? AND south <= ? AND west <= ?)",
				b.South, b.North, b.West, b.South, b.North, b.East)
		}
		w.add("("+lon+" >= ? OR "+lon+" <= ?)", b.West, b.East)
		return
	}
	// -180 and 180 are one meridian: a box that touches one holds the other.
	box := "m.id IN (SELECT id FROM places WHERE north >= ? AND south <= ? AND east >= ? AND west <= ?"
	exact := "(" + lon + " BETWEEN ? AND ?"
	if b.West == -180 || b.East == 180 {
		if indexed {
			w.add(box+" UNION SELECT id FROM places WHERE north >= ? AND south <= ? AND (east >= 180 OR west <= -180))",
				b.South, b.North, b.West, b.East, b.South, b.North)
		}
		exact += " OR abs(" + lon + ") = 180"
	} else if indexed {
		w.add(box+")", b.South, b.North, b.West, b.East)
	}
	w.add(exact+")", b.West, b.East)
}

// sortColumn is the column that the filter sorts by, and whether it falls; nil
// without one.
func (f *Filter) sortColumn(def string) (c *Column, down bool, err error) {
	name := f.Sort
	if name == "" {
		name = def
	}
	if name == "" {
		return nil, false, nil
	}
	if strings.HasPrefix(name, "-") {
		name, down = name[1:], true
	}
	found, ok := ColumnByName(name)
	if !ok {
		return nil, false, badParameter("sort", fmt.Sprintf("%q is not a column", Clip(name)), "one of: "+strings.Join(ColumnNames(), ", "))
	}
	return &found, down, nil
}

// sorting is, in SQL, whether a cell of the column is not given, and what its
// cells are sorted by.
func (c *Column) sorting() (without, by string) {
	switch {
	case c.Name == "grade":
		return "m.grade_rank IS NULL", "m.grade_rank"
	case c.Numeric():
		return c.expr + " IS NULL", c.expr
	}
	return c.expr + " = ''", c.expr + " COLLATE NOCASE"
}

// orderBy sorts by the column of the filter, what is not given last, ties by
// the order in which the measurements were accepted.
func (f *Filter) orderBy(def string) (string, error) {
	c, down, err := f.sortColumn(def)
	if err != nil {
		return "", err
	}
	if c == nil {
		return " ORDER BY m.id", nil
	}
	without, by := c.sorting()
	if down {
		by += " DESC"
	}
	return " ORDER BY " + without + ", " + by + ", m.id", nil
}

// paging returns the page of the filter as LIMIT and OFFSET.
func (f *Filter) paging() (limit, offset int) {
	limit = f.PerPage
	if limit <= 0 {
		limit = DefaultPerPage
	}
	limit = min(limit, MaxPerPage)
	return limit, (max(f.Page, 1) - 1) * limit
}
