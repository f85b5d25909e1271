package expectation

import "math"

// jackknife is the jackknife+ interval over clusters at 90 % (Barber, Candes,
// Ramdas & Tibshirani, Ann. Stat. 49:486 (2021), doi 10.1214/20-AOS1965): it
// guarantees 80 %, and only if clusters are exchangeable. Each cluster, and in
// it each system, counts alike; nil with too few clusters for limits to exist.
func (f *Fits) jackknife(d *draws, weight func(int) float64) *[2]float64 {
	var low, high []weighted
	var total float64
	for c := range f.frame.clusters {
		var at float64
		ok := true
		for k, t := range f.fits {
			if w := weight(k); w > 0 {
				if t.failure != "" || t.loo[c] == nil {
					ok = false
					break
				}
				at += w * t.value(&d.point, t.loo[c])
			}
		}
		if !ok {
			continue
		}
		for i := f.frame.start[c]; i < f.frame.start[c+1]; i++ {
			ob := &f.frame.obs[i]
			if math.IsInf(ob.y, 0) {
				continue
			}
			var own float64
			for k, t := range f.fits {
				if w := weight(k); w > 0 {
					if !t.usable[i] {
						own = math.NaN()
						break
					}
					own += w * t.mean(i, t.loo[c])
				}
			}
			if r := math.Abs(ob.y - own); !math.IsNaN(r) {
				low, high, total = append(low, weighted{at - r, ob.weight}), append(high, weighted{at + r, ob.weight}), total+ob.weight
			}
		}
	}
	const alpha = 0.1
	up := (1 - alpha) * (total + 1) / total
	if total == 0 || up > 1 {
		return nil
	}
	lo, hi := weightedQuantiles(low, 1-up), weightedQuantiles(high, up)
	return &[2]float64{1 + math.Exp(lo[0]), 1 + math.Exp(math.Min(hi[0], 12))}
}
