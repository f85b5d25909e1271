package stats

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"unicode"
)

// plural writes a count with its noun.
func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}

func upperFirst(s string) string {
	for i, r := range s {
		return string(unicode.ToUpper(r)) + s[i+len(string(r)):]
	}
	return s
}

// number writes a value with three significant digits, without an exponent
// unless it needs one.
func number(x float64) string {
	switch a := math.Abs(x); {
	case !finite(x):
		return "not known"
	case a >= 1000 && a < 1e6:
		return strconv.FormatFloat(x, 'f', 0, 64)
	case a != 0 && (a < 1e-4 || a >= 1e6):
		return strconv.FormatFloat(x, 'e', 2, 64)
	}
	s := strconv.FormatFloat(x, 'g', 3, 64)
	if strings.Contains(s, "e") {
		s = strconv.FormatFloat(x, 'f', 0, 64)
	}
	return s
}

// between writes an interval as "a to b".
func between(i Interval) string { return number(i[0]) + " to " + number(i[1]) }

// percent writes a fraction as a whole percentage.
func percent(x float64) string {
	if !finite(x) {
		return "an unknown share"
	}
	return fmt.Sprintf("%.0f %%", 100*x)
}

// percents writes an interval of fractions: "42 to 78 %".
func percents(i Interval) string {
	if !finite(i[0]) || !finite(i[1]) {
		return "no interval"
	}
	return fmt.Sprintf("%.0f to %.0f %%", 100*i[0], 100*i[1])
}

var predictorNames = map[string]string{
	"valley_slope": "valley slope", "abs_latitude": "latitude", "sin_abs_latitude": "the sine of latitude",
	"coriolis": "the Coriolis parameter", "channel_width": "channel width", "channel_depth": "channel depth",
	"log10_slope": "the logarithm of valley slope",
}

// nameOf is a predictor or category in words.
func nameOf(p string) string {
	if s, ok := predictorNames[p]; ok {
		return s
	}
	return strings.ReplaceAll(p, "_", " ")
}

// coefficientText names a coefficient: its predictor in words, or the letter or
// level that it has in its form.
func coefficientText(name string) string {
	if name == "intercept" {
		return "the intercept"
	}
	return nameOf(name)
}

// scaleName is a response scale as it is written.
func scaleName(scale string) string {
	switch scale {
	case "ln":
		return "ln P"
	case "ln_excess":
		return "ln(P - 1)"
	}
	return "P"
}

// clusterNoun is what is resampled whole, as a plural.
func clusterNoun(by string) string {
	switch by {
	case "parent_deposit":
		return "deposits"
	case "none":
		return "rows"
	}
	return map[string]string{"system": "systems", "source": "sources", "basin": "basins"}[by]
}

func clusterOne(by string) string { return strings.TrimSuffix(clusterNoun(by), "s") }

// list writes "a, b and c".
func list(items []string) string {
	switch n := len(items); n {
	case 0:
		return ""
	case 1:
		return items[0]
	default:
		return strings.Join(items[:n-1], ", ") + " and " + items[n-1]
	}
}

func lowerFirst(s string) string {
	for i, r := range s {
		return string(unicode.ToLower(r)) + s[i+len(string(r)):]
	}
	return s
}

func splitComma(s string) []string { return strings.Split(s, ",") }

func mapSlice(in []string, f func(string) string) []string {
	out := make([]string, len(in))
	for i, s := range in {
		out[i] = f(s)
	}
	return out
}
