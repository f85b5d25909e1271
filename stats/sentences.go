package stats

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// fewClusters is the number of clusters under which every interval is warned of.
const fewClusters = 10

// warnings are all warning sentences of the page. Where one advises a setting,
// the setting's parameter stands in a bracket of its own, (name=value), after
// the words for it: documents and terminals keep it, pages leave it out.
func (s *study) warnings(a *Analysis) []string {
	var out []string
	add := func(format string, args ...any) { out = append(out, fmt.Sprintf(format, args...)) }
	g, noun := s.t.cluster.count(), s.t.many()
	switch {
	case s.t.n() == 0:
	case g == 1:
		add("All rows belong to one %s, so no interval or test is possible. Widen the filter, or choose another cluster.", s.t.one())
	case g < fewClusters:
		add("Only %d %s: every interval here is rough and probably too narrow. Take none of them as settled; widen the filter if you can.", g, noun)
	}
	if s.req.Cluster == "none" && s.t.n() > 0 {
		add("Rows are resampled as if they were independent (cluster=none). Rows of one deposit are not: these intervals are too narrow. Resample whole parent deposits (cluster=parent_deposit).")
	}
	out = append(out, s.mixed()...)
	out = append(out, s.ranges()...)
	out = append(out, s.oddSlopes()...)
	for _, m := range s.out {
		if m.Failure != "" {
			add("%s was not fitted. %s", m.name(), m.Failure)
			continue
		}
		out = append(out, s.modelWarnings(&m)...)
	}
	if s.req.MeasurementError && s.t.n() > 0 {
		out = append(out, s.statedErrors())
	}
	if unlikeScales(s.out) {
		add("AICc is not compared: the models are fitted on different response scales, and a likelihood of ln P is not one of P. Compare the out-of-sample R2, which is in sinuosity units for all, or fit all on one scale.")
	}
	if s.anyEqualOne() && s.req.Scale == "raw" && len(s.out) > 0 {
		n := 0
		for _, y := range s.t.y {
			if y == 1 {
				n++
			}
		}
		add("%s a sinuosity of exactly 1, which has no ln(P - 1): on that scale (scale=ln_excess) %s would be dropped.", plural(n, "row has", "rows have"), map[bool]string{true: "it", false: "they"}[n == 1])
	}
	return append(out, a.Separability...)
}

func (s *study) anyEqualOne() bool { return slices.Contains(s.t.y, 1.0) }

// name is the model with its group.
func (m *Model) name() string {
	if m.Group != "" {
		return m.Model + " (" + m.Group + ")"
	}
	return m.Model
}

// mixed warns of definitions mixed in one response.
func (s *study) mixed() []string {
	var out []string
	if s.req.Response == "any" {
		if text := tally(s.t.sinuosityKind); text != "" {
			out = append(out, "The rows mix kinds of sinuosity ("+text+"): a peak is larger than a mean of the same channel, so part of the scatter is definition. Keep to one kind where it has rows enough (response=peak, say).")
		}
	}
	if s.req.MeasuredLine == "all" {
		if text := tally(s.t.measuredLine); text != "" {
			out = append(out, "The rows mix measured lines ("+text+"): a levee crest is straighter than its thalweg. Keep to one line where it has rows enough (measured_line=thalweg, say).")
		}
	}
	return out
}

// tally counts values, "" where there is only one.
func tally(values []string) string {
	count := map[string]int{}
	for _, v := range values {
		count[orUnknown(v)]++
	}
	if len(count) < 2 {
		return ""
	}
	var parts []string
	for _, k := range slices.Sorted(mapKeys(count)) {
		parts = append(parts, fmt.Sprintf("%d %s", count[k], strings.ReplaceAll(k, "_", " ")))
	}
	return list(parts)
}

func (s *study) modelWarnings(m *Model) []string {
	var out []string
	add := func(format string, args ...any) {
		out = append(out, m.name()+": "+fmt.Sprintf(format, args...))
	}
	c := m.slope()
	if m.ResamplesUsed > 0 && m.DegenerateResamples > 0 {
		advice := "its intervals rest on the others."
		if 10*m.DegenerateResamples > m.ResamplesUsed {
			advice = "its intervals rest on the others and are not to be trusted. Leave out the category or predictor that hangs on few " + s.t.many() + "."
		}
		add("%d of %d resamples could not be fitted; %s", m.DegenerateResamples, m.ResamplesUsed, advice)
	}
	if m.ResamplesUsed > 0 && m.ResamplesUsed < s.req.Resamples {
		add("%d resamples are used, not %d: with %s more would take too long.", m.ResamplesUsed, s.req.Resamples, s.size())
	}
	if m.FlipsUsed > 0 && m.FlipsUsed < s.req.Permutations {
		add("its test uses %d sign flips, not %d: with %s more would take too long.", m.FlipsUsed, s.req.Permutations, s.size())
	}
	for _, l := range m.Levels {
		for i, n := range l.Rows {
			if n == 1 {
				add("%s = %s has one row, and its coefficient fits that row alone. Join it with another level, or leave it out.", l.Category, l.Levels[i])
			}
		}
	}
	if c != nil && m.Form != "joint" {
		if t := disagreement(c, m, s); t != "" {
			add("%s", t)
		}
		if t := clusteringSentence(c, s); t != "" {
			add("%s", t)
		}
	}
	if len(m.Influence) > 0 && math.Abs(m.Influence[0].RSquaredWithout-m.RSquared) > ruling {
		i := m.Influence[0]
		add("one system decides: without %s R2 is %.2f in place of %.2f. Look at its record before you quote either.", i.SystemName, i.RSquaredWithout, m.RSquared)
	}
	if t := s.leverage(m); t != "" {
		add("%s", t)
	}
	for _, t := range m.Terms {
		if t.VIF > 5 {
			add("%s is tied to the other members (variance inflation %s): its coefficient cannot be told from theirs. Leave one of them out.", upperFirst(nameOf(t.Name)), number(t.VIF))
		}
	}
	return out
}

// disagreement: the interval kinds differ about zero, or in width by more than
// half.
func disagreement(c *Coefficient, m *Model, s *study) string {
	kinds := []string{"studentised", "cr2", "bca"}
	var known []string
	zero, wide, narrow := 0, 0.0, math.Inf(1)
	text := ""
	for _, k := range kinds {
		i, ok := c.Intervals[k]
		if !ok || !i.known() {
			continue
		}
		known = append(known, k)
		if i.excludes(0) {
			zero++
		}
		wide, narrow = math.Max(wide, i.width()), math.Min(narrow, i.width())
		if text != "" {
			text += ", "
		}
		text += kindName(k) + " " + between(i)
	}
	if len(known) < 2 {
		return ""
	}
	overZero := zero > 0 && zero < len(known)
	if !overZero && narrow > 0.5*wide {
		return ""
	}
	about := "in width"
	if overZero {
		about = "about zero"
	}
	return fmt.Sprintf("the intervals of %s disagree %s (%s), because %s %s carries the estimate. Quote the widest, and say why.", coefficientText(c.Name), about, text, s.t.one(), m.Carrier)
}

// clusteringSentence puts the intervals with and without clustering side by
// side when they differ by more than half.
func clusteringSentence(c *Coefficient, s *study) string {
	rows, ok := c.Intervals["row_bootstrap"]
	whole, kinds := c.Intervals["bca"], "BCa both"
	if hc1, many := c.Intervals["rows_hc1"]; many {
		rows, ok, kinds = hc1, true, "HC1 against BCa"
	}
	if !ok || !rows.known() || !whole.known() {
		return ""
	}
	ratio := whole.width() / rows.width()
	if ratio < 1.5 && ratio > 0.5 {
		return ""
	}
	verdict := ""
	switch {
	case rows.excludes(0) && !whole.excludes(0):
		verdict = " Rows taken for independent would say that it matters; whole " + s.t.many() + " say that it cannot be told."
	case !rows.excludes(0) && whole.excludes(0):
		verdict = " Only the clustered interval excludes zero."
	}
	return fmt.Sprintf("clustering changes the interval of %s by more than half: rows resampled %s, whole %s resampled %s (%s).%s Use the second.",
		coefficientText(c.Name), between(rows), s.t.many(), between(whole), kinds, verdict)
}

// leverage warns when one row alone holds more than half of the leverage of an
// inverse model.
func (s *study) leverage(m *Model) string {
	if m.Form != "inverse" {
		return ""
	}
	worst := Influence{Leverage: math.Inf(-1)}
	for _, i := range m.Influence {
		if i.Leverage > worst.Leverage {
			worst = i
		}
	}
	if !(worst.Leverage > 1) {
		return ""
	}
	return fmt.Sprintf("%s has a leverage of %.2f of 2: the inverse of %s is ruled by the system nearest to zero. Prefer a decay to the floor (model=floor_decay:%s).", worst.SystemName, worst.Leverage, nameOf(m.Predictor), m.Predictor)
}

// Spans under which a predictor hardly varies: a decade of what spans decades, a
// third of the globe's latitudes.
const (
	narrowDecade   = 10.0
	narrowLatitude = 30.0 // degrees
)

// ranges warns of predictors that the rows hardly vary.
func (s *study) ranges() []string {
	var out []string
	predictors, _ := s.req.needs()
	for _, p := range predictors {
		x := s.t.predictor[p]
		if len(x) < 2 {
			continue
		}
		lo, hi := slices.Min(x), slices.Max(x)
		switch {
		case logAxis(p) && lo > 0 && hi < narrowDecade*lo, p == "abs_latitude" && hi-lo < narrowLatitude:
			out = append(out, fmt.Sprintf("The rows span only %s to %s of %s: what is found here says nothing about values outside, and a relation can hide in so short a span. Widen the filter.", number(lo), number(hi), nameOf(p)))
		}
	}
	return out
}

// Valley slopes outside these limits are likely degrees or per mille typed as
// m/m (common practice, no source; the same limits warn at the import).
const (
	leastSlope    = 1e-4 // m/m
	greatestSlope = 0.1  // m/m
)

// oddSlopes names the steepest row outside the usual limits: one such row can
// rule a straight line in slope.
func (s *study) oddSlopes() []string {
	predictors, _ := s.req.needs()
	if !slices.Contains(predictors, "valley_slope") && !slices.Contains(predictors, "log10_slope") {
		return nil
	}
	odd, worst := 0, -1
	for i, r := range s.t.source {
		if r.ValleySlope >= leastSlope && r.ValleySlope <= greatestSlope {
			continue
		}
		odd++
		if worst < 0 || r.ValleySlope > s.t.source[worst].ValleySlope {
			worst = i
		}
	}
	if odd == 0 {
		return nil
	}
	return []string{fmt.Sprintf("%s a valley slope outside %s to %s m/m (%s: %s): is it degrees or per mille? Such a row can rule a slope fit by itself. Check the record, or leave it out by a largest valley slope of %s (slope_max=%s).",
		plural(odd, "row has", "rows have"), number(leastSlope), number(greatestSlope), s.t.label[worst], number(s.t.source[worst].ValleySlope), number(greatestSlope), number(greatestSlope))}
}

func (s *study) size() string {
	return fmt.Sprintf("%s in %s", plural(s.t.n(), "row", "rows"), plural(s.t.cluster.count(), s.t.one(), s.t.many()))
}
