package views

import (
	"math"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats/expectation"
)

// DeepTimePage is the test of the rules on ancient rows.
type DeepTimePage struct {
	Page
	Result *expectation.DeepTimeResult
	Filter catalogue.Filter
	Facets []catalogue.Facet
}

// seriesColumn is one quantity of a series with its limits.
type seriesColumn struct {
	id, title, axis string
	reverseY        bool
	of              func(expectation.SeriesPoint) (value, low, high float64)
}

var seriesColumns = []seriesColumn{
	{"time-latitude", "Palaeolatitude", "Latitude (°)", false, func(s expectation.SeriesPoint) (v, lo, hi float64) {
		return s.Palaeolatitude.Value, s.Palaeolatitude.Interval[0], s.Palaeolatitude.Interval[1]
	}},
	{"time-day", "Length of the day", "Day (solar hours)", false, func(s expectation.SeriesPoint) (v, lo, hi float64) {
		return s.DayLength.Value, s.DayLength.Low, s.DayLength.High
	}},
	{"time-coriolis", "Coriolis parameter", "|f| (1e-4 s⁻¹)", false, func(s expectation.SeriesPoint) (v, lo, hi float64) {
		return s.Coriolis * 1e4, s.CoriolisLow * 1e4, s.CoriolisHigh * 1e4
	}},
	{"time-sinuosity", "Expected sinuosity", "Sinuosity", false, func(s expectation.SeriesPoint) (v, lo, hi float64) {
		if s.Sinuosity == nil {
			return math.NaN(), math.NaN(), math.NaN()
		}
		return s.Sinuosity.P50, s.Sinuosity.P10, s.Sinuosity.P90
	}},
}

// seriesPlots are the quantities against age, one under the other on one axis
// of time, so that they can be read across.
func (p ExpectationPage) seriesPlots() []Plot {
	to := 0.0
	for _, s := range p.Series {
		to = math.Max(to, s.AgeMa)
	}
	var out []Plot
	for i, c := range seriesColumns {
		plot := Plot{ID: c.id, Title: c.title + " through time", Desc: "Value with its limits against age.", Left: 74, Width: 540, Height: 150,
			X: Axis{Min: 0, Max: math.Max(to, 1), Reverse: true}, Y: Axis{Label: c.axis}, Empty: c.title + ": no age could be answered."}
		if i == len(seriesColumns)-1 {
			plot.X.Label, plot.Height = "Age (Ma)", 172
		}
		var b Band
		var l Line
		for _, s := range p.Series {
			v, lo, hi := math.NaN(), math.NaN(), math.NaN()
			if s.Failure == "" {
				v, lo, hi = c.of(s)
			}
			b.X, b.Low, b.High = append(b.X, s.AgeMa), append(b.Low, lo), append(b.High, hi)
			l.X, l.Y = append(l.X, s.AgeMa), append(l.Y, v)
		}
		plot.Bands, plot.Lines = []Band{b}, []Line{l}
		if age := p.Result.Age.Value; age > 0 && age <= to {
			plot.Rules = []Rule{{At: age, Vertical: true, Class: "dash"}}
		}
		out = append(out, plot)
	}
	return out
}

// siteText names the site of a series.
func (p ExpectationPage) siteText() string {
	t := p.Target
	if math.IsNaN(t.SiteLat) || math.IsNaN(t.SiteLon) {
		return "a channel at " + latitudeText(p.Result.Palaeolatitude.Value)
	}
	s := latitudeText(t.SiteLat) + ", " + longitudeText(t.SiteLon)
	if t.Plate != "" {
		s += " on " + t.Plate
	}
	return s
}

func longitudeText(lon float64) string {
	s := strings.NewReplacer(" N", " E", " S", " W").Replace(latitudeText(math.Remainder(lon, 360)))
	return s
}

// fixedLatitude says that only a plate moves a site.
func (p ExpectationPage) fixedLatitude() bool { return p.Target.Plate == "" }

func (p ExpectationPage) timeCaption() string {
	s := "Palaeolatitude, length of the day, Coriolis parameter and expected " + p.responseName() + " (median and 80 % limits) of " + p.siteText() +
		" against age; the other bands are 95 % limits."
	if p.Result.InventedRows > 0 {
		s += " " + countText(p.Result.InventedRows, "training row is", "training rows are") + " invented."
	}
	return s
}

// address is this target's address at another path.
func (p ExpectationPage) address(path string) string {
	if len(p.Query) == 0 {
		return path
	}
	return path + "?" + p.Query.Encode()
}

var ruleNames = map[string]string{"coriolis": "the Coriolis parameter", "climate": "climate state", "latitude": "plain latitude"}

func ruleName(r string) string {
	if n, ok := ruleNames[r]; ok {
		return n
	}
	return r
}

// neededText writes a number of systems without false digits.
func neededText(n float64) string {
	switch {
	case math.IsNaN(n):
		return unknownMark
	case math.IsInf(n, 1) || n >= 1e6:
		return "over a million"
	}
	return roundCount(n)
}

// roundCount keeps two significant digits of a large count.
func roundCount(n float64) string {
	if n < 100 {
		return fixedText(math.Ceil(n), 0)
	}
	p := math.Pow(10, math.Floor(math.Log10(n))-1)
	return fixedText(math.Round(n/p)*p, 0)
}
