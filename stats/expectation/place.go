package expectation

import (
	"fmt"
	"math"

	"fathombend/stats/earth"
)

// place is where and when a target was: point values, and how to draw them.
type place struct {
	lat     earth.Palaeolatitude
	age     earth.Age
	day     earth.DayLength
	ratio   float64
	options earth.HistoryOptions
	table   *earth.PoleTable // by plate only
	site    [2]float64
	plate   string
	pole    earth.Pole
	notes   []string
	days    []float64 // solar hours on a grid of ages over the errors of the age
	grid    [2]float64
}

// gridNodes is the number of ages at which the day length is looked up for the
// draws of the age.
const gridNodes = 65

// setGrid tabulates the day length over five standard errors of the age (or
// the unit); beyond a history's end its last value stands.
func (p *place) setGrid() {
	if p.age.SE == 0 || p.options.History == earth.Given {
		return
	}
	lo, hi := math.Max(0, p.age.Value-5*p.age.SE), p.age.Value+5*p.age.SE
	p.grid = [2]float64{lo, (hi - lo) / (gridNodes - 1)}
	last := float64(p.day.Value)
	for k := range gridNodes {
		if d, err := earth.DayLengthAt(lo+float64(k)*p.grid[1], p.options); err == nil {
			last = float64(d.Value)
		}
		p.days = append(p.days, last)
	}
}

// dayAt is the day length at a drawn age, solar hours.
func (p *place) dayAt(age float64) float64 {
	if p.days == nil {
		return float64(p.day.Value)
	}
	x := (age - p.grid[0]) / p.grid[1]
	x = math.Max(0, math.Min(gridNodes-1, x))
	k := min(int(x), gridNodes-2)
	return p.days[k] + (x-float64(k))*(p.days[k+1]-p.days[k])
}

// locate turns a target into a palaeolatitude, an age and a day length.
func locate(t *Target) (*place, error) {
	p := &place{}
	var err error
	if p.age, err = p.ageOf(t); err != nil {
		return nil, err
	}
	p.options = earth.HistoryOptions{History: t.Day, SolarTide: t.SolarTide, RateMsPerCentury: t.RateMsPerCentury}
	if given(t.DayLengthH) {
		p.options.DayLength = earth.SolarHours(t.DayLengthH)
	}
	if given(t.DaysPerYear) {
		p.options.DaysPerYear = t.DaysPerYear
	}
	if given(t.RotationPeriodH) {
		p.options = earth.HistoryOptions{History: earth.Given, Rotation: earth.SiderealHours(t.RotationPeriodH)}
		p.notes = append(p.notes, "The rotation period was typed: the solar day is counted with the Earth's year.")
	}
	if given(t.DayLengthH) && given(t.DaysPerYear) {
		return nil, refuse("days_per_year", "the day is given twice, as day_length_h and as days_per_year. Give one of them")
	}
	if (given(t.DayLengthH) || given(t.DaysPerYear)) && p.options.History != earth.Given {
		p.notes = append(p.notes, "Not used: the day length that was typed, because the day comes from "+dayName(p.options.History)+". Choose a given day to use it.")
	}
	if p.day, err = earth.DayLengthAt(p.age.Value, p.options); err != nil {
		return nil, err
	}
	p.ratio = p.day.Value.RotationRatio()
	if given(t.RotationPeriodH) {
		p.ratio = p.options.Rotation.RotationRatio()
	}
	if err := p.latitudeOf(t); err != nil {
		return nil, err
	}
	p.setGrid()
	if t.Day == earth.Locked && p.age.Value >= 500 && p.age.Value <= 2300 {
		p.notes = append(p.notes, "The locked day of 19.5 h is taken as a solar day.")
	}
	return p, nil
}

func orDefault(day string) string {
	if day == "" {
		return earth.TidalHistory
	}
	return day
}

func (p *place) ageOf(t *Target) (earth.Age, error) {
	if t.Unit != "" {
		u, err := earth.UnitNamed(t.Unit)
		if err != nil {
			return earth.Age{}, err
		}
		p.notes = append(p.notes, fmt.Sprintf("The age is that of the %s, %g to %g Ma (chart v2024-12): any age in it is taken as equally likely.", u.Name, u.BaseMa, u.TopMa))
		return earth.AgeOfUnit(u), nil
	}
	if !given(t.Age) {
		p.notes = append(p.notes, "No age was given: the present day is used (0 Ma).")
		return earth.AgeOf(0, 0)
	}
	if !given(t.AgeSE) && t.Age > 0 {
		p.notes = append(p.notes, "No error of the age was given: it is taken as 0.")
	}
	return earth.AgeOf(t.Age, t.AgeSE)
}

func (p *place) latitudeOf(t *Target) error {
	way, err := t.way()
	if err != nil {
		return err
	}
	p.notes = append(p.notes, t.unused(way)...)
	missing := func(x float64, what string) {
		if !given(x) {
			p.notes = append(p.notes, "No "+what+" was given: it is taken as 0.")
		}
	}
	switch way {
	case wayGiven:
		missing(t.PalaeolatitudeSE, "error of the palaeolatitude")
		p.lat, err = earth.FromGiven(t.Palaeolatitude, t.PalaeolatitudeSE)
	case wayInclination:
		missing(t.A95, "a95 of the inclination")
		if !given(t.Flattening) {
			p.notes = append(p.notes, "No flattening of the inclination was given: 1 is used (none), which makes the latitude of a detrital sediment too low. Typical factors are 0.4 to 1.")
		}
		p.lat, err = earth.FromInclination(t.Inclination, t.A95, t.Flattening)
	case wayPole:
		missing(t.A95, "A95 of the pole")
		p.lat, err = earth.FromPole(t.SiteLat, t.SiteLon, earth.Pole{Lat: t.PoleLat, Lon: t.PoleLon, A95: t.A95})
		if t.PoleLat < 0 {
			p.notes = append(p.notes, "The pole typed lies in the southern hemisphere. If it is the south pole of the pair, the palaeolatitude has the wrong sign: type the north pole.")
		}
	case wayPlate:
		err = p.byPlate(t)
	default:
		missing(t.EulerError, "error of the rotation")
		if t.EulerFrame == "" {
			p.notes = append(p.notes, "The rotation is taken to lead into a palaeomagnetic (spin-axis) frame. A mantle frame misleads by degrees: check yours.")
		}
		p.lat, err = earth.FromRotation(t.SiteLat, t.SiteLon, t.EulerLat, t.EulerLon, t.EulerAngle, t.EulerError, t.EulerFrame)
	}
	if err == nil && math.Abs(p.lat.Value)+1.96*p.lat.SE > 90 {
		p.notes = append(p.notes, "The error of the palaeolatitude reaches past the pole: draws beyond it are folded back over it.")
	}
	return err
}

func (p *place) byPlate(t *Target) error {
	var err error
	if t.UserPoles != nil && (t.PoleTable == "" || t.PoleTable == t.UserPoles.Name) {
		p.table = t.UserPoles
	} else if p.table, err = earth.PoleTableNamed(t.PoleTable, t.Plate, p.age.Value); err != nil {
		return err
	}
	p.plate, p.site = t.Plate, [2]float64{t.SiteLat, t.SiteLon}
	if p.pole, err = p.table.Pole(t.Plate, p.age.Value); err != nil {
		return err
	}
	if !given(p.pole.A95) {
		p.notes = append(p.notes, "The pole table gives no A95: the error of the pole is taken as 0, which is too small.")
	}
	p.lat, err = earth.FromPole(t.SiteLat, t.SiteLon, p.pole)
	p.lat.Text = fmt.Sprintf("From the site and the north pole of %s at %.4g Ma, %.1f N %.1f E (%s). %s", t.Plate, p.age.Value, p.pole.Lat, p.pole.Lon, p.table.Source, p.lat.Text)
	return err
}

// drawn is one draw of where and when.
type drawn struct {
	lat, ratio, age float64
}

// at is where and when for one set of deviates: age, day length and
// palaeolatitude move each only if its flag is set.
func (p *place) at(z *deviates, withAge, withDay, withLat bool) drawn {
	d := drawn{lat: p.lat.Value, ratio: p.ratio, age: p.age.Value}
	hours, moved := float64(p.day.Value), false
	if withAge && p.age.SE > 0 {
		d.age = p.age.Value + p.age.SE*z.age
		if p.age.Unit != "" {
			d.age = p.age.Low + z.uAge*(p.age.High-p.age.Low)
		}
		d.age = math.Abs(d.age)
		hours, moved = p.dayAt(d.age), true
		if p.table != nil {
			if pole, err := p.table.Pole(p.plate, d.age); err == nil {
				d.lat = earth.LatitudeFromPole(p.site[0], p.site[1], pole)
			}
		}
	}
	if withDay && p.day.High > p.day.Low {
		hours, moved = hours+p.day.SE()*z.day, true
	}
	if moved && p.options.Rotation == 0 {
		d.ratio = earth.SolarHours(hours).RotationRatio()
	}
	if withLat {
		d.lat = foldLatitude(d.lat + p.lat.SE*z.lat)
	}
	return d
}
