package expectation

import "math"

// Constants of the flow estimates.
const (
	gravity       = 9.81 // m/s2
	submergedSand = 1.65 // (density of grains - water) / water; 1.58 in sea water

	// Thresholds of the regimes. |Ro_R| < 1 with Ro_W < 5: Coriolis rules
	// (Geophys. Res. Lett. 37:L17603 (2010); Phil. Trans. R. Soc. A
	// 371:20120366 (2013)). |Ro_R| much above 1: bends rule; "much" is ten
	// times here, a convention of this program.
	coriolisRoR = 1.0
	coriolisRoW = 5.0
	bendsRoR    = 10.0
)

// ReducedGravity is g' = g R_s C for a concentration by volume.
func ReducedGravity(g, concentration float64) float64 { return g * submergedSand * concentration }

// FlowSpeed is U = sqrt(g' h S / (C_f (1 + alpha))), m/s, for a flow of
// thickness h (m) on slope S (m/m) with bed drag C_f and ratio alpha of the
// drag at the interface to that at the bed.
func FlowSpeed(reducedGravity, h, slope, drag, alpha float64) float64 {
	return math.Sqrt(reducedGravity * h * slope / (drag * (1 + alpha)))
}

// Froude is the densimetric Froude number U / sqrt(g' h).
func Froude(u, reducedGravity, h float64) float64 { return u / math.Sqrt(reducedGravity*h) }

// RossbyWidth is Ro_W = U / (|f| W).
func RossbyWidth(u, f, width float64) float64 { return u / (math.Abs(f) * width) }

// RossbyRadius is Ro_R = U / (f R); its sign is that of the turning direction
// carried by R.
func RossbyRadius(u, f, radius float64) float64 { return u / (f * radius) }

// Tilt is the height difference of the interface across a channel,
// (W/g')(f U + U^2/R), m: positive up to the right looking downstream in the
// northern hemisphere; radius +Inf for a straight reach (after Komar, J.
// Geophys. Res. 74:4544 (1969), form from memory). An Ekman boundary layer
// describes rotating experiments better: an estimate.
func Tilt(width, reducedGravity, f, u, radius float64) float64 {
	return width / reducedGravity * (f*u + u*u/radius)
}

// Entrainment is e_w = 0.075 / sqrt(1 + 718 Ri^2.4) with Ri = 1/Fr^2 (Parker,
// Garcia, Fukushima & Yu, J. Hydraul. Res. 25:123 (1987)).
func Entrainment(froude float64) float64 {
	return 0.075 / math.Sqrt(1+718*math.Pow(1/(froude*froude), 2.4))
}
