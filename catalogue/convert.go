package catalogue

import (
	"fmt"
	"regexp"
	"strconv"
	"strings"
)

// conversion is another unit a column is accepted in.
type conversion struct {
	column string // as stored
	unit   string // as given, in words
	parse  func(text string) (float64, error)
}

// conversions by the name of the column as given.
var conversions = buildConversions()

func buildConversions() map[string]conversion {
	m := map[string]conversion{}
	for _, c := range Columns {
		if base, ok := strings.CutSuffix(c.Name, "_m"); ok && c.Unit == "m" {
			m[base+"_km"] = conversion{c.Name, "km", shifted(3)}
			m[base+"_ft"] = conversion{c.Name, "feet", feet}
		}
		if base, ok := strings.CutSuffix(c.Name, "_ma"); ok && c.Unit == "Ma" {
			m[base+"_ka"] = conversion{c.Name, "ka", shifted(-3)}
		}
	}
	for _, name := range []string{"valley_slope", "channel_slope"} {
		m[name+"_deg"] = conversion{name, "degrees", slopeOfDegrees}
		m[name+"_permille"] = conversion{name, "per mille", shifted(-3)}
		m[name+"_percent"] = conversion{name, "per cent", shifted(-2)}
		m[name+"_ratio"] = conversion{name, "1:n", slopeOfRatio}
	}
	return m
}

var plainNumber = regexp.MustCompile(`^[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE]([+-]?[0-9]{1,4}))?$`)

// shifted multiplies by a power of ten in the text, so that 1.234 km is the
// double nearest 1234 m.
func shifted(power int) func(string) (float64, error) {
	return func(text string) (float64, error) {
		m := plainNumber.FindStringSubmatch(text)
		if m == nil {
			return 0, strconv.ErrSyntax
		}
		mantissa, exp := text, 0
		if m[2] != "" {
			mantissa = strings.TrimSuffix(text, m[2])
			exp, _ = strconv.Atoi(m[3])
		}
		return strconv.ParseFloat(mantissa+"e"+strconv.Itoa(exp+power), 64)
	}
}

// feet are international ones, 0.3048 m by definition.
func feet(text string) (float64, error) {
	v, err := shifted(0)(text)
	return v * 0.3048, err
}

func slopeOfDegrees(text string) (float64, error) {
	v, err := shifted(0)(text)
	if err != nil {
		return 0, err
	}
	if v <= -90 || v >= 90 {
		return 0, fmt.Errorf("an angle of slope lies between -90 and 90 degrees")
	}
	return degreesToSlope(v), nil
}

// slopeOfRatio reads "1:200" or "200" as 1/200.
func slopeOfRatio(text string) (float64, error) {
	if before, after, ok := strings.Cut(text, ":"); ok {
		if strings.TrimSpace(before) != "1" {
			return 0, fmt.Errorf("a ratio starts with 1, as 1:200")
		}
		text = strings.TrimSpace(after)
	}
	v, err := shifted(0)(text)
	if err != nil {
		return 0, err
	}
	if v == 0 {
		return 0, fmt.Errorf("a ratio of 1:0 is no slope")
	}
	return 1 / v, nil
}

// Degrees and minutes as written on charts: 12 34.5 S, 12°34.5'S, 12°34'30"S,
// 12d34m30s, -12:34.5; and decimal degrees with a letter, 12.5S.
var (
	sexagesimal  = regexp.MustCompile(`^([+-]?)([0-9]{1,3})(?:\s*[°ºd:]\s*|\s+)([0-9]{1,2}(?:\.[0-9]+)?)\s*(?:['′’m:]\s*|\s+|$)?(?:([0-9]{1,2}(?:\.[0-9]+)?)\s*(?:["″”s]|'')?)?\s*([NSEWnsew]?)$`)
	decimalPlace = regexp.MustCompile(`^([+-]?)([0-9]{1,3}(?:\.[0-9]+)?)\s*[°º]?\s*([NSEWnsew]?)$`)
)

// parseAngle reads a latitude or longitude that is not a plain number.
func parseAngle(text string, latitude bool) (float64, error) {
	text = strings.TrimSpace(text)
	sign, letter, value := "", "", 0.0
	if m := sexagesimal.FindStringSubmatch(text); m != nil {
		d, _ := strconv.ParseFloat(m[2], 64)
		minutes, _ := strconv.ParseFloat(m[3], 64)
		seconds := 0.0
		if m[4] != "" {
			seconds, _ = strconv.ParseFloat(m[4], 64)
		}
		if minutes >= 60 || seconds >= 60 {
			return 0, fmt.Errorf("minutes and seconds are below 60")
		}
		if m[4] != "" && strings.Contains(m[3], ".") {
			return 0, fmt.Errorf("minutes have decimals or seconds, not both")
		}
		sign, letter, value = m[1], m[5], d+(minutes+seconds/60)/60
	} else if m := decimalPlace.FindStringSubmatch(text); m != nil {
		sign, letter = m[1], m[3]
		value, _ = strconv.ParseFloat(m[2], 64)
	} else {
		return 0, strconv.ErrSyntax
	}
	letter = strings.ToUpper(letter)
	switch {
	case letter != "" && sign != "":
		return 0, fmt.Errorf("it has a sign and a letter")
	case letter != "" && latitude != strings.Contains("NS", letter):
		return 0, fmt.Errorf("the letter %s is for the other coordinate", letter)
	case sign == "-", letter == "S", letter == "W":
		value = -value
	}
	return value, nil
}

// angleColumn says whether a column takes degrees and minutes.
func angleColumn(c *Column) (latitude, ok bool) {
	if c.num == nil || c.Unit != "degrees" || strings.Contains(c.Name, "_se_") {
		return false, false
	}
	return strings.Contains(c.Name, "latitude"), true
}

// resolver prefixes that people write before a DOI.
var doiPrefixes = []string{"https://doi.org/", "http://doi.org/", "https://dx.doi.org/", "http://dx.doi.org/", "doi.org/", "doi:", "DOI:", "doi ", "DOI "}

func bareDOI(text string) string {
	for _, p := range doiPrefixes {
		if rest, ok := strings.CutPrefix(text, p); ok {
			return strings.TrimSpace(rest)
		}
	}
	return text
}
