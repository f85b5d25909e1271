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
		{"spacing_m", "from the line", "spacing of the points the line is resampled to, metres; give one to read lines of different spacing alike"},
		{"smooth", "11, or two channel widths", "points of the smoothing filter, odd; 1 is none"},
		{"along", "given", "arcs along the given vertices, or the resampled points where a spacing is asked for"},
		{"lines", "centrelines", "what several lines are: centrelines, banks (pairs, whose middle is measured), levels (pairs of an older and a younger course)"},
		{"z", "from the file", "what the third coordinate is: depth, elevation or time; time gives no slope"},
		{"direction", "down the slope", "as_given or reversed; without depths the order of the vertices is taken as down-channel"},
		{"epsg", "4326", "what the coordinates are: WGS84 degrees, a UTM zone, or plane metres with no place"},
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
	"channel_depth": "h, m; bankfull, levee crest to thalweg",
	"log10_slope":   "log₁₀ of S_v in m/m; rows with a slope of 0 or below are kept out",
}
