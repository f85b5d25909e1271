package planform

import (
	"fmt"
	"math"
	"strings"
)

// pairBanks puts a centreline in place of every pair of bank lines: those the
// file marks left and right with the same name, or successive lines when the
// settings say that the lines are banks.
func (c *collector) pairBanks() {
	if c.s.Lines == "banks" {
		for i := range c.lines {
			if c.lines[i].Role == "" {
				c.lines[i].Role = []string{"left_bank", "right_bank"}[i%2]
			}
		}
	}
	var out []Line
	used := make([]bool, len(c.lines))
	for i, l := range c.lines {
		if used[i] || l.Role != "left_bank" && l.Role != "right_bank" {
			if !used[i] {
				out = append(out, l)
			}
			continue
		}
		used[i] = true
		j := c.partner(i, used)
		if j < 0 {
			c.refuse(l.Name, "it is one bank and the other one is missing; give both, or mark it as a centreline")
			continue
		}
		used[j] = true
		left, right := l, c.lines[j]
		if l.Role == "right_bank" {
			left, right = right, left
		}
		centre, err := Centreline(left, right)
		if err != nil {
			c.refuse(l.Name+" and "+c.lines[j].Name, sentence(err))
			continue
		}
		out = append(out, centre)
	}
	c.lines = out
}

// partner is the other bank of line i: one with the same name once the words
// for banks are gone, else the next one of the other side.
func (c *collector) partner(i int, used []bool) int {
	next := -1
	for j := range c.lines {
		if used[j] || c.lines[j].Role == c.lines[i].Role || !strings.HasSuffix(c.lines[j].Role, "_bank") {
			continue
		}
		if bankName(c.lines[j].Name) == bankName(c.lines[i].Name) {
			return j
		}
		if next < 0 && j > i {
			next = j
		}
	}
	if next >= 0 && c.s.Lines != "banks" && len(c.lines) > 2 {
		return -1 // of several pairs only names tell which belong together
	}
	return next
}

// bankName is the name without what says that it is a bank.
func bankName(name string) string {
	s := strings.ToLower(name)
	for _, w := range []string{"left", "right", "bank", "_", "-"} {
		s = strings.ReplaceAll(s, w, " ")
	}
	return strings.Join(strings.Fields(s), " ")
}

// giveAxes hands a line marked as valley axis to the lines it can be meant
// for: all of them when there is one axis, else the one with the same name.
func (c *collector) giveAxes() {
	var axes, rest []Line
	for _, l := range c.lines {
		if l.Role == "axis" {
			axes = append(axes, l)
		} else {
			rest = append(rest, l)
		}
	}
	plain := func(name string) string {
		s := strings.ToLower(name)
		return strings.TrimSpace(strings.TrimSuffix(strings.TrimSuffix(strings.TrimSpace(s), "axis"), "valley "))
	}
	for _, a := range axes {
		given := false
		for i := range rest {
			if len(axes) == 1 || plain(a.Name) == plain(rest[i].Name) {
				rest[i].Axis = a.Vertices
				rest[i].Notes = append(rest[i].Notes, fmt.Sprintf("The line %q was taken as the valley axis.", clip(a.Name)))
				given = true
			}
		}
		if !given {
			c.refuse(a.Name, "it is a valley axis, but no channel of the same name is in the file")
		}
	}
	c.lines = rest
}

// bankPoint is a point of a densified bank, in three dimensions (the plane as
// z = 0).
type bankPoint struct {
	at    [3]float64
	depth float64
}

// Centreline makes the line midway between two banks, with the width at each
// vertex. Both banks are resampled alike and walked along together, always
// taking the step that leaves the two feet nearer to each other, which costs
// one pass. The middle of each rung is then moved to the middle between the
// points of the two banks nearest to it, until it is as far from one as from the
// other; the distance between those two points is the width. A bank drawn
// against the other is turned round.
func Centreline(left, right Line) (Line, error) {
	if left.Plane != right.Plane {
		return Line{}, &InputError{"lines", "one bank is in degrees and the other in plane metres; give both alike"}
	}
	a, err := newTrack(left, false)
	if err != nil {
		return Line{}, err
	}
	b, err := newTrack(right, false)
	if err != nil {
		return Line{}, err
	}
	first, last := 0, len(b.v)-1
	d := func(i, j int) float64 {
		return a.distance(a.v[i].Lat, a.v[i].Lon, b.v[j].Lat, b.v[j].Lon)
	}
	end := len(a.v) - 1
	turned := !(d(0, first)+d(end, last) <= d(0, last)+d(end, first))
	if turned {
		if b, err = newTrack(right, true); err != nil {
			return Line{}, err
		}
	}
	width := (d(0, first) + d(end, last)) / 2
	if !(width > 0) {
		return Line{}, &InputError{"lines", "the two banks start and end at the same points, so there is no width between them"}
	}
	// Eight steps to a width, as far as the vertices given deserve.
	n := int(math.Min(8*math.Max(a.length, b.length)/width, 16*float64(len(a.v)+len(b.v))))
	n = min(max(n, len(a.v), len(b.v), 64), MaxVertices/2)
	line := Line{Name: strings.TrimSpace(orElse(bankName(left.Name), "channel")), Plane: left.Plane, Z: left.Z,
		HasTime: left.HasTime || right.HasTime, Notes: left.Notes}
	if turned {
		line.Notes = append(line.Notes, "One bank was drawn against the other and was turned round.")
	}
	line.Vertices = zip(a.densify(n), b.densify(n), left.Plane)
	line.Notes = append(line.Notes, fmt.Sprintf("The centreline and the width were made from two bank lines (%q and %q).", clip(left.Name), clip(right.Name)))
	return line, nil
}

// densify resamples a bank into n steps.
func (t *track) densify(n int) []bankPoint {
	z := t.depths()
	out := make([]bankPoint, n+1)
	for i := range out {
		s := t.length * float64(i) / float64(n)
		lat, lon := t.at(s)
		out[i] = bankPoint{[3]float64{lon, lat, 0}, z.at(s)}
		if !t.plane {
			out[i].at = solidAt(lat, lon)
		}
	}
	return out
}

// zip walks along both banks together and returns the centreline. Vertices
// nearer to the last one than an eighth of the width are left out: on the inside
// of a bend many feet share one middle.
func zip(a, b []bankPoint, plane bool) []Vertex {
	var out []Vertex
	var kept [3]float64
	i, j := 0, 0
	for {
		v, at := middle(a, b, i, j, plane)
		done := i == len(a)-1 && j == len(b)-1
		if len(out) == 0 || done || straight(kept, at) > v.Width/8 {
			out, kept = append(out, v), at
		}
		switch {
		case done:
			return out
		case i == len(a)-1:
			j++
		case j == len(b)-1:
			i++
		case straight(a[i+1].at, b[j+1].at) <= math.Min(straight(a[i+1].at, b[j].at), straight(a[i].at, b[j+1].at)):
			i, j = i+1, j+1
		case straight(a[i+1].at, b[j].at) < straight(a[i].at, b[j+1].at):
			i++
		default:
			j++
		}
	}
}

// middle is the centreline vertex of the rung between foot i and foot j.
func middle(a, b []bankPoint, i, j int, plane bool) (Vertex, [3]float64) {
	p, q := a[i].at, b[j].at
	at := between3(p, q, 0.5)
	for range 4 {
		p, q = nearBank(at, a, i), nearBank(at, b, j)
		at = between3(p, q, 0.5)
	}
	v := Vertex{Lon: at[0], Lat: at[1], Depth: (a[i].depth + b[j].depth) / 2, Width: straight(p, q)}
	if !plane {
		const e2 = wgsF * (2 - wgsF)
		v.Lon = math.Atan2(at[1], at[0]) / degree
		v.Lat = math.Atan2(at[2], (1-e2)*math.Hypot(at[0], at[1])) / degree
	}
	return v, at
}

func between3(p, q [3]float64, f float64) (c [3]float64) {
	for k := range c {
		c[k] = p[k] + f*(q[k]-p[k])
	}
	return c
}

// nearBank is the point of a bank nearest to c, near the foot of the rung.
func nearBank(c [3]float64, bank []bankPoint, foot int) (near [3]float64) {
	best := math.Inf(1)
	for k := max(0, foot-16); k < min(len(bank)-1, foot+16); k++ {
		p := between3(bank[k].at, bank[k+1].at, project(bank[k].at, bank[k+1].at, c))
		if d := straight(p, c); d < best {
			best, near = d, p
		}
	}
	return near
}
