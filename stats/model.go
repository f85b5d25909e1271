package stats

import (
	"errors"
	"fmt"
	"math"
)

// fitted is one model fitted on all rows of a table, with what is needed to
// refit it on any weighting of clusters, systems or rows.
type fitted struct {
	*plan
	t         *table
	coef, se  []float64
	r2        float64 // in sinuosity units
	r2Fitted  float64 // on the scale fitted
	rss       float64 // on the scale fitted
	sigma     float64
	predicted []float64 // sinuosity units
	resid     []float64 // on the scale fitted

	cluster, system, row estimator
	robust               func(e estimator) robust // nil where no linearisation is defined
	nl                   *NonlinearFit            // of a decay
	failure              string

	rowIntervals []Interval // see rowErrors
	likelihood   bool       // residuals have a Gaussian likelihood: AICc is defined
}

// maxRowFormRows bounds the forms whose resamples go through the rows.
const maxRowFormRows = 20_000

// robust is the linearised model on one grouping.
type robust struct {
	terms    *clusterTerms
	contrast func(j int) (c []float64, unit float64)
	shift    func(from, to []float64) []float64 // difference of two coefficient vectors, as the terms count them
	unit     float64                            // residual standard deviation in the unit of the terms
}

// fitPlan fits p on the rows of t. A model that cannot be fitted comes back
// with its failure, not with an error.
func fitPlan(t *table, p *plan) *fitted {
	f := &fitted{plan: p, t: t}
	if f.failure = p.refusal(); f.failure != "" {
		return f
	}
	switch {
	case isLeastSquares(p.form):
		f.leastSquares()
	case p.form == "floor_decay":
		f.decay()
	case t.n() > maxRowFormRows:
		f.failure = fmt.Sprintf("%s goes through the rows in every resample and takes at most %d of them; there are %d. Narrow the filter, or use a straight line.", upperFirst(p.form), maxRowFormRows, t.n())
	case p.form == "broken_line":
		f.broken()
	case p.form == "theil_sen":
		f.theilSen()
	default:
		f.quantile()
	}
	if f.failure != "" {
		return f
	}
	f.predicted = make([]float64, t.n())
	for i := range f.predicted {
		f.predicted[i] = f.at(f.coef, i)
	}
	f.cluster = f.compile(&t.cluster)
	return f
}

func (f *fitted) leastSquares() {
	ls, err := FitLinear(f.cols, f.z)
	var c *CollinearError
	switch {
	case errors.As(err, &c):
		f.failure = fmt.Sprintf("%s is a combination of the predictors before it on these rows, so its coefficient is not defined. Leave one of them out.", upperFirst(f.names[c.Column+1]))
		return
	case err != nil:
		f.failure = upperFirst(err.Error()) + "."
		return
	}
	f.coef, f.se, f.r2Fitted, f.rss, f.sigma, f.resid = ls.Coef, ls.SE, ls.R2, ls.RSS, ls.Sigma, ls.Residual
	if f.r2 = ls.R2; f.scale != "raw" {
		f.r2 = backR2(f.plan, ls.Fitted)
	}
	f.likelihood = true
	f.robust = func(e estimator) robust {
		m := momentsOf(e)
		return robust{terms: m.terms(ls), contrast: m.contrast, unit: f.sigma / m.zSD, shift: m.shift}
	}
}

func momentsOf(e estimator) *moments {
	if l, ok := e.(line); ok {
		return l.moments
	}
	return e.(plane).moments
}

// shift is the difference of two coefficient vectors on the scaled columns.
func (m *moments) shift(from, to []float64) []float64 {
	d := make([]float64, m.q+1)
	d[0] = (to[0] - from[0]) / m.zSD
	for j := range m.q {
		diff := to[j+1] - from[j+1]
		d[j+1] = diff * m.sd[j] / m.zSD
		d[0] += diff * m.mean[j] / m.zSD
	}
	return d
}

func (f *fitted) decay() {
	nl, err := fitDecay(f.x, f.y)
	if err != nil {
		f.failure = "The fall to the floor does not settle on these rows: sinuosity may not fall with " + nameOf(f.predictor) + " at all. Use another form."
		return
	}
	f.coef, f.se, f.rss, f.sigma = nl.Coef, nl.SE, nl.RSS, nl.Sigma
	_, length := centreScale(f.y)
	f.r2 = 1 - nl.RSS/(length*length)
	f.r2Fitted = f.r2
	f.resid, f.likelihood = f.residuals(), true
	f.nl = nl
	f.robust = func(e estimator) robust {
		d := e.(*decay)
		scaled := func(c []float64) [2]float64 { return [2]float64{c[0] * math.Exp(-c[1]*d.mid), c[1] * d.half} }
		return robust{terms: d.terms(), contrast: d.contrast, unit: f.sigma,
			shift: func(from, to []float64) []float64 {
				a, b := scaled(from), scaled(to)
				return []float64{b[0] - a[0], b[1] - a[1]}
			}}
	}
}

// compile lays the model on groups of its rows.
func (f *fitted) compile(g *grouping) estimator {
	switch f.form {
	case "floor_decay":
		return newDecay(f.plan, g, f.nl)
	case "broken_line":
		return newBroken(f.plan, g)
	case "theil_sen":
		return newTheilSen(f.plan, g)
	case "quantile_10", "quantile_50", "quantile_90":
		q := newQuantileLine(f.plan, g, quantileTau(f.form))
		q.warm = f.coef[1] * q.sx / q.sz
		return q
	}
	m := newMoments(f.plan, g)
	if m.q == 1 {
		return line{m}
	}
	return plane{m}
}

// residuals on the scale fitted, of a model with one predictor.
func (f *fitted) residuals() []float64 {
	out := make([]float64, len(f.z))
	for i, z := range f.z {
		out[i] = z - f.level(f.coef, f.x[i])
	}
	return out
}

// at is the fitted sinuosity of row i under a set of coefficients.
func (f *fitted) at(coef []float64, i int) float64 {
	if f.x == nil {
		z := coef[0]
		for j, c := range f.cols {
			z += coef[j+1] * c[i]
		}
		return fromScale(f.scale, z)
	}
	return f.curve(coef, f.x[i])
}

// curve is the fitted sinuosity at x (in the predictor's own unit) of a model
// with one predictor.
func (f *fitted) curve(coef []float64, x float64) float64 {
	return fromScale(f.scale, f.level(coef, x))
}

// level is curve on the scale fitted.
func (f *fitted) level(coef []float64, x float64) float64 {
	switch f.form {
	case "floor_decay":
		return 1 + coef[0]*math.Exp(-coef[1]*x)
	case "broken_line":
		return coef[0] + coef[1]*math.Min(x, coef[3]) + coef[2]*math.Max(0, x-coef[3])
	}
	return coef[0] + coef[1]*transform(f.form, f.predictor, x).value
}
