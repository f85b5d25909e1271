package expectation

import (
	"math"
	"testing"

	"fathombend/stats/earth"
)

// TestRotationChoices: at 70 Ma the tidal history gives 1.0195 in the middle of
// the Sun's tide on and off, 1.0213 with it on and 1.0177 without (worked from
// the Earth-Moon distances of Farhat et al., A&A 665:L1 (2022)), the polynomial
// of Laskar et al., A&A 428:261 (2004), 1.0224; the site 12 S 10 W with its pole
// at 72 N 200 E lay at 27.36 S, and has the f of 27.9 to 28.0 S today.
func TestRotationChoices(t *testing.T) {
	target := NewTarget()
	target.SiteLat, target.SiteLon, target.PoleLat, target.PoleLon, target.A95, target.Age, target.AgeSE = -12, -10, 72, 200, 4, 70, 3
	p, err := locate(&target)
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]float64{earth.TidalHistory + earth.TideMiddle: 1.0195, earth.TidalHistory + earth.TideOn: 1.0213, earth.TidalHistory + earth.TideOff: 1.0177, earth.Polynomial: 1.0224, earth.Locked: 1.0195}
	got := rotationChoices(p)
	if len(got) != len(want) {
		t.Fatalf("%d choices, want %d", len(got), len(want))
	}
	for _, c := range got {
		if w := want[c.History+c.SolarTide]; math.Abs(c.RotationRatio-w) > 1e-4 {
			t.Errorf("%s: %.5f, want %.4f", c.Title, c.RotationRatio, w)
		}
		if c.EquivalentModernLatitude == nil || math.Abs(*c.EquivalentModernLatitude+27.95) > 0.1 {
			t.Errorf("%s: equivalent modern latitude %v, want about -27.95", c.Title, c.EquivalentModernLatitude)
		}
	}
	target.Age = 0
	if p, err = locate(&target); err != nil || rotationChoices(p) != nil {
		t.Errorf("today there is nothing to choose: %v %v", rotationChoices(p), err)
	}
}
