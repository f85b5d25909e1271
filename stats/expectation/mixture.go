package expectation

import (
	"cmp"
	"math"
	"slices"
	"sort"

	"gonum.org/v1/gonum/mathext"
)

// mixture is a weighted mixture of sorted draws.
type mixture struct {
	draws   [][]float64
	weights []float64
	total   float64
	alpha   float64             // exponent of the beta transform; 0 or 1 = none
	known   map[float64]float64 // inner of the usual quantiles; nil = none known
}

// outer turns a share of the plain mixture into one of the transformed
// mixture, inner the other way.
func (m *mixture) outer(share float64) float64 {
	if m.alpha == 0 || m.alpha == 1 {
		return share
	}
	return mathext.RegIncBeta(m.alpha, m.alpha, math.Max(0, math.Min(1, share)))
}

func (m *mixture) inner(share float64) float64 {
	if m.alpha == 0 || m.alpha == 1 {
		return share
	}
	if v, ok := m.known[share]; ok {
		return v
	}
	return mathext.InvRegIncBeta(m.alpha, m.alpha, share)
}

// usualShares are those of Quantiles.
var usualShares = [...]float64{0.025, 0.1, 0.25, 0.5, 0.75, 0.9, 0.975}

// innerShares is inner of the usual shares for one exponent.
func innerShares(alpha float64) map[float64]float64 {
	m, out := mixture{alpha: alpha}, map[float64]float64{}
	for _, q := range usualShares {
		out[q] = m.inner(q)
	}
	return out
}

func (m *mixture) add(sorted []float64, weight float64) {
	m.draws, m.weights, m.total = append(m.draws, sorted), append(m.weights, weight), m.total+weight
}

// below is the share of outcomes below p; those at p count half.
func (m *mixture) below(p float64) float64 {
	var sum float64
	for k, d := range m.draws {
		under := sort.SearchFloat64s(d, p)
		upTo := under
		for upTo < len(d) && d[upTo] == p {
			upTo++
		}
		sum += m.weights[k] * float64(under+upTo) / 2 / float64(len(d))
	}
	return m.outer(sum / m.total)
}

// atMost is the share of the plain mixture at or below p.
func (m *mixture) atMost(p float64) float64 {
	var sum float64
	for k, d := range m.draws {
		sum += m.weights[k] * float64(sort.SearchFloat64s(d, math.Nextafter(p, math.Inf(1)))) / float64(len(d))
	}
	return sum / m.total
}

// quantile is the value below which the share q of the outcomes lies, by
// bisection.
func (m *mixture) quantile(q float64) float64 {
	q = m.inner(q)
	if len(m.draws) == 1 {
		return quantileOf(m.draws[0], q)
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, d := range m.draws {
		lo, hi = math.Min(lo, d[0]), math.Max(hi, d[len(d)-1])
	}
	// sinuosities: bisect ln(P - 1 + small), so that a heavy tail costs nothing
	const small = 1e-6
	a, b := math.Log(lo-1+small), math.Log(hi-1+small)
	for range 46 {
		mid := (a + b) / 2
		if m.atMost(1-small+math.Exp(mid)) >= q {
			b = mid
		} else {
			a = mid
		}
	}
	return math.Max(1, 1-small+math.Exp(b))
}

func (m *mixture) quantiles() *Quantiles {
	var q [len(usualShares)]float64
	for k, share := range usualShares {
		q[k] = m.quantile(share)
	}
	return &Quantiles{P2_5: q[0], P10: q[1], P25: q[2], P50: q[3], P75: q[4], P90: q[5], P97_5: q[6]}
}

// quantileOf is the linear-interpolation quantile of sorted values.
func quantileOf(x []float64, q float64) float64 {
	at := q * float64(len(x)-1)
	i := int(at)
	if i+1 >= len(x) {
		return x[len(x)-1]
	}
	return x[i] + (at-float64(i))*(x[i+1]-x[i])
}

// weighted is a value with its weight.
type weighted struct{ v, w float64 }

// weightedQuantiles sorts the values in place and returns those at which each
// share (ascending) of the total weight is reached.
func weightedQuantiles(x []weighted, shares ...float64) []float64 {
	var total float64
	for _, p := range x {
		total += p.w
	}
	slices.SortFunc(x, func(a, b weighted) int { return cmp.Compare(a.v, b.v) })
	out := make([]float64, len(shares))
	var sum float64
	k := 0
	for _, p := range x {
		sum += p.w
		for k < len(shares) && sum >= shares[k]*total*(1-1e-12) {
			out[k] = p.v
			k++
		}
	}
	for ; k < len(shares) && len(x) > 0; k++ {
		out[k] = x[len(x)-1].v
	}
	return out
}
