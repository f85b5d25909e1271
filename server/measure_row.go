package main

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"strings"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

// writeMeasuredRows writes one row of the measurement table for each measured
// line. What a line cannot know (its source, its setting, which line it is)
// stays to be filled in.
func writeMeasuredRows(w io.Writer, report *planform.Report) error {
	out := csv.NewWriter(w)
	if err := out.Write(catalogue.ColumnNames()); err != nil {
		return err
	}
	record := make([]string, len(catalogue.Columns))
	for i := range report.Lines {
		row := measuredRow(&report.Lines[i])
		catalogue.Record(&row, record)
		if err := out.Write(record); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// measuredRow is the row of one measured line: the peak of its windows, or the
// reach when it holds one window only.
func measuredRow(m *planform.Measured) catalogue.Row {
	r := catalogue.NewRow()
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
	r.SinuosityKind = "reach"
	set(&r.Sinuosity, m.ReachSinuosity)
	if !m.WholeReach && isFinite(m.PeakSinuosity) {
		r.SinuosityKind = "peak"
		set(&r.Sinuosity, m.PeakSinuosity)
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
