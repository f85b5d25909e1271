package earth

import "strings"

// Observation is one observed day length of the geological past.
type Observation struct {
	AgeMa, AgeErrMa     float64 // Ma; error NaN when none is given
	LengthH, LengthErrH float64 // hours, of the kind in DayKind
	SolarH              float64 // solar hours: converted when DayKind is sidereal
	DayKind             string  // solar, sidereal, unstated
	SolarDaysPerYear    float64 // NaN when none
	Method              string
	Notes               string
	Source              string
	Tag                 string // published, second-hand, memory
}

// Hollow is true for values that were not read in their source: figures draw
// them hollow.
func (o Observation) Hollow() bool { return o.Tag != "published" }

// Observations returns the observed day lengths and today's.
func Observations() []Observation { return append([]Observation(nil), observed()...) }

var observed = table("lod_geological.csv", func(rows []record) []Observation {
	var out []Observation
	for _, r := range rows {
		o := Observation{
			AgeMa: r.number("age_ma"), AgeErrMa: r.number("age_err_ma"),
			LengthH: r.number("lod_h"), LengthErrH: r.number("lod_err_h"),
			DayKind: r.text("day_kind"), SolarDaysPerYear: r.number("solar_days_per_year"),
			Method: r.text("method"), Notes: r.text("formation_and_notes"),
			Source: r.text("source"), Tag: strings.ToLower(r.text("tag")),
		}
		o.SolarH = o.LengthH
		if o.DayKind == "sidereal" {
			o.SolarH = float64(SiderealHours(o.LengthH).Solar())
		}
		out = append(out, o)
	}
	return out
})
