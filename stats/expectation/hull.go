package expectation

import (
	"cmp"
	"math"
	"slices"
)

// hullOf is the convex hull of the rows in |f| and log10 slope, counter-
// clockwise; nil with fewer than three rows that have both.
func hullOf(f *frame) [][2]float64 {
	var pts [][2]float64
	for i := range f.obs {
		if ob := &f.obs[i]; !math.IsNaN(ob.logSlope) && ob.p > 1 {
			pts = append(pts, [2]float64{columnF.of(&ob.inputs), ob.logSlope})
		}
	}
	return convexHull(pts)
}

// convexHull by Andrew's monotone chain.
func convexHull(pts [][2]float64) [][2]float64 {
	slices.SortFunc(pts, func(a, b [2]float64) int { return cmp.Or(cmp.Compare(a[0], b[0]), cmp.Compare(a[1], b[1])) })
	pts = slices.Compact(pts)
	if len(pts) < 3 {
		return nil
	}
	var hull [][2]float64
	half := func(p [2]float64, floor int) {
		for len(hull) >= floor+2 && turn(hull[len(hull)-2], hull[len(hull)-1], p) <= 0 {
			hull = hull[:len(hull)-1]
		}
		hull = append(hull, p)
	}
	for _, p := range pts {
		half(p, 0)
	}
	floor := len(hull) - 1
	for i := len(pts) - 2; i >= 0; i-- {
		half(pts[i], floor)
	}
	if hull = hull[:len(hull)-1]; len(hull) < 3 {
		return nil
	}
	return hull
}

// turn is above 0 when a, b, c turn left.
func turn(a, b, c [2]float64) float64 {
	return (b[0]-a[0])*(c[1]-a[1]) - (b[1]-a[1])*(c[0]-a[0])
}

func insideHull(hull [][2]float64, p [2]float64) bool {
	for i := range hull {
		if turn(hull[i], hull[(i+1)%len(hull)], p) < -1e-12 {
			return false
		}
	}
	return true
}
