package earth

import "math"

// Omega is today's rotation rate of the Earth, rad/s (IERS and WGS84
// conventional value).
const Omega = 7.292115e-5

// Coriolis returns f = 2 omega sin(lat) in s-1 for a latitude in degrees and a
// rotation rate in rad/s; positive north.
func Coriolis(omega, latDeg float64) float64 {
	return 2 * omega * math.Sin(latDeg*math.Pi/180)
}
