package planform

import (
	"math"
	"slices"
)

// bend measures the piece between two successive inflections. Arc and chord
// are those of the line as measured; amplitude, radius and apex come from its
// samples in the local frame. The smoothed line says only where the inflections
// are and to which side the bend turns.
func (r *samples) bend(c *curve, from, to float64) Bend {
	b := Bend{FromM: r.arc(from), ToM: r.arc(to), ChordM: r.chord(from, to)}
	b.ArcM = b.ToM - b.FromM
	b.Sinuosity = ratio(b.ArcM, b.ChordM)
	b.WavelengthM = 2 * b.ChordM
	var apex float64
	b.AmplitudeM, apex = r.apex(from, to)
	b.Side = "right"
	if r.turn(c, from, to) > 0 {
		b.Side = "left"
	}
	up, down := r.arc(apex)-b.FromM, b.ToM-r.arc(apex)
	b.Asymmetry = (up - down) / (up + down)
	b.RadiusM = r.radius(apex, from, to)
	if !r.t.plane {
		b.ApexLat, b.ApexLon = r.at(apex)
	}
	b.apex = apex
	return b
}

// turn is the angle turned through between two places, radians, left positive.
func (r *samples) turn(c *curve, from, to float64) float64 {
	sum := 0.0
	for i := int(math.Ceil(from)); float64(i) <= to; i++ {
		sum += c.kappa[i]
	}
	return sum * r.step
}

// apex is the place farthest from the chord of a bend, with its distance from
// it, m, read off the parabola through the farthest sample and its neighbours.
// Of several equally far (a flat-topped bend) the middle one counts.
func (r *samples) apex(from, to float64) (amplitude, place float64) {
	x0, y0 := r.point(from)
	x1, y1 := r.point(to)
	dx, dy := x1-x0, y1-y0
	d := math.Hypot(dx, dy)
	first, last := int(math.Ceil(from)), int(math.Floor(to))
	lo, hi := first, last
	off := func(i int) float64 {
		if d > 1e-9 {
			return math.Abs((r.x[i]-x0)*dy-(r.y[i]-y0)*dx) / d
		}
		return math.Hypot(r.x[i]-x0, r.y[i]-y0) // closed loop: the farthest from its mouth
	}
	tie := 1e-9 * (to - from) * r.step
	for i := first; i <= last; i++ {
		switch a := off(i); {
		case a > amplitude+tie:
			amplitude, lo, hi = a, i, i
		case a >= amplitude-tie:
			hi = i
		}
	}
	if lo != hi || lo == first || lo == last {
		return amplitude, float64(lo+hi) / 2
	}
	before, after := off(lo-1), off(lo+1)
	bow := before - 2*amplitude + after
	if !(bow < 0) {
		return amplitude, float64(lo)
	}
	shift := min(0.5, max(-0.5, (before-after)/(2*bow)))
	return amplitude - (before-after)*shift/4, float64(lo) + shift
}

// radius is that of the circle fitted to the quarter of the bend about its
// apex, m; NaN where there are not three distinct samples or they lie straight.
// On a sine-generated curve it is 3 % more than the least radius.
func (r *samples) radius(apex, from, to float64) float64 {
	half := math.Max((to-from)/8, 1.5)
	lo := max(int(math.Ceil(apex-half)), int(math.Ceil(from)), 0)
	hi := min(int(math.Floor(apex+half)), int(math.Floor(to)), r.n)
	if hi-lo < 2 {
		return math.NaN()
	}
	return fitCircle(r.x[lo:hi+1], r.y[lo:hi+1])
}

// fitCircle is the radius of the circle through points by the algebraic fit of
// Pratt 1987, Computer Graphics 21:145, doi 10.1145/37402.37420, which does not
// shrink on short arcs. NaN when the points lie on a line.
func fitCircle(x, y []float64) float64 {
	n := float64(len(x))
	var mx, my float64
	for i := range x {
		mx += x[i] / n
		my += y[i] / n
	}
	var xx, yy, xy, xz, yz, zz float64
	for i := range x {
		u, v := x[i]-mx, y[i]-my
		z := u*u + v*v
		xx, yy, xy = xx+u*u/n, yy+v*v/n, xy+u*v/n
		xz, yz, zz = xz+u*z/n, yz+v*z/n, zz+z*z/n
	}
	mz := xx + yy
	det := xx*yy - xy*xy
	if !(det > 1e-14*mz*mz) {
		return math.NaN()
	}
	// Least root of the characteristic polynomial by Newton from 0, where it
	// is positive and falling, so that the steps approach it from below.
	varZ := zz - mz*mz
	a0 := xz*(xz*yy-yz*xy) + yz*(yz*xx-xz*xy) - varZ*det
	a1 := varZ*mz + 4*det*mz - xz*xz - yz*yz
	a2 := 4*det - 3*mz*mz - zz
	root := 0.0
	value := math.Inf(1)
	for range 50 {
		p := a0 + root*(a1+root*(a2+4*root*root))
		slope := a1 + root*(2*a2+16*root*root)
		if math.Abs(p) >= math.Abs(value) || slope == 0 {
			break
		}
		value = p
		next := root - p/slope
		if !finite(next) || math.Abs(next-root) < 1e-14*mz {
			break
		}
		root = next
	}
	d := root*root - root*mz + det
	cx := (xz*(yy-root) - yz*xy) / d / 2
	cy := (yz*(xx-root) - xz*xy) / d / 2
	return math.Sqrt(cx*cx + cy*cy + mz + 2*root)
}

// bendsOf is the bend table, from the inflections.
func (r *samples) bendsOf(c *curve, inflections []float64) []Bend {
	bends := make([]Bend, 0, max(len(inflections)-1, 0))
	for i := 1; i < len(inflections); i++ {
		bends = append(bends, r.bend(c, inflections[i-1], inflections[i]))
	}
	return bends
}

// typical takes medians over the bends.
func typical(bends []Bend) *Typical {
	if len(bends) == 0 {
		return nil
	}
	median := func(of func(Bend) float64) float64 {
		var v []float64
		for _, b := range bends {
			if x := of(b); finite(x) {
				v = append(v, x)
			}
		}
		slices.Sort(v)
		return quantile(v, 0.5)
	}
	return &Typical{
		Bends:       len(bends),
		WavelengthM: median(func(b Bend) float64 { return b.WavelengthM }),
		AmplitudeM:  median(func(b Bend) float64 { return b.AmplitudeM }),
		RadiusM:     median(func(b Bend) float64 { return b.RadiusM }),
		Sinuosity:   median(func(b Bend) float64 { return b.Sinuosity }),
	}
}

// overInflections is the valley length as the sum of chords from the start over
// the inflections to the end, m.
func (r *samples) overInflections(inflections []float64) float64 {
	if len(inflections) == 0 {
		return r.t.chord
	}
	sum := r.chord(0, inflections[0])
	for i := 1; i < len(inflections); i++ {
		sum += r.chord(inflections[i-1], inflections[i])
	}
	return sum + r.chord(inflections[len(inflections)-1], float64(r.n))
}
