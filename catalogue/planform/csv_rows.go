package planform

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// value reads a number; missing gives NaN.
func (t *table) value(fields []string, name string) (x float64, text string, err error) {
	i, ok := t.col[name]
	if !ok || i >= len(fields) {
		return math.NaN(), "", nil
	}
	s := strings.TrimSpace(fields[i])
	switch strings.ToLower(s) {
	case "", "na", "null", "-", "none":
		return math.NaN(), "", nil
	}
	x, err = strconv.ParseFloat(s, 64)
	if err != nil && strings.Count(s, ",") == 1 {
		if x, err = strconv.ParseFloat(strings.Replace(s, ",", ".", 1), 64); err == nil {
			t.decimal = true
		}
	}
	if k, ok := t.scale[name]; ok {
		x *= k
	}
	return x, s, err
}

// row adds one row to its line. A row that cannot be read breaks its line, not
// the file.
func (t *table) row(fields []string, number int) error {
	empty := true
	for _, f := range fields {
		if strings.TrimSpace(f) != "" {
			empty = false
		}
	}
	if empty {
		return nil
	}
	name := ""
	if i, ok := t.col["line"]; ok && i < len(fields) {
		name = strings.TrimSpace(fields[i])
	}
	if t.has("left_lon", "left_lat", "right_lon", "right_lat") {
		if err := t.vertex(fields, number, name, "left_bank", "left_lon", "left_lat"); err != nil {
			return err
		}
		return t.vertex(fields, number, name, "right_bank", "right_lon", "right_lat")
	}
	role := ""
	if i, ok := t.col["bank"]; ok && i < len(fields) {
		role = roleOf(fields[i])
		switch strings.ToLower(strings.TrimSpace(fields[i])) {
		case "l":
			role = "left_bank"
		case "r":
			role = "right_bank"
		}
	}
	return t.vertex(fields, number, name, role, "lon", "lat")
}

// vertex adds one vertex to the line of the name and role.
func (t *table) vertex(fields []string, number int, name, role, lonName, latName string) error {
	k := t.line(name, role)
	if t.broken[k] != "" {
		return nil
	}
	v := Vertex{Depth: math.NaN(), Width: math.NaN()}
	left, right, seq := math.NaN(), math.NaN(), math.NaN()
	for _, f := range []struct {
		name string
		to   *float64
		need bool
	}{{lonName, &v.Lon, true}, {latName, &v.Lat, true}, {"elevation", &v.Depth, false}, {"width", &v.Width, false},
		{"levee_left", &left, false}, {"levee_right", &right, false}, {"seq", &seq, false}} {
		x, s, err := t.value(fields, f.name)
		label := strings.ReplaceAll(f.name, "_", " ")
		switch {
		case err != nil && f.name == "seq":
			continue
		case err != nil:
			t.broken[k] = fmt.Sprintf("row %d: %s %q is not a number%s", number, label, clip(s), dms(s))
			return nil
		case f.need && !finite(x):
			t.broken[k] = fmt.Sprintf("row %d: %s is missing or not a finite number", number, label)
			return nil
		case f.name == "width" && x <= 0:
			t.broken[k] = fmt.Sprintf("row %d: width %s is not positive; leave it empty where it is unknown", number, clip(s))
			return nil
		}
		*f.to = x
	}
	l := &t.lines[k]
	l.Vertices = append(l.Vertices, v)
	if t.has("levee_left", "levee_right") {
		l.LeveeLeft, l.LeveeRight = append(l.LeveeLeft, left), append(l.LeveeRight, right)
	}
	if _, ok := t.col["seq"]; ok {
		t.seq[k] = append(t.seq[k], seq)
	}
	return t.c.grow(1)
}

func dms(s string) string {
	if strings.ContainsAny(s, "°'\"NSEWnsew") {
		return "; expected decimal degrees, south and west negative"
	}
	return "; expected a number with a point as decimal sign"
}

// line is the number of the line of this name and role.
func (t *table) line(name, role string) int {
	key := role + "\x00" + name
	k, ok := t.byName[key]
	if !ok {
		k = len(t.lines)
		t.byName[key] = k
		t.lines = append(t.lines, Line{Name: name, Role: role})
		if role == "" {
			t.lines[k].Role = roleOf(name)
		}
		t.broken, t.seq = append(t.broken, ""), append(t.seq, nil)
	}
	return k
}

// finish hands the lines over.
func (t *table) finish() {
	note := "Columns: " + strings.Join(t.used, "; ") + "."
	for k, l := range t.lines {
		if t.broken[k] != "" {
			t.c.refuse(orElse(l.Name, fmt.Sprintf("line %d", k+1)), t.broken[k])
			continue
		}
		l.Vertices = slices.Clip(l.Vertices)
		l.Notes = append(l.Notes, note)
		if t.decimal {
			l.Notes = append(l.Notes, "Commas inside numbers were read as decimal points.")
		}
		if sortBySeq(&l, t.seq[k]) {
			l.Notes = append(l.Notes, "The rows were put in the order of their sequence column.")
		}
		t.c.add(l)
	}
}

// sortBySeq puts vertices in the order of a sequence column; false when they
// were in order, or not all rows have a number.
func sortBySeq(l *Line, seq []float64) bool {
	if len(seq) != len(l.Vertices) || slices.IsSorted(seq) || slices.ContainsFunc(seq, math.IsNaN) {
		return false
	}
	order := make([]int, len(seq))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case seq[a] < seq[b]:
			return -1
		case seq[a] > seq[b]:
			return 1
		}
		return 0
	})
	v := make([]Vertex, len(order))
	for i, k := range order {
		v[i] = l.Vertices[k]
	}
	l.Vertices = v
	if len(l.LeveeLeft) == len(order) {
		left, right := make([]float64, len(order)), make([]float64, len(order))
		for i, k := range order {
			left[i], right[i] = l.LeveeLeft[k], l.LeveeRight[k]
		}
		l.LeveeLeft, l.LeveeRight = left, right
	}
	return true
}
