// Package stats holds the regressions, the resampling, the comparison of
// explanations and the influence tables. It is pure: slices in, results out;
// it imports gonum and the standard library only (and its own sub-packages).
package stats

import "fathombend/stats/earth"

// Row is one measurement as a regression sees it. Missing numbers are NaN;
// missing categories are "" or "unknown".
type Row struct {
	ID         string // measurement id
	System     string // slug
	SystemName string
	// Parents: any of them may be the cluster.
	ParentDeposit string // "" = the system stands alone
	Source        string
	Basin         string

	Kind          string // submarine, river, lacustrine
	Invented      bool
	Private       bool   // only some people see it
	SinuosityKind string // peak, p90, mean, bend, reach, unknown
	MeasuredLine  string // thalweg, centreline, levee_crest, unknown
	Grade         string // remeasured, surveyed, traced, quoted
	Order         int    // larger is newer: ties of grade are broken by it

	Sinuosity   float64
	SinuositySE float64
	Windows     []float64 // window sinuosities of the stored centreline, if any

	LatitudeDeg         float64
	LongitudeDeg        float64
	AgeMa               float64 // NaN = today
	PalaeolatitudeDeg   float64
	PalaeolatitudeSEDeg float64
	ValleySlope         float64 // m/m
	ValleySlopeSE       float64
	SlopeState          string // present, restored
	ChannelWidthM       float64
	ChannelDepthM       float64
	WavelengthM         float64
	AmplitudeM          float64
	RadiusM             float64
	NetToGross          float64

	// Categories by column name: feeder, grain, margin, setting, activity,
	// burial, confinement, aggradation, large_river, stacking,
	// lateral_accretion, survey, extraction, climate_state.
	Categories map[string]string
}

// InputError is a refusal with its reason; the one type of all pure rooms.
type InputError = earth.InputError

// Request is one regression question. The zero value is not valid: start from
// DefaultRequest.
type Request struct {
	Models      []ModelSpec // FORM:PREDICTOR
	Joint       []string    // predictors and categories of a joint model
	Interaction [2]string   // a pair of Joint's members, or empty
	Group       string      // "" or "kind"

	Response         string // peak p90 mean bend reach standardised_peak any
	MeasuredLine     string // all, or one line
	Scale            string // raw ln ln_excess
	K                int    // windows of a standardised peak
	Cluster          string // parent_deposit system source basin none
	Interval         string // studentised cr2 bca percentile
	Level            float64
	Resamples        int
	Permutations     int
	Seed             uint64
	Time             string // of_deposition, present
	Pick             string // best, all
	MeasurementError bool
	ThinStraight     float64 // fraction 0..1
	ThinSinuous      float64
	// Recomputed names the recomputation that gave the rows' sinuosities and
	// windows, "" = they are as stored; RecomputedAs is its settings in words.
	Recomputed, RecomputedAs string
	// Chosen is the filter of the catalogue in words, for the methods text.
	Chosen string

	Workers int // cores to use; no effect on any number
}

// ModelSpec is one FORM:PREDICTOR pair.
type ModelSpec struct{ Form, Predictor string }

func (m ModelSpec) String() string { return m.Form + ":" + m.Predictor }

// Forms and Predictors that Analyse accepts, in the order they are listed to
// users.
var (
	Forms      = []string{"linear", "logarithmic", "exponential", "power", "inverse", "floor_decay", "broken_line", "quantile_10", "quantile_50", "quantile_90", "theil_sen"}
	Predictors = []string{"valley_slope", "abs_latitude", "sin_abs_latitude", "coriolis", "channel_width", "channel_depth", "log10_slope"}
	// Categories may stand in Joint beside predictors.
	Categories = []string{"feeder", "grain", "margin", "setting", "activity", "burial", "confinement", "aggradation", "large_river", "stacking", "lateral_accretion", "survey", "extraction", "climate_state"}
)

// DefaultRequest is the question asked when nothing is said: three straight
// lines over whole parent deposits, with the defaults of the contract.
func DefaultRequest() Request {
	return Request{
		Models:   []ModelSpec{{"linear", "valley_slope"}, {"linear", "abs_latitude"}, {"linear", "coriolis"}},
		Response: "any", MeasuredLine: "all", Scale: "raw", K: 5,
		Cluster: "parent_deposit", Interval: "studentised", Level: 0.95,
		Resamples: 9999, Permutations: 1999, Seed: 1,
		Time: "of_deposition", Pick: "all", Workers: 1,
	}
}

// Interval is [low, high]; JSON writes null for an end that is not finite.
type Interval [2]float64

// Analysis is the answer to a Request: everything the regression page shows
// and, field for field, the JSON of the contract.
type Analysis struct {
	Rows         int            `json:"rows"`
	Clusters     int            `json:"clusters"`
	Systems      int            `json:"systems"`
	Dropped      []Dropped      `json:"dropped"`
	InventedRows int            `json:"invented_rows"`
	PrivateRows  int            `json:"private_rows,omitempty"` // that only some people see, the asker among them
	Settings     map[string]any `json:"settings"`
	Models       []Model        `json:"models"`
	Comparisons  []Comparison   `json:"comparisons"`
	Shares       []Share        `json:"shares"`
	Influence    []Influence    `json:"influence"`
	Overturning  *Overturning   `json:"overturning"`
	Breakpoint   *Breakpoint    `json:"breakpoint"`
	Headline     string         `json:"headline"`
	Warnings     []string       `json:"warnings"`
	MethodsText  string         `json:"methods_text"`
	Used         []UsedRow      `json:"-"` // every row considered, for /regression.csv and the figures
	Separability []string       `json:"separability"`

	LeadingModel string            `json:"leading_model"` // best leave-one-cluster-out score: the headline and Influence are about it
	Parts        []Part            `json:"parts"`         // unique and common parts of R2 for two or three predictors
	Groups       []GroupDifference `json:"groups"`        // group=kind: each model's slope in one kind minus that in another
	Selection    []Selection       `json:"selection"`     // thin_straight, thin_sinuous
	Collinearity []Collinearity    `json:"collinearity"`  // pairs of the predictors in use
}

// Part is a part of the joint R2 that goes with exactly these predictors:
// one member = its unique part, several = what they have in common
// (commonality analysis; Newton & Spurrell, Appl. Stat. 16:51 (1967),
// doi 10.2307/2985237). A common part can be negative (suppression).
type Part struct {
	Members  []string `json:"members"`
	Share    float64  `json:"share"`
	Interval Interval `json:"interval"`
}

// GroupDifference is the interaction of a model's slope with the kind of
// system: coefficient in A minus coefficient in B.
type GroupDifference struct {
	Model        string   `json:"model"`
	Term         string   `json:"term"`
	A            string   `json:"a"`
	B            string   `json:"b"`
	Difference   float64  `json:"difference"`
	Interval     Interval `json:"interval"`
	IntervalKind string   `json:"interval_kind"`
	P            float64  `json:"p"`
	Text         string   `json:"text"`
}

// Selection is the leading model re-estimated with a stated fraction of the
// straight (or sinuous) systems left out at random, many times.
type Selection struct {
	Thinned     string   `json:"thinned"` // straight, sinuous
	Fraction    float64  `json:"fraction"`
	Systems     int      `json:"systems"` // systems open to thinning
	Repeats     int      `json:"repeats"`
	Term        string   `json:"term"`
	Coefficient float64  `json:"coefficient"` // median over the repeats
	Range       Interval `json:"range"`       // 2.5 and 97.5 % points over the repeats
	RSquared    float64  `json:"r_squared"`   // median
	Text        string   `json:"text"`
}

// Collinearity is how far two predictors move together on the rows used.
type Collinearity struct {
	A           string  `json:"a"`
	B           string  `json:"b"`
	Correlation float64 `json:"correlation"` // of the values; for a category the multiple correlation
	VIF         float64 `json:"vif"`         // 1/(1 - r^2)
}

// Term is one predictor, category or interaction of a joint model, tested as
// a whole given all the others.
type Term struct {
	Name         string  `json:"name"`
	Columns      int     `json:"columns"`
	VIF          float64 `json:"vif"` // largest of its columns
	PermutationP float64 `json:"permutation_p"`
}

// Dropped counts the rows left out for one reason.
type Dropped struct {
	Reason string `json:"reason"`
	Rows   int    `json:"rows"`
}

// UsedRow is one row considered, with its derived predictors. Missing numbers
// are NaN.
type UsedRow struct {
	Row
	Kept        bool
	WhyDropped  string
	ClusterID   string
	Response    float64            // the response in sinuosity units
	PredictorOf map[string]float64 // by predictor name, as fitted (coriolis in 1e-4 s-1)
	ResidualOf  map[string]float64 // by model name, sinuosity units
	PredictedOf map[string]float64 // by model name, sinuosity units
}

// Model is one fitted model.
type Model struct {
	Model               string        `json:"model"`
	Form                string        `json:"form"`
	Predictor           string        `json:"predictor"`
	Coefficients        []Coefficient `json:"coefficients"`
	RSquared            float64       `json:"r_squared"`
	RSquaredInterval    Interval      `json:"r_squared_interval"`
	RSquaredFitted      float64       `json:"r_squared_fitted_scale"`
	OutOfSampleR2       float64       `json:"out_of_sample_r_squared"`
	AICc                float64       `json:"aicc"`
	AkaikeWeight        float64       `json:"akaike_weight"`
	PermutationP        float64       `json:"permutation_p"`
	Kendall             float64       `json:"kendall"`
	Spearman            float64       `json:"spearman"`
	DegenerateResamples int           `json:"degenerate_resamples"`
	Failure             string        `json:"failure,omitempty"` // why this model could not be fitted, in a sentence
	Curve               []CurvePoint  `json:"curve"`             // fitted line with its interval band, in sinuosity units

	Group                string      `json:"group,omitempty"` // group=kind: the kind this fit is for
	Scale                string      `json:"scale"`           // response as fitted: raw ln ln_excess
	Rows                 int         `json:"rows"`
	Clusters             int         `json:"clusters"`
	Sigma                float64     `json:"residual_standard_deviation"` // on the scale fitted
	Skill                float64     `json:"out_of_sample_skill"`         // 1 - PRESS/PRESS of the mean of the other clusters
	RSquaredIntervalKind string      `json:"r_squared_interval_kind"`
	ResamplesUsed        int         `json:"resamples_used"`
	FlipsUsed            int         `json:"permutations_used"`
	CurveKind            string      `json:"curve_interval_kind"`
	Levels               []Level     `json:"levels,omitempty"` // categories of a joint model, first level = baseline
	Terms                []Term      `json:"terms,omitempty"`
	Influence            []Influence `json:"influence"`
	Carrier              string      `json:"carrier"` // cluster whose leaving out moves the slope farthest
	Found                bool        `json:"found"`   // see Analysis.Headline: interval, sign-flip test and out-of-sample score all speak for it

	alpha float64 // the level its sign-flip test had to reach, see judge
}

// Level is a category of a joint model with its levels and their rows.
type Level struct {
	Category string   `json:"category"`
	Levels   []string `json:"levels"` // alphabetical; the first is the baseline
	Rows     []int    `json:"rows"`
}

// CurvePoint is the fitted line at X with the pointwise interval of the line.
type CurvePoint struct {
	X    float64 `json:"x"`
	Y    float64 `json:"y"`
	Low  float64 `json:"low"`
	High float64 `json:"high"`
}

// Coefficient is one estimate with its interval and the CR2 interval beside it.
type Coefficient struct {
	Name          string              `json:"name"`
	Estimate      float64             `json:"estimate"`
	StandardError float64             `json:"standard_error"`
	Interval      Interval            `json:"interval"`
	IntervalKind  string              `json:"interval_kind"`
	CR2           *CR2                `json:"cr2"`
	Intervals     map[string]Interval `json:"intervals"` // every kind that is defined: studentised, cr2, bca, percentile; row_bootstrap (rows_hc1 where rows are very many)
}

// CR2 is the bias-reduced cluster error with Satterthwaite degrees of freedom.
type CR2 struct {
	SE       float64  `json:"se"`
	DF       float64  `json:"df"`
	Interval Interval `json:"interval"`
}

// Comparison is the paired difference of R2 between two models.
type Comparison struct {
	A          string   `json:"a"`
	B          string   `json:"b"`
	Difference float64  `json:"r_squared_difference"`
	Interval   Interval `json:"interval"`
	Scale      string   `json:"scale"` // of both R2: always sinuosity units
}

// Share is one predictor's share of R2 (Lindeman-Merenda-Gold).
type Share struct {
	Predictor string   `json:"predictor"`
	Share     float64  `json:"share"`
	Interval  Interval `json:"interval"`
	Scale     string   `json:"scale"` // of the R2 shared out: raw, ln, ln_excess
}

// Influence says what happens without one system, for the leading model.
type Influence struct {
	System             string  `json:"system"`
	SystemName         string  `json:"system_name"`
	Model              string  `json:"model"`
	RSquaredWithout    float64 `json:"r_squared_without"`
	CoefficientWithout float64 `json:"coefficient_without"`
	Cook               float64 `json:"cook"`
	Leverage           float64 `json:"leverage"`
}

// Overturning is how many contrary systems would undo a term.
type Overturning struct {
	Term    string `json:"term"`
	Systems int    `json:"systems"`
	Text    string `json:"text"`

	MoreThan bool `json:"more_than"` // more than Systems would be needed
}

// Breakpoint is the broken line's breakpoint with its interval.
type Breakpoint struct {
	At       float64      `json:"at"`
	Interval Interval     `json:"interval"`
	P        float64      `json:"p"`       // sup-F against a straight line, by sign flips
	Profile  []CurvePoint `json:"profile"` // R2 (y) of the best broken line at breakpoint x; low and high are not used
	Model    string       `json:"model"`
	Text     string       `json:"text"`
}
