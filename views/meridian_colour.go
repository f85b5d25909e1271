package views

import "math"

// colourClass is one step of what colour carries.
type colourClass struct {
	Class  string // r0..r6
	Letter string // repeats the colour beside the ribbon, "" where the ramp is ordered
	Text   string
	holds  func(MeridianItem) bool
}

// colourClasses are the steps of one colouring, the unknown last. Slope
// doubles from step to step, centred on the range that compilations have.
func colourClasses(colour string) (title string, steps []colourClass) {
	is := func(get func(MeridianItem) string, v string) func(MeridianItem) bool {
		return func(i MeridianItem) bool { return get(i) == v }
	}
	between := func(get func(MeridianItem) float64, lo, hi float64) func(MeridianItem) bool {
		return func(i MeridianItem) bool { v := get(i); return v >= lo && v < hi }
	}
	switch colour {
	case "feeder":
		get := func(i MeridianItem) string { return i.Feeder }
		return "Feeder", []colourClass{
			{"r6", "R", "river", is(get, "river")}, {"r4", "S", "shelf", is(get, "shelf")}, {"r1", "G", "glacial", is(get, "glacial")},
			{"r3", "V", "volcanic", is(get, "volcanic")}, {"r2", "F", "failure", is(get, "failure")}, {"r0", "", "unknown", nil},
		}
	case "grade":
		get := func(i MeridianItem) string { return i.Grade }
		return "Grade", []colourClass{
			{"r6", "", "remeasured", is(get, "remeasured")}, {"r4", "", "surveyed", is(get, "surveyed")},
			{"r2", "", "traced", is(get, "traced")}, {"r0", "", "quoted", nil},
		}
	case "age":
		get := func(i MeridianItem) float64 { return i.AgeMa }
		return "Age (Ma)", []colourClass{
			{"r1", "", "sea floor", func(i MeridianItem) bool { return !i.Ancient }}, {"r2", "", "5–23", between(get, 5, 23)},
			{"r3", "", "23–66", between(get, 23, 66)}, {"r4", "", "66–145", between(get, 66, 145)},
			{"r5", "", "145–252", between(get, 145, 252)}, {"r6", "", "over 252", between(get, 252, math.Inf(1))}, {"r0", "", "unknown", nil},
		}
	}
	get := func(i MeridianItem) float64 { return i.Slope }
	return "Valley slope (m/m)", []colourClass{
		{"r1", "", "under 0.001", between(get, 5e-324, 0.001)}, {"r2", "", "0.001–0.002", between(get, 0.001, 0.002)},
		{"r3", "", "0.002–0.004", between(get, 0.002, 0.004)}, {"r4", "", "0.004–0.008", between(get, 0.004, 0.008)},
		{"r5", "", "0.008–0.016", between(get, 0.008, 0.016)}, {"r6", "", "over 0.016", between(get, 0.016, math.Inf(1))}, {"r0", "", "unknown", nil},
	}
}

// colourOf is the step an item falls into.
func colourOf(colour string, i MeridianItem) colourClass {
	_, steps := colourClasses(colour)
	for _, s := range steps {
		if s.holds == nil || s.holds(i) {
			return s
		}
	}
	return colourClass{Class: "r0"}
}
