package earth

import (
	"fmt"
	"math"
)

// Radius95 turns a 95 % radius on the sphere into the standard error along
// one direction: sqrt(chi2 with 2 degrees of freedom at 0.95) = 2.45.
const Radius95 = 2.45

// Palaeolatitude is degrees, north positive, with one standard error and 95 %
// limits, held inside -90..90.
type Palaeolatitude struct {
	Value, SE float64
	Low, High float64
	Method    string // given, inclination, pole, rotation
	Text      string // how it was found and what its error does not hold
}

func withLimits(p Palaeolatitude) Palaeolatitude {
	p.Low = math.Max(-90, p.Value-1.96*p.SE)
	p.High = math.Min(90, p.Value+1.96*p.SE)
	return p
}

func checkRange(parameter string, v, lo, hi float64, unit string) error {
	if math.IsNaN(v) || v < lo || v > hi {
		return &InputError{parameter, fmt.Sprintf("%s is not allowed. Expected a number from %g to %g%s", plain(v), lo, hi, unit)}
	}
	return nil
}

// checkError checks a 95 % radius or a standard error; NaN is taken as 0.
func checkError(parameter string, v float64) (float64, error) {
	if math.IsNaN(v) {
		return 0, nil
	}
	return v, checkRange(parameter, v, 0, 90, " degrees")
}

// FromGiven takes a palaeolatitude and its standard error as they are typed.
func FromGiven(lat, se float64) (Palaeolatitude, error) {
	if err := checkRange("palaeolatitude", lat, -90, 90, " degrees, north positive"); err != nil {
		return Palaeolatitude{}, err
	}
	se, err := checkError("palaeolatitude_se", se)
	return withLimits(Palaeolatitude{Value: lat, SE: se, Method: "given",
		Text: "As typed, with its standard error."}), err
}

// FieldInclination undoes the flattening of sediment inclinations,
// tan I_obs = f tan I_field (King 1955); degrees.
func FieldInclination(observed, flattening float64) float64 {
	if math.Abs(observed) == 90 {
		return observed
	}
	return degrees(math.Atan(math.Tan(radians(observed)) / flattening))
}

// LatitudeOfInclination is the geocentric axial dipole: tan I = 2 tan lat;
// degrees.
func LatitudeOfInclination(inclination float64) float64 {
	if math.Abs(inclination) >= 90 {
		return math.Copysign(90, inclination)
	}
	return degrees(math.Atan(math.Tan(radians(inclination)) / 2))
}

// InclinationOfLatitude is the inverse of LatitudeOfInclination; degrees.
func InclinationOfLatitude(lat float64) float64 {
	if math.Abs(lat) >= 90 {
		return math.Copysign(90, lat)
	}
	return degrees(math.Atan(2 * math.Tan(radians(lat))))
}

// DP is the 95 % figure dp = 2 a95 / (1 + 3 cos^2 I), degrees.
func DP(inclination, a95 float64) float64 {
	c := math.Cos(radians(inclination))
	return 2 * a95 / (1 + 3*c*c)
}

// FromInclination finds the palaeolatitude from an observed inclination with
// its a95 and a flattening factor (1 = none). The 95 % limits are those of
// the inclination, carried through flattening and dipole; se = dp/2.45.
func FromInclination(inclination, a95, flattening float64) (Palaeolatitude, error) {
	if math.IsNaN(flattening) {
		flattening = 1
	}
	if err := checkRange("inclination", inclination, -90, 90, " degrees, down positive"); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("flattening", flattening, 0.1, 1, " (1 = none; 0.4 to 1 is usual in detrital sediments)"); err != nil {
		return Palaeolatitude{}, err
	}
	a95, err := checkError("a95", a95)
	if err != nil {
		return Palaeolatitude{}, err
	}
	lat := func(i float64) float64 {
		return LatitudeOfInclination(FieldInclination(math.Max(-90, math.Min(90, i)), flattening))
	}
	field := FieldInclination(inclination, flattening)
	// d I_field / d I_obs carries a95 to the unflattened inclination.
	t := math.Tan(radians(inclination))
	stretch := flattening
	if math.Abs(inclination) < 89.999 {
		stretch = (1 + t*t) / flattening / (1 + t*t/(flattening*flattening))
	}
	p := Palaeolatitude{Value: lat(inclination), SE: DP(field, a95*stretch) / Radius95, Method: "inclination",
		Low: lat(inclination - a95), High: lat(inclination + a95),
		Text: "From the inclination by the geocentric axial dipole, tan I = 2 tan lat; the standard error is dp/2.45. Not in it: errors of the flattening factor, of the dipole field's averaging, of tilt correction and of the age."}
	return p, nil
}

// Pole is a palaeomagnetic north pole with its 95 % radius (NaN = none given).
type Pole struct{ Lat, Lon, A95 float64 }

// LatitudeFromPole is the palaeolatitude of a site from a north pole:
// sin lat = sin ls sin lp + cos ls cos lp cos(lon_p - lon_s); degrees.
func LatitudeFromPole(siteLat, siteLon float64, p Pole) float64 {
	ls, lp := radians(siteLat), radians(p.Lat)
	s := math.Sin(ls)*math.Sin(lp) + math.Cos(ls)*math.Cos(lp)*math.Cos(radians(p.Lon-siteLon))
	return degrees(math.Asin(math.Max(-1, math.Min(1, s))))
}

func checkSite(lat, lon float64) error {
	if err := checkRange("site_lat", lat, -90, 90, " degrees"); err != nil {
		return err
	}
	return checkRange("site_lon", lon, -180, 360, " degrees")
}

// FromPole finds the palaeolatitude of a site from a north pole; A95 is a
// 95 % radius, so the standard error along the arc is A95/2.45 (Fisher
// statistics).
func FromPole(siteLat, siteLon float64, p Pole) (Palaeolatitude, error) {
	if err := checkSite(siteLat, siteLon); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("pole_lat", p.Lat, -90, 90, " degrees (the north pole of the pair)"); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("pole_lon", p.Lon, -180, 360, " degrees"); err != nil {
		return Palaeolatitude{}, err
	}
	a95, err := checkError("a95", p.A95)
	return withLimits(Palaeolatitude{Value: LatitudeFromPole(siteLat, siteLon, p), SE: a95 / Radius95, Method: "pole",
		Text: "From the site and the palaeomagnetic north pole; the standard error is A95/2.45 (Fisher statistics). Not in it: errors of the age, of the plate's margins and inner deformation, and of the plate circuit that carried the pole."}), err
}
