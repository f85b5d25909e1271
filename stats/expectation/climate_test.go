package expectation

import (
	"context"
	"math"
	"strings"
	"testing"

	"fathombend/stats/earth"
)

func TestClimateTableIsChecked(t *testing.T) {
	own := func(rows ...earth.ClimateState) error { return CheckClimate(rows) }
	ice, green := earth.ClimateState{Name: "Late", BaseMa: 50, State: "icehouse"}, earth.ClimateState{Name: "Early", BaseMa: 200, TopMa: 50, State: "greenhouse"}
	if err := own(green, ice); err != nil {
		t.Errorf("two intervals end to end are refused: %v", err)
	}
	for want, err := range map[string]error{
		"overlap":           own(ice, earth.ClimateState{Name: "Middle", BaseMa: 60, TopMa: 49, State: "greenhouse"}),
		"not a climate":     own(ice, earth.ClimateState{Name: "Early", BaseMa: 60, TopMa: 50, State: "lukewarm"}),
		"base_ma above":     own(ice, earth.ClimateState{Name: "Early", BaseMa: 50, TopMa: 50, State: "greenhouse"}),
		"reaches 0":         own(green),
		"from 0 to 4600":    own(ice, earth.ClimateState{Name: "Early", BaseMa: math.Inf(1), TopMa: 50, State: "greenhouse"}),
		"both from 0 to 46": own(earth.ClimateState{Name: "NaN", BaseMa: math.NaN(), State: "icehouse"}),
	} {
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v does not say %q", err, want)
		}
	}
	if err := CheckClimate(earth.ClimateStates()); err != nil {
		t.Errorf("the built-in table is refused: %v", err)
	}
}

// The table of the options is the one that rows and target are looked up in:
// with one that calls every age a greenhouse, 10 Ma is one.
func TestClimateTableIsUsed(t *testing.T) {
	rows := plainLaw.draw(8)
	target := NewTarget()
	target.Palaeolatitude, target.Age, target.Draws = 40, 10, FewestDraws
	for want, table := range map[string]earth.ClimateTable{
		"icehouse":   nil,
		"greenhouse": {{Name: "All", BaseMa: 4000, State: "greenhouse"}},
	} {
		fits, err := Fit(context.Background(), rows, Options{Climate: table})
		if err != nil {
			t.Fatal(err)
		}
		res, err := fits.Expect(context.Background(), target)
		if err != nil || res.ClimateState != want {
			t.Errorf("%q, want %q: %v", res.ClimateState, want, err)
		}
		if _, said := res.Settings["climate_table"]; said != (table != nil) {
			t.Error("the settings of the answer do not tell whose table it is")
		}
	}
}
