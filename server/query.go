package main

import (
	"net/url"
	"slices"
	"strconv"
	"strings"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
)

// params returns the parameters of a request: the query, or for POST the body
// (targets are confidential and may travel there).
func params(c echo.Context) (url.Values, error) {
	if c.Request().Method == "POST" {
		if err := c.Request().ParseForm(); err != nil {
			return nil, &badInput{"body", "the form could not be read; send it as application/x-www-form-urlencoded"}
		}
		return c.Request().PostForm, nil
	}
	q, err := url.ParseQuery(c.Request().URL.RawQuery)
	if err != nil {
		return nil, &badInput{"query", "the address holds a broken escape (%); write a plain % as %25"}
	}
	return q, nil
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
			return &badInput{name, "no such parameter here. Allowed: " + strings.Join(all, ", ")}
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

func short(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }

// clip keeps what is echoed back in a message short.
func clip(s string) string {
	if r := []rune(s); len(r) > 80 {
		return string(r[:80]) + "..."
	}
	return s
}

// filterOf reads the catalogue filter of a request.
func filterOf(q url.Values) (catalogue.Filter, error) { return catalogue.ParseFilter(q) }
