package catalogue

import (
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"
)

// FilterParameters are the names ParseFilter reads.
var FilterParameters = []string{
	"q", "kind", "setting", "margin", "feeder", "grain", "confinement", "activity", "burial", "survey", "extraction", "grade",
	"basin", "parent_deposit", "source", "lat_min", "lat_max", "abs_lat_min", "abs_lat_max", "slope_min", "slope_max",
	"sinuosity_min", "sinuosity_max", "width_min", "width_max", "age_min", "age_max", "bbox", "release", "private", "sort", "page", "per_page",
}

// ChoiceParameters are those of FilterParameters that may be repeated; each is
// also the name of the column it selects on.
var ChoiceParameters = []string{"kind", "setting", "margin", "feeder", "grain", "confinement", "activity", "burial", "survey", "extraction", "grade", "basin", "parent_deposit", "source"}

// Limits of a filter: long lists and texts cost time and mean nothing.
const (
	maxChoices    = 100  // values of one parameter
	maxQuery      = 300  // characters of q
	maxChoiceText = 4000 // characters of one value
	maxPage       = 1e6
	// DefaultPerPage and MaxPerPage are the sizes of a page of a table.
	DefaultPerPage = 50
	MaxPerPage     = 500
)

// rangeParameter is a pair of _min and _max parameters.
type rangeParameter struct {
	name, unit string
	lo, hi     float64
	min, max   func(*Filter) *Number
	expr       string
}

// A row on today's sea floor without an age is of age 0; a buried one without
// an age is of no known age and no range holds it.
const ageExpr = "CASE WHEN m.age_ma IS NULL AND m.burial = 'seafloor' THEN 0.0 ELSE m.age_ma END"

var rangeParameters = []rangeParameter{
	{"lat", "degrees", -90, 90, func(f *Filter) *Number { return &f.LatMin }, func(f *Filter) *Number { return &f.LatMax }, "m.latitude_deg"},
	{"abs_lat", "degrees", 0, 90, func(f *Filter) *Number { return &f.AbsLatMin }, func(f *Filter) *Number { return &f.AbsLatMax }, "abs(m.latitude_deg)"},
	{"slope", "m/m", -largest, largest, func(f *Filter) *Number { return &f.SlopeMin }, func(f *Filter) *Number { return &f.SlopeMax }, "m.valley_slope"},
	{"sinuosity", "", 0, largest, func(f *Filter) *Number { return &f.SinuosityMin }, func(f *Filter) *Number { return &f.SinuosityMax }, "m.sinuosity"},
	{"width", "m", 0, largest, func(f *Filter) *Number { return &f.WidthMin }, func(f *Filter) *Number { return &f.WidthMax }, "m.channel_width_m"},
	{"age", "Ma", 0, 4600, func(f *Filter) *Number { return &f.AgeMin }, func(f *Filter) *Number { return &f.AgeMax }, ageExpr},
}

func badParameter(name, message, expected string) *Error {
	return &Error{Code: Invalid, Field: name, Message: message, Expected: expected}
}

// ParseFilter reads the filter parameters of the contract out of a query.
// Empty values, as forms send them, are not set. A bad value is an Invalid
// Error naming the parameter and what is allowed; parameters of other names
// are left to the caller.
func ParseFilter(q url.Values) (Filter, error) {
	var f Filter
	for _, name := range FilterParameters {
		values := given(q[name])
		if len(values) == 0 {
			continue
		}
		if slices.Contains(ChoiceParameters, name) {
			if err := f.parseChoices(name, values); err != nil {
				return Filter{}, err
			}
			continue
		}
		if len(values) > 1 {
			return Filter{}, badParameter(name, "it is given more than once", "one value")
		}
		if err := f.parseSingle(name, values[0]); err != nil {
			return Filter{}, err
		}
	}
	for _, r := range rangeParameters {
		if lo, hi := r.min(&f), r.max(&f); lo.Valid && hi.Valid && lo.V > hi.V {
			return Filter{}, badParameter(r.name+"_min", "it is above "+r.name+"_max, so no row can match", "at most "+FormatNumber(*hi))
		}
	}
	return f, nil
}

func given(values []string) []string {
	var out []string
	for _, v := range values {
		if v = strings.TrimSpace(v); v != "" {
			out = append(out, v)
		}
	}
	return out
}

func (f *Filter) parseChoices(name string, values []string) error {
	c, _ := ColumnByName(name)
	if len(values) > maxChoices {
		return badParameter(name, "it is given "+strconv.Itoa(len(values))+" times", "at most "+strconv.Itoa(maxChoices)+" values")
	}
	var kept []string
	for _, v := range values {
		switch {
		case c.Kind == KindChoice && !c.allows(v):
			return badParameter(name, strconv.Quote(Clip(v))+" is not one of its values", c.Expected())
		case !utf8.ValidString(v) || len(v) > 4*maxChoiceText:
			return badParameter(name, "the value cannot be read", "UTF-8 text of at most "+strconv.Itoa(maxChoiceText)+" characters")
		}
		if !slices.Contains(kept, v) {
			kept = append(kept, v)
		}
	}
	if f.Choices == nil {
		f.Choices = map[string][]string{}
	}
	f.Choices[name] = kept
	return nil
}

func (f *Filter) parseSingle(name, v string) error {
	switch name {
	case "q":
		if !utf8.ValidString(v) || utf8.RuneCountInString(v) > maxQuery {
			return badParameter(name, "the text is too long or not UTF-8", "at most "+strconv.Itoa(maxQuery)+" characters")
		}
		f.Text = v
	case "bbox":
		box, err := ParseBBox(v)
		if err != nil {
			return err
		}
		f.BBox = box
	case "release":
		if !validRelease(v) {
			return badParameter(name, strconv.Quote(Clip(v))+" is not the name of a release", "letters, digits, points, dashes and underscores, at most 64")
		}
		f.Release = v
	case "private":
		if v != "yes" && v != "no" {
			return badParameter(name, strconv.Quote(Clip(v))+" is not allowed", "yes, or no for the rows that everybody sees")
		}
		f.WithoutPrivate = v == "no"
	case "sort":
		if _, ok := ColumnByName(strings.TrimPrefix(v, "-")); !ok {
			return badParameter(name, strconv.Quote(Clip(v))+" is not a column", "a column, with - before it for descending; one of: "+strings.Join(ColumnNames(), ", "))
		}
		f.Sort = v
	case "page":
		return parsePage(name, v, maxPage, &f.Page)
	case "per_page":
		return parsePage(name, v, MaxPerPage, &f.PerPage)
	default:
		return f.parseRange(name, v)
	}
	return nil
}

func parsePage(name, v string, most int, into *int) error {
	n, err := strconv.Atoi(v)
	if err != nil || n < 1 || n > most {
		return badParameter(name, strconv.Quote(Clip(v))+" is not allowed", "a whole number from 1 to "+strconv.Itoa(most))
	}
	*into = n
	return nil
}

func (f *Filter) parseRange(name, v string) error {
	for _, r := range rangeParameters {
		var into *Number
		switch name {
		case r.name + "_min":
			into = r.min(f)
		case r.name + "_max":
			into = r.max(f)
		default:
			continue
		}
		x, err := strconv.ParseFloat(v, 64)
		if err != nil || math.IsNaN(x) || x < r.lo || x > r.hi {
			expected := "a number"
			if r.unit != "" {
				expected += " in " + r.unit
			}
			if r.hi < largest {
				expected += " from " + shortNumber(r.lo) + " to " + shortNumber(r.hi)
			} else if r.lo > -largest {
				expected += ", " + shortNumber(r.lo) + " or more"
			}
			why := strconv.Quote(Clip(v)) + " is not allowed"
			if hint := NumberHint(v, ""); err != nil && hint != "" {
				why = hint
			}
			return badParameter(name, why, expected+", with a point as decimal sign")
		}
		*into = Num(x)
		return nil
	}
	return nil
}

func shortNumber(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// ParseBBox reads west,south,east,north in WGS84 degrees; west above east
// crosses the antimeridian.
func ParseBBox(v string) (*BBox, error) {
	const expected = "west,south,east,north in degrees: longitudes -180 to 180, latitudes -90 to 90, south not above north; west above east crosses the antimeridian"
	parts := strings.Split(v, ",")
	if len(parts) != 4 {
		return nil, badParameter("bbox", strconv.Quote(Clip(v))+" does not hold four numbers", expected)
	}
	var x [4]float64
	for i, p := range parts {
		n, err := strconv.ParseFloat(strings.TrimSpace(p), 64)
		limit := 90.0
		if i%2 == 0 {
			limit = 180
		}
		if err != nil || math.IsNaN(n) || math.Abs(n) > limit {
			return nil, badParameter("bbox", strconv.Quote(Clip(p))+" is not allowed there", expected)
		}
		x[i] = n
	}
	if x[1] > x[3] {
		return nil, badParameter("bbox", "south is above north", expected)
	}
	return &BBox{West: x[0], South: x[1], East: x[2], North: x[3]}, nil
}

func (b BBox) String() string {
	return shortNumber(b.West) + "," + shortNumber(b.South) + "," + shortNumber(b.East) + "," + shortNumber(b.North)
}

func validRelease(v string) bool {
	return len(v) <= 64 && validMeasurement(v)
}

// Values is the way back to a query: only what is set.
func (f Filter) Values() url.Values {
	q := url.Values{}
	set := func(name, v string) {
		if v != "" {
			q.Set(name, v)
		}
	}
	for name, values := range f.Choices {
		if len(values) > 0 {
			q[name] = slices.Clone(values)
		}
	}
	for _, r := range rangeParameters {
		set(r.name+"_min", FormatNumber(*r.min(&f)))
		set(r.name+"_max", FormatNumber(*r.max(&f)))
	}
	set("q", f.Text)
	if f.BBox != nil {
		set("bbox", f.BBox.String())
	}
	set("release", f.Release)
	if f.WithoutPrivate {
		q.Set("private", "no")
	}
	set("sort", f.Sort)
	if f.Page > 1 {
		set("page", strconv.Itoa(f.Page))
	}
	if f.PerPage > 0 && f.PerPage != DefaultPerPage {
		set("per_page", strconv.Itoa(f.PerPage))
	}
	return q
}
