package views

import (
	"fmt"
	"math"
	"strconv"

	"fathombend/catalogue/planform"
)

// Most that is drawn of a plan: past it an inch of paper holds no more.
const (
	planPoints     = 4000
	planBends      = 1500 // more are drawn as a plain line
	planMarks      = 300  // inflections marked
	roomForNumber  = 20   // page units between the inflections of a numbered bend
	profileWindows = 3000
)

// trace collects several pieces of line into one, with gaps between them.
type trace struct{ x, y []float64 }

func (t *trace) piece(plan []planform.PlanPoint, from, to, stride int) {
	if len(t.x) > 0 {
		t.x, t.y = append(t.x, math.NaN()), append(t.y, math.NaN())
	}
	for i := from; ; i += stride {
		i = min(i, to)
		t.x, t.y = append(t.x, plan[i].X/1e3), append(t.y, plan[i].Y/1e3)
		if i == to {
			return
		}
	}
}

func (t *trace) line(class string) Line { return Line{X: t.x, Y: t.y, Class: class} }

// MeasuredPlan is the plan view of a measured line, in km about its middle:
// bends by the side they turn to, inflections, scale bar and north.
func MeasuredPlan(m *planform.Measured) Plot {
	p := Plot{ID: "plan", Title: "Plan view of " + m.Name, Equal: true, NoFrame: true,
		Desc: fmt.Sprintf("%d bends: those that turn left are drawn solid, those that turn right dashed, looking downstream. North is up.", len(m.Bends))}
	n := len(m.Plan)
	if n < 2 {
		return p
	}
	stride := max(1, n/planPoints)
	if len(m.Bends) == 0 || len(m.Bends) > planBends {
		var all trace
		all.piece(m.Plan, 0, n-1, stride)
		p.Lines = append(p.Lines, all.line(""))
	} else {
		p.planBends(m, stride)
	}
	p.planEnds(m)
	p.numberBends(m, p.frame(m.Place != nil))
	return p
}

func (p *Plot) planBends(m *planform.Measured, stride int) {
	var left, right, ends trace
	first, last := m.Inflections[0], m.Inflections[len(m.Inflections)-1]
	ends.piece(m.Plan, 0, first, stride)
	ends.piece(m.Plan, last, len(m.Plan)-1, stride)
	for i, b := range m.Bends {
		to := &right
		if b.Side == "left" {
			to = &left
		}
		to.piece(m.Plan, m.Inflections[i], m.Inflections[i+1], stride)
		p.bendMark(m, i)
	}
	p.Lines = append(p.Lines, ends.line("l3 dot-dash"), left.line(""), right.line("l2 dash"))
	if len(m.Inflections) <= planMarks {
		for _, i := range m.Inflections {
			q := m.Plan[i]
			p.Points = append(p.Points, Point{X: q.X / 1e3, Y: q.Y / 1e3, Size: 3, Class: "hollow",
				Title: "Inflection, " + lengthText(q.S) + " along"})
		}
	}
}

// bendMark gives the values of a bend on hover.
func (p *Plot) bendMark(m *planform.Measured, i int) {
	if len(m.Bends) > planMarks {
		return
	}
	b := m.Bends[i]
	q := m.Plan[(m.Inflections[i]+m.Inflections[i+1])/2]
	title := fmt.Sprintf("Bend %d, turns %s, sinuosity %s, arc %s, radius %s", i+1, b.Side, sinuosityText(b.Sinuosity), lengthText(b.ArcM), lengthText(b.RadiusM))
	p.Points = append(p.Points, Point{X: q.X / 1e3, Y: q.Y / 1e3, Size: 2, Class: "soft", Title: title})
}

// numberBends letters the bends outside their apices where there is room:
// perUnit page units to a km.
func (p *Plot) numberBends(m *planform.Measured, perUnit float64) {
	if m.Typical == nil || len(m.Bends) > planMarks || m.Typical.WavelengthM/2e3*perUnit < roomForNumber {
		return
	}
	for i := range m.Bends {
		a, z := m.Plan[m.Inflections[i]], m.Plan[m.Inflections[i+1]]
		q := m.Plan[(m.Inflections[i]+m.Inflections[i+1])/2]
		// Outside the bend: away from the middle of its chord.
		dx, dy := q.X-(a.X+z.X)/2, q.Y-(a.Y+z.Y)/2
		if d := math.Hypot(dx, dy); d > 0 {
			off := 14 / perUnit
			p.Texts = append(p.Texts, Text{X: q.X/1e3 + dx/d*off, Y: q.Y/1e3 + dy/d*off - 5/perUnit, Text: fmt.Sprint(i + 1), Anchor: "middle"})
		}
	}
}

// planEnds mark where the line starts and ends.
func (p *Plot) planEnds(m *planform.Measured) {
	a, z := m.Plan[0], m.Plan[len(m.Plan)-1]
	p.Points = append(p.Points,
		Point{X: a.X / 1e3, Y: a.Y / 1e3, Shape: "circle", Size: 6, Title: "Upstream end"},
		Point{X: z.X / 1e3, Y: z.Y / 1e3, Shape: "square", Size: 6, Title: "Downstream end"})
}

// frame adds scale bar and north, sets the height of the drawing, and returns
// its scale in page units to a km.
func (p *Plot) frame(north bool) (perUnit float64) {
	x, y := p.extent()
	w, h := x.hi-x.lo, y.hi-y.lo
	side := math.Max(w, h)
	p.Width = 960
	p.Height = math.Min(720, math.Max(300, 900*h/math.Max(w, side/20)+110))
	// The taller drawing sets the scale; the bar is about a fifth of the width.
	perUnit = math.Min(900/math.Max(w, 1e-12), (p.Height-110)/math.Max(h, 1e-12))
	bar := niceStep(180 / perUnit / 2.5)
	foot := y.lo - 42/perUnit
	tick := 5 / perUnit
	p.Lines = append(p.Lines, Line{Class: "l3", X: []float64{x.lo, x.lo, x.lo, x.lo + bar, x.lo + bar, x.lo + bar}, Y: []float64{foot + tick, foot - tick, foot, foot, foot + tick, foot - tick}})
	p.Texts = append(p.Texts, Text{X: x.lo + bar + 8/perUnit, Y: foot - 5/perUnit, Text: barText(bar)})
	if !north {
		return perUnit
	}
	at, top := x.hi-14/perUnit, y.hi+34/perUnit
	p.Lines = append(p.Lines, Line{Class: "l3", X: []float64{at, at, math.NaN(), at - tick, at, at + tick}, Y: []float64{top - 30/perUnit, top, math.NaN(), top - 2*tick, top, top - 2*tick}})
	p.Texts = append(p.Texts, Text{X: at - 9/perUnit, Y: top - 20/perUnit, Text: "N", Anchor: "end"})
	return perUnit
}

// barText is the length of a scale bar of km kilometres.
func barText(km float64) string {
	if km >= 1 {
		return strconv.FormatFloat(km, 'g', 4, 64) + " km"
	}
	return strconv.FormatFloat(km*1e3, 'g', 4, 64) + " m"
}

// MeasuredProfile are the profiles against distance along the channel: the
// sinuosity of windows and bends, then slope and depth where depths are known.
func MeasuredProfile(m *planform.Measured) []Plot {
	x := Axis{Label: "Distance along the channel (km)", Min: 0, Max: m.ChannelLengthM / 1e3}
	sin := Plot{ID: "sinuosity-profile", Title: "Sinuosity along the channel", X: x, Y: Axis{Label: "Sinuosity"},
		Desc:  "The sinuosity of each window at its middle as a line, of each bend as an open mark.",
		Width: 460, Height: 320}
	var line, slope Line
	stride := max(1, len(m.Windows)/profileWindows)
	for i := 0; i < len(m.Windows); i += stride {
		w := m.Windows[i]
		mid := (w.FromM + w.ToM) / 2e3
		line.X, line.Y = append(line.X, mid), append(line.Y, w.Sinuosity)
		if w.ValleySlope != nil {
			slope.X, slope.Y = append(slope.X, mid), append(slope.Y, *w.ValleySlope)
		}
	}
	if len(line.X) == 1 { // one window: its extent
		w := m.Windows[0]
		line = Line{X: []float64{w.FromM / 1e3, w.ToM / 1e3}, Y: []float64{w.Sinuosity, w.Sinuosity}}
		if w.ValleySlope != nil {
			slope = Line{X: line.X, Y: []float64{*w.ValleySlope, *w.ValleySlope}}
		}
	}
	sin.Lines = []Line{line}
	if len(m.Bends) <= planBends {
		for i, b := range m.Bends {
			sin.Points = append(sin.Points, Point{X: (b.FromM + b.ToM) / 2e3, Y: b.Sinuosity, Size: 3.5, Class: "hollow",
				Title: fmt.Sprintf("Bend %d, sinuosity %s", i+1, sinuosityText(b.Sinuosity))})
		}
	}
	sin.Y.Min, sin.Y.Max = sinuosityRange(sin)
	out := []Plot{sin}
	if len(slope.X) > 0 {
		out = append(out, Plot{ID: "slope-profile", Title: "Valley slope along the channel", X: x, Y: Axis{Label: "Valley slope (m/m)"},
			Desc: "The drop over the chord of each window, at its middle.", Lines: []Line{slope}, Width: 460, Height: 320})
	}
	if len(out) == 1 && len(m.Profile) < 2 { // alone it has the whole width
		out[0].Width, out[0].Height = 960, 320
		return out
	}
	if len(m.Profile) > 1 {
		var d Line
		for _, q := range m.Profile {
			d.X, d.Y = append(d.X, q.S/1e3), append(d.Y, q.Depth)
		}
		out = append(out, Plot{ID: "depth-profile", Title: "Depth along the channel", X: x, Y: Axis{Label: "Depth (m)", Reverse: true},
			Desc: "The depth of the given vertices.", Lines: []Line{d}, Width: 460, Height: 320})
	}
	return out
}

// sinuosityRange keeps a nearly constant profile from looking rough: the axis
// spans a tenth at least.
func sinuosityRange(p Plot) (lo, hi float64) {
	const least = 0.1
	_, y := p.extent()
	if !y.ok || y.hi-y.lo >= least {
		return 0, 0
	}
	mid := (y.lo + y.hi) / 2
	lo = math.Max(1, mid-least/2)
	return lo, lo + least
}

// MeasuredRuler is length against ruler length, as sinuosity.
func MeasuredRuler(m *planform.Measured) Plot {
	p := Plot{ID: "ruler", Title: "Sinuosity read with longer and longer rulers", X: Axis{Label: "Ruler (m)", Log: true}, Y: Axis{Label: "Sinuosity"},
		Desc:  "The length of the line walked with dividers of each opening, over its end-to-end length.",
		Width: 720, Height: 340, Empty: "The line is too short for rulers longer than its vertex spacing."}
	var l Line
	for _, r := range m.Ruler {
		l.X, l.Y = append(l.X, r.RulerM), append(l.Y, r.Sinuosity)
		p.Points = append(p.Points, Point{X: r.RulerM, Y: r.Sinuosity, Size: 3.5,
			Title: "Ruler " + lengthText(r.RulerM) + ", sinuosity " + sinuosityText(r.Sinuosity)})
	}
	p.Lines = []Line{l}
	if len(m.Ruler) > 0 {
		p.Rules = append(p.Rules, Rule{At: m.ReachSinuosity, Class: "dash"})
	}
	if s := m.StableSpacingM; s != nil {
		p.Rules = append(p.Rules, Rule{At: *s, Vertical: true, Label: "within 1 % up to " + lengthText(*s), Class: "dot-dash"})
	}
	return p
}

// MovementPlan is two levels of one channel with the move of each matched apex.
func MovementPlan(i int, m planform.Movement) Plot {
	p := Plot{ID: fmt.Sprintf("movement-%d", i+1), Title: m.Older + " and " + m.Younger, Equal: true, NoFrame: true,
		Desc: "The older level is dashed, the younger solid; a thin line joins the apices of each matched bend, from the open to the filled mark. " + m.Text}
	var old, young, moves trace
	if len(m.OlderPlan) > 1 {
		old.piece(m.OlderPlan, 0, len(m.OlderPlan)-1, max(1, len(m.OlderPlan)/planPoints))
	}
	if len(m.YoungerPlan) > 1 {
		young.piece(m.YoungerPlan, 0, len(m.YoungerPlan)-1, max(1, len(m.YoungerPlan)/planPoints))
	}
	for k, b := range m.Bends {
		if k >= planMarks {
			break
		}
		moves.piece([]planform.PlanPoint{b.From, b.To}, 0, 1, 1)
		title := fmt.Sprintf("Bend %d, swing %s, sweep %s", b.Bend, lengthText(b.SwingM), lengthText(b.SweepM))
		p.Points = append(p.Points,
			Point{X: b.From.X / 1e3, Y: b.From.Y / 1e3, Size: 3, Class: "ochre hollow", Title: title},
			Point{X: b.To.X / 1e3, Y: b.To.Y / 1e3, Size: 3, Title: title})
	}
	p.Lines = []Line{old.line("l2 dash"), young.line(""), moves.line("l3")}
	p.frame(m.Placed)
	return p
}
