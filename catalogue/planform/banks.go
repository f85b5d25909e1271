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

// bankPoint is a point of a densified bank.
type bankPoint struct {
	at       [3]float64
	lat, lon float64
	depth    float64
}

// Centreline makes the line midway between two banks, with the width across at
// each vertex. Both banks are resampled alike and walked along together, always
// taking the step that leaves the two feet nearer to each other, which costs
// one pass; the middles of these rungs are the centreline, and the width at one
// is the distance from each foot to the nearest point of the opposite bank,
// averaged. A bank drawn against the other is turned round.
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
	turned := false
	ends := func(t *track) (Vertex, Vertex) { return t.v[0], t.v[len(t.v)-1] }
	a0, a1 := ends(a)
	b0, b1 := ends(b)
	d := func(p, q Vertex) float64 { return a.distance(p.Lat, p.Lon, q.Lat, q.Lon) }
	if !(d(a0, b0)+d(a1, b1) <= d(a0, b1)+d(a1, b0)) {
		turned = true
		if b, err = newTrack(right, true); err != nil {
			return Line{}, err
		}
		b0, b1 = ends(b)
	}
	width := (d(a0, b0) + d(a1, b1)) / 2
	if !(width > 0) {
		return Line{}, &InputError{"lines", "the two banks start and end at the same points, so there is no width between them"}
	}
	n := int(math.Round(math.Max(a.length, b.length) / math.Max(width/8, (a.length+b.length)/float64(MaxVertices))))
	n = min(max(n, len(a.v), len(b.v), 64), MaxVertices/2)
	pa, pb := a.densify(n), b.densify(n)
	line := Line{Name: strings.TrimSpace(orElse(bankName(left.Name), "channel")), Plane: left.Plane, Z: left.Z,
		HasTime: left.HasTime || right.HasTime, Notes: left.Notes}
	if turned {
		line.Notes = append(line.Notes, "One bank was drawn against the other and was turned round.")
	}
	line.Vertices = zip(pa, pb, a)
	line.Notes = append(line.Notes, fmt.Sprintf("The centreline and the width were made from two bank lines (%q and %q).", clip(left.Name), clip(right.Name)))
	return line, nil
}

// densify resamples a bank into n steps.
func (t *track) densify(n int) []bankPoint {
	z := t.depths()
	out := make([]bankPoint, n+1)
	for i := range out {
		s := t.length * float64(i) / float64(n)
		p := &out[i]
		p.lat, p.lon = t.at(s)
		p.depth = z.at(s)
		if t.plane {
			p.at = [3]float64{p.lon, p.lat, 0}
		} else {
			p.at = solidAt(p.lat, p.lon)
		}
	}
	return out
}

// zip walks along both banks together and returns the middles of the rungs.
func zip(a, b []bankPoint, t *track) []Vertex {
	out := make([]Vertex, 0, len(a)+len(b))
	i, j := 0, 0
	for {
		out = append(out, middle(a, b, i, j, t))
		switch {
		case i == len(a)-1 && j == len(b)-1:
			return thin(out)
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

// thin takes off middles that stand where the last one stood.
func thin(v []Vertex) []Vertex {
	out := v[:1]
	for _, p := range v[1:] {
		if q := out[len(out)-1]; p.Lat != q.Lat || p.Lon != q.Lon {
			out = append(out, p)
		}
	}
	return out
}

// middle is the centreline vertex of the rung between foot i and foot j.
func middle(a, b []bankPoint, i, j int, t *track) Vertex {
	p, q := a[i], b[j]
	v := Vertex{Depth: (p.depth + q.depth) / 2}
	if t.plane {
		v.Lat, v.Lon = (p.lat+q.lat)/2, (p.lon+q.lon)/2
	} else {
		v.Lat, v.Lon = along(p.lat, p.lon, q.lat, q.lon, 0.5)
	}
	v.Width = (toBank(p.at, b, j) + toBank(q.at, a, i)) / 2
	return v
}

// toBank is the distance from a foot to the nearest point of the other bank
// near the rung.
func toBank(p [3]float64, bank []bankPoint, at int) float64 {
	best := math.Inf(1)
	for k := max(0, at-16); k < min(len(bank)-1, at+16); k++ {
		f := project(bank[k].at, bank[k+1].at, p)
		var c [3]float64
		for m := range c {
			c[m] = bank[k].at[m] + f*(bank[k+1].at[m]-bank[k].at[m])
		}
		best = math.Min(best, straight(p, c))
	}
	return best
}
