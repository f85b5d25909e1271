package expectation

import (
	"fmt"
	"math"
	"strings"

	"fathombend/stats"
)

// sinuousFrom is where "sinuous" starts in the facies statements: the second
// of the class limits, 1.2 by default. A convention.
func (f *Fits) sinuousFrom() float64 {
	return f.options.ClassLimits[min(1, len(f.options.ClassLimits)-1)]
}

// steepFrom is "steep" in the facies statements, m/m (half a degree): above
// most of the classic compilation. A convention.
const steepFrom = 0.0087

// likelihoodWord follows the likelihood scale of the IPCC guidance note on
// uncertainties (Mastrandrea et al. 2010), from memory.
func likelihoodWord(p float64) string {
	switch {
	case math.IsNaN(p):
		return "undecided"
	case p >= 0.9:
		return "very likely"
	case p >= 0.66:
		return "likely"
	case p >= 0.33:
		return "about as likely as not"
	case p >= 0.1:
		return "unlikely"
	}
	return "very unlikely"
}

// tri is yes, no or not known.
type tri int

const (
	unknown tri = iota
	yes
	no
)

func is(value string, want ...string) tri {
	if value == "" || value == "unknown" {
		return unknown
	}
	for _, w := range want {
		if value == w {
			return yes
		}
	}
	return no
}

// facies is what the statements depend on.
type facies struct {
	sinuous     float64 // probability
	low         float64
	aggrading   tri
	little      tri // little aggradation
	leveed      tri
	confined    tri
	mud, coarse tri
	point       tri
	steep       tri
	veryHigh    float64 // share of draws poleward of 70 degrees
	regime      *Regime
}

// statement is one line of the table: p is NaN where the target leaves it
// undecided, and 0 where it is excluded.
type statement struct {
	text, condition, source, grade string
	p                              float64
	decided                        bool // false: shown as undecided
	noLikelihood                   string
	base                           func(*Fits) (rate float64, text string)
}

// tendencies lists the facies statements with likelihood, source and grade,
// each beside its base rate in the catalogue.
func (f *Fits) tendencies(t *Target, d *draws, res *Result) []Tendency {
	c := f.conditions(t, d, res)
	out := []Tendency{}
	for _, s := range statements(c, t) {
		if s.decided && s.p == 0 && s.noLikelihood == "" {
			continue // excluded by what the target gives
		}
		v := Tendency{Text: s.text, Condition: s.condition, Source: s.source, Grade: s.grade}
		switch {
		case s.noLikelihood != "":
			v.Likelihood = s.noLikelihood
		case !s.decided || math.IsNaN(s.p):
			v.Likelihood = "undecided"
		default:
			p := s.p
			v.Likelihood, v.Probability = likelihoodWord(p), &p
		}
		v.BaseText = "no base rate: the catalogue has no field for it"
		if s.base != nil {
			rate, text := s.base(f)
			v.BaseText = text
			if !math.IsNaN(rate) {
				v.BaseRate = &rate
			}
		}
		out = append(out, v)
	}
	return out
}

func (f *Fits) conditions(t *Target, d *draws, res *Result) *facies {
	c := &facies{sinuous: math.NaN(), regime: &res.Regime,
		aggrading: is(t.TargetAggradation, "aggrading"), little: is(t.TargetAggradation, "stable", "incising"),
		leveed: is(t.TargetConfinement, "levee_confined"), confined: is(t.TargetConfinement, "confined"),
		mud: is(t.TargetGrain, "mud", "mud_sand"), coarse: is(t.TargetGrain, "sand", "gravel"), point: is(t.TargetFeeder, "river"),
	}
	switch {
	case given(t.ObservedSinuosity):
		c.sinuous = 0
		if t.ObservedSinuosity >= f.sinuousFrom() {
			c.sinuous = 1
		}
	case len(d.mix.draws) > 0:
		c.sinuous = 1 - d.mix.below(f.sinuousFrom())
	}
	c.low = 1 - c.sinuous
	if given(t.TargetSlope) {
		c.steep = no
		if t.TargetSlope >= steepFrom {
			c.steep = yes
		}
	}
	for _, lat := range d.lat {
		if math.Abs(lat) >= 70 {
			c.veryHigh += 1 / float64(d.n)
		}
	}
	return c
}

// all joins conditions: excluded by one "no", undecided by one "not known".
func joined(p float64, conditions ...tri) (float64, bool) {
	decided := !math.IsNaN(p)
	for _, c := range conditions {
		switch c {
		case no:
			return 0, true
		case unknown:
			decided = false
		}
	}
	return p, decided
}

func statements(c *facies, t *Target) []statement {
	const jgs = "J. Geol. Soc. 148:427 (1991)"
	leveed, leveedOK := joined(c.sinuous, c.aggrading, c.leveed)
	lateral, lateralOK := joined(c.sinuous, c.confined, c.little)
	steep, steepOK := joined(c.low, c.steep)
	mud, mudOK := joined(1, c.mud, c.point)
	coarse, coarseOK := joined(1, c.coarse)
	side := "No side is stated here: the hemisphere is open."
	switch c.regime.LeveeSide {
	case "right":
		side = "Here: the right levee, looking downstream."
	case "left":
		side = "Here: the left levee, looking downstream."
	}
	contested := ""
	if leveed > 0 {
		contested = "contested"
	}
	return []statement{
		{text: "Vertical accretion rules; the channel belt is about 9 times as wide as thick, against 72 times in rivers (297 belts).", condition: "submarine belts in general",
			source: "Geology 44:931 (2016)", grade: "strong", p: 0.95, decided: true, base: categoryBase("stacking", "vertical", "vertical stacking")},
		{text: "More than 3 channel depths of superelevation before avulsion, against 1 in rivers.", condition: "submarine belts in general",
			source: "Front. Earth Sci. 8:53 (2020)", grade: "strong", p: 0.95, decided: true},
		{text: "Bends grow, then stop; ribbon sand bodies.", condition: "sinuous, aggrading, leveed",
			source: "J. Sediment. Res. 70:434 (2000)", grade: "moderate to strong", p: leveed, decided: leveedOK, base: categoryBase("stacking", "vertical", "vertical stacking")},
		{text: "Little down-valley sweep, few cut-offs; many three-dimensional surveys show both.", condition: "sinuous, aggrading, leveed",
			source: "J. Sediment. Res. 70:434 (2000); three-dimensional surveys show both", grade: "contested", p: leveed, decided: leveedOK, noLikelihood: contested},
		{text: "Lateral accretion packages on inner bends, erosion at outer bends.", condition: "sinuous, confined, little aggradation",
			source: "Mar. Pet. Geol. 20:631 (2003)", grade: "moderate", p: lateral, decided: lateralOK, base: categoryBase("lateral_accretion", "yes", "lateral accretion")},
		{text: "Narrow, bypass and coarse lag, small levees.", condition: "low sinuosity, steep",
			source: "J. Sediment. Res. 77:433 (2007)", grade: "moderate", p: steep, decided: steepOK, base: netToGross},
		{text: "Large, persistent leveed channels that tend to meander.", condition: "mud-dominated point source",
			source: jgs, grade: "moderate to strong", p: mud, decided: mudOK, base: sinuousBase(func(r *stats.Row) bool { g := r.Categories["grain"]; return g == "mud" || g == "mud_sand" }, "muddy")},
		{text: "Steeper, shorter-lived, switching channels.", condition: "coarser calibre",
			source: jgs, grade: "moderate to strong", p: coarse, decided: coarseOK, base: sinuousBase(func(r *stats.Row) bool { g := r.Categories["grain"]; return g == "sand" || g == "gravel" }, "sandy and gravelly")},
		{text: "Deposition alternates from bank to bank; overspill at outer bends.", condition: "bends rule (|Ro_R| much above 1)",
			source: "Geophys. Res. Lett. 37:L17603 (2010); J. Geol. Soc. 172:161 (2015), doi 10.1144/jgs2014-043", grade: "experiments strong, field moderate", p: c.regime.BendsRule, decided: true},
		{text: "The interface tilts to the same side in every bend; one levee is higher along the whole reach (right in the northern hemisphere, left in the southern, looking downstream). " + side, condition: "Coriolis rules (|Ro_R| < 1, Ro_W below about 5)",
			source: "Geophys. Res. Lett. 37:L17603 (2010); Phil. Trans. R. Soc. A 371:20120366 (2013)", grade: "levees strong, low sinuosity contested", p: c.regime.CoriolisRules, decided: true},
		{text: "Near-vertical fill, little lateral migration, thick asymmetric levees, sinuosity at most 1.38 on about 0.3 degrees of slope (one margin, 72 to 76 N).", condition: "very high latitude (poleward of 70 degrees)",
			source: "Front. Earth Sci. 10:976852 (2022)", grade: "moderate; climate also plausible", p: math.Round(c.veryHigh*1e9) / 1e9, decided: true},
		{text: "Which bank the sand of the channel floor lies on: no side is stated, the sources differ by layer.", condition: "any",
			source: "J. Geophys. Res. Oceans 115:C11016 (2010); Terra Nova 25:65 (2013)", grade: "insufficient", noLikelihood: "no side stated"},
	}
}

// Facies lists every facies statement with its condition, source and grade, as
// it stands before a target is known: likelihoods are empty.
func Facies() []Tendency {
	t, undecided := NewTarget(), math.NaN()
	var out []Tendency
	for _, s := range statements(&facies{sinuous: undecided, low: undecided, regime: &Regime{}}, &t) {
		text, _, _ := strings.Cut(s.text, " No side is stated here:")
		out = append(out, Tendency{Text: text, Condition: s.condition, Source: s.source, Grade: s.grade})
	}
	return out
}

// share is the weighted share of rows for which is holds, each deposit alike.
func (f *Fits) share(has, is func(*stats.Row) bool) (rate float64, rows, deposits int) {
	count := map[string]float64{}
	for i := range f.frame.all {
		if r := &f.frame.all[i]; has(r) {
			count[clusterOf(r, f.options.Cluster)]++
			rows++
		}
	}
	for i := range f.frame.all {
		if r := &f.frame.all[i]; has(r) && is(r) {
			rate += 1 / count[clusterOf(r, f.options.Cluster)]
		}
	}
	if deposits = len(count); deposits == 0 {
		return math.NaN(), 0, 0
	}
	return rate / float64(deposits), rows, deposits
}

func categoryBase(column, value, words string) func(*Fits) (float64, string) {
	return func(f *Fits) (float64, string) {
		rate, rows, deposits := f.share(
			func(r *stats.Row) bool { v := r.Categories[column]; return v != "" && v != "unknown" },
			func(r *stats.Row) bool { return r.Categories[column] == value })
		if rows == 0 {
			return rate, "no base rate: " + column + " is not filled in any chosen row"
		}
		return rate, fmt.Sprintf("%s in %.0f %% of the chosen rows that say (%s in %s, deposits alike)", words, 100*rate, plural(rows, "row", "rows"), plural(deposits, "deposit", "deposits"))
	}
}

func sinuousBase(has func(*stats.Row) bool, words string) func(*Fits) (float64, string) {
	return func(f *Fits) (float64, string) {
		rate, rows, deposits := f.share(func(r *stats.Row) bool { return has(r) && r.Sinuosity >= 1 }, func(r *stats.Row) bool { return r.Sinuosity >= f.sinuousFrom() })
		if rows == 0 {
			return rate, "no base rate: no chosen row is " + words
		}
		return rate, fmt.Sprintf("sinuosity of %g and more in %.0f %% of the %s rows (%s in %s, deposits alike)", f.sinuousFrom(), 100*rate, words, plural(rows, "row", "rows"), plural(deposits, "deposit", "deposits"))
	}
}

// netToGross is no rate of the tendency itself: the median stands in words.
func netToGross(f *Fits) (float64, string) {
	var x []weighted
	for i := range f.frame.all {
		if v := f.frame.all[i].NetToGross; v >= 0 && v <= 1 {
			x = append(x, weighted{v, 1})
		}
	}
	if len(x) == 0 {
		return math.NaN(), "no base rate: net-to-gross is not filled in any chosen row"
	}
	return math.NaN(), fmt.Sprintf("net-to-gross in the chosen rows: median %.2f (%s)", weightedQuantiles(x, 0.5)[0], plural(len(x), "row", "rows"))
}
