package earth

import "math"

// Rotate turns a point about an Euler pole by an angle (+ counter-clockwise
// seen from outside the Earth) by Rodrigues' formula; degrees, longitude
// 0..360.
func Rotate(lat, lon, eulerLat, eulerLon, angle float64) (outLat, outLon float64) {
	v, k := unitVector(lat, lon), unitVector(eulerLat, eulerLon)
	s, c := math.Sincos(radians(angle))
	dot := v[0]*k[0] + v[1]*k[1] + v[2]*k[2]
	cross := [3]float64{k[1]*v[2] - k[2]*v[1], k[2]*v[0] - k[0]*v[2], k[0]*v[1] - k[1]*v[0]}
	var r [3]float64
	for i := range r {
		r[i] = v[i]*c + cross[i]*s + k[i]*dot*(1-c)
	}
	return latLon(r)
}

// FromRotation finds the palaeolatitude of a site by a finite rotation into a
// palaeomagnetic (spin-axis) frame. frame must be "spin_axis" or "" (taken as
// spin_axis); "mantle" is refused because it misleads by degrees. errorRadius
// is a 95 % radius in degrees.
func FromRotation(siteLat, siteLon, eulerLat, eulerLon, angle, errorRadius float64, frame string) (Palaeolatitude, error) {
	if err := checkSite(siteLat, siteLon); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("euler_lat", eulerLat, -90, 90, " degrees"); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("euler_lon", eulerLon, -180, 360, " degrees"); err != nil {
		return Palaeolatitude{}, err
	}
	if err := checkRange("euler_angle", angle, -360, 360, " degrees, counter-clockwise positive"); err != nil {
		return Palaeolatitude{}, err
	}
	switch frame {
	case "", "spin_axis":
	case "mantle":
		return Palaeolatitude{}, &InputError{"euler_frame", "a rotation into a mantle frame gives latitudes that are wrong by degrees. Type the rotation into a palaeomagnetic (spin-axis) frame, or a palaeopole"}
	default:
		return Palaeolatitude{}, &InputError{"euler_frame", "expected spin_axis: the frame the rotation leads into"}
	}
	r, err := checkError("euler_error", errorRadius)
	lat, _ := Rotate(siteLat, siteLon, eulerLat, eulerLon, angle)
	return withLimits(Palaeolatitude{Value: lat, SE: r / Radius95, Method: "rotation",
		Text: "By finite rotation into a palaeomagnetic (spin-axis) frame; the standard error is the 95 % radius over 2.45. Not in it: errors of the age, of the plate's inner deformation, and of the frame. A rotation into a mantle frame would mislead by degrees: check which frame yours leads into."}), err
}

func unitVector(lat, lon float64) [3]float64 {
	sl, cl := math.Sincos(radians(lat))
	so, co := math.Sincos(radians(lon))
	return [3]float64{cl * co, cl * so, sl}
}

func latLon(v [3]float64) (lat, lon float64) {
	lat = degrees(math.Atan2(v[2], math.Hypot(v[0], v[1])))
	lon = degrees(math.Atan2(v[1], v[0]))
	if lon < 0 {
		lon += 360
	}
	return lat, lon
}

// alongArc returns the point at fraction u of the great circle from a to b.
func alongArc(aLat, aLon, bLat, bLon, u float64) (lat, lon float64) {
	a, b := unitVector(aLat, aLon), unitVector(bLat, bLon)
	w := math.Acos(math.Max(-1, math.Min(1, a[0]*b[0]+a[1]*b[1]+a[2]*b[2])))
	if w < 1e-12 {
		return aLat, aLon
	}
	wa, wb := math.Sin((1-u)*w)/math.Sin(w), math.Sin(u*w)/math.Sin(w)
	return latLon([3]float64{wa*a[0] + wb*b[0], wa*a[1] + wb*b[1], wa*a[2] + wb*b[2]})
}
