package stats

import (
	"math"

	"fathombend/stats/earth"
)

// oldMa is the age from which a row's latitude and rotation rate are those of
// its deposition: in 5 Ma a plate moves a degree or few, and the day changes
// by a second or two.
const oldMa = 5

// derived is a predictor's value, or the reason why this row has none.
type derived struct {
	value float64
	why   string
}

// predictorOf computes one predictor of one row.
//
//	valley_slope      m/m
//	log10_slope       log10 of m/m
//	abs_latitude      degrees
//	sin_abs_latitude  1
//	coriolis          |f| = 2 omega(age) |sin latitude|, 1e-4 s-1
//	channel_width, channel_depth  m
func predictorOf(r *Row, name, time string) derived {
	switch name {
	case "valley_slope", "log10_slope":
		switch {
		case !finite(r.ValleySlope):
			return derived{why: "no valley slope"}
		case r.ValleySlope <= 0:
			return derived{why: "valley slope of zero or below, kept out of slope fits"}
		case name == "log10_slope":
			return derived{value: math.Log10(r.ValleySlope)}
		}
		return derived{value: r.ValleySlope}
	case "channel_width":
		return positive(r.ChannelWidthM, "channel width")
	case "channel_depth":
		return positive(r.ChannelDepthM, "channel depth")
	}
	return latitudePredictor(r, name, time)
}

// storedValue is what the record holds of a predictor, for a row that is left
// out for it: a slope below zero is shown, not hidden. NaN where nothing is
// stored or the predictor is derived.
func storedValue(r *Row, name string) float64 {
	switch name {
	case "valley_slope":
		return r.ValleySlope
	case "channel_width":
		return r.ChannelWidthM
	case "channel_depth":
		return r.ChannelDepthM
	}
	return nan
}

func positive(x float64, what string) derived {
	if !finite(x) || x <= 0 {
		return derived{why: "no " + what}
	}
	return derived{value: x}
}

// isOld tells whether the row uses palaeolatitude and ancient rotation.
func isOld(r *Row, time string) bool {
	return time == "of_deposition" && finite(r.AgeMa) && r.AgeMa > oldMa
}

func latitudePredictor(r *Row, name, time string) derived {
	lat := r.LatitudeDeg
	if isOld(r, time) {
		if lat = r.PalaeolatitudeDeg; !finite(lat) {
			return derived{why: "older than 5 Ma without a palaeolatitude"}
		}
	}
	if !finite(lat) || math.Abs(lat) > 90 {
		return derived{why: "no latitude"}
	}
	lat = math.Abs(lat)
	switch name {
	case "abs_latitude":
		return derived{value: lat}
	case "sin_abs_latitude":
		return derived{value: math.Sin(lat * math.Pi / 180)}
	}
	omega := earth.Omega
	if isOld(r, time) {
		var err error
		if omega, err = earth.OmegaAt(r.AgeMa); err != nil {
			return derived{why: "age outside the history of the Earth's rotation"}
		}
	}
	return derived{value: math.Abs(earth.Coriolis(omega, lat)) * 1e4}
}

// transform returns the predictor as the form fits it, or why it cannot.
func transform(form, predictor string, x float64) derived {
	switch form {
	case "logarithmic", "power":
		if x <= 0 {
			return derived{why: predictor + " of 0 has no logarithm"}
		}
		return derived{value: math.Log(x)}
	case "inverse":
		if x == 0 {
			if predictor == "coriolis" {
				return derived{why: "on the equator f = 0 and 1/f has no value"}
			}
			return derived{why: predictor + " of 0 has no inverse"}
		}
		return derived{value: 1 / x}
	}
	return derived{value: x}
}

// isLatitude tells the predictors that are one explanation on modern rows.
func isLatitude(predictor string) bool {
	return predictor == "abs_latitude" || predictor == "sin_abs_latitude" || predictor == "coriolis"
}

// explanationOf groups predictors that say the same thing, so that asking
// twice is not testing twice.
func explanationOf(predictor string) string {
	switch {
	case isLatitude(predictor):
		return "latitude"
	case predictor == "log10_slope":
		return "valley_slope"
	}
	return predictor
}

// logAxis tells predictors that span decades: their curve is drawn at equal
// steps of the logarithm.
func logAxis(predictor string) bool {
	return predictor == "valley_slope" || predictor == "channel_width" || predictor == "channel_depth"
}

// scaleOf is the response scale a form is fitted on.
func scaleOf(form, asked string) string {
	switch form {
	case "exponential", "power":
		return "ln"
	case "floor_decay":
		return "raw"
	}
	return asked
}

// toScale and fromScale carry a sinuosity P to the scale fitted and back:
// raw P, ln P, ln_excess ln(P - 1).
func toScale(scale string, p float64) float64 {
	switch scale {
	case "ln":
		return math.Log(p)
	case "ln_excess":
		return math.Log(p - 1)
	}
	return p
}

func fromScale(scale string, z float64) float64 {
	switch scale {
	case "ln":
		return math.Exp(z)
	case "ln_excess":
		return 1 + math.Exp(z)
	}
	return z
}

// EmptyRow is a row with every number missing.
func EmptyRow() Row {
	return Row{Sinuosity: nan, SinuositySE: nan, LatitudeDeg: nan, LongitudeDeg: nan, AgeMa: nan,
		PalaeolatitudeDeg: nan, PalaeolatitudeSEDeg: nan, ValleySlope: nan, ValleySlopeSE: nan,
		ChannelWidthM: nan, ChannelDepthM: nan, WavelengthM: nan, AmplitudeM: nan, RadiusM: nan, NetToGross: nan}
}
