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
	Ruler            []Ruler       `json:"ruler"`
	Sensitivity      Range         `json:"sensitivity"`
	Settings         Settings      `json:"settings"`
	Warnings         []string      `json:"warnings"`
	Levees           *Levees       `json:"levees,omitempty"`

	// Plan is the smoothed line in local metres (east, north) for figures.
	Plan []PlanPoint `json:"-"`
	// Inflections are indices into Plan.
	Inflections []int `json:"-"`
}

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
}

// Window of the along-channel profile.
type Window struct {
	FromM       float64  `json:"from_m"`
	ToM         float64  `json:"to_m"`
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
