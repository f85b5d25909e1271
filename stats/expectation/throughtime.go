package expectation

import (
	"context"
	"errors"
	"math"

	"fathombend/stats/earth"
)

// SeriesPoint is one age of a site's history. Low and high are 95 % limits;
// numbers that are not known are NaN.
type SeriesPoint struct {
	AgeMa                    float64        `json:"age_ma"`
	Palaeolatitude           Palaeolatitude `json:"palaeolatitude"`
	DayLength                DayLength      `json:"day_length_h"`
	RotationRatio            float64        `json:"rotation_ratio"`
	Coriolis                 float64        `json:"coriolis"`
	CoriolisLow              float64        `json:"coriolis_low"`
	CoriolisHigh             float64        `json:"coriolis_high"`
	EquivalentModernLatitude *float64       `json:"equivalent_modern_latitude"`
	ClimateState             string         `json:"climate_state"`
	Sinuosity                *Quantiles     `json:"sinuosity"`
	Failure                  string         `json:"failure,omitempty"` // why this age has no values
}

// seriesDraws are the draws of each age of a series.
const seriesDraws = 1000

// SeriesAges are the ages at which a target's history is drawn when none are
// asked for: every 10 Myr as far as its plate's path and its day length reach,
// at most 400 Ma.
func SeriesAges(t Target) []float64 {
	to := 400.0
	if t.Plate != "" {
		table := t.UserPoles
		if table == nil || (t.PoleTable != "" && t.PoleTable != table.Name) {
			table, _ = earth.PoleTableNamed(t.PoleTable, t.Plate, 0)
		}
		if table != nil {
			if _, end, ok := table.Reach(t.Plate); ok {
				to = math.Min(to, end)
			}
		}
	}
	if t.Day == earth.Polynomial {
		to = math.Min(to, 250)
	}
	var out []float64
	for age := 0.0; age < to-1e-9; age += 10 {
		out = append(out, age)
	}
	return append(out, to)
}

// ThroughTime is palaeolatitude, day length, f and expected sinuosity of a
// site and plate against age. With another way to the palaeolatitude than a
// plate, that latitude stands at every age. An age that a table does not reach
// keeps its place with the reason; any other fault of the target is returned.
func (f *Fits) ThroughTime(ctx context.Context, t Target, ages []float64) ([]SeriesPoint, error) {
	if len(ages) == 0 {
		ages = SeriesAges(t)
	}
	t.Unit, t.Draws = "", min(max(t.Draws, FewestDraws), seriesDraws)
	out := make([]SeriesPoint, 0, len(ages))
	failed := 0
	var last error
	for _, age := range ages {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		t.Age = age
		p, err := f.seriesPoint(t)
		if err != nil {
			var in *InputError
			if !errors.As(err, &in) {
				return nil, err
			}
			failed, last = failed+1, err
			p = SeriesPoint{RotationRatio: math.NaN(), Coriolis: math.NaN(), CoriolisLow: math.NaN(), CoriolisHigh: math.NaN(), Failure: in.Message}
		}
		p.AgeMa = age
		out = append(out, p)
	}
	if failed == len(ages) {
		return nil, last
	}
	return out, nil
}

func (f *Fits) seriesPoint(t Target) (SeriesPoint, error) {
	if err := t.Validate(); err != nil {
		return SeriesPoint{}, err
	}
	p, err := locate(&t)
	if err != nil {
		return SeriesPoint{}, err
	}
	d := f.draw(&t, p, false)
	r := f.frameOf(&t, p, d)
	s := SeriesPoint{
		Palaeolatitude: r.Palaeolatitude, DayLength: r.DayLength, RotationRatio: r.RotationRatio,
		Coriolis: r.Coriolis, CoriolisLow: r.CoriolisLow, CoriolisHigh: r.CoriolisHigh,
		EquivalentModernLatitude: r.EquivalentModernLatitude, ClimateState: r.ClimateState,
	}
	if len(d.mix.draws) > 0 {
		s.Sinuosity = d.mix.quantiles()
	}
	return s, nil
}
