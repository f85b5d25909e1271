package seed

import (
	"encoding/json"
	"math"
	"strconv"

	"fathombend/catalogue"
	"fathombend/catalogue/land"
	"fathombend/catalogue/planform"
)

// spot is one vertex of a course on the globe.
type spot struct{ lat, lon, depth float64 }

// course is the drawn line of a whole system, split into its reaches.
type course struct {
	shapes []shape
	spots  [][]spot // of each reach; the last of one is the first of the next
}

// place gives the rows of each reach a position along the straight axis, for
// the law to act at; the drawn line moves it a little.
func place(rs []reach, lat, lon, bearing float64) {
	total := 0.0
	for i := range rs {
		total += rs[i].axis()
	}
	at := -total / 2
	for i := range rs {
		la, lo := travel(lat, lon, bearing, at+rs[i].axis()/2)
		for k := range rs[i].rows {
			rs[i].rows[k].LatitudeDeg = catalogue.Num(la)
			rs[i].rows[k].LongitudeDeg = catalogue.Num(lo)
		}
		at += rs[i].axis()
	}
}

func (r *reach) axis() float64 { return r.wave * float64(r.bends) / 2 }

// inPlace says whether the axis lies in water (rivers: on land) with some room
// to either side.
func inPlace(rs []reach, lat, lon, bearing float64, wantLand bool) bool {
	total, side := 0.0, 0.0
	for i := range rs {
		total += rs[i].axis()
		side = max(side, rs[i].wave)
	}
	n := max(8, int(total/20e3)) // a vertex at least every 20 km
	for i := range n + 1 {
		la, lo := travel(lat, lon, bearing, total*(float64(i)/float64(n)-0.5))
		for _, off := range []float64{-1.5, 0, 1.5} {
			if a, b := travel(la, lo, bearing+90, off*side); land.Contains(a, b) != wantLand {
				return false
			}
		}
	}
	return true
}

// turnToPlace turns the bearing until the axis lies in water (rivers: on land).
func turnToPlace(rs []reach, lat, lon, bearing float64, wantLand bool) float64 {
	for _, turn := range []float64{0, 25, -25, 50, -50, 80, -80, 120, -120, 180} {
		if inPlace(rs, lat, lon, bearing+turn, wantLand) {
			return bearing + turn
		}
	}
	return bearing // the test of the tables would tell
}

// travel goes metres along a line of constant bearing, in steps short enough
// for the radii of curvature of WGS84 to count as constant.
func travel(lat, lon, bearing, metres float64) (float64, float64) {
	sin, cos := math.Sincos(bearing * math.Pi / 180)
	steps := 1 + int(math.Abs(metres)/20e3)
	for range steps {
		lat, lon = step(lat, lon, metres/float64(steps)*sin, metres/float64(steps)*cos)
	}
	return lat, lon
}

// step moves by metres east and north on WGS84 with the radii of curvature at
// the middle of the step; good to 1e-6 of a step of 20 km away from the poles.
func step(lat, lon, east, north float64) (float64, float64) {
	const a, e2 = 6378137, 0.00669437999014 // WGS84
	q := lat * math.Pi / 180
	s := math.Sin(q)
	w := 1 - e2*s*s
	next := q + north*w*math.Sqrt(w)/(a*(1-e2))
	mid := (q + next) / 2
	s = math.Sin(mid)
	lon += east * math.Sqrt(1-e2*s*s) / (a * math.Cos(mid)) * 180 / math.Pi
	return next * 180 / math.Pi, wrap(lon)
}

// draw draws the line of a system through its place with a depth along it, and
// writes positions and lengths back to the rows. depth is that of the upstream
// end in metres, positive down (rivers: negative).
func (d *drawer) draw(rs []reach, lat, lon, bearing, depth float64) course {
	var c course
	side := 1.0
	if d.lineRand.IntN(2) == 1 {
		side = -1
	}
	for i := range rs { // an even number of bends each, so that all begin alike
		r := &rs[i]
		first := &r.rows[0]
		t := target{kind: first.SinuosityKind, sinuosity: first.Sinuosity.V, window: first.WindowM.V}
		c.shapes = append(c.shapes, bendLine(d.lineRand, r.bends, r.axis(), side, t))
	}
	x, y := 0.0, 0.0
	for i := range c.shapes { // one after the other, in the plane
		s := &c.shapes[i]
		for k := range s.x {
			s.x[k] += x
			s.y[k] += y
		}
		x, y = s.x[len(s.x)-1], s.y[len(s.y)-1]
	}
	// From the middle outwards, so that the place of the system is the middle
	// of its line.
	flatX, flatY := c.flat()
	from := 0
	for k := range flatX {
		if flatX[k] < x/2 {
			from = k
		}
	}
	sin, cos := math.Sincos(bearing * math.Pi / 180)
	spots := make([]spot, len(flatX))
	spots[from] = spot{lat: lat, lon: lon}
	move := func(to, at int) {
		dx, dy := flatX[to]-flatX[at], flatY[to]-flatY[at]
		// +x is down the bearing, +y to its left.
		spots[to].lat, spots[to].lon = step(spots[at].lat, spots[at].lon, dx*sin-dy*cos, dx*cos+dy*sin)
	}
	for k := from + 1; k < len(spots); k++ {
		move(k, k-1)
	}
	for k := from - 1; k >= 0; k-- {
		move(k, k+1)
	}
	k := 0
	for i := range rs {
		n := len(c.shapes[i].x)
		part := spots[k : k+n]
		depth = deepen(part, c.shapes[i], rs[i].slope, depth)
		c.spots = append(c.spots, part)
		k += n - 1
	}
	return c
}

// flat joins the shapes, the shared vertex once.
func (c *course) flat() (x, y []float64) {
	for i, s := range c.shapes {
		from := 0
		if i > 0 {
			from = 1
		}
		x, y = append(x, s.x[from:]...), append(y, s.y[from:]...)
	}
	return x, y
}

// deepen gives a reach depths that fall by slope times its chord, a little
// concave, and returns the depth at its end.
func deepen(part []spot, s shape, slope, depth float64) float64 {
	n := len(s.x) - 1
	cx, cy := s.x[n]-s.x[0], s.y[n]-s.y[0]
	chord := math.Hypot(cx, cy)
	for k := range part {
		t := ((s.x[k]-s.x[0])*cx + (s.y[k]-s.y[0])*cy) / (chord * chord)
		part[k].depth = depth + slope*chord*(t+0.06*math.Sin(math.Pi*max(0, min(1, t))))
	}
	return depth + slope*chord
}

// lineString writes GeoJSON with elevation in metres, up positive: six decimals
// of a degree (0.1 m) and one of a metre.
func lineString(part []spot) string {
	b := make([]byte, 0, 34*len(part)+48)
	b = append(b, `{"type":"LineString","coordinates":[`...)
	for i, s := range part {
		if i > 0 {
			b = append(b, ',')
		}
		b = append(b, '[')
		b = append(appendFixed(b, s.lon, 6), ',')
		b = append(appendFixed(b, s.lat, 6), ',')
		b = append(appendFixed(b, -s.depth, 1), ']')
	}
	return string(append(b, "]}"...))
}

// appendFixed writes x with n decimals; half the time of the shortest form.
func appendFixed(b []byte, x float64, n int) []byte {
	v := int64(math.Round(x * tens[n]))
	if v < 0 {
		b, v = append(b, '-'), -v
	}
	p := int64(tens[n])
	b = append(strconv.AppendInt(b, v/p, 10), '.')
	for rest := v % p; p > 1; rest %= p {
		p /= 10
		b = append(b, byte('0'+rest/p))
	}
	return b
}

// centreline is what is stored for a row: the line, how it is measured, and
// its windows.
func centreline(r *catalogue.Row, s shape, part []spot, width float64) catalogue.Centreline {
	set := planform.Settings{WidthM: round(width, 0), WindowWidths: 20, K: 5, Z: "elevation"}
	window := 20 * width
	if r.WindowM.Valid {
		window = r.WindowM.V
		set.WindowWidths, set.WindowM = 0, window
	}
	text, err := json.Marshal(set)
	if err != nil { // a struct of plain fields always encodes
		panic(err)
	}
	w := s.windows(window)
	for i := range w {
		w[i] = round(w[i], 4)
	}
	return catalogue.Centreline{System: r.System, Measurement: r.Measurement, Line: lineString(part), Settings: string(text), Sinuosities: w}
}
