package stats

import (
	"context"
	"math"
)

// test fills the sign-flip p of the model, and of each term of a joint model.
func (s *study) test(ctx context.Context, m *Model, f *fitted) error {
	flips := s.flips(f)
	m.FlipsUsed = flips
	run := func(t flipTest) (float64, error) {
		return flipP(ctx, t, flips, s.req.Seed, s.req.Workers)
	}
	var err error
	switch {
	case s.t.cluster.count() < 2:
	case isLeastSquares(f.form):
		mo := momentsOf(f.cluster)
		terms, xz := f.robust(f.cluster).terms, mo.responseTerms()
		if t := newTermTest(terms, xz, 1, mo.q+1); t != nil {
			if m.PermutationP, err = run(t); err != nil {
				return err
			}
		}
		if f.form != "joint" {
			break
		}
		for _, tm := range f.terms {
			out := Term{Name: tm.name, Columns: tm.to - tm.from, VIF: f.vif(tm), PermutationP: nan}
			if t := newTermTest(terms, xz, tm.from+1, tm.to+1); t != nil {
				if out.PermutationP, err = run(t); err != nil {
					return err
				}
			}
			m.Terms = append(m.Terms, out)
		}
	case f.form == "floor_decay":
		d := f.cluster.(*decay)
		m.PermutationP, err = run(decayTest{d, d.vMean})
	case f.form == "broken_line":
		m.PermutationP, err = run(newBrokenTest(f.cluster.(*broken), false))
	case f.form == "theil_sen":
		m.PermutationP, err = run(newKendallTest(f, &s.t.cluster))
	default:
		m.PermutationP, err = run(newScoreTest(f, &s.t.cluster, quantileTau(f.form)))
	}
	return err
}

// flips is how many sign flips the test of a model is given: as many as asked,
// unless each costs too much.
func (s *study) flips(f *fitted) int {
	n, cost := s.t.n(), s.t.cluster.count()
	budget := flipBudget
	switch f.form {
	case "theil_sen":
		cost, budget = n*(n-1)/2, pairBudget
	case "broken_line":
		cost, budget = n, backBudget
	}
	return min(s.req.Permutations, max(MinPermutations, budget/max(cost, 1)))
}

// vif is the largest variance inflation factor of a term's columns, 1/(1 - R2)
// of the column on all columns of the other terms.
func (f *fitted) vif(tm term) float64 {
	worst := 1.0
	for j := tm.from; j < tm.to; j++ {
		var others [][]float64
		for k, c := range f.cols {
			if k < tm.from || k >= tm.to {
				others = append(others, c)
			}
		}
		if len(others) == 0 {
			return 1
		}
		ls, err := FitLinear(others, f.cols[j])
		if err != nil {
			return nan
		}
		worst = math.Max(worst, 1/(1-ls.R2))
	}
	return worst
}
