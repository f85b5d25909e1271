// Package expectation says what planform to expect of a channel at a
// palaeolatitude and an age: rival explanations fitted on catalogue rows, the
// flow regime and the facies tendencies. Pure.
package expectation

import (
	"fathombend/stats/earth"
)

// Target is one question. Numbers that were not given are NaN, texts "".
// Every field carries the name it has in the query.
type Target struct {
	// Palaeolatitude, one of four ways.
	Palaeolatitude, PalaeolatitudeSE           float64 // degrees
	Inclination, A95, Flattening               float64 // degrees, degrees, 1
	SiteLat, SiteLon                           float64 // degrees
	Plate                                      string
	PoleTable                                  string
	PoleLat, PoleLon                           float64 // degrees, north pole
	EulerLat, EulerLon, EulerAngle, EulerError float64 // degrees
	EulerFrame                                 string  // spin_axis or mantle

	Age, AgeSE float64 // Ma
	Unit       string

	Day              string // tidal_history polynomial constant_rate locked given
	SolarTide        string // middle on off
	RateMsPerCentury float64
	DayLengthH       float64 // solar hours
	DaysPerYear      float64

	Response, MeasuredLine                                                         string
	TargetSlope                                                                    float64 // m/m
	TargetWidthM, TargetDepthM                                                     float64
	TargetFeeder, TargetGrain, TargetSetting, TargetConfinement, TargetAggradation string
	SpeedMS, Concentration, RadiusM                                                float64
	ObservedSinuosity                                                              float64

	// TargetLargeRiver is yes, no or unknown.
	TargetLargeRiver string
	// RotationPeriodH is a rotation period against the stars in hours, and
	// GravityMS2 a gravity in m/s2, for other planets; NaN = the Earth's.
	RotationPeriodH, GravityMS2 float64
	// UserPoles is a pole table of the user's own; its name goes in PoleTable.
	UserPoles *earth.PoleTable

	Seed  uint64
	Draws int
}

// Result is the answer; its JSON is that of the contract.
type Result struct {
	Palaeolatitude Palaeolatitude `json:"palaeolatitude"`
	Age            ValueSE        `json:"age"`
	DayLength      DayLength      `json:"day_length_h"`
	RotationRatio  float64        `json:"rotation_ratio"`
	Coriolis       float64        `json:"coriolis"` // |f|, s-1
	CoriolisLow    float64        `json:"coriolis_low"`
	CoriolisHigh   float64        `json:"coriolis_high"`
	// EquivalentModernLatitude is degrees, or nil when the ancient f exceeds
	// today's polar value.
	EquivalentModernLatitude *float64       `json:"equivalent_modern_latitude"`
	EquivalentSentence       string         `json:"equivalent_sentence"`
	Response                 string         `json:"response"`
	MeasuredLine             string         `json:"measured_line"`
	Rows                     int            `json:"rows"`
	Clusters                 int            `json:"clusters"`
	InventedRows             int            `json:"invented_rows"`
	PrivateRows              int            `json:"private_rows,omitempty"` // that only some people see
	Explanations             []Explanation  `json:"explanations"`
	Combined                 Explanation    `json:"combined"`
	Observed                 *Observed      `json:"observed"`
	Classes                  []Class        `json:"classes"`
	Regime                   Regime         `json:"regime"`
	Tendencies               []Tendency     `json:"tendencies"`
	NearestSystems           []Nearest      `json:"nearest_systems"`
	Sensitivity              []Sensitivity  `json:"sensitivity"`
	Extrapolation            []string       `json:"extrapolation"`
	Notes                    []string       `json:"notes"` // what was assumed, e.g. a missing error taken as 0
	Cautions                 []string       `json:"cautions"`
	Settings                 map[string]any `json:"settings"`
	// ResponseText names the sinuosity that is expected, in words.
	ResponseText string `json:"response_text"`
	// RotationEffect compares what the faster spin does with the error of the
	// palaeolatitude, in a sentence.
	RotationEffect string `json:"rotation_effect"`
	// RotationChoices are the other histories at this age; RotationSpread says
	// how far the answer hangs on the choice.
	RotationChoices []RotationChoice `json:"rotation_choices,omitempty"`
	RotationSpread  string           `json:"rotation_spread,omitempty"`
	// ClimateState at the age, "" where the table has none.
	ClimateState string      `json:"climate_state"`
	Dimensions   []Dimension `json:"dimensions"`
}

// ValueSE is a value with one standard error.
type ValueSE struct {
	Value float64 `json:"value"`
	SE    float64 `json:"se"`
}

// Palaeolatitude is degrees; Interval is the 95 % interval.
type Palaeolatitude struct {
	Value    float64    `json:"value"`
	SE       float64    `json:"se"`
	Interval [2]float64 `json:"interval"`
	Method   string     `json:"method"`
	Text     string     `json:"text"` // how it was found and what its error does not hold
}

// DayLength is solar hours.
type DayLength struct {
	Value   float64 `json:"value"`
	Low     float64 `json:"low"`
	High    float64 `json:"high"`
	History string  `json:"history"`
}

// Quantiles of the expected sinuosity of one new system: P90 means 90 % of
// outcomes lie below.
type Quantiles struct {
	P2_5  float64 `json:"p2_5"`
	P10   float64 `json:"p10"`
	P25   float64 `json:"p25"`
	P50   float64 `json:"p50"`
	P75   float64 `json:"p75"`
	P90   float64 `json:"p90"`
	P97_5 float64 `json:"p97_5"`
}

// Coverage is what the stated 80 and 95 % limits held when each cluster was
// left out in turn, as a fraction.
type Coverage struct {
	C80 float64 `json:"80"`
	C95 float64 `json:"95"`
}

// Explanation is one rival account of planform, fitted and used for the target.
type Explanation struct {
	Name      string      `json:"name"`
	Text      string      `json:"text"` // what it says, in a sentence
	Weight    float64     `json:"weight"`
	Sinuosity *Quantiles  `json:"sinuosity"`
	Coverage  *Coverage   `json:"coverage"`
	Jackknife *[2]float64 `json:"jackknife_plus_90"`
	// Parts of the variance of ln(P-1): parameters, residual, inputs.
	Parts   map[string]float64 `json:"parts,omitempty"`
	Failure string             `json:"failure,omitempty"`
	// Rows and Clusters it is fitted on; Score is its mean log density (or,
	// where P = 1 occurs, minus its ranked probability score) of left-out
	// clusters; larger is better.
	Rows         int           `json:"rows"`
	Clusters     int           `json:"clusters"`
	Score        float64       `json:"score"`
	Coefficients []Coefficient `json:"coefficients"`
}

// Coefficient of an explanation on ln(P - 1), with its cluster-bootstrap
// standard error.
type Coefficient struct {
	Name          string  `json:"name"`
	Estimate      float64 `json:"estimate"`
	StandardError float64 `json:"standard_error"`
}

// Dimension is a quantity of the analogues for a reservoir model, each deposit
// counted once.
type Dimension struct {
	Name     string  `json:"name"`
	Unit     string  `json:"unit"`
	From     string  `json:"from"` // nearest or filtered
	Rows     int     `json:"rows"`
	Deposits int     `json:"deposits"`
	P10      float64 `json:"p10"`
	P25      float64 `json:"p25"`
	P50      float64 `json:"p50"`
	P75      float64 `json:"p75"`
	P90      float64 `json:"p90"`
}

// Observed places a measured sinuosity in the expected distribution.
type Observed struct {
	Sinuosity  float64 `json:"sinuosity"`
	Percentile float64 `json:"percentile"` // 0..100
	Text       string  `json:"text"`
}

// Class is a planform class with its probability and its base rate in the
// chosen rows.
type Class struct {
	Name        string  `json:"name"`
	From        float64 `json:"from"`
	Probability float64 `json:"probability"`
	BaseRate    float64 `json:"base_rate"`
}

// Regime holds the flow numbers as low, median, high of the draws.
type Regime struct {
	RoW           [3]float64 `json:"ro_w"`
	RoR           [3]float64 `json:"ro_r"`
	Froude        [3]float64 `json:"froude"`
	SpeedMS       [3]float64 `json:"speed_m_s"`
	TiltM         [3]float64 `json:"tilt_m"`
	CoriolisRules float64    `json:"coriolis_rules"` // share of draws
	BendsRule     float64    `json:"bends_rule"`
	Neither       float64    `json:"neither"`
	RiverTiltM    float64    `json:"river_tilt_m"`
	// In bends the two terms add (turning left in the north) or oppose.
	TiltAddingBendM   [3]float64 `json:"tilt_adding_bend_m"`
	TiltOpposingBendM [3]float64 `json:"tilt_opposing_bend_m"`
	LeveeSide         string     `json:"levee_side"` // right, left, or "" = no side is stated
	Assumed           []string   `json:"assumed"`
	Text              []string   `json:"text"`
}

// Tendency is one facies statement.
type Tendency struct {
	Text        string   `json:"text"`
	Condition   string   `json:"condition"`
	Likelihood  string   `json:"likelihood"`
	Probability *float64 `json:"probability"`
	BaseRate    *float64 `json:"base_rate"`
	BaseText    string   `json:"base_text"`
	Source      string   `json:"source"`
	Grade       string   `json:"grade"`
}

// Nearest is one analogue.
type Nearest struct {
	Slug      string  `json:"slug"`
	Name      string  `json:"name"`
	Distance  float64 `json:"distance"`
	Sinuosity float64 `json:"sinuosity"`
	Why       string  `json:"why"`
}

// Sensitivity is the first-order share of one input in the spread.
type Sensitivity struct {
	Input string  `json:"input"`
	Share float64 `json:"share"`
}

// InputError is a refusal with the parameter it concerns; see stats.InputError.
type InputError = earth.InputError
