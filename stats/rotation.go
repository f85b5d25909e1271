package stats

import (
	"math"

	"fathombend/stats/earth"
)

// omegaAt is the rotation rate of the Earth at an age in Ma, rad/s.
//
// A constant lengthening of the day by 1.78 ms per century, the observed rate
// (Stephenson, Morrison & Hohenkerk, Proc. R. Soc. A 472:20160404 (2016),
// doi 10.1098/rspa.2016.0404); 1 ms per century is 0.0027778 h per Myr. The
// sidereal and solar year fractions hold: 1/T_sid = 1/T_sol + 1/Y.
func omegaAt(ageMa float64) (float64, error) {
	const perMyr, year = 1.78 / 360, 365.2422 * 24
	solar := 24 - perMyr*ageMa
	if ageMa < 0 || solar < 12 {
		return math.NaN(), &InputError{Parameter: "age", Message: "outside the history of the Earth's rotation"}
	}
	return earth.Omega * (1/solar + 1/year) / (1.0/24 + 1/year), nil
}
