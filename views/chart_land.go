package views

import (
	"math"
	"sync"

	"fathombend/catalogue/land"
)

// ring is a closed outline of longitudes and latitudes, or of page positions;
// the first vertex is not repeated.
type ring = [][2]float64

// Land in rings of one sense: outer ones run anticlockwise with north up,
// holes clockwise. So filled by winding number they are right in every
// projection, also where a ring holds the antipode of the centre and is turned
// inside out.
var (
	coarseLand = sync.OnceValue(func() []ring { return oriented(land.Rings()) })
	fineLand   = sync.OnceValue(func() []ring { return oriented(land.FineRings()) })
)

// ChartLand is the land in rings of one sense, for the map that moves.
func ChartLand(fine bool) [][][2]float64 {
	if fine {
		return fineLand()
	}
	return coarseLand()
}

func oriented(rings []ring) []ring {
	out := make([]ring, len(rings))
	for i, r := range rings {
		depth := 0
		for j, o := range rings {
			if i != j && ringHolds(o, r[0]) {
				depth++
			}
		}
		out[i] = r
		if (ringArea(r) > 0) != (depth%2 == 0) {
			out[i] = make(ring, len(r))
			for k, v := range r {
				out[i][len(r)-1-k] = v
			}
		}
	}
	return out
}

func ringArea(r ring) float64 {
	s := 0.0
	for i, v := range r {
		n := r[(i+1)%len(r)]
		s += v[0]*n[1] - n[0]*v[1]
	}
	return s / 2
}

// ringHolds by the even-odd rule.
func ringHolds(r ring, v [2]float64) bool {
	in := false
	for i, a := range r {
		b := r[(i+1)%len(r)]
		if (a[1] > v[1]) != (b[1] > v[1]) && v[0] < a[0]+(b[0]-a[0])*(v[1]-a[1])/(b[1]-a[1]) {
			in = !in
		}
	}
	return in
}

// clipHalf keeps the part of a ring where side is not negative (Sutherland &
// Hodgman 1974, Commun. ACM 17:32).
func clipHalf(r ring, side func([2]float64) float64) ring {
	var out ring
	for i, b := range r {
		a := r[(i+len(r)-1)%len(r)]
		sa, sb := side(a), side(b)
		if (sa < 0) != (sb < 0) {
			t := sa / (sa - sb)
			out = append(out, [2]float64{a[0] + t*(b[0]-a[0]), a[1] + t*(b[1]-a[1])})
		}
		if sb >= 0 {
			out = append(out, b)
		}
	}
	return out
}

// clipFrame keeps the part of a ring of page positions inside a frame with a
// rim of two units, so that the cut itself is not seen.
func clipFrame(r ring, w, h float64) ring {
	const rim = 2
	for _, side := range []func([2]float64) float64{
		func(v [2]float64) float64 { return v[0] + rim },
		func(v [2]float64) float64 { return w + rim - v[0] },
		func(v [2]float64) float64 { return v[1] + rim },
		func(v [2]float64) float64 { return h + rim - v[1] },
	} {
		if r = clipHalf(r, side); len(r) < 3 {
			return nil
		}
	}
	return r
}

// landOnPage are the outlines of the land inside the frame, to be filled by
// winding number.
func (p chartProjection) landOnPage() []ring {
	rings := coarseLand()
	if p.r > 900 { // page units an Earth radius: a tenth of a degree is seen
		rings = fineLand()
	}
	var out []ring
	keep := func(r ring) {
		page := make(ring, len(r))
		for i, v := range r {
			page[i][0], page[i][1] = p.toPage(p.planeOfRing(v))
		}
		if page = thinRing(clipFrame(page, p.w, p.h)); len(page) > 2 {
			out = append(out, page)
		}
	}
	if p.v.azimuthal() {
		antipode := [2]float64{wrapLongitude(p.lon0 + 180), -p.lat0}
		turned := false
		for _, r := range rings {
			if p.reaches(r) {
				turned = turned != ringHolds(r, antipode)
				keep(r)
			}
		}
		if turned {
			// Anticlockwise, as the outlines are.
			out = append(out, ring{{-2, -2}, {-2, p.h + 2}, {p.w + 2, p.h + 2}, {p.w + 2, -2}})
		}
		return out
	}
	// Each ring goes on the map once, or in two pieces where the edge of the
	// map cuts it.
	for _, r := range rings {
		for _, turn := range []float64{-360, 0, 360} {
			piece := make(ring, len(r))
			for i, v := range r {
				piece[i] = [2]float64{v[0] + turn - p.lon0, v[1]}
			}
			piece = clipHalf(piece, func(v [2]float64) float64 { return v[0] + 180 })
			if len(piece) > 2 {
				piece = clipHalf(piece, func(v [2]float64) float64 { return 180 - v[0] })
			}
			if len(piece) > 2 {
				keep(piece)
			}
		}
	}
	return out
}

// reaches says whether any of a ring's land can be in an azimuthal view. One
// that cannot would still be drawn along its edge, and may go round it.
func (p chartProjection) reaches(r ring) bool {
	for _, v := range r {
		if arcBetween(v[1], v[0], p.lat0, p.lon0) < p.v.cap() {
			return true
		}
	}
	return ringHolds(r, [2]float64{wrapLongitude(p.lon0), p.lat0})
}

// planeOfRing: rings of the world map are already east of the central
// meridian.
func (p chartProjection) planeOfRing(v [2]float64) (x, y float64) {
	if p.v.azimuthal() {
		return azimuthal(v[1], v[0], p.lat0, p.lon0, p.v.cap())
	}
	return equalEarth(v[1], v[0])
}

// thinRing leaves out steps under a unit: they are not seen.
func thinRing(r ring) ring {
	var out ring
	for _, v := range r {
		if n := len(out); n > 0 && math.Hypot(v[0]-out[n-1][0], v[1]-out[n-1][1]) < 0.9 {
			continue
		}
		out = append(out, v)
	}
	return out
}
