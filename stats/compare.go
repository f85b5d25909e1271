package stats

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// comparisons are the paired differences of R2 (sinuosity units) between the
// models, from the same resamples: first listed minus later listed.
func (s *study) comparisons() []Comparison {
	var out []Comparison
	for i, a := range s.models {
		for j := i + 1; j < len(s.models); j++ {
			b := s.models[j]
			if a.failure != "" || b.failure != "" {
				continue
			}
			c := Comparison{A: a.label, B: b.label, Difference: a.r2 - b.r2, Interval: noInterval, Scale: "sinuosity"}
			if s.boot != nil {
				c.Interval = s.difference(i, j)
			}
			out = append(out, c)
		}
	}
	return out
}

func (s *study) difference(i, j int) Interval {
	a, b := s.models[i], s.models[j]
	ea, eb := s.jobOf[i], s.jobOf[j]
	wa, wb, ka, kb := s.boot.width[ea], s.boot.width[eb], len(a.coef), len(b.coef)
	var v []float64
	for r := range min(s.boot.done[ea], s.boot.done[eb]) {
		if d := s.boot.val[ea][r*wa+ka] - s.boot.val[eb][r*wb+kb]; s.boot.ok[ea][r] && s.boot.ok[eb][r] && finite(d) {
			v = append(v, d)
		}
	}
	jack := make([]float64, len(s.pull[i]))
	for g := range jack {
		jack[g] = s.pull[i][g][ka] - s.pull[j][g][kb]
	}
	return s.intervalOf(v, a.r2-b.r2, jack)
}

// collinearity lists how far every pair of the predictors in use moves together.
func collinearity(t *table, req *Request) []Collinearity {
	if t.n() < 3 {
		return nil
	}
	predictors, categories := req.needs()
	var out []Collinearity
	add := func(a, b string, r float64) {
		if finite(r) {
			out = append(out, Collinearity{A: a, B: b, Correlation: r, VIF: 1 / (1 - r*r)})
		}
	}
	for i, a := range predictors {
		for _, b := range predictors[i+1:] {
			add(a, b, correlation(t.predictor[a], t.predictor[b]))
		}
		for _, c := range categories {
			add(a, c, math.Sqrt(etaSquared(t.predictor[a], t.category[c])))
		}
	}
	return out
}

// etaSquared is the share of the variance of x that goes with the categories.
func etaSquared(x []float64, category []string) float64 {
	mean, length := centreScale(x)
	sum, n := map[string]float64{}, map[string]float64{}
	for i, c := range category {
		sum[c] += x[i] - mean
		n[c]++
	}
	between := 0.0
	for _, c := range slices.Sorted(mapKeys(n)) {
		between += sum[c] * sum[c] / n[c]
	}
	return between / (length * length)
}

func mapKeys[V any](m map[string]V) func(func(string) bool) {
	return func(yield func(string) bool) {
		for k := range m {
			if !yield(k) {
				return
			}
		}
	}
}

// tooAlike is the correlation from which two predictors are called
// inseparable: a variance inflation of 10, the usual alarm; together the one
// from which half of the variance is shared.
const (
	tooAlike = 0.95
	together = 0.7
)

// separability says in sentences what these rows cannot separate.
func (s *study) separability(col []Collinearity, comparisons []Comparison) []string {
	var out []string
	for _, c := range col {
		switch r := math.Abs(c.Correlation); {
		case r < together:
			continue
		case r < tooAlike:
			out = append(out, fmt.Sprintf("%s and %s go together on these rows (r = %.2f, variance inflation %s): part of what one goes with is the other's. Fit them in one model (joint=%s,%s).",
				upperFirst(nameOf(c.A)), nameOf(c.B), c.Correlation, number(c.VIF), c.A, c.B))
			continue
		}
		out = append(out, fmt.Sprintf("%s and %s are nearly the same number on these rows (r = %.3f, variance inflation %s): no regression on them can tell the two apart. Take them as one explanation.",
			upperFirst(nameOf(c.A)), nameOf(c.B), c.Correlation, number(c.VIF)))
	}
	for _, c := range comparisons {
		a, b := s.byLabel(c.A), s.byLabel(c.B)
		if a == nil || b == nil || a.x == nil || b.x == nil || a.atEdge() || b.atEdge() || explanationOf(a.predictor) == explanationOf(b.predictor) {
			continue
		}
		if c.Interval.known() && !c.Interval.excludes(0) {
			out = append(out, fmt.Sprintf("These rows cannot say whether %s or %s goes better with sinuosity: the difference of R2 in sinuosity units (%s less %s) is %s, with whole %s resampled %s.",
				nameOf(a.predictor), nameOf(b.predictor), nameOf(a.predictor), nameOf(b.predictor), number(c.Difference), s.t.many(), between(c.Interval)))
		}
	}
	return append(out, s.supply()...)
}

// atEdge tells lines at an outer quantile: their R2 is no measure of anything.
func (f *fitted) atEdge() bool { return f.form == "quantile_10" || f.form == "quantile_90" }

func (s *study) byLabel(label string) *fitted {
	for _, f := range s.models {
		if f.label == label {
			return f
		}
	}
	return nil
}

// supplyCategories are the columns that record what feeds a channel. They are
// compared with latitude even when no model asks for them, as glacial supply
// and latitude go together in nature.
var supplyCategories = []string{"feeder", "large_river", "grain"}

// supply says where latitude and the recorded supply hold their R2 in common,
// or go together so closely that it could not be told.
func (s *study) supply() []string {
	lat := ""
	for _, f := range s.models {
		if f.failure == "" && isLatitude(f.predictor) && f.x != nil {
			lat = f.predictor
			break
		}
	}
	if lat == "" {
		return nil
	}
	var tied []tie
	for _, c := range supplyCategories {
		if t, ok := s.tieOf(lat, c); ok {
			tied = append(tied, t)
		}
	}
	if len(tied) == 0 {
		return nil
	}
	slices.SortStableFunc(tied, func(a, b tie) int { return cmp.Compare(b.common, a.common) })
	t := tied[0]
	text := fmt.Sprintf("Latitude and supply cannot be separated by these rows: %s goes with %s of the variance of %s (%s); on the scale of %s, %s alone has R2 %.2f, %s alone %.2f, and %.2f they hold in common.",
		nameOf(t.category), percent(t.eta), nameOf(lat), plural(t.rows, "row", "rows"), scaleName(s.req.Scale), nameOf(lat), t.alone, nameOf(t.category), t.other, t.common)
	if len(tied) > 1 {
		var names []string
		for _, o := range tied[1:] {
			names = append(names, nameOf(o.category))
		}
		text += " The same holds for " + list(names) + "."
	}
	return []string{text + fmt.Sprintf(" Add systems that break the pattern, or fit both in one model (joint=%s,%s).", lat, t.category)}
}

// tie is how far latitude and one category of supply go together: R2 of each
// alone and in common, on the scale fitted, and the share of the variance of
// latitude that goes with the category.
type tie struct {
	category                  string
	alone, other, common, eta float64
	rows                      int
}

// tiedEta is the share from which latitude and a category are called
// inseparable whatever sinuosity does.
const tiedEta = 0.4

// leastKnown is the share of rows that must record a category before it is
// compared with latitude.
const leastKnown = 0.5

func (s *study) tieOf(lat, category string) (tie, bool) {
	sub := &table{predictor: map[string][]float64{}, category: map[string][]string{}}
	var labels []string
	for i, v := range s.t.supply[category] {
		if v == "" || v == "unknown" {
			continue
		}
		sub.y = append(sub.y, s.t.y[i])
		sub.predictor[lat] = append(sub.predictor[lat], s.t.predictor[lat][i])
		sub.category[category] = append(sub.category[category], v)
		labels = append(labels, s.t.cluster.names[s.t.cluster.of[i]])
	}
	if float64(sub.n()) < leastKnown*float64(s.t.n()) || sub.n() < 12 {
		return tie{}, false
	}
	sub.cluster = newGrouping(labels)
	joint := newJointPlan(sub, []string{lat, category}, [2]string{}, s.req.Scale)
	if joint.refusal() != "" || sub.cluster.count() < 6 {
		return tie{}, false
	}
	both, err := FitLinear(joint.cols, joint.z)
	if err != nil {
		return tie{}, false
	}
	alone, err1 := FitLinear(joint.cols[:1], joint.z)
	other, err2 := FitLinear(joint.cols[1:], joint.z)
	if err1 != nil || err2 != nil {
		return tie{}, false
	}
	out := tie{category: category, alone: alone.R2, other: other.R2, common: alone.R2 + other.R2 - both.R2,
		eta: etaSquared(sub.predictor[lat], sub.category[category]), rows: sub.n()}
	smaller := math.Min(out.alone, out.other)
	return out, out.eta >= tiedEta || smaller >= 0.05 && out.common >= 0.5*smaller
}
