package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"net/http"
	"net/url"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/labstack/echo/v4"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
	"fathombend/views"
)

// maxPastedLine is how much of a centreline a form carries along, bytes.
const maxPastedLine = 4 << 20

// formLine is the centreline of a form, measured.
type formLine struct {
	geoJSON  string // LineString; third coordinate elevation, m, up positive
	settings string // JSON
	planform *planform.Measured
}

// lineText is the centreline of a form: the file when one was chosen, else the
// text. A text file takes the place of what was typed, so that it survives an
// error; a binary one cannot.
func lineText(c echo.Context, r *record) (data []byte, name string, err error) {
	head, err := c.FormFile("centreline_file")
	if errors.Is(err, http.ErrMissingFile) || errors.Is(err, http.ErrNotMultipart) {
		return []byte(r.typed.Get("centreline")), "", nil
	}
	if err != nil {
		return nil, "", err
	}
	f, err := head.Open()
	if err != nil {
		return nil, "", err
	}
	defer f.Close()
	data, err = io.ReadAll(io.LimitReader(f, maxPastedLine+1))
	if err != nil {
		return nil, "", err
	}
	if len(data) == 0 {
		return []byte(r.typed.Get("centreline")), "", nil
	}
	if utf8.Valid(data) && len(data) <= maxPastedLine {
		r.typed.Set("centreline", string(data))
	}
	return data, head.Filename, nil
}

// measureLine measures the centreline of a form, nil when there is none. A
// refusal is an error beside the field.
func measureLine(c echo.Context, r *record) (*formLine, *views.LineReport) {
	data, name, err := lineText(c, r)
	if err != nil {
		return nil, &views.LineReport{Error: "The file could not be read; choose it again."}
	}
	if len(strings.TrimSpace(string(data))) == 0 {
		return nil, nil
	}
	if len(data) > maxPastedLine {
		return nil, &views.LineReport{Error: fmt.Sprintf("The line is longer than %d MB. Thin its vertices, or measure it on the page Measure and give the numbers here.", maxPastedLine>>20)}
	}
	settings, err := lineSettings(r)
	if err != nil {
		return nil, &views.LineReport{Error: inputSentence(err)}
	}
	lines, refused, err := planform.Read(data, "", name, settings)
	switch {
	case err != nil:
		return nil, &views.LineReport{Error: inputSentence(err)}
	case len(lines) == 0 && len(refused) > 0:
		return nil, &views.LineReport{Error: refused[0].Reason}
	case len(lines) != 1:
		return nil, &views.LineReport{Error: fmt.Sprintf("There are %d lines. Expected: the one line this measurement was made on.", len(lines))}
	case lines[0].Plane:
		return nil, &views.LineReport{Error: "The line is in plane metres and has no place. Expected: longitude and latitude in WGS84 degrees."}
	}
	m, err := planform.Measure(lines[0], settings)
	if err != nil {
		return nil, &views.LineReport{Error: inputSentence(err)}
	}
	out := &formLine{geoJSON: lineString(lines[0]), planform: m}
	if b, err := json.Marshal(finite(storedSettings(m))); err == nil {
		out.settings = string(b)
	}
	return out, lineReport(m)
}

// lineSettings are the settings the line is measured with: those it brought
// along from the page Measure, else the defaults for the width in the form.
func lineSettings(r *record) (planform.Settings, error) {
	var s planform.Settings
	if text := strings.TrimSpace(r.typed.Get("centreline_settings")); text != "" {
		if json.Unmarshal([]byte(text), &s) != nil {
			return s, &planform.InputError{Parameter: "centreline_settings", Message: "the settings of the measurement are no settings of this program; empty them for the defaults"}
		}
	}
	if s.WidthM == 0 {
		s.WidthM = positive(r.row.ChannelWidthM)
	}
	return s, s.Check()
}

func inputSentence(err error) string {
	var in interface{ Input() (string, string) }
	if errors.As(err, &in) {
		_, message := in.Input()
		return sentence(message, "")
	}
	return "The line could not be measured. Expected: at least three different vertices, upstream to downstream."
}

func positive(n catalogue.Number) float64 {
	if n.Valid && n.V > 0 {
		return n.V
	}
	return 0
}

// lineString is the line as GeoJSON. A depth becomes an elevation; a line of
// two-way times keeps its plan only.
func lineString(l planform.Line) string {
	var b strings.Builder
	b.WriteString(`{"type":"LineString","coordinates":[`)
	deep := !l.HasTime
	for _, v := range l.Vertices {
		deep = deep && isFinite(v.Depth)
	}
	for i, v := range l.Vertices {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString("[" + strconv.FormatFloat(v.Lon, 'f', -1, 64) + "," + strconv.FormatFloat(v.Lat, 'f', -1, 64))
		if deep {
			b.WriteString("," + strconv.FormatFloat(-v.Depth+0, 'f', -1, 64))
		}
		b.WriteByte(']')
	}
	b.WriteString("]}")
	return b.String()
}

func (l *formLine) sinuosities() []float64 {
	var out []float64
	for _, w := range l.planform.Windows {
		if isFinite(w.Sinuosity) && w.Sinuosity >= 1 {
			out = append(out, w.Sinuosity)
		}
	}
	return out
}

// lineReport says what a line measures.
func lineReport(m *planform.Measured) *views.LineReport {
	r := &views.LineReport{Notes: m.Warnings, Measured: m}
	add := func(label string, v float64, unit string) {
		if isFinite(v) {
			r.Facts = append(r.Facts, views.LineFact{Label: label, Value: strings.TrimSpace(rounded(v) + " " + unit)})
		}
	}
	add("Vertices", float64(m.Vertices), "")
	add("Channel length", m.ChannelLengthM, "m")
	add("Valley length, end to end", m.ValleyLengthM.EndToEnd, "m")
	add("Sinuosity of the reach", m.ReachSinuosity, "")
	add("Mean of windows", m.MeanSinuosity, "")
	add("90th percentile of windows", m.P90Sinuosity, "")
	add("Peak of windows", m.PeakSinuosity, "")
	add("Windows", float64(len(m.Windows)), "")
	add("Length of a window", m.WindowLengthM, "m")
	add("Median vertex spacing", m.MedianSpacingM, "m")
	add("Bends", float64(len(m.Bends)), "")
	if m.ValleySlope != nil {
		add("Valley slope", *m.ValleySlope, "m/m")
	}
	return r
}

// storedLine measures the stored line of a submission again, as it was.
func storedLine(s *catalogue.Submission) *views.LineReport {
	var settings planform.Settings
	if s.CentrelineSettings != "" {
		// Settings of an older version may hold words no longer known; the
		// defaults stand in.
		_ = json.Unmarshal([]byte(s.CentrelineSettings), &settings)
	}
	// However the file was to be read, what is stored is degrees and elevations.
	settings.EPSG, settings.Lines, settings.Z = "", "", ""
	lines, _, err := planform.Read([]byte(s.Centreline), "application/geo+json", "", settings)
	if err != nil || len(lines) != 1 {
		return &views.LineReport{Error: "The stored line cannot be read any more."}
	}
	m, err := planform.Measure(lines[0], settings)
	if err != nil {
		return &views.LineReport{Error: inputSentence(err)}
	}
	return lineReport(m)
}

// rounded writes a measured number with four significant digits, or all the
// digits before the point.
func rounded(v float64) string {
	if math.Abs(v) >= 1000 {
		return strconv.FormatFloat(v, 'f', 0, 64)
	}
	return strconv.FormatFloat(v, 'g', 4, 64)
}

// filler puts measured values into fields of a form that are empty, and keeps
// which.
type filler struct {
	typed  url.Values
	filled []string
}

func (f *filler) set(column, text string) {
	now := strings.TrimSpace(f.typed.Get(column))
	c, ok := catalogue.ColumnByName(column)
	if !ok || text == "" || (now != "" && !(len(c.Choices) > 0 && now == c.Default)) || now == text {
		return
	}
	f.typed.Set(column, text)
	f.typed.Del(column + ".unit")
	f.filled = append(f.filled, column)
}

func (f *filler) number(column string, v float64) {
	if isFinite(v) {
		f.set(column, strconv.FormatFloat(v, 'g', -1, 64))
	}
}

func (f *filler) given(column string, v *float64) {
	if v != nil {
		f.number(column, *v)
	}
}

// length and degrees write decimetres, 1e-6 degrees being one: digits beyond
// are the computer's. Sinuosity and slope keep theirs, so that the stored line
// gives the stored number.
func (f *filler) length(column string, v float64)  { f.number(column, math.Round(v*10)/10) }
func (f *filler) degrees(column string, v float64) { f.number(column, math.Round(v*1e6)/1e6) }

// fillFrom puts what the line measures into fields that are empty, and returns
// which.
func (r *record) fillFrom(l *formLine) []string {
	f, m := &filler{typed: r.typed}, l.planform
	f.sinuosity(m)
	f.set("valley_line", "end_to_end")
	f.length("reach_length_m", m.ChannelLengthM)
	f.length("vertex_spacing_m", m.MedianSpacingM)
	f.given("valley_slope", m.ValleySlope)
	f.given("channel_slope", m.ChannelSlope)
	if p := m.Place; p != nil {
		f.degrees("latitude_deg", p.MiddleLat)
		f.degrees("longitude_deg", p.MiddleLon)
		f.degrees("start_latitude_deg", p.StartLat)
		f.degrees("start_longitude_deg", p.StartLon)
		f.degrees("end_latitude_deg", p.EndLat)
		f.degrees("end_longitude_deg", p.EndLon)
	}
	if t := m.Typical; t != nil {
		f.length("wavelength_m", t.WavelengthM)
		f.length("amplitude_m", t.AmplitudeM)
		f.length("radius_m", t.RadiusM)
	}
	return f.filled
}

// sinuosity fills the sinuosity of the kind chosen, or the peak where there is
// more than one window, with how it was measured. A sinuosity that was typed
// stays, and so does what it says of itself.
func (f *filler) sinuosity(m *planform.Measured) {
	if strings.TrimSpace(f.typed.Get("sinuosity")) != "" {
		return
	}
	kind := f.typed.Get("sinuosity_kind")
	if kind == "" && len(m.Windows) > 1 {
		kind = "peak"
	} else if kind == "" {
		kind = "reach"
	}
	v, ok := map[string]float64{"reach": m.ReachSinuosity, "mean": m.MeanSinuosity, "p90": m.P90Sinuosity, "peak": m.PeakSinuosity}[kind]
	if !ok {
		return
	}
	f.number("sinuosity", v)
	f.set("sinuosity_kind", kind)
	f.set("grade", gradeOf(m))
	f.set("extraction", "centreline")
	if kind != "reach" {
		f.length("window_m", m.WindowLengthM)
		f.number("windows", float64(len(m.Windows)))
	}
}

// gradeOf is the grade of a value measured here: remeasured needs a vertex
// spacing finer than a quarter of the wavelength.
func gradeOf(m *planform.Measured) string {
	if !m.Coarse && m.Typical != nil && m.MedianSpacingM < m.Typical.WavelengthM/4 {
		return "remeasured"
	}
	return "traced"
}
