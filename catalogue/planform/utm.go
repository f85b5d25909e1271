package planform

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// crs is what the coordinates of a file are.
type crs struct {
	plane bool // metres with no place
	zone  int  // UTM zone 1..60, 0 = degrees on WGS84
	south bool
	note  string // when the datum is another one, and what that does
}

// parseEPSG reads the setting epsg: "" (degrees, or as the file says), 4326, a
// UTM zone as EPSG code (326zz north, 327zz south; 258zz ETRS89 and 269zz NAD83
// stand in) or as "31N", or "plane".
func parseEPSG(code string) (crs, error) {
	c := strings.ToUpper(strings.TrimSpace(code))
	for _, p := range []string{"URN:OGC:DEF:CRS:", "EPSG::", "EPSG:", "OGC:1.3:", "UTM", "ZONE"} {
		c = strings.TrimSpace(strings.TrimPrefix(c, p))
	}
	switch c {
	case "", "4326", "4979", "CRS84", "CRS84H", "WGS84":
		return crs{}, nil
	case "PLANE":
		return crs{plane: true}, nil
	}
	if n := len(c); n > 1 && (c[n-1] == 'N' || c[n-1] == 'S') {
		if z, err := strconv.Atoi(strings.TrimSpace(c[:n-1])); err == nil && z >= 1 && z <= 60 {
			return crs{zone: z, south: c[n-1] == 'S'}, nil
		}
	}
	if v, err := strconv.Atoi(c); err == nil {
		switch {
		case v >= 32601 && v <= 32660:
			return crs{zone: v - 32600}, nil
		case v >= 32701 && v <= 32760:
			return crs{zone: v - 32700, south: true}, nil
		case v >= 25828 && v <= 25838:
			return crs{zone: v - 25800, note: "ETRS89 was taken as WGS84: less than a metre apart, and the shape is the same."}, nil
		case v >= 26901 && v <= 26923:
			return crs{zone: v - 26900, note: "NAD83 was taken as WGS84: one or two metres apart, and the shape is the same."}, nil
		}
	}
	return crs{}, &InputError{"epsg", fmt.Sprintf("%q is not known here; expected 4326 (degrees), 32601 to 32660 (UTM north), 32701 to 32760 (UTM south), a zone as 31N, or plane (metres with no place)", clip(code))}
}

// Transverse Mercator by Krüger's series in the third flattening to sixth
// order, good to less than a micrometre within a zone: Krüger 1912,
// Veröff. Königl. Preuß. Geod. Inst. 52, doi 10.2312/GFZ.b103-krueger28;
// coefficients as in Karney 2011, J. Geodesy 85:475, equations 35 and 36,
// doi 10.1007/s00190-011-0445-3.
const (
	utmScale   = 0.9996
	utmEast    = 500e3
	utmSouth   = 10e6
	thirdFlat  = wgsF / (2 - wgsF)
	maxUTMEast = 4e6 // m from the central meridian: past it the series is not trusted
)

var (
	krugerA, krugerAlpha, krugerBeta = krugerSeries(thirdFlat)
	wgsE                             = math.Sqrt(wgsF * (2 - wgsF))
)

// krugerSeries gives the rectifying radius, m, and the coefficients of the
// forward and the inverse series.
func krugerSeries(n float64) (a float64, alpha, beta [6]float64) {
	n2, n3, n4, n5, n6 := n*n, n*n*n, n*n*n*n, n*n*n*n*n, n*n*n*n*n*n
	a = wgsA / (1 + n) * (1 + n2/4 + n4/64 + n6/256)
	alpha = [6]float64{
		n/2 - 2*n2/3 + 5*n3/16 + 41*n4/180 - 127*n5/288 + 7891*n6/37800,
		13*n2/48 - 3*n3/5 + 557*n4/1440 + 281*n5/630 - 1983433*n6/1935360,
		61*n3/240 - 103*n4/140 + 15061*n5/26880 + 167603*n6/181440,
		49561*n4/161280 - 179*n5/168 + 6601661*n6/7257600,
		34729*n5/80640 - 3418889*n6/1995840,
		212378941 * n6 / 319334400,
	}
	beta = [6]float64{
		n/2 - 2*n2/3 + 37*n3/96 - n4/360 - 81*n5/512 + 96199*n6/604800,
		n2/48 + n3/15 - 437*n4/1440 + 46*n5/105 - 1118711*n6/3870720,
		17*n3/480 - 37*n4/840 - 209*n5/4480 + 5569*n6/90720,
		4397*n4/161280 - 11*n5/504 - 830251*n6/7257600,
		4583*n5/161280 - 108847*n6/3991680,
		20648693 * n6 / 638668800,
	}
	return a, alpha, beta
}

// UTM projects degrees on WGS84 into a zone (1 to 60): easting and northing in
// metres, with the false northing of 10,000 km when south.
func UTM(lat, lon float64, zone int, south bool) (easting, northing float64) {
	l := math.Remainder(lon-centralMeridian(zone), 360) * degree
	sinPhi := math.Sin(lat * degree)
	t := math.Sinh(math.Atanh(sinPhi) - wgsE*math.Atanh(wgsE*sinPhi)) // tan of the conformal latitude
	sinL, cosL := math.Sincos(l)
	xi, eta := math.Atan2(t, cosL), math.Asinh(sinL/math.Hypot(t, cosL))
	x, y := eta, xi
	for j, a := range krugerAlpha {
		k := 2 * float64(j+1)
		y += a * math.Sin(k*xi) * math.Cosh(k*eta)
		x += a * math.Cos(k*xi) * math.Sinh(k*eta)
	}
	easting, northing = utmEast+utmScale*krugerA*x, utmScale*krugerA*y
	if south {
		northing += utmSouth
	}
	return easting, northing
}

// FromUTM undoes UTM; the longitude is in -180..180.
func FromUTM(easting, northing float64, zone int, south bool) (lat, lon float64) {
	if south {
		northing -= utmSouth
	}
	xi, eta := northing/(utmScale*krugerA), (easting-utmEast)/(utmScale*krugerA)
	x, y := eta, xi
	for j, b := range krugerBeta {
		k := 2 * float64(j+1)
		y -= b * math.Sin(k*xi) * math.Cosh(k*eta)
		x -= b * math.Cos(k*xi) * math.Sinh(k*eta)
	}
	sinhX := math.Sinh(x)
	sinY, cosY := math.Sincos(y)
	l := math.Atan2(sinhX, cosY)
	// Newton for the geographic from the conformal latitude (Karney 2011,
	// equations 19-21).
	conformal := sinY / math.Hypot(sinhX, cosY)
	e2 := wgsE * wgsE
	t := conformal
	for range 5 {
		sigma := math.Sinh(wgsE * math.Atanh(wgsE*t/math.Sqrt(1+t*t)))
		ti := t*math.Sqrt(1+sigma*sigma) - sigma*math.Sqrt(1+t*t)
		d := (conformal - ti) / math.Sqrt(1+ti*ti) * (1 + (1-e2)*t*t) / ((1 - e2) * math.Sqrt(1+t*t))
		t += d
		if math.Abs(d) < 1e-14*(1+math.Abs(t)) {
			break
		}
	}
	return math.Atan(t) / degree, math.Remainder(centralMeridian(zone)+l/degree, 360)
}

// centralMeridian of a UTM zone, degrees east.
func centralMeridian(zone int) float64 { return float64(6*zone - 183) }

// toDegrees turns a line in UTM metres into degrees, in place.
func (c crs) toDegrees(line *Line) error {
	convert := func(v []Vertex) error {
		for i := range v {
			e, n := v[i].Lon, v[i].Lat
			if !finite(e) || !finite(n) {
				return &InputError{"line", fmt.Sprintf("vertex %d has a coordinate that is not a number", i+1)}
			}
			if math.Abs(e-utmEast) > maxUTMEast || n < -1e7 || n > 2e7 {
				return &InputError{"line", fmt.Sprintf("vertex %d is (%s, %s), which lies outside every UTM zone: expected an easting near 500000 and a northing from 0 to 10000000, in that order", i+1, num(e), num(n))}
			}
			if math.Abs(e) <= 360 && math.Abs(n) <= 360 {
				return &InputError{"epsg", fmt.Sprintf("vertex %d is (%s, %s): these look like degrees, not UTM metres. Leave epsg empty for degrees", i+1, num(e), num(n))}
			}
			v[i].Lat, v[i].Lon = FromUTM(e, n, c.zone, c.south)
		}
		return nil
	}
	if err := convert(line.Vertices); err != nil {
		return err
	}
	return convert(line.Axis)
}
