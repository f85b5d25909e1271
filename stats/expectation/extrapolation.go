package expectation

import (
	"fmt"
	"math"
	"slices"
)

// extrapolation says in sentences where the target lies outside the rows the
// explanations were fitted on.
func (f *Fits) extrapolation(t *Target, p *place, d *draws, res *Result) []string {
	out := []string{}
	if len(f.frame.obs) == 0 {
		return out
	}
	if res.EquivalentModernLatitude == nil {
		out = append(out, "The Coriolis parameter then was larger than any on today's Earth: every calibration on modern rows is an extrapolation here.")
	}
	out = append(out, f.outsideF(d)...)
	out = append(out, f.outsideSlope(t, d)...)
	for k, v := range []string{t.TargetFeeder, t.TargetGrain, t.TargetLargeRiver} {
		if v != "" && v != "unknown" && d.point.level[k] < 0 {
			out = append(out, fmt.Sprintf("No row has %s %s: supply is taken as not given there. Widen the filter or leave it out.", factors[k], v))
		}
	}
	if s := d.point.state; s != 0 && s != icehouse && !f.hasState(s) {
		out = append(out, fmt.Sprintf("No row is from a %s: what the climate explanation expects there is its assumption, not an observation.", stateNames[s]))
	}
	if s := d.point.state; s == 0 {
		out = append(out, "The table of climate states has none for this age: the climate explanation expects the mean.")
	}
	if p.age.Value > modernMa && !slices.ContainsFunc(f.frame.obs, func(ob observation) bool { return !ob.modern }) {
		out = append(out, fmt.Sprintf("Every row is younger than %d Ma, the target is %g Ma old: that the same rule held then is an assumption.", modernMa, p.age.Value))
	}
	return out
}

func (f *Fits) hasState(s state) bool {
	return slices.ContainsFunc(f.frame.obs, func(ob observation) bool { return ob.state == s })
}

func (f *Fits) outsideF(d *draws) []string {
	lo, hi := math.Inf(1), math.Inf(-1)
	for i := range f.frame.obs {
		v := columnF.of(&f.frame.obs[i].inputs)
		lo, hi = math.Min(lo, v), math.Max(hi, v)
	}
	at := columnF.of(&d.point)
	switch {
	case at > hi:
		return []string{fmt.Sprintf("The target's |f| of %.2fe-4 per second lies above the largest of the rows, %.2fe-4: the expectation is an extrapolation polewards.", at, hi)}
	case at < lo:
		return []string{fmt.Sprintf("The target's |f| of %.2fe-4 per second lies below the smallest of the rows, %.2fe-4: the expectation is an extrapolation towards the equator.", at, lo)}
	}
	var n float64
	for j := range d.f {
		if v := d.f[j] * 1e4; v < lo || v > hi {
			n++
		}
	}
	if share := n / float64(d.n); share > 0.05 {
		return []string{fmt.Sprintf("With its errors, the target's |f| lies outside the range of the rows (%.2fe-4 to %.2fe-4 per second) in %.0f %% of the draws.", lo, hi, 100*share)}
	}
	return nil
}

func (f *Fits) outsideSlope(t *Target, d *draws) []string {
	if !given(t.TargetSlope) {
		return nil
	}
	lo, hi, n := math.Inf(1), math.Inf(-1), 0
	for i := range f.frame.obs {
		if v := f.frame.obs[i].logSlope; !math.IsNaN(v) {
			lo, hi, n = math.Min(lo, v), math.Max(hi, v), n+1
		}
	}
	s := d.point.logSlope
	switch {
	case n == 0:
		return []string{"No row has a valley slope: the target's slope is not used."}
	case s < lo || s > hi:
		return []string{fmt.Sprintf("The target's slope of %.2g m/m lies outside the rows' %.2g to %.2g: the expectation is an extrapolation in slope.", t.TargetSlope, math.Pow(10, lo), math.Pow(10, hi))}
	case f.hull != nil && !insideHull(f.hull, [2]float64{columnF.of(&d.point), s}):
		return []string{"Slope and |f| lie each within the range of the rows, but no rows surround the two together (outside their convex hull): the joint explanation extrapolates."}
	}
	return nil
}
