package views

import (
	"strconv"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
)

// MethodsPage holds every equation, setting and source in use. Settings come
// from the rooms themselves, so that the page cannot say other than they do.
type MethodsPage struct {
	Page
	Request      stats.Request
	Classes      []float64
	Explanations []expectation.Explanation
	Cautions     []string
	Histories    []earth.History
	Poles        []*earth.PoleTable
	Climate      earth.ClimateTable
	Observations []earth.Observation
	Credits      []earth.Credit
	LandCredit   string
	Filters      []string
}

// setting is one setting in use.
type setting struct{ name, value, note string }

// regressionSettings are the defaults of a regression.
func (p MethodsPage) regressionSettings() []setting {
	r := p.Request
	return []setting{
		{"response", r.Response, "which sinuosity is the response"},
		{"measured_line", r.MeasuredLine, "which measured line is taken"},
		{"scale", r.Scale, "P, ln P or ln(P − 1); the regression page offers ln(P − 1) first where every P is above 1"},
		{"k", strconv.Itoa(r.K), "windows of the standardised peak"},
		{"cluster", r.Cluster, "what is resampled whole; a system without a parent deposit stands for itself"},
		{"interval", r.Interval, "interval of coefficients; R² and differences are BCa"},
		{"level", strconv.FormatFloat(r.Level, 'g', -1, 64), "level of every interval"},
		{"resamples", strconv.Itoa(r.Resamples), "99 to 100,000"},
		{"permutations", strconv.Itoa(r.Permutations), "99 to 99,999"},
		{"seed", strconv.FormatUint(r.Seed, 10), "in the address: equal addresses give equal numbers"},
		{"time", r.Time, "latitude and rotation rate of the time of deposition; rows older than 5 Ma without a palaeolatitude are left out, and counted"},
		{"pick", r.Pick, "every measurement of the asked kind, or the best-graded of each system"},
		{"measurement_error", yesNo(r.MeasurementError), "stated errors drawn in each resample"},
		{"thin_straight, thin_sinuous", "0", "share of the straighter or more sinuous half of the systems left out at random"},
	}
}

// planformSettings are the defaults of a measured centreline.
func planformSettings() []setting {
	return []setting{
		{"window_widths", strconv.Itoa(planform.DefaultWindowWidths), "window in channel widths, stepped by a quarter of it"},
		{"window_bends", strconv.Itoa(planform.DefaultWindowBends), "window in bends, where no width is known"},
		{"min_bend_widths", strconv.Itoa(planform.DefaultMinBendWidths), "shorter bends are dropped"},
		{"k", strconv.Itoa(planform.DefaultK), "windows of the standardised peak"},
	}
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

func classList(limits []float64) string {
	s := ""
	for i, l := range limits {
		if i > 0 {
			s += ", "
		}
		s += strconv.FormatFloat(l, 'f', -1, 64)
	}
	return s
}

// columnGroup is one group of the measurement table.
type columnGroup struct {
	name    string
	columns []catalogue.Column
}

func columnGroups() []columnGroup {
	var out []columnGroup
	for _, g := range catalogue.Groups {
		group := columnGroup{name: g}
		for _, c := range catalogue.Columns {
			if c.Group == g {
				group.columns = append(group.columns, c)
			}
		}
		out = append(out, group)
	}
	return out
}

// formEquation is the equation of a regression form.
var formEquations = map[string]string{
	"linear": "P = a + b x", "logarithmic": "P = a + b ln x", "exponential": "P = a exp(b x), fitted as ln P = ln a + b x",
	"power": "P = a x^b, fitted as ln P = ln a + b ln x", "inverse": "P = a + b / x", "floor_decay": "P = 1 + a exp(−b x), nonlinear least squares",
	"broken_line": "P = a + b₁ x below c, a + b₁ c + b₂ (x − c) above; c by least sum of squares",
	"quantile_10": "line below which 10 % of rows lie", "quantile_50": "line with half of the rows on either side", "quantile_90": "line below which 90 % of rows lie",
	"theil_sen": "median of the slopes between all pairs of rows",
}

var formSources = map[string]string{
	"broken_line": "Hudson, J. Am. Stat. Assoc. 61:1097 (1966)", "quantile_10": "Koenker & Bassett, Econometrica 46:33 (1978)",
	"quantile_50": "Koenker & Bassett, Econometrica 46:33 (1978)", "quantile_90": "Koenker & Bassett, Econometrica 46:33 (1978)",
	"floor_decay": "variable projection: Golub & Pereyra, SIAM J. Numer. Anal. 10:413 (1973)", "theil_sen": "Sen, J. Am. Stat. Assoc. 63:1379 (1968)",
}

var predictorTexts = map[string]string{
	"valley_slope": "S_v, m/m; rows with a slope of 0 or below are kept out", "abs_latitude": "|latitude|, degrees, at the time of deposition",
	"sin_abs_latitude": "sin |latitude|, at the time of deposition", "coriolis": "|f| = 2 Ω(age) sin |latitude|, in 10⁻⁴ s⁻¹", "channel_width": "W, m",
}

// tendencyRow is one facies tendency with its source and grade.
type tendencyRow struct{ condition, text, source, grade string }

var tendencyRows = []tendencyRow{
	{"submarine belts in general", "Vertical accretion rules; a belt is about 9 times as wide as thick, against 72 in rivers (297 belts).", "Geology 44:931 (2016)", "strong"},
	{"submarine belts in general", "More than 3 channel depths of superelevation before avulsion, against 1 in rivers.", "Front. Earth Sci. 8:53 (2020)", "strong"},
	{"sinuous, aggrading, leveed", "Bends grow, then stop; ribbon sand bodies.", "J. Sediment. Res. 70:434 (2000)", "moderate to strong"},
	{"sinuous, aggrading, leveed", "Little down-valley sweep, few cut-offs.", "J. Sediment. Res. 70:434 (2000); many three-dimensional surveys show both", "contested"},
	{"sinuous, confined, little aggradation", "Lateral accretion packages on inner bends, erosion at outer bends.", "Mar. Pet. Geol. 20:631 (2003)", "moderate"},
	{"low sinuosity, steep", "Narrow; bypass and coarse lag; small levees.", "J. Sediment. Res. 77:433 (2007)", "moderate"},
	{"mud-dominated point source", "Large, persistent leveed channels that tend to meander.", "J. Geol. Soc. 148:427 (1991)", "moderate to strong"},
	{"coarser calibre", "Steeper, shorter-lived, switching channels.", "J. Geol. Soc. 148:427 (1991)", "moderate to strong"},
	{"bends rule (|Ro_R| much above 1)", "Deposition alternates from bank to bank; overspill at outer bends.", "Geophys. Res. Lett. 37:L17603 (2010); J. Geol. Soc. 172:161 (2015), doi 10.1144/jgs2014-043", "experiments strong, field moderate"},
	{"Coriolis rules (|Ro_R| < 1, Ro_W below about 5)", "The interface tilts to the same side in every bend; one levee is higher along the whole reach (right in the northern hemisphere, looking downstream).", "Geophys. Res. Lett. 37:L17603 (2010); Phil. Trans. R. Soc. A 371:20120366 (2013)", "levees strong, low sinuosity contested"},
	{"very high latitude (one margin, 72 to 76° N)", "Near-vertical fill, little lateral migration, thick asymmetric levees, sinuosity at most 1.38 on about 0.3°.", "Front. Earth Sci. 10:976852 (2022)", "moderate; climate also plausible"},
	{"any", "Which bank the sand of the channel floor lies on: no side is stated, since sources differ by layer.", "J. Geophys. Res. Oceans 115:C11016 (2010); Terra Nova 25:65 (2013)", "insufficient"},
}
