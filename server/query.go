package main

import (
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/stats/earth"
)

// params returns the parameters of a request: the query, or for POST the body
// (targets are confidential and may travel there).
func params(c echo.Context) (url.Values, error) {
	if c.Request().Method == "POST" {
		if err := c.Request().ParseForm(); err != nil {
			return nil, &badInput{"body", "the form could not be read. Expected application/x-www-form-urlencoded"}
		}
		return ownView(c, c.Request().PostForm), nil
	}
	q, err := url.ParseQuery(c.Request().URL.RawQuery)
	if err != nil {
		return nil, &badInput{"query", "the address holds a broken escape (%). Expected %25 for a plain %"}
	}
	return ownView(c, q), nil
}

// ownView honours private=no wherever a question is read. Other values are for
// ParseFilter to refuse.
func ownView(c echo.Context, q url.Values) url.Values {
	if strings.TrimSpace(q.Get("private")) == "no" {
		withoutPrivate(c)
	}
	return q
}

// allow refuses every parameter that is not in one of the lists, naming it and
// what is allowed.
func allow(q url.Values, lists ...[]string) error {
	all := slices.Concat(lists...)
	names := make([]string, 0, len(q))
	for name := range q {
		names = append(names, name)
	}
	slices.Sort(names)
	for _, name := range names {
		if !slices.Contains(all, name) {
			near := nearest(name, all)
			if near != "" {
				near = " Is " + near + " meant?"
			}
			return &badInput{name, "no such parameter here." + near + " Allowed: " + strings.Join(all, ", ")}
		}
	}
	return nil
}

// oneOf reads a choice.
func oneOf(q url.Values, name, def string, choices []string) (string, error) {
	v := q.Get(name)
	if v == "" {
		return def, nil
	}
	if !slices.Contains(choices, v) {
		return "", &badInput{name, strconv.Quote(clip(v)) + " is not one of its values. Expected one of: " + strings.Join(choices, ", ")}
	}
	return v, nil
}

// number reads a finite number in [lo, hi]; an empty value gives def.
func number(q url.Values, name string, def, lo, hi float64) (float64, error) {
	v := strings.TrimSpace(q.Get(name))
	if v == "" {
		return def, nil
	}
	x, err := strconv.ParseFloat(v, 64)
	if hint := catalogue.NumberHint(v, ""); err != nil && hint != "" && !strings.Contains(hint, "decimal comma") {
		return 0, &badInput{name, hint + ". Expected a number from " + short(lo) + " to " + short(hi)}
	}
	if dotted := strings.Replace(v, ",", ".", 1); err != nil && strings.Count(v, ",") == 1 && isNumber(dotted) {
		return 0, &badInput{name, strconv.Quote(clip(v)) + " has a comma as decimal sign. Expected " + dotted + ", with a point"}
	}
	if err != nil || !isFinite(x) || x < lo || x > hi {
		return 0, &badInput{name, strconv.Quote(clip(v)) + " is not allowed. Expected a number from " + short(lo) + " to " + short(hi) + ", with a point as decimal sign"}
	}
	return x, nil
}

// whole reads a whole number in [lo, hi].
func whole(q url.Values, name string, def, lo, hi int) (int, error) {
	v := strings.TrimSpace(q.Get(name))
	if v == "" {
		return def, nil
	}
	x, err := strconv.Atoi(v)
	if err != nil || x < lo || x > hi {
		return 0, &badInput{name, strconv.Quote(clip(v)) + " is not allowed. Expected a whole number from " + strconv.Itoa(lo) + " to " + strconv.Itoa(hi)}
	}
	return x, nil
}

// short writes a number so that reading it gives the same double: plainly,
// unless that would be a row of zeros.
func short(x float64) string {
	if a := math.Abs(x); a != 0 && (a < 1e-9 || a >= 1e15) {
		return strconv.FormatFloat(x, 'g', -1, 64)
	}
	return strconv.FormatFloat(x, 'f', -1, 64)
}

// counted writes a count with its noun.
func counted(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}

// nearest is the one of names that text was most likely meant to be, "" when
// none is near: at most a third of its letters differ.
func nearest(text string, names []string) string {
	best, at := "", len(text)/3+1
	for _, n := range names {
		if d := earth.Distance(strings.ToLower(text), n); d < at {
			best, at = n, d
		}
	}
	return best
}

// clip keeps what is echoed back in a message short.
func clip(s string) string {
	if r := []rune(s); len(r) > 80 {
		return string(r[:80]) + "..."
	}
	return s
}

// unusedOfTables names what an address gives of order and pages where neither
// has a meaning, "" when it gives none: they are parameters of the filter, and
// links carry them along from a table.
func unusedOfTables(f catalogue.Filter) string {
	var names []string
	for _, n := range []struct {
		name string
		set  bool
	}{{"order (sort)", f.Sort != ""}, {"page", f.Page > 0}, {"page size (per_page)", f.PerPage > 0}} {
		if n.set {
			names = append(names, n.name)
		}
	}
	if len(names) == 0 {
		return ""
	}
	return "Not used here: " + strings.Join(names, ", ") + ", which belong to a table; every row that the filter leaves counts."
}

// noteUnused says the same in the header of a file that has no other place
// for it.
func noteUnused(c echo.Context, f catalogue.Filter) {
	if note := unusedOfTables(f); note != "" {
		c.Response().Header().Set("Fathombend-Note", note)
	}
}

// filterOf reads the catalogue filter of a request.
func filterOf(q url.Values) (catalogue.Filter, error) { return catalogue.ParseFilter(q) }
