package planform

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

const maxWindows = 200_000

// span is a window by its two places.
type span struct{ from, to float64 }

// windowsByLength lays windows of w metres of arc, stepped by w/4, over the
// line. What is left over is shared between the two ends, so that the reversed
// line has the same windows. None when the line is shorter than w.
func (r *samples) windowsByLength(w float64) []span {
	total := r.total()
	if total < w {
		return nil
	}
	n := int((total-w)/(w/4)*(1+1e-12)) + 1
	start := (total - w - float64(n-1)*w/4) / 2
	out := make([]span, n)
	for i := range out {
		a := start + float64(i)*w/4
		out[i] = span{r.place(a), r.place(a + w)}
	}
	return out
}

// windowsByBends lays windows of b bends, stepped by b/4 bends, between the
// first and the last inflection. A window may start inside a bend: both its
// ends then cut a bend at the same share of it.
func (r *samples) windowsByBends(inflections []float64, b float64) []span {
	bends := float64(len(inflections) - 1)
	if bends < b {
		return nil
	}
	n := int((bends-b)/(b/4)*(1+1e-12)) + 1
	start := (bends - b - float64(n-1)*b/4) / 2
	out := make([]span, n)
	for i := range out {
		a := start + float64(i)*b/4
		out[i] = span{inflectionAt(inflections, a), inflectionAt(inflections, a+b)}
	}
	return out
}

func inflectionAt(inflections []float64, a float64) float64 {
	i := min(int(a), len(inflections)-2)
	return inflections[i] + (a-float64(i))*(inflections[i+1]-inflections[i])
}

// spans are the windows of the settings, which are complete; whole says that
// the line is too short for one and is its own window.
func (r *samples) spans(inflections []float64, s Settings) (out []span, whole bool) {
	switch {
	case s.WindowM > 0:
		out = r.windowsByLength(s.WindowM)
	case s.WindowWidths > 0:
		out = r.windowsByLength(s.WindowWidths * s.WidthM)
	default:
		out = r.windowsByBends(inflections, s.WindowBends)
	}
	if len(out) == 0 {
		return []span{{0, float64(r.n)}}, true
	}
	return out, false
}

// checkWindow refuses windows too short to hold a bend of samples, or so short
// that there would be too many of them.
func (r *samples) checkWindow(s Settings) error {
	w, name := s.WindowM, "window_m"
	if s.WindowWidths > 0 {
		w, name = s.WindowWidths*s.WidthM, "window_widths"
	}
	if s.WindowBends > 0 {
		return nil
	}
	least := math.Max(4*r.step, 4*r.total()/maxWindows)
	if w < least {
		return &InputError{name, fmt.Sprintf("a window of %s is too short for this line; expected at least %s (four point spacings, and at most %d windows)", km(w), km(least), maxWindows)}
	}
	return nil
}

// levels of sinuosity over a set of windows.
type sinuosities struct {
	values          []float64 // sorted, finite
	mean, p90, peak float64
	closed          int // windows whose two ends meet
}

func summarise(values []float64, closed int) sinuosities {
	v := sinuosities{values: values, closed: closed, mean: math.NaN(), p90: math.NaN(), peak: math.NaN()}
	if len(values) == 0 {
		return v
	}
	slices.Sort(values)
	sum := 0.0
	for _, x := range values {
		sum += x
	}
	v.mean = sum / float64(len(values))
	v.p90 = quantile(values, 0.9)
	v.peak = values[len(values)-1]
	return v
}

// sinuosity of each span, summarised.
func (r *samples) sinuosities(spans []span) sinuosities {
	values := make([]float64, 0, len(spans))
	closed := 0
	for _, w := range spans {
		p := ratio(r.arc(w.to)-r.arc(w.from), r.chord(w.from, w.to))
		if math.IsNaN(p) {
			closed++
			continue
		}
		values = append(values, p)
	}
	return summarise(values, closed)
}

// windows is the along-channel profile of sinuosity and valley slope.
func (r *samples) windows(spans []span, d *depths) []Window {
	out := make([]Window, len(spans))
	for i, w := range spans {
		chord := r.chord(w.from, w.to)
		out[i] = Window{FromM: r.arc(w.from), ToM: r.arc(w.to), ChordM: chord}
		out[i].Sinuosity = ratio(out[i].ToM-out[i].FromM, chord)
		drop := d.at(w.to*r.step) - d.at(w.from*r.step)
		if finite(drop) && finite(out[i].Sinuosity) {
			slope := drop / chord
			out[i].ValleySlope = &slope
		}
	}
	return out
}

// depths is the depth along the vertices where it is known.
type depths struct{ s, z []float64 }

func (t *track) depths() *depths {
	d := &depths{}
	for i, p := range t.v {
		if finite(p.Depth) {
			if d.s == nil {
				d.s, d.z = make([]float64, 0, len(t.v)-i), make([]float64, 0, len(t.v)-i)
			}
			d.s, d.z = append(d.s, t.s[i]), append(d.z, p.Depth)
		}
	}
	return d
}

// at is the depth at distance s along the vertices, NaN outside what is known.
func (d *depths) at(s float64) float64 {
	n := len(d.s)
	if n < 2 || s < d.s[0]-1e-6 || s > d.s[n-1]+1e-6 {
		return math.NaN()
	}
	i := sort.SearchFloat64s(d.s, s)
	if i == 0 {
		return d.z[0]
	}
	if i >= n {
		return d.z[n-1]
	}
	f := (s - d.s[i-1]) / (d.s[i] - d.s[i-1])
	return d.z[i-1] + f*(d.z[i]-d.z[i-1])
}

// falls is the sign of the least-squares trend of depth along the line: +1
// deepens, -1 shoals, 0 unknown or level.
func (d *depths) falls() int {
	if len(d.s) < 2 {
		return 0
	}
	var ms, mz float64
	n := float64(len(d.s))
	for i := range d.s {
		ms += d.s[i] / n
		mz += d.z[i] / n
	}
	c := 0.0
	for i := range d.s {
		c += (d.s[i] - ms) * (d.z[i] - mz)
	}
	switch {
	case c > 0:
		return 1
	case c < 0:
		return -1
	}
	return 0
}
