package expectation

import (
	"fmt"
	"math"
	"math/rand/v2"

	"fathombend/stats"
	"fathombend/stats/earth"
)

// law is what the invented rows of these tests are drawn from:
// ln(P - 1) = a + b |f| (1e-4 s-1) + supply + slope + deposit + rest.
type law struct {
	a, f, slope, glacial, icehouse float64
	between, within                float64
	deposits, rows                 int     // rows: at most, in a deposit
	ancient                        float64 // share of ancient rows
	ages                           [2]float64
	missing                        float64 // share of rows without a slope
}

var plainLaw = law{a: -0.4, f: -1.6, between: 0.35, within: 0.25, deposits: 30, rows: 5, ancient: 0.15, ages: [2]float64{20, 300}, missing: 0.2}

func (l law) draw(seed uint64) []stats.Row {
	rng := rand.New(rand.NewPCG(seed, 77))
	var out []stats.Row
	for d := range l.deposits {
		lat := math.Asin(rng.Float64()*0.98) * 180 / math.Pi
		if rng.IntN(2) == 0 {
			lat = -lat
		}
		logSlope := -2.3 + 0.4*rng.NormFloat64()
		feeder := []string{"river", "shelf", "failure", "unknown"}[rng.IntN(4)]
		if math.Abs(lat) > 50 && rng.Float64() < 0.7 {
			feeder = "glacial"
		}
		deposit := l.between * rng.NormFloat64()
		ancient := rng.Float64() < l.ancient
		age := l.ages[0] + (l.ages[1]-l.ages[0])*rng.Float64()
		for k := range 1 + rng.IntN(l.rows) {
			r := blankRow()
			r.ID, r.System, r.SystemName = fmt.Sprintf("m%04d%02d", d, k), fmt.Sprintf("s%04d-%d", d, k/2), fmt.Sprintf("System %d-%d", d, k/2)
			r.ParentDeposit = fmt.Sprintf("D%04d", d)
			r.LatitudeDeg, r.LongitudeDeg, r.Invented = lat, 10, true
			ratio := 1.0
			if ancient {
				r.AgeMa, r.PalaeolatitudeDeg, r.PalaeolatitudeSEDeg, r.LatitudeDeg = age, lat, 2, lat/2
				day, _ := earth.DayLengthAt(age, earth.HistoryOptions{})
				ratio = day.Value.RotationRatio()
			}
			s := logSlope + 0.1*rng.NormFloat64()
			y := l.a + l.f*fUnit*ratio*sinOf(lat) + l.slope*(s+2.3) + deposit + l.within*rng.NormFloat64()
			if feeder == "glacial" {
				y += l.glacial
			}
			if l.icehouse != 0 && stateAt(earth.ClimateStates(), math.Max(0, zero(r.AgeMa))) == icehouse {
				y += l.icehouse * (sinOf(lat) - 0.5)
			}
			r.Sinuosity = 1 + math.Exp(y)
			if rng.Float64() > l.missing {
				r.ValleySlope = math.Pow(10, s)
			}
			r.ChannelWidthM = math.Exp(math.Log(1000) + 0.7*rng.NormFloat64())
			r.ChannelDepthM = r.ChannelWidthM / (10 + 30*rng.Float64())
			r.RadiusM = r.ChannelWidthM * (2 + 3*rng.Float64())
			r.Categories = map[string]string{"feeder": feeder, "grain": []string{"mud", "mud_sand", "sand"}[rng.IntN(3)], "large_river": []string{"yes", "no", "unknown"}[rng.IntN(3)],
				"setting": []string{"fan", "slope"}[rng.IntN(2)], "confinement": []string{"levee_confined", "confined", "unknown"}[rng.IntN(3)],
				"stacking": []string{"vertical", "lateral", "unknown"}[rng.IntN(3)], "lateral_accretion": []string{"yes", "no", ""}[rng.IntN(3)]}
			out = append(out, r)
		}
	}
	return out
}

func zero(x float64) float64 {
	if math.IsNaN(x) {
		return 0
	}
	return x
}

func blankRow() stats.Row {
	n := math.NaN()
	return stats.Row{Kind: "submarine", SinuosityKind: "peak", MeasuredLine: "thalweg", Sinuosity: n, SinuositySE: n, LatitudeDeg: n, LongitudeDeg: n, AgeMa: n,
		PalaeolatitudeDeg: n, PalaeolatitudeSEDeg: n, ValleySlope: n, ValleySlopeSE: n, ChannelWidthM: n, ChannelDepthM: n, WavelengthM: n, AmplitudeM: n, RadiusM: n, NetToGross: n,
		Categories: map[string]string{}}
}
