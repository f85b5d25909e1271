package expectation

import (
	"cmp"
	"math"
	"math/rand/v2"
	"slices"
)

// sensitivity is the first-order share of each input in the variance of
// ln(P - 1): one input drawn, the others at their point values, averaged over
// the explanations by their weights.
func (f *Fits) sensitivity(t *Target, p *place, d *draws) []Sensitivity {
	if len(d.mix.draws) == 0 {
		return nil
	}
	total := map[string]float64{}
	var mean, square float64
	for k, ft := range f.fits {
		if w := f.weights[k]; w > 0 {
			v := d.parts[k]
			total["parameters of the fit"] += w * v["parameters"]
			total["scatter between systems"] += w * v["residual"]
			y := ft.value(&d.point, ft.beta)
			mean, square = mean+w*y, square+w*y*y
		}
	}
	total["choice of explanation"] = math.Max(0, square-mean*mean)
	for name, which := range map[string]moves{"palaeolatitude": {lat: d.moves.lat}, "age": {age: d.moves.age}, "day length": {day: d.moves.day},
		"slope not given": {slope: d.moves.slope}, "supply not given": {supply: d.moves.supply}} {
		if which != (moves{}) {
			total[name] = f.oneInput(t, p, d, which)
		}
	}
	var out []Sensitivity
	for name, share := range shares(total) {
		out = append(out, Sensitivity{name, share})
	}
	slices.SortFunc(out, func(a, b Sensitivity) int {
		return cmp.Or(cmp.Compare(b.Share, a.Share), cmp.Compare(a.Input, b.Input))
	})
	return out
}

// oneInput is the variance of ln(P - 1) when only the inputs in which move.
func (f *Fits) oneInput(t *Target, p *place, d *draws, which moves) float64 {
	const n = 400
	all := make([]moments, len(f.fits))
	var pcg rand.PCG
	rng := rand.New(&pcg)
	for j := range min(n, d.n) {
		pcg.Seed(t.Seed, uint64(j))
		u := rng.Float64()
		z := deviatesFrom(rng)
		at := p.at(&z, which.age, which.day, which.lat)
		in := d.point
		in.sin, in.ratio = sinOf(at.lat), at.ratio
		if at.age != p.age.Value {
			in.state = stateAt(f.frame.climate, at.age)
		}
		d.donors.fill(f.frame, &in, u, which.slope, which.supply)
		for k, ft := range f.fits {
			if f.weights[k] > 0 {
				all[k].add(ft.value(&in, ft.beta))
			}
		}
	}
	var v float64
	for k := range all {
		v += f.weights[k] * all[k].variance()
	}
	return v
}
