package views

import (
	"strconv"

	"fathombend/catalogue/planform"
)

// measureFields are the fields of the form in order, and what they are called.
var measureFields = []string{"line", "epsg", "z", "direction", "lines", "width_m", "window_widths", "window_bends", "window_m", "spacing_m", "along", "smooth", "min_bend_widths", "k"}

var measureLabels = map[string]string{
	"line": "The line", "epsg": "Coordinates", "z": "Third coordinate", "direction": "Direction", "lines": "The lines are",
	"width_m": "Channel width", "window_widths": "Window in channel widths", "window_bends": "Window in bends", "window_m": "Window in metres",
	"spacing_m": "Point spacing", "along": "Arcs are measured along", "smooth": "Smoothing filter", "min_bend_widths": "Least bend", "k": "Standardised peak of",
}

// measureSettingTexts are the settings used, by parameter, as they would be
// typed.
func measureSettingTexts(s planform.Settings) [][2]string {
	var out [][2]string
	add := func(name, v string) {
		if v != "" && v != "0" {
			out = append(out, [2]string{name, v})
		}
	}
	float := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	add("spacing_m", float(s.SpacingM))
	add("along", s.Along)
	add("smooth", strconv.Itoa(s.Smooth))
	add("width_m", float(s.WidthM))
	add("window_widths", float(s.WindowWidths))
	add("window_bends", float(s.WindowBends))
	add("window_m", float(s.WindowM))
	add("min_bend_widths", float(s.MinBendWidths))
	add("k", strconv.Itoa(s.K))
	add("direction", s.Direction)
	add("z", s.Z)
	add("epsg", s.EPSG)
	add("lines", s.Lines)
	return out
}

func measurePlanCaption(m *planform.Measured) string {
	where := "Metres in a plane with no place."
	if m.Place != nil {
		where = "Azimuthal equidistant about the middle of the line, " + latLonText(m.Place.MiddleLat, m.Place.MiddleLon) + "."
	}
	text := m.Name + ": " + measureCount(len(m.Bends), "bend", "bends") + " on " + lengthText(m.ChannelLengthM) + " of channel. " + where
	if len(m.Bends) > planBends {
		text += " There are too many bends to draw them by side."
	}
	return text
}

func latLonText(lat, lon float64) string {
	half := func(v float64, plus, less string) string {
		if v < 0 {
			return fixedText(-v, 3) + "° " + less
		}
		return fixedText(v, 3) + "° " + plus
	}
	return half(lat, "N", "S") + ", " + half(lon, "E", "W")
}
