package expectation

import (
	"context"
	"fmt"
	"math"

	"fathombend/stats"
	"fathombend/stats/earth"
)

// DeepTimeResult is the test of f against climate state and against plain
// latitude on ancient rows.
type DeepTimeResult struct {
	Response        string           `json:"response"`
	MeasuredLine    string           `json:"measured_line"`
	ModernRows      int              `json:"modern_rows"`
	ModernClusters  int              `json:"modern_clusters"`
	AncientRows     int              `json:"ancient_rows"`
	AncientClusters int              `json:"ancient_clusters"`
	InventedRows    int              `json:"invented_rows"`
	PrivateRows     int              `json:"private_rows,omitempty"` // that only some people see
	Scatter         float64          `json:"scatter"`                // standard deviation of ln(P - 1) between new systems
	Comparisons     []DeepComparison `json:"comparisons"`
	Needed          []Needed         `json:"needed"`
	Headline        string           `json:"headline"`
	Failure         string           `json:"failure,omitempty"`
	Cautions        []string         `json:"cautions"`
}

// DeepComparison compares how two rules score the ancient rows. Differences
// are sums over ancient deposits of the log score, first rule minus second.
type DeepComparison struct {
	A string `json:"a"`
	B string `json:"b"`
	// Fitted on modern rows only; its error holds that of the modern fit.
	Modern   float64 `json:"modern_fit_difference"`
	ModernSE float64 `json:"modern_fit_se"`
	// Fitted on all rows but the deposit scored, so that an error of the
	// modern slope is not taken for a difference between the rules.
	All   float64 `json:"refitted_difference"`
	AllSE float64 `json:"refitted_se"`

	Shift     float64 `json:"shift"`     // root mean square difference of the two expectations of ln(P - 1)
	Power     float64 `json:"power"`     // chance to tell them apart with these ancient deposits
	Needed    float64 `json:"needed"`    // ancient systems in as many deposits for a power of 80 %
	Preferred string  `json:"preferred"` // "" = not yet
	Text      string  `json:"text"`
}

// Needed is how many ancient systems of one age would tell f from latitude.
type Needed struct {
	AgeMa         float64 `json:"age_ma"`
	RotationRatio float64 `json:"rotation_ratio"`
	Shift         float64 `json:"shift"`
	Systems       float64 `json:"systems"`
}

// Normal quantiles: two-sided 5 %, and 80 % power.
const (
	z975 = 1.959963984540054
	z80  = 0.8416212335729143
)

// DeepTime fits the modern rows, scores the ancient rows under f, under
// climate state and under plain latitude, and says which rule they prefer, by
// how much, with how many rows and with what power.
func DeepTime(ctx context.Context, rows []stats.Row, o Options) (*DeepTimeResult, error) {
	o, err := o.withDefaults()
	if err != nil {
		return nil, err
	}
	f := newFrame(rows, o, 0)
	res := &DeepTimeResult{Response: f.response, MeasuredLine: f.line, InventedRows: f.invented, PrivateRows: f.private, Scatter: math.NaN(),
		Cautions: []string{
			"Ancient systems were found by other methods and kept by other chances than modern ones: survey and preservation are confounded with age, and so with climate state.",
			"A global icehouse is not ice at this margin, and relict channels ran at a glacial lowstand: supply counts as it was when the channel was active.",
			"Boundaries of climate states from memory are marked so in their table.",
		}}
	modern, ancient := map[int]bool{}, map[int]bool{}
	for i := range f.obs {
		if ob := &f.obs[i]; ob.modern {
			res.ModernRows++
			modern[ob.cluster] = true
		} else {
			res.AncientRows++
			ancient[ob.cluster] = true
		}
	}
	res.ModernClusters, res.AncientClusters = len(modern), len(ancient)
	rules := deepRules(ctx, f)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	if rules[0].modern.failure != "" {
		res.Failure = "The modern rows cannot be fitted. " + rules[0].modern.failure
		res.Headline = "Not yet: " + res.Failure
		return res, nil
	}
	res.Scatter = rules[0].modern.s
	for _, k := range []int{1, 2} {
		res.Comparisons = append(res.Comparisons, compareRules(f, rules[0], rules[k]))
	}
	res.Needed = neededByAge(rules[0].modern)
	res.Headline = deepHeadline(res)
	return res, nil
}

// rule is one account of the ancient rows, fitted on modern rows and on all.
type rule struct {
	name        string
	modern, all *fitted
}

func deepRules(ctx context.Context, f *frame) []rule {
	var out []rule
	for _, m := range []model{
		{name: nameCoriolis, plain: []column{columnF}},
		{name: nameClimate, plain: []column{columnIce}},
		{name: nameLatitude, plain: []column{columnSin}},
	} {
		onModern := m
		onModern.modernOnly = true
		out = append(out, rule{m.name, fitModel(ctx, onModern, f, nil), fitModel(ctx, m, f, nil)})
	}
	return out
}

// score is the log density of ancient row i, its mean and its scale under a
// fit on modern rows; the error of the row's palaeolatitude is in the scale.
func (t *fitted) scoreAncient(i int) (logDensity, mean, scale float64, x []float64) {
	ob := &t.frame.obs[i]
	x = make([]float64, t.p)
	t.columns(&ob.inputs, x)
	for k := range x {
		mean += x[k] * t.beta[k]
	}
	slope := t.beta[1] * math.Cos(ob.latDeg*math.Pi/180) * ob.latSE * math.Pi / 180
	if t.name == nameCoriolis {
		slope *= fUnit * ob.ratio
	} else if t.name == nameClimate && ob.state != icehouse {
		slope = 0
	}
	scale = math.Sqrt(t.s*t.s + quadratic(t.v, x) + slope*slope)
	return logStudent((ob.y-mean)/scale, t.df) - math.Log(scale) - ob.y, mean, scale, x
}

func compareRules(f *frame, a, b rule) DeepComparison {
	c := DeepComparison{A: a.name, B: b.name}
	var own, refitted moments
	var shift, n float64
	gradient := make([]float64, a.modern.p)
	for k := range f.clusters {
		var dModern, dAll, w float64
		for i := f.start[k]; i < f.start[k+1]; i++ {
			ob := &f.obs[i]
			if ob.modern || math.IsInf(ob.y, 0) {
				continue
			}
			la, ma, sa, x := a.modern.scoreAncient(i)
			lb, mb, _, _ := b.modern.scoreAncient(i)
			dModern += ob.weight * (la - lb)
			if a.all.failure == "" && b.all.failure == "" {
				dAll += ob.weight * (a.all.logDens[i] - b.all.logDens[i])
			}
			shift += ob.weight * (ma - mb) * (ma - mb)
			for j := range gradient {
				gradient[j] += ob.weight * (ma - mb) / (sa * sa) * x[j]
			}
			w += ob.weight
		}
		if w == 0 {
			continue
		}
		n += w
		own.add(dModern)
		refitted.add(dAll)
	}
	if own.n == 0 {
		c.Modern, c.ModernSE, c.All, c.AllSE, c.Shift, c.Power, c.Needed = math.NaN(), math.NaN(), math.NaN(), math.NaN(), math.NaN(), math.NaN(), math.NaN()
		c.Text = fmt.Sprintf("%s against %s: not yet. There is no ancient row with a palaeolatitude among the chosen rows.", ruleWords[a.name], ruleWords[b.name])
		return c
	}
	c.Modern, c.ModernSE = own.n*own.mean, math.Sqrt(own.n*own.variance()+quadratic(a.modern.v, gradient))
	c.All, c.AllSE = refitted.n*refitted.mean, math.Sqrt(refitted.n*refitted.variance())
	c.Shift = math.Sqrt(shift / n)
	c.Power, c.Needed = powerOf(c.Shift/a.modern.s, own.n)
	c.decide(own.n)
	return c
}

// powerOf is the chance that the sum of log score differences of n deposits
// lies 1.96 standard errors off 0 when one of the rules is true, and the n for
// 80 %. For two expectations d standard deviations apart each difference has
// mean d^2/2 and standard deviation d.
func powerOf(d, n float64) (power, needed float64) {
	z := math.Sqrt(n) * d / 2
	power = normalCDF(z-z975) + normalCDF(-z-z975)
	needed = math.Pow(2*(z975+z80)/d, 2)
	if math.IsInf(needed, 0) {
		needed = math.NaN()
	}
	return power, needed
}

func normalCDF(z float64) float64 { return 0.5 * math.Erfc(-z/math.Sqrt2) }

var ruleWords = map[string]string{
	nameCoriolis: "the Coriolis parameter", nameClimate: "climate state", nameLatitude: "plain latitude",
}

// decide prefers a rule when the refitted difference lies 1.96 standard errors
// off 0, at least five deposits speak, and the modern fit does not clearly say
// the opposite.
func (c *DeepComparison) decide(n float64) {
	z := c.All / c.AllSE
	opposite := c.Modern*c.All < 0 && math.Abs(c.Modern) > z975*c.ModernSE
	verdict := "not yet"
	if n >= fewestClusters && math.Abs(z) > z975 && !opposite {
		c.Preferred = c.A
		if c.All < 0 {
			c.Preferred = c.B
		}
		verdict = "the ancient rows prefer " + ruleWords[c.Preferred]
	}
	c.Text = fmt.Sprintf("%s against %s: %s. Sum of log scores over %.0f ancient deposits, first minus second: %+.2f (standard error %.2f) with the rules refitted on all rows but the deposit scored, %+.2f (%.2f) with the modern fit alone. "+
		"The two expect ln(P - 1) to differ by %.3f; a catalogue like this tells them apart in %.0f %% of cases",
		capital(ruleWords[c.A]), ruleWords[c.B], verdict, n, c.All, c.AllSE, c.Modern, c.ModernSE, c.Shift, 100*c.Power)
	switch {
	case c.Preferred != "":
		c.Text += "."
	case math.IsNaN(c.Needed):
		c.Text += "; the two are the same for these rows."
	case c.Needed > n:
		c.Text += fmt.Sprintf(", and about %s ancient systems like these, each in a deposit of its own, would be needed for 80 %%.", count(c.Needed))
	default:
		c.Text += "; the count is enough for 80 %, but these rows do not decide."
	}
}

func capital(s string) string { return string(s[0]-'a'+'A') + s[1:] }

// count writes a number to two figures: 1,200.
func count(x float64) string {
	p := math.Pow(10, math.Max(0, math.Floor(math.Log10(x))-1))
	n := int(math.Ceil(x/p-1e-9) * p)
	if n >= 1_000_000 {
		return "more than a million"
	}
	if n >= 1000 {
		return fmt.Sprintf("%d,%03d", n/1000, n%1000)
	}
	return fmt.Sprint(n)
}

// neededByAge is how many ancient systems of one age, at latitudes spread
// evenly between 5 and 75 degrees, would tell f from latitude with 80 % power,
// with the slope taken as known.
func neededByAge(t *fitted) []Needed {
	out := []Needed{}
	for _, age := range []float64{70, 150, 300, 450, 600} {
		day, err := earth.DayLengthAt(age, earth.HistoryOptions{})
		if err != nil {
			continue
		}
		ratio := day.Value.RotationRatio()
		var sum, n float64
		for lat := 5.0; lat <= 75; lat += 5 {
			d := t.beta[1] * fUnit * (ratio - 1) * sinOf(lat)
			sum, n = sum+d*d, n+1
		}
		shift := math.Sqrt(sum / n)
		_, needed := powerOf(shift/t.s, 1)
		out = append(out, Needed{age, ratio, shift, needed})
	}
	return out
}

func deepHeadline(r *DeepTimeResult) string {
	s := ""
	for _, c := range r.Comparisons {
		if s != "" {
			s += " "
		}
		if c.Preferred == "" {
			s += fmt.Sprintf("%s or %s: not yet", capital(ruleWords[c.A]), ruleWords[c.B])
			if !math.IsNaN(c.Needed) && c.Needed > float64(r.AncientClusters) {
				s += fmt.Sprintf(" (%s; about %s would be needed)", plural(r.AncientClusters, "ancient deposit", "ancient deposits"), count(c.Needed))
			} else if r.AncientClusters == 0 {
				s += " (no ancient rows)"
			}
			s += "."
			continue
		}
		s += fmt.Sprintf("%s or %s: the ancient rows prefer %s (%s).", capital(ruleWords[c.A]), ruleWords[c.B], ruleWords[c.Preferred], plural(r.AncientClusters, "deposit", "deposits"))
	}
	return s
}
