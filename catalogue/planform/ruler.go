package planform

import "math"

const (
	maxRulers = 16
	// stableShare: sinuosity has stopped changing when a ruler reads within
	// this share of what the given vertices read. Convention.
	stableShare = 0.01
	// missingShare of its length beyond which a line counts as too coarse.
	// Convention.
	missingShare = 0.01
)

// earthRadius is the mean radius of WGS84, m; it serves only to turn a straight
// distance through the ellipsoid into one along it, where its 0.3 % matter at
// 1e-7 for 100 km.
const earthRadius = 6371008.8

// solid gives the vertices in three dimensions (the plane as z = 0), where a
// distance costs one square root: rulers need very many.
func (t *track) solid() [][3]float64 {
	out := make([][3]float64, len(t.v))
	for i, p := range t.v {
		if t.plane {
			out[i] = [3]float64{p.Lon - t.v[0].Lon, p.Lat - t.v[0].Lat, 0}
		} else {
			out[i] = solidAt(p.Lat, p.Lon)
		}
	}
	return out
}

// solidAt is the point on the ellipsoid in geocentric metres.
func solidAt(lat, lon float64) [3]float64 {
	const e2 = wgsF * (2 - wgsF)
	sinLat, cosLat := math.Sincos(lat * degree)
	sinLon, cosLon := math.Sincos(lon * degree)
	n := wgsA / math.Sqrt(1-e2*sinLat*sinLat)
	return [3]float64{n * cosLat * cosLon, n * cosLat * sinLon, n * (1 - e2) * sinLat}
}

func straight(a, b [3]float64) float64 {
	x, y, z := b[0]-a[0], b[1]-a[1], b[2]-a[2]
	return math.Sqrt(x*x + y*y + z*z)
}

// over turns a straight distance into one along the ellipsoid.
func over(straight float64, plane bool) float64 {
	if plane {
		return straight
	}
	return 2 * earthRadius * math.Asin(min(1, straight/(2*earthRadius)))
}

// walk steps along a line with a pair of dividers set to the given opening and
// returns the number of whole steps and the straight rest to the last vertex.
func walk(p [][3]float64, opening float64) (steps int, rest float64) {
	foot := p[0]
	for i := 1; i < len(p); {
		if straight(foot, p[i]) < opening {
			i++
			continue
		}
		// The foot falls on the segment that ends at vertex i: where its
		// distance first reaches the opening.
		a := foot
		if i > 1 && straight(foot, p[i-1]) < opening {
			a = p[i-1]
		}
		foot = crossing(foot, a, p[i], opening)
		steps++
	}
	return steps, straight(foot, p[len(p)-1])
}

// crossing is the point between a (nearer to foot than r) and b (not nearer)
// at distance r from foot.
func crossing(foot, a, b [3]float64, r float64) [3]float64 {
	var dd, df, ff float64
	for k := range 3 {
		d, f := b[k]-a[k], a[k]-foot[k]
		dd, df, ff = dd+d*d, df+d*f, ff+f*f
	}
	disc := math.Sqrt(max(0, df*df-dd*(ff-r*r)))
	t := (disc - df) / dd
	if df > 0 { // the same root without cancellation
		t = (r*r - ff) / (df + disc)
	}
	t = min(1, max(0, t))
	return [3]float64{a[0] + t*(b[0]-a[0]), a[1] + t*(b[1]-a[1]), a[2] + t*(b[2]-a[2])}
}

// rulers is the length of the line by rulers from its vertex spacing up to half
// its greatest extent, at most maxRulers of them, equally apart on a log scale
// (Richardson plot; Mandelbrot 1967, Science 156:636,
// doi 10.1126/science.156.3775.636). The rest of the last step counts as a part
// step.
func (t *track) rulers(p [][3]float64) []Ruler {
	top := t.reach
	low := math.Max(t.spacing, t.length/float64(4*len(t.v)+256))
	n := min(maxRulers, int(2*math.Log2(top/low))+1)
	if n < 2 {
		return []Ruler{}
	}
	out := make([]Ruler, 0, n)
	step := math.Pow(top/low, 1/float64(n-1))
	for i := range n {
		r := low * math.Pow(step, float64(i))
		steps, rest := walk(p, r)
		if steps == 0 {
			break
		}
		length := float64(steps)*over(r, t.plane) + over(rest, t.plane)
		out = append(out, Ruler{RulerM: r, LengthM: length, Sinuosity: ratio(length, t.chord)})
	}
	return out
}

// stable is the coarsest ruler up to which all rulers read within stableShare
// of the given vertices; nil when not even the finest does.
func (t *track) stable(rulers []Ruler) *float64 {
	var out *float64
	for _, r := range rulers {
		if t.length-r.LengthM > stableShare*t.length {
			break
		}
		v := r.RulerM
		out = &v
	}
	return out
}

// missing estimates the share of the channel's length that the vertices miss.
// On a smooth curve whose vertices turn by d radians each, the vertices fall
// short of the curve by d^2/24 and a ruler as long as their spacing falls short
// of the vertices by d^2/12; and what is lost from ruler r to 2r is three times
// what was lost already at r (Richardson's extrapolation). The larger of the two
// estimates counts.
func (t *track) missing(p [][3]float64) float64 {
	read := func(r float64) float64 {
		steps, rest := walk(p, r)
		return float64(steps)*over(r, t.plane) + over(rest, t.plane)
	}
	r := math.Max(t.spacing, t.length/float64(4*len(t.v)+256))
	once := read(r)
	return max(0, (t.length-once)/2, (once-read(2*r))/3) / t.length
}
