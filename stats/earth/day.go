package earth

import "math"

// Solar and sidereal days are kept apart by type: growth lines and rhythmites
// count solar days, some astronomical solutions give sidereal ones, and the
// difference (4 minutes) is of the size of the effect at 3 Ma.
type (
	// SolarHours is the length of a mean solar day in hours of today.
	SolarHours float64
	// SiderealHours is a rotation period against the stars, in hours of today.
	SiderealHours float64
)

const (
	// YearDays is the tropical year in days of 86,400 s, taken as constant
	// through time.
	YearDays = 365.2422
	// YearHours is the same year in hours: 8765.8128.
	YearHours = YearDays * 24
)

// Sidereal converts by 1/T_sid = 1/T_sol + 1/Y.
func (d SolarHours) Sidereal() SiderealHours {
	return SiderealHours(1 / (1/float64(d) + 1/YearHours))
}

// Solar converts by 1/T_sol = 1/T_sid - 1/Y. For a rotation as slow as the
// year or slower there is no prograde solar day: the result is NaN.
func (d SiderealHours) Solar() SolarHours {
	inv := 1/float64(d) - 1/YearHours
	if inv <= 0 {
		return SolarHours(math.NaN())
	}
	return SolarHours(1 / inv)
}

// PerYear is the number of solar days in a year, N = Y / T_sol.
func (d SolarHours) PerYear() float64 { return YearHours / float64(d) }

// SolarFromPerYear is LOD_h = 8765.8128 / N.
func SolarFromPerYear(n float64) SolarHours { return SolarHours(YearHours / n) }

// RotationRatio is Omega/Omega0 for a solar day: today's sidereal day over
// that day's sidereal day. 24 h gives exactly 1.
func (d SolarHours) RotationRatio() float64 { return d.Sidereal().RotationRatio() }

// RotationRatio is Omega/Omega0 = T_sid(today) / T_sid.
func (d SiderealHours) RotationRatio() float64 {
	return float64(SolarHours(24).Sidereal()) / float64(d)
}

// Omega is the rotation rate in rad/s.
func (d SiderealHours) Omega() float64 { return Omega * d.RotationRatio() }

// Omega is the rotation rate in rad/s of a solar day's rotation.
func (d SolarHours) Omega() float64 { return d.Sidereal().Omega() }

// SiderealFromOmega is the rotation period of a rate in rad/s.
func SiderealFromOmega(omega float64) SiderealHours {
	return SiderealHours(float64(SolarHours(24).Sidereal()) * Omega / omega)
}

// EquivalentModernLatitude returns the latitude that has the same Coriolis
// parameter today, asin(ratio sin lat), with the sign of lat, in degrees.
// false when the ancient value exceeds today's polar one.
func EquivalentModernLatitude(ratio, latDeg float64) (float64, bool) {
	s := ratio * math.Sin(radians(latDeg))
	if math.IsNaN(s) || math.Abs(s) > 1 {
		return math.NaN(), false
	}
	return degrees(math.Asin(s)), true
}

// NoEquivalentPoleward is the latitude, in degrees, poleward of which no
// modern latitude has the same f: asin(1/ratio).
func NoEquivalentPoleward(ratio float64) float64 {
	if ratio <= 1 {
		return 90
	}
	return degrees(math.Asin(1 / ratio))
}

func radians(d float64) float64 { return d * math.Pi / 180 }
func degrees(r float64) float64 { return r * 180 / math.Pi }
