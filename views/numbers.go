package views

import (
	"math"
	"strconv"
	"strings"

	"fathombend/stats"
)

// unknownMark stands where a number is not known.
const unknownMark = "–"

// numberText writes x with the given number of significant digits and a real
// minus sign; a number that is not finite is a dash.
func numberText(x float64, digits int) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return unknownMark
	}
	if x == 0 {
		return "0"
	}
	decimals := digits - 1 - int(math.Floor(math.Log10(math.Abs(x))))
	return fixedText(x, decimals)
}

// tidyText is numberText without zeros at its end: for inputs, which are as
// exact as they were given.
func tidyText(x float64, digits int) string {
	s := numberText(x, digits)
	if strings.Contains(s, ".") && !strings.Contains(s, "×") {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// fixedText writes x with the given number of decimals; a number too small to
// read that way is written as a power of ten.
func fixedText(x float64, decimals int) string {
	switch {
	case math.IsNaN(x) || math.IsInf(x, 0):
		return unknownMark
	case math.Abs(x) >= 1e9 || (decimals > 6 && x != 0):
		s := strconv.FormatFloat(x, 'e', 2, 64)
		mantissa, exponent, _ := strings.Cut(s, "e")
		n, _ := strconv.Atoi(exponent)
		return minus(mantissa) + " × 10" + superscript(n)
	}
	return minus(strconv.FormatFloat(x, 'f', min(max(decimals, 0), 8), 64))
}

// minus writes the sign as a minus, not a hyphen, and never a negative zero.
func minus(s string) string {
	rest, negative := strings.CutPrefix(s, "-")
	if !negative {
		return s
	}
	if strings.Trim(rest, "0.") == "" {
		return rest
	}
	return "−" + rest
}

func superscript(n int) string {
	return strings.NewReplacer("-", "⁻", "0", "⁰", "1", "¹", "2", "²", "3", "³", "4", "⁴", "5", "⁵", "6", "⁶", "7", "⁷", "8", "⁸", "9", "⁹").
		Replace(strconv.Itoa(n))
}

func finiteInterval(i stats.Interval) bool {
	return !math.IsNaN(i[0]+i[1]) && !math.IsInf(i[0], 0) && !math.IsInf(i[1], 0)
}

// intervalDecimals are the decimals that show the width of an interval with
// two significant digits: more would pretend to know more.
func intervalDecimals(lo, hi float64) int {
	w := hi - lo
	if !(w > 0) || math.IsInf(w, 0) {
		return 3
	}
	return 1 - int(math.Floor(math.Log10(w)))
}

// valueTexts are a value and the ends of its interval, to be typeset as one
// thing with one number of decimals.
type valueTexts struct{ value, low, high string }

func estimateTexts(x float64, i stats.Interval) valueTexts {
	if !finiteInterval(i) {
		one := func(v float64) string { return numberText(v, 3) }
		return valueTexts{one(x), one(i[0]), one(i[1])}
	}
	d := intervalDecimals(i[0], i[1])
	return valueTexts{fixedText(x, d), fixedText(i[0], d), fixedText(i[1], d)}
}

// shareTexts are estimateTexts with three decimals at most.
func shareTexts(x float64, i stats.Interval) valueTexts {
	if !finiteInterval(i) || intervalDecimals(i[0], i[1]) <= 3 {
		return estimateTexts(x, i)
	}
	return valueTexts{fixedText(x, 3), fixedText(i[0], 3), fixedText(i[1], 3)}
}

// percent writes a fraction as a whole percentage.
func percent(x float64) string {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return unknownMark
	}
	return minus(strconv.FormatFloat(100*x, 'f', 0, 64)) + " %"
}

// pText writes a test's p: never more digits than permutations can give.
func pText(p float64) string {
	switch {
	case math.IsNaN(p):
		return unknownMark
	case p < 0.001:
		return "< 0.001"
	case p < 0.1:
		return fixedText(p, 3)
	}
	return fixedText(p, 2)
}

// settingText writes a setting of any of the kinds that settings have.
func settingText(v any) string {
	switch x := v.(type) {
	case string:
		return strings.ReplaceAll(x, "_", " ")
	case bool:
		return yesNoText(x)
	case int:
		return strconv.Itoa(x)
	case uint64:
		return strconv.FormatUint(x, 10)
	case float64:
		return numberText(x, 4)
	case []float64:
		parts := make([]string, len(x))
		for i, f := range x {
			parts[i] = floatText(f)
		}
		return strings.Join(parts, ", ")
	}
	return ""
}
