// Package planform takes a centreline and gives its planform: lengths,
// sinuosity by windows and by bends, slope, and what they depend on. Pure.
package planform

// Vertex is one point of a line. Lon, Lat are WGS84 degrees, or X, Y plane
// metres when the line has no place. Depth is metres below sea level, positive
// down; NaN where unknown. Width is metres, NaN where unknown.
type Vertex struct {
	Lon, Lat float64
	Depth    float64
	Width    float64
}

// Line is one centreline, upstream to downstream as given.
type Line struct {
	Name     string
	Vertices []Vertex
	Plane    bool // Lon, Lat are metres in a plane with no place
	HasTime  bool // the third coordinate was two-way time: no slope
	Notes    []string

	// Z is what the third coordinate was taken as: depth, elevation, time, or
	// "" when there is none.
	Z string
	// Role is what the file says the line is: "" for a centreline, else
	// left_bank, right_bank or axis.
	Role string
	// LeveeLeft and LeveeRight are levee crest heights above the channel floor
	// in metres, looking downstream, one a vertex, NaN where unknown; both nil
	// when the file gives none.
	LeveeLeft, LeveeRight []float64
	// Axis is a given valley axis in the coordinates of the line, nil if none.
	Axis []Vertex
}

// Settings of a measurement; every choice that changes a number is here, and
// is stored with the number. Zero values mean "default", see Defaults.
type Settings struct {
	SpacingM      float64 `json:"spacing_m"`       // resampling; 0 = chosen from the line, and said
	Smooth        int     `json:"smooth"`          // Savitzky-Golay window in points, odd; 0 = default, 1 = none
	WindowWidths  float64 `json:"window_widths"`   // window in channel widths
	WindowBends   float64 `json:"window_bends"`    // window in bends
	WindowM       float64 `json:"window_m"`        // window in metres
	WidthM        float64 `json:"width_m"`         // channel width, m
	MinBendWidths float64 `json:"min_bend_widths"` // shorter bends are dropped
	K             int     `json:"k"`               // windows of the standardised peak
	EPSG          string  `json:"epsg"`            // "", UTM zone code or "plane"
	Z             string  `json:"z"`               // depth, elevation, time
	Direction     string  `json:"direction"`       // as_given, reversed
	Along         string  `json:"along"`           // arcs of windows and bends along the "given" vertices or the "resampled" points
	Lines         string  `json:"lines"`           // what several lines of a file are: centrelines, banks, levels
}

// Measured is the planform of one line; its JSON is that of the contract.
type Measured struct {
	Name             string        `json:"name"`
	Vertices         int           `json:"vertices"`
	ChannelLengthM   float64       `json:"channel_length_m"`
	ChordM           float64       `json:"chord_m"`
	ValleyLengthM    ValleyLengths `json:"valley_length_m"`
	ReachSinuosity   float64       `json:"reach_sinuosity"`
	MeanSinuosity    float64       `json:"mean_sinuosity"`
	P90Sinuosity     float64       `json:"p90_sinuosity"`
	PeakSinuosity    float64       `json:"peak_sinuosity"`
	StandardisedPeak *StdPeak      `json:"standardised_peak"`
	ValleySlope      *float64      `json:"valley_slope"`
	MedianSpacingM   float64       `json:"vertex_spacing_m"`
	Bends            []Bend        `json:"bends"`
	Windows          []Window      `json:"windows"`
	WindowLengthM    float64       `json:"window_length_m"` // mean arc of the windows
	WholeReach       bool          `json:"whole_reach"`     // too short for one window: the reach is the window
	Ruler            []Ruler       `json:"ruler"`
	StableSpacingM   *float64      `json:"stable_spacing_m"` // coarsest ruler within 1 % of the finest
	Coarse           bool          `json:"coarse"`           // too coarse for its bends: sinuosity reads low
	Sensitivity      Range         `json:"sensitivity"`      // of the peak
	SensitivityMean  Range         `json:"sensitivity_mean"`
	SensitivityP90   Range         `json:"sensitivity_p90"`
	ChannelSlope     *float64      `json:"channel_slope"`
	Width            *float64      `json:"channel_width_m"`
	Typical          *Typical      `json:"typical"` // medians over the bends, nil without bends
	Place            *Place        `json:"place"`   // nil for a plane line
	Notes            []string      `json:"notes"`   // what was guessed or chosen
	Settings         Settings      `json:"settings"`
	Warnings         []string      `json:"warnings"`
	Levees           *Levees       `json:"levees,omitempty"`

	// Given is the line as it was read, when it was measured from a file.
	Given *Line `json:"-"`
	// Profile is the depth along the channel where it is known, thinned to at
	// most profilePoints.
	Profile []ProfilePoint `json:"-"`
	// Plan is the smoothed line in local metres (east, north) for figures.
	Plan []PlanPoint `json:"-"`
	// Inflections are indices into Plan.
	Inflections []int `json:"-"`

	missing    float64 // share of the length that the vertices miss
	depthShare float64 // share of the line between the first and last known depth
}

// Typical bend: medians over all bends, m.
type Typical struct {
	Bends       int     `json:"bends"`
	WavelengthM float64 `json:"wavelength_m"`
	AmplitudeM  float64 `json:"amplitude_m"`
	RadiusM     float64 `json:"radius_m"`
	Sinuosity   float64 `json:"sinuosity"`
}

// Place is where a line starts, has its middle and ends, degrees.
type Place struct {
	StartLat  float64 `json:"start_latitude_deg"`
	StartLon  float64 `json:"start_longitude_deg"`
	MiddleLat float64 `json:"latitude_deg"`
	MiddleLon float64 `json:"longitude_deg"`
	EndLat    float64 `json:"end_latitude_deg"`
	EndLon    float64 `json:"end_longitude_deg"`
}

// ProfilePoint is the depth, m below sea level, at a distance along the
// channel, m.
type ProfilePoint struct{ S, Depth float64 }

// ValleyLengths by their definitions, m.
type ValleyLengths struct {
	EndToEnd    float64  `json:"end_to_end"`
	Inflections float64  `json:"inflections"`
	Axis        *float64 `json:"axis,omitempty"`
}

// StdPeak is the expected largest of K windows drawn without replacement.
type StdPeak struct {
	K        int     `json:"k"`
	Expected float64 `json:"expected"`
	SD       float64 `json:"sd"`
}

// Bend between two successive inflections.
type Bend struct {
	FromM       float64 `json:"from_m"`
	ToM         float64 `json:"to_m"`
	ArcM        float64 `json:"arc_m"`
	ChordM      float64 `json:"chord_m"`
	Sinuosity   float64 `json:"sinuosity"`
	AmplitudeM  float64 `json:"amplitude_m"`
	WavelengthM float64 `json:"wavelength_m"`
	RadiusM     float64 `json:"radius_m"`
	Side        string  `json:"side"` // left or right, looking downstream
	Asymmetry   float64 `json:"asymmetry"`
	ApexLat     float64 `json:"-"` // degrees; 0 for a plane line
	ApexLon     float64 `json:"-"`

	apex float64 // place along Plan
}

// Window of the along-channel profile.
type Window struct {
	FromM       float64  `json:"from_m"`
	ToM         float64  `json:"to_m"`
	ChordM      float64  `json:"chord_m"`
	Sinuosity   float64  `json:"sinuosity"`
	ValleySlope *float64 `json:"valley_slope"`
}

// Ruler is the length of the line walked with one ruler.
type Ruler struct {
	RulerM    float64 `json:"ruler_m"`
	LengthM   float64 `json:"length_m"`
	Sinuosity float64 `json:"sinuosity"`
}

// Range is the lowest and highest value under other settings.
type Range struct {
	Low  float64 `json:"low"`
	High float64 `json:"high"`
}

// Levees is the pattern of the levee heights along the reach.
type Levees struct {
	Pattern string      `json:"pattern"` // same_side, alternating, undecided
	Side    string      `json:"side"`
	Text    string      `json:"text"`
	SpeedMS *[3]float64 `json:"speed_m_s"`
}

// PlanPoint is a point of the plan view in local metres; S is metres along the
// channel.
type PlanPoint struct{ X, Y, S float64 }

// Refused is a line that could not be measured, with the reason.
type Refused struct {
	Line   string `json:"line"`
	Reason string `json:"reason"`
}

// Report is what measuring a file gives.
type Report struct {
	Lines   []Measured `json:"lines"`
	Refused []Refused  `json:"refused"`
	// Movements between two levels of one channel, one for each pair of lines.
	Movements []Movement `json:"movements,omitempty"`
}

// InputError is a refusal with the setting or field it concerns and one
// sentence for the user.
type InputError struct {
	Parameter string
	Message   string
}

func (e *InputError) Error() string { return e.Parameter + ": " + e.Message }

// Input returns the parameter and the sentence; the server maps every error
// that has this method to status 400 or 422.
func (e *InputError) Input() (parameter, message string) { return e.Parameter, e.Message }
