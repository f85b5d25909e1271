package planform

import (
	"math"
	"slices"
)

// Limits of what is read and measured.
const (
	MaxBytes    = 64 << 20
	MaxVertices = 1_000_000
	MaxLines    = 20_000 // of one file

	profilePoints = 2000
	// filePoints bounds the samples of all lines of a file together, which stay
	// in memory until the figures are drawn.
	filePoints = 4_000_000
)

// Length is the length of a line along its vertices in metres: geodesic on
// WGS84, or plane where the line has no place.
func Length(line Line) (float64, error) {
	total := 0.0
	v := line.Vertices
	if line.Plane {
		for i := 1; i < len(v); i++ {
			total += math.Hypot(v[i].Lon-v[i-1].Lon, v[i].Lat-v[i-1].Lat)
		}
		return total, nil
	}
	var p spot
	for i := range v {
		q := spotOf(v[i].Lat, v[i].Lon)
		if i > 0 {
			d := between(p, q)
			if math.IsNaN(d) {
				return math.NaN(), ErrNotConverged
			}
			total += d
		}
		p = q
	}
	return total, nil
}

// Chord is the distance between the first and the last vertex in metres.
func Chord(line Line) (float64, error) {
	v := line.Vertices
	if len(v) < 2 {
		return 0, nil
	}
	return Length(Line{Plane: line.Plane, Vertices: []Vertex{v[0], v[len(v)-1]}})
}

// Measure gives the planform of one line under the settings. The settings of
// the result are complete: measuring the same line with them gives the same
// numbers. Errors are *InputError.
//
// Lengths are geodesic. The line is resampled at equal distances and smoothed
// only to find its inflections; windows and bends are measured along the given
// vertices, or from sample to sample when Along is "resampled". The cost is
// linear in the vertices.
func Measure(line Line, s Settings) (*Measured, error) {
	if err := s.Check(); err != nil {
		return nil, err
	}
	reversed, why := direction(line, s)
	t, err := newTrack(line, reversed)
	if err != nil {
		return nil, err
	}
	s, err = s.complete(t, line.Z, reversed)
	if err != nil {
		return nil, err
	}
	m := &Measured{Name: line.Name, Vertices: len(line.Vertices), ChannelLengthM: t.length, ChordM: t.chord,
		MedianSpacingM: t.spacing, ReachSinuosity: ratio(t.length, t.chord),
		Notes: append(slices.Clone(line.Notes), why...), Warnings: []string{}}
	solid := t.solid()
	m.Ruler, m.missing = t.rulers(solid), t.missing(solid)
	m.StableSpacingM = t.stable(m.Ruler)
	r, err := t.resample(s.SpacingM, s.Along)
	if err != nil {
		return nil, err
	}
	s.SpacingM = r.step
	s.Smooth = s.smoothPoints(r)
	if err := r.checkWindow(s); err != nil {
		return nil, err
	}
	m.Settings = s
	m.shape(r, line)
	m.warn(r, line)
	return m, nil
}

// shape fills everything that rests on the samples.
func (m *Measured) shape(r *samples, line Line) {
	s, t := m.Settings, r.t
	c := r.smoothed(s.Smooth)
	inflections := r.inflections(c, s.Smooth, s.leastArc(r, s.Smooth))
	m.Bends = r.bendsOf(c, inflections)
	m.Typical = typical(m.Bends)
	m.ValleyLengthM = ValleyLengths{EndToEnd: t.chord, Inflections: r.overInflections(inflections)}
	if len(line.Axis) > 1 {
		m.ValleyLengthM.Axis = t.alongAxis(line)
	}
	spans, whole := r.spans(inflections, s)
	m.WholeReach = whole
	d := &depths{}
	if !line.HasTime {
		d = t.depths()
	}
	m.Windows = r.windows(spans, d)
	m.summarise(r, spans, inflections)
	m.slopes(t, d)
	m.profile(d)
	if n := len(d.s); n > 1 {
		m.depthShare = (d.s[n-1] - d.s[0]) / t.length
	}
	if s.WidthM > 0 {
		w := s.WidthM
		m.Width = &w
	}
	m.place(t)
	m.plan(r, c, inflections)
	m.levees(r, line)
}

// summarise fills the windowed levels and how far they move when the window
// and the filter are halved and doubled.
func (m *Measured) summarise(r *samples, spans []span, inflections []float64) {
	base := r.sinuosities(spans)
	m.MeanSinuosity, m.P90Sinuosity, m.PeakSinuosity = base.mean, base.p90, base.peak
	total := 0.0
	for _, w := range m.Windows {
		total += w.ToM - w.FromM
	}
	m.WindowLengthM = total / float64(len(m.Windows))
	if k := m.Settings.K; len(base.values) >= k {
		mean, sd := ExpectedMax(base.values, k)
		m.StandardisedPeak = &StdPeak{k, mean, sd}
	}
	all := []sinuosities{base}
	for _, f := range []float64{0.5, 2} {
		o := m.Settings
		o.WindowM, o.WindowWidths, o.WindowBends = o.WindowM*f, o.WindowWidths*f, o.WindowBends*f
		if r.checkWindow(o) == nil {
			w, _ := r.spans(inflections, o)
			all = append(all, r.sinuosities(w))
		}
		if m.Settings.WindowBends > 0 && m.Settings.Smooth > 1 {
			points := fitSmooth(int(f*float64(m.Settings.Smooth)), r.n)
			w, _ := r.spans(r.inflections(r.smoothed(points), points, m.Settings.leastArc(r, points)), m.Settings)
			all = append(all, r.sinuosities(w))
		}
	}
	m.Sensitivity = rangeOf(all, func(v sinuosities) float64 { return v.peak })
	m.SensitivityMean = rangeOf(all, func(v sinuosities) float64 { return v.mean })
	m.SensitivityP90 = rangeOf(all, func(v sinuosities) float64 { return v.p90 })
}

func rangeOf(all []sinuosities, of func(sinuosities) float64) Range {
	out := Range{math.NaN(), math.NaN()}
	for _, v := range all {
		x := of(v)
		if !(out.Low <= x) && finite(x) {
			out.Low = x
		}
		if !(out.High >= x) && finite(x) {
			out.High = x
		}
	}
	return out
}

// slopes fills valley and channel slope between the first and the last known
// depth: the drop over the chord, and over the channel, between the two.
func (m *Measured) slopes(t *track, d *depths) {
	n := len(d.s)
	if n < 2 {
		return
	}
	lat1, lon1 := t.at(d.s[0])
	lat2, lon2 := t.at(d.s[n-1])
	chord, arc := t.distance(lat1, lon1, lat2, lon2), d.s[n-1]-d.s[0]
	if !(chord > 1e-6*arc) || arc == 0 {
		return
	}
	valley, channel := (d.z[n-1]-d.z[0])/chord, (d.z[n-1]-d.z[0])/arc
	m.ValleySlope, m.ChannelSlope = &valley, &channel
}

// profile keeps the known depths for figures.
func (m *Measured) profile(d *depths) {
	step := max(1, (len(d.s)+profilePoints-1)/profilePoints)
	for i := 0; i < len(d.s); i += step {
		m.Profile = append(m.Profile, ProfilePoint{d.s[i], d.z[i]})
	}
}

func (m *Measured) place(t *track) {
	if t.plane {
		return
	}
	lat, lon := t.at(t.length / 2)
	first, last := t.v[0], t.v[len(t.v)-1]
	wrap := func(lon float64) float64 {
		if lon > 180 {
			return lon - 360
		}
		return lon
	}
	m.Place = &Place{first.Lat, wrap(first.Lon), lat, lon, last.Lat, wrap(last.Lon)}
}

// plan keeps the smoothed line for figures.
func (m *Measured) plan(r *samples, c *curve, inflections []float64) {
	m.Plan = make([]PlanPoint, r.n+1)
	for i := range m.Plan {
		m.Plan[i] = PlanPoint{c.x[i], c.y[i], r.arc(float64(i))}
	}
	for _, u := range inflections {
		m.Inflections = append(m.Inflections, int(math.Round(u)))
	}
}

// medianWidth over the vertices that have one, 0 when none has.
func (t *track) medianWidth() float64 {
	var w []float64
	for _, p := range t.v {
		if p.Width > 0 && finite(p.Width) {
			w = append(w, p.Width)
		}
	}
	if len(w) == 0 {
		return 0
	}
	slices.Sort(w)
	return quantile(w, 0.5)
}

// alongAxis is the length of the given valley axis between the places nearest
// to the two ends of the channel, m; nil when the axis cannot be measured.
func (t *track) alongAxis(line Line) *float64 {
	axis := Line{Vertices: line.Axis, Plane: line.Plane}
	if checkVertices(axis) != nil {
		return nil
	}
	a := &track{plane: line.Plane}
	a.take(axis, false)
	if len(a.v) < 2 || a.stations() != nil {
		return nil
	}
	p := a.solid()
	foot := func(v Vertex) float64 {
		q := [3]float64{v.Lon - a.v[0].Lon, v.Lat - a.v[0].Lat, 0}
		if !t.plane {
			q = solidAt(v.Lat, v.Lon)
		}
		i, f := nearest(p, q, 0, len(p)-1)
		return a.s[i] + f*(a.s[i+1]-a.s[i])
	}
	l := math.Abs(foot(t.v[len(t.v)-1]) - foot(t.v[0]))
	if l < 1e-6*t.length {
		return nil
	}
	return &l
}

// nearest is the segment of p, among those from vertex lo to vertex hi, that
// comes nearest to q, and how far along it, 0..1.
func nearest(p [][3]float64, q [3]float64, lo, hi int) (i int, f float64) {
	best := math.Inf(1)
	for k := lo; k < hi; k++ {
		g := project(p[k], p[k+1], q)
		var c [3]float64
		for j := range c {
			c[j] = p[k][j] + g*(p[k+1][j]-p[k][j])
		}
		if d := straight(c, q); d < best {
			best, i, f = d, k, g
		}
	}
	return i, f
}

// project is the share of the way from a to b at which q stands, 0..1.
func project(a, b, q [3]float64) float64 {
	var dd, dq float64
	for j := range a {
		d := b[j] - a[j]
		dd, dq = dd+d*d, dq+d*(q[j]-a[j])
	}
	if dd == 0 {
		return 0
	}
	return min(1, max(0, dq/dd))
}
