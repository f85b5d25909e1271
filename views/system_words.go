package views

import (
	"fmt"
	"math"
	"strings"

	"fathombend/catalogue"
	"fathombend/catalogue/planform"
)

func bigRibbonBox(s Shape) string {
	half := max(s.Half, 24) + 10
	left, right := min(s.Left, -12)-6, max(s.Right, 312)+6
	return fmt.Sprintf("%s %s %s %s", num2(left), num2(-half), num2(right-left), num2(2*half))
}

// globe is centred on the system.
func (p SystemPage) globe() Globe {
	r := p.best()
	g := Globe{ID: "place", Title: "Where " + p.Detail.Name + " lies on the globe, marked in the middle", Rings: p.Land, Lat: math.NaN()}
	if r.LatitudeDeg.Valid && r.LongitudeDeg.Valid {
		g.Lat, g.Lon = r.LatitudeDeg.V, r.LongitudeDeg.V
		g.Marks = [][2]float64{{g.Lon, g.Lat}}
	}
	return g
}

func longitudeCell(n catalogue.Number) string {
	if !n.Valid {
		return unknownMark
	}
	return formatLongitude(math.Round(n.V*10) / 10)
}

func lineOf(l SystemLine) string {
	if l.Measurement == "" {
		return ""
	}
	return " of " + l.Measurement
}

// inventedSystem is said under every picture of an invented system.
func inventedSystem(p SystemPage) string {
	if p.best().Invented {
		return " Invented: a program drew this system."
	}
	return ""
}

func planCaption(l SystemLine) string {
	m := l.Measured
	return fmt.Sprintf("The stored line%s in local kilometres, %d vertices at a median spacing of %s m, %.1f km long over a chord of %.1f km; ring: upstream end%s. Sinuosity of the whole reach %s.",
		lineOf(l), m.Vertices, cell(catalogue.Num(m.MedianSpacingM), 2), m.ChannelLengthM/1000, m.ChordM/1000, inflectionsText(m), num2Fixed(m.ReachSinuosity))
}

func windowsCaption(l SystemLine) string {
	m := l.Measured
	s := fmt.Sprintf("Left: sinuosity of %s of %s km. Mean %s, 90th percentile %s, peak %s.",
		plural(len(m.Windows), "window", "windows"), cell(catalogue.Num(m.WindowLengthM/1000), 2), num2Fixed(m.MeanSinuosity), num2Fixed(m.P90Sinuosity), num2Fixed(m.PeakSinuosity))
	if len(m.Profile) > 1 {
		return s + " Right: depth along the channel."
	}
	return s + " No depth is stored with the line."
}

func fitCaption(p SystemPage) string {
	s := fmt.Sprintf("Sinuosity against |f| at the time of deposition: %s in %s; straight line with its 95 %% interval, whole deposits resampled. Diamonds: %s.",
		plural(p.FitRows, "measurement", "measurements"), plural(p.FitClusters, "deposit", "deposits"), p.Detail.Name)
	if p.InventedRows > 0 {
		s += " Invented data."
	}
	return s
}

func clipped(s string) string {
	if r := []rune(s); len(r) > 120 {
		return string(r[:120]) + "…"
	}
	return s
}

// ownNote is what a measurement's note says beside the mark that it is
// invented, which the page shows on its own.
func ownNote(r catalogue.Row) string {
	return strings.TrimSpace(strings.TrimPrefix(r.Notes, catalogue.InventedMark))
}

func inflectionsText(m *planform.Measured) string {
	if n := len(m.Inflections); n == 0 || n > mostMarks {
		return ""
	}
	return "; small marks: inflections"
}
