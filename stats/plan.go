package stats

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// plan is one model laid out on the rows of a table: what is fitted on what.
type plan struct {
	label     string // FORM:PREDICTOR, or joint:a+b
	form      string
	predictor string
	scale     string
	names     []string    // of the coefficients
	cols      [][]float64 // columns as fitted, without the intercept
	x         []float64   // the predictor in its own unit; nil for a joint model
	z         []float64   // the response as fitted
	y         []float64   // the response in sinuosity units
	terms     []term
	levels    []Level
	none      bool // no row came in at all
}

// term is a run of columns that stand for one predictor, category or
// interaction: cols[from:to].
type term struct {
	name     string
	from, to int
}

// isLeastSquares tells the forms that are straight lines on some scale.
func isLeastSquares(form string) bool {
	switch form {
	case "linear", "logarithmic", "exponential", "power", "inverse", "joint":
		return true
	}
	return false
}

// coefficientNames follow the contract: intercept first; exponential and power
// report ln a then b; floor_decay a, b; broken_line four.
func coefficientNames(form, predictor string) []string {
	switch form {
	case "logarithmic":
		return []string{"intercept", "ln " + predictor}
	case "inverse":
		return []string{"intercept", "1/" + predictor}
	case "exponential", "power":
		return []string{"ln a", "b"}
	case "floor_decay":
		return []string{"a", "b"}
	case "broken_line":
		return []string{"intercept", "slope below", "slope above", "breakpoint"}
	}
	return []string{"intercept", predictor}
}

// slopeIndex is the coefficient that carries the relation of a model with one
// predictor: the one headlines and influence speak of.
func slopeIndex(string) int { return 1 }

func newPlan(t *table, m ModelSpec, scale string) *plan {
	p := &plan{none: t.considered == 0, label: m.String(), form: m.Form, predictor: m.Predictor, scale: scaleOf(m.Form, scale),
		names: coefficientNames(m.Form, m.Predictor), x: t.predictor[m.Predictor], y: t.y}
	p.z = scaled(p.scale, t.y)
	c := make([]float64, t.n())
	for i, v := range p.x {
		c[i] = transform(m.Form, m.Predictor, v).value
	}
	p.cols = [][]float64{c}
	p.terms = []term{{m.Predictor, 0, 1}}
	return p
}

func scaled(scale string, y []float64) []float64 {
	z := make([]float64, len(y))
	for i, v := range y {
		z[i] = toScale(scale, v)
	}
	return z
}

// newJointPlan lays out several predictors and categories: categories by
// treatment coding against the alphabetically first level, an interaction as
// the products of its members' columns.
func newJointPlan(t *table, members []string, interaction [2]string, scale string) *plan {
	p := &plan{none: t.considered == 0, form: "joint", predictor: strings.Join(members, ","), label: "joint:" + strings.Join(members, "+"),
		scale: scale, names: []string{"intercept"}, y: t.y, z: scaled(scale, t.y)}
	for _, name := range members {
		from := len(p.cols)
		if x, ok := t.predictor[name]; ok {
			p.cols, p.names = append(p.cols, x), append(p.names, name)
		} else {
			p.addCategory(name, t.category[name])
		}
		p.terms = append(p.terms, term{name, from, len(p.cols)})
	}
	if interaction[0] != "" {
		a, b := p.term(interaction[0]), p.term(interaction[1])
		from := len(p.cols)
		for i := a.from; i < a.to; i++ {
			for j := b.from; j < b.to; j++ {
				c := make([]float64, t.n())
				for k := range c {
					c[k] = p.cols[i][k] * p.cols[j][k]
				}
				p.cols, p.names = append(p.cols, c), append(p.names, p.names[i+1]+":"+p.names[j+1])
			}
		}
		name := interaction[0] + ":" + interaction[1]
		p.terms = append(p.terms, term{name, from, len(p.cols)})
		p.label += "+" + name
	}
	return p
}

func (p *plan) addCategory(name string, values []string) {
	levels := slices.Compact(slices.Sorted(slices.Values(values)))
	l := Level{Category: name, Levels: levels, Rows: make([]int, len(levels))}
	for _, v := range values {
		l.Rows[slices.Index(levels, v)]++
	}
	p.levels = append(p.levels, l)
	for _, level := range levels[min(1, len(levels)):] {
		c := make([]float64, len(values))
		for i, v := range values {
			if v == level {
				c[i] = 1
			}
		}
		p.cols, p.names = append(p.cols, c), append(p.names, name+"="+level)
	}
}

func (p *plan) term(name string) term {
	for _, t := range p.terms {
		if t.name == name {
			return t
		}
	}
	return term{}
}

// refusal says in a sentence why the model cannot be fitted, or "".
func (p *plan) refusal() string {
	n, k := len(p.y), len(p.names)
	if n == 0 && p.none {
		return "There is no row to fit."
	}
	if n == 0 {
		return "No rows are left for this model. Widen the filter, or ask for fewer predictors at once."
	}
	if n < k+2 {
		return fmt.Sprintf("%s for %s; at least %d are needed. Widen the filter.", plural(n, "row is too few", "rows are too few"), plural(k, "coefficient", "coefficients"), k+2)
	}
	for _, l := range p.levels {
		if len(l.Levels) < 2 {
			return fmt.Sprintf("Every row has the %s %q, so there is nothing to compare. Leave %s out.", nameOf(l.Category), strings.ReplaceAll(l.Levels[0], "_", " "), nameOf(l.Category))
		}
	}
	if constant(p.y) {
		return fmt.Sprintf("Every sinuosity is %s (%s), so there is nothing to fit. Widen the filter.", number(p.y[0]), plural(n, "row", "rows"))
	}
	for j, c := range p.cols {
		if constant(c) {
			return fmt.Sprintf("%s is the same in %s, so nothing can be told about it. Widen the filter, or leave it out.", upperFirst(coefficientText(p.names[min(j+1, len(p.names)-1)])), map[bool]string{true: "the only row", false: fmt.Sprintf("all %d rows", n)}[n == 1])
		}
	}
	return ""
}

func constant(v []float64) bool {
	lo, hi := slices.Min(v), slices.Max(v)
	return hi-lo <= 1e-12*math.Max(math.Abs(lo), math.Abs(hi))
}

// backR2 is R2 in sinuosity units of fitted values on the plan's scale.
func backR2(p *plan, fitted []float64) float64 {
	_, length := centreScale(p.y)
	rss := 0.0
	for i, z := range fitted {
		e := p.y[i] - fromScale(p.scale, z)
		rss += e * e
	}
	return 1 - rss/(length*length)
}
