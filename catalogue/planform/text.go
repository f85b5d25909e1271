package planform

import (
	"fmt"
	"math"
	"strconv"
)

// num prints a number shortly for a sentence.
func num(x float64) string { return strconv.FormatFloat(x, 'g', 8, 64) }

// km prints a length for a sentence: kilometres, or metres when short.
func km(m float64) string {
	switch {
	case math.Abs(m) >= 100e3:
		return fmt.Sprintf("%.0f km", m/1e3)
	case math.Abs(m) >= 1e3:
		return fmt.Sprintf("%.3g km", m/1e3)
	}
	return fmt.Sprintf("%.3g m", m)
}

func count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}

// clip keeps what is quoted from a file short.
func clip(s string) string {
	if r := []rune(s); len(r) > 60 {
		return string(r[:60]) + "..."
	}
	return s
}
