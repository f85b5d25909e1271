package expectation

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"fathombend/stats/earth"
)

// Draws a target may ask for.
const (
	FewestDraws = 100
	MostDraws   = 100_000
)

// DefaultDraws and DefaultSeed are used when a target says none.
const (
	DefaultDraws = 4000
	DefaultSeed  = 1
)

// steepest slope that is believed, m/m (11 degrees): above it the number is
// more likely in degrees or per mille.
const steepest = 0.2

// NewTarget returns a target with every number NaN and the contract's defaults.
func NewTarget() Target {
	n := math.NaN()
	return Target{
		Palaeolatitude: n, PalaeolatitudeSE: n, Inclination: n, A95: n, Flattening: n,
		SiteLat: n, SiteLon: n, PoleLat: n, PoleLon: n, EulerLat: n, EulerLon: n, EulerAngle: n, EulerError: n,
		Age: n, AgeSE: n, Day: earth.TidalHistory, SolarTide: earth.TideMiddle,
		RateMsPerCentury: n, DayLengthH: n, DaysPerYear: n, RotationPeriodH: n, GravityMS2: n,
		TargetSlope: n, TargetWidthM: n, TargetDepthM: n, SpeedMS: n, Concentration: n, RadiusM: n,
		ObservedSinuosity: n, Seed: DefaultSeed, Draws: DefaultDraws,
	}
}

func given(x float64) bool { return !math.IsNaN(x) }

func refuse(parameter, format string, a ...any) error {
	return &InputError{Parameter: parameter, Message: fmt.Sprintf(format, a...)}
}

// The ways to a palaeolatitude.
const (
	wayGiven       = "given"
	wayInclination = "inclination"
	wayPlate       = "plate"
	wayPole        = "pole"
	wayRotation    = "rotation"
)

// way finds the one way to a palaeolatitude that the target gives.
func (t *Target) way() (string, error) {
	var ways, first []string
	add := func(way, parameter string, is bool) {
		if is {
			ways, first = append(ways, way), append(first, parameter)
		}
	}
	add(wayGiven, "palaeolatitude", given(t.Palaeolatitude))
	add(wayInclination, "inclination", given(t.Inclination))
	add(wayPlate, "plate", t.Plate != "")
	add(wayPole, "pole_lat", given(t.PoleLat) || given(t.PoleLon))
	add(wayRotation, "euler_angle", given(t.EulerLat) || given(t.EulerLon) || given(t.EulerAngle))
	switch len(ways) {
	case 1:
		return ways[0], t.needs(ways[0])
	case 0:
		if given(t.SiteLat) || given(t.SiteLon) {
			return "", refuse("plate", "the site needs a way to its palaeolatitude: give plate (with the age), pole_lat and pole_lon, or euler_lat, euler_lon and euler_angle")
		}
		return "", refuse("palaeolatitude", "no palaeolatitude is given. Give palaeolatitude, or inclination, or site_lat and site_lon with plate, with pole_lat and pole_lon, or with euler_lat, euler_lon and euler_angle")
	}
	return "", refuse(first[1], "the palaeolatitude is given in %d ways (%s). Give one of them and leave the others empty", len(ways), strings.Join(first, ", "))
}

// needs checks that everything the way needs is there.
func (t *Target) needs(way string) error {
	need := func(parameter string, x float64) error {
		if given(x) {
			return nil
		}
		return refuse(parameter, "is needed for a palaeolatitude by %s. Expected a number in degrees", way)
	}
	fields := map[string][]struct {
		name string
		x    float64
	}{
		wayPlate:    {{"site_lat", t.SiteLat}, {"site_lon", t.SiteLon}},
		wayPole:     {{"site_lat", t.SiteLat}, {"site_lon", t.SiteLon}, {"pole_lat", t.PoleLat}, {"pole_lon", t.PoleLon}},
		wayRotation: {{"site_lat", t.SiteLat}, {"site_lon", t.SiteLon}, {"euler_lat", t.EulerLat}, {"euler_lon", t.EulerLon}, {"euler_angle", t.EulerAngle}},
	}
	for _, f := range fields[way] {
		if err := need(f.name, f.x); err != nil {
			return err
		}
	}
	if way == wayPlate && !given(t.Age) && t.Unit == "" {
		return refuse("age", "a plate has its pole at an age, and none is given. Give age in Ma, or unit")
	}
	return nil
}

// The values the target's texts may take.
var targetChoices = []struct {
	name   string
	of     func(*Target) string
	values []string
}{
	{"day", func(t *Target) string { return t.Day }, []string{"", earth.TidalHistory, earth.Polynomial, earth.ConstantRate, earth.Locked, earth.Given}},
	{"solar_tide", func(t *Target) string { return t.SolarTide }, []string{"", earth.TideMiddle, earth.TideOn, earth.TideOff}},
	{"target_feeder", func(t *Target) string { return t.TargetFeeder }, []string{"", "unknown", "river", "shelf", "glacial", "volcanic", "failure"}},
	{"target_grain", func(t *Target) string { return t.TargetGrain }, []string{"", "unknown", "mud", "mud_sand", "sand", "gravel"}},
	{"target_large_river", func(t *Target) string { return t.TargetLargeRiver }, []string{"", "unknown", "yes", "no"}},
	{"target_setting", func(t *Target) string { return t.TargetSetting }, []string{"", "unknown", "fan", "slope", "rise", "trench", "foredeep", "minibasin", "deep_ocean", "non_margin", "river_valley"}},
	{"target_confinement", func(t *Target) string { return t.TargetConfinement }, []string{"", "unknown", "confined", "levee_confined", "unconfined"}},
	{"target_aggradation", func(t *Target) string { return t.TargetAggradation }, []string{"", "unknown", "aggrading", "stable", "incising"}},
}

// The numbers of a target that have a range of their own.
var targetRanges = []struct {
	name   string
	of     func(*Target) float64
	lo, hi float64
	unit   string
}{
	{"palaeolatitude_se", func(t *Target) float64 { return t.PalaeolatitudeSE }, 0, 90, "degrees, one standard error"},
	{"age_se", func(t *Target) float64 { return t.AgeSE }, 0, 2000, "Ma, one standard error"},
	{"day_length_h", func(t *Target) float64 { return t.DayLengthH }, 0.1, 20_000, "solar hours"},
	{"days_per_year", func(t *Target) float64 { return t.DaysPerYear }, 0.1, 100_000, "solar days"},
	{"rotation_period_h", func(t *Target) float64 { return t.RotationPeriodH }, 0.1, 20_000, "hours against the stars"},
	{"gravity_m_s2", func(t *Target) float64 { return t.GravityMS2 }, 0.01, 1000, "m/s2"},
	{"target_width_m", func(t *Target) float64 { return t.TargetWidthM }, 0.01, 1e6, "m"},
	{"target_depth_m", func(t *Target) float64 { return t.TargetDepthM }, 0.01, 1e5, "m"},
	{"speed_m_s", func(t *Target) float64 { return t.SpeedMS }, 1e-4, 100, "m/s"},
	{"concentration", func(t *Target) float64 { return t.Concentration }, 1e-8, 0.65, "by volume"},
	{"radius_m", func(t *Target) float64 { return t.RadiusM }, 0.1, 1e7, "m"},
	{"observed_sinuosity", func(t *Target) float64 { return t.ObservedSinuosity }, 1, 1000, "sinuosity"},
}

// Validate refuses what cannot be answered: an *InputError that names the
// query parameter and what was expected.
func (t Target) Validate() error {
	for _, c := range targetChoices {
		if v := c.of(&t); !slices.Contains(c.values, v) {
			return refuse(c.name, "%q is not one of its values. Expected one of: %s", v, strings.Join(c.values[1:], ", "))
		}
	}
	for _, r := range targetRanges {
		if v := r.of(&t); given(v) && (v < r.lo || v > r.hi) {
			return refuse(r.name, "%g is not allowed. Expected %g to %g (%s)", v, r.lo, r.hi, r.unit)
		}
	}
	if v := t.TargetSlope; given(v) && v <= 0 {
		return refuse("target_slope", "%g is not a slope down the channel. Expected a number above 0 in m/m, or nothing when it is not known", v)
	} else if given(v) && v > steepest {
		return refuse("target_slope", "%g m/m is %.0f degrees, steeper than any submarine valley. If it is in degrees, give it as target_slope_deg", v, math.Atan(v)*180/math.Pi)
	}
	if t.Draws < FewestDraws || t.Draws > MostDraws {
		return refuse("draws", "%d is not allowed. Expected a whole number from %d to %d", t.Draws, FewestDraws, MostDraws)
	}
	if t.Unit != "" && given(t.Age) {
		return refuse("unit", "the age is given twice, as a number and as a unit. Give one of them")
	}
	if _, err := t.way(); err != nil {
		return err
	}
	_, err := locate(&t)
	return err
}
