package expectation

import (
	"context"
	"fmt"
	"math"
	"sort"
	"sync"

	"fathombend/stats"
	"fathombend/stats/earth"
)

// Fits holds the rival explanations fitted on a set of rows, ready for any
// number of targets. Safe for concurrent use.
type Fits struct {
	options  Options
	frame    *frame
	fits     []*fitted
	weights  []float64
	alone    []*Coverage
	together *Coverage
	alpha    float64
	scores   []float64 // on the rows common to all; NaN = none
	common   int       // such rows
	base     []float64 // base rate of each class, deposits alike
	hull     [][2]float64
	systems  []*system
	sized    [4]sizes            // rows with a width, a depth, a slope, a radius and width
	inner    map[float64]float64 // shares of the plain mixture at the usual quantiles
	memory   memory

	filtered        sync.Once
	dimensionsOfAll []Dimension // of the filtered rows
}

// Options of Fit.
type Options struct {
	Response     string // peak ... any; "" = peak, else any
	MeasuredLine string
	Cluster      string
	Seed         uint64
	ClassLimits  []float64 // 1.05, 1.2, 1.5
	// Climate gives the climate state at an age; nil is the built-in table.
	Climate earth.ClimateTable
}

// Classes is the default of the limits between planform classes: a
// convention, no published boundary is settled.
var Classes = []float64{1.05, 1.2, 1.5}

func (o Options) withDefaults() (Options, error) {
	if o.Cluster == "" {
		o.Cluster = "parent_deposit"
	}
	if o.Seed == 0 {
		o.Seed = DefaultSeed
	}
	if len(o.ClassLimits) == 0 {
		o.ClassLimits = Classes
	}
	if len(o.Climate) == 0 {
		o.Climate = earth.ClimateStates()
	}
	if err := CheckClimate(o.Climate); err != nil {
		return o, err
	}
	return o, CheckClasses(o.ClassLimits)
}

// CheckClasses refuses limits that do not part sinuosities into classes.
func CheckClasses(limits []float64) error {
	for i, l := range limits {
		if !(l > 1) || math.IsInf(l, 0) || (i > 0 && l <= limits[i-1]) {
			return refuse("class_limits", "the limits between classes must be sinuosities above 1 in rising order, for example 1.05, 1.2, 1.5")
		}
	}
	return nil
}

// MostDeposits is how many clusters the explanations are fitted on: leaving
// each out in turn costs their number times their rows.
const MostDeposits = 400

// Fit fits every explanation on rows (modern and ancient mixed; it separates
// them) with its bootstrap parameter sets, leave-one-cluster-out scores,
// weights and coverage. Rows that are too few are no error: every explanation
// then says why it could not be fitted, and a target still gets its
// palaeolatitude, day length and flow regime.
func Fit(ctx context.Context, rows []stats.Row, o Options) (*Fits, error) {
	o, err := o.withDefaults()
	if err != nil {
		return nil, err
	}
	f := newFrame(rows, o, MostDeposits)
	r := newResampling(f, o.Seed)
	list := models()
	out := &Fits{options: o, frame: f, fits: make([]*fitted, len(list)), alone: make([]*Coverage, len(list)), scores: make([]float64, len(list))}
	var wg sync.WaitGroup
	for k, m := range list {
		wg.Go(func() { out.fits[k] = fitModel(ctx, m, f, r) })
	}
	wg.Wait()
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	ch := leaveOutAll(ctx, f, out.fits, r, o.Seed)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	weights, without, common := stack(f, out.fits, ch)
	out.weights, out.common = weights, len(common)
	p := ch.pits(f, without)
	out.together, out.alpha = ch.together(f, p), p.alpha(f, -1)
	for k := range list {
		out.alone[k] = ch.alone(f, k)
		out.scores[k] = out.scoreOn(common, k, ch)
	}
	out.inner = innerShares(out.alpha)
	out.baseRates()
	out.hull, out.systems = hullOf(f), systemsOf(f)
	for k, has := range []func(*stats.Row) bool{
		func(r *stats.Row) bool { return above0(r.ChannelWidthM) },
		func(r *stats.Row) bool { return above0(r.ChannelDepthM) },
		func(r *stats.Row) bool { return above0(r.ValleySlope) },
		func(r *stats.Row) bool { return above0(r.ChannelWidthM) && above0(r.RadiusM) },
	} {
		out.sized[k] = sizesOf(f.all, o.Cluster, has)
	}
	return out, ctx.Err()
}

// scoreOn is the mean score over the common rows: log density, or minus the
// ranked probability score where P = 1 occurs.
func (f *Fits) scoreOn(rows []int, k int, ch *checks) float64 {
	var sum, n float64
	for _, i := range rows {
		ob := &f.frame.obs[i]
		switch {
		case f.frame.ones == 0 && f.fits[k].failure == "" && !math.IsNaN(f.fits[k].logDens[i]):
			sum += ob.weight * f.fits[k].logDens[i]
		case f.frame.ones > 0 && ch.p[k][i] != nil:
			d := ch.p[k][i]
			sum -= ob.weight * (meanDistance(d, []float64{ob.p}) - meanDistance(d, d)/2)
		default:
			continue
		}
		n += ob.weight
	}
	if n == 0 {
		return math.NaN()
	}
	return sum / n
}

// baseRates counts the classes in the chosen rows, each deposit alike.
func (f *Fits) baseRates() {
	f.base = make([]float64, len(f.options.ClassLimits)+1)
	g := float64(len(f.frame.clusters))
	for i := range f.frame.obs {
		f.base[classOf(f.options.ClassLimits, f.frame.obs[i].p)] += f.frame.obs[i].weight / g
	}
}

func classOf(limits []float64, p float64) int {
	return sort.Search(len(limits), func(i int) bool { return p < limits[i] })
}

// className names the class between two limits.
func className(limits []float64, k int) string {
	names := []string{"nearly straight", "low sinuosity", "sinuous", "highly sinuous"}
	if len(limits) == 3 {
		return names[k]
	}
	switch k {
	case 0:
		return fmt.Sprintf("below %g", limits[0])
	case len(limits):
		return fmt.Sprintf("%g and above", limits[k-1])
	}
	return fmt.Sprintf("%g to %g", limits[k-1], limits[k])
}

// Held is how many rows the fits hold on to.
func (f *Fits) Held() int { return len(f.frame.all) }

// Expect answers one target. An *InputError names the parameter that cannot be
// used.
func (f *Fits) Expect(ctx context.Context, t Target) (*Result, error) {
	p, err := placed(ctx, &t)
	if err != nil {
		return nil, err
	}
	d := f.draw(&t, p, true)
	res := f.frameOf(&t, p, d)
	f.explain(d, res)
	f.classes(d, res)
	res.Regime = f.regime(&t, d)
	res.Tendencies = f.tendencies(&t, d, res)
	res.NearestSystems = f.nearest(&t)
	res.Dimensions = f.dimensions(res.NearestSystems)
	res.Sensitivity = f.sensitivity(&t, p, d)
	res.Extrapolation = f.extrapolation(&t, p, d, res)
	f.observed(&t, d, res)
	return res, nil
}

// ExpectCombined answers one of many targets: where and when, the combined
// expectation, its classes and what stands beside them, equal to the digit to
// those of Expect. The single explanations, jackknife and parts, the flow
// regime, tendencies, nearest systems, dimensions and sensitivity are left out.
func (f *Fits) ExpectCombined(ctx context.Context, t Target) (*Result, error) {
	p, err := placed(ctx, &t)
	if err != nil {
		return nil, err
	}
	d := f.draw(&t, p, false)
	res := f.frameOf(&t, p, d)
	res.Combined = f.combined(d)
	f.classes(d, res)
	res.Extrapolation = f.extrapolation(&t, p, d, res)
	f.observed(&t, d, res)
	return res, nil
}

func placed(ctx context.Context, t *Target) (*place, error) {
	if err := t.Validate(); err != nil {
		return nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	return locate(t)
}
