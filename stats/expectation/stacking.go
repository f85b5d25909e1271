package expectation

import "math"

// priorDeposits is the weight, in deposits, of "all explanations alike" in the
// stacking: with few deposits the best mixture would otherwise put all weight
// on one by chance.
const priorDeposits = 1.0

// stackRows lists the rows every weighted explanation can be scored on.
func stackRows(f *frame, fits []*fitted, ch *checks) []int {
	var rows []int
	for i := range f.obs {
		ok := true
		for k, t := range fits {
			if t.weighted && t.failure == "" && ch.p[k][i] == nil {
				ok = false
				break
			}
		}
		if ok {
			rows = append(rows, i)
		}
	}
	return rows
}

// stack finds the weights of the rival explanations and, for the coverage of
// the combination, the weights without each cluster.
//
// Where every P is above 1 it maximises sum over deposits of the log of the
// mixture density of P, the density being Student's t on ln(P - 1) with its
// Jacobian; where P = 1 occurs, it minimises the continuous ranked probability
// score of the mixture (Yao, Vehtari, Simpson & Gelman, Bayesian Anal. 13:917
// (2018), doi 10.1214/17-BA1091). Explanations that cannot be told apart keep
// equal weights.
func stack(f *frame, fits []*fitted, ch *checks) (all []float64, without [][]float64, rows []int) {
	var use []int
	for k, t := range fits {
		if t.weighted && t.failure == "" {
			use = append(use, k)
		}
	}
	all, without = make([]float64, len(fits)), make([][]float64, len(f.clusters))
	rows = stackRows(f, fits, ch)
	var find func(skip int, from []float64) []float64
	switch {
	case len(use) == 0:
		for c := range without {
			without[c] = all
		}
		return all, without, nil
	case f.ones > 0:
		find = crpsStacking(f, ch, use, rows)
	default:
		find = densityStacking(f, fits, use, rows)
	}
	equal := make([]float64, len(use))
	for k := range equal {
		equal[k] = 1 / float64(len(use))
	}
	best := find(-1, equal)
	spreadOut := func(w []float64) []float64 {
		out := make([]float64, len(fits))
		for j, k := range use {
			out[k] = w[j]
		}
		return out
	}
	for c := range f.clusters {
		without[c] = spreadOut(find(c, best))
	}
	return spreadOut(best), without, rows
}

// densityStacking is expectation-maximisation for the weights of a mixture
// with fixed densities.
func densityStacking(f *frame, fits []*fitted, use, rows []int) func(int, []float64) []float64 {
	d := make([]float64, 0, len(rows)*len(use))
	for _, i := range rows {
		top := math.Inf(-1)
		for _, k := range use {
			top = math.Max(top, fits[k].logDens[i])
		}
		for _, k := range use {
			d = append(d, math.Exp(fits[k].logDens[i]-top))
		}
	}
	n := len(use)
	return func(skip int, from []float64) []float64 {
		w := append([]float64(nil), from...)
		next := make([]float64, n)
		steps := 400
		if skip >= 0 {
			steps = 60
		}
		for range steps {
			total := priorDeposits
			for k := range next {
				next[k] = priorDeposits / float64(n)
			}
			for r, i := range rows {
				if f.obs[i].cluster == skip {
					continue
				}
				row := d[r*n : (r+1)*n]
				var mix float64
				for k, v := range row {
					mix += w[k] * v
				}
				for k, v := range row {
					next[k] += f.obs[i].weight * w[k] * v / mix
				}
				total += f.obs[i].weight
			}
			for k := range w {
				w[k] = next[k] / total
			}
		}
		return w
	}
}

// crpsStacking minimises sum w (e'u - u'D u/2) over the weights u, with
// e_k = E|X_k - p| and D_kl = E|X_k - X_l|, by exponentiated gradients.
func crpsStacking(f *frame, ch *checks, use, rows []int) func(int, []float64) []float64 {
	n := len(use)
	e, d := crpsTerms(f, ch, use, rows)
	return func(skip int, from []float64) []float64 {
		es, ds := make([]float64, n), make([]float64, n*n)
		for c := range e {
			if c == skip {
				continue
			}
			for k, v := range e[c] {
				es[k] += v
			}
			for k, v := range d[c] {
				ds[k] += v
			}
		}
		w := append([]float64(nil), from...)
		scale := 0.0
		for _, v := range es {
			scale = math.Max(scale, v)
		}
		if scale == 0 {
			return w
		}
		// a tenth of one deposit's score keeps every weight above 0
		keep := 0.1 * priorDeposits * scale / float64(n*len(f.clusters))
		grad := make([]float64, n)
		for range 2000 {
			var sum, mean float64
			for k := range w {
				grad[k] = es[k] - keep/math.Max(w[k], 1e-9)
				for l := range w {
					grad[k] -= ds[k*n+l] * w[l]
				}
				mean += w[k] * grad[k]
			}
			for k := range w {
				w[k] *= math.Exp(-math.Max(-1, math.Min(1, 5*(grad[k]-mean)/scale)))
				sum += w[k]
			}
			for k := range w {
				w[k] /= sum
			}
		}
		return w
	}
}

// crpsTerms are the terms e and d of the score, by cluster.
func crpsTerms(f *frame, ch *checks, use, rows []int) (e, d [][]float64) {
	n := len(use)
	e, d = make([][]float64, len(f.clusters)), make([][]float64, len(f.clusters))
	for c := range e {
		e[c], d[c] = make([]float64, n), make([]float64, n*n)
	}
	for _, i := range rows {
		ob := &f.obs[i]
		for a, k := range use {
			e[ob.cluster][a] += ob.weight * meanDistance(ch.p[k][i], []float64{ob.p})
			for b := range a + 1 {
				v := ob.weight * meanDistance(ch.p[k][i], ch.p[use[b]][i])
				d[ob.cluster][a*n+b] += v
				if a != b {
					d[ob.cluster][b*n+a] += v
				}
			}
		}
	}
	return e, d
}

// meanDistance is E|X - Y| of two sorted samples, in linear time.
func meanDistance(x, y []float64) float64 {
	// E|X - Y| is the integral of F(1-G) + G(1-F) over the line.
	var sum float64
	i, j := 0, 0
	last := math.Min(x[0], y[0])
	for i < len(x) || j < len(y) {
		var at float64
		if j == len(y) || (i < len(x) && x[i] <= y[j]) {
			at = x[i]
		} else {
			at = y[j]
		}
		a, b := float64(i)/float64(len(x)), float64(j)/float64(len(y))
		sum += (at - last) * (a*(1-b) + b*(1-a))
		last = at
		for i < len(x) && x[i] == at {
			i++
		}
		for j < len(y) && y[j] == at {
			j++
		}
	}
	return sum
}
