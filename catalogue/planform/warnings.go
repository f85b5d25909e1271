package planform

import (
	"fmt"
	"math"
)

// Limits past which a number is doubted; science text section 5. Those without
// a source there are common practice.
const (
	polarLat        = 89.0  // degrees: nearer to a pole than 111 km
	frameLimit      = 750e3 // m from the middle: 0.23 % of stretch in the frame
	highReach       = 4.0
	leastSlope      = 1e-4
	greatestSlope   = 0.1
	fewBends        = 3
	leastFullReach  = 0.8 // share of the line with known depths
	leastRWidths    = 1.0
	greatestRWidths = 20.0
	leastLWidths    = 3.0
	greatestLWidths = 40.0
)

func (m *Measured) say(format string, args ...any) {
	m.Warnings = append(m.Warnings, fmt.Sprintf(format, args...))
}

// warn fills the warnings. Each says what to do.
func (m *Measured) warn(r *samples, line Line) {
	t := r.t
	m.warnPlace(t)
	m.warnCoarse(t)
	m.warnBends(r)
	m.warnWindows()
	m.warnSlope(line)
}

func (m *Measured) warnPlace(t *track) {
	if t.repeated > 0 {
		m.say("%s the vertex before and %s left out; check the digitising if there are many.", count(t.repeated, "vertex repeats", "vertices repeat"), was(t.repeated))
	}
	if !t.plane {
		crosses, polar := false, false
		for i, p := range t.v {
			if math.Abs(p.Lat) > polarLat {
				polar = true
			}
			if i > 0 && math.Abs(p.Lon-t.v[i-1].Lon) > 180 {
				crosses = true
			}
		}
		if crosses {
			m.say("The line crosses the antimeridian; it was measured across it. If it should not, check the sign of the longitudes.")
		}
		if polar {
			m.say("The line passes within 111 km of a pole; lengths are right, but read no meaning into its longitudes there.")
		}
		if t.reach > frameLimit {
			m.say("The line reaches %s from its middle: lengths and sinuosities are geodesic, but amplitudes and radii are stretched by up to %.1f %%. Measure shorter reaches for those.", km(t.reach), 100*t.reach*t.reach/(6*earthRadius*earthRadius))
		}
	}
	at, full := t.crossesAt()
	if finite(at) {
		m.say("The line crosses or touches itself, first %s along it. It was measured as given; check it for a digitising error or a cut-off loop.", km(at))
	} else if !full {
		m.say("The line runs so often over the same ground that it was not searched for self-crossings to the end; check that it is one channel.")
	}
}

func was(n int) string {
	if n == 1 {
		return "was"
	}
	return "were"
}

func (m *Measured) warnCoarse(t *track) {
	if share := t.staircase(); share > 0.5 {
		m.say("%.0f %% of its turns are right angles or half right angles, as where a line follows the edges of pixels: it reads up to 41 %% too long. Set spacing_m to several pixels.", 100*share)
		return
	}
	quarter := math.Inf(1)
	if m.Typical != nil {
		quarter = m.Typical.WavelengthM / 4
	}
	switch {
	case m.missing > missingShare:
		m.Coarse = true
		m.say("The line is too coarse for its bends, or its digitising is noisy: its length still grows as the ruler shrinks to the vertex spacing (%s), and about %.0f %% of it is missing. Sinuosity reads low; digitise more vertices from the survey.", km(t.spacing), math.Max(1, 100*m.missing))
	case t.spacing > quarter:
		m.Coarse = true
		m.say("The line is too coarse for its bends: its vertices are %s apart, more than a quarter of the median wavelength (%s). Sinuosity reads low; digitise more vertices from the survey.", km(t.spacing), km(4*quarter))
	}
}

// staircase is the share of the turns, among vertices that turn at all, that
// are 45 or 90 degrees to within half a degree; 0 for fewer than 20 of them.
func (t *track) staircase() float64 {
	turns, square := 0, 0
	for i := 1; i < len(t.x)-1; i++ {
		ax, ay := t.x[i]-t.x[i-1], t.y[i]-t.y[i-1]
		bx, by := t.x[i+1]-t.x[i], t.y[i+1]-t.y[i]
		a := math.Abs(math.Atan2(ax*by-ay*bx, ax*bx+ay*by)) / degree
		if a < 0.5 {
			continue
		}
		turns++
		if math.Abs(a-45) < 0.5 || math.Abs(a-90) < 0.5 {
			square++
		}
	}
	if turns < 20 {
		return 0
	}
	return float64(square) / float64(turns)
}

func (m *Measured) warnBends(r *samples) {
	n := len(m.Bends)
	if n < fewBends {
		m.say("Only %s between inflections %s found: bend values say little. Give a longer reach, or a smaller spacing_m or smooth if the line shows more.", count(n, "complete bend", "complete bends"), was(n))
	}
	if n == 0 {
		return
	}
	arcs := 0.0
	for _, b := range m.Bends {
		arcs += b.ArcM / float64(n)
	}
	if filter := float64(m.Settings.Smooth) * r.step; m.Settings.Smooth > 1 && arcs < 1.5*filter && m.Settings.WidthM == 0 {
		m.say("The mean bend (%s of arc) is hardly longer than the smoothing filter (%s): many bends may be digitising noise. Give the channel width, or a larger spacing_m.", km(arcs), km(filter))
	}
	w := m.Settings.WidthM
	if w == 0 {
		return
	}
	if x := m.Typical.RadiusM / w; x < leastRWidths || x > greatestRWidths {
		m.say("The median radius is %.2g channel widths; %g to %g are usual. Check the width and the smoothing.", x, leastRWidths, greatestRWidths)
	}
	if x := m.Typical.WavelengthM / w; x < leastLWidths || x > greatestLWidths {
		m.say("The median wavelength is %.2g channel widths; %g to %g are usual. Check the width and the smoothing.", x, leastLWidths, greatestLWidths)
	}
}

func (m *Measured) warnWindows() {
	if m.WholeReach {
		what := "the window of " + km(m.Settings.WindowM)
		if m.Settings.WindowWidths > 0 {
			what = fmt.Sprintf("the window of %g channel widths (%s)", m.Settings.WindowWidths, km(m.Settings.WindowWidths*m.Settings.WidthM))
		} else if m.Settings.WindowBends > 0 {
			what = fmt.Sprintf("the window of %g bends (it has %d between inflections)", m.Settings.WindowBends, len(m.Bends))
		}
		m.say("The line is shorter than %s, so the whole reach stands as the only window and mean, P90 and peak are all its sinuosity. Give a shorter window or a longer reach.", what)
	}
	closed := 0
	for _, w := range m.Windows {
		if !finite(w.Sinuosity) {
			closed++
		}
	}
	if closed > 0 {
		m.say("%s at the same point at both ends, has no sinuosity and %s left out. Use a longer window.", count(closed, "window is", "windows are"), was(closed))
	}
	if m.ReachSinuosity > highReach {
		m.say("The reach sinuosity is %.3g, over %g: the valley itself may be curved. Look at the sum of chords between inflections (%.3g), or give a valley axis.", m.ReachSinuosity, highReach, m.ChannelLengthM/m.ValleyLengthM.Inflections)
	}
	if a := m.ValleyLengthM.Axis; a != nil && *a > m.ChannelLengthM {
		m.say("The valley axis (%s) is longer than the channel (%s), which would be a sinuosity below 1: use the end-to-end valley length, or check the axis.", km(*a), km(m.ChannelLengthM))
	}
	if h := m.Sensitivity; h.High-1 > 2*(h.Low-1) && h.High > 1.1 {
		m.say("The peak depends strongly on the window and the smoothing: %.3g to %.3g under half and double of each. Say the window whenever you quote it, or use the mean or the standardised peak.", h.Low, h.High)
	}
}

func (m *Measured) warnSlope(line Line) {
	if line.HasTime {
		m.say("The third coordinate is two-way time, so there is no slope: time becomes depth only with a velocity for each layer. Convert it to metres first if you need the slope.")
		return
	}
	if m.ValleySlope == nil {
		return
	}
	if m.depthShare < leastFullReach {
		m.say("Depths are known over %.0f %% of the line only; the valley slope is that of this part.", 100*m.depthShare)
	}
	switch v := *m.ValleySlope; {
	case v <= 0:
		m.say("The valley slope is %.3g: the line does not run down the slope as it is. Reverse it, check the sign of the depths (z=depth or z=elevation), or record it as tilted since.", v)
	case v < leastSlope || v > greatestSlope:
		m.say("The valley slope is %.3g, outside %g to %g. Check the unit of the depths.", v, leastSlope, greatestSlope)
	}
}
