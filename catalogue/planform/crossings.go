package planform

import "math"

// crossesAt looks for the first place where the line crosses or touches
// itself, as a distance along it; not found gives NaN. Segments are sorted into
// the cells of a square grid they pass through and compared within each cell,
// so the cost is linear for a line that does not fill the plane; a line that
// does is given up on after a fixed number of comparisons a segment, and full
// is then false.
func (t *track) crossesAt() (s float64, full bool) {
	n := len(t.x) - 1
	g := t.grid()
	heads, next, seg, keys := g.fill(t)
	budget := 100 * n
	best := math.NaN()
	for b := range heads {
		for i := heads[b]; i >= 0; i = next[i] {
			for j := next[i]; j >= 0; j = next[j] {
				if keys[i] != keys[j] {
					continue
				}
				budget--
				if budget < 0 {
					return best, false
				}
				if at, ok := t.meets(int(seg[i]), int(seg[j]), n); ok && !(at >= best) {
					best = at
				}
			}
		}
	}
	return best, true
}

// grid of square cells over the local frame.
type grid struct{ cell, x0, y0 float64 }

func (t *track) grid() grid {
	g := grid{x0: math.Inf(1), y0: math.Inf(1)}
	for i := range t.x {
		g.x0, g.y0 = math.Min(g.x0, t.x[i]), math.Min(g.y0, t.y[i])
	}
	g.cell = t.length / float64(len(t.x)-1)
	return g
}

// fill chains the segments by a hash of the cells they pass through.
func (g grid) fill(t *track) (heads, next, seg []int32, keys []uint64) {
	n := len(t.x) - 1
	size := 1
	for size < 2*n {
		size *= 2
	}
	heads = make([]int32, size)
	for i := range heads {
		heads[i] = -1
	}
	next, seg, keys = make([]int32, 0, 3*n), make([]int32, 0, 3*n), make([]uint64, 0, 3*n)
	for i := range n {
		g.cells(t.x[i], t.y[i], t.x[i+1], t.y[i+1], func(ix, iy uint64) {
			key := ix<<32 | iy
			b := (key * 0x9e3779b97f4a7c15) >> 32 & uint64(size-1)
			next, seg, keys = append(next, heads[b]), append(seg, int32(i)), append(keys, key)
			heads[b] = int32(len(next) - 1)
		})
	}
	return heads, next, seg, keys
}

// cells visits every cell a segment passes through: column by column, the
// cells between the heights at which it enters and leaves.
func (g grid) cells(xa, ya, xb, yb float64, visit func(ix, iy uint64)) {
	if xa > xb {
		xa, ya, xb, yb = xb, yb, xa, ya
	}
	first, last := math.Floor((xa-g.x0)/g.cell), math.Floor((xb-g.x0)/g.cell)
	for c := first; c <= last; c++ {
		lo, hi := ya, yb
		if xb > xa {
			slope := (yb - ya) / (xb - xa)
			if c > first {
				lo = ya + (g.x0+c*g.cell-xa)*slope
			}
			if c < last {
				hi = ya + (g.x0+(c+1)*g.cell-xa)*slope
			}
		}
		if lo > hi {
			lo, hi = hi, lo
		}
		from, to := math.Floor((lo-g.y0)/g.cell), math.Floor((hi-g.y0)/g.cell)
		for r := math.Max(from, 0); r <= to; r++ {
			visit(uint64(c), uint64(r))
		}
	}
}

// meets says whether segments i and j, not neighbours, share a point, and where
// along the line the later one is.
func (t *track) meets(i, j, n int) (s float64, ok bool) {
	if i > j {
		i, j = j, i
	}
	if j-i < 2 {
		return 0, false
	}
	ax, ay, bx, by := t.x[i], t.y[i], t.x[i+1], t.y[i+1]
	cx, cy, dx, dy := t.x[j], t.y[j], t.x[j+1], t.y[j+1]
	o1, o2 := side(ax, ay, bx, by, cx, cy), side(ax, ay, bx, by, dx, dy)
	o3, o4 := side(cx, cy, dx, dy, ax, ay), side(cx, cy, dx, dy, bx, by)
	if o1*o2 < 0 && o3*o4 < 0 {
		return t.s[j], true
	}
	within := func(o, px, py, qx, qy, x, y float64) bool {
		return o == 0 && x >= math.Min(px, qx) && x <= math.Max(px, qx) && y >= math.Min(py, qy) && y <= math.Max(py, qy)
	}
	touch := within(o1, ax, ay, bx, by, cx, cy) || within(o2, ax, ay, bx, by, dx, dy) ||
		within(o3, cx, cy, dx, dy, ax, ay) || within(o4, cx, cy, dx, dy, bx, by)
	return t.s[j], touch
}

// side is the sign of the turn a, b, p.
func side(ax, ay, bx, by, px, py float64) float64 {
	v := (bx-ax)*(py-ay) - (by-ay)*(px-ax)
	switch {
	case v > 0:
		return 1
	case v < 0:
		return -1
	}
	return 0
}
