package planform

import "math"

// Recorded is what a record says of a line it stands for; NaN where it does
// not.
type Recorded struct {
	Kind      string // of the sinuosity: peak, p90, mean, reach; others are not compared
	Sinuosity float64
	SpacingM  float64 // of the vertices
}

// Disagreement is one value of a record against the line stored with it.
type Disagreement struct {
	Column             string // sinuosity or vertex_spacing_m
	Recorded, Measured float64
	Low, High          float64 // what the line gives under other settings; equal to Measured where that is not known
}

// Disagreements compares a record with its line. A sinuosity disagrees when it
// lies more than 2 % outside what the line gives with half and double the
// window and the smoothing (the reach: more than 5 % off, as it has no window);
// a spacing when one of the two is more than a quarter larger.
func (m *Measured) Disagreements(r Recorded) []Disagreement {
	var out []Disagreement
	of := map[string]struct {
		value float64
		under Range
	}{
		"peak": {m.PeakSinuosity, m.Sensitivity}, "p90": {m.P90Sinuosity, m.SensitivityP90}, "mean": {m.MeanSinuosity, m.SensitivityMean},
		"reach": {m.ReachSinuosity, Range{m.ReachSinuosity / 1.03, m.ReachSinuosity * 1.03}},
	}[r.Kind]
	low, high := least(of.under.Low, of.value), -least(-of.under.High, -of.value)
	if known(r.Sinuosity) && known(of.value) && of.value > 0 && (r.Sinuosity < 0.98*low || r.Sinuosity > 1.02*high) {
		out = append(out, Disagreement{"sinuosity", r.Sinuosity, of.value, low, high})
	}
	if a, b := r.SpacingM, m.MedianSpacingM; known(a) && known(b) && a > 0 && b > 0 && math.Max(a, b) > 1.25*math.Min(a, b) {
		out = append(out, Disagreement{"vertex_spacing_m", a, b, b, b})
	}
	return out
}

func known(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }

// least is the smaller of two, the other where one is unknown or 0.
func least(a, b float64) float64 {
	if !known(a) || a == 0 {
		return b
	}
	return math.Min(a, b)
}
