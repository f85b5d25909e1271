package earth

import (
	"fmt"
	"math"
	"sort"
)

// The names of the day-length histories and of the solar-tide settings.
const (
	TidalHistory = "tidal_history"
	Polynomial   = "polynomial"
	ConstantRate = "constant_rate"
	Locked       = "locked"
	Given        = "given"

	TideMiddle = "middle"
	TideOn     = "on"
	TideOff    = "off"
)

// History describes one day-length history.
type History struct {
	Name      string // as in the query
	Title     string
	FromMa    float64 // youngest age it holds for
	ToMa      float64 // oldest
	DayKind   string  // kind of day the source gives
	Text      string  // what it is and what its spread is
	Source    string
	SpreadIs  string
	NeedsRate bool
}

// Histories lists the five histories in the order they are offered.
func Histories() []History {
	return []History{
		{Name: TidalHistory, Title: "tidal-evolution history", ToMa: 4000, DayKind: "derived from the distance of the Moon",
			Text:     "Earth-Moon distance of a tidal-evolution model turned into a day length by conserved angular momentum. Derived here: not the authors' own day-length curve.",
			SpreadIs: "half the difference between the Sun's tide on and off, joined with the 2-sigma band of the distance",
			Source:   "Farhat et al., A&A 665:L1 (2022), doi 10.1051/0004-6361/202243445"},
		{Name: Polynomial, Title: "astronomical polynomial", ToMa: 250, DayKind: "sidereal",
			Text:     "Fourth-degree polynomial in time, sidereal hours, turned into solar hours here.",
			SpreadIs: "the distance from the middle tidal history at the same age, because the polynomial itself carries none",
			Source:   "Laskar et al., A&A 428:261 (2004), doi 10.1051/0004-6361:20041335"},
		{Name: ConstantRate, Title: "constant rate", ToMa: 3000, DayKind: "solar", NeedsRate: true,
			Text:     "The day lengthens by a typed number of milliseconds per century. Observed 1.72 to 1.78; by tides alone 2.3 to 2.4.",
			SpreadIs: "0.05 ms per century either way, half the width of the published range for the tides",
			Source:   "Stephenson, Morrison & Hohenkerk, Proc. R. Soc. A 472:20160404 (2016); Morrison et al., Proc. R. Soc. A 477:20200776 (2021)"},
		{Name: Locked, Title: "locked day", ToMa: 4000, DayKind: "taken as solar",
			Text:     "19.5 h between 600 and 2200 Ma, joined to the tidal history by a straight line over 100 Myr on either side.",
			SpreadIs: "0.5 h either way where locked (the two papers give 19.5 and about 19 h); the tidal history's outside",
			Source:   "Wu et al., Sci. Adv. 9:eadd2499 (2023); Mitchell & Kirscher, Nat. Geosci. 16:567 (2023)"},
		{Name: Given, Title: "given", ToMa: math.Inf(1), DayKind: "solar",
			Text: "A typed day length, number of days in a year, or rotation rate.", SpreadIs: "none: the typed value is taken as exact", Source: "the user"},
	}
}

// HistoryOptions chooses a history. The zero value is the default: the
// tidal-evolution history, middle of solar tide on and off.
type HistoryOptions struct {
	History          string  // "" = tidal_history
	SolarTide        string  // "" = middle; middle, on, off
	RateMsPerCentury float64 // constant_rate
	// Given: the first of these that is above 0.
	DayLength   SolarHours
	DaysPerYear float64
	Rotation    SiderealHours
}

// DayLength is a mean solar day with limits that hold about 95 %.
type DayLength struct {
	Value, Low, High SolarHours
	History          string
}

// SE is a quarter of the width of the limits, in hours.
func (d DayLength) SE() float64 { return float64(d.High-d.Low) / 4 }

// tidal constants after Runcorn 1979, Deubner 1990, Coughenour et al. 2013.
const (
	tideAlpha0 = 0.203
	tideB      = 0.211
)

// TidalDay is the sidereal day when the Moon stood at aRatio times its
// present distance, by conserved angular momentum:
// w = 1 + [1 + b/13 - sqrt(a) - (b/13) a^6.5]/alpha0, T = 86164.0905 s / w
// (today's sidereal day, to all its digits, so that today's ratio is 1).
// b is the share of the Sun's tide: 0.211, or 0 for the Moon alone.
func TidalDay(aRatio, b float64) SiderealHours {
	w := 1 + (1+b/13-math.Sqrt(aRatio)-b/13*math.Pow(aRatio, 6.5))/tideAlpha0
	return SolarHours(24).Sidereal() / SiderealHours(w)
}

type moonTable struct{ age, a, low, high []float64 }

var moon = table("earthmoon_farhat2022.csv", func(rows []record) *moonTable {
	t := &moonTable{}
	for _, r := range rows {
		t.age = append(t.age, r.number("age_ga")*1000)
		t.a = append(t.a, r.number("a_ratio"))
		t.low = append(t.low, r.number("a_ratio_lo2s"))
		t.high = append(t.high, r.number("a_ratio_hi2s"))
	}
	return t
})

// at interpolates the distance and its band linearly between the tabulated
// ages.
func (t *moonTable) at(ageMa float64) (a, low, high float64) {
	i := sort.SearchFloat64s(t.age, ageMa)
	if i < len(t.age) && t.age[i] == ageMa {
		return t.a[i], t.low[i], t.high[i]
	}
	u := (ageMa - t.age[i-1]) / (t.age[i] - t.age[i-1])
	mix := func(x []float64) float64 { return x[i-1] + u*(x[i]-x[i-1]) }
	return mix(t.a), mix(t.low), mix(t.high)
}

// DayLengthAt returns the day length at an age in Ma under a history, with
// its spread. An age the history does not reach is an *InputError that says
// its limit and names the histories that do.
func DayLengthAt(ageMa float64, o HistoryOptions) (DayLength, error) {
	if math.IsNaN(ageMa) || ageMa < 0 {
		return DayLength{}, &InputError{"age", "the age is negative. Expected 0 or more, in Ma"}
	}
	name := o.History
	if name == "" {
		name = TidalHistory
	}
	h, ok := historyNamed(name)
	if !ok {
		return DayLength{}, &InputError{"day", fmt.Sprintf("%q is no day-length history. Expected one of: %s", name, listHistories())}
	}
	if ageMa > h.ToMa {
		return DayLength{}, &InputError{"age", fmt.Sprintf("the %s reaches back to %.0f Ma, not to %g Ma. Choose another day length: %s", h.Title, h.ToMa, ageMa, reachingTo(ageMa))}
	}
	var d DayLength
	var err error
	switch name {
	case TidalHistory:
		d, err = tidalAt(ageMa, o.SolarTide)
	case Polynomial:
		d, err = polynomialAt(ageMa)
	case ConstantRate:
		d, err = constantRateAt(ageMa, o.RateMsPerCentury)
	case Locked:
		d, err = lockedAt(ageMa, o.SolarTide)
	default:
		d, err = givenDay(o)
	}
	d.History = name
	return d, err
}

func historyNamed(name string) (History, bool) {
	for _, h := range Histories() {
		if h.Name == name {
			return h, true
		}
	}
	return History{}, false
}

func listHistories() string {
	s := ""
	for i, h := range Histories() {
		if i > 0 {
			s += ", "
		}
		s += h.Name
	}
	return s
}

func reachingTo(ageMa float64) string {
	s := ""
	for _, h := range Histories() {
		if ageMa <= h.ToMa {
			if s != "" {
				s += ", "
			}
			s += h.Name
			if !math.IsInf(h.ToMa, 0) {
				s += fmt.Sprintf(" (to %.0f Ma)", h.ToMa)
			}
		}
	}
	return s
}

// tidalAt joins half the difference between solar tide on and off with the
// 2-sigma band of the distance in quadrature, each side of the value apart.
func tidalAt(ageMa float64, tide string) (DayLength, error) {
	a, lowA, highA := moon().at(ageMa)
	on, off := TidalDay(a, tideB).Solar(), TidalDay(a, 0).Solar()
	switch tide {
	case TideOn, TideOff:
		b := tideB
		if tide == TideOff {
			b = 0
		}
		return DayLength{Value: TidalDay(a, b).Solar(), Low: TidalDay(lowA, b).Solar(), High: TidalDay(highA, b).Solar()}, nil
	case "", TideMiddle:
	default:
		return DayLength{}, &InputError{"solar_tide", fmt.Sprintf("%q is not one of its values. Expected one of: middle, on, off", tide)}
	}
	middle := (on + off) / 2
	half := float64(off-on) / 2
	band := func(at float64) float64 {
		return float64((TidalDay(at, tideB).Solar()+TidalDay(at, 0).Solar())/2 - middle)
	}
	return DayLength{
		Value: middle,
		Low:   middle - SolarHours(math.Hypot(half, band(lowA))),
		High:  middle + SolarHours(math.Hypot(half, band(highA))),
	}, nil
}

// polynomialAt is Laskar et al. 2004, sidereal hours, t in Gyr, negative in
// the past.
func polynomialAt(ageMa float64) (DayLength, error) {
	t := -ageMa / 1000
	sid := SiderealHours(23.934468 + t*(7.432167+t*(-0.727046+t*(0.409572-t*0.589692))))
	v := sid.Solar()
	middle, err := tidalAt(ageMa, TideMiddle)
	gap := SolarHours(math.Abs(float64(v - middle.Value)))
	return DayLength{Value: v, Low: v - gap, High: v + gap}, err
}

// msPerCenturyHours: 1 ms per century is 10 s per Myr.
const msPerCenturyHours = 10.0 / 3600

func constantRateAt(ageMa, rate float64) (DayLength, error) {
	if math.IsNaN(rate) || rate == 0 {
		return DayLength{}, &InputError{"rate_ms_per_century", "the constant rate is missing. Expected milliseconds per century, for example 1.75 (observed) or 2.35 (by tides alone)"}
	}
	day := func(r float64) SolarHours { return SolarHours(24 - r*msPerCenturyHours*ageMa) }
	v := day(rate)
	if !(v > 2) || v > 1000 {
		return DayLength{}, &InputError{"rate_ms_per_century", fmt.Sprintf("%g ms per century gives a day of %.1f h at %g Ma, which is no day of the Earth. Expected about 1.7 to 2.4", rate, float64(v), ageMa)}
	}
	const spread = 0.05 // ms per century
	return DayLength{Value: v, Low: day(rate + spread), High: day(rate - spread)}, nil
}

// lockedAt holds 19.5 h between 600 and 2200 Ma and joins by straight lines
// over joinMyr on either side.
func lockedAt(ageMa float64, tide string) (DayLength, error) {
	const from, to, join = 600.0, 2200.0, 100.0
	locked := DayLength{Value: 19.5, Low: 19.0, High: 20.0}
	switch {
	case ageMa >= from && ageMa <= to:
		return locked, nil
	case ageMa < from-join || ageMa > to+join:
		return tidalAt(ageMa, tide)
	}
	end, u := from-join, (from-ageMa)/join
	if ageMa > to {
		end, u = to+join, (ageMa-to)/join
	}
	d, err := tidalAt(end, tide)
	mix := func(a, b SolarHours) SolarHours { return a + SolarHours(u)*(b-a) }
	return DayLength{Value: mix(locked.Value, d.Value), Low: mix(locked.Low, d.Low), High: mix(locked.High, d.High)}, err
}

func givenDay(o HistoryOptions) (DayLength, error) {
	var v SolarHours
	switch {
	case o.DayLength > 0:
		v = o.DayLength
	case o.DaysPerYear > 0:
		v = SolarFromPerYear(o.DaysPerYear)
	case o.Rotation > 0:
		v = o.Rotation.Solar()
	default:
		return DayLength{}, &InputError{"day_length_h", "a given day has no length here. Give day_length_h (solar hours) or days_per_year, above 0"}
	}
	return DayLength{Value: v, Low: v, High: v}, nil
}

// OmegaAt is the rotation rate in rad/s at an age in Ma, by the default
// history.
func OmegaAt(ageMa float64) (float64, error) {
	d, err := DayLengthAt(ageMa, HistoryOptions{})
	if err != nil {
		return math.NaN(), err
	}
	return d.Value.Omega(), nil
}

// Rival is one history's value at an age.
type Rival struct {
	History History
	Day     DayLength
}

// RivalsAt returns every history that needs no typed value and reaches the
// age: the spread between them is the honest uncertainty.
func RivalsAt(ageMa float64) []Rival {
	var out []Rival
	for _, h := range Histories() {
		if h.NeedsRate || h.Name == Given {
			continue
		}
		if d, err := DayLengthAt(ageMa, HistoryOptions{History: h.Name}); err == nil {
			out = append(out, Rival{h, d})
		}
	}
	return out
}
