package expectation

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"sort"

	"fathombend/stats"
)

// sizes are the rows from which the flow estimate draws what a target does not
// give: each deposit alike.
type sizes struct {
	rows  []*stats.Row
	total []float64
}

func sizesOf(rows []stats.Row, cluster string, has func(*stats.Row) bool) sizes {
	count := map[string]float64{}
	for i := range rows {
		if has(&rows[i]) {
			count[clusterOf(&rows[i], cluster)]++
		}
	}
	var s sizes
	var sum float64
	for i := range rows {
		if has(&rows[i]) {
			sum += 1 / count[clusterOf(&rows[i], cluster)]
			s.rows, s.total = append(s.rows, &rows[i]), append(s.total, sum)
		}
	}
	return s
}

func (s *sizes) pick(u float64) *stats.Row {
	if len(s.rows) == 0 {
		return nil
	}
	k := sort.SearchFloat64s(s.total, u*s.total[len(s.total)-1])
	return s.rows[min(k, len(s.rows)-1)]
}

// quantity is one size the flow estimate needs: given, drawn from the rows, or
// from a stated range (log-uniform).
type quantity struct {
	name   string
	given  float64
	of     func(*stats.Row) float64
	from   sizes
	lo, hi float64
	unit   string
}

func above0(x float64) bool { return x > 0 && !math.IsInf(x, 0) }

func (f *Fits) quantities(t *Target) (width, depth, slope quantity) {
	width = quantity{"channel width", t.TargetWidthM, func(r *stats.Row) float64 { return r.ChannelWidthM }, f.sized[0], 100, 10_000, "m"}
	depth = quantity{"flow thickness (taken as channel depth)", t.TargetDepthM, func(r *stats.Row) float64 { return r.ChannelDepthM }, f.sized[1], 10, 300, "m"}
	slope = quantity{"valley slope", t.TargetSlope, func(r *stats.Row) float64 { return r.ValleySlope }, f.sized[2], 1e-4, 0.1, "m/m"}
	return
}

// value is the given one, the donor row's, another row's, or one of the range.
func (q *quantity) value(donor *stats.Row, u float64) float64 {
	if given(q.given) {
		return q.given
	}
	if donor != nil {
		if v := q.of(donor); above0(v) {
			return v
		}
	}
	if r := q.from.pick(u); r != nil {
		return q.of(r)
	}
	return logUniform(u, q.lo, q.hi)
}

func logUniform(u, lo, hi float64) float64 { return lo * math.Pow(hi/lo, u) }

// assumed says where the value came from when it was not given.
func (q *quantity) assumed() string {
	switch {
	case given(q.given):
		return ""
	case len(q.from.rows) > 0:
		return fmt.Sprintf("No %s was given: drawn from %s of the catalogue.", q.name, plural(len(q.from.rows), "row", "rows"))
	}
	return fmt.Sprintf("No %s was given and no row has one: drawn between %g and %g %s, each order of magnitude alike.", q.name, q.lo, q.hi, q.unit)
}

// flow is one draw of the flow numbers; tilts are sizes, without sign.
type flow struct {
	roW, roR, froude, u, tilt, adding, opposing, river float64
}

// flowDraws is the most draws of the flow numbers: their ranges are wide and
// settle early.
const flowDraws = 2000

// regime estimates the flow numbers by Monte Carlo over the stated ranges.
func (f *Fits) regime(t *Target, d *draws) Regime {
	width, depth, slope := f.quantities(t)
	n := min(d.n, flowDraws)
	all := make([]flow, n)
	var pcg rand.PCG
	rng := rand.New(&pcg)
	for j := range n {
		pcg.Seed(t.Seed+2, uint64(j))
		all[j] = f.oneFlow(t, d.f[j], rng, &width, &depth, &slope)
	}
	r := Regime{}
	buffer, scratch := make([]float64, n), make([]float64, n)
	three := func(of func(*flow) float64) [3]float64 {
		for j := range all {
			buffer[j] = of(&all[j])
		}
		sortPositive(buffer, scratch)
		q := [3]float64{quantileOf(buffer, 0.1), quantileOf(buffer, 0.5), quantileOf(buffer, 0.9)}
		for k, v := range q {
			if math.IsInf(v, 0) {
				q[k] = math.NaN()
			}
		}
		return q
	}
	r.RoW = three(func(x *flow) float64 { return x.roW })
	r.RoR = three(func(x *flow) float64 { return x.roR })
	r.Froude = three(func(x *flow) float64 { return x.froude })
	r.SpeedMS = three(func(x *flow) float64 { return x.u })
	r.TiltM = three(func(x *flow) float64 { return x.tilt })
	r.TiltAddingBendM = three(func(x *flow) float64 { return x.adding })
	r.TiltOpposingBendM = three(func(x *flow) float64 { return x.opposing })
	r.RiverTiltM = three(func(x *flow) float64 { return x.river })[1]
	for j := range all {
		switch x := &all[j]; {
		case x.roR < coriolisRoR && x.roW < coriolisRoW:
			r.CoriolisRules += 1 / float64(n)
		case x.roR > bendsRoR:
			r.BendsRule += 1 / float64(n)
		}
	}
	r.Neither = math.Max(0, 1-r.CoriolisRules-r.BendsRule)
	r.Assumed = f.regimeAssumed(t, &width, &depth, &slope)
	r.LeveeSide = leveeSide(d)
	r.Text = regimeText(&r, d)
	return r
}

func (f *Fits) oneFlow(t *Target, coriolis float64, rng *rand.Rand, width, depth, slope *quantity) flow {
	donor := f.sized[0].pick(rng.Float64())
	u1, u2, u3, u4 := rng.Float64(), rng.Float64(), rng.Float64(), rng.Float64()
	w, h, s := width.value(donor, u1), depth.value(donor, u2), slope.value(donor, u3)
	c := t.Concentration
	if !given(c) {
		c = logUniform(u4, 2e-4, 5e-2)
	}
	drag, alpha, uR := 0.002+0.003*rng.Float64(), 0.3+0.7*rng.Float64(), rng.Float64()
	g := gravity
	if given(t.GravityMS2) {
		g = t.GravityMS2
	}
	gp := ReducedGravity(g, c)
	u := t.SpeedMS
	if !given(u) {
		u = FlowSpeed(gp, h, s, drag, alpha)
	}
	radius := t.RadiusM
	if !given(radius) {
		radius = w * f.radiusInWidths(uR)
	}
	out := flow{u: u, froude: Froude(u, gp, h), roW: RossbyWidth(u, coriolis, w), roR: math.Abs(RossbyRadius(u, coriolis, radius))}
	out.tilt = Tilt(w, gp, coriolis, u, math.Inf(1))
	out.adding = Tilt(w, gp, coriolis, u, radius)
	out.opposing = math.Abs(Tilt(w, gp, coriolis, u, -radius))
	out.river = Tilt(w, g, coriolis, u, math.Inf(1))
	return out
}

// Bend radius in channel widths when no row has both: the range the input
// checks accept.
const fewestWidths, mostWidths = 1, 20

func (f *Fits) radiusInWidths(u float64) float64 {
	if r := f.sized[3].pick(u); r != nil {
		return r.RadiusM / r.ChannelWidthM
	}
	return logUniform(u, fewestWidths, mostWidths)
}

func (f *Fits) regimeAssumed(t *Target, q ...*quantity) []string {
	out := []string{}
	for _, x := range q {
		if s := x.assumed(); s != "" {
			out = append(out, s)
		}
	}
	if !given(t.RadiusM) {
		if n := len(f.sized[3].rows); n > 0 {
			out = append(out, fmt.Sprintf("No bend radius was given: the ratio of radius to width is drawn from %s of the catalogue.", plural(n, "row", "rows")))
		} else {
			out = append(out, fmt.Sprintf("No bend radius was given and no row has one with its width: drawn between %d and %d channel widths, each order of magnitude alike.", fewestWidths, mostWidths))
		}
	}
	if !given(t.Concentration) {
		out = append(out, "No concentration was given: drawn between 0.0002 and 0.05 by volume, each order of magnitude alike (Sci. Adv. 3:e1700200 (2017); Nat. Commun. 9:2616 (2018)).")
	}
	if !given(t.SpeedMS) {
		out = append(out, "No flow speed was given: U = sqrt(g' h S / (C_f (1 + alpha))) with C_f from 0.002 to 0.005 and alpha from 0.3 to 1 (ranges from memory).")
	}
	if given(t.GravityMS2) {
		out = append(out, fmt.Sprintf("Gravity %g m/s2 as typed.", t.GravityMS2))
	}
	return out
}

// leveeSide is the higher levee looking downstream, by the hemisphere; "" when
// the draws do not agree on the hemisphere (in at least 95 of 100).
func leveeSide(d *draws) string {
	north := 0
	for _, lat := range d.lat {
		if lat > 0 {
			north++
		}
	}
	switch share := float64(north) / float64(d.n); {
	case share >= 0.95:
		return "right"
	case share <= 0.05 && slices.Min(d.lat) < 0:
		return "left"
	}
	return ""
}

func regimeText(r *Regime, d *draws) []string {
	out := []string{fmt.Sprintf("Coriolis rules in %.0f %% of the draws (|Ro_R| < 1 and Ro_W < 5), bends rule in %.0f %% (|Ro_R| > 10), neither in %.0f %%.",
		100*r.CoriolisRules, 100*r.BendsRule, 100*r.Neither)}
	if math.IsNaN(r.RoW[1]) {
		out = append(out, "On the equator f = 0: the Rossby numbers have no finite value, and Coriolis has no part in the flow.")
	}
	switch r.LeveeSide {
	case "":
		out = append(out, "No levee side is stated: the error of the palaeolatitude leaves the hemisphere open.")
	default:
		hemisphere := map[string]string{"right": "northern", "left": "southern"}[r.LeveeSide]
		out = append(out, fmt.Sprintf("In the %s hemisphere the interface tilts up to the %s looking downstream: where Coriolis rules, that levee is the higher along the whole reach, by about %s (%s to %s for 80 %% of the draws).",
			hemisphere, r.LeveeSide, metres(r.TiltM[1]), metres(r.TiltM[0]), metres(r.TiltM[2])))
	}
	out = append(out,
		"In bends the two terms add on one side and oppose on the other: bends to the left add in the northern hemisphere, bends to the right in the southern.",
		fmt.Sprintf("A river of the same width and speed tilts by %s: its density difference to air is the whole of its density, hundreds to thousands of times that of a turbidity current. That is why a river does not care.", metres(r.RiverTiltM)),
		"An Ekman boundary layer describes rotating experiments better than this balance: read the tilt as an estimate (after Komar, J. Geophys. Res. 74:4544 (1969), form from memory).",
		"Latitude alone is not enough: dense flows (1 % by volume and more) in small steep channels hardly feel Coriolis at any latitude, dilute flows in large gentle channels feel it at all (J. Geophys. Res. Oceans, doi 10.1029/2023JC020131).")
	return out
}

func metres(x float64) string {
	switch a := math.Abs(x); {
	case math.IsNaN(x):
		return "an unknown height"
	case a < 0.005:
		return fmt.Sprintf("%.2g mm", x*1000)
	case a < 1:
		return fmt.Sprintf("%.2g cm", x*100)
	case a < 10:
		return fmt.Sprintf("%.1f m", x)
	}
	return fmt.Sprintf("%.0f m", x)
}
