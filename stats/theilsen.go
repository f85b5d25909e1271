package stats

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// maxTheilSenRows keeps the n(n-1)/2 slopes in memory.
const maxTheilSenRows = 2000

// theilSen is the median of the slopes of all pairs of rows, and the median of
// z - b x as intercept (Theil, Indag. Math. 12:85 (1950); Sen, J. Am. Stat.
// Assoc. 63:1379 (1968), doi 10.1080/01621459.1968.10480934). The slopes are
// sorted once; a resample only weights them.
type theilSen struct {
	slope  []float64
	i, j   []int32 // rows of the pair, in group order
	x, z   []float64
	y      []float64
	group  []int32
	start  []int
	scale  string
	groups int
}

func newTheilSen(p *plan, g *grouping) *theilSen {
	t := &theilSen{scale: p.scale, start: g.start, groups: g.count()}
	for _, i := range g.rows {
		t.x, t.z, t.y = append(t.x, p.x[i]), append(t.z, p.z[i]), append(t.y, p.y[i])
		t.group = append(t.group, int32(g.of[i]))
	}
	type pair struct {
		s    float64
		i, j int32
	}
	var pairs []pair
	for i := range t.x {
		for j := range i {
			if d := t.x[i] - t.x[j]; d != 0 {
				pairs = append(pairs, pair{(t.z[i] - t.z[j]) / d, int32(i), int32(j)})
			}
		}
	}
	slices.SortFunc(pairs, func(a, b pair) int { return cmp.Compare(a.s, b.s) })
	for _, p := range pairs {
		t.slope, t.i, t.j = append(t.slope, p.s), append(t.i, p.i), append(t.j, p.j)
	}
	return t
}

// shape: intercept, slope, R2.
func (t *theilSen) shape() (coefficients, width int) { return 2, 3 }

func (t *theilSen) worker() fitter {
	wt, row := make([]float64, t.groups), make([]float64, len(t.x))
	s := &quantileScratch{}
	return func(d *draw, out []float64, _ bool) bool {
		clear(wt)
		for k, g := range d.id {
			wt[g] = d.wt[k]
		}
		for i, g := range t.group {
			row[i] = wt[g]
		}
		b, ok := t.median(row)
		if !ok {
			return false
		}
		out[1], out[0] = b, t.level(s, row, b)
		out[2] = weightedR2(d, t.start, t.y, func(i int) float64 { return fromScale(t.scale, out[0]+b*t.x[i]) })
		return finite(out[2])
	}
}

// median of the slopes, a pair counted w_i w_j times; the mean of the two middle
// ones where the weight falls into equal halves.
func (t *theilSen) median(row []float64) (float64, bool) {
	total := 0.0
	for k, i := range t.i {
		total += row[i] * row[t.j[k]]
	}
	if total == 0 {
		return 0, false
	}
	sum := 0.0
	for k, i := range t.i {
		w := row[i] * row[t.j[k]]
		if sum += w; w == 0 || 2*sum < total {
			continue
		}
		if 2*sum > total {
			return t.slope[k], true
		}
		for m := k + 1; m < len(t.slope); m++ {
			if row[t.i[m]]*row[t.j[m]] > 0 {
				return (t.slope[k] + t.slope[m]) / 2, true
			}
		}
	}
	return 0, false
}

// level is the weighted median of z - b x.
func (t *theilSen) level(s *quantileScratch, row []float64, b float64) float64 {
	s.r, s.w = s.r[:0], s.w[:0]
	for i, w := range row {
		if w > 0 {
			s.r, s.w = append(s.r, t.z[i]-b*t.x[i]), append(s.w, w)
		}
	}
	if cap(s.tmp) < len(s.r) {
		s.tmp, s.tmpW = make([]float64, 0, len(row)), make([]float64, 0, len(row))
	}
	lower := weightedQuantile(s, 0.5)
	for i := range s.r {
		s.r[i] = -s.r[i]
	}
	return (lower - weightedQuantile(s, 0.5)) / 2
}

func (f *fitted) theilSen() {
	if len(f.x) > maxTheilSenRows {
		f.failure = fmt.Sprintf("Theil-Sen compares all pairs of rows and takes at most %d rows; there are %d. Narrow the filter, or use quantile_50.", maxTheilSenRows, len(f.x))
		return
	}
	t := newTheilSen(f.plan, &f.t.cluster)
	d, out := newDraw(t.groups), make([]float64, 3)
	d.without(t.groups, -1)
	if !t.worker()(d, out, false) {
		f.failure = "No two rows differ in " + nameOf(f.predictor) + ", so there is no slope between them. Widen the filter."
		return
	}
	f.simple(out)
}

// kendallTest tests Theil-Sen by Kendall's S = sum over pairs of the sign of
// (x_i - x_j)(e_i - e_j), with e the residuals of the median, flipped by whole
// clusters.
type kendallTest struct {
	e     []float64 // by row in order of x
	x     []float64
	group []int
	n     int
}

func newKendallTest(f *fitted, g *grouping) *kendallTest {
	idx := make([]int, len(f.x))
	for i := range idx {
		idx[i] = i
	}
	slices.SortStableFunc(idx, func(a, b int) int { return cmp.Compare(f.x[a], f.x[b]) })
	z := slices.Sorted(slices.Values(f.z))
	middle := (z[(len(z)-1)/2] + z[len(z)/2]) / 2
	t := &kendallTest{n: g.count()}
	for _, i := range idx {
		t.x, t.e, t.group = append(t.x, f.x[i]), append(t.e, f.z[i]-middle), append(t.group, g.of[i])
	}
	return t
}

func (t *kendallTest) groups() int { return t.n }

func (t *kendallTest) statistic() func(w []float64) float64 {
	e := make([]float64, len(t.e))
	return func(w []float64) float64 {
		for i, g := range t.group {
			e[i] = w[g] * t.e[i]
		}
		s := 0
		for i := range e {
			for j := range i {
				if t.x[i] != t.x[j] {
					switch {
					case e[i] > e[j]:
						s++
					case e[i] < e[j]:
						s--
					}
				}
			}
		}
		return math.Abs(float64(s))
	}
}
