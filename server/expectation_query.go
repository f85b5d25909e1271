package main

import (
	"errors"
	"math"
	"net/url"
	"slices"
	"strconv"
	"strings"

	"fathombend/catalogue"
	"fathombend/stats"
	"fathombend/stats/earth"
	"fathombend/stats/expectation"
)

// targetField is one number of a target: where it goes and what it may be.
type targetField struct {
	name     string
	to       func(*expectation.Target) *float64
	low, top float64
	unit     string
	letters  string // hemisphere letters accepted after the number, positive first
}

const (
	anyLatitude  = 90
	anyLongitude = 360
	// oldestMa is the age of the Earth, rounded up: nothing older can be meant.
	oldestMa = 4600
)

var targetFields = []targetField{
	{"palaeolatitude", func(t *expectation.Target) *float64 { return &t.Palaeolatitude }, -anyLatitude, anyLatitude, "degrees", "NS"},
	{"palaeolatitude_se", func(t *expectation.Target) *float64 { return &t.PalaeolatitudeSE }, 0, anyLatitude, "degrees, one standard error", ""},
	{"inclination", func(t *expectation.Target) *float64 { return &t.Inclination }, -90, 90, "degrees, down positive", ""},
	{"a95", func(t *expectation.Target) *float64 { return &t.A95 }, 0, 90, "degrees", ""},
	{"flattening", func(t *expectation.Target) *float64 { return &t.Flattening }, 0.1, 1, "1", ""},
	{"site_lat", func(t *expectation.Target) *float64 { return &t.SiteLat }, -anyLatitude, anyLatitude, "degrees", "NS"},
	{"site_lon", func(t *expectation.Target) *float64 { return &t.SiteLon }, -180, anyLongitude, "degrees", "EW"},
	{"pole_lat", func(t *expectation.Target) *float64 { return &t.PoleLat }, -anyLatitude, anyLatitude, "degrees", "NS"},
	{"pole_lon", func(t *expectation.Target) *float64 { return &t.PoleLon }, -180, anyLongitude, "degrees", "EW"},
	{"euler_lat", func(t *expectation.Target) *float64 { return &t.EulerLat }, -anyLatitude, anyLatitude, "degrees", "NS"},
	{"euler_lon", func(t *expectation.Target) *float64 { return &t.EulerLon }, -180, anyLongitude, "degrees", "EW"},
	{"euler_angle", func(t *expectation.Target) *float64 { return &t.EulerAngle }, -360, 360, "degrees, counter-clockwise positive", ""},
	{"euler_error", func(t *expectation.Target) *float64 { return &t.EulerError }, 0, 90, "degrees", ""},
	{"age", func(t *expectation.Target) *float64 { return &t.Age }, 0, oldestMa, "Ma", ""},
	{"age_se", func(t *expectation.Target) *float64 { return &t.AgeSE }, 0, 1000, "Ma, one standard error", ""},
	{"rate_ms_per_century", func(t *expectation.Target) *float64 { return &t.RateMsPerCentury }, -10, 10, "ms per century", ""},
	{"day_length_h", func(t *expectation.Target) *float64 { return &t.DayLengthH }, 1, 10000, "solar hours", ""},
	{"days_per_year", func(t *expectation.Target) *float64 { return &t.DaysPerYear }, 1, 10000, "solar days per year", ""},
	{"rotation_period_h", func(t *expectation.Target) *float64 { return &t.RotationPeriodH }, 0.1, 20_000, "hours against the stars, for other planets", ""},
	{"gravity_m_s2", func(t *expectation.Target) *float64 { return &t.GravityMS2 }, 0.01, 1000, "m/s2, for other planets", ""},
	{"target_width_m", func(t *expectation.Target) *float64 { return &t.TargetWidthM }, 0.1, 200_000, "m", ""},
	{"target_depth_m", func(t *expectation.Target) *float64 { return &t.TargetDepthM }, 0.01, 10_000, "m", ""},
	{"speed_m_s", func(t *expectation.Target) *float64 { return &t.SpeedMS }, 0.001, 50, "m/s", ""},
	{"concentration", func(t *expectation.Target) *float64 { return &t.Concentration }, 1e-7, 0.6, "1, by volume", ""},
	{"radius_m", func(t *expectation.Target) *float64 { return &t.RadiusM }, 1, 1_000_000, "m", ""},
	{"observed_sinuosity", func(t *expectation.Target) *float64 { return &t.ObservedSinuosity }, 1, 100, "1", ""},
}

// The ways to give the target's slope; one of them at most.
var slopeFields = []struct {
	name string
	top  float64
	mm   func(float64) float64
}{
	{"target_slope", 10, func(x float64) float64 { return x }},
	{"target_slope_deg", 45, func(x float64) float64 { return math.Tan(x * math.Pi / 180) }},
	{"target_slope_permille", 1000, func(x float64) float64 { return x / 1000 }},
}

// The choices of the target's text fields.
var (
	dayChoices         = []string{"tidal_history", "polynomial", "constant_rate", "locked", "given"}
	solarTideChoices   = []string{"middle", "on", "off"}
	eulerFrameChoices  = []string{"spin_axis", "mantle"}
	feederChoices      = []string{"unknown", "river", "shelf", "glacial", "volcanic", "failure"}
	largeRiverChoices  = []string{"unknown", "yes", "no"}
	grainChoices       = []string{"unknown", "mud", "mud_sand", "sand", "gravel"}
	settingChoices     = []string{"unknown", "fan", "slope", "rise", "trench", "foredeep", "minibasin", "deep_ocean", "non_margin", "river_valley"}
	confinementChoices = []string{"unknown", "confined", "levee_confined", "unconfined"}
	aggradationChoices = []string{"unknown", "aggrading", "stable", "incising"}
)

type targetText struct {
	name    string
	to      func(*expectation.Target) *string
	choices []string // nil = free text
}

var targetTexts = []targetText{
	{"plate", func(t *expectation.Target) *string { return &t.Plate }, nil},
	{"pole_table", func(t *expectation.Target) *string { return &t.PoleTable }, nil},
	{"euler_frame", func(t *expectation.Target) *string { return &t.EulerFrame }, eulerFrameChoices},
	{"unit", func(t *expectation.Target) *string { return &t.Unit }, nil},
	{"day", func(t *expectation.Target) *string { return &t.Day }, dayChoices},
	{"solar_tide", func(t *expectation.Target) *string { return &t.SolarTide }, solarTideChoices},
	{"response", func(t *expectation.Target) *string { return &t.Response }, stats.Responses},
	{"measured_line", func(t *expectation.Target) *string { return &t.MeasuredLine }, stats.MeasuredLines},
	{"target_feeder", func(t *expectation.Target) *string { return &t.TargetFeeder }, feederChoices},
	{"target_large_river", func(t *expectation.Target) *string { return &t.TargetLargeRiver }, largeRiverChoices},
	{"target_grain", func(t *expectation.Target) *string { return &t.TargetGrain }, grainChoices},
	{"target_setting", func(t *expectation.Target) *string { return &t.TargetSetting }, settingChoices},
	{"target_confinement", func(t *expectation.Target) *string { return &t.TargetConfinement }, confinementChoices},
	{"target_aggradation", func(t *expectation.Target) *string { return &t.TargetAggradation }, aggradationChoices},
}

// targetParameters are the names that describe a target, for addresses, help
// and the columns of a file of targets.
var targetParameters = func() []string {
	var out []string
	for _, f := range targetFields {
		out = append(out, f.name)
	}
	for _, s := range slopeFields {
		out = append(out, s.name)
	}
	for _, t := range targetTexts {
		out = append(out, t.name)
	}
	return append(out, "pole_csv", "seed", "draws")
}()

// targetOf reads a target; what was not given keeps NewTarget's default.
func targetOf(q url.Values) (expectation.Target, error) {
	t := expectation.NewTarget()
	if err := once(onlyNames(q, targetParameters)); err != nil {
		return t, err
	}
	for _, f := range targetFields {
		if err := f.read(q, &t); err != nil {
			return t, err
		}
	}
	if err := readSlope(q, &t); err != nil {
		return t, err
	}
	for _, f := range targetTexts {
		v := strings.TrimSpace(q.Get(f.name))
		if v == "" {
			continue
		}
		if f.choices != nil {
			if _, err := oneOf(url.Values{f.name: {v}}, f.name, "", f.choices); err != nil {
				return t, err
			}
		} else if len(v) > 200 {
			return t, &badInput{f.name, "is longer than 200 characters. Expected a name"}
		}
		*f.to(&t) = v
	}
	if err := readPoles(q, &t); err != nil {
		return t, err
	}
	seed, err := whole(q, "seed", int(t.Seed), 0, maxSeed)
	if err != nil {
		return t, err
	}
	draws, err := whole(q, "draws", t.Draws, expectation.FewestDraws, expectation.MostDraws)
	if err != nil {
		return t, err
	}
	t.Seed, t.Draws = uint64(seed), draws
	return t, nil
}

func onlyNames(q url.Values, names []string) url.Values {
	out := url.Values{}
	for name, v := range q {
		if slices.Contains(names, name) {
			out[name] = v
		}
	}
	return out
}

func (f targetField) read(q url.Values, t *expectation.Target) error {
	v := strings.TrimSpace(q.Get(f.name))
	if v == "" {
		return nil
	}
	text, sign := f.hemisphere(v)
	x, err := strconv.ParseFloat(text, 64)
	if f.name == "age" && err == nil && x >= 10_000 && isFinite(x) {
		return &badInput{f.name, strconv.Quote(clip(v)) + " looks like years. Expected millions of years (Ma): " + short(x) + " years is " + short(x/1e6) + " Ma"}
	}
	if err != nil {
		return &badInput{f.name, f.misread(v)}
	}
	if !isFinite(x) || sign*x < f.low || sign*x > f.top || (sign < 0 && x < 0) {
		return &badInput{f.name, strconv.Quote(clip(v)) + " is not allowed. Expected " + f.want()}
	}
	*f.to(t) = sign * x
	return nil
}

// want is what a number of the field may be.
func (f targetField) want() string {
	want := "a number from " + short(f.low) + " to " + short(f.top) + " (" + f.unit + "), with a point as decimal sign"
	if f.unit == "1" {
		want = "a number from " + short(f.low) + " to " + short(f.top) + ", with a point as decimal sign"
	}
	if f.letters != "" {
		want += "; " + f.letters[:1] + " or " + f.letters[1:] + " may follow it"
	}
	return want
}

// errorFields are where the error of a value is typed.
var errorFields = map[string]string{"palaeolatitude": "palaeolatitude_se", "age": "age_se", "inclination": "a95", "pole_lat": "a95", "pole_lon": "a95",
	"euler_lat": "euler_error", "euler_lon": "euler_error", "euler_angle": "euler_error"}

// misread says why a text is no number of the field, and what to type where it
// is clear what was meant: a value with its error, a decimal comma, a unit.
// The value itself is never guessed.
func (f targetField) misread(v string) string {
	quoted := strconv.Quote(clip(v))
	value, se, pair := strings.Cut(strings.NewReplacer("+/-", "±", "+-", "±", "-+", "±").Replace(v), "±")
	value, se = strings.TrimSpace(value), strings.TrimSpace(se)
	switch to := errorFields[f.name]; {
	case pair && isNumber(value) && to != "" && isNumber(se):
		return quoted + " is a value with its error. Give " + value + " here and " + se + " in " + to
	case pair && isNumber(value):
		return quoted + " is a value with its error. Give " + value + " here; an error of it has no place in this question"
	}
	if dotted := strings.Replace(v, ",", ".", 1); strings.Count(v, ",") == 1 && isNumber(dotted) {
		return quoted + " has a comma as decimal sign. Expected " + dotted + ", with a point"
	}
	if i := strings.LastIndexAny(v, "0123456789."); i >= 0 && isNumber(v[:i+1]) {
		number, unit := v[:i+1], strings.TrimSpace(v[i+1:])
		if x, _ := strconv.ParseFloat(number, 64); f.name == "age" && ageUnits[strings.ToLower(unit)] != 0 {
			return quoted + " carries its unit, and ages are taken in Ma. Give " + short(x*ageUnits[strings.ToLower(unit)])
		}
		return quoted + " is a number followed by " + strconv.Quote(clip(unit)) + ". Give " + number + " alone, if it is in " + f.unitName()
	}
	return quoted + " is no number. Expected " + f.want()
}

// ageUnits in Ma.
var ageUnits = map[string]float64{"ma": 1, "myr": 1, "my": 1, "m.y.": 1, "ka": 1e-3, "kyr": 1e-3, "ga": 1e3, "gyr": 1e3}

func (f targetField) unitName() string {
	unit, _, _ := strings.Cut(f.unit, ",")
	if unit == "1" {
		return "no unit"
	}
	return unit
}

func isNumber(s string) bool {
	x, err := strconv.ParseFloat(s, 64)
	return err == nil && isFinite(x)
}

// hemisphere takes a letter such as the S of "12 S" off a coordinate.
func (f targetField) hemisphere(v string) (text string, sign float64) {
	if f.letters == "" {
		return v, 1
	}
	last := strings.ToUpper(v[len(v)-1:])
	i := strings.Index(f.letters, last)
	if i < 0 {
		return strings.TrimSpace(strings.TrimSuffix(v, "°")), 1
	}
	text = strings.TrimSpace(strings.TrimSuffix(strings.TrimSpace(v[:len(v)-1]), "°"))
	if i == 1 {
		return text, -1
	}
	return text, 1
}

func readSlope(q url.Values, t *expectation.Target) error {
	given := ""
	for _, s := range slopeFields {
		if strings.TrimSpace(q.Get(s.name)) == "" {
			continue
		}
		if given != "" {
			return &badInput{s.name, "the slope is given twice, as " + given + " and as " + s.name + ". Expected one of them"}
		}
		given = s.name
		x, err := number(q, s.name, 0, -s.top, s.top)
		if err != nil {
			return err
		}
		if x <= 0 {
			return &badInput{s.name, strconv.Quote(q.Get(s.name)) + " is not a slope down the channel. Expected a number above 0; leave it out when it is not known"}
		}
		t.TargetSlope = s.mm(x)
	}
	return nil
}

// ownPoles is the name of a pole table that came with the question.
const ownPoles = "own"

// readPoles reads a pole table of the user's own, sent as CSV text: it is used
// for this question and stored nowhere.
func readPoles(q url.Values, t *expectation.Target) error {
	text := q.Get("pole_csv")
	if strings.TrimSpace(text) == "" {
		if t.PoleTable == ownPoles {
			return &badInput{"pole_table", "a pole table of your own is chosen, but pole_csv is empty. Expected there: plate, age, pole latitude, pole longitude, A95"}
		}
		return nil
	}
	table, err := earth.ParsePoleTable(ownPoles, strings.NewReader(text))
	var in *earth.InputError
	if errors.As(err, &in) {
		return &badInput{"pole_csv", in.Message}
	}
	if err != nil {
		return err
	}
	t.UserPoles = table
	if t.PoleTable == "" {
		t.PoleTable = ownPoles
	}
	return nil
}

// targetValues keeps of q what describes the target, without empty values, so
// that an address reads as it was asked.
func targetValues(q url.Values) url.Values {
	out := url.Values{}
	for _, name := range targetParameters {
		if v := strings.TrimSpace(q.Get(name)); v != "" {
			out.Set(name, v)
		}
	}
	return out
}

// asksNothing says that a query says nothing of a target: the form is shown,
// not an error. The data twin refuses the same address, because data has no
// form to show.
func asksNothing(q url.Values) bool { return len(targetValues(q)) == 0 }

// expectationQuestion reads a whole expectation address or body.
func expectationQuestion(q url.Values) (catalogue.Filter, expectation.Target, error) {
	if err := allow(q, targetParameters, catalogue.FilterParameters); err != nil {
		return catalogue.Filter{}, expectation.Target{}, err
	}
	f, err := filterOf(q)
	if err != nil {
		return f, expectation.Target{}, err
	}
	t, err := targetOf(q)
	return f, t, err
}
