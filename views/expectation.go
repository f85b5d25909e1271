package views

import (
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
)

// ExpectationPage is what /expectation shows. Result is nil when nothing was
// asked, or when it was refused; Refusals then says why.
type ExpectationPage struct {
	Page
	Typed   url.Values // as typed, so that nothing is lost on an error
	Posted  bool       // asked by POST: the target stays out of addresses
	Target  expectation.Target
	Filter  catalogue.Filter
	Facets  []catalogue.Facet
	Result  *expectation.Result
	Days    DayFigure
	Series  []expectation.SeriesPoint // the site through time
	Name    string                    // of the target in a report on several
	Report  bool                      // printed: nothing stays folded
	Columns []ColumnHelp
	Refused string // why a target of a report has no answer
}

// ColumnHelp is one column of a file of targets.
type ColumnHelp struct {
	Name, Unit, Meaning string
	Out                 bool // added to the file that comes back
}

// DayFigure is the length of the day through time.
type DayFigure struct {
	ToMa     float64
	Curves   []DayCurve
	Observed []earth.Observation
}

// DayCurve is one history with its spread; ages in Ma, days in solar hours.
type DayCurve struct {
	Name, Title, Source   string
	Age, Value, Low, High []float64
}

// TargetsField is the form field of a file of targets.
const TargetsField = "targets"

// workedExample is the question offered to someone who has none yet: a buried
// channel at 28 degrees in Late Cretaceous time.
const workedExample = "/expectation?palaeolatitude=28&palaeolatitude_se=2&unit=Late+Cretaceous&target_grain=mud_sand&target_confinement=levee_confined&seed=1"

// question is the sentence the page answers.
func (p ExpectationPage) question() string {
	if p.Result == nil {
		return "What planform goes with a palaeolatitude and an age?"
	}
	return "What planform goes with " + latitudeText(p.Result.Palaeolatitude.Value) + " " + p.timeText() + "?"
}

// timeText is when, in words: the unit as typed, or the age.
func (p ExpectationPage) timeText() string {
	if u := strings.TrimSpace(p.Target.Unit); u != "" {
		return "in " + upperFirst(u) + " time"
	}
	if a := p.Result.Age.Value; a > 0 {
		return "at " + tidyText(a, 4) + " Ma"
	}
	return "today"
}

// latitudeText is a signed latitude as people write it.
func latitudeText(lat float64) string {
	if math.IsNaN(lat) {
		return unknownMark
	}
	s := strconv.FormatFloat(math.Round(math.Abs(lat)*10)/10, 'f', -1, 64) + "°"
	switch {
	case lat > 0:
		return s + " N"
	case lat < 0:
		return s + " S"
	}
	return s
}

// sentence is the answer before any table.
func (p ExpectationPage) sentence() string {
	r := p.Result
	where := "A channel at " + latitudeText(r.Palaeolatitude.Value) + " " + p.timeText()
	q := r.Combined.Sinuosity
	if q == nil {
		if r.Rows == 0 && len(p.Filter.Values()) == 0 {
			return where + ": no expectation can be formed, because the catalogue holds no row to learn from yet. What follows from place and age alone stands below."
		}
		return where + ": no expectation can be formed from these rows. Widen the filter of the training rows."
	}
	s := where + ": expected " + p.responseName() + " " + fixedText(q.P50, 2) + " [" + fixedText(q.P10, 2) + ", " + fixedText(q.P90, 2) + "]; " +
		"80 % of new systems are expected between these limits"
	if c := r.Combined.Coverage; c != nil && !math.IsNaN(c.C80) {
		s += ", which held " + percent(c.C80) + " when each deposit was left out in turn"
	}
	return s + "."
}

func (p ExpectationPage) responseName() string {
	if t := p.Result.ResponseText; t != "" {
		return t
	}
	return responseText(p.Result.Response, 5)
}

// value is what was typed into a field.
func (p ExpectationPage) value(name string) string { return p.Typed.Get(name) }

// err is the sentence beside the field that was refused.
func (p ExpectationPage) err(name string) string {
	return p.refused(name)
}

// explained are the explanations with an expectation, the combined one last.
func (p ExpectationPage) explained() []expectation.Explanation {
	out := slices.Clone(p.Result.Explanations)
	c := p.Result.Combined
	if c.Name == "" {
		c.Name = "combined"
	}
	return append(out, c)
}

var explanationNames = map[string]string{
	"coriolis": "Coriolis parameter", "latitude": "latitude itself", "climate": "climate state", "slope": "valley slope", "supply": "supply",
	"all": "all together", "none": "none of these", "combined": "combined by weight",
}

func explanationName(n string) string {
	if t, ok := explanationNames[n]; ok {
		return t
	}
	return strings.ReplaceAll(n, "_", " ")
}

// ribbonAnswer is one ribbon of the answer.
type ribbonAnswer struct {
	Label string
	P     float64
	Class string
}

// ribbons are the answer as shapes: the 10th, 50th and 90th percentile, and
// the observed channel when there is one.
func (p ExpectationPage) ribbons() []ribbonAnswer {
	q := p.Result.Combined.Sinuosity
	if q == nil {
		return nil
	}
	out := []ribbonAnswer{
		{"10 % of new systems lie below", q.P10, "limit"},
		{"expected: half lie below, half above", q.P50, "middle"},
		{"90 % lie below", q.P90, "limit"},
	}
	if o := p.Result.Observed; o != nil {
		out = append(out, ribbonAnswer{"the observed channel", o.Sinuosity, "observed"})
	}
	return out
}

// Panels are the names of the figures of an answer.
func (p ExpectationPage) Panels() []string {
	out := []string{"explanations"}
	if len(p.Days.Curves) > 0 {
		out = append(out, "day_length")
	}
	return out
}

// Figure draws one figure of the answer.
func (p ExpectationPage) Figure(name string) Plot {
	if name == "day_length" {
		return p.dayPlot()
	}
	return p.explanationPlot()
}

// explanationPlot sets the limits of the explanations under each other: whisker
// 10 to 90 %, mark the median.
func (p ExpectationPage) explanationPlot() Plot {
	var items []rankItem
	for _, e := range p.explained() {
		q := e.Sinuosity
		if q == nil {
			continue
		}
		name := explanationName(e.Name)
		if e.Name != "combined" && e.Weight > 0 {
			name += " (" + fixedText(e.Weight, 2) + ")"
		}
		it := rankItem{Name: name, X: q.P50, Low: q.P10, High: q.P90, Also: math.NaN(),
			Title: name + ", median " + fixedText(q.P50, 2) + ", 80 % limits " + fixedText(q.P10, 2) + " to " + fixedText(q.P90, 2)}
		if e.Name == "combined" {
			it.Shape = "square"
		}
		items = append(items, it)
	}
	plot := Plot{ID: "explanations", Title: "What each explanation expects", Desc: "Median and the limits that 80 % of new systems are expected between.",
		X: Axis{Label: "Sinuosity"}, Empty: "No explanation could be fitted to these rows."}
	if o := p.Result.Observed; o != nil {
		plot.Rules = []Rule{{At: o.Sinuosity, Vertical: true, Label: "observed", Class: "dash"}}
	}
	return rankPlot(plot, items)
}

var dayLineClasses = []struct{ line, band string }{{"", ""}, {"l2 dash", "b2"}, {"l3 dot-dash", ""}, {"l4 dash", ""}}

// dayPlot is the length of the day through time: histories with their spread,
// observed points over them, hollow where second-hand or from memory.
func (p ExpectationPage) dayPlot() Plot {
	d := p.Days
	plot := Plot{ID: "day-length", Title: "Length of the day through time",
		Desc: "Rival histories with their spread, and observed values; a hollow mark was not read in its source.",
		X:    Axis{Label: "Age (Ma)", Reverse: true, Min: 0, Max: d.ToMa}, Y: Axis{Label: "Length of the day (solar hours)"}, Height: 400}
	for i, c := range d.Curves {
		k := dayLineClasses[min(i, len(dayLineClasses)-1)]
		plot.Bands = append(plot.Bands, Band{X: c.Age, Low: c.Low, High: c.High, Class: k.band})
		plot.Lines = append(plot.Lines, Line{X: c.Age, Y: c.Value, Class: k.line})
	}
	for _, o := range d.Observed {
		q := Point{X: o.AgeMa, Y: o.SolarH, Class: "soft", Title: observationTitle(o), Size: 4}
		if !math.IsNaN(o.LengthErrH) && o.LengthErrH > 0 {
			q.Low, q.High = o.SolarH-o.LengthErrH, o.SolarH+o.LengthErrH
		}
		if o.Hollow() {
			q.Class = "soft hollow"
		}
		plot.Points = append(plot.Points, q)
	}
	r := p.Result
	q := Point{X: r.Age.Value, Y: r.DayLength.Value, Low: r.DayLength.Low, High: r.DayLength.High, Shape: "diamond", Class: "alarm", Size: 6,
		Title: "this target, " + tidyText(r.Age.Value, 4) + " Ma, " + fixedText(r.DayLength.Value, 2) + " h"}
	plot.Points = append(plot.Points, q)
	return plot
}

func observationTitle(o earth.Observation) string {
	s := tidyText(o.AgeMa, 4) + " Ma, " + fixedText(o.LengthH, 2) + " h " + o.DayKind
	if o.Method != "" {
		s += ", " + o.Method
	}
	return s + ", " + o.Source + " (" + o.Tag + ")"
}
