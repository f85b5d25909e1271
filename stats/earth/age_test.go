package earth

import (
	"errors"
	"math"
	"strings"
	"testing"
)

// Boundary ages as the chart v2024-12 prints them.
func TestUnits(t *testing.T) {
	if n := len(Units()); n != 178 { // 178 units in the chart
		t.Fatalf("%d units", n)
	}
	for name, want := range map[string][2]float64{
		"Maastrichtian": {72.2, 66}, "maastrichtian": {72.2, 66}, "Late Cretaceous": {100.5, 66}, "Upper Cretaceous": {100.5, 66},
		"early jurassic": {201.4, 174.7}, "Lower Jurassic": {201.4, 174.7}, "Mid Jurassic": {174.7, 161.5}, "Palaeocene": {66, 56},
		"  Late   Pleistocene": {0.129, 0.0117}, "Archaean": {4031, 2500}, "Holocene": {0.0117, 0},
	} {
		u, err := UnitNamed(name)
		if err != nil || u.BaseMa != want[0] || u.TopMa != want[1] {
			t.Errorf("%s: %+v %v", name, u, err)
		}
	}
	_, err := UnitNamed("Mastrichian")
	var in *InputError
	if !errors.As(err, &in) || in.Parameter != "unit" || !strings.Contains(in.Message, "Nearest: Maastrichtian") {
		t.Error(err)
	}
}

// A name is offered only where it is near.
func TestNearUnits(t *testing.T) {
	for name, says := range map[string]string{"Cretac": "Nearest: ", "Campanien": "Nearest: Campanian", "Cretaceous Upper": "Cretaceous", "Jurasic": "Nearest: Jurassic"} {
		if _, err := UnitNamed(name); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%s: %v", name, err)
		}
	}
	for _, name := range []string{"Foo", "x", "Thursday", "yesterday evening"} {
		if _, err := UnitNamed(name); err == nil || strings.Contains(err.Error(), "Nearest") || !strings.Contains(err.Error(), "nor near one. Expected") {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestParseAge(t *testing.T) {
	for text, want := range map[string][2]float64{
		"70": {70, 0}, "70 Ma": {70, 0}, "70 +- 3": {70, 3}, "70±3 Ma": {70, 3}, "70 +/- 3 Ma": {70, 3}, "12 ka": {0.012, 0}, "2.5Ga": {2500, 0},
		"Maastrichtian": {69.1, math.Sqrt(6.2*6.2/12 + 0.01)}, // uniform over 72.2..66 and 0.2 at 2 sigma for the base
	} {
		a, err := ParseAge(text)
		if err != nil || math.Abs(a.Value-want[0]) > 1e-9 || math.Abs(a.SE-want[1]) > 1e-9 {
			t.Errorf("%s: %+v %v", text, a, err)
		}
	}
	for text, says := range map[string]string{
		"": "expected", "70000000": "type 70", "-3": "0 or more", "7o": "no age", "70 +- x": "no age", "Late Cretacious": "Upper Cretaceous", "NaN": "no unit", "70 +- -3": "standard error",
	} {
		if _, err := ParseAge(text); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%q: %v", text, err)
		}
	}
}

func FuzzParseAge(f *testing.F) {
	for _, s := range []string{"70 +- 3 Ma", "Late Cretaceous", "1e300", "±", "9Ga", "\xff"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		a, err := ParseAge(s)
		if err == nil && (math.IsNaN(a.Value+a.SE) || a.Value < 0 || a.Value > oldest) {
			t.Errorf("%q: %+v", s, a)
		}
	})
}

func FuzzParsePoleTable(f *testing.F) {
	f.Add("plate,age_ma,pole_lat,pole_lon,a95\nA,20,80,100,2\n")
	f.Fuzz(func(t *testing.T, s string) {
		tb, err := ParsePoleTable("x", strings.NewReader(s))
		if err != nil {
			return
		}
		for _, p := range tb.Plates() {
			from, to, _ := tb.Reach(p)
			if q, err := tb.Pole(p, (from+to)/2); err == nil && math.IsNaN(q.Lat+q.Lon) {
				t.Errorf("%q: %+v", s, q)
			}
		}
	})
}

func TestClimateStates(t *testing.T) {
	for age, want := range map[float64]string{0: "icehouse", 33.9: "greenhouse", 70: "greenhouse", 120: "cool greenhouse", 300: "icehouse", 444: "icehouse", 620: "greenhouse", 700: "icehouse"} {
		if c, ok := ClimateStateAt(age); !ok || c.State != want {
			t.Errorf("%g Ma: %+v", age, c)
		}
	}
	if _, ok := ClimateStateAt(2000); ok {
		t.Error("the table ends at 1000 Ma")
	}
	own, err := ParseClimateTable(strings.NewReader("name,base_ma,top_ma,state\nall,4000,0,greenhouse\n"))
	if err != nil {
		t.Fatal(err)
	}
	if c, ok := own.At(2000); !ok || c.State != "greenhouse" {
		t.Error(c)
	}
	if _, err := ParseClimateTable(strings.NewReader("name,base_ma,top_ma,state\nall,0,4000,greenhouse\n")); err == nil {
		t.Error("base below top accepted")
	}
	if cs := Credits(); len(cs) != 6 || len(cs[0].Lines) < 2 || !strings.Contains(cs[0].Lines[0], "International Chronostratigraphic Chart") {
		t.Error("credits")
	}
}
