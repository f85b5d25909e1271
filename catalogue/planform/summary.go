package planform

// Summary of the windows of one line.
type Summary struct {
	Windows      int     // finite windows
	Mean         float64 // NaN without windows, as are the next two
	P90          float64 // type 7 of Hyndman & Fan (1996), Am. Stat. 50:361, doi 10.2307/2684934
	Peak         float64
	Standardised float64 // expected largest of k, NaN with fewer than k windows
}

// Summarise gives the levels of window sinuosities that were stored; values
// that are not finite are left out.
func Summarise(windows []float64, k int) Summary {
	v := make([]float64, 0, len(windows))
	for _, x := range windows {
		if finite(x) {
			v = append(v, x)
		}
	}
	l := summarise(v, 0)
	out := Summary{Windows: len(v), Mean: l.mean, P90: l.p90, Peak: l.peak}
	out.Standardised, _ = ExpectedMax(l.values, k)
	return out
}
