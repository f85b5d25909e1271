package main

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"net/url"
	"strings"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// measuredAs is what a line cannot know of its rows: the kind of channel, and
// which sinuosity they hold ("" = the peak of the windows, or the reach of a
// line that holds one window only).
type measuredAs struct{ kind, sinuosity string }

// measuredKinds are the sinuosities that a row of a measured line can hold.
var measuredKinds = []string{"peak", "p90", "mean", "reach"}

// rowParameters are what the rows of measured lines take beside the settings.
var rowParameters = []string{"kind", "sinuosity_kind"}

// measuredAsOf reads rowParameters.
func measuredAsOf(q url.Values) (as measuredAs, err error) {
	kind, _ := catalogue.ColumnByName("kind")
	if as.kind, err = oneOf(q, "kind", "submarine", kind.Choices); err != nil {
		return as, err
	}
	as.sinuosity, err = oneOf(q, "sinuosity_kind", "", measuredKinds)
	return as, err
}

// measuredColumns says what the columns of such a row hold, for help texts.
const measuredColumns = `sinuosity is of the kind in sinuosity_kind: peak, p90 and mean are over the
windows (window_m long, as many as windows says); reach is the whole line over
its ends. Without sinuosity_kind it is the peak, or the reach of a line with one
window only. reach_length_m and valley_slope are of the whole line;
latitude_deg and longitude_deg of its middle, start_ and end_ of its ends;
vertex_spacing_m is the median of the given vertices; wavelength_m, amplitude_m
and radius_m are medians over the bends. notes hold the settings and the other
levels. Source, setting and measured line are yours to fill in.`

// writeMeasuredRows writes one row of the measurement table for each measured
// line. What a line cannot know (its source, its setting, which line it is)
// stays to be filled in.
func writeMeasuredRows(w io.Writer, report *planform.Report, as measuredAs) error {
	out := csv.NewWriter(w)
	if err := out.Write(catalogue.ColumnNames()); err != nil {
		return err
	}
	record := make([]string, len(catalogue.Columns))
	for i := range report.Lines {
		row := measuredRow(&report.Lines[i], as)
		catalogue.Record(&row, record)
		if err := out.Write(record); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// measuredRow is the row of one measured line. A level of windows that a line
// with one window has not got stays empty.
func measuredRow(m *planform.Measured, as measuredAs) catalogue.Row {
	r := catalogue.NewRow()
	r.Kind = as.kind
	r.SystemName = m.Name
	r.ValleyLine, r.Extraction, r.Grade = "end_to_end", "centreline", gradeOf(m)
	if m.Given != nil && m.Settings.Lines == "banks" {
		r.MeasuredLine = "centreline"
	}
	set := func(to *catalogue.Number, v float64) {
		if isFinite(v) {
			*to = catalogue.Num(v)
		}
	}
	given := func(to *catalogue.Number, v *float64) {
		if v != nil {
			set(to, *v)
		}
	}
	if r.SinuosityKind = as.sinuosity; r.SinuosityKind == "" {
		r.SinuosityKind = "reach"
		if !m.WholeReach && isFinite(m.PeakSinuosity) {
			r.SinuosityKind = "peak"
		}
	}
	if level := map[string]float64{"peak": m.PeakSinuosity, "p90": m.P90Sinuosity, "mean": m.MeanSinuosity}; r.SinuosityKind == "reach" {
		set(&r.Sinuosity, m.ReachSinuosity)
	} else if !m.WholeReach {
		set(&r.Sinuosity, level[r.SinuosityKind])
		set(&r.WindowM, m.WindowLengthM)
		set(&r.Windows, float64(len(m.Windows)))
	}
	set(&r.VertexSpacingM, m.MedianSpacingM)
	set(&r.ReachLengthM, m.ChannelLengthM)
	given(&r.ValleySlope, m.ValleySlope)
	given(&r.ChannelSlope, m.ChannelSlope)
	given(&r.ChannelWidthM, m.Width)
	if m.ValleySlope != nil {
		r.SlopeKind = "valley"
	}
	if t := m.Typical; t != nil {
		set(&r.WavelengthM, t.WavelengthM)
		set(&r.AmplitudeM, t.AmplitudeM)
		set(&r.RadiusM, t.RadiusM)
	}
	if p := m.Place; p != nil {
		set(&r.LatitudeDeg, p.MiddleLat)
		set(&r.LongitudeDeg, p.MiddleLon)
		set(&r.StartLatitudeDeg, p.StartLat)
		set(&r.StartLongitudeDeg, p.StartLon)
		set(&r.EndLatitudeDeg, p.EndLat)
		set(&r.EndLongitudeDeg, p.EndLon)
	}
	if g := m.Given; g != nil && len(g.LeveeLeft) > 0 {
		set(&r.LeveeLeftM, meanOf(g.LeveeLeft))
		set(&r.LeveeRightM, meanOf(g.LeveeRight))
		if m.Settings.Direction == "reversed" {
			r.LeveeLeftM, r.LeveeRightM = r.LeveeRightM, r.LeveeLeftM
		}
	}
	r.Notes = measuredNotes(m)
	return r
}

func meanOf(v []float64) float64 {
	sum, n := 0.0, 0.0
	for _, x := range v {
		if isFinite(x) {
			sum, n = sum+x, n+1
		}
	}
	if n == 0 {
		return math.NaN()
	}
	return sum / n
}

// measuredNotes says with which settings the numbers were made, the other
// levels, and what was warned about.
func measuredNotes(m *planform.Measured) string {
	var b strings.Builder
	b.WriteString("Measured from a centreline with")
	for i, s := range settingTexts(m.Settings) {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString(" " + s[0] + "=" + s[1])
	}
	fmt.Fprintf(&b, ". Reach %.4g, mean %.4g, P90 %.4g, peak %.4g (%.4g to %.4g under half and double the window and the smoothing).",
		m.ReachSinuosity, m.MeanSinuosity, m.P90Sinuosity, m.PeakSinuosity, m.Sensitivity.Low, m.Sensitivity.High)
	if p := m.StandardisedPeak; p != nil {
		fmt.Fprintf(&b, " Standardised peak of %d windows %.4g (sd %.2g).", p.K, p.Expected, p.SD)
	}
	for _, w := range m.Warnings {
		b.WriteString(" " + w)
	}
	return b.String()
}
