package planform

import (
	"errors"
	"math"
)

// WGS84 ellipsoid: semi-major axis in metres and flattening (NIMA TR8350.2,
// 3rd ed. (2000)).
const (
	wgsA = 6378137.0
	wgsF = 1 / 298.257223563
	wgsB = wgsA * (1 - wgsF)
)

const (
	degree = math.Pi / 180
	// vincentyLimit is generous: two to six rounds are usual, and what has not
	// settled after 200 is nearly antipodal and never will.
	vincentyLimit = 200
	// vincentyTolerance in radians of longitude: 6 nm on the ground, since the
	// contraction by f at each round makes the true error far smaller still.
	vincentyTolerance = 1e-12
)

// ErrNotConverged is returned for nearly antipodal points, where Vincenty's
// inverse formula has no answer.
var ErrNotConverged = errors.New("the two points lie nearly opposite each other on the globe, where the geodesic formula does not converge")

// spot is a position prepared for the inverse formula: the sine and cosine of
// its reduced latitude and its longitude in radians. Preparing each vertex once
// halves the cost of a line's length.
type spot struct{ sinU, cosU, lon float64 }

func spotOf(lat, lon float64) spot {
	if math.Abs(lat) >= 90 {
		return spot{math.Copysign(1, lat), 0, lon * degree}
	}
	t := (1 - wgsF) * math.Tan(lat*degree)
	c := 1 / math.Sqrt(1+t*t)
	return spot{t * c, c, lon * degree}
}

// arcOf holds what the iteration settles on; lengths and azimuths follow from
// it.
type arcOf struct {
	sinSigma, cosSigma, sigma float64
	cosSqAlpha, cos2SigmaM    float64
	sinLambda, cosLambda      float64
}

// iterate solves for the difference in longitude on the auxiliary sphere;
// Vincenty 1975, equations 13-18.
func iterate(p, q spot) (arcOf, bool) {
	var a arcOf
	L := math.Remainder(q.lon-p.lon, 2*math.Pi)
	lambda := L
	for range vincentyLimit {
		a.sinLambda, a.cosLambda = math.Sincos(lambda)
		u := q.cosU * a.sinLambda
		v := p.cosU*q.sinU - p.sinU*q.cosU*a.cosLambda
		a.sinSigma = math.Sqrt(u*u + v*v)
		a.cosSigma = p.sinU*q.sinU + p.cosU*q.cosU*a.cosLambda
		a.sigma = math.Atan2(a.sinSigma, a.cosSigma)
		if a.sinSigma == 0 {
			return a, a.cosSigma > 0 // the same point, or exactly opposite
		}
		sinAlpha := p.cosU * q.cosU * a.sinLambda / a.sinSigma
		a.cosSqAlpha = 1 - sinAlpha*sinAlpha
		a.cos2SigmaM = 0 // along the equator
		if a.cosSqAlpha > 1e-15 {
			a.cos2SigmaM = a.cosSigma - 2*p.sinU*q.sinU/a.cosSqAlpha
		}
		C := wgsF / 16 * a.cosSqAlpha * (4 + wgsF*(4-3*a.cosSqAlpha))
		next := L + (1-C)*wgsF*sinAlpha*(a.sigma+C*a.sinSigma*(a.cos2SigmaM+C*a.cosSigma*(2*a.cos2SigmaM*a.cos2SigmaM-1)))
		if math.Abs(next) > math.Pi {
			return a, false
		}
		if math.Abs(next-lambda) < vincentyTolerance {
			return a, true
		}
		lambda = next
	}
	return a, false
}

// metres is the geodesic length of a settled arc; Vincenty 1975, equations
// 3, 4, 6 and 19.
func (a arcOf) metres() float64 {
	uSq := a.cosSqAlpha * (wgsA*wgsA - wgsB*wgsB) / (wgsB * wgsB)
	A := 1 + uSq/16384*(4096+uSq*(-768+uSq*(320-175*uSq)))
	B := uSq / 1024 * (256 + uSq*(-128+uSq*(74-47*uSq)))
	m := a.cos2SigmaM
	d := B * a.sinSigma * (m + B/4*(a.cosSigma*(2*m*m-1)-B/6*m*(4*a.sinSigma*a.sinSigma-3)*(4*m*m-3)))
	return wgsB * A * (a.sigma - d)
}

// Inverse solves the inverse geodesic problem on WGS84: the distance in metres
// and the azimuths in degrees (clockwise from north, -180..180) at the first
// and the second point, both in the direction of travel. Latitudes and
// longitudes are degrees. The error is ErrNotConverged for nearly antipodal
// points.
//
// Vincenty 1975, Survey Review 23:88-93, doi 10.1179/sre.1975.23.176.88.
func Inverse(lat1, lon1, lat2, lon2 float64) (metres, az1, az2 float64, err error) {
	p, q := spotOf(lat1, lon1), spotOf(lat2, lon2)
	a, ok := iterate(p, q)
	if !ok || math.IsNaN(a.sigma) {
		return math.NaN(), math.NaN(), math.NaN(), ErrNotConverged
	}
	if a.sinSigma == 0 {
		return 0, 0, 0, nil
	}
	az1 = math.Atan2(q.cosU*a.sinLambda, p.cosU*q.sinU-p.sinU*q.cosU*a.cosLambda) / degree
	az2 = math.Atan2(p.cosU*a.sinLambda, p.cosU*q.sinU*a.cosLambda-p.sinU*q.cosU) / degree
	return a.metres(), az1, az2, nil
}

// between is the distance in metres between two prepared positions, NaN where
// the formula does not converge.
func between(p, q spot) float64 {
	a, ok := iterate(p, q)
	if !ok {
		return math.NaN()
	}
	if a.sinSigma == 0 {
		return 0
	}
	return a.metres()
}

// Direct solves the direct geodesic problem on WGS84: where one arrives, and
// with which azimuth, after going the given metres from a point along an
// azimuth. Angles are degrees; the longitude comes back in -180..180.
//
// Vincenty 1975, Survey Review 23:88-93, doi 10.1179/sre.1975.23.176.88.
func Direct(lat, lon, az, metres float64) (lat2, lon2, az2 float64) {
	p := spotOf(lat, lon)
	sinA1, cosA1 := math.Sincos(az * degree)
	sigma1 := math.Atan2(p.sinU, p.cosU*cosA1)
	sinAlpha := p.cosU * sinA1
	cosSqAlpha := 1 - sinAlpha*sinAlpha
	uSq := cosSqAlpha * (wgsA*wgsA - wgsB*wgsB) / (wgsB * wgsB)
	A := 1 + uSq/16384*(4096+uSq*(-768+uSq*(320-175*uSq)))
	B := uSq / 1024 * (256 + uSq*(-128+uSq*(74-47*uSq)))
	sigma := metres / (wgsB * A)
	var sinS, cosS, m float64
	for range vincentyLimit {
		m = math.Cos(2*sigma1 + sigma)
		sinS, cosS = math.Sincos(sigma)
		d := B * sinS * (m + B/4*(cosS*(2*m*m-1)-B/6*m*(4*sinS*sinS-3)*(4*m*m-3)))
		next := metres/(wgsB*A) + d
		done := math.Abs(next-sigma) < vincentyTolerance
		sigma = next
		if done {
			break
		}
	}
	m = math.Cos(2*sigma1 + sigma)
	sinS, cosS = math.Sincos(sigma)
	t := p.sinU*sinS - p.cosU*cosS*cosA1
	lat2 = math.Atan2(p.sinU*cosS+p.cosU*sinS*cosA1, (1-wgsF)*math.Sqrt(sinAlpha*sinAlpha+t*t)) / degree
	lambda := math.Atan2(sinS*sinA1, p.cosU*cosS-p.sinU*sinS*cosA1)
	C := wgsF / 16 * cosSqAlpha * (4 + wgsF*(4-3*cosSqAlpha))
	L := lambda - (1-C)*wgsF*sinAlpha*(sigma+C*sinS*(m+C*cosS*(2*m*m-1)))
	lon2 = math.Remainder(lon+L/degree, 360)
	az2 = math.Atan2(sinAlpha, -t) / degree
	return lat2, lon2, az2
}
