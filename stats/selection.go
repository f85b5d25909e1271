package stats

import (
	"fmt"
	"math/rand/v2"
)

// thinnings is how often systems are left out at random.
const thinnings = 499

// selectionStream keeps thinnings and resamples of one seed apart.
const selectionStream = 0x2545f4914f6cdd1d

// selection re-estimates model k with a stated fraction of the straighter (or
// more sinuous) half of the systems left out at random: publication favours
// sinuous channels, and thinning them shows what an even catalogue might give.
func (s *study) selection(k int) []Selection {
	var out []Selection
	for _, side := range []struct {
		name     string
		fraction float64
	}{{"straight", s.req.ThinStraight}, {"sinuous", s.req.ThinSinuous}} {
		if side.fraction > 0 && k >= 0 && s.t.system.count() > 3 {
			out = append(out, s.thin(s.models[k], side.name, side.fraction))
		}
	}
	return out
}

// half lists the systems whose mean response is below (or not below) the
// median of the systems.
func (s *study) half(sinuous bool) (picked, rest []int32) {
	g := &s.t.system
	mean := make([]float64, g.count())
	for i, k := range g.of {
		mean[k] += s.t.y[i] / float64(len(g.members(k)))
	}
	sorted := append([]float64(nil), mean...)
	sortFloats(sorted)
	middle := sortedQuantile(sorted, 0.5)
	for k, v := range mean {
		if (v > middle) == sinuous {
			picked = append(picked, int32(k))
		} else {
			rest = append(rest, int32(k))
		}
	}
	return picked, rest
}

func (s *study) thin(f *fitted, side string, fraction float64) Selection {
	j := slopeIndex(f.form)
	picked, rest := s.half(side == "sinuous")
	out := Selection{Thinned: side, Fraction: fraction, Systems: len(picked), Repeats: thinnings, Term: f.names[j], Coefficient: nan, RSquared: nan, Range: noInterval}
	leave := int(fraction*float64(len(picked)) + 0.5)
	if f.system == nil {
		f.system = f.compile(&s.t.system)
	}
	_, w := f.system.shape()
	fit, value, d := f.system.worker(), make([]float64, w), newDraw(s.t.system.count())
	var coef, r2 []float64
	for i := range thinnings {
		rng := rand.New(rand.NewPCG(s.req.Seed^selectionStream, uint64(i)))
		rng.Shuffle(len(picked), func(a, b int) { picked[a], picked[b] = picked[b], picked[a] })
		d.id, d.wt = append(append(d.id[:0], rest...), picked[leave:]...), d.wt[:0]
		for range d.id {
			d.wt = append(d.wt, 1)
		}
		d.size = float64(len(d.id))
		if fit(d, value, false) && finite(value[j]) && finite(value[len(f.coef)]) {
			coef, r2 = append(coef, value[j]), append(r2, value[len(f.coef)])
		}
	}
	if len(coef) < leastReplicates {
		out.Text = fmt.Sprintf("With %s of the %s half of the systems left out the model cannot be fitted. Thin less.", percent(fraction), halfName(side))
		return out
	}
	sortFloats(coef)
	sortFloats(r2)
	out.Coefficient, out.RSquared = sortedQuantile(coef, 0.5), sortedQuantile(r2, 0.5)
	out.Range = Interval{sortedQuantile(coef, 0.025), sortedQuantile(coef, 0.975)}
	out.Text = fmt.Sprintf("With %d of the %s of the %s half left out at random, %d times over, the coefficient of %s in %s is %s (%s) in place of %s, and R2 %.2f in place of %.2f.",
		leave, plural(len(picked), "system", "systems"), halfName(side), thinnings, coefficientText(f.names[j]), f.label, number(out.Coefficient), between(out.Range), number(f.coef[j]), out.RSquared, f.r2)
	return out
}

func halfName(side string) string {
	if side == "straight" {
		return "straighter"
	}
	return "more sinuous"
}
