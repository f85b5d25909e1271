package stats

import (
	"math"
	"math/bits"
	"slices"
)

// sharesEstimator splits R2 (on the scale fitted) among the members of a joint
// model: Lindeman-Merenda-Gold shares, the gain of R2 of a member averaged over
// all orders of entry (Lindeman, Merenda & Gold, Introduction to Bivariate and
// Multivariate Analysis (1980), p. 119; the Shapley value of the members), and
// for two or three members the unique and common parts.
type sharesEstimator struct {
	*moments
	members []string
	columns [][]int   // of each member
	weight  []float64 // of an entry after k others: k!(m-k-1)!/m!
	parts   bool
}

// maxShares is the most members whose 2^m subsets are fitted in every resample.
const maxShares = 6

// newShares is nil where there are fewer than two predictors to share among.
func newShares(s *study) *sharesEstimator {
	members := s.req.Joint
	interaction := [2]string{}
	if len(members) < 2 {
		members = nil
		for _, m := range s.req.Models {
			if !slices.Contains(members, m.Predictor) {
				members = append(members, m.Predictor)
			}
		}
	}
	if len(members) < 2 || len(members) > maxShares || s.t.n() == 0 {
		return nil
	}
	p := newJointPlan(s.t, members, interaction, s.req.Scale)
	if p.refusal() != "" {
		return nil
	}
	e := &sharesEstimator{moments: newMoments(p, &s.t.cluster), members: members, parts: len(members) <= 3}
	for _, t := range p.terms {
		var c []int
		for j := t.from; j < t.to; j++ {
			c = append(c, j)
		}
		e.columns = append(e.columns, c)
	}
	e.weight = entryWeights(len(members))
	return e
}

func entryWeights(m int) []float64 {
	w := make([]float64, m)
	for k := range w {
		w[k] = 1 / float64(m)
		for i := 1; i <= k; i++ { // 1/(m C(m-1, k))
			w[k] *= float64(i) / float64(m-i)
		}
	}
	return w
}

// resamples: all subsets of a wide model in every resample are the slowest part
// of a page, as are the triangles of very many clusters; the ends of shares need
// fewer digits.
func (e *sharesEstimator) resamples(asked int) int {
	if len(e.members) > 4 || e.groups*e.moments.width > 10_000 {
		return min(asked, 1999)
	}
	return asked
}

// shape: the shares, their sum, then the parts of subset 1, 2, 3 ...
func (e *sharesEstimator) shape() (coefficients, width int) {
	m := len(e.members)
	if e.parts {
		return m, m + 1<<m
	}
	return m, m + 1
}

type sharesScratch struct {
	sum, mean, c, l, u, y, r2 []float64
	idx                       []int
}

func (e *sharesEstimator) worker() fitter {
	q := e.q
	s := &sharesScratch{sum: make([]float64, e.width), mean: make([]float64, q), c: make([]float64, q*q), l: make([]float64, q*q),
		u: make([]float64, q), y: make([]float64, q), r2: make([]float64, 1<<len(e.members)), idx: make([]int, 0, q)}
	return func(d *draw, out []float64, _ bool) bool { return e.fit(s, d, out) }
}

func (e *sharesEstimator) fit(s *sharesScratch, d *draw, out []float64) bool {
	e.accumulate(d, s.sum)
	n := s.sum[0]
	mz, tot, ok := e.centred(s.sum, s.mean, s.c)
	if !ok {
		return false
	}
	for j := range e.q {
		s.u[j] = s.sum[e.at(j+1, e.q+1)] - n*s.mean[j]*mz
	}
	m := len(e.members)
	for set := range s.r2 {
		s.r2[set] = e.explained(s, set) / tot
	}
	full := 1<<m - 1
	for j := range m {
		out[j] = 0
		for set := range s.r2 {
			if set>>j&1 == 0 {
				out[j] += e.weight[bits.OnesCount(uint(set))] * (s.r2[set|1<<j] - s.r2[set])
			}
		}
	}
	out[m] = s.r2[full]
	if e.parts {
		for set := 1; set <= full; set++ {
			out[m+set] = common(s.r2, set, full)
		}
	}
	return true
}

// common is the commonality of a set of members: minus the alternating sum of
// R2 over the subsets of the set joined with all members outside it.
func common(r2 []float64, set, full int) float64 {
	v := 0.0
	for sub := set; ; sub = (sub - 1) & set {
		sign := 1 - 2*float64(bits.OnesCount(uint(sub))&1)
		v -= sign * r2[sub|full&^set]
		if sub == 0 {
			return v
		}
	}
}

// explained is the sum of squares the members of set take together; a column
// that is a combination of those before it takes nothing more.
func (e *sharesEstimator) explained(s *sharesScratch, set int) float64 {
	s.idx = s.idx[:0]
	q, sum := e.q, 0.0
	for m, cols := range e.columns {
		if set>>m&1 == 0 {
			continue
		}
		for _, j := range cols {
			k := len(s.idx)
			v := s.c[j*q+j]
			for a, i := range s.idx {
				x := s.c[j*q+i]
				for b := range a {
					x -= s.l[k*q+b] * s.l[a*q+b]
				}
				x /= s.l[a*q+a]
				s.l[k*q+a] = x
				v -= x * x
			}
			if v <= 1e-9*s.c[j*q+j] {
				continue
			}
			root := math.Sqrt(v)
			s.l[k*q+k] = root
			y := s.u[j]
			for a := range k {
				y -= s.l[k*q+a] * s.y[a]
			}
			s.y[k] = y / root
			sum += s.y[k] * s.y[k]
			s.idx = append(s.idx, j)
		}
	}
	return sum
}

// reportShares fills the shares and the parts with their intervals.
func (s *study) reportShares() ([]Share, []Part) {
	e := s.shares
	if e == nil || s.boot == nil {
		return nil, nil
	}
	_, w := e.shape()
	own, d := make([]float64, w), newDraw(e.groups)
	d.without(e.groups, -1)
	if !e.worker()(d, own, false) {
		return nil, nil
	}
	m := len(e.members)
	var shares []Share
	for j, name := range e.members {
		shares = append(shares, Share{Predictor: name, Share: own[j],
			Interval: s.statInterval(s.shareJob, j, own[j], columnOf(s.shareJack, j)), Scale: s.req.Scale})
	}
	var parts []Part
	if e.parts {
		for set := 1; set < 1<<m; set++ {
			p := Part{Share: own[m+set], Interval: s.statInterval(s.shareJob, m+set, own[m+set], columnOf(s.shareJack, m+set))}
			for j, name := range e.members {
				if set>>j&1 == 1 {
					p.Members = append(p.Members, name)
				}
			}
			parts = append(parts, p)
		}
	}
	return shares, parts
}
