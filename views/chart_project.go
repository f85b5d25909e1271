package views

import "math"

// The chart is equal-area everywhere, so that crowding on the page is crowding
// on the Earth:
//   - the whole world in Equal Earth (Savric, Patterson & Jenny 2019, Int. J.
//     Geogr. Inf. Sci. 33:454, doi 10.1080/13658816.2018.1504949) about the
//     meridian of the centre;
//   - closer, and around the poles, in Lambert's azimuthal equal-area
//     projection (Snyder 1987, USGS Prof. Pap. 1395, p. 182). It is true to
//     shape at its centre, so that a bend is not sheared into another one.
//
// static/chart-map.js holds the same formulas for the map that moves.

const (
	chartW      = 1180.0
	chartH      = 600.0
	chartMargin = 12.0
	// chartNear is the zoom from which the world is drawn azimuthally about
	// the centre of the view.
	chartNear = 3.0
	// ChartMaxZoom is the closest view: about 6 m a page unit.
	ChartMaxZoom = 5000.0
	// polarEdge is the latitude at which the polar views end.
	polarEdge = 30.0
	// nearCap: vertices farther than this from the centre of a near view
	// (degrees) are put on this circle, which lies outside every frame.
	nearCap = 120.0
)

const radian = math.Pi / 180

// ChartView is the part of the Earth that is shown. Lat and Lon are degrees of
// the centre of the frame; Zoom 1 shows the whole.
type ChartView struct {
	Name     string // world, north, south
	Lat, Lon float64
	Zoom     float64
}

// NewChartView is the whole of a view.
func NewChartView(name string) ChartView {
	v := ChartView{Name: name, Zoom: 1}
	switch name {
	case "north":
		v.Lat = 90
	case "south":
		v.Lat = -90
	}
	return v
}

// IsWhole says whether the view is not moved.
func (v ChartView) IsWhole() bool {
	w := NewChartView(v.Name)
	return v.Zoom == 1 && v.Lat == w.Lat && (v.Lon == 0 || v.polar())
}

func (v ChartView) polar() bool     { return v.Name == "north" || v.Name == "south" }
func (v ChartView) azimuthal() bool { return v.polar() || v.Zoom >= chartNear }

// cap is where an azimuthal view ends, in degrees from its centre.
func (v ChartView) cap() float64 {
	if v.polar() {
		return 90 - polarEdge
	}
	return nearCap
}

// chartProjection maps degrees to page units of one frame.
type chartProjection struct {
	v          ChartView
	w, h       float64
	r          float64 // page units an Earth radius
	cx, cy     float64 // plane position of the centre of the frame, in radii
	lat0, lon0 float64 // centre of the azimuthal projection, or central meridian
}

func newChartProjection(v ChartView, w, h float64) chartProjection {
	p := chartProjection{v: v, w: w, h: h, lat0: v.Lat, lon0: v.Lon}
	m := chartMargin
	switch {
	case v.polar():
		// 2 sin(c/2) of the colatitude of the edge is the radius of the disc.
		disc := 2 * math.Sin((90-polarEdge)/2*radian)
		p.r = (min(w, h)/2 - m) / disc
		p.lat0, p.lon0 = 90, 0
		if v.Name == "south" {
			p.lat0 = -90
		}
		p.cx, p.cy = p.plane(v.Lat, v.Lon)
	default:
		p.r = min((w-2*m)/(2*equalEarthX), (h-2*m)/(2*equalEarthY))
		if !v.azimuthal() {
			_, y := equalEarth(v.Lat, 0)
			// The frame stays on the map as long as the map is taller.
			room := max(0, equalEarthY+m/(p.r*v.Zoom)-h/(2*p.r*v.Zoom))
			p.cy = min(max(y, -room), room)
		}
	}
	p.r *= v.Zoom
	return p
}

// plane is the position in Earth radii, x right, y up, before the frame.
func (p chartProjection) plane(lat, lon float64) (x, y float64) {
	if p.v.azimuthal() {
		return azimuthal(lat, lon, p.lat0, p.lon0, p.v.cap())
	}
	return equalEarth(lat, lonDifference(lon, p.lon0))
}

// toPage puts a plane position into the frame; page y runs down.
func (p chartProjection) toPage(x, y float64) (float64, float64) {
	return p.w/2 + (x-p.cx)*p.r, p.h/2 - (y-p.cy)*p.r
}

// at is the page position of a place and whether the view shows it.
func (p chartProjection) at(lat, lon float64) (x, y float64, shown bool) {
	x, y = p.toPage(p.plane(lat, lon))
	shown = x >= 0 && x <= p.w && y >= 0 && y <= p.h
	switch {
	case p.v.Name == "north":
		shown = shown && lat >= polarEdge
	case p.v.Name == "south":
		shown = shown && lat <= -polarEdge
	case p.v.azimuthal():
		shown = shown && arcBetween(lat, lon, p.lat0, p.lon0) < 90
	}
	return x, y, shown
}

// place is the inverse of at; ok is false off the map.
func (p chartProjection) place(px, py float64) (lat, lon float64, ok bool) {
	x, y := (px-p.w/2)/p.r+p.cx, (p.h/2-py)/p.r+p.cy
	if p.v.azimuthal() {
		return azimuthalInverse(x, y, p.lat0, p.lon0, p.v.cap())
	}
	lat, d, ok := equalEarthInverse(x, y)
	return lat, wrapLongitude(p.lon0 + d), ok
}

// moved is the view with the frame shifted by a share of its own size, right
// and up, and zoomed by a factor about its centre.
func (p chartProjection) moved(right, up, zoom float64) ChartView {
	v := p.v
	if right != 0 || up != 0 {
		lat, lon, ok := p.place(p.w*(0.5+right), p.h*(0.5-up))
		if !ok && !p.v.azimuthal() { // beyond the edge of the world: turn it
			lat, lon, ok = v.Lat, wrapLongitude(v.Lon+right*p.w/p.r/radian), true
		}
		if ok {
			v.Lat, v.Lon = lat, lon
		}
	}
	v.Zoom = min(max(v.Zoom*zoom, 1), ChartMaxZoom)
	if v.Zoom == 1 {
		whole := NewChartView(v.Name)
		whole.Lon = v.Lon
		if v.polar() {
			whole.Lon = 0
		}
		return whole.rounded()
	}
	return v.rounded()
}

// rounded writes the centre no finer than a hundredth of the frame needs.
func (v ChartView) rounded() ChartView {
	d := math.Pow(10, math.Ceil(math.Log10(v.Zoom))+1)
	v.Lat, v.Lon = math.Round(v.Lat*d)/d, math.Round(v.Lon*d)/d
	v.Zoom = roundSignificant(v.Zoom, 4)
	return v
}

// Coefficients of Equal Earth, and the half axes of its outline in radii.
const (
	ee1, ee2, ee3, ee4 = 1.340264, -0.081106, 0.000893, 0.003796
	equalEarthX        = 2.7066299836960748
	equalEarthY        = 1.3173627591574133
)

// equalEarth of a latitude and the longitude east of the central meridian,
// degrees; a difference past 180 goes on beyond the outline.
func equalEarth(lat, dlon float64) (x, y float64) {
	t := math.Asin(math.Sqrt(3) / 2 * math.Sin(lat*radian))
	t2 := t * t
	t6 := t2 * t2 * t2
	x = dlon * radian * math.Cos(t) / (math.Sqrt(3) / 2 * (ee1 + 3*ee2*t2 + t6*(7*ee3+9*ee4*t2)))
	return x, t * (ee1 + ee2*t2 + t6*(ee3+ee4*t2))
}

// equalEarthInverse by Newton's method; ok is false outside the outline.
func equalEarthInverse(x, y float64) (lat, dlon float64, ok bool) {
	if math.Abs(y) > equalEarthY {
		return 0, 0, false
	}
	t := y
	for range 12 {
		t2 := t * t
		t6 := t2 * t2 * t2
		step := (t*(ee1+ee2*t2+t6*(ee3+ee4*t2)) - y) / (ee1 + 3*ee2*t2 + t6*(7*ee3+9*ee4*t2))
		t -= step
		if math.Abs(step) < 1e-12 {
			break
		}
	}
	t2 := t * t
	t6 := t2 * t2 * t2
	dlon = math.Sqrt(3) / 2 * x * (ee1 + 3*ee2*t2 + t6*(7*ee3+9*ee4*t2)) / math.Cos(t) / radian
	lat = math.Asin(min(max(math.Sin(t)*2/math.Sqrt(3), -1), 1)) / radian
	return lat, dlon, math.Abs(dlon) <= 180
}

// azimuthal is Lambert's projection about lat0, lon0, in radii. What is beyond
// edge degrees is put on that circle, so that rings stay closed.
func azimuthal(lat, lon, lat0, lon0, edge float64) (x, y float64) {
	s, c := math.Sincos(lat * radian)
	s0, c0 := math.Sincos(lat0 * radian)
	sd, cd := math.Sincos((lon - lon0) * radian)
	x, y = c*sd, c0*s-s0*c*cd
	cosc := min(max(s0*s+c0*c*cd, -1), 1)
	if cosc < math.Cos(edge*radian) {
		d := math.Hypot(x, y)
		r := 2 * math.Sin(edge/2*radian)
		if d < 1e-12 { // the antipode has no direction
			return 0, r
		}
		return x / d * r, y / d * r
	}
	k := math.Sqrt(2 / (1 + cosc))
	return k * x, k * y
}

func azimuthalInverse(x, y, lat0, lon0, edge float64) (lat, lon float64, ok bool) {
	r := math.Hypot(x, y)
	if r > 2*math.Sin(edge/2*radian) {
		return 0, 0, false
	}
	if r < 1e-15 {
		return lat0, wrapLongitude(lon0), true
	}
	s, c := math.Sincos(2 * math.Asin(r/2))
	s0, c0 := math.Sincos(lat0 * radian)
	lat = math.Asin(min(max(c*s0+y*s*c0/r, -1), 1)) / radian
	return lat, wrapLongitude(lon0 + math.Atan2(x*s, r*c0*c-y*s0*s)/radian), true
}

// arcBetween is the angle between two places, degrees.
func arcBetween(lat1, lon1, lat2, lon2 float64) float64 {
	s1, c1 := math.Sincos(lat1 * radian)
	s2, c2 := math.Sincos(lat2 * radian)
	sd, cd := math.Sincos((lon2 - lon1) * radian)
	return math.Atan2(math.Hypot(c2*sd, c1*s2-s1*c2*cd), s1*s2+c1*c2*cd) / radian
}

// wrapLongitude into (-180, 180].
func wrapLongitude(lon float64) float64 {
	if lon > -180 && lon <= 180 {
		return lon
	}
	lon = math.Mod(lon, 360)
	switch {
	case lon <= -180:
		return lon + 360
	case lon > 180:
		return lon - 360
	}
	return lon
}

// lonDifference is lon east of lon0 in [-180, 180]; a meridian right on the
// edge keeps its side.
func lonDifference(lon, lon0 float64) float64 {
	d := lon - lon0
	if d < -180 || d > 180 {
		d = math.Mod(d, 360)
		if d < -180 {
			d += 360
		} else if d > 180 {
			d -= 360
		}
	}
	return d
}

// ChartPosition is where a view in a frame of w by h shows a place.
func ChartPosition(v ChartView, w, h, lat, lon float64) (x, y float64) {
	x, y, _ = newChartProjection(v, w, h).at(lat, lon)
	return x, y
}
