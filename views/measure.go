package views

import (
	"fmt"
	"math"
	"net/url"
	"strconv"
	"strings"

	"fathombend/catalogue/planform"
)

// MeasurePage is the page that measures a centreline.
type MeasurePage struct {
	Page   Page
	Values url.Values        // the settings as typed
	Text   string            // the line as pasted, or the text of a small file
	File   string            // name of the file that was sent
	Errors map[string]string // by setting; "line" for the line itself
	Report *planform.Report  // nil before anything was sent
	Show   int               // the line shown in full

	// SaveLine and SaveSettings go into the form for a contribution; "" when
	// the line cannot be taken there.
	SaveLine, SaveSettings string
}

// Save sets what the form for a contribution is given.
func (p *MeasurePage) Save(line, settings string) { p.SaveLine, p.SaveSettings = line, settings }

func (p MeasurePage) value(name string) string { return p.Values.Get(name) }

// measured is the line shown in full, nil when nothing was measured.
func (p MeasurePage) measured() *planform.Measured {
	if p.Report == nil || p.Show < 0 || p.Show >= len(p.Report.Lines) {
		return nil
	}
	return &p.Report.Lines[p.Show]
}

// Most rows of each table and list on the page; the files have all of them.
const (
	maxBendRows   = 300
	maxLineRows   = 300
	maxRefusals   = 200
	maxWindowRows = 300
)

// used is what stands in the place of an empty setting: the value chosen for
// it.
func (p MeasurePage) used(name string) string {
	m := p.measured()
	if m == nil {
		return ""
	}
	s := m.Settings
	v := map[string]float64{"spacing_m": s.SpacingM, "smooth": float64(s.Smooth), "window_widths": s.WindowWidths, "window_bends": s.WindowBends,
		"window_m": s.WindowM, "width_m": s.WidthM, "min_bend_widths": s.MinBendWidths, "k": float64(s.K)}[name]
	if v == 0 {
		return ""
	}
	return strconv.FormatFloat(v, 'g', 4, 64)
}

// measureLead is the sentence the page answers.
func measureLead(m *planform.Measured) string {
	if m.WholeReach {
		return "Sinuosity " + sinuosityText(m.ReachSinuosity) + " over the whole reach of " + lengthText(m.ChannelLengthM) + ", which is shorter than one window."
	}
	return fmt.Sprintf("Sinuosity %s over the reach of %s; its %s of %s read %s on average and %s at the peak [%s, %s].",
		sinuosityText(m.ReachSinuosity), lengthText(m.ChannelLengthM), measureCount(len(m.Windows), "window", "windows"), windowText(m),
		sinuosityText(m.MeanSinuosity), sinuosityText(m.PeakSinuosity), sinuosityText(m.Sensitivity.Low), sinuosityText(m.Sensitivity.High))
}

// windowText names the window: "ten bends" or a length.
func windowText(m *planform.Measured) string {
	switch s := m.Settings; {
	case s.WindowBends > 0:
		return countWord(s.WindowBends) + " bends"
	case s.WindowWidths > 0:
		return countWord(s.WindowWidths) + " channel widths (" + lengthText(s.WindowWidths*s.WidthM) + ")"
	default:
		return lengthText(s.WindowM)
	}
}

func countWord(v float64) string { return strconv.FormatFloat(v, 'g', 4, 64) }

func measureCount(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return strconv.Itoa(n) + " " + many
}

// sinuosityText writes a sinuosity with two decimals, or three below 1.1,
// where the second says nothing.
func sinuosityText(p float64) string {
	if p < 1.1 {
		return fixedText(p, 3)
	}
	if p >= 100 {
		return fixedText(p, 0)
	}
	return fixedText(p, 2)
}

// lengthText writes a length in m, or in km from 10 km on.
func lengthText(m float64) string {
	if math.Abs(m) >= 10e3 {
		return numberText(m/1e3, 3) + " km"
	}
	return numberText(m, 3) + " m"
}

func slopeText(p *float64) string {
	if p == nil {
		return unknownMark
	}
	return numberText(*p, 3)
}

// measureFact is one label with its value.
type measureFact struct{ label, value, note string }

// measureLengths are the lengths and the sinuosities they give.
func measureLengths(m *planform.Measured) []measureFact {
	v := m.ValleyLengthM
	out := []measureFact{
		{"Channel length", lengthText(m.ChannelLengthM), "along the given vertices"},
		{"Valley length, end to end", lengthText(v.EndToEnd), "sinuosity " + sinuosityText(m.ReachSinuosity)},
		{"Valley length over inflections", lengthText(v.Inflections), "sinuosity " + sinuosityText(m.ChannelLengthM/v.Inflections)},
	}
	if v.Axis != nil {
		out = append(out, measureFact{"Valley length along the axis", lengthText(*v.Axis), "sinuosity " + sinuosityText(m.ChannelLengthM / *v.Axis)})
	}
	out = append(out, measureFact{"Vertices", strconv.Itoa(m.Vertices), "median spacing " + lengthText(m.MedianSpacingM)})
	stable := "not reached by these vertices"
	if m.StableSpacingM != nil {
		stable = "up to " + lengthText(*m.StableSpacingM)
	}
	out = append(out, measureFact{"Spacing at which sinuosity stays within 1 %", stable, ""})
	if m.Width != nil {
		out = append(out, measureFact{"Channel width", lengthText(*m.Width), ""})
	}
	if m.ValleySlope != nil {
		out = append(out, measureFact{"Valley slope, m/m", slopeText(m.ValleySlope), "channel slope " + slopeText(m.ChannelSlope)})
	}
	return out
}

// measureBends are the typical bend's dimensions.
func measureBends(m *planform.Measured) []measureFact {
	t := m.Typical
	if t == nil {
		return nil
	}
	out := []measureFact{
		{"Bends between inflections", strconv.Itoa(t.Bends), ""},
		{"Median bend sinuosity", sinuosityText(t.Sinuosity), "arc over chord"},
		{"Median wavelength", lengthText(t.WavelengthM), overWidth(t.WavelengthM, m.Width)},
		{"Median amplitude", lengthText(t.AmplitudeM), "from the chord to the apex"},
		{"Median radius", lengthText(t.RadiusM), overWidth(t.RadiusM, m.Width)},
	}
	return out
}

func overWidth(x float64, w *float64) string {
	if w == nil || !(*w > 0) {
		return ""
	}
	return numberText(x / *w, 2) + " channel widths"
}

// measureLevel is one level of sinuosity with its range under other settings.
type measureLevel struct{ name, value, low, high, note string }

func measureLevels(m *planform.Measured) []measureLevel {
	level := func(name string, v float64, r planform.Range, note string) measureLevel {
		return measureLevel{name, sinuosityText(v), sinuosityText(r.Low), sinuosityText(r.High), note}
	}
	out := []measureLevel{
		level("Mean of windows", m.MeanSinuosity, m.SensitivityMean, ""),
		level("90th percentile", m.P90Sinuosity, m.SensitivityP90, "90 % of windows read less"),
		level("Peak", m.PeakSinuosity, m.Sensitivity, "grows with the number of windows"),
	}
	if s := m.StandardisedPeak; s != nil {
		out = append(out, measureLevel{"Standardised peak, " + countText(s.K, "window", "windows"), sinuosityText(s.Expected), "", "",
			"standard deviation " + numberText(s.SD, 2) + "; the expected largest of " + countText(s.K, "window", "windows") + " drawn from these"})
	}
	return out
}

// measureChoices are the choices of a select after the blank one.
func measureChoices(choices []string, texts map[string]string, blank string) []measureChoice {
	out := []measureChoice{{"", blank}}
	for _, c := range choices {
		t := texts[c]
		if t == "" {
			t = strings.ReplaceAll(c, "_", " ")
		}
		out = append(out, measureChoice{c, t})
	}
	return out
}

type measureChoice struct{ value, text string }
