package planform

import "math"

// j0Zero is the first zero of J0 in radians (137.79 degrees; Abramowitz &
// Stegun 1964, table 9.5): there the sinuosity of a sine-generated curve is
// infinite.
const j0Zero = 2.404825557695773

// MaxOmega is the largest angle, in radians, a sine-generated curve is drawn
// with; its loops have long crossed one another (they touch near 125 degrees).
const MaxOmega = j0Zero * (1 - 1e-6)

// SinuosityOf is the sinuosity 1/J0(omega) of the sine-generated curve
// theta(s) = omega sin(2 pi s/M), omega in radians. It is +Inf from the first
// zero of J0 on.
//
// Langbein & Leopold 1966, USGS Prof. Pap. 422-H, doi 10.3133/pp422H.
func SinuosityOf(omega float64) float64 {
	omega = math.Abs(omega)
	if omega >= j0Zero {
		return math.Inf(1)
	}
	return 1 / math.J0(omega)
}

// OmegaOf is the angle omega in radians whose sine-generated curve has
// sinuosity p: the inverse of SinuosityOf, to about 1e-12. A p of 1 or less, or
// NaN, gives 0 (a straight line); large p stops at MaxOmega.
func OmegaOf(p float64) float64 {
	if !(p > 1) {
		return 0
	}
	if p >= SinuosityOf(MaxOmega) {
		return MaxOmega
	}
	lo, hi := 0.0, MaxOmega
	for range 60 {
		mid := (lo + hi) / 2
		if math.J0(mid)*p > 1 {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

// SineGeneratedLine draws a sine-generated curve with angle omega (radians):
// waves whole or part meanders on a channel of the given arc length in metres,
// perWave points to each. X runs down the valley from 0, Y across it (left
// positive) and is centred on the belt axis; S is the distance along the
// channel. The curve starts at the apex of a bend, heading down the valley. The
// points lie on the curve to about 1e-10 of a wavelength (each step is
// integrated by five-point Gauss-Legendre quadrature).
func SineGeneratedLine(omega, arc, waves float64, perWave int) []PlanPoint {
	perWave = max(perWave, 4)
	n := max(int(math.Round(waves*float64(perWave))), 1)
	m := arc / waves
	h := arc / float64(n)
	pts := make([]PlanPoint, n+1)
	for i := 1; i <= n; i++ {
		dx, dy := 0.0, 0.0
		mid := (float64(i) - 0.5) * h
		for j, t := range gauss5 {
			sin, cos := math.Sincos(omega * math.Sin(2*math.Pi*(mid+t*h/2)/m))
			dx += gauss5w[j] * cos
			dy += gauss5w[j] * sin
		}
		pts[i] = PlanPoint{pts[i-1].X + dx*h/2, pts[i-1].Y + dy*h/2, float64(i) * h}
	}
	// The belt axis lies half-way between the first apex and the opposite one.
	half := 0.0
	steps := max(perWave, 64)
	q := m / 2 / float64(steps)
	for i := range steps {
		for j, t := range gauss5 {
			s := (float64(i)+0.5)*q + t*q/2
			half += gauss5w[j] * math.Sin(omega*math.Sin(2*math.Pi*s/m)) * q / 2
		}
	}
	for i := range pts {
		pts[i].Y -= half / 2
	}
	return pts
}

// Five-point Gauss-Legendre nodes and weights (Abramowitz & Stegun 1964,
// table 25.4).
var (
	gauss5  = [5]float64{-0.9061798459386640, -0.5384693101056831, 0, 0.5384693101056831, 0.9061798459386640}
	gauss5w = [5]float64{0.2369268850561891, 0.4786286704993665, 0.5688888888888889, 0.4786286704993665, 0.2369268850561891}
)
