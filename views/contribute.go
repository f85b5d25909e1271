package views

import (
	"net/url"
	"strings"
	"time"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// FormField is one column of the measurement table as a field of a form.
type FormField struct {
	Column   catalogue.Column
	Value    string
	Units    []UnitChoice // more than one = a choice of unit
	Unit     string       // the unit chosen
	Error    string
	Warnings []FormWarning
	Shown    string // a conversion that was made, in words

	Suggestions []string // names that a text may take
}

// UnitChoice is a unit a field can be typed in. Column is the name of the
// imported column that takes this unit.
type UnitChoice struct{ Column, Text string }

// FormWarning is a check that finds the value odd; a reason overrides it.
type FormWarning struct {
	Key, Message, Expected string
	Reason, ReasonError    string
}

// FormGroup is a fieldset. Folded ones start closed.
type FormGroup struct {
	Key, Title, Hint string
	Fields           []FormField
	Folded, Open     bool
	Filled           int // fields that hold something
}

// FormError is one line of the summary on top of a form.
type FormError struct{ Field, Label, Message string }

// LineReport is what a pasted centreline measures.
type LineReport struct {
	Error  string
	Facts  []LineFact
	Notes  []string
	Filled []string // columns that took their value from the line

	Measured *planform.Measured // nil when it could not be measured
}

// ReferenceReport is what a pasted BibTeX or RIS entry filled in.
type ReferenceReport struct {
	Error         string
	Filled        []string // columns
	Before        string   // the source that was typed before, when it was another
	Known         bool     // the DOI is in the catalogue in other words, which were taken
	Measurements  int      // that rest on it
	NoDOI, BadDOI bool     // the entry has none, or one that cannot be read
}

// troubles is the heading over what is to be mended: what became of the record
// depends on whether it was saved before.
func (f ContributeForm) troubles() string {
	n := countOf(len(f.Errors), "thing to mend", "things to mend")
	switch {
	case f.Warned == len(f.Errors) && f.Warned == 1:
		return "1 value looks odd: mend it, or say why it is right"
	case f.Warned == len(f.Errors):
		return countOf(f.Warned, "value looks odd", "values look odd") + ": mend them, or say why they are right"
	case f.Tried == "check" || f.Tried == "measure" || f.Tried == "fill" || f.Tried == "reference":
		return countOf(len(f.Errors), "thing to mend", "things to mend")
	case f.ID != 0 && f.State == "draft":
		return "Not sent: " + n + ". The draft still holds what you saved last"
	case f.ID != 0:
		return "Not sent: " + n + ". What you sent before stands"
	}
	return "Nothing was stored: " + n
}

// LineFact is one measured quantity of a line and the column it can fill.
type LineFact struct{ Label, Value, Column string }

// ContributeForm is the form for one measurement.
type ContributeForm struct {
	Page         Page   // its frame, for the addresses of scripts
	Action       string // where it posts to
	Name         string // of its system, as typed
	ID           int64  // 0 = not saved yet
	State        string
	Token        string // names this filling-in of the form: sent twice, it counts once
	Measurement  string // accepted record it changes, "" = new
	SystemName   string // of the accepted system it adds to or changes, "" = new
	System       string // its slug
	BaseRevision string // revision of the record the author saw
	Refusal      string // why it was not taken, when no field is to blame
	Groups       []FormGroup
	Errors       []FormError
	Warned       int // warnings without a reason
	Centreline   string
	// CentrelineSettings are those the line is measured with, as JSON; "" = the
	// defaults.
	CentrelineSettings string
	Line               *LineReport
	Message            string // word to the curator
	Changes            []catalogue.FieldChange
	Comment            string // the curator's, when it was returned
	Messages           []catalogue.Message
	Reference          string           // a pasted BibTeX or RIS entry
	Source             *ReferenceReport // what was read of it
	Tried              string           // the button pressed: check, save, submit ...
	Curator            bool             // a curator edits before accepting
	Checked            bool             // the checks ran and found nothing to mend
	Seeing             Seeing
}

// Submitted is one line of a person's list.
type Submitted struct {
	ID         int64
	SystemName string
	Sinuosity  float64
	State      string
	Act        string // edit, withdraw or restore
	At         time.Time
	Changes    bool
	Comment    string
	Hidden     *catalogue.Hidden // its row, when only some people see it
}

var fieldLabels = map[string]string{
	"system_name": "System name", "latitude_deg": "Latitude", "longitude_deg": "Longitude",
	"start_latitude_deg": "Upstream end, latitude", "start_longitude_deg": "Upstream end, longitude",
	"end_latitude_deg": "Downstream end, latitude", "end_longitude_deg": "Downstream end, longitude",
	"water_depth_m": "Water depth", "age_ma": "Age", "age_min_ma": "Youngest age", "age_max_ma": "Oldest age",
	"unit": "Chronostratigraphic unit", "palaeolatitude_deg": "Palaeolatitude",
	"palaeolatitude_se_deg": "Its standard error", "palaeolatitude_method": "How the palaeolatitude was found",
	"sinuosity_kind": "Which sinuosity", "sinuosity_se": "Standard error of sinuosity",
	"window_m": "Window", "windows": "Number of windows", "vertex_spacing_m": "Vertex spacing",
	"wavelength_m": "Wavelength", "amplitude_m": "Amplitude", "radius_m": "Radius of curvature",
	"reach_length_m": "Reach length", "valley_slope_se": "Standard error of valley slope",
	"slope_kind": "Which slope", "slope_state": "Slope today or restored", "channel_width_m": "Channel width",
	"channel_depth_m": "Channel depth", "levee_left_m": "Left levee height", "levee_right_m": "Right levee height",
	"pixel_m": "Pixel", "source_doi": "DOI of the source", "source_locator": "Page, figure or table",
	"catchment_area_km2": "Catchment area", "catchment_latitude_deg": "Catchment latitude",
	"measured_line": "Measured line", "net_to_gross": "Net to gross", "contributor": "Credit line",
}

// FieldLabel is the name of a column as a form and a difference show it.
func FieldLabel(column string) string {
	if l, ok := fieldLabels[column]; ok {
		return l
	}
	s := strings.ReplaceAll(column, "_", " ")
	if s == "" {
		return ""
	}
	return strings.ToUpper(s[:1]) + s[1:]
}

// ChoiceText is a choice as a page shows it.
func ChoiceText(v string) string {
	switch v {
	case "":
		return "not given"
	case "dem":
		return "DEM"
	case "p90":
		return "90th percentile of windows"
	case "peak", "mean":
		return v + " of windows"
	case "bend":
		return "one bend"
	case "reach":
		return "whole reach"
	case "seismic_3d":
		return "seismic, 3D"
	case "seismic_2d":
		return "seismic, 2D"
	}
	return strings.ReplaceAll(v, "_", " ")
}

// stateText says where a submission stands, in the words of a contributor.
func stateText(state string) string {
	switch state {
	case "draft":
		return "draft, not sent"
	case "submitted":
		return "waiting for a curator"
	case "returned":
		return "returned to you"
	}
	return state
}

func dateText(t time.Time) string {
	if t.IsZero() {
		return unknownMark
	}
	return t.UTC().Format("2 January 2006")
}

func dateTimeText(t time.Time) string {
	if t.IsZero() {
		return unknownMark
	}
	return t.UTC().Format("2 January 2006, 15:04 UTC")
}

// systemAddress is the page of a system.
func systemAddress(slug string) string { return "/systems/" + url.PathEscape(slug) }

func (f FormField) long() bool {
	return f.Column.Name == "notes" || f.Column.MaxLen >= 4000
}

func (f FormField) wide() bool { return f.long() || len(f.Warnings) > 0 }

func (f FormField) describedBy() string {
	ids := []string{}
	if f.Error != "" {
		ids = append(ids, f.Column.Name+"-error")
	}
	ids = append(ids, f.Column.Name+"-hint")
	return strings.Join(ids, " ")
}
