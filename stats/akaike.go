package stats

import "math"

// akaikeWeights fills the weights where every fitted model has an AICc on one
// response scale; otherwise they stay unknown.
func akaikeWeights(models []Model) {
	if unlikeScales(models) {
		return
	}
	best := math.Inf(1)
	for _, m := range models {
		if finite(m.AICc) {
			best = math.Min(best, m.AICc)
		}
	}
	sum := 0.0
	for _, m := range models {
		if finite(m.AICc) {
			sum += math.Exp(-(m.AICc - best) / 2)
		}
	}
	for i := range models {
		if finite(models[i].AICc) {
			models[i].AkaikeWeight = math.Exp(-(models[i].AICc-best)/2) / sum
		}
	}
}

func unlikeScales(models []Model) bool {
	scale := ""
	for _, m := range models {
		if !finite(m.AICc) {
			continue
		}
		if scale != "" && m.Scale != scale {
			return true
		}
		scale = m.Scale
	}
	return false
}
