package expectation

import (
	"math"
	"slices"
)

// draws are the draws of one target: its inputs, and the sinuosities they give
// under each explanation.
type draws struct {
	point  inputs
	n      int
	in     []inputs
	lat    []float64
	f      []float64 // |f|, s-1
	chance []chance
	p      [][]float64 // by explanation, sorted; nil = not asked for
	mix    mixture     // of the weighted explanations
	donors *donors
	moves  moves
	parts  []map[string]float64 // of the variance of ln(P - 1), by explanation
}

// moves says which inputs of a target are uncertain.
type moves struct{ lat, age, day, slope, supply bool }

// donors are the catalogue rows whose slope or supply stands in for what a
// target does not say.
type donors struct {
	rows  []int
	total []float64 // cumulative weight
	guide []int     // where the search for each of as many equal shares begins
}

func (f *Fits) donorsFor(point *inputs) *donors {
	key := openness{point.level, !math.IsNaN(point.logSlope)}
	return f.memory.donorsOf(key, func() donors { return f.findDonors(point) })
}

func (f *Fits) findDonors(point *inputs) donors {
	collect := func(fits func(*observation) bool) donors {
		var d donors
		var sum float64
		for i := range f.frame.obs {
			if ob := &f.frame.obs[i]; fits(ob) {
				sum += ob.weight
				d.rows, d.total = append(d.rows, i), append(d.total, sum)
			}
		}
		return d
	}
	slope := func(ob *observation) bool { return !math.IsNaN(point.logSlope) || !math.IsNaN(ob.logSlope) }
	d := collect(func(ob *observation) bool {
		for k := range factors {
			if point.level[k] >= 0 && ob.level[k] != point.level[k] {
				return false
			}
		}
		return slope(ob)
	})
	if len(d.rows) < 5 {
		d = collect(slope)
	}
	if len(d.rows) == 0 {
		d = collect(func(*observation) bool { return true })
	}
	return d
}

// index prepares pick.
func (d *donors) index() {
	n := len(d.rows)
	d.guide = make([]int, n+1)
	k := 0
	for c := range d.guide {
		for k < n && d.total[k] < float64(c)/float64(n)*d.total[n-1] {
			k++
		}
		d.guide[c] = k
	}
}

// pick is the first row whose cumulative weight reaches the share u.
func (d *donors) pick(u float64) int {
	n := len(d.rows)
	x := u * d.total[n-1]
	k := d.guide[int(u*float64(n))]
	for k > 0 && d.total[k-1] >= x {
		k--
	}
	for k < n && d.total[k] < x {
		k++
	}
	return d.rows[min(k, n-1)]
}

// fill puts a donor's slope and supply where the target has none.
func (d *donors) fill(f *frame, in *inputs, u float64, slope, supply bool) {
	if len(d.rows) == 0 {
		return
	}
	ob := &f.obs[d.pick(u)]
	if slope && math.IsNaN(in.logSlope) {
		in.logSlope = ob.logSlope
	}
	if supply {
		for k := range factors {
			if in.level[k] < 0 {
				in.level[k] = ob.level[k]
			}
		}
	}
}

// pointOf is a target's inputs at their point values.
func (f *Fits) pointOf(t *Target, p *place) inputs {
	in := inputs{sin: sinOf(p.lat.Value), ratio: p.ratio, logSlope: math.NaN(), state: stateAt(f.frame.climate, p.age.Value)}
	if given(t.TargetSlope) {
		in.logSlope = math.Log10(t.TargetSlope)
	}
	for k, v := range []string{t.TargetFeeder, t.TargetGrain, t.TargetLargeRiver} {
		in.level[k] = f.frame.levelOf(k, v)
	}
	return in
}

// draw makes a target's draws; draw j comes from its own stream PCG(seed, j),
// so the answer does not depend on the number of cores. With all, every
// explanation is drawn with the parts of its variance; without, those alone
// that have a weight.
func (f *Fits) draw(t *Target, p *place, all bool) *draws {
	d := &draws{point: f.pointOf(t, p), n: t.Draws}
	d.donors = f.donorsFor(&d.point)
	d.moves = moves{
		lat: p.lat.SE > 0, age: p.age.SE > 0, day: p.day.High > p.day.Low,
		slope: math.IsNaN(d.point.logSlope), supply: slices.Contains(d.point.level[:], -1),
	}
	d.chance = f.memory.chances(t.Seed, d.n)
	d.in = make([]inputs, d.n)
	block := make([]float64, 2*d.n)
	d.lat, d.f = block[:d.n], block[d.n:]
	for j := range d.n {
		at := p.at(&d.chance[j].where, true, true, true)
		in := &d.in[j]
		*in = d.point
		in.sin, in.ratio = sinOf(at.lat), at.ratio
		if at.age != p.age.Value {
			in.state = stateAt(f.frame.climate, at.age)
		}
		d.donors.fill(f.frame, in, d.chance[j].donor, true, true)
		d.lat[j] = at.lat
		d.f[j] = fUnit * 1e-4 * in.ratio * in.sin
	}
	f.outcomes(d, all)
	return d
}

// outcomes turns the draws into sinuosities, explanation by explanation:
// 1 + exp(x'b* + s r*), or 1 with the share of rows that hold P = 1.
func (f *Fits) outcomes(d *draws, all bool) {
	d.mix.alpha, d.mix.known = f.alpha, f.inner
	scratch := make([]float64, d.n)
	d.p, d.parts = make([][]float64, len(f.fits)), make([]map[string]float64, len(f.fits))
	for k, t := range f.fits {
		if t.failure != "" || (!all && f.weights[k] == 0) {
			continue
		}
		out := make([]float64, d.n)
		for j := range out {
			u := &d.chance[j]
			if u.one < f.frame.ones {
				out[j] = 1
				continue
			}
			b := int(u.set * float64(t.sets))
			y := t.value(&d.in[j], t.boot[b*t.p:(b+1)*t.p]) + t.s*t.pool[int(u.res*float64(len(t.pool)))]
			out[j] = 1 + math.Exp(math.Min(y, 12))
		}
		sortPositive(out, scratch)
		d.p[k] = out
		if all {
			d.parts[k] = t.variances(d)
		}
		if f.weights[k] > 0 {
			d.mix.add(out, f.weights[k])
		}
	}
}

// explain fills in the explanations and their combination.
func (f *Fits) explain(d *draws, res *Result) {
	parts := map[string]float64{}
	var mean, meanSquare float64
	for k, t := range f.fits {
		e := Explanation{Name: t.name, Text: t.text, Weight: f.weights[k], Failure: t.failure,
			Rows: t.rows, Clusters: t.clusters, Score: f.scores[k]}
		if t.failure == "" {
			m := mixture{}
			m.add(d.p[k], 1)
			e.Sinuosity, e.Coverage = m.quantiles(), f.alone[k]
			e.Jackknife = f.jackknife(d, func(j int) float64 {
				if j == k {
					return 1
				}
				return 0
			})
			v := d.parts[k]
			e.Parts = shares(v)
			e.Coefficients = t.coefficients
			y := t.value(&d.point, t.beta)
			mean, meanSquare = mean+f.weights[k]*y, meanSquare+f.weights[k]*y*y
			for name, x := range v {
				parts[name] += f.weights[k] * x
			}
		}
		res.Explanations = append(res.Explanations, e)
	}
	if res.Combined = f.combined(d); res.Combined.Failure != "" {
		return
	}
	res.Combined.Jackknife = f.jackknife(d, func(j int) float64 { return f.weights[j] })
	parts["explanation"] = math.Max(0, meanSquare-mean*mean)
	res.Combined.Parts = shares(parts)
}

// combined is the expectation of all explanations together.
func (f *Fits) combined(d *draws) Explanation {
	c := Explanation{Name: "combined", Text: "All explanations together, by their weights; the spread of the mixture is set by what it held when each deposit was left out, because a mixture of rival forecasts is wider than it should be (Gneiting & Ranjan, Electron. J. Stat. 7:1747 (2013)).", Weight: 1, Score: math.NaN(),
		Rows: len(f.frame.obs), Clusters: len(f.frame.clusters)}
	if len(d.mix.draws) == 0 {
		c.Failure, c.Weight = "No explanation could be fitted on the chosen rows. Widen the filter.", 0
		if len(f.frame.obs) == 0 {
			c.Failure = "No row with this sinuosity and a latitude is left after filtering. Widen the filter, or ask for another kind of sinuosity."
		}
		if len(f.frame.all) == 0 {
			c.Failure = noRows
		}
		return c
	}
	c.Sinuosity, c.Coverage = d.mix.quantiles(), f.together
	return c
}

// variances are the parts of the variance of ln(P - 1) of a new system: by the
// parameters, by the residual and by the inputs, each with the others at their
// point values.
func (t *fitted) variances(d *draws) map[string]float64 {
	var par, inp moments
	for b := range t.sets {
		par.add(t.value(&d.point, t.boot[b*t.p:(b+1)*t.p]))
	}
	for j := range min(d.n, 1000) {
		inp.add(t.value(&d.in[j], t.beta))
	}
	return map[string]float64{"parameters": par.variance(), "residual": t.s * t.s * t.poolVariance, "inputs": inp.variance()}
}

// shares scales parts to a sum of 1.
func shares(v map[string]float64) map[string]float64 {
	var sum float64
	for _, name := range sortedKeys(v) {
		sum += v[name]
	}
	out := map[string]float64{}
	for name, x := range v {
		if sum > 0 {
			out[name] = x / sum
		}
	}
	return out
}

func sortedKeys(m map[string]float64) []string {
	var out []string
	for k := range m {
		out = append(out, k)
	}
	slices.Sort(out)
	return out
}

// moments accumulates a mean and a variance (Welford).
type moments struct{ n, mean, ss float64 }

func (m *moments) add(x float64) {
	m.n++
	d := x - m.mean
	m.mean += d / m.n
	m.ss += d * (x - m.mean)
}

func (m *moments) variance() float64 {
	if m.n < 2 {
		return 0
	}
	return m.ss / (m.n - 1)
}

// estimates are the coefficients with their cluster-bootstrap errors.
func (t *fitted) estimates() []Coefficient {
	out := make([]Coefficient, t.p)
	for k := range out {
		var m moments
		for b := range t.sets {
			m.add(t.boot[b*t.p+k])
		}
		out[k] = Coefficient{Name: t.names[k], Estimate: t.beta[k], StandardError: math.Sqrt(m.variance())}
	}
	return out
}

// classes fills in the class probabilities beside their base rates.
func (f *Fits) classes(d *draws, res *Result) {
	limits := f.options.ClassLimits
	below := 0.0
	for k := range len(limits) + 1 {
		c := Class{Name: className(limits, k), From: 1, Probability: math.NaN(), BaseRate: math.NaN()}
		if k > 0 {
			c.From = limits[k-1]
		}
		if len(d.mix.draws) > 0 {
			upTo := 1.0
			if k < len(limits) {
				upTo = d.mix.below(limits[k])
			}
			c.Probability, below = upTo-below, upTo
		}
		if len(f.frame.clusters) > 0 {
			c.BaseRate = f.base[k]
		}
		res.Classes = append(res.Classes, c)
	}
}
