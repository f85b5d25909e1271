package planform

import "math"

// Movement is how the bends of one channel moved between two levels, the older
// first.
type Movement struct {
	Older     string  `json:"older"`
	Younger   string  `json:"younger"`
	Bends     []Moved `json:"bends"`
	Unmatched int     `json:"unmatched"` // bends of the older level without a partner
	MeanSwing float64 `json:"mean_swing_m"`
	MeanSweep float64 `json:"mean_sweep_m"`
	Text      string  `json:"text"`

	// Plans of both levels in one local frame, for figures.
	OlderPlan, YoungerPlan []PlanPoint `json:"-"`
	// Placed says that the frame has a north.
	Placed bool `json:"-"`
}

// Moved is one bend at both levels. Swing is the move of its apex across the
// valley, positive outwards (the bend grew); sweep along it, positive
// down-valley; m.
type Moved struct {
	Bend        int     `json:"bend"`         // of the older level, from 1 upstream
	YoungerBend int     `json:"younger_bend"` // of the younger level
	Side        string  `json:"side"`
	ValleyM     float64 `json:"valley_m"` // place along the valley axis of the older level
	SwingM      float64 `json:"swing_m"`
	SweepM      float64 `json:"sweep_m"`

	From, To PlanPoint `json:"-"` // the two apices in the common frame
}

// CompareLevels matches the bends of two centrelines of one channel at two
// levels by their place along the valley and resolves how each apex moved. The
// valley axis is the line over the older level's inflections; the axis at a
// bend runs from one inflection before it to one after it. A bend is matched
// with the nearest one that turns to the same side, when each is the other's
// nearest and they are less than half a wavelength apart along the valley.
func CompareLevels(older, younger Line, s Settings) (*Movement, error) {
	if older.Plane != younger.Plane {
		return nil, &InputError{"lines", "one level is in degrees and the other in plane metres; give both alike"}
	}
	a, err := levelOf(older, s)
	if err != nil {
		return nil, err
	}
	b, err := levelOf(younger, s)
	if err != nil {
		return nil, err
	}
	m := &Movement{Older: older.Name, Younger: younger.Name, Bends: []Moved{}, OlderPlan: a.m.Plan, YoungerPlan: b.m.Plan, Placed: !older.Plane}
	if err := b.into(a); err != nil {
		return nil, err
	}
	if len(a.m.Bends) == 0 || len(b.m.Bends) == 0 {
		return nil, &InputError{"lines", "one of the levels shows no complete bend, so there is nothing to match"}
	}
	va, vb := a.valleyPlaces(a), b.valleyPlaces(a)
	ab, ba := nearestPlaces(a, va, b, vb), nearestPlaces(b, vb, a, va)
	for i, j := range ab {
		if j < 0 || ba[j] != i || math.Abs(va[i]-vb[j]) > a.m.Bends[i].WavelengthM/2 {
			m.Unmatched++
			continue
		}
		m.Bends = append(m.Bends, a.moved(i, va[i], b, j))
	}
	m.summarise()
	return m, nil
}

// level is one measured centreline with its shape.
type level struct {
	m          *Measured
	t          *track
	inflection []PlanPoint // start, inflections, end
	apex       []PlanPoint
}

func levelOf(line Line, s Settings) (*level, error) {
	m, err := Measure(line, s)
	if err != nil {
		return nil, err
	}
	t, err := newTrack(line, m.Settings.Direction == "reversed")
	if err != nil {
		return nil, err
	}
	l := &level{m: m, t: t}
	l.inflection = append(l.inflection, m.Plan[0])
	for _, i := range m.Inflections {
		l.inflection = append(l.inflection, m.Plan[i])
	}
	l.inflection = append(l.inflection, m.Plan[len(m.Plan)-1])
	for _, b := range m.Bends {
		i := min(int(b.apex), len(m.Plan)-2)
		f := b.apex - float64(i)
		p, q := m.Plan[i], m.Plan[i+1]
		l.apex = append(l.apex, PlanPoint{p.X + f*(q.X-p.X), p.Y + f*(q.Y-p.Y), p.S + f*(q.S-p.S)})
	}
	return l, nil
}

// into moves the shape of l into the frame of a: both frames are metres about
// the middle of their own line, so the shift and the turn between them follow
// from where l's ends and middle fall in a's frame. Over one reach the two
// projections differ by far less than a pixel of any survey.
func (l *level) into(a *level) error {
	latA, lonA := a.t.at(a.t.length / 2)
	place := func(lat, lon float64) (x, y float64, ok bool) { return lon - lonA, lat - latA, true }
	if !a.t.plane {
		place = newProjection(latA, lonA).project
	}
	latM, lonM := l.t.at(l.t.length / 2)
	x0, y0, ok := place(latM, lonM)
	if !ok {
		return &InputError{"lines", "the two levels lie on opposite sides of the globe"}
	}
	n := len(l.t.v) - 1
	// Turn: the direction from the first to the last vertex in both frames.
	x1, y1, ok1 := place(l.t.v[0].Lat, l.t.v[0].Lon)
	x2, y2, ok2 := place(l.t.v[n].Lat, l.t.v[n].Lon)
	if !ok1 || !ok2 {
		return &InputError{"lines", "the two levels lie on opposite sides of the globe"}
	}
	turn := math.Atan2(y2-y1, x2-x1) - math.Atan2(l.t.y[n]-l.t.y[0], l.t.x[n]-l.t.x[0])
	sin, cos := math.Sincos(turn)
	move := func(p []PlanPoint) {
		for i := range p {
			p[i].X, p[i].Y = x0+p[i].X*cos-p[i].Y*sin, y0+p[i].X*sin+p[i].Y*cos
		}
	}
	move(l.m.Plan)
	move(l.inflection)
	move(l.apex)
	return nil
}

// valleyPlaces is the distance of each apex along the axis of level a, m.
func (l *level) valleyPlaces(a *level) []float64 {
	axis := make([][3]float64, len(a.inflection))
	along := make([]float64, len(axis))
	for i, p := range a.inflection {
		axis[i] = [3]float64{p.X, p.Y, 0}
		if i > 0 {
			along[i] = along[i-1] + straight(axis[i-1], axis[i])
		}
	}
	out := make([]float64, len(l.apex))
	hint := 0
	for k, p := range l.apex {
		// Bends come in order along the valley: look near the last one only,
		// so that the cost stays linear.
		lo := max(0, hint-8)
		hi := min(len(axis)-1, hint+64)
		if k == 0 {
			hi = len(axis) - 1
		}
		i, f := nearest(axis, [3]float64{p.X, p.Y, 0}, lo, hi)
		out[k] = along[i] + f*(along[i+1]-along[i])
		hint = i
	}
	return out
}

// nearestPlaces is, for each bend of a, the bend of b on the same side that is
// nearest along the valley, -1 when there is none.
func nearestPlaces(a *level, va []float64, b *level, vb []float64) []int {
	out := make([]int, len(va))
	hint := 0
	for i := range va {
		for hint < len(vb)-1 && vb[hint] < va[i] {
			hint++
		}
		best, at := math.Inf(1), -1
		for j := max(0, hint-8); j < min(len(vb), hint+9); j++ {
			if d := math.Abs(va[i] - vb[j]); d < best && a.m.Bends[i].Side == b.m.Bends[j].Side {
				best, at = d, j
			}
		}
		out[i] = at
	}
	return out
}

// moved resolves the move of the apex of bend i of the older level to that of
// bend j of the younger.
func (l *level) moved(i int, place float64, b *level, j int) Moved {
	// inflection[i+1] and [i+2] bound bend i; one further on either side, but
	// not to the ends of the line, which lie anywhere across the belt.
	last := len(l.inflection) - 2
	p, q := l.inflection[max(i, 1)], l.inflection[min(i+3, last)]
	dx, dy := q.X-p.X, q.Y-p.Y
	d := math.Hypot(dx, dy)
	dx, dy = dx/d, dy/d
	from, to := l.apex[i], b.apex[j]
	mx, my := to.X-from.X, to.Y-from.Y
	side := l.m.Bends[i].Side
	swing := dx*my - dy*mx // left of the axis
	if side == "left" {    // a left-turning bend bulges to the right
		swing = -swing
	}
	return Moved{Bend: i + 1, YoungerBend: j + 1, Side: side, ValleyM: place, SwingM: swing, SweepM: dx*mx + dy*my, From: from, To: to}
}

func (m *Movement) summarise() {
	n := float64(len(m.Bends))
	if n == 0 {
		m.Text = "No bend could be matched between the two levels: they are more than half a wavelength apart along the valley, or turn to different sides."
		return
	}
	for _, b := range m.Bends {
		m.MeanSwing += b.SwingM / n
		m.MeanSweep += b.SweepM / n
	}
	grew, swept := "outwards", "down-valley"
	if m.MeanSwing < 0 {
		grew = "inwards"
	}
	if m.MeanSweep < 0 {
		swept = "up-valley"
	}
	m.Text = count(len(m.Bends), "bend", "bends") + " matched: on average the apex moved " + km(math.Abs(m.MeanSwing)) + " " + grew + " (swing) and " + km(math.Abs(m.MeanSweep)) + " " + swept + " (sweep)."
}
