package stats

import (
	"cmp"
	"math"
	"slices"
)

// influence refits a model without each system in turn: how R2 and the slope
// move, Cook's distance of the whole system, d'(X'X)d/(p sigma^2) with d the
// change of the coefficients (Cook, Technometrics 19:15 (1977), doi
// 10.2307/1268249, for a group of rows), and its leverage, the sum of h_ii over
// its rows. Sorted by how far R2 moves.
func (s *study) influence(f *fitted, k int) []Influence {
	g := &s.t.system
	if g.count() < 3 || g.count() > mostLeftOut {
		return nil // very many systems: none of them can matter much
	}
	f.system = f.compile(g)
	jack := jackknife(f.system, g.count())
	cook, leverage := s.cook(f, jack)
	p, j := len(f.coef), slopeIndex(f.form)
	names := s.systemNames()
	out := make([]Influence, g.count())
	for i, r := range jack {
		out[i] = Influence{System: g.names[i], SystemName: names[i], Model: f.label,
			RSquaredWithout: r[p], CoefficientWithout: r[j], Cook: cook[i], Leverage: leverage[i]}
	}
	slices.SortStableFunc(out, func(a, b Influence) int {
		return cmp.Or(-cmp.Compare(moved(a, f.r2), moved(b, f.r2)), cmp.Compare(a.System, b.System))
	})
	return out
}

// moved is how far leaving the system out moves R2; a system the model cannot
// do without comes first.
func moved(i Influence, r2 float64) float64 {
	if !finite(i.RSquaredWithout) {
		return math.Inf(1)
	}
	return math.Abs(i.RSquaredWithout - r2)
}

func (s *study) cook(f *fitted, jack [][]float64) (cook, leverage []float64) {
	cook, leverage = make([]float64, len(jack)), make([]float64, len(jack))
	for i := range jack {
		cook[i], leverage[i] = nan, nan
	}
	if f.robust == nil {
		return cook, leverage
	}
	r := f.robust(f.system)
	p := r.terms.p
	root, ok := r.terms.rootInverse()
	if !ok {
		return cook, leverage
	}
	xx := make([]float64, p*p)
	for _, x := range r.terms.xx {
		axpy(1, x, xx)
	}
	k := make([]float64, p*p)
	for i, v := range jack {
		d := r.shift(f.coef, v)
		sum := 0.0
		for a := range p {
			for b := range p {
				sum += d[a] * xx[a*p+b] * d[b]
			}
		}
		cook[i] = sum / (float64(p) * r.unit * r.unit)
		sandwich(root, r.terms.xx[i], k, p)
		leverage[i] = 0
		for a := range p {
			leverage[i] += k[a*p+a]
		}
	}
	return cook, leverage
}

// systemNames are the names of the systems in the order of their grouping.
func (s *study) systemNames() []string {
	out := make([]string, s.t.system.count())
	for g := range out {
		out[g] = s.t.label[s.t.system.members(g)[0]]
	}
	return out
}
