package planform

import (
	"fmt"
	"math"
)

// Defaults of a measurement. Widths and bends of a window, the number of
// windows of the standardised peak and the least bend are common practice or
// convention, no source.
const (
	DefaultWindowWidths  = 20
	DefaultWindowBends   = 10
	DefaultK             = 5
	DefaultMinBendWidths = 2
	defaultSmooth        = 11
)

// Choices of the settings that are words; "" means guessed or default.
var (
	ZChoices         = []string{"depth", "elevation", "time"}
	DirectionChoices = []string{"as_given", "reversed"}
	AlongChoices     = []string{"given", "resampled"}
	LinesChoices     = []string{"centrelines", "banks", "levels"}
)

// Check refuses settings that no line could be measured with. The error is an
// *InputError that names the setting.
func (s Settings) Check() error {
	for _, f := range []struct {
		name   string
		v      float64
		lo, hi float64
	}{
		{"spacing_m", s.SpacingM, 1e-3, 1e7}, {"window_widths", s.WindowWidths, 1, 1e6},
		{"window_bends", s.WindowBends, 1, 1e6}, {"window_m", s.WindowM, 1e-2, 1e8},
		{"width_m", s.WidthM, 1e-3, 1e6}, {"min_bend_widths", s.MinBendWidths, 0, 1e4},
	} {
		if f.v != 0 && !(f.v >= f.lo && f.v <= f.hi) {
			return &InputError{f.name, fmt.Sprintf("%s is not allowed; expected a number from %s to %s, or nothing for the default", num(f.v), num(f.lo), num(f.hi))}
		}
	}
	given := 0
	for _, v := range []float64{s.WindowM, s.WindowWidths, s.WindowBends} {
		if v > 0 {
			given++
		}
	}
	if given > 1 {
		return &InputError{"window_m", "more than one window is given; expected only one of window_widths, window_bends and window_m"}
	}
	if s.Smooth != 0 && s.Smooth != 1 && (s.Smooth < minSmooth || s.Smooth > maxSmooth || s.Smooth%2 == 0) {
		return &InputError{"smooth", fmt.Sprintf("%d is not allowed; expected 1 (no smoothing) or an odd number of points from %d to %d", s.Smooth, minSmooth, maxSmooth)}
	}
	if s.K < 0 || s.K > maxWindows {
		return &InputError{"k", fmt.Sprintf("%d is not allowed; expected a whole number of windows from 1 to %d", s.K, maxWindows)}
	}
	for _, c := range []struct {
		name, v string
		choices []string
	}{{"z", s.Z, ZChoices}, {"direction", s.Direction, DirectionChoices}, {"along", s.Along, AlongChoices}, {"lines", s.Lines, LinesChoices}} {
		if err := oneOf(c.name, c.v, c.choices); err != nil {
			return err
		}
	}
	_, err := parseEPSG(s.EPSG)
	return err
}

func oneOf(name, v string, choices []string) error {
	if v == "" {
		return nil
	}
	list := ""
	for i, c := range choices {
		if c == v {
			return nil
		}
		if i > 0 {
			list += ", "
		}
		list += c
	}
	return &InputError{name, fmt.Sprintf("%q is not one of its values; expected one of: %s", clip(v), list)}
}

// complete fills the settings a line is measured with, so that measuring with
// the result gives the same numbers again.
func (s Settings) complete(t *track, z string, reversed bool) (Settings, error) {
	if s.WidthM == 0 {
		s.WidthM = t.medianWidth()
	}
	if s.Along == "" {
		s.Along = "given"
		if s.SpacingM > 0 {
			s.Along = "resampled"
		}
	}
	if s.SpacingM == 0 {
		s.SpacingM = t.automaticSpacing()
	}
	if s.WindowWidths > 0 && s.WidthM == 0 {
		return s, &InputError{"window_widths", "the channel width is not known; give width_m, or a width column, or a window in bends or metres"}
	}
	if s.MinBendWidths > 0 && s.WidthM == 0 {
		return s, &InputError{"min_bend_widths", "the channel width is not known; give width_m or a width column"}
	}
	if s.WindowM == 0 && s.WindowWidths == 0 && s.WindowBends == 0 {
		if s.WidthM > 0 {
			s.WindowWidths = DefaultWindowWidths
		} else {
			s.WindowBends = DefaultWindowBends
		}
	}
	if s.MinBendWidths == 0 && s.WidthM > 0 {
		s.MinBendWidths = DefaultMinBendWidths
	}
	if s.K == 0 {
		s.K = DefaultK
	}
	if s.Z == "" {
		s.Z = z
	}
	s.Direction = "as_given"
	if reversed {
		s.Direction = "reversed"
	}
	return s, nil
}

// smoothPoints is the filter for n samples a step apart: as asked, else two
// channel widths where the width is known, and never less than eleven points,
// which lets through what is longer than about six (Schafer 2011, IEEE Signal
// Process. Mag. 28(4):111, doi 10.1109/MSP.2011.941097). It is at most a third
// of the samples.
func (s Settings) smoothPoints(r *samples) int {
	p := s.Smooth
	if p == 0 {
		p = defaultSmooth
		if s.WidthM > 0 {
			p = max(p, int(math.Min(2*s.WidthM/r.step, maxSmooth)))
		}
	}
	return fitSmooth(p, r.n)
}

// fitSmooth makes a filter length odd and keeps it within its limits.
func fitSmooth(points, n int) int {
	if points <= 1 {
		return 1
	}
	points = min(points, maxSmooth, (n+1)/3)
	points = max(points, minSmooth) | 1
	if points > n+1 {
		return 1
	}
	return points
}

// leastArc is the arc below which a stretch is no bend of its own, m: the
// stated number of widths, or half the filter where that is longer, since the
// filter invents nothing shorter but noise.
func (s Settings) leastArc(r *samples, points int) float64 {
	a := s.MinBendWidths * s.WidthM
	if points > 1 {
		a = math.Max(a, float64(points)/2*r.step)
	}
	return a
}
