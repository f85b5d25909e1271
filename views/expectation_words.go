package views

import (
	"math"
	"net/url"
	"strings"

	"github.com/a-h/templ"

	"fathombend/stats/expectation"
)

// ribbonAxis is the page length of the axis of every ribbon of the answer.
const ribbonAxis = 180

// ribbonHalf is the half height that holds all ribbons of the answer.
func (p ExpectationPage) ribbonHalf() float64 {
	half := 20.0
	for _, r := range p.ribbons() {
		half = math.Max(half, RibbonShape(r.P, ribbonAxis).Half)
	}
	return half
}

// standingCautions are shown while there is no answer to take them from.
var standingCautions = []string{
	"A first-order regional expectation from a small, biased compilation; not a basis for siting a well, a cable or a structure, nor for a hazard assessment, by itself.",
	"Seismic, core and engineering survey by qualified people, and the rules of the place, decide.",
	"Seafloor flows break cables and moorings; slope failure can raise tsunami: those need licensed practice.",
}

func (p ExpectationPage) cautions() []string {
	if p.Result == nil || len(p.Result.Cautions) == 0 {
		return standingCautions
	}
	return p.Result.Cautions
}

// shortCaution stands beside the answer: what it is, and what it is not for.
func (p ExpectationPage) shortCaution() string {
	c := p.cautions()
	if len(c) > 1 && !strings.Contains(c[0], "siting") {
		return c[0] + " " + c[1]
	}
	return c[0]
}

func weightText(e expectation.Explanation) string {
	if e.Name == "latitude" {
		return "shared"
	}
	return fixedText(e.Weight, 2)
}

func failureText(e expectation.Explanation) string {
	if e.Failure != "" {
		return e.Failure
	}
	return "cannot be fitted on these rows"
}

// partsText says where the spread of an explanation comes from.
func partsText(e expectation.Explanation) string {
	if len(e.Parts) == 0 {
		return ""
	}
	var words []string
	for _, k := range []string{"parameters", "residual", "inputs"} {
		if x, ok := e.Parts[k]; ok {
			words = append(words, k+" "+percent(x))
		}
	}
	return "Of its spread: " + strings.Join(words, ", ") + "."
}

func classReading(c expectation.Class) string {
	d := c.Probability - c.BaseRate
	switch {
	case math.IsNaN(d):
		return "no base rate"
	case math.Abs(d) < 0.05:
		return "about as common as in the catalogue"
	case d > 0:
		return "more likely here than in the catalogue"
	}
	return "less likely here than in the catalogue"
}

func (p ExpectationPage) palaeolatitudeText() string {
	l := p.Result.Palaeolatitude
	s := latitudeText(l.Value)
	if l.SE > 0 {
		s += ", standard error " + tidyText(l.SE, 2) + "°, 95 % from " + latitudeText(l.Interval[0]) + " to " + latitudeText(l.Interval[1])
	}
	return s
}

func (p ExpectationPage) ageText() string {
	a := p.Result.Age
	s := tidyText(a.Value, 4) + " Ma"
	if a.Value == 0 {
		s = "today"
	}
	if a.SE > 0 {
		s += ", standard error " + tidyText(a.SE, 2)
	}
	return s
}

func (p ExpectationPage) dayText() string {
	d := p.Result.DayLength
	s := fixedText(d.Value, 2) + " solar hours"
	if d.High > d.Low {
		s += " [" + fixedText(d.Low, 2) + ", " + fixedText(d.High, 2) + "]"
	}
	s += ", " + strings.ReplaceAll(d.History, "_", " ")
	for _, c := range p.Result.RotationChoices {
		if c.SolarTide != "" && p.usesRotation(c) {
			_, tide, _ := strings.Cut(c.Title, ", ")
			s += " (" + tide + ")"
		}
	}
	return s
}

// usesRotation says whether the answer uses this history.
func (p ExpectationPage) usesRotation(c expectation.RotationChoice) bool {
	day, tide := p.Target.Day, p.Target.SolarTide
	if day == "" {
		day = "tidal_history"
	}
	if tide == "" {
		tide = "middle"
	}
	return c.History == day && (c.SolarTide == "" || c.SolarTide == tide)
}

// coriolisText is |f| in 1e-4 s-1 with its limits.
func (p ExpectationPage) coriolisText() string {
	r := p.Result
	s := fixedText(r.Coriolis*1e4, 3)
	if r.CoriolisHigh > r.CoriolisLow {
		s += " [" + fixedText(r.CoriolisLow*1e4, 3) + ", " + fixedText(r.CoriolisHigh*1e4, 3) + "]"
	}
	return s + " × 10⁻⁴ s⁻¹"
}

// regimeRow is one flow number at 10 %, median and 90 % of the draws.
type regimeRow struct {
	Name   string // with its unit
	Values [3]float64
}

func regimeRows(r expectation.Regime) []regimeRow {
	return []regimeRow{
		{"Rossby number of the width, Ro_W", r.RoW},
		{"Rossby number of the bends, |Ro_R|", r.RoR},
		{"densimetric Froude number", r.Froude},
		{"flow speed (m/s)", r.SpeedMS},
		{"interface tilt across a straight reach (m)", r.TiltM},
		{"tilt in bends where the two terms add (m)", r.TiltAddingBendM},
		{"tilt in bends where they oppose (m)", r.TiltOpposingBendM},
	}
}

func (p ExpectationPage) explanationCaption() string {
	s := "Median and 80 % limits of the " + p.responseName() + " of one new system at this target under each explanation (its weight), and combined by weight. " +
		countText(p.Result.Rows, "row", "rows") + " in " + countText(p.Result.Clusters, "cluster", "clusters") + "."
	if p.Result.InventedRows > 0 {
		s += " " + countText(p.Result.InventedRows, "row is", "rows are") + " invented."
	}
	if p.Result.PrivateRows > 0 {
		s += " " + countText(p.Result.PrivateRows, "row is", "rows are") + " private."
	}
	return s
}

func (p ExpectationPage) dayCaption() string {
	s := "Length of the solar day through time by rival histories, with their spread, and observed values over them."
	for _, c := range p.Days.Curves {
		s += " " + upperFirst(c.Title) + ": " + c.Source + "."
	}
	return s + " The rhythmite value at 620 Ma lies well above the tidal history; the misfit is shown, not removed."
}

func (p ExpectationPage) figureHref(panel string) templ.SafeURL {
	q := url.Values{"panel": {panel}}
	for k, v := range p.Query {
		q[k] = v
	}
	return templ.SafeURL("/figures/expectation.svg?" + q.Encode())
}

// quantityText names a dimension with its unit.
func quantityText(name, unit string) string {
	s := strings.ReplaceAll(name, "_", " ")
	if unit == "" || unit == "1" {
		return s
	}
	return s + " (" + unit + ")"
}
