package stats

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// noiseStream keeps measurement errors and resamples of one seed apart.
const noiseStream = 0x94d049bb133111eb

// noisy draws the stated errors of measurement anew in every resample before
// the model is refitted: sinuosity P + s N(0,1), mirrored at 1 so that it stays
// possible; valley slope times exp(s/S N), so that it stays above 0; the
// palaeolatitude of rows older than 5 Ma, mirrored at the pole. A row without a
// stated error counts as exact.
type noisy struct {
	estimator
	f    *fitted
	rows []*Row // by row of the table
	seed uint64
	req  *Request
}

func (s *study) withNoise(f *fitted) estimator {
	return &noisy{estimator: f.cluster, f: f, rows: s.t.source, seed: s.req.Seed ^ noiseStream, req: s.req}
}

func (m *noisy) worker() fitter {
	var pcg rand.PCG
	rng := rand.New(&pcg)
	return func(d *draw, out []float64, se bool) bool {
		pcg.Seed(m.seed, uint64(d.index))
		t := m.disturbed(rng)
		var p *plan
		if m.f.form == "joint" {
			p = newJointPlan(t, m.req.Joint, m.req.Interaction, m.req.Scale)
			if len(p.names) != len(m.f.names) {
				return false
			}
		} else {
			p = newPlan(t, ModelSpec{m.f.form, m.f.predictor}, m.req.Scale)
		}
		g := *m.f
		g.plan = p
		for _, z := range p.z {
			if !finite(z) {
				return false
			}
		}
		return g.compile(&m.f.t.cluster).worker()(d, out, se)
	}
}

// disturbed is the table with one draw of every stated error. The order of the
// draws is that of the rows, whatever model asks.
func (m *noisy) disturbed(rng *rand.Rand) *table {
	t := m.f.t
	out := &table{predictor: map[string][]float64{}, category: t.category, cluster: t.cluster}
	out.y = append(out.y, t.y...)
	for name, v := range t.predictor {
		out.predictor[name] = append([]float64(nil), v...)
	}
	for i, r := range m.rows {
		ny, ns, nl := rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()
		if r.SinuositySE > 0 {
			out.y[i] = 1 + math.Abs(out.y[i]+r.SinuositySE*ny-1)
		}
		row := *r
		if r.ValleySlopeSE > 0 && r.ValleySlope > 0 {
			row.ValleySlope *= math.Exp(math.Min(r.ValleySlopeSE/r.ValleySlope, 1.5) * ns)
		}
		if r.PalaeolatitudeSEDeg > 0 {
			row.PalaeolatitudeDeg = mirror(r.PalaeolatitudeDeg + r.PalaeolatitudeSEDeg*nl)
		}
		if row.ValleySlope == r.ValleySlope && row.PalaeolatitudeDeg == r.PalaeolatitudeDeg {
			continue
		}
		for name := range out.predictor {
			if v := predictorOf(&row, name, m.req.Time); v.why == "" {
				out.predictor[name][i] = v.value
			}
		}
	}
	return out
}

// mirror folds a latitude beyond a pole back onto the globe.
func mirror(lat float64) float64 {
	lat = math.Mod(lat, 360)
	switch {
	case lat > 90:
		return 180 - lat
	case lat < -90:
		return -180 - lat
	}
	return lat
}

// statedErrors says how many rows carry an error that can be drawn.
func (s *study) statedErrors() string {
	y, slope, lat := 0, 0, 0
	for _, r := range s.t.source {
		if r.SinuositySE > 0 {
			y++
		}
		if r.ValleySlopeSE > 0 {
			slope++
		}
		if r.PalaeolatitudeSEDeg > 0 && isOld(r, s.req.Time) {
			lat++
		}
	}
	return fmt.Sprintf("Measurement errors are drawn in every resample: %s a stated error of sinuosity, %d of valley slope, %d of palaeolatitude. The others count as exact, so intervals may still be too narrow.",
		plural(y, "row has", "rows have"), slope, lat)
}
