package planform

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// track is a line made ready to measure: checked, without repeated vertices,
// in the direction asked for, with the distance along it and its shape in a
// local frame.
type track struct {
	plane  bool
	v      []Vertex  // distinct successive vertices
	s      []float64 // distance along them, m
	x, y   []float64 // local frame, m: east and north of the middle
	length float64
	chord  float64

	spacing float64 // median distance of the vertices that carry shape
	shaped  int     // number of them

	reach    float64 // greatest distance from the middle, m
	repeated int
	left     []float64 // levee heights, nil when none
	right    []float64
}

// newTrack checks a line and prepares it. Every error is an *InputError that
// can be shown.
func newTrack(line Line, reversed bool) (*track, error) {
	if err := checkVertices(line); err != nil {
		return nil, err
	}
	t := &track{plane: line.Plane}
	t.take(line, reversed)
	if len(t.v) < 2 {
		return nil, &InputError{"line", "all its vertices are the same point; a line needs at least two different ones"}
	}
	if err := t.stations(); err != nil {
		return nil, err
	}
	if err := t.frame(); err != nil {
		return nil, err
	}
	t.effectiveSpacing()
	return t, nil
}

func checkVertices(line Line) error {
	v := line.Vertices
	if len(v) < 2 {
		return &InputError{"line", fmt.Sprintf("it has %s; a line needs at least two different ones", count(len(v), "vertex", "vertices"))}
	}
	if len(v) > MaxVertices {
		return &InputError{"line", fmt.Sprintf("it has %d vertices; at most %d are measured. Thin it or split it", len(v), MaxVertices)}
	}
	for i, p := range v {
		if !finite(p.Lon) || !finite(p.Lat) {
			return &InputError{"line", fmt.Sprintf("vertex %d has a coordinate that is not a number", i+1)}
		}
		if line.Plane {
			if math.Abs(p.Lon) > 1e9 || math.Abs(p.Lat) > 1e9 {
				return &InputError{"line", fmt.Sprintf("vertex %d lies more than a million kilometres away; the coordinates must be metres", i+1)}
			}
			continue
		}
		if math.Abs(p.Lon) > 360 || math.Abs(p.Lat) > 360 {
			return errMetres(i, p)
		}
		if math.Abs(p.Lat) > 90 {
			return &InputError{"line", fmt.Sprintf("vertex %d has latitude %s, beyond 90 degrees%s", i+1, num(p.Lat), swapHint(v))}
		}
		if p.Lon < -180 || p.Lon > 360 {
			return &InputError{"line", fmt.Sprintf("vertex %d has longitude %s; expected -180 to 360 degrees", i+1, num(p.Lon))}
		}
	}
	return nil
}

func errMetres(i int, p Vertex) error {
	return &InputError{"epsg", fmt.Sprintf("vertex %d is (%s, %s): these are metres, not degrees. Say which UTM zone they are in (epsg=32631 for zone 31 north, 32731 for zone 31 south), or give epsg=plane for metres with no place", i+1, num(p.Lon), num(p.Lat))}
}

// swapHint adds a question when reading the two coordinates the other way
// round would be valid everywhere.
func swapHint(v []Vertex) string {
	for _, p := range v {
		if math.Abs(p.Lon) > 90 || p.Lat < -180 || p.Lat > 360 {
			return ""
		}
	}
	return ". Are longitude and latitude swapped? Longitude comes first"
}

// take copies the vertices in the direction asked for, without repeats.
func (t *track) take(line Line, reversed bool) {
	n := len(line.Vertices)
	t.v = make([]Vertex, 0, n)
	levees := len(line.LeveeLeft) == n && len(line.LeveeRight) == n
	for k := range n {
		i := k
		if reversed {
			i = n - 1 - k
		}
		p := line.Vertices[i]
		if m := len(t.v); m > 0 && t.v[m-1].Lat == p.Lat && (t.v[m-1].Lon == p.Lon || !t.plane && math.Mod(t.v[m-1].Lon-p.Lon, 360) == 0) {
			t.repeated++
			continue
		}
		t.v = append(t.v, p)
		if levees {
			l, r := line.LeveeLeft[i], line.LeveeRight[i]
			if reversed {
				l, r = r, l
			}
			t.left, t.right = append(t.left, l), append(t.right, r)
		}
	}
}

// stations fills the distance along the vertices and the chord.
func (t *track) stations() error {
	n := len(t.v)
	t.s = make([]float64, n)
	if t.plane {
		for i := 1; i < n; i++ {
			t.s[i] = t.s[i-1] + math.Hypot(t.v[i].Lon-t.v[i-1].Lon, t.v[i].Lat-t.v[i-1].Lat)
		}
		t.chord = math.Hypot(t.v[n-1].Lon-t.v[0].Lon, t.v[n-1].Lat-t.v[0].Lat)
	} else {
		p := spotOf(t.v[0].Lat, t.v[0].Lon)
		for i := 1; i < n; i++ {
			q := spotOf(t.v[i].Lat, t.v[i].Lon)
			d := between(p, q)
			if math.IsNaN(d) {
				return &InputError{"line", fmt.Sprintf("vertices %d and %d lie nearly opposite each other on the globe; add vertices between them", i, i+1)}
			}
			t.s[i] = t.s[i-1] + d
			p = q
		}
		t.chord = between(spotOf(t.v[0].Lat, t.v[0].Lon), p)
		if math.IsNaN(t.chord) {
			return &InputError{"line", "its two ends lie nearly opposite each other on the globe, so it has no end-to-end distance; measure a part of it"}
		}
	}
	t.length = t.s[n-1]
	if t.length < 1e-6 {
		return &InputError{"line", "its vertices differ by less than a thousandth of a millimetre; a line needs at least two different ones"}
	}
	if t.chord < 1e-6*t.length {
		return &InputError{"line", fmt.Sprintf("it is closed: its two ends are the same point (chord 0 on %s of line), so it has no sinuosity. Cut it open, or give the reach you mean", km(t.length))}
	}
	return nil
}

// frame projects the vertices into a plane in metres: azimuthal equidistant
// about the middle of the line (Snyder 1987, USGS Prof. Pap. 1395, p. 191,
// doi 10.3133/pp1395) with geodesic distances and azimuths. Distances from the
// middle are true; across them they are stretched by about r^2/(6 R^2), 0.23 %
// at 750 km.
func (t *track) frame() error {
	n := len(t.v)
	t.x, t.y = make([]float64, n), make([]float64, n)
	midLat, midLon := t.at(t.length / 2)
	if t.plane {
		for i, p := range t.v {
			t.x[i], t.y[i] = p.Lon-midLon, p.Lat-midLat
			t.reach = math.Max(t.reach, math.Hypot(t.x[i], t.y[i]))
		}
		return nil
	}
	pr := newProjection(midLat, midLon)
	for i, p := range t.v {
		var ok bool
		if t.x[i], t.y[i], ok = pr.project(p.Lat, p.Lon); !ok {
			return &InputError{"line", "it spans half the globe; measure a part of it"}
		}
		t.reach = math.Max(t.reach, math.Hypot(t.x[i], t.y[i]))
	}
	return nil
}

// projection is the azimuthal equidistant projection about a point.
type projection struct{ centre spot }

func newProjection(lat, lon float64) projection { return projection{spotOf(lat, lon)} }

// project gives metres east and north of the centre; not ok nearly opposite it.
func (p projection) project(lat, lon float64) (x, y float64, ok bool) {
	q := spotOf(lat, lon)
	a, ok := iterate(p.centre, q)
	if !ok {
		return 0, 0, false
	}
	if a.sinSigma == 0 {
		return 0, 0, true
	}
	d := a.metres()
	east := q.cosU * a.sinLambda
	north := p.centre.cosU*q.sinU - p.centre.sinU*q.cosU*a.cosLambda
	h := math.Hypot(east, north)
	return d * east / h, d * north / h, true
}

// segment finds the segment that holds the distance s along the vertices and
// how far along it that is, 0..1.
func (t *track) segment(s float64) (i int, f float64) {
	n := len(t.s)
	i = sort.SearchFloat64s(t.s, s)
	switch {
	case i <= 0:
		return 0, 0
	case i >= n:
		return n - 2, 1
	}
	return i - 1, (s - t.s[i-1]) / (t.s[i] - t.s[i-1])
}

// at is the position at distance s along the vertices: latitude and longitude,
// or Y and X of a plane line.
func (t *track) at(s float64) (lat, lon float64) {
	i, f := t.segment(s)
	p, q := t.v[i], t.v[i+1]
	if t.plane {
		return p.Lat + f*(q.Lat-p.Lat), p.Lon + f*(q.Lon-p.Lon)
	}
	switch f {
	case 0:
		return p.Lat, p.Lon
	case 1:
		return q.Lat, q.Lon
	}
	return along(p.Lat, p.Lon, q.Lat, q.Lon, f)
}

// along is the point a share f of the way between two positions, on the great
// circle of their normals: within 1e-3 of the sagitta of the geodesic, and
// right across the antimeridian and the poles.
func along(lat1, lon1, lat2, lon2, f float64) (lat, lon float64) {
	a, b := normal(lat1, lon1), normal(lat2, lon2)
	c := a[0]*b[0] + a[1]*b[1] + a[2]*b[2]
	wa, wb := 1-f, f
	if c < 0.9999 { // over about 90 km the two weights differ visibly
		angle := math.Acos(max(-1, c))
		if sin := math.Sin(angle); sin > 1e-9 {
			wa, wb = math.Sin((1-f)*angle)/sin, math.Sin(f*angle)/sin
		}
	}
	x, y, z := wa*a[0]+wb*b[0], wa*a[1]+wb*b[1], wa*a[2]+wb*b[2]
	return math.Atan2(z, math.Hypot(x, y)) / degree, math.Atan2(y, x) / degree
}

func normal(lat, lon float64) [3]float64 {
	sinLat, cosLat := math.Sincos(lat * degree)
	sinLon, cosLon := math.Sincos(lon * degree)
	return [3]float64{cosLat * cosLon, cosLat * sinLon, sinLat}
}

// distance between two positions given as at gives them, m.
func (t *track) distance(lat1, lon1, lat2, lon2 float64) float64 {
	if t.plane {
		return math.Hypot(lon2-lon1, lat2-lat1)
	}
	return between(spotOf(lat1, lon1), spotOf(lat2, lon2))
}

// effectiveSpacing is the median distance between the vertices that carry
// shape: those on a straight line between others add nothing, and a line made
// dense by interpolation must not look finely surveyed. A vertex is passed over
// when all vertices since the last kept one lie within 1e-9 of the line's
// length of the straight line past them (a narrowing cone, one pass).
func (t *track) effectiveSpacing() {
	tol := 1e-9 * t.length
	n := len(t.v)
	gaps := make([]float64, 0, n)
	anchor, lo, hi := 0, math.Inf(-1), math.Inf(1)
	var ref float64
	for i := 1; i < n; i++ {
		dx, dy := t.x[i]-t.x[anchor], t.y[i]-t.y[anchor]
		d := math.Hypot(dx, dy)
		angle := math.Atan2(dy, dx)
		if i == anchor+1 {
			ref = angle
		}
		rel := math.Remainder(angle-ref, 2*math.Pi)
		if i > anchor+1 && (rel < lo || rel > hi || d <= math.Hypot(t.x[i-1]-t.x[anchor], t.y[i-1]-t.y[anchor])) {
			gaps = append(gaps, t.s[i-1]-t.s[anchor])
			anchor, lo, hi = i-1, math.Inf(-1), math.Inf(1)
			dx, dy = t.x[i]-t.x[anchor], t.y[i]-t.y[anchor]
			d = math.Hypot(dx, dy)
			ref = math.Atan2(dy, dx)
			rel = 0
		}
		if d > tol {
			half := math.Asin(tol / d)
			lo, hi = math.Max(lo, rel-half), math.Min(hi, rel+half)
		}
	}
	gaps = append(gaps, t.length-t.s[anchor])
	slices.Sort(gaps)
	t.shaped = len(gaps) + 1
	t.spacing = quantile(gaps, 0.5)
}

// quantile of sorted values by linear interpolation (type 7 of Hyndman & Fan
// 1996, Am. Stat. 50:361, doi 10.2307/2684934).
func quantile(sorted []float64, p float64) float64 {
	if len(sorted) == 0 {
		return math.NaN()
	}
	h := p * float64(len(sorted)-1)
	i := int(h)
	if i >= len(sorted)-1 {
		return sorted[len(sorted)-1]
	}
	return sorted[i] + (h-float64(i))*(sorted[i+1]-sorted[i])
}

func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
