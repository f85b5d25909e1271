package stats

import (
	"fmt"
	"math"
	"slices"
)

// leading is the model with the best leave-one-cluster-out R2 (R2 itself where
// there is none), or -1.
func leading(models []Model) int {
	best, at := math.Inf(-1), -1
	for i, m := range models {
		if m.Failure != "" || m.Form == "quantile_10" || m.Form == "quantile_90" {
			continue // a line at the edge is not meant to predict the middle
		}
		v := m.OutOfSampleR2
		if !finite(v) {
			v = m.RSquared - 10
		}
		if v > best {
			best, at = v, i
		}
	}
	return at
}

// slope is the coefficient that carries a model's relation.
func (m *Model) slope() *Coefficient {
	if j := slopeIndex(m.Form); j < len(m.Coefficients) {
		return &m.Coefficients[j]
	}
	return nil
}

// leastShare is the lower end of the interval of R2 from which a model counts
// as found: below it the end would be printed as 0 %.
const leastShare = 0.005

// judge marks the models that find something. Four things must agree: the
// sign-flip test holds after division by the number of separate explanations
// asked about (Bonferroni; latitude, its sine and the Coriolis parameter are
// one), some interval of the slope excludes zero, the interval of R2 does not
// reach down to 0 %, and the model predicts left-out clusters better than the
// mean does.
func judge(models []Model, level float64) {
	var asked []string
	for _, m := range models {
		if e := explanationOf(m.Predictor); m.Failure == "" && !slices.Contains(asked, e) {
			asked = append(asked, e)
		}
	}
	for i := range models {
		m := &models[i]
		if m.Failure != "" {
			continue
		}
		m.alpha = (1 - level) / float64(max(len(asked), 1))
		holds := m.PermutationP <= m.alpha
		m.Found = holds && m.OutOfSampleR2 > 0 && m.RSquaredInterval[0] >= leastShare && (m.Form == "joint" || m.anyExcludesZero())
	}
}

func (m *Model) anyExcludesZero() bool {
	c := m.slope()
	if c == nil {
		return false
	}
	for kind, i := range c.Intervals {
		if kind != "row_bootstrap" && i.excludes(0) {
			return true
		}
	}
	return false
}

// headline is the answer in one or two sentences.
func (s *study) headline(models []Model) string {
	k := leading(models)
	if s.t.n() == 0 {
		return s.nothingLeft()
	}
	if k < 0 {
		return fmt.Sprintf("Nothing can be said from %s: %s", plural(s.t.n(), "row", "rows"), models[0].Failure)
	}
	m := &models[k]
	if s.boot == nil {
		return fmt.Sprintf("Nothing is found: %s one %s, so no interval can be given.", plural(s.t.n(), "row comes from", "rows come from"), s.t.one())
	}
	goes := fmt.Sprintf("%s goes with %s of the variance here, whole %s resampled: %s", upperFirst(m.subject()), percent(m.RSquared), s.t.many(), percents(m.RSquaredInterval))
	if s.req.Cluster == "none" {
		goes = fmt.Sprintf("%s goes with %s of the variance here, rows resampled as if independent: %s", upperFirst(m.subject()), percent(m.RSquared), percents(m.RSquaredInterval))
	}
	text := goes + "."
	switch c := m.slope(); {
	case !m.Found && m.RSquared < leastShare:
		text = fmt.Sprintf("Nothing is found: %s goes with no part of the variance here (%s).", m.subject(), m.whyNot(s))
	case !m.Found && m.related():
		text = goes + fmt.Sprintf(", but it is not a relation to predict from: %s.", m.whyNot(s))
	case !m.Found:
		text = fmt.Sprintf("Nothing is found: %s, which these rows cannot tell from no relation (%s).", lowerFirst(goes), m.whyNot(s))
	case m.Form == "joint":
	case !c.Interval.excludes(0):
		text = goes + fmt.Sprintf(", but its coefficient may lie anywhere from %s, zero included, because %s %s carries the estimate.", between(c.Interval), s.t.one(), m.Carrier)
	}
	return text + s.withoutSentence(m)
}

// nothingLeft says why there are no rows: an empty catalogue cannot be helped
// by a wider filter.
func (s *study) nothingLeft() string {
	if s.t.considered == 0 && s.req.Chosen == "" {
		return "The catalogue holds no row for this question yet: nothing can be said. Add measurements, or look at another kind of channel."
	}
	if s.t.considered == 0 {
		return "No row passes the filter: nothing can be said. Widen it."
	}
	return "No rows are left for this question: nothing can be said. Ask for fewer predictors at once, or widen the filter."
}

// subject is what a headline speaks of.
func (m *Model) subject() string {
	if m.Form == "joint" {
		return list(mapSlice(splitComma(m.Predictor), nameOf)) + " together"
	}
	return nameOf(m.Predictor)
}

// related says whether a model that does not count as found still stands apart
// from no relation at all: both its sign-flip test and the interval asked for
// say so.
func (m *Model) related() bool {
	c := m.slope()
	return m.Form != "joint" && c != nil && m.PermutationP <= m.alpha && c.Interval.excludes(0)
}

// whyNot gives the reason a model does not count as found.
func (m *Model) whyNot(s *study) string {
	p := "p = " + number(m.PermutationP)
	c := m.slope()
	switch {
	case !(m.OutOfSampleR2 > 0):
		return p + fmt.Sprintf(", and it predicts left-out %s no better than their mean", s.t.many())
	case m.PermutationP <= 1-s.req.Level && !(m.RSquaredInterval[0] >= leastShare):
		return p + ", but its share of the variance may be as low as 0 %"
	case m.Form != "joint" && c != nil && c.Interval.known() && !c.Interval.excludes(0):
		return p + fmt.Sprintf(", and its coefficient may lie anywhere from %s, zero included", between(c.Interval))
	}
	return p
}

// ruling is how far one system must move R2 to be named in the headline.
const ruling = 0.1

// withoutSentence names the system that moves R2 by more than 0.1.
func (s *study) withoutSentence(m *Model) string {
	if len(m.Influence) == 0 {
		return ""
	}
	i := m.Influence[0]
	switch {
	case !finite(i.RSquaredWithout):
		return fmt.Sprintf(" Without %s it cannot be fitted.", i.SystemName)
	case math.Abs(i.RSquaredWithout-m.RSquared) > ruling:
		return fmt.Sprintf(" Without %s it is %s.", i.SystemName, percent(i.RSquaredWithout))
	}
	return ""
}

func kindName(kind string) string {
	return map[string]string{"studentised": "studentised", "cr2": "CR2", "bca": "BCa", "percentile": "percentile"}[kind]
}
