package expectation

import (
	"fmt"

	"fathombend/stats/earth"
)

// RotationChoice is what another day-length history, or another share of the
// tide of the Sun, gives at the target's age.
type RotationChoice struct {
	History                  string   `json:"history"`
	SolarTide                string   `json:"solar_tide,omitempty"` // of the tidal history only
	Title                    string   `json:"title"`
	DayLengthH               float64  `json:"day_length_h"` // solar hours
	RotationRatio            float64  `json:"rotation_ratio"`
	EquivalentModernLatitude *float64 `json:"equivalent_modern_latitude"`
}

// rotationChoices are the histories that need no typed value and reach the
// age: they show what the choice of history changes. None today.
func rotationChoices(p *place) []RotationChoice {
	if p.age.Value == 0 || p.options.Rotation > 0 || p.options.History == earth.Given {
		return nil
	}
	var out []RotationChoice
	add := func(o earth.HistoryOptions, title string) {
		d, err := earth.DayLengthAt(p.age.Value, o)
		if err != nil {
			return
		}
		c := RotationChoice{History: o.History, SolarTide: o.SolarTide, Title: title, DayLengthH: float64(d.Value), RotationRatio: d.Value.RotationRatio()}
		if eq, ok := earth.EquivalentModernLatitude(c.RotationRatio, p.lat.Value); ok {
			c.EquivalentModernLatitude = &eq
		}
		out = append(out, c)
	}
	for _, h := range earth.Histories() {
		switch {
		case h.Name == earth.TidalHistory:
			for _, t := range []struct{ tide, title string }{{earth.TideMiddle, "middle of the Sun's tide on and off"}, {earth.TideOn, "the Sun's tide on"}, {earth.TideOff, "the Sun's tide off"}} {
				add(earth.HistoryOptions{History: h.Name, SolarTide: t.tide}, h.Title+", "+t.title)
			}
		case !h.NeedsRate && h.Name != earth.Given:
			add(earth.HistoryOptions{History: h.Name}, h.Title)
		}
	}
	return out
}

// rotationSpread says in a sentence how far the answer hangs on the choice.
func rotationSpread(list []RotationChoice) string {
	if len(list) < 2 {
		return ""
	}
	low, high := list[0], list[0]
	for _, c := range list {
		if c.RotationRatio < low.RotationRatio {
			low = c
		}
		if c.RotationRatio > high.RotationRatio {
			high = c
		}
	}
	s := fmt.Sprintf("The choice of history moves the rotation ratio from %.4f (%s) to %.4f (%s)", low.RotationRatio, low.Title, high.RotationRatio, high.Title)
	if a, b := low.EquivalentModernLatitude, high.EquivalentModernLatitude; a != nil && b != nil {
		s += fmt.Sprintf(", and the equivalent modern latitude from %s to %s", hemisphere(*a), hemisphere(*b))
	}
	return s + "."
}
