package seed

import (
	"math"
	"math/rand/v2"
	"slices"
)

// perBend is the number of vertices to a bend: a spacing of about a
// sixteenth of a wavelength, fine enough to be measured by this program.
const perBend = 8

// maxAngle keeps bends well away from a neck cut-off, where a window's
// sinuosity has no limit: the loops of a sine-generated curve touch near 2.2
// rad (125 degrees; from memory).
const maxAngle = 1.75

// shape is the course of one reach in a plane, metres, from (0, 0) along the
// valley axis +x.
type shape struct{ x, y []float64 }

// target says what a line is drawn to give back.
type target struct {
	kind      string // sinuosity_kind
	sinuosity float64
	window    float64 // m along the channel; 0 = whole reach
}

// bendLine draws a reach of sine-generated bends (Langbein & Leopold 1966, USGS
// Prof. Pap. 422-H) whose angles differ from bend to bend by the scatter of
// windows, on a gently wandering axis, and scales the angles so that the line
// has the target's sinuosity. axis is the length of the valley in metres; side is 1
// where the first limb runs to the left, -1 to the right.
func bendLine(r *rand.Rand, bends int, axis, side float64, t target) shape {
	n := bends * perBend
	theta, wander, step := make([]float64, n), make([]float64, n), make([]float64, n)
	arcs, total := make([]float64, bends), 0.0
	for b := range arcs {
		arcs[b] = math.Exp(0.10 * r.NormFloat64())
		total += arcs[b]
	}
	excess := t.sinuosity - 1
	if t.kind == "peak" || t.kind == "p90" {
		excess *= 0.6 // of the whole reach, roughly
	}
	length := axis * (1 + excess)
	swing := min(0.12, 0.8*math.Sqrt(t.sinuosity-1))
	phase := 2 * math.Pi * r.Float64()
	jitter := 0.8
	if bends < 6 { // a part of a longer line, whose parts differ already
		jitter = 0.3
	}
	for b := range bends {
		// A channel is straighter at its ends than in its middle, and windows
		// of three or four bends scatter by BetweenWindows.
		h := math.Exp(jitter*BetweenWindows*r.NormFloat64()) * (0.85 + 0.3*math.Sin(math.Pi*(float64(b)+0.5)/float64(bends)))
		skew := 0.5 * (r.Float64() - 0.5) // upstream or downstream limb longer
		for k := range perBend {
			i := b*perBend + k
			u := (float64(k) + 0.5) / perBend
			theta[i] = side * h * math.Sin(math.Pi*(u+skew*u*(1-u)))
			wander[i] = swing * math.Sin(2*math.Pi*float64(i)/float64(n)+phase)
			step[i] = arcs[b] / total * length / perBend
		}
		side = -side
	}
	s := shape{x: make([]float64, n+1), y: make([]float64, n+1)}
	at := func(gain float64) float64 {
		for i := range n {
			a := max(-maxAngle, min(maxAngle, gain*theta[i])) + wander[i]
			sin, cos := math.Sincos(a)
			s.x[i+1], s.y[i+1] = s.x[i]+step[i]*cos, s.y[i]+step[i]*sin
		}
		return s.sinuosity(t)
	}
	solve(at, t.sinuosity)
	return s
}

// solve finds the gain at which the rising function f reaches want (regula
// falsi in the Illinois form), and leaves f evaluated there.
func solve(f func(float64) float64, want float64) {
	lo, hi := 0.0, 1.2
	flo, fhi := f(lo)-want, f(hi)-want
	for fhi < 0 && hi < 8 {
		lo, flo = hi, fhi
		hi *= 1.5
		fhi = f(hi) - want
	}
	for range 40 {
		if flo >= 0 || fhi <= 0 {
			return
		}
		mid := (lo*fhi - hi*flo) / (fhi - flo)
		fm := f(mid) - want
		if math.Abs(fm) < 1e-4 {
			return
		}
		if fm > 0 {
			hi, fhi, flo = mid, fm, flo/2
		} else {
			lo, flo, fhi = mid, fm, fhi/2
		}
	}
}

// sinuosity measures the shape as the target's kind is measured.
func (s shape) sinuosity(t target) float64 {
	switch t.kind {
	case "peak", "p90", "mean":
		w := s.windows(t.window)
		switch t.kind {
		case "peak":
			return slices.Max(w)
		case "mean":
			sum := 0.0
			for _, v := range w {
				sum += v
			}
			return sum / float64(len(w))
		}
		slices.Sort(w)
		// Linear interpolation between order statistics (type 7 of Hyndman &
		// Fan 1996, Am. Stat. 50:361, doi 10.2307/2684934).
		h := 0.9 * float64(len(w)-1)
		i := int(h)
		if i+1 == len(w) {
			return w[i]
		}
		return w[i] + (h-float64(i))*(w[i+1]-w[i])
	}
	n := len(s.x) - 1
	length := 0.0
	for i := range n {
		length += math.Hypot(s.x[i+1]-s.x[i], s.y[i+1]-s.y[i])
	}
	return length / math.Hypot(s.x[n]-s.x[0], s.y[n]-s.y[0])
}

// windows gives the sinuosity (arc over chord) of windows of the given length
// in metres along the line, a quarter of it apart, what is left over shared
// between the two ends, as planform lays them; the whole line when it is no
// longer than one window.
func (s shape) windows(length float64) []float64 {
	n := len(s.x)
	dist := make([]float64, n)
	for i := 1; i < n; i++ {
		dist[i] = dist[i-1] + math.Hypot(s.x[i]-s.x[i-1], s.y[i]-s.y[i-1])
	}
	total := dist[n-1]
	if length <= 0 || length > total {
		length = total
	}
	a, b := 0, 0
	point := func(d float64, i *int) (float64, float64) {
		for *i < n-2 && dist[*i+1] < d {
			*i++
		}
		f := (d - dist[*i]) / (dist[*i+1] - dist[*i])
		return s.x[*i] + f*(s.x[*i+1]-s.x[*i]), s.y[*i] + f*(s.y[*i+1]-s.y[*i])
	}
	count := int((total-length)/(length/4)*(1+1e-12)) + 1
	start := (total - length - float64(count-1)*length/4) / 2
	out := make([]float64, 0, count)
	for k := range count {
		from := start + float64(k)*length/4
		x0, y0 := point(from, &a)
		x1, y1 := point(from+length, &b)
		out = append(out, max(1, length/math.Hypot(x1-x0, y1-y0)))
	}
	return out
}

// bend is one bend between two inflections of a shape.
type bend struct {
	at        int // vertex of its apex
	sinuosity float64
	amplitude float64 // m, apex to chord
	chord     float64 // m
}

// bendsOf finds the bends: between vertices where the direction is at an
// extreme, which is where the curvature changes sign.
func (s shape) bendsOf() []bend {
	n := len(s.x) - 1
	var turn []int // inflections
	dir := func(i int) float64 { return math.Atan2(s.y[i+1]-s.y[i], s.x[i+1]-s.x[i]) }
	for i := 1; i < n-1; i++ {
		if (dir(i)-dir(i-1))*(dir(i+1)-dir(i)) < 0 {
			turn = append(turn, i)
		}
	}
	var out []bend
	for k := 1; k < len(turn); k++ {
		i, j := turn[k-1], turn[k]
		dx, dy := s.x[j]-s.x[i], s.y[j]-s.y[i]
		b := bend{chord: math.Hypot(dx, dy)}
		arc := 0.0
		for m := i; m < j; m++ {
			arc += math.Hypot(s.x[m+1]-s.x[m], s.y[m+1]-s.y[m])
			if off := math.Abs(dx*(s.y[m]-s.y[i])-dy*(s.x[m]-s.x[i])) / b.chord; off > b.amplitude {
				b.amplitude, b.at = off, m
			}
		}
		b.sinuosity = arc / b.chord
		out = append(out, b)
	}
	return out
}
