package expectation

import (
	"context"
	"encoding/json"
	"errors"
	"math"
	"reflect"
	"runtime"
	"strings"
	"testing"

	"fathombend/stats"
)

func mustFit(t testing.TB, rows []stats.Row, o Options) *Fits {
	t.Helper()
	f, err := Fit(context.Background(), rows, o)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func mustExpect(t testing.TB, f *Fits, target Target) *Result {
	t.Helper()
	r, err := f.Expect(context.Background(), target)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func near(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tol {
		t.Errorf("%s = %v, want %v within %g", what, got, want, tol)
	}
}

func latitude(lat, se float64) Target {
	t := NewTarget()
	t.Palaeolatitude, t.PalaeolatitudeSE = lat, se
	return t
}

// 30 degrees under a day of 22 h: 1.09066 and 33.047 degrees, worked from
// 1/T_sid = 1/T_sol + 1/Y; 70 degrees lies poleward of 66.47 and has none.
func TestGivenDay(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	q := latitude(30, math.NaN())
	q.Age, q.Day, q.DayLengthH = 620, "given", 22
	r := mustExpect(t, f, q)
	near(t, "ratio", r.RotationRatio, 1.09066, 5e-6)
	if r.EquivalentModernLatitude == nil {
		t.Fatal("no equivalent")
	}
	near(t, "equivalent", *r.EquivalentModernLatitude, 33.047, 5e-4)
	near(t, "day", r.DayLength.Value, 22, 0)
	if r.DayLength.Low != 22 || r.DayLength.High != 22 || r.DayLength.History != "given" {
		t.Errorf("%+v", r.DayLength)
	}
	if !strings.Contains(strings.Join(r.Notes, " "), "No error of the palaeolatitude was given: it is taken as 0.") {
		t.Error("a missing error must be said:", r.Notes)
	}
	q.Palaeolatitude = 70
	r = mustExpect(t, f, q)
	if r.EquivalentModernLatitude != nil || !strings.Contains(r.EquivalentSentence, "no equivalent modern latitude") || !strings.Contains(r.EquivalentSentence, "66.47") {
		t.Errorf("%v %q", r.EquivalentModernLatitude, r.EquivalentSentence)
	}
	if len(r.Extrapolation) == 0 || !strings.Contains(r.Extrapolation[0], "extrapolation") {
		t.Error(r.Extrapolation)
	}
}

// Site 12 S 10 W, pole 72 N 200 E, A95 4, 70 +- 3 Ma: -27.36, se 1.63. With
// the Sun's tide the day of the table is 23.4981 h, which gives the rotation
// ratio 1.0213, |f| 6.844e-5 and the equivalent 27.99; without a choice the
// middle of the two columns gives 1.0195, 6.832e-5 and 27.93.
func TestPoleCase(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	q := NewTarget()
	q.SiteLat, q.SiteLon, q.PoleLat, q.PoleLon, q.A95, q.Age, q.AgeSE = -12, -10, 72, 200, 4, 70, 3
	for _, c := range []struct {
		tide         string
		ratio, f, eq float64
	}{{"on", 1.0213, 6.844e-5, 27.99}, {"middle", 1.0195, 6.832e-5, 27.93}} {
		q.SolarTide = c.tide
		r := mustExpect(t, f, q)
		near(t, "palaeolatitude", r.Palaeolatitude.Value, -27.36, 5e-3)
		near(t, "se", r.Palaeolatitude.SE, 1.63, 5e-3)
		near(t, "ratio", r.RotationRatio, c.ratio, 5e-5)
		near(t, "f", r.Coriolis, c.f, 1e-8)
		near(t, "equivalent", math.Abs(*r.EquivalentModernLatitude), c.eq, 6e-3)
		if !strings.Contains(r.RotationEffect, "below the error of the palaeolatitude") {
			t.Error(r.RotationEffect)
		}
		if r.Regime.LeveeSide != "left" {
			t.Errorf("levee side %q in the southern hemisphere", r.Regime.LeveeSide)
		}
		if r.ClimateState != "greenhouse" {
			t.Error(r.ClimateState)
		}
	}
}

// 3 +- 6 degrees: the hemisphere is open and |f| is folded at the equator.
func TestFoldedAtTheEquator(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	r := mustExpect(t, f, latitude(3, 6))
	if r.CoriolisLow < 0 || r.CoriolisLow > 1e-6 {
		t.Errorf("|f| from %v", r.CoriolisLow)
	}
	// 97.5 % of |N(3, 6)|, from the normal distribution: 14.905 degrees, where Phi((x-3)/6) + Phi((x+3)/6) - 1 = 0.975
	near(t, "|f| high", r.CoriolisHigh, 2*7.292115e-5*math.Sin(14.905*math.Pi/180), 1e-6)
	if r.Regime.LeveeSide != "" || !strings.Contains(strings.Join(r.Regime.Text, " "), "No levee side is stated") {
		t.Error(r.Regime.LeveeSide, r.Regime.Text)
	}
	near(t, "value", r.Palaeolatitude.Value, 3, 0)
}

func TestAnswerIsWhole(t *testing.T) {
	f := mustFit(t, plainLaw.draw(3), Options{})
	q := latitude(-40, 4)
	q.Unit, q.TargetSlope, q.TargetFeeder, q.TargetGrain, q.TargetSetting, q.ObservedSinuosity = "Maastrichtian", 0.004, "river", "mud", "fan", 1.4
	r := mustExpect(t, f, q)
	var sum float64
	names := []string{}
	for _, e := range r.Explanations {
		names = append(names, e.Name)
		if e.Failure != "" {
			t.Errorf("%s: %s", e.Name, e.Failure)
			continue
		}
		sum += e.Weight
		checkQuantiles(t, e.Name, e.Sinuosity)
		if e.Coverage == nil || e.Coverage.C80 < 0.5 || e.Coverage.C95 < e.Coverage.C80 {
			t.Errorf("%s: coverage %+v", e.Name, e.Coverage)
		}
		var parts float64
		for _, p := range e.Parts {
			parts += p
		}
		near(t, e.Name+" parts", parts, 1, 1e-9)
	}
	near(t, "weights", sum, 1, 1e-9)
	if want := []string{"coriolis", "latitude", "climate", "slope", "supply", "all", "none"}; !reflect.DeepEqual(names, want) {
		t.Error(names)
	}
	if r.Explanations[1].Weight != 0 {
		t.Error("f and latitude are one explanation: only one may have weight")
	}
	checkQuantiles(t, "combined", r.Combined.Sinuosity)
	var p, b float64
	for _, c := range r.Classes {
		p, b = p+c.Probability, b+c.BaseRate
	}
	near(t, "class probabilities", p, 1, 1e-9)
	near(t, "base rates", b, 1, 1e-9)
	near(t, "class 1", r.Classes[0].Probability, 0, 0.2)
	if r.Observed == nil || r.Observed.Percentile <= 0 || r.Observed.Percentile >= 100 || !strings.Contains(r.Observed.Text, "use the image") {
		t.Errorf("%+v", r.Observed)
	}
	if len(r.NearestSystems) != nearestCount || r.NearestSystems[0].Distance > r.NearestSystems[7].Distance || r.NearestSystems[0].Why == "" {
		t.Errorf("%+v", r.NearestSystems)
	}
	if len(r.Dimensions) != 6 || r.Dimensions[0].From != "nearest" || !(r.Dimensions[0].P10 <= r.Dimensions[0].P90) {
		t.Errorf("%+v", r.Dimensions)
	}
	var s float64
	for _, x := range r.Sensitivity {
		s += x.Share
	}
	near(t, "sensitivity", s, 1, 1e-9)
	if len(r.Cautions) < 3 || r.InventedRows != r.Rows || r.Rows == 0 {
		t.Error(len(r.Cautions), r.InventedRows, r.Rows)
	}
	near(t, "age", r.Age.Value, (72.2+66)/2, 1e-9)
	if r.Combined.Jackknife == nil || r.Combined.Jackknife[0] > r.Combined.Sinuosity.P50 || r.Combined.Jackknife[1] < r.Combined.Sinuosity.P50 {
		t.Errorf("jackknife+ %v", r.Combined.Jackknife)
	}
}

func checkQuantiles(t *testing.T, name string, q *Quantiles) {
	t.Helper()
	if q == nil {
		t.Errorf("%s: no quantiles", name)
		return
	}
	x := []float64{1, q.P2_5, q.P10, q.P25, q.P50, q.P75, q.P90, q.P97_5}
	for i := 1; i < len(x); i++ {
		if math.IsNaN(x[i]) || x[i] < x[i-1] {
			t.Errorf("%s: %+v", name, q)
		}
	}
}

// The same question gives the same bytes on any number of cores and from rows
// in any order.
func TestSameAnswer(t *testing.T) {
	rows := plainLaw.draw(5)
	back := make([]stats.Row, len(rows))
	for i, r := range rows {
		back[len(rows)-1-i] = r
	}
	q := latitude(33, 3)
	q.Age, q.AgeSE = 100, 5
	answer := func(rows []stats.Row, cores int) string {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(cores))
		r := mustExpect(t, mustFit(t, rows, Options{}), q)
		r.Combined.Score, r.Dimensions = 0, r.Dimensions[:3] // not numbers: no single score; no wavelengths
		b, err := json.Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		return string(b)
	}
	one := answer(rows, 1)
	if two := answer(rows, 2); two != one {
		t.Error("another answer on two cores")
	}
	if turned := answer(back, 2); turned != one {
		i := 0
		for i < min(len(one), len(turned)) && one[i] == turned[i] {
			i++
		}
		t.Errorf("another answer from the rows in another order: %.200s\n%.200s", one[max(0, i-60):], turned[max(0, i-60):])
	}
}

func TestFewRows(t *testing.T) {
	for _, rows := range [][]stats.Row{nil, plainLaw.draw(1)[:2], {blankRow()}} {
		r := mustExpect(t, mustFit(t, rows, Options{}), latitude(20, 2))
		if r.Combined.Sinuosity != nil || r.Combined.Failure == "" {
			t.Errorf("%d rows: %+v", len(rows), r.Combined)
		}
		for _, e := range r.Explanations {
			if e.Failure == "" {
				t.Errorf("%d rows: %s has been fitted", len(rows), e.Name)
			}
		}
		near(t, "f", r.Coriolis, 4.988e-5, 5e-9)
	}
	// no slope anywhere: that explanation fails, the others go on
	rows := plainLaw.draw(2)
	for i := range rows {
		rows[i].ValleySlope = math.NaN()
	}
	r := mustExpect(t, mustFit(t, rows, Options{}), latitude(20, 2))
	if r.Explanations[3].Failure == "" || r.Explanations[0].Failure != "" || r.Combined.Sinuosity == nil {
		t.Errorf("%+v", r.Explanations)
	}
}

// A standardised peak belongs to the stored line: rows that quote the same
// windows count once. Windows 1..2 in steps of 0.2: the expected largest of 5
// of 6 is 2 - 0.2/6 (the largest is missed in 1 of 6 draws).
func TestStandardisedPeak(t *testing.T) {
	near(t, "of 6", standardisedPeak([]float64{1.4, 1, 1.8, 2, 1.2, 1.6}, 5), 2-0.2/6, 1e-12)
	rows := plainLaw.draw(2)
	for i := range rows {
		p := rows[i].Sinuosity
		rows[i].Windows = []float64{p, p, p, p, p}
	}
	f := newFrame(append(rows, rows...), Options{Response: "standardised_peak"}, 0)
	if len(f.obs) != len(rows) || f.dropped["the same centreline is already counted"] != len(rows) {
		t.Errorf("%d rows of %d, dropped %v", len(f.obs), len(rows), f.dropped)
	}
}

func TestRefusals(t *testing.T) {
	f := mustFit(t, plainLaw.draw(1), Options{})
	for _, c := range []struct {
		param, says string
		change      func(*Target)
	}{
		{"palaeolatitude", "no palaeolatitude", func(q *Target) { q.Palaeolatitude = math.NaN() }},
		{"palaeolatitude", "-90 to 90", func(q *Target) { q.Palaeolatitude = 91 }},
		{"inclination", "2 ways", func(q *Target) { q.Inclination = 40 }},
		{"plate", "no plate", func(q *Target) { q.site(10, 10); q.Plate, q.Age = "Atlantis", 50 }},
		{"plate", "81.99 Ma", func(q *Target) { q.site(10, 10); q.Plate, q.Age = "Iberia", 200 }},
		{"age", "a plate has its pole at an age", func(q *Target) { q.site(10, 10); q.Plate = "India" }},
		{"plate", "needs a way", func(q *Target) { q.site(10, 10) }},
		{"pole_lon", "is needed", func(q *Target) { q.site(10, 10); q.PoleLat = 80 }},
		{"age", "type 70", func(q *Target) { q.Age = 70e6 }},
		{"age", "250 Ma", func(q *Target) { q.Age, q.Day = 300, "polynomial" }},
		{"unit", "Maastrichtian", func(q *Target) { q.Unit = "Mastrichtian" }},
		{"unit", "twice", func(q *Target) { q.Unit, q.Age = "Danian", 60 }},
		{"target_slope", "target_slope_deg", func(q *Target) { q.TargetSlope = 3 }},
		{"target_slope", "above 0", func(q *Target) { q.TargetSlope = 0 }},
		{"observed_sinuosity", "1 to", func(q *Target) { q.ObservedSinuosity = 0.9 }},
		{"day_length_h", "has no length", func(q *Target) { q.Day = "given" }},
		{"target_grain", "mud_sand", func(q *Target) { q.TargetGrain = "clay" }},
		{"draws", "100 to", func(q *Target) { q.Draws = 1 }},
		{"euler_frame", "spin-axis", func(q *Target) {
			q.site(10, 10)
			q.EulerLat, q.EulerLon, q.EulerAngle, q.EulerFrame = 1, 1, 1, "mantle"
		}},
	} {
		q := latitude(20, 2)
		c.change(&q)
		_, err := f.Expect(context.Background(), q)
		var in *InputError
		if !errors.As(err, &in) || in.Parameter != c.param || !strings.Contains(in.Message, c.says) {
			t.Errorf("want %s with %q, got %v", c.param, c.says, err)
		}
	}
	if _, err := Fit(context.Background(), nil, Options{ClassLimits: []float64{1.5, 1.2}}); err == nil {
		t.Error("falling class limits accepted")
	}
}

func (t *Target) site(lat, lon float64) {
	t.Palaeolatitude, t.PalaeolatitudeSE, t.SiteLat, t.SiteLon = math.NaN(), math.NaN(), lat, lon
}
