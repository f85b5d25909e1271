package stats

// draw is one weighting of the groups: which are in, and how often. Every
// resample, jackknife fit and leave-one-out fit is a draw.
type draw struct {
	id   []int32
	wt   []float64
	size float64 // sum of wt

	index int // of the resample
}

// fitter refits one model on a draw. It writes the coefficients, then R2 in
// sinuosity units, then (if se) the cluster error of every coefficient (and
// what else the estimator tells) to out, and is false where the draw is degenerate: the model
// cannot be fitted on it. It allocates nothing.
type fitter func(d *draw, out []float64, se bool) bool

// estimator is a model compiled onto groups of rows.
type estimator interface {
	shape() (coefficients, width int) // width = numbers a fit writes
	worker() fitter                   // with scratch of its own, for one goroutine
}

// without fills d with every group but one (none is left out for skip < 0).
func (d *draw) without(groups, skip int) {
	d.id, d.wt = d.id[:0], d.wt[:0]
	for g := range groups {
		if g != skip {
			d.id, d.wt = append(d.id, int32(g)), append(d.wt, 1)
		}
	}
	d.size = float64(len(d.id))
}

func newDraw(groups int) *draw {
	return &draw{id: make([]int32, 0, groups), wt: make([]float64, 0, groups)}
}

// moments are the centred and scaled columns of a least-squares model with
// their cross-products by group. Scaled column j is (col - mean)/sd, so that
// cross-products lose no digits to a large mean.
type moments struct {
	q          int // columns
	groups     int
	width      int       // numbers a group: upper triangle of (1, x1..xq, z)
	sums       []float64 // groups x width
	mean, sd   []float64 // of the columns
	zMean, zSD float64
	yMean      float64
	scale      string
	start      []int     // rows of group g are start[g]..start[g+1] of xs and ys
	xs         []float64 // scaled columns, row-major, in group order (only when scale != raw)
	ys         []float64 // y - yMean in group order (only when scale != raw)
	ySums      []float64 // by group: sum (y - yMean), sum (y - yMean)^2
	zeroAt     []float64 // scaled coordinates of all columns = 0
}

func newMoments(p *plan, g *grouping) *moments {
	n, q := len(p.z), len(p.cols)
	m := &moments{q: q, groups: g.count(), scale: p.scale, start: g.start}
	m.width = (q + 2) * (q + 3) / 2
	m.sums = make([]float64, m.groups*m.width)
	v := make([][]float64, q+2)
	v[0] = make([]float64, n)
	for i := range v[0] {
		v[0][i] = 1
	}
	for j, c := range p.cols {
		mean, length := centreScale(c)
		sd := length / sqrtInt(n)
		v[j+1] = standardise(c, mean, sd)
		m.mean, m.sd, m.zeroAt = append(m.mean, mean), append(m.sd, sd), append(m.zeroAt, -mean/sd)
	}
	zMean, zLength := centreScale(p.z)
	m.zMean, m.zSD = zMean, zLength/sqrtInt(n)
	v[q+1] = standardise(p.z, m.zMean, m.zSD)
	for i, gr := range g.of {
		s, k := m.sums[gr*m.width:], 0
		for a := range v {
			for b := a; b < len(v); b++ {
				s[k] += v[a][i] * v[b][i]
				k++
			}
		}
	}
	if p.scale != "raw" {
		m.keepRows(p, g, v)
	}
	return m
}

// keepRows stores what R2 in sinuosity units needs when the response was
// transformed: no cross-product can give it.
func (m *moments) keepRows(p *plan, g *grouping, v [][]float64) {
	m.yMean, _ = centreScale(p.y)
	m.ySums = make([]float64, 2*m.groups)
	for _, i := range g.rows {
		for j := range m.q {
			m.xs = append(m.xs, v[j+1][i])
		}
		y := p.y[i] - m.yMean
		m.ys = append(m.ys, y)
		m.ySums[2*g.of[i]] += y
		m.ySums[2*g.of[i]+1] += y * y
	}
}

func standardise(c []float64, mean, sd float64) []float64 {
	out := make([]float64, len(c))
	for i, v := range c {
		out[i] = (v - mean) / sd
	}
	return out
}
