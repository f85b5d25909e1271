package expectation

import (
	"math"
	"strings"
	"testing"
)

// (C, h, S, C_f, alpha) -> U, Fr with R_s 1.65 and g 9.81: the project's check
// values, at their printed precision.
func TestFlowSpeed(t *testing.T) {
	for _, c := range []struct{ c, h, s, drag, alpha, u, fr float64 }{
		{0.001, 50, 0.003, 0.003, 0.5, 0.73, 0.82},
		{0.01, 50, 0.003, 0.003, 0.5, 2.32, 0.82},
		{0.005, 100, 0.0005, 0.003, 0.5, 0.95, 0.33},
	} {
		gp := ReducedGravity(gravity, c.c)
		u := FlowSpeed(gp, c.h, c.s, c.drag, c.alpha)
		near(t, "U", u, c.u, 0.0051)
		near(t, "Fr", Froude(u, gp, c.h), c.fr, 0.0051)
		// Fr^2 = S / (C_f (1 + alpha)) whatever the concentration
		near(t, "Fr2", math.Pow(Froude(u, gp, c.h), 2), c.s/(c.drag*(1+c.alpha)), 1e-12)
	}
}

// U 1, 60 deg, W 10 km, g' 0.05: dh 25 m, Ro_W 0.79; U 1, 6 deg, W 2 km: dh
// 0.6 m, Ro_W 32.8 (the project's check values).
func TestTilt(t *testing.T) {
	for _, c := range []struct{ lat, w, dh, ro, tolDh, tolRo float64 }{{60, 10_000, 25, 0.79, 0.5, 5e-3}, {6, 2000, 0.6, 32.8, 0.05, 0.05}} {
		f := 2 * 7.292115e-5 * math.Sin(c.lat*math.Pi/180)
		near(t, "dh", Tilt(c.w, 0.05, f, 1, math.Inf(1)), c.dh, c.tolDh)
		near(t, "Ro_W", RossbyWidth(1, f, c.w), c.ro, c.tolRo)
		// at Ro_R = -1 the two terms cancel and the interface is flat
		near(t, "flat", Tilt(c.w, 0.05, f, 1, -1/f), 0, 1e-9)
		near(t, "Ro_R", RossbyRadius(1, f, -1/f), -1, 1e-12)
		// a river: the same with g' = g is centimetres
		if r := Tilt(c.w, gravity, f, 1, math.Inf(1)); r > 0.2 || r < 0.001 {
			t.Errorf("river %v m", r)
		}
	}
}

// e_w tends to 0.075 for fast flows and falls with Ri (formula worked by hand:
// Ri 1 gives 0.075/sqrt(719) = 0.0027970).
func TestEntrainment(t *testing.T) {
	near(t, "Fr 1", Entrainment(1), 0.0027970, 5e-8)
	near(t, "Fr 100", Entrainment(100), 0.075, 1e-4)
}

func TestRegime(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	q := latitude(60, 0)
	q.SpeedMS, q.TargetWidthM, q.TargetDepthM, q.RadiusM, q.Concentration, q.TargetSlope = 1, 10_000, 100, 50_000, 0.05/(gravity*submergedSand), 0.001
	r := mustExpect(t, f, q).Regime
	near(t, "Ro_W", r.RoW[1], 0.79, 5e-3)
	near(t, "tilt", r.TiltM[1], 25, 0.5)
	// Ro_R = 1 / (1.263e-4 * 5e4) = 0.158
	near(t, "Ro_R", r.RoR[1], 0.158, 5e-4)
	near(t, "Coriolis rules", r.CoriolisRules, 1, 1e-9)
	if r.LeveeSide != "right" || len(r.Assumed) != 0 {
		t.Errorf("%q %q", r.LeveeSide, r.Assumed)
	}
	// U^2/R against f U: 1/5e4 = 2e-5 against 1.263e-4
	near(t, "adding", r.TiltAddingBendM[1]/r.TiltM[1], (1.263+0.2)/1.263, 1e-3)
	near(t, "opposing", r.TiltOpposingBendM[1]/r.TiltM[1], (1.263-0.2)/1.263, 1e-3)

	q = latitude(0, 0)
	r = mustExpect(t, f, q).Regime
	if !math.IsNaN(r.RoW[1]) || r.LeveeSide != "" {
		t.Errorf("on the equator: %+v", r)
	}
	near(t, "bends rule", r.BendsRule, 1, 1e-9)
	near(t, "sum", r.BendsRule+r.CoriolisRules+r.Neither, 1, 1e-9)
	if len(r.Assumed) != 6 {
		t.Errorf("every missing input must be named: %q", r.Assumed)
	}
	// another planet: half the gravity, half the reduced gravity, the tilt of a typed speed doubles
	q = latitude(60, 0)
	q.SpeedMS, q.TargetWidthM, q.Concentration = 1, 10_000, 0.001
	one := mustExpect(t, f, q).Regime.TiltM[1]
	q.GravityMS2 = gravity / 2
	near(t, "gravity", mustExpect(t, f, q).Regime.TiltM[1], 2*one, 1e-9*one)
	q.RotationPeriodH = 23.9344696 / 2
	got := mustExpect(t, f, q)
	near(t, "twice the spin", got.RotationRatio, 2, 1e-6)
}

// Confinement and aggradation decide between opposite tendencies; unknown
// leaves both standing as undecided, known leaves one.
func TestTendencies(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	find := func(r *Result, text string) *Tendency {
		for i := range r.Tendencies {
			if strings.Contains(r.Tendencies[i].Text, text) {
				return &r.Tendencies[i]
			}
		}
		return nil
	}
	q := latitude(30, 2)
	r := mustExpect(t, f, q)
	for _, text := range []string{"ribbon sand bodies", "Lateral accretion packages"} {
		if v := find(r, text); v == nil || v.Likelihood != "undecided" || v.Probability != nil || v.BaseText == "" {
			t.Errorf("%s: %+v", text, v)
		}
	}
	q.TargetAggradation, q.TargetConfinement = "aggrading", "levee_confined"
	r = mustExpect(t, f, q)
	v := find(r, "ribbon sand bodies")
	if v == nil || v.Probability == nil || v.BaseRate == nil || find(r, "Lateral accretion packages") != nil {
		t.Fatalf("%+v", r.Tendencies)
	}
	var sinuous float64
	for _, c := range r.Classes {
		if c.From >= Classes[1] {
			sinuous += c.Probability
		}
	}
	near(t, "probability", *v.Probability, sinuous, 1e-9)
	if v := find(r, "down-valley sweep"); v == nil || v.Likelihood != "contested" {
		t.Errorf("%+v", v)
	}
	q.TargetAggradation, q.TargetConfinement, q.ObservedSinuosity = "incising", "confined", 1.8
	r = mustExpect(t, f, q)
	if v := find(r, "Lateral accretion packages"); v == nil || v.Likelihood != "very likely" || find(r, "ribbon sand bodies") != nil {
		t.Errorf("%+v", v)
	}
	if v := find(r, "Which bank"); v == nil || v.Likelihood != "no side stated" || v.Probability != nil || v.Grade != "insufficient" {
		t.Errorf("%+v", v)
	}
	if find(r, "near-vertical fill") != nil || find(r, "Near-vertical fill") != nil {
		t.Error("30 degrees is no very high latitude")
	}
	if v := find(mustExpect(t, f, latitude(74, 1)), "Near-vertical fill"); v == nil || v.Likelihood != "very likely" {
		t.Errorf("74 degrees: %+v", v)
	}
	for _, v := range r.Tendencies {
		if v.Source == "" || v.Grade == "" || v.Likelihood == "" || v.BaseText == "" {
			t.Errorf("%+v", v)
		}
	}
}
