package views

import (
	"fmt"
	"math"

	"fathombend/catalogue/planform"
)

// planPlot is the line on a plane of local kilometres, with its inflections.
func planPlot(i int, name string, m *planform.Measured) Plot {
	p := Plot{
		ID: fmt.Sprintf("plan-%d", i), Title: "Plan view of " + name, Equal: true, Width: 720, Height: 380,
		Desc:  "The measured line in local kilometres, upstream at the ringed end.",
		X:     Axis{Label: "East (km)"},
		Y:     Axis{Label: "North (km)"},
		Empty: "The line has no points to draw.",
	}
	l := Line{}
	for _, v := range thin(m.Plan, 1500) {
		l.X, l.Y = append(l.X, v.X/1000), append(l.Y, v.Y/1000)
	}
	p.Lines = []Line{l}
	// As tall as the line asks for, so that a line from north to south is not
	// drawn as a hair.
	if x, y := p.extent(); x.ok && x.hi > x.lo {
		p.Height = min(max(p.Width*(y.hi-y.lo)/(x.hi-x.lo), 280), 620)
	}
	if len(m.Plan) > 0 {
		p.Points = append(p.Points, Point{X: m.Plan[0].X / 1000, Y: m.Plan[0].Y / 1000, Class: "hollow", Size: 7, Title: "upstream end"})
	}
	if len(m.Inflections) <= mostMarks {
		for _, k := range m.Inflections {
			if k >= 0 && k < len(m.Plan) {
				p.Points = append(p.Points, Point{X: m.Plan[k].X / 1000, Y: m.Plan[k].Y / 1000, Size: 2.2, Class: "ochre"})
			}
		}
	}
	return p
}

// mostMarks: more marks than this hide the line they stand on.
const mostMarks = 60

// thin keeps at most about n points, and the last.
func thin(pts []planform.PlanPoint, n int) []planform.PlanPoint {
	if len(pts) <= n {
		return pts
	}
	step := float64(len(pts)-1) / float64(n-1)
	out := make([]planform.PlanPoint, 0, n)
	for i := range n {
		out = append(out, pts[int(math.Round(float64(i)*step))])
	}
	return out
}

// profilePlots are sinuosity by windows and depth against the distance along
// the channel.
func profilePlots(i int, name string, m *planform.Measured) []Plot {
	sin := Plot{
		ID: fmt.Sprintf("windows-%d", i), Title: "Sinuosity along " + name, Width: 430, Height: 300,
		Desc:  fmt.Sprintf("Sinuosity of each of %d windows against distance along the channel.", len(m.Windows)),
		X:     Axis{Label: "Distance along the channel (km)", Zero: true},
		Y:     Axis{Label: "Sinuosity of the window"},
		Empty: "The line is shorter than one window.",
	}
	line := Line{}
	for _, w := range m.Windows {
		mid := (w.FromM + w.ToM) / 2000
		line.X, line.Y = append(line.X, mid), append(line.Y, w.Sinuosity)
		if len(m.Windows) > mostMarks {
			continue
		}
		sin.Points = append(sin.Points, Point{X: mid, Y: w.Sinuosity, Size: 2.6,
			Title: fmt.Sprintf("window from %.1f to %.1f km: sinuosity %s", w.FromM/1000, w.ToM/1000, num2Fixed(w.Sinuosity))})
	}
	sin.Lines = []Line{line}
	out := []Plot{sin}
	depth := Line{}
	for _, q := range m.Profile {
		depth.X, depth.Y = append(depth.X, q.S/1000), append(depth.Y, q.Depth)
	}
	if len(depth.X) > 1 {
		out = append(out, Plot{
			ID: fmt.Sprintf("depth-%d", i), Title: "Depth along " + name, Width: 430, Height: 300,
			Desc:  "Depth below sea level against distance along the channel, deeper downwards.",
			X:     Axis{Label: "Distance along the channel (km)", Zero: true},
			Y:     Axis{Label: "Depth (m)", Reverse: true},
			Lines: []Line{depth},
		})
	}
	return out
}

// fitPlot is the system among all submarine systems.
func (p SystemPage) fitPlot() Plot {
	out := Plot{
		ID: "fit", Title: "Sinuosity against the Coriolis parameter, with this system marked", Width: 720, Height: 400,
		Desc: "Every submarine measurement, the straight line fitted on them with its interval, and the measurements of this system as filled diamonds.",
		X:    Axis{Label: "|f| (10⁻⁴ s⁻¹)", Zero: true},
		Y:    Axis{Label: "Sinuosity"},
	}
	var x, y, lo, hi []float64
	for _, c := range p.Fit.Curve {
		x, y, lo, hi = append(x, c.X), append(y, c.Y), append(lo, c.Low), append(hi, c.High)
	}
	out.Bands = []Band{{X: x, Low: lo, High: hi}}
	out.Lines = []Line{{X: x, Y: y}}
	var mine []Point
	for _, u := range p.Used {
		if !u.Kept {
			continue
		}
		q := Point{X: u.PredictorOf["coriolis"], Y: u.Response, Size: 3.2, Class: "soft",
			Title: u.SystemName + ", sinuosity " + num2Fixed(u.Response), Href: "/systems/" + u.System}
		if u.System == p.Detail.Slug {
			q.Size, q.Class, q.Shape = 7, "ochre", "diamond"
			mine = append(mine, q)
			continue
		}
		out.Points = append(out.Points, q)
	}
	if len(mine) == 0 && p.Item.Kind != "submarine" {
		return out
	}
	out.Points = append(out.Points, mine...)
	return out
}
