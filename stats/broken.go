package stats

import (
	"context"
	"fmt"
	"math"
	"slices"
)

// broken is the broken line, continuous, with one breakpoint c:
// a + b1 x below c, a + b1 c + b2 (x - c) above. The breakpoint is that of the
// least sum of squares, found exactly (Hudson, J. Am. Stat. Assoc. 61:1097
// (1966), doi 10.1080/01621459.1966.10482198): either c is where the two free
// lines of a split cross, when that lies between the split's rows, or c is at a
// row.
type broken struct {
	x, z, y []float64 // sorted by x; z on the scale fitted
	group   []int32
	scale   string
	mx, mz  float64 // what was taken off x and z to keep digits
	sx, sz  float64 // and their units
	groups  int
}

// leastSide is the fewest rows on either side of a breakpoint.
const leastSide = 3

func newBroken(p *plan, g *grouping) *broken {
	idx := make([]int, len(p.x))
	for i := range idx {
		idx[i] = i
	}
	slices.SortStableFunc(idx, func(a, b int) int {
		switch {
		case p.x[a] < p.x[b]:
			return -1
		case p.x[a] > p.x[b]:
			return 1
		}
		return 0
	})
	b := &broken{scale: p.scale, groups: g.count()}
	mx, lx := centreScale(p.x)
	mz, lz := centreScale(p.z)
	b.mx, b.sx, b.mz, b.sz = mx, lx/sqrtInt(len(idx)), mz, lz/sqrtInt(len(idx))
	for _, i := range idx {
		b.x, b.z, b.y = append(b.x, (p.x[i]-b.mx)/b.sx), append(b.z, (p.z[i]-b.mz)/b.sz), append(b.y, p.y[i])
		b.group = append(b.group, int32(g.of[i]))
	}
	return b
}

// shape: intercept, slope below, slope above, breakpoint, R2.
func (b *broken) shape() (coefficients, width int) { return 4, 5 }

// half holds the weighted sums of the rows on one side.
type half struct{ n, x, z, xx, xz, zz float64 }

func (h half) minus(o half) half {
	return half{h.n - o.n, h.x - o.x, h.z - o.z, h.xx - o.xx, h.xz - o.xz, h.zz - o.zz}
}

// line is the free line of a side; ok is false where its rows share one x.
func (h half) line() (a, b, rss float64, ok bool) {
	q := h.xx - h.x*h.x/h.n
	if !(h.n >= leastSide) || !(q > 1e-10*h.n) {
		return 0, 0, 0, false
	}
	sxz := h.xz - h.x*h.z/h.n
	b = sxz / q
	return (h.z - b*h.x) / h.n, b, math.Max(0, h.zz-h.z*h.z/h.n-b*sxz), true
}

type brokenScratch struct {
	wt  []float64 // by group
	row []float64 // by row
	sum []half    // prefix sums: rows 0..i
}

func (b *broken) scratch() *brokenScratch {
	return &brokenScratch{wt: make([]float64, b.groups), row: make([]float64, len(b.x)), sum: make([]half, len(b.x))}
}

func (b *broken) worker() fitter {
	s := b.scratch()
	return func(d *draw, out []float64, _ bool) bool {
		clear(s.wt)
		for k, g := range d.id {
			s.wt[g] = d.wt[k]
		}
		for i, g := range b.group {
			s.row[i] = s.wt[g]
		}
		fit, ok := b.best(s, b.z)
		if !ok {
			return false
		}
		b.report(fit, out)
		out[4] = b.r2(s, fit)
		return true
	}
}

// knot is a fit on the scaled values: lines a1 + b1 x below c and a2 + b2 x
// above.
type knot struct{ a1, b1, a2, b2, c, rss float64 }

// best is the broken line with the least sum of squares under the weights in
// s.row, for response z.
func (b *broken) best(s *brokenScratch, z []float64) (knot, bool) {
	b.accumulate(s, z)
	all := s.sum[len(s.sum)-1]
	fit := knot{rss: math.Inf(1)}
	last := -1 // the row before the next split, with weight
	for i, w := range s.row {
		if w == 0 {
			continue
		}
		if last >= 0 && b.x[i] > b.x[last] {
			b.split(s.sum[last], all, b.x[last], b.x[i], &fit)
		}
		last = i
	}
	return fit, finite(fit.rss)
}

func (b *broken) accumulate(s *brokenScratch, z []float64) {
	var h half
	for i, w := range s.row {
		x, y := b.x[i], z[i]
		h.n += w
		h.x += w * x
		h.z += w * y
		h.xx += w * x * x
		h.xz += w * x * y
		h.zz += w * y * y
		s.sum[i] = h
	}
}

// split tries breakpoints between two neighbouring rows, and at the left one
// and the right one.
func (b *broken) split(left, all half, from, to float64, best *knot) {
	right := all.minus(left)
	if left.n < leastSide || right.n < leastSide {
		return
	}
	a1, b1, r1, ok1 := left.line()
	a2, b2, r2, ok2 := right.line()
	if ok1 && ok2 && r1+r2 < best.rss && b1 != b2 {
		if c := (a1 - a2) / (b2 - b1); c >= from && c <= to {
			*best = knot{a1, b1, a2, b2, c, r1 + r2}
			return
		}
	}
	if ok1 {
		b.at(left, right, from, best)
	}
	if ok2 {
		b.at(left, right, to, best)
	}
}

// at fits the continuous line with its knot at c: least squares on 1,
// (x - c)- and (x - c)+.
func (b *broken) at(left, right half, c float64, best *knot) {
	// Sums of u = x - c on either side.
	lu, ru := left.x-c*left.n, right.x-c*right.n
	luu, ruu := left.xx-2*c*left.x+c*c*left.n, right.xx-2*c*right.x+c*c*right.n
	luz, ruz := left.xz-c*left.z, right.xz-c*right.z
	if luu <= 1e-10*left.n || ruu <= 1e-10*right.n {
		return
	}
	n, z, zz := left.n+right.n, left.z+right.z, left.zz+right.zz
	// Slopes given the level h at the knot: b1 = (luz - h lu)/luu.
	den := n - lu*lu/luu - ru*ru/ruu
	if den <= 1e-10*n {
		return
	}
	h := (z - lu*luz/luu - ru*ruz/ruu) / den
	b1, b2 := (luz-h*lu)/luu, (ruz-h*ru)/ruu
	rss := math.Max(0, zz-h*z-b1*luz-b2*ruz)
	if rss < best.rss {
		*best = knot{h - b1*c, b1, h - b2*c, b2, c, rss}
	}
}

// report writes intercept, slopes and breakpoint in the units of the rows.
func (b *broken) report(k knot, out []float64) {
	out[1], out[2] = k.b1*b.sz/b.sx, k.b2*b.sz/b.sx
	out[0] = b.mz + b.sz*k.a1 - out[1]*b.mx
	out[3] = b.mx + b.sx*k.c
}

// r2 is R2 in sinuosity units under the weights in s.row.
func (b *broken) r2(s *brokenScratch, k knot) float64 {
	all := s.sum[len(s.sum)-1]
	if b.scale == "raw" {
		return 1 - k.rss/(all.zz-all.z*all.z/all.n)
	}
	var n, y, yy, rss float64
	for i, w := range s.row {
		if w == 0 {
			continue
		}
		z := k.a1 + k.b1*b.x[i]
		if b.x[i] > k.c {
			z = k.a2 + k.b2*b.x[i]
		}
		e := b.y[i] - fromScale(b.scale, b.mz+b.sz*z)
		v := b.y[i] - b.y[0]
		n, y, yy, rss = n+w, y+w*v, yy+w*v*v, rss+w*e*e
	}
	return 1 - rss/(yy-y*y/n)
}

func (f *fitted) broken() {
	all := singles(len(f.x))
	b := newBroken(f.plan, &all)
	s := b.scratch()
	for i := range s.row {
		s.row[i] = 1
	}
	fit, ok := b.best(s, b.z)
	if !ok {
		f.failure = fmt.Sprintf("A broken line needs at least %d rows and two values of %s on either side of its breakpoint. Widen the filter, or use a straight line.", leastSide, nameOf(f.predictor))
		return
	}
	f.coef = make([]float64, 4)
	b.report(fit, f.coef)
	f.r2 = b.r2(s, fit)
	f.r2Fitted = 1 - fit.rss/float64(len(f.x))
	f.rss = fit.rss * b.sz * b.sz
	f.resid, f.sigma = f.residuals(), math.Sqrt(f.rss/math.Max(1, float64(len(f.x)-4)))
	f.se = f.brokenErrors()
	f.likelihood = true
}

// brokenErrors are the errors of the model linearised at its breakpoint
// (Muggeo, Stat. Med. 22:3055 (2003), doi 10.1002/sim.1545); NaN for all where
// the slopes are equal and the breakpoint says nothing.
func (f *fitted) brokenErrors() []float64 {
	c, d := f.coef[3], f.coef[2]-f.coef[1]
	cols := make([][]float64, 3)
	for _, x := range f.x {
		over := math.Max(0, x-c)
		step := 0.0
		if x > c {
			step = -d
		}
		cols[0], cols[1], cols[2] = append(cols[0], x-over), append(cols[1], over), append(cols[2], step)
	}
	ls, err := FitLinear(cols, f.z)
	if err != nil {
		return []float64{nan, nan, nan, nan}
	}
	k := f.sigma / ls.Sigma
	return []float64{ls.SE[0] * k, ls.SE[1] * k, ls.SE[2] * k, ls.SE[3] * k}
}

// brokenTest tests a broken line against its null (a straight line: sup-F; or
// the mean) by sign flips of the null's residuals. The statistic is the ratio of
// the sums of squares, which orders flips as F does (sup-F: Andrews,
// Econometrica 61:821 (1993), doi 10.2307/2951764; its p by resampling, as the
// breakpoint exists only under the alternative).
type brokenTest struct {
	b        *broken
	fit      []float64 // of the null, in the order of b
	residual []float64
	straight bool
}

func newBrokenTest(b *broken, straight bool) *brokenTest {
	t := &brokenTest{b: b, straight: straight, fit: make([]float64, len(b.x)), residual: make([]float64, len(b.x))}
	var slope float64 // x and z are centred, with unit variance
	if straight {
		slope = dot(b.x, b.z) / dot(b.x, b.x)
	}
	for i := range b.x {
		t.fit[i] = slope * b.x[i]
		t.residual[i] = b.z[i] - t.fit[i]
	}
	return t
}

func (t *brokenTest) groups() int { return t.b.groups }

func (t *brokenTest) statistic() func(w []float64) float64 {
	s := t.b.scratch()
	z := make([]float64, len(t.fit))
	for i := range s.row {
		s.row[i] = 1
	}
	return func(w []float64) float64 {
		for i, g := range t.b.group {
			z[i] = t.fit[i] + w[g]*t.residual[i]
		}
		k, ok := t.b.best(s, z)
		if !ok {
			return 0
		}
		all := s.sum[len(s.sum)-1]
		null := all.zz - all.z*all.z/all.n
		if t.straight {
			_, _, null, _ = all.line()
		}
		return null / k.rss
	}
}

// profilePoints is how many breakpoints the figure of the profile shows.
const profilePoints = 61

// profile is R2 on the scale fitted of the best broken line at each of a row of
// breakpoints.
func (f *fitted) profile() []CurvePoint {
	all := singles(len(f.x))
	b := newBroken(f.plan, &all)
	s := b.scratch()
	for i := range s.row {
		s.row[i] = 1
	}
	b.accumulate(s, b.z)
	total := s.sum[len(s.sum)-1]
	var out []CurvePoint
	lo, hi := b.x[0], b.x[len(b.x)-1]
	for i := range profilePoints {
		c := lo + (hi-lo)*float64(i)/(profilePoints-1)
		k, _ := slices.BinarySearch(b.x, c)
		if k == 0 || k == len(b.x) {
			continue
		}
		fit := knot{rss: math.Inf(1)}
		left := s.sum[k-1]
		if right := total.minus(left); left.n >= leastSide && right.n >= leastSide {
			b.at(left, right, c, &fit)
		}
		if finite(fit.rss) {
			out = append(out, CurvePoint{X: b.mx + b.sx*c, Y: 1 - fit.rss/total.zz, Low: nan, High: nan})
		}
	}
	return out
}

// practiceLatitude is where common practice, without a source, lets channels
// turn nearly straight; degrees.
const practiceLatitude = 50

// breakpoint reports the first broken line of the study, or nil.
func (s *study) breakpoint(ctx context.Context) (*Breakpoint, error) {
	for k, f := range s.models {
		if f.form != "broken_line" || f.failure != "" {
			continue
		}
		b := &Breakpoint{At: f.coef[3], Interval: s.out[k].Coefficients[3].Interval, P: nan, Profile: f.profile(), Model: f.label}
		if s.t.cluster.count() > 1 {
			var err error
			if b.P, err = flipP(ctx, newBrokenTest(f.cluster.(*broken), true), s.flips(f), s.req.Seed, s.req.Workers); err != nil {
				return nil, err
			}
		}
		b.Text = b.sentence(f, s)
		return b, nil
	}
	return nil, nil
}

func (b *Breakpoint) sentence(f *fitted, s *study) string {
	unit := map[bool]string{true: " degrees"}[f.predictor == "abs_latitude"]
	text := fmt.Sprintf("The broken line bends at %s%s (%s%s, whole %s resampled); against a straight line p = %s.",
		number(b.At), unit, between(b.Interval), unit, s.t.many(), number(b.P))
	if b.P > 1-s.req.Level {
		text += " These rows do not need a breakpoint."
	}
	if f.predictor != "abs_latitude" || !b.Interval.known() {
		return text
	}
	if b.Interval[0] <= practiceLatitude && practiceLatitude <= b.Interval[1] {
		return text + " The 50 degrees of common practice lie inside the interval, and so do many other latitudes: the interval, not the point, is the finding."
	}
	return text + " The 50 degrees of common practice lie outside the interval."
}
