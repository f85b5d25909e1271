package stats

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// withRivers adds a control group of rivers whose sinuosity follows nothing.
func withRivers(seed uint64, slope float64) []Row {
	rows := inventedRows(seed, 70, 25)
	rng := rand.New(rand.NewPCG(seed, 91))
	for i := range 40 {
		r := EmptyRow()
		r.ID, r.System, r.Kind, r.SinuosityKind = "river "+string(rune('A'+i)), "river "+string(rune('A'+i)), "river", "reach"
		r.LatitudeDeg, r.ValleySlope = 75*rng.Float64(), math.Exp(-7+rng.NormFloat64())
		r.Sinuosity = 1 + math.Exp(-0.5+slope*r.LatitudeDeg+0.4*rng.NormFloat64())
		rows = append(rows, r)
	}
	return rows
}

// The difference between kinds is the interaction coefficient of one model
// fitted to both: the same number, to rounding.
func TestGroupByKind(t *testing.T) {
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}, {"theil_sen", "abs_latitude"}, {"floor_decay", "coriolis"}}
	req.Group, req.Scale = "kind", "raw"
	a := analyse(t, withRivers(2, 0), req)
	if len(a.Models) != 6 || len(a.Groups) != 3 {
		t.Fatalf("%d models, %d differences", len(a.Models), len(a.Groups))
	}
	g := a.Groups[0]
	if g.A != "submarine" || g.B != "river" || !(g.P < 0.05) || !g.Interval.excludes(0) || !strings.Contains(g.Text, "they differ") {
		t.Errorf("rivers follow nothing and channels do: %+v", g)
	}
	var x, kind, inter, y []float64
	for _, u := range a.Used {
		k := 0.0
		if u.Kind == "submarine" {
			k = 1
		}
		x, kind, inter, y = append(x, u.PredictorOf["abs_latitude"]), append(kind, k), append(inter, k*u.PredictorOf["abs_latitude"]), append(y, u.Response)
	}
	f, err := FitLinear([][]float64{x, kind, inter}, y)
	if err != nil {
		t.Fatal(err)
	}
	needDigits(t, "interaction", g.Difference, f.Coef[3], 8)
	for _, m := range a.Models {
		if m.Group == "" || m.Rows == 0 {
			t.Errorf("%s has no group", m.Model)
		}
	}
	req.Models = req.Models[:1]
	req.Scale = "ln_excess"
	same := analyse(t, withRivers(2, -0.022), req).Groups[0]
	if same.P < 0.05 {
		t.Errorf("two groups with much the same slope: %+v", same)
	}
}

func TestSelection(t *testing.T) {
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}}
	req.ThinSinuous, req.ThinStraight = 0.5, 0.4
	a := analyse(t, inventedRows(2, 70, 25), req)
	if len(a.Selection) != 2 {
		t.Fatalf("%d selections", len(a.Selection))
	}
	full := a.Models[0].Coefficients[1].Estimate
	for _, s := range a.Selection {
		if !(s.Range[0] <= s.Coefficient && s.Coefficient <= s.Range[1]) || s.Repeats != thinnings || s.Text == "" {
			t.Errorf("%+v", s)
		}
	}
	// Leaving out sinuous systems, which stand at low latitudes, flattens the fall.
	if s := a.Selection[1]; s.Thinned != "sinuous" || !(s.Coefficient > full) {
		t.Errorf("without half of the sinuous systems %v, with them %v", s.Coefficient, full)
	}
}

// The number is the smallest: with one system fewer the interval does not hold
// zero, with it it does.
func TestOverturningIsMinimal(t *testing.T) {
	req := DefaultRequest()
	req.Interval = "cr2"
	req.Models = []ModelSpec{{"linear", "abs_latitude"}}
	rows := inventedRows(2, 70, 25)
	a := analyse(t, rows, req)
	o := a.Overturning
	if o == nil || o.Systems < 1 || o.MoreThan || o.Text == "" {
		t.Fatalf("%+v", o)
	}
	x, y := columnFrom(a, "abs_latitude"), responses(a)
	sortFloats(x)
	sortFloats(y)
	for n, want := range map[int]bool{o.Systems - 1: true, o.Systems: false} {
		more := append([]Row(nil), rows...)
		for i := range n {
			r := EmptyRow()
			r.ID, r.System, r.Sinuosity = "new", "new "+string(rune('a'+i)), sortedQuantile(y, 0.9)
			r.LatitudeDeg = sortedQuantile(x, 0.75+0.25*(float64(i)+0.5)/float64(n))
			more = append(more, r)
		}
		if c := analyse(t, more, req).Models[0].Coefficients[1]; c.Interval.excludes(0) != want {
			t.Errorf("with %d contrary systems the interval is %v", n, c.Interval)
		}
	}
	rows = referenceRows(t)
	req.Interval = "studentised"
	if o := analyse(t, rows, req).Overturning; o.Systems != 0 || !strings.Contains(o.Text, "already holds zero") {
		t.Errorf("on the reference rows the studentised interval holds zero already: %+v", o)
	}
}

// Errors of measurement widen intervals; errors of zero change nothing.
func TestMeasurementError(t *testing.T) {
	rows := inventedRows(2, 60, 25)
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}, {"floor_decay", "coriolis"}, {"theil_sen", "valley_slope"}}
	req.Resamples = 799
	exact := analyse(t, rows, req)
	req.MeasurementError = true
	compareModels(t, "no stated error", exact, analyse(t, rows, req), 1, 1e-9)
	for i := range rows {
		rows[i].SinuositySE, rows[i].ValleySlopeSE = 0.4, rows[i].ValleySlope/2
	}
	a := analyse(t, rows, req)
	for k, m := range a.Models[:2] {
		now, was := m.Coefficients[1].Intervals["percentile"].width(), exact.Models[k].Coefficients[1].Intervals["percentile"].width()
		if !(now > 1.15*was) {
			t.Errorf("%s: interval %v wide with errors, %v without", m.Model, now, was)
		}
	}
	if !strings.Contains(strings.Join(a.Warnings, "\n"), "60 rows have a stated error of sinuosity, 60 of valley slope") {
		t.Errorf("warnings %q", a.Warnings)
	}
}

// The reference rows must say what the science notes say: rows resampled make
// slope matter, whole deposits do not; and the deposit that carries |latitude|.
func TestReferenceSentences(t *testing.T) {
	a := analyse(t, referenceRows(t), DefaultRequest())
	text := strings.Join(a.Warnings, "\n")
	for _, want := range []string{
		"linear:valley_slope: clustering changes the interval of valley slope by more than half",
		"Rows taken for independent would say that it matters; whole deposits say that it cannot be told.",
		"linear:abs_latitude: the intervals of latitude disagree about zero",
		"because deposit C17 carries the estimate",
		"no regression on them can tell the two apart",
		"Latitude and supply cannot be separated by these rows",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("no warning says %q in:\n%s", want, text)
		}
	}
	if !strings.Contains(a.MethodsText, "18 deposits") || !strings.Contains(a.MethodsText, "seed 1") {
		t.Error(a.MethodsText)
	}
	for _, m := range a.Models {
		for _, c := range m.Coefficients {
			if i := c.Intervals["row_bootstrap"]; !i.known() {
				t.Errorf("%s %s: no row bootstrap beside", m.Model, c.Name)
			}
		}
	}
}

// The system that moves R2 by more than 0.1 is named in the headline.
func TestHeadlineNamesTheRulingSystem(t *testing.T) {
	rows := inventedRows(2, 60, 25)
	rows[5].LatitudeDeg, rows[5].Sinuosity, rows[5].SystemName = 74, 4.5, "Odd Channel"
	req := DefaultRequest()
	req.Models = []ModelSpec{{"linear", "abs_latitude"}}
	a := analyse(t, rows, req)
	if !strings.Contains(a.Headline, "Without Odd Channel") {
		t.Errorf("headline %q, first influence %+v", a.Headline, a.Influence[0])
	}
	if i := a.Influence[0]; i.SystemName != "Odd Channel" || !(i.Cook > 0.3) || !(i.Leverage > 0.01 && i.Leverage < 1) {
		t.Errorf("%+v", i)
	}
}

// Group Cook's distance and leverage against their definitions for a single
// row: e^2 h/(p s^2 (1-h)^2) and h.
func TestInfluenceOfSingleRows(t *testing.T) {
	rows := inventedRows(2, 40, 40)
	req := DefaultRequest()
	req.Models, req.Resamples = []ModelSpec{{"linear", "abs_latitude"}}, 99
	a := analyse(t, rows, req)
	f, err := FitLinear([][]float64{columnFrom(a, "abs_latitude")}, responses(a))
	if err != nil {
		t.Fatal(err)
	}
	cook, k := f.Cook(), 0
	for _, u := range a.Used {
		for _, i := range a.Influence {
			if i.System == u.System {
				needDigits(t, "Cook's distance", i.Cook, cook[k], 8)
				needDigits(t, "leverage", i.Leverage, f.Hat[k], 8)
			}
		}
		k++
	}
}
