package planform

import (
	"fmt"
	"math"
	"sort"
)

const (
	minPoints = 64        // a coarse line is still sampled finely enough to smooth
	maxPoints = 2_000_000 // after resampling
)

// samples is a track resampled at equal distances along its vertices. Places
// on it are given as u, the (fractional) number of the sample.
type samples struct {
	t    *track
	n    int       // samples 0..n
	step float64   // distance between them along the vertices, m
	x, y []float64 // local frame, m
	cum  []float64 // arc measured along the samples; nil when arcs are measured along the vertices
}

// automaticSpacing is the median distance of the vertices that carry shape,
// but never so coarse that the line has fewer than minPoints samples, nor so
// fine that there are more than twice as many samples as such vertices.
func (t *track) automaticSpacing() float64 {
	n := math.Round(t.length / t.spacing)
	n = max(minPoints, min(n, max(4096, 2*float64(t.shaped)), maxPoints))
	return t.length / n
}

// resample places samples at equal distances as near as possible to spacing,
// so that the last falls on the last vertex. With along "resampled" arcs are
// measured from sample to sample, so that lines of different vertex spacing
// can be read with one spacing; with "given" along the vertices.
func (t *track) resample(spacing float64, along string) (*samples, error) {
	count := math.Round(t.length / spacing)
	if count > maxPoints {
		return nil, &InputError{"spacing_m", fmt.Sprintf("%s m on a line of %s would give %.0f points; at most %d are used, so give at least %s m", num(spacing), km(t.length), count, maxPoints, num(math.Ceil(t.length/maxPoints*10)/10))}
	}
	if count < 8 {
		return nil, &InputError{"spacing_m", fmt.Sprintf("%s m on a line of %s leaves fewer than 8 steps; give at most %s m", num(spacing), km(t.length), num(math.Floor(t.length/8*10)/10))}
	}
	r := &samples{t: t, n: int(count), step: t.length / count}
	r.x, r.y = make([]float64, r.n+1), make([]float64, r.n+1)
	i := 0
	for k := range r.n + 1 {
		s := float64(k) * r.step
		for i < len(t.s)-2 && t.s[i+1] < s {
			i++
		}
		f := min(1, (s-t.s[i])/(t.s[i+1]-t.s[i]))
		r.x[k] = t.x[i] + f*(t.x[i+1]-t.x[i])
		r.y[k] = t.y[i] + f*(t.y[i+1]-t.y[i])
	}
	if along == "resampled" {
		r.measureAlong()
	}
	return r, nil
}

// measureAlong fills the arc measured from sample to sample.
func (r *samples) measureAlong() {
	r.cum = make([]float64, r.n+1)
	lat, lon := r.t.at(0)
	if r.t.plane {
		for k := 1; k <= r.n; k++ {
			r.cum[k] = r.cum[k-1] + math.Hypot(r.x[k]-r.x[k-1], r.y[k]-r.y[k-1])
		}
		return
	}
	p := spotOf(lat, lon)
	for k := 1; k <= r.n; k++ {
		q := spotOf(r.t.at(float64(k) * r.step))
		r.cum[k] = r.cum[k-1] + between(p, q)
		p = q
	}
}

// arc is the measured distance from the start to u, m.
func (r *samples) arc(u float64) float64 {
	if r.cum == nil {
		return u * r.step
	}
	i := min(max(int(u), 0), r.n-1)
	return r.cum[i] + (u-float64(i))*(r.cum[i+1]-r.cum[i])
}

// total is the whole measured arc, m.
func (r *samples) total() float64 { return r.arc(float64(r.n)) }

// place undoes arc.
func (r *samples) place(arc float64) float64 {
	if r.cum == nil {
		return min(max(arc/r.step, 0), float64(r.n))
	}
	i := sort.SearchFloat64s(r.cum, arc)
	if i == 0 {
		return 0
	}
	if i > r.n {
		return float64(r.n)
	}
	return float64(i-1) + (arc-r.cum[i-1])/(r.cum[i]-r.cum[i-1])
}

// at is the position at u, as track.at.
func (r *samples) at(u float64) (lat, lon float64) { return r.t.at(u * r.step) }

// chord is the distance between two places, m.
func (r *samples) chord(u, v float64) float64 {
	lat1, lon1 := r.at(u)
	lat2, lon2 := r.at(v)
	return r.t.distance(lat1, lon1, lat2, lon2)
}

// point is the place u in the local frame.
func (r *samples) point(u float64) (x, y float64) {
	i := min(max(int(u), 0), r.n-1)
	f := u - float64(i)
	return r.x[i] + f*(r.x[i+1]-r.x[i]), r.y[i] + f*(r.y[i+1]-r.y[i])
}

// ratio is arc over chord: at least 1, since rounding may leave a straight
// piece a hair below; NaN where the two ends meet.
func ratio(arc, chord float64) float64 {
	if !(chord > 1e-6*arc) {
		return math.NaN()
	}
	return max(1, arc/chord)
}
